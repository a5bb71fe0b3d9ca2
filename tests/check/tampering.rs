//! Single changes to good programs, judged by `ribband check` as anybody runs it: those that alter the part or the
//! safety are refuted, by the claim that they break; those that alter neither leave everything holding.

use std::fmt::Write as _;
use std::fs;

use assert_cmd::Command;
use kurbo::{Point, Vec2};
use ribband::geom::ArcSpline;
use serde_json::Value;

use crate::emit::{Arcs, Form, program};
use crate::polyline;

/// A good program with its drawing, in a folder of their own: a sign of an outer ring of arcs, a square hole and an
/// open stroke.
struct Good {
    text: String,
    folder: tempfile::TempDir,
}

impl Good {
    fn new(form: Form) -> Self {
        let ring =
            |k: usize| Point::new(80.0, 60.0) + Vec2::from_angle(0.2 * k as f64) * (45.0 + (k % 5) as f64);
        let mut outer = ArcSpline::polyline((0..31).map(ring), true);
        for (k, v) in outer.vertices.iter_mut().enumerate() {
            v.bulge = [0.05, -0.2, 0.0, 0.3][k % 4];
        }
        let hole = polyline(&[(60.0, 50.0), (75.0, 50.0), (75.0, 65.0), (60.0, 65.0)], true);
        let stroke = polyline(&[(90.0, 40.0), (95.0, 55.0), (105.0, 50.0), (100.0, 80.0)], false);
        let paths = [outer, hole, stroke];
        let folder = tempfile::tempdir().expect("a folder");
        fs::write(folder.path().join("sign.dxf"), dxf(&paths)).expect("the folder takes a drawing");
        Self { text: program(&paths, form), folder }
    }

    fn lines(&self) -> Vec<String> {
        self.text.lines().map(str::to_string).collect()
    }

    /// The claims that fail for the changed lines, or what the command says when it reads no further.
    fn judge(&self, lines: &[String]) -> Result<Vec<String>, String> {
        fs::write(self.folder.path().join("sign.nc"), lines.join("\n") + "\n").expect("the folder takes it");
        let mut command = Command::cargo_bin("ribband").expect("the binary is built");
        command.current_dir(&self.folder).args(["check", "sign.nc", "--against", "sign.dxf"]);
        command.args(["--origin", "drawing", "--tolerance", "0.05mm", "--depth", "6mm", "--pass", "2mm"]);
        let ended = command.args(["--clearance", "5mm", "--report", "-"]).output().expect("it runs");
        let (told, status) = (String::from_utf8_lossy(&ended.stderr), ended.status.code());
        let Ok(report) = serde_json::from_slice::<Value>(&ended.stdout) else {
            assert_eq!(status, Some(1), "a program that is not understood is refused: {told}");
            return Err(told.into_owned());
        };
        let claims = report["check"]["claims"].as_array().expect("a list").iter();
        let name = |claim: &Value| claim["name"].as_str().expect("a name").to_string();
        let failing: Vec<String> = claims.filter(|claim| claim["state"] == "fails").map(name).collect();
        let (holds, verdict) = if failing.is_empty() { (0, "holds") } else { (1, "does not hold") };
        assert_eq!(status, Some(holds), "{failing:?}");
        assert_eq!(
            told.lines().next(),
            Some(&*format!("checked against the drawing: {verdict}")),
            "{failing:?}"
        );
        Ok(failing)
    }
}

/// Contours as a DXF of light polylines with bulges, in mm.
fn dxf(paths: &[ArcSpline]) -> String {
    let mut text =
        String::from("0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n");
    for path in paths {
        let (count, closed) = (path.vertices.len(), u8::from(path.closed));
        write!(text, "0\nLWPOLYLINE\n8\n0\n90\n{count}\n70\n{closed}\n").expect("text takes any line");
        for v in &path.vertices {
            write!(text, "10\n{}\n20\n{}\n42\n{}\n", v.at.x, v.at.y, v.bulge).expect("text takes any line");
        }
    }
    text + "0\nENDSEC\n0\nEOF\n"
}

/// Claims that any change of the shape may break.
const SHAPE: [&str; 6] = [
    "within the tolerance",
    "every contour is cut",
    "off the drawing",
    "no pass is deeper",
    "to the depth asked",
    "radii",
];

/// Counts changes, and demands that each is refuted by one of its claims (or by the reader, with the line's fault).
struct Tally<'a> {
    good: &'a Good,
    refuted: usize,
}

impl Tally<'_> {
    #[track_caller]
    fn refute(&mut self, lines: &[String], claims: &[&str], what: &str) {
        match self.good.judge(lines) {
            Ok(failing) => {
                let right = failing.iter().any(|name| claims.iter().any(|claim| name.contains(claim)));
                assert!(right, "{what}: failing are {failing:?}, not {claims:?}");
            }
            Err(refusal) => assert!(refusal.contains("line"), "{what}: a refusal names its line: {refusal}"),
        }
        self.refuted += 1;
    }
}

/// The number after `letter` in a line.
fn number(line: &str, letter: char) -> Option<f64> {
    let rest = &line[line.find(letter)? + 1..];
    let end = rest.find(|c: char| !(c.is_ascii_digit() || "+-.".contains(c))).unwrap_or(rest.len());
    rest[..end].parse().ok()
}

/// The line with the number after `letter` changed.
fn with(line: &str, letter: char, change: impl Fn(f64) -> f64) -> Option<String> {
    let value = number(line, letter)?;
    let at = line.find(letter)? + 1;
    let rest = &line[at..];
    let end = rest.find(|c: char| !(c.is_ascii_digit() || "+-.".contains(c))).unwrap_or(rest.len());
    Some(format!("{}{:.3}{}", &line[..at], change(value), &rest[end..]))
}

fn is_cut(line: &str) -> bool {
    ["G1 X", "G1 Y", "G2", "G3"].iter().any(|code| line.starts_with(code))
}

/// Every change of one line that alters the part, over every `nth` cut.
fn alter_cuts(tally: &mut Tally, nth: usize) {
    let good = tally.good.lines();
    for (i, line) in good.iter().enumerate().filter(|(_, line)| is_cut(line)).step_by(nth) {
        let mut put = |changed: Option<String>, what: &str| {
            let Some(changed) = changed.filter(|changed| changed != line) else { return };
            let mut lines = good.clone();
            lines[i].clone_from(&changed);
            tally.refute(&lines, &SHAPE, &format!("{what}: line {} {line:?} to {changed:?}", i + 1));
        };
        for letter in ['X', 'Y'] {
            put(with(line, letter, |v| v + 0.1), "a digit");
            put(with(line, letter, |v| -v), "a sign");
        }
        for letter in ['I', 'J'] {
            put(with(line, letter, |v| v + 0.1 + 0.1 * v.abs()), "a digit of the centre");
        }
        let swap = |line: &str, a: &str, b: &str| line.starts_with(a).then(|| line.replacen(a, b, 1));
        put(swap(line, "G2", "G3").or_else(|| swap(line, "G3", "G2")), "the other way round");
        if number(line, 'I').zip(number(line, 'J')).is_some_and(|(i, j)| (i - j).abs() > 0.2) {
            put(Some(line.replace('I', "@").replace('J', "I").replace('@', "J")), "swapped I and J");
        }
        let mut lines = good.clone();
        lines.remove(i);
        tally.refute(&lines, &SHAPE, &format!("a dropped block: line {} {line:?}", i + 1));
    }
}

/// Changes that alter the safety, wherever they can be made.
fn alter_safety(tally: &mut Tally) {
    let good = tally.good.lines();
    let rapid = ["no rapid", "off the drawing", "ends raised"];
    for (i, line) in good.iter().enumerate() {
        let what = |name: &str| format!("{name}: line {} {line:?}", i + 1);
        let mut put = |changed: Vec<String>, claims: &[&str], name: &str| {
            let mut lines = good.clone();
            lines.splice(i..=i, changed);
            tally.refute(&lines, claims, &what(name));
        };
        if line == "G0 Z5.000" {
            // A retract over the place where the next pass goes down is not missed.
            if !good[i + 1].starts_with("G1 Z") {
                let claims = ["no rapid", "off the drawing", "no pass", "ends raised", "every contour"];
                put(vec![], &claims, "a lost retract");
                put(vec!["G0 Z0.5".into()], &rapid, "a low retract");
            }
            put(
                vec![
                    line.clone(),
                    "G1 X150 Y150 F1800".into(),
                    "G1 Z-1 F600".into(),
                    "G1 X160".into(),
                    "G0 Z5".into(),
                ],
                &["off the drawing"],
                "a stray cut",
            );
        }
        if line.starts_with("G1 Z") {
            put(vec![line.replacen("G1", "G0", 1)], &["no rapid"], "a plunge by rapid");
            put(
                vec![with(line, 'F', |f| f * 10.0).expect("a feed")],
                &["feeds"],
                "a plunge ten times as fast",
            );
            put(vec![with(line, 'Z', |z| z - 1.0).expect("a height")], &["deeper"], "a deeper pass");
            put(
                vec![with(line, 'Z', |z| -z).expect("a height")],
                &["every contour", "no pass", "to the depth"],
                "a plunge upwards",
            );
        }
        if is_cut(line) && i % 10 == 0 {
            put(vec![with(line, 'F', |f| f * 10.0).expect("a feed")], &["feeds"], "a feed ten times as high");
            put(vec![line.replace("F1800", "F0")], &["feeds"], "a feed of zero");
        }
        if line.starts_with("S18000") {
            put(vec![], &["spindle"], "a spindle that never starts");
            put(vec!["S180000 M3".into()], &["spindle"], "a speed ten times as high");
            put(vec!["S0 M3".into()], &["spindle"], "a speed of zero");
        }
        if line == "M5" || line == "M30" {
            put(vec![], &["ends raised"], "a lost end");
        }
        if i == 1 {
            put(vec![], &["raised before"], "a lost first retract");
        }
    }
}

#[test]
fn changes_that_matter_are_refuted_by_the_right_claim() {
    let forms = [
        Form::PLAIN,
        Form { incremental: true, ..Form::PLAIN },
        Form { arcs: Arcs::CentreFromZero, ..Form::PLAIN },
    ];
    let mut refuted = 0;
    for form in forms {
        let good = Good::new(form);
        assert_eq!(good.judge(&good.lines()), Ok(vec![]), "the program is good to start with: {form:?}");
        let mut tally = Tally { good: &good, refuted: 0 };
        alter_cuts(&mut tally, 13);
        if !form.incremental {
            alter_safety(&mut tally);
        }
        refuted += tally.refuted;
    }
    assert!(refuted >= 200, "only {refuted} changes were tried");
    println!("{refuted} changes refuted");
}

/// A word without the zeros that end its decimals, and without a point that ends it.
fn without_zeros(word: &str) -> &str {
    if word.contains('.') && !word.starts_with("G9") {
        word.trim_end_matches('0').trim_end_matches('.')
    } else {
        word
    }
}

#[test]
fn changes_that_do_not_matter_leave_everything_holding() {
    let good = Good::new(Form::PLAIN);
    let each =
        |change: &dyn Fn(&str) -> String| good.lines().iter().map(|line| change(line)).collect::<Vec<_>>();
    let rows: [(&str, Vec<String>); 9] = [
        ("lower case", each(&str::to_lowercase)),
        ("no blanks", each(&|line| line.replace(' ', ""))),
        ("blanks and tabs", each(&|line| format!("\t{}", line.replace(' ', "  ")))),
        ("blanks inside numbers", each(&|line| line.replace('.', " . "))),
        ("a comment on each line", each(&|line| format!("{line} (as planned)"))),
        ("zeros dropped", each(&|line| line.split(' ').map(without_zeros).collect::<Vec<_>>().join(" "))),
        ("zeros added", each(&|line| line.replace("Z5.000", "Z005.00000").replace("F1800", "F1800.0"))),
        (
            "two digits of a code",
            each(&|line| line.replace("G1 ", "G01 ").replace("G2 ", "G02 ").replace("M5", "M05")),
        ),
        (
            "line numbers",
            good.lines().iter().enumerate().map(|(i, line)| format!("N{} {line}", 10 * i)).collect(),
        ),
    ];
    for (what, lines) in rows {
        assert_eq!(good.judge(&lines), Ok(vec![]), "{what}");
    }
    // Swapping a contour's place in the order changes nothing either.
    let lines = good.lines();
    let crlf = lines.join("\r\n");
    assert_eq!(good.judge(&[crlf]), Ok(vec![]), "other line ends");
}
