//! The kinds of value a key can have.

use super::node::{Node, Value};
use super::reader::{At, Read, Reader};
use crate::diag::{closest, either, quote};
use crate::units::{Dimension, Fault, Permitted, Range};
use schemars::{JsonSchema, Schema, SchemaGenerator, json_schema};
use std::borrow::Cow;
use std::marker::PhantomData;

/// A named quantity with its permitted range.
pub trait Measure {
    /// The type of its values.
    type Value: From<f64> + Copy;
    /// Name, range, example.
    const PERMITTED: Permitted;
}

/// Defines measures: `Name: Type = "name in a sentence", "least" to "most", like "example";`, and
/// before the semicolon, where it helps, `, note "what to remember outside the range"`.
macro_rules! quantities {
    ($( $(#[$doc:meta])+ $name:ident: $type:ty = $called:literal,
        $least:literal to $most:literal, like $example:literal $(, note $note:literal)?; )+) => {
        $(
            $(#[$doc])+
            #[derive(Debug, Clone, Copy, PartialEq)]
            pub struct $name;

            impl $crate::yaml::Measure for $name {
                type Value = $type;
                const PERMITTED: $crate::units::Permitted = $crate::units::Permitted {
                    name: $called,
                    least: $least,
                    most: $most,
                    example: $example,
                    note: concat!($($note)?),
                };
            }
        )+

        /// All quantities of these files.
        pub const ALL: &[$crate::units::Permitted] =
            &[$( <$name as $crate::yaml::Measure>::PERMITTED ),+];
    };
}
pub(crate) use quantities;

/// Loose: a word, or the 1/V of a reciprocal; the reader knows units, an editor need not.
const UNIT_PATTERN: &str = r"\s*([^\d\s.,]|1/).*";

const NUMBER_PATTERN: &str = r"[+\-\u2212]?(\d+\.?\d*|\.\d+)([eE][+\-]?\d+)?";

fn explain(reader: &mut Reader<'_>, node: &Node, permitted: &Permitted, fault: &Fault, text: &str) {
    let (message, hints) = permitted.explain(fault, text);
    reader.fault(node.id, message, hints);
}

/// One value of a quantity.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Quantity<M: Measure>(
    /// The value.
    pub M::Value,
);

impl<M: Measure> Read for Quantity<M> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        let permitted = M::PERMITTED;
        let (result, text) = match &node.value {
            Value::Text(text) => (permitted.read(text), text.clone()),
            Value::Number { value, .. } => (permitted.check(*value), value.to_string()),
            _ => {
                let wanted = format!("the {} (like {})", permitted.name, permitted.example);
                reader.wrong_type(node, &wanted);
                return None;
            }
        };
        match result {
            Ok(value) => Some(Quantity(value.into())),
            Err(fault) => {
                explain(reader, node, &permitted, &fault, &text);
                None
            }
        }
    }
}

impl<M: Measure> JsonSchema for Quantity<M> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        M::PERMITTED.name.into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        let permitted = M::PERMITTED;
        let (least, most) = permitted.ends();
        if permitted.example.parse::<f64>().is_ok() {
            return json_schema!({ "type": "number", "minimum": least, "maximum": most });
        }
        let kinds = match permitted.dimension() {
            Dimension::NUMBER => serde_json::json!(["string", "number"]),
            _ => "string".into(),
        };
        json_schema!({
            "type": kinds,
            "pattern": format!(r"^\s*{NUMBER_PATTERN}{UNIT_PATTERN}$"),
            "examples": [permitted.example],
            "$comment": format!("{} to {}", permitted.least, permitted.most),
        })
    }
}

/// A range of a quantity; its ends differ.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Span<M: Measure>(
    /// The range.
    pub Range<M::Value>,
);

/// A range of a quantity, or one fixed value.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fixable<M: Measure>(
    /// The range; its ends are equal if the value is fixed.
    pub Range<M::Value>,
);

fn read_range<M: Measure>(
    node: &Node,
    reader: &mut Reader<'_>,
    single: bool,
) -> Option<Range<M::Value>> {
    let permitted = M::PERMITTED;
    let (result, text) = match &node.value {
        Value::Text(text) => (permitted.read_range(text, single), text.clone()),
        Value::Number { value, .. } => (
            permitted.check(*value).map(|value| (value, value)),
            value.to_string(),
        ),
        _ => {
            let wanted = format!("the {} (like {})", permitted.name, permitted.example);
            reader.wrong_type(node, &wanted);
            return None;
        }
    };
    match result {
        Ok((least, most)) => Some(Range {
            least: least.into(),
            most: most.into(),
        }),
        Err(fault) => {
            explain(reader, node, &permitted, &fault, &text);
            None
        }
    }
}

impl<M: Measure> Read for Span<M> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        read_range::<M>(node, reader, false).map(Span)
    }
}

impl<M: Measure> Read for Fixable<M> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        read_range::<M>(node, reader, true).map(Fixable)
    }
}

fn range_schema(permitted: Permitted, single: bool) -> Schema {
    let unit = UNIT_PATTERN;
    let pattern = if single {
        format!(r"^\s*({NUMBER_PATTERN}.* to )?\s*{NUMBER_PATTERN}{unit}$")
    } else {
        format!(r"^\s*{NUMBER_PATTERN}.* to \s*{NUMBER_PATTERN}{unit}$")
    };
    json_schema!({
        "type": "string",
        "pattern": pattern,
        "examples": [permitted.example],
        "$comment": format!("{} to {}", permitted.least, permitted.most),
    })
}

impl<M: Measure> JsonSchema for Span<M> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("{} range", M::PERMITTED.name).into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        range_schema(M::PERMITTED, false)
    }
}

impl<M: Measure> JsonSchema for Fixable<M> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("{} range or value", M::PERMITTED.name).into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        range_schema(M::PERMITTED, true)
    }
}

/// A ratio: a positive number, or two with a slash between them.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Fraction<M: Measure<Value = f64>>(
    /// Its value.
    pub f64,
    PhantomData<M>,
);

impl<M: Measure<Value = f64>> Read for Fraction<M> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        let result = match &node.value {
            Value::Text(text) => match text.split_once('/') {
                Some((over, under)) => match (over.trim().parse(), under.trim().parse()) {
                    (Ok(over), Ok(under)) => M::PERMITTED.check(over_under(over, under)),
                    _ => Err(Fault::NotANumber),
                },
                None => {
                    return Quantity::<M>::read(node, reader).map(|q| Fraction(q.0, PhantomData));
                }
            },
            _ => return Quantity::<M>::read(node, reader).map(|q| Fraction(q.0, PhantomData)),
        };
        match result {
            Ok(value) => Some(Fraction(value, PhantomData)),
            Err(fault) => {
                explain(reader, node, &M::PERMITTED, &fault, "");
                None
            }
        }
    }
}

fn over_under(over: f64, under: f64) -> f64 {
    over / under
}

impl<M: Measure<Value = f64>> JsonSchema for Fraction<M> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        M::PERMITTED.name.into()
    }

    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let number = Quantity::<M>::json_schema(generator);
        json_schema!({
            "anyOf": [number, {
                "type": "string",
                "pattern": format!(r"^\s*{NUMBER_PATTERN}\s*(/\s*{NUMBER_PATTERN}\s*)?$"),
                "examples": ["1/200"],
            }],
        })
    }
}

/// One line of text for people.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Text(
    /// The text, trimmed; not empty.
    pub String,
);

/// Longest [`Text`] in characters.
const LONGEST_TEXT: usize = 300;

impl Read for Text {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        match &node.value {
            Value::Text(text) => {
                let text = text.trim();
                if text.is_empty() {
                    reader.fault(node.id, "this text is empty", vec![]);
                } else if text.chars().count() > LONGEST_TEXT {
                    let message = format!("this text is longer than {LONGEST_TEXT} characters");
                    reader.fault(node.id, message, vec![]);
                } else if text.chars().any(char::is_control) {
                    reader.fault(
                        node.id,
                        "this text must be one line of plain characters",
                        vec![],
                    );
                } else {
                    return Some(Text(text.to_owned()));
                }
            }
            Value::Number { .. } | Value::Bool(_) => reader.fault(
                node.id,
                format!("expected text, found {}", node.value.kind()),
                vec!["put it in quotes".to_owned()],
            ),
            _ => reader.wrong_type(node, "text"),
        }
        None
    }
}

impl JsonSchema for Text {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        "text".into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": "string", "minLength": 1, "maxLength": LONGEST_TEXT })
    }
}

/// A name that survives in a netlist: letters, digits and underscores, a letter first.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Name(
    /// The name.
    pub String,
);

/// Longest [`Name`].
const LONGEST_NAME: usize = 40;

impl Read for Name {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        let text = match &node.value {
            Value::Text(text) => text.clone(),
            Value::Number { value, .. } => value.to_string(),
            Value::Bool(value) => value.to_string(),
            _ => {
                reader.wrong_type(node, "a name");
                return None;
            }
        };
        let letters = |c: char| c.is_ascii_alphanumeric() || c == '_';
        let good = text.chars().all(letters)
            && text.starts_with(|c: char| c.is_ascii_alphabetic())
            && text.len() <= LONGEST_NAME;
        if good {
            return Some(Name(text));
        }
        let repaired: String = text
            .trim()
            .chars()
            .map(|c| if letters(c) { c } else { '_' })
            .take(LONGEST_NAME)
            .collect();
        let mut hints = vec![format!(
            "a name starts with a letter and has up to {LONGEST_NAME} letters, digits and underscores"
        )];
        if repaired.starts_with(|c: char| c.is_ascii_alphabetic()) && repaired != text {
            hints.insert(0, format!("write it like {repaired}"));
        }
        reader.fault(node.id, format!("{} is not a name", quote(&text)), hints);
        None
    }
}

impl JsonSchema for Name {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        "name".into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        let pattern = format!("^[A-Za-z][A-Za-z0-9_]{{0,{}}}$", LONGEST_NAME - 1);
        json_schema!({ "type": "string", "pattern": pattern })
    }
}

/// A whole number from `LEAST` to `MOST`.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Whole<const LEAST: u64, const MOST: u64>(
    /// The number.
    pub u64,
);

impl<const LEAST: u64, const MOST: u64> Read for Whole<LEAST, MOST> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        let wanted = format!("a whole number from {LEAST} to {MOST}");
        match &node.value {
            Value::Number {
                whole: Some(whole), ..
            } => match u64::try_from(*whole) {
                Ok(value) if (LEAST..=MOST).contains(&value) => return Some(Whole(value)),
                _ => reader.fault(node.id, format!("expected {wanted}, found {whole}"), vec![]),
            },
            Value::Number { value, .. } => {
                reader.fault(node.id, format!("expected {wanted}, found {value}"), vec![]);
            }
            Value::Text(text) => {
                reader.fault(
                    node.id,
                    format!("expected {wanted}, found {}", quote(text)),
                    vec![],
                );
            }
            _ => reader.wrong_type(node, &wanted),
        }
        None
    }
}

impl<const LEAST: u64, const MOST: u64> JsonSchema for Whole<LEAST, MOST> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("whole number from {LEAST} to {MOST}").into()
    }

    fn json_schema(_: &mut SchemaGenerator) -> Schema {
        json_schema!({ "type": "integer", "minimum": LEAST, "maximum": MOST })
    }
}

impl Read for bool {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        match node.value {
            Value::Bool(value) => Some(value),
            _ => {
                reader.wrong_type(node, "true or false");
                None
            }
        }
    }
}

/// A list with at least one entry and at most `MOST`.
#[derive(Debug, Clone, PartialEq)]
pub struct List<T, const MOST: usize>(
    /// The entries that could be read.
    pub Vec<At<T>>,
);

impl<T: Read, const MOST: usize> Read for List<T, MOST> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        let Value::List(items) = &node.value else {
            reader.wrong_type(node, "a list");
            return None;
        };
        if items.is_empty() {
            reader.fault(node.id, "the list is empty", vec![]);
            return None;
        }
        if items.len() > MOST {
            let message = format!("the list has {} entries, more than {MOST}", items.len());
            reader.fault(node.owner, message, vec![]);
            return None;
        }
        Some(List(
            items
                .iter()
                .filter_map(|item| reader.field(Some(item)))
                .collect(),
        ))
    }
}

impl<T: Read, const MOST: usize> JsonSchema for List<T, MOST> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("list of {}", T::schema_name()).into()
    }

    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let items = generator.subschema_for::<T>();
        json_schema!({ "type": "array", "items": items, "minItems": 1, "maxItems": MOST })
    }
}

/// A short form in one line, or a long form as a table or list.
#[derive(Debug, Clone, PartialEq)]
pub enum Either<S, L> {
    /// One line.
    Short(S),
    /// A table or a list.
    Long(L),
}

impl<S: Read, L: Read> Read for Either<S, L> {
    fn read(node: &Node, reader: &mut Reader<'_>) -> Option<Self> {
        match node.value {
            Value::Map(_) | Value::List(_) => L::read(node, reader).map(Either::Long),
            _ => S::read(node, reader).map(Either::Short),
        }
    }
}

impl<S: Read, L: Read> JsonSchema for Either<S, L> {
    fn inline_schema() -> bool {
        true
    }

    fn schema_name() -> Cow<'static, str> {
        format!("{} or {}", S::schema_name(), L::schema_name()).into()
    }

    fn json_schema(generator: &mut SchemaGenerator) -> Schema {
        let (short, long) = (
            generator.subschema_for::<S>(),
            generator.subschema_for::<L>(),
        );
        json_schema!({ "anyOf": [short, long] })
    }
}

/// A word out of a fixed set.
pub trait Choice: Sized + Copy + 'static {
    /// The set, in one sentence part: "the direction".
    const NAME: &'static str;
    /// Words and what they stand for.
    const WORDS: &'static [(&'static str, Self)];
}

/// Reads a word of a [`Choice`].
pub fn read_choice<C: Choice>(node: &Node, reader: &mut Reader<'_>) -> Option<C> {
    let words = C::WORDS.iter().map(|(word, _)| *word);
    let text = match &node.value {
        Value::Text(text) => text.clone(),
        Value::Number { value, .. } => value.to_string(),
        Value::Bool(value) => value.to_string(),
        _ => {
            reader.wrong_type(node, &either(words));
            return None;
        }
    };
    if let Some((_, choice)) = C::WORDS.iter().find(|(word, _)| *word == text.trim()) {
        return Some(*choice);
    }
    let hint = match closest(&text, words.clone()) {
        Some(word) => format!("did you mean \"{word}\"?"),
        None => format!("write {}", either(words)),
    };
    reader.fault(
        node.id,
        format!("unknown {} {}", C::NAME, quote(&text)),
        vec![hint],
    );
    None
}

/// Implements [`Choice`] and reading for an existing enum.
macro_rules! choice {
    ($type:ty = $name:literal { $( $word:literal => $value:expr, )+ }) => {
        impl $crate::yaml::Choice for $type {
            const NAME: &'static str = $name;
            const WORDS: &'static [(&'static str, Self)] = &[$( ($word, $value) ),+];
        }

        impl $crate::yaml::Read for $type {
            fn read(
                node: &$crate::yaml::Node,
                reader: &mut $crate::yaml::Reader<'_>,
            ) -> Option<Self> {
                $crate::yaml::read_choice(node, reader)
            }
        }

        impl schemars::JsonSchema for $type {
            fn inline_schema() -> bool {
                true
            }

            fn schema_name() -> std::borrow::Cow<'static, str> {
                $name.into()
            }

            fn json_schema(_: &mut schemars::SchemaGenerator) -> schemars::Schema {
                schemars::json_schema!({ "type": "string", "enum": [$( $word ),+] })
            }
        }
    };
}
pub(crate) use choice;
