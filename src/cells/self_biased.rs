//! The self-biased wide-swing cascode mirror.

use super::cascode::stacked_output;
use super::draw::{Draw, Feed, Lines};
use super::wide_swing::mirror_drain;
use super::{Body, Cell, Expected, Parts, Shape, Size, Tech, Unit};

/// A wide-swing cascode whose upper gate a resistor in the input leg sets.
pub struct SelfBiased;

impl Cell for SelfBiased {
    fn name(&self) -> &'static str {
        "self_biased"
    }
    fn summary(&self) -> &'static str {
        "a wide-swing cascode whose upper gate a resistor in the input leg sets"
    }
    fn drawing(&self) -> &'static str {
        "\
     in
     |
     +-----------+
     R           |      out
     |           |       |
     +-----+     |       |
   |-+     |     |     |-+
   M3 -----|-----+-----| M4
   |-+     |           |-+
   |-+     |           |-+
   M1 -----+-----------| M2
   |-+                 |-+
    gnd                 gnd"
    }
    fn how(&self) -> &'static str {
        "The input current drops across R and lifts the cascode gate by I R above the mirror gate: \
         no second leg is needed, so the cell can take a single reference. R spreads with the \
         process, so the margin must cover it, and the input leg needs I R more."
    }
    fn source(&self) -> &'static str {
        "Carusone, Johns, Martin, Analog Integrated Circuit Design, ch. 6"
    }
    fn parts(&self) -> Parts {
        Parts {
            cascode: true,
            drop: true,
            resistor: true,
            ..Parts::default()
        }
    }
    fn unit(&self, tech: &Tech, shape: &Shape, current: f64) -> Option<Unit> {
        let resistor = tech.card.resistor.as_ref()?;
        let gate = tech.gate(shape.inversion, 0.0, shape.length);
        let drain = mirror_drain(tech, shape);
        let top = tech.gate(shape.cascode_inversion, drain, shape.cascode_length);
        let lift = top - gate;
        if lift <= 0.0 {
            return None;
        }
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
            resistor: Some(Body {
                ohms: lift / current,
                width: resistor.width,
            }),
            expected: Expected {
                line: gate,
                drain,
                cascode: top,
                input: top,
            },
        })
    }
    fn input(&self, draw: &mut Draw, unit: &Unit, units: u32, feed: &Feed) -> Lines {
        let rail = draw.rail_node();
        let line = draw.inner("g", unit.expected.line);
        let middle = draw.inner("d", unit.expected.drain);
        let cascode = unit.cascode.expect("a cascode unit has a cascode device");
        // One body carries the whole input current: 1/units of a unit's resistance.
        let body = unit.resistor.expect("a self-biased unit has a resistor");
        let body = Body {
            ohms: body.ohms / f64::from(units),
            ..body
        };
        draw.resistor("gate resistor", [feed.input, line], body, 1);
        draw.mos("input cascode", [line, feed.input, middle], cascode, units);
        draw.mos("input mirror", [middle, line, rail], unit.mirror, units);
        Lines {
            mirror: line,
            cascode: Some(feed.input),
        }
    }
    fn output(&self, draw: &mut Draw, unit: &Unit, units: u32, lines: &Lines, pin: usize) {
        stacked_output(draw, unit, units, lines, pin);
    }
    fn least_output(&self, tech: &Tech, shape: &Shape) -> f64 {
        mirror_drain(tech, shape) + tech.saturation(shape.cascode_inversion)
    }
    fn input_voltage(&self, tech: &Tech, shape: &Shape) -> f64 {
        let drain = mirror_drain(tech, shape);
        tech.gate(shape.cascode_inversion, drain, shape.cascode_length)
    }
}
