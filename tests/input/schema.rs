//! The JSON Schema and the reader agree: every key of the schema is accepted, every key the reader
//! names is in the schema, and every shipped file conforms.

use super::{read_spec, shipped_specs};
use biasloom::diag::Diagnostics;
use biasloom::{process, spec};
use serde_json::Value;
use std::collections::BTreeSet;

fn resolve<'a>(root: &'a Value, schema: &'a Value) -> &'a Value {
    match schema.get("$ref").and_then(Value::as_str) {
        Some(path) => resolve(root, root.pointer(path.trim_start_matches('#')).unwrap()),
        None => schema,
    }
}

/// Every table of keys in a schema, with the path of keys and list items that leads to it.
fn tables<'a>(
    root: &'a Value,
    schema: &'a Value,
    path: Vec<String>,
    out: &mut Vec<(Vec<String>, &'a Value)>,
) {
    let schema = resolve(root, schema);
    if let Some(properties) = schema.get("properties").and_then(Value::as_object) {
        out.push((path.clone(), schema));
        for (key, property) in properties {
            let mut deeper = path.clone();
            deeper.push(key.clone());
            tables(root, property, deeper, out);
        }
    }
    if let Some(items) = schema.get("items") {
        let mut deeper = path.clone();
        deeper.push("-".to_owned());
        tables(root, items, deeper, out);
    }
    for branch in schema
        .get("anyOf")
        .and_then(Value::as_array)
        .into_iter()
        .flatten()
    {
        tables(root, branch, path.clone(), out);
    }
}

/// A file that holds one table with one key at a path.
fn file_with(path: &[String], key: &str, model: &str) -> String {
    let mut text = format!("{{{key}: ~}}");
    for step in path.iter().rev() {
        text = match step.as_str() {
            "-" => format!("[{text}]"),
            // The parameters of a transistor are read under its model.
            "parameters" => format!("{{model: {model}, parameters: {text}}}"),
            _ => format!("{{{step}: {text}}}"),
        };
    }
    text
}

fn check(schema: &Value, read: impl Fn(&str) -> Diagnostics) -> usize {
    let mut found = Vec::new();
    tables(schema, schema, Vec::new(), &mut found);
    for (path, table) in &found {
        let keys: BTreeSet<&str> = table["properties"]
            .as_object()
            .unwrap()
            .keys()
            .map(String::as_str)
            .collect();
        let early = "early_per_length";
        let square = keys.contains(early) || path.iter().any(|step| step == early);
        let model = if square { "square" } else { "charge" };
        for key in &keys {
            let faults = read(&file_with(path, key, model));
            let unknown = faults.iter().find(|f| f.message.starts_with("unknown key"));
            assert!(unknown.is_none(), "{path:?} {key}: {unknown:?}");
        }
        // The reader lists its keys for a word it does not know.
        let faults = read(&file_with(path, "qqqqqqqqqqqqqqqqqqqq", model));
        let fault = faults
            .iter()
            .find(|f| f.message.starts_with("unknown key"))
            .unwrap();
        let listed = fault.hints[0].split_once(" are ").unwrap().1;
        let listed: BTreeSet<&str> = listed.split(", ").collect();
        assert_eq!(listed, keys, "{path:?}");
        assert_eq!(table["additionalProperties"], false);
        // What the schema calls required is missed by the reader, and nothing else.
        let required: BTreeSet<&str> = table["required"]
            .as_array()
            .unwrap()
            .iter()
            .map(|key| key.as_str().unwrap())
            .collect();
        for key in &keys {
            let missed = faults
                .iter()
                .any(|f| f.message.ends_with(&format!("needs the key \"{key}\"")));
            let either_or = ["flows", "range"].contains(key) && path == &["reference"];
            assert!(
                missed == required.contains(key) || either_or,
                "{path:?} {key}"
            );
        }
    }
    found.len()
}

#[test]
fn of_a_spec() {
    let tables = check(&spec::schema(), |text| read_spec(text).unwrap_err());
    assert_eq!(tables, 7);
}

#[test]
fn of_a_card() {
    let read = |text: &str| process::read(text, "card", "card.yaml").unwrap_err();
    assert!(check(&process::schema(), read) > 20);
}

/// What a schema says about a value, patterns left out: the reader checks texts far more strictly.
fn conforms(root: &Value, schema: &Value, value: &Value) -> Result<(), String> {
    let schema = resolve(root, schema);
    if let Some(branches) = schema.get("anyOf").and_then(Value::as_array) {
        let tried: Vec<String> = branches
            .iter()
            .filter_map(|branch| conforms(root, branch, value).err())
            .collect();
        return if tried.len() < branches.len() {
            Ok(())
        } else {
            Err(tried.join("; "))
        };
    }
    let kind = match value {
        Value::Object(_) => "object",
        Value::Array(_) => "array",
        Value::String(_) => "string",
        Value::Bool(_) => "boolean",
        Value::Number(n) if n.is_u64() || n.is_i64() => "integer",
        Value::Number(_) => "number",
        Value::Null => "null",
    };
    let fits = |wanted: &Value| wanted == kind || (wanted == "number" && kind == "integer");
    let types = match &schema["type"] {
        Value::Array(types) => types.iter().any(fits),
        one => fits(one),
    };
    if !types {
        return Err(format!("{value} is no {}", schema["type"]));
    }
    if let Some(words) = schema.get("enum").and_then(Value::as_array)
        && !words.contains(value)
    {
        return Err(format!("{value} is none of {words:?}"));
    }
    if let (Some(number), Some(least)) = (value.as_f64(), schema["minimum"].as_f64())
        && (number < least || number > schema["maximum"].as_f64().unwrap())
    {
        return Err(format!("{value} out of range"));
    }
    if let Value::Object(map) = value {
        for (key, value) in map {
            let property = schema["properties"]
                .get(key)
                .ok_or(format!("no key {key}"))?;
            conforms(root, property, value)?;
        }
        for key in schema["required"].as_array().unwrap() {
            if !map.contains_key(key.as_str().unwrap()) {
                return Err(format!("{key} is missing"));
            }
        }
    }
    if let Value::Array(items) = value {
        if items.len() > schema["maxItems"].as_u64().unwrap() as usize {
            return Err("too many items".to_owned());
        }
        for item in items {
            conforms(root, &schema["items"], item)?;
        }
    }
    Ok(())
}

#[test]
fn shipped_files_conform() {
    let (spec_schema, card_schema) = (spec::schema(), process::schema());
    for (name, text) in shipped_specs() {
        let value: Value = serde_yaml::from_str(&text).unwrap();
        conforms(&spec_schema, &spec_schema, &value).unwrap_or_else(|e| panic!("{name}: {e}"));
    }
    for (name, text) in process::SHIPPED {
        let value: Value = serde_yaml::from_str(text).unwrap();
        conforms(&card_schema, &card_schema, &value).unwrap_or_else(|e| panic!("{name}: {e}"));
    }
}

#[test]
fn a_file_that_does_not_conform_is_told_so() {
    let schema = spec::schema();
    let value = serde_json::json!({ "card": "generic-180", "supply": 3 });
    assert!(conforms(&schema, &schema, &value).is_err());
}

#[test]
fn every_key_is_explained() {
    for schema in [spec::schema(), process::schema()] {
        let mut found = Vec::new();
        tables(&schema, &schema, Vec::new(), &mut found);
        for (path, table) in found {
            for (key, property) in table["properties"].as_object().unwrap() {
                let explained = property.get("description").is_some() || key == "value";
                assert!(explained, "{path:?} {key}");
            }
        }
    }
}
