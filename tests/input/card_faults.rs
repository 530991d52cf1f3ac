//! The wording of the faults that only cards can have.

use biasloom::process::{self, Card, Loaded, SHIPPED};
use std::path::Path;

fn card(name: &str) -> &'static str {
    SHIPPED
        .iter()
        .find(|(shipped, _)| *shipped == name)
        .unwrap()
        .1
}

fn faults(name: &str, from: &str, to: &str) -> String {
    assert!(card(name).contains(from), "{from}");
    let text = card(name).replacen(from, to, 1);
    let faults = process::read(&text, name, "cards/mine.yaml").unwrap_err();
    format!(
        "==== {} -> {}\n{}\n",
        from.trim(),
        to.trim(),
        faults.render(false)
    )
}

#[test]
fn in_a_card() {
    let shown: String = [
        ("generic-180", "    mobility: { value: 350 cm2/Vs, source: from memory }\n", ""),
        ("generic-180", "0.455 V, ", ""),
        ("generic-180", "0.455 V, 0.466 V", "0.455 V, 0.466"),
        ("generic-180", "[0.18 um, 0.25 um", "[0.25 um, 0.18 um"),
        ("generic-180", "    lengths: [0.18 um, 0.25 um, 0.35 um, 0.5 um, 0.7 um, 1 um, 2 um, 5 um, 10 um, 20 um]\n", ""),
        ("generic-180", "value: 0.85 V, source: invented for the demo", "value: 0.85 V"),
        ("generic-180", "{ value: 0.85 V, source: invented for the demo }", "0.85 V"),
        ("generic-180", "value: 0.18 um to 20 um", "value: 0.183 um to 20 um"),
        ("generic-180", "value: 0.22 um to 50 um", "value: 0.01 um to 50 um"),
        ("generic-180", "model: charge", "model: cubic"),
        ("generic-180", "model: charge", "model: square"),
        ("generic-180", "kp: { value: 315 uA/V^2", "kp: { value: 315 A/V^2"),
        ("generic-180", "convention: pair", "convention: both"),
        ("generic-180", "shared: true", "shared: sometimes"),
        ("generic-180", "4.5 mV um", "4.5 mV"),
        ("generic-180", "- { name: TT, source: nominal }", "- { name: TT, nmos_gain: 5 %, source: nominal }"),
        ("generic-180", "name: SS", "name: TT"),
        ("textbook-080", "    phi: { value: 0.7 V, source: \"Allen & Holberg, CMOS Analog Circuit Design, table 3.1-2\" }\n", ""),
    ]
    .map(|(name, from, to)| faults(name, from, to))
    .concat();
    insta::assert_snapshot!(shown);
}

#[test]
fn of_the_name() {
    let none = tempfile::tempdir().unwrap();
    let shown = [
        Card::load("generic-18").unwrap_err().render(false),
        Card::load("something").unwrap_err().render(false),
        Card::load("none/such.yaml").unwrap_err().render(false),
    ]
    .concat();
    insta::assert_snapshot!(shown);
    assert!(Loaded::load("mine.yaml", none.path()).is_err());
    assert!(Loaded::load("mine.yaml", Path::new("")).is_err());
}

#[test]
fn a_card_file_is_found_beside_the_spec() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("mine.yaml"), card("generic-65")).unwrap();
    let loaded = Loaded::load("mine.yaml", folder.path()).unwrap();
    assert_eq!(loaded.card.name, "mine");
    assert_eq!(loaded.card.title, "Generic 65 nm process, 1.0 V");
}
