//! The deck read back by a small reader of its own and compared with the netlist, element by
//! element. The reader knows the netlist cards (Verilog-AMS LRM 2.4, annex E, from memory): a
//! title line, `*` comments, `+` continuations, letter case ignored, scale factors.

use super::fixture;
use biasloom::circuit::netlist::Polarity;
use biasloom::explore::{NetworkReport, Outcome};
use biasloom::report;
use biasloom::spec::Rail;
use std::collections::{BTreeMap, BTreeSet};

/// A number with its scale factor.
fn number(text: &str) -> f64 {
    let text = text.to_lowercase();
    let digits = text.trim_end_matches(|c: char| c.is_ascii_alphabetic());
    let scale = match &text[digits.len()..] {
        "" => 1.0,
        "f" => 1e-15,
        "p" => 1e-12,
        "n" => 1e-9,
        "u" => 1e-6,
        "m" => 1e-3,
        "k" => 1e3,
        "meg" => 1e6,
        "g" => 1e9,
        other => panic!("scale factor {other}"),
    };
    digits.parse::<f64>().unwrap() * scale
}

#[derive(Debug, Default)]
struct Deck {
    title: String,
    /// Name and ports of the subcircuit.
    subcircuit: (String, Vec<String>),
    parameters: BTreeMap<String, f64>,
    /// Cards inside of the subcircuit and outside of it, in words.
    inner: Vec<Vec<String>>,
    outer: Vec<Vec<String>>,
}

fn read(text: &str) -> Deck {
    let mut cards: Vec<String> = Vec::new();
    let (title, rest) = text.split_once('\n').unwrap();
    for line in rest.lines() {
        assert!(line.is_ascii() && line.len() < 80, "{line}");
        if let Some(more) = line.strip_prefix('+') {
            let card = cards.last_mut().unwrap();
            card.push(' ');
            card.push_str(&more.trim().to_lowercase());
        } else if !line.starts_with('*') && !line.trim().is_empty() {
            cards.push(line.to_lowercase());
        }
    }
    assert_eq!(cards.pop().as_deref(), Some(".end"));
    let mut deck = Deck {
        title: title.to_owned(),
        ..Deck::default()
    };
    let mut inside = false;
    for card in cards {
        let words: Vec<String> = card.split_whitespace().map(str::to_owned).collect();
        match words[0].as_str() {
            ".subckt" => {
                assert!(!inside && deck.subcircuit.0.is_empty());
                inside = true;
                let (settings, ports): (Vec<String>, Vec<String>) = words[2..]
                    .iter()
                    .cloned()
                    .partition(|word| word.contains('='));
                deck.subcircuit = (words[1].clone(), ports);
                for setting in settings {
                    let (name, value) = setting.split_once('=').unwrap();
                    assert!(
                        deck.parameters
                            .insert(name.to_owned(), number(value))
                            .is_none()
                    );
                }
            }
            ".ends" => {
                assert!(inside && words[1] == deck.subcircuit.0);
                inside = false;
            }
            _ if inside => deck.inner.push(words),
            _ => deck.outer.push(words),
        }
    }
    assert!(!inside);
    deck
}

fn decks(outcome: &Outcome) -> Vec<Deck> {
    let files = (report::deck::FORMAT.render)(outcome);
    files
        .iter()
        .map(|(_, bytes)| read(std::str::from_utf8(bytes).unwrap()))
        .collect()
}

fn close(a: f64, b: f64) {
    assert!((a - b).abs() <= 1e-8 * b.abs(), "{a} against {b}");
}

/// Deck names of the netlist's nodes, found from the cards: each index has one name, and no two
/// indices share one.
#[derive(Default)]
struct Nodes(BTreeMap<usize, String>);

impl Nodes {
    fn same(&mut self, index: usize, name: &str) {
        let known = self.0.entry(index).or_insert_with(|| name.to_owned());
        assert_eq!(known, name, "node {index}");
        assert_eq!(index == 0, name == "0");
    }
    fn distinct(&self) {
        let names: BTreeSet<&String> = self.0.values().collect();
        assert_eq!(names.len(), self.0.len());
    }
}

fn compare(deck: &Deck, network: &NetworkReport) {
    let source = &network.deck;
    let mut nodes = Nodes::default();
    let mut cards = deck.inner.iter();
    let mut names = BTreeSet::new();
    for mos in &source.netlist.mos {
        let card = cards.next().unwrap();
        assert!(
            card[0].starts_with('m') && names.insert(card[0].clone()),
            "{card:?}"
        );
        for (node, name) in [mos.drain, mos.gate, mos.source, mos.bulk]
            .into_iter()
            .zip(&card[1..5])
        {
            nodes.same(node, name);
        }
        let model = &source.models[usize::from(mos.polarity == Polarity::P)];
        assert_eq!(card[5], model.to_lowercase());
        let value = |key: &str| {
            let word = card[6..]
                .iter()
                .find_map(|word| word.strip_prefix(key))
                .unwrap_or_else(|| panic!("no {key} in {card:?}"));
            match word
                .strip_prefix('{')
                .and_then(|word| word.strip_suffix('}'))
            {
                Some(name) => deck.parameters[name],
                None => number(word),
            }
        };
        close(value("w="), mos.width);
        close(value("l="), mos.length);
        assert_eq!(value("m="), f64::from(mos.units));
        assert_eq!(card.len(), 9);
    }
    for resistor in &source.netlist.resistors {
        for _ in 0..resistor.units {
            let card = cards.next().unwrap();
            assert!(
                card[0].starts_with('r') && names.insert(card[0].clone()),
                "{card:?}"
            );
            nodes.same(resistor.a, &card[1]);
            nodes.same(resistor.b, &card[2]);
            close(number(&card[3]), resistor.ohms);
            assert_eq!(card.len(), 4);
        }
    }
    for current in &source.netlist.currents {
        let card = cards.next().unwrap();
        assert!(
            card[0].starts_with('i') && names.insert(card[0].clone()),
            "{card:?}"
        );
        nodes.same(current.from, &card[1]);
        nodes.same(current.to, &card[2]);
        close(number(&card[3]), current.amps);
    }
    for voltage in &source.netlist.voltages {
        let card = cards.next().unwrap();
        assert!(
            card[0].starts_with('v') && names.insert(card[0].clone()),
            "{card:?}"
        );
        nodes.same(voltage.plus, &card[1]);
        nodes.same(voltage.minus, &card[2]);
        close(number(&card[3]), voltage.volts);
    }
    assert!(cards.next().is_none());

    // Ports and test bench.
    let mut pins = vec![source.supply];
    pins.extend(&source.references);
    pins.extend(source.outputs.iter().flatten());
    assert_eq!(deck.subcircuit.1.len(), pins.len());
    for (&pin, name) in pins.iter().zip(&deck.subcircuit.1) {
        nodes.same(pin, name);
    }
    nodes.distinct();
    let instance = deck
        .outer
        .iter()
        .find(|card| card[0].starts_with('x'))
        .unwrap();
    assert_eq!(instance[1..instance.len() - 1], deck.subcircuit.1);
    assert_eq!(instance.last(), Some(&deck.subcircuit.0));
    let driven = |letter: char, index: usize, name: &String| {
        let mut found = deck
            .outer
            .iter()
            .filter(|card| card[0].starts_with(letter) && card[index] == *name);
        let card = found
            .next()
            .unwrap_or_else(|| panic!("{name} is driven by nothing"));
        assert!(found.next().is_none(), "{name} is driven twice");
        number(&card[3])
    };
    close(
        driven('v', 1, &nodes.0[&source.supply]),
        source.nominal_supply,
    );
    for reference in &source.references {
        // A positive current flows from ground through the source into the pin.
        close(
            driven('i', 2, &nodes.0[reference]),
            source.reference_current,
        );
    }
    for (output, pins) in network.outputs.iter().zip(&source.outputs) {
        let middle = 0.5 * (output.range[0] + output.range[1]);
        let expected = if output.rail == Rail::Sink {
            middle
        } else {
            source.nominal_supply - middle
        };
        for pin in pins {
            close(driven('v', 1, &nodes.0[pin]), expected);
        }
    }
    let sources: Vec<&String> = deck.outer.iter().map(|card| &card[0]).collect();
    let unique: BTreeSet<&&String> = sources
        .iter()
        .filter(|name| !name.starts_with('.'))
        .collect();
    assert_eq!(
        unique.len(),
        sources.iter().filter(|name| !name.starts_with('.')).count()
    );
    assert!(deck.outer.iter().any(|card| card[0] == ".op"));
    let sweep = deck.outer.iter().find(|card| card[0] == ".dc").unwrap();
    assert!(sources.contains(&&sweep[1]));
    close(number(&sweep[3]), source.nominal_supply);
}

#[test]
fn every_element_reads_back() {
    for outcome in [fixture::found(), fixture::large()] {
        let decks = decks(&outcome);
        assert_eq!(decks.len(), outcome.front.len());
        for (deck, network) in decks.iter().zip(&outcome.front) {
            assert!(deck.title.contains(&outcome.spec.title));
            compare(deck, network);
        }
    }
    let outcome = fixture::nothing_fits();
    compare(&decks(&outcome)[0], outcome.nearest.as_deref().unwrap());
}

/// Names that differ in case only, are empty, long, foreign or that of ground stay distinct, and
/// sources in the netlist are written too.
#[test]
fn awkward_names_stay_apart() {
    use biasloom::circuit::netlist::{CurrentSource, VoltageSource};
    let mut outcome = fixture::found();
    outcome.spec.title = format!("µ — {} Ω", "long".repeat(60));
    let netlist = &mut outcome.front[0].deck.netlist;
    let names = [
        "0",
        "vdd",
        "GND",
        "a b",
        "A_B",
        "a-b",
        "",
        "été",
        &"x".repeat(200),
    ];
    for (index, node) in netlist.nodes.iter_mut().enumerate() {
        *node = names.get(index).map_or_else(
            || format!("{}{index}", "x".repeat(199)),
            |name| (*name).to_owned(),
        );
    }
    for (index, mos) in netlist.mos.iter_mut().enumerate() {
        mos.name = ["m1", "M1", "1", "", "r1"][index % 5].to_owned();
    }
    netlist.currents.push(CurrentSource {
        name: "leak".to_owned(),
        from: 1,
        to: 2,
        amps: 3.3e-13,
    });
    netlist.voltages.push(VoltageSource {
        name: "probe".to_owned(),
        plus: 3,
        minus: 2,
        volts: -0.25,
    });
    compare(&decks(&outcome)[0], &outcome.front[0]);
}

/// The cautions, the figures, the place for the foundry's models and broken limits stand in the
/// header.
#[test]
fn the_header_warns() {
    let files = (report::deck::FORMAT.render)(&fixture::nothing_fits());
    let text = String::from_utf8(files[0].1.clone()).unwrap();
    let head = text[..text.find(".subckt").unwrap()].replace("\n* ", " ");
    for caution in report::words::CAUTIONS {
        assert!(head.contains(caution), "{caution}");
    }
    for words in [
        "BREAKS A LIMIT: preamp",
        ".include",
        "nch and pch",
        "area: 891 um2",
    ] {
        assert!(head.contains(words), "{words}");
    }
}
