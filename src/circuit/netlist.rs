//! A small netlist: MOSFETs, resistors, current and voltage sources between named nodes.

/// A node by index; [`GROUND`] is node 0.
pub type Node = usize;

/// The ground node.
pub const GROUND: Node = 0;

/// Channel type.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Polarity {
    /// n-channel.
    N,
    /// p-channel.
    P,
}

/// `units` equal transistors in parallel, each `width` by `length` (drawn, metres).
#[derive(Debug, Clone, PartialEq)]
pub struct Mos {
    /// Element name, unique in the netlist.
    pub name: String,
    /// Channel type.
    pub polarity: Polarity,
    /// Drain.
    pub drain: Node,
    /// Gate.
    pub gate: Node,
    /// Source.
    pub source: Node,
    /// Bulk.
    pub bulk: Node,
    /// Drawn width of one unit, m.
    pub width: f64,
    /// Drawn length, m.
    pub length: f64,
    /// Number of units in parallel.
    pub units: u32,
}

/// A resistor between two nodes: `units` equal bodies in parallel.
#[derive(Debug, Clone, PartialEq)]
pub struct Resistance {
    /// Element name, unique in the netlist.
    pub name: String,
    /// One end.
    pub a: Node,
    /// Other end.
    pub b: Node,
    /// Nominal resistance of one body, Ohm.
    pub ohms: f64,
    /// Drawn width of one body, m.
    pub width: f64,
    /// Number of bodies in parallel.
    pub units: u32,
}

/// An ideal current source: current flows through it from `from` to `to`.
#[derive(Debug, Clone, PartialEq)]
pub struct CurrentSource {
    /// Element name.
    pub name: String,
    /// Node the current leaves the circuit at.
    pub from: Node,
    /// Node the current enters the circuit at.
    pub to: Node,
    /// Value, A.
    pub amps: f64,
}

/// An ideal voltage source from `minus` to `plus`.
#[derive(Debug, Clone, PartialEq)]
pub struct VoltageSource {
    /// Element name.
    pub name: String,
    /// Positive end.
    pub plus: Node,
    /// Negative end.
    pub minus: Node,
    /// Value, V.
    pub volts: f64,
}

/// A netlist.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Netlist {
    /// Node names; index 0 is ground.
    pub nodes: Vec<String>,
    /// Transistors.
    pub mos: Vec<Mos>,
    /// Resistors.
    pub resistors: Vec<Resistance>,
    /// Current sources.
    pub currents: Vec<CurrentSource>,
    /// Voltage sources.
    pub voltages: Vec<VoltageSource>,
}
