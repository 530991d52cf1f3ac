//! Families and feeders as one network: what it is made of, its drawing, its solution as one
//! circuit at every corner.

pub mod bench;
pub mod corners;
pub mod drawing;
pub mod measure;
pub mod probes;
pub mod work;

use crate::cells::{CELLS, Shape, Size, Tech, Unit};
use crate::device;
use crate::process::Card;
use crate::spec::{Rail, Spec};

/// Everything that is fixed while a spec is explored.
#[derive(Debug, Clone, Copy)]
pub struct Job<'a> {
    /// What is asked.
    pub spec: &'a Spec,
    /// The process.
    pub card: &'a Card,
}

impl<'a> Job<'a> {
    /// The card seen from a rail.
    pub fn tech(&self, rail: Rail) -> Tech<'a> {
        Tech {
            card: self.card,
            rail,
        }
    }
}

/// A whole bias network: families, parents before children, and the leg of every output.
#[derive(Debug, Clone, PartialEq)]
pub struct Network {
    /// Families; a family is fed by the reference or by one before it.
    pub families: Vec<Family>,
    /// One leg per output of the spec (each of a counted output's equal legs looks like it).
    pub legs: Vec<Leg>,
    /// The reference resistor, Ohm, where the spec asks for one.
    pub reference_resistor: Option<f64>,
}

/// One gate line.
#[derive(Debug, Clone, PartialEq)]
pub struct Family {
    /// Rail.
    pub rail: Rail,
    /// What it was sized from.
    pub shape: Shape,
    /// Drawn sizes of a unit.
    pub unit: Unit,
    /// Units in the input leg.
    pub input_units: u32,
    /// Nominal input current, A.
    pub input_current: f64,
    /// Who feeds the input leg.
    pub feed: Source,
    /// The bias leg, for cells that have one.
    pub bias: Option<BiasLeg>,
}

/// The bias leg of a wide-swing family.
#[derive(Debug, Clone, PartialEq)]
pub struct BiasLeg {
    /// Who feeds it.
    pub feed: Source,
    /// Nominal current, A.
    pub current: f64,
    /// Drawn size of its diode.
    pub size: Size,
}

/// Where a leg's current comes from.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Source {
    /// One copy of the reference.
    Reference,
    /// A feeder of `units` units of an earlier family on the other rail.
    Family {
        /// Index of that family.
        parent: usize,
        /// Units in the feeder leg.
        units: u32,
    },
}

/// A leg that serves an output.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Leg {
    /// Index of the family.
    pub family: usize,
    /// Units in the leg.
    pub units: u32,
}

impl Family {
    /// Nominal current of one unit, A.
    pub fn unit_current(&self) -> f64 {
        self.input_current / f64::from(self.input_units)
    }

    /// Area of a leg of `units` units, m^2: mirror and cascode devices and degeneration resistors.
    pub fn leg_area(&self, card: &Card, units: u32) -> f64 {
        let tech = Tech {
            card,
            rail: self.rail,
        };
        leg_area(&tech, &self.shape, &self.unit, units)
    }

    /// Area of the input leg with its bias leg, m^2.
    pub fn input_area(&self, card: &Card) -> f64 {
        let tech = Tech {
            card,
            rail: self.rail,
        };
        let bias = self.bias.as_ref().map(|b| b.size);
        input_area(&tech, &self.shape, &self.unit, self.input_units, bias)
    }
}

/// Area of a leg of `units` units.
pub fn leg_area(tech: &Tech, shape: &Shape, unit: &Unit, units: u32) -> f64 {
    let mosfet = tech.mosfet();
    let mut area = device::area_of(mosfet, unit.mirror.width, unit.mirror.length, units);
    if let Some(c) = unit.cascode {
        area += device::area_of(mosfet, c.width, c.length, units);
    }
    let parts = CELLS[shape.cell].parts();
    if let (Some(body), Some(card), false) = (unit.resistor, &tech.card.resistor, parts.cascode) {
        area += device::resistor_area(card, body.width, body.ohms, units);
    }
    area
}

/// Area of an input leg of `units` units with its bias diode.
pub fn input_area(tech: &Tech, shape: &Shape, unit: &Unit, units: u32, bias: Option<Size>) -> f64 {
    let mut area = leg_area(tech, shape, unit, units);
    if let Some(size) = bias {
        area += device::area_of(tech.mosfet(), size.width, size.length, 1);
    }
    let parts = CELLS[shape.cell].parts();
    if let (Some(body), Some(card), true) = (unit.resistor, &tech.card.resistor, parts.cascode) {
        area += device::resistor_area(card, body.width, body.ohms / f64::from(units), 1);
    }
    area
}

impl Network {
    /// Total area, m^2.
    pub fn area(&self, job: &Job) -> f64 {
        let mut area: f64 = self.families.iter().map(|f| f.input_area(job.card)).sum();
        for family in &self.families {
            let bias = family.bias.as_ref().map(|b| b.feed);
            for source in [Some(family.feed), bias].into_iter().flatten() {
                if let Source::Family { parent, units } = source {
                    area += self.families[parent].leg_area(job.card, units);
                }
            }
        }
        for (leg, output) in self.legs.iter().zip(&job.spec.outputs) {
            let one = self.families[leg.family].leg_area(job.card, leg.units);
            area += f64::from(output.count) * one;
        }
        if let (Some(ohms), Some(card)) = (self.reference_resistor, &job.card.resistor) {
            area += device::resistor_area(card, card.width, ohms, 1);
        }
        area
    }
}
