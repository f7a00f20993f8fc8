//! What each getter takes and refuses.

use eyot::study::{NOT_NEGATIVE, Numbers, POSITIVE, PROBABILITY, Table};

use super::{mistakes, parse, told};

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
