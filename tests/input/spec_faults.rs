//! The wording of every class of fault in a spec, with its place, mark and hints.

use super::{facts, read_spec};
use biasloom::process::Card;
use biasloom::spec::{self, CardFacts};
use biasloom::units::Volt;

/// A sound spec with two outputs; the cases replace parts of it.
const SOUND: &str = "\
title: Tern
card: generic-180
supply: 1.62 V to 1.98 V
temperature: -40 degC to 125 degC
reference:
  current: 10 uA
  flows: into network
  range: 0 V to 1.2 V
outputs:
  - name: tail
    kind: sink
    current: 20 uA
    range: 0.25 V to 1.4 V
    accuracy: 1.5 %
    output_resistance: 2.5 MOhm
  - name: load
    kind: source
    ratio: 1/2
    range: 0.3 V to 1.2 V
";

/// Renders the faults of a spec after a replacement that must fit exactly once.
fn faults(from: &str, to: &str) -> String {
    assert_eq!(SOUND.matches(from).count(), 1, "{from}");
    let text = SOUND.replace(from, to);
    match read_spec(&text) {
        Ok(located) => located.warnings.render(false),
        Err(faults) => faults.render(false),
    }
}

fn all(cases: &[(&str, &str)]) -> String {
    cases
        .iter()
        .map(|(from, to)| {
            format!(
                "==== {} -> {}\n{}\n",
                from.trim(),
                to.trim(),
                faults(from, to)
            )
        })
        .collect()
}

#[test]
fn the_sound_spec_is_sound() {
    assert!(read_spec(SOUND).is_ok());
}

#[test]
fn yaml() {
    let whole = |text: &str| {
        format!(
            "==== {text:?}\n{}\n",
            read_spec(text).unwrap_err().render(false)
        )
    };
    let shown: String = [
        "",
        "# nothing\n",
        "---\n",
        "a: 1\n---\nb: 2\n",
        "a: 1\n...\nb: 2\n",
        "just text",
        "- 1\n- 2\n",
        "title: [1\nsupply: 3 V",
        "limits: {area: 1 um2, power: 3 W",
        "title: a: b",
        "title: x\n\tsupply: 3 V\n",
        "title: 'x",
        "title: *other",
        "title: @x",
        "title: \"\\q\"",
        "outputs:\n  - name: a\n   kind: sink\n",
        "title: x\n supply: 3 V\n",
        "supply: 3 V\nwords\n",
        "title: \u{1}\n",
        "1: 2\n? [a]\n: 3\n~: 4\n",
    ]
    .map(whole)
    .concat();
    insta::assert_snapshot!(shown);
}

#[test]
fn keys() {
    insta::assert_snapshot!(all(&[
        ("    accuracy:", "    acuracy:"),
        ("    output_resistance:", "    output resistance:"),
        ("title: Tern", "author: Tern"),
        ("supply: 1.62 V to 1.98 V\n", ""),
        ("card: generic-180", "card: generic-180\ncard: generic-65"),
        ("    kind: sink\n", ""),
        ("    current: 20 uA\n", ""),
        ("    ratio: 1/2\n", "    ratio: 1/2\n    current: 5 uA\n"),
        ("  flows: into network\n", ""),
        (
            "  flows: into network\n",
            "  flows: into network\n  from: resistor\n"
        ),
        ("  - name: load", "  - load\n  - name: load"),
    ]));
}

#[test]
fn quantities() {
    insta::assert_snapshot!(all(&[
        ("20 uA", "20"),
        ("20 uA", "twenty"),
        ("20 uA", "''"),
        ("20 uA", ".nan"),
        ("20 uA", "-.inf"),
        ("20 uA", "inf A"),
        ("20 uA", "1e999 A"),
        ("20 uA", "20 UA"),
        ("20 uA", "20 uAmp"),
        ("20 uA", "20 uV"),
        ("20 uA", "20 uA/V"),
        ("20 uA", "0 A"),
        ("20 uA", "-20 uA"),
        ("20 uA", "10 uA to 20 uA"),
        ("20 uA", "[20 uA]"),
        ("20 uA", "{value: 20 uA}"),
        ("20 uA", "~"),
        ("20 uA", "!amps 20"),
        ("1.5 %", "1,5 %"),
        ("1.5 %", "0.015"),
        ("1.5 %", "0 %"),
        ("1.5 %", "150 %"),
        ("2.5 MOhm", "2.5 mOhm"),
        ("0.25 V to 1.4 V", "1.4 V to 0.25 V"),
        ("0.25 V to 1.4 V", "0.25 V to 0.25 V"),
        ("0.25 V to 1.4 V", "0.25 V"),
        ("0.25 V to 1.4 V", "0 V to 1.4 V"),
        ("0.25 V to 1.4 V", "0.25 V to nan V"),
        ("0.25 V to 1.4 V", "250 mv to 1.4 V"),
        ("-40 degC to 125 degC", "-40 C to 125 C"),
        ("-40 degC to 125 degC", "-40 degC to 500 degC"),
        ("ratio: 1/2", "ratio: 1/0"),
        ("ratio: 1/2", "ratio: -2"),
        ("ratio: 1/2", "ratio: one half"),
        ("ratio: 1/2", "ratio: 50 %"),
        ("ratio: 1/2", "ratio: 100000"),
        ("current: 10 uA", "current: 10 A"),
    ]));
}

#[test]
fn words_and_numbers() {
    insta::assert_snapshot!(all(&[
        ("kind: sink", "kind: snk"),
        ("kind: sink", "kind: upwards"),
        ("kind: sink", "kind: [sink]"),
        ("flows: into network", "flows: inwards"),
        ("name: tail", "name: 2nd tail"),
        ("name: tail", "name: preamp-tail"),
        ("name: tail", "name: [a]"),
        ("title: Tern", "title: 2026"),
        ("title: Tern", "title: ''"),
        ("title: Tern", "title: \"two\\nlines\""),
        ("kind: sink", "kind: sink\n    count: 0"),
        ("kind: sink", "kind: sink\n    count: 2.5"),
        ("kind: sink", "kind: sink\n    count: two"),
        ("title: Tern", "search: { effort: fast, seed: -1 }"),
        ("title: Tern", "trade: [area, headrom, area]"),
        ("title: Tern", "trade: []"),
        ("title: Tern", "trade: beauty"),
        ("title: Tern", "trade: [beauty]"),
        ("title: Tern", "corners: [TT, SS, TT]"),
        ("title: Tern", "limits: { area: 20000 um, power: }"),
        (
            "accuracy: 1.5 %",
            "accuracy: { limit: 1.5 %, of: ratios, sigma: 3 }"
        ),
        ("accuracy: 1.5 %", "accuracy: { sigma: 3 sigma }"),
    ]));
}

#[test]
fn seen_together() {
    insta::assert_snapshot!(all(&[
        ("0.25 V to 1.4 V", "0.25 V to 1.7 V"),
        ("0.3 V to 1.2 V", "0.3 V to 1.7 V"),
        ("name: load", "name: TAIL"),
        ("name: load", "name: tail_1\n    count: 2"),
        (
            "name: tail\n",
            "name: tail\n    count: 2\n  - { name: tail_2, kind: sink, ratio: 1, range: 1 to 1.2 V }\n  - name: other\n"
        ),
        ("card: generic-180", "card: generic-18"),
        ("card: generic-180", "card: mine"),
        (
            "-40 degC to 125 degC",
            "{ range: -40 degC to 85 degC, nominal: 100 degC }"
        ),
        ("0 V to 1.2 V", "1.7 V to 1.9 V"),
        ("  current: 10 uA", "  current: 10 uA\n  tolerance: 2 %"),
    ]));
}

#[test]
fn beside_the_card() {
    let card = Card::load("generic-180").unwrap();
    let check = |text: &str, card: &CardFacts| {
        let located = read_spec(text).unwrap_or_else(|f| panic!("{}", f.render(false)));
        let faults = spec::check_against_card(located, card).unwrap_err();
        faults.render(false)
    };
    let plain = facts(&card);
    let weak = CardFacts {
        supply_max: Volt(1.1),
        has_resistor: false,
        ..plain.clone()
    };
    let shown = [
        check(
            &SOUND.replace("title: Tern", "corners: [TT, TS, hot]"),
            &plain,
        ),
        check(&SOUND.replace("title: Tern", "corners: [SS, FF]"), &plain),
        check(
            &SOUND.replace(
                "  flows: into network\n  range: 0 V to 1.2 V",
                "  from: resistor",
            ),
            &weak,
        ),
    ]
    .join("\n");
    insta::assert_snapshot!(shown);
}

#[test]
fn all_faults_of_a_file_at_once_and_in_colour() {
    let text = SOUND
        .replace("supply: 1.62 V", "suply: 1.62 V")
        .replace("20 uA", "20")
        .replace("kind: source", "kind: sauce")
        .replace("into network", "sideways");
    let faults = read_spec(&text).unwrap_err();
    assert_eq!(faults.len(), 4, "{}", faults.render(false));
    insta::assert_snapshot!(faults.render(true).replace('\u{1b}', "ESC"));
}

#[test]
fn long_lines_and_control_characters_are_tamed() {
    let long = format!("title: [{}, zzz, {}]\n", "y".repeat(400), "x".repeat(400));
    let nasty = "title: x\ncard: \"\\e[31mred\\u202e\"\n\"\\e[2Jkey\": 1\n";
    let shown = [long.as_str(), nasty]
        .map(|text| read_spec(text).unwrap_err().render(false))
        .join("\n");
    assert!(!shown.contains('\u{1b}'));
    assert!(shown.lines().all(|line| line.chars().count() < 200));
}
