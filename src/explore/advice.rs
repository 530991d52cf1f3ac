//! When nothing fits: which limits collide, and the least that one of them, or a few together, would
//! have to give.
//!
//! Every question is asked of a spec with other limits, through the same paper model, polish and
//! measurement that an ordinary exploration goes through. One limit at a time is set free, the
//! structures of the failed exploration (and what local search makes of them) are sized for the
//! freed spec, and the limit is closed in on from both sides. An advice is a drawn network that, at
//! every corner, breaks no limit of the relaxed spec. "Least" is therefore the least that was found:
//! that it suffices is verified, that nothing less would is not proved.

use super::describe;
use super::limit::Limit;
use super::outcome::NetworkReport;
use super::{NEARLY_SAME, Observer};
use crate::assembly::alone::{self, Reach};
use crate::assembly::build;
use crate::assembly::plan::{Plan, Price};
use crate::assembly::polish::{self, Polished};
use crate::assembly::resize::{Limits, Sized};
use crate::assembly::workshop::Workshop;
use crate::network::bench::Bench;
use crate::network::probes::Pool;
use crate::network::work::Work;
use crate::network::{Job, corners, measure};
use crate::numeric::scalar::ln;
use crate::search;
use crate::spec::{Effort, Rail, Spec};
use rayon::prelude::*;
use serde::Serialize;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// Why nothing fits, and what would.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Explanation {
    /// What no network of any size can do, whatever its budgets. Empty where every output can be
    /// served alone: the limits then collide with each other.
    pub impossible: Vec<Impossible>,
    /// What would make the spec feasible: changes of one limit, or, where none suffices, one advice
    /// of several together.
    pub advice: Vec<Advice>,
    /// Whether every limit was tried: false where the run was stopped before.
    pub complete: bool,
}

/// A demand that no network of any size meets.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Impossible {
    /// The output whose limits are out of reach; `None` where it is a limit of the whole network.
    pub output: Option<String>,
    /// The nearest possible values, each with all others kept; empty where none alone is enough.
    pub nearest: Vec<Change>,
}

/// Changes that make the spec feasible, with the network that shows it.
#[derive(Debug, Clone, PartialEq)]
pub struct Advice {
    /// The limits that give.
    pub changes: Vec<Change>,
    /// A network that meets the relaxed spec at every corner.
    pub network: Box<NetworkReport>,
}

/// One limit with another value.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Change {
    /// Key of the spec: `area`, `overhead_current`, `power`, `range`, `accuracy`,
    /// `output_resistance`.
    pub key: String,
    /// Which end of a range: `low` or `high`.
    pub end: Option<String>,
    /// The output it belongs to; `None` for budgets and the reference pin.
    pub output: Option<String>,
    /// Value in the spec, SI.
    pub from: f64,
    /// Value that it would need, SI.
    pub to: f64,
    /// SI unit symbol, "1" for a fraction.
    pub unit: String,
}

impl Change {
    fn of(spec: &Spec, limit: Limit, to: f64) -> Change {
        Change {
            key: limit.key().to_owned(),
            end: limit.end().map(str::to_owned),
            output: limit.output().map(|k| spec.outputs[k].name.clone()),
            from: limit.value(spec).unwrap_or(f64::NAN),
            to,
            unit: limit.unit().to_owned(),
        }
    }

    /// The spec with this change made.
    pub fn applied(&self, spec: &Spec) -> Spec {
        let same = |limit: &Limit| {
            limit.key() == self.key
                && limit.end() == self.end.as_deref()
                && limit.output().map(|k| &spec.outputs[k].name) == self.output.as_ref()
        };
        let found = Limit::all(spec).into_iter().find(same);
        found.map_or_else(|| spec.clone(), |limit| limit.set(spec, self.to))
    }
}

impl Advice {
    /// The spec with all changes made.
    pub fn applied(&self, spec: &Spec) -> Spec {
        let change = |spec: Spec, change: &Change| change.applied(&spec);
        self.changes.iter().fold(spec.clone(), change)
    }
}

/// Structures of the failed exploration that questions start from.
const SEEDS: usize = 3;
/// An excess on paper that the polish settles.
const SETTLED: f64 = 2e-3;
/// A structure this far from fitting (as a share) with a limit set free may still come to fit after
/// local search; one further away will not.
const WITHIN: f64 = 0.3;
/// The same after local search, for what closing in and polishing gain.
const NEARLY: f64 = 0.03;
/// First step outwards from a limit: 5 % of it, or 10 mV.
const STEP: [f64; 2] = [0.05, 0.01];
/// Steps between the last value that failed and the first that worked.
const CLOSING: usize = 4;
/// Steps of a drawn network around the value found on paper: half a per cent, or 2 mV.
const NUDGE: [f64; 2] = [0.005, 0.002];
/// Doublings of that step at most.
const NUDGES: usize = 5;
/// Budgets tried between a limit of current and the current of the least network.
const BUDGETS: usize = 8;
/// Nominal currents are what a plan adds up; at the worst corner they are a little more.
const NOMINAL: f64 = 0.997;

const POLISH: polish::Effort = polish::Effort {
    rounds: 2,
    iterations: 1,
    swarm: (0, 0),
};

/// Explains why no network was found for a spec. `drawn` are the networks that came out nearest.
pub fn explain(
    job: &Job,
    pool: &Pool,
    drawn: &[Polished],
    observer: &dyn Observer,
    stop: &AtomicBool,
    work: &mut Work,
) -> Explanation {
    let advisor = Advisor {
        job: *job,
        pool,
        seed: job.spec.search.seed.wrapping_mul(1_000_003),
        stop,
    };
    let spec = job.spec;
    let (reach, solutions) = alone::reach(job, pool, stop);
    work.dc_solutions += solutions;
    let (impossible, first) = advisor.impossible(&reach, work);
    let seeds = advisor.seeds(drawn);
    // Where one thing is out of reach at any size, only its own limits can help; where several are,
    // no single one can.
    let tried: Vec<Limit> = match impossible.len() {
        0 => Limit::all(spec),
        1 => {
            let own = |limit: &Limit| match reach.iter().position(Option::is_some) {
                Some(k) => limit.output() == Some(k),
                None => first.iter().any(|f| f.0 == *limit),
            };
            Limit::all(spec).into_iter().filter(own).collect()
        }
        _ => Vec::new(),
    };
    observer.stage("asking what would fit", tried.len() as u64);
    let done = AtomicU64::new(0);
    let answers: Vec<(Option<Advice>, Work)> = tried
        .par_iter()
        .map(|&limit| {
            let mut work = Work::default();
            let answer = advisor.alone(limit, drawn, &seeds, !impossible.is_empty(), &mut work);
            observer.advance(done.fetch_add(1, Ordering::Relaxed) + 1);
            (answer, work)
        })
        .collect();
    let mut advice = Vec::new();
    for (answer, spent) in answers {
        add(work, &spent);
        advice.extend(answer);
    }
    if advice.is_empty() && !advisor.stopped() {
        advice.extend(advisor.together(&first, drawn, &seeds, work));
    }
    Explanation {
        impossible,
        advice,
        complete: !advisor.stopped(),
    }
}

/// Adds what a question cost.
fn add(work: &mut Work, spent: &Work) {
    work.dc_solutions += spent.dc_solutions;
    work.polish_evaluations += spent.polish_evaluations;
    work.networks_verified += spent.networks_verified;
}

struct Advisor<'a> {
    job: Job<'a>,
    pool: &'a Pool,
    seed: u64,
    stop: &'a AtomicBool,
}

/// A structure sized for some limits, and how far it is from keeping them.
#[derive(Clone)]
struct Fit {
    sized: Sized,
    /// Above 0: what is missing, as a share of the limits; below: the room left in the area.
    gap: f64,
}

impl<'a> Advisor<'a> {
    fn stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    fn job_of<'s>(&'s self, spec: &'s Spec) -> Job<'s> {
        Job {
            spec,
            card: self.job.card,
        }
    }

    /// What no network of any size can do, and the limit that is easiest to loosen for each.
    fn impossible(
        &self,
        reach: &[Option<Reach>],
        work: &mut Work,
    ) -> (Vec<Impossible>, Vec<(Limit, f64)>) {
        let spec = self.job.spec;
        let mut list = Vec::new();
        let mut first = Vec::new();
        let mut note = |output: Option<String>, nearest: Vec<(Limit, f64)>| {
            let nearest: Vec<(Limit, f64)> = nearest
                .into_iter()
                .map(|(limit, value)| (limit, limit.outward(value)))
                .collect();
            // The least change by its share of the limit.
            let share = |&(limit, value): &(Limit, f64)| {
                ln(value / limit.value(spec).unwrap_or(value)).abs()
            };
            let easiest = nearest
                .iter()
                .copied()
                .min_by(|a, b| share(a).total_cmp(&share(b)));
            first.extend(easiest);
            list.push(Impossible {
                output,
                nearest: nearest
                    .iter()
                    .map(|&(limit, value)| Change::of(spec, limit, value))
                    .collect(),
            });
        };
        // Whatever feeds the network comes from the supply, and is no output.
        let reference = spec.reference.current().0;
        if spec.overhead_limit() < reference {
            let least = [
                (Limit::OverheadCurrent, reference),
                (Limit::Power, reference * spec.supply.most.0),
            ];
            let short = least
                .into_iter()
                .filter(|&(limit, value)| limit.value(spec).is_some_and(|asked| asked < value));
            for one in short {
                note(None, vec![one]);
            }
        }
        let (lowest, solutions) = alone::lowest_pin(&self.job, self.pool);
        work.dc_solutions += solutions;
        if let Some(lowest) = lowest {
            let (limit, needed) = match spec.reference.rail() {
                Rail::Sink => (Limit::PinMost, lowest),
                Rail::Source => (Limit::PinLeast, spec.supply.least.0 - lowest),
            };
            if limit
                .value(spec)
                .is_some_and(|asked| limit.looser(needed, asked))
            {
                note(None, vec![(limit, needed)]);
            }
        }
        for (k, reach) in reach.iter().enumerate() {
            let Some(reach) = reach else { continue };
            let nearest = [
                (Limit::Accuracy(k), reach.accuracy),
                (Limit::LowEnd(k), reach.low),
                (Limit::HighEnd(k), reach.high),
                (Limit::OutputResistance(k), reach.resistance),
            ];
            let nearest = nearest
                .into_iter()
                .filter_map(|(limit, value)| Some((limit, value?)))
                .collect();
            note(Some(spec.outputs[k].name.clone()), nearest);
        }
        (list, first)
    }

    /// The networks nearest to the spec, different ones, nearest first.
    fn seeds(&self, drawn: &[Polished]) -> Vec<Sized> {
        let spec = self.job.spec;
        let mut ranked: Vec<&Polished> = drawn.iter().collect();
        ranked.sort_by(|a, b| missing(spec, a).total_cmp(&missing(spec, b)));
        let mut seeds: Vec<Sized> = Vec::new();
        for polished in ranked {
            let sized = Sized::of(&polished.network);
            if seeds.len() < SEEDS && seeds.iter().all(|s| s.plan != sized.plan) {
                seeds.push(sized);
            }
        }
        seeds
    }

    /// The least relaxation of one limit that was found to suffice alone.
    fn alone(
        &self,
        limit: Limit,
        drawn: &[Polished],
        seeds: &[Sized],
        fresh: bool,
        work: &mut Work,
    ) -> Option<Advice> {
        let spec = self.job.spec;
        if self.stopped() {
            return None;
        }
        match limit {
            Limit::Area => {
                let kept = drawn.iter().filter(|p| p.excess == 0.0);
                let least = kept.min_by(|a, b| a.measured.area.total_cmp(&b.measured.area))?;
                let value = limit.outward(least.measured.area);
                self.verified(&[(limit, value)], least, work)
            }
            Limit::OverheadCurrent | Limit::Power => self.current(limit, seeds, fresh, work),
            _ => {
                let (value, polished) = self.sized(spec, limit, seeds, fresh, work)?;
                self.verified(&[(limit, value)], &polished, work)
            }
        }
    }

    /// The advice to make some changes, if a network keeps every limit of the spec so relaxed, as
    /// an ordinary exploration would measure it.
    fn verified(
        &self,
        changes: &[(Limit, f64)],
        polished: &Polished,
        work: &mut Work,
    ) -> Option<Advice> {
        let relaxed = relaxed(self.job.spec, changes);
        let job = self.job_of(&relaxed);
        let corners = corners::verified(&job);
        let mut bench = Bench::new(job, corners.clone());
        let mut fine = Bench::new(job, corners::with_nominal_supply(&job));
        let mut measured = measure::measure(&job, &mut bench, &polished.network).ok()?;
        measure::headroom(&job, &mut bench, &mut measured).ok()?;
        let report =
            describe::describe(&job, &mut fine, &polished.network, &measured, &corners).ok()?;
        work.dc_solutions += bench.solutions + fine.solutions;
        work.networks_verified += 1;
        report.broken.is_empty().then(|| Advice {
            changes: changes
                .iter()
                .map(|&(limit, value)| Change::of(self.job.spec, limit, value))
                .collect(),
            network: Box::new(report),
        })
    }

    /// A structure with its sizes refined for a spec.
    fn fit(&self, spec: &Spec, from: &Sized, radius: f64, work: &mut Work) -> Option<Fit> {
        let (sized, price, evaluations) = Limits::of(self.job_of(spec)).refined(from, radius)?;
        work.polish_evaluations += evaluations;
        let gap = gap(spec, &price);
        Some(Fit { sized, gap })
    }

    /// What local search over structures finds for a spec, from some starts.
    fn searched(
        &self,
        spec: &Spec,
        starts: &[Sized],
        fresh: bool,
        budget: f64,
        work: &mut Work,
    ) -> Option<Fit> {
        let job = self.job_of(spec);
        let probed = [Rail::Sink, Rail::Source].iter().all(|&rail| {
            crate::network::probes::Probes::of(&job, rail) == self.pool.probes[rail as usize]
        });
        let swept;
        let pool = if probed {
            self.pool
        } else {
            let mut own = Work::default();
            swept = search::pool::sweep_at(&job, Effort::Quick, &mut own, &|_, _| {}, self.stop);
            add(work, &own);
            &swept
        };
        if self.stopped() {
            return None;
        }
        let mut shop = Workshop::open(job, pool, 1.0, budget, LEVELS, self.stop);
        let plans: Vec<Plan> = starts
            .iter()
            .filter_map(|start| shop.adopt(start, work))
            .collect();
        let plans: Vec<&Plan> = plans.iter().collect();
        let found = shop.search(budget, &plans, fresh, 1, self.seed);
        let ledger = shop.ledger(budget);
        let sized = Sized {
            shapes: build::shapes(&ledger, &found.plan),
            plan: found.plan,
        };
        self.fit(spec, &sized, 0.25, work)
    }

    /// Draws a structure for a spec; the network where it keeps every limit, else how far it is
    /// from that.
    fn drawn(&self, spec: &Spec, from: &Sized, work: &mut Work) -> Result<Polished, f64> {
        let limits = Limits::of(self.job_of(spec));
        let (polished, evaluations, solutions) = limits.drawn(from, POLISH, self.seed);
        work.polish_evaluations += evaluations;
        work.dc_solutions += solutions;
        let polished = polished.ok_or(f64::INFINITY)?;
        work.networks_verified += 1;
        match missing(spec, &polished) {
            0.0 => Ok(polished),
            missing => Err(missing),
        }
    }

    /// The least value of a limit that sizes decide (all but those of current), the other limits of
    /// `spec` kept, and the network that keeps it.
    fn sized(
        &self,
        spec: &Spec,
        limit: Limit,
        seeds: &[Sized],
        fresh: bool,
        work: &mut Work,
    ) -> Option<(f64, Polished)> {
        let start = limit.value(spec)?;
        let loosest = limit.loosest(spec);
        if !limit.looser(loosest, start) {
            return None;
        }
        let budget = spec.overhead_limit() * NOMINAL;
        let open = limit.set(spec, loosest);
        let mut best: Option<Fit> = None;
        for seed in seeds {
            if let Some(fit) = self.fit(&open, seed, 0.25, work)
                && best.as_ref().is_none_or(|b| fit.gap < b.gap)
            {
                best = Some(fit);
            }
        }
        let best_gap = best.as_ref().map_or(f64::INFINITY, |b| b.gap);
        if (best_gap > WITHIN && !fresh) || self.stopped() {
            return None;
        }
        let mut from: Vec<Sized> = best.iter().map(|b| b.sized.clone()).collect();
        if best_gap > 0.0 {
            from.extend(seeds.iter().cloned());
            let found = self.searched(&open, &from, fresh, budget, work)?;
            if found.gap < best_gap {
                best = Some(found);
            }
        }
        let best = best.filter(|b| b.gap <= NEARLY)?;
        let (inside, outside) = (limit.place(start), limit.place(loosest));
        let (mut place, mut fit) = self.close(spec, limit, [inside, outside], best, work);
        // What local search makes of it where it will stand, not where everything goes.
        let there = limit.set(spec, limit.at(place));
        let starts = [fit.sized.clone()];
        if let Some(found) = self.searched(&there, &starts, fresh, budget, work)
            && found.gap < fit.gap - NEARLY_SAME
            && found.gap <= 0.0
        {
            (place, fit) = self.close(spec, limit, [inside, place], found, work);
        }
        self.settle(spec, limit, place, &fit.sized, work)
    }

    /// Closes in on the least place of a limit at which a structure fits on paper. `places` are the
    /// limit's own, and one where `fit` fits.
    fn close(
        &self,
        spec: &Spec,
        limit: Limit,
        places: [f64; 2],
        fit: Fit,
        work: &mut Work,
    ) -> (f64, Fit) {
        let [mut dead, mut alive] = places;
        let mut dead_gap: Option<f64> = None;
        let mut best = fit;
        let at = |place: f64| limit.set(spec, limit.at(place));
        let mut step = STEP[usize::from(limit.end().is_some())];
        // Outwards from the limit: most advice is near it.
        let mut from = best.sized.clone();
        while dead + step < alive && !self.stopped() {
            let place = dead + step;
            let Some(fit) = self.fit(&at(place), &from, 0.25, work) else {
                break;
            };
            if fit.gap <= 0.0 {
                (alive, best) = (place, fit);
                break;
            }
            from = fit.sized;
            (dead, dead_gap) = (place, Some(fit.gap));
            step *= 2.0;
        }
        for _ in 0..CLOSING {
            if self.stopped() || alive - dead < 0.002 {
                break;
            }
            // Straight line between the two gaps, where both say something.
            let share = match dead_gap {
                Some(gap) if best.gap < -1e-3 && gap < 1.0 => {
                    (gap / (gap - best.gap)).clamp(0.2, 0.8)
                }
                _ => 0.5,
            };
            let place = dead + share * (alive - dead);
            match self.fit(&at(place), &best.sized, 0.1, work) {
                Some(fit) if fit.gap <= 0.0 => (alive, best) = (place, fit),
                Some(fit) => (dead, dead_gap) = (place, Some(fit.gap)),
                None => dead = place,
            }
        }
        (alive, best)
    }

    /// Draws at a place and nudges it: outwards until the drawn network keeps every limit, inwards
    /// while it still does.
    fn settle(
        &self,
        spec: &Spec,
        limit: Limit,
        place: f64,
        from: &Sized,
        work: &mut Work,
    ) -> Option<(f64, Polished)> {
        let own = limit.value(spec)?;
        let nudge = NUDGE[usize::from(limit.end().is_some())];
        let draw = |place: f64, work: &mut Work| {
            let value = limit.outward(limit.at(place));
            if !limit.looser(value, own) {
                return None;
            }
            let network = self.drawn(&limit.set(spec, value), from, work).ok()?;
            Some((value, network))
        };
        let mut found = draw(place, work);
        let inwards = found.is_some();
        let mut step = nudge;
        for _ in 0..NUDGES {
            if self.stopped() {
                break;
            }
            let next = draw(if inwards { place - step } else { place + step }, work);
            match (inwards, next) {
                (true, Some(better)) => found = Some(better),
                (true, None) => break,
                (false, Some(first)) => {
                    found = Some(first);
                    break;
                }
                (false, None) => {}
            }
            step *= 2.0;
        }
        found
    }

    /// The least relaxation of a limit of current: structures decide it, so a ladder of budgets is
    /// searched between the limit and what the least network takes.
    fn current(
        &self,
        limit: Limit,
        seeds: &[Sized],
        fresh: bool,
        work: &mut Work,
    ) -> Option<Advice> {
        let spec = self.job.spec;
        let own = limit.value(spec)?;
        let volts = match limit {
            Limit::Power => spec.supply.most.0,
            _ => 1.0,
        };
        let open = limit.set(spec, limit.loosest(spec));
        let most = open.overhead_limit() * NOMINAL;
        let top = self.searched(&open, seeds, true, most, work)?;
        if top.gap > WITHIN {
            return None;
        }
        let taken: f64 = overhead(&top.sized.plan);
        let least = own / volts;
        if taken <= least {
            // It is not the current that is missing.
            return None;
        }
        let ratio = ln(taken * 1.02 / least) / BUDGETS as f64;
        let rungs: Vec<(Option<(f64, Polished)>, Work)> = (1..=BUDGETS)
            .into_par_iter()
            .map(|i| {
                let mut work = Work::default();
                if self.stopped() {
                    return (None, work);
                }
                let budget = least * crate::numeric::scalar::exp(ratio * i as f64);
                let value = limit.outward(budget * volts);
                let spec = limit.set(spec, value);
                let mut starts = vec![top.sized.clone()];
                starts.extend(seeds.iter().cloned());
                let budget = spec.overhead_limit() * NOMINAL;
                let found = self
                    .searched(&spec, &starts, fresh, budget, &mut work)
                    .filter(|f| f.gap <= NEARLY)
                    .and_then(|f| self.drawn(&spec, &f.sized, &mut work).ok());
                (found.map(|network| (value, network)), work)
            })
            .collect();
        let mut best = None;
        for (found, spent) in rungs {
            add(work, &spent);
            best = best.or(found);
        }
        let (_, polished) = best?;
        // What it takes at its worst corner, rather than what it was allowed.
        let amps = polished
            .measured
            .overhead
            .iter()
            .copied()
            .fold(0.0, f64::max);
        let value = limit.outward(amps * volts);
        self.verified(&[(limit, value)], &polished, work)
    }

    /// Where no limit alone suffices: several together. What is out of reach is first brought within
    /// it, then whatever the nearest network still breaks is let go, then every limit is taken back
    /// as far as the others allow.
    fn together(
        &self,
        first: &[(Limit, f64)],
        drawn: &[Polished],
        seeds: &[Sized],
        work: &mut Work,
    ) -> Option<Advice> {
        /// Beyond the edge of what is possible, networks get infinitely large.
        const ROOM: f64 = 0.05;
        let own = self.job.spec;
        let mut changes: Vec<(Limit, f64)> = first
            .iter()
            .map(|&(limit, value)| {
                let room = match limit.end() {
                    Some(_) => ROOM * value.abs().max(0.1),
                    None => ROOM,
                };
                let place = limit.place(value) + room;
                let most = limit.place(limit.loosest(own));
                (limit, limit.outward(limit.at(place.min(most))))
            })
            .collect();
        let mut near: Vec<Polished> = Vec::new();
        if changes.is_empty() {
            near.extend(drawn.iter().cloned());
        } else {
            let spec = relaxed(own, &changes);
            let budget = spec.overhead_limit() * NOMINAL;
            let found = self.searched(&spec, seeds, true, budget, work)?;
            let limits = Limits::of(self.job_of(&spec));
            let (polished, evaluations, solutions) = limits.drawn(&found.sized, POLISH, self.seed);
            work.polish_evaluations += evaluations;
            work.dc_solutions += solutions;
            near.extend(polished);
        }
        let spec = relaxed(own, &changes);
        let nearest = near
            .iter()
            .min_by(|a, b| missing(&spec, a).total_cmp(&missing(&spec, b)))?;
        self.let_go(&spec, nearest, &mut changes)?;
        let mut best = self.verified(&changes, nearest, work)?;
        let mut network = nearest.clone();
        // The costliest change first: it is the one to be rid of.
        let cost = |&(limit, value): &(Limit, f64)| {
            let from = limit.value(own).unwrap_or(value);
            (ln(value.max(1e-30) / from.max(1e-30))).abs()
        };
        changes.sort_by(|a, b| cost(b).total_cmp(&cost(a)));
        for i in 0..changes.len() {
            if self.stopped() {
                break;
            }
            let (limit, value) = changes[i];
            let rest: Vec<(Limit, f64)> = changes
                .iter()
                .enumerate()
                .filter(|&(j, _)| j != i)
                .map(|(_, &change)| change)
                .collect();
            let spec = relaxed(own, &rest);
            let from = Sized::of(&network.network);
            let taken = match limit {
                Limit::Area | Limit::OverheadCurrent | Limit::Power => self
                    .drawn(&spec, &from, work)
                    .ok()
                    .map(|network| (None, network)),
                _ => self.taken_back(&spec, limit, value, &from, work),
            };
            let Some((value, better)) = taken else {
                continue;
            };
            let mut next = changes.clone();
            match value {
                Some(value) => next[i].1 = value,
                None => next[i].1 = limit.value(own).unwrap_or(next[i].1),
            }
            let kept: Vec<(Limit, f64)> = next
                .iter()
                .copied()
                .filter(|&(limit, value)| limit.value(own) != Some(value))
                .collect();
            if let Some(advice) = self.verified(&kept, &better, work) {
                (best, network, changes) = (advice, better, next);
            }
        }
        let order = Limit::all(own);
        let place = |change: &Change| {
            order
                .iter()
                .position(|&limit| Change::of(own, limit, change.to) == *change)
        };
        best.changes.sort_by_key(place);
        Some(best)
    }

    /// Adds to the changes what a network still breaks, as far as it breaks it. `None` where
    /// something is broken that no limit sets.
    fn let_go(
        &self,
        spec: &Spec,
        polished: &Polished,
        changes: &mut Vec<(Limit, f64)>,
    ) -> Option<()> {
        let job = self.job_of(spec);
        let corners = corners::verified(&job);
        let mut bench = Bench::new(job, corners.clone());
        let mut measured = measure::measure(&job, &mut bench, &polished.network).ok()?;
        measure::headroom(&job, &mut bench, &mut measured).ok()?;
        for broken in describe::broken(&job, &measured, &corners) {
            let k = || {
                let name = broken.output.as_ref()?;
                spec.outputs.iter().position(|o| &o.name == name)
            };
            let limit = match broken.figure.as_str() {
                "area" => Limit::Area,
                "overhead_current" => Limit::OverheadCurrent,
                "power" => Limit::Power,
                "current_error" => Limit::Accuracy(k()?),
                "headroom" => Limit::LowEnd(k()?),
                "output_resistance" => Limit::OutputResistance(k()?),
                "reference_voltage" if broken.value > broken.limit => Limit::PinMost,
                "reference_voltage" => Limit::PinLeast,
                _ => return None,
            };
            let value = limit.outward(broken.value);
            match changes.iter_mut().find(|c| c.0 == limit) {
                Some(change) => change.1 = value,
                None => changes.push((limit, value)),
            }
        }
        Some(())
    }

    /// Takes one of several changes back: whole (`None`) or to a lesser value.
    fn taken_back(
        &self,
        spec: &Spec,
        limit: Limit,
        value: f64,
        from: &Sized,
        work: &mut Work,
    ) -> Option<(Option<f64>, Polished)> {
        if let Ok(network) = self.drawn(spec, from, work) {
            return Some((None, network));
        }
        let start = limit.value(spec)?;
        let fit = self.fit(&limit.set(spec, value), from, 0.1, work)?;
        let places = [limit.place(start), limit.place(value)];
        let (place, fit) = self.close(spec, limit, places, fit, work);
        let (less, network) = self.settle(spec, limit, place, &fit.sized, work)?;
        limit.looser(value, less).then_some((Some(less), network))
    }
}

/// Levels of collected variance in the master problem that stocks a shelf.
const LEVELS: usize = 5;

fn relaxed(spec: &Spec, changes: &[(Limit, f64)]) -> Spec {
    changes.iter().fold(spec.clone(), |spec, &(limit, value)| {
        limit.set(&spec, value)
    })
}

/// Overhead current of a plan, A.
fn overhead(plan: &Plan) -> f64 {
    let legs = plan.members.iter();
    legs.map(|m| m.current + m.bias.map_or(0.0, |b| b.0)).sum()
}

/// How far a plan is from keeping a spec's limits; below 0 the share of the area that is left.
fn gap(spec: &Spec, price: &Price) -> f64 {
    let area = spec.limits.area.map_or(-1.0, |l| ln(price.area / l.0));
    if price.excess > SETTLED {
        price.excess + area.max(0.0)
    } else {
        area
    }
}

/// How far a drawn network is from keeping a spec's limits; 0 where it does.
fn missing(spec: &Spec, polished: &Polished) -> f64 {
    let area = spec
        .limits
        .area
        .map_or(0.0, |l| (polished.measured.area / l.0 - 1.0).max(0.0));
    polished.excess + area
}
