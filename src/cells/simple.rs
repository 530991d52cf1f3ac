//! The simple mirror.

use super::draw::{Draw, Feed, Lines};
use super::{Cell, Expected, Parts, Shape, Size, Tech, Unit};

/// Two devices, one gate line.
pub struct Simple;

impl Cell for Simple {
    fn name(&self) -> &'static str {
        "simple"
    }
    fn summary(&self) -> &'static str {
        "a diode-connected device and equal devices on its gate line"
    }
    fn drawing(&self) -> &'static str {
        "\
   in            out
   |              |
   +---+          |
   |   |          |
 |-+   |        |-+
 M1 ---+--------| M2
 |-+            |-+
   |              |
  gnd            gnd"
    }
    fn how(&self) -> &'static str {
        "The input device turns its current into a gate voltage, every device on the line turns it \
         back. The smallest cell and the lowest headroom, one VDSsat; but the output follows its \
         voltage with ro alone, so accuracy over a wide range asks for length."
    }
    fn source(&self) -> &'static str {
        "Gray, Hurst, Lewis, Meyer, Analysis and Design of Analog Integrated Circuits, ch. 4"
    }
    fn parts(&self) -> Parts {
        Parts::default()
    }
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit> {
        let gate = tech.gate(shape.inversion, 0.0, shape.length);
        Some(Unit {
            current,
            mirror: Size {
                width: tech.width(current, shape.inversion, shape.length),
                length: shape.length,
            },
            cascode: None,
            bias: None,
            resistor: None,
            expected: Expected {
                line: gate,
                drain: gate,
                cascode: 0.0,
                input: gate,
            },
        })
    }
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines {
        let rail = draw.rail_node();
        draw.mos(
            "input mirror",
            [feed.input, feed.input, rail],
            unit.mirror,
            units,
        );
        Lines {
            mirror: feed.input,
            cascode: None,
        }
    }
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
        let rail = draw.rail_node();
        draw.mos(
            "output mirror",
            [pin, lines.mirror, rail],
            unit.mirror,
            units,
        );
    }
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64 {
        tech.saturation(shape.inversion)
    }
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64 {
        tech.gate(shape.inversion, 0.0, shape.length)
    }
}
