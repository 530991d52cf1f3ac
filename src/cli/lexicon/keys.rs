//! Keys of a file, read off its JSON Schema: what the reader checks is what is explained.

use super::{Entry, Kind};
use serde_json::{Map, Value};
use std::collections::BTreeSet;

/// Every key of a file, tables before what they hold.
pub fn of(kind: Kind, schema: &Value) -> Vec<Entry> {
    let mut walk = Walk {
        kind,
        definitions: &schema["$defs"],
        seen: BTreeSet::new(),
        entries: Vec::new(),
        owners: Vec::new(),
    };
    walk.table("", schema);
    walk.entries
}

struct Walk<'s> {
    kind: Kind,
    definitions: &'s Value,
    /// Tables already walked: the second of two equal ones repeats nothing.
    seen: BTreeSet<String>,
    entries: Vec<Entry>,
    /// What the table of each entry is.
    owners: Vec<&'s str>,
}

impl<'s> Walk<'s> {
    fn table(&mut self, path: &str, schema: &'s Value) {
        let Some(properties) = schema["properties"].as_object() else {
            return;
        };
        let about = text(schema, "description");
        for (key, value) in properties {
            let word = if path.is_empty() {
                key.clone()
            } else {
                format!("{path}.{key}")
            };
            let needed = schema["required"]
                .as_array()
                .is_some_and(|list| list.iter().any(|name| name == key));
            self.key(&word, about, value, needed);
        }
        for (key, value) in properties {
            let word = if path.is_empty() {
                key.clone()
            } else {
                format!("{path}.{key}")
            };
            self.tables_inside(&word, value);
        }
    }

    fn key(&mut self, word: &str, table: &'s str, schema: &'s Value, needed: bool) {
        let need = if needed {
            "Required"
        } else {
            "May be left out"
        };
        let form = format!("{need}. Written as {}.", self.forms(schema).join(", or "));
        let about = text(schema, "description");
        // The two current laws share key names: one entry tells both.
        let twin = self.entries.iter().position(|entry| entry.word == word);
        match twin {
            Some(index) => {
                let twin = &mut self.entries[index];
                if let ([first], Some(owner)) = (&mut twin.text[..], self.owners.get(index)) {
                    *first = format!("{owner} {first}");
                }
                twin.text.push(format!("{table} {about} {form}"));
            }
            None => {
                let entry = Entry::new(self.kind, word, about);
                self.entries.push(entry.says(form));
                self.owners.push(table);
            }
        }
    }

    /// Walks the tables that a key's value may be.
    fn tables_inside(&mut self, word: &str, schema: &'s Value) {
        if let Some(name) = reference(schema) {
            let definition = &self.definitions[name];
            if self.seen.insert(name.to_owned()) {
                if definition["properties"].is_object() {
                    self.table(word, definition);
                } else {
                    self.tables_inside(word, definition);
                }
            }
        }
        for part in schema["anyOf"].as_array().into_iter().flatten() {
            self.tables_inside(word, part);
        }
        if schema["items"].is_object() {
            self.tables_inside(word, &schema["items"]);
        }
        if let Some(value) = sourced(schema) {
            self.tables_inside(word, value);
        }
    }

    /// The ways in which a value may be written.
    fn forms(&self, schema: &Value) -> Vec<String> {
        if let Some(parts) = schema["anyOf"].as_array() {
            return parts.iter().flat_map(|part| self.forms(part)).collect();
        }
        if let Some(name) = reference(schema) {
            let definition = &self.definitions[name];
            if definition["properties"].is_object() {
                return vec![format!("a table: {}", keys(definition))];
            }
            return self.forms(definition);
        }
        if let Some(value) = sourced(schema) {
            let inner = self.forms(value).join(", or ");
            return vec![format!(
                "{{ value: ..., source: ... }}, the value as {inner}"
            )];
        }
        vec![self.form(schema)]
    }

    fn form(&self, schema: &Value) -> String {
        if let Some(words) = schema["enum"].as_array() {
            let words: Vec<String> = words.iter().map(bare).collect();
            return words.join(" | ");
        }
        let example = schema["examples"][0].as_str();
        let range = schema["$comment"].as_str().map(str::to_owned).or_else(|| {
            match (&schema["minimum"], &schema["maximum"]) {
                (Value::Null, _) | (_, Value::Null) => None,
                (least, most) => Some(format!("{least} to {most}")),
            }
        });
        let example = example.map(|text| format!("such as {text}"));
        let what = match schema["type"].as_str() {
            Some("boolean") => "true | false",
            Some("integer") => "a whole number",
            Some("number") => "a number",
            Some("array") => {
                let inner = self.forms(&schema["items"]).join(", or ");
                return format!("a list, each {inner}");
            }
            Some("object") => return format!("a table: {}", keys(schema)),
            _ if range.is_some() => "a quantity",
            _ => "text",
        };
        let range = range.map(|range| format!("({range})"));
        [Some(what.to_owned()), example, range]
            .into_iter()
            .flatten()
            .collect::<Vec<String>>()
            .join(" ")
    }
}

fn text<'v>(schema: &'v Value, key: &str) -> &'v str {
    schema[key].as_str().unwrap_or("")
}

fn bare(value: &Value) -> String {
    value
        .as_str()
        .map_or_else(|| value.to_string(), str::to_owned)
}

fn keys(table: &Value) -> String {
    let keys = table["properties"]
        .as_object()
        .into_iter()
        .flat_map(Map::keys);
    keys.map(String::as_str).collect::<Vec<_>>().join(", ")
}

fn reference(schema: &Value) -> Option<&str> {
    schema["$ref"].as_str()?.strip_prefix("#/$defs/")
}

/// The value of a value with its source.
fn sourced(schema: &Value) -> Option<&Value> {
    let properties = schema["properties"].as_object()?;
    if properties.len() == 2 && properties.contains_key("source") {
        properties.get("value")
    } else {
        None
    }
}
