//! Drawing legs into a netlist, rail-independent: a cell draws its sink side, the pen mirrors it.

use crate::circuit::netlist::{CurrentSource, GROUND, Mos, Netlist, Node, Polarity, Resistance};
use crate::spec::Rail;

use super::{Body, Size};

/// What a drawn element is for.
#[derive(Debug, Clone, PartialEq)]
pub struct Origin {
    /// Index of the family.
    pub family: usize,
    /// Role in words, such as "input mirror".
    pub role: &'static str,
    /// What the leg serves: nothing for an input leg, an output (index in the spec), or a family
    /// it feeds.
    pub serves: Serves,
}

/// What a leg serves.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Serves {
    /// It is an input or bias leg.
    Own,
    /// An output of the spec.
    Output(usize),
    /// The input of a family.
    Feeds(usize),
    /// The bias leg of a family.
    Biases(usize),
}

/// Where a leg's current enters.
#[derive(Debug, Clone, Copy)]
pub struct Feed {
    /// Node of the input leg.
    pub input: Node,
    /// Node of the bias leg and its current in A, for cells that have one.
    pub bias: Option<(Node, Size)>,
}

/// The gate lines an input leg makes.
#[derive(Debug, Clone, Copy)]
pub struct Lines {
    /// Gate of the mirror devices.
    pub mirror: Node,
    /// Gate of the cascode devices.
    pub cascode: Option<Node>,
}

/// A netlist under construction.
#[derive(Debug, Clone)]
pub struct Draw {
    /// What has been drawn.
    pub netlist: Netlist,
    /// Expected voltage of each node at the nominal corner, from the rail it belongs to.
    pub expected: Vec<(Rail, f64)>,
    /// Origin of each transistor.
    pub mos_origin: Vec<Origin>,
    /// Origin of each resistor.
    pub resistor_origin: Vec<Origin>,
    /// Supply node.
    pub supply: Node,
    /// Rail being drawn on.
    pub rail: Rail,
    /// Family being drawn.
    pub family: usize,
    /// Name prefix of elements and inner nodes being drawn; without one they stay nameless, which
    /// serves a drawing nobody reads.
    pub tag: String,
    /// What the leg being drawn serves.
    pub serves: Serves,
}

impl Draw {
    /// An empty drawing with ground and supply.
    pub fn new() -> Draw {
        Draw {
            netlist: Netlist {
                nodes: vec!["0".to_owned(), "vdd".to_owned()],
                ..Netlist::default()
            },
            expected: vec![(Rail::Sink, 0.0), (Rail::Source, 0.0)],
            mos_origin: Vec::new(),
            resistor_origin: Vec::new(),
            supply: 1,
            rail: Rail::Sink,
            family: 0,
            tag: String::new(),
            serves: Serves::Own,
        }
    }

    /// A new node, expected at `volts` from the present rail.
    pub fn node(&mut self, name: impl Into<String>, volts: f64) -> Node {
        self.netlist.nodes.push(name.into());
        self.expected.push((self.rail, volts));
        self.netlist.nodes.len() - 1
    }

    /// A new inner node of the leg being drawn.
    pub fn inner(&mut self, name: &str, volts: f64) -> Node {
        let full = if self.tag.is_empty() {
            String::new()
        } else {
            format!("{}_{name}", self.tag)
        };
        self.node(full, volts)
    }

    /// The rail's own node.
    pub fn rail_node(&self) -> Node {
        match self.rail {
            Rail::Sink => GROUND,
            Rail::Source => self.supply,
        }
    }

    fn origin(&self, role: &'static str) -> Origin {
        Origin {
            family: self.family,
            role,
            serves: self.serves,
        }
    }

    /// Element name: its kind, the tag, and the initials of its role.
    fn name(&self, kind: char, role: &str) -> String {
        if self.tag.is_empty() {
            return String::new();
        }
        let initials: String = role.split(' ').filter_map(|w| w.chars().next()).collect();
        format!("{kind}{}_{initials}", self.tag)
    }

    /// A transistor of the rail's polarity, bulk on the rail.
    pub fn mos(&mut self, role: &'static str, ends: [Node; 3], size: Size, units: u32) {
        let [drain, gate, source] = ends;
        let name = self.name('M', role);
        self.mos_origin.push(self.origin(role));
        self.netlist.mos.push(Mos {
            name,
            polarity: match self.rail {
                Rail::Sink => Polarity::N,
                Rail::Source => Polarity::P,
            },
            drain,
            gate,
            source,
            bulk: self.rail_node(),
            width: size.width,
            length: size.length,
            units,
        });
    }

    /// A resistor of `units` equal bodies in parallel.
    pub fn resistor(&mut self, role: &'static str, ends: [Node; 2], body: Body, units: u32) {
        let name = self.name('R', role);
        self.resistor_origin.push(self.origin(role));
        self.netlist.resistors.push(Resistance {
            name,
            a: ends[0],
            b: ends[1],
            ohms: body.ohms,
            width: body.width,
            units,
        });
    }

    /// A current that flows into a leg of the present rail at `node`: towards ground on the sink
    /// side, out of the supply on the source side.
    pub fn current(&mut self, node: Node, amps: f64) {
        let other = match self.rail {
            Rail::Sink => self.supply,
            Rail::Source => GROUND,
        };
        let (from, to) = match self.rail {
            Rail::Sink => (other, node),
            Rail::Source => (node, other),
        };
        let name = self.name('I', "current");
        self.netlist.currents.push(CurrentSource {
            name,
            from,
            to,
            amps,
        });
    }
}

impl Default for Draw {
    fn default() -> Self {
        Draw::new()
    }
}
