//! Devices by length, kept: a width only scales what a length decides.

use super::{Conditions, Device, width_loss};
use crate::numeric::lanes::WIDTH;
use crate::process::Mosfet;
use std::collections::BTreeMap;

/// Lengths kept before the bank starts afresh (a polish visits thousands).
const KEPT: usize = 4096;

/// Devices of one transistor type at several groups of conditions.
#[derive(Debug, Clone)]
pub struct Bank<'a> {
    mosfet: &'a Mosfet,
    nominal: f64,
    groups: Vec<[Conditions; WIDTH]>,
    kept: BTreeMap<u64, Vec<Device>>,
}

impl<'a> Bank<'a> {
    /// A bank for a transistor whose card values hold at `nominal` kelvin.
    pub fn new(mosfet: &'a Mosfet, nominal: f64, groups: Vec<[Conditions; WIDTH]>) -> Bank<'a> {
        Bank {
            mosfet,
            nominal,
            groups,
            kept: BTreeMap::new(),
        }
    }

    /// `units` devices of `width` by `length` (drawn, m) in parallel, at one group of conditions.
    pub fn device(&mut self, group: usize, width: f64, length: f64, units: u32) -> Device {
        let loss = width_loss(self.mosfet);
        if self.kept.len() > KEPT {
            self.kept.clear();
        }
        let (mosfet, nominal, groups) = (self.mosfet, self.nominal, &self.groups);
        let metre = self.kept.entry(length.to_bits()).or_insert_with(|| {
            groups
                .iter()
                .map(|g| Device::new(mosfet, nominal, loss + 1.0, length, g))
                .collect()
        });
        metre[group].widened((width - loss) * f64::from(units))
    }
}
