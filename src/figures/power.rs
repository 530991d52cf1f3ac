//! Power.

use super::overhead_current::OverheadCurrent;
use super::{Better, Figure, Subject, Value};

/// Overhead current times the largest supply.
pub struct Power;

impl Figure for Power {
    fn name(&self) -> &'static str {
        "power"
    }
    fn unit(&self) -> &'static str {
        "W"
    }
    fn better(&self) -> Better {
        Better::Less
    }
    fn summary(&self) -> &'static str {
        "the overhead current times the largest supply"
    }
    fn definition(&self) -> &'static str {
        "Worst overhead current of all corners times the upper end of the supply range."
    }
    fn source(&self) -> &'static str {
        "our own definition, on top of overhead_current"
    }
    fn of(&self, subject: &Subject) -> Value {
        let amps = OverheadCurrent.of(subject);
        Value {
            value: amps.value * subject.job.spec.supply.most.0,
            ..amps
        }
    }
}
