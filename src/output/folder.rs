//! Outcome folders, which appear whole or not at all.
//!
//! An outcome is written into a draft beside the place it is meant for and moved there when it is complete. An outcome
//! that is to be replaced is moved aside first and comes back if anything fails. Files that are none of an outcome's are
//! never deleted: they move along into the new folder.

use std::ffi::OsStr;
use std::fs;
use std::io::{self, BufWriter, Write};
use std::path::{Path, PathBuf};

use tempfile::TempDir;

use super::files::{ALL_FILES, OUTCOME};
use crate::mistake::{Failure, Mistake, Place};

/// What is to become of an outcome that stands where a new one should go.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Existing {
    /// it stays, and the new one is refused
    Keep,
    /// the new one takes its place
    Replace,
}

/// A place where an outcome may be written.
#[derive(Debug)]
pub struct Folder {
    path: PathBuf,
    existing: Existing,
}

/// An outcome folder in the making.
#[derive(Debug)]
pub struct Draft<'a> {
    folder: &'a Folder,
    path: PathBuf,
}

/// What stands at the place of a folder.
enum Found {
    Nothing,
    Empty,
    Outcome,
}

impl Folder {
    /// Makes sure, before the work starts, that an outcome may be written at `path`. Nothing is left there yet.
    ///
    /// # Errors
    /// [`Failure::Input`] if something stands there that must not be replaced; [`Failure::System`] if the folder that
    /// it would lie in is missing or cannot be written to.
    pub fn claim(path: &Path, existing: Existing) -> Result<Self, Failure> {
        let mut folder = Self { path: path.to_path_buf(), existing };
        if !matches!(folder.look()?, Found::Nothing) {
            // A link to a folder stays a link: what it points to is what is replaced.
            folder.path = fs::canonicalize(path).map_err(|error| Failure::system(path, "open the folder", error))?;
        }
        folder.staging()?;
        Ok(folder)
    }

    /// Where it is.
    pub fn path(&self) -> &Path {
        &self.path
    }

    /// Writes the files of an outcome, all of them or none.
    ///
    /// # Errors
    /// Those of `write`, and [`Failure::System`] if the folder cannot be put in its place. Whatever stood there before
    /// is there still.
    pub fn fill(&self, write: impl FnOnce(&Draft<'_>) -> Result<(), Failure>) -> Result<(), Failure> {
        let staging = self.staging()?;
        let draft = Draft { folder: self, path: staging.path().join("new") };
        fs::create_dir(&draft.path).map_err(|error| self.failure("write the folder", error))?;
        write(&draft)?;
        self.put_in_place(&draft.path, staging)
    }

    /// A private folder beside this one, on the same disk, that vanishes with all it holds.
    fn staging(&self) -> Result<TempDir, Failure> {
        let parent = match self.path.parent() {
            Some(parent) if parent != Path::new("") => parent,
            _ => Path::new("."),
        };
        let made = tempfile::Builder::new().prefix(".eyot-").tempdir_in(parent);
        made.map_err(|error| Failure::system(parent, "write in the folder", error))
    }

    fn put_in_place(&self, new: &Path, staging: TempDir) -> Result<(), Failure> {
        let place = |()| fs::rename(new, &self.path);
        let outcome = match self.look()? {
            Found::Nothing => place(()),
            Found::Empty => fs::remove_dir(&self.path).and_then(place),
            Found::Outcome => return self.replace(new, staging),
        };
        outcome.map_err(|error| self.failure("put the folder in its place", error))
    }

    fn replace(&self, new: &Path, staging: TempDir) -> Result<(), Failure> {
        let old = staging.path().join("replaced");
        fs::rename(&self.path, &old).map_err(|error| self.failure("move the old outcome aside", error))?;
        if let Err(error) = fs::rename(new, &self.path) {
            if fs::rename(&old, &self.path).is_err() {
                return Err(Failure::system(staging.keep().join("replaced"), "put the old outcome back from", error));
            }
            return Err(self.failure("put the folder in its place", error));
        }
        if let Err(error) = carry_foreign_files(&old, &self.path) {
            return Err(Failure::system(staging.keep().join("replaced"), "move your own files back from", error));
        }
        Ok(())
    }

    fn look(&self) -> Result<Found, Failure> {
        let failure = |error| self.failure("look into the folder", error);
        let refuse = |found: &str, expected: &str, advice: &str| {
            Err(Mistake::new(Place::file(&self.path), found, expected).advise(advice).into())
        };
        match fs::symlink_metadata(&self.path) {
            Err(error) if error.kind() == io::ErrorKind::NotFound => return Ok(Found::Nothing),
            Err(error) => return Err(failure(error)),
            Ok(_) => {}
        }
        if !fs::metadata(&self.path).map_err(failure)?.is_dir() {
            return refuse("a file", "a folder", "name another place with --out");
        }
        if fs::read_dir(&self.path).map_err(failure)?.next().is_none() {
            return Ok(Found::Empty);
        }
        if !is_outcome(&self.path) {
            let expected = "a folder that is new, empty, or holds an outcome";
            return refuse("a folder with other files", expected, "name another folder with --out");
        }
        match self.existing {
            Existing::Replace => Ok(Found::Outcome),
            Existing::Keep => {
                let advice = "name another folder with --out, or replace it with --replace";
                refuse("an outcome is there already", "a folder that is new or empty", advice)
            }
        }
    }

    fn failure(&self, doing: &'static str, error: io::Error) -> Failure {
        Failure::system(&self.path, doing, error)
    }
}

impl Draft<'_> {
    /// Writes one file of the outcome; it is on the disk when this returns.
    ///
    /// # Errors
    /// [`Failure::System`], under the name that the file would have had, if it cannot be written.
    pub fn file(&self, name: &str, write: impl FnOnce(&mut dyn Write) -> io::Result<()>) -> Result<(), Failure> {
        let written = fs::File::create_new(self.path.join(name)).and_then(|file| {
            let mut buffer = BufWriter::new(file);
            write(&mut buffer)?;
            // A disk may be found full only now: better here than after the old outcome is gone.
            buffer.into_inner()?.sync_all()
        });
        written.map_err(|error| Failure::system(self.folder.path.join(name), "write", error))
    }
}

fn is_outcome(folder: &Path) -> bool {
    let Ok(bytes) = fs::read(folder.join(OUTCOME)) else { return false };
    let read = serde_json::from_slice::<serde_json::Value>(&bytes);
    read.is_ok_and(|document| document["schema"] == super::json::SCHEMA)
}

fn carry_foreign_files(old: &Path, new: &Path) -> io::Result<()> {
    for entry in fs::read_dir(old)? {
        let name = entry?.file_name();
        if !ALL_FILES.iter().any(|ours| OsStr::new(ours) == name) {
            fs::rename(old.join(&name), new.join(&name))?;
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    const OUTCOME_TEXT: &str = r#"{"schema": "eyot-outcome"}"#;

    /// A parent folder, and in it an outcome with somebody's notes.
    fn with_outcome() -> (TempDir, PathBuf) {
        let parent = tempfile::tempdir().unwrap();
        let path = parent.path().join("out");
        fs::create_dir(&path).unwrap();
        fs::write(path.join(OUTCOME), OUTCOME_TEXT).unwrap();
        fs::write(path.join("report.html"), "old").unwrap();
        fs::write(path.join("notes.txt"), "mine").unwrap();
        (parent, path)
    }

    fn names(folder: &Path) -> Vec<String> {
        let entries = fs::read_dir(folder).unwrap();
        let mut names: Vec<String> = entries.map(|entry| entry.unwrap().file_name().into_string().unwrap()).collect();
        names.sort();
        names
    }

    fn write_new(draft: &Draft<'_>) -> Result<(), Failure> {
        draft.file(OUTCOME, |to| to.write_all(b"new"))
    }

    fn refusal(path: &Path, existing: Existing) -> Mistake {
        match Folder::claim(path, existing).unwrap_err() {
            Failure::Input(mistakes) => mistakes.into_vec().remove(0),
            other => panic!("a mistake, not: {other}"),
        }
    }

    #[test]
    fn a_claim_leaves_nothing_and_a_new_folder_takes_its_place() {
        let parent = tempfile::tempdir().unwrap();
        let path = parent.path().join("out");
        let folder = Folder::claim(&path, Existing::Keep).unwrap();
        assert_eq!(names(parent.path()), [""; 0]);
        folder.fill(write_new).unwrap();
        assert_eq!(names(parent.path()), ["out"]);
        assert_eq!(fs::read_to_string(path.join(OUTCOME)).unwrap(), "new");
    }

    #[test]
    fn an_empty_folder_may_be_filled() {
        let parent = tempfile::tempdir().unwrap();
        Folder::claim(parent.path(), Existing::Keep).unwrap().fill(write_new).unwrap();
        assert_eq!(names(parent.path()), [OUTCOME]);
    }

    #[test]
    fn an_outcome_is_not_replaced_unasked() {
        let (_parent, path) = with_outcome();
        let mistake = refusal(&path, Existing::Keep);
        assert_eq!(mistake.found, "an outcome is there already");
        assert!(mistake.advice.unwrap().contains("--replace"));
    }

    #[test]
    fn what_is_no_outcome_is_never_replaced() {
        let parent = tempfile::tempdir().unwrap();
        fs::write(parent.path().join("thesis.doc"), "mine").unwrap();
        assert_eq!(refusal(parent.path(), Existing::Replace).found, "a folder with other files");
        fs::write(parent.path().join(OUTCOME), "{}").unwrap();
        assert_eq!(refusal(parent.path(), Existing::Replace).found, "a folder with other files");
        assert_eq!(refusal(&parent.path().join("thesis.doc"), Existing::Replace).found, "a file");
    }

    #[test]
    fn a_missing_parent_is_said_before_the_work() {
        let parent = tempfile::tempdir().unwrap();
        let failure = Folder::claim(&parent.path().join("no/out"), Existing::Keep).unwrap_err();
        assert!(matches!(failure, Failure::System { path, .. } if path == parent.path().join("no")));
    }

    #[test]
    fn replacing_keeps_the_files_of_others_and_drops_the_old_report() {
        let (parent, path) = with_outcome();
        Folder::claim(&path, Existing::Replace).unwrap().fill(write_new).unwrap();
        assert_eq!(names(&path), ["notes.txt", OUTCOME]);
        assert_eq!(fs::read_to_string(path.join(OUTCOME)).unwrap(), "new");
        assert_eq!(names(parent.path()), ["out"]);
    }

    #[test]
    fn a_full_disk_leaves_everything_as_it_was() {
        let (parent, path) = with_outcome();
        let folder = Folder::claim(&path, Existing::Replace).unwrap();
        let failure = folder.fill(|draft| {
            write_new(draft)?;
            draft.file("by_year.csv", |to| {
                to.write_all(b"year\n")?;
                Err(io::ErrorKind::StorageFull.into())
            })
        });
        assert!(matches!(failure.unwrap_err(), Failure::System { path: at, .. } if at.ends_with("out/by_year.csv")));
        assert_eq!(names(parent.path()), ["out"]);
        assert_eq!(names(&path), ["notes.txt", OUTCOME, "report.html"]);
        assert_eq!(fs::read_to_string(path.join(OUTCOME)).unwrap(), OUTCOME_TEXT);
    }

    #[test]
    fn an_old_outcome_comes_back_if_the_new_one_cannot_take_its_place() {
        let (parent, path) = with_outcome();
        let folder = Folder::claim(&path, Existing::Replace).unwrap();
        let failure = folder.fill(|draft| {
            fs::remove_dir(&draft.path).unwrap();
            Ok(())
        });
        assert!(matches!(failure, Err(Failure::System { .. })));
        assert_eq!(names(parent.path()), ["out"]);
        assert_eq!(names(&path), ["notes.txt", OUTCOME, "report.html"]);
    }

    #[cfg(unix)]
    #[test]
    fn a_link_to_an_outcome_stays_a_link() {
        let (parent, path) = with_outcome();
        let link = parent.path().join("latest");
        std::os::unix::fs::symlink(&path, &link).unwrap();
        Folder::claim(&link, Existing::Replace).unwrap().fill(write_new).unwrap();
        assert!(fs::symlink_metadata(&link).unwrap().is_symlink());
        assert_eq!(fs::read_to_string(path.join(OUTCOME)).unwrap(), "new");
    }
}
