//! Output resistance.

use super::{Better, Figure, Subject, Value, worst_output};

/// The least output resistance of any output.
pub struct OutputResistance;

impl Figure for OutputResistance {
    fn name(&self) -> &'static str {
        "output_resistance"
    }
    fn unit(&self) -> &'static str {
        "Ohm"
    }
    fn better(&self) -> Better {
        Better::More
    }
    fn summary(&self) -> &'static str {
        "the least small-signal output resistance of the outputs"
    }
    fn definition(&self) -> &'static str {
        "Per output, dV/dI at the low end of its voltage range at the worst corner, from the \
         factorised Jacobian of the whole network; the least counts."
    }
    fn source(&self) -> &'static str {
        "Gray, Hurst, Lewis, Meyer, Analysis and Design of Analog Integrated Circuits, ch. 4"
    }
    fn of(&self, subject: &Subject) -> Value {
        match worst_output(subject, |w| -w.resistance) {
            Some((k, value)) => Value {
                value: -value,
                corner: Some(subject.outputs[k].resistance_corner),
                output: Some(k),
            },
            None => Value {
                value: 0.0,
                corner: None,
                output: None,
            },
        }
    }
}
