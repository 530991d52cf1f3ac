//! The command line, end to end: the program is run as a user runs it.

mod audit;
mod check;
mod explore;
mod faults;
mod help;
mod lexicon;
mod specs;
mod streams;

use assert_cmd::Command;
use std::collections::BTreeMap;
use std::path::{Path, PathBuf};

/// The program, in a folder of its own so that nothing is written beside the sources.
fn biasloom(folder: &Path) -> Command {
    let mut command = Command::new(env!("CARGO_BIN_EXE_biasloom"));
    command.current_dir(folder).env_remove("NO_COLOR");
    command
}

/// Exit code, stdout, stderr.
fn run(folder: &Path, arguments: &[&str]) -> (i32, String, String) {
    let output = biasloom(folder).args(arguments).output().unwrap();
    (
        output.status.code().expect("not ended by a signal"),
        String::from_utf8(output.stdout).unwrap(),
        String::from_utf8(output.stderr).unwrap(),
    )
}

/// Path of a file of the project.
fn project(path: &str) -> String {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join(path)
        .display()
        .to_string()
}

/// Every file below a folder with its bytes.
fn content(folder: &Path) -> BTreeMap<PathBuf, Vec<u8>> {
    let mut files = BTreeMap::new();
    let mut folders = vec![folder.to_owned()];
    while let Some(inside) = folders.pop() {
        for entry in std::fs::read_dir(&inside).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                folders.push(path);
            } else {
                let name = path.strip_prefix(folder).unwrap().to_owned();
                files.insert(name, std::fs::read(&path).unwrap());
            }
        }
    }
    files
}

/// A small spec that is found feasible in a moment.
const SMALL: &str = "\
title: Two currents of the hydrophone's test bench
card: generic-180
supply: 1.62 V to 1.98 V
temperature: -40 degC to 125 degC
corners: [TT, SS, FF]
reference: { current: 10 uA, flows: into network, range: 0 V to 1.2 V }
outputs:
  - { name: tail, kind: sink, current: 20 uA, range: 0.3 V to 1.3 V, accuracy: 5 % }
  - { name: load, kind: source, current: 5 uA, range: 0.3 V to 1.3 V, accuracy: 5 % }
limits: { area: 20000 um2, overhead_current: 60 uA }
search: { effort: quick }
";
