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
