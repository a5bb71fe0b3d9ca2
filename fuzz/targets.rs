//! What is fuzzed, and what must hold beyond not panicking.

use ribband::error::{Error, Kind};
use ribband::gcode::{self, Dialect};
use ribband::geom::ArcSpline;
use ribband::job::{CutArgs, DrawingArgs, DrawingUnit, Job, JobFile, Settings};
use ribband::machine::Machine;
use ribband::num::Length;
use ribband::read::{self, Scale, Unit};
use ribband::run::{self, Source, Unwatched};

/// One thing that takes bytes from outside.
pub(crate) struct Target {
    pub(crate) name: &'static str,
    /// Kept inputs elsewhere in the repository.
    pub(crate) also: &'static [&'static str],
    /// Whether the input was accepted; or what must not be.
    pub(crate) run: fn(&[u8]) -> Result<bool, String>,
}

pub(crate) const TARGETS: [Target; 7] = [
    Target { name: "svg", also: &["fixtures/outlines/analytic/star-a-s20-clean.svg"], run: drawing },
    Target { name: "dxf", also: &["fixtures/outlines/analytic/star-a-s20-clean.dxf"], run: drawing },
    Target { name: "points", also: &["fixtures/outlines/analytic/star-a-s20-clean.csv"], run: drawing },
    Target { name: "program", also: &[], run: program },
    Target {
        name: "profile",
        also: &["machine-profiles/shop-router.toml", "machine-profiles/old-controller.toml"],
        run: profile,
    },
    Target { name: "job", also: &[], run: job_file },
    Target { name: "post", also: &[], run: post },
];

/// An error that helps: it says something, and it is not the fault of an output.
fn useful(error: &Error) -> Result<bool, String> {
    if error.what.is_empty() || error.kind == Kind::Output {
        Err(format!("a useless error: {error:?}"))
    } else {
        Ok(false)
    }
}

fn mm() -> Scale {
    Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() }
}

/// Whatever is read has finite coordinates within reason, and something in it.
fn drawing(input: &[u8]) -> Result<bool, String> {
    let sketch = match read::read("fuzz", input, &mm()) {
        Ok(sketch) => sketch,
        Err(error) => return useful(&error),
    };
    if sketch.contours.is_empty() {
        return Err("an empty drawing is accepted".into());
    }
    for contour in &sketch.contours {
        let sound =
            |v: &ribband::geom::Vertex| v.at.x.abs() <= 1e7 && v.at.y.abs() <= 1e7 && v.bulge.is_finite();
        if !contour.path.vertices.iter().all(sound) {
            return Err(format!("contour {} has a vertex beyond reason", contour.id));
        }
    }
    Ok(true)
}

/// Whatever is understood is one unbroken chain of finite moves.
fn program(input: &[u8]) -> Result<bool, String> {
    let text = String::from_utf8_lossy(input);
    let dialect = Dialect::of(&shop_router()?);
    let program = match gcode::read(&text).and_then(|text| gcode::interpret(&text, &dialect)) {
        Ok(program) => program,
        Err(error) => return useful(&error),
    };
    for m in &program.toolpath.moves {
        let numbers =
            [m.from.xy.x, m.from.xy.y, m.from.z, m.to.xy.x, m.to.xy.y, m.to.z, m.bulge, m.spindle_rpm];
        if !numbers.iter().all(|number| number.is_finite()) || m.bulge.abs() > 1.0 {
            return Err(format!("line {} is a move that no machine can make: {m:?}", m.line));
        }
    }
    Ok(true)
}

/// A profile that is accepted is written as one that is accepted, and as the same.
fn profile(input: &[u8]) -> Result<bool, String> {
    let text = String::from_utf8_lossy(input);
    let machine = match Machine::from_toml(&text) {
        Ok(machine) => machine,
        Err(error) => return useful(&error),
    };
    let again =
        machine.to_toml().and_then(|text| Machine::from_toml(&text)).map_err(|error| error.to_string())?;
    if again == machine { Ok(true) } else { Err("written and read again it is another machine".into()) }
}

/// A job file that is accepted gives a job whose numbers are sound, or an error that helps.
fn job_file(input: &[u8]) -> Result<bool, String> {
    let text = String::from_utf8_lossy(input);
    let file = match JobFile::parse("fuzz", &text) {
        Ok(file) => file,
        Err(error) => return useful(&error),
    };
    let typed = Settings { machine: Some("shop-router".into()), ..Settings::default() };
    let job = match Job::new(&typed, &file) {
        Ok(job) => job,
        Err(error) => return useful(&error),
    };
    let cutting = &job.cutting;
    let numbers = [
        cutting.depth_mm,
        cutting.pass_mm,
        cutting.feed,
        cutting.plunge,
        cutting.spindle_rpm,
        job.cutters[0].diameter_mm,
    ];
    if numbers.iter().all(|number| number.is_finite() && *number > 0.0) {
        Ok(true)
    } else {
        Err(format!("{job:?}"))
    }
}

/// A random drawing is cut by a program that holds its check, says what was meant, and is the same the second time; or
/// it is refused.
fn post(input: &[u8]) -> Result<bool, String> {
    let list = points(input);
    let millimetres = |mm| Some(Length::from_mm(mm));
    let typed = Settings {
        drawing: DrawingArgs { drawing_unit: Some(DrawingUnit::Mm), ..DrawingArgs::default() },
        cut: CutArgs { depth: millimetres(3.0), ..CutArgs::default() },
        tolerance: millimetres(0.02 + f64::from(input.first().copied().unwrap_or(0)) / 256.0),
        ..Settings::default()
    };
    let job = Job::new(&typed, &JobFile::default()).map_err(|error| error.to_string())?;
    let source = Source { name: "fuzz", bytes: list.as_bytes() };
    let plan = match run::plan(&job, source, &Unwatched) {
        Ok(plan) => plan,
        Err(error) if error.kind == Kind::Settings => return Err(error.to_string()),
        Err(error) => return useful(&error),
    };
    let [made] = &plan.programs[..] else { return Err("one cutter is not one program".into()) };
    if !made.verdict.holds {
        return Err("a program that fails its check is handed on".into());
    }
    let length = |path: &ArcSpline| path.length();
    let meant: f64 = made.routed.iter().map(|routed| length(&routed.path)).sum();
    let read: f64 = made
        .program
        .toolpath
        .moves
        .iter()
        .filter(|m| !m.is_rapid() && (m.from.z - m.to.z).abs() == 0.0)
        .map(|m| m.length())
        .sum();
    let passes = job.cutting.depth_mm / job.cutting.pass_mm;
    let places = made.program.motion_blocks as f64 * 4.0 * job.machine.last_place();
    if (read - meant * passes.ceil()).abs() > places + 1e-3 * meant {
        return Err(format!("{read} mm are cut, {meant} mm were meant"));
    }
    let again = run::plan(&job, source, &Unwatched).map_err(|error| error.to_string())?;
    if again.programs[0].text == made.text {
        Ok(true)
    } else {
        Err("the second time it is another program".into())
    }
}

/// Bytes as a point list: steps of a walk, a new contour where a byte is 255, closed where it is 254.
fn points(input: &[u8]) -> String {
    let (mut x, mut y) = (100.0, 100.0);
    let mut first = (x, y);
    let mut list = String::new();
    for pair in input.chunks(2) {
        let [a, b] = [pair[0], pair[pair.len() - 1]];
        match a {
            255 => {
                list.push('\n');
                (x, y) = (x + f64::from(b) - 100.0, y + 20.0);
                first = (x, y);
            }
            254 => list.push_str(&format!("{},{}\n", first.0, first.1)),
            _ => {
                let reach = if a % 16 == 0 { 20.0 } else { 1.0 };
                let angle = f64::from(b) / 256.0 * std::f64::consts::TAU;
                (x, y) = (x + reach * angle.cos(), y + reach * angle.sin() * f64::from(a) / 256.0);
                list.push_str(&format!("{x:.3},{y:.3}\n"));
            }
        }
    }
    list
}

fn shop_router() -> Result<Machine, String> {
    Machine::named("shop-router").map_err(|error| error.to_string())
}
