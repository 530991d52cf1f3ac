//! Places are exact. Authority: the test puts each fault into the file itself, so it knows line and
//! column before the reader does.

use super::{read_spec, shipped_specs};
use biasloom::diag::Diagnostics;
use biasloom::process::{self, SHIPPED};

/// The `key: value` lines of a file: line index, column of the key and of the value, both from 0.
fn pairs(text: &str) -> Vec<(usize, usize, usize)> {
    text.lines()
        .enumerate()
        .filter(|(_, line)| !line.trim_start().starts_with(['#']) && !line.contains("- {"))
        .filter_map(|(index, line)| {
            let colon = line.find(": ")?;
            let key = line.len() - line.trim_start_matches([' ', '-']).len();
            Some((index, key, colon + 2))
        })
        .collect()
}

fn with_line(text: &str, index: usize, line: &str) -> String {
    let mut lines: Vec<&str> = text.lines().collect();
    lines[index] = line;
    lines.join("\n") + "\n"
}

fn at(faults: &Diagnostics, line: usize, column: usize) -> bool {
    faults
        .iter()
        .filter_map(|fault| fault.place.as_ref())
        .any(|place| (place.line, place.column) == (line + 1, column + 1))
}

fn check(name: &str, text: &str, read: impl Fn(&str) -> Option<Diagnostics>) -> usize {
    let mut checked = 0;
    for (index, key, value) in pairs(text) {
        let line = text.lines().nth(index).unwrap();
        // An empty list is a fault under every key, and so is an unknown key.
        let spoilt = with_line(text, index, &format!("{}[]", &line[..value]));
        let faults = read(&spoilt).unwrap_or_else(|| panic!("{name}: {line} may be empty"));
        assert!(
            at(&faults, index, value),
            "{name}: {line}\n{}",
            faults.render(false)
        );
        let spoilt = with_line(
            text,
            index,
            &format!("{}zzzzzz{}", &line[..key], &line[value - 2..]),
        );
        let faults = read(&spoilt).unwrap_or_else(|| panic!("{name}: {line} may be unknown"));
        assert!(
            at(&faults, index, key),
            "{name}: {line}\n{}",
            faults.render(false)
        );
        checked += 1;
    }
    checked
}

#[test]
fn every_value_and_key_of_the_specs() {
    let mut checked = 0;
    for (name, text) in shipped_specs() {
        if name != "sixty-four" {
            checked += check(&name, &text, |text| read_spec(text).err());
        }
    }
    assert!(checked > 100);
}

#[test]
fn every_value_and_key_of_a_card() {
    for name in ["generic-180", "textbook-080"] {
        let (_, text) = SHIPPED
            .iter()
            .find(|(shipped, _)| *shipped == name)
            .unwrap();
        assert!(check(name, text, |text| process::read(text, name, name).err()) > 30);
    }
}

#[test]
fn columns_count_characters_and_skip_a_byte_order_mark() {
    let text = "\u{feff}title: Boje für µA, Ω\nsupply: [\u{b5}, zwei µA]\ncard: generic-180\r\n";
    let faults = read_spec(text).unwrap_err();
    assert!(at(&faults, 1, 8), "{}", faults.render(false));
    let text = "# µµµ\n{title: \"µµ\", kard: x}\n";
    let faults = read_spec(text).unwrap_err();
    let place = faults
        .iter()
        .find(|f| f.message.contains("kard"))
        .unwrap()
        .place
        .clone()
        .unwrap();
    assert_eq!((place.line, place.column, place.length), (2, 15, 4));
}
