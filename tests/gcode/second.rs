//! Every program that we write, read by a second parser (the `gcode` crate) and understood by a second,
//! little interpreter that shares nothing with the first: the same places, the same arcs, the same feeds.

use gcode::{Block, Code, Value};
use kurbo::{Point, Vec2};
use proptest::prelude::*;
use ribband::gcode::{Program, write};
use ribband::machine::{ArcStyle, Machine, RetractBy, Unit};
use ribband::toolpath::Toolpath;

use crate::common::{Path, at, header, understood};
use crate::rounded::machines;

/// What a block does: where it ends, a place half way along, and its feed; in mm.
#[derive(Clone, Copy, Debug)]
struct Stroke {
    end: [f64; 3],
    middle: [f64; 2],
    feed: Option<f64>,
}

/// The words of a block, G words apart.
fn words(block: &Block) -> (Vec<u32>, Vec<(char, f64)>) {
    let number = |value: &Value| match value {
        Value::Literal(number) => f64::from(*number),
        other => panic!("not a number: {other}"),
    };
    let mut words: Vec<_> =
        block.word_addresses.iter().map(|w| (w.letter.to_ascii_uppercase(), number(&w.value))).collect();
    let mut codes = Vec::new();
    for code in &block.codes {
        let args = match code {
            Code::General(g) => {
                codes.push(
                    g.number.to_string().parse::<f64>().map(|n| (n * 10.0).round() as u32).expect("a number"),
                );
                &g.args
            }
            Code::Miscellaneous(m) => &m.args,
            other => panic!("we write no {other}"),
        };
        words.extend(args.iter().map(|a| (a.letter.to_ascii_uppercase(), number(&a.value))));
    }
    (codes, words)
}

/// The strokes of `text` after the first three places are known.
fn strokes(text: &str, machine: &Machine) -> Vec<Stroke> {
    let program = gcode::parse(text).expect("the second parser reads it");
    let scale = if machine.unit == Unit::Mm { 1.0 } else { 25.4 };
    let (mut here, mut motion, mut feed) = ([f64::NAN; 3], 0, 0.0);
    let mut all = Vec::new();
    for block in &program.blocks {
        let (codes, words) = words(block);
        let get = |letter| words.iter().find(|(l, _)| *l == letter).map(|(_, value)| value * scale);
        if codes.contains(&530) {
            continue;
        }
        motion = codes.iter().copied().find(|code| *code <= 30).unwrap_or(motion);
        feed = get('F').unwrap_or(feed);
        let mut end = here;
        for (axis, letter) in ['X', 'Y', 'Z'].into_iter().enumerate() {
            end[axis] = get(letter).unwrap_or(end[axis]);
        }
        if !['X', 'Y', 'Z'].into_iter().any(|letter| get(letter).is_some()) {
            continue;
        }
        let (from, to) = (Point::new(here[0], here[1]), Point::new(end[0], end[1]));
        let clockwise = motion == 20;
        let middle = match (motion, get('R'), get('I'), get('J')) {
            (0 | 10, ..) => from.midpoint(to),
            (_, Some(radius), ..) => by_radius(from, to, radius, clockwise),
            (_, None, Some(i), Some(j)) => {
                let absolute = machine.arcs.style == ArcStyle::CentreAbsolute;
                let centre = if absolute { Point::new(i, j) } else { from + Vec2::new(i, j) };
                by_centre(from, to, centre, clockwise)
            }
            other => panic!("an arc without its numbers: {other:?}"),
        };
        let feed = (motion > 0).then_some(feed);
        if here.iter().all(|v| !v.is_nan()) {
            all.push(Stroke { end, middle: [middle.x, middle.y], feed });
        }
        here = end;
    }
    all
}

/// The middle of an arc by radius, of at most half a turn: off the chord's middle by the sagitta.
fn by_radius(from: Point, to: Point, radius: f64, clockwise: bool) -> Point {
    let chord = to - from;
    let sagitta = radius - (radius * radius - chord.hypot2() / 4.0).max(0.0).sqrt();
    let right = Vec2::new(chord.y, -chord.x) / chord.hypot();
    from.midpoint(to) + right * if clockwise { -sagitta } else { sagitta }
}

/// The middle of an arc by centre, by halving its angle.
fn by_centre(from: Point, to: Point, centre: Point, clockwise: bool) -> Point {
    let (start, mut end) = ((from - centre).atan2(), (to - centre).atan2());
    let whole = std::f64::consts::TAU;
    if clockwise && end >= start - 1e-9 {
        end -= whole;
    }
    if !clockwise && end <= start + 1e-9 {
        end += whole;
    }
    centre + Vec2::from_angle((start + end) / 2.0) * from.distance(centre)
}

/// Our own reading, a stroke for each line that moves.
fn ours(program: &Program) -> Vec<Stroke> {
    let moves = &program.toolpath.moves;
    let line = moves.chunk_by(|a, b| a.line == b.line);
    line.map(|parts| {
        let (last, half) = (parts[parts.len() - 1], parts.len() / 2);
        let middle = if parts.len() == 2 { parts[half].from.xy } else { parts[0].span().at(0.5) };
        Stroke { end: [last.to.xy.x, last.to.xy.y, last.to.z], middle: [middle.x, middle.y], feed: last.feed }
    })
    .collect()
}

/// A random job: contours of lines and arcs, each at its own depth.
fn jobs() -> impl Strategy<Value = Toolpath> {
    let step = (-100.0..100.0_f64, -100.0..100.0_f64, -1.0..1.0_f64, 50.0..2900.0_f64);
    let contour = (prop::collection::vec(step, 2..8), -8.0..-0.1_f64);
    prop::collection::vec(contour, 1..4).prop_map(|contours| {
        let mut path = Path::from(at(0.0, 0.0, 15.0));
        for (steps, depth) in contours {
            let (x, y, ..) = steps[0];
            path = path.rapid(x, y, 15.0).plunge(depth);
            for &(x, y, bulge, feed) in &steps[1..] {
                path = path.go(at(x, y, depth), if bulge.abs() < 0.2 { 0.0 } else { bulge }, Some(feed));
            }
            let (x, y, ..) = steps[steps.len() - 1];
            path = path.rapid(x, y, 15.0);
        }
        path.rapid(0.0, 0.0, 15.0).done()
    })
}

proptest! {
    #[test]
    fn both_read_the_same_moves(toolpath in jobs(), which in 0..11_usize) {
        let machine = &machines()[which];
        let text = write(&toolpath, &header(), machine).expect("can be written");
        let program = understood(&text, machine);
        let (mine, second) = (ours(&program), strokes(&text, machine));
        // A retract by machine coordinate leaves Z unstated, where the second reader carries on.
        let skipped = usize::from(machine.retract.by == RetractBy::MachineCoordinate);
        prop_assert!(second.len() >= mine.len() && second.len() - mine.len() <= skipped, "{text}");
        for (a, b) in mine.iter().rev().zip(second.iter().rev()) {
            // The second parser's numbers are f32, which leaves 1e-4 of a place; where the radii at an
            // arc's two ends differ, its middle is a matter of taste by as much.
            let off = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
            let middles = 1e-3 + 1.5 * machine.last_place();
            let near = off(&a.end, &b.end) < 1e-4 && off(&a.middle, &b.middle) < middles;
            let feeds = a.feed.zip(b.feed).is_none_or(|(a, b)| (a - b).abs() < 1e-3 * b);
            prop_assert!(near && feeds && a.feed.is_some() == b.feed.is_some(), "{a:?} {b:?}\n{text}");
        }
    }

    #[test]
    fn what_was_meant_is_read_back(toolpath in jobs(), which in 0..11_usize) {
        let machine = &machines()[which];
        let text = write(&toolpath, &header(), machine).expect("can be written");
        let program = understood(&text, machine);
        let place = machine.last_place();
        let read = &program.toolpath.moves;
        let ends = toolpath.moves.iter().filter(|m| !m.is_rapid() && m.from != m.to).map(|m| m.to);
        let mut rest = read.iter();
        for end in ends {
            let near = |at: f64, meant: f64| (at - meant).abs() <= 0.5001 * place;
            let (at, up) = (end.xy, end.z);
            let found = rest.find(|m| near(m.to.xy.x, at.x) && near(m.to.xy.y, at.y) && near(m.to.z, up));
            prop_assert!(found.is_some() || read.is_empty(), "{end:?} is not reached\n{text}");
        }
        let length = |moves: &[ribband::toolpath::Move]| -> f64 {
            moves.iter().filter(|m| !m.is_rapid()).map(|m| m.length()).sum()
        };
        let (meant, got) = (length(&toolpath.moves), length(read));
        prop_assert!((meant - got).abs() <= 1e-4 * meant + 20.0 * place, "{meant} {got}\n{text}");
        let slower = toolpath.moves.iter().filter_map(|m| m.feed).fold(0.0, f64::max);
        let fastest = read.iter().filter_map(|m| m.feed).fold(0.0, f64::max);
        prop_assert!(fastest <= slower + 1e-9 && fastest > slower - 0.3, "{fastest} for {slower}");
        let hand = machine.spindle.hand_switched;
        prop_assert!(hand || read.iter().all(|m| m.spindle_rpm > 0.0), "the spindle turns throughout");
    }
}
