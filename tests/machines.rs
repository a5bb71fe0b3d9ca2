//! Machine profiles: the built-in ones hold together, and a wrong one says what is wrong.

use ribband::machine::{self, ArcStyle, Machine, Unit};

#[test]
fn every_built_in_profile_round_trips() {
    for name in machine::names() {
        let machine = Machine::named(name).expect("built in");
        assert_eq!(machine.name, name, "the profile carries its own name");
        let text = machine.to_toml().expect("writes");
        assert_eq!(Machine::from_toml(&text).expect("reads back"), machine, "{text}");
    }
}

#[test]
fn the_default_and_the_old_controller_have_their_fixed_numbers() {
    let shop = Machine::named("shop-router").expect("built in");
    assert_eq!((shop.travel.x, shop.travel.y, shop.travel.z), (1300.0, 1300.0, 150.0));
    assert_eq!((shop.unit, shop.program.decimals), (Unit::Mm, 3));
    let old = Machine::named("old-controller").expect("built in");
    assert_eq!((old.travel.x, old.travel.y, old.travel.z), (600.0, 600.0, 80.0));
    assert_eq!((old.controller.blocks_per_second, old.controller.queue), (50.0, 8));
    assert_eq!((old.acceleration.x, old.acceleration.y, old.acceleration.z), (200.0, 200.0, 200.0));
    assert_eq!((old.feed.x, old.feed.y, old.feed.z), (3000.0, 3000.0, 3000.0));
    assert_eq!((old.arcs.style, old.arcs.whole_circles), (ArcStyle::Radius, false));
    assert_eq!((old.program.decimals, old.controller.memory_bytes), (3, Some(32 * 1024)));
}

#[test]
fn an_unknown_name_is_answered_with_the_nearest() {
    let error = Machine::named("shop-rooter").expect_err("not built in");
    assert_eq!(error.exit_status(), 2);
    assert!(error.remedy.contains("did you mean shop-router?"), "{error}");
}

/// The default profile with one line changed, and a word for what is wrong with it.
const BAD: [(&str, &str); 58] = [
    ("name = \"shop-router\"", ""),
    ("name = \"shop-router\"", "name = \"shop router\""),
    ("name = \"shop-router\"", "nam = \"shop-router\""),
    ("name = \"shop-router\"", "name = 5"),
    ("name = \"shop-router\"", "name = \"shop-router"),
    ("unit = \"mm\"", "unit = \"cm\""),
    ("unit = \"mm\"", "unit = \"in\""),
    ("build = \"stiff\"", "build = \"rigid\""),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nx = 0"),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nx = 1e9"),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nx = nan"),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nx = inf"),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nx = \"wide\""),
    ("[travel] # mm\nx = 1300", "[travel] # mm\nw = 1300"),
    ("[travel] # mm", "[travels] # mm"),
    ("[feed] # mm/min\nx = 8000", "[feed] # mm/min\nx = -8000"),
    ("[rapid] # mm/min\nx = 15000", "[rapid] # mm/min\nx = 1500000"),
    ("[acceleration] # mm/s2\nx = 800", "[acceleration] # mm/s2\nx = 0"),
    ("junction = 0.02", "junction = 0"),
    ("blocks_per_second = 500", "blocks_per_second = 0.5"),
    ("blocks_per_second = 500", "blocks_per_second = true"),
    ("queue = 64", "queue = 0"),
    ("queue = 64", "queue = -1"),
    ("queue = 64", "queue = 64\nmemory_bytes = 100"),
    ("decimals = 3", "decimals = 2"),
    ("decimals = 3", "decimals = 9"),
    ("longest_line = 256", "longest_line = 40"),
    ("longest_line = 256", "longest_line = 1000"),
    ("spaces = true", "spaces = \"yes\""),
    ("comments = \"brackets\"", "comments = \"(\""),
    ("line_numbers = 0", "line_numbers = 100000"),
    ("line_ending = \"lf\"", "line_ending = \"cr\""),
    ("\"G17\", \"G21\"", "\"G17\", \"G20\""),
    ("\"G17\", \"G21\"", "\"G18\", \"G21\""),
    ("end = [\"M30\"]", "end = [\"M5\"]"),
    ("end = [\"M30\"]", "end = [\"stop\", \"M30\"]"),
    ("end = [\"M30\"]", "end = \"M30\""),
    ("end = [\"M30\"]", "end = [\"M30\"]\nstart = [\"(hello\"]"),
    ("end = [\"M30\"]", "end = [\"M30\"]\nspline = \"G6\""),
    ("dwell = \"seconds\"", "dwell = \"minutes\""),
    ("ending = \".nc\"", "ending = \"nc\""),
    ("ending = \".nc\"", "ending = \".n/c\""),
    ("longest_name = 64", "longest_name = 0"),
    ("style = \"centre-incremental\"", "style = \"radius\"\nmode_word = \"\""),
    ("whole_circles = false\nhelices = true", "whole_circles = true\nhelices = \"maybe\""),
    ("style = \"centre-incremental\"\nwhole_circles = false", "style = \"radius\"\nwhole_circles = true"),
    ("style = \"centre-incremental\"", "style = \"none\""),
    ("smallest = 0.05", "smallest = 20"),
    ("largest = 10000", "largest = 1"),
    ("end_radii = 0.002", "end_radii = 0.5"),
    ("word = \"G64\"\n", ""),
    ("blending = 0.05", "blending = 5"),
    ("by = \"start-height\"", "by = \"start-height\"\nmachine_z = 0"),
    ("by = \"start-height\"", "by = \"machine-coordinate\""),
    ("by = \"start-height\"", "by = \"start-height\"\npark = { x = 0, y = 0 }"),
    ("slowest = 6000", "slowest = 60000"),
    ("least_chip = 0.03", "least_chip = 0.3"),
    ("name = \"3.175mm\"\ndiameter = 3.175", "name = \"6mm\"\ndiameter = 0"),
];

#[test]
fn every_bad_profile_gets_its_own_clear_message() {
    let good = machine::built_in("shop-router").expect("built in");
    let mut said = Vec::new();
    for (from, to) in BAD {
        assert!(good.contains(from), "{from:?} is not in the profile");
        let error = Machine::from_toml(&good.replacen(from, to, 1)).expect_err(to);
        assert_eq!(error.exit_status(), 2);
        said.push(format!("{to:?}\n    {error}"));
    }
    let messages: std::collections::HashSet<_> = said.iter().map(|s| s.split_once('\n')).collect();
    assert_eq!(messages.len(), BAD.len(), "no two are alike");
    insta::assert_snapshot!(said.join("\n"));
}

#[test]
fn all_flaws_are_told_at_once() {
    let good = machine::built_in("shop-router").expect("built in");
    let bad = good.replace("queue = 64", "queue = 0").replace("decimals = 3", "decimals = 1");
    let error = Machine::from_toml(&bad).expect_err("two flaws");
    assert!(error.what.contains("controller.queue") && error.what.contains("program.decimals"), "{error}");
}

#[test]
fn a_profile_in_inches_is_held_in_mm() {
    let machine = Machine::named("inch-gantry").expect("built in");
    assert_eq!(machine.unit, Unit::Inch);
    approx::assert_relative_eq!(machine.travel.x, 98.0 * 25.4, epsilon = 1e-9);
    approx::assert_relative_eq!(machine.feed.x, 600.0 * 25.4, epsilon = 1e-9);
    approx::assert_relative_eq!(machine.cutters[0].diameter, 6.35, epsilon = 1e-12);
    approx::assert_relative_eq!(machine.last_place(), 0.00254, epsilon = 1e-12);
}

#[test]
fn a_machine_explains_itself() {
    for name in ["shop-router", "old-controller", "inch-gantry"] {
        insta::assert_snapshot!(name, machine::explain(&Machine::named(name).expect("built in")));
    }
    let all: Vec<_> = machine::names().map(|name| Machine::named(name).expect("built in")).collect();
    let json = machine::to_json(&all).expect("can be written");
    assert_eq!(json["machines"][0]["name"], "shop-router");
    assert_eq!(json["machines"][3]["controller"]["memory_bytes"], 32768);
    assert_eq!(json["machines"][2]["feed"]["x"], 15240.0, "in mm/min whatever the unit");
}

#[test]
fn file_names_suit_the_controller() {
    let flaw = |name: &str, stem: &str| Machine::named(name).expect("built in").files.flaw_in(stem);
    assert_eq!(flaw("old-controller", "SIGN-01"), None);
    assert_eq!(
        flaw("old-controller", "sign").as_deref(),
        Some("the controller takes no \"s\" in a file name")
    );
    let long = flaw("old-controller", "TEMPLATES");
    assert_eq!(long.as_deref(), Some("the name has 9 characters, the controller takes 8"));
    assert_eq!(flaw("shop-router", "paddle blade, left"), None);
    assert!(flaw("benchtop-router", "paddle blade").is_some());
}

/// Found by fuzzing: a cutter's diameter of sixteen digits came back rounded to twelve.
#[test]
fn every_digit_of_a_profile_survives_writing_it() {
    for (name, short, long) in [
        ("shop-router", "diameter = 3.175", "diameter = 3.1777777777777775"),
        ("inch-gantry", "diameter = 0.25", "diameter = 0.25777777777777777"),
    ] {
        let text = machine::built_in(name).expect("a profile of this name");
        assert!(text.contains(short), "{name} has such a cutter");
        let machine = Machine::from_toml(&text.replacen(short, long, 1)).expect("such a cutter is allowed");
        let again = Machine::from_toml(&machine.to_toml().expect("written")).expect("read again");
        assert!(again == machine, "{name}");
    }
}
