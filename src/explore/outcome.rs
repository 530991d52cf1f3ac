//! What an exploration ends in.

use super::advice::Explanation;
pub use super::prices::{Chosen, DEAREST, Exchange, LimitPrice, Prices, Step, Verdict};
use crate::circuit::netlist::{Netlist, Node};
pub use crate::network::work::Work;
pub use crate::proof::{Certificate, Declared};
use crate::spec::{Rail, Spec};
use serde::Serialize;

/// Everything a report needs: built once, rendered by any format. No wall-clock time in it, so
/// that equal runs give equal bytes.
#[derive(Debug, Clone)]
pub struct Outcome {
    /// The spec as understood.
    pub spec: Spec,
    /// Title of the process card.
    pub card_title: String,
    /// How it ended.
    pub status: Status,
    /// The front, ranked: first the least area.
    pub front: Vec<NetworkReport>,
    /// When nothing fits: the network that comes closest.
    pub nearest: Option<Box<NetworkReport>>,
    /// What every limit costs, for one network of the front; `None` where there is no front, or the
    /// run was stopped before they were known.
    pub prices: Option<Prices>,
    /// How small any network could be at all; `None` where there is no front, or the run was stopped.
    pub proof: Option<Proof>,
    /// What was done.
    pub work: Work,
}

/// Lower bounds on area, and what they cover.
#[derive(Debug, Clone, PartialEq)]
pub struct Proof {
    /// The design space that is covered.
    pub declared: Declared,
    /// One bound per network of the front, in its order.
    pub bounds: Vec<Certificate>,
}

impl Proof {
    /// How much more area than the smallest possible a network of the front has at most, fraction;
    /// infinite where nothing is proved.
    pub fn gap(&self, network: &NetworkReport) -> f64 {
        let area = network.figure("area");
        match (area, self.bounds.get(network.rank.wrapping_sub(1))) {
            (Some(area), Some(bound)) if bound.area > 0.0 => area.value / bound.area - 1.0,
            _ => f64::INFINITY,
        }
    }
}

/// How an exploration ended.
#[derive(Debug, Clone, PartialEq)]
pub enum Status {
    /// A front was found; every network on it meets the spec at every corner.
    Found,
    /// Stopped early; the front holds what was found so far.
    Interrupted,
    /// No network meets the spec.
    NothingFits {
        /// Limits the nearest network breaks, worst first.
        broken: Vec<Broken>,
        /// What is impossible at any size, and what would make the spec feasible.
        why: Explanation,
    },
}

/// A limit that a network breaks.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Broken {
    /// Figure (`area`, `overhead_current`, `power`, `current_error`, `headroom`,
    /// `output_resistance`, `reference_voltage`).
    pub figure: String,
    /// Output it belongs to, if any.
    pub output: Option<String>,
    /// Limit, SI unit of the figure (fractions for errors).
    pub limit: f64,
    /// Value reached, same unit.
    pub value: f64,
    /// SI unit symbol: "m2", "A", "W", "1", "V", "Ohm".
    pub unit: String,
    /// Corner at which it is worst, if one matters.
    pub corner: Option<String>,
}

/// One network, with all that a page, a table or a deck shows of it.
#[derive(Debug, Clone, PartialEq)]
pub struct NetworkReport {
    /// 1 is the least area.
    pub rank: usize,
    /// Figures of the whole network, in catalogue order.
    pub figures: Vec<FigureValue>,
    /// Families, parents before children; the first is the root.
    pub families: Vec<FamilyReport>,
    /// Every drawn device.
    pub devices: Vec<DeviceRow>,
    /// Every output of the spec, in its order.
    pub outputs: Vec<OutputReport>,
    /// The reference pin over all corners, V to ground.
    pub reference_pin: [f64; 2],
    /// The network as a netlist, sources excluded, and its ports.
    pub deck: DeckSource,
    /// Limits this network breaks (empty on the front).
    pub broken: Vec<Broken>,
}

impl NetworkReport {
    /// A figure by name.
    pub fn figure(&self, name: &str) -> Option<&FigureValue> {
        self.figures.iter().find(|f| f.name == name)
    }
}

/// One figure of merit of a network.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FigureValue {
    /// Name in the catalogue, such as `area` or `overhead_current`.
    pub name: String,
    /// SI unit symbol, "1" for a fraction.
    pub unit: String,
    /// Worst value over corners, SI.
    pub value: f64,
    /// Corner where it is worst, such as "SS 1.62 V -40 degC".
    pub corner: Option<String>,
    /// Output where it is worst.
    pub output: Option<String>,
}

/// One family of a network.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct FamilyReport {
    /// Name within the network: n1, n2, ... on the sink rail, p1, p2, ... on the source rail.
    pub name: String,
    /// Rail.
    pub rail: Rail,
    /// Cell name in the catalogue.
    pub cell: String,
    /// Name of the family that feeds it; `None` for the reference.
    pub fed_by: Option<String>,
    /// Input current, A.
    pub input_current: f64,
    /// Units in the input leg.
    pub input_units: u32,
    /// Current of one unit, A.
    pub unit_current: f64,
    /// Sum of the areas of its devices, m^2.
    pub area: f64,
    /// Names of the outputs it serves.
    pub outputs: Vec<String>,
}

/// One drawn device of a network.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct DeviceRow {
    /// Element name in the deck.
    pub name: String,
    /// Family it belongs to.
    pub family: String,
    /// What it does: "input mirror", "output cascode", "degeneration resistor", ...
    pub role: String,
    /// Output the device's leg serves, if it serves one (the first of a counted output).
    pub output: Option<String>,
    /// Deck model name, or "resistor".
    pub model: String,
    /// Drawn width of one unit, m.
    pub width: f64,
    /// Drawn length of one unit, m.
    pub length: f64,
    /// Units in parallel, for all equal outputs together.
    pub units: u32,
    /// Resistance of one unit, Ohm (resistors only).
    pub ohms: Option<f64>,
    /// Drain current at the nominal corner of all units, A.
    pub current: f64,
    /// Inversion coefficient at the nominal corner (transistors under the charge law).
    pub inversion: Option<f64>,
    /// |VGS| at the nominal corner, V.
    pub vgs: Option<f64>,
    /// |VDS| at the nominal corner, V (the low end of the range for output legs).
    pub vds: Option<f64>,
    /// Saturation voltage at the nominal corner, V.
    pub vdssat: Option<f64>,
    /// Area of all units, m^2.
    pub area: f64,
}

/// One output of the spec in a network.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct OutputReport {
    /// Name in the spec.
    pub name: String,
    /// Rail.
    pub rail: Rail,
    /// How many equal ones.
    pub count: u32,
    /// Family that serves it.
    pub family: String,
    /// Cell of that family.
    pub cell: String,
    /// Units in each output leg.
    pub units: u32,
    /// Target current, A.
    pub target: f64,
    /// Worst current error (systematic + k sigma), fraction.
    pub error: f64,
    /// Its limit, if any, fraction.
    pub error_limit: Option<f64>,
    /// k.
    pub sigma: f64,
    /// Corner of the worst error.
    pub error_corner: String,
    /// Parts of the worst error in reporting order, fractions: systematic parts carry their sign
    /// and sum to the signed systematic error; mismatch parts are k sigma each and add in squares.
    pub budget: Vec<BudgetPart>,
    /// Required range, V from the output's own rail.
    pub range: [f64; 2],
    /// Least voltage from the rail at which it still meets its error limit at every corner, V.
    pub headroom: f64,
    /// `range[0] - headroom`, V.
    pub headroom_margin: f64,
    /// Corner of the worst headroom.
    pub headroom_corner: String,
    /// Output resistance at the low end of the range, worst corner, Ohm.
    pub output_resistance: f64,
    /// Its limit, if any, Ohm.
    pub output_resistance_limit: Option<f64>,
    /// Corner of the least output resistance.
    pub output_resistance_corner: String,
    /// Output current against the voltage from its own rail.
    pub curve: OutputCurve,
}

/// One part of an error budget.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct BudgetPart {
    /// `threshold_mismatch`, `gain_mismatch`, `resistor_mismatch`, `output_conductance`,
    /// `ratio_rounding`, `process`, `temperature`, `supply`, `reference`.
    pub name: String,
    /// Fraction of the target.
    pub value: f64,
    /// True where the part adds in squares (mismatch), false where it adds with its sign.
    pub random: bool,
}

/// Output current over the pin's voltage from its own rail.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct OutputCurve {
    /// Voltages, V, rising.
    pub volts: Vec<f64>,
    /// Current at the nominal corner, A.
    pub nominal: Vec<f64>,
    /// Least current over all corners (systematic), A.
    pub least: Vec<f64>,
    /// Largest current over all corners (systematic), A.
    pub most: Vec<f64>,
}

/// A network as a netlist with its ports.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct DeckSource {
    /// Elements of the network without any source.
    pub netlist: Netlist,
    /// Family of each transistor, in the netlist's order.
    pub families: Vec<String>,
    /// Supply node.
    pub supply: Node,
    /// Reference pins (empty with a resistor reference), one per copy used.
    pub references: Vec<Node>,
    /// Output nodes in spec order, one node per output (equal outputs of a count share the row:
    /// every one of `count` legs is drawn, on nodes `name_1`, `name_2`, ...).
    pub outputs: Vec<Vec<Node>>,
    /// Reference current, A; positive flows into the pin.
    pub reference_current: f64,
    /// Nominal supply, V.
    pub nominal_supply: f64,
    /// Nominal temperature, K.
    pub nominal_temperature: f64,
    /// Deck model name of the n-channel and the p-channel device.
    pub models: [String; 2],
}
