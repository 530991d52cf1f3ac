//! Every spec in `specs/` is explored at quick effort. What is reported as meeting the spec is measured
//! again from its netlist; what cannot be met says which limits stand in the way.

use super::Task;
use super::remeasure::remeasure;
use biasloom::explore::{NetworkReport, Outcome, Status};
use biasloom::front::dominates;
use biasloom::spec::{Effort, Reference};
use std::sync::OnceLock;

const NAMES: [&str; 6] = [
    "starter",
    "tern",
    "low-voltage",
    "nanoamp",
    "sixty-four",
    "impossible",
];

/// All of them, explored once for all tests.
fn explored() -> &'static [(Task, Outcome)] {
    static ALL: OnceLock<Vec<(Task, Outcome)>> = OnceLock::new();
    ALL.get_or_init(|| {
        NAMES
            .iter()
            .map(|name| {
                let task = Task::shipped(name, Effort::Quick);
                let outcome = task.explore();
                (task, outcome)
            })
            .collect()
    })
}

fn figure(network: &NetworkReport, name: &str) -> f64 {
    let found = network.figures.iter().find(|f| f.name == name);
    found.expect("a figure of the catalogue").value
}

#[test]
fn all_but_the_impossible_are_found() {
    for (task, outcome) in explored() {
        let name = &task.spec.name;
        if name == "impossible" {
            let Status::NothingFits { broken, .. } = &outcome.status else {
                panic!("{name}: {:?}", outcome.status);
            };
            // It is said which limits collide: here nothing but accuracy and area can.
            let names: Vec<&str> = broken.iter().map(|b| b.figure.as_str()).collect();
            assert!(!names.is_empty());
            for name in names {
                assert!(["area", "current_error"].contains(&name), "{name}");
            }
            assert!(outcome.front.is_empty() && outcome.nearest.is_some());
            for b in broken {
                assert!(b.value > b.limit, "{b:?}");
            }
        } else {
            assert_eq!(outcome.status, Status::Found, "{name}");
            assert!(!outcome.front.is_empty() && outcome.nearest.is_none());
        }
        assert!(outcome.work.networks_verified > 0);
    }
}

/// Neither does a network on a front break a limit, nor does the impossible one's nearest network keep
/// those it is said to break: measured from the netlists, by other code.
#[test]
fn no_network_on_a_front_breaks_a_limit() {
    for (task, outcome) in explored() {
        let spec = &task.spec;
        let nearest = outcome.nearest.iter().map(|n| &**n);
        for network in outcome.front.iter().chain(nearest) {
            let name = format!("{} {}", spec.name, network.rank);
            let found = remeasure(task, network);
            let same = |ours: f64, reported: f64, relative: f64, what: &str| {
                assert!(
                    (ours / reported - 1.0).abs() < relative,
                    "{name}: {what} {ours:e}, reported {reported:e}"
                );
            };
            same(found.area, figure(network, "area"), 1e-9, "area");
            let overhead = figure(network, "overhead_current");
            same(found.overhead, overhead, 1e-6, "overhead");
            same(found.pin[1], network.reference_pin[1], 1e-6, "pin");
            for (output, (error, resistance)) in network.outputs.iter().zip(&found.outputs) {
                same(*error, output.error, 1e-6, &output.name);
                same(*resistance, output.output_resistance, 1e-5, &output.name);
            }
            let mut broken = Vec::new();
            let mut over = |figure: &str, output: Option<&str>, value: f64, limit: f64| {
                // What is kept must be kept without excuse; a hair for the other code's rounding.
                if value > limit * (1.0 + 1e-9) {
                    broken.push((figure.to_owned(), output.map(str::to_owned)));
                }
            };
            for (output, (error, resistance)) in spec.outputs.iter().zip(&found.outputs) {
                let named = Some(output.name.as_str());
                if let Some(a) = output.accuracy {
                    over("current_error", named, *error, a.limit);
                }
                if let Some(least) = output.output_resistance {
                    over("output_resistance", named, least.0, *resistance);
                }
            }
            let limits = &spec.limits;
            if let Some(l) = limits.area {
                over("area", None, found.area, l.0);
            }
            if let Some(l) = limits.overhead_current {
                over("overhead_current", None, found.overhead, l.0);
            }
            if let Some(l) = limits.power {
                over("power", None, found.overhead * spec.supply.most.0, l.0);
            }
            if let Reference::Current { range, .. } = spec.reference {
                over("reference_voltage", None, found.pin[1], range.most.0);
                over("reference_voltage", None, range.least.0, found.pin[0]);
            }
            broken.sort();
            let mut reported: Vec<_> = network
                .broken
                .iter()
                .map(|b| (b.figure.clone(), b.output.clone()))
                .collect();
            reported.sort();
            assert_eq!(broken, reported, "{name}");
            if outcome.status == Status::Found {
                assert!(broken.is_empty(), "{name}: {broken:?}");
            }
        }
    }
}

#[test]
fn no_network_on_a_front_is_beaten_by_another() {
    for (task, outcome) in explored() {
        let points: Vec<Vec<f64>> = outcome
            .front
            .iter()
            .map(|n| task.spec.trade.iter().map(|t| figure(n, t)).collect())
            .collect();
        for (i, a) in points.iter().enumerate() {
            assert_eq!(outcome.front[i].rank, i + 1);
            for b in &points[i + 1..] {
                assert!(!dominates(a, b) && !dominates(b, a), "{}", task.spec.name);
                assert!(a[0] <= b[0], "ranked by area");
            }
        }
    }
}

/// What a report says of a network adds up.
#[test]
fn parts_of_a_report_add_up() {
    for (task, outcome) in explored() {
        let name = &task.spec.name;
        for network in &outcome.front {
            let area = figure(network, "area");
            let devices: f64 = network.devices.iter().map(|d| d.area).sum();
            let families: f64 = network.families.iter().map(|f| f.area).sum();
            assert!(
                (devices / area - 1.0).abs() < 1e-9,
                "{name}: {devices:e} {area:e}"
            );
            assert!(
                (families / area - 1.0).abs() < 1e-9,
                "{name}: {families:e} {area:e}"
            );
            for output in &network.outputs {
                let (mut signed, mut squares) = (0.0, 0.0);
                for part in &output.budget {
                    if part.random {
                        squares += part.value * part.value;
                    } else {
                        signed += part.value;
                    }
                }
                let sum = f64::abs(signed) + squares.sqrt();
                assert!((sum - output.error).abs() < 1e-9, "{name} {}", output.name);
                assert!(output.headroom <= output.range[0] + 1e-12);
                let family = network.families.iter().find(|f| f.name == output.family);
                assert!(family.unwrap().outputs.contains(&output.name));
                assert!(output.curve.volts.windows(2).all(|w| w[0] < w[1]));
            }
            // Every family hangs on one before it, and every one serves something.
            for (i, family) in network.families.iter().enumerate() {
                match &family.fed_by {
                    None => assert_eq!(i, 0, "{name}: one root"),
                    Some(by) => {
                        assert!(network.families[..i].iter().any(|f| &f.name == by));
                    }
                }
                let feeds = network
                    .devices
                    .iter()
                    .any(|d| d.family == family.name && d.role.contains("feeds"));
                let biases = network
                    .devices
                    .iter()
                    .any(|d| d.family == family.name && d.role.contains("biases"));
                assert!(
                    !family.outputs.is_empty() || feeds || biases,
                    "{name}: {} serves nothing",
                    family.name
                );
            }
        }
    }
}

/// The whole of the demo's point, at the effort its spec asks for: a front to choose from. Run with
/// `cargo test --release -- --ignored`.
#[test]
#[ignore = "minutes in a debug build"]
fn tern_offers_a_choice() {
    let task = Task::shipped("tern", Effort::Normal);
    assert!(task.spec.outputs.len() >= 12);
    let outcome = task.explore();
    assert_eq!(outcome.status, Status::Found);
    assert!(outcome.front.len() >= 8, "{}", outcome.front.len());
}
