//! Every dependency, of every feature and platform, is under a licence that the project may carry.

use std::process::Command;

/// Licences by their SPDX identifiers (spdx.org/licenses).
const ALLOWED: &[&str] = &[
    "MIT",
    "Apache-2.0",
    "BSD-2-Clause",
    "BSD-3-Clause",
    "ISC",
    "Zlib",
    "Unicode-3.0",
    "Unicode-DFS-2016",
    "BSL-1.0",
    "CC0-1.0",
];

/// Whether an SPDX expression can be met with the allowed licences alone (SPDX 2.3, annex D: WITH
/// binds most, then AND, then OR; the old `/` means OR).
fn acceptable(expression: &str) -> bool {
    let spaced = expression
        .replace('/', " OR ")
        .replace('(', " ( ")
        .replace(')', " ) ");
    let words: Vec<&str> = spaced.split_whitespace().collect();
    let mut rest = words.as_slice();
    either(&mut rest) == Some(true) && rest.is_empty()
}

/// `None` where the expression is none.
fn either(words: &mut &[&str]) -> Option<bool> {
    let mut met = both(words)?;
    while let Some(rest) = words.strip_prefix(&["OR"]) {
        *words = rest;
        met |= both(words)?;
    }
    Some(met)
}

fn both(words: &mut &[&str]) -> Option<bool> {
    let mut met = one(words)?;
    while let Some(rest) = words.strip_prefix(&["AND"]) {
        *words = rest;
        met &= one(words)?;
    }
    Some(met)
}

fn one(words: &mut &[&str]) -> Option<bool> {
    let (first, rest) = words.split_first()?;
    *words = rest;
    if *first == "(" {
        let met = either(words);
        *words = words.strip_prefix(&[")"])?;
        return met;
    }
    if let ["WITH", _exception, rest @ ..] = words {
        // An exception only adds permissions, but it is not among those looked through.
        *words = rest;
        return Some(false);
    }
    Some(ALLOWED.contains(first))
}

#[test]
fn expressions() {
    for good in [
        "MIT",
        "MIT OR Apache-2.0",
        "Unlicense OR MIT",
        "MIT/Apache-2.0",
        "(MIT OR Apache-2.0) AND Unicode-3.0",
        "Apache-2.0 WITH LLVM-exception OR Apache-2.0 OR MIT",
        "MIT OR LGPL-2.1-or-later",
    ] {
        assert!(acceptable(good), "{good}");
    }
    for bad in [
        "",
        "MPL-2.0",
        "GPL-3.0-only",
        "MIT AND MPL-2.0",
        "(MIT OR Apache-2.0) AND GPL-2.0-only",
        "MIT OR",
        "(MIT",
        "MIT Apache-2.0",
        "Apache-2.0 WITH LLVM-exception",
    ] {
        assert!(!acceptable(bad), "{bad}");
    }
}

#[test]
fn every_dependency() {
    let output = Command::new(env!("CARGO"))
        .args([
            "metadata",
            "--format-version",
            "1",
            "--all-features",
            "--locked",
        ])
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .unwrap();
    let stderr = String::from_utf8_lossy(&output.stderr);
    assert!(output.status.success(), "{stderr}");
    let metadata: serde_json::Value = serde_json::from_slice(&output.stdout).unwrap();
    let packages = metadata["packages"].as_array().unwrap();
    assert!(packages.len() > 50, "only {} packages", packages.len());
    let wrong: Vec<String> = packages
        .iter()
        .filter(|package| !acceptable(package["license"].as_str().unwrap_or("")))
        .map(|package| {
            format!(
                "{} {}: {}",
                package["name"], package["version"], package["license"]
            )
        })
        .collect();
    assert!(wrong.is_empty(), "{wrong:#?}");
}

/// The package offers both licences, and carries the text of each.
#[test]
fn the_project_carries_its_licences() {
    let root = std::path::Path::new(env!("CARGO_MANIFEST_DIR"));
    assert_eq!(env!("CARGO_PKG_LICENSE"), "MIT OR Apache-2.0");
    for (file, opening) in [
        (
            "LICENSE-MIT",
            "Permission is hereby granted, free of charge",
        ),
        ("LICENSE-APACHE", "Apache License"),
    ] {
        let text = std::fs::read_to_string(root.join(file)).unwrap();
        assert!(text.contains(opening), "{file}");
    }
}
