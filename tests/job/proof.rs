//! Lower bounds on area: that they hold, for shapes, for families, for networks, for closed forms.

use super::Task;
use super::outside::one_to_one;
use biasloom::assembly::candidates::wants;
use biasloom::assembly::columns::{UNITS, currents};
use biasloom::assembly::plan::Plan;
use biasloom::assembly::workshop::Workshop;
use biasloom::cells::solved::Solver;
use biasloom::cells::{CELLS, Shape};
use biasloom::explore::NetworkReport;
use biasloom::network::corners::climates;
use biasloom::network::probes::{Pool, Probes};
use biasloom::network::work::Work;
use biasloom::proof::merit::{DROP, Gauge, INVERSION, MARGIN, OF_LINE, SHIFTS, calibrate, merits};
use biasloom::proof::relaxed::{Prices, Relaxed, Resolution};
use biasloom::proof::{Certificate, Prover, image};
use biasloom::search::pool::sweep;
use biasloom::spec::{Effort, Rail};
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;
use rayon::prelude::*;
use std::sync::atomic::AtomicBool;

fn pool_of(task: &Task) -> Pool {
    let stop = AtomicBool::new(false);
    sweep(&task.job(), &mut Work::default(), &|_, _| {}, &stop)
}

/// Random shapes of the whole declared design space, solved in full at every climate: none may do
/// better than the floors say. Half of them stand near the best of the pool, where a floor that is
/// too high would show.
fn floors_hold(name: &str, shapes: usize) {
    let task = Task::shipped(name, Effort::Quick);
    let job = task.job();
    let pool = pool_of(&task);
    let wants = wants(&job, 1.0);
    let ratios = calibrate(&job, &pool);
    let floors = merits(&job, &pool, &wants, true);
    let chunks = 8;
    let served: u64 = (0..2 * CELLS.len() * chunks)
        .into_par_iter()
        .map(|task| {
            let (rail, cell) = ([Rail::Sink, Rail::Source][task % 2], task / 2 % CELLS.len());
            let gauge = Gauge::new(job, rail, &pool, &wants, &ratios);
            let tech = job.tech(rail);
            let probes = Probes::of(&job, rail);
            let current = job.spec.reference.current().0;
            let mut solver = Solver::new(tech, cell, current, &probes.volts, &climates(&job));
            let mut rng = Pcg64::seed_from_u64(task as u64);
            let parts = CELLS[cell].parts();
            let near: Vec<Shape> = (0..wants.len())
                .filter_map(|k| {
                    pool.shapes[rail as usize]
                        .iter()
                        .filter(|s| s.shape.cell == cell)
                        .filter_map(|s| Some((gauge.marks(s, k)?[1], s.shape)))
                        .min_by(|a, b| a.0.total_cmp(&b.0))
                        .map(|m| m.1)
                })
                .collect();
            let length = tech.mosfet().length;
            let mut served = 0;
            for n in 0..shapes / (2 * chunks) {
                let mut shape = Shape {
                    cell,
                    length: rng
                        .random_range(length.least.0.ln()..length.most.0.ln())
                        .exp(),
                    inversion: rng.random_range(INVERSION[0].ln()..INVERSION[1].ln()).exp(),
                    cascode_length: 0.0,
                    cascode_inversion: 0.0,
                    drop: 0.0,
                };
                if parts.cascode {
                    shape.cascode_length = rng
                        .random_range(length.least.0.ln()..length.most.0.ln())
                        .exp();
                    shape.cascode_inversion =
                        rng.random_range(INVERSION[0].ln()..INVERSION[1].ln()).exp();
                }
                if parts.drop {
                    let least = if parts.cascode { MARGIN[0] } else { DROP };
                    shape.drop = rng.random_range(least..MARGIN[1]);
                }
                if n % 2 == 0 && !near.is_empty() {
                    let like = near[n / 2 % near.len()];
                    let mut about = |x: f64| x * rng.random_range(-0.7f64..0.7).exp();
                    shape.length = about(like.length).clamp(length.least.0, length.most.0);
                    shape.inversion = about(like.inversion);
                    if parts.cascode {
                        shape.cascode_length =
                            about(like.cascode_length).clamp(length.least.0, length.most.0);
                        shape.cascode_inversion = about(like.cascode_inversion);
                    }
                    if parts.drop {
                        let least = if parts.cascode { MARGIN[0] } else { DROP };
                        shape.drop = (like.drop + rng.random_range(-0.05..0.05)).max(least);
                    }
                }
                let Ok(solved) = solver.solve(&shape) else {
                    continue;
                };
                for (k, floor) in floors.outputs.iter().enumerate() {
                    let Some(marks) = gauge.marks(&solved, k) else {
                        continue;
                    };
                    let Some(floors) = floor else {
                        panic!("{shape:?} serves output {k}, the pool has none")
                    };
                    served += 1;
                    let density = marks[SHIFTS + 1];
                    for floor in [floors.all(), floors.up_to(density)] {
                        let [a, b, c] = floor.own;
                        let least = [a, b, c, floor.line, floor.density];
                        for (mark, least) in marks.iter().zip(least) {
                            assert!(
                                *mark >= least,
                                "{shape:?} output {k}: {marks:?} below {floor:?}"
                            );
                        }
                    }
                }
                if let (Some(marks), Some(floors)) =
                    (gauge.bare(&solved), &floors.bare[rail as usize])
                {
                    let floor = floors.all();
                    assert!(
                        marks[OF_LINE] >= floor.line && marks[SHIFTS + 1] >= floor.density,
                        "{shape:?}: {marks:?} below {floor:?}"
                    );
                }
            }
            served
        })
        .sum();
    assert!(
        served > (shapes / 4) as u64,
        "hardly a shape serves anything: {served}"
    );
}

#[test]
fn no_shape_does_better_than_its_floor() {
    floors_hold("starter", 4_000);
}

#[test]
#[ignore = "a million shapes per cell take an hour"]
fn no_shape_of_a_million_does_better_than_its_floor() {
    floors_hold("starter", 1_000_000);
    floors_hold("tern", 1_000_000);
}

/// Real networks, searched and refined, family by family: the relaxed family each maps onto exists
/// and costs no more, so no relaxed optimum can exceed a real one.
#[test]
fn every_network_maps_onto_a_relaxed_one_that_costs_no_more() {
    for (name, budgets) in [
        ("starter", vec![15e-6, 30e-6]),
        ("low-voltage", vec![30e-6, 60e-6]),
    ] {
        let task = Task::shipped(name, Effort::Quick);
        let job = task.job();
        let pool = pool_of(&task);
        let wants = wants(&job, 1.0);
        let stop = AtomicBool::new(false);
        let mut shop = Workshop::open(job, &pool, 1.0, 1e-4, 5, &stop);
        let ratios = calibrate(&job, &pool);
        let gauges = [Rail::Sink, Rail::Source].map(|r| Gauge::new(job, r, &pool, &wants, &ratios));
        let floors = merits(&job, &pool, &wants, true);
        let relaxed = Relaxed::new(
            &job,
            &wants,
            &floors,
            &currents(&job, &wants, 1e-4),
            &UNITS,
            Resolution {
                density: 1.05,
                levels: 100,
            },
        )
        .expect("all outputs can be served");
        for budget in budgets {
            let found = shop.search(budget, &[], true, 1, 3);
            let mut plans: Vec<Plan> = vec![found.plan.clone()];
            if let Some(refined) = shop.refine(budget, &found.plan, 0.2) {
                plans.push(shop.shelve(refined, &mut Work::default()));
            }
            for plan in plans {
                let price = shop.score(budget, &plan).price;
                let ledger = shop.ledger(budget);
                let families = image::families(&ledger, &plan, &gauges);
                let areas = image::areas(&relaxed, &plan, &families);
                if price.excess > 0.0 {
                    continue;
                }
                let area: f64 = areas
                    .iter()
                    .map(|a| a.unwrap_or_else(|| panic!("{name}: {families:?}")))
                    .sum();
                assert!(
                    area <= price.area,
                    "{name}: relaxed {area:e} above {:e}",
                    price.area
                );
                assert!(
                    area >= 0.5 * price.area,
                    "{name}: relaxed {area:e} of {:e} says little",
                    price.area
                );
            }
        }
    }
}

/// The prover of a shipped spec, and what it proves of every network of the front: the certificate,
/// the overhead current and the area. Each must say at least `share` of the area, no more than all
/// of it, and prove the same when its prices are scanned again.
fn proved(name: &str, share: f64) -> (Prover, Vec<(Certificate, f64, f64)>) {
    let task = Task::shipped(name, Effort::Quick);
    let outcome = task.explore();
    let prover = Prover::new(&task.job(), &pool_of(&task)).expect("it can be served");
    let figure = |network: &NetworkReport, name: &str| network.figure(name).map(|f| f.value);
    let networks: Vec<(f64, f64)> = outcome
        .front
        .iter()
        .map(|n| Some((figure(n, "overhead_current")?, figure(n, "area")?)))
        .collect::<Option<_>>()
        .expect("both are figures of every network");
    let certificates = prover.prove(&networks);
    assert!(!certificates.is_empty() && certificates.len() == networks.len());
    let all = certificates.into_iter().zip(networks);
    let all = all.map(|(certificate, (overhead, area))| {
        assert!(certificate.area <= area, "{certificate:?} above {area:e}");
        assert!(
            certificate.area >= share * area,
            "{certificate:?} of {area:e} says little"
        );
        let again = prover.certificate(&prices_of(&certificate), overhead);
        assert_eq!(again, certificate);
        (certificate, overhead, area)
    });
    let all = all.collect();
    (prover, all)
}

fn prices_of(certificate: &Certificate) -> Prices {
    Prices {
        outputs: certificate.output_prices.clone(),
        overhead: certificate.overhead_price,
    }
}

/// Any price of overhead current proves a bound; none may exceed what a network reaches. And the
/// best price found proves what it claims when it is scanned again.
#[test]
fn any_price_proves_a_bound_below_every_network() {
    let (prover, all) = proved("starter", 0.4);
    let mut rng = Pcg64::seed_from_u64(5);
    for (certificate, overhead, _) in all {
        for _ in 0..4 {
            let mut other = prices_of(&certificate);
            other.overhead *= rng.random_range(0.0..3.0);
            let other = prover.certificate(&other, overhead);
            assert!(other.area <= certificate.area * (1.0 + 1e-3));
        }
    }
}

/// Prices of outputs relax what serving every output exactly once holds (Geoffrion 1974): whatever
/// they are, they prove no more than sets do. With more outputs than sets can tell apart, no prices
/// prove more than a network reaches.
#[test]
fn prices_of_outputs_prove_no_more_than_sets_of_them() {
    let mut rng = Pcg64::seed_from_u64(7);
    for name in ["starter", "low-voltage"] {
        let task = Task::shipped(name, Effort::Quick);
        let job = task.job();
        let pool = pool_of(&task);
        let wants = wants(&job, 1.0);
        let floors = merits(&job, &pool, &wants, false);
        let currents = currents(&job, &wants, job.spec.overhead_limit());
        let resolution = Resolution {
            density: 1.3,
            levels: 12,
        };
        let relaxed = Relaxed::new(&job, &wants, &floors, &currents, &UNITS, resolution)
            .expect("all outputs can be served");
        assert!(relaxed.is_exact());
        let guess = relaxed.guess();
        for overhead in [0.0, 3e-6, 3e-5] {
            let exact = relaxed.cheapest(overhead);
            assert!(exact.cost.is_finite() && exact.area > 0.0);
            let sum = exact.area + overhead * exact.overhead;
            assert!(
                (sum / exact.cost - 1.0).abs() < 1e-9,
                "{name}: {exact:?} read back"
            );
            for _ in 0..6 {
                let outputs = guess.iter().map(|u| u * rng.random_range(0.1..1.5));
                let prices = Prices {
                    outputs: outputs.collect(),
                    overhead,
                };
                let bound = Relaxed::bound(&prices, relaxed.root_cost(&prices), 0.0);
                assert!(
                    bound <= exact.cost * (1.0 + 1e-9),
                    "{name}: prices prove {bound:e}, sets {:e}",
                    exact.cost
                );
            }
        }
    }
}

/// More outputs than sets can tell apart: whatever the prices, no bound exceeds what a network
/// reaches, and the best prices prove what they claim when they are scanned again.
#[test]
fn any_prices_prove_a_bound_below_every_network() {
    let (prover, all) = proved("nanoamp", 0.1);
    let mut rng = Pcg64::seed_from_u64(5);
    for (certificate, overhead, area) in all {
        for _ in 0..3 {
            let mut other = prices_of(&certificate);
            for output in &mut other.outputs {
                *output *= rng.random_range(0.5..1.5);
            }
            other.overhead *= rng.random_range(0.0..3.0);
            assert!(prover.certificate(&other, overhead).area <= area);
        }
    }
}

/// The least area of a 1:1 mirror is known in closed form (Hershenson, Boyd, Lee, IEEE TCAD 20(1),
/// 2001, and what a hair of triode adds: 459.3 um^2 for two devices without borders). The bound is
/// below it: a degenerated mirror, whose resistor costs next to nothing in this ideal card and to
/// the floors, keeps it from being near.
#[test]
fn bound_of_a_square_law_mirror_is_below_its_closed_form() {
    let task = one_to_one("textbook-ideal");
    let prover = Prover::new(&task.job(), &pool_of(&task)).expect("it can be served");
    let bound = prover.prove(&[(10e-6, 459.3e-12)])[0].area * 1e12;
    assert!(
        bound <= 459.3,
        "{bound} um2 is more than a mirror that exists"
    );
    assert!(bound >= 0.25 * 459.3, "{bound} um2 says nothing");
}
