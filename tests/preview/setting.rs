//! Stock, zero and clamps in the pictures, and the pace within a move.

use ribband::preview::{page, setup_sheet, still};
use serde_json::Value;

use crate::Made;

const SLOT: &str = "0,0\n200,0\n";
const SET_UP: &str = "depth = \"3mm\"\npass = \"3mm\"\nentry = \"plunge\"\nthickness = \"5.9..6.1mm\"\nstock = \"300x80\"\n\
                      stock-at = \"100,50\"\norigin = \"stock\"\nfeed = 3000\n\
                      [[clamp]]\nx = [0, 20]\ny = [30, 50]\nheight = 4\n";

/// The markup between the start of a layer and the end of its group of groups.
fn layer<'a>(drawn: &'a str, start: &str) -> &'a str {
    let (_, rest) = drawn.split_once(start).unwrap_or_else(|| panic!("{start} is drawn"));
    rest.split("<g id=").next().unwrap_or_default()
}

#[test]
fn stock_and_clamps_are_drawn_where_they_lie_and_told_in_words() {
    let made = Made::with("slot.csv", SLOT.as_bytes(), SET_UP);
    let scene = made.scene();
    let page = page(&scene).expect("a page");
    let sheet = setup_sheet(std::slice::from_ref(&scene));
    // Y points down on the page.
    let stock = "d=\"M0 0L300 0L300 -80L0 -80L0 0\"";
    let clamp = "M0 -30L20 -30L20 -50L0 -50L0 -30";
    for (drawn, start) in [(&page, "<g id=\"layer-stock\">"), (&still(&scene), "<g id=\"stock\">")] {
        assert!(layer(drawn, start).contains(stock), "{}", layer(drawn, start));
        let clamps = layer(drawn, &start.replace("stock", "clamps"));
        assert!(
            clamps.contains(clamp) && clamps.contains(">clamp 1<") && clamps.contains(">4 mm high<"),
            "{clamps}"
        );
        assert!(
            clamps.contains("<title>clamp 1: X 0 to 20, Y 30 to 50, 4 mm above the stock</title>"),
            "{clamps}"
        );
    }
    assert!(sheet.contains(stock) && sheet.contains(clamp), "the sheet's picture");
    assert!(
        sheet.contains(
            "aria-label=\"The part from above with its size and zero, on its stock, with a clamp\""
        )
    );
    assert!(sheet.contains("<li>Clamps stand as drawn"), "a box to tick");
    for (term, told) in [
        ("Zero of X and Y", "the lower left corner of the stock"),
        ("Zero of Z", "the top of the stock"),
        (
            "Stock",
            "300 x 80 mm, 5.9 to 6.1 mm thick, its lower left corner at X 0 Y 0 from zero, on the machine at X 100 Y 50",
        ),
        ("Bed", "the bed is not cut"),
        ("Clamps", "1: X 0 to 20, Y 30 to 50, 4 mm above the stock"),
    ] {
        for shown in [&page, &sheet] {
            assert!(shown.contains(&format!("<dt>{term}</dt><dd>{told}</dd>")), "{term}: {told}");
        }
    }
    assert!(
        page.contains("data-layer=\"clamps\" checked> <svg class=\"key\""),
        "a legend entry and a switch"
    );
}

#[test]
fn what_is_not_declared_is_not_drawn() {
    let made = Made::with("slot.csv", SLOT.as_bytes(), "depth = \"3mm\"\n");
    let page = page(&made.scene()).expect("a page");
    assert!(!page.contains("data-layer=\"clamps\"") && !page.contains("data-layer=\"stock\""));
    assert!(page.contains("<dt>Clamps</dt><dd>none declared</dd>"));
    assert!(page.contains("<dt>Stock</dt><dd>size and thickness not given</dd>"));
}

#[test]
fn the_pace_within_a_move_is_the_planned_one() {
    let made = Made::with("slot.csv", SLOT.as_bytes(), SET_UP);
    let page = page(&made.scene()).expect("a page");
    let (_, rest) = page.split_once("id=\"data\">").expect("the data");
    let data: Value = serde_json::from_str(rest.split_once("</script>").expect("its end").0).expect("JSON");
    let moves = &made.plan.programs[0].program.toolpath.moves;
    let long = moves.iter().position(|m| !m.is_rapid() && m.span().length() > 199.0).expect("the slot");
    let pace: Vec<f64> = data["paces"][long.to_string()]
        .as_array()
        .expect("a long move has a pace")
        .iter()
        .filter_map(Value::as_f64)
        .collect();
    // From what the corner to the plunge allows to 50 mm/s and back, at the machine's acceleration along X: the
    // difference of the squared speeds over 2 a, at both ends.
    let corner = pace[0];
    assert!(corner < 10.0, "{pace:?}");
    let gain = (50.0 * 50.0 - corner * corner) / (2.0 * made.job.machine.acceleration.x);
    let expected = [corner, gain, 50.0, 200.0 - 2.0 * gain, 50.0, gain, corner];
    assert_eq!(pace.len(), expected.len(), "{pace:?}");
    assert!(pace.iter().zip(expected).all(|(a, b)| (a - b).abs() < 1e-3), "{pace:?} for {expected:?}");
    // Every pace there is covers its move, and takes no longer than the move does.
    let ended: Vec<f64> = data["ended"].as_array().expect("times").iter().filter_map(Value::as_f64).collect();
    let paces = data["paces"].as_object().expect("paces");
    for (number, pace) in paces {
        let number: usize = number.parse().expect("a number");
        let pace: Vec<f64> = pace.as_array().expect("a list").iter().filter_map(Value::as_f64).collect();
        let (mut from, mut length, mut time) = (pace[0], 0.0, 0.0);
        for part in pace[1..].chunks(2) {
            (length, time) = (length + part[0], time + 2.0 * part[0] / (from + part[1]));
            from = part[1];
        }
        let lasts = ended[number] - if number == 0 { 0.0 } else { ended[number - 1] };
        assert!((length - moves[number].length()).abs() < 1e-2, "{number}: {length} mm");
        assert!(time <= lasts + 5e-3, "{number}: {time} s of {lasts} s");
    }
}
