//! Random mirrors within a card's limits, one climate per lane.

use biasloom::cells::draw::{Draw, Feed};
use biasloom::cells::solved::{Climate, conditions, resistor_factor};
use biasloom::cells::{CELLS, Shape, Size, Tech, Unit};
use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::{Netlist, Node, VoltageSource};
use biasloom::device::{Conditions, Device};
use biasloom::numeric::lanes::{Lanes, WIDTH};
use biasloom::process::Card;
use biasloom::spec::Rail;
use rand::Rng;
use rand_pcg::Pcg64;

/// A mirror in eight lanes that differ in climate, currents and output voltage.
pub struct Mirror {
    pub netlist: Netlist,
    pub circuit: Circuit,
    /// Voltages at which a designer would expect the nodes.
    pub expected: Vec<f64>,
    pub devices: Vec<Device>,
    pub conditions: [Conditions; WIDTH],
    pub supply: f64,
    pub pin: Node,
    /// Nodes that a current source feeds, with the voltage at which it would run out of supply.
    pub fed: Vec<(Node, f64)>,
}

impl Mirror {
    /// Lanes that have a solution between the rails. The legs depend on one another in turn: the last
    /// fed one on none. With a fed node, and those that depend on it, held at the far rail,
    /// it draws more than its source gives, so that somewhere between the rails it draws just that.
    pub fn in_range(&self) -> [bool; WIDTH] {
        let mut fine = [true; WIDTH];
        for k in (0..self.fed.len()).rev() {
            let mut netlist = self.netlist.clone();
            netlist.currents.drain(..=k);
            for &(node, volts) in &self.fed[..=k] {
                netlist.voltages.push(VoltageSource {
                    name: format!("hold{node}"),
                    plus: node,
                    minus: 0,
                    volts,
                });
            }
            let mut held = Circuit::new(&netlist, |k| self.devices[k]).expect("grounded");
            for (to, from) in held.resistors.iter_mut().zip(&self.circuit.resistors) {
                to.conductance = from.conductance;
            }
            for (to, from) in held
                .currents
                .iter_mut()
                .zip(&self.circuit.currents[k + 1..])
            {
                to.amps = from.amps;
            }
            held.fixed[self.pin] = self.circuit.fixed[self.pin];
            let start = self.expected.iter().map(|&v| Lanes::splat(v)).collect();
            let mut state = State::start(start);
            held.solve(&mut state);
            let drawn = held.current_from(&state, self.fed[k].0);
            for (lane, fine) in fine.iter_mut().enumerate() {
                let needed = self.circuit.currents[k].amps.0[lane];
                // What cannot be decided counts as in range.
                *fine &= !state.converged[lane] || drawn.0[lane].abs() > needed;
            }
        }
        fine
    }

    /// A device of the mirror's transistor `k`, its threshold and gain changed.
    pub fn changed(&self, tech: &Tech, k: usize, shift: f64, gain: f64) -> Device {
        let m = &self.netlist.mos[k];
        let lanes = self.conditions.map(|c| Conditions {
            threshold_shift: c.threshold_shift + shift,
            gain: c.gain * gain,
            ..c
        });
        Device::new(tech.mosfet(), tech.nominal(), m.width, m.length, &lanes)
            .widened(f64::from(m.units))
    }
}

fn logarithmic(rng: &mut Pcg64, least: f64, most: f64) -> f64 {
    (rng.random_range(least.ln()..most.ln())).exp()
}

/// A shape of cell `cell`, sized for a random current; `None` where it leaves the card's limits.
fn random_unit(rng: &mut Pcg64, tech: &Tech, cell: usize) -> Option<(Unit, f64)> {
    let mosfet = tech.mosfet();
    let current = logarithmic(rng, 10e-9, 300e-6);
    let shape = Shape {
        cell,
        length: logarithmic(rng, mosfet.length.least.0, mosfet.length.most.0),
        inversion: logarithmic(rng, 0.02, 80.0),
        cascode_length: logarithmic(rng, mosfet.length.least.0, mosfet.length.most.0),
        cascode_inversion: logarithmic(rng, 0.02, 80.0),
        drop: rng.random_range(0.0..0.3),
    };
    let unit = CELLS[cell].unit(tech, &shape, current)?;
    let fits = |size: Size| {
        (mosfet.width.least.0..=mosfet.width.most.0).contains(&size.width)
            && size.length <= mosfet.length.most.0
    };
    let bias = unit.bias_size(tech, current);
    let all = [Some(unit.mirror), unit.cascode, bias];
    all.into_iter()
        .flatten()
        .all(fits)
        .then_some((unit, current))
}

/// A random mirror of cell `cell` on `rail`.
pub fn random_mirror(rng: &mut Pcg64, card: &Card, cell: usize, rail: Rail) -> Mirror {
    let tech = Tech { card, rail };
    let (unit, current) = loop {
        if let Some(found) = random_unit(rng, &tech, cell) {
            break found;
        }
    };
    let units = rng.random_range(1..=8);
    let amps = current * f64::from(units);
    let mut draw = Draw::new();
    draw.rail = rail;
    draw.tag = "in".into();
    let input = draw.node("in", unit.expected.input);
    draw.current(input, amps);
    let bias = unit.bias_size(&tech, current).map(|size| {
        let node = draw.node("bias", unit.expected.cascode);
        draw.current(node, current);
        (node, size)
    });
    let lines = CELLS[cell].input(&mut draw, &unit, units, &Feed { input, bias });
    draw.tag = "out".into();
    let pin = draw.node("pin", 0.5);
    CELLS[cell].output(&mut draw, &unit, rng.random_range(1..=8), &lines, pin);

    let supply = rng.random_range(0.6..1.0) * card.supply_max.0;
    let mut netlist = draw.netlist;
    for (name, plus, volts) in [("supply", draw.supply, supply), ("pin", pin, 0.0)] {
        netlist.voltages.push(VoltageSource {
            name: name.into(),
            plus,
            minus: 0,
            volts,
        });
    }
    let climates: [Climate; WIDTH] = std::array::from_fn(|_| Climate {
        corner: rng.random_range(0..card.corners.len()),
        temperature: rng.random_range(233.15..398.15),
    });
    let conditions = climates.map(|climate| conditions(&tech, &climate));
    let devices: Vec<Device> = netlist
        .mos
        .iter()
        .map(|m| {
            Device::new(
                tech.mosfet(),
                tech.nominal(),
                m.width,
                m.length,
                &conditions,
            )
            .widened(f64::from(m.units))
        })
        .collect();
    let mut circuit = Circuit::new(&netlist, |k| devices[k]).expect("sources are grounded");
    for r in &mut circuit.resistors {
        r.conductance = r.conductance / Lanes::from_fn(|i| resistor_factor(&tech, &climates[i]));
    }
    for source in &mut circuit.currents {
        source.amps = source.amps * Lanes::from_fn(|_| rng.random_range(0.5..1.5));
    }
    circuit.fixed[pin] = Some(Lanes::from_fn(|_| rng.random_range(0.0..supply)));
    let far = if rail == Rail::Sink { supply } else { 0.0 };
    let fed = std::iter::once(input)
        .chain(bias.map(|(node, _)| node))
        .map(|node| (node, far))
        .collect();
    let expected = draw
        .expected
        .iter()
        .map(|&(rail, v)| if rail == Rail::Sink { v } else { supply - v })
        .collect();
    Mirror {
        netlist,
        circuit,
        expected,
        devices,
        conditions,
        supply,
        pin,
        fed,
    }
}
