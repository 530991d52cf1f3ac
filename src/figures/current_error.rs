//! Current error.

use super::{Better, Figure, Subject, Value, worst_output};

/// The largest error of any output that is held to one.
pub struct CurrentError;

impl Figure for CurrentError {
    fn name(&self) -> &'static str {
        "current_error"
    }
    fn unit(&self) -> &'static str {
        "1"
    }
    fn better(&self) -> Better {
        Better::Less
    }
    fn summary(&self) -> &'static str {
        "the largest current error of the outputs, systematic part plus k sigma"
    }
    fn definition(&self) -> &'static str {
        "Per output, over all corners and its whole voltage range: |I/target - 1| of the solved \
         network plus k standard deviations of mismatch (k from the spec, 3 unless said), the \
         variances of all devices on the path from the reference added by adjoint sensitivities. \
         The largest over the outputs that have an accuracy; over all where none has."
    }
    fn source(&self) -> &'static str {
        "Pelgrom, Duinmaijer, Welbers, IEEE JSSC 24, 1989 (mismatch); Director, Rohrer, IEEE \
         Trans. Circuit Theory 16, 1969 (adjoint sensitivities)"
    }
    fn of(&self, subject: &Subject) -> Value {
        let asked = subject.outputs.iter().any(|o| o.limit.is_some());
        let key = |w: &super::Worst| {
            if asked && w.limit.is_none() {
                f64::NEG_INFINITY
            } else {
                w.error
            }
        };
        match worst_output(subject, key) {
            Some((k, value)) => Value {
                value,
                corner: Some(subject.outputs[k].error_corner),
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
