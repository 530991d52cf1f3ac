//! A YAML text as a tree, and the way back from a node to its place.

use crate::diag::{Diagnostic, Diagnostics, Place};
use serde::de::{
    DeserializeSeed, Deserializer, EnumAccess, Error, MapAccess, SeqAccess, VariantAccess, Visitor,
};
use std::cell::RefCell;
use std::fmt;
use std::sync::Arc;

/// Most nodes a file may unfold into: a hundred times the largest spec that makes sense. Nested
/// aliases reach it long before they cost memory.
const MOST_NODES: u32 = 100_000;

/// Most opening brackets in a file. The parser's time grows with the square of the nesting of flow
/// collections, so the count is checked before it starts.
const MOST_BRACKETS: usize = 10_000;

/// A node of a YAML document.
#[derive(Debug, Clone, PartialEq)]
pub struct Node {
    /// Number in reading order; finds the place again.
    pub id: u32,
    /// Node to blame when something is missing here: the key of a value, else the node itself.
    pub owner: u32,
    /// What it holds.
    pub value: Value,
}

/// What a node holds.
#[derive(Debug, Clone, PartialEq)]
pub enum Value {
    /// Nothing.
    Null,
    /// `true` or `false`.
    Bool(bool),
    /// A number; `whole` if it is an integer.
    Number {
        /// As a double.
        value: f64,
        /// As an integer, if it is one.
        whole: Option<i128>,
    },
    /// Anything else that is one word or line.
    Text(String),
    /// A list.
    List(Vec<Node>),
    /// Pairs of key and value in file order, duplicates included.
    Map(Vec<(Node, Node)>),
    /// A node with a tag of its own; its content is not looked at.
    Tagged,
}

impl Value {
    /// What it is, in a sentence.
    pub fn kind(&self) -> &'static str {
        match self {
            Value::Null => "nothing",
            Value::Bool(_) => "true or false",
            Value::Number { .. } => "a number",
            Value::Text(_) => "text",
            Value::List(_) => "a list",
            Value::Map(_) => "a table of keys",
            Value::Tagged => "a tag",
        }
    }
}

/// The text of a file under the name by which the user knows it.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Source {
    file: String,
    text: Arc<str>,
}

impl Source {
    /// A text and its file name for messages. A byte order mark is dropped: editors do not count it
    /// as a column.
    pub fn new(file: &str, text: &str) -> Source {
        Source {
            file: file.to_owned(),
            text: text.trim_start_matches('\u{feff}').into(),
        }
    }

    /// File name for messages.
    pub fn file(&self) -> &str {
        &self.file
    }

    /// The text.
    pub fn text(&self) -> &Arc<str> {
        &self.text
    }

    /// Parses the text, which must hold one document.
    pub fn parse(&self) -> Result<Node, Diagnostics> {
        if self
            .text
            .bytes()
            .filter(|b| matches!(b, b'[' | b'{'))
            .count()
            > MOST_BRACKETS
        {
            return Err(self.refuse(None, "the file has too many brackets to be read", None));
        }
        let walk = RefCell::new(Walk::default());
        let mut documents = serde_yaml::Deserializer::from_str(&self.text);
        let Some(first) = documents.next() else {
            return Err(self.refuse(None, "the file is empty", None));
        };
        let root = Seed {
            walk: &walk,
            owner: None,
        }
        .deserialize(first)
        .map_err(|error| {
            let problem = error.to_string();
            if walk.borrow().count > MOST_NODES {
                return self.refuse(None, "the file unfolds into too many entries", None);
            }
            let offset = error.location().map(|location| location.index());
            let (message, hint, from) = words(&problem);
            let offset = match from {
                Shown::Problem => offset,
                Shown::Opening => self.opening(&problem).or(offset),
                Shown::Control => self
                    .text
                    .find(|c: char| c.is_control() && !"\n\r\t".contains(c)),
            };
            self.refuse(offset, &message, hint)
        })?;
        if documents.next().is_some() {
            return Err(self.refuse(
                self.second_document(),
                "the file holds more than one document",
                Some("keep one document per file: no second --- line"),
            ));
        }
        if root.value == Value::Null {
            return Err(self.refuse(None, "the file is empty", None));
        }
        Ok(root)
    }

    fn refuse(&self, offset: Option<usize>, message: &str, hint: Option<&str>) -> Diagnostics {
        let mut diagnostics = Diagnostics::new();
        diagnostics.add_text(&self.file, self.text.clone());
        let mut diagnostic = Diagnostic::error(message);
        diagnostic.hints.extend(hint.map(str::to_owned));
        diagnostics.push(match offset {
            Some(offset) => diagnostic.at(self.place_at(offset, 1)),
            None => diagnostic.at(Place {
                file: self.file.clone(),
                line: 0,
                column: 0,
                length: 1,
            }),
        });
        diagnostics
    }

    /// Byte offset of the construct that the parser was in when it failed: its messages end in
    /// `, while scanning a quoted scalar at line 2 column 8`.
    fn opening(&self, problem: &str) -> Option<usize> {
        let (_, context) = problem.split_once(", while ")?;
        let mut words = context.rsplit(' ');
        let column: usize = words.next()?.parse().ok()?;
        let line: usize = words.nth(1)?.parse().ok()?;
        let text = self.text.split_inclusive('\n').nth(line.checked_sub(1)?)?;
        let start: usize = self
            .text
            .split_inclusive('\n')
            .take(line - 1)
            .map(str::len)
            .sum();
        let before = text.chars().take(column.checked_sub(1)?);
        Some(start + before.map(char::len_utf8).sum::<usize>())
    }

    /// Start of the line that begins a second document: the first marker after any content.
    fn second_document(&self) -> Option<usize> {
        let mut content = false;
        let mut offset = 0;
        for line in self.text.split_inclusive('\n') {
            let marker = line.trim_end();
            let is_marker = marker == "---" || marker.starts_with("--- ");
            if content && (is_marker || marker == "...") {
                return Some(offset);
            }
            let plain = marker.trim_start();
            content |= !(plain.is_empty() || plain.starts_with(['#', '%'])) && marker != "---";
            offset += line.len();
        }
        None
    }

    /// The place of a node.
    pub fn place(&self, id: u32) -> Place {
        let walk = RefCell::new(Walk {
            stop_at: Some(id),
            ..Walk::default()
        });
        let found = serde_yaml::Deserializer::from_str(&self.text)
            .next()
            .and_then(|document| {
                Seed {
                    walk: &walk,
                    owner: None,
                }
                .deserialize(document)
                .err()
            })
            .and_then(|error| error.location())
            .map(|location| location.index());
        match found {
            Some(offset) => {
                let rest = self.text.get(offset..).unwrap_or("");
                let length = token_length(rest, walk.borrow().stopped_text.as_deref());
                self.place_at(offset, length)
            }
            None => Place {
                file: self.file.clone(),
                line: 1,
                column: 1,
                length: 1,
            },
        }
    }

    /// The place of a byte offset. Lines end at line feeds only, as editors count them; the parser
    /// has rarer ideas of a line break.
    fn place_at(&self, offset: usize, length: usize) -> Place {
        let mut offset = offset.min(self.text.len());
        while !self.text.is_char_boundary(offset) {
            offset -= 1;
        }
        let before = &self.text[..offset];
        let start = before.rfind('\n').map_or(0, |at| at + 1);
        Place {
            file: self.file.clone(),
            line: before.matches('\n').count() + 1,
            column: before[start..].chars().count() + 1,
            length,
        }
    }
}

/// Characters of the token at the start of `rest`, on its line.
fn token_length(rest: &str, text: Option<&str>) -> usize {
    let line = rest.split(['\n', '\r']).next().unwrap_or("");
    if let Some(quote @ ('"' | '\'')) = line.chars().next() {
        let mut escaped = false;
        for (index, c) in line.chars().enumerate().skip(1) {
            if c == quote && !escaped {
                return index + 1;
            }
            escaped = quote == '"' && c == '\\' && !escaped;
        }
        return line.chars().count();
    }
    match text {
        Some(text) if !text.is_empty() && line.starts_with(text) => text.chars().count(),
        _ if line.starts_with(['[', '{']) => {
            let close = if line.starts_with('[') { ']' } else { '}' };
            line.chars().position(|c| c == close).map_or(1, |at| at + 1)
        }
        _ => {
            let end = line
                .find([' ', '\t', ',', ']', '}', ':'])
                .unwrap_or(line.len());
            line[..end].chars().count().max(1)
        }
    }
}

/// Which place a complaint of the parser is shown at.
enum Shown {
    /// Where the parser gave up.
    Problem,
    /// Where the construct it gave up in begins.
    Opening,
    /// The first control character: the parser does not say where it is.
    Control,
}

/// The parser's complaint in our words, what would help, and where to show it.
fn words(problem: &str) -> (String, Option<&'static str>, Shown) {
    let plain = problem.split(" at line ").next().unwrap_or(problem);
    let plain = plain.split(" at position ").next().unwrap_or(plain);
    let plain = plain.split(", while ").next().unwrap_or(plain);
    let (message, hint, shown) = match plain {
        "mapping values are not allowed in this context" => (
            "a \": \" does not fit here",
            "keys of one table start in the same column; text that holds \": \" needs quotes",
            Shown::Problem,
        ),
        "found a tab character that violates indentation" => (
            "a tab in the indentation",
            "indent with spaces",
            Shown::Problem,
        ),
        "did not find expected key" => (
            "this does not fit what stands above it",
            "keys of one table start in the same column; text with odd signs needs quotes",
            Shown::Problem,
        ),
        "did not find expected '-' indicator" => (
            "this line does not fit the list above it",
            "items of one list start with \"- \" in the same column",
            Shown::Problem,
        ),
        "did not find expected ',' or ']'" => (
            "this list in brackets is not closed",
            "write it like [TT, SS, FF]",
            Shown::Opening,
        ),
        "did not find expected ',' or '}'" => (
            "this table in braces is not closed",
            "write it like {limit: 1 %, of: ratio}",
            Shown::Opening,
        ),
        "found character that cannot start any token" => (
            "a value cannot start with this sign",
            "indent with spaces, never tabs; put text that starts with @ or ` in quotes",
            Shown::Problem,
        ),
        "could not find expected ':'" => (
            "this line has no \": \" after its key",
            "write it like key: value",
            Shown::Opening,
        ),
        "found unexpected end of stream" => {
            ("the quotes opened here are not closed", "", Shown::Opening)
        }
        "control characters are not allowed" => (
            "a control character, which YAML does not allow",
            "",
            Shown::Control,
        ),
        "unknown anchor" => ("this alias has no anchor above it", "", Shown::Problem),
        "recursion limit exceeded" => ("the nesting is too deep", "", Shown::Problem),
        "repetition limit exceeded" => {
            ("the file unfolds into too many entries", "", Shown::Problem)
        }
        other => return (format!("this is not YAML: {other}"), None, Shown::Problem),
    };
    (
        message.to_owned(),
        (!hint.is_empty()).then_some(hint),
        shown,
    )
}

/// State shared by all seeds of one walk over a document.
#[derive(Default)]
struct Walk {
    count: u32,
    stop_at: Option<u32>,
    stopped_text: Option<String>,
}

/// Reads one node, or fails at the node the walk is to stop at.
#[derive(Clone, Copy)]
struct Seed<'a> {
    walk: &'a RefCell<Walk>,
    owner: Option<u32>,
}

impl Seed<'_> {
    fn node<E: Error>(&self, text: Option<&str>) -> Result<Node, E> {
        let mut walk = self.walk.borrow_mut();
        let id = walk.count;
        walk.count += 1;
        if walk.stop_at == Some(id) {
            walk.stopped_text = text.map(str::to_owned);
            return Err(E::custom("the place looked for"));
        }
        if walk.count > MOST_NODES {
            return Err(E::custom("too many entries"));
        }
        Ok(Node {
            id,
            owner: self.owner.unwrap_or(id),
            value: Value::Null,
        })
    }

    fn leaf<E: Error>(&self, value: Value) -> Result<Node, E> {
        let text = match &value {
            Value::Text(text) => Some(text.as_str()),
            _ => None,
        };
        let node = self.node(text)?;
        Ok(Node { value, ..node })
    }
}

impl<'de> DeserializeSeed<'de> for Seed<'_> {
    type Value = Node;

    fn deserialize<D: Deserializer<'de>>(self, deserializer: D) -> Result<Node, D::Error> {
        deserializer.deserialize_any(self)
    }
}

impl<'de> Visitor<'de> for Seed<'_> {
    type Value = Node;

    fn expecting(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str("any YAML")
    }

    fn visit_unit<E: Error>(self) -> Result<Node, E> {
        self.leaf(Value::Null)
    }

    /// How the parser presents a document without content.
    fn visit_none<E: Error>(self) -> Result<Node, E> {
        self.leaf(Value::Null)
    }

    fn visit_bool<E: Error>(self, value: bool) -> Result<Node, E> {
        self.leaf(Value::Bool(value))
    }

    fn visit_i64<E: Error>(self, value: i64) -> Result<Node, E> {
        self.visit_i128(value.into())
    }

    fn visit_u64<E: Error>(self, value: u64) -> Result<Node, E> {
        self.visit_i128(value.into())
    }

    fn visit_i128<E: Error>(self, value: i128) -> Result<Node, E> {
        self.leaf(Value::Number {
            value: value as f64,
            whole: Some(value),
        })
    }

    fn visit_u128<E: Error>(self, value: u128) -> Result<Node, E> {
        self.leaf(Value::Number {
            value: value as f64,
            whole: i128::try_from(value).ok(),
        })
    }

    fn visit_f64<E: Error>(self, value: f64) -> Result<Node, E> {
        self.leaf(Value::Number { value, whole: None })
    }

    fn visit_str<E: Error>(self, value: &str) -> Result<Node, E> {
        self.leaf(Value::Text(value.to_owned()))
    }

    fn visit_seq<A: SeqAccess<'de>>(self, mut access: A) -> Result<Node, A::Error> {
        let node = self.node(None)?;
        let mut items = Vec::new();
        while let Some(item) = access.next_element_seed(Seed {
            owner: None,
            ..self
        })? {
            items.push(item);
        }
        Ok(Node {
            value: Value::List(items),
            ..node
        })
    }

    fn visit_map<A: MapAccess<'de>>(self, mut access: A) -> Result<Node, A::Error> {
        let node = self.node(None)?;
        let mut pairs = Vec::new();
        while let Some(key) = access.next_key_seed(Seed {
            owner: None,
            ..self
        })? {
            let value = access.next_value_seed(Seed {
                owner: Some(key.id),
                ..self
            })?;
            pairs.push((key, value));
        }
        Ok(Node {
            value: Value::Map(pairs),
            ..node
        })
    }

    /// How the parser presents a tag.
    fn visit_enum<A: EnumAccess<'de>>(self, access: A) -> Result<Node, A::Error> {
        let node = self.node(None)?;
        let (_, content) = access.variant::<String>()?;
        content.newtype_variant_seed(Seed {
            owner: None,
            ..self
        })?;
        Ok(Node {
            value: Value::Tagged,
            ..node
        })
    }
}
