//! Arbitrary bytes as a spec, as a card and as a quantity: nothing panics, every fault has a place
//! inside the text, and nothing that is shown can steer a terminal.
//!
//! `cargo +nightly fuzz run --fuzz-dir tests/fuzz spec_and_card`; the files under `specs/` make good
//! seeds.
#![no_main]

use biasloom::diag::Diagnostics;
use biasloom::process;
use biasloom::spec::{self, CardFacts, Vocabulary};
use biasloom::units::{self, Volt};
use libfuzzer_sys::fuzz_target;

fn sound(text: &str, faults: &Diagnostics) {
    assert!(!faults.is_empty());
    let lines: Vec<&str> = text.trim_start_matches('\u{feff}').split('\n').collect();
    for fault in faults.iter() {
        if let Some(place) = fault.place.as_ref().filter(|place| place.line > 0) {
            let width = lines[place.line - 1].chars().count();
            assert!((1..=width + 1).contains(&place.column), "{fault:?}");
        }
    }
    let shown = faults.render(false);
    assert!(
        shown.chars().all(|c| c == '\n' || !c.is_control()),
        "{shown:?}"
    );
}

fuzz_target!(|data: &[u8]| {
    let text = String::from_utf8_lossy(data);
    let cards = process::shipped_names();
    let vocabulary = Vocabulary {
        figures: &["area", "overhead_current", "power"],
        cards: &cards,
    };
    match spec::read(&text, "fuzz", "fuzz.yaml", &vocabulary) {
        Err(faults) => sound(&text, &faults),
        Ok(located) => {
            let facts = CardFacts {
                name: "fuzz".to_owned(),
                corners: ["TT", "SS", "FF"].map(str::to_owned).to_vec(),
                supply_max: Volt(1.98),
                has_resistor: false,
            };
            if let Err(faults) = spec::check_against_card(located, &facts) {
                sound(&text, &faults);
            }
        }
    }
    match process::read(&text, "fuzz", "fuzz.yaml") {
        Err(faults) => sound(&text, &faults),
        Ok(loaded) => assert!(loaded.card.nmos.width.least.0 > 0.0),
    }
    for line in text.lines().take(4) {
        if let Ok((value, _)) = units::parse(line) {
            for symbol in ["V", "A", "m2"] {
                let exact = units::exact(value, symbol);
                assert_eq!(
                    units::parse(&exact).map(|(back, _)| back),
                    Ok(value),
                    "{exact}"
                );
            }
        }
    }
});
