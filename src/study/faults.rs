//! Faults of the TOML itself, in words for somebody who writes studies and not parsers.

/// What the parser says of a list without a comma.
const LIST_WITHOUT_COMMA: &str = "missing comma between array elements";

/// What the parser says of every line below a list or an inline table that is never closed.
const INSIDE: [&str; 3] =
    [LIST_WITHOUT_COMMA, "missing comma between key-value pairs", "missing key for inline table element"];

/// Whether the parser took the line for a part of a list or of an inline table.
pub(super) fn is_inside(message: &str) -> bool {
    INSIDE.iter().any(|start| message.starts_with(start))
}

/// What is expected where the parser says one of these (the beginnings of its messages).
const PLAIN: [(&str, &str); 13] = [
    ("string values must be quoted", "a number, true, false, or a text in quotation marks"),
    ("invalid basic string", "a quotation mark that closes the text, on the same line"),
    ("invalid literal string", "a quotation mark that closes the text, on the same line"),
    ("key with no value", "an equals sign and a value after the key"),
    ("unclosed array", "a bracket ] that closes what [ has opened"),
    ("unclosed inline table", "a brace } that closes what { has opened"),
    (LIST_WITHOUT_COMMA, "a comma between two values of a list, or the bracket ] that closes it"),
    ("unclosed table", "the bracket ] that closes the name of the table"),
    ("unclosed array table", "the brackets ]] that close the name of the table"),
    ("missing comma between key-value pairs", "a comma between two keys in braces, or the brace } that closes them"),
    ("missing key for inline table element", "a key in braces, or the brace } that closes what { has opened above"),
    ("extra `=`", "one equals sign"),
    ("extra comma in inline table", "a key and its value between two commas"),
];

/// What was expected where the parser says `message` about the text `line`, and what to do, if that can be told.
pub(super) fn plainly(message: &str, line: &str) -> (String, Option<String>) {
    let line = line.trim();
    if message == "duplicate key" {
        let advice = if line.starts_with('[') && !line.starts_with("[[") {
            format!("take one of the two out; tables of which there are several are each headed [{line}]")
        } else {
            "take one of the two out".to_owned()
        };
        return ("each key once in its table".to_owned(), Some(advice));
    }
    if has_decimal_comma(line) {
        let expected = "TOML: numbers with a decimal point".to_owned();
        return (expected, Some("write decimals with a point, 0.35 and not 0,35".to_owned()));
    }
    if let Some((expected, advice)) = of_the_line(message, line) {
        return (format!("TOML: {expected}"), Some(advice.to_owned()));
    }
    let plain = PLAIN.iter().find(|(start, _)| message.starts_with(start)).map_or(message, |(_, plain)| plain);
    (format!("TOML: {plain}"), None)
}

/// Slips that the line itself gives away.
fn of_the_line(message: &str, line: &str) -> Option<(&'static str, &'static str)> {
    if line.contains(['\u{201c}', '\u{201d}', '\u{2018}', '\u{2019}']) && message.starts_with("string values") {
        return Some(("a text in quotation marks", "use straight quotation marks, as code editors write them"));
    }
    if line.contains(" //") {
        return Some(("nothing after the value but a note", "begin notes with #, not with //"));
    }
    if message.starts_with("missing escaped value") && line.contains('\\') {
        return Some(("no single backslash in a text", "write paths with forward slashes, maps/patches.geojson"));
    }
    None
}

/// Whether a value on the line looks like `0,35`: digits, a comma and digits after an equals sign.
fn has_decimal_comma(line: &str) -> bool {
    line.split('=').skip(1).any(|value| {
        let value = value.trim_start().trim_start_matches(['-', '+']);
        let after_whole = value.trim_start_matches(|c: char| c.is_ascii_digit());
        let decimals = after_whole.strip_prefix(',').unwrap_or_default();
        after_whole.len() < value.len() && decimals.starts_with(|c: char| c.is_ascii_digit())
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_decimal_comma_is_known() {
        for line in ["a = 0,35", "survival = { mean = 0,35, sd = 0.1 }", "x=-1,5 # km"] {
            assert!(has_decimal_comma(line), "{line}");
        }
        for line in ["a = 0.35", "matrix = [[0,35], [1,2]]", "{ mean = 1, sd = 2", "a = ,3", "a 0,35"] {
            assert!(!has_decimal_comma(line), "{line}");
        }
    }
}
