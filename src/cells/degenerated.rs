//! The mirror with source degeneration.

use super::draw::{Draw, Feed, Lines};
use super::{Body, Cell, Expected, Parts, Shape, Size, Tech, Unit};

/// Equal resistors under every device.
pub struct Degenerated;

impl Cell for Degenerated {
    fn name(&self) -> &'static str {
        "degenerated"
    }
    fn summary(&self) -> &'static str {
        "a simple mirror with an equal resistor under every device"
    }
    fn drawing(&self) -> &'static str {
        "\
   in            out
   |              |
   +---+          |
 |-+   |        |-+
 M1 ---+--------| M2
 |-+            |-+
   |              |
   R              R
   |              |
  gnd            gnd"
    }
    fn how(&self) -> &'static str {
        "The drop I R across each resistor resists a change of current: the output resistance and \
         the immunity to threshold mismatch grow by 1 + gms R, for I R more headroom. Matching is \
         then the resistors' matter."
    }
    fn source(&self) -> &'static str {
        "Gray, Hurst, Lewis, Meyer, Analysis and Design of Analog Integrated Circuits, ch. 4"
    }
    fn parts(&self) -> Parts {
        Parts {
            drop: true,
            resistor: true,
            ..Parts::default()
        }
    }
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit> {
        let resistor = tech.card.resistor.as_ref()?;
        let gate = tech.gate(shape.inversion, shape.drop, shape.length);
        Some(Unit {
            current,
            mirror: Size {
                width: tech.width(current, shape.inversion, shape.length),
                length: shape.length,
            },
            cascode: None,
            bias: None,
            resistor: Some(Body {
                ohms: shape.drop / current,
                width: resistor.width,
            }),
            expected: Expected {
                line: gate,
                drain: shape.drop,
                cascode: 0.0,
                input: gate,
            },
        })
    }
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines {
        let lines = Lines {
            mirror: feed.input,
            cascode: None,
        };
        leg(
            draw,
            ["input mirror", "input degeneration resistor"],
            unit,
            units,
            &lines,
            feed.input,
        );
        lines
    }
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
        leg(
            draw,
            ["output mirror", "output degeneration resistor"],
            unit,
            units,
            lines,
            pin,
        );
    }
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64 {
        shape.drop + tech.saturation(shape.inversion)
    }
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64 {
        tech.gate(shape.inversion, shape.drop, shape.length)
    }
}

fn leg(
    draw: &mut Draw,
    roles: [&'static str; 2],
    unit: &Unit,
    units: u32,
    lines: &Lines,
    drain: usize,
) {
    let rail = draw.rail_node();
    let foot = draw.inner("s", unit.expected.drain);
    draw.mos(roles[0], [drain, lines.mirror, foot], unit.mirror, units);
    let body = unit.resistor.expect("a degenerated unit has a resistor");
    draw.resistor(roles[1], [foot, rail], body, units);
}
