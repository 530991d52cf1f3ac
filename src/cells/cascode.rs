//! The stacked cascode mirror.

use super::draw::{Draw, Feed, Lines};
use super::{Cell, Expected, Parts, Shape, Size, Tech, Unit};

/// Two diodes on the input side, two devices on the output side.
pub struct Cascode;

impl Cell for Cascode {
    fn name(&self) -> &'static str {
        "cascode"
    }
    fn summary(&self) -> &'static str {
        "a mirror stacked on a mirror: stiff, but it needs a threshold more of headroom"
    }
    fn drawing(&self) -> &'static str {
        "\
   in            out
   |              |
   +---+          |
 |-+   |        |-+
 M3 ---+--------| M4
 |-+            |-+
   +---+          |
 |-+   |        |-+
 M1 ---+--------| M2
 |-+            |-+
  gnd            gnd"
    }
    fn how(&self) -> &'static str {
        "The upper device holds the lower one's drain where the input side has it, so the copy is \
         exact and the output resistance is gms ro^2. The stacked diodes set the upper gate a \
         threshold higher than it needs to be: the output stops at VT + 2 VDSsat and the input \
         leg takes two gate-source voltages."
    }
    fn source(&self) -> &'static str {
        "Gray, Hurst, Lewis, Meyer, Analysis and Design of Analog Integrated Circuits, ch. 4"
    }
    fn parts(&self) -> Parts {
        Parts {
            cascode: true,
            ..Parts::default()
        }
    }
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit> {
        let gate = tech.gate(shape.inversion, 0.0, shape.length);
        let top = tech.gate(shape.cascode_inversion, gate, shape.cascode_length);
        Some(Unit {
            current,
            mirror: Size {
                width: tech.width(current, shape.inversion, shape.length),
                length: shape.length,
            },
            cascode: Some(Size {
                width: tech.width(current, shape.cascode_inversion, shape.cascode_length),
                length: shape.cascode_length,
            }),
            bias: None,
            resistor: None,
            expected: Expected {
                line: gate,
                drain: gate,
                cascode: top,
                input: top,
            },
        })
    }
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines {
        let rail = draw.rail_node();
        let line = draw.inner("g", unit.expected.line);
        let cascode = unit.cascode.expect("a cascode unit has a cascode device");
        draw.mos(
            "input cascode",
            [feed.input, feed.input, line],
            cascode,
            units,
        );
        draw.mos("input mirror", [line, line, rail], unit.mirror, units);
        Lines {
            mirror: line,
            cascode: Some(feed.input),
        }
    }
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
        stacked_output(draw, unit, units, lines, pin);
    }
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64 {
        tech.gate(shape.inversion, 0.0, shape.length) + tech.saturation(shape.cascode_inversion)
    }
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64 {
        let gate = tech.gate(shape.inversion, 0.0, shape.length);
        tech.gate(shape.cascode_inversion, gate, shape.cascode_length)
    }
}

/// A mirror device under a cascode device: the output leg of every cascode cell.
pub(super) fn stacked_output(draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
    let rail = draw.rail_node();
    let middle = draw.inner("d", unit.expected.drain);
    let cascode = unit.cascode.expect("a cascode unit has a cascode device");
    let gate = lines
        .cascode
        .expect("a cascode input leg makes a cascode line");
    draw.mos("output cascode", [pin, gate, middle], cascode, units);
    draw.mos(
        "output mirror",
        [middle, lines.mirror, rail],
        unit.mirror,
        units,
    );
}
