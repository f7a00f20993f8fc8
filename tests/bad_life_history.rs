//! What people's life histories get wrong: each is refused or warned of in words that say where and what to do.

use std::path::Path;

use eyot::demography::LifeHistory;
use eyot::mistake::Warning;
use eyot::study::Document;

/// Reads `[life_history]` from its text: the mistakes, or the warnings.
fn read(text: &str) -> Result<Vec<String>, Vec<String>> {
    let document = Document::parse(Path::new("study.toml"), format!("[life_history]\n{text}"));
    let life_history = document.root().table("life_history").and_then(LifeHistory::read);
    match document.verdict() {
        Ok(warnings) => {
            assert!(life_history.is_some(), "no life history and no mistake:\n{text}");
            Ok(warnings.iter().map(|warning| Warning(warning).to_string()).collect())
        }
        Err(mistakes) => Err(mistakes.into_vec().iter().map(ToString::to_string).collect()),
    }
}

/// One mistake that holds all these words.
fn assert_refused(text: &str, words: &[&str]) {
    let mistakes = read(text).expect_err(text);
    assert_eq!(mistakes.len(), 1, "{text}\n{mistakes:#?}");
    for word in words {
        assert!(mistakes[0].contains(word), "no `{word}` in:\n{}", mistakes[0]);
    }
}

/// As many warnings as there are words, each holding its own.
fn assert_warned(text: &str, words: &[&str]) {
    let warnings = read(text).unwrap_or_else(|mistakes| panic!("{text}\n{mistakes:#?}"));
    assert_eq!(warnings.len(), words.len(), "{text}\n{warnings:#?}");
    for (warning, word) in warnings.iter().zip(words) {
        assert!(warning.contains(word), "no `{word}` in:\n{warning}");
    }
}

/// One stage, with these keys above it.
fn one_stage(keys: &str, fecundity: &str) -> String {
    format!(
        "kind = \"stages\"\ndensity_dependence = {{ form = \"none\" }}\n{keys}\n\
         [[life_history.stage]]\nname = \"all\"\nsurvival = {{ mean = 0.5, sd = 0.1 }}\nfecundity = {fecundity}\n"
    )
}

fn counts(keys: &str) -> String {
    format!(
        "kind = \"counts\"\ngrowth = {{ mean = 1.2, sd = 0.2 }}\ndensity_dependence = {{ form = \"none\" }}\n{keys}\n"
    )
}

/// A row of each sex, with these keys above and at the end of each.
fn pairs(keys: &str, female: &str, male: &str) -> String {
    format!(
        "kind = \"stages\"\nindividuals = \"both sexes\"\ndensity_dependence = {{ form = \"none\" }}\n{keys}\n\
         [[life_history.stage]]\nname = \"hen\"\nsurvival = {{ mean = 0.5, sd = 0.1 }}\n{female}\n\
         [[life_history.stage]]\nname = \"cock\"\nsurvival = 0.5\n{male}\n"
    )
}

const HEN: &str = "sex = \"female\"\nfecundity = 1.4";
const COCK: &str = "sex = \"male\"";

#[test]
fn what_is_right_is_read_in_silence() {
    for text in [
        one_stage("", "0.7"),
        one_stage("allee_effect = { half_at = 2.5, origin = \"a guess\" }\ncensus = \"pre-breeding\"", "0.7"),
        one_stage("young = { litter = [0.2, 0.3, 0.5] }", "{ mean = 1.1, sd = 0.2 }"),
        one_stage("young = { litter = [0, 0, 1] }", "2"),
        counts("offspring_variance = 1"),
        counts("offspring_variance = 3.5\nallee_effect = { half_at = 2 }"),
        pairs("", HEN, COCK),
        pairs("harem_size = 0.5\nfemale_share = 0.4", HEN, "sex = \"male\"\nmates = true"),
    ] {
        assert_eq!(read(&text), Ok(vec![]), "{text}");
    }
}

#[test]
fn allee_effects() {
    for (keys, words) in [
        ("allee_effect = { half_at = 0 }", ["life_history.allee_effect.half_at = 0", "a number above 0"]),
        ("allee_effect = { half_at = -2 }", ["half_at = -2", "a number above 0"]),
        ("allee_effect = { half_at = \"few\" }", ["half_at = \"few\"", "a number above 0"]),
        ("allee_effect = {}", ["half_at is missing", "half of the fecundity"]),
        ("allee_effect = { half_at = 2, form = 1 }", ["allee_effect.form is not a key", "half_at"]),
        ("allee_effect = 5", ["life_history.allee_effect = 5", "a table"]),
    ] {
        assert_refused(&one_stage(keys, "0.7"), &words);
        assert_refused(&counts(keys), &words);
        assert_refused(&pairs(keys, HEN, COCK), &words);
    }
    let words = ["life_history.allee_effect", "a stage with fecundity above 0"];
    assert_refused(&one_stage("allee_effect = { half_at = 2 }", "0"), &words);
}

#[test]
fn litters() {
    for (young, words) in [
        ("{ litter = [0.5, 0.4] }", ["life_history.young.litter", "sum to 1, not to 0.9"]),
        ("{ litter = [] }", ["life_history.young.litter", "sum to 1, not to 0"]),
        ("{ litter = [1.0] }", ["life_history.young.litter", "at least one young"]),
        ("{ litter = [0.5, -0.5, 1.0] }", ["life_history.young.litter.2 = -0.5", "from 0 to 1"]),
        ("{ litter = \"two\" }", ["life_history.young.litter = \"two\"", "a list"]),
        ("{}", ["life_history.young.litter is missing", "0, 1, 2"]),
        ("{ litter = [0.5, 0.5], mean = 1 }", ["life_history.young.mean is not a key", "litter"]),
        ("2", ["life_history.young = 2", "{ litter = [..] }"]),
        ("\"twins\"", ["life_history.young = \"twins\"", "\"at most one\""]),
    ] {
        assert_refused(&one_stage(&format!("young = {young}"), "0.4"), &words);
    }
    let litter = "young = { litter = [0.2, 0.3, 0.5] }";
    let too_many = ["life_history.all.fecundity = 1.4", "at most 1.3, the mean of a litter"];
    assert_refused(&one_stage(litter, "1.4"), &too_many);
    let too_many = ["life_history.all.fecundity.mean = 1.4", "at most 1.3"];
    assert_refused(&one_stage(litter, "{ mean = 1.4, sd = 0.1 }"), &too_many);
    let too_wide = ["life_history.all.fecundity.sd = 0.65", "below 0.65", "a share of 0.5 breeds"];
    assert_refused(&one_stage(litter, "{ mean = 0.65, sd = 0.65 }"), &too_wide);
    assert_refused(&one_stage(litter, "{ mean = 1.3, sd = 0.01 }"), &["fecundity.sd = 0.01", "below 0:"]);
    assert_refused(&one_stage(litter, "-1"), &["life_history.all.fecundity = -1", "from 0 to"]);
    let matrix = |keys: &str| {
        format!("kind = \"stages\"\ndensity_dependence = {{ form = \"none\" }}\n{litter}\nmatrix = [[1.4]]\n{keys}\n")
    };
    assert_refused(&matrix(""), &["life_history.matrix", "life_history.stage 1.fecundity", "at most 1.3"]);
    // Half of the entry are fates, so that the share of 0.7/1.3 breeds: 1.3 sqrt(p (1 - p)) is 0.648.
    let words = ["life_history.stage 1.fecundity.sd = 0.9", "below 0.648", "a share of 0.5385 breeds"];
    assert_refused(&matrix("first_row_fates = [0.5]\nfecundity_sd = [0.9]"), &words);
}

#[test]
fn spread_between_individuals() {
    for (spread, words) in [
        ("0.5", ["life_history.offspring_variance = 0.5", "1 or above"]),
        ("nan", ["life_history.offspring_variance = nan", "1 or above"]),
        ("inf", ["life_history.offspring_variance = inf", "not too large"]),
        ("\"wide\"", ["life_history.offspring_variance = \"wide\"", "1 or above"]),
    ] {
        assert_refused(&counts(&format!("offspring_variance = {spread}")), &words);
    }
    assert_refused(&one_stage("offspring_variance = 2", "0.7"), &["life_history.offspring_variance is not a key"]);
    assert_refused(&counts("young = \"poisson\""), &["life_history.young is not a key"]);
}

#[test]
fn both_sexes() {
    for (keys, words) in [
        ("harem_size = 0", ["life_history.harem_size = 0", "above 0"]),
        ("harem_size = \"many\"", ["life_history.harem_size = \"many\"", "above 0"]),
        ("female_share = 1", ["life_history.female_share = 1", "above 0 and below 1"]),
        ("female_share = -0.1", ["life_history.female_share = -0.1", "above 0 and below 1"]),
        ("matrix = [[0.5]]", ["life_history.matrix", "no matrix where individuals = \"both sexes\""]),
        ("first_row_fates = [0]", ["life_history.first_row_fates", "no matrix"]),
    ] {
        assert_refused(&pairs(keys, HEN, COCK), &words);
    }
    for (female, male, words) in [
        (HEN, "", ["life_history.cock.sex is missing", "\"female\" or \"male\""]),
        (HEN, "sex = \"cock\"", ["life_history.cock.sex = \"cock\"", "\"female\" or \"male\""]),
        (HEN, "sex = 2", ["life_history.cock.sex = 2", "\"female\" or \"male\""]),
        (HEN, "sex = \"female\"", ["life_history.stage", "at least one stage of each sex"]),
        ("sex = \"male\"", COCK, ["life_history.stage", "at least one stage of each sex"]),
        (HEN, "sex = \"male\"\nfecundity = 1", ["life_history.cock.fecundity", "no such key on males"]),
        (HEN, "sex = \"male\"\nmates = false", ["life_history.stage", "mates = true on at least one"]),
        (HEN, "sex = \"male\"\nmates = 1", ["life_history.cock.mates = 1", "true or false"]),
        (HEN, "sex = \"male\"\nadvance = 0.5", ["life_history.cock.advance = 0.5", "no advance on the last stage"]),
        ("sex = \"female\"\nfecundity = 1\nmates = true", COCK, ["life_history.hen.mates", "no such key on females"]),
    ] {
        assert_refused(&pairs("", female, male), &words);
    }
    let none = "kind = \"stages\"\nindividuals = \"both sexes\"\ndensity_dependence = { form = \"none\" }\n";
    assert_refused(none, &["life_history.stage is missing", "sex = \"female\" or \"male\""]);
    for key in ["harem_size = 2", "female_share = 0.5"] {
        let words = ["no such key unless individuals = \"both sexes\""];
        assert_refused(&one_stage(key, "0.7"), &words);
    }
    let row = "0.7\nsex = \"female\"";
    assert_refused(&one_stage("", row), &["life_history.all.sex", "no such key unless individuals"]);
    assert_refused(&one_stage("individuals = \"couples\"", "0.7"), &["individuals = \"couples\"", "\"both sexes\""]);
    // The density dependence is that of the females: hens that never die are not held at capacity by their fecundity,
    // though half of the cocks die.
    let endless = pairs("", HEN, COCK)
        .replace("form = \"none\"", "form = \"ricker\"")
        .replace("survival = { mean = 0.5, sd = 0.1 }", "survival = 1");
    assert_refused(&endless, &["density_dependence.form = \"ricker\"", "bring growth down to 1"]);
}

#[test]
fn the_time_of_the_census() {
    let words = ["life_history.census = \"autumn\"", "\"post-breeding\" or \"pre-breeding\""];
    assert_refused(&one_stage("census = \"autumn\"", "0.7"), &words);
    assert_refused(&counts("census = \"post-breeding\""), &["life_history.census is not a key"]);
}

#[test]
fn what_is_lawful_and_odd() {
    let calm = |matrix: &str, sd: &str| {
        format!(
            "kind = \"stages\"\ndensity_dependence = {{ form = \"none\" }}\nmatrix = {matrix}\nsurvival_sd = {sd}\n"
        )
    };
    assert_warned(
        "kind = \"counts\"\ngrowth = 1.1\ndensity_dependence = { form = \"none\" }\n",
        &["no vital rate varies"],
    );
    assert_warned(&one_stage("", "0"), &["no stage has fecundity"]);
    let stage_2 = "stage 2 survives 0.9 a year";
    assert_warned(&calm("[[0, 9], [0.5, 0.9]]", "[0.1, 0]"), &[stage_2]);
    // A short-lived animal may well grow so fast.
    assert_warned(&calm("[[0, 9], [0.5, 0.7]]", "[0.1, 0]"), &[]);
    let matrix = "[[0, 1, 1], [0.5, 0.5, 0], [0, 0, 0]]";
    assert_warned(&calm(matrix, "[0.1, 0, 0]"), &["nothing leads to this stage"]);
    let matrix = "[[0, 1, 0], [0.5, 0.5, 0], [0, 0.2, 0.9]]";
    assert_warned(&calm(matrix, "[0.1, 0, 0]"), &["never left and does not breed"]);
    // Males never have fecundity: they are not such a stage.
    assert_warned(&pairs("", HEN, COCK), &[]);
    let lasting = pairs("", "sex = \"female\"\nfecundity = 0.2", COCK).replace("survival = 0.5", "survival = 0.95");
    assert_warned(&lasting, &["males outlast the females"]);
}
