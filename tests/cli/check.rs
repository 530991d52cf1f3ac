//! `check`: what was understood, and a first estimate.

use super::{SMALL, project, run};
use std::fs;

#[test]
fn reads_a_spec_back_with_every_default_spelt_out() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bench.yaml");
    let bare = SMALL
        .replace("corners: [TT, SS, FF]\n", "")
        .replace("limits: { area: 20000 um2, overhead_current: 60 uA }\n", "")
        .replace("search: { effort: quick }\n", "");
    fs::write(path, bare).unwrap();
    let (code, stdout, stderr) = run(folder.path(), &["check", "bench.yaml"]);
    assert_eq!((code, stderr.as_str()), (0, ""), "{stdout}");
    for expected in [
        "Two currents of the hydrophone's test bench",
        "generic-180 (Generic 180 nm process, 1.8 V)",
        "1.620 to 1.980 V, nominal 1.800 V",
        "-40 degC to 125 degC, nominal 27 degC",
        "TT, SS, FF, SF, FS",
        "10.0 uA into the network, exact, pin at 0.000 to 1.200 V",
        "area not limited, overhead current not limited, power not limited",
        "area, overhead current",
        "normal effort, seed 1",
        "5.00 % of current, 3 sigma",
        "0.300 to 1.300 V",
        "20.0 uA",
        "5.00 uA",
    ] {
        assert!(stdout.contains(expected), "{expected} is not in\n{stdout}");
    }
    assert!(
        fs::read_dir(folder.path()).unwrap().count() == 1,
        "check writes nothing"
    );
}

/// Every output of every shipped spec has a row, and a cell.
#[test]
fn every_shipped_spec_has_a_cell_for_every_output() {
    let folder = tempfile::tempdir().unwrap();
    for (stem, text) in super::specs::shipped() {
        let path = project(&format!("specs/{stem}.yaml"));
        let (code, stdout, stderr) = run(folder.path(), &["check", &path]);
        // Even the impossible one: each output alone has a cell, all of them together no room.
        assert_eq!((code, stderr.as_str()), (0, ""), "{stem}\n{stdout}");
        for name in text.split("name: ").skip(1) {
            let name: String = name
                .chars()
                .take_while(|c| c.is_alphanumeric() || *c == '_')
                .collect();
            let row = |line: &&str| line.split_whitespace().next() == Some(&name);
            assert_eq!(
                stdout.lines().filter(row).count(),
                1,
                "{stem}: {name}\n{stdout}"
            );
        }
    }
}

/// 60 mV is less than four thermal voltages, the least saturation voltage of any MOS transistor
/// (Enz & Vittoz 2006, ch. 4), so no mirror keeps a per cent of accuracy there.
#[test]
fn an_output_without_any_cell_ends_with_1() {
    let folder = tempfile::tempdir().unwrap();
    let hopeless = SMALL.replace(
        "5 uA, range: 0.3 V to 1.3 V, accuracy: 5 %",
        "5 uA, range: 0.02 V to 1.3 V, accuracy: 1 %, output_resistance: 10 GOhm",
    );
    fs::write(folder.path().join("hopeless.yaml"), hopeless).unwrap();
    let (code, stdout, stderr) = run(folder.path(), &["check", "hopeless.yaml"]);
    assert_eq!((code, stderr.as_str()), (1, ""), "{stdout}");
    assert!(stdout.contains("No cell can serve load"), "{stdout}");
}

/// A warning is said on stderr, and is no fault.
#[test]
fn warnings_do_not_stop() {
    let folder = tempfile::tempdir().unwrap();
    let loose = SMALL.replace(
        "range: 0 V to 1.2 V }",
        "range: 0 V to 1.2 V, tolerance: 7 % }",
    );
    fs::write(folder.path().join("loose.yaml"), loose).unwrap();
    let (code, stdout, stderr) = run(folder.path(), &["check", "loose.yaml"]);
    assert!(stderr.contains("warning: "), "{stderr}");
    assert!(code < 2, "{stderr}");
    assert!(stdout.contains("within 7.00 %"), "{stdout}");
}
