//! Everything that has a name can be listed and explained.

use super::run;
use biasloom::cells::CELLS;
use biasloom::cli::lexicon::{Entry, Kind, lexicon};
use biasloom::figures::FIGURES;
use biasloom::process::{self, SHIPPED};
use biasloom::report::FORMATS;
use biasloom::spec;
use clap::ValueEnum;
use std::collections::BTreeSet;

fn of(kind: Kind) -> Vec<Entry> {
    let entries = lexicon().into_iter();
    entries.filter(|entry| entry.kind == kind).collect()
}

#[test]
fn every_word_is_unique_within_its_kind_and_says_something() {
    let mut seen = BTreeSet::new();
    for entry in lexicon() {
        let word = &entry.word;
        assert!(
            seen.insert((entry.kind, word.to_lowercase())),
            "{word} twice"
        );
        assert!(entry.summary.trim().len() > 3, "{word} has no summary");
        assert!(!entry.text.is_empty(), "{word} has no text");
        assert!(
            entry.text.iter().all(|text| text.trim().len() > 3),
            "{word}"
        );
        let source = entry.source.as_deref();
        assert!(
            source.is_none_or(|source| source.trim().len() > 3),
            "{word}"
        );
        assert!(
            !word.is_empty() && !word.contains(char::is_whitespace),
            "{word}"
        );
    }
}

#[test]
fn every_catalogue_is_in_it() {
    let words = |kind| {
        of(kind)
            .into_iter()
            .map(|entry| entry.word)
            .collect::<Vec<_>>()
    };
    assert_eq!(words(Kind::Cells), CELLS.map(|cell| cell.name()));
    assert_eq!(words(Kind::Figures), FIGURES.map(|figure| figure.name()));
    assert_eq!(words(Kind::Formats), FORMATS.map(|format| format.name));
    let shipped: Vec<&str> = SHIPPED.iter().map(|(name, _)| *name).collect();
    assert_eq!(words(Kind::Cards), shipped);
    assert_eq!(words(Kind::ErrorParts), biasloom::cli::lexicon::PARTS);
    for kind in Kind::ALL {
        assert!(!of(kind).is_empty(), "{kind:?}");
        let spelt = kind.to_possible_value().unwrap();
        assert_eq!(spelt.get_name(), kind.name());
    }
}

/// The schemas come from the reader's own tables, so a key that can be read can be explained.
#[test]
fn every_key_of_every_schema_is_in_it() {
    for (kind, schema) in [
        (Kind::SpecKeys, spec::schema()),
        (Kind::CardKeys, process::schema()),
    ] {
        let explained: BTreeSet<String> = of(kind)
            .iter()
            .map(|entry| entry.last().to_owned())
            .collect();
        let mut keys = BTreeSet::new();
        collect(&schema, &mut keys);
        // The parts of a value with its source are told with the value itself.
        keys.remove("value");
        keys.remove("source");
        assert!(keys.len() > 20, "{keys:?}");
        let missing: Vec<_> = keys.difference(&explained).collect();
        assert!(missing.is_empty(), "{kind:?}: {missing:?}");
    }
}

fn collect(schema: &serde_json::Value, keys: &mut BTreeSet<String>) {
    if let Some(properties) = schema.get("properties").and_then(|p| p.as_object()) {
        keys.extend(properties.keys().cloned());
    }
    match schema {
        serde_json::Value::Object(map) => map.values().for_each(|value| collect(value, keys)),
        serde_json::Value::Array(list) => list.iter().for_each(|value| collect(value, keys)),
        _ => {}
    }
}

#[test]
fn every_word_is_listed_and_explained() {
    let folder = tempfile::tempdir().unwrap();
    for kind in Kind::ALL {
        let (code, stdout, stderr) = run(folder.path(), &["list", kind.name()]);
        assert_eq!((code, stderr.as_str()), (0, ""));
        for entry in of(kind) {
            let first = |line: &str| line.split_whitespace().next() == Some(&entry.word);
            assert!(stdout.lines().any(first), "{} is not listed", entry.word);
        }
    }
    // One process per word would take long: a first and a last of each kind.
    for kind in Kind::ALL {
        let entries = of(kind);
        for entry in [entries.first().unwrap(), entries.last().unwrap()] {
            let (code, stdout, stderr) = run(folder.path(), &["explain", &entry.word]);
            assert_eq!((code, stderr.as_str()), (0, ""), "{}", entry.word);
            let title = format!("{} ({})", entry.word, kind.one());
            assert!(
                stdout.lines().any(|line| line == title),
                "{title}\n{stdout}"
            );
        }
    }
}

#[test]
fn a_cell_shows_its_drawing_how_it_works_and_its_source() {
    let folder = tempfile::tempdir().unwrap();
    for cell in CELLS {
        let (_, stdout, _) = run(folder.path(), &["explain", cell.name()]);
        for line in cell.drawing().lines() {
            assert!(stdout.contains(line.trim_end()), "{}: {line}", cell.name());
        }
        let flowing = stdout.split_whitespace().collect::<Vec<_>>().join(" ");
        let plain = |text: &str| text.split_whitespace().collect::<Vec<_>>().join(" ");
        assert!(flowing.contains(&plain(cell.how())), "{}", cell.name());
        assert!(flowing.contains(&plain(cell.source())), "{}", cell.name());
    }
}

#[test]
fn spelling_is_forgiven() {
    let folder = tempfile::tempdir().unwrap();
    let (_, exact, _) = run(folder.path(), &["explain", "wide_swing"]);
    for word in ["wide-swing", "Wide Swing", "WIDE_SWING"] {
        assert_eq!(run(folder.path(), &["explain", word]).1, exact, "{word}");
    }
    for (word, hint) in [
        ("headrom", "did you mean \"headroom\"?"),
        ("cascade", "did you mean \"cascode\"?"),
        ("acuracy", "did you mean \"accuracy\"?"),
        ("outputs.rang", "did you mean \"outputs.range\"?"),
        ("cells", "biasloom list cells shows them"),
        ("zzzzzz", "biasloom list shows what there is"),
    ] {
        let (code, stdout, stderr) = run(folder.path(), &["explain", word]);
        assert_eq!((code, stdout.as_str()), (2, ""), "{word}");
        assert!(
            stderr.contains(&format!("hint: {hint}")),
            "{word}: {stderr}"
        );
    }
}

#[test]
fn a_word_of_several_kinds_is_explained_in_all() {
    let folder = tempfile::tempdir().unwrap();
    let (_, stdout, _) = run(folder.path(), &["explain", "area"]);
    for title in [
        "area (figure)",
        "limits.area (key of a spec)",
        "nmos.area (key of a process card)",
    ] {
        assert!(
            stdout.lines().any(|line| line == title),
            "{title}\n{stdout}"
        );
    }
}
