//! The pool: shapes of every cell on both rails, swept on a grid, screened by closed forms, and
//! the survivors solved at every climate.

use crate::cells::solved::{Failure, Solved, Solver};
use crate::cells::{CELLS, Cell, Shape, Tech};
use crate::network::Job;
use crate::network::corners::climates;
use crate::network::probes::{Pool, Probes};
use crate::network::work::Work;
use crate::numeric::scalar::{exp, ln};
use crate::spec::{Effort, Rail};
use rayon::prelude::*;
use std::collections::BTreeMap;
use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// Shapes handed to one task: fixed, so that the order of work never depends on the threads.
const CHUNK: usize = 64;

/// The grid of one cell.
fn grid(tech: &Tech, cell: usize, effort: Effort, headroom: f64) -> Vec<Shape> {
    let (lengths, inversions, cascodes, drops) = match effort {
        Effort::Quick => (10, 8, 3, 2),
        Effort::Normal => (14, 11, 3, 3),
        Effort::Thorough => (20, 16, 3, 3),
    };
    let mosfet = tech.mosfet();
    let (shortest, longest) = (mosfet.length.least.0, mosfet.length.most.0);
    let snap = |l: f64| {
        let snapped = (l / mosfet.grid.0).round() * mosfet.grid.0;
        snapped.clamp(shortest, longest)
    };
    let lengths: Vec<f64> = steps(shortest, longest, lengths)
        .into_iter()
        .map(snap)
        .collect();
    let inversions = steps(0.03, 60.0, inversions);
    let parts = CELLS[cell].parts();
    let cascode_sizes: Vec<(f64, f64)> = if parts.cascode {
        let ratio = [1.0, 2.5, 6.0, 15.0];
        ratio[..cascodes]
            .iter()
            .flat_map(|r| [0.3, 3.0].map(|ic| (snap(shortest * r), ic)))
            .collect()
    } else {
        vec![(0.0, 0.0)]
    };
    let drops: Vec<f64> = match (parts.drop, parts.cascode) {
        (false, _) => vec![0.0],
        // Beyond the mirror device's saturation voltage.
        (true, true) => [0.03, 0.08, 0.0, 0.15][..drops].to_vec(),
        // Across the degeneration resistor.
        (true, false) => steps(0.05, (headroom * 0.8).max(0.1), drops),
    };
    let mut shapes = Vec::new();
    for &length in &lengths {
        for &inversion in &inversions {
            for &(cascode_length, cascode_inversion) in &cascode_sizes {
                for &drop in &drops {
                    shapes.push(Shape {
                        cell,
                        length,
                        inversion,
                        cascode_length,
                        cascode_inversion,
                        drop,
                    });
                }
            }
        }
    }
    shapes
}

/// `n` values from `least` to `most`, evenly spaced in the logarithm.
fn steps(least: f64, most: f64, n: usize) -> Vec<f64> {
    if n < 2 || most <= least {
        return vec![least];
    }
    let ratio = ln(most / least) / (n - 1) as f64;
    (0..n).map(|i| least * exp(ratio * i as f64)).collect()
}

/// Closed-form screening: false where no output of the rail and no feeder could use the shape.
///
/// The closed forms leave out what shortens a device's life in saturation, so a shape is only
/// excluded where even half of its closed-form saturation voltage does not fit.
pub fn could_serve(job: &Job, tech: &Tech, shape: &Shape) -> bool {
    let cell = CELLS[shape.cell];
    let supply = job.spec.supply.most.0;
    // The input leg hangs between the rails; a fast, hot corner takes less than the closed form.
    if 0.5 * cell.input_voltage(tech, shape) > supply {
        return false;
    }
    // An output leg lives somewhere below the supply, or at an output's own low end.
    let highest = job
        .spec
        .outputs
        .iter()
        .filter(|o| o.rail == tech.rail)
        .map(|o| o.range.least.0)
        .fold(supply, f64::max);
    0.5 * cell.least_output(tech, shape) <= highest
}

/// Sweeps and solves at the spec's effort. `advance` hears of shapes done and shapes in all.
pub fn sweep(
    job: &Job,
    work: &mut Work,
    advance: &(dyn Fn(u64, u64) + Sync),
    stop: &AtomicBool,
) -> Pool {
    sweep_at(job, job.spec.search.effort, work, advance, stop)
}

/// Sweeps and solves at an effort. Once `stop` is set, what is not yet solved is left out.
pub fn sweep_at(
    job: &Job,
    effort: Effort,
    work: &mut Work,
    advance: &(dyn Fn(u64, u64) + Sync),
    stop: &AtomicBool,
) -> Pool {
    let climates = climates(job);
    let current = job.spec.reference.current().0;
    let probes = [Rail::Sink, Rail::Source].map(|rail| Probes::of(job, rail));
    let mut tasks: Vec<(usize, usize, Vec<Shape>)> = Vec::new();
    for rail in [Rail::Sink, Rail::Source] {
        let tech = job.tech(rail);
        let headroom = job
            .spec
            .outputs
            .iter()
            .filter(|o| o.rail == rail)
            .map(|o| o.range.least.0)
            .fold(0.0, f64::max);
        for (index, cell) in CELLS.iter().enumerate() {
            if !usable(job, *cell) {
                continue;
            }
            let shapes = grid(&tech, index, effort, headroom);
            work.shapes += shapes.len() as u64;
            let kept: Vec<Shape> = shapes
                .iter()
                .copied()
                .filter(|s| could_serve(job, &tech, s))
                .collect();
            work.screened_out += (shapes.len() - kept.len()) as u64;
            tasks.extend(
                kept.chunks(CHUNK)
                    .map(|c| (rail as usize, index, c.to_vec())),
            );
        }
    }
    let total: u64 = tasks.iter().map(|t| t.2.len() as u64).sum();
    advance(0, total);
    let done = AtomicU64::new(0);
    let results: Vec<(Vec<Result<Solved, Failure>>, u64)> = tasks
        .par_iter()
        .map(|(rail, cell, shapes)| {
            if stop.load(Ordering::Relaxed) {
                return (Vec::new(), 0);
            }
            let tech = job.tech([Rail::Sink, Rail::Source][*rail]);
            let mut solver = Solver::new(tech, *cell, current, &probes[*rail].volts, &climates);
            let out = shapes.iter().map(|s| solver.solve(s)).collect();
            let so_far = done.fetch_add(shapes.len() as u64, Ordering::Relaxed);
            advance(so_far + shapes.len() as u64, total);
            (out, solver.solutions)
        })
        .collect();
    let mut shapes = [Vec::new(), Vec::new()];
    let mut failures: BTreeMap<String, u64> = BTreeMap::new();
    for ((rail, cell, _), (solved, solutions)) in tasks.iter().zip(results) {
        work.dc_solutions += solutions;
        for result in solved {
            match result {
                Ok(s) => {
                    work.solved += 1;
                    shapes[*rail].push(s);
                }
                // The closed forms found no size: excluded before any solution.
                Err(Failure::NoSize) => work.screened_out += 1,
                Err(Failure::NotConverged) => {
                    *failures.entry(CELLS[*cell].name().to_owned()).or_default() += 1;
                }
            }
        }
    }
    work.not_converged.extend(failures);
    Pool { probes, shapes }
}

/// Some shapes of a pool, one in `step` of each rail, solved where another job probes them.
pub fn again(job: &Job, pool: &Pool, step: usize, work: &mut Work, stop: &AtomicBool) -> Pool {
    let climates = climates(job);
    let current = job.spec.reference.current().0;
    let probes = [Rail::Sink, Rail::Source].map(|rail| Probes::of(job, rail));
    let mut shapes = [Vec::new(), Vec::new()];
    for rail in [Rail::Sink, Rail::Source] {
        let (r, tech) = (rail as usize, job.tech(rail));
        let mut solvers: BTreeMap<usize, Solver> = BTreeMap::new();
        for known in pool.shapes[r].iter().step_by(step.max(1)) {
            if stop.load(Ordering::Relaxed) {
                break;
            }
            let solver = solvers.entry(known.shape.cell).or_insert_with_key(|&cell| {
                Solver::new(tech, cell, current, &probes[r].volts, &climates)
            });
            // What does not converge here did where it was first solved, and is counted there.
            shapes[r].extend(solver.solve(&known.shape));
        }
        work.dc_solutions += solvers.values().map(|s| s.solutions).sum::<u64>();
    }
    Pool { probes, shapes }
}

/// Whether the card allows a cell at all.
fn usable(job: &Job, cell: &dyn Cell) -> bool {
    job.card.resistor.is_some() || !cell.parts().resistor
}
