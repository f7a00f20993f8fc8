//! Text that is not TOML, and files that are not studies.

use eyot::mistake::{Failure, Place};
use eyot::study::{Document, POSITIVE};

use super::{mistakes, parse, read_settings, told};

#[test]
fn repeated_keys_are_told_in_plain_words() {
    let text = "a = 1\na = 2\n[t]\nx = 1\n[t]\ny = { z = 1, z = 2 }\n[[a]]\n";
    let once = "each key once in its table | take one of the two out";
    assert_eq!(
        told(text, |_| ()),
        [
            format!("2:1 a = 2 | {once}"),
            format!("5:2 [t] | {once}; tables of which there are several are each headed [[t]]"),
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
    let Err(Failure::Input(no_file)) = Document::open(folder.path()) else { panic!("a folder") };
    assert_eq!(no_file.as_slice()[0].place, Place::file(folder.path()));
}
