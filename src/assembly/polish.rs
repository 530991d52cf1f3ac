//! Polishing: with the structure of a network fixed, its continuous sizes are refined together by
//! gradient-free methods (argmin), then the drawing is solved as one circuit and the limits on
//! paper are corrected by what the whole showed, until the drawing meets the spec.
//!
//! Sizes of one family at a time: Nelder & Mead, Computer Journal 7, 1965. How the families share
//! area and error among themselves, a scale of length per family: particle swarm, Kennedy &
//! Eberhart, Proc. ICNN 1995. Violations are charged by an exact penalty. The correction is space
//! mapping (Bandler et al., IEEE Trans. MTT 42, 1994): the paper model is the coarse one, the
//! whole circuit the fine one.

use super::build::build;
use super::desk::{Desk, shape_of, variables};
use super::plan::{Ledger, Plan};
use super::slp;
use crate::cells::Shape;
use crate::cells::solved::Solved;
use crate::network::bench::Bench;
use crate::network::measure::{Measured, PLAIN_FALL, measure, trim_reference};
use crate::network::{Job, Network};
use crate::numeric::scalar::exp;
use argmin::core::{CostFunction, Error, Executor, State};
use argmin::solver::neldermead::NelderMead;
use argmin::solver::particleswarm::ParticleSwarm;
use rand::SeedableRng;
use rand_pcg::Pcg64Mcg;
use std::cell::RefCell;

/// Limits on paper stay a hair inside, so that the last digits of a snapped size do not decide.
const INSIDE: f64 = 0.9995;
/// Further rounds for a network that is not inside its limits after all.
const EXTRA: usize = 8;
/// Excess beyond which short steps will not get there.
const HOPELESS: f64 = 0.05;

/// How hard to polish.
#[derive(Debug, Clone, Copy)]
pub struct Effort {
    /// Corrections by the whole circuit.
    pub rounds: usize,
    /// Nelder-Mead iterations per family and sweep.
    pub iterations: u64,
    /// Particles and iterations of the swarm.
    pub swarm: (usize, u64),
}

/// A polished network with its measurement.
#[derive(Debug, Clone)]
pub struct Polished {
    /// The drawing.
    pub network: Network,
    /// Measured at every corner.
    pub measured: Measured,
    /// How far its limits are exceeded, as [`excess`] says; 0 meets the spec.
    pub excess: f64,
    /// Scale of the accuracy limits it was held to.
    pub tighten: f64,
}

/// The sizes of one family.
struct OneFamily<'d, 'l, 'a> {
    desk: &'d RefCell<Desk<'l, 'a>>,
    family: usize,
    like: Shape,
}

impl CostFunction for OneFamily<'_, '_, '_> {
    type Param = Vec<f64>;
    type Output = f64;
    fn cost(&self, x: &Vec<f64>) -> Result<f64, Error> {
        let mut desk = self.desk.borrow_mut();
        // Infinity, not an error: argmin would abandon the whole run.
        if !desk.put(self.family, &shape_of(&self.like, x)) {
            return Ok(f64::INFINITY);
        }
        Ok(desk.cost())
    }
}

/// A scale of length for every family, inversion kept: area and error shift between them.
struct AllScales<'d, 'l, 'a> {
    desk: &'d RefCell<Desk<'l, 'a>>,
    like: Vec<Shape>,
}

/// Scales every family's lengths; false where one cannot be solved.
fn apply_scales(desk: &mut Desk, like: &[Shape], x: &[f64]) -> bool {
    like.iter().zip(x).enumerate().all(|(f, (shape, s))| {
        desk.put(
            f,
            &Shape {
                length: shape.length * exp(*s),
                ..*shape
            },
        )
    })
}

impl CostFunction for AllScales<'_, '_, '_> {
    type Param = Vec<f64>;
    type Output = f64;
    fn cost(&self, x: &Vec<f64>) -> Result<f64, Error> {
        let mut desk = self.desk.borrow_mut();
        if !apply_scales(&mut desk, &self.like, x) {
            return Ok(f64::INFINITY);
        }
        Ok(desk.cost())
    }
}

/// Nelder-Mead over one family's sizes, from where they are.
fn refine_family(desk: &RefCell<Desk>, f: usize, iterations: u64, step: f64) {
    let like = desk.borrow().shapes()[f];
    let start = variables(&like);
    let before = desk.borrow_mut().cost();
    let mut simplex = vec![start.clone()];
    for i in 0..start.len() {
        let mut x = start.clone();
        x[i] += step;
        simplex.push(x);
    }
    let solver = match NelderMead::new(simplex).with_sd_tolerance(before * 1e-5) {
        Ok(solver) => solver,
        Err(_) => return,
    };
    let run = Executor::new(
        OneFamily {
            desk,
            family: f,
            like,
        },
        solver,
    )
    .configure(|state| state.max_iters(iterations))
    .timer(false)
    .run();
    let mut desk = desk.borrow_mut();
    let best = run.ok().and_then(|r| {
        let state = r.state();
        (state.get_best_cost() < before)
            .then(|| state.get_best_param().cloned())
            .flatten()
    });
    let kept = best.is_some_and(|x| desk.put(f, &shape_of(&like, &x)));
    if !kept {
        desk.put(f, &like);
    }
}

/// A particle swarm over the families' scales, around where they are.
fn refine_scales(desk: &RefCell<Desk>, swarm: (usize, u64), seed: u64) {
    let like = desk.borrow().shapes();
    let before = desk.borrow_mut().cost();
    let n = like.len();
    let bounds = (vec![-0.02; n], vec![0.02; n]);
    // The generator is set explicitly: the default one would seed itself from the system.
    let solver =
        ParticleSwarm::new(bounds, swarm.0).with_rng_generator(Pcg64Mcg::seed_from_u64(seed));
    let problem = AllScales {
        desk,
        like: like.clone(),
    };
    let run = Executor::new(problem, solver)
        .configure(|state| state.max_iters(swarm.1))
        .timer(false)
        .run();
    let best = run.ok().and_then(|r| {
        let state = r.state();
        let best = state.get_best_param()?;
        (best.cost < before).then(|| best.position.clone())
    });
    let mut desk = desk.borrow_mut();
    let kept = best.is_some_and(|x| apply_scales(&mut desk, &like, &x));
    if !kept {
        for (f, shape) in like.iter().enumerate() {
            desk.put(f, shape);
        }
    }
}

/// How far a measured network exceeds its limits: the sum over all of excess over limit.
/// `tighten` scales accuracy limits.
pub fn excess(job: &Job, measured: &Measured, pin: [f64; 2], tighten: f64) -> f64 {
    let limits = &job.spec.limits;
    let mut sum = 0.0;
    for (output, worst) in job.spec.outputs.iter().zip(&measured.worst) {
        if let Some(limit) = worst.limit {
            sum += (worst.error / (limit * tighten) - 1.0).max(0.0);
        }
        if worst.limit.is_none() {
            sum += (worst.fall / PLAIN_FALL - 1.0).max(0.0);
        }
        if let Some(least) = output.output_resistance {
            sum += (least.0 / worst.resistance - 1.0).max(0.0);
        }
    }
    let overhead = measured.overhead.iter().copied().fold(0.0, f64::max);
    for limit in [
        limits.overhead_current.map(|l| l.0),
        limits.power.map(|l| l.0 / job.spec.supply.most.0),
    ] {
        sum += limit.map_or(0.0, |l| (overhead / l - 1.0).max(0.0));
    }
    for &volts in &measured.pin {
        sum += (pin[0] - volts).max(0.0) + (volts - pin[1]).max(0.0);
    }
    sum
}

/// Refines a plan's sizes on paper. Returns its shapes solved, one per member, and the evaluations
/// spent; `None` where a shape cannot be solved again.
pub fn refine(
    ledger: &Ledger,
    plan: &Plan,
    shapes: &[Shape],
    radius: f64,
) -> Option<(Vec<Solved>, u64)> {
    let mut desk = Desk::new(ledger, plan, shapes)?;
    slp::descend(&mut desk, radius);
    Some((desk.solved(), desk.evaluations))
}

/// Polishes a plan against the spec's own limits, accuracy scaled by `tighten`. Returns the least network that met every limit when solved as a whole, or the
/// one that came closest; and the evaluations spent.
pub fn polish<'a>(
    ledger: &Ledger<'a>,
    bench: &mut Bench<'a>,
    plan: &Plan,
    shapes: &[Shape],
    tighten: f64,
    effort: Effort,
    seed: u64,
) -> (Option<Polished>, u64) {
    let job = ledger.job;
    let Some(desk) = Desk::new(ledger, plan, shapes) else {
        return (None, 0);
    };
    let desk = RefCell::new(desk);
    // Exact penalty: an excess of 1 % costs a tenth of the area.
    let area = {
        let mut desk = desk.borrow_mut();
        desk.cost() * 1e-12
    };
    desk.borrow_mut().charge = 10.0 * area;
    let mut best: Option<Polished> = None;
    let mut inside = INSIDE;
    for round in 0..effort.rounds + EXTRA {
        if round >= effort.rounds {
            // Only to get inside: a little more room than last time, small steps.
            if best.as_ref().is_some_and(|b| b.excess == 0.0) {
                break;
            }
            inside -= 1.0 - INSIDE;
        }
        if round > 0 || effort.iterations > 0 {
            let radius = if round < effort.rounds { 0.06 } else { 0.03 };
            slp::settle(&mut desk.borrow_mut(), radius, 1e-5);
            // The swarm and the simplex finish what straight lines leave: kinks where the worst
            // corner changes.
            if round + 2 == effort.rounds && effort.swarm.0 > 0 {
                refine_scales(&desk, effort.swarm, seed);
            }
            if round + 2 == effort.rounds {
                for f in 0..plan.members.len() {
                    refine_family(&desk, f, effort.iterations, 0.03);
                }
            }
        }
        let shapes = desk.borrow().shapes();
        let Some(mut network) = build(&job, plan, &shapes) else {
            break;
        };
        if trim_reference(&job, &mut network).is_err() {
            break;
        }
        let Ok(measured) = measure(&job, bench, &network) else {
            break;
        };
        let over = excess(&job, &measured, ledger.pin_to_ground(), tighten);
        let candidate = Polished {
            network,
            measured,
            excess: over,
            tighten,
        };
        correct(&mut desk.borrow_mut(), &candidate.measured, tighten, inside);
        let better = best.as_ref().is_none_or(|b| {
            if candidate.excess > 0.0 || b.excess > 0.0 {
                candidate.excess < b.excess
            } else {
                candidate.measured.area < b.measured.area
            }
        });
        let hopeless = round >= effort.rounds && candidate.excess > HOPELESS;
        if better {
            best = Some(candidate);
        }
        if hopeless {
            break;
        }
    }
    let evaluations = desk.borrow().evaluations;
    (best, evaluations)
}

/// Moves the limits on paper so that paper and whole circuit agree where they stand.
pub(super) fn correct(desk: &mut Desk, measured: &Measured, tighten: f64, inside: f64) {
    let shares = desk.shares();
    for (k, worst) in measured.worst.iter().enumerate() {
        let output = &desk.ledger.job.spec.outputs[k];
        if let Some(limit) = worst.limit {
            // On paper the error is share * limit on paper; in the circuit it is worst.error.
            let paper = shares[k][0].max(shares[k][1]) * desk.wants[k].limit;
            if worst.error > 0.0 && paper > 0.0 {
                desk.wants[k].limit = (limit * tighten * inside) * (paper / worst.error);
            }
        }
        if worst.limit.is_none() && worst.fall > PLAIN_FALL {
            desk.wants[k].fall *= PLAIN_FALL * inside / worst.fall;
        }
        if let Some(least) = output.output_resistance {
            let asked = desk.ledger.wants[k].early;
            // Only a shortfall is corrected: a leg stiffer than asked needs no stiffer limit.
            let short = least.0 / worst.resistance;
            if short > 1.0 {
                desk.wants[k].early = desk.wants[k].early.max(asked) * short / inside;
            }
        }
    }
    desk.renew();
}
