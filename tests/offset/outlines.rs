//! Closed outlines as drawn and as fitted, four cutters, both sides, against the buffer of the `geo` crate, which shares no code with
//! ours: it sweeps polygons on an integer grid.

use std::fs;
use std::path::Path;

use geo::algorithm::buffer::{BufferStyle, LineJoin};
use geo::{Area, Buffer as _, CoordsIter, MultiPolygon};
use kurbo::{Point, Vec2};
use proptest::prelude::*;
use rayon::prelude::*;
use ribband::fit::{Pace, fit};
use ribband::geom::{ArcSpline, Span, SpanIndex};
use ribband::num::Tolerance;
use ribband::offset::{Corners, Side, compensate};
use ribband::read::{Scale, Unit, read};
use rstar::RTree;

const CUTTERS: [f64; 4] = [1.0, 3.175, 6.0, 12.0];

/// The names of the closed outlines of at most so many vertices, with the tolerance to fit them within.
fn closed_outlines(largest: u64) -> Vec<(String, Tolerance)> {
    let manifest = fs::read_to_string(outline("manifest.json")).expect("the manifest is there");
    let manifest: serde_json::Value = serde_json::from_str(&manifest).expect("the manifest is JSON");
    let entries = manifest["outlines"].as_array().expect("a list of outlines");
    let closed = entries.iter().filter(|entry| entry["closed"] == true);
    let small = closed.filter(|entry| entry["vertices"].as_u64().is_some_and(|count| count <= largest));
    let tolerance = |entry: &serde_json::Value| entry["tolerance_mm"].as_f64().and_then(Tolerance::new);
    let row = |entry: &serde_json::Value| {
        let name = entry["csv"].as_str().expect("a file name").to_string();
        (name, tolerance(entry).expect("a tolerance"))
    };
    small.map(row).collect()
}

fn outline(name: &str) -> std::path::PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines").join(name)
}

/// The closed contours of an outline.
fn loops(name: &str) -> Vec<ArcSpline> {
    let bytes = fs::read(outline(name)).expect("the outline is there");
    let scale = Scale { drawing_unit: Some(Unit::Mm), ..Scale::default() };
    let sketch = read(name, &bytes, &scale).expect("an outline reads");
    sketch.contours.into_iter().map(|c| c.path).filter(|path| path.closed).collect()
}

/// How far a chord may be from its arc in the polygons that the reference is given, in mm.
const SAGITTA: f64 = 5e-5;

/// The starts of the chords that stand for a span.
fn chords(span: &Span) -> Vec<(f64, f64)> {
    let longest = if span.is_line() { f64::INFINITY } else { (8.0 * span.radius() * SAGITTA).sqrt() };
    let count = (span.length() / longest).ceil().max(1.0);
    (0..count as usize).map(|k| span.at(k as f64 / count)).map(|p| (p.x, p.y)).collect()
}

/// The region that polygons bound by even and odd.
fn region(loops: &[ArcSpline]) -> MultiPolygon {
    use geo::BooleanOps;
    let polygon = |chain: &ArcSpline| {
        let ring = chain.spans().flat_map(|span| chords(&span)).collect();
        MultiPolygon::new(vec![geo::Polygon::new(ring, Vec::new())])
    };
    loops.iter().map(polygon).fold(MultiPolygon::new(Vec::new()), |a, b| a.xor(&b))
}

/// The widest angle between two points of the reference's arcs: twice the least step it takes, 0.01 pi.
const STEP: f64 = 0.02 * std::f64::consts::PI;

/// The reference's buffer.
struct Buffer {
    polygons: MultiPolygon,
    /// The corners of what it is a buffer of.
    corners: RTree<[f64; 2]>,
    distance: f64,
}

impl Buffer {
    fn new(region: &MultiPolygon, distance: f64) -> Self {
        let style = BufferStyle::new(distance).line_join(LineJoin::Round(0.0));
        let corners = region.coords_iter().map(|c| [c.x, c.y]).collect();
        Self { polygons: region.buffer_with_style(style), corners: RTree::bulk_load(corners), distance }
    }

    fn rings(&self) -> usize {
        self.polygons.iter().map(|p| 1 + p.interiors().len()).sum()
    }

    fn edges(&self) -> impl Iterator<Item = geo::Line> + '_ {
        self.polygons
            .iter()
            .flat_map(|p| p.interiors().iter().chain([p.exterior()]))
            .flat_map(|ring| ring.lines())
    }

    fn length(&self) -> f64 {
        self.edges().map(|edge| edge.dx().hypot(edge.dy())).sum()
    }

    /// Its area, with what the chords cut off that stand for arcs about corners.
    fn area(&self) -> f64 {
        self.polygons.unsigned_area()
            + self.distance.signum() * self.edges().map(|edge| self.cut_off(edge)).sum::<f64>()
    }

    /// The area between an edge and its arc about a corner; none for an edge that has both ends at the distance from no
    /// corner.
    fn cut_off(&self, edge: geo::Line) -> f64 {
        let middle = [f64::midpoint(edge.start.x, edge.end.x), f64::midpoint(edge.start.y, edge.end.y)];
        let Some(corner) = self.corners.nearest_neighbor_iter(middle).next() else { return 0.0 };
        let radius = self.distance.abs();
        let on_arc = |c: geo::Coord| ((c.x - corner[0]).hypot(c.y - corner[1]) - radius).abs() < 1e-5;
        let angle = 2.0 * (edge.dx().hypot(edge.dy()) / 2.0 / radius).min(1.0).asin();
        if on_arc(edge.start) && on_arc(edge.end) {
            radius * radius * (angle - angle.sin()) / 2.0
        } else {
            0.0
        }
    }
}

/// One comparison: what is wrong, if anything. Areas must agree within 1e-4, and what flattening may cost along the
/// buffer's border. Where the reference's own count of rings changes within the sagitta of its arcs, any count between
/// will do.
fn compare(name: &str, loops: &[ArcSpline], cutter: f64, side: Side) -> Option<String> {
    let radius = cutter / 2.0;
    let at = format!("{name}, cutter {cutter}, {side:?}");
    let ours = match compensate(loops, radius, side, Corners::Round) {
        Ok(ours) => ours,
        Err(error) => return Some(format!("{at}: {error}")),
    };
    let sign = if side == Side::Outside { 1.0 } else { -1.0 };
    let area = -sign * ours.lines.iter().map(|line| line.path.area()).sum::<f64>();
    let region = region(loops);
    let reference = Buffer::new(&region, sign * radius);
    let expected = reference.area();
    if (area - expected).abs() > 1e-4 * expected + SAGITTA * reference.length() {
        return Some(format!("{at}: area {area:.4} for {expected:.4}"));
    }
    let (count, rings) = (ours.lines.len(), reference.rings());
    let sagitta = radius * STEP * STEP / 8.0 + SAGITTA;
    let agrees = count == rings || {
        let [fewer, more] = [-sagitta, sagitta].map(|d| Buffer::new(&region, sign * (radius + d)).rings());
        count >= rings.min(fewer).min(more) && count <= rings.max(fewer).max(more)
    };
    (!agrees).then(|| format!("{at}: {count} lines for {rings}"))
}

/// How a drawn loop becomes the one that is followed.
type Prepare = fn(ArcSpline, Tolerance) -> ArcSpline;

fn as_drawn(path: ArcSpline, _: Tolerance) -> ArcSpline {
    path
}

fn as_fitted(path: ArcSpline, tolerance: Tolerance) -> ArcSpline {
    fit(&path, tolerance, Pace::Thorough).path
}

/// All eight ways of cutting.
fn ways() -> Vec<(f64, Side)> {
    CUTTERS.iter().flat_map(|&cutter| [Side::Inside, Side::Outside].map(|side| (cutter, side))).collect()
}

/// Compares the outlines of at most so many vertices, each cut in every `nth` way, another one first each time; tells how
/// many were compared.
#[track_caller]
fn assert_agree(largest: u64, nth: usize, prepare: Prepare) -> usize {
    let names: Vec<_> = closed_outlines(largest).into_iter().enumerate().collect();
    let compare = |(k, (name, tolerance)): &(usize, (String, Tolerance))| {
        let loops: Vec<ArcSpline> = loops(name).into_iter().map(|path| prepare(path, *tolerance)).collect();
        let ways = ways().into_iter().skip(k % nth).step_by(nth);
        ways.map(|(cutter, side)| compare(name, &loops, cutter, side)).collect::<Vec<_>>()
    };
    let compared: Vec<Option<String>> = names.par_iter().flat_map_iter(compare).collect();
    let failures: Vec<&String> = compared.iter().flatten().collect();
    assert!(compared.len() > 50, "the comparison is not empty");
    assert!(failures.is_empty(), "{failures:#?}");
    compared.len()
}

#[test]
fn outlines_as_drawn_agree_with_an_independent_buffer() {
    assert_agree(1000, 4, as_drawn);
}

#[test]
fn outlines_as_fitted_agree_with_an_independent_buffer() {
    assert_agree(600, 8, as_fitted);
}

#[test]
#[ignore = "takes many minutes of both cores"]
fn every_outline_as_drawn_agrees_with_an_independent_buffer() {
    println!("{} agree", assert_agree(u64::MAX, 1, as_drawn));
}

#[test]
#[ignore = "takes many minutes of both cores"]
fn every_outline_as_fitted_agrees_with_an_independent_buffer() {
    println!("{} agree", assert_agree(u64::MAX, 1, as_fitted));
}

/// A nearest span that is not the nearest would let the cutter into the part.
#[test]
fn the_index_finds_the_nearest_span_of_real_outlines() {
    for name in
        ["analytic/limacon-a-s05-n05.csv", "analytic/gear-a-s05-q01.csv", "glyph/dejavu-sans-u0038.csv"]
    {
        let spans: Vec<_> = loops(name).iter().flat_map(|l| l.spans().collect::<Vec<_>>()).collect();
        let index = SpanIndex::new(spans.iter().copied());
        let boxes = spans.iter().map(|span| span.bbox()).reduce(|a, b| a.union(b)).expect("there are spans");
        for k in 0..2500 {
            let share = |k: i32| f64::from(k) / 49.0;
            let at = Point::new(
                boxes.x0 + boxes.width() * share(k % 50),
                boxes.y0 + boxes.height() * share(k / 50),
            );
            let (_, nearest) = index.nearest(at).expect("there are spans");
            let least = spans.iter().map(|span| span.nearest(at).distance).fold(f64::INFINITY, f64::min);
            assert!(nearest.nearest(at).distance <= least, "{name} at {at}");
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(96))]

    /// Jagged stars of all sorts, spikes and slits included.
    #[test]
    fn random_stars_agree_with_an_independent_buffer(
        radii in prop::collection::vec(2.0..60.0_f64, 3..48), cutter in 0.2..20.0_f64, inside in any::<bool>(),
    ) {
        let step = std::f64::consts::TAU / radii.len() as f64;
        let corner = |(k, r): (usize, &f64)| Point::new(70.0, 70.0) + Vec2::from_angle(k as f64 * step) * *r;
        let star = ArcSpline::polyline(radii.iter().enumerate().map(corner), true);
        let side = if inside { Side::Inside } else { Side::Outside };
        let wrong = compare("star", &[star], cutter, side);
        prop_assert!(wrong.is_none(), "{}", wrong.unwrap_or_default());
    }
}
