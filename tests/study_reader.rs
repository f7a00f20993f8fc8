//! The collecting reader of study files, through its public face: what each getter refuses and in which words, where
//! mistakes stand, and that no text whatever makes it panic.
//!
//! The grammar that decides right from wrong here is TOML 1.0 (toml.io/en/v1.0.0); places are worked out by hand.

#![expect(clippy::unwrap_used, reason = "a test stops where a value is not as it should be")]

use std::path::Path;

use eyot::mistake::{Failure, Mistake, Place};
use eyot::study::{
    CsvTable, Document, Effort, Item, NOT_NEGATIVE, Numbers, POSITIVE, PROBABILITY, QuasiExtinction, Settings, Table,
};
use proptest::prelude::*;
use proptest::test_runner::RngSeed;

fn parse(text: &str) -> Document {
    Document::parse(Path::new("s.toml"), text.to_owned())
}

fn at(line: usize, column: usize) -> Place {
    Place::Text { file: "s.toml".into(), line, column }
}

fn mistakes(document: &Document) -> Vec<Mistake> {
    document.verdict().err().map(|mistakes| mistakes.into_vec()).unwrap_or_default()
}

/// Reads `text` with `read` and gives each mistake as `line:column found | expected | advice`.
fn told(text: &str, read: impl Fn(&Table<'_>)) -> Vec<String> {
    let document = parse(text);
    read(&document.root());
    let tell = |mistake: Mistake| {
        let place = mistake.place.to_string();
        let place = place.strip_prefix("s.toml").unwrap().trim_start_matches(':');
        let advice = mistake.advice.map(|advice| format!(" | {advice}")).unwrap_or_default();
        format!("{place} {} | {}{advice}", mistake.found, mistake.expected)
    };
    mistakes(&document).into_iter().map(tell).collect()
}

/// One value of every kind that TOML has, each under its own key; `t` is a table and `ts` an array of tables.
const EVERY_KIND: &str = "\
text = 'a'
whole = 3
number = 0.5
flag = true
date = 1979-05-27
list = [1]
inline = { a = 1 }
[t]
[[ts]]
";
const KINDS: [&str; 9] = ["text", "whole", "number", "flag", "date", "list", "inline", "t", "ts"];

/// Which of the kinds a getter takes; the others must each leave exactly one mistake at their key, in `words`.
fn takes(getter: impl Fn(&Table<'_>, &str) -> bool, words: &str) -> Vec<&'static str> {
    let mut taken = Vec::new();
    for kind in KINDS {
        let document = parse(EVERY_KIND);
        let is_taken = getter(&document.root(), kind);
        let found = mistakes(&document);
        if is_taken {
            assert_eq!(found, [], "{kind} is taken");
            taken.push(kind);
        } else {
            assert_eq!(found.len(), 1, "{kind}: {found:?}");
            assert_eq!(found[0].expected, words, "{kind}");
            assert!(found[0].found.starts_with(kind), "{kind}: {}", found[0].found);
        }
    }
    taken
}

#[test]
fn every_getter_takes_its_own_kind_and_refuses_the_others_once() {
    let wide = Numbers { low: 0.0, high: 9.0, above_low: false, below_high: false };
    assert_eq!(takes(|table, key| table.text(key).is_some(), "a text in quotation marks"), ["text"]);
    assert_eq!(takes(|table, key| table.flag(key).is_some(), "true or false"), ["flag"]);
    assert_eq!(takes(|table, key| table.number(key, wide).is_some(), "a number from 0 to 9"), ["whole", "number"]);
    assert_eq!(takes(|table, key| table.whole(key, 0, 9).is_some(), "a whole number from 0 to 9"), ["whole"]);
    assert_eq!(takes(|table, key| table.table(key).is_some(), "a table"), ["inline", "t"]);
    assert_eq!(takes(|table, key| table.choice(key, &[("a", 1), ("b", 2)]).is_some(), "\"a\" or \"b\""), ["text"]);
}

#[test]
fn lists_are_refused_item_by_item() {
    let read = |table: &Table<'_>| {
        assert!(table.numbers("n", PROBABILITY).is_none());
        assert!(table.texts("t").is_none());
        assert!(table.rows("r", POSITIVE).is_none());
        assert!(table.rows("flat", POSITIVE).is_none());
        assert!(table.tables("ts").is_empty());
        assert!(table.tables("one").is_empty());
        assert!(table.texts("none").unwrap().is_empty());
        assert_eq!(table.rows("ragged", POSITIVE).unwrap().value, [vec![1.0], vec![2.0, 3.0], vec![]]);
    };
    let text = "n = [0.1, 2, 'x']\nt = ['a', 1]\nr = [[1, 0], [true]]\nflat = [1]\nts = [3]\nnone = []\n\
                ragged = [[1], [2, 3], []]\n[one]\n";
    assert_eq!(
        told(text, read),
        [
            "1:11 n.2 = 2 | a number from 0 to 1",
            "1:14 n.3 = 'x' | a number from 0 to 1",
            "2:11 t.2 = 1 | a list of texts in quotation marks",
            "3:10 r.1.2 = 0 | a number above 0",
            "3:15 r.2.1 = true | a number above 0",
            "4:9 flat.1 = 1 | a list of rows, each a list of numbers",
            "5:7 ts.1 = 3 | a table",
            "8:2 one | tables, each under [[one]]",
        ]
    );
}

#[test]
fn a_missing_key_is_no_mistake_of_the_getter() {
    let document = parse("");
    let table = document.root();
    assert!(table.text("a").is_none() && table.flag("b").is_none() && table.item("c").is_none());
    assert!(table.number("d", POSITIVE).is_none() && table.whole("e", 0, 1).is_none());
    assert!(
        table.texts("f").is_none() && table.numbers("g", POSITIVE).is_none() && table.rows("h", POSITIVE).is_none()
    );
    assert!(table.table("i").is_none() && table.tables("j").is_empty() && table.choice("k", &[("x", ())]).is_none());
    assert!(!table.has("a"));
    table.finish();
    assert!(document.is_clean());
}

#[test]
fn numbers_keep_to_their_range_and_nothing_is_infinite() {
    let half_open = Numbers { low: 0.0, high: 1.0, above_low: true, below_high: true };
    let below = Numbers { low: f64::NEG_INFINITY, high: 1.0, above_low: false, below_high: true };
    let any = Numbers { low: f64::NEG_INFINITY, high: f64::INFINITY, above_low: false, below_high: false };
    let cases: [(&str, Numbers, bool); 22] = [
        ("0", PROBABILITY, true),
        ("1", PROBABILITY, true),
        ("1.0000000000000002", PROBABILITY, false),
        ("-1e-300", PROBABILITY, false),
        ("0", half_open, false),
        ("1.0", half_open, false),
        ("0.5", half_open, true),
        ("0.0", POSITIVE, false),
        ("-0.0", POSITIVE, false),
        ("5e-324", POSITIVE, true),
        ("0", NOT_NEGATIVE, true),
        ("1.7976931348623157e308", NOT_NEGATIVE, true),
        ("1e309", NOT_NEGATIVE, false),
        ("inf", NOT_NEGATIVE, false),
        ("nan", PROBABILITY, false),
        ("-nan", NOT_NEGATIVE, false),
        ("nan", any, false),
        ("+inf", any, false),
        ("-inf", any, false),
        ("-1e300", any, true),
        ("2", Numbers::above(2.0), false),
        ("-inf", below, false),
    ];
    for (words, numbers, is_taken) in cases {
        let document = parse(&format!("x = {words}"));
        let number = document.root().number("x", numbers);
        assert_eq!(number.is_some(), is_taken, "{words} in {numbers}");
        assert_eq!(document.is_clean(), is_taken, "{words} in {numbers}");
    }
    assert_eq!(half_open.to_string(), "a number above 0 and below 1");
    assert_eq!(Numbers { above_low: false, ..half_open }.to_string(), "a number 0 or above and below 1");
    assert_eq!(Numbers { below_high: false, ..half_open }.to_string(), "a number above 0 and at most 1");
    assert_eq!(below.to_string(), "a number below 1");
    assert_eq!(any.to_string(), "a number");
    assert_eq!(NOT_NEGATIVE.to_string(), "a number 0 or above");
}

#[test]
fn whole_numbers_are_exact_and_huge_ones_are_refused_in_words() {
    // 2^53 + 1 has no double, 2^63 - 1 is the largest of TOML
    let text = "a = 9_007_199_254_740_993\nb = 9223372036854775807\nc = 0xFF\nd = 0o17\ne = 0b101";
    let document = parse(text);
    let root = document.root();
    let whole = |key: &str| root.whole(key, 0, u64::MAX).unwrap().value;
    assert_eq!(["a", "b", "c", "d", "e"].map(whole), [9_007_199_254_740_993, i64::MAX as u64, 255, 15, 5]);
    assert!(document.is_clean());

    let read = |table: &Table<'_>| {
        for key in ["f", "g", "h", "i", "j"] {
            assert!(table.whole(key, 1, u64::MAX).is_none());
        }
        assert!(table.whole("k", 1, 5).is_none());
        assert!(table.number("l", POSITIVE).is_none());
    };
    let text = "f = 9223372036854775808\ng = 0\nh = -1\ni = 1.0\nj = nan\nk = 99999999999999999999999\nl = 1e999";
    assert_eq!(
        told(text, read),
        [
            "1:1 f = 9223372036854775808 | a whole number from 1 to 9223372036854775807",
            "2:1 g = 0 | a whole number, 1 or above",
            "3:1 h = -1 | a whole number, 1 or above",
            "4:1 i = 1.0 | a whole number, 1 or above",
            "5:1 j = nan | a whole number, 1 or above",
            "6:1 k = 99999999999999999999999 | a whole number from 1 to 5",
            "7:1 l = 1e999 | a number above 0, and not too large to hold",
        ]
    );
}

const TOP: &str = "title = 'a'\nseed = 1\nhorizon = 50\nreplicates = 10\n";

fn read_settings(table: &Table<'_>) {
    assert!(Settings::read(table).is_none());
}

#[test]
fn settings_name_all_that_is_missing_at_once() {
    let missing = [
        " title is missing | a text that names the study",
        " seed is missing | a whole number, 0 or above, so that the study can be run again to the same result",
        " horizon is missing | the years to look ahead, such as 100",
        " replicates is missing | replicates = 1000, or precision = 0.01 to let the tool choose their number",
    ];
    assert_eq!(told("", read_settings), missing);
    for (line, expected) in TOP.lines().zip(missing) {
        assert_eq!(told(&TOP.replace(line, ""), read_settings), [expected]);
    }
}

#[test]
fn settings_read_what_is_there() {
    let document = parse(&format!("{TOP}quasi_extinction = 20\ngeneration_years = 2.5\n"));
    let settings = Settings::read(&document.root()).unwrap();
    assert!(document.is_clean());
    assert_eq!((settings.title.as_str(), settings.seed, settings.horizon), ("a", 1, 50));
    assert_eq!((settings.effort, settings.generation_years), (Effort::Replicates(10), Some(2.5)));
    assert_eq!(settings.quasi_extinction, Some(QuasiExtinction { below: 20, stages: Vec::new() }));

    let document = parse("title='a'\nseed=1\nhorizon=5\nprecision=0.01\nquasi_extinction={below=2,stages=['b','a']}");
    let settings = Settings::read(&document.root()).unwrap();
    assert_eq!(settings.effort, Effort::Precision(0.01));
    assert_eq!(settings.counted_stages(&["a", "b", "c"]), Ok(vec![1, 0]));
    let mistakes = settings.counted_stages(&["A", "young"]).unwrap_err();
    assert_eq!(mistakes.len(), 2);
    assert_eq!(mistakes[1].found, "quasi_extinction.stages.2 = 'a'");
    assert_eq!(mistakes[1].advice.as_deref(), Some("write \"A\""));
}

#[test]
fn settings_refuse_each_wrong_value() {
    let text = "title = 1\nseed = -1\nhorizon = 0\nreplicates = 0\ngeneration_years = 0\nquasi_extinction = 2.5";
    assert_eq!(
        told(text, read_settings),
        [
            "1:1 title = 1 | a text in quotation marks",
            "2:1 seed = -1 | a whole number, 0 or above",
            "3:1 horizon = 0 | a whole number from 1 to 100000",
            "4:1 replicates = 0 | a whole number from 1 to 10000000",
            "5:1 generation_years = 0 | a number above 0",
            "6:1 quasi_extinction = 2.5 | a whole number from 1 to 4294967295",
        ]
    );
    let both = "title='a'\nseed=1\nhorizon=5\nreplicates=1\nprecision=0.01";
    let clash = "either replicates or precision, not both | take one of the two out";
    assert_eq!(told(both, read_settings), [format!("4:1 replicates = 1 | {clash}")]);
    let both_and_one_wrong = both.replace("replicates=1", "replicates=0");
    assert_eq!(
        told(&both_and_one_wrong, read_settings),
        [
            "4:1 replicates = 0 | a whole number from 1 to 10000000".to_owned(),
            format!("5:1 precision = 0.01 | {clash}")
        ]
    );
}

#[test]
fn quasi_extinction_counts_stages_that_are_there_once() {
    let of = |value: &str| format!("{TOP}quasi_extinction = {value}");
    let expected = "a whole number of individuals in the whole network, or { below = 20, stages = [...] }";
    let read = |table: &Table<'_>| drop(Settings::read(table));
    assert_eq!(told(&of("'few'"), read), [format!("5:1 quasi_extinction = 'few' | {expected}")]);
    assert_eq!(
        told(&of("{ stages = [] }"), read),
        [
            "5:1 quasi_extinction.below is missing | the threshold, in individuals of the whole network",
            "5:1 quasi_extinction.stages = [] | at least one stage; leave the key out to count all",
        ]
    );
    assert_eq!(
        told(&of("{ below = 1, stagse = ['a'] }"), read),
        ["5:33 quasi_extinction.stagse is not a key | one of: below, stages | write stages"]
    );
    let document = parse(&of("{ below = 1, stages = ['a', 'a'] }"));
    let settings = Settings::read(&document.root()).unwrap();
    assert_eq!(settings.counted_stages(&["a"]).unwrap_err()[0].expected, "each stage once");
}

#[test]
fn repeated_keys_are_told_in_plain_words() {
    let text = "a = 1\na = 2\n[t]\nx = 1\n[t]\ny = { z = 1, z = 2 }\n[[a]]\n";
    let once = "each key once in its table | take one of the two out";
    assert_eq!(
        told(text, |_| ()),
        [
            format!("2:1 a = 2 | {once}"),
            format!("5:2 [t] | {once}"),
            format!("6:14 y = {{ z = 1, z = 2 }} | {once}"),
            format!("7:3 [[a]] | {once}"),
        ]
    );
}

#[test]
fn all_faults_of_the_toml_are_told_together_with_other_mistakes() {
    let text = "title = \"abc\nseed = 12abc\nhorizon = \nreplicates = 01\nquasi_extinction = 'x'\nkey\n[t";
    let found = told(text, read_settings);
    let starts: Vec<&str> = found.iter().map(|line| line.split(" | ").next().unwrap()).collect();
    assert_eq!(
        starts,
        [
            "1:13 title = \"abc",
            "2:8 seed = 12abc",
            "3:11 horizon =",
            "4:14 replicates = 01",
            "5:1 quasi_extinction = 'x'",
            "6:4 key",
            "7:3 [t",
        ]
    );
    assert!(found.iter().filter(|line| !line.starts_with("5:")).all(|line| line.contains(" | TOML: ")), "{found:?}");
}

#[test]
fn no_key_is_called_missing_where_a_fault_may_hide_it() {
    // nothing below a key without a value is reached
    let text = "title = 'a'\nseed\nhorizon = 5\nreplicates = 10\n";
    let found = told(text, read_settings);
    assert_eq!(found.len(), 1);
    assert!(found[0].starts_with("2:5 seed | TOML: "), "{found:?}");
}

#[test]
fn what_the_toml_leaves_unsaid_is_not_read_as_if_it_were_said() {
    // One mistake each: the parser's stand-in for a broken value is neither taken nor refused a second time.
    for text in ["x = ", "x = 1abc", "x = [1, 2", "x = {a = 1", "x = \"\"\"a", "x = 1979-13-01", "x = [1 2]", "x = tru"]
    {
        let document = parse(text);
        let root = document.root();
        assert!(root.has("x"), "{text}");
        assert!(root.item("x").is_none(), "{text}");
        assert!(root.number("x", POSITIVE).is_none() && root.whole("x", 0, 9).is_none() && root.text("x").is_none());
        assert!(root.table("x").is_none() && root.tables("x").is_empty() && root.numbers("x", POSITIVE).is_none());
        root.finish();
        let found = mistakes(&document);
        assert!(!found.is_empty() && found.iter().all(|mistake| mistake.expected.starts_with("TOML: ")), "{found:?}");
    }
}

#[test]
fn unknown_keys_are_told_with_the_nearest_word() {
    let read = |table: &Table<'_>| {
        let inner = table.table("life_history").unwrap();
        for key in ["kind", "young", "c"] {
            assert!(inner.item(key).is_none());
        }
        inner.finish();
    };
    let text = "[life_history]\norigin = 'field notes'\nknid = 1\nYOUNG = 2\nb = 3\n\"a b\\n\" = 4\n'' = 5\n";
    let known = "one of: c, kind, young";
    assert_eq!(
        told(text, read),
        [
            format!("3:1 life_history.knid is not a key | {known} | write kind"),
            format!("4:1 life_history.YOUNG is not a key | {known} | write young"),
            format!("5:1 life_history.b is not a key | {known}"),
            format!("6:1 life_history.\"a b\\n\" is not a key | {known}"),
            format!("7:1 life_history.'' is not a key | {known}"),
        ]
    );
    let origin_only = |table: &Table<'_>| table.table("t").unwrap().finish();
    assert_eq!(told("[t]\norigin = 3\n", origin_only), ["2:1 t.origin = 3 | a text in quotation marks"]);
}

#[test]
fn wrong_choices_are_told_with_the_nearest_word() {
    let forms = [("none", 0), ("ceiling", 1), ("beverton-holt", 2)];
    let read = |table: &Table<'_>| assert!(table.choice("form", &forms).is_none());
    let expected = "\"none\", \"ceiling\" or \"beverton-holt\"";
    assert_eq!(
        told("form = 'beverton holt'", read),
        [format!("1:1 form = 'beverton holt' | {expected} | write \"beverton-holt\"")]
    );
    assert_eq!(told("form = 'logistic'", read), [format!("1:1 form = 'logistic' | {expected}")]);
    assert_eq!(parse("form = 'ceiling'").root().choice("form", &forms).unwrap().value, 1);
}

/// Where the key `x` stands, found by way of `path`: names of tables, or positions in arrays of tables.
fn place_of_x(text: &str, path: &[&str]) -> Place {
    fn descend(table: Table<'_>, path: &[&str]) -> Place {
        match path {
            [] => table.number("x", POSITIVE).unwrap().place,
            [key, position, rest @ ..] if position.parse::<usize>().is_ok() => {
                descend(table.tables(key).swap_remove(position.parse().unwrap()), rest)
            }
            [key, rest @ ..] => descend(table.table(key).unwrap(), rest),
        }
    }
    let document = parse(text);
    let place = descend(document.root(), path);
    assert!(document.is_clean());
    place
}

#[test]
fn a_key_knows_its_line_and_column() {
    assert_eq!(place_of_x("x = 1", &[]), at(1, 1));
    assert_eq!(place_of_x("\n\n  x = 1", &[]), at(3, 3));
    assert_eq!(place_of_x("\u{feff}x = 1", &[]), at(1, 1));
    assert_eq!(place_of_x("\u{feff}# a\nx = 1", &[]), at(2, 1));
    assert_eq!(place_of_x("a = { b = { c = 2, x = 1 } }", &["a", "b"]), at(1, 20));
    assert_eq!(place_of_x("a.b.x = 1", &["a", "b"]), at(1, 5));
    assert_eq!(place_of_x("[a]\nb.x = 1", &["a", "b"]), at(2, 3));
    assert_eq!(place_of_x("[a.b]\ny = 1\n[a]\nx = 1", &["a"]), at(4, 1));
    assert_eq!(place_of_x("[[a]]\ny = 1\n[[a]]\nx = 1", &["a", "1"]), at(4, 1));
    assert_eq!(place_of_x("[[a]]\n[[a.b]]\n[[a.b]]\n x = 1\n[[a]]", &["a", "0", "b", "1"]), at(4, 2));
    assert_eq!(place_of_x("a = [{ y = 1 },\n  { x = 1 }]", &["a", "1"]), at(2, 5));
    assert_eq!(place_of_x("s = \"\"\"\nx = 3\n\"\"\"\nx = 1", &[]), at(4, 1));
    assert_eq!(place_of_x("s = '''\r\n\r\n'''\r\nx = 1\r\n", &[]), at(4, 1));
    assert_eq!(place_of_x("# a\r\n\r\n[b]\r\nx = 1\r\n", &["b"]), at(4, 1));
    assert_eq!(place_of_x("\"ö\" = { 'é' = 1, x = 1 }", &["ö"]), at(1, 18));
    assert_eq!(place_of_x("s = '🦫 Äïø' # ñ\na = { s = '🦫', x = 1 }", &["a"]), at(2, 16));
    assert_eq!(place_of_x("a = { s = \"\"\"\n🦫\"\"\", x = 1 }", &["a"]), at(2, 7));
}

#[test]
fn tables_know_where_they_begin_and_what_they_are_called() {
    let document = parse("[a]\n[a.b]\n[[c]]\n  [[c]]\nd = { e = 1 }\n");
    let root = document.root();
    assert_eq!((root.place().clone(), root.path()), (Place::file("s.toml"), ""));
    let a = root.table("a").unwrap();
    let b = a.table("b").unwrap();
    assert_eq!((a.place(), a.path(), b.place(), b.path()), (&at(1, 2), "a", &at(2, 4), "a.b"));
    let mut c = root.tables("c").pop().unwrap();
    assert_eq!((c.place(), c.path()), (&at(4, 3), "c.2"));
    c.rename("c.juvenile".to_owned());
    assert_eq!(c.address("d"), "c.juvenile.d");
    assert_eq!(c.table("d").unwrap().address("e"), "c.juvenile.d.e");
    c.missing("f", "an f");
    assert_eq!(mistakes(&document), [Mistake::new(at(4, 3), "c.juvenile.f is missing", "an f")]);
}

#[test]
fn words_are_one_short_line_without_control_characters() {
    let long = "x".repeat(90);
    let text = format!("a = '{long}'\nb = \"\"\"one\ntwo\"\"\"\nc = [1,\n2]\nd\u{1b}[31m = 1\n");
    let document = parse(&text);
    let root = document.root();
    for key in ["a", "b", "c"] {
        assert!(root.flag(key).is_none());
    }
    root.finish();
    let found: Vec<String> = mistakes(&document).into_iter().map(|mistake| mistake.found).collect();
    assert_eq!(found[0], format!("a = '{} ...", &long[..59]));
    assert_eq!(found[1..3], ["b = \"\"\"one ...".to_owned(), "c = [1, ...".to_owned()]);
    assert!(found.len() > 3 && found.iter().all(|found| !found.contains(char::is_control)), "{found:?}");
}

#[test]
fn mistakes_stand_in_order_and_each_once() {
    let document = parse("a = 1\nb = 2\n");
    let root = document.root();
    for _ in 0..2 {
        assert!(root.text("b").is_none() && root.flag("b").is_none() && root.text("a").is_none());
    }
    root.missing("c", "a c");
    let found = mistakes(&document);
    let places: Vec<&Place> = found.iter().map(|mistake| &mistake.place).collect();
    assert_eq!(places, [&Place::file("s.toml"), &at(1, 1), &at(2, 1), &at(2, 1)]);
}

#[test]
fn nesting_without_end_is_refused() {
    for deep in [100, 10_000, 200_000] {
        for text in [
            format!("a = {}1{}", "[".repeat(deep), "]".repeat(deep)),
            format!("a = {}", "[".repeat(deep)),
            format!("a = {}1{}", "{a=".repeat(deep), "}".repeat(deep)),
            format!("{}a = 1", "a.".repeat(deep)),
            format!("[{}a]", "a.".repeat(deep)),
            format!("[[{}a]]", "a.".repeat(deep)),
        ] {
            let document = parse(&text);
            document.root().item("a");
            assert!(!document.is_clean());
            assert!(mistakes(&document).iter().all(|mistake| mistake.found.len() < 100));
        }
    }
}

#[test]
fn places_in_a_long_list_are_found_quickly() {
    // Quadratic work would take minutes here; linear work takes a fraction of a second.
    let text = format!("a = [\n{}]", "0.25,\n".repeat(300_000));
    assert_eq!(parse(&text).root().numbers("a", PROBABILITY).unwrap().value.len(), 300_000);
}

#[test]
fn files_that_are_not_studies_are_told_apart() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("s.toml");
    let Err(Failure::Input(missing)) = Document::open(&file) else { panic!("a file that is not there") };
    assert_eq!(missing.as_slice()[0].place, Place::file(&file));

    std::fs::write(&file, b"a = 1\nb = '\xc3\xb6\xff'\n").unwrap();
    let Err(Failure::Input(not_text)) = Document::open(&file) else { panic!("a file that is not text") };
    assert_eq!(not_text.as_slice()[0].place, Place::Text { file: file.clone(), line: 2, column: 7 });

    std::fs::write(&file, "a = 1\n").unwrap();
    let document = Document::open(&file).unwrap();
    // SHA-256 of these six bytes, by `printf 'a = 1\n' | sha256sum` of GNU coreutils
    let inputs = document.inputs();
    assert_eq!(inputs[0].path, "s.toml");
    assert_eq!(inputs[0].sha256, "cb78bd8a17f7b751fe0d4663366dcbc257204033ef7ddd64b1f2969573b5b2e2");
    assert!(matches!(Document::open(folder.path()), Err(Failure::System { .. })));
}

fn read_csv(bytes: &[u8]) -> (Option<CsvTable>, Vec<String>) {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("a.csv"), bytes).unwrap();
    let document = Document::parse(&folder.path().join("s.toml"), "t = 'a.csv'".to_owned());
    let table = CsvTable::read(&document, &document.root().text("t").unwrap());
    if let Some(table) = &table {
        assert_eq!(document.inputs().len(), 2);
        for (row, column) in table.rows.iter().flat_map(|row| table.column(&document, "n").map(|column| (row, column)))
        {
            table.number(&document, row, column, NOT_NEGATIVE);
        }
    }
    let line = |mistake: Mistake| match mistake.place {
        Place::Row { line, .. } => format!("{line} {} | {}", mistake.found, mistake.expected),
        other => panic!("{other}"),
    };
    (table, mistakes(&document).into_iter().map(line).collect())
}

#[test]
fn csv_rows_know_their_line_as_an_editor_counts() {
    for line_end in ["\n", "\r\n", "\r"] {
        let text = "\u{feff}patch, n \n\nA,1\n\"B\nb\",2\n,\n\n C ,x\nD,3".replace('\n', line_end);
        let (table, found) = read_csv(text.as_bytes());
        let table = table.unwrap();
        assert_eq!(table.header, ["patch", "n"]);
        let rows: Vec<(usize, &str)> = table.rows.iter().map(|row| (row.line, row.cells[1].as_str())).collect();
        assert_eq!(rows, [(3, "1"), (4, "2"), (8, "x"), (9, "3")], "{line_end:?}");
        assert_eq!(found, ["8 n = x | a number 0 or above"], "{line_end:?}");
    }
}

#[test]
fn csv_tables_tell_every_row_that_is_wrong() {
    let told = |bytes: &[u8]| read_csv(bytes).1;
    assert_eq!(
        told(b"n,m\r\n1\r\n1,2,3\r\n\xff,2\r\n1,2\r\n"),
        [
            "2 1 | 2 cells, as the header has",
            "3 1,2,3 | 2 cells, as the header has",
            "4 a row that cannot be read | CSV in UTF-8"
        ]
    );
    assert_eq!(told(b"n,\xff\n1,2\n"), ["1 a header that cannot be read | CSV in UTF-8"]);
    assert_eq!(told(b"n;m\n1;2\n"), ["1 n;m | columns parted by commas"]);
    assert_eq!(told(b"n\tm\n1\t2\n"), ["1 n\tm | columns parted by commas"]);
    assert_eq!(told(b"n,m,n\n1,2,3\n"), ["1 header n,m,n | each column once"]);
    let cells = "n\nnan\ninf\n-1\n1e999\n0x10\n\"\"\n1 2\n";
    assert_eq!(told(cells.as_bytes()).len(), 6, "all but the empty row");
}

#[test]
fn a_csv_table_without_the_column_says_what_it_has() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("a.csv"), "patch,count\n").unwrap();
    let document = Document::parse(&folder.path().join("s.toml"), "t = 'a.csv'\nu = 'b.csv'".to_owned());
    let table = CsvTable::read(&document, &document.root().text("t").unwrap()).unwrap();
    assert_eq!((table.column(&document, "count"), table.column(&document, "Count")), (Some(1), None));
    assert!(CsvTable::read(&document, &document.root().text("u").unwrap()).is_none());
    let found = mistakes(&document);
    assert_eq!(found[0].found, "u = 'b.csv'");
    assert!(found[0].expected.starts_with("a file that can be read"));
    assert_eq!((found[1].found.as_str(), found[1].expected.as_str()), ("header patch,count", "a column Count"));
}

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

const EXAMPLE: &str = include_str!("../examples/thrindle/study.toml");
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
