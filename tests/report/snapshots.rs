//! One snapshot per format. The page's style and script are left out of its snapshot.

use super::fixture;
use biasloom::report::{self, FORMATS, terminal};

fn text(name: &str, outcome: &biasloom::explore::Outcome, path: &str) -> String {
    let format = report::format_named(name).unwrap();
    let files = (format.render)(outcome);
    let found = files
        .into_iter()
        .find(|(file, _)| file.to_str() == Some(path));
    String::from_utf8(found.unwrap_or_else(|| panic!("{name} writes no {path}")).1).unwrap()
}

#[test]
fn csv() {
    insta::assert_snapshot!("csv", text("csv", &fixture::found(), "front.csv"));
    insta::assert_snapshot!("csv_prices", text("csv", &fixture::found(), "prices.csv"));
    insta::assert_snapshot!(
        "csv_nothing_fits",
        text("csv", &fixture::nothing_fits(), "front.csv")
    );
}

#[test]
fn json() {
    insta::assert_snapshot!(
        "json_schema",
        text("json", &fixture::found(), "front.schema.json")
    );
    // The curves are long and of one kind: the first lines of the document stand for it here.
    let json = text("json", &fixture::found(), "front.json");
    let head: Vec<&str> = json.lines().take(260).collect();
    insta::assert_snapshot!("json_head", head.join("\n"));
}

#[test]
fn deck() {
    insta::assert_snapshot!("deck", text("deck", &fixture::found(), "network-02.cir"));
    insta::assert_snapshot!(
        "deck_nothing_fits",
        text("deck", &fixture::nothing_fits(), "nearest.cir")
    );
}

#[test]
fn devices() {
    let outcome = fixture::found();
    insta::assert_snapshot!(
        "devices_csv",
        text("devices", &outcome, "network-02-devices.csv")
    );
    insta::assert_snapshot!(
        "devices_txt",
        text("devices", &outcome, "network-02-devices.txt")
    );
}

#[test]
fn picture() {
    insta::assert_snapshot!("picture", text("picture", &fixture::found(), "front.svg"));
}

#[test]
fn page() {
    for (name, outcome) in [
        ("page", fixture::found()),
        ("page_nothing_fits", fixture::nothing_fits()),
    ] {
        let page = text("page", &outcome, "report.html");
        // Body without its two script blocks: what stands there when no script runs.
        let body = &page[page.find("<body>").unwrap()..page.find("<script id=\"data\"").unwrap()];
        insta::assert_snapshot!(name, body.replace("><", ">\n<"));
    }
}

#[test]
fn terminal_text() {
    for width in [140, 80, 50] {
        insta::assert_snapshot!(
            format!("terminal_{width}"),
            terminal::summary(&fixture::found(), width)
        );
    }
    insta::assert_snapshot!(
        "terminal_nothing_fits",
        terminal::summary(&fixture::nothing_fits(), 80)
    );
}

/// The formats' own list of file names is what they write, with NN for a rank.
#[test]
fn every_format_writes_the_files_it_names() {
    let outcome = fixture::found();
    for format in &FORMATS {
        let mut expected = Vec::new();
        for file in format.files {
            if file.contains("NN") {
                expected.extend((1..=3).map(|rank| file.replace("NN", &format!("{rank:02}"))));
            } else {
                expected.push((*file).to_owned());
            }
        }
        let mut written: Vec<String> = (format.render)(&outcome)
            .into_iter()
            .map(|(path, _)| path.to_str().unwrap().to_owned())
            .collect();
        written.sort();
        expected.sort();
        assert_eq!(written, expected, "{}", format.name);
    }
}

/// Names are unique, and the same outcome gives the same bytes.
#[test]
fn formats_are_distinct_and_repeatable() {
    let names: std::collections::BTreeSet<&str> =
        FORMATS.iter().map(|format| format.name).collect();
    assert_eq!(names.len(), FORMATS.len());
    for outcome in [fixture::found(), fixture::nothing_fits(), fixture::large()] {
        assert_eq!(
            report::render(&outcome, &FORMATS),
            report::render(&outcome.clone(), &FORMATS)
        );
    }
}

/// An outcome with nothing to show still renders, in every format.
#[test]
fn an_empty_outcome_renders() {
    let mut outcome = fixture::found();
    outcome.front.clear();
    outcome.prices = None;
    outcome.status = biasloom::explore::Status::Interrupted;
    for format in &FORMATS {
        for (path, bytes) in (format.render)(&outcome) {
            let text = String::from_utf8(bytes).unwrap();
            assert!(
                !text.contains("NaN") && !text.is_empty(),
                "{}",
                path.display()
            );
        }
    }
    assert!(terminal::summary(&outcome, 80).contains("Stopped early"));
}
