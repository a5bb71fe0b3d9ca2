//! Closed outlines that were drawn in pieces.

use std::collections::HashMap;

use kurbo::Point;

use crate::geom::ArcSpline;

/// Which of the open `chains` make up rings: chains whose ends meet others' within `gap` mm, all the way round.
pub(super) fn in_rings(chains: &[&ArcSpline], gap: f64) -> Vec<bool> {
    let mut places = Places { gap, known: Vec::new(), cells: HashMap::new() };
    let ends: Vec<Option<[usize; 2]>> = chains
        .iter()
        .map(|chain| {
            let (first, last) = chain.vertices.first().zip(chain.vertices.last())?;
            Some([places.place(first.at), places.place(last.at)])
        })
        .collect();
    let mut meeting = vec![0_usize; places.known.len()];
    ends.iter().flatten().flatten().for_each(|&end| meeting[end] += 1);
    let mut kept: Vec<bool> = ends.iter().map(Option::is_some).collect();
    // A chain with a loose end is in no ring; without it, the next one may be loose.
    loop {
        let mut loose = false;
        for (ends, kept) in ends.iter().zip(&mut kept).filter(|(_, kept)| **kept) {
            if ends.iter().flatten().any(|&end| meeting[end] < 2) {
                *kept = false;
                loose = true;
                ends.iter().flatten().for_each(|&end| meeting[end] -= 1);
            }
        }
        if !loose {
            return kept;
        }
    }
}

/// Places that count as one within a gap, found by the cells of a grid as wide.
struct Places {
    gap: f64,
    known: Vec<Point>,
    cells: HashMap<(i64, i64), Vec<usize>>,
}

impl Places {
    /// The number of the known place near `p`, or of `p` as a new one.
    fn place(&mut self, p: Point) -> usize {
        let (x, y) = ((p.x / self.gap).floor() as i64, (p.y / self.gap).floor() as i64);
        let around =
            (-1..=1).flat_map(|dx| (-1..=1).map(move |dy| (x.saturating_add(dx), y.saturating_add(dy))));
        let mut near = around.filter_map(|cell| self.cells.get(&cell)).flatten();
        if let Some(&known) = near.find(|&&known| self.known[known].distance(p) <= self.gap) {
            return known;
        }
        self.known.push(p);
        self.cells.entry((x, y)).or_default().push(self.known.len() - 1);
        self.known.len() - 1
    }
}
