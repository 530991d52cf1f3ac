//! Where cards come from: the shipped ones, and the user's files.

use super::{Card, Corner, Loaded, read};
use crate::diag::{Diagnostic, Diagnostics, closest, quote, read_text};
use std::path::Path;

macro_rules! shipped {
    ($( $name:literal ),+ $(,)?) => {
        /// The shipped cards: name and YAML text, in the order in which they are listed.
        pub const SHIPPED: &[(&str, &str)] = &[
            $( ($name, include_str!(concat!("../../specs/cards/", $name, ".yaml"))) ),+
        ];
    };
}

shipped![
    "generic-180",
    "generic-65",
    "textbook-basic",
    "textbook-ideal",
    "textbook-050",
    "textbook-080",
    "textbook-100",
    "charge-ideal",
];

/// Names of the shipped cards.
pub fn shipped_names() -> Vec<&'static str> {
    SHIPPED.iter().map(|(name, _)| *name).collect()
}

/// Whether the name of a card is a path rather than a shipped name.
fn is_path(name: &str) -> bool {
    name.ends_with(".yaml") || name.ends_with(".yml")
}

impl Loaded {
    /// Loads a card: a shipped name, or a path to a YAML file relative to `folder` (the folder of
    /// the spec that names it).
    ///
    /// # Errors
    /// An unknown name, a file that cannot be read, or every fault of the file with its place.
    pub fn load(name_or_path: &str, folder: &Path) -> Result<Loaded, Diagnostics> {
        if !is_path(name_or_path) {
            return match SHIPPED.iter().find(|(name, _)| *name == name_or_path) {
                Some((name, text)) => read(text, name, &format!("{name}.yaml")),
                None => Err(unknown(name_or_path).into()),
            };
        }
        let path = folder.join(name_or_path);
        let shown = path.display().to_string();
        let text = read_text(&path).map_err(|fault| fault.at(&shown))?;
        let stem = path
            .file_stem()
            .map_or_else(String::new, |s| s.to_string_lossy().into_owned());
        read(&text, &stem, &shown)
    }
}

fn unknown(name: &str) -> Diagnostic {
    let hint = match closest(name, shipped_names()) {
        Some(meant) => format!("did you mean \"{meant}\"?"),
        None => format!(
            "the shipped cards are {}; the path of a card of your own ends in .yaml",
            shipped_names().join(", ")
        ),
    };
    Diagnostic::error(format!("unknown card {}", quote(name))).hint(hint)
}

impl Card {
    /// Loads a shipped card by name, or a card file by its path, relative to the working folder;
    /// see [`Loaded::load`].
    ///
    /// # Errors
    /// An unknown name, a file that cannot be read, or every fault of the file with its place.
    pub fn load(name_or_path: &str) -> Result<Card, Diagnostics> {
        Loaded::load(name_or_path, Path::new("")).map(|loaded| loaded.card)
    }

    /// A corner by name.
    pub fn corner(&self, name: &str) -> Option<&Corner> {
        self.corners.iter().find(|corner| corner.name == name)
    }

    /// The names of all corners, the nominal one first.
    pub fn corner_names(&self) -> Vec<&str> {
        self.corners
            .iter()
            .map(|corner| corner.name.as_str())
            .collect()
    }
}
