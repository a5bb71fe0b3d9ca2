//! What a profile may say: numbers in their bounds, words in their grammar, fields that fit each other.

use super::numbers::numbers;
use super::{ArcStyle, Machine, RetractBy, Unit};
use crate::error::{Error, Kind};

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
