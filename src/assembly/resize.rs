//! A structure with sizes of its own, off the shelf, taken to other limits: what it costs there
//! after its sizes have been refined, on paper and as a drawing.

use super::build;
use super::candidates::Candidate;
use super::desk::Desk;
use super::plan::{Ledger, Plan, Price};
use super::polish::{self, Effort, Polished};
use super::slp;
use crate::cells::Shape;
use crate::network::bench::Bench;
use crate::network::probes::{Pool, Probes};
use crate::network::{Job, Network, corners};
use crate::spec::Rail;

/// A plan and one shape per member.
#[derive(Debug, Clone, PartialEq)]
pub struct Sized {
    /// The plan; its members' candidates mean nothing.
    pub plan: Plan,
    /// Shapes, one per member.
    pub shapes: Vec<Shape>,
}

impl Sized {
    /// What a network was drawn from.
    pub fn of(network: &Network) -> Sized {
        let (plan, shapes) = build::plan_of(network);
        Sized { plan, shapes }
    }
}

/// One set of limits to size structures for.
pub struct Limits<'a> {
    job: Job<'a>,
    /// No shapes, only where legs are probed.
    pool: Pool,
    candidates: [Vec<Candidate>; 2],
}

impl<'a> Limits<'a> {
    /// The limits of a job.
    pub fn of(job: Job<'a>) -> Limits<'a> {
        let probes = [Rail::Sink, Rail::Source].map(|rail| Probes::of(&job, rail));
        Limits {
            job,
            pool: Pool {
                probes,
                shapes: [Vec::new(), Vec::new()],
            },
            candidates: [Vec::new(), Vec::new()],
        }
    }

    fn ledger(&self) -> Ledger<'_> {
        let budget = self.job.spec.overhead_limit();
        Ledger::new(self.job, &self.pool, &self.candidates, 1.0, budget)
    }

    /// Refines sizes on paper within a first trust region of `radius`: the structure with its new
    /// sizes, its price, and the evaluations spent. `None` where a shape cannot be solved.
    pub fn refined(&self, from: &Sized, radius: f64) -> Option<(Sized, Price, u64)> {
        let ledger = self.ledger();
        let mut desk = Desk::new(&ledger, &from.plan, &from.shapes)?;
        slp::descend(&mut desk, radius);
        let price = desk.price();
        let sized = Sized {
            plan: from.plan.clone(),
            shapes: desk.shapes(),
        };
        Some((sized, price, desk.evaluations))
    }

    /// Polishes and draws: the least network that keeps every limit but the area, solved as a
    /// whole at every corner, or the one that comes closest; the evaluations and the DC solutions
    /// spent.
    pub fn drawn(&self, from: &Sized, effort: Effort, seed: u64) -> (Option<Polished>, u64, u64) {
        let ledger = self.ledger();
        let mut bench = Bench::new(self.job, corners::verified(&self.job));
        let (plan, shapes) = (&from.plan, &from.shapes);
        let (best, evaluations) =
            polish::polish(&ledger, &mut bench, plan, shapes, 1.0, effort, seed);
        (best, evaluations, bench.solutions)
    }
}
