//! Area.

use super::{Better, Figure, Subject, Value};

/// Area of everything drawn.
pub struct Area;

impl Figure for Area {
    fn name(&self) -> &'static str {
        "area"
    }
    fn unit(&self) -> &'static str {
        "m2"
    }
    fn better(&self) -> Better {
        Better::Less
    }
    fn summary(&self) -> &'static str {
        "the area of every transistor and resistor of the network"
    }
    fn definition(&self) -> &'static str {
        "Sum over all unit devices and resistors, all legs of counted outputs included, of the \
         card's area rule: drawn size plus its fixed border. No wiring, no guard rings."
    }
    fn source(&self) -> &'static str {
        "our own definition, from the card's area rule"
    }
    fn of(&self, subject: &Subject) -> Value {
        Value {
            value: subject.area,
            corner: None,
            output: None,
        }
    }
}
