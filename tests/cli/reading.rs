//! A little reader of programs, apart from the one under test: absolute mm, G0 to G3 and G5 in XY, centres from the start.

use kurbo::{Point, Vec2};

/// What a program cuts.
pub(crate) struct Cuts {
    /// Chains of points at its lowest height, each from where the cutter goes down to where it leaves, arcs sampled.
    pub(crate) chains: Vec<Vec<Point>>,
    /// Every move that is somewhere below zero, arcs sampled.
    pub(crate) sunk: Vec<Vec<Point>>,
    /// The largest difference between an arc's radius at its start and at its end: numbers that are rounded describe
    /// no exact arc, and two readings of them may be that far apart.
    pub(crate) mismatch: f64,
}

/// Reads what `program` cuts, arcs sampled within `sagitta` mm.
pub(crate) fn cuts(program: &str, sagitta: f64) -> Cuts {
    let mut at = Point::ORIGIN;
    let (mut z, mut motion) = (f64::INFINITY, 0);
    let mut mismatch = 0.0;
    let mut moves: Vec<(f64, i32, Vec<Point>)> = Vec::new();
    let mut sunk = Vec::new();
    for line in program.lines() {
        let words = words(line);
        let of = |letter| words.iter().rev().find(|w| w.0 == letter).map(|w| w.1);
        for code in words.iter().filter(|w| w.0 == 'G' && w.1 < 4.0 || **w == ('G', 5.0)) {
            motion = code.1 as i32;
        }
        let coordinate = words.iter().any(|w| "XYZ".contains(w.0));
        if !coordinate || words.contains(&('G', 53.0)) {
            continue;
        }
        let to = Point::new(of('X').unwrap_or(at.x), of('Y').unwrap_or(at.y));
        let from_z = z;
        z = of('Z').unwrap_or(z);
        let centre = Point::new(at.x + of('I').unwrap_or(0.0), at.y + of('J').unwrap_or(0.0));
        let is_arc = (motion == 2 || motion == 3) && (of('I').is_some() || of('J').is_some());
        if is_arc {
            mismatch = f64::max(mismatch, (at.distance(centre) - to.distance(centre)).abs());
        }
        let [i, j, p, q] = ['I', 'J', 'P', 'Q'].map(of);
        let points = match (motion, i, j, p, q) {
            (5, Some(i), Some(j), Some(p), Some(q)) => {
                cubic([at, at + Vec2::new(i, j), to + Vec2::new(p, q), to], sagitta)
            }
            (5, ..) => panic!("a cubic move without its four numbers: {line}"),
            _ if is_arc => arc(at, to, (centre, sagitta), motion == 3),
            _ => vec![at, to],
        };
        if z.min(from_z) < 0.0 {
            sunk.push(points.clone());
        }
        moves.push((z, motion, points));
        at = to;
    }
    let lowest = moves.iter().fold(f64::INFINITY, |low, m| low.min(m.0));
    let mut chains: Vec<Vec<Point>> = Vec::new();
    let mut cutting = false;
    for (z, motion, points) in moves {
        let cuts = motion > 0 && z <= lowest;
        match (cutting, cuts) {
            (true, true) => chains.last_mut().expect("one is begun").extend(&points[1..]),
            (false, true) => chains.push(points),
            _ => {}
        }
        cutting = cuts;
    }
    Cuts { chains, sunk, mismatch }
}

/// The words of a line outside its comments.
fn words(line: &str) -> Vec<(char, f64)> {
    let mut words = Vec::new();
    let mut rest = line.split('(').next().unwrap_or_default();
    while let Some(letter) = rest.chars().next() {
        rest = &rest[letter.len_utf8()..];
        let end = rest.find(|c: char| !(c.is_ascii_digit() || "+-.".contains(c))).unwrap_or(rest.len());
        if let Ok(number) = rest[..end].parse() {
            words.push((letter, number));
        }
        rest = &rest[end..];
    }
    words
}

/// Points on the arc, its ends among them.
fn arc(from: Point, to: Point, (centre, sagitta): (Point, f64), left: bool) -> Vec<Point> {
    let (a, b) = (from - centre, to - centre);
    let radius = a.hypot();
    let turn = b.atan2() - a.atan2();
    let sweep = match (left, turn) {
        (true, turn) if turn <= 0.0 => turn + std::f64::consts::TAU,
        (false, turn) if turn >= 0.0 => turn - std::f64::consts::TAU,
        (_, turn) => turn,
    };
    let pieces = (sweep.abs() / (2.0 * (1.0 - sagitta / radius).clamp(-1.0, 1.0).acos())).ceil().max(1.0);
    let at = |k: f64| {
        let angle = a.atan2() + sweep * k / pieces;
        centre + kurbo::Vec2::from_angle(angle) * (radius + (b.hypot() - radius) * k / pieces)
    };
    let inner = (1..pieces as usize).map(|k| at(k as f64));
    std::iter::once(from).chain(inner).chain([to]).collect()
}

/// Points on the cubic Bézier curve, its ends among them, by the Bernstein polynomials.
fn cubic(control: [Point; 4], sagitta: f64) -> Vec<Point> {
    let [a, b, c, d] = control.map(Point::to_vec2);
    // A chord leaves a curve by an eighth of its second derivative over the squared step at most.
    let second = (6.0 * (a - 2.0 * b + c)).hypot().max((6.0 * (b - 2.0 * c + d)).hypot());
    let pieces = (second / (8.0 * sagitta)).sqrt().ceil().max(1.0);
    let at = |t: f64| {
        let s = 1.0 - t;
        (a * (s * s * s) + b * (3.0 * s * s * t) + c * (3.0 * s * t * t) + d * (t * t * t)).to_point()
    };
    let inner = (1..pieces as usize).map(|k| at(k as f64 / pieces));
    std::iter::once(control[0]).chain(inner).chain([control[3]]).collect()
}

/// A chain of straight pieces that is asked for distances, its pieces in the cells of a grid.
pub(crate) struct Chain {
    points: Vec<Point>,
    cells: std::collections::HashMap<(i64, i64), Vec<usize>>,
    cell: f64,
}

impl Chain {
    /// A chain that will be asked for distances up to `reach`.
    pub(crate) fn new(points: Vec<Point>, reach: f64) -> Self {
        let length: f64 = points.windows(2).map(|p| p[0].distance(p[1])).sum();
        let cell = (2.0 * length / points.len() as f64).max(2.0 * reach);
        let mut cells: std::collections::HashMap<_, Vec<usize>> = std::collections::HashMap::new();
        for (i, ends) in points.windows(2).enumerate() {
            let steps = (ends[0].distance(ends[1]) / (cell / 2.0)).ceil().max(1.0);
            for k in 0..=steps as usize {
                let place = key(ends[0].lerp(ends[1], k as f64 / steps), cell);
                let pieces = cells.entry(place).or_default();
                if pieces.last() != Some(&i) {
                    pieces.push(i);
                }
            }
        }
        Self { points, cells, cell }
    }

    /// The distance from `p` to the chain, exact where it is within reach; else an upper bound.
    pub(crate) fn distance(&self, p: Point) -> f64 {
        let (x, y) = key(p, self.cell);
        let near = (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (x + dx, y + dy)));
        let pieces = near.filter_map(|place| self.cells.get(&place)).flatten();
        pieces.map(|&i| distance(p, self.points[i], self.points[i + 1])).fold(f64::INFINITY, f64::min)
    }

    /// The largest distance of the points of this chain, and of points between them every `step`, from `other`.
    pub(crate) fn farthest_from(&self, other: &Self, step: f64) -> f64 {
        let between = |ends: &[Point]| {
            let (from, to) = (ends[0], ends[1]);
            let pieces = (from.distance(to) / step).ceil().max(1.0);
            (0..=pieces as usize).map(move |k| from.lerp(to, k as f64 / pieces)).collect::<Vec<_>>()
        };
        self.points.windows(2).flat_map(between).map(|p| other.distance(p)).fold(0.0, f64::max)
    }
}

fn key(p: Point, cell: f64) -> (i64, i64) {
    ((p.x / cell).floor() as i64, (p.y / cell).floor() as i64)
}

/// The distance of `p` from the piece between two points.
pub(crate) fn distance(p: Point, from: Point, to: Point) -> f64 {
    let along = to - from;
    let t = (p - from).dot(along) / along.hypot2();
    p.distance(if t > 0.0 { from + along * t.min(1.0) } else { from })
}
