//! Files that cannot be read say why, and a huge one is refused before it is read.

use biasloom::diag::{FileFault, LARGEST_FILE, read_text};
use std::fs::{self, File};

#[test]
fn every_way_a_file_can_fail() {
    let folder = tempfile::tempdir().unwrap();
    let path = |name: &str| folder.path().join(name);
    assert_eq!(read_text(&path("none.yaml")), Err(FileFault::Missing));
    assert_eq!(read_text(folder.path()), Err(FileFault::Directory));
    fs::write(path("empty.yaml"), " \n\n").unwrap();
    assert_eq!(read_text(&path("empty.yaml")), Err(FileFault::Empty));
    fs::write(path("latin.yaml"), b"title: T\ncard: \xb5x\n").unwrap();
    assert_eq!(
        read_text(&path("latin.yaml")),
        Err(FileFault::NotUtf8 { line: 2, column: 7 })
    );
    assert_eq!(
        read_text(&path("latin.yaml/x.yaml")),
        Err(FileFault::Missing)
    );
    let at_limit = "a".repeat(LARGEST_FILE as usize);
    fs::write(path("large.yaml"), &at_limit).unwrap();
    assert_eq!(read_text(&path("large.yaml")), Ok(at_limit));
    // A hole of 100 MB costs nothing unless it is read.
    let huge = File::create(path("huge.yaml")).unwrap();
    huge.set_len(100_000_000).unwrap();
    assert_eq!(read_text(&path("huge.yaml")), Err(FileFault::TooLarge));
    // Nothing says how long a device is.
    #[cfg(unix)]
    assert_eq!(
        read_text(std::path::Path::new("/dev/zero")),
        Err(FileFault::TooLarge)
    );
}

#[test]
fn wording() {
    let faults = [
        FileFault::Missing,
        FileFault::Directory,
        FileFault::Unreadable("permission denied".to_owned()),
        FileFault::NotUtf8 { line: 3, column: 7 },
        FileFault::TooLarge,
        FileFault::Empty,
    ];
    let text: String = faults
        .map(|fault| fault.at("specs/tern.yaml").render(false))
        .concat();
    insta::assert_snapshot!(text);
}
