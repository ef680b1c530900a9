//! As much of JSON Schema as the project's own schemas use.

use serde_json::Value;

/// What in `value` is against `schema`; `root` is what `$ref` points into.
pub(crate) fn violations(value: &Value, schema: &Value, root: &Value) -> Vec<String> {
    let mut found = Vec::new();
    walk(value, schema, root, "$", &mut found);
    found
}

fn walk(value: &Value, schema: &Value, root: &Value, at: &str, found: &mut Vec<String>) {
    for (keyword, wanted) in schema.as_object().into_iter().flatten() {
        let mut say = |what: String| found.push(format!("{at}: {what}"));
        match keyword.as_str() {
            "$ref" => {
                let path = wanted.as_str().and_then(|it| it.strip_prefix('#')).expect("a local reference");
                walk(value, root.pointer(path).expect("exists"), root, at, found);
            }
            "const" if value != wanted => say(format!("{value} is not {wanted}")),
            "enum" if !wanted.as_array().expect("a list").contains(value) => {
                say(format!("{value} is none of {wanted}"))
            }
            "minimum" if value.as_f64() < wanted.as_f64() => say(format!("{value} is below {wanted}")),
            "type" => {
                let is = match wanted.as_str().expect("one type") {
                    "object" => value.is_object(),
                    "array" => value.is_array(),
                    "string" => value.is_string(),
                    "boolean" => value.is_boolean(),
                    "integer" => value.is_u64() || value.is_i64(),
                    other => panic!("type {other} is not known here"),
                };
                if !is {
                    say(format!("{value} is no {wanted}"));
                }
            }
            "required" => {
                for key in wanted.as_array().expect("a list") {
                    if value.get(key.as_str().expect("a name")).is_none() {
                        say(format!("{key} is missing"));
                    }
                }
            }
            "properties" => {
                for (key, inner) in wanted.as_object().expect("an object") {
                    if let Some(value) = value.get(key) {
                        walk(value, inner, root, &format!("{at}.{key}"), found);
                    }
                }
            }
            "items" => {
                for (index, value) in value.as_array().into_iter().flatten().enumerate() {
                    walk(value, wanted, root, &format!("{at}[{index}]"), found);
                }
            }
            "allOf" => {
                for inner in wanted.as_array().expect("a list") {
                    walk(value, inner, root, at, found);
                }
            }
            "oneOf" => {
                let fits = wanted.as_array().expect("a list").iter();
                let fits = fits.filter(|inner| violations(value, inner, root).is_empty()).count();
                if fits != 1 {
                    say(format!("fits {fits} of the alternatives"));
                }
            }
            "const" | "enum" | "minimum" | "$schema" | "$defs" | "title" | "description" => {}
            other => panic!("{other} is not known here"),
        }
    }
}
