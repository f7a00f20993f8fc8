//! `eyot new`: a first study around the user's own patches.

use std::fs;
use std::path::{Component, Path, PathBuf};

use clap::Args;

use super::{DONE, say};
use crate::landscape::Glance;
use crate::mistake::{Failure, Mistake, Place};
use crate::output::{first_study, write_new};

/// Write a commented study around your own patches.
#[derive(Debug, Args)]
#[command(after_help = "Example:\n  eyot new my-study --patches patches.geojson\n\n\
    The vital rates are left for you to fill in: `eyot check` names each one that is missing.")]
pub(super) struct Arguments {
    /// The folder to write the study into; made if need be
    folder: PathBuf,
    /// The patches, as GeoJSON
    #[arg(long, value_name = "FILE")]
    patches: PathBuf,
}

pub(super) fn main(arguments: &Arguments) -> Result<u8, Failure> {
    let glance = Glance::at(&arguments.patches)?;
    let study = arguments.folder.join("study.toml");
    if study.exists() {
        let found = format!("{} is there already", study.display());
        return Err(Mistake::new(Place::Call, found, "a folder without a study")
            .advise("choose another folder")
            .into());
    }
    if arguments.folder.exists() && !arguments.folder.is_dir() {
        let mistake = Mistake::new(Place::file(&arguments.folder), "a file", "a folder, or a name that is free");
        return Err(mistake.advise("name another folder").into());
    }
    fs::create_dir_all(&arguments.folder)
        .map_err(|error| Failure::system(&arguments.folder, "make the folder", error))?;
    let patches = seen_from(&arguments.folder, &arguments.patches)?;
    write_new(&study, &first_study(&glance, &patches))?;
    say(&format!(
        "written: {}\nnext: fill in the vital rates there, then  eyot check {}",
        study.display(),
        super::quoted(&study)
    ));
    Ok(DONE)
}

/// The path of `file` as a study in `folder` writes it: relative, with forward slashes.
fn seen_from(folder: &Path, file: &Path) -> Result<String, Failure> {
    let whole = |path: &Path| fs::canonicalize(path).map_err(|error| Failure::system(path, "find", error));
    let (folder, file) = (whole(folder)?, whole(file)?);
    let common = folder.components().zip(file.components()).take_while(|(a, b)| a == b).count();
    let up = folder.components().skip(common).map(|_| "..".to_owned());
    let down = file.components().skip(common).filter_map(|part| match part {
        Component::Normal(name) => Some(name.to_string_lossy().into_owned()),
        _ => None,
    });
    Ok(up.chain(down).collect::<Vec<_>>().join("/"))
}
