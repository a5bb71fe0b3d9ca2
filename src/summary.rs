//! The summary on the terminal: a job's report in a few lines, the machine first.

use std::fmt::Write;

use crate::num::LengthUnit;
use crate::report::{
    Check, Claim, Condensed, Contour, CutterProgram, DryRun, Layout, Program, Report, Setup, State,
};

/// The summary of `report`, in the machine's own unit, with a line end.
pub fn summary(report: &Report) -> String {
    let show = Show::new(&report.setup);
    let rows = [
        ("Machine", format!("{}, program in {}", report.setup.machine, report.setup.unit)),
        ("Part", part(report, show)),
        ("Zero", zero(&report.setup)),
        ("Path", extents(&report.setup, show)),
        ("Stock", stock(&report.setup, show)),
        ("Clamps", clamps(&report.setup, show)),
        ("Cut", cut(&report.setup, show)),
        ("Cutter", cutters(report, show)),
        ("Blocks", blocks(report)),
        ("Deviation", deviation(report, show)),
        ("Time", time(report)),
        ("Feeding", feeding(report)),
        ("Check", check(report)),
        ("Program", program(report)),
    ];
    let mut text = String::new();
    let uncut = report.contours.iter().flat_map(|c| c.uncut.iter().map(move |told| (c.id, told)));
    let uncut = uncut.map(|(id, told)| ("Uncut", format!("contour {id}: {told}")));
    let laid = laid_out(&report.setup.layout, show).map(|told| ("Laid out", told));
    let (first, rest) = rows.split_at(2);
    let rest = rest.iter().filter(|(_, told)| !told.is_empty());
    for (name, told) in first.iter().cloned().chain(laid).chain(rest.cloned()).chain(uncut) {
        // A string takes everything that is written to it.
        let _ = writeln!(text, "{name:10} {told}");
    }
    for (k, one) in (1..).zip(&report.programs) {
        let told =
            format!("{k}: {}; {}; {}", cutter(&one.setup, show), cut(&one.setup, show), files(&one.program));
        let _ = writeln!(text, "{:10} {told}", "Program");
    }
    for run in &report.dry_runs {
        let _ = writeln!(text, "{:10} {}", "Dry run", dry_run(run));
    }
    for warning in &report.warnings {
        let _ = writeln!(text, "{:10} {warning}", "Note");
    }
    text
}

/// The summary of `report` among others: the drawing, its program, and what the person at the machine should know.
pub fn in_short(report: &Report) -> String {
    let show = Show::new(&report.setup);
    let mut text = format!(
        "{}: {}\n  {}; {}; {}\n",
        report.drawing.file,
        program(report),
        part(report, show),
        deviation(report, show),
        time(report)
    );
    for warning in &report.warnings {
        // A string takes everything that is written to it.
        let _ = writeln!(text, "  {warning}");
    }
    text
}

/// Shows lengths in the machine's unit.
#[derive(Clone, Copy)]
struct Show(LengthUnit);

impl Show {
    fn new(setup: &Setup) -> Self {
        Self(if setup.unit == LengthUnit::Inch.symbol() { LengthUnit::Inch } else { LengthUnit::Mm })
    }

    /// A coordinate or size: a tenth of a mm, or five thousandths of an inch.
    fn size(self, mm: f64) -> String {
        let rounded = match self.0 {
            LengthUnit::Mm => format!("{mm:.1}"),
            LengthUnit::Inch => format!("{:.3}", mm / 25.4),
        };
        if rounded.trim_start_matches('-').chars().all(|c| c == '0' || c == '.') {
            rounded.trim_start_matches('-').to_owned()
        } else {
            rounded
        }
    }

    /// A deviation.
    fn fine(self, mm: f64) -> String {
        match self.0 {
            LengthUnit::Mm => format!("{mm:.4} mm"),
            LengthUnit::Inch => format!("{:.5} in", mm / 25.4),
        }
    }

    /// A feed.
    fn feed(self, mm_min: f64) -> String {
        match self.0 {
            LengthUnit::Mm => format!("{mm_min:.0} mm/min"),
            LengthUnit::Inch => format!("{:.1} in/min", mm_min / 25.4),
        }
    }

    fn unit(self) -> &'static str {
        self.0.symbol()
    }
}

fn part(report: &Report, show: Show) -> String {
    let drawing = &report.drawing;
    let (width, height) = (show.size(drawing.width_mm), show.size(drawing.height_mm));
    let contours = counted(report.contours.len(), "contour");
    format!("{width} x {height} {} finished, {contours}, scale by {}", show.unit(), drawing.scale_from)
}

/// How the drawing is laid out, where it is not once as drawn.
fn laid_out(layout: &Layout, show: Show) -> Option<String> {
    let words = layout.words(|mm| format!("{} {}", show.size(mm), show.unit()));
    let [x0, y0, x1, y1] = layout.parts_mm;
    let (width, height) = (show.size(x1 - x0), show.size(y1 - y0));
    (!words.is_empty()).then(|| format!("{words}: {width} x {height} {} in all", show.unit()))
}

fn zero(setup: &Setup) -> String {
    format!("X and Y at {}, Z at {}", setup.origin.words(), setup.zero.words())
}

fn extents(setup: &Setup, show: Show) -> String {
    let [x0, y0, z0, x1, y1, z1] = setup.extents_mm.map(|mm| show.size(mm));
    format!(
        "X {x0} to {x1}, Y {y0} to {y1}, Z {z1} down to {z0} {} from that zero; lowest Z {z0}",
        show.unit()
    )
}

/// The stock and the cut into the bed under it, as far as they are known.
fn stock(setup: &Setup, show: Show) -> String {
    // A cut into the bed is a matter of tenths.
    let fine = |mm: f64| match show.0 {
        LengthUnit::Mm => format!("{mm:.2}"),
        LengthUnit::Inch => format!("{:.4}", mm / 25.4),
    };
    [setup.stock_words(|mm| show.size(mm)), setup.bed_words(fine)]
        .into_iter()
        .flatten()
        .collect::<Vec<_>>()
        .join("; ")
}

fn clamps(setup: &Setup, show: Show) -> String {
    setup.clamp_words(|mm| show.size(mm)).join("; ")
}

fn cut(setup: &Setup, show: Show) -> String {
    let passes = counted(setup.passes, "pass");
    let depth = show.size(setup.depth_mm);
    let side = side_words(&setup.side);
    let direction = setup.direction.as_ref().map_or(String::new(), |direction| format!(", {direction}"));
    format!("{depth} {} deep in {passes}, {side}{direction}", show.unit())
}

/// What came of condensing a program, with a line end.
pub fn condensed(told: &Condensed) -> String {
    let (before, after) = (&told.before, &told.after);
    let times = match (before.time_s, after.time_s) {
        (Some(before), Some(after)) => format!("{}, {} before", duration(after), duration(before)),
        _ => "not planned: the program holds words that are not known".into(),
    };
    let mut rows = vec![
        ("Machine", told.machine.clone()),
        ("Blocks", format!("{} motion blocks, {} before", after.motion_blocks, before.motion_blocks)),
        ("Bytes", format!("{}, {} before", after.bytes, before.bytes)),
        ("Time", times),
    ];
    match (&told.unchanged, told.deviation_mm) {
        (Some(why), _) => rows.push(("Unchanged", format!("the program is as it was: {why}"))),
        (None, deviation) => {
            let runs = counted(told.runs, "run");
            rows.push(("Runs", format!("{} of {runs} of straight cuts in fewer blocks", told.bettered)));
            let certified = deviation.map_or(String::new(), |mm| format!(" ({mm:.4} mm certified)"));
            rows.push(("Deviation", format!("within {} mm, as allowed{certified}", told.tolerance_mm)));
            rows.push(("Check", "read back and checked against the program it was made from".into()));
        }
    }
    rows.push(("Program", format!("{}, {} blocks", after.file, after.blocks)));
    rows.extend(told.warnings.iter().map(|warning| ("Note", warning.clone())));
    rows.iter().map(|(name, told)| format!("{name:10} {told}\n")).collect()
}

/// A check: its verdict in one line, then claim by claim, then what it leaves to the person at the machine.
pub fn check_list(check: &Check) -> String {
    let verdict = if check.holds { "holds" } else { "does not hold" };
    let mut text = format!("checked against the drawing: {verdict}\n\n");
    for claim in &check.claims {
        let state = match claim.state {
            State::Holds => "holds",
            State::Fails => "fails",
            State::NotChecked => "not checked",
        };
        let _ = writeln!(text, "{state:11} {}{}", claim.name, figures(claim));
    }
    text.push_str("\nNo program can check:\n");
    for open in &check.not_checked {
        let _ = writeln!(text, "            {open}");
    }
    text
}

/// What a claim found, what is allowed, where, and why.
fn figures(claim: &Claim) -> String {
    let unit = if claim.unit.is_empty() { String::new() } else { format!(" {}", claim.unit) };
    let mut told = match (claim.value, claim.limit) {
        (Some(value), Some(limit)) if !claim.unit.is_empty() => {
            let bound = if claim.least { "least" } else { "most" };
            format!(": {} found, {}{unit} at {bound} allowed", four_places(value), four_places(limit))
        }
        _ => String::new(),
    };
    if let (State::Fails, Some(at)) = (claim.state, &claim.at) {
        let _ = write!(told, ", at {at}");
    }
    if !claim.note.is_empty() {
        let _ = write!(told, " ({})", claim.note);
    }
    told
}

/// `value` to four places, without the noughts at the end.
fn four_places(value: f64) -> String {
    format!("{value:.4}").trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// What a side means for the part's size.
pub fn side_words(side: &str) -> &'static str {
    match side {
        "on" => "on the line: the part comes out smaller by the cutter's radius",
        "inside" => "inside the contours: holes keep the drawn size",
        "outside" => "outside the contours: parts keep the drawn size",
        "auto" => "outside the outer contours, inside the holes: parts keep the drawn size",
        _ => "on the side that each layer asks for",
    }
}

/// The cutters of several programs, in the order in which they are needed.
fn cutters(report: &Report, show: Show) -> String {
    if report.programs.is_empty() {
        return cutter(&report.setup, show);
    }
    let diameter = |one: &CutterProgram| format!("{} {}", one.setup.cutter_mm / show.0.mm(), show.unit());
    let all: Vec<String> = report.programs.iter().map(diameter).collect();
    format!("{}: a program for each, all from one zero", all.join(", then "))
}

fn cutter(setup: &Setup, show: Show) -> String {
    let diameter = setup.cutter_mm / show.0.mm();
    let (feed, plunge) = (show.feed(setup.feed_mm_min), show.feed(setup.plunge_mm_min));
    format!(
        "{diameter} {}, feed {feed}, plunge {plunge}, spindle {:.0} rev/min",
        show.unit(),
        setup.spindle_rpm
    )
}

fn blocks(report: &Report) -> String {
    let program = &report.program;
    let sum = |count: fn(&Contour) -> usize| report.contours.iter().map(count).sum::<usize>();
    let spans = match report.contours.iter().any(|contour| contour.cubics.is_some()) {
        true => counted(sum(|contour| contour.cubics.unwrap_or(0)), "cubic"),
        false => {
            format!("{} and {}", counted(sum(|c| c.lines), "line"), counted(sum(|c| c.arcs), "arc"))
        }
    };
    format!(
        "{} motion blocks, {} as drawn; contours of {spans}",
        program.motion_blocks, program.as_drawn.motion_blocks
    )
}

/// Near the tolerance by design, so it is said in a way that does not alarm.
fn deviation(report: &Report, show: Show) -> String {
    let tolerance = match show.0 {
        LengthUnit::Mm => format!("{:.2} mm", report.tolerance_mm),
        LengthUnit::Inch => format!("{:.4} in", report.tolerance_mm / 25.4),
    };
    let certified =
        report.check.deviation_mm.map_or("not found".into(), |mm| format!("{} certified", show.fine(mm)));
    let waste = if report.tolerance_side.is_some() { " on the waste side, none on the other" } else { "" };
    format!("within {tolerance}{waste}, as allowed ({certified})")
}

fn time(report: &Report) -> String {
    let program = &report.program;
    format!(
        "{}, of which {} along the contours; as drawn {} and {}",
        duration(program.time_s),
        duration(program.cut_time_s),
        duration(program.as_drawn.time_s),
        duration(program.as_drawn.cut_time_s)
    )
}

/// Whether the controller keeps up with the reading, and up to which override.
fn feeding(report: &Report) -> String {
    let program = &report.program;
    let drawn = counted(program.as_drawn.starved_blocks, "starved block");
    match (program.starved_blocks, program.highest_override) {
        (0, 100..) => {
            format!("no starved block up to {} % feed override; as drawn {drawn}", program.highest_override)
        }
        (0, _) => format!("no starved block at 100 % feed, with nothing to spare; as drawn {drawn}"),
        (starved, _) => format!("{} at 100 % feed; as drawn {drawn}", counted(starved, "starved block")),
    }
}

fn check(report: &Report) -> String {
    let count = |state| report.check.claims.iter().filter(|claim| claim.state == state).count();
    let open = match count(State::NotChecked) {
        0 => String::new(),
        open => format!(", {open} not checked"),
    };
    format!("read back and checked against the drawing: {} hold{open}", counted(count(State::Holds), "claim"))
}

fn program(report: &Report) -> String {
    let program = &report.program;
    let sizes = format!("{} blocks, {} bytes", program.blocks, program.bytes);
    match program.parts[..] {
        [_, .., _] if !report.programs.is_empty() => {
            format!("{}, to be run in this order, {sizes}", files(program))
        }
        [ref first, .., ref last] => format!(
            "{} to {}: {} parts, to be run one after the other, {sizes}",
            first.file,
            last.file,
            program.parts.len()
        ),
        _ if program.file == "-" => format!("to standard output, {sizes}"),
        _ => format!("{}, {sizes}", program.file),
    }
}

/// A dry run and its files.
fn dry_run(run: &DryRun) -> String {
    let files = match run.files[..] {
        [ref first, .., ref last] => format!("{} to {}", first.file, last.file),
        [ref one] => one.file.clone(),
        [] => String::new(),
    };
    let held = run.claims.iter().filter(|claim| claim.state == State::Holds).count();
    format!("{files}: {}, spindle off; read back and checked: {} hold", run.kind, counted(held, "claim"))
}

/// The names of a program's files.
fn files(program: &Program) -> String {
    match program.parts[..] {
        [ref first, .., ref last] => format!("{} to {}", first.file, last.file),
        _ => program.file.clone(),
    }
}

/// `2 passes`, `1 line`.
fn counted(count: usize, what: &str) -> String {
    let ending = match (count, what.ends_with('s')) {
        (1, _) => "",
        (_, true) => "es",
        (_, false) => "s",
    };
    format!("{count} {what}{ending}")
}

/// `45 s`, `4 min 5 s`, `1 h 2 min`.
pub fn duration(seconds: f64) -> String {
    let whole = seconds.round() as u64;
    match (whole / 3600, whole / 60 % 60, whole % 60) {
        (0, 0, _) => format!("{seconds:.1} s"),
        (0, minutes, seconds) => format!("{minutes} min {seconds} s"),
        (hours, minutes, _) => format!("{hours} h {minutes} min"),
    }
}
