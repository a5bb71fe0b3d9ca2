//! Lines of the language, good and bad.

use proptest::prelude::*;
use ribband::gcode::{Dialect, interpret, read};

use crate::common::{machine, understood};
use crate::nist::refusal;

/// NISTIR 6556, 3.3: case, blanks and zeros change nothing.
#[test]
fn ways_to_write_the_same_numbers() {
    let plain = "G21 G90 G94\nG0 X1 Y-2 Z0.5\nG1 X0 F300\nM2\n";
    let same = [
        "g21g90g94\r\ng0x1y-2z.5\r\ng1x0f300\r\nm2",
        "G21 G90 G94\rG00 X+1. Y-2.000 Z0.50\rG01 X-0 F300.0\rM02",
        "G21 G90 G94\nG0 X0 0 1 Y - 2 Z 0 . 5\n\tG1\tX0\tF300\nM2",
        "N5 G21 G90 G94 (set up) (twice)\nN10 Y-2 G0 Z0.5 X1 ; over\n/N15 G1 X0 F300\nN99999 M2",
        "%\nG21 G90 G94\n\n   \nG0 X1 Y-2 Z0.5\nG1 F300 X0\nM2\n%\n",
        "\u{feff}G21 G90 G94\nG0 X1 Y-2 Z0.5\nG1 X0 F300\nM2",
        "O1000\nG21 G90 G94\nG0 X1 Y-2 Z0.500000000000000000000\nG1 X0 F300\nM2",
    ];
    let shop = machine("shop-router");
    let geometry = |text: &str| -> Vec<_> {
        let program = understood(text, &shop);
        program.toolpath.moves.iter().map(|m| (m.from, m.to, m.feed)).collect()
    };
    for text in same {
        assert_eq!(geometry(text), geometry(plain), "{text}");
    }
}

#[test]
fn every_number_is_the_nearest_there_is() {
    for number in ["0.1", "123.456", "-0.001", "1234567.12345678", "0.30000000000000004", ".5", "7.", "00012"]
    {
        let text = format!("X{number}");
        let words = read(&text).expect("reads");
        let expected: f64 = number.parse().expect("a number of the standard library too");
        assert_eq!(words.words(&words.blocks[0])[0].value.to_bits(), expected.to_bits(), "{number}");
    }
}

/// Lines that are not of the language, or that are and have no meaning here.
const REFUSED: &[&str] = &[
    "G1 X1e-5 F10",
    "G1 X1.2.3 F10",
    "G1 X+-1 F10",
    "G1 X- F10",
    "G1 X F10",
    "G1 X#5 F10",
    "G1 X[1+2] F10",
    "G1 X1 (open",
    "G1 X1 (a (b) c)",
    "G1 X1 & F10",
    "G1 X1 ä",
    "N123456 G1 X1 F10",
    "N1.5 G1 X1 F10",
    "N G1 X1",
    "G1 /X1",
    "% G1",
    "G1 X1 X2 F10",
    "G0 G1 X1",
    "G1 X1 F-5",
    "S-1",
    "G41 D1",
    "G5.1 X1 Y1 I1 J1",
    "G38.2 Z-1 F10",
    "G10 L2 P1 X0",
    "G33 X1",
    "G1.5 X1",
    "G21.005 X1",
    "M98 P1",
    "M60",
    "M99",
    "U1",
    "G1 A90 F10",
    "X1 T1.5",
    "G2 X1 F10",
    "G2 X1 I1 R1 F10",
    "G2 I1 F10",
    "G2 X1 R0.1 F10",
    "G2 X0 Y0 R1 F10",
    "G2 X1 I0 J0 F10",
    "G18 G2 X1 J1 F10",
    "G4",
    "G4 P-1",
    "G80 X1",
    "G1 X1 P5 F10",
    "G1 X1 I5 F10",
    "G0 R5",
    "G43",
    "G55",
    "G64 P0.1 Q1",
    "G53 G1 X1 F10",
    "G92",
    "G92 G1 X1",
    "G28 G0 X1",
    "G81 X1 Z-1 F10",
    "G81 X1 Z-1 R-2 F10",
    "G83 X1 Z-1 R1 F10",
    "G83 X1 Z-1 R1 Q0 F10",
    "G82 X1 Z-1 R1 F10",
    "G81 X1 Z-1 R1 L0 F10",
    "G93 G81 X1 Z-1 R1 F10",
    "G20 F100",
];

/// Each line after a good start, and what is said about it.
#[test]
fn lines_that_are_refused() {
    let start = "G21 G90 G94 G0 Z5\nX0 Y0\n";
    let said: Vec<_> =
        REFUSED.iter().map(|line| format!("{line:24} {}", refusal(&format!("{start}{line}\nM2")))).collect();
    insta::assert_snapshot!(said.join("\n"));
}

#[test]
fn programs_that_are_refused_as_a_whole() {
    let long = format!("G1 X1 ({})", "x".repeat(300));
    let rows = [
        "",
        "\n\n  \n",
        "%\nG0 X0",
        "G0 X0\n%",
        "G91 G0 X1",
        "G2 X1 I1 F10",
        "G1 X1 F10\nG55\nG1 X2",
        "G90 X1",
        long.as_str(),
        "\u{0}\u{1}\u{2}",
        "G81 X0 Y0 Z-1 R1 F10",
        "G0 X0 Y0 Z5\nG81 X1 Z-1 R1 F10\nG91 X5 Z-2",
    ];
    let said: Vec<_> = rows.iter().map(|text| refusal(text)).collect();
    insta::assert_snapshot!(said.join("\n"));
}

proptest! {
    /// Whatever the bytes, there is an answer.
    #[test]
    fn no_text_brings_the_reader_down(text in "\\PC{0,80}|[GMXYZIJKRFSTNLPQ%/();.0-9 \\-\n]{0,200}") {
        if let Ok(words) = read(&text) {
            let _ = interpret(&words, &Dialect::of(&machine("shop-router")));
        }
    }

    /// Lines made of likely words: what is understood is finite and in one chain, but for approaches.
    #[test]
    fn what_is_understood_is_finite(lines in prop::collection::vec(line(), 1..30)) {
        let text = format!("G21 G90 G94 G17 G0 X0 Y0 Z5\n{}\n", lines.join("\n"));
        let words = read(&text).expect("made of words");
        if let Ok(program) = interpret(&words, &Dialect::of(&machine("shop-router"))) {
            for m in &program.toolpath.moves {
                prop_assert!(m.length().is_finite() && m.bulge.abs() <= 1.0 + 1e-12, "{m:?}\n{text}");
            }
        }
    }
}

/// A line of words that often make sense.
fn line() -> impl Strategy<Value = String> {
    let code = prop::sample::select(vec![
        "", "G0", "G1", "G2", "G3", "G90", "G91", "G20", "G21", "G81", "G83", "G80", "G18", "G17", "G28",
        "G92", "M3", "M0",
    ]);
    let word = prop::sample::select(b"XYZIJRFQL".to_vec());
    let words = prop::collection::btree_map(word, -20..20_i32, 0..4);
    (code, words).prop_map(|(code, words)| {
        let words: Vec<_> =
            words.into_iter().map(|(letter, n)| format!("{}{n}", char::from(letter))).collect();
        format!("{code} {}", words.join(" "))
    })
}
