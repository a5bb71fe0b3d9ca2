//! A second reader of programs: the `gcode` crate parses them, and a little interpreter that shares nothing with the
//! project's own follows them.

use gcode::{Block, Code, Value};
use kurbo::{Point, Vec2};
use ribband::gcode::Program;
use ribband::machine::{ArcStyle, Machine, RetractBy, Unit};

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

/// What the words so far have set, in the second reader's own terms.
struct Modes {
    scale: f64,
    incremental: bool,
    centre_from_zero: bool,
    motion: u32,
    feed: f64,
}

impl Modes {
    fn of(machine: &Machine) -> Self {
        let scale = if machine.unit == Unit::Mm { 1.0 } else { 25.4 };
        let centre_from_zero = machine.arcs.style == ArcStyle::CentreAbsolute;
        Self { scale, incremental: false, centre_from_zero, motion: 0, feed: 0.0 }
    }

    fn take(&mut self, code: u32) {
        match code {
            0 | 10 | 20 | 30 => self.motion = code,
            200 => self.scale = 25.4,
            210 => self.scale = 1.0,
            900 | 910 => self.incremental = code == 910,
            901 | 911 => self.centre_from_zero = code == 901,
            _ => {}
        }
    }
}

/// The strokes of `text` after the first three places are known.
fn strokes(text: &str, machine: &Machine) -> Vec<Stroke> {
    let program = gcode::parse(text).expect("the second parser reads it");
    let (mut here, mut modes) = ([f64::NAN; 3], Modes::of(machine));
    let mut all = Vec::new();
    for block in &program.blocks {
        let (codes, words) = words(block);
        if codes.contains(&530) {
            continue;
        }
        codes.iter().for_each(|&code| modes.take(code));
        let scale = modes.scale;
        let get = |letter| words.iter().find(|(l, _)| *l == letter).map(|(_, value)| value * scale);
        modes.feed = get('F').unwrap_or(modes.feed);
        let mut end = here;
        for (axis, letter) in ['X', 'Y', 'Z'].into_iter().enumerate() {
            let from = if modes.incremental { here[axis] } else { 0.0 };
            end[axis] = get(letter).map_or(end[axis], |value| from + value);
        }
        if !['X', 'Y', 'Z'].into_iter().any(|letter| get(letter).is_some()) {
            continue;
        }
        let (from, to) = (Point::new(here[0], here[1]), Point::new(end[0], end[1]));
        let clockwise = modes.motion == 20;
        let middle = match (modes.motion, get('R'), get('I').or(get('J'))) {
            (0 | 10, ..) => from.midpoint(to),
            (_, Some(radius), _) => by_radius(from, to, radius, clockwise),
            (_, None, Some(_)) => {
                let centre = Vec2::new(get('I').unwrap_or(0.0), get('J').unwrap_or(0.0));
                let from_zero = modes.centre_from_zero;
                by_centre(from, to, if from_zero { centre.to_point() } else { from + centre }, clockwise)
            }
            other => panic!("an arc without its numbers: {other:?}"),
        };
        let feed = (modes.motion > 0).then_some(modes.feed);
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

/// Holds our reading of `text` against the second one, stroke by stroke from the end: the same places, to `near` mm,
/// the same middles and the same feeds.
///
/// The second parser's numbers are f32, which leaves 1e-4 of a place; where the radii at an arc's two ends differ, its
/// middle is a matter of taste by as much. A retract by machine coordinate leaves Z unstated, where the second reader
/// carries on, so that it may have one stroke more.
pub(crate) fn agree(text: &str, program: &Program, machine: &Machine, near: f64) -> Result<(), String> {
    let (mine, second) = (ours(program), strokes(text, machine));
    let skipped = usize::from(machine.retract.by == RetractBy::MachineCoordinate);
    if second.len() < mine.len() || second.len() - mine.len() > skipped {
        return Err(format!("{} strokes, and {} by the second reader", mine.len(), second.len()));
    }
    let off = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| (a - b).abs()).fold(0.0, f64::max);
    let middles = 1e-3 + 1.5 * machine.last_place();
    for (a, b) in mine.iter().rev().zip(second.iter().rev()) {
        let places = off(&a.end, &b.end) < near && off(&a.middle, &b.middle) < middles;
        let feeds = a.feed.zip(b.feed).is_none_or(|(a, b)| (a - b).abs() < 1e-3 * b);
        if !(places && feeds && a.feed.is_some() == b.feed.is_some()) {
            return Err(format!("{a:?} and by the second reader {b:?}"));
        }
    }
    Ok(())
}
