//! A reported network measured again from its netlist alone: other code, the same laws.

use super::Task;
use biasloom::cells::solved::{Climate, conditions, resistor_factor};
use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::{CurrentSource, GROUND, Netlist, Polarity, VoltageSource};
use biasloom::device::{self, Device};
use biasloom::explore::NetworkReport;
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::spec::{AccuracyOf, Rail, Reference, Target};

/// What was found, the worst over every corner.
#[derive(Debug, Clone)]
pub struct Remeasured {
    /// m^2.
    pub area: f64,
    /// A.
    pub overhead: f64,
    /// V to ground.
    pub pin: [f64; 2],
    /// Per output: error, and output resistance at the low end of its range.
    pub outputs: Vec<(f64, f64)>,
}

/// Every element's area by the card's rule.
fn area(task: &Task, netlist: &Netlist) -> f64 {
    let card = &task.card;
    let mos = netlist.mos.iter().map(|m| {
        let mosfet = match m.polarity {
            Polarity::N => &card.nmos,
            Polarity::P => &card.pmos,
        };
        device::area_of(mosfet, m.width, m.length, m.units)
    });
    let resistors = netlist.resistors.iter().map(|r| {
        let card = card.resistor.as_ref().expect("a card with resistors");
        device::resistor_area(card, r.width, r.ohms, r.units)
    });
    mos.chain(resistors).sum()
}

/// Measures a report's netlist at every corner of its spec.
pub fn remeasure(task: &Task, report: &NetworkReport) -> Remeasured {
    let (spec, job) = (&task.spec, task.job());
    let deck = &report.deck;
    let Reference::Current { tolerance, .. } = spec.reference else {
        panic!("an external reference");
    };
    let mut corners: Vec<(Climate, f64)> = Vec::new();
    for name in &spec.corners {
        let corner = task.card.corners.iter().position(|c| &c.name == name);
        for t in [
            spec.temperature.least,
            spec.temperature.nominal,
            spec.temperature.most,
        ] {
            for supply in [spec.supply.least, spec.supply.most] {
                let climate = Climate {
                    corner: corner.expect("a corner of the card"),
                    temperature: t.0,
                };
                corners.push((climate, supply.0));
            }
        }
    }
    let mut netlist = deck.netlist.clone();
    let pins = deck.outputs.iter().flatten();
    for node in std::iter::once(&deck.supply).chain(pins) {
        netlist.voltages.push(VoltageSource {
            name: format!("v{node}"),
            plus: *node,
            minus: GROUND,
            volts: 0.0,
        });
    }
    for &node in &deck.references {
        let (from, to) = if deck.reference_current > 0.0 {
            (deck.supply, node)
        } else {
            (node, GROUND)
        };
        netlist.currents.push(CurrentSource {
            name: format!("i{node}"),
            from,
            to,
            amps: deck.reference_current.abs(),
        });
    }
    let mut out = Remeasured {
        area: area(task, &deck.netlist),
        overhead: 0.0,
        pin: [f64::INFINITY, f64::NEG_INFINITY],
        outputs: vec![(0.0, f64::INFINITY); spec.outputs.len()],
    };
    for group in corners.chunks(WIDTH) {
        let lane = |i: usize| &group[i.min(group.len() - 1)];
        let supply = Lanes::from_fn(|i| lane(i).1);
        let mut circuit = Circuit::new(&netlist, |k| {
            let m = &netlist.mos[k];
            let rail = match m.polarity {
                Polarity::N => Rail::Sink,
                Polarity::P => Rail::Source,
            };
            let tech = job.tech(rail);
            let conditions = std::array::from_fn(|i| conditions(&tech, &lane(i).0));
            let one = Device::new(
                tech.mosfet(),
                tech.nominal(),
                m.width,
                m.length,
                &conditions,
            );
            one.widened(f64::from(m.units))
        })
        .expect("every source is grounded");
        let factor = Lanes::from_fn(|i| resistor_factor(&job.tech(Rail::Sink), &lane(i).0));
        for r in &mut circuit.resistors {
            r.conductance = r.conductance / factor;
        }
        circuit.fixed[deck.supply] = Some(supply);
        for low in [false, true] {
            for (output, nodes) in spec.outputs.iter().zip(&deck.outputs) {
                let volts = if low {
                    output.range.least.0
                } else {
                    output.range.most.0
                };
                for &node in nodes {
                    circuit.fixed[node] = Some(match output.rail {
                        Rail::Sink => Lanes::splat(volts),
                        Rail::Source => supply - volts,
                    });
                }
            }
            // From the middle of the supply: nothing is known of the drawing here.
            let mut state = State::start(vec![supply * 0.5; netlist.nodes.len()]);
            assert!(circuit.solve(&mut state), "{:?}", state.residual);
            circuit.linearise(&mut state);
            let mut through_outputs = Lanes::ZERO;
            for (k, (output, nodes)) in spec.outputs.iter().zip(&deck.outputs).enumerate() {
                assert_eq!(nodes.len(), output.count as usize);
                let sign = match output.rail {
                    Rail::Sink => 1.0,
                    Rail::Source => -1.0,
                };
                let first = circuit.current_from(&state, nodes[0]) * sign;
                for &node in nodes {
                    let current = circuit.current_from(&state, node) * sign;
                    if output.rail == Rail::Source {
                        through_outputs += current;
                    }
                    for i in 0..group.len() {
                        assert!((current.0[i] / first.0[i] - 1.0).abs() < 1e-7);
                    }
                }
                let target = match output.target {
                    Target::Current(amps) => amps.0,
                    Target::Ratio(ratio) => ratio * spec.reference.current().0,
                };
                let by_device = circuit.sensitivity(&state, nodes[0]);
                let mut variance = Lanes::ZERO;
                for (m, (vt, beta)) in netlist
                    .mos
                    .iter()
                    .zip(by_device.threshold.iter().zip(&by_device.gain))
                {
                    let mosfet = match m.polarity {
                        Polarity::N => &task.card.nmos,
                        Polarity::P => &task.card.pmos,
                    };
                    // Pelgrom, Duinmaijer, Welbers, JSSC 24(5), 1989: one device carries half the
                    // variance of a pair; all its units share their gate area.
                    let gate = m.width * m.length * f64::from(m.units);
                    let a = *vt * mosfet.mismatch.threshold;
                    let b = *beta * mosfet.mismatch.gain;
                    variance += (a * a + b * b) / (2.0 * gate);
                }
                for (r, by) in netlist.resistors.iter().zip(&by_device.resistor) {
                    let card = task.card.resistor.as_ref().expect("a card with resistors");
                    let length = r.width * r.ohms / card.sheet;
                    let a = *by * card.mismatch;
                    variance += a * a / (2.0 * r.width * length * f64::from(r.units));
                }
                let (sigma, of) = match (output.accuracy, output.target) {
                    (Some(a), _) => (a.sigma, a.of),
                    (None, Target::Current(_)) => (3.0, AccuracyOf::Current),
                    (None, Target::Ratio(_)) => (3.0, AccuracyOf::Ratio),
                };
                let extra = if of == AccuracyOf::Current {
                    tolerance
                } else {
                    0.0
                };
                let conductance = circuit.conductance_at(&state, nodes[0]);
                for i in 0..group.len() {
                    let systematic = (first.0[i] / target - 1.0).abs();
                    let error = systematic + extra + sigma * variance.0[i].sqrt() / first.0[i];
                    let (worst, resistance) = &mut out.outputs[k];
                    *worst = worst.max(error);
                    if low {
                        *resistance = resistance.min(1.0 / conductance.0[i]);
                    }
                }
            }
            // Whatever leaves the supply and is no output.
            let total = circuit.current_from(&state, deck.supply) - through_outputs;
            for i in 0..group.len() {
                out.overhead = out.overhead.max(total.0[i]);
                for &node in &deck.references {
                    let pin = state.volts[node].0[i];
                    out.pin = [out.pin[0].min(pin), out.pin[1].max(pin)];
                }
            }
        }
    }
    out
}
