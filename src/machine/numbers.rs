//! Every number of a profile as a named bound with its unit and reason.

use super::{Axes, Machine, Unit, rounded};

/// What a number counts; decides the unit it is shown in.
#[derive(Clone, Copy)]
pub(super) enum Count {
    Length,
    Feed,
    Acceleration,
    Plain(&'static str),
}

/// A limited number of the profile: its field, its bounds in mm, and why they are there.
pub(super) struct Bounded {
    pub(super) field: String,
    value: f64,
    count: Count,
    low: f64,
    high: f64,
    reason: &'static str,
}

impl Count {
    /// What the count is called in a profile of `unit`.
    fn name(self, unit: Unit) -> String {
        match self {
            Self::Length => unit.symbol().into(),
            Self::Feed => format!("{}/min", unit.symbol()),
            Self::Acceleration => format!("{}/s2", unit.symbol()),
            Self::Plain(name) => name.into(),
        }
    }

    /// `value`, held in mm, as a profile of `unit` has it.
    fn own(self, value: f64, unit: Unit) -> f64 {
        match self {
            Self::Plain(_) => value,
            _ => rounded(value / unit.mm(), 12),
        }
    }
}

impl Bounded {
    /// The value and the range, as a profile of `unit` has them; a bound in four digits.
    pub(super) fn shown(&self, unit: Unit) -> (String, String) {
        let bound = |value| rounded(self.count.own(value, unit), 4);
        let (value, low, high) = (self.count.own(self.value, unit), bound(self.low), bound(self.high));
        let name = self.count.name(unit);
        (format!("{value} {name}").trim_end().into(), format!("{low} to {high} {name}").trim_end().into())
    }

    /// The complaint, when the value is outside its bounds; NaN is.
    pub(super) fn flaw(&self, unit: Unit) -> Option<String> {
        let (value, range) = self.shown(unit);
        let flaw = || format!("{} is {value}, allowed is {range}: {}", self.field, self.reason);
        (!(self.low..=self.high).contains(&self.value)).then(flaw)
    }
}

/// Every number of the profile with its bounds.
pub(super) fn numbers(m: &Machine) -> Vec<Bounded> {
    use Count::{Acceleration, Feed, Length};
    let mut all = Vec::new();
    let mut three = |name: &str, axes: &Axes, count, (low, high): (f64, f64), reason| {
        for (axis, value) in [("x", axes.x), ("y", axes.y), ("z", axes.z)] {
            all.push(Bounded { field: format!("{name}.{axis}"), value, count, low, high, reason });
        }
    };
    three(
        "travel",
        &m.travel,
        Length,
        (10.0, 20_000.0),
        "a router's axis is longer than a matchbox and shorter than a hall",
    );
    three("feed", &m.feed, Feed, (1.0, 100_000.0), "slower is at rest, and no router cuts faster");
    three("rapid", &m.rapid, Feed, (1.0, 200_000.0), "slower is at rest, and no router moves faster");
    three(
        "acceleration",
        &m.acceleration,
        Acceleration,
        (1.0, 50_000.0),
        "five times gravity is more than a router bears",
    );
    all.extend(controller_numbers(m));
    all.extend(text_numbers(m));
    all.extend(arc_numbers(m));
    all.extend(retract_numbers(m));
    all.extend(spindle_numbers(m));
    all.extend(m.cutters.iter().enumerate().flat_map(|(i, _)| cutter_numbers(m, i)));
    all
}

/// One bounded number.
fn number(field: &str, value: f64, count: Count, (low, high): (f64, f64), reason: &'static str) -> Bounded {
    Bounded { field: field.to_string(), value, count, low, high, reason }
}

/// The controller's numbers.
fn controller_numbers(m: &Machine) -> Vec<Bounded> {
    use Count::{Length, Plain};
    let c = &m.controller;
    let blocks = (1.0, 100_000.0);
    let mut all = vec![
        number(
            "controller.junction",
            c.junction,
            Length,
            (0.0001, 1.0),
            "a corner is rounded by something, and by less than a cutter",
        ),
        number(
            "controller.blocks_per_second",
            c.blocks_per_second,
            Plain("blocks/s"),
            blocks,
            "a controller reads at least one block a second",
        ),
        number(
            "controller.queue",
            f64::from(c.queue),
            Plain("blocks"),
            blocks,
            "a controller holds at least the block it runs",
        ),
        number(
            "path.blending",
            m.path.blending,
            Length,
            (0.0, 1.0),
            "a corner is rounded by less than a cutter",
        ),
    ];
    let memory = c.memory_bytes.map(f64::from);
    all.extend(memory.map(|bytes| {
        number(
            "controller.memory_bytes",
            bytes,
            Plain("bytes"),
            (1024.0, 4e9),
            "less than a kilobyte holds no program",
        )
    }));
    all
}

/// The numbers of the text and its file.
fn text_numbers(m: &Machine) -> Vec<Bounded> {
    use Count::Plain;
    let p = &m.program;
    // The end radii of an arc rounded to q differ by up to 1.41 q, and 0.002 mm or 0.0002 in are allowed.
    let decimals = if m.unit == Unit::Mm { (3.0, 6.0) } else { (4.0, 7.0) };
    let length = f64::from(m.files.longest_name);
    vec![
        number(
            "program.decimals",
            f64::from(p.decimals),
            Plain(""),
            decimals,
            "fewer break the rule for the end radii of arcs, more are noise",
        ),
        number(
            "program.longest_line",
            f64::from(p.longest_line),
            Plain("characters"),
            (80.0, 256.0),
            "a block of seven words must fit, and the language ends lines at 256",
        ),
        number(
            "program.line_numbers",
            f64::from(p.line_numbers),
            Plain(""),
            (0.0, 1000.0),
            "line numbers have five digits",
        ),
        number(
            "files.longest_name",
            length,
            Plain("characters"),
            (1.0, 255.0),
            "a file needs a name, and no file system takes more",
        ),
    ]
}

/// The numbers of the arcs.
fn arc_numbers(m: &Machine) -> Vec<Bounded> {
    use Count::Length;
    let a = &m.arcs;
    vec![
        number("arcs.smallest", a.smallest, Length, (0.0, 10.0), "larger arcs are needed to cut corners"),
        number(
            "arcs.largest",
            a.largest,
            Length,
            (10.0, 1e7),
            "an arc must span a part, and ten kilometres are straight",
        ),
        number(
            "arcs.end_radii",
            a.end_radii,
            Length,
            (0.001, 0.1),
            "the language allows 0.002 mm or 0.0002 in, and 0.1 mm would show",
        ),
    ]
}

/// The numbers of the retract; machine coordinates are negative or positive, by maker.
fn retract_numbers(m: &Machine) -> Vec<Bounded> {
    let place = |field: &str, value, reach: f64| {
        number(
            field,
            value,
            Count::Length,
            (-reach, reach),
            "a place in machine coordinates lies within the travel",
        )
    };
    let z = m.retract.machine_z.map(|z| place("retract.machine_z", z, m.travel.z));
    let park = m.retract.park;
    let x = park.map(|p| place("retract.park.x", p.x, m.travel.x));
    let y = park.map(|p| place("retract.park.y", p.y, m.travel.y));
    [z, x, y].into_iter().flatten().collect()
}

/// The numbers of the spindle.
fn spindle_numbers(m: &Machine) -> Vec<Bounded> {
    use Count::Plain;
    let s = &m.spindle;
    let range = (1.0, 100_000.0);
    vec![
        number(
            "spindle.slowest",
            s.slowest,
            Plain("rev/min"),
            range,
            "a spindle turns, and none in a router turns faster",
        ),
        number(
            "spindle.fastest",
            s.fastest,
            Plain("rev/min"),
            range,
            "a spindle turns, and none in a router turns faster",
        ),
        number(
            "spindle.spin_up",
            s.spin_up,
            Plain("s"),
            (0.0, 120.0),
            "a spindle is at speed within two minutes",
        ),
    ]
}

/// The numbers of cutter `i`.
fn cutter_numbers(m: &Machine, i: usize) -> Vec<Bounded> {
    use Count::{Length, Plain};
    let c = &m.cutters[i];
    let field = |name: &str| format!("cutters[{}].{name}", i + 1);
    vec![
        number(
            &field("diameter"),
            c.diameter,
            Length,
            (0.1, 100.0),
            "router cutters are between a hair and a fist",
        ),
        number(
            &field("flutes"),
            f64::from(c.flutes),
            Plain(""),
            (1.0, 12.0),
            "a cutter has at least one edge",
        ),
        number(&field("flute_length"), c.flute_length, Length, (0.1, 200.0), "the edges are what cuts"),
        number(
            &field("largest_rpm"),
            c.largest_rpm,
            Plain("rev/min"),
            (100.0, 200_000.0),
            "the maker's mark is within this range",
        ),
        number(&field("least_chip"), c.least_chip, Length, (0.0, 2.0), "no router edge takes a thicker chip"),
        number(
            &field("most_chip"),
            c.most_chip,
            Length,
            (0.001, 2.0),
            "an edge takes some chip, and none in a router more than this",
        ),
    ]
}
