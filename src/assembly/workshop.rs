//! Where networks of one set of limits are made: the shapes worth using, what each could do, and
//! the plans found so far. Refined shapes come back onto the shelf, for other networks to use.

use super::build;
use super::candidates::{Candidate, Want, wants};
use super::columns::{Feeds, generate};
use super::desk::Desk;
use super::improve::{Menu, Scored, Search};
use super::milp::{Instance, assemble, instances, instances_of_columns};
use super::plan::{Clerk, Ledger, Plan};
use super::polish;
use super::resize::Sized;
use crate::cells::solved::Solved;
use crate::network::Job;
use crate::network::probes::Pool;
use crate::network::work::Work;
use rand::SeedableRng;
use rand_pcg::Pcg64Mcg;
use std::sync::atomic::AtomicBool;

/// Instances a MILP may choose among: beyond this it takes longer than it is worth.
const INSTANCES: usize = 40;

/// Shapes on the shelf and what is made of them.
pub struct Workshop<'a> {
    job: Job<'a>,
    wants: Vec<Want>,
    tighten: f64,
    pool: Pool,
    candidates: [Vec<Candidate>; 2],
    menu: Menu,
    feeds: Feeds,
    stop: &'a AtomicBool,
}

/// A plan refined on paper: its shapes are not on the shelf yet.
pub struct Refined {
    plan: Plan,
    solved: Vec<Solved>,
    evaluations: u64,
}

impl<'a> Workshop<'a> {
    /// A workshop for a job's limits with accuracy limits scaled by `tighten`, stocked with the
    /// shapes of `pool` that win some contest at the overhead `limit` (A).
    pub fn open(
        job: Job<'a>,
        pool: &Pool,
        tighten: f64,
        limit: f64,
        levels: usize,
        stop: &'a AtomicBool,
    ) -> Workshop<'a> {
        let wants = wants(&job, tighten);
        let all = Candidate::all(&job, &wants, pool);
        let ledger = Ledger::new(job, pool, &all, tighten, limit);
        let feeds = Feeds::of(&ledger, levels);
        let menu = Menu::of(&ledger, &feeds);
        let shelf = Pool {
            probes: pool.probes.clone(),
            shapes: [0, 1].map(|r| {
                menu.shapes[r]
                    .iter()
                    .map(|&k| pool.shapes[r][all[r][k].index].clone())
                    .collect()
            }),
        };
        let candidates = Candidate::all(&job, &wants, &shelf);
        let menu = menu.renumbered(&wants);
        Workshop {
            job,
            wants,
            tighten,
            pool: shelf,
            candidates,
            menu,
            feeds,
            stop,
        }
    }

    /// The limits at a budget of overhead current, A.
    pub fn ledger(&self, budget: f64) -> Ledger<'_> {
        Ledger::new(self.job, &self.pool, &self.candidates, self.tighten, budget)
    }

    /// Instances suggested by column generation over the shelf at a budget.
    pub fn columns(&self, budget: f64, rounds: usize, work: &mut Work) -> Vec<Instance> {
        let ledger = self.ledger(budget);
        let (columns, done) = generate(
            &ledger,
            &self.feeds,
            &self.menu.shapes,
            self.menu.charge / 3.0,
            rounds,
            self.stop,
        );
        work.rounds += done as u64;
        work.columns += columns.len() as u64;
        instances_of_columns(&self.feeds, &columns[..columns.len().min(INSTANCES)])
    }

    /// The best network of some instances at a budget, and whether that was proved.
    pub fn assembled(
        &self,
        budget: f64,
        instances: &[Instance],
        nodes: u64,
    ) -> Option<(Plan, bool)> {
        let ledger = self.ledger(budget);
        let mut clerk = Clerk::new(&ledger);
        let list = &instances[..instances.len().min(INSTANCES)];
        let answer = assemble(&mut clerk, list, nodes)?;
        Some((answer.plan, answer.proved))
    }

    /// Every different family of some plans.
    pub fn instances(&self, plans: &[&Plan]) -> Vec<Instance> {
        let ledger = self.ledger(f64::INFINITY);
        let plans: Vec<Plan> = plans.iter().map(|&p| p.clone()).collect();
        instances(&mut Clerk::new(&ledger), &plans)
    }

    /// The best plan that local search finds at a budget: from a first plan with `rounds`
    /// restarts where `fresh`, and from every start.
    pub fn search(
        &self,
        budget: f64,
        starts: &[&Plan],
        fresh: bool,
        rounds: usize,
        seed: u64,
    ) -> Scored {
        let ledger = self.ledger(budget);
        let mut rng = Pcg64Mcg::seed_from_u64(seed);
        let mut search = Search::new(&ledger, &self.menu, self.stop);
        let mut best: Option<Scored> = None;
        if fresh || starts.is_empty() {
            let first = search.first();
            best = Some(search.descend(first));
        }
        for start in starts {
            let scored = search.score((*start).clone());
            let next = search.descend(scored);
            if best.as_ref().is_none_or(|b| next.score < b.score) {
                best = Some(next);
            }
        }
        let best = best.expect("there is a first plan or a start");
        search.explore(best, rounds, &mut rng)
    }

    /// Scores a plan at a budget.
    pub fn score(&self, budget: f64, plan: &Plan) -> Scored {
        let ledger = self.ledger(budget);
        Search::new(&ledger, &self.menu, self.stop).score(plan.clone())
    }

    /// Puts the shapes of a structure from elsewhere on the shelf, and returns its plan; `None`
    /// where one of them cannot be solved here.
    pub fn adopt(&mut self, from: &Sized, work: &mut Work) -> Option<Plan> {
        let solved = {
            let ledger = self.ledger(f64::INFINITY);
            Desk::new(&ledger, &from.plan, &from.shapes)?.solved()
        };
        let refined = Refined {
            plan: from.plan.clone(),
            solved,
            evaluations: 0,
        };
        Some(self.shelve(refined, work))
    }

    /// Refines a plan's sizes on paper.
    pub fn refine(&self, budget: f64, plan: &Plan, radius: f64) -> Option<Refined> {
        let ledger = self.ledger(budget);
        let shapes = build::shapes(&ledger, plan);
        let (solved, evaluations) = polish::refine(&ledger, plan, &shapes, radius)?;
        Some(Refined {
            plan: plan.clone(),
            solved,
            evaluations,
        })
    }

    /// Puts refined shapes on the shelf and returns the plan that uses them.
    pub fn shelve(&mut self, refined: Refined, work: &mut Work) -> Plan {
        let Refined {
            mut plan,
            solved,
            evaluations,
        } = refined;
        work.polish_evaluations += evaluations;
        for (member, solved) in plan.members.iter_mut().zip(solved) {
            let rail = member.rail as usize;
            let same = self.pool.shapes[rail]
                .iter()
                .position(|s| s.shape == solved.shape);
            member.candidate = same.unwrap_or_else(|| {
                let index = self.pool.shapes[rail].len();
                let probes = &self.pool.probes[rail];
                let candidate =
                    Candidate::new(&self.job, &self.wants, member.rail, index, &solved, probes);
                self.candidates[rail].push(candidate);
                self.pool.shapes[rail].push(solved);
                self.menu.shapes[rail].push(index);
                index
            });
        }
        for (k, &leg) in plan.legs.iter().enumerate() {
            let index = plan.members[leg].candidate;
            let rail = plan.members[leg].rail as usize;
            let own = &mut self.menu.own[k];
            if self.candidates[rail][index].outputs[k].is_some() && !own.contains(&index) {
                own.push(index);
            }
        }
        plan
    }
}
