//! Arrows between modules point down: a module may use only those below it, so that each can be
//! read, and tested, without knowing what is built on it.

use std::fmt::Write;
use std::fs;
use std::path::{Path, PathBuf};

/// From the top; modules of one row do not use each other. DEVELOPERS.md shows the same table.
pub const ROWS: &[&[&str]] = &[
    &["cli"],
    &["report"],
    &["explore"],
    &["proof"],
    &["search", "assembly"],
    &["figures", "front"],
    &["network"],
    &["cells"],
    &["circuit"],
    &["device"],
    &["spec", "process"],
    &["yaml"],
    &["units", "diag", "numeric"],
];

fn row(module: &str) -> Option<usize> {
    ROWS.iter().position(|row| row.contains(&module))
}

fn allowed(from: &str, to: &str) -> bool {
    match (row(from), row(to)) {
        (Some(upper), Some(lower)) => from == to || upper < lower,
        _ => false,
    }
}

/// A use of a module of this crate: where, and the path used.
#[derive(Debug, PartialEq)]
struct Use {
    line: usize,
    path: String,
}

/// The code without comments, texts and characters; line breaks stay.
fn bare(code: &str) -> String {
    let letters: Vec<char> = code.chars().collect();
    let mut out = String::new();
    let mut at = 0;
    let blank = |out: &mut String, skipped: &[char]| {
        out.extend(skipped.iter().map(|&c| if c == '\n' { '\n' } else { ' ' }));
    };
    let starts = |at: usize, text: &str| {
        text.chars()
            .enumerate()
            .all(|(k, c)| letters.get(at + k) == Some(&c))
    };
    while at < letters.len() {
        let start = at;
        if starts(at, "//") {
            while at < letters.len() && letters[at] != '\n' {
                at += 1;
            }
        } else if starts(at, "/*") {
            let mut depth = 0;
            while at < letters.len() {
                if starts(at, "/*") {
                    depth += 1;
                    at += 2;
                } else if starts(at, "*/") {
                    depth -= 1;
                    at += 2;
                } else {
                    at += 1;
                }
                if depth == 0 {
                    break;
                }
            }
        } else if letters[at] == 'r'
            && (starts(at, "r\"") || starts(at, "r#"))
            && (at == 0 || !(letters[at - 1].is_alphanumeric() || letters[at - 1] == '_'))
        {
            let hashes = letters[at + 1..].iter().take_while(|&&c| c == '#').count();
            if letters.get(at + 1 + hashes) == Some(&'"') {
                let end = format!("\"{}", "#".repeat(hashes));
                at += hashes + 2;
                while at < letters.len() && !starts(at, &end) {
                    at += 1;
                }
                at = (at + end.len()).min(letters.len());
            } else {
                at += 1;
            }
            blank(&mut out, &letters[start..at]);
            continue;
        } else if letters[at] == '"' {
            at += 1;
            while at < letters.len() && letters[at] != '"' {
                at += if letters[at] == '\\' { 2 } else { 1 };
            }
            at = (at + 1).min(letters.len());
        } else if letters[at] == '\'' && letters.get(at + 1) == Some(&'\\') {
            at += 3;
            while at < letters.len() && letters[at] != '\'' {
                at += 1;
            }
            at = (at + 1).min(letters.len());
        } else if letters[at] == '\'' && letters.get(at + 2) == Some(&'\'') {
            at += 3;
        } else {
            out.push(letters[at]);
            at += 1;
            continue;
        }
        blank(&mut out, &letters[start..at.min(letters.len())]);
    }
    out
}

/// Every `crate::...` of a file; a group `crate::{a::B, c}` is taken apart.
fn uses(code: &str) -> Vec<Use> {
    let code = bare(code);
    let mut found = Vec::new();
    for (at, _) in code.match_indices("crate::") {
        let before = code[..at].chars().next_back();
        if before.is_some_and(|c| c.is_alphanumeric() || c == '_') {
            continue;
        }
        let rest = &code[at + "crate::".len()..];
        let paths = match rest.strip_prefix('{') {
            Some(group) => split_group(group),
            None => vec![path(rest)],
        };
        let line = code[..at].matches('\n').count() + 1;
        found.extend(paths.into_iter().map(|path| Use { line, path }));
    }
    found
}

fn path(text: &str) -> String {
    text.chars()
        .take_while(|&c| c.is_alphanumeric() || c == '_' || c == ':')
        .collect()
}

fn split_group(group: &str) -> Vec<String> {
    let (mut depth, mut part, mut parts) = (0, String::new(), Vec::new());
    for c in group.chars() {
        match c {
            '{' => depth += 1,
            '}' if depth == 0 => break,
            '}' => depth -= 1,
            ',' if depth == 0 => parts.push(std::mem::take(&mut part)),
            _ => {}
        }
        if c != ',' || depth > 0 {
            part.push(c);
        }
    }
    parts.push(part);
    let parts = parts.iter().map(|part| path(part.trim()));
    parts.filter(|part| !part.is_empty()).collect()
}

fn sources(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    for entry in fs::read_dir(folder).unwrap() {
        let path = entry.unwrap().path();
        if path.is_dir() {
            files.extend(sources(&path));
        } else if path.extension().is_some_and(|end| end == "rs") {
            files.push(path);
        }
    }
    files.sort();
    files
}

#[test]
fn arrows_point_down() {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut wrong = String::new();
    let mut looked_at = 0;
    for file in sources(&root) {
        let inside = file.strip_prefix(&root).unwrap();
        let module = inside
            .iter()
            .next()
            .unwrap()
            .to_str()
            .unwrap()
            .trim_end_matches(".rs");
        if module == "lib" || module == "main" {
            continue;
        }
        assert!(
            row(module).is_some(),
            "src/{}: no row for {module}",
            inside.display()
        );
        for Use { line, path } in uses(&fs::read_to_string(&file).unwrap()) {
            looked_at += 1;
            let target = path.split("::").next().unwrap();
            if !allowed(module, target) {
                let place = inside.display();
                writeln!(wrong, "src/{place}:{line}: {module} may not use {path}").unwrap();
            }
        }
    }
    assert!(wrong.is_empty(), "\n{wrong}");
    assert!(looked_at > 100, "only {looked_at} uses were seen");
}

/// The test of the test: it sees every way to write a use, and none that is not one.
#[test]
fn uses_are_seen() {
    let code = "\
use crate::spec::Spec; // crate::no
use crate::{diag, units::{Amp, Volt},
    report::Files};
/* crate::no /* crate::no */ crate::no */
fn f() -> crate::cells::Unit { \"crate::no\"; 'c'; '\\''; r#\"crate::no \"# ; $crate::yaml::At }
use mycrate::no;
fn g<'a>(x: &'a crate::front::Front) {}
";
    let seen: Vec<(usize, String)> = uses(code).into_iter().map(|u| (u.line, u.path)).collect();
    let expected = [
        (1, "spec::Spec"),
        (2, "diag"),
        (2, "units::"),
        (2, "report::Files"),
        (5, "cells::Unit"),
        (5, "yaml::At"),
        (7, "front::Front"),
    ];
    assert_eq!(seen, expected.map(|(line, path)| (line, path.to_owned())));
    assert!(allowed("cli", "units") && allowed("report", "report"));
    assert!(!allowed("units", "cli") && !allowed("spec", "process") && !allowed("cli", "other"));
}
