//! What is not drawn: by structure, by style, by condition; and what is told of it.

use super::{contours, sketch, svg};

/// A line that is always drawn, so that the drawing is never empty.
const ANCHOR: &str = "<line id='anchor' x2='1'/>";

fn drawn(content: &str) -> usize {
    contours(&format!("{content}{ANCHOR}")).len() - 1
}

#[test]
fn display_and_visibility() {
    let p = "<path d='M0 0H5'/>";
    let rows = [
        (format!("<g display='none'>{p}</g>"), 0),
        (format!("<g style='display:none'>{p}</g>"), 0),
        (format!("<g style='display : NONE'>{p}</g>"), 0),
        (format!("<g display='inline'>{p}</g>"), 1),
        (format!("<g visibility='hidden'>{p}</g>"), 0),
        (format!("<g visibility='collapse'>{p}</g>"), 0),
        ("<g visibility='hidden'><path visibility='visible' d='M0 0H5'/></g>".into(), 1),
        ("<g display='none'><path display='inline' d='M0 0H5'/></g>".into(), 0),
        ("<path display='none' d='M0 0H5'/>".into(), 0),
        // The style attribute beats the presentation attribute, and a rule does too.
        ("<path display='none' style='display:inline' d='M0 0H5'/>".into(), 1),
        (format!("<style>g {{display: none}}</style><g display='inline'>{p}</g>"), 0),
        (format!("<style>.off {{display: none}}</style><g class='a off'>{p}</g>"), 0),
        (format!("<style>.off {{display: none}}</style><g class='off' style='display:inline'>{p}</g>"), 1),
        (
            format!(
                "<style>.off {{display: none !important}}</style><g class='off' style='display:inline'>{p}</g>"
            ),
            0,
        ),
        (
            format!(
                "<style>#x {{display: inline}} .off {{display: none}}</style><g id='x' class='off'>{p}</g>"
            ),
            1,
        ),
        (
            format!(
                "<style>.a {{display:none}}</style><style>.a {{display:inline}}</style><g class='a'>{p}</g>"
            ),
            1,
        ),
        (format!("<style>g > path {{visibility:hidden}}</style><g>{p}</g>"), 0),
        (format!("<style><![CDATA[ path {{visibility:hidden}} ]]></style>{p}"), 0),
        (format!("<style media='print'>path {{display:none}}</style>{p}"), 1),
        (format!("<style media='screen, print'>path {{display:none}}</style>{p}"), 0),
        (format!("<style type='text/x'>path {{display:none}}</style>{p}"), 1),
        ("<path display='none !important' d='M0 0H5'/>".into(), 1),
    ];
    for (content, wanted) in rows {
        assert_eq!(drawn(&content), wanted, "{content}");
    }
}

#[test]
fn what_only_describes_is_not_drawn() {
    let p = "<path d='M0 0H5'/>";
    for element in
        ["defs", "symbol", "clipPath", "mask", "marker", "pattern", "metadata", "linearGradient", "filter"]
    {
        assert_eq!(drawn(&format!("<{element}>{p}</{element}>")), 0, "{element}");
    }
    assert_eq!(drawn(&format!("<a>{p}</a><g>{p}</g>")), 2);
    assert_eq!(drawn("<path xmlns='urn:other' d='M0 0H5'/>"), 0, "another namespace's path");
}

#[test]
fn a_hidden_elements_parts_may_still_be_used() {
    let content = "<g display='none'><path id='p' d='M0 0H5'/></g><use href='#p'/>";
    assert_eq!(drawn(content), 1);
    assert_eq!(drawn("<defs><path id='p' display='none' d='M0 0H5'/></defs><use href='#p'/>"), 0);
}

#[test]
fn conditions() {
    let p = "<path d='M0 0H5'/>";
    let long = "<path d='M0 0H50'/>";
    let rows = [
        (
            format!("<switch><g systemLanguage='fr'>{p}</g><g systemLanguage='de,en-GB'>{long}</g></switch>"),
            vec![50.0],
        ),
        (format!("<switch><foreignObject requiredExtensions='urn:x'/><g>{p}</g></switch>"), vec![5.0]),
        (format!("<switch><g>{p}</g><g>{long}</g></switch>"), vec![5.0]),
        ("<path requiredExtensions='urn:x' d='M0 0H5'/>".to_owned(), vec![]),
        ("<path systemLanguage='fr' d='M0 0H5'/>".to_owned(), vec![]),
        ("<path requiredExtensions='' d='M0 0H5'/>".to_owned(), vec![5.0]),
    ];
    for (content, wanted) in rows {
        let found: Vec<f64> = contours(&format!("{content}{ANCHOR}")).iter().map(|c| c.length()).collect();
        assert_eq!(found[..found.len() - 1], wanted, "{content}");
    }
}

#[test]
fn everything_left_out_is_told() {
    let content = "
        <text>a</text><text><tspan>b</tspan></text><image width='5' height='5'/><foreignObject/>
        <g display='none'><path d='M0 0H5'/><rect width='1' height='1'/></g><path visibility='hidden' d='M0 0H5'/>
        <g clip-path='url(#c)'><path mask='url(#m)' d='M0 0H5'/></g>
        <use href='#nowhere'/><use href='other.svg#part'/>
        <path marker-end='url(#m)' d='M0 0H5'/>
        <rect width='-1' height='2'/><polyline points='0 0 1 1 2'/>
        <path stroke='red' stroke-width='2.5' d='M0 0H5'/>
        <star/>";
    insta::assert_snapshot!(sketch(&svg(content)).notes.join("\n"), @r##"
    1 foreignObject not cut: it is no outline
    1 image not cut: a picture has no outline, trace it first
    1 star not cut: it is no outline
    2 texts not cut: turn text into paths before saving
    3 shapes hidden and left out
    2 elements with a clip path or mask: it is not applied, the whole outline is cut
    1 shape with markers, which are not cut
    2 uses of something that is not in the file, not drawn (the first: "#nowhere")
    1 shape drawn with a stroke, up to 2.50 units wide: the path is its middle line
    rect on line 7: a width or height below zero
    polyline on line 7: an x without a y at the end of its points
    "##);
}

#[test]
fn style_sheets_elsewhere_are_told() {
    let linked = format!("<?xml-stylesheet href='a.css'?>{}", svg(ANCHOR));
    assert_eq!(
        sketch(&linked).notes,
        ["a style sheet in another file is not read: what it hides or shows is not known"]
    );
    let media = svg(&format!(
        "<style>@media print {{ path {{display: none}} }} .a {{display:none}}</style>{ANCHOR}<g class='a'><path d='M0 0H5'/></g>"
    ));
    let read = sketch(&media);
    assert_eq!(read.contours.len(), 1, "the rule behind the block still counts");
    assert!(read.notes.iter().any(|n| n == "style rules inside @media are not applied"), "{:?}", read.notes);
    let newer = svg(&format!("<style>path:not(.keep) {{display: none}}</style>{ANCHOR}<path d='M0 0H5'/>"));
    assert_eq!(sketch(&newer).notes, ["style rules with selectors newer than CSS 2 are not applied"]);
}
