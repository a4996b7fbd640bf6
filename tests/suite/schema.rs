//! A reader of the part of JSON Schema (draft 2020-12) that our schemas use. It
//! refuses a keyword it does not know, so that no part of a schema is silently
//! without effect.

use serde_json::Value;

/// Everything in `value` that `schema` forbids, each with its place.
pub fn violations(schema: &Value, value: &Value) -> Vec<String> {
    let mut found = Vec::new();
    check(schema, schema, value, "", &mut found);
    found
}

fn check(top: &Value, schema: &Value, value: &Value, place: &str, found: &mut Vec<String>) {
    let keywords = schema.as_object().unwrap_or_else(|| panic!("the schema at {place} is an object"));
    for (keyword, wanted) in keywords {
        match keyword.as_str() {
            "$schema" | "$defs" | "title" | "description" => {}
            "$ref" => {
                let name =
                    wanted.as_str().and_then(|text| text.strip_prefix("#/$defs/")).expect("a local name");
                check(top, &top["$defs"][name], value, place, found);
            }
            "anyOf" => {
                let fits = wanted.as_array().unwrap().iter().any(|one| {
                    let mut inside = Vec::new();
                    check(top, one, value, place, &mut inside);
                    inside.is_empty()
                });
                complain(fits, found, place, "fits none of the forms");
            }
            "const" => complain(value == wanted, found, place, "is not the value wanted"),
            "enum" => {
                complain(wanted.as_array().unwrap().contains(value), found, place, "is not in the list")
            }
            "minimum" => {
                let enough = value.as_f64().is_none_or(|number| number >= wanted.as_f64().unwrap());
                complain(enough, found, place, "is too small");
            }
            "type" => {
                let names: Vec<&str> = match wanted {
                    Value::Array(list) => list.iter().filter_map(Value::as_str).collect(),
                    one => one.as_str().into_iter().collect(),
                };
                complain(names.iter().any(|name| is_a(value, name)), found, place, "is of another type");
            }
            "items" => {
                for (index, item) in value.as_array().into_iter().flatten().enumerate() {
                    check(top, wanted, item, &format!("{place}/{index}"), found);
                }
            }
            "required" => {
                for name in wanted.as_array().unwrap().iter().filter_map(Value::as_str) {
                    let there = value.as_object().is_none_or(|object| object.contains_key(name));
                    complain(there, found, place, &format!("lacks `{name}`"));
                }
            }
            "properties" => {
                for (name, part) in value.as_object().into_iter().flatten() {
                    match wanted.get(name) {
                        Some(schema) => check(top, schema, part, &format!("{place}/{name}"), found),
                        // Allowed by the schema, but what we write is described completely.
                        None => found.push(format!("{place} has `{name}`, which is not described")),
                    }
                }
            }
            other => panic!("the keyword `{other}` is not known here"),
        }
    }
}

fn complain(good: bool, found: &mut Vec<String>, place: &str, what: &str) {
    if !good {
        found.push(format!("{place} {what}"));
    }
}

fn is_a(value: &Value, name: &str) -> bool {
    match name {
        "object" => value.is_object(),
        "array" => value.is_array(),
        "string" => value.is_string(),
        "integer" => value.is_u64() || value.is_i64(),
        "boolean" => value.is_boolean(),
        "null" => value.is_null(),
        other => panic!("the type `{other}` is not known here"),
    }
}

#[test]
fn the_schema_reader_sees_what_is_wrong() {
    let schema: Value = serde_json::from_str(
        r##"{"type": "object", "required": ["a"], "properties": {"a": {"$ref": "#/$defs/n"}, "b": {"enum": ["x"]}},
            "$defs": {"n": {"type": ["integer", "null"], "minimum": 1}}}"##,
    )
    .unwrap();
    let number = |text: &str| violations(&schema, &serde_json::from_str(text).unwrap()).len();
    assert_eq!(number(r#"{"a": 1, "b": "x"}"#), 0);
    assert_eq!(number(r#"{"a": null}"#), 0);
    for wrong in
        [r#"{}"#, r#"{"a": 0}"#, r#"{"a": "1"}"#, r#"{"a": 1, "b": "y"}"#, r#"{"a": 1, "c": 2}"#, "[]"]
    {
        assert!(number(wrong) > 0, "{wrong}");
    }
}
