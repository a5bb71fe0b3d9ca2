//! A profile shown to people and to programs.

use comfy_table::{Table, presets::NOTHING};
use serde_json::{Value, json};

use super::{ArcStyle, Build, Comments, Dwell, HelixFeed, Letters, Machine, Unit, numbers};

/// The profile for the terminal: what its choices mean for the programs, in sentences, then every number with
/// the range it may have, in the machine's own unit.
pub fn explain(machine: &Machine) -> String {
    let mut table = Table::new();
    table.load_style(NOTHING);
    table.set_header(["number", "value", "allowed"]);
    for number in numbers::numbers(machine) {
        let (value, range) = number.shown(machine.unit);
        table.add_row([number.field, value, range]);
    }
    let choices: String = choices(machine).iter().map(|choice| format!("  {choice}\n")).collect();
    format!("{}: {}\n{choices}{}\n", machine.name, machine.describes, table.trim_fmt())
}

/// What the profile's choices mean, one sentence each.
fn choices(m: &Machine) -> Vec<String> {
    let unit = match m.unit {
        Unit::Mm => "millimetres",
        Unit::Inch => "inches",
    };
    let build = match m.build {
        Build::Stiff => "stiff: it may climb",
        Build::Slack => "slack: conventional cutting is gentler",
    };
    let modes = if m.program.modes.is_empty() { "none".to_string() } else { m.program.modes.join(" ") };
    let offset =
        |word: &Option<String>| word.clone().unwrap_or_else(|| "left as the user set it".to_string());
    let spline = m.program.spline.as_deref().unwrap_or("none");
    let memory = m.controller.memory_bytes.map_or("no limit given".to_string(), |b| format!("{b} bytes"));
    vec![
        format!("programs in {unit}, files named *{}, {}", m.files.ending, letters(m)),
        format!("the machine is {build}"),
        format!("modes set at the start: {modes}; path mode: {}", m.path.word.as_deref().unwrap_or("none")),
        format!("work offset: {}; length offset: {}", offset(&m.offsets.work), offset(&m.offsets.length)),
        arcs(m),
        format!("cubic moves: {spline}; program memory: {memory}; ends with {}", m.program.end.join(", ")),
        comments(m),
        retract(m),
        spindle(m),
        format!("cutters: {}", cutters(m)),
    ]
}

/// Which file names it takes.
fn letters(m: &Machine) -> &'static str {
    match m.files.letters {
        Letters::Any => "with any characters",
        Letters::Plain => "of letters, digits, hyphens and underscores",
        Letters::Capitals => "of capitals, digits, hyphens and underscores",
    }
}

/// How arcs are written.
fn arcs(m: &Machine) -> String {
    let style = match m.arcs.style {
        ArcStyle::CentreIncremental => "by their centre from the start (I, J)",
        ArcStyle::CentreAbsolute => "by their centre from zero (I, J)",
        ArcStyle::Radius => "by their radius (R)",
        ArcStyle::None => return "arcs: none, curves become straight blocks".into(),
    };
    let circles = if m.arcs.whole_circles { "whole circles in one block" } else { "no whole circles" };
    let helices = match (m.arcs.helices, m.arcs.helix_feed) {
        (false, _) => "no helices",
        (true, HelixFeed::Path) => "helices with the feed along the path",
        (true, HelixFeed::Plane) => "helices with the feed along the plane",
    };
    let word = m.arcs.mode_word.as_ref().map_or(String::new(), |word| format!(", selected by {word}"));
    format!("arcs: {style}{word}; {circles}; {helices}")
}

/// How the text looks.
fn comments(m: &Machine) -> String {
    let marked = match m.program.comments {
        Comments::Brackets => "between brackets",
        Comments::Semicolon => "after a semicolon",
        Comments::None => "left out",
    };
    let dwell = match m.program.dwell {
        Dwell::Seconds => "in seconds",
        Dwell::Milliseconds => "in milliseconds",
        Dwell::Unknown => "not used, the program stops for the operator",
    };
    format!("comments: {marked}; dwell: {dwell}")
}

/// How the cutter gets clear.
fn retract(m: &Machine) -> String {
    match (m.retract.machine_z, m.retract.park) {
        (Some(_), Some(_)) => "retracts and parks at places in machine coordinates".into(),
        (Some(_), None) => "retracts to a height in machine coordinates, ends above the last cut".into(),
        _ => "starts from, and retracts to, the clearance height that the program states".into(),
    }
}

/// How the spindle is started.
fn spindle(m: &Machine) -> String {
    let by = if m.spindle.hand_switched { "by hand, the program stops for it" } else { "by the program" };
    format!("spindle: switched {by}")
}

/// The cutters' names.
fn cutters(m: &Machine) -> String {
    let names: Vec<_> = m.cutters.iter().map(|c| c.name.as_str()).collect();
    if names.is_empty() { "none listed".into() } else { names.join(", ") }
}

/// The profiles as `{"machines": [...]}`, every length in mm whatever the machine's unit.
///
/// # Errors
/// None in practice: a profile always has a JSON form; the error is that of the JSON writer.
pub fn to_json(machines: &[Machine]) -> serde_json::Result<Value> {
    let all = machines.iter().map(serde_json::to_value).collect::<Result<Vec<_>, _>>()?;
    Ok(json!({ "machines": all }))
}
