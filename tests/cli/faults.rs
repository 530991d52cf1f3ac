//! Every class of fault, end to end: exit code 2, nothing on stdout, nothing written, and words that
//! say where, what and what would be right. The wording of single faults is pinned in
//! `tests/input`; here each class has to arrive at the user.

use super::{SMALL, content, project, run};
use std::fs;
use std::path::Path;

/// A fault: how the small spec is changed, and what must be said. `@` in front of an expected text
/// means the place of that text in the changed spec.
type Case = (&'static str, &'static str, &'static [&'static str]);

const IN_A_SPEC: &[Case] = &[
    // The text is no YAML.
    ("title: Two", "title: [Two", &["spec.yaml:"]),
    (
        "title: Two currents",
        "title: Two: currents",
        &["spec.yaml:1:"],
    ),
    // Keys.
    ("supply:", "suply:", &["@suply", "did you mean \"supply\"?"]),
    ("card: generic-180\n", "", &["spec.yaml:", "card"]),
    (
        "card: generic-180",
        "card: generic-180\ncard: generic-65",
        &["spec.yaml:3:1"],
    ),
    // Quantities.
    ("20 uA", "20", &["@20,", "unit"]),
    ("20 uA", "20 uV", &["@20 uV"]),
    ("20 uA", "-20 uA", &["@-20 uA", "positive"]),
    ("20 uA", "20 kA", &["@20 kA", "between 10 pA and 100 mA"]),
    ("20 uA", ".nan", &["@.nan"]),
    (
        "5 uA, range: 0.3 V to 1.3 V",
        "5 uA, range: 1.3 V to 0.3 V",
        &["@1.3 V to 0.3 V"],
    ),
    // Words.
    (
        "kind: source",
        "kind: soure",
        &["@soure", "did you mean \"source\"?"],
    ),
    (
        "limits:",
        "trade: [area, overhead_curent]\nlimits:",
        &["@overhead_curent", "did you mean \"overhead_current\"?"],
    ),
    (
        "card: generic-180",
        "card: generic-18",
        &["@generic-18", "did you mean \"generic-180\"?"],
    ),
    ("name: tail", "name: 2nd", &["@2nd"]),
    ("name: load", "name: tail", &["appears twice"]),
    ("{ effort: quick }", "{ effort: fast }", &["@fast", "quick"]),
    // What shows only when values are seen together.
    (
        "5 uA, range: 0.3 V to 1.3 V",
        "5 uA, range: 0.3 V to 1.9 V",
        &["@0.3 V to 1.9 V"],
    ),
    (
        "range: 0 V to 1.2 V",
        "range: 1.8 V to 1.9 V",
        &["@1.8 V to 1.9 V", "least supply"],
    ),
    // What shows only beside the card.
    ("[TT, SS, FF]", "[TT, SS, XX]", &["@XX", "generic-180"]),
    ("[TT, SS, FF]", "[SS, FF]", &["nominal corner"]),
    (
        "1.62 V to 1.98 V",
        "4.5 V to 5.5 V",
        &["@4.5 V to 5.5 V", "they stand 1.98 V"],
    ),
    // Cards of one's own.
    (
        "card: generic-180",
        "card: none.yaml",
        &["none.yaml: there is no such file"],
    ),
    (
        "card: generic-180",
        "card: broken.yaml",
        &["broken.yaml:", "title"],
    ),
];

/// Both commands that read a spec say the same.
fn both(folder: &Path, spec: &str) -> String {
    let before = content(folder);
    let checked = run(folder, &["check", spec]);
    let explored = run(folder, &["explore", spec]);
    assert_eq!(checked, explored, "{spec}");
    let (code, stdout, stderr) = checked;
    assert_eq!((code, stdout.as_str()), (2, ""), "{spec}\n{stderr}");
    assert_eq!(content(folder), before, "{spec}: something was written");
    assert!(!stderr.contains("panicked"), "{stderr}");
    stderr
}

/// `spec.yaml:line:column` of a text that stands in the spec once.
fn place(spec: &str, text: &str) -> String {
    let at = spec
        .find(text)
        .unwrap_or_else(|| panic!("{text} is not in\n{spec}"));
    let line = spec[..at].matches('\n').count() + 1;
    let start = spec[..at].rfind('\n').map_or(0, |end| end + 1);
    format!("spec.yaml:{line}:{}", spec[start..at].chars().count() + 1)
}

#[test]
fn faults_of_a_spec_and_its_card() {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("broken.yaml"), "title: [x\n").unwrap();
    for (from, to, expected) in IN_A_SPEC {
        assert_eq!(SMALL.matches(from).count(), 1, "{from}");
        let spec = SMALL.replace(from, to);
        fs::write(folder.path().join("spec.yaml"), &spec).unwrap();
        let stderr = both(folder.path(), "spec.yaml");
        for text in *expected {
            let text = match text.strip_prefix('@') {
                Some(marked) => format!("{}: ", place(&spec, marked)),
                None => (*text).to_owned(),
            };
            assert!(stderr.contains(&text), "{to}: expected {text} in\n{stderr}");
        }
    }
}

#[test]
fn all_faults_at_once() {
    let folder = tempfile::tempdir().unwrap();
    let spec = SMALL
        .replace("supply:", "suply:")
        .replace("20 uA", "20 uV")
        .replace("kind: source", "kind: sauce")
        .replace("generic-180", "generic-18");
    fs::write(folder.path().join("spec.yaml"), &spec).unwrap();
    let stderr = both(folder.path(), "spec.yaml");
    let places = stderr
        .lines()
        .filter(|line| line.starts_with("spec.yaml:"))
        .count();
    // An unknown key and the missing one it stood for count once.
    assert_eq!(places, 4, "{stderr}");
}

#[test]
fn faults_of_the_file_itself() {
    let folder = tempfile::tempdir().unwrap();
    let path = |name: &str| folder.path().join(name);
    fs::create_dir(path("folder.yaml")).unwrap();
    fs::write(path("empty.yaml"), "\n \n").unwrap();
    fs::write(path("latin.yaml"), b"title: T\ncard: \xb5x\n").unwrap();
    fs::write(path("large.yaml"), "a".repeat(1_100_000)).unwrap();
    for (name, expected) in [
        ("none.yaml", "none.yaml: there is no such file"),
        ("folder.yaml", "folder.yaml: this is a directory"),
        ("empty.yaml", "empty.yaml: the file is empty"),
        ("latin.yaml", "latin.yaml:2:7: the file is not UTF-8"),
        ("large.yaml", "large.yaml: the file is larger than 1 MB"),
    ] {
        let stderr = both(folder.path(), name);
        assert!(stderr.contains(expected), "{name}: {stderr}");
    }
}

#[test]
fn faults_of_the_command_line() {
    let folder = tempfile::tempdir().unwrap();
    let spec = project("specs/starter.yaml");
    let cases: [(&[&str], &str); 14] = [
        (&[], "Usage: biasloom <COMMAND>"),
        (&["exlore", &spec], "'explore'"),
        (&["explore"], "<SPEC>"),
        (&["explore", &spec, &spec], "unexpected argument"),
        (
            &["explore", &spec, "--format", "cvs"],
            "hint: did you mean \"csv\"?",
        ),
        (
            &["explore", &spec, "--format", ""],
            "the formats are page, csv",
        ),
        (&["check", ""], "<SPEC>"),
        (&["explore", &spec, "--seed", "-1"], "'-1'"),
        (&["explore", &spec, "--seed", "one"], "--seed"),
        (&["explore", &spec, "--threads", "0"], "--threads"),
        (&["explore", &spec, "--effort", "through"], "'thorough'"),
        (&["explore", &spec, "--owt", "x"], "'--out'"),
        (&["list", "cell"], "'cells'"),
        (&["schema", "specs"], "'spec'"),
    ];
    for (arguments, expected) in cases {
        let (code, stdout, stderr) = run(folder.path(), arguments);
        assert_eq!((code, stdout.as_str()), (2, ""), "{arguments:?}");
        assert!(stderr.contains(expected), "{arguments:?}: {stderr}");
    }
    assert!(content(folder.path()).is_empty());
}

/// A place that cannot be written is refused before the work, and stays as it was.
#[test]
fn places_that_cannot_be_written() {
    let folder = tempfile::tempdir().unwrap();
    let path = |name: &str| folder.path().join(name);
    fs::write(path("spec.yaml"), SMALL).unwrap();
    fs::write(path("file"), "mine").unwrap();
    fs::create_dir(path("taken")).unwrap();
    fs::write(path("taken/report.html"), "mine").unwrap();
    let before = content(folder.path());
    for (out, expected) in [
        ("file", "is a file; results go into a folder"),
        ("file/inside", "is a file; results go into a folder"),
        (".", "holds the working folder"),
        ("..", "holds the working folder"),
        ("taken", "was not written by biasloom"),
        #[cfg(target_os = "linux")]
        ("/proc/biasloom", "cannot make a folder in /proc"),
    ] {
        let (code, stdout, stderr) = run(folder.path(), &["explore", "spec.yaml", "--out", out]);
        assert_eq!((code, stdout.as_str()), (2, ""), "{out}: {stderr}");
        assert!(stderr.contains(expected), "{out}: {stderr}");
        assert_eq!(content(folder.path()), before, "{out}");
    }
    // A file whose stem is no name for a folder.
    fs::write(path("..yaml"), SMALL).unwrap();
    let (code, _, stderr) = run(folder.path(), &["explore", "..yaml"]);
    assert_eq!(code, 2);
    assert!(
        stderr.contains("hint: name a folder with --out"),
        "{stderr}"
    );
}
