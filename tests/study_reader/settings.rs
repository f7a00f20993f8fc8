//! The settings at the top of a study.

use eyot::study::{Effort, QuasiExtinction, Settings, Table};

use super::{parse, read_settings, told};

const TOP: &str = "title = 'a'\nseed = 1\nhorizon = 50\nreplicates = 10\n";

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
    assert_eq!(settings.quasi_extinction, Some(QuasiExtinction { below: 20, stages: Vec::new(), in_each_patch: None }));

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
        ["5:33 quasi_extinction.stagse is not a key | one of: below, in_each_patch, stages | write stages"]
    );
    let document = parse(&of("{ below = 1, stages = ['a', 'a'] }"));
    let settings = Settings::read(&document.root()).unwrap();
    assert_eq!(settings.counted_stages(&["a"]).unwrap_err()[0].expected, "each stage once");
}
