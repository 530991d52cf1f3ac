//! Reading a tree by tables of keys, collecting every fault.

use super::node::{Node, Source, Value};
use crate::diag::{Diagnostic, Diagnostics, Severity, closest, quote};
use schemars::{JsonSchema, Schema};

/// Most faults that are shown with their place; the rest is counted. Looking up a place costs a
/// walk over the file.
const MOST_SHOWN: usize = 100;

/// Most faults kept; a file with more is no spec with mistakes but something else altogether.
const MOST_KEPT: usize = 1000;

/// A value and the node it came from.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct At<T> {
    /// The value.
    pub value: T,
    /// The node.
    pub id: u32,
}

/// A type that can be read from a node; its JSON Schema says the same to an editor.
pub trait Read: Sized + JsonSchema {
    /// Reads a node; on `None` at least one fault was reported.
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self>;
}

/// A key of a record.
#[derive(Debug, Clone, Copy)]
pub struct Entry {
    /// The key.
    pub key: &'static str,
    /// Whether it must be there.
    pub required: bool,
}

struct Pending {
    id: u32,
    /// An earlier node the last hint speaks of; its line ends the hint.
    earlier: Option<u32>,
    severity: Severity,
    message: String,
    hints: Vec<String>,
}

/// The values of a table, one slot for each of its entries.
pub struct Slots<'n> {
    /// The value's node, if the key is there.
    pub values: Vec<Option<&'n Node>>,
    /// Whether the key is there, be it with a faulty value or misspelt.
    pub seen: Vec<bool>,
}

/// Collects faults of one file.
pub struct Reader<'a> {
    source: &'a Source,
    pending: Vec<Pending>,
    dropped: usize,
}

impl<'a> Reader<'a> {
    /// A reader without faults.
    pub fn new(source: &'a Source) -> Reader<'a> {
        Reader {
            source,
            pending: Vec::new(),
            dropped: 0,
        }
    }

    /// Reports a fault at a node.
    pub fn fault(&mut self, id: u32, message: impl Into<String>, hints: Vec<String>) {
        self.report(id, Severity::Error, message.into(), hints, None);
    }

    /// Reports a fault that has to do with an earlier node: `in line N` follows the hint.
    pub fn clash(&mut self, id: u32, earlier: u32, message: impl Into<String>, hint: &str) {
        self.report(
            id,
            Severity::Error,
            message.into(),
            vec![hint.to_owned()],
            Some(earlier),
        );
    }

    /// Reports something that can be used, but hardly as intended.
    pub fn warn(&mut self, id: u32, message: impl Into<String>, hints: Vec<String>) {
        self.report(id, Severity::Warning, message.into(), hints, None);
    }

    fn report(
        &mut self,
        id: u32,
        severity: Severity,
        message: String,
        hints: Vec<String>,
        earlier: Option<u32>,
    ) {
        if self.pending.len() < MOST_KEPT {
            self.pending.push(Pending {
                id,
                earlier,
                severity,
                message,
                hints,
            });
        } else {
            self.dropped += 1;
        }
    }

    /// Reports a node of the wrong type; an empty value is shown at its key.
    pub fn wrong_type(&mut self, node: &Node, wanted: &str) {
        let (id, hints) = match &node.value {
            Value::Null => (node.owner, vec![]),
            Value::Tagged => (
                node.id,
                vec!["tags that start with ! have no meaning here".into()],
            ),
            _ => (node.id, vec![]),
        };
        self.fault(
            id,
            format!("expected {wanted}, found {}", node.value.kind()),
            hints,
        );
    }

    /// Whether any fault is an error.
    pub fn has_errors(&self) -> bool {
        self.pending.iter().any(|p| p.severity == Severity::Error)
    }

    /// Sorts the pairs of a table into the slots of `entries`, reporting unknown, duplicate and
    /// missing keys; `None` if the node is no table.
    pub fn slots<'n>(
        &mut self,
        node: &'n Node,
        what: &str,
        entries: &[Entry],
    ) -> Option<Slots<'n>> {
        let Value::Map(pairs) = &node.value else {
            self.wrong_type(node, &format!("a table of keys for {what}"));
            return None;
        };
        let mut slots: Vec<Option<(&Node, &Node)>> = vec![None; entries.len()];
        // A misspelt key is not reported a second time as missing.
        let mut meant = vec![false; entries.len()];
        for (key, value) in pairs {
            let Value::Text(word) = &key.value else {
                let message = format!("expected a key, found {}", key.value.kind());
                self.fault(key.id, message, vec![]);
                continue;
            };
            match entries.iter().position(|entry| entry.key == word) {
                Some(at) => match slots[at] {
                    None => slots[at] = Some((key, value)),
                    Some((first, _)) => {
                        let message = format!("the key {} appears twice", quote(word));
                        self.clash(key.id, first.id, message, "it stands already");
                    }
                },
                None => {
                    let keys = entries.iter().map(|entry| entry.key);
                    let full = self.pending.len() >= MOST_KEPT;
                    let guess = if full { None } else { closest(word, keys) };
                    if let Some(at) =
                        guess.and_then(|g| entries.iter().position(|entry| entry.key == g))
                    {
                        meant[at] = true;
                    }
                    let hint = match guess {
                        Some(guess) => format!("did you mean \"{guess}\"?"),
                        None => {
                            let keys: Vec<&str> = entries.iter().map(|entry| entry.key).collect();
                            format!("the keys of {what} are {}", keys.join(", "))
                        }
                    };
                    self.fault(key.id, format!("unknown key {}", quote(word)), vec![hint]);
                }
            }
        }
        for (at, entry) in entries.iter().enumerate() {
            if entry.required && slots[at].is_none() && !meant[at] {
                self.fault(
                    node.owner,
                    format!("{what} needs the key \"{}\"", entry.key),
                    vec![],
                );
            }
        }
        Some(Slots {
            seen: slots
                .iter()
                .zip(meant)
                .map(|(slot, meant)| slot.is_some() || meant)
                .collect(),
            values: slots
                .into_iter()
                .map(|slot| slot.map(|(_, value)| value))
                .collect(),
        })
    }

    /// Reads the value of a slot.
    pub fn field<T: Read>(&mut self, slot: Option<&Node>) -> Option<At<T>> {
        let node = slot?;
        Some(At {
            value: T::read(node, self)?,
            id: node.id,
        })
    }

    /// The faults with their places, in the order of the file.
    pub fn finish(mut self) -> Diagnostics {
        self.pending.sort_by_key(|p| p.id);
        let mut diagnostics = Diagnostics::new();
        diagnostics.add_text(self.source.file(), self.source.text().clone());
        let more = self.dropped + self.pending.len().saturating_sub(MOST_SHOWN);
        for mut pending in self.pending.into_iter().take(MOST_SHOWN) {
            if let (Some(earlier), Some(hint)) = (pending.earlier, pending.hints.last_mut()) {
                hint.push_str(&format!(" in line {}", self.source.place(earlier).line));
            }
            diagnostics.push(Diagnostic {
                severity: pending.severity,
                place: Some(self.source.place(pending.id)),
                message: pending.message,
                hints: pending.hints,
            });
        }
        // A missing key is blamed on its table, which comes before faults inside the table.
        diagnostics.sort();
        if more > 0 {
            diagnostics.push(Diagnostic::error(format!(
                "{more} more faults are not shown"
            )));
        }
        diagnostics
    }
}

/// A schema with a description put in front of whatever it says.
pub fn described(mut schema: Schema, text: &str) -> Schema {
    if !text.is_empty() {
        schema.insert("description".to_owned(), text.into());
    }
    schema
}
