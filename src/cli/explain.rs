//! `biasloom explain`: one word, from every catalogue that knows it.

use super::Ended;
use super::lexicon::{Entry, Kind, lexicon};
use super::shell::Shell;
use crate::diag::{Diagnostic, Diagnostics, closest, quote};
use crate::report::words;
use clap::Args;

/// Explain a word: a cell, a figure, a key, a card, a format, a corner, a term.
///
/// A key may be given with its table, such as `outputs.range`, or alone.
#[derive(Debug, Args)]
#[command(after_help = "Example: biasloom explain wide_swing")]
pub struct Explain {
    /// The word.
    word: String,
}

impl Explain {
    /// Runs the command.
    pub fn run(self, shell: &Shell) -> Result<Ended, Diagnostics> {
        let entries = lexicon();
        let found = named(&entries, &self.word);
        if found.is_empty() {
            return Err(unknown(&entries, &self.word).into());
        }
        let pages: Vec<String> = found
            .into_iter()
            .map(|entry| page(entry, shell.width().min(90)))
            .collect();
        shell.data(&pages.join("\n"))?;
        Ok(Ended::Well)
    }
}

/// Case, spaces and hyphens do not count.
fn plain(word: &str) -> String {
    word.trim().to_lowercase().replace([' ', '-'], "_")
}

/// Entries of a word: those with this very name, and the keys that end in it.
pub fn named<'a>(entries: &'a [Entry], word: &str) -> Vec<&'a Entry> {
    let word = plain(word);
    entries
        .iter()
        .filter(|entry| plain(&entry.word) == word || plain(entry.last()) == word)
        .collect()
}

fn unknown(entries: &[Entry], word: &str) -> Diagnostic {
    let known = entries
        .iter()
        .flat_map(|entry| [entry.word.as_str(), entry.last()]);
    let fault = Diagnostic::error(format!("nothing here is called {}", quote(word)));
    if let Some(kind) = Kind::ALL.iter().find(|kind| kind.name() == plain(word)) {
        return fault.hint(format!("biasloom list {} shows them", kind.name()));
    }
    match closest(word, known) {
        Some(meant) => fault.hint(format!("did you mean \"{meant}\"?")),
        None => fault.hint("biasloom list shows what there is"),
    }
}

/// An entry as a page of text.
fn page(entry: &Entry, width: usize) -> String {
    let mut text = format!("{} ({})\n", entry.word, entry.kind.one());
    text.push_str(&paragraph(&capital(&entry.summary), width));
    if let Some(drawing) = &entry.drawing {
        text.push('\n');
        for line in drawing.lines() {
            text.push_str(format!("      {line}").trim_end());
            text.push('\n');
        }
    }
    for said in &entry.text {
        text.push_str(&paragraph(said, width));
    }
    if let Some(source) = &entry.source {
        text.push_str(&paragraph(&format!("Source: {source}."), width));
    }
    text
}

fn paragraph(said: &str, width: usize) -> String {
    let lines = words::wrap(said, width.max(40) - 2);
    let indented: String = lines.iter().map(|line| format!("  {line}\n")).collect();
    format!("\n{indented}")
}

/// A sentence of its own.
fn capital(summary: &str) -> String {
    let mut letters = summary.chars();
    let first: String = letters
        .next()
        .into_iter()
        .flat_map(char::to_uppercase)
        .collect();
    let end = if summary.ends_with(['.', ':']) {
        ""
    } else {
        "."
    };
    format!("{first}{}{end}", letters.as_str())
}
