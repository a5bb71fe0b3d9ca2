//! What is asked for: settings as typed, merged from all their sources in one place, and judged before any work.

mod accuracy;
mod bounds;
mod checking;
mod condensing;
mod cutting;
mod file;
mod ladder;
mod laying;
mod places;
mod settings;
mod stock;
mod wishes;

use std::collections::BTreeMap;
use std::path::Path;

use crate::error::{Error, Kind};
use crate::files;
use crate::machine::{Cutter, Machine, RetractBy};
use crate::num::{Length, LengthUnit, Tolerance};
use crate::sketch::Contour;

pub use accuracy::{AccuracyArgs, Moves, ToleranceSide};
pub use checking::{CheckArgs, CheckJob};
pub use condensing::{CondenseArgs, CondenseJob};
pub use cutting::{Cutting, TabNumber, Tabs};
pub use file::{JobFile, LayerSettings, same_colour};
pub use ladder::{Ladder, LadderArgs};
pub use laying::{Grid, Layout, LayoutArgs};
pub use places::{ClampWanted, Pair, SizeWanted, ThicknessWanted};
pub use settings::{DrawingArgs, DrawingUnit, Origin, Outputs, Settings, Zero};
pub use stock::{Clamp, SettingUpArgs, Sheet, Stock, Thickness};
pub use wishes::{Corners, CutArgs, Direction, Entry, Held, Side, TabsWanted};

/// A job whose settings are whole and inside their bounds. Lengths in mm, feeds in mm/min.
#[derive(Clone, Debug)]
pub struct Job {
    /// The machine it is for.
    pub machine: Machine,
    /// How the drawing is read.
    pub drawing: DrawingSettings,
    /// The tolerance asked for; `None` for the default.
    pub tolerance: Option<Tolerance>,
    /// Where the tolerance may be used.
    pub tolerance_side: ToleranceSide,
    /// What curves are written as.
    pub moves: Moves,
    /// True when curvature along trace, fair curve and path is shown.
    pub curvature: bool,
    /// The cutters, that of the whole job first.
    pub cutters: Vec<ChosenCutter>,
    /// How contours are cut.
    pub cutting: Cutting,
    /// How the contours of single layers are cut instead; `None` where they are left out.
    pub layers: BTreeMap<String, Option<Cutting>>,
    /// The same for contours of single colours that are on none of these layers.
    pub colours: BTreeMap<String, Option<Cutting>>,
    /// How the drawing is laid on the stock.
    pub layout: Layout,
    /// Zero, stock, clamps and the height of travel.
    pub stock: Stock,
}

/// A cutter that was asked for.
#[derive(Clone, Debug, PartialEq)]
pub struct ChosenCutter {
    /// Its diameter.
    pub diameter_mm: f64,
    /// Its entry in the machine profile, if it has one.
    pub entry: Option<Cutter>,
}

/// How a drawing is read.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct DrawingSettings {
    /// What a bare number in it means.
    pub unit: Option<DrawingUnit>,
    /// The factor it is scaled by.
    pub scale: Option<f64>,
    /// The width it is scaled to.
    pub fit_width_mm: Option<f64>,
    /// The layers to cut; `None` for all.
    pub layers: Option<Vec<String>>,
    /// How far apart ends may be that are joined; `None` for the tolerance.
    pub join_mm: Option<f64>,
    /// How many times the usual size it may have at most; `None` for once.
    pub size_limit: Option<f64>,
}

/// How many units of the last decimal a tolerance must span at least: fitting loses 1.5 of them to the rounding of the
/// program's numbers.
const LEAST_TOLERANCE_STEPS: f64 = 3.0;

impl DrawingSettings {
    /// How a drawing is read for `machine`, judged.
    ///
    /// # Errors
    /// [`Kind::Settings`] for a setting out of its bounds.
    pub fn new(typed: &DrawingArgs, machine: &Machine) -> Result<Self, Error> {
        drawing(typed, Units { machine: machine.unit })
    }
}

impl Job {
    /// The job that `typed` asks for, the settings of `file` standing where nothing was typed.
    ///
    /// # Errors
    /// [`Kind::Settings`] for a setting that is missing or out of its bounds, [`Kind::Refused`] for one that the
    /// machine or the cutter cannot do.
    pub fn new(typed: &Settings, file: &JobFile) -> Result<Self, Error> {
        let all = typed.clone().or(file.settings.clone());
        let machine = machine(all.machine.as_deref())?;
        let mm = Units { machine: machine.unit };
        let tolerance = mm.length(&bounds::TOLERANCE, all.tolerance)?;
        if let Some(tolerance) = tolerance {
            spans_decimals(tolerance, &machine)?;
        }
        let stock = Stock::new(&all.setting_up, all.bed_cut, mm)?;
        starts_clear(&stock, &machine)?;
        let mut maker = cutting::Maker { machine: &machine, mm, stock: &stock, cutters: Vec::new() };
        let cutting = maker.cutting(&all.cut)?;
        let mut entry = |(name, entry): (&String, &LayerSettings)| {
            let wanted = typed.cut.clone().or(entry.cut.clone()).or(file.settings.cut.clone());
            let cutting = if entry.skip { None } else { Some(maker.cutting(&wanted)?) };
            Ok((name.clone(), cutting))
        };
        let layers = file.layers.iter().map(&mut entry).collect::<Result<BTreeMap<_, _>, Error>>()?;
        let colours = file.colours.iter().map(entry).collect::<Result<BTreeMap<_, _>, Error>>()?;
        let cutters = maker.cutters;
        let off_edge = |cutting: &Cutting| cutting.allowance_mm != 0.0;
        let beside = |cutting: &Cutting| cutting.side != Side::On;
        let all_cuttings =
            || std::iter::once(&cutting).chain(layers.values().chain(colours.values()).flatten());
        if all_cuttings().any(off_edge) && !all_cuttings().any(|c| off_edge(c) && beside(c)) {
            let what = "--allowance moves the cutter off the drawn edge, and the cut is on the line";
            return Err(Error::new(Kind::Settings, what).remedy("choose a --side, or leave --allowance out"));
        }
        let layout = Layout::new(&all.layout, mm)?;
        let outside = |c: &&Cutting| matches!(c.side, Side::Outside | Side::Auto);
        let needed = |c: &Cutting| cutters[c.cutter].diameter_mm + 2.0 * c.allowance_mm;
        let needed_mm = all_cuttings().filter(outside).map(needed).fold(0.0, f64::max);
        if layout.copies.count() > 1 && layout.gap_mm < needed_mm {
            return Err(too_close(layout.gap_mm, needed_mm));
        }
        all.accuracy.judge(&machine, std::iter::once(&cutting).chain(layers.values().flatten()))?;
        Ok(Self {
            drawing: drawing(&all.drawing, mm)?,
            layout,
            tolerance: tolerance.and_then(Tolerance::new),
            tolerance_side: all.accuracy.tolerance_side.unwrap_or_default(),
            moves: all.accuracy.moves.unwrap_or_default(),
            curvature: all.accuracy.curvature == Some(true),
            cutters,
            cutting,
            layers,
            colours,
            stock,
            machine,
        })
    }

    /// True when the path is never to be on the side of the line that is kept.
    pub fn keeps_to_waste(&self) -> bool {
        self.tolerance_side == ToleranceSide::Waste
    }

    /// How much further than its radius the cutter's centre is meant to keep from the edge, in mm, where it cuts on one
    /// side alone: for a cut on the line as much less.
    pub fn edge_mm(&self, cutting: &Cutting) -> f64 {
        if self.cuts_on_line_only() {
            -self.cutters[cutting.cutter].diameter_mm / 2.0
        } else {
            cutting.allowance_mm
        }
    }

    /// True when no contour is cut beside its line.
    pub fn cuts_on_line_only(&self) -> bool {
        self.cuttings().all(|cutting| cutting.side == Side::On)
    }

    /// All ways in which contours may be cut.
    pub fn cuttings(&self) -> impl Iterator<Item = &Cutting> {
        std::iter::once(&self.cutting).chain(self.layers.values().chain(self.colours.values()).flatten())
    }

    /// How a contour that is cut is cut.
    pub fn cutting_for(&self, contour: &Contour) -> &Cutting {
        self.cutting_of(contour).unwrap_or(&self.cutting)
    }

    /// How a contour is cut, by its layer, else by its colour; `None` where it is left out.
    pub fn cutting_of(&self, contour: &Contour) -> Option<&Cutting> {
        let by_colour = || self.colours.get(&same_colour(&contour.colour));
        self.layers.get(&contour.layer).or_else(by_colour).map_or(Some(&self.cutting), Option::as_ref)
    }
}

/// Refuses clamps that rise to where the cutter travels on a machine whose program starts at that height: nobody knows
/// from where it then comes across.
fn starts_clear(stock: &Stock, machine: &Machine) -> Result<(), Error> {
    let clearance_mm = stock.clearance_mm();
    let tall = |(_, clamp): &(usize, &Clamp)| clamp.height_mm >= clearance_mm;
    let Some((number, clamp)) = (1..).zip(&stock.clamps).find(tall) else { return Ok(()) };
    if machine.retract.by == RetractBy::MachineCoordinate {
        return Ok(());
    }
    let what = format!(
        "clamp {number} rises {} mm above the stock, and the cutter comes to its first cut {clearance_mm} mm above it, \
         from a place that the program does not know",
        clamp.height_mm
    );
    Err(Error::new(Kind::Refused, what).remedy("raise --clearance above the clamp"))
}

/// Refuses copies between which the cutter cannot pass.
fn too_close(gap_mm: f64, needed_mm: f64) -> Error {
    let what = format!(
        "the gap between copies is {gap_mm} mm, and the cutter needs {needed_mm} mm to pass outside of both"
    );
    Error::new(Kind::Refused, what).remedy("ask for a wider --gap")
}

/// The machine profile of that name, built in or in a file; `shop-router` where none is named.
///
/// # Errors
/// [`Kind::Settings`] when there is no such profile, or it is wrong.
pub fn machine(name: Option<&str>) -> Result<Machine, Error> {
    let name = name.unwrap_or("shop-router");
    let looks_like_file = name.contains(['/', '\\', '.']) || Path::new(name).is_file();
    if !looks_like_file {
        return Machine::named(name);
    }
    let bytes = files::read(Path::new(name)).map_err(|error| Error { kind: Kind::Settings, ..error })?;
    let text = String::from_utf8(bytes).map_err(|_| {
        Error::new(Kind::Settings, "the machine profile is not text in UTF-8")
            .in_file(name)
            .remedy("save it as UTF-8")
    })?;
    Machine::from_toml(&text).map_err(|error| error.in_file(name))
}

/// Turns what was typed into mm on a machine that works in the given unit.
#[derive(Clone, Copy)]
struct Units {
    machine: LengthUnit,
}

impl Units {
    /// A length inside its bounds, in mm.
    fn length(self, bound: &bounds::Bound, typed: Option<Length>) -> Result<Option<f64>, Error> {
        let Some(typed) = typed else { return Ok(None) };
        let mm = typed.mm(self.machine).ok_or_else(|| bare(bound.name, &typed.to_string(), ""))?;
        bound.hold(mm).map(Some)
    }

    /// A feed inside its bounds, in mm/min.
    fn feed(self, bound: &bounds::Bound, typed: Option<crate::num::Feed>) -> Result<Option<f64>, Error> {
        let Some(typed) = typed else { return Ok(None) };
        let feed = typed.mm_min(self.machine).ok_or_else(|| bare(bound.name, &typed.to_string(), "/min"))?;
        bound.hold(feed).map(Some)
    }
}

/// The error for a bare number on a machine that works in inches.
fn bare(name: &str, typed: &str, per: &str) -> Error {
    Error::new(Kind::Settings, format!("{name} is {typed} without a unit, and the machine works in inches"))
        .remedy(format!("write {typed}in{per} or {typed}mm{per}"))
}

fn drawing(typed: &DrawingArgs, mm: Units) -> Result<DrawingSettings, Error> {
    Ok(DrawingSettings {
        unit: typed.drawing_unit,
        scale: typed.scale.map(|scale| bounds::SCALE.hold(scale)).transpose()?,
        fit_width_mm: mm.length(&bounds::FIT_WIDTH, typed.fit_width)?,
        layers: typed.layers.clone(),
        join_mm: mm.length(&bounds::JOIN, typed.join)?,
        size_limit: typed.size_limit.map(|times| bounds::SIZE_LIMIT.hold(times)).transpose()?,
    })
}

fn spans_decimals(tolerance_mm: f64, machine: &Machine) -> Result<(), Error> {
    let least = LEAST_TOLERANCE_STEPS * machine.last_place();
    if tolerance_mm >= least {
        return Ok(());
    }
    let what = format!(
        "tolerance is {tolerance_mm} mm, and the decimals that {} writes need {least:.4} mm at least",
        machine.name
    );
    Err(Error::new(Kind::Refused, what).remedy("ask for a wider --tolerance"))
}

/// The cutter: typed as a diameter or a name, or the profile's first.
fn cutter(typed: Option<&str>, machine: &Machine, mm: Units) -> Result<ChosenCutter, Error> {
    let known_as = |entry: &Cutter| ChosenCutter { diameter_mm: entry.diameter, entry: Some(entry.clone()) };
    let known = || machine.cutters.iter().map(|c| c.name.as_str()).collect::<Vec<_>>().join(", ");
    let Some(typed) = typed else {
        let first = machine.cutters.first().ok_or_else(|| {
            let what = format!("no cutter is given, and the profile {} has none", machine.name);
            Error::new(Kind::Settings, what).remedy("give its diameter with --cutter, such as --cutter 6mm")
        })?;
        return Ok(known_as(first));
    };
    if let Some(cutter) = machine.cutter(typed) {
        return Ok(known_as(cutter));
    }
    let length: Length = typed.parse().map_err(|_| {
        let what =
            format!("there is no cutter `{typed}` in the profile {}, and it is no diameter", machine.name);
        Error::new(Kind::Settings, what).remedy(format!("its cutters are: {}; or write 6mm, 1/4in", known()))
    })?;
    let diameter_mm = mm.length(&bounds::CUTTER, Some(length))?.unwrap_or_default();
    // A diameter that one cutter of the profile has is that cutter, with its flutes and its speed.
    let same = |entry: &&Cutter| (entry.diameter - diameter_mm).abs() <= 4.0 * f64::EPSILON * diameter_mm;
    let mut known = machine.cutters.iter().filter(same);
    Ok(match (known.next(), known.next()) {
        (Some(one), None) => known_as(one),
        _ => ChosenCutter { diameter_mm, entry: None },
    })
}
