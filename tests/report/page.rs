//! The page: offline, without a script readable, and safe with any text.

use super::fixture;
use biasloom::explore::Outcome;
use biasloom::report::{self, FORMATS, write};
use std::path::Path;

fn page(outcome: &Outcome) -> String {
    let files = (report::page::FORMAT.render)(outcome);
    String::from_utf8(files[0].1.clone()).unwrap()
}

/// The data block as the script reads it.
fn data(page: &str) -> serde_json::Value {
    let start = page
        .find("<script id=\"data\" type=\"application/json\">")
        .unwrap();
    let block = &page[start..];
    let block = &block[block.find('>').unwrap() + 1..block.find("</script>").unwrap()];
    serde_json::from_str(block).unwrap()
}

/// HTML's own rule for what a page fetches: an address in `src`, `href`, `url()` or `@import`.
/// The page has links to its sibling files and to its own sections only.
#[test]
fn fetches_nothing() {
    for outcome in [fixture::found(), fixture::nothing_fits(), fixture::large()] {
        let page = page(&outcome);
        let own = page.replace("http://www.w3.org/2000/svg", "");
        assert!(!own.contains("//www") && !own.contains("http:") && !own.contains("https:"));
        assert!(!own.contains("@import") && !own.contains("src="));
        let files = report::render(&outcome, &FORMATS);
        for link in page
            .split("href=\"")
            .skip(1)
            .map(|rest| &rest[..rest.find('"').unwrap()])
        {
            let sibling = files.iter().any(|(path, _)| path == Path::new(link));
            assert!(
                sibling || link.starts_with('#') || link == "data:,",
                "{link}"
            );
        }
    }
}

/// A section link leads to a section.
#[test]
fn inner_links_have_targets() {
    for outcome in [fixture::found(), fixture::nothing_fits()] {
        let page = page(&outcome);
        let body = &page[..page.find("<script id=\"data\"").unwrap()];
        for link in body
            .split("href=\"#")
            .skip(1)
            .map(|rest| &rest[..rest.find('"').unwrap()])
        {
            assert!(body.contains(&format!("id=\"{link}\"")), "{link}");
        }
    }
}

/// Without its script the page still holds every device, output and figure of the first network.
#[test]
fn reads_without_a_script() {
    for outcome in [fixture::found(), fixture::nothing_fits()] {
        let page = page(&outcome);
        let body = &page[..page.find("<script id=\"data\"").unwrap()];
        let first = outcome
            .front
            .first()
            .or(outcome.nearest.as_deref())
            .unwrap();
        for device in &first.devices {
            assert!(
                body.contains(&format!("<td>{}</td>", device.name)),
                "{}",
                device.name
            );
        }
        for output in &first.outputs {
            assert!(body.contains(&output.name));
        }
        assert!(body.contains("licensed engineer"));
    }
}

/// Text of the spec cannot end the data block or become markup.
#[test]
fn hostile_text_stays_text() {
    let mut outcome = fixture::found();
    outcome.spec.title = "</script><img src=x onerror=alert(1)> & \"quotes\"".to_owned();
    outcome.front[0].outputs[0].error_corner = "</script><b>".to_owned();
    let page = page(&outcome);
    assert!(!page.contains("<img") && !page.contains("</script><b>"));
    let legs = &data(&page)["networks"][0]["legs"];
    assert!(
        legs[0]["facts"][0][3]
            .as_str()
            .unwrap()
            .contains("</script><b>")
    );
}

/// What the script draws agrees with the outcome: five significant digits, the same lengths.
#[test]
fn data_agrees_with_the_outcome() {
    let outcome = fixture::large();
    let data = data(&page(&outcome));
    for (network, drawn) in outcome
        .front
        .iter()
        .zip(data["networks"].as_array().unwrap())
    {
        for (output, leg) in network
            .outputs
            .iter()
            .zip(drawn["legs"].as_array().unwrap())
        {
            for (values, key) in [
                (&output.curve.volts, "volts"),
                (&output.curve.nominal, "nominal"),
                (&output.curve.least, "least"),
                (&output.curve.most, "most"),
            ] {
                let drawn = leg[key].as_array().unwrap();
                assert_eq!(drawn.len(), values.len());
                for (value, drawn) in values.iter().zip(drawn) {
                    let drawn = drawn.as_f64().unwrap();
                    assert!(
                        (value - drawn).abs() <= 1e-4 * value.abs(),
                        "{value} {drawn}"
                    );
                }
            }
        }
    }
}

/// Writes results folders for `tests/page/check.mjs`, which looks at them with a browser:
/// `cargo test --test all write_results_for_a_browser -- --ignored`.
#[test]
#[ignore = "writes folders under target/page for the browser check"]
fn write_results_for_a_browser() {
    let target = Path::new(env!("CARGO_MANIFEST_DIR")).join("target/page");
    let outcomes = [
        ("found", fixture::found()),
        ("nothing_fits", fixture::nothing_fits()),
        ("large", fixture::large()),
    ];
    for (name, outcome) in outcomes {
        let files = report::render(&outcome, &FORMATS);
        write::write(&target.join(name), &files).unwrap();
    }
}
