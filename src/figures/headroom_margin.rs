//! Headroom margin.

use super::{Better, Figure, Subject, Value, worst_output};

/// How far the least voltage of an output lies above its headroom.
pub struct HeadroomMargin;

impl Figure for HeadroomMargin {
    fn name(&self) -> &'static str {
        "headroom_margin"
    }
    fn unit(&self) -> &'static str {
        "V"
    }
    fn better(&self) -> Better {
        Better::More
    }
    fn summary(&self) -> &'static str {
        "the least distance between the low end of an output's range and its headroom"
    }
    fn definition(&self) -> &'static str {
        "Headroom is the least voltage between the output and its rail at which it still meets its \
         own error limit at every corner; where no accuracy is asked, at which its current is \
         within 1 % of the current in the middle of its range. The margin is the low end of the \
         range minus the headroom; the smallest counts."
    }
    fn source(&self) -> &'static str {
        "our own definition; headroom as a term of the trade is common practice, no source"
    }
    fn of(&self, subject: &Subject) -> Value {
        let outputs = &subject.job.spec.outputs;
        let mut margins = outputs
            .iter()
            .zip(subject.outputs)
            .map(|(o, w)| o.range.least.0 - w.headroom);
        let worst = worst_output(subject, |_| -margins.next().unwrap_or(f64::INFINITY));
        match worst {
            Some((k, value)) => Value {
                value: -value,
                corner: Some(subject.outputs[k].headroom_corner),
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
