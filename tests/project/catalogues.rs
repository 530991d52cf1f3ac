//! What every entry of a catalogue must carry.

use biasloom::cells::CELLS;
use biasloom::figures::{self, FIGURES};
use biasloom::process::{Loaded, SHIPPED};
use biasloom::report::FORMATS;
use std::collections::BTreeSet;
use std::path::Path;

fn is_name(name: &str) -> bool {
    name.starts_with(|c: char| c.is_ascii_lowercase())
        && name
            .chars()
            .all(|c| c.is_ascii_lowercase() || c.is_ascii_digit() || c == '_')
}

/// A summary completes "built as ..." or "minimise ...": no capital, no full stop.
fn is_phrase(text: &str) -> bool {
    text.len() > 10 && !text.ends_with('.') && text.starts_with(|c: char| !c.is_uppercase())
}

#[test]
fn cells() {
    let mut names = BTreeSet::new();
    for cell in CELLS {
        let name = cell.name();
        assert!(is_name(name) && names.insert(name), "{name}");
        assert!(is_phrase(cell.summary()), "{name}: {}", cell.summary());
        assert!(cell.how().len() > 40, "{name}");
        assert!(cell.source().len() > 10, "{name} has no source");
        let drawing = cell.drawing();
        assert!(drawing.lines().count() >= 5, "{name} has no drawing");
        assert!(
            drawing.lines().all(|line| line.chars().count() <= 70),
            "{name}"
        );
        assert!(drawing.is_ascii(), "{name}");
    }
}

#[test]
fn figures_of_merit() {
    let mut names = BTreeSet::new();
    for figure in FIGURES {
        let name = figure.name();
        assert!(is_name(name) && names.insert(name), "{name}");
        assert!(is_phrase(figure.summary()), "{name}: {}", figure.summary());
        assert!(figure.definition().len() > 20, "{name}");
        assert!(figure.source().len() > 10, "{name} has no source");
        assert!(
            ["m2", "A", "W", "V", "Ohm", "1"].contains(&figure.unit()),
            "{name}"
        );
        assert!(figures::named(name).is_some_and(|found| found.name() == name));
    }
}

#[test]
fn formats() {
    let mut files = BTreeSet::new();
    for format in FORMATS {
        assert!(is_name(format.name), "{}", format.name);
        assert!(is_phrase(format.about), "{}: {}", format.name, format.about);
        assert!(!format.files.is_empty(), "{}", format.name);
        for file in format.files {
            assert!(files.insert(*file), "{file} is written twice");
        }
    }
}

#[test]
fn every_value_of_every_shipped_card_has_a_source() {
    for (name, text) in SHIPPED {
        assert!(text.starts_with("# "), "{name} does not say what it is for");
        let loaded =
            Loaded::load(name, Path::new("")).unwrap_or_else(|f| panic!("{}", f.render(false)));
        assert!(loaded.lines.len() > 15, "{name}");
        for line in &loaded.lines {
            assert!(line.source.trim().len() > 3, "{name}: {}", line.path);
        }
    }
}
