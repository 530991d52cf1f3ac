//! `front.json` against its own schema, and against the outcome it tells of.

use super::fixture;
use biasloom::explore::Outcome;
use biasloom::report;
use serde_json::Value;

fn rendered(outcome: &Outcome) -> Value {
    let files = (report::json::FORMAT.render)(outcome);
    serde_json::from_slice(&files[0].1).unwrap()
}

/// The part of JSON Schema (draft 2020-12) that schemars uses for our types. Stricter in one
/// point: an object has exactly the schema's keys. An unknown keyword is a failure, so that
/// nothing goes unchecked.
fn check(value: &Value, schema: &Value, root: &Value, path: &str) -> Result<(), String> {
    let Some(schema) = schema.as_object() else {
        return Err(format!("{path}: no schema"));
    };
    for (keyword, rule) in schema {
        let ok = match keyword.as_str() {
            "$schema" | "$defs" | "title" | "description" | "format" => true,
            "$ref" => {
                let name = rule.as_str().unwrap().strip_prefix("#/$defs/").unwrap();
                check(value, &root["$defs"][name], root, path)?;
                true
            }
            "type" => {
                let fits = |kind: &Value| match kind.as_str().unwrap() {
                    "object" => value.is_object(),
                    "array" => value.is_array(),
                    "string" => value.is_string(),
                    "number" => value.is_number(),
                    "integer" => value.is_u64() || value.is_i64(),
                    "boolean" => value.is_boolean(),
                    "null" => value.is_null(),
                    other => panic!("unknown type {other}"),
                };
                rule.as_array()
                    .map_or_else(|| fits(rule), |kinds| kinds.iter().any(fits))
            }
            "const" => value == rule,
            "enum" => rule.as_array().unwrap().contains(value),
            "minimum" => value
                .as_f64()
                .is_none_or(|number| number >= rule.as_f64().unwrap()),
            "anyOf" | "oneOf" => {
                let fitting = rule.as_array().unwrap().iter();
                fitting
                    .filter(|rule| check(value, rule, root, path).is_ok())
                    .count()
                    == 1
            }
            "items" => {
                for (index, item) in value.as_array().into_iter().flatten().enumerate() {
                    check(item, rule, root, &format!("{path}[{index}]"))?;
                }
                true
            }
            "properties" => {
                if let Some(object) = value.as_object() {
                    let rules = rule.as_object().unwrap();
                    let mut found: Vec<&String> = object.keys().collect();
                    let mut wanted: Vec<&String> = rules.keys().collect();
                    found.sort();
                    wanted.sort();
                    if found != wanted {
                        return Err(format!("{path}: keys {found:?}, schema {wanted:?}"));
                    }
                    for (key, rule) in rules {
                        check(&object[key], rule, root, &format!("{path}.{key}"))?;
                    }
                }
                true
            }
            "required" => {
                let object = value.as_object();
                object.is_none_or(|object| {
                    rule.as_array()
                        .unwrap()
                        .iter()
                        .all(|key| object.contains_key(key.as_str().unwrap()))
                })
            }
            "additionalProperties" => *rule == Value::Bool(false),
            other => return Err(format!("{path}: keyword {other} is not checked")),
        };
        if !ok {
            return Err(format!("{path}: {value} against {keyword} {rule}"));
        }
    }
    Ok(())
}

fn schema() -> Value {
    serde_json::to_value(report::json::schema()).unwrap()
}

#[test]
fn has_exactly_the_schemas_keys() {
    let schema = schema();
    let mut interrupted = fixture::found();
    interrupted.status = biasloom::explore::Status::Interrupted;
    interrupted.front.truncate(1);
    for outcome in [
        fixture::found(),
        fixture::nothing_fits(),
        fixture::large(),
        interrupted,
    ] {
        check(&rendered(&outcome), &schema, &schema, "$").unwrap();
    }
}

/// The checker itself can fail: a key more, a key less, a wrong type, an unknown word.
#[test]
fn the_checker_refuses_what_is_wrong() {
    let schema = schema();
    let good = rendered(&fixture::found());
    let broken = |change: &dyn Fn(&mut Value)| {
        let mut value = good.clone();
        change(&mut value);
        check(&value, &schema, &schema, "$").unwrap_err()
    };
    assert!(broken(&|value| value["more"] = Value::Null).contains("keys"));
    assert!(
        broken(&|value| drop(value["front"][1].as_object_mut().unwrap().remove("rank")))
            .contains("$.front[1]")
    );
    assert!(broken(&|value| value["spec"]["seed"] = "seven".into()).contains("$.spec.seed"));
    broken(&|value| value["status"] = "finished".into());
    broken(&|value| value["front"][0]["outputs"][0]["rail"] = "both".into());
}

/// An unbounded resistance is no number in JSON (RFC 8259): it is `null`, and the schema says so.
#[test]
fn a_value_that_is_not_finite_is_null() {
    let mut outcome = fixture::found();
    outcome.front[0].outputs[1].output_resistance = f64::INFINITY;
    let value = rendered(&outcome);
    assert!(value["front"][0]["outputs"][1]["output_resistance"].is_null());
    check(&value, &schema(), &schema(), "$").unwrap();
}

/// Shortest round-trip: every number reads back to the very same bits.
#[test]
fn numbers_read_back_exactly() {
    let outcome = fixture::found();
    let value = rendered(&outcome);
    for (network, json) in outcome.front.iter().zip(value["front"].as_array().unwrap()) {
        for (device, json) in network
            .devices
            .iter()
            .zip(json["devices"].as_array().unwrap())
        {
            assert_eq!(json["name"], device.name.as_str());
            assert_eq!(json["area"].as_f64(), Some(device.area));
            assert_eq!(json["width"].as_f64(), Some(device.width));
            assert_eq!(json["ohms"].as_f64(), device.ohms);
        }
        for (output, json) in network
            .outputs
            .iter()
            .zip(json["outputs"].as_array().unwrap())
        {
            let currents = json["curve"]["nominal"].as_array().unwrap();
            let currents: Vec<f64> = currents
                .iter()
                .map(|value| value.as_f64().unwrap())
                .collect();
            assert_eq!(currents, output.curve.nominal);
            assert_eq!(
                json["budget"].as_array().unwrap().len(),
                output.budget.len()
            );
        }
    }
    assert_eq!(value["spec"]["seed"], 7);
    assert_eq!(value["work"]["dc_solutions"], 365_940);
    assert_eq!(value["work"]["not_converged"][0]["count"], 19);
    assert_eq!(value["format"], "biasloom-front");
    assert_eq!(value["version"], 1);
}

/// Keys stand in the order of the types, not of the alphabet.
#[test]
fn keys_keep_their_order() {
    let files = (report::json::FORMAT.render)(&fixture::found());
    let text = String::from_utf8(files[0].1.clone()).unwrap();
    let at = |key: &str| text.find(&format!("\n  \"{key}\":")).unwrap();
    let places = [
        "format",
        "version",
        "status",
        "card_title",
        "spec",
        "front",
        "nearest",
        "work",
    ]
    .map(at);
    assert!(places.is_sorted(), "{places:?}");
}
