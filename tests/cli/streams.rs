//! Data goes to stdout, everything else to stderr, and a reader may leave early.

use super::{biasloom, run};
use std::process::{Command, Stdio};

/// The commands that need no spec and print a lot.
const TALKATIVE: [&[&str]; 5] = [
    &["list", "card_keys"],
    &["explain", "threshold"],
    &["schema", "front"],
    &["completions", "bash"],
    &["--help"],
];

#[test]
fn answers_go_to_stdout_alone() {
    let folder = tempfile::tempdir().unwrap();
    for arguments in TALKATIVE {
        let (code, stdout, stderr) = run(folder.path(), arguments);
        assert_eq!((code, stderr.as_str()), (0, ""), "{arguments:?}");
        assert!(stdout.ends_with('\n'), "{arguments:?}");
        assert!(
            !stdout.contains('\u{1b}'),
            "colour in a pipe: {arguments:?}"
        );
    }
}

/// POSIX: writing to a pipe nobody reads fails with EPIPE. That is the reader's choice, no fault.
#[test]
fn a_closed_pipe_is_no_fault() {
    for arguments in TALKATIVE {
        let (reader, writer) = std::io::pipe().unwrap();
        drop(reader);
        let output = Command::new(env!("CARGO_BIN_EXE_biasloom"))
            .args(arguments)
            .stdout(writer)
            .stderr(Stdio::piped())
            .output()
            .unwrap();
        let stderr = String::from_utf8(output.stderr).unwrap();
        assert_eq!(
            (output.status.code(), stderr.as_str()),
            (Some(0), ""),
            "{arguments:?}"
        );
    }
}

/// Faults on a closed stderr: nobody to tell, but the exit code still does.
#[test]
fn a_closed_stderr_is_no_panic() {
    let (reader, writer) = std::io::pipe().unwrap();
    drop(reader);
    let status = Command::new(env!("CARGO_BIN_EXE_biasloom"))
        .args(["check", "nowhere.yaml"])
        .stderr(writer)
        .status()
        .unwrap();
    assert_eq!(status.code(), Some(2));
}

/// Linux: /dev/full refuses every byte with ENOSPC.
#[cfg(target_os = "linux")]
#[test]
fn a_full_device_is_a_fault() {
    for arguments in TALKATIVE {
        let full = std::fs::OpenOptions::new().write(true).open("/dev/full");
        let output = Command::new(env!("CARGO_BIN_EXE_biasloom"))
            .args(arguments)
            .stdout(full.unwrap())
            .stderr(Stdio::piped())
            .output()
            .unwrap();
        let stderr = String::from_utf8(output.stderr).unwrap();
        assert_eq!(output.status.code(), Some(2), "{arguments:?}");
        assert!(stderr.starts_with("cannot write to stdout"), "{stderr}");
    }
}

#[test]
fn nothing_is_read_from_stdin() {
    let folder = tempfile::tempdir().unwrap();
    let output = biasloom(folder.path())
        .args(["list"])
        .write_stdin("starter\n")
        .output()
        .unwrap();
    assert!(output.status.success());
}
