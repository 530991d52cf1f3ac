//! `biasloom list`: everything there is of a kind.

use super::Ended;
use super::lexicon::{Kind, lexicon};
use super::shell::Shell;
use crate::diag::Diagnostics;
use crate::report::words;
use clap::Args;

/// List what there is: cells, figures, keys, cards, formats, words.
///
/// Without a kind, the kinds. `biasloom explain WORD` says more about a line.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom list cells")]
pub struct List {
    /// What to list.
    kind: Option<Kind>,
}

impl List {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let entries = lexicon();
        let rows: Vec<(String, String)> = match self.kind {
            None => Kind::ALL
                .iter()
                .map(|&kind| {
                    let number = entries.iter().filter(|entry| entry.kind == kind).count();
                    (kind.name().to_owned(), format!("{number} {}", kind.about()))
                })
                .collect(),
            Some(kind) => entries
                .into_iter()
                .filter(|entry| entry.kind == kind)
                .map(|entry| (entry.word, entry.summary))
                .collect(),
        };
        shell.data(&two_columns(&rows, shell.width()))?;
        Ok(Ended::Well)
    }
}

/// Words on the left, sentences on the right, wrapped below themselves.
fn two_columns(rows: &[(String, String)], width: usize) -> String {
    let left = rows.iter().map(|(word, _)| word.chars().count()).max();
    let left = left.unwrap_or(0) + 2;
    let mut text = String::new();
    for (word, sentence) in rows {
        let mut word = word.as_str();
        for line in words::wrap(sentence, width.saturating_sub(left).max(30)) {
            text.push_str(&format!("{word:<left$}{line}\n"));
            word = "";
        }
    }
    text
}
