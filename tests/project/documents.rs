//! README.md and DEVELOPERS.md say what is true: their tables are compared with the catalogues,
//! their commands and links with the files.
//!
//! After a change of a catalogue: `BIASLOOM_WRITE=1 cargo test documents`.

use super::arrows::ROWS;
use biasloom::cells::CELLS;
use biasloom::figures::{Better, FIGURES};
use biasloom::report::FORMATS;
use std::fs;
use std::path::{Path, PathBuf};

fn root(path: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(path)
}

fn read(path: &str) -> String {
    fs::read_to_string(root(path)).unwrap_or_else(|error| panic!("{path}: {error}"))
}

/// Compares the part of a document between its markers with what it should be, or writes it there.
fn generated(path: &str, name: &str, expected: &str) {
    let text = read(path);
    let (start, end) = (
        format!("<!-- {name} -->\n"),
        format!("<!-- end of {name} -->"),
    );
    let from = text
        .find(&start)
        .unwrap_or_else(|| panic!("{path} has no part {name}"));
    let from = from + start.len();
    let to = from
        + text[from..]
            .find(&end)
            .unwrap_or_else(|| panic!("{path}: {name} has no end"));
    if std::env::var_os("BIASLOOM_WRITE").is_some() {
        let new = format!("{}{expected}{}", &text[..from], &text[to..]);
        fs::write(root(path), new).unwrap();
    } else {
        assert_eq!(&text[from..to], expected, "{path}: {name}");
    }
}

/// Tests that rewrite one file run one after the other: all tables of README in one test.
#[test]
fn tables_of_the_readme() {
    let mut cells = "| cell | what it is | source |\n|---|---|---|\n".to_owned();
    for cell in CELLS {
        cells += &format!(
            "| `{}` | {} | {} |\n",
            cell.name(),
            cell.summary(),
            cell.source()
        );
    }
    generated("README.md", "cells", &cells);
    let mut figures = "| figure | unit | better | what it is |\n|---|---|---|---|\n".to_owned();
    for figure in FIGURES {
        let better = match figure.better() {
            Better::Less => "less",
            Better::More => "more",
        };
        let unit = match figure.unit() {
            "1" => "%",
            "m2" => "m²",
            "Ohm" => "Ω",
            unit => unit,
        };
        figures += &format!(
            "| `{}` | {unit} | {better} | {} |\n",
            figure.name(),
            figure.summary()
        );
    }
    generated("README.md", "figures", &figures);
    let mut formats = "| format | files | what it is for |\n|---|---|---|\n".to_owned();
    for format in FORMATS {
        let files: Vec<String> = format
            .files
            .iter()
            .map(|file| format!("`{file}`"))
            .collect();
        formats += &format!(
            "| `{}` | {} | {} |\n",
            format.name,
            files.join(", "),
            format.about
        );
    }
    generated("README.md", "formats", &formats);
}

#[test]
fn arrows_of_the_developers_document() {
    let rows: Vec<String> = ROWS
        .iter()
        .map(|row| format!(" {}\n", row.join("   ")))
        .collect();
    let expected = format!("```text\n{}```\n", rows.concat());
    generated("DEVELOPERS.md", "arrows", &expected);
}

/// The map names every folder and file directly below src/, and none that is not there.
#[test]
fn map_of_the_developers_document() {
    let text = read("DEVELOPERS.md");
    let map = text
        .split("<!-- map -->")
        .nth(1)
        .and_then(|rest| rest.split("<!-- end of map -->").next());
    let map = map.expect("DEVELOPERS.md has a map");
    let named: Vec<&str> = map
        .lines()
        .filter(|line| line.starts_with("  ") && !line.starts_with("   "))
        .filter_map(|line| line.split_whitespace().next())
        .collect();
    let mut there: Vec<String> = Vec::new();
    for entry in fs::read_dir(root("src")).unwrap() {
        let path = entry.unwrap().path();
        let name = path.file_name().unwrap().to_str().unwrap();
        // A module with a file of its own is named by that file.
        if !path.is_dir() {
            there.push(name.to_owned());
        } else if !path.with_extension("rs").exists() {
            there.push(format!("{name}/"));
        }
    }
    there.sort();
    let mut sorted: Vec<&str> = named.clone();
    sorted.sort_unstable();
    assert_eq!(sorted, there);
}

/// Links into the project lead to files that are there.
#[test]
fn links_lead_somewhere() {
    for document in ["README.md", "DEVELOPERS.md"] {
        let text = read(document);
        for link in text.split("](").skip(1) {
            let link = link.split(')').next().unwrap();
            let outside = link.contains("://") || link.starts_with('#');
            let path = link.split('#').next().unwrap();
            assert!(
                outside || root(path).exists(),
                "{document}: {link} leads nowhere"
            );
        }
    }
}

/// Every `biasloom COMMAND` in a document is one that the program has.
#[test]
fn commands_exist() {
    let command = biasloom::cli::command();
    let known: Vec<&str> = command
        .get_subcommands()
        .map(|sub| sub.get_name())
        .collect();
    for document in ["README.md", "DEVELOPERS.md"] {
        let text = read(document);
        let calls = text
            .split("biasloom ")
            .skip(1)
            .chain(text.split(" -- ").skip(1));
        let mut seen = 0;
        for call in calls {
            let word: String = call
                .chars()
                .take_while(|c| c.is_ascii_lowercase())
                .collect();
            if known.contains(&word.as_str()) {
                seen += 1;
            }
        }
        assert!(seen > 0, "{document} calls no command");
        for line in text.lines().filter(|line| line.starts_with("biasloom ")) {
            let word = line.split_whitespace().nth(1).unwrap();
            assert!(known.contains(&word), "{document}: {line}");
        }
    }
}

/// The spec shown in README is one that the program reads.
#[test]
fn the_spec_of_the_readme_is_sound() {
    let text = read("README.md");
    let spec = text
        .split("```yaml\n")
        .nth(1)
        .and_then(|rest| rest.split("```").next());
    let figures: Vec<&str> = FIGURES.iter().map(|figure| figure.name()).collect();
    let cards = biasloom::process::shipped_names();
    let vocabulary = biasloom::spec::Vocabulary {
        figures: &figures,
        cards: &cards,
    };
    let read = biasloom::spec::read(spec.expect("a spec"), "readme", "README.md", &vocabulary);
    let located = read.unwrap_or_else(|faults| panic!("{}", faults.render(false)));
    assert!(
        located.warnings.is_empty(),
        "{}",
        located.warnings.render(false)
    );
}

/// What README promises is what the gate runs.
#[test]
fn the_main_command_is_the_one_that_is_checked() {
    let main = "cargo run --release -- explore specs/tern.yaml";
    assert!(read("README.md").contains(main));
    assert!(read(".ci/run").contains(main));
}
