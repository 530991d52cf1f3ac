//! A network as a netlist.

use super::{Job, Network, Source};
use crate::cells::CELLS;
use crate::cells::draw::{Draw, Feed, Lines, Serves};
use crate::circuit::netlist::Node;
use crate::spec::Rail;

/// A drawn network and where its pins are.
#[derive(Debug, Clone)]
pub struct Drawing {
    /// Netlist, expected voltages and origins. No source has been drawn.
    pub draw: Draw,
    /// Input node of every family.
    pub inputs: Vec<Node>,
    /// Bias node of every family that has one.
    pub biases: Vec<Option<Node>>,
    /// Pins of every output: one, or one per equal leg where all were drawn.
    pub pins: Vec<Vec<Node>>,
    /// Names of the families: n1, n2, ... on the sink rail, p1, p2, ... on the source rail.
    pub names: Vec<String>,
    /// Index of the reference resistor in the netlist, if there is one.
    pub reference_resistor: Option<usize>,
}

/// Draws a network. With `every` leg of counted outputs, or with one that stands for all.
pub fn draw(job: &Job, network: &Network, every: bool) -> Drawing {
    let mut draw = Draw::new();
    let mut counts = [0usize; 2];
    let names: Vec<String> = network
        .families
        .iter()
        .map(|f| {
            let (letter, count) = match f.rail {
                Rail::Sink => ('n', &mut counts[0]),
                Rail::Source => ('p', &mut counts[1]),
            };
            *count += 1;
            format!("{letter}{count}")
        })
        .collect();
    let mut inputs = Vec::new();
    let mut biases = Vec::new();
    let mut lines: Vec<Lines> = Vec::new();
    for (k, family) in network.families.iter().enumerate() {
        draw.rail = family.rail;
        draw.family = k;
        draw.serves = Serves::Own;
        draw.tag = names[k].clone();
        let unit = &family.unit;
        let input = draw.node(format!("{}_in", names[k]), unit.expected.input);
        let bias = family.bias.as_ref().map(|b| {
            (
                draw.node(format!("{}_b", names[k]), unit.expected.cascode),
                b.size,
            )
        });
        inputs.push(input);
        biases.push(bias.map(|(node, _)| node));
        let cell = CELLS[family.shape.cell];
        lines.push(cell.input(&mut draw, unit, family.input_units, &Feed { input, bias }));
    }
    // Feeders hang on the lines of their parents.
    for (k, family) in network.families.iter().enumerate() {
        let mut feed = |source: Source, node: Node, serves: Serves, tag: String| {
            if let Source::Family { parent, units } = source {
                let from = &network.families[parent];
                draw.rail = from.rail;
                draw.family = parent;
                draw.serves = serves;
                draw.tag = tag;
                CELLS[from.shape.cell].output(&mut draw, &from.unit, units, &lines[parent], node);
            }
        };
        feed(
            family.feed,
            inputs[k],
            Serves::Feeds(k),
            format!("f_{}", names[k]),
        );
        if let (Some(bias), Some(node)) = (&family.bias, biases[k]) {
            feed(
                bias.feed,
                node,
                Serves::Biases(k),
                format!("b_{}", names[k]),
            );
        }
    }
    let mut pins = Vec::new();
    for (k, (leg, output)) in network.legs.iter().zip(&job.spec.outputs).enumerate() {
        let family = &network.families[leg.family];
        draw.rail = family.rail;
        draw.family = leg.family;
        draw.serves = Serves::Output(k);
        let copies = if every { output.count } else { 1 };
        let mut nodes = Vec::new();
        for copy in 1..=copies {
            let name = if copies == 1 {
                output.name.clone()
            } else {
                format!("{}_{copy}", output.name)
            };
            draw.tag = format!("o_{name}");
            let pin = draw.node(name, output.range.least.0);
            CELLS[family.shape.cell].output(
                &mut draw,
                &family.unit,
                leg.units,
                &lines[leg.family],
                pin,
            );
            nodes.push(pin);
        }
        pins.push(nodes);
    }
    let reference_resistor =
        network
            .reference_resistor
            .zip(job.card.resistor)
            .map(|(ohms, card)| {
                draw.rail = Rail::Sink;
                draw.family = 0;
                draw.serves = Serves::Own;
                draw.tag = "ref".to_owned();
                let ends = [draw.supply, inputs[0]];
                draw.resistor(
                    "reference resistor",
                    ends,
                    crate::cells::Body {
                        ohms,
                        width: card.width,
                    },
                    1,
                );
                draw.netlist.resistors.len() - 1
            });
    Drawing {
        draw,
        inputs,
        biases,
        pins,
        names,
        reference_resistor,
    }
}
