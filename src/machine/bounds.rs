//! What a profile may say: every number a named bound with its unit and reason, every word in its grammar.

use super::{ArcStyle, Axes, Machine, RetractBy, Unit};
use crate::error::{Error, Kind};

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
            _ => super::rounded(value / unit.mm(), 12),
        }
    }
}

impl Bounded {
    /// The value and the range, as a profile of `unit` has them; a bound in four digits.
    pub(super) fn shown(&self, unit: Unit) -> (String, String) {
        let bound = |value| super::rounded(self.count.own(value, unit), 4);
        let (value, low, high) = (self.count.own(self.value, unit), bound(self.low), bound(self.high));
        let name = self.count.name(unit);
        (format!("{value} {name}").trim_end().into(), format!("{low} to {high} {name}").trim_end().into())
    }

    /// The complaint, when the value is outside its bounds; NaN is.
    fn flaw(&self, unit: Unit) -> Option<String> {
        let (value, range) = self.shown(unit);
        let flaw = || format!("{} is {value}, allowed is {range}: {}", self.field, self.reason);
        (!(self.low..=self.high).contains(&self.value)).then(flaw)
    }
}

/// The error for text that is not a profile.
pub(super) fn unreadable(text: &str, error: &toml::de::Error) -> Error {
    let at = error.span().map_or(0, |span| span.start.min(text.len()));
    let line = text.bytes().take(at).filter(|&b| b == b'\n').count() + 1;
    let said = text.lines().nth(line - 1).unwrap_or("").trim();
    let mut what = error.message().replace('\n', " ");
    let words = [
        ("expected f64", "expected a number"),
        ("expected u32", "expected a whole number from 0"),
        ("expected a boolean", "expected true or false"),
        ("expected a sequence", "expected a list"),
    ];
    words.into_iter().for_each(|(theirs, ours)| what = what.replace(theirs, ours));
    // A field that is missing from the whole file has no line of its own.
    let has_line = error.span().is_some() && (!what.starts_with("missing") || said.starts_with('['));
    let quoted = if has_line { format!("`{said}`: ") } else { String::new() };
    let error = Error::new(Kind::Settings, format!("the profile cannot be read: {quoted}{what}"));
    let error = if has_line { error.on_line(line) } else { error };
    error.remedy("`ribband machines NAME` shows a profile with all its fields")
}

/// Everything that is wrong with the profile, one sentence each.
pub(super) fn flaws(m: &Machine) -> Vec<String> {
    let mut all: Vec<String> = numbers(m).iter().filter_map(|n| n.flaw(m.unit)).collect();
    all.extend(names(m));
    all.extend(words(m));
    all.extend(pairs(m));
    all
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

/// What is wrong with names.
fn names(m: &Machine) -> Vec<String> {
    let mut all = Vec::new();
    let plain = |c: char| c.is_ascii_alphanumeric() || c == '-';
    if m.name.is_empty() || !m.name.chars().all(plain) {
        all.push(format!(
            "name is {:?}, allowed are letters, digits and hyphens: it is typed on the command line",
            m.name
        ));
    }
    if m.describes.trim().is_empty() || m.describes.chars().any(char::is_control) {
        all.push(
            "describes is empty or has control characters: it says on one line what kind of machine this is"
                .into(),
        );
    }
    let ending = m.files.ending.strip_prefix('.').unwrap_or("");
    if ending.is_empty() || ending.len() > 8 || !ending.chars().all(|c| c.is_ascii_alphanumeric()) {
        all.push(format!(
            "files.ending is {:?}, it needs a point and one to eight letters or digits",
            m.files.ending
        ));
    }
    for (i, c) in m.cutters.iter().enumerate() {
        if c.name.trim().is_empty() || c.name.chars().any(char::is_control) {
            all.push(format!("cutters[{}].name is {:?}: a cutter is asked for by its name", i + 1, c.name));
        }
        if m.cutters[..i].iter().any(|other| other.name == c.name) {
            all.push(format!("cutters[{}].name is {:?}, which an earlier cutter has", i + 1, c.name));
        }
    }
    all
}

/// What is wrong with the words that go into programs as they are.
fn words(m: &Machine) -> Vec<String> {
    let p = &m.program;
    let mut all = Vec::new();
    let unit_word = if m.unit == Unit::Mm { "G21" } else { "G20" };
    let known = ["G17", unit_word, "G40", "G80", "G90", "G94"];
    for mode in p.modes.iter().filter(|mode| !known.contains(&mode.as_str())) {
        all.push(format!(
            "program.modes has {mode:?}, allowed are {}: programs are written for these modes",
            known.join(" ")
        ));
    }
    let mut line = |field: &str, words: &str| {
        if !are_words(words) || words.len() > p.longest_line as usize {
            all.push(format!(
                "{field} is {words:?}, which is not a line of words such as \"G61\" or \"M30\""
            ));
        }
    };
    p.start.iter().for_each(|words| line("program.start", words));
    p.end.iter().for_each(|words| line("program.end", words));
    m.path.word.iter().for_each(|words| line("path.word", words));
    m.arcs.mode_word.iter().for_each(|words| line("arcs.mode_word", words));
    if !p.end.iter().any(|words| ["M2", "M02", "M30"].contains(&words.as_str())) {
        all.push("program.end has neither \"M2\" nor \"M30\": a program must end".into());
    }
    all.extend(chosen(
        "offsets.work",
        m.offsets.work.as_deref(),
        &["G54", "G55", "G56", "G57", "G58", "G59"],
    ));
    all.extend(chosen("offsets.length", m.offsets.length.as_deref(), &["G49"]));
    all.extend(chosen("program.spline", p.spline.as_deref(), &["G5", "G05"]));
    all
}

/// The complaint when `word` is given and not among `allowed`.
fn chosen(field: &str, word: Option<&str>, allowed: &[&str]) -> Option<String> {
    let word = word.filter(|word| !allowed.contains(word))?;
    Some(format!("{field} is {word:?}, allowed are {}, or leave it out", allowed.join(" ")))
}

/// True for one or more words, each a capital letter and a number, with single blanks between.
fn are_words(line: &str) -> bool {
    line.split(' ').all(|word| {
        let digits = word.strip_prefix(|c: char| c.is_ascii_uppercase()).unwrap_or("");
        let shaped = digits.bytes().all(|b| b.is_ascii_digit() || b"+-.".contains(&b));
        shaped && digits.parse::<f64>().is_ok()
    })
}

/// What is wrong with fields that do not fit each other.
fn pairs(m: &Machine) -> Vec<String> {
    let mut all = Vec::new();
    let mut unless = |fits: bool, what: &str| {
        if !fits {
            all.push(what.to_string());
        }
    };
    let style = m.arcs.style;
    let centred = matches!(style, ArcStyle::CentreIncremental | ArcStyle::CentreAbsolute);
    unless(
        centred || !m.arcs.whole_circles,
        "arcs.whole_circles needs a centre style: an arc by radius cannot be a whole circle",
    );
    unless(style != ArcStyle::None || !m.arcs.helices, "arcs.helices needs arcs, and arcs.style is \"none\"");
    unless(m.arcs.smallest < m.arcs.largest, "arcs.smallest is not below arcs.largest");
    unless(
        m.path.word.is_some() || m.path.blending == 0.0,
        "path.blending needs path.word: without it the mode is not set",
    );
    let by_machine = m.retract.by == RetractBy::MachineCoordinate;
    unless(
        by_machine == m.retract.machine_z.is_some(),
        "retract.machine_z is needed for a retract by \"machine-coordinate\", and for no other",
    );
    unless(
        by_machine || m.retract.park.is_none(),
        "retract.park needs a retract by \"machine-coordinate\": the way there must be clear",
    );
    unless(m.spindle.slowest <= m.spindle.fastest, "spindle.slowest is above spindle.fastest");
    for (i, c) in m.cutters.iter().enumerate() {
        unless(
            c.least_chip < c.most_chip,
            &format!("cutters[{}].least_chip is not below its most_chip", i + 1),
        );
    }
    all
}
