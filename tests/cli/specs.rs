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
fn found(stem: &str, effort: &str) {
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
}

#[test]
fn starter() {
    found("starter", "quick");
}

/// The main job, with the effort its spec asks for.
#[test]
fn tern() {
    found("tern", "normal");
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
