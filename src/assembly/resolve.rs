//! The same network for other limits: its structure is held and all sizes are solved for again,
//! from sizes that are nearly right.
//!
//! Differences between two such answers are prices, and a price may be smaller than what rounding
//! to the manufacturing grid does to an area. So each answer has two forms. The *exact* one has
//! its sizes as they come out, and is what areas are compared by. The *drawn* one is on the grid,
//! and shows that the limits can be kept by a network that can be built. Both are solved as whole
//! circuits at every corner and keep every limit, or there is no answer.

use super::build::{build, build_exact};
use super::desk::Desk;
use super::plan::Ledger;
use super::polish::{correct, excess};
use super::resize::Sized;
use super::slp;
use crate::cells::Shape;
use crate::network::bench::Bench;
use crate::network::measure::{Measured, measure, trim_reference};
use crate::network::probes::{Pool, Probes};
use crate::network::{Job, Network, corners};
use crate::spec::Rail;

/// Limits on paper stay this share inside: half of it is what drawing to the grid may use up.
const INSIDE: f64 = 0.9995;
/// Attempts to draw an exact answer.
const DRAWINGS: usize = 6;
/// Excess beyond which another attempt would not help.
const HOPELESS: f64 = 0.05;

/// Where a re-solving starts and how long it may take.
#[derive(Debug, Clone, Copy)]
pub struct Pace {
    /// First trust region, in the variables of the descent (a factor e, or 100 mV).
    pub radius: f64,
    /// Descents, each after a correction of the paper model by the whole circuit.
    pub rounds: usize,
    /// Factor on the trust region from one descent to the next.
    pub shrink: f64,
}

/// A structure solved for a job's limits; every limit is kept at every corner.
#[derive(Debug, Clone)]
pub struct Resolved {
    /// Sizes as they came out.
    pub exact: Sized,
    /// Area with these sizes, m^2.
    pub area: f64,
    /// Overhead current with these sizes at the worst corner, A.
    pub overhead: f64,
    /// The network on the manufacturing grid.
    pub drawn: Network,
    /// Its area, m^2.
    pub drawn_area: f64,
}

/// What re-solving took.
#[derive(Debug, Clone, Copy, Default)]
pub struct Effort {
    /// Evaluations on paper.
    pub evaluations: u64,
    /// DC solutions of whole networks.
    pub solutions: u64,
}

/// Largest overhead current over the corners, A.
pub fn overhead(measured: &Measured) -> f64 {
    measured.overhead.iter().copied().fold(0.0, f64::max)
}

/// Whether a network keeps every limit of a job but that on its area, measured whole at every
/// corner. `bench` may belong to a job that differs in its limits.
pub fn keeps(job: &Job, bench: &mut Bench, network: &Network) -> Option<Measured> {
    let measured = measure(job, bench, network).ok()?;
    (excess(job, &measured, pin(job), 1.0) == 0.0).then_some(measured)
}

/// Solves a structure's sizes for the least area within a job's limits; `None` where no network
/// was found that keeps them. The limit on the area itself is not looked at: area is the answer.
pub fn resolve(job: &Job, from: &Sized, pace: Pace, effort: &mut Effort) -> Option<Resolved> {
    let pool = Pool {
        probes: [Rail::Sink, Rail::Source].map(|rail| Probes::of(job, rail)),
        shapes: [Vec::new(), Vec::new()],
    };
    let candidates = [Vec::new(), Vec::new()];
    let limit = job.spec.overhead_limit();
    let ledger = Ledger::new(*job, &pool, &candidates, 1.0, limit);
    let mut bench = Bench::new(*job, corners::verified(job));
    let mut desk = Desk::new(&ledger, &from.plan, &from.shapes)?;
    let answer = solved(job, &mut desk, &mut bench, from, pace);
    effort.evaluations += desk.evaluations;
    effort.solutions += bench.solutions;
    answer
}

fn solved(
    job: &Job,
    desk: &mut Desk,
    bench: &mut Bench,
    from: &Sized,
    pace: Pace,
) -> Option<Resolved> {
    let plan = &from.plan;
    (desk.snap, desk.on_grid) = (false, false);
    for (f, shape) in from.shapes.iter().enumerate() {
        if !desk.put(f, shape) {
            return None;
        }
    }
    let mut best: Option<(Vec<Shape>, Measured)> = None;
    let mut inside = INSIDE;
    let mut radius = pace.radius;
    for round in 0..=pace.rounds + 1 {
        let shapes = desk.shapes();
        let mut network = build_exact(job, plan, &shapes)?;
        trim_reference(job, &mut network).ok()?;
        let measured = measure(job, bench, &network).ok()?;
        let over = excess(job, &measured, pin(job), 1.0);
        if round >= pace.rounds {
            if over == 0.0 {
                best = Some((shapes, measured));
                break;
            }
            // Nearly there: a little more room, as for a drawing.
            if round > pace.rounds || over > HOPELESS {
                return None;
            }
            inside -= 1.0 - INSIDE;
        }
        correct(desk, &measured, 1.0, inside);
        slp::settle(desk, radius);
        radius *= pace.shrink;
    }
    let (shapes, exact) = best?;
    (desk.snap, desk.on_grid) = (true, true);
    let mut on_grid = shapes.clone();
    for _ in 0..DRAWINGS {
        let mut drawn = build(job, plan, &on_grid)?;
        trim_reference(job, &mut drawn).ok()?;
        let measured = measure(job, bench, &drawn).ok()?;
        let over = excess(job, &measured, pin(job), 1.0);
        if over == 0.0 {
            return Some(Resolved {
                exact: Sized {
                    plan: plan.clone(),
                    shapes,
                },
                area: exact.area,
                overhead: overhead(&exact),
                drawn,
                drawn_area: measured.area,
            });
        }
        if over > HOPELESS {
            break;
        }
        inside -= 1.0 - INSIDE;
        correct(desk, &measured, 1.0, inside);
        slp::descend(desk, 0.03);
        on_grid = desk.shapes();
    }
    None
}

/// Voltages the reference pin may have, V to ground.
fn pin(job: &Job) -> [f64; 2] {
    match job.spec.reference {
        crate::spec::Reference::Current { range, .. } => [range.least.0, range.most.0],
        crate::spec::Reference::Resistor { .. } => [0.0, 0.9 * job.spec.supply.least.0],
    }
}
