//! The chord error on the terminal.

use ribband::preview::terminal;

use crate::Made;

#[test]
fn a_row_for_each_contour_and_one_line_for_the_error() {
    let made = Made::demo("template.csv");
    let text = terminal(&made.scene());
    let lines: Vec<&str> = text.lines().collect();
    assert_eq!(lines.len(), 1 + made.report.contours.len() + 1, "{text}");
    for (row, contour) in lines[1..].iter().zip(&made.report.contours) {
        let words: Vec<&str> = row.split_whitespace().collect();
        assert_eq!(words[0], contour.id.to_string());
        let largest: f64 = words[words.len() - 1].parse().expect("a number");
        assert!(largest <= made.report.tolerance_mm && largest > 0.0, "{row}");
    }
    let spread = lines[lines.len() - 1];
    let (before, bars) = spread.split_once('[').expect("bars");
    assert_eq!(before, "Chord error 0 ");
    let (bars, after) = bars.split_once(']').expect("their end");
    assert_eq!(bars.chars().count(), 10);
    assert!(bars.contains('█') && bars.chars().all(|bar| " ▁▂▃▄▅▆▇█".contains(bar)), "{bars}");
    assert!(
        after
            .starts_with(&format!(" {} mm, the tolerance; half of the way within", made.report.tolerance_mm))
    );
    assert!(!after.contains("over it"), "{after}");
}

#[test]
fn straight_sides_have_all_of_the_way_in_the_first_tenth() {
    let made = Made::of("square.csv", b"x,y\n0,0\n40,0\n40,30\n0,30\n0,0\n");
    let text = terminal(&made.scene());
    assert!(
        text.contains(
            "[█         ] 0.1 mm, the tolerance; half of the way within 0.01 mm, nine tenths within 0.01 mm"
        ),
        "{text}"
    );
}

#[test]
fn a_layers_name_commands_no_terminal() {
    let name = "a\u{1b}[31mb";
    let mut made = Made::of("square.csv", b"x,y\n0,0\n40,0\n40,30\n0,30\n0,0\n");
    made.report.contours[0].layer = name.into();
    assert!(!terminal(&made.scene()).contains('\u{1b}'));
}
