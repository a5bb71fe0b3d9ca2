//! What is not a run of straight cuts stays as it is, byte for byte.

use ribband::condense::{Condensed, condense};
use ribband::error::Kind;
use ribband::gcode::{Dialect, Program, interpret, read};
use ribband::geom::{ArcSpline, frechet};
use ribband::machine::Machine;
use ribband::num::Tolerance;

fn on(machine: &str, text: &str, tolerance: f64) -> Condensed {
    let machine = Machine::named(machine).expect("built in");
    let tolerance = Tolerance::new(tolerance).expect("above zero");
    condense(text, &machine, tolerance).expect("it is condensed")
}

fn condensed(text: &str) -> Condensed {
    on("shop-router", text, 0.05)
}

fn understood(text: &str) -> Program {
    let machine = Machine::named("shop-router").expect("built in");
    interpret(&read(text).expect("it reads"), &Dialect::of(&machine)).expect("every word is known")
}

/// Blocks along a quarter of a circle of 40 mm about zero, from X40 Y0 to X0 Y40.
fn quarter(before: &str, after: &str) -> Vec<String> {
    let place = |k: i32| {
        let (y, x) = (f64::from(k) * 0.05 * std::f64::consts::FRAC_PI_2).sin_cos();
        format!("{before}X{:.3} Y{:.3}{after}", 40.0 * x, 40.0 * y)
    };
    (1..=20).map(place).collect()
}

const HEAD: &str = "G17 G21 G90 G94 G91.1\nG0 Z5\nS18000 M3\nG0 X40 Y0\nG1 Z-2 F500\n";

fn program(run: &[String], tail: &str) -> String {
    format!("{HEAD}{}\n{tail}", run.join("\n"))
}

/// The lines of a text without those of the run and without the comment that names the tolerance.
fn without_motion(text: &str) -> Vec<&str> {
    let cut = |line: &&str| line.contains('X') && line.contains('Y') && !line.starts_with("G0");
    text.split_inclusive('\n').filter(|line| !cut(line) && !line.contains("condensed within")).collect()
}

#[test]
fn everything_but_the_run_is_kept_byte_for_byte() {
    let tails =
        ["G0 Z5\nM5\nM30\n", "\tG0  z5.000 ; up (now)\n\n(off)\nM5\n%left over ~\nX1", "M64 P1\nG0Z5\nM30"];
    for tail in tails {
        for ending in ["\n", "\r\n"] {
            let text = program(&quarter("G1 ", " F1800"), tail);
            let text = text.replace("%left over ~\nX1", "").replace('\n', ending);
            let got = condensed(&text);
            assert!(got.unchanged.is_none() && got.bettered == 1, "{:?}", got.unchanged);
            assert_eq!(without_motion(&got.text), without_motion(&text), "{tail:?}");
            assert!(got.after.motion_blocks + 15 < got.before.motion_blocks, "{}", got.text);
            assert_eq!((got.before.bytes, got.after.bytes), (text.len(), got.text.len()));
            assert_eq!(got.text.matches('\n').count(), got.text.matches(ending).count(), "{:?}", got.text);
        }
    }
}

#[test]
fn the_tolerance_spent_is_named_and_never_spent_twice() {
    let text = program(&quarter("G1 ", " F1800"), "G0 Z5\nM5\nM30\n");
    let once = condensed(&text);
    assert!(once.text.starts_with("(condensed within 0.05 mm)\n"), "{}", once.text);
    let twice = condensed(&once.text);
    assert_eq!(twice.text, once.text);
    assert!(twice.unchanged.is_some_and(|why| why.contains("condensed within 0.05 mm")));
    let numbered = condensed(&format!("%\nO12\n{text}%\n"));
    assert!(numbered.text.starts_with("%\nO12\n(condensed"), "{}", numbered.text);
    let semicolons = on("fast-router", &text, 0.05);
    assert!(semicolons.text.starts_with("; condensed within 0.05 mm\n"), "{}", semicolons.text);
}

#[test]
fn what_cannot_be_bettered_is_returned_as_it_is() {
    let few = program(&["G1 X40 Y40 F900".into(), "X0 Y40".into()], "G0 Z5\nM5\nM30\n");
    let got = condensed(&few);
    assert_eq!(got.text, few);
    assert!(got.unchanged.is_some() && got.bettered == 0 && got.deviation.is_none());
    assert_eq!(got.before, got.after);
}

/// Every change of anything but X and Y parts two runs: the place there is come to exactly.
#[test]
fn runs_end_where_anything_else_changes() {
    let rows = [
        ("G1 X28.284 Y28.284 Z-2.5", "a height"),
        ("M8", "a word without motion"),
        ("X28.284 Y28.284 (half way)", "a comment"),
        ("S12000", "a speed"),
        ("/X28.284 Y28.284", "a line that may be skipped"),
        ("X28.284 Y28.284 A10", "another axis"),
    ];
    for (line, what) in rows {
        let mut run = quarter("", "");
        run[0].insert_str(0, "G1 F1800 ");
        run[9] = line.into();
        let text = program(&run, "G0 Z5\nM5\nM30\n");
        let got = condensed(&text);
        assert!(got.text.contains(&format!("\n{line}\n")), "{what}: {}", got.text);
        assert!(got.bettered >= 1, "{what}: {}", got.text);
        // The place before the odd line is kept; so is the end.
        for place in [&run[8], &run[19]] {
            let (x, y) = place.rsplit_once(" Y").expect("two words");
            let x = x.trim_start_matches('X').trim_end_matches('0').trim_end_matches('.');
            let y = y.trim_end_matches('0').trim_end_matches('.');
            assert!(
                got.text.contains(&format!("X{x}")) && got.text.contains(&format!("Y{y}")),
                "{what}: {place} in {}",
                got.text
            );
        }
    }
}

#[test]
fn a_change_of_feed_parts_two_runs_and_is_said_again() {
    let mut run = quarter("", "");
    run[0].insert_str(0, "G1 F1800 ");
    run[9].push_str(" F900");
    let got = condensed(&program(&run, "G0 Z5\nM5\nM30\n"));
    assert_eq!((got.runs, got.bettered), (2, 2));
    let feed_at = |program: &Program, y: f64| {
        let cuts = program.toolpath.moves.iter().filter(|m| m.to.z < 0.0 && m.from.z < 0.0);
        cuts.clone().find(|m| m.from.xy.y <= y && y < m.to.xy.y).and_then(|m| m.feed)
    };
    let new = understood(&got.text);
    assert_eq!((feed_at(&new, 25.0), feed_at(&new, 26.5)), (Some(1800.0), Some(900.0)), "{}", got.text);
}

/// A line that counts on the motion word in force finds it, though the run now ends with an arc.
#[test]
fn the_motion_word_in_force_is_restored_where_it_is_needed() {
    for (next, needed) in [("Z5\nM5\nM30\n", true), ("G0 Z5\nM5\nM30\n", false), ("M5\nG1 Z5\nM30\n", false)]
    {
        let text = program(&quarter("G1 ", ""), next);
        let got = condensed(&text);
        assert_eq!(got.text.contains("\nG1\n"), needed, "{}", got.text);
        let (old, new) = (understood(&text), understood(&got.text));
        let (a, b) = (old.toolpath.moves.last().expect("one"), new.toolpath.moves.last().expect("one"));
        assert_eq!((a.from, a.to, a.feed), (b.from, b.to, b.feed));
        assert_eq!(old.events.len(), new.events.len());
    }
}

#[test]
fn unknown_words_stay_and_the_place_is_not_trusted_after_them() {
    let mut run = quarter("G1 ", "");
    run.insert(10, "M150 P2".into());
    run.insert(0, "G5.1 Q1".into());
    let got = condensed(&program(&run, "G0 Z5\nM5\nM30\n"));
    assert!(got.text.contains("\nM150 P2\n") && got.text.contains("\nG5.1 Q1\n"), "{}", got.text);
    assert!(got.notes.iter().any(|note| note.contains("G5.1") && note.contains("M150")), "{:?}", got.notes);
    // The first block after each is kept: where it starts from is not known.
    for kept in [&run[1], &run[12]] {
        assert!(got.text.contains(&format!("\n{kept}\n")), "{kept} in {}", got.text);
    }
    assert!(got.bettered == 2 && got.before.time_s.is_none(), "{}", got.text);
}

#[test]
fn calls_of_other_lines_are_refused_with_their_line() {
    let machine = Machine::named("shop-router").expect("built in");
    let tolerance = Tolerance::new(0.05).expect("above zero");
    for call in ["M98 P100 L2", "G65 P9000", "M99"] {
        let text = program(&quarter("G1 ", ""), &format!("{call}\nM30\n"));
        let refused = condense(&text, &machine, tolerance).expect_err("a call");
        assert_eq!((refused.kind, refused.line), (Kind::Refused, 26), "{call}: {refused}");
    }
    let unread = condense("G1 X#1 F100\n", &machine, tolerance).expect_err("a parameter");
    assert_eq!((unread.kind, unread.line), (Kind::Input, 1));
}

#[test]
fn line_numbers_stay_in_order() {
    let numbered = |(i, line): (usize, &str)| format!("N{} {line}\n", 10 * i + 10);
    let text: String =
        program(&quarter("G1 ", ""), "G0 Z5\nM5\nM30").lines().enumerate().map(numbered).collect();
    let got = condensed(&text);
    let numbers: Vec<u32> = got
        .text
        .lines()
        .skip(1)
        .map(|line| {
            let digits: String =
                line.trim_start_matches('N').chars().take_while(char::is_ascii_digit).collect();
            digits.parse().expect("each line has its number")
        })
        .collect();
    assert!(numbers.is_sorted() && numbers.len() < 15, "{}", got.text);
}

#[test]
fn a_run_that_goes_down_in_proportion_becomes_a_helix_where_the_machine_takes_them() {
    let ramp: Vec<String> = quarter("G1 ", "")
        .iter()
        .enumerate()
        .map(|(k, line)| format!("{line} Z{:.3}", -2.0 - 0.1 * (k + 1) as f64))
        .collect();
    let text = program(&ramp, "G0 Z5\nM5\nM30\n");
    let got = condensed(&text);
    assert!(got.bettered == 1 && got.after.motion_blocks + 15 < got.before.motion_blocks, "{}", got.text);
    let (old, new) = (understood(&text), understood(&got.text));
    let cuts = |program: &Program| {
        program
            .toolpath
            .moves
            .iter()
            .filter(|m| m.feed.is_some() && m.from.xy != m.to.xy)
            .copied()
            .collect::<Vec<_>>()
    };
    let (old, new) = (cuts(&old), cuts(&new));
    let chain = |moves: &[ribband::toolpath::Move]| {
        ArcSpline::from_spans(&moves.iter().map(|m| m.span()).collect::<Vec<_>>(), false)
    };
    assert!(frechet(&chain(&new), &chain(&old)).mm <= 0.05);
    assert_eq!(new.last().expect("one").to, old.last().expect("one").to);
    // Every place of the old way has one near it on the new way, the height included.
    for m in &old {
        let near = new.iter().map(|n| {
            let near = n.span().nearest(m.to.xy);
            near.distance.hypot(n.from.z + (n.to.z - n.from.z) * near.t - m.to.z)
        });
        assert!(near.fold(f64::INFINITY, f64::min) <= 0.05, "{m:?}");
    }
    let level = on("old-controller", &text, 0.05);
    assert!(level.unchanged.is_some(), "no helices there: {}", level.text);
    // Out of proportion it is left.
    let mut steps = ramp.clone();
    for (k, line) in steps.iter_mut().enumerate() {
        let z = -2.0 - f64::from(u8::from(k % 2 == 0)) - 0.1 * k as f64;
        *line = format!("{} Z{z:.3}", line.split(" Z").next().unwrap_or_default());
    }
    assert!(condensed(&program(&steps, "G0 Z5\nM5\nM30\n")).unchanged.is_some());
}

#[test]
fn a_lap_keeps_its_start_and_its_direction() {
    for way in [1.0, -1.0] {
        let place = |k: i32| {
            let (y, x) = (way * f64::from(k) * std::f64::consts::TAU / 90.0).sin_cos();
            format!("G1 X{:.3} Y{:.3}", 40.0 * x, 40.0 * y)
        };
        let text = program(&(1..=90).map(place).collect::<Vec<_>>(), "G0 Z5\nM5\nM30\n");
        let got = condensed(&text);
        assert!(got.after.motion_blocks <= got.before.motion_blocks - 85, "{}", got.text);
        let word = if way > 0.0 { "G3" } else { "G2" };
        assert!(got.text.contains(word), "{}", got.text);
        let moves = understood(&got.text).toolpath.moves;
        let last = moves.iter().rfind(|m| m.feed.is_some() && m.from.xy != m.to.xy).expect("a cut");
        assert_eq!((last.to.xy.x, last.to.xy.y), (40.0, 0.0));
    }
}
