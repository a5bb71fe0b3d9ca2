//! Noise, pixel steps and corners are found where they are, and nowhere else.

use kurbo::{Point, Vec2};
use ribband::clean::{CornerPlace, Texture, corners, roughness};
use ribband::geom::ArcSpline;

use super::common::{Dice, Outline, at, fixture, outlines, ring};

/// The computed outlines without any corner.
const SMOOTH: [&str; 10] = [
    "arcchain",
    "circle",
    "clothoid",
    "ellipse",
    "involute",
    "limacon",
    "logspiral",
    "roundrect",
    "sine",
    "superellipse",
];
/// The computed outlines with corners, and the largest noise under which their arms are long enough for the rule.
const CORNERED: [(&str, f64); 3] = [("star", 0.2), ("keyhole", 0.1), ("gear", 0.05)];

fn outline(all: &[Outline], id: &str) -> ArcSpline {
    let found = all.iter().find(|o| o.id == id).unwrap_or_else(|| panic!("{id} is not in the manifest"));
    found.paths[0].clone()
}

fn with_noise(path: &ArcSpline, sigma: f64, seed: u64) -> ArcSpline {
    let mut dice = Dice(seed);
    let mut moved = |p: Point| p + Vec2::new(dice.normal(), dice.normal()) * sigma;
    ArcSpline::polyline(path.vertices.iter().map(|v| moved(v.at)).map(|p| at(p.x, p.y)), path.closed)
}

fn assert_sigma(name: &str, path: &ArcSpline, sigma: f64) {
    let found = roughness(path);
    assert_eq!(found.texture, Texture::Noise, "{name}, noise {sigma}");
    let ratio = found.sigma_mm / sigma;
    assert!((0.7..1.3).contains(&ratio), "{name}: noise {sigma}, found {}", found.sigma_mm);
}

#[test]
fn noise_of_the_fixtures_is_estimated_within_30_per_cent() {
    let all = outlines();
    let noisy = all.iter().filter_map(|o| Some((o, o.figures["noise_sigma_mm"].as_f64()?)));
    let smooth: Vec<_> =
        noisy.filter(|(o, _)| !CORNERED.iter().any(|(name, _)| o.id.contains(name))).collect();
    assert_eq!(smooth.len(), 23);
    for (outline, sigma) in smooth {
        assert_sigma(&outline.id, &outline.paths[0], sigma);
    }
}

#[test]
fn seeded_noise_is_estimated_within_30_per_cent() {
    let all = outlines();
    for name in SMOOTH {
        let clean = outline(&all, &format!("analytic/{name}-a-s05-clean"));
        for (seed, sigma) in (1..).zip([0.02, 0.03, 0.05, 0.08, 0.12, 0.2]) {
            for again in 0..3 {
                assert_sigma(name, &with_noise(&clean, sigma, seed + 100 * again), sigma);
            }
        }
    }
}

#[test]
fn curves_and_coasts_without_noise_have_none() {
    for outline in outlines().iter().filter(|o| o.id.ends_with("-clean") || o.id.starts_with("coast")) {
        let found = roughness(&outline.paths[0]);
        assert!(found.sigma_mm < 1e-6, "{}: {found:?}", outline.id);
        assert!(found.support().mm < 1e-6, "{}: {:?}", outline.id, found.support());
    }
}

#[test]
fn pixels_of_staircases_are_found_within_10_per_cent() {
    let all = outlines();
    let stairs = all.iter().filter(|o| ["-stair", "-raster", "-multi"].iter().any(|end| o.id.ends_with(end)));
    let chains =
        all.iter().filter(|o| o.id.starts_with("traced/cell") && o.id.len() == "traced/cell354".len());
    let all: Vec<_> = stairs.map(|o| (o, false)).chain(chains.map(|o| (o, true))).collect();
    assert_eq!(all.len(), 29 + 3);
    for (outline, along_diagonals) in all {
        let pixel = outline.figures["pixel_mm"].as_f64().unwrap();
        let Texture::Steps { pixel_mm, diagonal } = roughness(&outline.paths[0]).texture else {
            panic!("{}: no steps found", outline.id)
        };
        assert!((pixel_mm / pixel - 1.0).abs() < 0.1, "{}: {pixel_mm} for {pixel}", outline.id);
        assert_eq!(diagonal, along_diagonals, "{}", outline.id);
    }
}

#[test]
fn a_staircase_is_found_at_any_angle_and_size() {
    let stairs = outline(&outlines(), "traced/dolphin-stair");
    for (degrees, scale) in [(7.0, 1.0), (33.0, 0.1), (45.0, 3.0), (80.0, 1.0)] {
        let turn = kurbo::Affine::rotate(f64::to_radians(degrees)) * kurbo::Affine::scale(scale);
        let Texture::Steps { pixel_mm, diagonal } = roughness(&stairs.transformed(turn)).texture else {
            panic!("turned by {degrees}: no steps found")
        };
        assert!((pixel_mm / (0.5128 * scale) - 1.0).abs() < 0.1, "turned by {degrees}: {pixel_mm}");
        assert!(!diagonal, "turned by {degrees}");
    }
}

#[test]
fn stepped_parts_that_are_meant_are_no_staircase() {
    // A comb of fifteen square teeth, each a hundredth of its length and more.
    let teeth = (0..15).flat_map(|k| {
        let x = 10.0 * f64::from(k);
        [(x, 0.0), (x + 5.0, 0.0), (x + 5.0, 5.0), (x + 10.0, 5.0)]
    });
    let comb: Vec<_> = teeth.chain([(150.0, 30.0), (0.0, 30.0)]).collect();
    assert_eq!(roughness(&ring(&comb)).support().mm, 0.0);
    // The edges of a plain plate, sampled every half millimetre.
    let side = |k: u32| f64::from(k) * 0.5;
    let plate: Vec<_> = (0..200)
        .map(|k| (side(k), 0.0))
        .chain((0..100).map(|k| (100.0, side(k))))
        .chain((0..200).map(|k| (100.0 - side(k), 50.0)))
        .chain((0..100).map(|k| (0.0, 50.0 - side(k))))
        .collect();
    assert_eq!(roughness(&ring(&plate)).support().mm, 0.0);
    assert_eq!(corners(&ring(&plate), &roughness(&ring(&plate))).len(), 4);
}

/// The true corners of a computed outline with their turns in radians.
fn true_corners(name: &str) -> Vec<(Point, f64)> {
    let truth: serde_json::Value =
        serde_json::from_str(&fixture(&format!("analytic/{name}-a.truth.json"))).unwrap();
    let number = |v: &serde_json::Value| v.as_f64().unwrap();
    let corner = |c: &serde_json::Value| {
        (Point::new(number(&c["xy"][0]), number(&c["xy"][1])), number(&c["turn_deg"]).to_radians())
    };
    truth["corners"].as_array().unwrap().iter().map(corner).collect()
}

fn assert_corners(what: &str, found: &[CornerPlace], truth: &[(Point, f64)], reach: f64) {
    for (place, turn) in truth {
        let near: Vec<_> = found.iter().filter(|c| c.at.distance(*place) < reach).collect();
        assert_eq!(near.len(), 1, "{what}: at {place}");
        assert!((near[0].turn.abs() - turn).abs() < 0.5, "{what}: turn {} for {turn}", near[0].turn);
    }
    assert_eq!(found.len(), truth.len(), "{what}: {found:?}");
}

#[test]
fn all_true_corners_of_the_fixtures_and_no_others() {
    let all = outlines();
    for name in SMOOTH.iter().copied().chain(CORNERED.map(|(name, _)| name)) {
        let truth = true_corners(name);
        for variant in ["s05-clean", "s20-clean", "s05-n02", "s05-n05", "s05-q01"] {
            let id = format!("analytic/{name}-a-{variant}");
            let path = outline(&all, &id);
            let reach = if variant.starts_with("s20") { 2.0 } else { 1.0 };
            assert_corners(&id, &corners(&path, &roughness(&path)), &truth, reach);
        }
    }
}

#[test]
fn corners_are_found_under_seeded_noise() {
    let all = outlines();
    for (name, most) in CORNERED {
        let clean = outline(&all, &format!("analytic/{name}-a-s05-clean"));
        for sigma in [0.02, 0.05, 0.1, 0.2].into_iter().filter(|&s| s <= most) {
            for seed in 0..20 {
                let path = with_noise(&clean, sigma, seed);
                let found = corners(&path, &roughness(&path));
                assert_corners(
                    &format!("{name}, {sigma}, {seed}"),
                    &found,
                    &true_corners(name),
                    1.0 + 10.0 * sigma,
                );
            }
        }
    }
}

#[test]
fn corners_of_drawn_shapes_are_their_breaks_of_tangent() {
    let square = ring(&[(0.0, 0.0), (10.0, 0.0), (10.0, 10.0), (0.0, 10.0)]);
    let found = corners(&square, &roughness(&square));
    assert_eq!(found.len(), 4);
    assert!(found.iter().all(|c| (c.turn - std::f64::consts::FRAC_PI_2).abs() < 1e-12));
    // A slot: two lines, two half circles, no corner.
    let mut slot = ring(&[(0.0, 0.0), (10.0, 0.0), (10.0, 4.0), (0.0, 4.0)]);
    slot.vertices[1].bulge = 1.0;
    slot.vertices[3].bulge = 1.0;
    assert_eq!(corners(&slot, &roughness(&slot)), []);
}
