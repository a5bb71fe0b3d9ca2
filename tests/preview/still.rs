//! The still: real size, well formed, all of it from the program.

use ribband::preview::still;
use ribband::toolpath::Move;
use roxmltree::{Document, Node};

use crate::Made;

fn group<'a>(svg: &'a Document, id: &str) -> Node<'a, 'a> {
    svg.descendants().find(|node| node.attribute("id") == Some(id)).expect("the layer")
}

/// The numbers after each of the letters in the path data of a group, in order.
fn ends(group: Node) -> Vec<(char, Vec<f64>)> {
    let mut all = Vec::new();
    for path in group.descendants().filter(|node| node.has_tag_name("path")) {
        let data = path.attribute("d").expect("path data");
        let mut rest = data;
        while let Some(at) = rest.find(|c: char| c.is_ascii_alphabetic()) {
            let letter = rest.as_bytes()[at] as char;
            rest = &rest[at + 1..];
            let end = rest.find(|c: char| c.is_ascii_alphabetic()).unwrap_or(rest.len());
            let numbers = rest[..end].split(' ').filter(|n| !n.is_empty());
            all.push((letter, numbers.map(|n| n.parse().expect("a number")).collect()));
        }
    }
    all
}

#[test]
fn a_millimetre_is_a_millimetre() {
    let made = Made::demo("paddle-blade.svg");
    let text = still(&made.scene());
    let svg = Document::parse(&text).expect("well-formed XML");
    let root = svg.root_element();
    let sides: Vec<f64> = root
        .attribute("viewBox")
        .expect("a view box")
        .split(' ')
        .map(|n| n.parse().expect("a number"))
        .collect();
    assert_eq!(root.attribute("width"), Some(format!("{}mm", sides[2]).as_str()));
    assert_eq!(root.attribute("height"), Some(format!("{}mm", sides[3]).as_str()));
    assert!(sides[2] >= made.report.drawing.width_mm && sides[3] >= made.report.drawing.height_mm);
}

#[test]
fn the_cutters_path_is_the_programs() {
    let made = Made::demo("template.csv");
    let text = still(&made.scene());
    let svg = Document::parse(&text).expect("well-formed XML");
    let drawn: Vec<Vec<f64>> = ends(group(&svg, "cutter"))
        .into_iter()
        .filter(|(letter, _)| matches!(letter, 'L' | 'A'))
        .map(|(_, numbers)| numbers[numbers.len() - 2..].to_vec())
        .collect();
    let cut = made.plan.programs[0].program.toolpath.moves.iter();
    let cut: Vec<_> = cut.filter(|m| !m.is_rapid() && m.from.z.min(m.to.z) < 0.0).collect();
    // What lies below an earlier pass is not drawn again.
    assert!(drawn.len() > 30 && drawn.len() < cut.len(), "{} of {}", drawn.len(), cut.len());
    let near = |drawn: &[f64], m: &Move| (drawn[0] - m.to.xy.x).hypot(-drawn[1] - m.to.xy.y) < 0.001;
    for m in &cut {
        assert!(drawn.iter().any(|drawn| near(drawn, m)), "line {} is drawn", m.line);
    }
    for drawn in &drawn {
        assert!(cut.iter().any(|m| near(drawn, m)), "{drawn:?} is cut");
    }
}

#[test]
fn no_colour_says_more_than_the_tolerance_where_the_check_holds() {
    let made = Made::demo("template.csv");
    assert!(made.plan.programs[0].verdict.holds);
    let text = still(&made.scene());
    let svg = Document::parse(&text).expect("well-formed XML");
    let classes: Vec<_> =
        group(&svg, "error").children().filter_map(|node| node.attribute("class")).collect();
    assert!(classes.contains(&"e9") && classes.contains(&"e0") && !classes.contains(&"e10"), "{classes:?}");
}

#[test]
fn names_are_shown_and_not_obeyed() {
    let name = "</title><script>alert(\"1\")</script> & 'Пример' 図\u{1}.csv";
    let made = Made::of(name, b"x,y\n0,0\n40,0\n40,30\n0,30\n0,0\n");
    let text = still(&made.scene());
    let svg = Document::parse(&text).expect("well-formed XML");
    assert!(!svg.descendants().any(|node| node.has_tag_name("script")));
    let shown = name.replace('\u{1}', "\u{fffd}");
    let texts: Vec<_> = svg.descendants().filter_map(|node| node.text()).collect();
    assert!(texts.iter().any(|text| text.contains(&shown)), "{texts:?}");
}
