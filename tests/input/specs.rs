//! Every shipped spec is read, with its defaults, and nothing that a mutation or a hostile file does
//! to it makes the reader panic.

use super::{full_spec, read_spec, shipped_specs};
use biasloom::diag::Diagnostics;
use biasloom::process::{self, SHIPPED};
use biasloom::spec::{self, AccuracyOf, Effort, Flow, Rail, Reference, Target, Vocabulary};
use biasloom::units::{Amp, Kelvin, Ohm, Range, Volt};
use proptest::prelude::*;
use std::time::{Duration, Instant};

#[test]
fn every_shipped_spec_is_read_without_a_warning() {
    let specs = shipped_specs();
    let names: Vec<&str> = specs.iter().map(|(name, _)| name.as_str()).collect();
    for wanted in [
        "starter",
        "tern",
        "low-voltage",
        "nanoamp",
        "impossible",
        "sixty-four",
    ] {
        assert!(names.contains(&wanted), "{wanted}");
    }
    for (name, text) in &specs {
        let located = read_spec(text).unwrap_or_else(|f| panic!("{name}\n{}", f.render(false)));
        assert!(
            located.warnings.is_empty(),
            "{}",
            located.warnings.render(false)
        );
        let spec = full_spec(text).unwrap_or_else(|f| panic!("{name}\n{}", f.render(false)));
        assert_eq!(spec.corners, ["TT", "SS", "FF", "SF", "FS"], "{name}");
        assert!(text.starts_with("# "), "{name} explains itself first");
        assert!(text.contains("# |"), "{name} shows its table");
    }
}

#[test]
fn a_file_is_named_by_its_stem_and_by_its_path() {
    let folder = std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("specs");
    let cards = process::shipped_names();
    let vocabulary = Vocabulary {
        figures: super::FIGURES,
        cards: &cards,
    };
    let located = spec::load(&folder.join("low-voltage.yaml"), &vocabulary).unwrap();
    assert_eq!(located.spec.name, "low-voltage");
    let faults = spec::load(&folder.join("none.yaml"), &vocabulary).unwrap_err();
    let shown = faults.render(false);
    assert!(
        shown.contains("none.yaml: there is no such file"),
        "{shown}"
    );
}

#[test]
fn sizes_of_the_shipped_specs() {
    for (name, text) in shipped_specs() {
        let spec = full_spec(&text).unwrap();
        match name.as_str() {
            "starter" => assert_eq!(spec.outputs.len(), 2),
            "sixty-four" => assert_eq!(spec.outputs.len(), 64),
            "tern" => {
                assert!(spec.outputs.len() >= 12);
                let currents = spec.outputs.iter().map(|o| spec.target(o).0);
                let (least, most) =
                    currents.fold((1.0, 0.0), |(a, b): (f64, f64), c| (a.min(c), b.max(c)));
                assert_eq!((least, most), (50e-9, 200e-6));
            }
            _ => {}
        }
    }
}

#[test]
fn tern_as_understood() {
    let (_, text) = shipped_specs()
        .into_iter()
        .find(|(name, _)| name == "tern")
        .unwrap();
    let spec = full_spec(&text).unwrap();
    assert_eq!(
        spec.supply,
        Range {
            least: Volt(1.62),
            most: Volt(1.98)
        }
    );
    assert_eq!(spec.temperature.least, Kelvin(233.15));
    assert_eq!(spec.temperature.nominal, Kelvin(300.15));
    assert_eq!(spec.temperature.most, Kelvin(398.15));
    assert_eq!(
        spec.reference,
        Reference::Current {
            current: Amp(10e-6),
            flows: Flow::IntoNetwork,
            range: Range {
                least: Volt(0.0),
                most: Volt(1.2)
            },
            copies: 1,
            tolerance: 0.0,
        }
    );
    let tail = &spec.outputs[0];
    assert_eq!(
        (tail.name.as_str(), tail.rail, tail.count),
        ("preamp_tail", Rail::Sink, 2)
    );
    assert_eq!(tail.target, Target::Current(Amp(20e-6)));
    assert_eq!(tail.output_resistance, Some(Ohm(2.5e6)));
    let accuracy = tail.accuracy.unwrap();
    assert_eq!(
        (accuracy.limit, accuracy.sigma, accuracy.of),
        (0.015, 3.0, AccuracyOf::Current)
    );
    let charge = spec
        .outputs
        .iter()
        .find(|o| o.name == "oscillator_charge")
        .unwrap();
    assert_eq!(charge.target, Target::Ratio(0.1));
    assert_eq!(charge.accuracy.unwrap().of, AccuracyOf::Ratio);
    assert_eq!(spec.trade, ["area", "overhead_current"]);
    assert_eq!((spec.search.effort, spec.search.seed), (Effort::Normal, 1));
}

/// As little as a spec can say.
const LEAST: &str = "
card: textbook-basic
supply: 3 V
temperature: 50 degC
reference: { current: 100 uA, from: resistor }
outputs:
  - { name: out, kind: sink, ratio: 1/4, range: 0.4 to 2 V }
";

#[test]
fn defaults_fill_what_is_left_out() {
    let spec = full_spec(LEAST).unwrap_or_else(|f| panic!("{}", f.render(false)));
    assert_eq!((spec.name.as_str(), spec.title.as_str()), ("tern", "tern"));
    assert_eq!(
        spec.supply,
        Range {
            least: Volt(3.0),
            most: Volt(3.0)
        }
    );
    // 27 degC clamped into the range.
    assert_eq!(spec.temperature.nominal, Kelvin(323.15));
    assert_eq!(spec.corners, ["TT", "SS", "FF"]);
    assert_eq!(
        spec.reference,
        Reference::Resistor {
            current: Amp(100e-6)
        }
    );
    let out = &spec.outputs[0];
    assert_eq!(
        (out.count, out.accuracy, out.output_resistance),
        (1, None, None)
    );
    assert_eq!(spec.target(out), Amp(25e-6));
    assert_eq!(spec.limits, Default::default());
}

#[test]
fn long_forms() {
    let text = LEAST
        .replace("50 degC", "{ range: -40 to 125 degC, nominal: 60 degC }")
        .replace(
            "range: 0.4 to 2 V }",
            "range: 0.4 to 2 V, accuracy: { limit: 2 %, of: current, sigma: 4 sigma } }",
        )
        + "corners: [FF, TT]\nsearch: { effort: quick, seed: 18446744073709551615 }\n";
    let spec = full_spec(&text).unwrap_or_else(|f| panic!("{}", f.render(false)));
    assert_eq!(spec.temperature.nominal, Kelvin(333.15));
    let accuracy = spec.outputs[0].accuracy.unwrap();
    assert_eq!(
        (accuracy.limit, accuracy.sigma, accuracy.of),
        (0.02, 4.0, AccuracyOf::Current)
    );
    // The nominal corner always comes first.
    assert_eq!(spec.corners, ["TT", "FF"]);
    assert_eq!(
        (spec.search.effort, spec.search.seed),
        (Effort::Quick, u64::MAX)
    );
}

#[test]
fn hostile_files_are_refused_quickly() {
    let bomb = {
        let mut text = "a0: &a0 [x, x, x, x, x, x, x, x, x]\n".to_owned();
        for i in 1..40 {
            let previous = vec![format!("*a{}", i - 1); 9].join(", ");
            text.push_str(&format!("a{i}: &a{i} [{previous}]\n"));
        }
        text
    };
    let cases = [
        ("brackets", "[".repeat(100_000)),
        ("braces", "{a: ".repeat(100_000)),
        ("closed brackets", "[".repeat(9_000) + &"]".repeat(9_000)),
        ("dashes", "- ".repeat(100_000)),
        ("question marks", "? ".repeat(100_000)),
        (
            "indentation",
            (0..2_000).map(|i| " ".repeat(i) + "a:\n").collect(),
        ),
        ("alias bomb", bomb),
        ("alias of itself", "a: &a [*a]".to_owned()),
        ("equal keys", "supply: 1\n".repeat(90_000)),
        (
            "unknown keys",
            (0..60_000).map(|i| format!("k{i}: 1\n")).collect(),
        ),
        ("long line", "title: ".to_owned() + &"x".repeat(900_000)),
        (
            "many faults",
            "outputs:\n".to_owned() + &"- {name: 1, kind: 2}\n".repeat(256),
        ),
        ("quotes", "\"".repeat(900_000)),
    ];
    for (name, text) in cases {
        let start = Instant::now();
        let faults: Diagnostics = read_spec(&text).unwrap_err();
        let shown = faults.render(false);
        assert!(
            start.elapsed() < Duration::from_secs(20),
            "{name}: {:?}",
            start.elapsed()
        );
        assert!(shown.len() < 100_000, "{name}: {} bytes", shown.len());
    }
}

/// Edits that people and machines make: lines dropped, doubled, swapped, cut; letters replaced.
#[derive(Debug, Clone)]
enum Edit {
    Drop(usize),
    Double(usize),
    Swap(usize, usize),
    Cut(usize),
    Insert(usize, char),
    Delete(usize),
}

fn edits() -> impl Strategy<Value = Vec<Edit>> {
    let letters = prop::sample::select(
        ": -#[]{}&*!|>'\"%@`,?\n\t~0123456789.eEuµmMVAOhm°\u{0}\u{85}\u{2028}\u{feff}"
            .chars()
            .collect::<Vec<_>>(),
    );
    let edit = prop_oneof![
        any::<usize>().prop_map(Edit::Drop),
        any::<usize>().prop_map(Edit::Double),
        (any::<usize>(), any::<usize>()).prop_map(|(a, b)| Edit::Swap(a, b)),
        any::<usize>().prop_map(Edit::Cut),
        (any::<usize>(), letters).prop_map(|(at, c)| Edit::Insert(at, c)),
        any::<usize>().prop_map(Edit::Delete),
    ];
    prop::collection::vec(edit, 1..6)
}

fn apply(text: &str, edits: &[Edit]) -> String {
    let mut lines: Vec<String> = text.lines().map(str::to_owned).collect();
    for edit in edits {
        let count = lines.len().max(1);
        if lines.is_empty() {
            break;
        }
        match *edit {
            Edit::Drop(at) => drop(lines.remove(at % count)),
            Edit::Double(at) => lines.insert(at % count, lines[at % count].clone()),
            Edit::Swap(a, b) => lines.swap(a % count, b % count),
            Edit::Cut(at) => lines.truncate(at % count + 1),
            Edit::Insert(at, _) | Edit::Delete(at) => {
                let line = &mut lines[at % count];
                let length = line.chars().count();
                let place = if length == 0 {
                    0
                } else {
                    (at / count) % length
                };
                let mut letters: Vec<char> = line.chars().collect();
                match *edit {
                    Edit::Insert(_, c) => letters.insert(place, c),
                    _ if length > 0 => drop(letters.remove(place)),
                    _ => {}
                }
                *line = letters.into_iter().collect();
            }
        }
    }
    lines.join("\n")
}

/// What holds for every list of faults: it can be shown, and every place lies in the text.
fn sound(text: &str, faults: &Diagnostics) -> Result<(), TestCaseError> {
    prop_assert!(!faults.is_empty());
    let text = text.trim_start_matches('\u{feff}');
    let lines: Vec<&str> = text.split('\n').collect();
    for fault in faults.iter() {
        if let Some(place) = fault.place.as_ref().filter(|place| place.line > 0) {
            prop_assert!(place.line <= lines.len(), "{fault:?}");
            let width = lines[place.line - 1].chars().count();
            prop_assert!((1..=width + 1).contains(&place.column), "{fault:?}");
        }
        prop_assert!(!fault.message.is_empty());
    }
    let shown = faults.render(false);
    let escapes = shown.contains('\u{1b}');
    prop_assert!(!escapes);
    faults.render(true);
    Ok(())
}

proptest! {
    #[test]
    fn no_edit_of_a_spec_panics(edits in edits(), which in 0usize..6) {
        let specs = shipped_specs();
        let text = apply(&specs[which % specs.len()].1, &edits);
        if let Err(faults) = full_spec(&text) {
            sound(&text, &faults)?;
        }
    }

    #[test]
    fn no_edit_of_a_card_panics(edits in edits(), which in 0usize..8) {
        let text = apply(SHIPPED[which % SHIPPED.len()].1, &edits);
        if let Err(faults) = process::read(&text, "card", "card.yaml") {
            sound(&text, &faults)?;
        }
    }

    #[test]
    fn no_bytes_panic(bytes in prop::collection::vec(any::<u8>(), 0..200), text in "(?s).{0,120}") {
        for text in [String::from_utf8_lossy(&bytes).into_owned(), text] {
            if let Err(faults) = read_spec(&text) {
                sound(&text, &faults)?;
            }
            let _ = process::read(&text, "card", "card.yaml");
        }
    }
}
