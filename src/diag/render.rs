//! Diagnostics as text. The first line and the hints are our own; miette draws the snippet.

use super::{Diagnostic, Diagnostics, Place, Severity};
use miette::{GraphicalReportHandler, GraphicalTheme, LabeledSpan, ThemeCharacters, ThemeStyles};
use std::fmt;

/// Widest part of a line that a snippet shows.
const WINDOW: usize = 110;

pub(super) fn render(diagnostics: &Diagnostics, colour: bool) -> String {
    let mut out = String::new();
    for (index, diagnostic) in diagnostics.iter().enumerate() {
        if index > 0 {
            out.push('\n');
        }
        out.push_str(&headline(diagnostic, colour));
        out.push('\n');
        if let Some(place) = &diagnostic.place
            && let Some(text) = diagnostics.text_of(&place.file)
            && let Some(snippet) = snippet(text, place, colour)
        {
            out.push_str(&snippet);
        }
        for hint in &diagnostic.hints {
            let word = if colour {
                "\u{1b}[36mhint:\u{1b}[0m"
            } else {
                "hint:"
            };
            out.push_str(&format!("  {word} {}\n", visible(hint)));
        }
    }
    out
}

fn headline(diagnostic: &Diagnostic, colour: bool) -> String {
    let mut line = String::new();
    if let Some(place) = &diagnostic.place {
        line.push_str(&visible(&place.file));
        if place.line > 0 {
            line.push_str(&format!(":{}:{}", place.line, place.column));
        }
        line.push_str(": ");
    }
    let (word, code) = match diagnostic.severity {
        Severity::Error => ("", "31"),
        Severity::Warning => ("warning: ", "33"),
    };
    let message = visible(&format!("{word}{}", diagnostic.message));
    if colour {
        line.push_str(&format!("\u{1b}[1;{code}m{message}\u{1b}[0m"));
    } else {
        line.push_str(&message);
    }
    line
}

/// Terminals must not obey a file's control characters.
fn visible(text: &str) -> String {
    text.chars()
        .map(|c| if c.is_control() { '\u{fffd}' } else { c })
        .collect()
}

/// The line of a place with a mark under it. Only a window of a long line is shown, and tabs and
/// control characters become one column each, so that the mark stays under its word.
fn snippet(text: &str, place: &Place, colour: bool) -> Option<String> {
    let line = text
        .split('\n')
        .nth(place.line.checked_sub(1)?)?
        .trim_end_matches('\r');
    let mut shown: Vec<char> = line
        .chars()
        .map(|c| match c {
            '\t' => ' ',
            '\u{feff}' => ' ',
            c if c.is_control() => '\u{fffd}',
            c => c,
        })
        .collect();
    let column = (place.column - 1).min(shown.len());
    let first = if column > WINDOW / 2 && shown.len() > WINDOW {
        column - WINDOW / 2
    } else {
        0
    };
    shown.drain(..first);
    shown.truncate(WINDOW);
    let column = column - first;
    let length = place
        .length
        .max(1)
        .min(shown.len().saturating_sub(column))
        .max(1);
    // A mark one past the end, for what is missing there.
    while shown.len() < column + length {
        shown.push(' ');
    }
    let bytes = |count: usize| shown[..count].iter().map(|c| c.len_utf8()).sum::<usize>();
    let (start, end) = (bytes(column), bytes(column + length));
    let shown: String = shown.iter().collect();
    let excerpt = Excerpt {
        line: shown,
        span: (start, end - start),
    };
    let characters = ThemeCharacters::unicode();
    let styles = if colour {
        ThemeStyles::ansi()
    } else {
        ThemeStyles::none()
    };
    let handler = GraphicalReportHandler::new_themed(GraphicalTheme { characters, styles })
        .with_width(WINDOW + 20)
        .with_context_lines(1)
        .without_syntax_highlighting()
        .with_links(false);
    let mut drawn = String::new();
    handler.render_report(&mut drawn, &excerpt).ok()?;
    Some(marked_lines(&drawn, place.line))
}

/// miette numbers the excerpt's only line 1 and frames it; keep that line and its mark, under the
/// line's real number.
fn marked_lines(drawn: &str, line: usize) -> String {
    let number = line.to_string();
    let mut out = String::new();
    for (index, row) in drawn.lines().skip(2).take(2).enumerate() {
        let Some(bar) = row.find(['\u{2502}', '\u{b7}']) else {
            continue;
        };
        let bar_width = row[bar..].chars().next().map_or(1, char::len_utf8);
        let gutter = if index == 0 {
            number.clone()
        } else {
            " ".repeat(number.len())
        };
        out.push_str(format!("  {gutter} |{}", &row[bar + bar_width..]).trim_end());
        out.push('\n');
    }
    out
}

/// One line of a file as miette wants it.
#[derive(Debug)]
struct Excerpt {
    line: String,
    span: (usize, usize),
}

impl fmt::Display for Excerpt {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("-")
    }
}

impl std::error::Error for Excerpt {}

impl miette::Diagnostic for Excerpt {
    fn source_code(&self) -> Option<&dyn miette::SourceCode> {
        Some(&self.line)
    }

    fn labels(&self) -> Option<Box<dyn Iterator<Item = LabeledSpan> + '_>> {
        Some(Box::new(std::iter::once(LabeledSpan::new_with_span(
            None, self.span,
        ))))
    }
}
