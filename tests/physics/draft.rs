//! Netlists written by hand, with a device of one's own at every transistor.

use biasloom::circuit::dc::{Circuit, State};
use biasloom::circuit::netlist::{
    CurrentSource, GROUND, Mos, Netlist, Node, Polarity, Resistance, VoltageSource,
};
use biasloom::device::Device;
use biasloom::numeric::lanes::Lanes;

/// A netlist under construction; nodes appear when first named, `0` is ground.
#[derive(Debug, Clone)]
pub struct Draft {
    pub netlist: Netlist,
    pub devices: Vec<Device>,
}

impl Draft {
    pub fn new() -> Draft {
        Draft {
            netlist: Netlist {
                nodes: vec!["0".into()],
                ..Netlist::default()
            },
            devices: Vec::new(),
        }
    }

    pub fn node(&mut self, name: &str) -> Node {
        match self.netlist.nodes.iter().position(|n| n == name) {
            Some(node) => node,
            None => {
                self.netlist.nodes.push(name.into());
                self.netlist.nodes.len() - 1
            }
        }
    }

    /// A transistor between drain, gate, source and bulk.
    pub fn mos(&mut self, polarity: Polarity, nodes: [&str; 4], device: Device) -> &mut Draft {
        let [drain, gate, source, bulk] = nodes.map(|n| self.node(n));
        self.devices.push(device);
        self.netlist.mos.push(Mos {
            name: format!("M{}", self.devices.len()),
            polarity,
            drain,
            gate,
            source,
            bulk,
            width: 1e-6,
            length: 1e-6,
            units: 1,
        });
        self
    }

    pub fn nmos(&mut self, drain: &str, gate: &str, source: &str, device: Device) -> &mut Draft {
        self.mos(Polarity::N, [drain, gate, source, "0"], device)
    }

    pub fn pmos(&mut self, drain: &str, gate: &str, source: &str, device: Device) -> &mut Draft {
        self.mos(Polarity::P, [drain, gate, source, "vdd"], device)
    }

    pub fn resistor(&mut self, a: &str, b: &str, ohms: f64) -> &mut Draft {
        let (a, b) = (self.node(a), self.node(b));
        self.netlist.resistors.push(Resistance {
            name: format!("R{}", self.netlist.resistors.len() + 1),
            a,
            b,
            ohms,
            width: 1e-6,
            units: 1,
        });
        self
    }

    /// Current drawn out of node `from` and pushed into node `to`.
    pub fn current(&mut self, from: &str, to: &str, amps: f64) -> &mut Draft {
        let (from, to) = (self.node(from), self.node(to));
        self.netlist.currents.push(CurrentSource {
            name: format!("I{}", self.netlist.currents.len() + 1),
            from,
            to,
            amps,
        });
        self
    }

    pub fn voltage(&mut self, node: &str, volts: f64) -> &mut Draft {
        let plus = self.node(node);
        self.netlist.voltages.push(VoltageSource {
            name: format!("V{}", self.netlist.voltages.len() + 1),
            plus,
            minus: GROUND,
            volts,
        });
        self
    }

    pub fn circuit(&self) -> Circuit {
        Circuit::new(&self.netlist, |k| self.devices[k]).expect("the draft is well formed")
    }

    /// Solves from `start` volts at every unknown node and panics unless every lane converges.
    pub fn solve_from(&self, start: f64) -> Solved {
        let circuit = self.circuit();
        let mut state = State::start(vec![Lanes::splat(start); self.netlist.nodes.len()]);
        assert!(circuit.solve(&mut state), "residuals {:?}", state.residual);
        circuit.linearise(&mut state);
        Solved {
            draft: self.clone(),
            circuit,
            state,
        }
    }

    pub fn solve(&self) -> Solved {
        self.solve_from(0.6)
    }
}

/// A draft, solved and linearised; the readings are those of the first lane.
pub struct Solved {
    pub draft: Draft,
    pub circuit: Circuit,
    pub state: State,
}

impl Solved {
    pub fn node(&self, name: &str) -> Node {
        let node = self.draft.netlist.nodes.iter().position(|n| n == name);
        node.unwrap_or_else(|| panic!("no node {name}"))
    }

    pub fn volts(&self, name: &str) -> f64 {
        self.state.volts[self.node(name)].0[0]
    }

    /// Current from a known node into the circuit.
    pub fn amps(&self, name: &str) -> f64 {
        self.circuit.current_from(&self.state, self.node(name)).0[0]
    }

    pub fn resistance(&self, name: &str) -> f64 {
        1.0 / self.conductance(name)
    }

    pub fn conductance(&self, name: &str) -> f64 {
        self.circuit.conductance_at(&self.state, self.node(name)).0[0]
    }

    /// d(current from `pin`)/d(voltage of `driven`).
    pub fn transfer(&self, pin: &str, driven: &str) -> f64 {
        let (pin, driven) = (self.node(pin), self.node(driven));
        self.circuit.transfer(&self.state, pin, driven).0[0]
    }
}
