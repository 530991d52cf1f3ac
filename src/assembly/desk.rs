//! The paper model of one plan with shapes of its own, one slot per member: where continuous
//! sizes are tried.

use super::candidates::{Candidate, Want};
use super::plan::{Clerk, Ledger, Plan, Price, Tally};
use crate::cells::solved::{Solved, Solver};
use crate::cells::{CELLS, Shape};
use crate::network::corners;
use crate::network::probes::Pool;
use crate::numeric::scalar::{exp, ln};
use crate::spec::Rail;
use std::collections::BTreeMap;

/// How far inside an error limit a descent aims: what straight lines miss, and a snapped length.
const INSIDE: f64 = 5e-4;

/// The paper model with shapes of its own: one slot per member.
/// Share of a permitted fall that a descent aims at.
pub(super) const OF_FALL: f64 = 0.95;

pub(super) struct Desk<'l, 'a> {
    pub(super) ledger: &'l Ledger<'a>,
    pub(super) plan: Plan,
    solvers: BTreeMap<(Rail, usize), Solver<'a>>,
    pub(super) pool: Pool,
    candidates: [Vec<Candidate>; 2],
    /// Slot of each member on its rail.
    slots: Vec<usize>,
    pub(super) wants: Vec<Want>,
    pub(super) budget: f64,
    pub(super) charge: f64,
    /// Shapes are solved with their lengths on the manufacturing grid.
    pub(super) snap: bool,
    /// Descents end on the manufacturing grid; off it, differences of areas are smooth.
    pub(super) on_grid: bool,
    pub(super) evaluations: u64,
}

impl<'l, 'a> Desk<'l, 'a> {
    /// A desk for a plan; `None` where one of its shapes cannot be solved again.
    pub(super) fn new(
        ledger: &'l Ledger<'a>,
        plan: &Plan,
        shapes: &[Shape],
    ) -> Option<Desk<'l, 'a>> {
        let mut desk = Desk {
            ledger,
            plan: plan.clone(),
            solvers: BTreeMap::new(),
            pool: Pool {
                probes: ledger.pool.probes.clone(),
                shapes: [Vec::new(), Vec::new()],
            },
            candidates: [Vec::new(), Vec::new()],
            slots: Vec::new(),
            wants: ledger.wants.clone(),
            budget: ledger.budget,
            charge: 0.0,
            snap: true,
            on_grid: true,
            evaluations: 0,
        };
        for (f, shape) in shapes.iter().enumerate() {
            let rail = plan.members[f].rail;
            let solved = desk.solve(rail, shape)?;
            let slot = desk.pool.shapes[rail as usize].len();
            desk.candidates[rail as usize].push(desk.digest(rail, slot, &solved));
            desk.pool.shapes[rail as usize].push(solved);
            desk.slots.push(slot);
            desk.plan.members[f].candidate = slot;
        }
        Some(desk)
    }

    pub(super) fn solve(&mut self, rail: Rail, shape: &Shape) -> Option<Solved> {
        let job = self.ledger.job;
        let solver = self.solvers.entry((rail, shape.cell)).or_insert_with(|| {
            Solver::new(
                job.tech(rail),
                shape.cell,
                job.spec.reference.current().0,
                &self.pool.probes[rail as usize].volts,
                &corners::climates(&job),
            )
        });
        let drawn = if self.snap {
            shape.snapped(&job.tech(rail))
        } else {
            *shape
        };
        solver.solve(&drawn).ok()
    }

    pub(super) fn digest(&self, rail: Rail, slot: usize, solved: &Solved) -> Candidate {
        let probes = &self.pool.probes[rail as usize];
        Candidate::new(&self.ledger.job, &self.wants, rail, slot, solved, probes)
    }

    pub(super) fn shapes(&self) -> Vec<Shape> {
        self.plan
            .members
            .iter()
            .zip(&self.slots)
            .map(|(m, &slot)| self.pool.shapes[m.rail as usize][slot].shape)
            .collect()
    }

    /// The solved shape of every member.
    pub(super) fn solved(&self) -> Vec<Solved> {
        let members = self.plan.members.iter().zip(&self.slots);
        members
            .map(|(m, &slot)| self.pool.shapes[m.rail as usize][slot].clone())
            .collect()
    }

    /// Puts a shape into a member's slot. False where it cannot be solved.
    pub(super) fn put(&mut self, f: usize, shape: &Shape) -> bool {
        let (rail, slot) = (self.plan.members[f].rail, self.slots[f]);
        let Some(solved) = self.solve(rail, shape) else {
            return false;
        };
        self.candidates[rail as usize][slot] = self.digest(rail, slot, &solved);
        self.pool.shapes[rail as usize][slot] = solved;
        true
    }

    /// What the plan costs with the present shapes.
    pub(super) fn price(&mut self) -> Price {
        self.evaluations += 1;
        let ledger = Ledger {
            pool: &self.pool,
            candidates: &self.candidates,
            wants: self.wants.clone(),
            budget: self.budget,
            ..self.ledger.clone()
        };
        Clerk::new(&ledger).price(&self.plan, &mut Tally::new())
    }

    /// Area with every excess charged, um^2.
    pub(super) fn cost(&mut self) -> f64 {
        let price = self.price();
        (price.area + self.charge * price.excess) * 1e12
    }

    /// Relative error of each output over its limit, on paper.
    pub(super) fn shares(&self) -> Vec<[f64; 2]> {
        let ledger = Ledger {
            pool: &self.pool,
            candidates: &self.candidates,
            wants: self.wants.clone(),
            budget: self.budget,
            ..self.ledger.clone()
        };
        let mut tally = Tally::new();
        Clerk::new(&ledger).price(&self.plan, &mut tally);
        tally.error_shares()
    }

    /// Area, um^2, and every limit as `ln(value / limit)`: at most 0 where it is kept. Each carries
    /// the number of the thing it limits, of which the worst counts (an output's error at one end of
    /// its range has one limit per climate). Lists have the same order at every call.
    pub(super) fn limits(&mut self) -> (f64, Vec<(usize, f64)>) {
        self.evaluations += 1;
        // Whether a leg can serve at all must not depend on limits here: their excess is the point.
        let open: Vec<Want> = self
            .wants
            .iter()
            .map(|w| Want {
                early: 0.0,
                limit: if w.limit.is_finite() { 1e3 } else { w.limit },
                ..*w
            })
            .collect();
        let job = &self.ledger.job;
        let candidates: [Vec<Candidate>; 2] = [Rail::Sink, Rail::Source].map(|rail| {
            let (shapes, probes) = (
                &self.pool.shapes[rail as usize],
                &self.pool.probes[rail as usize],
            );
            shapes
                .iter()
                .enumerate()
                .map(|(k, s)| Candidate::new(job, &open, rail, k, s, probes))
                .collect()
        });
        let ledger = Ledger {
            pool: &self.pool,
            candidates: &candidates,
            wants: self.wants.clone(),
            budget: self.budget,
            ..self.ledger.clone()
        };
        let mut tally = Tally::new();
        let mut clerk = Clerk::new(&ledger);
        let price = clerk.price(&self.plan, &mut tally);
        let mut limits: Vec<(usize, f64)> = clerk
            .every_share(&self.plan, &tally)
            .iter()
            .map(|(thing, share)| (*thing, ln(share.max(1e-6)) + INSIDE))
            .collect();
        let mut thing = 2 * self.wants.len();
        let mut limit = |value: f64| {
            limits.push((thing, value));
            thing += 1;
        };
        for (k, want) in self.wants.iter().enumerate() {
            let member = &self.plan.members[self.plan.legs[k]];
            let solved = &self.pool.shapes[member.rail as usize][member.candidate];
            let probes = &self.pool.probes[member.rail as usize];
            let output = &job.spec.outputs[k];
            let low = &solved.probes[probes.index(output.range.least.0)];
            if want.limit.is_infinite() {
                let middle = (output.range.least.0 + output.range.most.0) / 2.0;
                let middle = &solved.probes[probes.index(middle)];
                let fall = 1.0 - (1.0 + low.error[0]) / (1.0 + middle.error[0]);
                // A share of the permitted fall, smooth through zero.
                limit(fall / (OF_FALL * want.fall) - 1.0);
            }
            if want.early > 0.0 {
                limit(ln(want.early / low.early.max(1e-9)));
            }
        }
        for member in &self.plan.members {
            let c = &candidates[member.rail as usize][member.candidate];
            let unit = member.current / f64::from(member.units);
            for value in c.drawing_limits(unit, member.units) {
                limit(value);
            }
            if member.parent.is_none() {
                // A tenth of a volt counts like a factor e.
                limit((c.input[1] - self.ledger.pin[1]) * 10.0);
                limit((self.ledger.pin[0] - c.input[0]) * 10.0);
            }
        }
        (price.area * 1e12, limits)
    }

    /// Redigests every slot after a change of the wants.
    pub(super) fn renew(&mut self) {
        for f in 0..self.plan.members.len() {
            let (rail, slot) = (self.plan.members[f].rail, self.slots[f]);
            let solved = self.pool.shapes[rail as usize][slot].clone();
            self.candidates[rail as usize][slot] = self.digest(rail, slot, &solved);
        }
    }
}

/// Least margin of a cascoded mirror device beyond its closed-form saturation voltage, V.
pub(crate) const MARGIN: f64 = -0.05;
/// Least voltage across a degeneration resistor, V.
pub(crate) const DROP: f64 = 0.01;

/// Continuous variables of a shape, each of order one per factor e (lengths, inversions) or per
/// 100 mV (drops).
pub(crate) fn variables(shape: &Shape) -> Vec<f64> {
    let parts = CELLS[shape.cell].parts();
    let mut x = vec![ln(shape.length), ln(shape.inversion)];
    if parts.cascode {
        x.extend([ln(shape.cascode_length), ln(shape.cascode_inversion)]);
    }
    if parts.drop {
        x.push(shape.drop * 10.0);
    }
    x
}

/// The shape of some variables, otherwise like another.
pub(crate) fn shape_of(like: &Shape, x: &[f64]) -> Shape {
    let parts = CELLS[like.cell].parts();
    let mut shape = *like;
    let mut x = x.iter().copied();
    let mut next = || x.next().unwrap_or_default();
    shape.length = exp(next());
    shape.inversion = exp(next()).clamp(1e-3, 1e3);
    if parts.cascode {
        shape.cascode_length = exp(next());
        shape.cascode_inversion = exp(next()).clamp(1e-3, 1e3);
    }
    if parts.drop {
        // A cascode's mirror device may be given a little less than its closed-form saturation
        // voltage; a degeneration resistor must be there.
        let least = if parts.cascode { MARGIN } else { DROP };
        shape.drop = (next() / 10.0).max(least);
    }
    shape
}
