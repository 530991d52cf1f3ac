//! A million circuits within the cards' limits: how many have no solution found for them.
#![allow(clippy::print_stdout, reason = "the figures of a run are its purpose")]

use crate::physics::mirrors::random_mirror;
use biasloom::cells::solved::{Climate, Failure, Solver};
use biasloom::cells::{CELLS, Shape, Tech};
use biasloom::circuit::dc::State;
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::Card;
use biasloom::spec::Rail;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;
use rayon::prelude::*;

/// What became of some circuits.
#[derive(Debug, Default, Clone, Copy)]
struct Count {
    within: u64,
    outside: u64,
    failed: u64,
}

impl Count {
    fn plus(self, other: Count) -> Count {
        Count {
            within: self.within + other.within,
            outside: self.outside + other.outside,
            failed: self.failed + other.failed,
        }
    }
}

/// Random mirrors of one cell, each lane at its own climate, currents and output voltage, solved from
/// where the closed forms expect it. A lane that converged lies between the rails, with Kirchhoff's
/// law kept; one that did not is a failure if the mirror can work there at all.
fn mirrors(card: &Card, cell: usize, rounds: usize, seed: u64) -> Count {
    let mut rng = Pcg64::seed_from_u64(seed);
    let mut count = Count::default();
    for round in 0..rounds {
        let rail = [Rail::Sink, Rail::Source][round % 2];
        let mirror = random_mirror(&mut rng, card, cell, rail);
        let start = mirror.expected.iter().map(|&v| Lanes::splat(v)).collect();
        let mut state = State::start(start);
        let all = mirror.circuit.solve(&mut state);
        assert_eq!(all, state.converged == [true; WIDTH]);
        let rails = -0.01..=mirror.supply + 0.01;
        let inside = |lane: usize| state.volts.iter().all(|v| rails.contains(&v.0[lane]));
        let good: [bool; WIDTH] = std::array::from_fn(|lane| state.converged[lane] && inside(lane));
        for lane in (0..WIDTH).filter(|&lane| good[lane]) {
            assert!(state.residual[lane] <= 1e-9, "{:?}", state.residual);
            let current = mirror.circuit.current_from(&state, mirror.pin).0[lane];
            assert!(current.is_finite());
        }
        if good == [true; WIDTH] {
            count.within += WIDTH as u64;
            continue;
        }
        let possible = mirror.in_range();
        for lane in 0..WIDTH {
            if good[lane] || possible[lane] {
                count.within += 1;
                count.failed += u64::from(!good[lane]);
            } else {
                count.outside += 1;
            }
        }
    }
    count
}

/// Every cell on both rails of both demo cards, in parallel pieces of their own seeds.
fn every(visit: impl Fn(&Card, usize, u64) -> Count + Sync) -> Count {
    let cards = ["generic-180", "generic-65"].map(|name| Card::load(name).expect("shipped"));
    let mut tasks = Vec::new();
    for (c, _) in cards.iter().enumerate() {
        for cell in 0..CELLS.len() {
            for piece in 0..8u64 {
                tasks.push((c, cell, 1000 * (c as u64 * 10 + cell as u64) + piece));
            }
        }
    }
    let counts: Vec<((usize, usize), Count)> = tasks
        .par_iter()
        .map(|&(c, cell, seed)| ((c, cell), visit(&cards[c], cell, seed)))
        .collect();
    for (c, card) in cards.iter().enumerate() {
        for (cell, kind) in CELLS.iter().enumerate() {
            let here = counts
                .iter()
                .filter(|(key, _)| *key == (c, cell))
                .fold(Count::default(), |sum, (_, n)| sum.plus(*n));
            println!("{:12} {:12} {here:?}", card.name, kind.name());
        }
    }
    counts
        .iter()
        .fold(Count::default(), |sum, (_, n)| sum.plus(*n))
}

#[test]
#[ignore = "a few seconds in release, for its figures"]
fn a_million_mirrors() {
    // Two cards, five cells, eight pieces; three quarters of the lanes or more are in range.
    let count = every(|card, cell, seed| mirrors(card, cell, 2_200, seed));
    println!("{count:?}");
    assert!(count.within >= 1_000_000, "{count:?}");
    assert!(count.failed * 100_000 < count.within, "{count:?}");
}

/// Random shapes in the range that polishing may reach, at every corner and five temperatures, as the
/// program solves them; a shape fails if it fails at any.
fn shapes(card: &Card, cell: usize, rounds: usize, seed: u64) -> Count {
    let mut rng = Pcg64::seed_from_u64(seed);
    let climates: Vec<Climate> = (0..card.corners.len())
        .flat_map(|corner| {
            [233.15, 273.15, 300.15, 358.15, 398.15].map(|temperature| Climate {
                corner,
                temperature,
            })
        })
        .collect();
    let mut count = Count::default();
    for rail in [Rail::Sink, Rail::Source] {
        let tech = Tech { card, rail };
        let length = tech.mosfet().length;
        let parts = CELLS[cell].parts();
        let probes = [0.05, 0.15, 0.4, 0.9];
        let mut solver = Solver::new(tech, cell, 10e-6, &probes, &climates);
        let mut log = |least: f64, most: f64| rng.random_range(least.ln()..most.ln()).exp();
        for _ in 0..rounds {
            let mut size = || (log(length.least.0, length.most.0), log(0.01, 100.0));
            let (length, inversion) = size();
            let (cascode_length, cascode_inversion) =
                if parts.cascode { size() } else { (0.0, 0.0) };
            let shape = Shape {
                cell,
                length,
                inversion,
                cascode_length,
                cascode_inversion,
                drop: if parts.drop { log(0.01, 0.3) } else { 0.0 },
            };
            let circuits = climates.len() as u64;
            match solver.solve(&shape) {
                Ok(solved) => {
                    count.within += circuits;
                    let probe = |k: usize| solved.probes[k].error[0];
                    assert!(probe(0) <= probe(3) + 1e-9, "{shape:?}");
                    assert!(solved.input.iter().all(|v| v.is_finite()));
                }
                Err(Failure::NoSize) => count.outside += circuits,
                Err(Failure::NotConverged) => {
                    count.within += circuits;
                    count.failed += 1;
                }
            }
        }
    }
    count
}

#[test]
#[ignore = "a few seconds in release, for its figures"]
fn a_million_circuits_of_shapes() {
    let count = every(|card, cell, seed| shapes(card, cell, 260, seed));
    println!("{count:?}");
    assert!(count.within >= 1_000_000, "{count:?}");
    assert!(count.failed * 100_000 < count.within, "{count:?}");
}

/// A thousandth of it, every time.
#[test]
fn thousands_of_mirrors_and_shapes() {
    let count = every(|card, cell, seed| mirrors(card, cell, 10, seed));
    assert!(count.within > 5_000 && count.failed == 0, "{count:?}");
    let count = every(|card, cell, seed| shapes(card, cell, 1, seed));
    assert!(count.within > 3_000 && count.failed == 0, "{count:?}");
}
