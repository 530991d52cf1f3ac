//! Help is short, in our own words, and carries one example each.

use super::run;

/// Every command line that has a help, from the program's own table.
fn lines() -> Vec<Vec<String>> {
    let mut lines = vec![vec![]];
    for command in biasloom::cli::command().get_subcommands() {
        lines.push(vec![command.get_name().to_owned()]);
    }
    lines
}

#[test]
fn help_of_every_command() {
    let folder = tempfile::tempdir().unwrap();
    let mut shown = String::new();
    for line in lines() {
        let mut arguments: Vec<&str> = line.iter().map(String::as_str).collect();
        arguments.push("--help");
        let (code, stdout, stderr) = run(folder.path(), &arguments);
        assert_eq!((code, stderr.as_str()), (0, ""), "{arguments:?}");
        assert_eq!(stdout.matches("Example:").count(), 1, "{arguments:?}");
        assert!(stdout.lines().all(|line| line.chars().count() <= 100));
        assert!(stdout.lines().count() <= 45, "{arguments:?} is long");
        shown.push_str(&format!(
            "==== biasloom {}\n{stdout}\n",
            arguments.join(" ")
        ));
    }
    insta::assert_snapshot!(shown);
}

#[test]
fn the_version_is_the_package_s() {
    let folder = tempfile::tempdir().unwrap();
    let (code, stdout, _) = run(folder.path(), &["--version"]);
    assert_eq!(code, 0);
    assert_eq!(stdout, format!("biasloom {}\n", env!("CARGO_PKG_VERSION")));
}

#[test]
fn completions_name_every_command() {
    let folder = tempfile::tempdir().unwrap();
    for interpreter in ["bash", "zsh", "fish", "elvish", "powershell"] {
        let (code, stdout, stderr) = run(folder.path(), &["completions", interpreter]);
        assert_eq!((code, stderr.as_str()), (0, ""), "{interpreter}");
        for line in lines().into_iter().flatten() {
            assert!(stdout.contains(&line), "{interpreter} lacks {line}");
        }
    }
}

#[test]
fn schemas_are_those_of_the_library() {
    let folder = tempfile::tempdir().unwrap();
    let front = biasloom::report::json::schema().to_value();
    for (name, expected) in [
        ("spec", biasloom::spec::schema()),
        ("card", biasloom::process::schema()),
        ("front", front),
    ] {
        let (code, stdout, stderr) = run(folder.path(), &["schema", name]);
        assert_eq!((code, stderr.as_str()), (0, ""), "{name}");
        let printed: serde_json::Value = serde_json::from_str(&stdout).unwrap();
        assert_eq!(printed, expected, "{name}");
    }
}
