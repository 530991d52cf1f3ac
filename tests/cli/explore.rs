//! `explore`: exit codes, what is written where, and the same bytes every time.

use super::{SMALL, content, project, run};
use biasloom::report::FORMATS;
use std::collections::BTreeSet;
use std::fs;
use std::path::Path;
use std::process::{Command, Stdio};
use std::time::{Duration, Instant};

fn small() -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("bench.yaml"), SMALL).unwrap();
    folder
}

#[test]
fn found_writes_every_format_and_prints_the_table() {
    let folder = small();
    let (code, stdout, stderr) = run(folder.path(), &["explore", "bench.yaml"]);
    assert_eq!(code, 0, "{stderr}");
    assert!(
        stdout.starts_with("Two currents of the hydrophone's test bench\nFound: "),
        "{stdout}"
    );
    assert!(!stdout.contains('\u{1b}') && !stderr.contains('\u{1b}'));
    let mut lines = stderr.lines();
    let wrote = lines.next().unwrap_or_default();
    assert!(
        wrote.starts_with("Wrote ") && wrote.ends_with(" into results/bench."),
        "{stderr}"
    );
    assert_eq!(
        lines.next(),
        Some("Open results/bench/report.html in a browser.")
    );
    let files = content(&folder.path().join("results/bench"));
    for name in FORMATS.iter().flat_map(|format| format.files) {
        let there = files.keys().any(|file| {
            let file = file.to_str().unwrap();
            file == *name || file.contains("network-01") && *name == file.replace("01", "NN")
        });
        assert!(there, "{name} is not among {:?}", files.keys());
    }
}

#[test]
fn nothing_fits_ends_with_1_and_shows_the_nearest() {
    let folder = tempfile::tempdir().unwrap();
    let impossible = project("specs/impossible.yaml");
    let arguments = [
        "explore",
        &impossible,
        "--effort",
        "quick",
        "--out",
        "there",
    ];
    let (code, stdout, stderr) = run(folder.path(), &arguments);
    assert_eq!(code, 1, "{stderr}");
    assert!(stdout.contains("Nothing fits"), "{stdout}");
    assert!(folder.path().join("there/report.html").exists());
}

#[test]
fn quiet_says_nothing_but_the_table() {
    let folder = small();
    let loud = run(folder.path(), &["explore", "bench.yaml"]);
    let quiet = run(folder.path(), &["explore", "bench.yaml", "--quiet"]);
    assert_eq!(
        (quiet.0, quiet.1.as_str(), quiet.2.as_str()),
        (loud.0, loud.1.as_str(), "")
    );
}

#[test]
fn only_the_formats_named_are_written() {
    let folder = small();
    let arguments = [
        "explore",
        "bench.yaml",
        "--format",
        "csv,picture",
        "--format",
        "csv",
    ];
    let (code, _, stderr) = run(folder.path(), &arguments);
    assert_eq!(code, 0, "{stderr}");
    let files = content(&folder.path().join("results/bench"));
    let names: BTreeSet<&str> = files.keys().filter_map(|file| file.to_str()).collect();
    assert_eq!(
        names,
        BTreeSet::from([".biasloom-files", "front.csv", "front.svg", "prices.csv"])
    );
}

/// Same spec, same seed: same bytes, on any number of threads.
#[test]
fn the_same_bytes_every_time() {
    let folder = small();
    let mut runs = Vec::new();
    for (out, threads) in [("a", "1"), ("b", "2"), ("c", "5")] {
        let arguments = [
            "explore",
            "bench.yaml",
            "--out",
            out,
            "--threads",
            threads,
            "--seed",
            "7",
        ];
        let (code, stdout, stderr) = run(folder.path(), &arguments);
        assert_eq!(code, 0, "{stderr}");
        assert!(stdout.contains("Seed 7."), "{stdout}");
        runs.push((stdout, content(&folder.path().join(out))));
    }
    assert!(runs.windows(2).all(|pair| pair[0] == pair[1]));
}

/// The seed and the effort of the command line are those of the report.
#[test]
fn options_stand_above_the_spec() {
    let folder = small();
    let arguments = [
        "explore",
        "bench.yaml",
        "--seed",
        "42",
        "--effort",
        "normal",
        "--price-of",
        "1",
        "--format",
        "json",
    ];
    run(folder.path(), &arguments);
    let text = fs::read_to_string(folder.path().join("results/bench/front.json")).unwrap();
    let front: serde_json::Value = serde_json::from_str(&text).unwrap();
    assert_eq!(front["spec"]["seed"], 42);
    assert_eq!(front["spec"]["effort"], "normal");
    assert_eq!(front["spec"]["price_of"], 1);
    assert_eq!(front["prices"]["rank"], 1);
    assert_eq!(front["prices"]["chosen"], "asked");
}

/// A second run takes the place of the first; what others put into the folder stays.
#[test]
fn a_second_run_replaces_the_first() {
    let folder = small();
    run(folder.path(), &["explore", "bench.yaml"]);
    let notes = folder.path().join("results/bench/notes.txt");
    fs::write(&notes, "mine").unwrap();
    let (code, _, stderr) = run(folder.path(), &["explore", "bench.yaml", "--format", "csv"]);
    assert_eq!(code, 0, "{stderr}");
    assert_eq!(fs::read_to_string(&notes).unwrap(), "mine");
    assert!(!folder.path().join("results/bench/report.html").exists());
}

#[test]
fn a_closed_pipe_loses_no_file() {
    let folder = small();
    let (reader, writer) = std::io::pipe().unwrap();
    drop(reader);
    let status = Command::new(env!("CARGO_BIN_EXE_biasloom"))
        .args(["explore", "bench.yaml", "--quiet"])
        .current_dir(folder.path())
        .stdout(writer)
        .status()
        .unwrap();
    assert_eq!(status.code(), Some(0));
    assert!(folder.path().join("results/bench/report.html").exists());
}

/// The parts of every error budget are those that `explain` knows.
#[test]
fn error_parts_are_those_explained() {
    let folder = small();
    run(
        folder.path(),
        &["explore", "bench.yaml", "--format", "json"],
    );
    let text = fs::read_to_string(folder.path().join("results/bench/front.json")).unwrap();
    let front: serde_json::Value = serde_json::from_str(&text).unwrap();
    let mut parts = BTreeSet::new();
    for network in front["front"].as_array().unwrap() {
        for output in network["outputs"].as_array().unwrap() {
            for part in output["budget"].as_array().unwrap() {
                parts.insert(part["name"].as_str().unwrap().to_owned());
            }
        }
    }
    assert!(!parts.is_empty());
    for part in parts {
        assert!(
            biasloom::cli::lexicon::PARTS.contains(&part.as_str()),
            "{part}"
        );
    }
}

/// Signal 2 (POSIX SIGINT), as Ctrl-C sends it.
#[cfg(unix)]
fn interrupt(process: u32) {
    let status = Command::new("kill")
        .args(["-INT", &process.to_string()])
        .status();
    assert!(status.unwrap().success());
}

#[cfg(unix)]
fn thorough(folder: &Path) -> std::process::Child {
    let spec = project("specs/sixty-four.yaml");
    Command::new(env!("CARGO_BIN_EXE_biasloom"))
        .args([
            "explore",
            &spec,
            "--effort",
            "thorough",
            "--out",
            "out",
            "--threads",
            "1",
        ])
        .current_dir(folder)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .unwrap()
}

/// One Ctrl-C: a good end, soon, with whatever was found.
#[cfg(unix)]
#[test]
fn an_interrupted_run_keeps_what_was_found() {
    let folder = tempfile::tempdir().unwrap();
    let child = thorough(folder.path());
    std::thread::sleep(Duration::from_millis(1500));
    interrupt(child.id());
    let start = Instant::now();
    let output = child.wait_with_output().unwrap();
    assert!(start.elapsed() < Duration::from_secs(30), "slow to stop");
    let stdout = String::from_utf8(output.stdout).unwrap();
    let stderr = String::from_utf8(output.stderr).unwrap();
    assert!(
        stderr.contains("Stopping; what was found is kept."),
        "{stderr}"
    );
    assert!(stdout.contains("Stopped early"), "{stdout}\n{stderr}");
    let written = folder.path().join("out/report.html").exists();
    // 0 with a front, 1 without one; files only with a front.
    assert_eq!(output.status.code(), Some(i32::from(!written)), "{stderr}");
}

/// Two: the end at once, and nothing is left behind.
#[cfg(unix)]
#[test]
fn a_second_interrupt_aborts() {
    let folder = tempfile::tempdir().unwrap();
    let child = thorough(folder.path());
    std::thread::sleep(Duration::from_millis(1000));
    interrupt(child.id());
    std::thread::sleep(Duration::from_millis(20));
    interrupt(child.id());
    let output = child.wait_with_output().unwrap();
    // The first may have been obeyed already by the time the second arrives.
    assert!(
        matches!(output.status.code(), Some(130 | 0 | 1)),
        "{output:?}"
    );
    if output.status.code() == Some(130) {
        assert!(content(folder.path()).is_empty());
    }
}
