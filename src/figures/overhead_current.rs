//! Overhead current.

use super::{Better, Figure, Subject, Value};

/// Supply current of everything that is not an output.
pub struct OverheadCurrent;

impl Figure for OverheadCurrent {
    fn name(&self) -> &'static str {
        "overhead_current"
    }
    fn unit(&self) -> &'static str {
        "A"
    }
    fn better(&self) -> Better {
        Better::Less
    }
    fn summary(&self) -> &'static str {
        "the supply current of everything that is not an output"
    }
    fn definition(&self) -> &'static str {
        "Currents of all input, bias and feeder legs, the reference included, at the worst corner. \
         A feeder and the input leg it feeds carry the same current, which counts once."
    }
    fn source(&self) -> &'static str {
        "our own definition"
    }
    fn of(&self, subject: &Subject) -> Value {
        let mut value = Value {
            value: 0.0,
            corner: None,
            output: None,
        };
        for (k, (&amps, corner)) in subject.overhead.iter().zip(subject.corners).enumerate() {
            if corner.counts && (value.corner.is_none() || amps > value.value) {
                value = Value {
                    value: amps,
                    corner: Some(k),
                    output: None,
                };
            }
        }
        value
    }
}
