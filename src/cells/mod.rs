//! The mirror cells: one file each, registered in [`CELLS`].
//!
//! A cell knows how to turn a [`Shape`] into drawn sizes and how to draw its input leg and its
//! output legs. What a leg does is found by solving what was drawn; the closed forms here only
//! set sizes and starting voltages.

pub mod cascode;
pub mod degenerated;
pub mod draw;
pub mod self_biased;
pub mod simple;
pub mod solved;
pub mod wide_swing;

use crate::device;
use crate::process::{Card, Mosfet};
use crate::spec::Rail;
use draw::{Draw, Feed, Lines};

/// Every cell, in the order of reports. A new one is a file and two lines.
pub static CELLS: [&dyn Cell; 5] = [
    &simple::Simple,
    &degenerated::Degenerated,
    &cascode::Cascode,
    &wide_swing::WideSwing,
    &self_biased::SelfBiased,
];

/// One kind of mirror circuit.
pub trait Cell: Sync {
    /// Name in specs, tables and files.
    fn name(&self) -> &'static str;
    /// What it is, in one sentence.
    fn summary(&self) -> &'static str;
    /// The circuit as a drawing in text, sink side.
    fn drawing(&self) -> &'static str;
    /// How it works and what it costs.
    fn how(&self) -> &'static str;
    /// Where it is published.
    fn source(&self) -> &'static str;
    /// Which degrees of freedom it has besides the mirror device's own.
    fn parts(&self) -> Parts;
    /// Sizes of a unit that carries `current`; `None` where the shape makes no sense here.
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit>;
    /// Draws the input leg; `feed` says where the input current (and the bias current) enters.
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines;
    /// Draws an output leg of `units` units onto `pin`.
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize);
    /// Closed-form least voltage at the output that keeps its devices saturated, V, at the card's
    /// temperature.
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64;
    /// Closed-form voltage of the input leg, V from the rail, at the card's temperature.
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64;
}

/// Degrees of freedom of a cell.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub struct Parts {
    /// It has cascode devices.
    pub cascode: bool,
    /// Its `drop` is a design variable.
    pub drop: bool,
    /// It needs a resistor in the card.
    pub resistor: bool,
    /// It takes a second feeding current.
    pub bias_leg: bool,
}

/// The card seen from one rail.
#[derive(Debug, Clone, Copy)]
pub struct Tech<'a> {
    /// The card.
    pub card: &'a Card,
    /// The rail.
    pub rail: Rail,
}

impl<'a> Tech<'a> {
    /// The rail's transistor.
    pub fn mosfet(&self) -> &'a Mosfet {
        match self.rail {
            Rail::Sink => &self.card.nmos,
            Rail::Source => &self.card.pmos,
        }
    }
    /// Temperature at which the card's values hold, K.
    pub fn nominal(&self) -> f64 {
        self.card.temperature.0
    }
    fn width(&self, current: f64, inversion: f64, length: f64) -> f64 {
        device::width_for(self.mosfet(), self.nominal(), current, inversion, length)
    }
    fn gate(&self, inversion: f64, source: f64, length: f64) -> f64 {
        device::gate_voltage(self.mosfet(), self.nominal(), inversion, source, length)
    }
    fn saturation(&self, inversion: f64) -> f64 {
        device::saturation_voltage(self.mosfet(), self.nominal(), inversion)
    }
}

/// What fixes a family but for its unit current: all of it intensive, so that one solution holds
/// for every unit current (widths grow in proportion).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Shape {
    /// Index in [`CELLS`].
    pub cell: usize,
    /// Drawn length of the mirror device, m.
    pub length: f64,
    /// Its inversion coefficient.
    pub inversion: f64,
    /// Drawn length of the cascode device, m; 0 where there is none.
    pub cascode_length: f64,
    /// Its inversion coefficient; 0 where there is none.
    pub cascode_inversion: f64,
    /// A voltage that is the cell's own, V; 0 where there is none. Source degeneration: across
    /// the resistor. Wide-swing cells: what the mirror device gets beyond its saturation voltage.
    pub drop: f64,
}

/// Drawn width and length, m.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Size {
    /// Width of one unit.
    pub width: f64,
    /// Length.
    pub length: f64,
}

/// A drawn resistor.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Body {
    /// Resistance at the nominal corner and the card's temperature, Ohm.
    pub ohms: f64,
    /// Drawn width, m.
    pub width: f64,
}

/// Sizes of one unit of a family, and the voltages they were sized for.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Unit {
    /// Current of one unit, A.
    pub current: f64,
    /// Mirror device.
    pub mirror: Size,
    /// Cascode device.
    pub cascode: Option<Size>,
    /// Bias diode of a cell with a bias leg, per ampere of bias current: width in m/A.
    pub bias: Option<Size>,
    /// Resistor: per unit in a degenerated cell; of an input leg of one unit in a self-biased one.
    pub resistor: Option<Body>,
    /// Voltages it was sized for.
    pub expected: Expected,
}

/// Voltages expected at the nominal corner, V from the rail: where Newton starts.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Expected {
    /// Mirror gate line.
    pub line: f64,
    /// Drain of the mirror device under a cascode; foot of a degenerated device.
    pub drain: f64,
    /// Cascode gate line.
    pub cascode: f64,
    /// Input of the input leg.
    pub input: f64,
}

impl Unit {
    /// The bias diode drawn for a bias current, A.
    pub fn bias_size(&self, tech: &Tech, current: f64) -> Option<Size> {
        let mosfet = tech.mosfet();
        let loss = device::width_loss(mosfet);
        self.bias
            .map(|b| bias_diode(b, current, mosfet.width.least.0, loss))
    }
}

/// A bias diode of `per_ampere` effective width, drawn for `current`: no narrower than
/// `least_width`; where the current asks for less, longer at the same aspect ratio.
pub fn bias_diode(per_ampere: Size, current: f64, least_width: f64, width_loss: f64) -> Size {
    let effective = per_ampere.width * current;
    let drawn = effective + width_loss;
    if drawn >= least_width {
        return Size {
            width: drawn,
            length: per_ampere.length,
        };
    }
    let stretch = (least_width - width_loss) / effective;
    Size {
        width: least_width,
        length: per_ampere.length * stretch,
    }
}

/// Index of a cell by name.
pub fn index_of(name: &str) -> Option<usize> {
    CELLS.iter().position(|c| c.name() == name)
}

/// Nearest point of a grid, at least `least`.
fn on_grid(value: f64, grid: f64, least: f64) -> f64 {
    let steps = (value / grid).round().max((least / grid - 1e-9).ceil());
    steps * grid
}

impl Shape {
    /// The shape with its lengths on the manufacturing grid and within the card's limits.
    pub fn snapped(&self, tech: &Tech) -> Shape {
        let mosfet = tech.mosfet();
        let snap = |l: f64| {
            let l = l.min(mosfet.length.most.0);
            if l > 0.0 {
                on_grid(l, mosfet.grid.0, mosfet.length.least.0)
            } else {
                0.0
            }
        };
        Shape {
            length: snap(self.length),
            cascode_length: snap(self.cascode_length),
            ..*self
        }
    }
}

impl Size {
    /// The size on the manufacturing grid, no narrower or shorter than the card allows.
    pub fn snapped(&self, tech: &Tech) -> Size {
        let mosfet = tech.mosfet();
        Size {
            width: on_grid(self.width, mosfet.grid.0, mosfet.width.least.0),
            length: on_grid(self.length, mosfet.grid.0, mosfet.length.least.0),
        }
    }
}

impl Unit {
    /// The unit with every drawn size on the manufacturing grid; a resistor keeps the value its
    /// drawn length gives. Bias sizes are per ampere and snapped when drawn.
    pub fn snapped(&self, tech: &Tech) -> Unit {
        let grid = tech.mosfet().grid.0;
        let resistor = self.resistor.map(|body| match &tech.card.resistor {
            Some(card) => {
                let length = device::resistor_length(card, body.width, body.ohms);
                let drawn = on_grid(length, grid, card.squares_min * body.width);
                Body {
                    ohms: drawn / body.width * card.sheet,
                    ..body
                }
            }
            None => body,
        });
        Unit {
            mirror: self.mirror.snapped(tech),
            cascode: self.cascode.map(|c| c.snapped(tech)),
            resistor,
            ..*self
        }
    }
}
