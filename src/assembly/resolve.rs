//! The same network for other limits: its structure is held and all sizes are solved for again,
//! from sizes that are nearly right.
//!
//! Differences between two such answers are prices, and a price may be smaller than what rounding
//! to the manufacturing grid does to an area. So each answer has two forms. The *exact* one has
//! its sizes as they come out, and is what areas are compared by. The *drawn* one is on the grid,
//! and shows that the limits can be kept by a network that can be built. Both are solved as whole
//! circuits at every corner and keep every limit, or there is no answer.

use super::build::{build, build_exact};
use super::candidates::Want;
use super::desk::{self, Desk};
use super::plan::Ledger;
use super::polish::{correct, excess};
use super::resize::Sized;
use super::slp;
use crate::cells::Shape;
use crate::network::bench::Bench;
use crate::network::measure::{Measured, PLAIN_FALL, measure, trim_reference};
use crate::network::probes::{Pool, Probes};
use crate::network::{Job, Network, corners};
use crate::spec::Rail;

/// Limits on paper stay this share inside: half of it is what drawing to the grid may use up.
const INSIDE: f64 = 0.9995;
/// Paper and circuit agree on every limit when a correction moves none by more than this share.
const AGREED: f64 = 2e-4;
/// Further rounds for an answer that is not inside its limits after all.
const EXTRA: usize = 3;
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
    /// A gain of this share of area ends a descent.
    pub gain: f64,
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

impl Effort {
    /// Counts more effort in.
    pub fn add(&mut self, more: Effort) {
        self.evaluations += more.evaluations;
        self.solutions += more.solutions;
    }
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
    for round in 0..=pace.rounds + EXTRA {
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
            if round == pace.rounds + EXTRA || over > HOPELESS {
                return None;
            }
            inside -= 1.0 - INSIDE;
        }
        let before = desk.wants.clone();
        calibrate(desk, &measured, inside);
        if round > 0 && over == 0.0 && shift(&before, &desk.wants) < AGREED {
            best = Some((shapes, measured));
            break;
        }
        slp::settle(desk, radius, pace.gain);
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
        calibrate(desk, &measured, inside);
        slp::descend(desk, 0.03);
        on_grid = desk.shapes();
    }
    None
}

/// Moves the limits on paper so that paper and whole circuit agree where they stand, `inside` of the
/// spec's. Output resistances and falls are set by what paper and circuit say of the same leg: a start far
/// outside a stepped limit must not be taken for a paper that is wrong by as much.
fn calibrate(desk: &mut Desk, measured: &Measured, inside: f64) {
    correct(desk, measured, 1.0, inside);
    for (k, output) in desk.ledger.job.spec.outputs.iter().enumerate() {
        let member = &desk.plan.members[desk.plan.legs[k]];
        let rail = member.rail as usize;
        let probe = |volts: f64| {
            let index = desk.pool.probes[rail].index(volts);
            &desk.pool.shapes[rail][member.candidate].probes[index]
        };
        let low = probe(output.range.least.0);
        let worst = &measured.worst[k];
        if let Some(least) = output.output_resistance {
            let circuit = worst.resistance * desk.wants[k].current;
            if circuit.is_finite() && circuit > 0.0 && low.early > 0.0 {
                let asked = least.0 * desk.wants[k].current;
                desk.wants[k].early = asked * (low.early / circuit) / inside;
            }
        }
        if worst.limit.is_none() {
            let middle = probe((output.range.least.0 + output.range.most.0) / 2.0);
            let paper = 1.0 - (1.0 + low.error[0]) / (1.0 + middle.error[0]);
            // Far from the limit the two say little about each other.
            if paper > 0.3 * PLAIN_FALL && worst.fall > 0.3 * PLAIN_FALL {
                let fall = PLAIN_FALL * inside * (paper / worst.fall);
                desk.wants[k].fall = fall / desk::OF_FALL;
            }
        }
    }
    desk.renew();
}

/// The largest share by which a correction moved a limit.
fn shift(before: &[Want], after: &[Want]) -> f64 {
    let moved = |a: f64, b: f64| {
        if a == b { 0.0 } else { (b / a - 1.0).abs() }
    };
    let pairs = before.iter().zip(after);
    pairs
        .map(|(a, b)| moved(a.limit, b.limit).max(moved(a.early, b.early)))
        .fold(0.0, f64::max)
}

/// Voltages the reference pin may have, V to ground.
fn pin(job: &Job) -> [f64; 2] {
    match job.spec.reference {
        crate::spec::Reference::Current { range, .. } => [range.least.0, range.most.0],
        crate::spec::Reference::Resistor { .. } => [0.0, 0.9 * job.spec.supply.least.0],
    }
}
