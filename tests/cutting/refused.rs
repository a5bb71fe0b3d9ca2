//! Jobs that are refused, each with its message.

use crate::shop::Shop;

const REFUSED: [(&str, i32); 29] = [
    ("plate.svg --side auto --thickness 6mm --through", 1),
    ("bracket.csv --thickness 6mm --through", 1),
    ("bracket.csv --side outside --thickness 6mm --through --tabs 2 --tab-height 6mm", 1),
    ("bracket.csv --side outside --thickness 6mm --through --tabs 40", 1),
    ("bracket.csv --side outside --thickness 6mm --through --tabs 2 --tab-length 90mm", 1),
    ("bracket.csv --side outside --depth 60mm", 1),
    ("bracket.csv --side outside --thickness 22mm --through --held tape", 1),
    ("bracket.csv --side outside --thickness 12mm --through --held tape --cutter 3.175mm", 1),
    ("bracket.csv --side outside --depth 13mm --cutter 1/8in", 1),
    ("bracket.csv --side outside --thickness 6mm --depth 7mm --held tape", 1),
    ("bracket.csv --side outside --thickness 6mm --skin 7mm", 1),
    ("bracket.csv --side inside --depth 3mm --cutter 50mm", 1),
    ("nearly.csv --side outside --depth 3mm", 1),
    ("nearly.csv --side auto --depth 3mm", 1),
    ("slot.csv --side inside --depth 3mm", 1),
    ("plate.svg --side outside --depth 3mm", 1),
    ("bracket.csv --side outside --through --held tape", 2),
    ("bracket.csv --side outside --skin 1mm", 2),
    ("bracket.csv --side outside --depth 3mm --tabs 2", 2),
    ("bracket.csv --side outside --depth 3mm --tab-height 2mm", 2),
    ("bracket.csv --depth 3mm --leave 0.5mm", 2),
    ("bracket.csv --depth 3mm --allowance 0.5mm", 2),
    ("bracket.csv --side outside --depth 3mm --allowance=-3mm", 1),
    ("bracket.csv --thickness 6mm --depth 3mm --through", 2),
    ("bracket.csv --depth 3mm --copies 30x1 --gap 12mm", 1),
    ("bracket.csv --side outside --depth 3mm --copies 2x1 --gap 5mm", 1),
    ("bracket.csv --depth 3mm --copies 2x1", 2),
    ("bracket.csv --depth 3mm --copies 0x2 --gap 12mm", 2),
    ("bracket.csv --depth 3mm --turn 400", 2),
];

#[test]
fn what_cannot_be_held_reached_or_told_apart_is_refused() {
    let shop = Shop::new();
    let mut told = String::new();
    for (line, status) in REFUSED {
        let ended = shop.post(line);
        assert_eq!(ended.status, status, "{line}: {}", ended.err);
        assert!(ended.out.is_empty() && !shop.exists("out.nc"), "{line}: nothing is written");
        told += &format!("{line}\n{}\n", ended.err);
    }
    insta::assert_snapshot!(told);
}
