//! A shape solved at every process corner and temperature, per unit of unit current.
//!
//! Widths grow in proportion to the unit current, so node voltages and relative errors do not
//! depend on it: one solution prices a family of any size.

use super::draw::{Draw, Feed, Lines};
use super::{CELLS, Shape, Tech, Unit};
use crate::circuit::dc::{Circuit, State};
use crate::circuit::netlist::{Mos, Netlist, Node, Resistance, VoltageSource};
use crate::circuit::small_signal::Study;
use crate::device::bank::Bank;
use crate::device::{self, Conditions};
use crate::numeric::lanes::{Lanes, WIDTH};
use crate::spec::Rail;

/// One condition at which shapes are solved: a process corner at a temperature.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Climate {
    /// Index of the corner in the card.
    pub corner: usize,
    /// Temperature, K.
    pub temperature: f64,
}

/// Conditions of a rail's transistor at a climate.
pub fn conditions(tech: &Tech, climate: &Climate) -> Conditions {
    let corner = &tech.card.corners[climate.corner];
    let (threshold_shift, gain) = match tech.rail {
        Rail::Sink => (corner.nmos_threshold, corner.nmos_gain),
        Rail::Source => (corner.pmos_threshold, corner.pmos_gain),
    };
    Conditions {
        temperature: climate.temperature,
        threshold_shift,
        gain,
    }
}

/// Factor on a resistor's nominal value at a climate (1 where the card has no resistor).
pub fn resistor_factor(tech: &Tech, climate: &Climate) -> f64 {
    let Some(resistor) = &tech.card.resistor else {
        return 1.0;
    };
    let dt = climate.temperature - tech.card.temperature.0;
    tech.card.corners[climate.corner].resistor * (1.0 + dt * (resistor.tc1 + dt * resistor.tc2))
}

/// Conditions of a rail's transistor at climates, eight at a time; the last group repeats its last
/// climate.
pub fn groups_of(tech: &Tech, climates: &[Climate]) -> Vec<[Conditions; WIDTH]> {
    climates
        .chunks(WIDTH)
        .map(|chunk| std::array::from_fn(|i| conditions(tech, &chunk[i.min(chunk.len() - 1)])))
        .collect()
}

/// What a shape does, for every unit current.
#[derive(Debug, Clone, PartialEq)]
pub struct Solved {
    /// The shape.
    pub shape: Shape,
    /// Sizes at the reference unit current the solver was made with.
    pub unit: Unit,
    /// Least and largest voltage of the input leg over climates, V from the rail.
    pub input: [f64; 2],
    /// Least and largest voltage of the bias leg, V from the rail, where there is one.
    pub bias: Option<[f64; 2]>,
    /// Behaviour of an output leg at each probed voltage.
    pub probes: Vec<Probe>,
    /// Voltage of the input leg at every climate, eight to a group, V from the rail.
    pub input_lanes: Vec<Lanes>,
    /// The same of the bias leg; empty where there is none.
    pub bias_lanes: Vec<Lanes>,
    /// What each probe does at every climate: `lanes[probe * groups + group]`.
    pub lanes: Vec<Mirrored>,
}

/// A copy of one unit's current at eight climates.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Mirrored {
    /// Systematic error, I_out / I_in - 1.
    pub error: Lanes,
    /// Mismatch variance of the input leg times its current, A.
    pub variance_in: Lanes,
    /// Mismatch variance of the output leg times its current, A.
    pub variance_out: Lanes,
}

impl Solved {
    /// Groups of eight climates.
    pub fn groups(&self) -> usize {
        self.input_lanes.len()
    }

    /// A probe at every climate.
    #[inline(always)]
    pub fn at(&self, probe: usize) -> &[Mirrored] {
        let groups = self.groups();
        &self.lanes[probe * groups..(probe + 1) * groups]
    }
}

/// An output leg at one voltage, over all climates.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Probe {
    /// Least and largest systematic error of the copy, I_out / I_in - 1.
    pub error: [f64; 2],
    /// Least product of output resistance and current, V.
    pub early: f64,
    /// Largest mismatch variance of the input leg times its current, A.
    pub variance_in: f64,
    /// Largest mismatch variance of the output leg times its current, A.
    pub variance_out: f64,
}

/// Why a shape was not solved.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Failure {
    /// The cell cannot be sized to this shape.
    NoSize,
    /// Newton and both continuations failed at some climate.
    NotConverged,
}

/// Solves shapes of one cell on one rail.
pub struct Solver<'a> {
    tech: Tech<'a>,
    cell: usize,
    current: f64,
    probes: Vec<f64>,
    climates: Vec<Climate>,
    groups: Vec<Group>,
    expected: Template,
    bank: Bank<'a>,
    study: Study,
    listed: Vec<usize>,
    listed_resistors: Vec<usize>,
    /// DC solutions made so far, one per climate and circuit.
    pub solutions: u64,
}

struct Group {
    /// Expected voltages of the shape whose solution `state` holds.
    solved_for: Option<Vec<f64>>,
    resistor: Lanes,
    circuit: Circuit,
    state: State,
}

/// The circuit every shape of a cell shares: an input leg of one unit, an output leg per probe.
struct Template {
    input: Node,
    bias: Option<Node>,
    pins: Vec<Node>,
    /// Transistors of the input leg come first.
    input_mos: usize,
    input_resistors: usize,
    /// Range of transistors and of resistors of each output leg.
    legs: Vec<([usize; 2], [usize; 2])>,
}

fn draw_template(
    cell: usize,
    tech: &Tech,
    unit: &Unit,
    current: f64,
    probes: &[f64],
) -> (Draw, Template) {
    let mut draw = Draw::new();
    draw.rail = tech.rail;
    let input = draw.node("", unit.expected.input);
    draw.current(input, current);
    let bias = unit.bias_size(tech, current).map(|size| {
        let node = draw.node("", unit.expected.cascode);
        draw.current(node, current);
        (node, size)
    });
    let lines: Lines = CELLS[cell].input(&mut draw, unit, 1, &Feed { input, bias });
    let input_mos = draw.netlist.mos.len();
    let input_resistors = draw.netlist.resistors.len();
    let mut pins = Vec::new();
    let mut legs = Vec::new();
    for &volts in probes {
        let pin = draw.node("", volts);
        let (m, r) = (draw.netlist.mos.len(), draw.netlist.resistors.len());
        CELLS[cell].output(&mut draw, unit, 1, &lines, pin);
        legs.push((
            [m, draw.netlist.mos.len()],
            [r, draw.netlist.resistors.len()],
        ));
        pins.push(pin);
    }
    let bias = bias.map(|(node, _)| node);
    (
        draw,
        Template {
            input,
            bias,
            pins,
            input_mos,
            input_resistors,
            legs,
        },
    )
}

impl<'a> Solver<'a> {
    /// A solver whose output legs are probed at `probes` volts from the rail. `current` is the
    /// unit current at which widths are written down, A.
    pub fn new(
        tech: Tech<'a>,
        cell: usize,
        current: f64,
        probes: &[f64],
        climates: &[Climate],
    ) -> Solver<'a> {
        Solver {
            tech,
            cell,
            current,
            probes: probes.to_vec(),
            climates: climates.to_vec(),
            groups: Vec::new(),
            expected: Template {
                input: 0,
                bias: None,
                pins: Vec::new(),
                input_mos: 0,
                input_resistors: 0,
                legs: Vec::new(),
            },
            bank: Bank::new(tech.mosfet(), tech.nominal(), groups_of(&tech, climates)),
            study: Study::default(),
            listed: Vec::new(),
            listed_resistors: Vec::new(),
            solutions: 0,
        }
    }

    fn make_groups(&mut self, netlist: &Netlist) {
        let mut netlist = netlist.clone();
        // Both rails at 0 V: each side hangs on its own rail and the other one carries only the
        // far ends of current sources.
        netlist.voltages.push(VoltageSource {
            name: "supply".into(),
            plus: 1,
            minus: 0,
            volts: 0.0,
        });
        for (k, &pin) in self.expected.pins.iter().enumerate() {
            let volts = match self.tech.rail {
                Rail::Sink => self.probes[k],
                Rail::Source => -self.probes[k],
            };
            netlist.voltages.push(VoltageSource {
                name: format!("v{k}"),
                plus: pin,
                minus: 0,
                volts,
            });
        }
        for chunk in self.climates.chunks(WIDTH) {
            let climate = |i: usize| &chunk[i.min(chunk.len() - 1)];
            let resistor = Lanes::from_fn(|i| resistor_factor(&self.tech, climate(i)));
            let g = self.groups.len();
            let bank = &mut self.bank;
            let circuit = Circuit::new(&netlist, |k| {
                let m = &netlist.mos[k];
                bank.device(g, m.width, m.length, m.units)
            })
            .expect("a template has grounded sources only");
            self.groups.push(Group {
                solved_for: None,
                resistor,
                circuit,
                state: State::default(),
            });
        }
    }

    /// Solves a shape at every climate.
    pub fn solve(&mut self, shape: &Shape) -> Result<Solved, Failure> {
        let cell = CELLS[self.cell];
        let unit = cell
            .unit(&self.tech, shape, self.current)
            .ok_or(Failure::NoSize)?;
        let (draw, template) =
            draw_template(self.cell, &self.tech, &unit, self.current, &self.probes);
        self.expected = template;
        if self.groups.is_empty() {
            self.make_groups(&draw.netlist);
        }
        let mut solved = Solved {
            shape: *shape,
            unit,
            input: [f64::INFINITY, f64::NEG_INFINITY],
            bias: self
                .expected
                .bias
                .map(|_| [f64::INFINITY, f64::NEG_INFINITY]),
            probes: vec![
                Probe {
                    error: [f64::INFINITY, f64::NEG_INFINITY],
                    early: f64::INFINITY,
                    variance_in: 0.0,
                    variance_out: 0.0,
                };
                self.probes.len()
            ],
            input_lanes: Vec::with_capacity(self.groups.len()),
            bias_lanes: Vec::new(),
            lanes: vec![
                Mirrored {
                    error: Lanes::ZERO,
                    variance_in: Lanes::ZERO,
                    variance_out: Lanes::ZERO,
                };
                self.probes.len() * self.groups.len()
            ],
        };
        for g in 0..self.groups.len() {
            self.solve_group(g, &draw, &mut solved)?;
        }
        Ok(solved)
    }

    fn solve_group(&mut self, g: usize, draw: &Draw, solved: &mut Solved) -> Result<(), Failure> {
        for (k, m) in draw.netlist.mos.iter().enumerate() {
            self.groups[g].circuit.mos[k].device = self.bank.device(g, m.width, m.length, m.units);
        }
        let sign = match self.tech.rail {
            Rail::Sink => 1.0,
            Rail::Source => -1.0,
        };
        let groups = self.groups.len();
        let group = &mut self.groups[g];
        for (lanes, r) in group
            .circuit
            .resistors
            .iter_mut()
            .zip(&draw.netlist.resistors)
        {
            lanes.conductance = f64::from(r.units) / (r.ohms * group.resistor);
        }
        // From the last shape's solution, moved by what the closed forms say has changed: a
        // neighbour on a grid or in a polish is then a few iterations away.
        let expected: Vec<f64> = draw.expected.iter().map(|&(_, v)| sign * v).collect();
        match &group.solved_for {
            Some(last) => {
                for ((v, new), old) in group.state.volts.iter_mut().zip(&expected).zip(last) {
                    *v += Lanes::splat(new - old);
                }
            }
            None => {
                group.state.volts.clear();
                group
                    .state
                    .volts
                    .extend(expected.iter().map(|&v| Lanes::splat(v)));
            }
        }
        group.solved_for = None;
        self.solutions += WIDTH as u64;
        if !group.circuit.solve(&mut group.state) {
            return Err(Failure::NotConverged);
        }
        group.solved_for = Some(expected);
        group.circuit.linearise(&mut group.state);
        let (circuit, state) = (&group.circuit, &group.state);
        let volts = |node: Node| state.volts[node] * sign;
        widen(&mut solved.input, volts(self.expected.input));
        solved.input_lanes.push(volts(self.expected.input));
        if let (Some(node), Some(range)) = (self.expected.bias, solved.bias.as_mut()) {
            widen(range, volts(node));
            solved.bias_lanes.push(volts(node));
        }
        let target = self.current;
        let tech = &self.tech;
        let netlist = &draw.netlist;
        let (inputs, input_resistors) = (self.expected.input_mos, self.expected.input_resistors);
        // Variance of one device's current error, in the squares of its own sensitivities.
        let sizes = |size: &Mos| device::mismatch_of(tech.mosfet(), size.width, size.length);
        let body = |r: &Resistance| match &tech.card.resistor {
            Some(card) => device::resistor_mismatch(card, r.width, r.ohms),
            None => 0.0,
        };
        for (k, probe) in solved.probes.iter_mut().enumerate() {
            let (leg, leg_resistors) = self.expected.legs[k];
            self.listed.clear();
            self.listed.extend((0..inputs).chain(leg[0]..leg[1]));
            self.listed_resistors.clear();
            self.listed_resistors
                .extend((0..input_resistors).chain(leg_resistors[0]..leg_resistors[1]));
            let pin = self.expected.pins[k];
            circuit.study(
                state,
                pin,
                &self.listed,
                &self.listed_resistors,
                &mut self.study,
            );
            let study = &self.study;
            let current = study.current * sign;
            let error = current / target - 1.0;
            widen(&mut probe.error, error);
            // A leg without output conductance has no finite Early voltage.
            let early = current / study.conductance.max(Lanes::splat(1e-30));
            probe.early = probe.early.min(early.smallest());
            let mut sums = [Lanes::ZERO; 2];
            for (place, &i) in self.listed.iter().enumerate() {
                let (vt, beta) = sizes(&netlist.mos[i]);
                let a = study.sensitivity.threshold[place] * vt;
                let b = study.sensitivity.gain[place] * beta;
                sums[usize::from(place >= inputs)] += a * a + b * b;
            }
            for (place, &i) in self.listed_resistors.iter().enumerate() {
                let a = study.sensitivity.resistor[place] * body(&netlist.resistors[i]);
                sums[usize::from(place >= input_resistors)] += a * a;
            }
            let scale = target / (current * current);
            let [input, output] = sums;
            let (variance_in, variance_out) = (input * scale, output * scale);
            probe.variance_in = probe.variance_in.max(variance_in.largest());
            probe.variance_out = probe.variance_out.max(variance_out.largest());
            solved.lanes[k * groups + g] = Mirrored {
                error,
                variance_in,
                variance_out,
            };
        }
        Ok(())
    }
}

fn widen(range: &mut [f64; 2], values: Lanes) {
    range[0] = range[0].min(values.smallest());
    range[1] = range[1].max(values.largest());
}
