//! Writing a report's files into a folder, whole or not at all.
//!
//! The new folder is made complete beside the old one and takes its place by two renames; the
//! old one stays until then. A crash between the two leaves the old folder under its waiting
//! name, and the next run puts it back. A list of the files written is kept in the folder
//! ([`LIST`]), so that a later run replaces its own files only: others are carried over, and
//! never overwritten.

use std::collections::BTreeSet;
use std::ffi::OsString;
use std::fs;
use std::io;
use std::path::{Component, Path, PathBuf};

/// Name of the list of files written, one relative path a line.
pub const LIST: &str = ".biasloom-files";

/// Why a report could not be written.
#[derive(Debug, thiserror::Error)]
pub enum WriteError {
    /// The target exists and is no folder.
    #[error("{} is a file; results go into a folder", .0.display())]
    NotAFolder(PathBuf),
    /// The target is the working folder or one around it, and cannot be exchanged.
    #[error("{} holds the working folder and cannot be replaced; name a folder inside it", .0.display())]
    InUse(PathBuf),
    /// A file to be written exists and was not written by an earlier run.
    #[error("{} was not written by biasloom and is left alone; move it away or name another folder", .0.display())]
    Foreign(PathBuf),
    /// Two files of one report share a path, or a path leaves the folder.
    #[error("a report may not write to {}: the path is taken or leaves the folder", .0.display())]
    BadPath(PathBuf),
    /// The system refused.
    #[error("cannot {action} {}: {source}", path.display())]
    System {
        /// What was tried, such as "write".
        action: &'static str,
        /// On what.
        path: PathBuf,
        /// The system's reason.
        source: io::Error,
    },
}

/// Writes `files` into `folder`, which is created with its parents where it does not exist.
///
/// Afterwards the folder holds exactly the files given, their list, and what others put there.
///
/// # Errors
/// Any [`WriteError`]; the folder's content is then what it was before. One failure comes later:
/// where the old folder cannot be cleared away after the exchange, the new files are in place and
/// the next run clears it.
pub fn write(folder: &Path, files: &[(PathBuf, Vec<u8>)]) -> Result<(), WriteError> {
    write_watched(folder, files, &mut |_| Ok(()))
}

/// Says early whether a report could be written into `folder`, before the work it reports. Leaves
/// nothing behind, and makes no folder.
///
/// `names` are files that the report will hold whatever the work brings.
///
/// # Errors
/// The [`WriteError`] that [`write()`] would end in as things stand.
pub fn check(folder: &Path, names: &[&str]) -> Result<(), WriteError> {
    // The nearest folder that exists is where everything else would be made.
    let absolute = std::path::absolute(folder).map_err(system("find", folder))?;
    let exists = fs::symlink_metadata(&absolute).is_ok();
    let around = if exists {
        let place = Place::new(folder)?;
        let names = names.iter().map(|name| (*name).to_owned()).collect();
        place.check_foreign(&names)?;
        place.parent
    } else {
        let mut up = absolute.ancestors().skip(1);
        let around = up.find(|path| fs::symlink_metadata(path).is_ok());
        around.unwrap_or(Path::new("/")).to_owned()
    };
    if !around.is_dir() {
        return Err(WriteError::NotAFolder(around));
    }
    tempfile::Builder::new()
        .prefix(".biasloom-")
        .tempdir_in(&around)
        .map(drop)
        .map_err(system("make a folder in", &around))
}

/// Points at which a write can be cut short; the tests do so.
#[derive(Debug, Clone, Copy, PartialEq)]
enum Step {
    /// Before a file is written beside the old folder.
    File(usize),
    /// The new folder is complete.
    Staged,
    /// The old folder has made way.
    MadeWay,
}

fn write_watched(
    folder: &Path,
    files: &[(PathBuf, Vec<u8>)],
    watch: &mut dyn FnMut(Step) -> io::Result<()>,
) -> Result<(), WriteError> {
    let paths = checked(files)?;
    let place = Place::new(folder)?;
    place.recover()?;
    let exists = fs::symlink_metadata(&place.folder).is_ok();
    if exists {
        place.check_foreign(&paths)?;
    }

    // Complete the new folder first. It lives in a temporary one, which is deleted on every
    // early return, and is itself made by `create_dir` so that it gets the usual permissions.
    let temporary = tempfile::Builder::new()
        .prefix(&place.hidden("new-"))
        .tempdir_in(&place.parent)
        .map_err(system("make a folder in", &place.parent))?;
    let staged = temporary.path().join("results");
    fs::create_dir(&staged).map_err(system("make", &staged))?;
    for (index, (path, bytes)) in files.iter().enumerate() {
        let target = staged.join(path);
        watch(Step::File(index)).map_err(system("write", &target))?;
        if let Some(parent) = target.parent() {
            fs::create_dir_all(parent).map_err(system("make", parent))?;
        }
        save(&target, bytes).map_err(system("write", &target))?;
    }
    let mut list = String::new();
    for path in &paths {
        list.push_str(path);
        list.push('\n');
    }
    let target = staged.join(LIST);
    save(&target, list.as_bytes()).map_err(system("write", &target))?;
    watch(Step::Staged).map_err(system("complete", &staged))?;

    // Exchange.
    if exists {
        let waiting = &place.waiting;
        fs::rename(&place.folder, waiting).map_err(system("replace", &place.folder))?;
        let moved = watch(Step::MadeWay).and_then(|()| fs::rename(&staged, &place.folder));
        if let Err(source) = moved {
            fs::rename(waiting, &place.folder).map_err(system("put back", &place.folder))?;
            return Err(system("replace", &place.folder)(source));
        }
        place.clear_waiting()
    } else {
        fs::rename(&staged, &place.folder).map_err(system("make", &place.folder))
    }
}

fn system<'a>(action: &'static str, path: &'a Path) -> impl FnOnce(io::Error) -> WriteError + 'a {
    move |source| WriteError::System {
        action,
        path: path.to_owned(),
        source,
    }
}

/// Writes a file and waits until the disk has it.
fn save(path: &Path, bytes: &[u8]) -> io::Result<()> {
    let mut file = fs::OpenOptions::new()
        .write(true)
        .create_new(true)
        .open(path)?;
    io::Write::write_all(&mut file, bytes)?;
    file.sync_all()
}

/// The paths as text with `/` between folders, each inside the folder and given once.
fn checked(files: &[(PathBuf, Vec<u8>)]) -> Result<BTreeSet<String>, WriteError> {
    let mut paths = BTreeSet::new();
    for (path, _) in files {
        let bad = || WriteError::BadPath(path.clone());
        let mut parts = Vec::new();
        for part in path.components() {
            match part {
                Component::Normal(part) => parts.push(part.to_str().ok_or_else(bad)?),
                _ => return Err(bad()),
            }
        }
        let text = parts.join("/");
        if text.is_empty() || text == LIST || text.contains('\n') || !paths.insert(text) {
            return Err(bad());
        }
    }
    Ok(paths)
}

/// Where a report goes.
struct Place {
    /// The folder, its name resolved.
    folder: PathBuf,
    /// The folder around it.
    parent: PathBuf,
    /// The folder's own name.
    name: OsString,
    /// Where the old folder waits during an exchange.
    waiting: PathBuf,
}

impl Place {
    fn new(folder: &Path) -> Result<Place, WriteError> {
        // A link stays a link: its target is what is replaced.
        let folder = match fs::canonicalize(folder) {
            Ok(real) => real,
            Err(error) if error.kind() == io::ErrorKind::NotFound => {
                let absolute = std::path::absolute(folder).map_err(system("find", folder))?;
                let parent = absolute.parent().unwrap_or(&absolute).to_owned();
                fs::create_dir_all(&parent).map_err(system("make", &parent))?;
                let parent = fs::canonicalize(&parent).map_err(system("find", &parent))?;
                let name = absolute.file_name();
                name.map(|name| parent.join(name))
                    .ok_or(WriteError::InUse(parent))?
            }
            Err(source) => return Err(system("find", folder)(source)),
        };
        if fs::metadata(&folder).is_ok_and(|data| !data.is_dir()) {
            return Err(WriteError::NotAFolder(folder));
        }
        let working = std::env::current_dir().and_then(fs::canonicalize);
        if working.is_ok_and(|working| working.starts_with(&folder)) {
            return Err(WriteError::InUse(folder));
        }
        match (folder.parent(), folder.file_name()) {
            (Some(parent), Some(name)) => {
                let (parent, name) = (parent.to_owned(), name.to_owned());
                let mut place = Place {
                    folder,
                    parent,
                    name,
                    waiting: PathBuf::new(),
                };
                place.waiting = place.parent.join(place.hidden("old"));
                Ok(place)
            }
            _ => Err(WriteError::InUse(folder)),
        }
    }

    /// A hidden name beside the folder.
    fn hidden(&self, end: &str) -> OsString {
        let mut name = OsString::from(".");
        name.push(&self.name);
        name.push(".");
        name.push(end);
        name
    }

    /// Finishes or undoes an exchange that a crash cut short.
    fn recover(&self) -> Result<(), WriteError> {
        if fs::symlink_metadata(&self.waiting).is_err() {
            Ok(())
        } else if fs::symlink_metadata(&self.folder).is_err() {
            fs::rename(&self.waiting, &self.folder).map_err(system("put back", &self.folder))
        } else {
            self.clear_waiting()
        }
    }

    /// Refuses to overwrite files that an earlier run did not write.
    fn check_foreign(&self, paths: &BTreeSet<String>) -> Result<(), WriteError> {
        let own = listed(&self.folder)?;
        for path in paths {
            // A foreign file anywhere along the path stands in the way; a foreign folder does not.
            let mut along = PathBuf::new();
            for part in Path::new(path) {
                along.push(part);
                let full = self.folder.join(&along);
                let whole = along.as_path() == Path::new(path);
                let blocks = match fs::symlink_metadata(&full) {
                    Err(_) => false,
                    Ok(data) => whole || !data.is_dir(),
                };
                if blocks && !along.to_str().is_some_and(|along| own.contains(along)) {
                    return Err(WriteError::Foreign(full));
                }
            }
        }
        Ok(())
    }

    /// Moves what others put into the old folder over to the new one, and deletes the old one.
    fn clear_waiting(&self) -> Result<(), WriteError> {
        let own = listed(&self.waiting)?;
        self.carry(Path::new(""), &own)?;
        // Our files go first and their list last, so that a crash in between never leaves one
        // that the next run would take for somebody else's.
        for path in &own {
            let path = self.waiting.join(path);
            match fs::remove_file(&path) {
                Err(error) if error.kind() != io::ErrorKind::NotFound => {
                    return Err(system("delete", &path)(error));
                }
                _ => {}
            }
        }
        fs::remove_dir_all(&self.waiting).map_err(system("delete", &self.waiting))
    }

    fn carry(&self, inside: &Path, own: &BTreeSet<String>) -> Result<(), WriteError> {
        let from = self.waiting.join(inside);
        let mut names = Vec::new();
        for entry in fs::read_dir(&from).map_err(system("read", &from))? {
            names.push(entry.map_err(system("read", &from))?.file_name());
        }
        names.sort();
        for name in names {
            let path = inside.join(&name);
            let text = path.to_string_lossy().replace('\\', "/");
            let (old, new) = (self.waiting.join(&path), self.folder.join(&path));
            if text == LIST || own.contains(&text) {
                continue;
            }
            let folder = fs::symlink_metadata(&old).is_ok_and(|data| data.is_dir());
            let shared = folder && own.iter().any(|file| Path::new(file).starts_with(&path));
            if shared || folder && new.is_dir() {
                // A folder of ours that may also hold things of others.
                if !new.is_dir() && holds_foreign(&self.waiting, &path, own) {
                    fs::create_dir_all(&new).map_err(system("make", &new))?;
                }
                if new.is_dir() {
                    self.carry(&path, own)?;
                }
            } else if fs::symlink_metadata(&new).is_err() {
                fs::rename(&old, &new).map_err(system("keep", &new))?;
            }
        }
        Ok(())
    }
}

/// Whether anything below `inside` is not of our own.
fn holds_foreign(root: &Path, inside: &Path, own: &BTreeSet<String>) -> bool {
    let Ok(entries) = fs::read_dir(root.join(inside)) else {
        return false;
    };
    entries.filter_map(Result::ok).any(|entry| {
        let path = inside.join(entry.file_name());
        if entry.file_type().is_ok_and(|kind| kind.is_dir()) {
            holds_foreign(root, &path, own)
        } else {
            !own.contains(&*path.to_string_lossy().replace('\\', "/"))
        }
    })
}

/// The files an earlier run wrote into a folder.
fn listed(folder: &Path) -> Result<BTreeSet<String>, WriteError> {
    let path = folder.join(LIST);
    match fs::read_to_string(&path) {
        Ok(text) => Ok(text.lines().map(str::to_owned).collect()),
        Err(error) if error.kind() == io::ErrorKind::NotFound => Ok(BTreeSet::new()),
        Err(source) => Err(system("read", &path)(source)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::collections::BTreeMap;

    fn content(folder: &Path) -> BTreeMap<String, Vec<u8>> {
        let mut files = BTreeMap::new();
        for entry in fs::read_dir(folder).unwrap() {
            let entry = entry.unwrap();
            let name = entry.file_name().into_string().unwrap();
            if entry.file_type().unwrap().is_dir() {
                for (inner, bytes) in content(&entry.path()) {
                    files.insert(format!("{name}/{inner}"), bytes);
                }
            } else {
                files.insert(name, fs::read(entry.path()).unwrap());
            }
        }
        files
    }

    fn set(tag: &str) -> Vec<(PathBuf, Vec<u8>)> {
        ["a.txt", "b.txt", "deep/c.txt"]
            .map(|path| (path.into(), tag.into()))
            .into()
    }

    /// A failure at every point of the way leaves the old files and nothing beside them.
    #[test]
    fn a_failed_write_changes_nothing() {
        let steps = [
            Step::File(0),
            Step::File(1),
            Step::File(2),
            Step::Staged,
            Step::MadeWay,
        ];
        for failing in steps {
            let root = tempfile::tempdir().unwrap();
            let folder = root.path().join("out");
            write(&folder, &set("old")).unwrap();
            fs::write(folder.join("notes.txt"), "mine").unwrap();
            let before = content(root.path());
            let result = write_watched(&folder, &set("new"), &mut |step| {
                if step == failing {
                    Err(io::Error::other("cut short"))
                } else {
                    Ok(())
                }
            });
            assert!(
                matches!(result, Err(WriteError::System { .. })),
                "{failing:?}"
            );
            assert_eq!(content(root.path()), before, "{failing:?}");
        }
    }

    /// A crash is a failure after which nobody tidies up: the next run finds the pieces.
    #[test]
    fn a_crash_between_the_renames_is_undone_by_the_next_run() {
        let root = tempfile::tempdir().unwrap();
        let folder = root.path().join("out");
        write(&folder, &set("old")).unwrap();
        fs::write(folder.join("notes.txt"), "mine").unwrap();
        let before = content(&folder);
        fs::rename(&folder, root.path().join(".out.old")).unwrap();
        // A write that fails at its first file has recovered by then.
        let cut = &mut |_| Err(io::Error::other("cut short"));
        assert!(write_watched(&folder, &set("new"), cut).is_err());
        assert_eq!(content(&folder), before);
        assert!(!root.path().join(".out.old").exists());
    }

    /// A crash after the exchange, before the old folder is cleared away.
    #[test]
    fn a_crash_after_the_renames_is_finished_by_the_next_run() {
        let root = tempfile::tempdir().unwrap();
        let folder = root.path().join("out");
        write(&folder, &set("old")).unwrap();
        fs::write(folder.join("notes.txt"), "mine").unwrap();
        fs::write(folder.join("deep/plan.txt"), "mine too").unwrap();
        fs::rename(&folder, root.path().join(".out.old")).unwrap();
        write_watched(&root.path().join("other"), &set("new"), &mut |_| Ok(())).unwrap();
        fs::rename(root.path().join("other"), &folder).unwrap();
        write(&folder, &set("newest")).unwrap();
        let after = content(root.path());
        assert_eq!(after["out/notes.txt"], b"mine");
        assert_eq!(after["out/deep/plan.txt"], b"mine too");
        assert_eq!(after["out/a.txt"], b"newest");
        assert_eq!(after.len(), 6, "{after:?}");
    }
}
