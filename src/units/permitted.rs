//! The name and the permitted range of a quantity, and the words for every way to get it wrong.

use super::dimension::{Dimension, Unit, parse, parse_unit, split_number};

/// A quantity of a file: what it is called, in which range it makes sense, and an example. The
/// ends are written as people write them, so that the text of a fault quotes them word for word.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Permitted {
    /// Its name in a sentence: "output current".
    pub name: &'static str,
    /// Least value, inclusive.
    pub least: &'static str,
    /// Greatest value, inclusive.
    pub most: &'static str,
    /// A value that people would write, or a range where the quantity is always a range.
    pub example: &'static str,
    /// What to remember when a value lies outside the range; may be empty.
    pub note: &'static str,
}

/// What can be wrong with the text of a quantity.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum Fault {
    /// Nothing there.
    Empty,
    /// Does not start with a number.
    NotANumber,
    /// NaN, infinite, or too large for a double.
    NotFinite,
    /// A decimal comma.
    DecimalComma,
    /// A number without its unit.
    MissingUnit,
    /// A unit that does not exist.
    UnknownUnit {
        /// As written.
        unit: String,
        /// What was probably meant.
        hint: Option<String>,
    },
    /// A unit that measures something else.
    WrongUnit {
        /// As written.
        unit: String,
        /// What it measures.
        found: Dimension,
    },
    /// Outside the permitted range.
    OutOfRange,
    /// A single value where a range belongs.
    NotARange,
    /// A range where a single value belongs.
    NotASingle,
    /// A range whose first value is above its second.
    Reversed,
    /// A range whose ends are equal where that is not meant.
    EmptyRange,
}

impl Permitted {
    /// Dimension of the quantity.
    pub fn dimension(&self) -> Dimension {
        parse(self.most)
            .map(|(_, unit)| unit.dimension)
            .unwrap_or_default()
    }

    /// Permitted ends in SI units.
    pub fn ends(&self) -> (f64, f64) {
        let end = |text| parse(text).map_or(f64::NAN, |(value, _)| value);
        (end(self.least), end(self.most))
    }

    /// Reads one value into SI units.
    pub fn read(&self, text: &str) -> Result<f64, Fault> {
        if split_range(text).is_some() {
            return Err(Fault::NotASingle);
        }
        self.value(text, None)
    }

    /// Reads `A to B` into SI units; the first unit may be left out where it equals the second. A
    /// single value, or two equal ones, count as a range only where `single` permits it.
    pub fn read_range(&self, text: &str, single: bool) -> Result<(f64, f64), Fault> {
        let Some((first, second)) = split_range(text) else {
            let value = self.value(text, None)?;
            return if single {
                Ok((value, value))
            } else {
                Err(Fault::NotARange)
            };
        };
        let most = self.value(second, None)?;
        let (_, unit) = split_number(second)?;
        let least = self.value(first, Some(parse_unit(unit)?))?;
        if least > most {
            Err(Fault::Reversed)
        } else if least == most && !single {
            Err(Fault::EmptyRange)
        } else {
            Ok((least, most))
        }
    }

    /// Checks a bare number (a YAML number where no unit belongs).
    pub fn check(&self, value: f64) -> Result<f64, Fault> {
        let (least, most) = self.ends();
        if !value.is_finite() {
            Err(Fault::NotFinite)
        } else if self.dimension() != Dimension::NUMBER {
            Err(Fault::MissingUnit)
        } else if value < least || value > most {
            Err(Fault::OutOfRange)
        } else {
            Ok(value)
        }
    }

    fn value(&self, text: &str, fallback: Option<Unit>) -> Result<f64, Fault> {
        let wanted = self.dimension();
        let (number, unit_text) = split_number(text)?;
        let unit = match (unit_text.trim().is_empty(), fallback) {
            (true, Some(unit)) => unit,
            (true, None) if wanted != Dimension::NUMBER => return Err(Fault::MissingUnit),
            _ => parse_unit(unit_text)?,
        };
        if unit.dimension != wanted {
            let unit_text = unit_text.trim().to_owned();
            return Err(Fault::WrongUnit {
                unit: unit_text,
                found: unit.dimension,
            });
        }
        let value = number.value(unit)?;
        let (least, most) = self.ends();
        if value < least || value > most {
            Err(Fault::OutOfRange)
        } else {
            Ok(value)
        }
    }

    /// The sentence for a fault of the text `found`, and what would be right.
    pub fn explain(&self, fault: &Fault, found: &str) -> (String, Vec<String>) {
        let Permitted {
            name,
            least,
            most,
            example,
            note,
        } = self;
        let found = found.trim();
        let write = format!("write it like {example}");
        match fault {
            Fault::Empty => (format!("the {name} is empty"), vec![write]),
            Fault::NotANumber => (
                format!("the {name} does not start with a number"),
                vec![write],
            ),
            Fault::NotFinite => (format!("the {name} must be a finite number"), vec![write]),
            Fault::DecimalComma => (
                format!("the {name} has a decimal comma"),
                vec![format!("write a decimal point, like {example}")],
            ),
            Fault::MissingUnit => (format!("the {name} has no unit"), vec![write]),
            Fault::UnknownUnit { unit, hint } => {
                let unit = quote(unit);
                let mut hints: Vec<String> = hint.iter().cloned().collect();
                hints.push(write);
                (format!("the {name} has the unknown unit {unit}"), hints)
            }
            Fault::WrongUnit { unit, found } => {
                let given = found
                    .name()
                    .map_or_else(String::new, |given| format!(", {given}"));
                let message = match self.dimension().name() {
                    _ if unit.is_empty() => format!("the {name} has no unit"),
                    Some("a bare number") => {
                        format!(
                            "the {name} is a bare number but has the unit {}",
                            quote(unit)
                        )
                    }
                    Some(wanted) => {
                        format!("the {name} must be {wanted}, found {}{given}", quote(unit))
                    }
                    None => format!("the {name} has the wrong unit {}{given}", quote(unit)),
                };
                (message, vec![write])
            }
            Fault::OutOfRange => (
                format!("the {name} must lie between {least} and {most}"),
                prefix_hint(found)
                    .into_iter()
                    .chain((!note.is_empty()).then(|| (*note).to_owned()))
                    .collect(),
            ),
            Fault::NotARange => (
                format!("the {name} needs two values, found one"),
                vec![range_hint(least, example)],
            ),
            Fault::NotASingle => (
                format!("the {name} must be a single value, found a range"),
                vec![write],
            ),
            Fault::Reversed => (
                format!("the {name} runs backwards: its first value is above its second"),
                reversed_hint(found).into_iter().collect(),
            ),
            Fault::EmptyRange => (
                format!("the {name} is an empty range: its ends are equal"),
                vec!["give the lowest and the highest value".to_owned()],
            ),
        }
    }
}

/// Units come from the file: no control characters, no endless text in a message. (`diag` has the
/// same for its own row.)
fn quote(text: &str) -> String {
    let short: String = text
        .chars()
        .take(40)
        .map(|c| if c.is_control() { '\u{fffd}' } else { c })
        .collect();
    let more = if text.chars().nth(40).is_some() {
        "..."
    } else {
        ""
    };
    format!("\"{short}{more}\"")
}

fn split_range(text: &str) -> Option<(&str, &str)> {
    let at = text.find(" to ")?;
    Some((&text[..at], &text[at + 4..]))
}

fn range_hint(least: &str, example: &str) -> String {
    if split_range(example).is_some() {
        format!("write it like {example}")
    } else {
        format!("write it like {least} to {example}")
    }
}

fn reversed_hint(found: &str) -> Option<String> {
    let (first, second) = split_range(found)?;
    Some(format!(
        "did you mean {} to {}?",
        second.trim(),
        first.trim()
    ))
}

/// The commonest slip of a thousand million: m for M, M for m.
fn prefix_hint(found: &str) -> Option<String> {
    let unit = split_number(found).ok()?.1.trim().to_owned();
    let mut letters = unit.chars();
    match (letters.next(), letters.next()) {
        (Some('m'), Some('A'..='Z' | '\u{3a9}' | '\u{2126}')) => {
            Some("m is milli, M is mega".to_owned())
        }
        (Some('M'), Some(_)) => Some("M is mega, m is milli".to_owned()),
        _ => None,
    }
}
