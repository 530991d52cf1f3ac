//! The network on the bench: solved as one circuit at every corner, and read.

use super::corners::Corner;
use super::drawing::{Drawing, draw};
use super::{Job, Network, Source};
use crate::cells::draw::Serves;
use crate::cells::solved::{groups_of, resistor_factor};
use crate::circuit::dc::{Circuit, State};
use crate::circuit::netlist::{CurrentSource, GROUND, Netlist, VoltageSource};
use crate::circuit::small_signal::{Sensitivity, Study};
use crate::device::bank::Bank;
use crate::device::{mismatch_of, resistor_mismatch};
use crate::numeric::lanes::{Lanes, WIDTH};
use crate::spec::{AccuracyOf, Output, Rail, Reference, Target};

/// Solves networks of one job at a list of corners.
pub struct Bench<'a> {
    job: Job<'a>,
    corners: Vec<Corner>,
    supply: Vec<Lanes>,
    resistor: Vec<Lanes>,
    banks: [Bank<'a>; 2],
    placed: Option<Placed>,
    /// DC solutions made so far, one per corner and circuit.
    pub solutions: u64,
}

/// The network on the bench.
struct Placed {
    drawing: Drawing,
    sourced: Netlist,
    circuits: Vec<Circuit>,
    states: Vec<State>,
    /// Transistors whose drains deliver the current of each family's input and bias legs.
    feeders: Vec<usize>,
    reference_legs: usize,
    all_mos: Vec<usize>,
    all_resistors: Vec<usize>,
}

/// A network that Newton and both continuations could not solve at some corner.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct NotConverged;

/// One output at one corner and one voltage.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reading {
    /// Current, A.
    pub current: f64,
    /// Systematic error against the target, with its sign, fraction.
    pub systematic: f64,
    /// Variances of the relative error from thresholds, gains and resistors.
    pub variance: [f64; 3],
    /// Output resistance, Ohm; infinite where the current does not change.
    pub resistance: f64,
}

/// What does not depend on the outputs' voltages, at one corner.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Common {
    /// Supply current of everything that is not an output, A.
    pub overhead: f64,
    /// Reference pin, V to ground.
    pub pin: f64,
}

/// Readings of a placed network: `outputs[k][corner]`.
#[derive(Debug, Clone, PartialEq)]
pub struct Readings {
    /// Per output, per corner.
    pub outputs: Vec<Vec<Reading>>,
    /// Per corner.
    pub common: Vec<Common>,
}

impl<'a> Bench<'a> {
    /// A bench for a job's networks at `corners`.
    pub fn new(job: Job<'a>, corners: Vec<Corner>) -> Bench<'a> {
        let climates: Vec<_> = corners.iter().map(|c| c.climate).collect();
        let lanes = |f: &dyn Fn(&Corner) -> f64| -> Vec<Lanes> {
            corners
                .chunks(WIDTH)
                .map(|chunk| Lanes::from_fn(|i| f(&chunk[i.min(chunk.len() - 1)])))
                .collect()
        };
        let bank = |rail| {
            let tech = job.tech(rail);
            Bank::new(tech.mosfet(), tech.nominal(), groups_of(&tech, &climates))
        };
        Bench {
            job,
            supply: lanes(&|c| c.supply),
            resistor: lanes(&|c| resistor_factor(&job.tech(Rail::Sink), &c.climate)),
            banks: [bank(Rail::Sink), bank(Rail::Source)],
            corners,
            placed: None,
            solutions: 0,
        }
    }

    /// The corners.
    pub fn corners(&self) -> &[Corner] {
        &self.corners
    }

    /// The drawing of the placed network.
    pub fn drawing(&self) -> &Drawing {
        &self.placed.as_ref().expect("a network was placed").drawing
    }

    /// Puts a network on the bench. One of the same structure as the last starts from its
    /// solution.
    pub fn place(&mut self, network: &Network) {
        let drawing = draw(&self.job, network, false);
        let (sourced, reference_legs) = self.with_sources(network, &drawing);
        let same = self
            .placed
            .as_ref()
            .is_some_and(|p| same_structure(&p.sourced, &sourced));
        if same {
            let placed = self.placed.as_mut().expect("checked just above");
            placed.drawing = drawing;
            placed.sourced = sourced;
        } else {
            let feeders = feeders(&drawing);
            let all_mos = (0..sourced.mos.len()).collect();
            let all_resistors = (0..sourced.resistors.len()).collect();
            self.placed = Some(Placed {
                drawing,
                sourced,
                circuits: Vec::new(),
                states: Vec::new(),
                feeders,
                reference_legs,
                all_mos,
                all_resistors,
            });
        }
        let placed = self.placed.as_mut().expect("placed just above");
        for g in 0..self.supply.len() {
            let netlist = &placed.sourced;
            let banks = &mut self.banks;
            let device = |k: usize| {
                let m = &netlist.mos[k];
                let bank = &mut banks[m.polarity as usize];
                bank.device(g, m.width, m.length, m.units)
            };
            if same {
                let mut device = device;
                for (k, m) in placed.circuits[g].mos.iter_mut().enumerate() {
                    m.device = device(k);
                }
            } else {
                let circuit =
                    Circuit::new(netlist, device).expect("a network has grounded sources only");
                placed.circuits.push(circuit);
                let supply = self.supply[g];
                let volts = placed
                    .drawing
                    .draw
                    .expected
                    .iter()
                    .map(|&(rail, v)| match rail {
                        Rail::Sink => Lanes::splat(v),
                        Rail::Source => supply - v,
                    })
                    .collect();
                placed.states.push(State::start(volts));
            }
            let circuit = &mut placed.circuits[g];
            for (lanes, r) in circuit.resistors.iter_mut().zip(&netlist.resistors) {
                lanes.conductance = f64::from(r.units) / (r.ohms * self.resistor[g]);
            }
            circuit.fixed[placed.drawing.draw.supply] = Some(self.supply[g]);
        }
    }

    /// The drawing with the supply, the reference and a voltage source on every output.
    fn with_sources(&self, network: &Network, drawing: &Drawing) -> (Netlist, usize) {
        let mut netlist = drawing.draw.netlist.clone();
        let supply = drawing.draw.supply;
        let grounded = |name: &str, plus| VoltageSource {
            name: name.to_owned(),
            plus,
            minus: GROUND,
            volts: 0.0,
        };
        netlist.voltages.push(grounded("supply", supply));
        for pin in drawing.pins.iter().flatten() {
            netlist.voltages.push(grounded("pin", *pin));
        }
        let mut legs = 0;
        if let Reference::Current { current, .. } = self.job.spec.reference {
            for (k, family) in network.families.iter().enumerate() {
                let bias = family.bias.as_ref().map(|b| b.feed);
                let nodes = [
                    (Some(family.feed), Some(drawing.inputs[k])),
                    (bias, drawing.biases[k]),
                ];
                for (feed, node) in nodes {
                    let (Some(Source::Reference), Some(node)) = (feed, node) else {
                        continue;
                    };
                    legs += 1;
                    let (from, to) = match family.rail {
                        Rail::Sink => (supply, node),
                        Rail::Source => (node, GROUND),
                    };
                    netlist.currents.push(CurrentSource {
                        name: format!("reference{legs}"),
                        from,
                        to,
                        amps: current.0,
                    });
                }
            }
        }
        (netlist, legs)
    }

    /// Solves the placed network with every output at `volts[k]` volts from its own rail.
    pub fn solve(&mut self, volts: &[f64]) -> Result<(), NotConverged> {
        let placed = self.placed.as_mut().expect("a network was placed");
        for (g, (circuit, state)) in placed
            .circuits
            .iter_mut()
            .zip(&mut placed.states)
            .enumerate()
        {
            for ((nodes, output), &v) in placed
                .drawing
                .pins
                .iter()
                .zip(&self.job.spec.outputs)
                .zip(volts)
            {
                let value = match output.rail {
                    Rail::Sink => Lanes::splat(v),
                    Rail::Source => self.supply[g] - v,
                };
                for &node in nodes {
                    circuit.fixed[node] = Some(value);
                }
            }
            self.solutions += WIDTH as u64;
            if !circuit.solve(state) {
                self.placed = None;
                return Err(NotConverged);
            }
        }
        Ok(())
    }

    /// Currents of every output at the present solution, `[output][corner]`, A.
    pub fn currents(&self) -> Vec<Vec<f64>> {
        let placed = self.placed.as_ref().expect("a network was placed");
        self.job
            .spec
            .outputs
            .iter()
            .zip(&placed.drawing.pins)
            .map(|(output, pins)| {
                let mut out = Vec::with_capacity(self.corners.len());
                for (circuit, state) in placed.circuits.iter().zip(&placed.states) {
                    out.extend((circuit.current_from(state, pins[0]) * sign(output.rail)).0);
                }
                out.truncate(self.corners.len());
                out
            })
            .collect()
    }

    /// The actual reference current at every corner of the present solution, A.
    pub fn reference(&self) -> Vec<f64> {
        let placed = self.placed.as_ref().expect("a network was placed");
        let mut out = Vec::with_capacity(self.corners.len());
        for (circuit, state) in placed.circuits.iter().zip(&placed.states) {
            out.extend(self.reference_lanes(placed, circuit, state).0);
        }
        out.truncate(self.corners.len());
        out
    }

    fn reference_lanes(&self, placed: &Placed, circuit: &Circuit, state: &State) -> Lanes {
        match placed.drawing.reference_resistor {
            Some(r) => {
                let [a, b] = circuit.resistors[r].nodes;
                (state.volts[a] - state.volts[b]) * circuit.resistors[r].conductance
            }
            None => Lanes::splat(self.job.spec.reference.current().0),
        }
    }

    /// Reads everything at the present solution.
    pub fn read(&mut self) -> Readings {
        let count = self.corners.len();
        let placed = self.placed.as_mut().expect("a network was placed");
        for (circuit, state) in placed.circuits.iter().zip(&mut placed.states) {
            circuit.linearise(state);
        }
        let placed = self.placed.as_ref().expect("a network was placed");
        let outputs = self.job.spec.outputs.len();
        let mut readings = Readings {
            outputs: vec![Vec::with_capacity(count); outputs],
            common: Vec::with_capacity(count),
        };
        let mut study = Study::default();
        for g in 0..placed.circuits.len() {
            let lanes = (count - g * WIDTH).min(WIDTH);
            let reference = self.reference_lanes(placed, &placed.circuits[g], &placed.states[g]);
            let by_reference = self.reference_sensitivity(placed, g);
            for k in 0..outputs {
                let by = by_reference.as_ref();
                let read = self.read_output(placed, g, k, reference, by, &mut study);
                readings.outputs[k].extend(&read[..lanes]);
            }
            let (circuit, state) = (&placed.circuits[g], &placed.states[g]);
            let mut overhead = match placed.drawing.reference_resistor {
                Some(_) => reference,
                None => reference * placed.reference_legs as f64,
            };
            for &m in &placed.feeders {
                overhead += state.points[m].id + state.points[m].ib;
            }
            let _ = circuit;
            let pin = state.volts[placed.drawing.inputs[0]];
            readings.common.extend((0..lanes).map(|i| Common {
                overhead: overhead.0[i],
                pin: pin.0[i],
            }));
        }
        readings
    }

    /// d ln(reference)/d(device), for a reference that the network makes itself.
    fn reference_sensitivity(&self, placed: &Placed, g: usize) -> Option<Sensitivity> {
        let r = placed.drawing.reference_resistor?;
        let (circuit, state) = (&placed.circuits[g], &placed.states[g]);
        let resistor = &circuit.resistors[r];
        let [supply, node] = resistor.nodes;
        // I = (VDD - v)/R: d ln I = -dv/(VDD - v) - d ln R.
        let drop = state.volts[supply] - state.volts[node];
        let mut s = circuit.voltage_sensitivity(state, node);
        for list in [&mut s.threshold, &mut s.gain, &mut s.resistor] {
            for value in list.iter_mut() {
                *value = -*value / drop;
            }
        }
        s.resistor[r] -= Lanes::ONE;
        Some(s)
    }

    fn read_output(
        &self,
        placed: &Placed,
        g: usize,
        k: usize,
        reference: Lanes,
        by_reference: Option<&Sensitivity>,
        study: &mut Study,
    ) -> [Reading; WIDTH] {
        let output = &self.job.spec.outputs[k];
        let (circuit, state) = (&placed.circuits[g], &placed.states[g]);
        let netlist = &placed.drawing.draw.netlist;
        let pin = placed.drawing.pins[k][0];
        circuit.study(state, pin, &placed.all_mos, &placed.all_resistors, study);
        let current = study.current * sign(output.rail);
        let nominal = self.job.spec.target(output).0;
        let to_ratio = of(output) == AccuracyOf::Ratio;
        let target = if to_ratio {
            reference * (nominal / self.job.spec.reference.current().0)
        } else {
            Lanes::splat(nominal)
        };
        let systematic = current / target - 1.0;
        let s = &study.sensitivity;
        let inverse = sign(output.rail) / current;
        let by_reference = by_reference.filter(|_| to_ratio);
        let mut variance = [Lanes::ZERO; 3];
        for (i, m) in netlist.mos.iter().enumerate() {
            // Units average: sigma of a leg is that of a unit over sqrt(units).
            let (vt, beta) = mismatch_of(self.mosfet(m.polarity as usize), m.width, m.length);
            let root = f64::from(m.units).sqrt();
            let (vt, beta) = (vt / root, beta / root);
            let mut a = s.threshold[i] * inverse;
            let mut b = s.gain[i] * inverse;
            if let Some(r) = by_reference {
                a -= r.threshold[i];
                b -= r.gain[i];
            }
            let (a, b) = (a * vt, b * beta);
            variance[0] += a * a;
            variance[1] += b * b;
        }
        if let Some(card) = &self.job.card.resistor {
            for (i, r) in netlist.resistors.iter().enumerate() {
                let sigma = resistor_mismatch(card, r.width, r.ohms) / f64::from(r.units).sqrt();
                let mut a = s.resistor[i] * inverse;
                if let Some(by) = by_reference {
                    a -= by.resistor[i];
                }
                let a = a * sigma;
                variance[2] += a * a;
            }
        }
        let conductance = study.conductance;
        std::array::from_fn(|i| Reading {
            current: current.0[i],
            systematic: systematic.0[i],
            variance: [variance[0].0[i], variance[1].0[i], variance[2].0[i]],
            resistance: 1.0 / conductance.0[i].max(0.0),
        })
    }

    fn mosfet(&self, polarity: usize) -> &'a crate::process::Mosfet {
        [&self.job.card.nmos, &self.job.card.pmos][polarity]
    }

    /// Voltages of the placed network at one corner, by node, V, and its operating points by
    /// transistor: (current, |VGS|, |VDS|, VDSsat).
    pub fn operating_points(&self, corner: usize) -> Vec<[f64; 4]> {
        let placed = self.placed.as_ref().expect("a network was placed");
        let (g, i) = (corner / WIDTH, corner % WIDTH);
        let (circuit, state) = (&placed.circuits[g], &placed.states[g]);
        circuit
            .mos
            .iter()
            .zip(&state.points)
            .map(|(m, p)| {
                let [d, gate, s, _] = m.nodes.map(|n| state.volts[n].0[i]);
                [p.id.0[i], (gate - s).abs(), (d - s).abs(), p.vdssat.0[i]]
            })
            .collect()
    }

    /// Current through each resistor of the placed network at one corner, A.
    pub fn resistor_currents(&self, corner: usize) -> Vec<f64> {
        let placed = self.placed.as_ref().expect("a network was placed");
        let (g, i) = (corner / WIDTH, corner % WIDTH);
        let (circuit, state) = (&placed.circuits[g], &placed.states[g]);
        circuit
            .resistors
            .iter()
            .map(|r| {
                let [a, b] = r.nodes.map(|n| state.volts[n].0[i]);
                (a - b).abs() * r.conductance.0[i]
            })
            .collect()
    }
}

/// What an output's accuracy is measured against; without one, what its target is.
pub fn of(output: &Output) -> AccuracyOf {
    match (&output.accuracy, output.target) {
        (Some(a), _) => a.of,
        (None, Target::Ratio(_)) => AccuracyOf::Ratio,
        (None, Target::Current(_)) => AccuracyOf::Current,
    }
}

/// +1 where the output's current flows into its pin, -1 where it flows out.
fn sign(rail: Rail) -> f64 {
    match rail {
        Rail::Sink => 1.0,
        Rail::Source => -1.0,
    }
}

/// The transistors whose drains sit on a child's input or bias node.
fn feeders(drawing: &Drawing) -> Vec<usize> {
    let fed: Vec<usize> = drawing
        .inputs
        .iter()
        .copied()
        .chain(drawing.biases.iter().flatten().copied())
        .collect();
    drawing
        .draw
        .mos_origin
        .iter()
        .zip(&drawing.draw.netlist.mos)
        .enumerate()
        .filter(|(_, (origin, m))| {
            matches!(origin.serves, Serves::Feeds(_) | Serves::Biases(_)) && fed.contains(&m.drain)
        })
        .map(|(k, _)| k)
        .collect()
}

fn same_structure(a: &Netlist, b: &Netlist) -> bool {
    let ends = |n: &Netlist| -> Vec<[usize; 4]> {
        n.mos
            .iter()
            .map(|m| [m.drain, m.gate, m.source, m.bulk])
            .collect()
    };
    a.nodes.len() == b.nodes.len()
        && ends(a) == ends(b)
        && a.mos
            .iter()
            .zip(&b.mos)
            .all(|(x, y)| x.polarity == y.polarity)
        && a.resistors.len() == b.resistors.len()
        && a.resistors
            .iter()
            .zip(&b.resistors)
            .all(|(x, y)| (x.a, x.b) == (y.a, y.b))
        && a.currents == b.currents
}
