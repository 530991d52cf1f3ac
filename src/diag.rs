//! Diagnostics: what is wrong in a file, where, and what would be right. Collects many, prints none.

mod file;
mod render;

pub use file::{FileFault, LARGEST_FILE, read_text};

use std::sync::Arc;

/// How bad it is.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Severity {
    /// The file cannot be used.
    Error,
    /// The file can be used, but probably says something unintended.
    Warning,
}

/// A stretch of one line of a file.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Place {
    /// Path as the user gave it.
    pub file: String,
    /// Line, from 1; 0 where the file as a whole is meant.
    pub line: usize,
    /// Column in characters, from 1; 0 where the file as a whole is meant.
    pub column: usize,
    /// Characters marked; at least 1.
    pub length: usize,
}

/// One thing to say.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Diagnostic {
    /// How bad it is.
    pub severity: Severity,
    /// Where, if it belongs to a place.
    pub place: Option<Place>,
    /// What is wrong; no full stop.
    pub message: String,
    /// What would be right.
    pub hints: Vec<String>,
}

impl Diagnostic {
    /// An error without a place.
    pub fn error(message: impl Into<String>) -> Diagnostic {
        Diagnostic {
            severity: Severity::Error,
            place: None,
            message: message.into(),
            hints: Vec::new(),
        }
    }

    /// The same with a hint more.
    #[must_use]
    pub fn hint(mut self, hint: impl Into<String>) -> Diagnostic {
        self.hints.push(hint.into());
        self
    }

    /// The same at a place.
    #[must_use]
    pub fn at(mut self, place: Place) -> Diagnostic {
        self.place = Some(place);
        self
    }
}

/// Diagnostics of one or more files, with the texts they point into.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Diagnostics {
    list: Vec<Diagnostic>,
    texts: Vec<(String, Arc<str>)>,
}

impl Diagnostics {
    /// None yet.
    pub fn new() -> Diagnostics {
        Diagnostics::default()
    }

    /// Registers the text of a file, so that places in it can be shown.
    pub fn add_text(&mut self, file: &str, text: Arc<str>) {
        if !self.texts.iter().any(|(name, _)| name == file) {
            self.texts.push((file.to_owned(), text));
        }
    }

    /// Adds one.
    pub fn push(&mut self, diagnostic: Diagnostic) {
        self.list.push(diagnostic);
    }

    /// Adds all of another collection.
    pub fn append(&mut self, other: Diagnostics) {
        for (file, text) in other.texts {
            self.add_text(&file, text);
        }
        self.list.extend(other.list);
    }

    /// Orders by place in the file, those without a place first; equal places keep their order.
    pub fn sort(&mut self) {
        self.list.sort_by(|a, b| {
            let key = |d: &Diagnostic| d.place.as_ref().map(|p| (p.file.clone(), p.line, p.column));
            key(a).cmp(&key(b))
        });
    }

    /// All, in order.
    pub fn iter(&self) -> impl Iterator<Item = &Diagnostic> {
        self.list.iter()
    }

    /// How many.
    pub fn len(&self) -> usize {
        self.list.len()
    }

    /// Whether there is none.
    pub fn is_empty(&self) -> bool {
        self.list.is_empty()
    }

    /// Whether any is an error.
    pub fn has_errors(&self) -> bool {
        self.list.iter().any(|d| d.severity == Severity::Error)
    }

    /// Text for people: each with its first line `file:line:column: message`, the offending line
    /// with a mark under it, and its hints; `colour` adds terminal colours. Ends in a newline.
    pub fn render(&self, colour: bool) -> String {
        render::render(self, colour)
    }

    fn text_of(&self, file: &str) -> Option<&str> {
        self.texts
            .iter()
            .find(|(name, _)| name == file)
            .map(|(_, text)| &**text)
    }
}

impl From<Diagnostic> for Diagnostics {
    fn from(diagnostic: Diagnostic) -> Diagnostics {
        Diagnostics {
            list: vec![diagnostic],
            texts: Vec::new(),
        }
    }
}

/// A user's word in quotes: control characters made visible, long text cut.
pub fn quote(text: &str) -> String {
    const LONGEST: usize = 60;
    let short: String = text
        .chars()
        .take(LONGEST)
        .map(|c| if c.is_control() { '\u{fffd}' } else { c })
        .collect();
    let more = if text.chars().nth(LONGEST).is_some() {
        "..."
    } else {
        ""
    };
    format!("\"{short}{more}\"")
}

/// The known word closest to an unknown one, if one is close enough to be meant: at most a third
/// of its letters wrong (Damerau & Levenshtein distance), or equal but for case and separators.
pub fn closest<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let plain = |text: &str| text.to_lowercase().replace([' ', '-'], "_");
    let given = plain(&word.chars().take(100).collect::<String>());
    let allowed = (given.chars().count() / 3).max(1);
    known
        .into_iter()
        .map(|candidate| {
            (
                strsim::damerau_levenshtein(&given, &plain(candidate)),
                candidate,
            )
        })
        .filter(|(distance, candidate)| *distance <= allowed && *distance < candidate.len())
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

/// Words as a list in a sentence: `sink or source`, `a, b or c`.
pub fn either<'a>(words: impl IntoIterator<Item = &'a str>) -> String {
    let words: Vec<&str> = words.into_iter().collect();
    match words.as_slice() {
        [] => "nothing".to_owned(),
        [one] => (*one).to_owned(),
        [most @ .., last] => format!("{} or {last}", most.join(", ")),
    }
}
