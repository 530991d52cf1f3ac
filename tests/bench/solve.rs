//! Speed of the physics: one device, and a DC solution of every cell from a cold start.
//!
//! `cargo bench --bench solve` shows the table; `cargo bench --bench solve -- --rate` prints what
//! `compare.sh` sets against numpy.

use biasloom::cells::draw::{Draw, Feed};
use biasloom::cells::solved::{Climate, conditions, resistor_factor};
use biasloom::cells::{Body, CELLS, Expected, Size, Tech, Unit, index_of};
use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::VoltageSource;
use biasloom::device::{Conditions, Device, Point};
use biasloom::numeric::dispatch::{Work, widest};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::Card;
use biasloom::spec::Rail;
use divan::counter::ItemsCount;
use divan::{Bencher, black_box};
use std::time::{Duration, Instant};

fn main() {
    if std::env::args().any(|a| a == "--rate") {
        rate();
    } else {
        divan::main();
    }
}

const CURRENT: f64 = 10e-6;
const VOUT: f64 = 0.6;
/// Corners in the order of the reference script.
const CORNERS: [&str; 5] = ["TT", "SS", "FF", "SF", "FS"];

fn card() -> Card {
    Card::load("generic-180").expect("a shipped card")
}

/// A sink of `cell` at eight climates and input currents, and the voltages it starts from.
fn mirror(
    card: &Card,
    cell: usize,
    climates: &[Climate; WIDTH],
    amps: Lanes,
) -> (Circuit, Vec<Lanes>) {
    let tech = Tech {
        card,
        rail: Rail::Sink,
    };
    let parts = CELLS[cell].parts();
    let size = |width, length| Size { width, length };
    let unit = Unit {
        current: CURRENT,
        mirror: size(8e-6, 1e-6),
        cascode: parts.cascode.then(|| size(8e-6, 0.5e-6)),
        bias: None,
        resistor: parts.resistor.then_some(Body {
            ohms: 20e3,
            width: 1e-6,
        }),
        expected: Expected {
            line: 0.5,
            drain: 0.2,
            cascode: 0.8,
            input: 0.5,
        },
    };
    let mut draw = Draw::new();
    draw.tag = "in".into();
    let input = draw.node("in", unit.expected.input);
    draw.current(input, CURRENT);
    let bias = parts.bias_leg.then(|| {
        let node = draw.node("bias", unit.expected.cascode);
        draw.current(node, CURRENT);
        (node, size(1.6e-6, 1e-6))
    });
    let lines = CELLS[cell].input(&mut draw, &unit, 1, &Feed { input, bias });
    draw.tag = "out".into();
    let pin = draw.node("pin", VOUT);
    CELLS[cell].output(&mut draw, &unit, 1, &lines, pin);
    let mut netlist = draw.netlist;
    for (name, plus, volts) in [("supply", draw.supply, 1.8), ("pin", pin, VOUT)] {
        netlist.voltages.push(VoltageSource {
            name: name.into(),
            plus,
            minus: 0,
            volts,
        });
    }
    let lanes: [Conditions; WIDTH] = std::array::from_fn(|i| conditions(&tech, &climates[i]));
    let mut circuit = Circuit::new(&netlist, |k| {
        let m = &netlist.mos[k];
        Device::new(tech.mosfet(), tech.nominal(), m.width, m.length, &lanes)
    })
    .expect("sources are grounded");
    for r in &mut circuit.resistors {
        r.conductance = r.conductance / Lanes::from_fn(|i| resistor_factor(&tech, &climates[i]));
    }
    for source in &mut circuit.currents {
        source.amps = amps;
    }
    let start = draw
        .expected
        .iter()
        .map(|&(_, v)| Lanes::splat(v))
        .collect();
    (circuit, start)
}

/// The `k`-th of `count` climates and its input current.
fn climate(card: &Card, k: usize, count: usize) -> (Climate, f64) {
    let name = CORNERS[k % CORNERS.len()];
    let corner = card.corners.iter().position(|c| c.name == name);
    let climate = Climate {
        corner: corner.expect("the card has the corner"),
        temperature: 233.15 + 165.0 * k as f64 / (count - 1) as f64,
    };
    let share = (k * 7919 % count) as f64 / count as f64;
    (climate, CURRENT * (0.8 + 0.4 * share))
}

/// Sinks of `cell` at `count` climates, eight to a circuit.
fn mirrors(card: &Card, cell: usize, count: usize) -> Vec<(Circuit, Vec<Lanes>)> {
    (0..count / WIDTH)
        .map(|group| {
            let here = |i: usize| climate(card, group * WIDTH + i, count);
            let climates = std::array::from_fn(|i| here(i).0);
            mirror(card, cell, &climates, Lanes::from_fn(|i| here(i).1))
        })
        .collect()
}

/// A DC solution from a cold start; an item is one solution at one climate.
#[divan::bench(args = ["simple", "degenerated", "cascode", "wide_swing", "self_biased"])]
fn cold_start(bencher: Bencher, name: &str) {
    let card = card();
    let cell = index_of(name).expect("a cell of that name");
    let all = mirrors(&card, cell, 64 * WIDTH);
    let mut state = State::default();
    bencher
        .counter(ItemsCount::new(all.len() * WIDTH))
        .bench_local(|| {
            for (circuit, start) in &all {
                state.volts.clone_from(start);
                assert!(circuit.solve(black_box(&mut state)));
            }
        });
}

/// Every derivative of one output: what a search asks of a solution.
#[divan::bench(args = ["simple", "degenerated", "cascode", "wide_swing", "self_biased"])]
fn derivatives(bencher: Bencher, name: &str) {
    let card = card();
    let cell = index_of(name).expect("a cell of that name");
    let (circuit, start) = mirrors(&card, cell, WIDTH).remove(0);
    let mut state = State::start(start);
    assert!(circuit.solve(&mut state));
    let pin = circuit
        .fixed
        .iter()
        .rposition(Option::is_some)
        .expect("a pin");
    bencher.counter(ItemsCount::new(WIDTH)).bench_local(|| {
        let mut state = state.clone();
        circuit.linearise(&mut state);
        black_box((
            circuit.conductance_at(&state, pin),
            circuit.sensitivity(&state, pin),
        ))
    });
}

struct Evaluation<'a> {
    device: &'a Device,
    gates: &'a [Lanes],
}

impl Work for Evaluation<'_> {
    type Answer = Lanes;
    #[inline(always)]
    fn run(self) -> Lanes {
        let mut sum = Lanes::ZERO;
        for &vg in self.gates {
            let Point {
                id, gm, gds, gms, ..
            } = self.device.at(vg, Lanes::splat(0.6), Lanes::splat(0.1));
            sum += id + gm + gds + gms;
        }
        sum
    }
}

/// Current and slopes of one device; an item is one device at one bias point.
#[divan::bench]
fn device(bencher: Bencher) {
    let card = card();
    let tech = Tech {
        card: &card,
        rail: Rail::Sink,
    };
    let climates: [Climate; WIDTH] = std::array::from_fn(|i| climate(&card, i, WIDTH).0);
    let lanes = climates.map(|c| conditions(&tech, &c));
    let device = Device::new(tech.mosfet(), tech.nominal(), 8e-6, 1e-6, &lanes);
    let gates: Vec<Lanes> = (0..128)
        .map(|k| Lanes::splat(0.01 * f64::from(k)))
        .collect();
    bencher
        .counter(ItemsCount::new(gates.len() * WIDTH))
        .bench_local(|| {
            widest(Evaluation {
                device: black_box(&device),
                gates: black_box(&gates),
            })
        });
}

/// Solutions of the wide-swing cascode per second, one thread, over the reference script's climates.
#[expect(clippy::print_stdout, reason = "the output of a benchmark")]
fn rate() {
    const COUNT: usize = 4096;
    let card = card();
    let cell = index_of("wide_swing").expect("a cell of that name");
    let all = mirrors(&card, cell, COUNT);
    let mut state = State::default();
    let mut run = || {
        let mut sum = 0.0;
        for (circuit, start) in &all {
            state.volts.clone_from(start);
            assert!(circuit.solve(&mut state));
            let pin = circuit
                .fixed
                .iter()
                .rposition(Option::is_some)
                .expect("a pin");
            sum += circuit.current_from(&state, pin).0.iter().sum::<f64>();
        }
        sum
    };
    println!("mean_output_current {:e}", run() / COUNT as f64);
    let (start, mut runs) = (Instant::now(), 0);
    while start.elapsed() < Duration::from_secs(2) {
        black_box(run());
        runs += 1;
    }
    let rate = f64::from(runs) * COUNT as f64 / start.elapsed().as_secs_f64();
    println!("solutions_per_second {rate:.0}");
}
