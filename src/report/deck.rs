//! A netlist deck of every network, to seed detailed simulation: the network as one subcircuit
//! with its sizes as parameters, and a small test bench around it.
//!
//! Element cards M, R, V and I in the form of the netlist-compatibility annex (E) of the
//! Verilog-AMS Language Reference Manual 2.4 (Accellera, 2014), from memory. Such decks ignore
//! letter case, so names differ by more than case; the scale factor `m` is milli and `meg` is
//! mega; the first line is a title; a line that starts with `+` continues the one before.

use super::{Files, Format, format, view, words};
use crate::circuit::netlist::{GROUND, Mos, Node, Polarity};
use crate::explore::Outcome;
use crate::spec::Rail;
use std::collections::{BTreeMap, BTreeSet};

/// The format.
pub const FORMAT: Format = Format {
    name: "deck",
    files: &["network-NN.cir"],
    about: "a netlist deck of each network with a small test bench",
    render,
};

/// Longest line of a deck.
pub const WIDTH: usize = 79;

/// Longest name of a node or an element before its uniqueness suffix.
const NAME_LENGTH: usize = 28;

fn render(outcome: &Outcome) -> Files {
    let networks = view::networks(outcome);
    networks
        .iter()
        .map(|shown| {
            (
                format!("{}.cir", shown.stem()).into(),
                deck(outcome, shown).into_bytes(),
            )
        })
        .collect()
}

fn deck(outcome: &Outcome, shown: &view::Shown<'_>) -> String {
    let source = &shown.network.deck;
    let mut names = Names::default();
    let nodes = names.nodes(&source.netlist.nodes);
    let node = |node: Node| nodes.get(node).map_or("0", String::as_str);
    let mut text = Lines::default();

    header(&mut text, outcome, shown);

    // The network.
    let sizes = Sizes::new(shown);
    let subcircuit = sanitised(&format!("{}_{}", outcome.spec.name, shown.stem()), "bias");
    let mut ports = vec![node(source.supply)];
    ports.extend(source.references.iter().map(|&pin| node(pin)));
    ports.extend(source.outputs.iter().flatten().map(|&pin| node(pin)));
    text.comment("");
    text.comment(
        "The network. Ground is node 0. A parameter is the drawn size shared by equal units.",
    );
    text.card(&format!(".subckt {subcircuit} {}", ports.join(" ")));
    for (name, width, length) in &sizes.parameters {
        text.more(&format!(
            "w_{name}={} l_{name}={}",
            format::deck(*width),
            format::deck(*length)
        ));
    }
    let mut elements = Names::default();
    for mos in &source.netlist.mos {
        let (model, size) = (
            &source.models[usize::from(mos.polarity == Polarity::P)],
            sizes.of(mos),
        );
        text.card(&format!(
            "{} {} {} {} {} {model} W={{w_{size}}} L={{l_{size}}} M={}",
            elements.element('M', &mos.name),
            node(mos.drain),
            node(mos.gate),
            node(mos.source),
            node(mos.bulk),
            mos.units
        ));
    }
    for resistor in &source.netlist.resistors {
        // Parallel bodies are drawn one by one: the resistor card of the annex has no multiplier.
        let bodies = match resistor.units {
            1 => "one body".to_owned(),
            units => format!("{units} equal bodies in parallel, each"),
        };
        text.comment(&format!(
            "{bodies} drawn {} wide",
            format::length(resistor.width)
        ));
        for body in 1..=resistor.units {
            let name = match resistor.units {
                1 => resistor.name.clone(),
                _ => format!("{}_{body}", resistor.name),
            };
            text.card(&format!(
                "{} {} {} {}",
                elements.element('R', &name),
                node(resistor.a),
                node(resistor.b),
                format::deck(resistor.ohms)
            ));
        }
    }
    for current in &source.netlist.currents {
        text.card(&format!(
            "{} {} {} {}",
            elements.element('I', &current.name),
            node(current.from),
            node(current.to),
            format::deck(current.amps)
        ));
    }
    for voltage in &source.netlist.voltages {
        text.card(&format!(
            "{} {} {} {}",
            elements.element('V', &voltage.name),
            node(voltage.plus),
            node(voltage.minus),
            format::deck(voltage.volts)
        ));
    }
    text.card(&format!(".ends {subcircuit}"));

    // The test bench.
    let supply = source.nominal_supply;
    text.comment("");
    text.comment(
        "Test bench: nominal supply and temperature, every output pin held at the middle of its \
         range. I(V...) of a pin is negative where the network sinks and positive where it sources.",
    );
    text.card(&format!("Xnetwork {} {subcircuit}", ports.join(" ")));
    text.card(&format!(
        "Vsupply {} 0 {}",
        node(source.supply),
        format::deck(supply)
    ));
    let mut bench = Names::default();
    bench.taken.insert("vsupply".to_owned());
    for &pin in &source.references {
        let name = bench.element('I', &format!("I_{}", node(pin)));
        text.card(&format!(
            "{name} 0 {} {}",
            node(pin),
            format::deck(source.reference_current)
        ));
    }
    let mut probes = Vec::new();
    for (output, pins) in shown.network.outputs.iter().zip(&source.outputs) {
        let middle = 0.5 * (output.range[0] + output.range[1]);
        let volts = match output.rail {
            Rail::Sink => middle,
            Rail::Source => supply - middle,
        };
        for &pin in pins {
            let name = bench.element('V', &format!("V_{}", node(pin)));
            text.card(&format!("{name} {} 0 {}", node(pin), format::deck(volts)));
            probes.push(name);
        }
    }
    text.card(&format!(
        ".temp {}",
        format::number(source.nominal_temperature - 273.15)
    ));
    text.card(".op");
    if let Some((first, others)) = probes.split_first() {
        // A hundred steps from rail to rail.
        let sweep = |name: &str| {
            format!(
                ".dc {name} 0 {} {}",
                format::deck(supply),
                format::deck(supply / 100.0)
            )
        };
        text.card(&sweep(first));
        text.card(&format!(".print dc I({first})"));
        if !others.is_empty() {
            text.comment("The same sweep for the other outputs; enable one at a time:");
        }
        for other in others {
            text.comment(&sweep(other));
        }
    }
    text.card(".end");
    text.0
}

fn header(text: &mut Lines, outcome: &Outcome, shown: &view::Shown<'_>) {
    let network = shown.network;
    text.comment(&format!("{}: {}", outcome.spec.title, shown.title()));
    text.comment(&format!(
        "Spec {}, process card: {}",
        outcome.spec.name, outcome.card_title
    ));
    text.comment("");
    for caution in words::CAUTIONS {
        text.comment(caution);
    }
    text.comment("");
    for figure in &network.figures {
        let mut line = format!(
            "{}: {}",
            words::label(&figure.name),
            format::quantity(figure.value, &figure.unit)
        );
        if let Some(output) = &figure.output {
            line.push_str(&format!(", {output}"));
        }
        if let Some(corner) = &figure.corner {
            line.push_str(&format!(", {corner}"));
        }
        text.comment(&line);
    }
    for broken in &network.broken {
        text.comment(&format!(
            "BREAKS A LIMIT: {}",
            words::broken_sentence(broken)
        ));
    }
    text.comment("");
    let mut models: Vec<&str> = Vec::new();
    for mos in &network.deck.netlist.mos {
        let model = network.deck.models[usize::from(mos.polarity == Polarity::P)].as_str();
        if !models.contains(&model) {
            models.push(model);
        }
    }
    text.comment(&format!(
        "The foundry's models go here; the names used below are {}:",
        models.join(" and ")
    ));
    text.comment(".include \"models.inc\"");
}

/// Lines of a deck, folded under [`WIDTH`].
#[derive(Default)]
struct Lines(String);

impl Lines {
    fn comment(&mut self, text: &str) {
        if text.is_empty() {
            self.0.push_str("*\n");
        }
        for line in words::wrap(&ascii(text), WIDTH - 2) {
            // A word that no line can hold is cut: a comment may lose its look, not the deck.
            for piece in line.as_bytes().chunks(WIDTH - 2) {
                self.0
                    .push_str(&format!("* {}\n", String::from_utf8_lossy(piece)));
            }
        }
    }
    fn card(&mut self, text: &str) {
        self.folded("", text);
    }
    /// Continues the card before.
    fn more(&mut self, text: &str) {
        self.folded("+ ", text);
    }
    fn folded(&mut self, first: &str, text: &str) {
        for (index, line) in words::wrap(text, WIDTH - 2).iter().enumerate() {
            self.0.push_str(&format!(
                "{}{line}\n",
                if index == 0 { first } else { "+ " }
            ));
        }
    }
}

/// Text in ASCII: signs that have a plain spelling get it, others become question marks.
fn ascii(text: &str) -> String {
    let mut plain = String::new();
    for letter in text.chars() {
        match letter {
            '\u{b5}' | '\u{3bc}' => plain.push('u'),
            '\u{3a9}' | '\u{2126}' => plain.push_str("Ohm"),
            '°' => plain.push_str("deg "),
            '²' => plain.push('2'),
            '±' => plain.push_str("+-"),
            '–' | '—' | '−' => plain.push('-'),
            '‘' | '’' => plain.push('\''),
            '“' | '”' => plain.push('"'),
            letter if letter.is_ascii() => plain.push(letter),
            _ => plain.push('?'),
        }
    }
    plain
}

/// A name of ASCII letters, digits and underscores, at most [`NAME_LENGTH`] long.
fn sanitised(name: &str, empty: &str) -> String {
    let clean: String = name
        .chars()
        .map(|letter| {
            if letter.is_ascii_alphanumeric() {
                letter
            } else {
                '_'
            }
        })
        .take(NAME_LENGTH)
        .collect();
    if clean.is_empty() {
        empty.to_owned()
    } else {
        clean
    }
}

/// Names already given away, in lower case.
#[derive(Default)]
struct Names {
    taken: BTreeSet<String>,
}

impl Names {
    /// The name itself, or with the first number that makes it unique.
    fn unique(&mut self, name: String) -> String {
        let mut candidate = name.clone();
        let mut number = 2;
        while !self.taken.insert(candidate.to_ascii_lowercase()) {
            candidate = format!("{name}_{number}");
            number += 1;
        }
        candidate
    }
    /// Deck names of all nodes by index; ground is 0, and no other node has one of its names.
    fn nodes(&mut self, nodes: &[String]) -> Vec<String> {
        self.taken.extend(["0".to_owned(), "gnd".to_owned()]);
        let name = |(index, name): (usize, &String)| match index {
            GROUND => "0".to_owned(),
            _ => self.unique(sanitised(name, "n")),
        };
        nodes.iter().enumerate().map(name).collect()
    }
    /// An element name that starts with its card's letter.
    fn element(&mut self, letter: char, name: &str) -> String {
        let clean = sanitised(name, "");
        let starts = clean
            .chars()
            .next()
            .is_some_and(|first| first.eq_ignore_ascii_case(&letter));
        self.unique(if starts {
            clean
        } else {
            format!("{letter}{clean}")
        })
    }
}

/// Sizes shared by equal units: one pair of parameters per family and size.
struct Sizes<'a> {
    /// Parameter stem, width and length.
    parameters: Vec<(String, f64, f64)>,
    /// Parameter stem by family, polarity and the bits of width and length.
    stems: BTreeMap<(&'a str, Polarity, u64, u64), String>,
    families: BTreeMap<&'a str, &'a str>,
}

impl<'a> Sizes<'a> {
    fn new(shown: &view::Shown<'a>) -> Sizes<'a> {
        let deck = &shown.network.deck;
        let families = deck
            .netlist
            .mos
            .iter()
            .zip(&deck.families)
            .map(|(mos, family)| (mos.name.as_str(), family.as_str()))
            .collect();
        let mut sizes = Sizes {
            parameters: Vec::new(),
            stems: BTreeMap::new(),
            families,
        };
        let mut names = Names::default();
        for mos in &shown.network.deck.netlist.mos {
            let key = sizes.key(mos);
            if !sizes.stems.contains_key(&key) {
                let family = if key.0.is_empty() { "m" } else { key.0 };
                let stem = names.unique(sanitised(family, "m"));
                sizes.parameters.push((stem.clone(), mos.width, mos.length));
                sizes.stems.insert(key, stem);
            }
        }
        sizes
    }
    fn key(&self, mos: &Mos) -> (&'a str, Polarity, u64, u64) {
        let family = self.families.get(mos.name.as_str()).copied().unwrap_or("");
        (
            family,
            mos.polarity,
            mos.width.to_bits(),
            mos.length.to_bits(),
        )
    }
    fn of(&self, mos: &Mos) -> &str {
        self.stems.get(&self.key(mos)).map_or("", String::as_str)
    }
}
