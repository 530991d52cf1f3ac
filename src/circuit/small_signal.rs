//! Derivatives of a solved circuit: conductance at a pin, and by one adjoint solution the
//! sensitivity of a pin's current to every device (Director & Rohrer, IEEE Trans. Circuit
//! Theory 16, 1969).

use super::dc::{Circuit, State};
use super::netlist::Node;
use crate::numeric::dispatch::{Work, widest};
use crate::numeric::lanes::{Lanes, Mask};

/// Growth of an elimination beyond which its order is made anew: derivatives keep ten digits.
const GROWTH_MOST: f64 = 1e4;

/// Sensitivities of one pin's current.
#[derive(Debug, Clone, Default)]
pub struct Sensitivity {
    /// Per transistor: d I / d VT, S (all its units shifted alike).
    pub threshold: Vec<Lanes>,
    /// Per transistor: d I / d ln beta, A.
    pub gain: Vec<Lanes>,
    /// Per resistor: d I / d ln R, A.
    pub resistor: Vec<Lanes>,
}

impl Circuit {
    /// Factorises the Jacobian at the solution; the functions below need it.
    pub fn linearise(&self, state: &mut State) {
        if state.factored {
            return;
        }
        let sound = widest(Factorise {
            circuit: self,
            state,
        });
        let growth = self.plan(state).growth(&state.factors);
        let good = sound.and(growth.lt(Lanes::splat(GROWTH_MOST)));
        if !good.or(Mask(state.converged).not()).all() {
            self.evaluate_anew(state);
            widest(Factorise {
                circuit: self,
                state,
            });
        }
        state.factored = true;
    }

    /// Current that flows from a node into the elements on it, A.
    pub fn current_from(&self, state: &State, node: Node) -> Lanes {
        let mut sum = Lanes::ZERO;
        for (m, p) in self.mos.iter().zip(&state.points) {
            if m.nodes[0] == node {
                sum += (p.id + p.ib) * m.sign;
            }
            if m.nodes[2] == node {
                sum -= p.id * m.sign;
            }
            if m.nodes[3] == node {
                sum -= p.ib * m.sign;
            }
        }
        for r in &self.resistors {
            let [a, b] = r.nodes;
            if a == node {
                sum += (state.volts[a] - state.volts[b]) * r.conductance;
            }
            if b == node {
                sum += (state.volts[b] - state.volts[a]) * r.conductance;
            }
        }
        for s in &self.currents {
            if s.nodes[0] == node {
                sum += s.amps;
            }
            if s.nodes[1] == node {
                sum -= s.amps;
            }
        }
        sum
    }

    /// Visits d(current from `node`)/d(voltage of another node), element by element.
    fn slopes_of(&self, state: &State, node: Node, mut visit: impl FnMut(Node, Lanes)) {
        for (m, p) in self.mos.iter().zip(&state.points) {
            let (channel, impact) = p.slopes();
            for ((&other, channel), impact) in m.nodes.iter().zip(channel).zip(impact) {
                if m.nodes[0] == node {
                    visit(other, channel + impact);
                }
                if m.nodes[2] == node {
                    visit(other, -channel);
                }
                if m.nodes[3] == node {
                    visit(other, -impact);
                }
            }
        }
        for r in &self.resistors {
            for (here, there) in [(r.nodes[0], r.nodes[1]), (r.nodes[1], r.nodes[0])] {
                if here == node {
                    visit(here, r.conductance);
                    visit(there, -r.conductance);
                }
            }
        }
    }

    /// dI/dV at a known node `pin`, A per volt: I is the current from the pin into the circuit.
    /// Call [`Circuit::linearise`] first.
    pub fn conductance_at(&self, state: &State, pin: Node) -> Lanes {
        self.transfer(state, pin, pin)
    }

    /// d(current from known node `pin`)/d(voltage of known node `driven`), A per volt. Call
    /// [`Circuit::linearise`] first.
    pub fn transfer(&self, state: &State, pin: Node, driven: Node) -> Lanes {
        let n = self.unknowns();
        let mut direct = Lanes::ZERO;
        let mut by_row = vec![Lanes::ZERO; n];
        self.slopes_of(state, pin, |node, g| {
            if node == driven {
                direct += g;
            }
            if let Some(r) = self.row(node) {
                by_row[r] += g;
            }
        });
        // Residual slopes over the driven node, at every unknown node.
        let mut rhs = vec![Lanes::ZERO; n];
        self.driven_by(state, driven, &mut rhs);
        let mut dv = vec![Lanes::ZERO; n];
        self.plan(state).solve(&state.factors, &mut rhs, &mut dv);
        for (g, d) in by_row.iter().zip(&dv) {
            direct -= *g * *d;
        }
        direct
    }

    /// Adds d(residual)/d(voltage of `driven`) for every unknown node.
    fn driven_by(&self, state: &State, driven: Node, rhs: &mut [Lanes]) {
        for (m, p) in self.mos.iter().zip(&state.points) {
            if !m.nodes.contains(&driven) {
                continue;
            }
            let (channel, impact) = p.slopes();
            for j in 0..4 {
                if m.nodes[j] != driven {
                    continue;
                }
                if let Some(r) = self.row(m.nodes[0]) {
                    rhs[r] += channel[j] + impact[j];
                }
                if let Some(r) = self.row(m.nodes[2]) {
                    rhs[r] -= channel[j];
                }
                if let Some(r) = self.row(m.nodes[3]) {
                    rhs[r] -= impact[j];
                }
            }
        }
        for r in &self.resistors {
            for (here, there) in [(r.nodes[0], r.nodes[1]), (r.nodes[1], r.nodes[0])] {
                if there == driven
                    && let Some(row) = self.row(here)
                {
                    rhs[row] -= r.conductance;
                }
            }
        }
    }

    /// Sensitivity of the current from known node `pin` to every device. Call
    /// [`Circuit::linearise`] first.
    pub fn sensitivity(&self, state: &State, pin: Node) -> Sensitivity {
        let mut c = vec![Lanes::ZERO; self.unknowns()];
        self.slopes_of(state, pin, |node, g| {
            if let Some(r) = self.row(node) {
                c[r] += g;
            }
        });
        self.adjoint(state, c, Some(pin))
    }

    /// Sensitivity of the voltage of unknown node `node` to every device, in V where
    /// [`Circuit::sensitivity`] has A. Call [`Circuit::linearise`] first.
    pub fn voltage_sensitivity(&self, state: &State, node: Node) -> Sensitivity {
        let mut c = vec![Lanes::ZERO; self.unknowns()];
        if let Some(r) = self.row(node) {
            c[r] = Lanes::ONE;
        }
        self.adjoint(state, c, None)
    }

    /// d(g(v) + current from `pin`)/dp with dg/dv = c: dI/dp = dI/dp|direct - y . dF/dp, where
    /// J^T y = c.
    fn adjoint(&self, state: &State, mut c: Vec<Lanes>, pin: Option<Node>) -> Sensitivity {
        let mut y = vec![Lanes::ZERO; self.unknowns()];
        self.plan(state)
            .solve_transposed(&state.factors, &mut c, &mut y);
        let weight = |node: Node| match self.row(node) {
            Some(r) => -y[r],
            None if Some(node) == pin => Lanes::ONE,
            None => Lanes::ZERO,
        };
        let mut out = Sensitivity::default();
        for (m, p) in self.mos.iter().zip(&state.points) {
            let [d, _, s, b] = m.nodes;
            let through = weight(d) - weight(s);
            let into_bulk = weight(d) - weight(b);
            let [bg, ..] = p.ib_slopes;
            out.threshold
                .push((-p.gm * through - bg * into_bulk) * m.sign);
            out.gain.push((p.id * through + p.ib * into_bulk) * m.sign);
        }
        for r in &self.resistors {
            let [a, b] = r.nodes;
            let i = (state.volts[a] - state.volts[b]) * r.conductance;
            out.resistor.push(-i * (weight(a) - weight(b)));
        }
        out
    }
}

/// Everything about one pin, in buffers that are used again: its current, the conductance there,
/// and the sensitivity of the current to chosen devices.
#[derive(Debug, Clone, Default)]
pub struct Study {
    /// Current from the pin into the circuit, A.
    pub current: Lanes,
    /// dI/dV, S.
    pub conductance: Lanes,
    /// Sensitivities, in the order the devices were listed.
    pub sensitivity: Sensitivity,
    c: Vec<Lanes>,
    y: Vec<Lanes>,
}

impl Circuit {
    /// Studies a known node `pin` by one adjoint solution. `mos` and `resistors` list the devices
    /// whose sensitivity is asked for; every device on the pin must be among them, and no current
    /// source may hang on it. Call [`Circuit::linearise`] first.
    pub fn study(
        &self,
        state: &State,
        pin: Node,
        mos: &[usize],
        resistors: &[usize],
        study: &mut Study,
    ) {
        widest(Studying {
            circuit: self,
            state,
            pin,
            mos,
            resistors,
            study,
        });
    }
}

struct Studying<'w> {
    circuit: &'w Circuit,
    state: &'w State,
    pin: Node,
    mos: &'w [usize],
    resistors: &'w [usize],
    study: &'w mut Study,
}

impl Work for Studying<'_> {
    type Answer = ();
    #[inline(always)]
    fn run(self) {
        let Studying {
            circuit,
            state,
            pin,
            mos,
            resistors,
            study,
        } = self;
        let n = circuit.unknowns();
        let Study {
            current,
            conductance,
            sensitivity,
            c,
            y,
        } = study;
        for list in [&mut *c, &mut *y] {
            list.clear();
            list.resize(n, Lanes::ZERO);
        }
        *current = Lanes::ZERO;
        // How the pin's current follows the unknown nodes.
        for &k in mos {
            let (m, p) = (&circuit.mos[k], &state.points[k]);
            let [d, _, s, b] = m.nodes;
            if d != pin && s != pin && b != pin {
                continue;
            }
            let (channel, impact) = p.slopes();
            let on = |node: Node| if node == pin { 1.0 } else { 0.0 };
            let (through, into_bulk) = (on(d) - on(s), on(d) - on(b));
            *current += (p.id * through + p.ib * into_bulk) * m.sign;
            for j in 0..4 {
                if let Some(r) = circuit.row(m.nodes[j]) {
                    c[r] += channel[j] * through + impact[j] * into_bulk;
                }
            }
        }
        for &k in resistors {
            let r = &circuit.resistors[k];
            for (here, there) in [(r.nodes[0], r.nodes[1]), (r.nodes[1], r.nodes[0])] {
                if here == pin {
                    *current += (state.volts[here] - state.volts[there]) * r.conductance;
                    if let Some(row) = circuit.row(there) {
                        c[row] -= r.conductance;
                    }
                }
            }
        }
        circuit.plan(state).solve_transposed(&state.factors, c, y);
        let weight = |node: Node| match circuit.row(node) {
            Some(r) => -y[r],
            None if node == pin => Lanes::ONE,
            None => Lanes::ZERO,
        };
        // What a change inside a device does: at its own ends, and through them everywhere.
        *conductance = Lanes::ZERO;
        sensitivity.threshold.clear();
        sensitivity.gain.clear();
        sensitivity.resistor.clear();
        for &k in mos {
            let (m, p) = (&circuit.mos[k], &state.points[k]);
            let [d, _, s, b] = m.nodes;
            let through = weight(d) - weight(s);
            let into_bulk = weight(d) - weight(b);
            let [bg, ..] = p.ib_slopes;
            sensitivity
                .threshold
                .push((-p.gm * through - bg * into_bulk) * m.sign);
            sensitivity
                .gain
                .push((p.id * through + p.ib * into_bulk) * m.sign);
            if m.nodes.contains(&pin) {
                let (channel, impact) = p.slopes();
                for j in 0..4 {
                    if m.nodes[j] == pin {
                        *conductance += channel[j] * through + impact[j] * into_bulk;
                    }
                }
            }
        }
        for &k in resistors {
            let r = &circuit.resistors[k];
            let [a, b] = r.nodes;
            let through = weight(a) - weight(b);
            let i = (state.volts[a] - state.volts[b]) * r.conductance;
            sensitivity.resistor.push(-i * through);
            let on = |node: Node| if node == pin { 1.0 } else { 0.0 };
            *conductance += r.conductance * through * (on(a) - on(b));
        }
    }
}

struct Factorise<'a> {
    circuit: &'a Circuit,
    state: &'a mut State,
}

impl Work for Factorise<'_> {
    /// Lanes in which no pivot was zero.
    type Answer = Mask;
    #[inline(always)]
    fn run(self) -> Mask {
        let Factorise { circuit, state } = self;
        let mut factors = std::mem::take(&mut state.factors);
        let sound = circuit.plan(state).factor(&mut factors);
        state.factors = factors;
        sound
    }
}
