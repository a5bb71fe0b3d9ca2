//! Programs beside the job's own: dry runs, and those that take a program up again.

use kurbo::Rect;

use super::claim::{Claim, Spot, State, Worst};
use super::{Asked, check_moves, motion, steps};
use crate::gcode::read::{Program, What};
use crate::machine::Machine;
use crate::toolpath::{Move, Position};

const STILL: &str = "no word starts the spindle";
const ABOVE: &str = "nothing goes below the clearance height";
const RAISED: &str = "it makes every move of the program, all by the same height above it";
const AROUND: &str = "it goes round all that the program cuts";
const REST: &str = "it makes the rest of the program's cuts";
const WAY_DOWN: &str = "on its way down it cuts nothing new";

/// Checks a dry run: what holds of any program, and that its spindle stays off and its moves above `asked.clearance`.
pub fn check_dry(program: &Program, machine: &Machine, asked: &Asked) -> Vec<Claim> {
    let mut claims = check_moves(program, machine, asked);
    claims.retain(|claim| claim.name != motion::SPINDLE && claim.name != motion::LOWEST);
    let starts = program.events.iter().filter(|event| matches!(event.what, What::SpindleOn { .. }));
    let first = starts.clone().next().map(|event| Spot::line(event.line));
    claims.push(Claim::none_of(STILL, starts.count(), first).because("the spindle would turn"));
    let mut lowest = Worst::none();
    for m in &program.toolpath.moves {
        lowest.note(-m.from.z.min(m.to.z), || Spot::end_of(m));
    }
    let least = asked.clearance.unwrap_or(asked.stock_top);
    let above = Claim::at_least(ABOVE, "mm", lowest, least, machine.last_place());
    claims.push(above.because("a dry run must stay above the stock"));
    claims
}

/// The claim that `high` makes every move of `low`, all raised by one height.
pub fn raised(high: &Program, low: &Program, machine: &Machine) -> Claim {
    let (high, low) = (&high.toolpath.moves, &low.toolpath.moves);
    let lift = high.first().zip(low.first()).map_or(0.0, |(high, low)| high.from.z - low.from.z);
    // Each height is rounded by itself.
    let slack = 1.01 * machine.last_place();
    let same = |(high, low): &(&Move, &Move)| {
        let off = |a: Position, b: Position| (a.z - b.z - lift).abs();
        let flat = |m: &Move| (m.from.xy, m.to.xy, m.bulge.to_bits(), m.is_rapid());
        flat(high) == flat(low) && off(high.from, low.from).max(off(high.to, low.to)) <= slack
    };
    let other = high.iter().zip(low).find(|pair| !same(pair)).map(|(high, _)| Spot::end_of(high));
    let found = usize::from(other.is_some() || high.len() != low.len());
    Claim::none_of(RAISED, found, other).because("it would show other moves than the program makes")
}

/// The claim that the way of `frame` at feed encloses the cuts of all `programs`, `radius` mm about them added.
pub fn around(frame: &Program, programs: &[&Program], radius: f64, machine: &Machine) -> Claim {
    let bounds = |program: &Program| {
        let cuts = program.toolpath.moves.iter().filter(|m| !m.is_rapid());
        cuts.map(|m| m.span().bbox()).reduce(|a, b| a.union(b))
    };
    let cut = programs.iter().filter_map(|program| bounds(program)).reduce(|a, b| a.union(b));
    let mut beyond = Worst::none();
    if let (Some(cut), Some(frame)) = (cut, bounds(frame)) {
        beyond.note(sticks_out(cut.inflate(radius, radius), frame), || Spot::line(0));
    }
    let claim = Claim::at_most(AROUND, "mm", beyond, 0.0, 2.0 * machine.last_place());
    if cut.is_some() && beyond.at.is_none() {
        return Claim { state: State::Fails, note: "it goes nowhere".into(), ..claim };
    }
    claim.because("a cut reaches beyond the way that is shown")
}

/// How far a box reaches beyond another.
fn sticks_out(inner: Rect, outer: Rect) -> f64 {
    let over = [outer.x0 - inner.x0, outer.y0 - inner.y0, inner.x1 - outer.x1, inner.y1 - outer.y1];
    over.into_iter().fold(0.0, f64::max)
}

/// The claims that `program` makes the cuts of a longer one that were left (`after`), and before them cuts nothing that
/// was not cut (`before`); the stock's top is at the height `top`.
pub fn check_resumed(
    program: &Program,
    (before, after): (&[Move], &[Move]),
    machine: &Machine,
    top: f64,
) -> Vec<Claim> {
    let cuts = |moves: &[Move]| -> Vec<Move> {
        // Feed and speed are planned anew from the new start.
        let bare = |m: &Move| Move { line: 0, feed: None, spindle_rpm: 0.0, ..*m };
        moves.iter().filter(|m| !m.is_rapid()).map(bare).collect()
    };
    let (made, left) = (cuts(&program.toolpath.moves), cuts(after));
    let missing = usize::from(!made.ends_with(&left));
    let rest = Claim::none_of(REST, missing, None).because("a cut would be left out, or be another one");
    let way_down = made.len().saturating_sub(left.len());
    let done = before.iter().filter(|m| !m.is_rapid());
    let slack = 4.0 * machine.last_place();
    let new = steps::fresh(done, made[..way_down].iter(), top, slack);
    let way = Claim::at_most(WAY_DOWN, "mm", new, 0.0, slack);
    vec![rest, way.because("the cutter would go down into material")]
}
