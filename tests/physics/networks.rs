//! Any circuit at all: random networks of transistors and resistors obey Kirchhoff's law, and
//! every derivative of a solution is what a dense matrix, and a second solution, say it is.

use super::draft::Draft;
use super::mirrors::random_mirror;
use super::numeric::dense_solve;
use super::support::{device, random_charge, random_conditions, random_law};
use biasloom::cells::{CELLS, Tech};
use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::{Netlist, Node, Polarity};
use biasloom::device::Device;
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::{Card, Law};
use biasloom::spec::Rail;
use rand::{Rng, SeedableRng};
use rand_pcg::Pcg64;

/// A supply, a pin, up to eight unknown nodes with a resistor each, and transistors anywhere.
fn random_network(rng: &mut Pcg64, laws: impl Fn(&mut Pcg64) -> Law) -> Draft {
    let mut d = Draft::new();
    let vdd = rng.random_range(1.0..2.5);
    d.voltage("vdd", vdd)
        .voltage("pin", rng.random_range(0.0..vdd));
    let unknown = rng.random_range(1..=8);
    let names: Vec<String> = ["0", "vdd", "pin"]
        .into_iter()
        .map(String::from)
        .chain((0..unknown).map(|k| format!("n{k}")))
        .collect();
    let lanes = random_conditions(rng);
    for k in 0..unknown {
        // To any node named before: every node hangs on a known one.
        let other = rng.random_range(0..3 + k);
        let ohms = 10f64.powf(rng.random_range(2.0..6.0));
        d.resistor(&names[3 + k], &names[other], ohms);
    }
    for _ in 0..rng.random_range(1..=8) {
        let polarity = [Polarity::N, Polarity::P][rng.random_range(0..2)];
        let bulk = if polarity == Polarity::N { "0" } else { "vdd" };
        let [drain, gate, source] = [0; 3].map(|_| names[rng.random_range(0..names.len())].clone());
        let width = 10f64.powf(rng.random_range(-6.5..-4.5));
        let m = device(laws(rng), 300.0, width, 0.5e-6, &lanes);
        d.mos(polarity, [&drain, &gate, &source, bulk], m);
    }
    if rng.random() {
        let node = &names[3 + rng.random_range(0..unknown)];
        d.current("vdd", node, 10f64.powf(rng.random_range(-8.0..-4.0)));
    }
    d
}

/// Current into a node's elements, from the netlist and the devices alone.
fn balance(d: &Draft, volts: &[f64], lane: usize, node: Node) -> (f64, f64) {
    let (mut sum, mut size, mut rounding) = (0.0, 0.0, 0.0);
    let mut add = |i: f64| {
        sum += i;
        size += f64::abs(i);
    };
    for (m, device) in d.netlist.mos.iter().zip(&d.devices) {
        let sign = if m.polarity == Polarity::N { 1.0 } else { -1.0 };
        let to_bulk = |n: Node| Lanes::splat((volts[n] - volts[m.bulk]) * sign);
        let p = device.at(to_bulk(m.gate), to_bulk(m.drain), to_bulk(m.source));
        let (id, ib) = (p.id.0[lane] * sign, p.ib.0[lane] * sign);
        if m.drain == node {
            add(id + ib);
        }
        if m.source == node {
            add(-id);
        }
        if m.bulk == node {
            add(-ib);
        }
        // Rounding of a volt through the channel, where the law is held to 1e-9.
        rounding += 1e-6 * (p.gms.0[lane] + p.gds.0[lane]);
    }
    for r in &d.netlist.resistors {
        let i = (volts[r.a] - volts[r.b]) / r.ohms;
        if r.a == node {
            add(i);
        }
        if r.b == node {
            add(-i);
        }
        rounding += 1e-6 / r.ohms;
    }
    for s in &d.netlist.currents {
        if s.from == node {
            add(s.amps);
        }
        if s.to == node {
            add(-s.amps);
        }
    }
    (sum, size + rounding)
}

#[test]
fn kirchhoff_s_law_holds_on_random_networks() {
    let mut rng = Pcg64::seed_from_u64(30);
    let (mut solved, mut lost) = (0, 0);
    for _ in 0..2000 {
        let d = random_network(&mut rng, random_law);
        let circuit = d.circuit();
        let nodes = d.netlist.nodes.len();
        let mut state = State::start(vec![Lanes::splat(0.5); nodes]);
        circuit.solve(&mut state);
        for lane in 0..WIDTH {
            if !state.converged[lane] {
                lost += 1;
                continue;
            }
            solved += 1;
            let volts: Vec<f64> = state.volts.iter().map(|v| v.0[lane]).collect();
            let mut total = 0.0;
            for node in 0..nodes {
                let (sum, size) = balance(&d, &volts, lane, node);
                let reported = circuit.current_from(&state, node).0[lane];
                assert!((reported - sum).abs() <= 1e-12 * size, "{reported} {sum}");
                if circuit.fixed[node].is_none() {
                    assert!(sum.abs() <= 1.1e-9 * size, "node {node}: {sum} of {size}");
                } else {
                    total += sum;
                }
            }
            // What the sources put in at the known nodes comes out at the others.
            let size: f64 = (0..nodes).map(|n| balance(&d, &volts, lane, n).1).sum();
            assert!(total.abs() <= 1e-8 * size);
        }
    }
    // Feedback through random gates makes switches that no Newton steps over; they stay rare.
    assert!(
        lost * 1000 < solved,
        "{lost} of {solved} lanes did not converge"
    );
}

/// Conductance matrix over *all* nodes in one lane: d(current into the elements)/d(voltage).
fn dense_matrix(netlist: &Netlist, circuit: &Circuit, state: &State, lane: usize) -> Vec<Vec<f64>> {
    let n = netlist.nodes.len();
    let mut y = vec![vec![0.0; n]; n];
    for (m, p) in netlist.mos.iter().zip(&state.points) {
        let [bg, bd, bs] = p.ib_slopes.map(|s| s.0[lane]);
        let (gm, gds, gms) = (p.gm.0[lane], p.gds.0[lane], p.gms.0[lane]);
        let columns = [
            (m.gate, gm, bg),
            (m.drain, gds, bd),
            (m.source, -gms, bs),
            (m.bulk, gms - gm - gds, -(bg + bd + bs)),
        ];
        for (column, channel, impact) in columns {
            y[m.drain][column] += channel + impact;
            y[m.source][column] -= channel;
            y[m.bulk][column] -= impact;
        }
    }
    for r in &circuit.resistors {
        let [a, b] = r.nodes;
        let g = r.conductance.0[lane];
        y[a][a] += g;
        y[b][b] += g;
        y[a][b] -= g;
        y[b][a] -= g;
    }
    y
}

/// Change of the current from known node `pin` when currents `push` are drawn out of the nodes and
/// known node `driven` rises by a volt: the direct method.
fn direct(
    y: &[Vec<f64>],
    unknown: &[Node],
    pin: Node,
    driven: Option<Node>,
    push: &[(Node, f64)],
) -> Option<f64> {
    let pushed = |node: Node| -> f64 {
        let here = push.iter().filter(|(n, _)| *n == node);
        here.map(|(_, amps)| amps).sum()
    };
    let matrix = unknown
        .iter()
        .map(|&r| unknown.iter().map(|&c| y[r][c]).collect())
        .collect();
    let rhs = unknown
        .iter()
        .map(|&r| -pushed(r) - driven.map_or(0.0, |d| y[r][d]))
        .collect();
    let dv = dense_solve(matrix, rhs)?;
    let mut change = pushed(pin) + driven.map_or(0.0, |d| y[pin][d]);
    for (&node, dv) in unknown.iter().zip(&dv) {
        change += y[pin][node] * dv;
    }
    change.is_finite().then_some(change)
}

/// Compares every derivative the circuit offers with the direct method. Returns how many.
fn compare_derivatives(
    netlist: &Netlist,
    circuit: &Circuit,
    state: &mut State,
    pin: Node,
) -> usize {
    circuit.linearise(state);
    let known: Vec<Node> = (0..netlist.nodes.len())
        .filter(|&n| circuit.fixed[n].is_some())
        .collect();
    let unknown: Vec<Node> = (0..netlist.nodes.len())
        .filter(|&n| circuit.fixed[n].is_none())
        .collect();
    let by_device = circuit.sensitivity(state, pin);
    let mut compared = 0;
    for lane in (0..WIDTH).filter(|&i| state.converged[i]) {
        let y = dense_matrix(netlist, circuit, state, lane);
        // Rounding is a share of the largest conductance anywhere, or of the current pushed.
        let size = y.iter().flatten().fold(0.0, |m: f64, g| m.max(g.abs()));
        let mut check = |ours: f64, driven: Option<Node>, push: &[(Node, f64)], size: f64| {
            let Some(truth) = direct(&y, &unknown, pin, driven, push) else {
                return;
            };
            assert!(
                (ours - truth).abs() <= 1e-9 * truth.abs() + 4e-11 * size + 1e-24,
                "lane {lane} {driven:?} {push:?}: {ours} {truth} of {size}"
            );
            compared += 1;
        };
        for &node in &known {
            let ours = circuit.transfer(state, pin, node).0[lane];
            check(ours, Some(node), &[], size);
        }
        let ours = circuit.conductance_at(state, pin).0[lane];
        check(ours, Some(pin), &[], size);
        for (k, (m, p)) in netlist.mos.iter().zip(&state.points).enumerate() {
            let sign = if m.polarity == Polarity::N { 1.0 } else { -1.0 };
            for (ours, channel, impact) in [
                (&by_device.threshold, -p.gm.0[lane], -p.ib_slopes[0].0[lane]),
                (&by_device.gain, p.id.0[lane], p.ib.0[lane]),
            ] {
                let (channel, impact) = (sign * channel, sign * impact);
                let push = [
                    (m.drain, channel + impact),
                    (m.source, -channel),
                    (m.bulk, -impact),
                ];
                check(ours[k].0[lane], None, &push, channel.abs());
            }
        }
        for (k, r) in circuit.resistors.iter().enumerate() {
            let [a, b] = r.nodes;
            let i = (state.volts[a].0[lane] - state.volts[b].0[lane]) * r.conductance.0[lane];
            let ours = by_device.resistor[k].0[lane];
            check(ours, None, &[(a, -i), (b, i)], i.abs());
        }
    }
    compared
}

#[test]
fn derivatives_of_mirrors_agree_with_the_direct_method() {
    let mut rng = Pcg64::seed_from_u64(31);
    for name in [
        "generic-180",
        "generic-65",
        "textbook-050",
        "textbook-ideal",
    ] {
        let card = Card::load(name).expect("a shipped card");
        for (cell, kind) in CELLS.iter().enumerate() {
            if kind.parts().resistor && card.resistor.is_none() {
                continue;
            }
            let mut compared = 0;
            for round in 0..60 {
                let rail = [Rail::Sink, Rail::Source][round % 2];
                let mirror = random_mirror(&mut rng, &card, cell, rail);
                let start = mirror.expected.iter().map(|&v| Lanes::splat(v)).collect();
                let mut state = State::start(start);
                mirror.circuit.solve(&mut state);
                compared +=
                    compare_derivatives(&mirror.netlist, &mirror.circuit, &mut state, mirror.pin);
            }
            assert!(compared > 1500, "{name} {}: {compared}", kind.name());
        }
    }
}

#[test]
fn derivatives_of_random_networks_agree_with_the_direct_method() {
    let mut rng = Pcg64::seed_from_u64(32);
    let mut compared = 0;
    for _ in 0..500 {
        let d = random_network(&mut rng, random_law);
        let circuit = d.circuit();
        let mut state = State::start(vec![Lanes::splat(0.5); d.netlist.nodes.len()]);
        circuit.solve(&mut state);
        compared += compare_derivatives(&d.netlist, &circuit, &mut state, 2);
    }
    assert!(compared > 20_000, "{compared}");
}

/// Current from the pin after a change to the circuit, solved anew from the old solution.
fn again(circuit: &Circuit, state: &State, pin: Node, change: impl FnOnce(&mut Circuit)) -> Lanes {
    let mut changed = circuit.clone();
    change(&mut changed);
    let mut after = State::start(state.volts.clone());
    assert!(changed.solve(&mut after));
    changed.current_from(&after, pin)
}

#[test]
fn derivatives_agree_with_second_solutions() {
    let mut rng = Pcg64::seed_from_u64(33);
    let card = Card::load("generic-180").expect("a shipped card");
    let mut compared = 0;
    for round in 0..200 {
        let cell = round % CELLS.len();
        let rail = [Rail::Sink, Rail::Source][(round / CELLS.len()) % 2];
        let mirror = random_mirror(&mut rng, &card, cell, rail);
        let tech = Tech { card: &card, rail };
        let (circuit, pin) = (&mirror.circuit, mirror.pin);
        let start = mirror.expected.iter().map(|&v| Lanes::splat(v)).collect();
        let mut state = State::start(start);
        if !circuit.solve(&mut state) {
            // Some lane is beyond its rails.
            continue;
        }
        circuit.linearise(&mut state);
        let size = circuit.current_from(&state, pin).abs();
        // Central difference with one Richardson step, in units of the current per UT.
        let mut check = |ours: Lanes, h: f64, at: &dyn Fn(&mut Circuit, f64)| {
            let by = |h: f64| {
                let up = again(circuit, &state, pin, |c| at(c, h));
                let down = again(circuit, &state, pin, |c| at(c, -h));
                (up - down) / Lanes::splat(2.0 * h)
            };
            let truth = (4.0 * by(0.5 * h) - by(h)) / Lanes::splat(3.0);
            for lane in 0..WIDTH {
                let (ours, truth, size) = (ours.0[lane], truth.0[lane], size.0[lane]);
                let scale = ours.abs() + size;
                assert!(
                    (ours - truth).abs() <= 3e-6 * scale,
                    "{ours} {truth} {size}"
                );
                compared += 1;
            }
        };
        check(circuit.conductance_at(&state, pin), 1e-4, &|c, h| {
            c.fixed[pin] = c.fixed[pin].map(|v| v + h);
        });
        // The supply is a known node too, and the rail of a source.
        let supply = 1;
        check(circuit.transfer(&state, pin, supply), 1e-4, &|c, h| {
            c.fixed[supply] = c.fixed[supply].map(|v| v + h);
        });
        let by = circuit.sensitivity(&state, pin);
        for k in 0..mirror.netlist.mos.len() {
            check(by.threshold[k], 1e-4, &|c, h| {
                c.mos[k].device = mirror.changed(&tech, k, h, 1.0);
            });
            check(by.gain[k], 1e-3, &|c, h| {
                c.mos[k].device = mirror.changed(&tech, k, 0.0, h.exp());
            });
        }
        for k in 0..circuit.resistors.len() {
            check(by.resistor[k], 1e-3, &|c, h| {
                c.resistors[k].conductance = c.resistors[k].conductance * (-h).exp();
            });
        }
    }
    assert!(compared > 5_000, "{compared}");
}

/// A solution must not depend on what the same circuit, or the same state, has solved before.
#[test]
fn solutions_do_not_remember() {
    let mut rng = Pcg64::seed_from_u64(34);
    let card = Card::load("generic-180").expect("a shipped card");
    for round in 0..40 {
        let mirror = random_mirror(&mut rng, &card, round % CELLS.len(), Rail::Sink);
        let start: Vec<Lanes> = mirror.expected.iter().map(|&v| Lanes::splat(v)).collect();
        let mut fresh = State::start(start.clone());
        mirror.circuit.solve(&mut fresh);
        let mut used = State::start(vec![Lanes::splat(-0.7); start.len()]);
        mirror.circuit.solve(&mut used);
        used.volts = start;
        mirror.circuit.solve(&mut used);
        assert_eq!(fresh.volts, used.volts);
        assert_eq!(fresh.converged, used.converged);
        assert_eq!(fresh.iterations, used.iterations);
    }
}

#[test]
fn bad_sources_are_named() {
    let mut d = Draft::new();
    d.voltage("a", 1.0)
        .voltage("a", 2.0)
        .resistor("a", "0", 1e3);
    let error = Circuit::new(&d.netlist, |_| unreachable!()).unwrap_err();
    assert_eq!(error.to_string(), "node a is set by two voltage sources");
    let mut d = Draft::new();
    d.voltage("a", 1.0).resistor("b", "0", 1e3);
    d.netlist.voltages[0].minus = d.netlist.nodes.len() - 1;
    let error = Circuit::new(&d.netlist, |_| unreachable!()).unwrap_err();
    assert_eq!(
        error.to_string(),
        "voltage source V1 must have one end at ground"
    );
}

/// Nothing to start from: a node that only gates hang on has no equation.
#[test]
fn a_node_without_a_path_does_not_converge() {
    let mut rng = Pcg64::seed_from_u64(35);
    let m: Device = device(
        Law::Charge(random_charge(&mut rng)),
        300.0,
        1e-6,
        1e-6,
        &random_conditions(&mut rng),
    );
    let mut d = Draft::new();
    d.voltage("vdd", 1.0).nmos("vdd", "float", "0", m);
    let mut state = State::start(vec![Lanes::splat(0.3); d.netlist.nodes.len()]);
    assert!(!d.circuit().solve(&mut state));
    assert_eq!(state.converged, [false; WIDTH]);
}
