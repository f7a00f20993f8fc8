//! No text whatever makes the reader panic, or lose the place of a mistake.

use eyot::mistake::Place;
use eyot::study::{Item, NOT_NEGATIVE, POSITIVE, PROBABILITY, Settings, Table};
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

use super::{mistakes, parse};

/// Asks for everything under `key` in every way, down to the bottom.
fn ask_in_every_way(table: &Table<'_>, key: &str) {
    table.text(key);
    table.flag(key);
    table.number(key, PROBABILITY);
    table.whole(key, 1, 10);
    table.numbers(key, POSITIVE);
    table.texts(key);
    table.rows(key, NOT_NEGATIVE);
    table.choice(key, &[("stages", ()), ("counts", ())]);
    for inner in table.table(key).into_iter().chain(table.tables(key)) {
        ask_for_words(inner);
    }
    if let Some(Item::List(list)) = table.item(key) {
        for item in list.value {
            table.number_of(&item, POSITIVE);
            item.refuse(table.document(), "nothing");
        }
    }
}

/// Asks for every word that the example study uses, then for what nobody asked for.
fn ask_for_words(table: Table<'_>) {
    for key in EXAMPLE_KEYS {
        ask_in_every_way(&table, key);
    }
    table.finish();
}

const EXAMPLE: &str = include_str!("../../examples/thrindle/study.toml");
const EXAMPLE_KEYS: [&str; 20] = [
    "title",
    "seed",
    "horizon",
    "landscape",
    "patches",
    "capacity",
    "per_hectare",
    "life_history",
    "kind",
    "stage",
    "name",
    "survival",
    "mean",
    "sd",
    "environment",
    "correlation",
    "reach_km",
    "dispersal",
    "kernel",
    "shape",
];

/// Reads a text in every way; all places must lie within it, in order, and all messages be single lines.
fn is_read_soundly(text: &str) {
    let document = parse(text);
    let settings = Settings::read(&document.root());
    ask_for_words(document.root());
    let found = mistakes(&document);
    if settings.is_none() {
        assert!(!found.is_empty(), "no settings, and no reason why");
    }
    assert!(found.is_sorted_by(|a, b| a.place <= b.place));
    let lines: Vec<&str> = text.split('\n').collect();
    for mistake in found {
        assert!(!format!("{}{}", mistake.found, mistake.expected).contains('\n'), "{mistake:?}");
        if let Place::Text { line, column, .. } = mistake.place {
            assert!((1..=lines.len()).contains(&line), "{mistake:?}");
            assert!((1..=lines[line - 1].chars().count() + 1).contains(&column), "{mistake:?}");
        }
    }
}

/// Bits of text that are apt to break a reader of TOML.
fn scrap() -> impl Strategy<Value = String> {
    let tokens = prop::sample::select(vec![
        "[",
        "]",
        "[[",
        "]]",
        "{",
        "}",
        "=",
        ".",
        ",",
        "'",
        "\"",
        "'''",
        "\"\"\"",
        "#",
        "\n",
        "\r\n",
        "\r",
        "\t",
        "\\",
        "\\u12",
        "\u{feff}",
        "\u{0}",
        "é",
        "🦫",
        "nan",
        "-inf",
        "1e999",
        "99999999999999999999",
        "0x",
        "1979-05-27",
        "true",
        "title",
        "stage",
        "[life_history]",
        "[[life_history.stage]]",
        "survival.mean = 2",
        "seed = ",
        "x = [1,",
    ]);
    prop_oneof![3 => tokens.prop_map(str::to_owned), 1 => any::<char>().prop_map(String::from), 1 => "[a-z0-9_ .=]{0,6}"]
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 2_000, rng_seed: RngSeed::Fixed(31_415), failure_persistence: None, ..ProptestConfig::default() })]

    #[test]
    fn no_text_makes_the_reader_panic(text in any::<String>()) {
        is_read_soundly(&text);
    }

    #[test]
    fn no_scraps_of_toml_make_the_reader_panic(scraps in prop::collection::vec(scrap(), 0..40)) {
        is_read_soundly(&scraps.concat());
    }

    #[test]
    fn no_damaged_study_makes_the_reader_panic(
        cuts in prop::collection::vec((any::<prop::sample::Index>(), 0..12_usize, scrap()), 1..6)
    ) {
        let mut text: Vec<char> = EXAMPLE.chars().collect();
        for (start, length, scrap) in cuts {
            let start = start.index(text.len());
            let end = (start + length).min(text.len());
            text.splice(start..end, scrap.chars());
        }
        is_read_soundly(&text.into_iter().collect::<String>());
    }
}
