//! Share of the error limit.

use super::{Better, Figure, Subject, Value, worst_output};

/// The largest error as a share of its limit.
pub struct ErrorShare;

impl Figure for ErrorShare {
    fn name(&self) -> &'static str {
        "error_share"
    }
    fn unit(&self) -> &'static str {
        "1"
    }
    fn better(&self) -> Better {
        Better::Less
    }
    fn summary(&self) -> &'static str {
        "the largest current error as a share of the output's own limit"
    }
    fn definition(&self) -> &'static str {
        "Per output, its current error over its accuracy limit; the largest counts. 100 % just \
         meets the spec, 50 % is twice as accurate as asked everywhere. Outputs without an \
         accuracy do not count."
    }
    fn source(&self) -> &'static str {
        "our own definition, on top of current_error"
    }
    fn of(&self, subject: &Subject) -> Value {
        let share = |w: &super::Worst| w.limit.map_or(f64::NEG_INFINITY, |l| w.error / l);
        match worst_output(subject, share) {
            Some((k, value)) if value.is_finite() => Value {
                value,
                corner: Some(subject.outputs[k].error_corner),
                output: Some(k),
            },
            _ => Value {
                value: 0.0,
                corner: None,
                output: None,
            },
        }
    }
}
