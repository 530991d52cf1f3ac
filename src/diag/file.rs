//! Reading an input file, and all the ways that can fail.

use super::{Diagnostic, Diagnostics, Place};
use std::io::Read;
use std::path::Path;

/// Largest input file in bytes. Specs and cards are some kilobytes; the limit is checked before a
/// file is read.
pub const LARGEST_FILE: u64 = 1_000_000;

/// Why a file gives no text.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum FileFault {
    /// No such file.
    #[error("there is no such file")]
    Missing,
    /// A directory.
    #[error("this is a directory, not a file")]
    Directory,
    /// The system refuses to read it.
    #[error("the file cannot be read: {0}")]
    Unreadable(String),
    /// Bytes that are no UTF-8 text.
    #[error("the file is not UTF-8 text: line {line} holds a byte that does not belong there")]
    NotUtf8 {
        /// Line of the first such byte, from 1.
        line: usize,
        /// Its column in characters, from 1.
        column: usize,
    },
    /// More than [`LARGEST_FILE`].
    #[error("the file is larger than 1 MB, which no spec and no card needs")]
    TooLarge,
    /// Nothing but white space.
    #[error("the file is empty")]
    Empty,
}

impl FileFault {
    /// As diagnostics of the file at `path`, which is named as the user named it.
    pub fn at(self, path: &str) -> Diagnostics {
        let mut diagnostic = Diagnostic::error(self.to_string());
        let (line, column) = match self {
            FileFault::NotUtf8 { line, column } => (line, column),
            _ => (0, 0),
        };
        diagnostic.place = Some(Place {
            file: path.to_owned(),
            line,
            column,
            length: 1,
        });
        match self {
            FileFault::NotUtf8 { .. } => diagnostic.hint("save the file as UTF-8").into(),
            _ => diagnostic.into(),
        }
    }
}

/// Reads a text file of at most [`LARGEST_FILE`] bytes.
pub fn read_text(path: &Path) -> Result<String, FileFault> {
    let unreadable = |error: std::io::Error| match error.kind() {
        std::io::ErrorKind::NotFound | std::io::ErrorKind::NotADirectory => FileFault::Missing,
        std::io::ErrorKind::IsADirectory => FileFault::Directory,
        std::io::ErrorKind::PermissionDenied => FileFault::Unreadable("permission denied".into()),
        kind => FileFault::Unreadable(kind.to_string()),
    };
    let about = std::fs::metadata(path).map_err(unreadable)?;
    if about.is_dir() {
        return Err(FileFault::Directory);
    }
    if about.len() > LARGEST_FILE {
        return Err(FileFault::TooLarge);
    }
    // A pipe or a device states no length: stop one byte past the limit.
    let mut bytes = Vec::new();
    let file = std::fs::File::open(path).map_err(unreadable)?;
    file.take(LARGEST_FILE + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    if bytes.len() as u64 > LARGEST_FILE {
        return Err(FileFault::TooLarge);
    }
    decode(bytes)
}

/// Bytes as text.
fn decode(bytes: Vec<u8>) -> Result<String, FileFault> {
    let text = String::from_utf8(bytes).map_err(|error| {
        let good = error.utf8_error().valid_up_to();
        let before = String::from_utf8_lossy(&error.as_bytes()[..good]).into_owned();
        let line = before.matches('\n').count() + 1;
        let column = before
            .rsplit('\n')
            .next()
            .map_or(0, |last| last.chars().count())
            + 1;
        FileFault::NotUtf8 { line, column }
    })?;
    if text
        .trim_matches(|c: char| c.is_whitespace() || c == '\u{feff}')
        .is_empty()
    {
        return Err(FileFault::Empty);
    }
    Ok(text)
}
