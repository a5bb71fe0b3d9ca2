//! Closed outlines cut beside the line with four cutters on both sides: the written text, read by another reader and
//! sampled, against what must stay and what must be reached.

use std::path::Path;

use kurbo::{Point, Vec2};
use rayon::prelude::*;
use rstar::primitives::Line;
use rstar::{AABB, PointDistance, RTree};
use serde_json::Value;

use crate::bad::Shop;
use crate::formats::Contours;
use crate::reading::cuts;

const CUTTERS: [f64; 4] = [1.0, 3.175, 6.0, 12.0];

/// How finely arcs are sampled, in mm of chord error.
const SAGITTA: f64 = 1e-4;

/// What rounding and the grid of 2^-20 mm of coordinates may take from a distance, in mm.
const ROUNDING: f64 = 2e-6;

/// Straight pieces, asked how far they are; `rstar` answers, which measures with its own lines.
struct Pieces(RTree<Line<[f64; 2]>>);

impl Pieces {
    fn new<'a>(chains: impl IntoIterator<Item = &'a [Point]>) -> Self {
        let piece = |ends: &[Point]| Line::new([ends[0].x, ends[0].y], [ends[1].x, ends[1].y]);
        Self(RTree::bulk_load(chains.into_iter().flat_map(|chain| chain.windows(2).map(piece)).collect()))
    }

    fn distance(&self, p: Point) -> f64 {
        let p = [p.x, p.y];
        let nearest = self.0.nearest_neighbor_iter(p).next();
        nearest.map_or(f64::INFINITY, |line| line.distance_2(&p).sqrt())
    }

    /// True where a level ray to the right crosses an odd number of pieces.
    fn contains(&self, p: Point) -> bool {
        let ray = AABB::from_corners([p.x, p.y], [1e6, p.y]);
        let crosses = |line: &&Line<[f64; 2]>| {
            let ([ax, ay], [bx, by]) = (line.from, line.to);
            (ay > p.y) != (by > p.y) && p.x < ax + (p.y - ay) / (by - ay) * (bx - ax)
        };
        self.0.locate_in_envelope_intersecting(ray).filter(crosses).count() % 2 == 1
    }
}

/// A closed drawing with the question of which side of it is cut.
struct Drawn {
    rings: Vec<Vec<Point>>,
    border: Pieces,
    inside: bool,
    radius: f64,
    tolerance: f64,
}

/// `points` and places between them, no further apart than `step`.
fn sampled(points: &[Point], step: f64) -> impl Iterator<Item = Point> + '_ {
    points.windows(2).flat_map(move |ends| {
        let count = (ends[0].distance(ends[1]) / step).ceil().max(1.0);
        (0..=count as usize).map(move |k| ends[0].lerp(ends[1], k as f64 / count))
    })
}

impl Drawn {
    fn new(contours: &Contours, inside: bool, cutter: f64, tolerance: f64) -> Self {
        let ring = |(points, _): &(Vec<Point>, bool)| points.iter().chain(points.first()).copied().collect();
        let rings: Vec<Vec<Point>> = contours.0.iter().map(ring).collect();
        let border = Pieces::new(rings.iter().map(Vec::as_slice));
        Self { rings, border, inside, radius: cutter / 2.0, tolerance }
    }

    fn is_free(&self, p: Point) -> bool {
        self.border.contains(p) == self.inside
    }

    /// Clearance: the places of the cutter's centre that are on the wrong side or closer than radius less tolerance.
    fn too_close(&self, sunk: &[Vec<Point>]) -> Option<String> {
        let least = self.radius - self.tolerance - ROUNDING;
        let wrong = |p: &Point| !(self.is_free(*p) && self.border.distance(*p) >= least);
        let place = sunk.iter().flat_map(|m| sampled(m, self.tolerance / 2.0)).find(wrong)?;
        Some(format!("at {place} the cutter is {} from the drawing", self.border.distance(place)))
    }

    /// True when a disc of radius plus tolerance, on the cutter's side, touches the drawing at `p` in one of the
    /// directions and crosses none of it.
    fn is_reachable(&self, p: Point, mut directions: impl Iterator<Item = Vec2>) -> bool {
        let reach = self.radius + self.tolerance;
        directions.any(|direction| {
            let centre = p + direction * reach;
            self.border.distance(centre) >= reach - 1e-9 && self.is_free(centre)
        })
    }

    /// Coverage: a place that is reachable and further than radius plus tolerance from `path`.
    fn not_reached(&self, path: &Pieces) -> Option<String> {
        let most = self.radius + self.tolerance + SAGITTA + ROUNDING;
        let far = |p: &Point| path.distance(*p) > most;
        let told = |p: Point| format!("{p} can be reached and is {} from the path", path.distance(p));
        for ring in &self.rings {
            for ends in ring.windows(2) {
                let along = (ends[1] - ends[0]).normalize();
                let aside = [Vec2::new(-along.y, along.x), Vec2::new(along.y, -along.x)];
                let mut places = sampled(ends, self.tolerance / 2.0).filter(far);
                if let Some(p) = places.find(|p| self.is_reachable(*p, aside.into_iter())) {
                    return Some(told(p));
                }
            }
            // At a corner a disc may touch in any direction.
            let round = || (0..32).map(|k| Vec2::from_angle(std::f64::consts::TAU * f64::from(k) / 32.0));
            if let Some(p) = ring.iter().copied().filter(far).find(|p| self.is_reachable(*p, round())) {
                return Some(told(p));
            }
        }
        None
    }
}

/// One outline of the manifest.
struct Outline {
    id: String,
    contours: Contours,
    vertices: usize,
    tolerance: f64,
}

/// The outlines of which every contour is closed.
fn closed_outlines() -> Vec<Outline> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("fixtures/outlines");
    let text = std::fs::read_to_string(folder.join("manifest.json")).expect("the manifest");
    let manifest: Value = serde_json::from_str(&text).expect("JSON");
    let outline = |entry: &Value| {
        let csv = folder.join(entry["csv"].as_str().expect("a csv"));
        let contours = Contours::from_csv(&std::fs::read_to_string(csv).expect("the outline"));
        Outline {
            id: entry["id"].as_str().expect("an id").into(),
            vertices: contours.0.iter().map(|contour| contour.0.len()).sum(),
            contours,
            tolerance: entry["tolerance_mm"].as_f64().expect("a tolerance"),
        }
    };
    let all = manifest["outlines"].as_array().expect("a list").iter().map(outline);
    all.filter(|outline| outline.contours.0.iter().all(|contour| contour.1)).collect()
}

/// What came of one job.
enum Outcome {
    /// A program that does what it must.
    Cut,
    /// No program, as no cutter of that size fits anywhere.
    TooLarge,
    /// No program, as the tolerance is as large as the cutter's radius.
    NoSide,
    Wrong(String),
}

impl Outline {
    /// Cuts the outline beside the line and judges the program that comes of it.
    fn cut(&self, cutter: f64, inside: bool) -> Outcome {
        let drawn = Drawn::new(&self.contours, inside, cutter, self.tolerance);
        let shop = Shop::new();
        shop.put("outline.dxf", self.layered());
        let [even, odd] = if inside { ["inside", "outside"] } else { ["outside", "inside"] };
        let layers = format!("[layer.even]\nside = \"{even}\"\n[layer.odd]\nside = \"{odd}\"\n");
        shop.put("sides.toml", layers);
        let (cutter, tolerance) = (format!("{cutter}mm"), format!("{}mm", self.tolerance));
        let typed = ["post", "outline.dxf", "--depth", "3mm", "--origin", "drawing", "--job", "sides.toml"];
        let more = ["-o", "out.nc", "--quiet", "--cutter", &cutter, "--tolerance", &tolerance];
        let ended = shop.run(&[&typed[..], &more[..]].concat());
        match ended.status {
            0 => {
                let cuts = cuts(&shop.text("out.nc"), SAGITTA);
                let path = Pieces::new(cuts.chains.iter().map(Vec::as_slice));
                let wrong = drawn.too_close(&cuts.sunk).or_else(|| drawn.not_reached(&path));
                wrong.map_or(Outcome::Cut, Outcome::Wrong)
            }
            1 if ended.err.contains("the cutter is too large for every contour") => {
                drawn.not_reached(&Pieces::new([])).map_or(Outcome::TooLarge, Outcome::Wrong)
            }
            1 if ended.err.contains("has no side") && drawn.tolerance >= drawn.radius => Outcome::NoSide,
            _ => Outcome::Wrong(ended.err),
        }
    }

    /// The drawing with every contour on the layer "even" or "odd", by how many others it lies in.
    fn layered(&self) -> String {
        let holds = |ring: &Vec<Point>, p: Point| {
            let closed: Vec<Point> = ring.iter().chain(ring.first()).copied().collect();
            Pieces::new([closed.as_slice()]).contains(p)
        };
        let rings = || self.contours.0.iter().map(|contour| &contour.0);
        let depth = |i: usize, p: Point| rings().enumerate().filter(|&(j, r)| j != i && holds(r, p)).count();
        let layer = |i: usize, ring: &Vec<Point>| ["even", "odd"][depth(i, ring[0].midpoint(ring[1])) % 2];
        self.contours.dxf_on(rings().enumerate().map(|(i, ring)| layer(i, ring)))
    }
}

/// How all jobs ended, none of them wrong.
#[derive(Debug)]
struct Tally {
    cut: usize,
    too_large: usize,
    no_side: usize,
}

/// Cuts and judges them all; fails with the list of those that end wrong.
#[track_caller]
fn assert_all(jobs: &[(&Outline, f64, bool)]) -> Tally {
    let outcomes: Vec<Outcome> =
        jobs.par_iter().map(|(outline, cutter, inside)| outline.cut(*cutter, *inside)).collect();
    let mut tally = Tally { cut: 0, too_large: 0, no_side: 0 };
    let mut wrong = Vec::new();
    for ((outline, cutter, inside), outcome) in jobs.iter().zip(outcomes) {
        let side = if *inside { "inside" } else { "outside" };
        match outcome {
            Outcome::Cut => tally.cut += 1,
            Outcome::TooLarge => tally.too_large += 1,
            Outcome::NoSide => tally.no_side += 1,
            Outcome::Wrong(why) => wrong.push(format!("{}, {cutter} mm, {side}: {why}", outline.id)),
        }
    }
    assert!(wrong.is_empty(), "{} of {}:\n{}", wrong.len(), jobs.len(), wrong.join("\n"));
    tally
}

/// All eight ways of cutting.
fn ways() -> impl Iterator<Item = (f64, bool)> + Clone {
    CUTTERS.into_iter().flat_map(|cutter| [(cutter, false), (cutter, true)])
}

#[test]
fn outlines_cut_beside_the_line_keep_clear_and_are_reached() {
    let outlines = closed_outlines();
    let small = outlines.iter().filter(|outline| outline.vertices <= 700);
    let jobs: Vec<_> =
        small.zip(ways().cycle()).map(|(outline, (cutter, inside))| (outline, cutter, inside)).collect();
    assert!(jobs.len() > 50, "the sample is not empty: {}", jobs.len());
    let tally = assert_all(&jobs);
    println!("{tally:?}");
    assert!(tally.cut > jobs.len() / 2, "{tally:?}");
}

#[test]
#[ignore = "takes many minutes of both cores"]
fn every_closed_outline_beside_the_line_keeps_clear_and_is_reached() {
    let outlines = closed_outlines();
    let jobs: Vec<_> = outlines
        .iter()
        .flat_map(|outline| ways().map(move |(cutter, inside)| (outline, cutter, inside)))
        .collect();
    let tally = assert_all(&jobs);
    println!("{tally:?}");
    assert!(tally.cut > jobs.len() / 2, "{tally:?}");
}
