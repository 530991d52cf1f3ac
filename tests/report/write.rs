//! Writing a folder whole or not at all, seen from outside. Failures at every step within are
//! tested beside the code.

use biasloom::report::write::{LIST, WriteError, write};
use std::fs;
use std::path::{Path, PathBuf};

fn files(names: &[&str], tag: &str) -> Vec<(PathBuf, Vec<u8>)> {
    names
        .iter()
        .map(|name| (name.into(), format!("{name} {tag}").into_bytes()))
        .collect()
}

fn names(folder: &Path) -> Vec<String> {
    let mut names: Vec<String> = fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().file_name().into_string().unwrap())
        .collect();
    names.sort();
    names
}

#[test]
fn makes_the_folder_and_its_parents() {
    let root = tempfile::tempdir().unwrap();
    let folder = root.path().join("results/tern");
    write(&folder, &files(&["a.csv", "b.cir"], "1")).unwrap();
    assert_eq!(names(&folder), [LIST, "a.csv", "b.cir"]);
    assert_eq!(fs::read_to_string(folder.join("a.csv")).unwrap(), "a.csv 1");
    assert_eq!(names(&root.path().join("results")), ["tern"]);
}

#[test]
fn replaces_its_own_files_and_keeps_others() {
    let root = tempfile::tempdir().unwrap();
    let folder = root.path().join("out");
    write(&folder, &files(&["a", "b", "sub/c"], "1")).unwrap();
    fs::write(folder.join("notes.md"), "mine").unwrap();
    fs::create_dir_all(folder.join("mine/deep")).unwrap();
    fs::write(folder.join("mine/deep/plan"), "mine").unwrap();
    write(&folder, &files(&["b", "d"], "2")).unwrap();
    assert_eq!(names(&folder), [LIST, "b", "d", "mine", "notes.md"]);
    assert_eq!(fs::read_to_string(folder.join("b")).unwrap(), "b 2");
    assert_eq!(
        fs::read_to_string(folder.join("mine/deep/plan")).unwrap(),
        "mine"
    );
    assert_eq!(names(root.path()), ["out"]);
}

#[test]
fn never_overwrites_what_it_did_not_write() {
    let root = tempfile::tempdir().unwrap();
    let folder = root.path().join("out");
    fs::create_dir(&folder).unwrap();
    fs::write(folder.join("b"), "mine").unwrap();
    let error = write(&folder, &files(&["a", "b"], "1")).unwrap_err();
    assert!(
        matches!(&error, WriteError::Foreign(path) if path.ends_with("b")),
        "{error}"
    );
    assert_eq!(names(&folder), ["b"]);
    assert_eq!(fs::read_to_string(folder.join("b")).unwrap(), "mine");
}

#[test]
fn a_file_where_the_folder_should_be() {
    let root = tempfile::tempdir().unwrap();
    let target = root.path().join("out");
    fs::write(&target, "a file").unwrap();
    let error = write(&target, &files(&["a"], "1")).unwrap_err();
    assert!(matches!(error, WriteError::NotAFolder(_)), "{error}");
    // The same one level up: the parent cannot be made.
    let error = write(&target.join("deep/er"), &files(&["a"], "1")).unwrap_err();
    assert!(matches!(error, WriteError::System { .. }), "{error}");
    assert_eq!(fs::read_to_string(&target).unwrap(), "a file");
    assert_eq!(names(root.path()), ["out"]);
}

/// Nobody, root included, may create entries under /proc (proc(5)).
#[cfg(target_os = "linux")]
#[test]
fn an_unwritable_target() {
    let error = write(Path::new("/proc/biasloom/out"), &files(&["a"], "1")).unwrap_err();
    assert!(matches!(&error, WriteError::System { .. }), "{error}");
    assert!(error.to_string().contains("/proc/biasloom"), "{error}");
}

/// A set that fails half-way (a file where a later path needs a folder) leaves the old result.
#[test]
fn an_interrupted_write_leaves_the_old_result() {
    let root = tempfile::tempdir().unwrap();
    let folder = root.path().join("out");
    write(&folder, &files(&["a", "b"], "old")).unwrap();
    let error = write(&folder, &files(&["a", "b", "b/c"], "new")).unwrap_err();
    assert!(matches!(error, WriteError::System { .. }), "{error}");
    assert_eq!(names(&folder), [LIST, "a", "b"]);
    assert_eq!(fs::read_to_string(folder.join("a")).unwrap(), "a old");
    assert_eq!(names(root.path()), ["out"]);
}

#[test]
fn paths_that_leave_the_folder_or_collide() {
    let root = tempfile::tempdir().unwrap();
    let folder = root.path().join("out");
    for bad in [
        &["../a"][..],
        &["/a"],
        &[""],
        &["a", "a"],
        &["./a"],
        &[LIST],
        &["a", "b/../a"],
    ] {
        let error = write(&folder, &files(bad, "1")).unwrap_err();
        assert!(matches!(error, WriteError::BadPath(_)), "{bad:?}: {error}");
    }
    assert_eq!(names(root.path()), [] as [&str; 0]);
}

/// The working folder cannot be exchanged under the user's feet.
#[test]
fn the_working_folder_is_refused() {
    for folder in [".", "..", "/"] {
        let error = write(Path::new(folder), &files(&["a"], "1")).unwrap_err();
        assert!(matches!(error, WriteError::InUse(_)), "{folder}: {error}");
    }
}
