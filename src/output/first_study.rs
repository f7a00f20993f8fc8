//! The text of a first study around somebody's patches.

use std::io::{self, Write};
use std::path::Path;

use tempfile::NamedTempFile;

use crate::landscape::{Glance, Property, Values};
use crate::mistake::Failure;

/// A commented study, complete but for the vital rates, which nobody can guess: they stand as comments, and `check` names
/// each one that is missing. `patches` is the path that the study writes.
pub fn first_study(glance: &Glance, patches: &str) -> String {
    let properties = properties_in_words(glance);
    let name = name_property(glance);
    let id = match (name, glance.has_ids) {
        (Some(property), _) => format!("id = {}", quoted(&property.name)),
        (None, true) => "# no id: the features' own `id` members name the patches".to_owned(),
        (None, false) => {
            "# id = \"..\"           # FILL IN: the property that names a patch, each name once".to_owned()
        }
    };
    let crs = if glance.in_metres { "crs = \"metres\"          # the coordinates cannot be degrees\n" } else { "" };
    let area = match (glance.has_points, find(glance, &["area", "hectare", "_ha"])) {
        (true, Some(property)) => {
            format!("area = {{ property = {} }}   # hectares; points need it\n", quoted(&property.name))
        }
        (true, None) => "# area = { property = \"..\" }   # FILL IN: points need a property of hectares\n".to_owned(),
        (false, _) => String::new(),
    };
    let capacity = match (find(glance, &["capacity"]), find(glance, &["quality", "suitability"])) {
        (Some(property), _) => format!("capacity = {{ property = {} }}   # individuals", quoted(&property.name)),
        (None, Some(quality)) => format!(
            "# capacity = {{ per_hectare = 10.0, quality = {} }}   # FILL IN: individuals a hectare of quality 1",
            quoted(&quality.name)
        ),
        (None, None) => "# capacity = { per_hectare = 10.0 }   # FILL IN: individuals a hectare".to_owned(),
    };
    let start = match find(glance, &["count", "abundance", "individuals"]) {
        Some(property) => format!("start = {{ property = {} }}   # individuals at census 0", quoted(&property.name)),
        None => {
            "start = { share_of_capacity = 0.6 }   # or { property = \"..\" }, or { table = \"counts.csv\" }".to_owned()
        }
    };
    format!(
        r##"# A first study. Commented lines that say FILL IN hold example values only: put your own there and take the first "# "
# away. `eyot check` names whatever is still missing.

title = "My study"
seed = 1                  # any whole number; the same seed gives the same result
horizon = 100             # years
replicates = 1000         # or: precision = 0.01, the half-width of the 95 % interval on persistence
# quasi_extinction = 20   # individuals in the whole network; leave it out if no number matters

[landscape]
# {n} features. Their properties: {properties}
patches = {patches}
{id}
{crs}{area}{capacity}
{start}

[life_history]
# origin = ".."           # where the values come from; such a note may stand in any table
kind = "stages"           # or "counts": one stage and its growth
individuals = "females"
# How crowding acts: "none", "ceiling", "beverton-holt", "ricker"
# density_dependence = {{ form = "beverton-holt", acts_on = ["fecundity"] }}   # FILL IN

[[life_history.stage]]
name = "juvenile"
# survival = {{ mean = 0.35, sd = 0.10 }}   # FILL IN: share alive a year later; sd between years
advance = 1.0             # share of survivors that move to the next stage
# emigration = 0.2        # chance of leaving the patch in a year; needs [dispersal]

[[life_history.stage]]
name = "adult"
# survival = {{ mean = 0.50, sd = 0.12 }}   # FILL IN
# fecundity = {{ mean = 1.6, sd = 0.5 }}    # FILL IN: female young a female, alive at the next census

[environment]
# How far good and bad years are alike: {{ reach_km = 12.0 }}, "none" or "full". Needed where a rate has an sd.
# correlation = {{ reach_km = 12.0 }}   # FILL IN

# [dispersal]             # FILL IN, if anybody leaves a patch
# kernel = {{ shape = "exponential", mean_km = 1.5 }}
# settlement = "shared"   # every emigrant heads for some patch; or "open": those who miss the patches are lost
# path_mortality_per_km = 0.1
"##,
        n = glance.n_features,
        patches = quoted(patches),
    )
}

/// A text as TOML writes it, which for these is as JSON does.
fn quoted(text: &str) -> String {
    serde_json::Value::from(text).to_string()
}

fn properties_in_words(glance: &Glance) -> String {
    let words = |property: &Property| {
        let name: String = property.name.chars().filter(|c| !c.is_control()).collect();
        match property.values {
            Values::Numbers(low, high) => format!("{name} ({low} to {high})"),
            Values::Texts => format!("{name} (text)"),
            Values::Mixed => format!("{name} (mixed)"),
        }
    };
    if glance.properties.is_empty() {
        return "none".to_owned();
    }
    glance.properties.iter().map(words).collect::<Vec<_>>().join(", ")
}

/// The property that most likely names a patch: filled and distinct, by its own name or by being the first text.
fn name_property(glance: &Glance) -> Option<&Property> {
    let unique = |property: &&Property| property.distinct && property.n_filled == glance.n_features;
    let named = |property: &&Property| {
        let name = property.name.to_lowercase();
        ["patch", "name", "id", "site", "code"].iter().any(|word| name.contains(word))
    };
    let candidates = || glance.properties.iter().filter(unique);
    candidates().find(named).or_else(|| candidates().find(|property| property.values == Values::Texts))
}

/// A property of numbers, none below 0, whose name holds one of these words.
fn find<'g>(glance: &'g Glance, words: &[&str]) -> Option<&'g Property> {
    glance.properties.iter().find(|property| {
        let name = property.name.to_lowercase();
        matches!(property.values, Values::Numbers(low, _) if low >= 0.0)
            && property.n_filled == glance.n_features
            && words.iter().any(|word| name.contains(word))
    })
}

/// Writes a file that is not there yet, whole or not at all.
///
/// # Errors
/// If it cannot be written, or has come to be there meanwhile.
pub fn write_new(path: &Path, text: &str) -> Result<(), Failure> {
    let write = || -> io::Result<()> {
        let mut draft = NamedTempFile::new_in(path.parent().unwrap_or(Path::new(".")))?;
        draft.write_all(text.as_bytes())?;
        draft.persist_noclobber(path)?;
        Ok(())
    };
    write().map_err(|error| Failure::system(path, "write", error))
}
