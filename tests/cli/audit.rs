//! `audit`: bounds are checked from the spec and the prices alone, so a claim that was raised must
//! be refused.

use super::{SMALL, run};
use std::fs;

#[test]
fn bounds_hold_until_they_are_raised() {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name);
    fs::write(at("bench.yaml"), SMALL).unwrap();
    let (code, _, stderr) = run(
        folder.path(),
        &["explore", "bench.yaml", "--out", "found", "--quiet"],
    );
    assert_eq!(code, 0, "{stderr}");
    let (code, stdout, stderr) = run(folder.path(), &["audit", "bench.yaml", "found/front.json"]);
    assert_eq!((code, stderr.as_str()), (0, ""), "{stdout}");
    assert!(
        stdout.lines().count() >= 1 && stdout.lines().all(|l| l.ends_with("holds")),
        "{stdout}"
    );

    let text = fs::read_to_string(at("found/front.json")).unwrap();
    let mut document: serde_json::Value = serde_json::from_str(&text).unwrap();
    let area = document["proof"]["bounds"][0]["area"].as_f64().unwrap();
    document["proof"]["bounds"][0]["area"] = (area * 1.01).into();
    fs::write(at("raised.json"), document.to_string()).unwrap();
    let (code, stdout, _) = run(folder.path(), &["audit", "bench.yaml", "raised.json"]);
    assert_eq!(code, 1, "{stdout}");
    assert!(stdout.contains("does not hold"), "{stdout}");
}

#[test]
fn what_is_no_front_is_refused_with_its_name() {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("bench.yaml"), SMALL).unwrap();
    for (name, text, expected) in [
        ("broken.json", "{ \"format\": ", "broken.json:1:"),
        (
            "other.json",
            "{ \"format\": \"another\" }",
            "is not a front of biasloom",
        ),
        ("bare.json", "{ \"format\": \"biasloom-front\" }", "effort"),
        (
            "half.json",
            "{ \"format\": \"biasloom-front\", \"spec\": { \"effort\": \"quick\" }, \"proof\": { \"bounds\": [{ \"rank\": 1 }] } }",
            "without all of its numbers",
        ),
    ] {
        fs::write(folder.path().join(name), text).unwrap();
        let (code, stdout, stderr) = run(folder.path(), &["audit", "bench.yaml", name]);
        assert_eq!((code, stdout.as_str()), (2, ""), "{stderr}");
        assert!(stderr.contains(expected), "{stderr}");
    }
    let (code, _, stderr) = run(folder.path(), &["audit", "bench.yaml", "missing.json"]);
    assert_eq!(code, 2);
    assert!(stderr.contains("missing.json cannot be read"), "{stderr}");
}
