//! The wide-swing cascode mirror with its bias leg.

use super::cascode::stacked_output;
use super::draw::{Draw, Feed, Lines};
use super::{Cell, Expected, Parts, Shape, Size, Tech, Unit};
use crate::device;

/// A cascode whose upper gate a second leg sets just as high as needed.
pub struct WideSwing;

/// Voltage across the mirror device that the bias leg aims for.
pub(super) fn mirror_drain(tech: &Tech, shape: &Shape) -> f64 {
    tech.saturation(shape.inversion) + shape.drop
}

impl Cell for WideSwing {
    fn name(&self) -> &'static str {
        "wide_swing"
    }
    fn summary(&self) -> &'static str {
        "a cascode whose upper gate a bias leg sets just high enough: stiff and low"
    }
    fn drawing(&self) -> &'static str {
        "\
 bias      in            out
  |        |              |
  +--+     +-----+        |
|-+  |   |-+     |      |-+
MB --+---| M3 ---|------| M4
|-+      |-+     |      |-+
  |        |     |        |
  |      |-+     |      |-+
  |      | M1 ---+------| M2
  |      |-+            |-+
 gnd      gnd            gnd"
    }
    fn how(&self) -> &'static str {
        "A weak diode MB, fed by a current of its own, sets the cascode gate so that the mirror \
         devices keep just their saturation voltage and a margin. The output works down to two \
         saturation voltages, the input needs only one gate-source voltage, and M3 gives M1 the \
         same drain voltage as M2. The price is the bias leg and its current; with a single \
         external reference the cell cannot stand at the root."
    }
    fn source(&self) -> &'static str {
        "Sooch, US patent 4,550,284, 1985; Carusone, Johns, Martin, Analog Integrated Circuit Design, ch. 6"
    }
    fn parts(&self) -> Parts {
        Parts {
            cascode: true,
            drop: true,
            bias_leg: true,
            ..Parts::default()
        }
    }
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit> {
        let gate = tech.gate(shape.inversion, 0.0, shape.length);
        let drain = mirror_drain(tech, shape);
        let top = tech.gate(shape.cascode_inversion, drain, shape.cascode_length);
        let length = shape.length;
        let inversion = device::inversion_at(tech.mosfet(), tech.nominal(), top, length);
        if inversion <= 0.0 {
            return None;
        }
        Some(Unit {
            current,
            mirror: Size {
                width: tech.width(current, shape.inversion, length),
                length,
            },
            cascode: Some(Size {
                width: tech.width(current, shape.cascode_inversion, shape.cascode_length),
                length: shape.cascode_length,
            }),
            // Per ampere of bias current, so that any current may feed the leg.
            bias: Some(Size {
                width: tech.width(1.0, inversion, length),
                length,
            }),
            resistor: None,
            expected: Expected {
                line: gate,
                drain,
                cascode: top,
                input: gate,
            },
        })
    }
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines {
        let rail = draw.rail_node();
        let (bias, size) = feed.bias.expect("a wide-swing cell has a bias leg");
        draw.mos("bias diode", [bias, bias, rail], size, 1);
        let cascode = unit.cascode.expect("a cascode unit has a cascode device");
        let middle = draw.inner("d", unit.expected.drain);
        draw.mos("input cascode", [feed.input, bias, middle], cascode, units);
        draw.mos(
            "input mirror",
            [middle, feed.input, rail],
            unit.mirror,
            units,
        );
        Lines {
            mirror: feed.input,
            cascode: Some(bias),
        }
    }
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
        stacked_output(draw, unit, units, lines, pin);
    }
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64 {
        mirror_drain(tech, shape) + tech.saturation(shape.cascode_inversion)
    }
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64 {
        tech.gate(shape.inversion, 0.0, shape.length)
    }
}
