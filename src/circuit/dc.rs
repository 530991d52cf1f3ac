//! The DC solution: nodal equations, Newton with the exact Jacobian, drag where it fails.
//!
//! One [`Circuit`] holds one netlist at eight corners side by side. Newton's equations are set up
//! at the unknown nodes only; a node tied to ground through a voltage source is known.
//! Convergence asks for both: the last step below 3e-7 V (the next would be its square over
//! 2 UT, some 1e-12 V) and Kirchhoff's current law at every node to 1e-9 of the currents
//! that meet there, or to the rounding of the node's voltage. A lane that fails is retried under drag, as if every node had a capacitance
//! that lets its imbalance move it only so far (pseudo-transient continuation: Kelley & Keyes,
//! SIAM J. Numer. Anal. 35, 1998); what still fails is reported.
//!
//! The order of elimination belongs to the netlist: it is chosen as if every transistor were
//! saturated, so that a solution does not depend on what was solved before it. Where a pivot of that
//! order is zero after all (square-law devices that are off, or have no output conductance),
//! an order of its own is made for that solution.

use super::netlist::{GROUND, Netlist, Node, Polarity};
use crate::device::{Device, Point};
use crate::numeric::dispatch::{Work, widest};
use crate::numeric::lanes::{Lanes, Mask};
use crate::numeric::sparse::{Factors, Plan};

/// No equation or no unknown at this place.
const NONE: u32 = u32::MAX;
/// Largest change of a node in one Newton step, V.
const STEP_MOST: f64 = 0.3;
/// Last Newton step of a converged lane, V.
const STEP_DONE: f64 = 3e-7;
/// Current-law residual of a converged lane, as a share of the currents at the node.
const RESIDUAL_DONE: f64 = 1e-9;
/// Current below which a node's balance is not resolved, A.
const CURRENT_FLOOR: f64 = 1e-20;
/// What rounding does to a node's balance: four units in the last place of its voltage, and of some UT
/// in the charges, times the node's conductance must be able to pass. It counts where a device
/// conducts well at next to no voltage.
const ROUNDING: f64 = 4.0 * f64::EPSILON / RESIDUAL_DONE;
/// Newton iterations before a lane counts as stuck.
const ITERATIONS: u32 = 60;
/// The two attempts under drag, a bold and a patient one.
const DRAGS: [Drag; 2] = [
    Drag {
        first: 0.1,
        most: 0.3,
        iterations: 200,
    },
    Drag {
        first: 0.05,
        most: 0.05,
        iterations: 300,
    },
];
/// Growth of a node's reach while it moves one way, and its loss when it turns back. The loss
/// outweighs two growths, so that a node caught in a cycle of three steps is freed.
const REACH_GROWTH: f64 = 1.5;
const REACH_LOSS: f64 = 0.4;
/// Least reach, V: near the solution, rounding alone turns a node back.
const REACH_LEAST: f64 = 1e-3;
/// Imbalance that every node is taken to have at least under drag, A: far below any current, and
/// enough to keep the matrix regular where every device is off.
const DRAG_FLOOR: f64 = 1e-16;
/// Orders of elimination tried in one run of Newton.
const PLANS: u32 = 4;
/// Slopes of the imagined saturated transistor by which the order of elimination is chosen, and of
/// a resistor beside it. Only their order of magnitude matters.
const TYPICAL_GM: f64 = 1.0;
const TYPICAL_GMS: f64 = 1.3;
const TYPICAL_GDS: f64 = 0.01;
const TYPICAL_RESISTOR: f64 = 0.5;

/// Drag on every node: it adds the conductance |imbalance|/reach to the node's diagonal, without a
/// current, so that nothing but the way to the solution changes. It vanishes with the imbalance.
#[derive(Debug, Clone, Copy)]
struct Drag {
    /// Reach at first, V.
    first: f64,
    /// Largest reach, V.
    most: f64,
    iterations: u32,
}

/// A transistor in eight lanes.
#[derive(Debug, Clone)]
pub struct MosLanes {
    /// Drain, gate, source, bulk.
    pub nodes: [Node; 4],
    /// +1 for n-channel, -1 for p-channel.
    pub sign: f64,
    /// The device, all its units together.
    pub device: Device,
    slots: [u32; 12],
}

/// A resistor in eight lanes.
#[derive(Debug, Clone)]
pub struct ResistorLanes {
    /// Both ends.
    pub nodes: [Node; 2],
    /// Conductance, S.
    pub conductance: Lanes,
    slots: [u32; 4],
}

/// A current source in eight lanes.
#[derive(Debug, Clone)]
pub struct CurrentLanes {
    /// The current leaves the circuit at the first and enters at the second.
    pub nodes: [Node; 2],
    /// Value, A.
    pub amps: Lanes,
}

/// One netlist at eight corners.
#[derive(Debug, Clone)]
pub struct Circuit {
    /// Transistors, in netlist order.
    pub mos: Vec<MosLanes>,
    /// Resistors, in netlist order.
    pub resistors: Vec<ResistorLanes>,
    /// Current sources, in netlist order.
    pub currents: Vec<CurrentLanes>,
    /// Known voltage of a node, where it is known.
    pub fixed: Vec<Option<Lanes>>,
    /// Index among the unknowns, or `u32::MAX`.
    row: Vec<u32>,
    n: usize,
    pattern: Vec<(usize, usize)>,
    diagonal: Vec<u32>,
    plan: Option<Plan>,
}

/// Why a netlist cannot be solved.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum CircuitError {
    /// A voltage source hangs between two nodes of which neither is ground.
    #[error("voltage source {0} must have one end at ground")]
    FloatingSource(String),
    /// Two voltage sources set one node.
    #[error("node {0} is set by two voltage sources")]
    SetTwice(String),
}

/// Node voltages and what was evaluated there.
#[derive(Debug, Clone, Default)]
pub struct State {
    /// Voltage of every node, V.
    pub volts: Vec<Lanes>,
    /// Every transistor at these voltages.
    pub points: Vec<Point>,
    /// Lanes that met both criteria.
    pub converged: [bool; 8],
    /// Largest residual over the unknown nodes, as a share of the currents there.
    pub residual: [f64; 8],
    /// Newton iterations spent.
    pub iterations: u32,
    /// The order of elimination of this solution, where the circuit's did not serve.
    plan: Option<Plan>,
    pub(super) factors: Factors,
    pub(super) factored: bool,
    f: Vec<Lanes>,
    scale: Vec<Lanes>,
    dx: Vec<Lanes>,
    /// Under drag: the reach of every unknown node, V, and the step it took last.
    reach: Vec<Lanes>,
    last: Vec<Lanes>,
}

impl Circuit {
    /// The structure of a netlist; devices are placed by `device`, which gets the index of the
    /// transistor and returns it with all its units.
    pub fn new(
        netlist: &Netlist,
        mut device: impl FnMut(usize) -> Device,
    ) -> Result<Circuit, CircuitError> {
        let mut fixed: Vec<Option<Lanes>> = vec![None; netlist.nodes.len()];
        fixed[GROUND] = Some(Lanes::ZERO);
        for source in &netlist.voltages {
            let (node, volts) = match (source.plus, source.minus) {
                (node, GROUND) => (node, source.volts),
                (GROUND, node) => (node, -source.volts),
                _ => return Err(CircuitError::FloatingSource(source.name.clone())),
            };
            if fixed[node].is_some() {
                return Err(CircuitError::SetTwice(netlist.nodes[node].clone()));
            }
            fixed[node] = Some(Lanes::splat(volts));
        }
        let mut row = vec![NONE; netlist.nodes.len()];
        let mut n = 0;
        for (node, value) in fixed.iter().enumerate() {
            if value.is_none() {
                row[node] = n as u32;
                n += 1;
            }
        }
        // Every diagonal has a place: drag needs it.
        let mut pattern: Vec<(usize, usize)> = (0..n).map(|i| (i, i)).collect();
        let diagonal = (0..n as u32).collect();
        let mut entry = |r: u32, c: u32| {
            if r == NONE || c == NONE {
                return NONE;
            }
            pattern.push((r as usize, c as usize));
            pattern.len() as u32 - 1
        };
        let mos = netlist
            .mos
            .iter()
            .enumerate()
            .map(|(k, m)| {
                let nodes = [m.drain, m.gate, m.source, m.bulk];
                let mut slots = [NONE; 12];
                for (i, &r) in [m.drain, m.source, m.bulk].iter().enumerate() {
                    for (j, &c) in nodes.iter().enumerate() {
                        slots[4 * i + j] = entry(row[r], row[c]);
                    }
                }
                MosLanes {
                    nodes,
                    sign: if m.polarity == Polarity::N { 1.0 } else { -1.0 },
                    device: device(k),
                    slots,
                }
            })
            .collect();
        let resistors = netlist
            .resistors
            .iter()
            .map(|r| {
                let (a, b) = (row[r.a], row[r.b]);
                ResistorLanes {
                    nodes: [r.a, r.b],
                    conductance: Lanes::splat(f64::from(r.units) / r.ohms),
                    slots: [entry(a, a), entry(a, b), entry(b, a), entry(b, b)],
                }
            })
            .collect();
        let currents = netlist
            .currents
            .iter()
            .map(|s| CurrentLanes {
                nodes: [s.from, s.to],
                amps: Lanes::splat(s.amps),
            })
            .collect();
        let mut circuit = Circuit {
            mos,
            resistors,
            currents,
            fixed,
            row,
            n,
            pattern,
            diagonal,
            plan: None,
        };
        circuit.plan = circuit.typical_plan();
        Ok(circuit)
    }

    /// The order of elimination for saturated transistors. `None` where even they would leave the
    /// matrix singular, as a node that no channel or resistor reaches does.
    fn typical_plan(&self) -> Option<Plan> {
        let lane = Lanes::splat;
        let mut values = vec![Lanes::ZERO; self.pattern.len()];
        let saturated = Point {
            gm: lane(TYPICAL_GM),
            gms: lane(TYPICAL_GMS),
            gds: lane(TYPICAL_GDS),
            ..Point::OFF
        };
        for m in &self.mos {
            m.stamp(&saturated, |e, g| values[e] += g);
        }
        for r in &self.resistors {
            r.stamp(lane(TYPICAL_RESISTOR), |e, g| values[e] += g);
        }
        Plan::new(self.n, &self.pattern, &values)
    }

    /// Number of unknown nodes.
    pub fn unknowns(&self) -> usize {
        self.n
    }

    pub(super) fn row(&self, node: Node) -> Option<usize> {
        (self.row[node] != NONE).then_some(self.row[node] as usize)
    }

    /// The order of elimination that `state` was factorised by.
    pub(super) fn plan<'a>(&'a self, state: &'a State) -> &'a Plan {
        let plan = state.plan.as_ref().or(self.plan.as_ref());
        plan.expect("a converged solution has an order of elimination")
    }

    /// Solves from the voltages in `state.volts` (unknown nodes; the known ones are set here).
    /// Returns whether every lane converged; `state` says which.
    pub fn solve(&self, state: &mut State) -> bool {
        assert_eq!(
            state.volts.len(),
            self.fixed.len(),
            "one starting voltage per node"
        );
        let start = state.volts.clone();
        state.plan = None;
        if self.newton(state, None) {
            return true;
        }
        self.rescue(state, &start);
        state.converged.iter().all(|&c| c)
    }

    /// Newton from the present voltages.
    fn newton(&self, state: &mut State, drag: Option<&Drag>) -> bool {
        self.tie(state);
        state.iterations = 0;
        state.converged = [false; 8];
        if let Some(drag) = drag {
            state.reach.clear();
            state.reach.resize(self.n, Lanes::splat(drag.first));
            state.last.clear();
            state.last.resize(self.n, Lanes::ZERO);
        }
        let mut hopeless = Mask::NONE;
        if state.plan.is_none() && self.plan.is_none() && !self.replan(state, drag.is_some()) {
            return false;
        }
        for round in 1.. {
            let end = widest(Newton {
                circuit: self,
                state,
                drag,
                hopeless,
            });
            match end {
                End::Converged => return true,
                End::Spent => return false,
                End::Singular => {
                    if !self.replan(state, drag.is_some()) {
                        return false;
                    }
                    hopeless = if round < PLANS {
                        self.plan(state).serves().not()
                    } else {
                        Mask::NONE.not()
                    };
                }
            }
        }
        false
    }

    /// Sets the known nodes.
    fn tie(&self, state: &mut State) {
        for (node, value) in self.fixed.iter().enumerate() {
            if let Some(v) = value {
                state.volts[node] = *v;
            }
        }
    }

    /// Makes an order of elimination for the matrix at the present voltages.
    fn replan(&self, state: &mut State, dragged: bool) -> bool {
        state.prepare(self.n, self.mos.len());
        // Unplanned slots equal entries.
        state.factors = Factors::zeroed(self.pattern.len());
        assemble(self, state, dragged, |entry| entry);
        let values: Vec<Lanes> = (0..self.pattern.len())
            .map(|e| state.factors.value(e))
            .collect();
        state.plan = Plan::new(self.n, &self.pattern, &values);
        state.plan.is_some()
    }

    /// Retries the lanes Newton left, under drag from where they started.
    fn rescue(&self, state: &mut State, start: &[Lanes]) {
        let mut best = state.clone();
        for drag in &DRAGS {
            state.volts.copy_from_slice(start);
            state.plan = None;
            self.newton(state, Some(drag));
            best.iterations += state.iterations;
            // A node that nothing holds stands still under drag: only Newton itself has the last word.
            state.plan = None;
            self.newton(state, None);
            best.iterations += state.iterations;
            for lane in 0..8 {
                if !best.converged[lane] && state.converged[lane] {
                    for (to, from) in best.volts.iter_mut().zip(&state.volts) {
                        to.0[lane] = from.0[lane];
                    }
                    best.converged[lane] = true;
                    best.residual[lane] = state.residual[lane];
                }
            }
            if best.converged.iter().all(|&c| c) {
                break;
            }
        }
        // Evaluate once more so that points and slopes belong to the adopted voltages.
        std::mem::swap(state, &mut best);
        self.evaluate(state);
    }

    /// Evaluates every element at the present voltages, without a step.
    pub(super) fn evaluate(&self, state: &mut State) {
        self.tie(state);
        if state.plan.is_some() || self.plan.is_some() || self.replan(state, false) {
            widest(Evaluate {
                circuit: self,
                state,
            });
        }
    }

    /// Makes the order of elimination anew at the present voltages and evaluates there.
    pub(super) fn evaluate_anew(&self, state: &mut State) {
        if self.replan(state, false) {
            self.evaluate(state);
        }
    }
}

impl MosLanes {
    /// Adds the slopes of the terminal currents to their places in the matrix.
    #[inline(always)]
    fn stamp(&self, p: &Point, mut add: impl FnMut(usize, Lanes)) {
        // Columns in the order drain, gate, source, bulk.
        let (channel, impact) = p.slopes();
        for j in 0..4 {
            if self.slots[j] != NONE {
                add(self.slots[j] as usize, channel[j] + impact[j]);
            }
            if self.slots[4 + j] != NONE {
                add(self.slots[4 + j] as usize, -channel[j]);
            }
            if self.slots[8 + j] != NONE {
                add(self.slots[8 + j] as usize, -impact[j]);
            }
        }
    }
}

impl ResistorLanes {
    /// Adds `conductance` to its places in the matrix.
    #[inline(always)]
    fn stamp(&self, conductance: Lanes, mut add: impl FnMut(usize, Lanes)) {
        let signs = [1.0, -1.0, -1.0, 1.0];
        for (k, sign) in signs.into_iter().enumerate() {
            if self.slots[k] != NONE {
                add(self.slots[k] as usize, conductance * sign);
            }
        }
    }
}

impl State {
    /// Starting voltages for a circuit: the known nodes are set by the solution itself.
    pub fn start(volts: Vec<Lanes>) -> State {
        State {
            volts,
            ..State::default()
        }
    }

    #[inline(always)]
    fn prepare(&mut self, n: usize, mos: usize) {
        self.f.clear();
        self.f.resize(n, Lanes::ZERO);
        self.scale.clear();
        self.scale.resize(n, Lanes::ZERO);
        self.dx.clear();
        self.dx.resize(n, Lanes::ZERO);
        if self.points.len() != mos {
            self.points.resize(mos, Point::OFF);
        }
        self.factored = false;
    }
}

/// Residual and Jacobian at the present voltages, the latter with the drag of `state.reach` if
/// `dragged`; `slot` says where an entry of the pattern goes.
#[inline(always)]
fn assemble(circuit: &Circuit, state: &mut State, dragged: bool, slot: impl Fn(usize) -> usize) {
    let State {
        volts,
        points,
        f,
        scale,
        factors,
        reach,
        ..
    } = state;
    for (m, point) in circuit.mos.iter().zip(points.iter_mut()) {
        let [d, g, s, b] = m.nodes;
        let vb = volts[b];
        let p = m.device.at(
            (volts[g] - vb) * m.sign,
            (volts[d] - vb) * m.sign,
            (volts[s] - vb) * m.sign,
        );
        *point = p;
        let id = p.id * m.sign;
        let ib = p.ib * m.sign;
        let [rd, rs, rb] = [circuit.row[d], circuit.row[s], circuit.row[b]];
        if rd != NONE {
            let r = rd as usize;
            f[r] += id + ib;
            scale[r] += (id + ib).abs();
        }
        if rs != NONE {
            let r = rs as usize;
            f[r] -= id;
            scale[r] += id.abs();
        }
        if rb != NONE {
            f[rb as usize] -= ib;
        }
        m.stamp(&p, |entry, g| factors.add(slot(entry), g));
    }
    for r in &circuit.resistors {
        let [a, b] = r.nodes;
        let i = (volts[a] - volts[b]) * r.conductance;
        r.stamp(r.conductance, |entry, g| factors.add(slot(entry), g));
        for (node, sign) in [(a, 1.0), (b, -1.0)] {
            let row = circuit.row[node];
            if row != NONE {
                f[row as usize] += i * sign;
                scale[row as usize] += i.abs();
            }
        }
    }
    for s in &circuit.currents {
        for (node, sign) in [(s.nodes[0], 1.0), (s.nodes[1], -1.0)] {
            let row = circuit.row[node];
            if row != NONE {
                f[row as usize] += s.amps * sign;
                scale[row as usize] += s.amps.abs();
            }
        }
    }
    if dragged {
        for ((f, reach), &diagonal) in f.iter().zip(&*reach).zip(&circuit.diagonal) {
            let g = (f.abs() + DRAG_FLOOR) / *reach;
            factors.add(slot(diagonal as usize), g);
        }
    }
}

/// How a run of Newton ended.
enum End {
    /// Every lane converged.
    Converged,
    /// The iterations are used up.
    Spent,
    /// In some lane that still has hope the order of elimination met a zero pivot.
    Singular,
}

struct Newton<'a> {
    circuit: &'a Circuit,
    state: &'a mut State,
    drag: Option<&'a Drag>,
    /// Lanes whose matrix no order of elimination serves; they stand still.
    hopeless: Mask,
}

impl Work for Newton<'_> {
    type Answer = End;

    #[inline(always)]
    fn run(self) -> End {
        let Newton {
            circuit,
            state,
            drag,
            hopeless,
        } = self;
        let iterations = drag.map_or(ITERATIONS, |d| d.iterations);
        let own = state.plan.take();
        let plan = own.as_ref().or(circuit.plan.as_ref());
        let plan = plan.expect("the caller saw to an order of elimination");
        let never = Lanes::splat(f64::INFINITY);
        let mut step = never;
        let end = loop {
            state.iterations += 1;
            state.prepare(circuit.n, circuit.mos.len());
            plan.clear(&mut state.factors);
            assemble(circuit, state, drag.is_some(), |e| plan.slot(e));
            let mut residual = Lanes::ZERO;
            for (node, &row) in circuit.row.iter().enumerate() {
                if row != NONE {
                    let r = row as usize;
                    let slope = state.factors.value(plan.slot(circuit.diagonal[r] as usize));
                    let rounding = slope.abs() * (state.volts[node].abs() + 0.1) * ROUNDING;
                    let scale = state.scale[r] + rounding + CURRENT_FLOOR;
                    residual = residual.max(state.f[r].abs() / scale);
                }
            }
            let done: Mask = step
                .lt(Lanes::splat(STEP_DONE))
                .and(residual.lt(Lanes::splat(RESIDUAL_DONE)));
            state.converged = done.0;
            state.residual = residual.0;
            if done.all() {
                break End::Converged;
            }
            if state.iterations >= iterations {
                break End::Spent;
            }
            let sound = plan.factor(&mut state.factors);
            if !sound.or(done).or(hopeless).all() {
                break End::Singular;
            }
            plan.solve(&state.factors, &mut state.f, &mut state.dx);
            step = Lanes::ZERO;
            let most = Lanes::splat(STEP_MOST);
            for (node, &row) in circuit.row.iter().enumerate() {
                if row != NONE {
                    let d = state.dx[row as usize].min(most).max(-most);
                    step = step.max(d.abs());
                    state.volts[node] -= Lanes::select(sound, d, Lanes::ZERO);
                }
            }
            step = Lanes::select(sound, step, never);
            if let Some(drag) = drag {
                for ((reach, last), d) in state.reach.iter_mut().zip(&mut state.last).zip(&state.dx)
                {
                    let longer = (*reach * REACH_GROWTH).min(Lanes::splat(drag.most));
                    let turned = (*d * *last).lt(Lanes::ZERO);
                    let shorter = (*reach * REACH_LOSS).max(Lanes::splat(REACH_LEAST));
                    *reach = Lanes::select(turned, shorter, longer);
                    *last = *d;
                }
            }
        };
        state.plan = own;
        end
    }
}

struct Evaluate<'a> {
    circuit: &'a Circuit,
    state: &'a mut State,
}

impl Work for Evaluate<'_> {
    type Answer = ();

    #[inline(always)]
    fn run(self) {
        let Evaluate { circuit, state } = self;
        let own = state.plan.take();
        let plan = own.as_ref().or(circuit.plan.as_ref());
        let plan = plan.expect("the caller saw to an order of elimination");
        state.prepare(circuit.n, circuit.mos.len());
        plan.clear(&mut state.factors);
        assemble(circuit, state, false, |e| plan.slot(e));
        state.plan = own;
    }
}
