//! Newton must find the solution from anywhere: random mirrors within the cards' limits, started where
//! nobody would. A lane may fail only where the mirror cannot work between its rails at all, which
//! `Mirror::in_range` decides by holding each fed node at the far rail.

use super::mirrors::random_mirror;
use biasloom::cells::CELLS;
use biasloom::circuit::dc::State;
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::Card;
use biasloom::spec::Rail;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

/// Solves `rounds` random mirrors of every cell in eight lanes each and asks that every lane with a
/// solution between the rails converge, to a solution between the rails.
fn solve_from_bad_starts(card: &str, rounds: usize) {
    let card = Card::load(card).expect("a shipped card");
    for (cell, kind) in CELLS.iter().enumerate() {
        if kind.parts().resistor && card.resistor.is_none() {
            continue;
        }
        let mut rng = Pcg64::seed_from_u64(100 + cell as u64);
        let (mut within, mut failed) = (0, 0);
        for round in 0..rounds {
            let rail = [Rail::Sink, Rail::Source][round % 2];
            let mirror = random_mirror(&mut rng, &card, cell, rail);
            let supply = mirror.supply;
            let start = (0..mirror.netlist.nodes.len())
                .map(|node| match (round / 2) % 4 {
                    0 => Lanes::ZERO,
                    1 => Lanes::splat(supply),
                    2 => Lanes::from_fn(|_| rng.random_range(-0.5..supply + 0.5)),
                    // Upside down: high where low is right.
                    _ => Lanes::splat(supply - mirror.expected[node]),
                })
                .collect();
            let mut state = State::start(start);
            let all = mirror.circuit.solve(&mut state);
            assert_eq!(all, state.converged == [true; WIDTH]);
            let inside: [bool; WIDTH] = std::array::from_fn(|lane| {
                // A hair beyond a rail is a device near cut-off, not a failure.
                let rails = -0.01..=supply + 0.01;
                state.volts.iter().all(|v| rails.contains(&v.0[lane]))
            });
            if (0..WIDTH).all(|lane| state.converged[lane] && inside[lane]) {
                within += WIDTH;
                continue;
            }
            let possible = mirror.in_range();
            for lane in (0..WIDTH).filter(|&lane| possible[lane]) {
                within += 1;
                failed += usize::from(!(state.converged[lane] && inside[lane]));
            }
        }
        let name = kind.name();
        assert!(
            within >= rounds * WIDTH / 3,
            "{name}: only {within} lanes in range"
        );
        assert_eq!(failed, 0, "{name}: of {within} lanes");
    }
}

#[test]
fn a_hundred_thousand_mirrors_of_every_cell() {
    solve_from_bad_starts("generic-180", 12_500);
}

#[test]
fn mirrors_of_a_short_channel_card() {
    solve_from_bad_starts("generic-65", 3_000);
}

/// Square-law devices are off without a slope: Newton alone has nothing to go by.
#[test]
fn mirrors_of_square_law_cards() {
    for card in ["textbook-050", "textbook-080", "textbook-ideal"] {
        solve_from_bad_starts(card, 3_000);
    }
}
