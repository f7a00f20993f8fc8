//! Where mistakes stand, in which order, and in which words.

use eyot::mistake::{Mistake, Place};
use eyot::study::{POSITIVE, PROBABILITY, Table};

use super::{at, mistakes, parse};

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
fn places_in_a_long_list_are_found_quickly() {
    // Quadratic work would take minutes here; linear work takes a fraction of a second.
    let text = format!("a = [\n{}]", "0.25,\n".repeat(300_000));
    assert_eq!(parse(&text).root().numbers("a", PROBABILITY).unwrap().value.len(), 300_000);
}
