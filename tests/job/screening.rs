//! The screen must never turn away a shape that could serve: what it excludes is solved in full.

use super::Task;
use biasloom::cells::solved::{Solved, Solver};
use biasloom::cells::{CELLS, Shape, Tech};
use biasloom::device::constants::thermal_voltage;
use biasloom::network::Job;
use biasloom::network::corners::climates;
use biasloom::network::probes::Probes;
use biasloom::search::pool::could_serve;
use biasloom::spec::{Effort, Rail};
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

fn logarithmic(rng: &mut Pcg64, least: f64, most: f64) -> f64 {
    rng.random_range(least.ln()..most.ln()).exp()
}

/// Far beyond what a grid would hold, so that the screen has something to do.
fn random_shape(rng: &mut Pcg64, tech: &Tech, cell: usize, supply: f64) -> Shape {
    let length = tech.mosfet().length;
    let parts = CELLS[cell].parts();
    let (least, most) = (length.least.0, length.most.0);
    // Saturation voltages up to some 2.6 supplies.
    let strongest = (2.6 * supply / (2.0 * thermal_voltage(tech.nominal()))).powi(2);
    let (cascode_length, cascode_inversion) = if parts.cascode {
        (
            logarithmic(rng, least, most),
            logarithmic(rng, 0.01, strongest),
        )
    } else {
        (0.0, 0.0)
    };
    Shape {
        cell,
        length: logarithmic(rng, least, most),
        inversion: logarithmic(rng, 0.01, strongest),
        cascode_length,
        cascode_inversion,
        drop: if parts.drop {
            logarithmic(rng, 0.01, 2.0 * supply)
        } else {
            0.0
        },
    }
}

/// Whether a solved shape, on a perfect gate line, keeps the limits of some output with no error but
/// its own leg's, and its input and bias legs fit between the rails.
fn usable(job: &Job, rail: Rail, solved: &Solved, probes: &Probes) -> bool {
    let fits = |range: [f64; 2]| range[1] < job.spec.supply.most.0;
    if !fits(solved.input) || !solved.bias.is_none_or(fits) {
        return false;
    }
    job.spec
        .outputs
        .iter()
        .filter(|o| o.rail == rail)
        .any(|output| {
            let current = job.spec.target(output).0;
            let ends = [output.range.least.0, output.range.most.0]
                .map(|v| &solved.probes[probes.index(v)]);
            let stiff = output
                .output_resistance
                .is_none_or(|r| ends[0].early >= r.0 * current);
            let accurate = output.accuracy.is_none_or(|a| {
                ends.iter().all(|p| {
                    let systematic = p.error[0].abs().max(p.error[1].abs());
                    systematic + a.sigma * (p.variance_out / current).sqrt() <= a.limit
                })
            });
            stiff && accurate
        })
}

#[test]
fn nothing_that_could_serve_is_screened_out() {
    let mut rng = Pcg64::seed_from_u64(11);
    let (mut drawn, mut excluded, mut kept_usable) = (0, 0, 0);
    for (name, shapes) in [("starter", 2000), ("low-voltage", 8000)] {
        let mut task = Task::shipped(name, Effort::Quick);
        // What serves at every corner serves at the nominal one.
        task.spec.corners.truncate(1);
        let job = task.job();
        for rail in [Rail::Sink, Rail::Source] {
            let tech = job.tech(rail);
            let probes = Probes::of(&job, rail);
            let current = job.spec.reference.current().0;
            for cell in 0..CELLS.len() {
                let mut solver = Solver::new(tech, cell, current, &probes.volts, &climates(&job));
                let mut looked_at = 0;
                for _ in 0..shapes {
                    let shape = random_shape(&mut rng, &tech, cell, job.spec.supply.most.0);
                    drawn += 1;
                    let kept = could_serve(&job, &tech, &shape);
                    // Of those that stay, a few show that usable shapes are among them.
                    if kept && looked_at == 40 {
                        continue;
                    }
                    let Ok(solved) = solver.solve(&shape) else {
                        continue;
                    };
                    let usable = usable(&job, rail, &solved, &probes);
                    if kept {
                        looked_at += 1;
                        kept_usable += u32::from(usable);
                    } else {
                        excluded += 1;
                        assert!(!usable, "{name} {rail:?} {shape:?}");
                    }
                }
            }
        }
    }
    assert!(drawn >= 100_000);
    assert!(
        excluded > 10_000 && kept_usable > 50,
        "{excluded} {kept_usable}"
    );
}
