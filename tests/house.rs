//! The shape of the house: data flows one way, and the yearly loop is bare.

use std::fs;
use std::path::{Path, PathBuf};

/// The rooms in the order in which data flows; each may use those before it.
const ROOMS: [&str; 13] = [
    "mistake",
    "num",
    "random",
    "study",
    "landscape",
    "network",
    "demography",
    "environment",
    "engine",
    "outcome",
    "analysis",
    "output",
    "cli",
];

fn sources(folder: &Path) -> Vec<PathBuf> {
    let mut files = Vec::new();
    for entry in fs::read_dir(folder).expect("the folder of sources is there") {
        let path = entry.expect("the folder can be listed").path();
        if path.is_dir() {
            files.extend(sources(&path));
        } else if path.extension().is_some_and(|extension| extension == "rs") {
            files.push(path);
        }
    }
    files
}

fn src() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("src")
}

/// The room that a file of `src` belongs to; none for the library's root and the program.
fn room_of(file: &Path) -> Option<usize> {
    let inside = file.strip_prefix(src()).expect("only sources are asked for");
    let first = inside.iter().next().and_then(|part| part.to_str()).expect("sources have plain names");
    ROOMS.iter().position(|room| *room == first.trim_end_matches(".rs"))
}

/// The code of a file, without its comments.
fn code(file: &Path) -> String {
    let text = fs::read_to_string(file).expect("sources can be read");
    text.lines().map(|line| line.split("//").next().unwrap_or("")).collect::<Vec<_>>().join("\n")
}

#[test]
fn a_room_uses_only_rooms_before_it() {
    let mut seen = 0;
    for file in sources(&src()) {
        let Some(room) = room_of(&file) else { continue };
        for used in code(&file).split("crate::").skip(1) {
            let name: String = used.chars().take_while(|c| c.is_alphanumeric() || *c == '_').collect();
            let used = ROOMS.iter().position(|room| *room == name);
            let used = used.unwrap_or_else(|| panic!("{} uses crate::{name}, which is no room", file.display()));
            assert!(used <= room, "{} uses {name}, which comes after {}", file.display(), ROOMS[room]);
            seen += 1;
        }
    }
    assert!(seen > 50, "only {seen} uses were seen: the test looks in the wrong place");
}

#[test]
fn every_room_is_in_the_list() {
    let library = fs::read_to_string(src().join("lib.rs")).unwrap();
    for line in library.lines().filter_map(|line| line.strip_prefix("pub mod ")) {
        let room = line.trim_end_matches(';');
        assert!(ROOMS.contains(&room), "{room} has no place in the order of rooms");
    }
}

#[test]
fn the_yearly_loop_knows_no_strings_files_locks_or_clocks() {
    for name in
        ["year.rs", "capacity.rs", "movement.rs", "crowded.rs", "removal/mod.rs", "occupancy.rs", "replicate.rs"]
    {
        let code = code(&src().join("engine").join(name));
        for word in ["String", "format!", "HashMap", "BTreeMap", "Mutex", "std::fs", "std::time", "Path"] {
            assert!(!code.contains(word), "engine/{name} has {word}");
        }
    }
}

/// What the loop calls, beside what is read and compiled in the same files.
#[test]
fn nothing_that_the_loop_calls_locks_or_hashes() {
    for room in ["engine", "demography", "environment", "random"] {
        for file in sources(&src().join(room)) {
            let code = code(&file);
            for word in ["HashMap", "HashSet", "Mutex", "RwLock", "RefCell", "std::fs", "std::time"] {
                assert!(!code.contains(word), "{} has {word}", file.display());
            }
        }
    }
}

#[test]
fn only_the_commands_print_and_exit() {
    for file in sources(&src()) {
        if room_of(&file).is_none_or(|room| ROOMS[room] == "cli") {
            continue;
        }
        let code = code(&file);
        for word in ["println!", "eprintln!", "process::exit", "Instant::now", "SystemTime"] {
            assert!(!code.contains(word), "{} has {word}", file.display());
        }
    }
}
