//! The limits of a spec as things that can be loosened: each has a value, a way in which it becomes
//! looser, and a spec with another value in its place.

use crate::spec::{Reference, Spec};
use crate::units::{Amp, Ohm, SquareMetre, Volt, Watt};

/// One limit of a spec; outputs by their index.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord)]
pub enum Limit {
    /// Total area.
    Area,
    /// Overhead current.
    OverheadCurrent,
    /// Overhead current times the largest supply.
    Power,
    /// Highest voltage of the reference pin.
    PinMost,
    /// Lowest voltage of the reference pin.
    PinLeast,
    /// Permitted current error of an output.
    Accuracy(usize),
    /// Low end of an output's range: its headroom.
    LowEnd(usize),
    /// High end of an output's range.
    HighEnd(usize),
    /// Least output resistance of an output.
    OutputResistance(usize),
}

impl Limit {
    /// Every limit that a spec sets, budgets first.
    pub fn all(spec: &Spec) -> Vec<Limit> {
        let mut all = vec![
            Limit::Area,
            Limit::OverheadCurrent,
            Limit::Power,
            Limit::PinMost,
            Limit::PinLeast,
        ];
        for k in 0..spec.outputs.len() {
            all.extend([
                Limit::Accuracy(k),
                Limit::LowEnd(k),
                Limit::HighEnd(k),
                Limit::OutputResistance(k),
            ]);
        }
        all.retain(|limit| limit.value(spec).is_some());
        all
    }

    /// Key of the spec that sets it.
    pub fn key(self) -> &'static str {
        match self {
            Limit::Area => "area",
            Limit::OverheadCurrent => "overhead_current",
            Limit::Power => "power",
            Limit::PinMost | Limit::PinLeast | Limit::LowEnd(_) | Limit::HighEnd(_) => "range",
            Limit::Accuracy(_) => "accuracy",
            Limit::OutputResistance(_) => "output_resistance",
        }
    }

    /// Which end of a range it is, if it is one.
    pub fn end(self) -> Option<&'static str> {
        match self {
            Limit::PinLeast | Limit::LowEnd(_) => Some("low"),
            Limit::PinMost | Limit::HighEnd(_) => Some("high"),
            _ => None,
        }
    }

    /// SI unit symbol, "1" for a fraction.
    pub fn unit(self) -> &'static str {
        match self {
            Limit::Area => "m2",
            Limit::OverheadCurrent => "A",
            Limit::Power => "W",
            Limit::Accuracy(_) => "1",
            Limit::OutputResistance(_) => "Ohm",
            _ => "V",
        }
    }

    /// The output it belongs to.
    pub fn output(self) -> Option<usize> {
        match self {
            Limit::Accuracy(k)
            | Limit::LowEnd(k)
            | Limit::HighEnd(k)
            | Limit::OutputResistance(k) => Some(k),
            _ => None,
        }
    }

    /// Whether a larger value is a looser limit.
    pub fn rises(self) -> bool {
        !matches!(
            self,
            Limit::PinLeast | Limit::HighEnd(_) | Limit::OutputResistance(_)
        )
    }

    /// Its value in a spec, SI; `None` where the spec does not set it.
    pub fn value(self, spec: &Spec) -> Option<f64> {
        let pin = match spec.reference {
            Reference::Current { range, .. } => Some([range.least.0, range.most.0]),
            Reference::Resistor { .. } => None,
        };
        match self {
            Limit::Area => spec.limits.area.map(|l| l.0),
            Limit::OverheadCurrent => spec.limits.overhead_current.map(|l| l.0),
            Limit::Power => spec.limits.power.map(|l| l.0),
            Limit::PinLeast => pin.map(|p| p[0]),
            Limit::PinMost => pin.map(|p| p[1]),
            Limit::Accuracy(k) => spec.outputs[k].accuracy.map(|a| a.limit),
            Limit::LowEnd(k) => Some(spec.outputs[k].range.least.0),
            Limit::HighEnd(k) => Some(spec.outputs[k].range.most.0),
            Limit::OutputResistance(k) => spec.outputs[k].output_resistance.map(|r| r.0),
        }
    }

    /// The spec with another value of this limit. A limit that the spec does not set stays unset.
    pub fn set(self, spec: &Spec, value: f64) -> Spec {
        let mut spec = spec.clone();
        match self {
            Limit::Area => spec.limits.area = spec.limits.area.map(|_| SquareMetre(value)),
            Limit::OverheadCurrent => {
                spec.limits.overhead_current = spec.limits.overhead_current.map(|_| Amp(value));
            }
            Limit::Power => spec.limits.power = spec.limits.power.map(|_| Watt(value)),
            Limit::PinLeast | Limit::PinMost => {
                if let Reference::Current { range, .. } = &mut spec.reference {
                    match self {
                        Limit::PinLeast => range.least = Volt(value),
                        _ => range.most = Volt(value),
                    }
                }
            }
            Limit::Accuracy(k) => {
                if let Some(accuracy) = &mut spec.outputs[k].accuracy {
                    accuracy.limit = value;
                }
            }
            Limit::LowEnd(k) => spec.outputs[k].range.least = Volt(value),
            Limit::HighEnd(k) => spec.outputs[k].range.most = Volt(value),
            Limit::OutputResistance(k) => {
                let asked = &mut spec.outputs[k].output_resistance;
                *asked = asked.map(|_| Ohm(value));
            }
        }
        spec
    }

    /// The loosest value that still says something: a spec may not ask for less, or it would not
    /// matter.
    pub fn loosest(self, spec: &Spec) -> f64 {
        match self {
            // Far beyond any network: the permitted ends of the spec's own keys.
            Limit::Area => 1e-3,
            Limit::OverheadCurrent => 1.0,
            Limit::Power => 10.0,
            Limit::PinLeast => 0.0,
            Limit::PinMost => spec.supply.least.0,
            // Half off is no current to speak of any more.
            Limit::Accuracy(k) => {
                let own = spec.outputs[k].accuracy.map_or(0.0, |a| a.limit);
                own.max(0.5)
            }
            // A range of a tenth of a volt at least, or as much as there is.
            Limit::LowEnd(k) => {
                let range = spec.outputs[k].range;
                range.least.0.max(range.most.0 - 0.1)
            }
            Limit::HighEnd(k) => {
                let range = spec.outputs[k].range;
                range.most.0.min(range.least.0 + 0.1)
            }
            Limit::OutputResistance(_) => 100.0,
        }
    }

    /// Where `value` stands on a scale on which equal steps matter alike: volts for voltages,
    /// logarithms for the rest; rising towards looser.
    pub fn place(self, value: f64) -> f64 {
        let place = match self.end() {
            Some(_) => value,
            None => crate::numeric::scalar::ln(value),
        };
        if self.rises() { place } else { -place }
    }

    /// The value at a place; the inverse of [`Limit::place`].
    pub fn at(self, place: f64) -> f64 {
        let place = if self.rises() { place } else { -place };
        match self.end() {
            Some(_) => place,
            None => crate::numeric::scalar::exp(place),
        }
    }

    /// Whether `a` is looser than `b`.
    pub fn looser(self, a: f64, b: f64) -> bool {
        if self.rises() { a > b } else { a < b }
    }

    /// A value of few digits that is at least as loose: voltages to the millivolt, the rest to
    /// three significant digits. It is the double that its decimal text reads as.
    pub fn outward(self, value: f64) -> f64 {
        let read = |text: String| text.parse().unwrap_or(value);
        let (step, near): (f64, f64) = match self.end() {
            Some(_) => (1e-3, read(format!("{value:.3}"))),
            None => {
                let near: f64 = read(format!("{value:.2e}"));
                let text = format!("{near:.2e}");
                let power: i32 = text
                    .rsplit('e')
                    .next()
                    .and_then(|e| e.parse().ok())
                    .unwrap_or(0);
                (read(format!("1e{}", power - 2)), near)
            }
        };
        // A value within the last digits of its rounding is that rounding.
        let dust = 1e-9 * step;
        if self.rises() {
            if near >= value - dust {
                return near;
            }
        } else if near <= value + dust {
            return near;
        }
        let next = if self.rises() {
            near + step
        } else {
            near - step
        };
        match self.end() {
            Some(_) => read(format!("{next:.3}")),
            None => read(format!("{next:.2e}")),
        }
    }

    /// One step of [`Limit::outward`] looser than a value that it made.
    pub fn step_out(self, value: f64) -> f64 {
        let beyond = match self.end() {
            Some(_) => 1e-6,
            None => value.abs() * 1e-6,
        };
        self.outward(if self.rises() {
            value + beyond
        } else {
            value - beyond
        })
    }
}
