//! What patches are called.

use std::collections::BTreeMap;

use serde_json::Value;

use super::coordinates::kind;

/// The name that a JSON value gives to a patch: text without the blanks around it, or a number, where 12 and 12.0 are alike.
///
/// # Errors
/// Says what the value is, where it cannot be a name.
pub(super) fn name_of(value: &Value) -> Result<String, &'static str> {
    match value {
        Value::String(text) if text.trim().is_empty() => Err("empty"),
        Value::String(text) => Ok(text.trim().to_owned()),
        Value::Number(number) => Ok(match number.as_f64() {
            Some(float) if number.is_f64() => float.to_string(),
            _ => number.to_string(),
        }),
        other => Err(kind(other)),
    }
}

/// The name that a cell of a table means: as it stands, or, where no patch is called so, as the number that it is.
pub(super) fn name_of_cell<'n, T>(cell: &str, known: &'n BTreeMap<&str, T>) -> Option<&'n T> {
    known.get(cell).or_else(|| {
        let number: f64 = cell.parse().ok()?;
        known.get(number.to_string().as_str())
    })
}

#[cfg(test)]
mod tests {
    use serde_json::json;

    use super::*;

    #[test]
    fn numbers_and_texts_name_patches() {
        assert_eq!(name_of(&json!(12)), Ok("12".to_owned()));
        assert_eq!(name_of(&json!(12.0)), Ok("12".to_owned()));
        assert_eq!(name_of(&json!(12.5)), Ok("12.5".to_owned()));
        assert_eq!(name_of(&json!(9_007_199_254_740_993_i64)), Ok("9007199254740993".to_owned()));
        assert_eq!(name_of(&json!(" Alder Fen ")), Ok("Alder Fen".to_owned()));
        assert_eq!(name_of(&json!("  ")), Err("empty"));
        assert_eq!(name_of(&json!(null)), Err("null"));
        assert_eq!(name_of(&json!(true)), Err("true or false"));
    }

    #[test]
    fn a_cell_may_write_a_number_in_another_way() {
        let known = BTreeMap::from([("12", 0), ("007", 1)]);
        assert_eq!(name_of_cell("12.0", &known), Some(&0));
        assert_eq!(name_of_cell("007", &known), Some(&1));
        assert_eq!(name_of_cell("7", &known), None);
    }
}
