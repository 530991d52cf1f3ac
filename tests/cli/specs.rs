//! Every file in specs/ is explored, and ends as it should.

use super::{content, project, run};
use std::path::Path;

/// The shipped specs: file stem and text.
pub fn shipped() -> Vec<(String, String)> {
    let mut specs: Vec<(String, String)> = std::fs::read_dir(project("specs"))
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|end| end == "yaml"))
        .map(|path| {
            let stem = path.file_stem().unwrap().to_str().unwrap().to_owned();
            (stem, std::fs::read_to_string(&path).unwrap())
        })
        .collect();
    specs.sort();
    specs
}

/// Explores a shipped spec; returns the exit code and what was written.
fn explored(stem: &str, effort: &str) -> (i32, serde_json::Value) {
    let folder = tempfile::tempdir().unwrap();
    let path = project(&format!("specs/{stem}.yaml"));
    let arguments = ["explore", &path, "--effort", effort];
    let (code, stdout, stderr) = run(folder.path(), &arguments);
    assert!(code < 2, "{stem}\n{stderr}");
    assert!(stdout.contains("model-level estimate"), "{stem}\n{stdout}");
    let files = content(&folder.path().join("results").join(stem));
    let front = files.get(Path::new("front.json")).expect("front.json");
    (code, serde_json::from_slice(front).unwrap())
}

/// Found: no network of the front breaks a limit of its spec, read from the file itself.
fn found(stem: &str, effort: &str) -> serde_json::Value {
    let (code, front) = explored(stem, effort);
    assert_eq!((code, &front["status"]), (0, &"found".into()), "{stem}");
    let networks = front["front"].as_array().unwrap();
    assert!(!networks.is_empty(), "{stem}");
    for network in networks {
        assert_eq!(
            network["broken"].as_array().map(Vec::len),
            Some(0),
            "{stem}"
        );
        for output in network["outputs"].as_array().unwrap() {
            let (error, limit) = (output["error"].as_f64(), output["error_limit"].as_f64());
            assert!(
                error.unwrap() <= limit.unwrap_or(f64::INFINITY),
                "{stem}: {output}"
            );
            assert!(
                output["headroom_margin"].as_f64().unwrap() >= 0.0,
                "{stem}: {output}"
            );
        }
    }
    front
}

#[test]
fn starter() {
    let front = found("starter", "normal");
    same_as_recorded("starter", &front);
}

/// The main job, with the effort its spec asks for.
#[test]
fn tern() {
    let front = found("tern", "normal");
    assert!(front["front"].as_array().unwrap().len() >= 8);
    same_as_recorded("tern", &front);
}

/// Recorded results hold on every machine: the arithmetic is the same everywhere, so the tolerance
/// is for the decimal digits of a recording alone.
const RECORDED: f64 = 1e-6;

/// Compares a front with the one recorded under results/.
fn same_as_recorded(stem: &str, front: &serde_json::Value) {
    let path = project(&format!("results/{stem}/front.json"));
    let recorded = std::fs::read(&path).unwrap_or_else(|e| panic!("{path}: {e}"));
    let recorded: serde_json::Value = serde_json::from_slice(&recorded).unwrap();
    compare(stem, &recorded, front);
}

fn compare(place: &str, recorded: &serde_json::Value, found: &serde_json::Value) {
    use serde_json::Value::{Array, Number, Object};
    match (recorded, found) {
        (Array(a), Array(b)) => {
            assert_eq!(a.len(), b.len(), "{place}");
            for (i, (a, b)) in a.iter().zip(b).enumerate() {
                compare(&format!("{place}[{i}]"), a, b);
            }
        }
        (Object(a), Object(b)) => {
            assert!(a.keys().eq(b.keys()), "{place}");
            for (key, value) in a {
                compare(&format!("{place}.{key}"), value, &b[key]);
            }
        }
        (Number(a), Number(b)) => {
            let (a, b) = (a.as_f64().unwrap(), b.as_f64().unwrap());
            // Mirrors without a systematic error have one of rounding's size: its digits are noise.
            let near = (a - b).abs() <= RECORDED * a.abs() + 1e-15;
            assert!(near, "{place}: {a} recorded, {b} found");
        }
        _ => assert_eq!(recorded, found, "{place}"),
    }
}

#[test]
fn low_voltage() {
    found("low-voltage", "quick");
}

#[test]
fn nanoamp() {
    found("nanoamp", "quick");
}

#[test]
fn sixty_four() {
    found("sixty-four", "quick");
}

#[test]
fn impossible() {
    let (code, front) = explored("impossible", "quick");
    assert_eq!((code, &front["status"]), (1, &"nothing_fits".into()));
    assert!(!front["broken"].as_array().unwrap().is_empty());
    assert!(!front["nearest"].is_null());
}

/// A spec without a test of its own above fails here.
#[test]
fn none_is_left_out() {
    let source = include_str!("specs.rs");
    for (stem, _) in shipped() {
        let named = [
            format!("found(\"{stem}\","),
            format!("explored(\"{stem}\","),
        ];
        assert!(
            named.iter().any(|text| source.contains(text)),
            "{stem} is not explored"
        );
    }
}
