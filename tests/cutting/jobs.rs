//! Job files: saved, run again, and settings by the colour of the drawing.

use crate::shop::Shop;

/// A plate whose lines have colours: a blue outline, a red letter, a green line that is not cut.
const COLOURED: &str = "<svg xmlns='http://www.w3.org/2000/svg' width='80mm' height='60mm' viewBox='0 0 80 60'>\
    <path stroke='#00F' fill='none' d='M0 0H80V60H0Z'/><path stroke='#ff0000' fill='none' d='M20 20H40V40H20Z'/>\
    <path style='stroke: Green; fill: none' d='M60 10V50'/></svg>";

const BY_COLOUR: &str = "thickness = \"6mm\"\nthrough = true\nside = \"outside\"\nheld = \"screws\"\n\
    [colour.\"#F00\"]\nside = \"on\"\ndepth = \"1mm\"\nallowance = \"0mm\"\nfeed = \"900mm/min\"\n\
    [colour.green]\nskip = true\n";

fn shop() -> Shop {
    let shop = Shop::new();
    shop.put("signs.svg", COLOURED);
    shop.put("colours.toml", BY_COLOUR);
    let inches = "machine = \"inch-gantry\"\ntolerance = \"0.004in\"\ndepth = \"1/8in\"\nthickness = \"1in\"\n\
                  [layer.none]\ntabs = \"6in\"\n";
    shop.put("inches.toml", inches);
    shop
}

#[test]
fn contours_are_cut_by_the_colour_that_they_are_drawn_in() {
    let shop = shop();
    let (program, report) = shop.done("signs.svg --job colours.toml");
    assert_eq!(report["check"]["holds"], true);
    assert_eq!(report["contours"].as_array().map(Vec::len), Some(2), "green is left out");
    assert_eq!(report["setup"]["side"], "by layer");
    assert!(program.contains("Z-6.2") && program.contains("Z-1"), "{program}");
    assert!(program.contains("F900"), "the letter's own feed: {program}");
    // DXF: the index of its palette.
    let line = |colour: i32, x: i32| {
        format!(
            "0\nLWPOLYLINE\n8\n0\n62\n{colour}\n90\n4\n70\n1\n10\n{x}\n20\n0\n10\n{}\n20\n0\n10\n{}\n20\n20\n10\n{x}\n20\n20\n",
            x + 20,
            x + 20
        )
    };
    let head = "0\nSECTION\n2\nHEADER\n9\n$INSUNITS\n70\n4\n0\nENDSEC\n0\nSECTION\n2\nENTITIES\n";
    shop.put("two.dxf", &format!("{head}{}{}0\nENDSEC\n0\nEOF\n", line(1, 0), line(3, 40)));
    shop.put("index.toml", "depth = 3\n[colour.1]\ndepth = 1\n[colour.7]\ndepth = 2\n");
    let (program, report) = shop.done("two.dxf --job index.toml --entry plunge --pass 3mm");
    assert!(program.contains("Z-1") && program.contains("Z-3") && !program.contains("Z-2"), "{program}");
    let warnings = report["warnings"].to_string();
    assert!(warnings.contains("colour \\\"7\\\", the drawing has none"), "{warnings}");
}

#[test]
fn a_layer_goes_before_a_colour() {
    let shop = shop();
    shop.put("signs.svg", &COLOURED.replace("<path stroke='#ff0000'", "<path id='letter' stroke='#ff0000'"));
    let both = format!("{BY_COLOUR}[layer.\"\"]\nside = \"on\"\ndepth = \"2mm\"\n");
    shop.put("both.toml", &both);
    let (_, report) = shop.done("signs.svg --job both.toml");
    assert_eq!(report["setup"]["depth_mm"], 2.0, "all contours are on the layer without a name");
}

#[test]
fn a_saved_job_gives_the_same_bytes() {
    let shop = shop();
    for line in [
        "bracket.csv --side outside --thickness 6mm --through --tabs 2",
        "bracket.csv --side outside --depth 3 --tolerance 0.05mm --allowance -0.1mm --turn 30 --copies 2x1 --gap 20mm",
        "plate.svg --side auto --thickness 1/4in --skin 0.5mm --entry helix --cutter 1/8in --spindle 12000 --feed 40in/min",
        "slot.csv --depth 4mm --pass 2mm --machine fast-router --origin drawing --clearance 8mm",
        "bracket.csv --side outside --depth 3mm --clamp=-40,0,-20,20,3mm --stock 200x120mm --thickness 5.8..6.2mm",
        "signs.svg --job colours.toml",
        "signs.svg --job colours.toml --depth 2mm --cutter 3mm --fit-width 120mm",
        "signs.svg --job inches.toml --fit-width 3in",
    ] {
        let (first, _) = shop.done(&format!("{line} --save-job saved.toml"));
        let saved = shop.text("saved.toml");
        let drawing = line.split(' ').next().expect("a drawing");
        // Without a unit for the drawing: that is saved too.
        let again = shop.run(&["post", drawing, "--job", "saved.toml", "-o", "again.nc", "--overwrite"]);
        assert_eq!(again.status, 0, "{line}: {}\n{saved}", again.err);
        assert_eq!(shop.text("again.nc"), first, "{line}\n{saved}");
    }
}

#[test]
fn a_saved_job_as_a_whole() {
    let shop = shop();
    shop.done("signs.svg --job colours.toml --cutter 3mm --allowance 0.2mm --save-job saved.toml");
    insta::assert_snapshot!(shop.text("saved.toml"));
}

#[test]
fn a_job_is_saved_with_the_program_or_not_at_all() {
    let shop = shop();
    let refused = shop.post("bracket.csv --thickness 6mm --through --save-job saved.toml");
    assert_eq!(refused.status, 1, "{}", refused.err);
    assert!(!shop.exists("saved.toml"));
    let typed = ["post", "signs.svg", "--job", "colours.toml", "--save-job", "colours.toml", "-o", "new.nc"];
    let own = shop.run(&typed);
    assert_eq!(own.status, 4, "{}", own.err);
    assert!(!shop.exists("new.nc") && shop.text("colours.toml") == BY_COLOUR);
}

#[test]
fn what_is_not_known_of_a_colour_is_told_with_its_line_and_a_suggestion() {
    let shop = shop();
    for (from, to, said) in [
        (
            "allowance",
            "alowance",
            "colours.toml, line 8: there is no setting `alowance`\n  did you mean `allowance`?",
        ),
        ("side = \"on\"", "side = \"over\"", "colours.toml, line 6"),
        ("[colour.green]", "[color.green]", "did you mean `colour`?"),
        (
            "[colour.green]\nskip = true",
            "[layer]\nletter = 3",
            "colours.toml, line 11: the entry of a layer is not a table",
        ),
    ] {
        shop.put("colours.toml", &BY_COLOUR.replace(from, to));
        let ended = shop.post("signs.svg --job colours.toml");
        assert_eq!(ended.status, 2, "{to}: {}", ended.err);
        assert!(ended.err.contains(said), "{to}: {}", ended.err);
    }
}
