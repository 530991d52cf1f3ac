//! The pipeline on one screen: spec -> pool -> networks -> front -> [`Outcome`].

mod advice;
mod describe;
mod limit;
mod outcome;
mod prices;

pub use advice::{Advice, Change, Explanation, Impossible};
pub use limit::Limit;
pub use outcome::*;

use crate::assembly::build;
use crate::assembly::candidates::{self, Candidate};
use crate::assembly::columns::Feeds;
use crate::assembly::improve::{Menu, Scored, Search};
use crate::assembly::plan::{Ledger, Plan};
use crate::assembly::polish::{self, Polished};
use crate::assembly::workshop::{Refined, Workshop};
use crate::network::bench::Bench;
use crate::network::probes::Pool;
use crate::network::{Job, corners, measure};
use crate::spec::Effort;
use crate::{figures, front, proof, search};
use rayon::prelude::*;
use serde::Serialize;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// Who watches an exploration; progress is an observer, never part of the loop.
pub trait Observer: Sync {
    /// A stage begins, with so many steps ahead.
    fn stage(&self, name: &'static str, steps: u64);
    /// So many steps of the present stage are done.
    fn advance(&self, done: u64);
}

/// Nobody watches.
pub struct Silent;

impl Observer for Silent {
    fn stage(&self, _: &'static str, _: u64) {}
    fn advance(&self, _: u64) {}
}

/// What a first look says, before anything is searched.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Estimate {
    /// Per output of the spec, the cells that can serve it alone, cheapest first; empty where none
    /// can.
    pub outputs: Vec<OutputEstimate>,
    /// Area of a quick network on paper, m^2, where one was found.
    pub area: Option<f64>,
    /// Its overhead current, A.
    pub overhead: Option<f64>,
    /// Whether that network on paper keeps every limit.
    pub fits: bool,
}

/// One output in an [`Estimate`].
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct OutputEstimate {
    /// Name in the spec.
    pub name: String,
    /// Cells that can serve it: catalogue name and least area of a leg, m^2.
    pub cells: Vec<(String, f64)>,
}

/// Explores a spec. `stop` may be set at any time; the front found so far is then returned.
pub fn explore(job: &Job, observer: &dyn Observer, stop: &AtomicBool) -> Outcome {
    let mut work = Work::default();
    observer.stage("solving shapes", 0);
    let progress = |done, total| {
        if done == 0 {
            observer.stage("solving shapes", total);
        }
        observer.advance(done);
    };
    let pool = search::pool::sweep(job, &mut work, &progress, stop);
    let effort = Thoroughness::of(job.spec.search.effort);
    let mut drawn: Vec<Polished> = Vec::new();
    for &tighten in &tightenings(job) {
        // A sweep that was cut short leaves too few shapes to build from.
        if stop.load(Ordering::Relaxed) {
            break;
        }
        drawn.extend(networks(
            job, &pool, tighten, &effort, observer, stop, &mut work,
        ));
    }
    let mut outcome = finish(job, &drawn, work, observer, stop);
    if let Status::NothingFits { why, .. } = &mut outcome.status {
        let work = &mut outcome.work;
        *why = advice::explain(job, &pool, &drawn, observer, stop, work);
    }
    if outcome.status == Status::Found {
        observer.stage("proving how small a network can be", 0);
        outcome.proof = prove(job, &pool, &outcome.front, &mut outcome.work);
    }
    outcome
}

/// Lower bounds for the networks of a front.
fn prove(job: &Job, pool: &Pool, front: &[NetworkReport], work: &mut Work) -> Option<Proof> {
    let prover = proof::Prover::new(job, pool)?;
    work.dc_solutions += prover.solutions;
    let figure = |network: &NetworkReport, name: &str| {
        network.figure(name).map_or(f64::INFINITY, |f| f.value)
    };
    let networks: Vec<(f64, f64)> = front
        .iter()
        .map(|n| (figure(n, "overhead_current"), figure(n, "area")))
        .collect();
    let bounds = prover.prove(&networks);
    Some(Proof {
        declared: prover.declared,
        bounds,
    })
}

/// Networks for one scale of the accuracy limits, down a ladder of overhead budgets.
///
/// Column generation over the pool and a MILP make the first network; local search takes it from
/// there, rung by rung. Then generations: every rung's network is refined, its shapes join the
/// shelf, the MILP recombines all families found so far, and local search goes on from the best.
fn networks(
    job: &Job,
    pool: &Pool,
    tighten: f64,
    effort: &Thoroughness,
    observer: &dyn Observer,
    stop: &AtomicBool,
    work: &mut Work,
) -> Vec<Polished> {
    // Nominal currents are what a plan adds up; at the worst corner they are a little more.
    let limit = job.spec.overhead_limit() * 0.997;
    let mut shop = Workshop::open(*job, pool, tighten, limit, effort.levels, stop);
    let seed = job.spec.search.seed.wrapping_mul(1_000_003);
    observer.stage(
        "searching networks",
        (2 + effort.ladder * (effort.generations + 1)) as u64,
    );
    let done = AtomicU64::new(0);
    let step = || observer.advance(done.fetch_add(1, Ordering::Relaxed) + 1);
    let suggested = shop.columns(limit, effort.column_rounds, work);
    step();
    let assembled = shop.assembled(limit, &suggested, effort.nodes);
    count(work, assembled.as_ref().map(|a| a.1));
    let starts: Vec<&Plan> = assembled.iter().map(|a| &a.0).collect();
    let tops: Vec<Scored> = (0..effort.tops as usize)
        .into_par_iter()
        .with_max_len(ALONE)
        .map(|i| {
            let i = i as u64;
            // One from the MILP's network, the others from scratch.
            let starts: &[&Plan] = if i == 0 { &starts } else { &[] };
            shop.search(
                limit,
                starts,
                i > 0,
                effort.rounds,
                seed.wrapping_add(7919 * i),
            )
        })
        .collect();
    step();
    let top = tops
        .iter()
        .fold(&tops[0], |a, b| if b.score < a.score { b } else { a })
        .clone();
    // From the limit down, or from twice what the least area wants where nothing bounds it.
    let most = limit.min(2.0 * top.price.overhead);
    let mut budgets: Vec<f64> = (0..effort.ladder)
        .map(|i| most * LADDER_STEP.powi(i as i32))
        .collect();
    let mut found: Vec<Scored> = budgets
        .par_iter()
        .with_max_len(ALONE)
        .enumerate()
        .map(|(i, &budget)| {
            let seed = seed.wrapping_add(1 + i as u64);
            let start = &tops[i % tops.len()].plan;
            let found = shop.search(budget, &[&top.plan, start], true, effort.rounds, seed);
            step();
            found
        })
        .collect();
    let mut best: Vec<Scored> = found.clone();
    for generation in 0..effort.generations {
        // The first shapes come from a coarse grid, later ones were refined before.
        let radius = if generation == 0 { 0.25 } else { 0.1 };
        let refined: Vec<Option<Refined>> = budgets
            .par_iter()
            .with_max_len(ALONE)
            .zip(&found)
            .map(|(&budget, scored)| shop.refine(budget, &scored.plan, radius))
            .collect();
        for (i, refined) in refined.into_iter().enumerate() {
            let Some(refined) = refined else { continue };
            let plan = shop.shelve(refined, work);
            let scored = shop.score(budgets[i], &plan);
            // What a rung inherited from its neighbour may exceed its own budget.
            let held = shop.score(budgets[i], &best[i].plan);
            best[i] = if scored.score < held.score {
                scored
            } else {
                held
            };
        }
        if generation + 1 == effort.generations || stop.load(Ordering::Relaxed) {
            break;
        }
        spread(
            &mut budgets,
            &mut best,
            job.spec.limits.area.map_or(f64::INFINITY, |l| l.0),
        );
        let next: Vec<(Scored, Option<bool>)> = budgets
            .par_iter()
            .with_max_len(ALONE)
            .enumerate()
            .map(|(i, &budget)| {
                let near = |j: usize| j.abs_diff(i) <= 1;
                let plans: Vec<&Plan> = (0..best.len())
                    .filter(|&j| near(j))
                    .map(|j| &best[j].plan)
                    .collect();
                let instances = shop.instances(&plans);
                let assembled = shop.assembled(budget, &instances, effort.nodes);
                let mut starts = plans;
                starts.extend(assembled.as_ref().map(|a| &a.0));
                let seed = seed.wrapping_add((100 * (generation + 1) + i) as u64);
                let found = shop.search(budget, &starts, false, effort.rounds, seed);
                step();
                (found, assembled.as_ref().map(|a| a.1))
            })
            .collect();
        for (_, proved) in &next {
            count(work, *proved);
        }
        found = next.into_iter().map(|n| n.0).collect();
    }
    observer.stage("polishing and verifying", best.len() as u64);
    let done = AtomicU64::new(0);
    let corners = corners::verified(job);
    let quick = stop.load(Ordering::Relaxed);
    let how = if quick {
        polish::Effort {
            iterations: 0,
            ..effort.polish
        }
    } else {
        effort.polish
    };
    let polished: Vec<(Option<Polished>, u64, u64)> = budgets
        .par_iter()
        .with_max_len(ALONE)
        .zip(&best)
        .enumerate()
        .map(|(i, (&budget, scored))| {
            let ledger = shop.ledger(budget);
            let mut bench = Bench::new(*job, corners.clone());
            let shapes = build::shapes(&ledger, &scored.plan);
            let (best, evaluations) = polish::polish(
                &ledger,
                &mut bench,
                &scored.plan,
                &shapes,
                tighten,
                how,
                seed.wrapping_add(i as u64),
            );
            observer.advance(done.fetch_add(1, Ordering::Relaxed) + 1);
            (best, evaluations, bench.solutions)
        })
        .collect();
    let mut out = Vec::new();
    for (best, evaluations, solutions) in polished {
        work.polish_evaluations += evaluations;
        work.dc_solutions += solutions;
        work.networks_verified += u64::from(best.is_some());
        out.extend(best);
    }
    out
}

/// Moves rungs that found nothing of their own into the widest gaps of the front: an epsilon
/// sweep whose steps follow the front. Budgets stay in falling order, each with its best so far.
fn spread(budgets: &mut Vec<f64>, best: &mut Vec<Scored>, area: f64) {
    /// An excess that the final polish settles.
    const NEARLY: f64 = 2e-3;
    /// A network this much over the area limit may yet come under it.
    const SHRINKS: f64 = 1.15;
    /// Rungs closer than this (ratio) would find the same network again.
    const CLOSE: f64 = 1.03;
    let points: Vec<Vec<f64>> = best
        .iter()
        .map(|s| vec![s.score, s.price.overhead])
        .collect();
    let kept: Vec<usize> = front::nondominated(&points)
        .into_iter()
        .filter(|&i| best[i].price.excess < NEARLY && best[i].price.area < SHRINKS * area)
        .collect();
    if kept.is_empty() {
        return;
    }
    let idle = budgets.len() - kept.len();
    // A kept rung asks for what it found and no more: the next one must do with less.
    let mut rungs: Vec<(f64, Scored)> = kept
        .iter()
        .map(|&i| (best[i].price.overhead, best[i].clone()))
        .collect();
    rungs.sort_by(|a, b| b.0.total_cmp(&a.0));
    // Below the last rung a network may or may not exist: one small step at a time.
    let floor = rungs[rungs.len() - 1].0 * 0.9;
    for _ in 0..idle {
        let ratio = |i: usize| rungs[i].0 / rungs.get(i + 1).map_or(floor, |r| r.0);
        let widest = (0..rungs.len()).fold(0, |w, i| if ratio(i) > ratio(w) { i } else { w });
        if ratio(widest) < CLOSE * CLOSE {
            break;
        }
        let budget = rungs[widest].0 / ratio(widest).sqrt();
        let start = rungs[widest].1.clone();
        rungs.insert(widest + 1, (budget, start));
    }
    *budgets = rungs.iter().map(|r| r.0).collect();
    *best = rungs.into_iter().map(|r| r.1).collect();
}

/// Counts a MILP that ended in a network: proved, or stopped at its limit.
fn count(work: &mut Work, proved: Option<bool>) {
    match proved {
        Some(true) => work.milps_proved += 1,
        Some(false) => work.milps_stopped += 1,
        // Its instances make no network: nothing was optimised.
        None => {}
    }
}

/// The front of what was drawn, or the network that comes closest.
fn finish(
    job: &Job,
    drawn: &[Polished],
    mut work: Work,
    observer: &dyn Observer,
    stop: &AtomicBool,
) -> Outcome {
    let corners = corners::verified(job);
    let mut bench = Bench::new(*job, corners.clone());
    let mut fine = Bench::new(*job, corners::with_nominal_supply(job));
    let mut report = |p: &Polished| -> Option<NetworkReport> {
        let mut measured = p.measured.clone();
        bench.place(&p.network);
        measure::headroom(job, &mut bench, &mut measured).ok()?;
        describe::describe(job, &mut fine, &p.network, &measured, &corners).ok()
    };
    let mut fits: Vec<(NetworkReport, &Polished)> = Vec::new();
    let mut nearest: Option<NetworkReport> = None;
    let breach = |r: &NetworkReport| r.broken.iter().map(breach_of).sum::<f64>();
    for p in drawn {
        let Some(described) = report(p) else { continue };
        if described.broken.is_empty() {
            fits.push((described, p));
        } else if nearest
            .as_ref()
            .is_none_or(|n| breach(&described) < breach(n))
        {
            nearest = Some(described);
        }
    }
    work.dc_solutions += bench.solutions + fine.solutions;
    let trade: Vec<_> = job
        .spec
        .trade
        .iter()
        .filter_map(|name| figures::named(name))
        .collect();
    let point = |r: &NetworkReport| -> Vec<f64> {
        trade
            .iter()
            .map(|f| {
                let value = r.figure(f.name()).map_or(0.0, |v| v.value);
                match f.better() {
                    figures::Better::Less => value,
                    figures::Better::More => -value,
                }
            })
            .collect()
    };
    let points: Vec<Vec<f64>> = fits.iter().map(|(r, _)| point(r)).collect();
    let mut kept = front::distinct(&points, NEARLY_SAME);
    kept.sort_by(|&a, &b| area_of(&fits[a].0).total_cmp(&area_of(&fits[b].0)));
    let mut front: Vec<NetworkReport> = kept.iter().map(|&i| fits[i].0.clone()).collect();
    let built: Vec<&Polished> = kept.iter().map(|&i| fits[i].1).collect();
    for (i, network) in front.iter_mut().enumerate() {
        network.rank = i + 1;
    }
    let points: Vec<Vec<f64>> = front.iter().map(point).collect();
    let prices = choose(job, &points)
        .filter(|_| !stop.load(Ordering::Relaxed))
        .and_then(|chosen| prices::prices(job, &front, &built, chosen, observer, stop, &mut work));
    let stopped = stop.load(Ordering::Relaxed);
    let status = if stopped {
        // Whether anything fits is then not known.
        Status::Interrupted
    } else if front.is_empty() {
        let broken = nearest
            .as_ref()
            .map(|n| n.broken.clone())
            .unwrap_or_default();
        Status::NothingFits {
            broken,
            why: Explanation::default(),
        }
    } else {
        Status::Found
    };
    let nearest = if front.is_empty() && !stopped {
        nearest.map(Box::new)
    } else {
        None
    };
    Outcome {
        spec: job.spec.clone(),
        card_title: job.card.title.clone(),
        status,
        front,
        nearest,
        prices,
        proof: None,
        work,
    }
}

/// Which network of a front (by its traded figures, less being better) is priced, and why.
fn choose(job: &Job, points: &[Vec<f64>]) -> Option<(usize, Chosen)> {
    let knee = front::knee::knee(points)?;
    Some(match job.spec.search.price_of {
        None => (knee, Chosen::Knee),
        Some(rank) if (1..=points.len()).contains(&(rank as usize)) => {
            (rank as usize - 1, Chosen::Asked)
        }
        Some(asked) => (knee, Chosen::Beyond { asked }),
    })
}

fn area_of(report: &NetworkReport) -> f64 {
    report.figure("area").map_or(f64::INFINITY, |f| f.value)
}

/// How far a broken limit is exceeded, as a share of it.
fn breach_of(b: &Broken) -> f64 {
    if b.value > b.limit {
        b.value / b.limit - 1.0
    } else {
        b.limit / b.value.max(1e-30) - 1.0
    }
}

/// Scales of the accuracy limits to look at: one, or several where accuracy is traded.
fn tightenings(job: &Job) -> Vec<f64> {
    let traded = |name: &str| job.spec.trade.iter().any(|t| t == name);
    if traded("current_error") || traded("error_share") {
        vec![1.0, 0.85, 0.7, 0.55]
    } else {
        vec![1.0]
    }
}

/// Networks nearer to each other than this share in every traded figure are one point of the front.
const NEARLY_SAME: f64 = 0.005;

/// Rungs handed to a thread at once: they are few and long, and of very different length.
const ALONE: usize = 1;

/// Next rung of the budget ladder.
const LADDER_STEP: f64 = 0.87;

/// Numbers behind a search effort.
struct Thoroughness {
    /// Rungs of the budget ladder.
    ladder: usize,
    /// Searches from scratch before the ladder.
    tops: u64,
    /// Restarts of the local search per rung and generation.
    rounds: usize,
    /// Generations of refinement and recombination.
    generations: usize,
    /// Levels of collected variance in the master problem.
    levels: usize,
    /// Rounds of column generation at most.
    column_rounds: usize,
    /// Branch-and-bound nodes of a MILP.
    nodes: u64,
    polish: polish::Effort,
}

impl Thoroughness {
    fn of(effort: Effort) -> Thoroughness {
        let polish = |rounds, iterations, swarm| polish::Effort {
            rounds,
            iterations,
            swarm,
        };
        match effort {
            Effort::Quick => Thoroughness {
                ladder: 6,
                tops: 2,
                rounds: 1,
                generations: 1,
                levels: 5,
                column_rounds: 8,
                nodes: 60,
                polish: polish(2, 8, (4, 2)),
            },
            Effort::Normal => Thoroughness {
                ladder: 12,
                tops: 4,
                rounds: 2,
                generations: 3,
                levels: 6,
                column_rounds: 12,
                nodes: 100,
                polish: polish(3, 12, (6, 4)),
            },
            Effort::Thorough => Thoroughness {
                ladder: 20,
                tops: 16,
                rounds: 15,
                generations: 6,
                levels: 8,
                column_rounds: 60,
                nodes: 2000,
                polish: polish(6, 80, (20, 30)),
            },
        }
    }
}

/// A first look at a spec, in well under a second.
pub fn estimate(job: &Job) -> Estimate {
    let mut work = Work::default();
    let stop = AtomicBool::new(false);
    let pool = search::pool::sweep_at(job, Effort::Quick, &mut work, &|_, _| {}, &stop);
    let wants = candidates::wants(job, 1.0);
    let all = Candidate::all(job, &wants, &pool);
    let ledger = Ledger::new(*job, &pool, &all, 1.0, job.spec.overhead_limit());
    let outputs = job
        .spec
        .outputs
        .iter()
        .enumerate()
        .map(|(k, output)| OutputEstimate {
            name: output.name.clone(),
            cells: candidates::cells_for(&all[output.rail as usize], k, &wants[k]),
        })
        .collect();
    let feeds = Feeds::of(&ledger, 5);
    let menu = Menu::of(&ledger, &feeds);
    let mut search = Search::new(&ledger, &menu, &stop);
    let first = search.first();
    let found = search.descend(first);
    Estimate {
        outputs,
        area: Some(found.price.area),
        overhead: Some(found.price.overhead),
        fits: found.price.excess == 0.0
            && job.spec.limits.area.is_none_or(|l| found.price.area <= l.0),
    }
}
