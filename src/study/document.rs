//! The TOML document as a tree of owned nodes, each with its place, and the mistakes found while walking it.

use std::cell::RefCell;
use std::collections::BTreeSet;
use std::ops::Range;
use std::path::{Path, PathBuf};

use sha2::{Digest, Sha256};
use toml::de::{DeTable, DeValue};

use super::faults::{is_inside, plainly};
use super::table::{Said, Table};
use crate::mistake::{Failure, Mistake, Mistakes, Place};

/// A file that went into the study, with the hash by which it can be known again.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Input {
    /// the path as the study writes it, or the study's own file name
    pub path: String,
    /// SHA-256 of its bytes (FIPS 180-4), in hexadecimal
    pub sha256: String,
}

/// A study file that has been parsed; what it means is read from it with [`Document::root`].
#[derive(Debug)]
pub struct Document {
    file: PathBuf,
    text: String,
    /// where each line of the text begins, in bytes; the first after a byte order mark
    line_starts: Vec<usize>,
    root: Vec<Entry>,
    has_faults: bool,
    mistakes: RefCell<Vec<Mistake>>,
    warnings: RefCell<Vec<Mistake>>,
    inputs: RefCell<Vec<Input>>,
}

#[derive(Debug)]
pub(super) struct Entry {
    pub(super) key: String,
    pub(super) key_span: Range<usize>,
    pub(super) node: Node,
}

#[derive(Debug)]
pub(super) struct Node {
    pub(super) span: Range<usize>,
    pub(super) value: Value,
}

#[derive(Debug)]
pub(super) enum Value {
    Text(String),
    Number(f64),
    Whole(i64),
    Flag(bool),
    Date,
    List(Vec<Node>),
    Table(Vec<Entry>),
    /// the TOML is at fault here, and the mistake has been noted
    Faulty,
}

/// The most lines whose faults of the TOML itself are shown.
const FAULTS_SHOWN: usize = 20;

impl Document {
    /// Reads and parses a study file. Faults of the TOML itself are kept with the other mistakes.
    ///
    /// # Errors
    /// If the file cannot be read.
    pub fn open(file: &Path) -> Result<Self, Failure> {
        let bytes = std::fs::read(file).map_err(|error| match error.kind() {
            std::io::ErrorKind::NotFound => Mistake::new(Place::file(file), "no such file", "a study file in TOML")
                .advise("check the path, or write a first study with `eyot new DIR --patches FILE`")
                .into(),
            std::io::ErrorKind::IsADirectory => Mistake::new(Place::file(file), "a folder", "a study file in TOML")
                .advise("name the file in it, such as study.toml")
                .into(),
            _ => Failure::system(file, "read", error),
        })?;
        let text = String::from_utf8(bytes).map_err(|error| {
            let sound = String::from_utf8_lossy(&error.as_bytes()[..error.utf8_error().valid_up_to()]);
            let place = place(file, &sound, &line_starts(&sound), sound.len());
            Mistake::new(place, "bytes that are not UTF-8", "a text file").advise("save the study as UTF-8 text")
        })?;
        Ok(Self::parse(file, text))
    }

    /// Parses the text of a study; `file` is the name that mistakes show and that relative paths start from.
    pub fn parse(file: &Path, text: String) -> Self {
        let (table, faults) = DeTable::parse_recoverable(&text);
        let mut fault_starts: Vec<usize> = faults.iter().map(start_of).collect();
        fault_starts.sort_unstable();
        let root = entries(table.get_ref(), &fault_starts);
        let name = file.file_name().map(|name| name.to_string_lossy().into_owned()).unwrap_or_default();
        let study = Input { path: name, sha256: sha256(text.as_bytes()) };
        let document = Self {
            file: file.to_path_buf(),
            line_starts: line_starts(&text),
            text,
            root,
            has_faults: !faults.is_empty(),
            mistakes: RefCell::default(),
            warnings: RefCell::default(),
            inputs: RefCell::new(vec![study]),
        };
        document.note_faults(&faults);
        document
    }

    /// The name of the file as it was given.
    pub fn file(&self) -> &Path {
        &self.file
    }

    /// The text of the file.
    pub fn text(&self) -> &str {
        &self.text
    }

    /// The whole file as a table to read from.
    pub fn root(&self) -> Table<'_> {
        Table::new(self, String::new(), &self.root, Place::file(&self.file))
    }

    /// A path written in the study, relative to the study file.
    pub fn resolve(&self, path: &str) -> PathBuf {
        self.file.parent().unwrap_or(Path::new("")).join(path)
    }

    /// Reads a data file that the study names, and remembers its hash. `None`, with the mistake noted, if it cannot be read.
    pub fn read_file(&self, said: &Said<String>) -> Option<(PathBuf, Vec<u8>)> {
        let path = self.resolve(&said.value);
        match std::fs::read(&path) {
            Ok(bytes) => {
                let input = Input { path: said.value.clone(), sha256: sha256(&bytes) };
                let mut inputs = self.inputs.borrow_mut();
                if !inputs.contains(&input) {
                    inputs.push(input);
                }
                Some((path, bytes))
            }
            Err(error) => {
                let path = path.display();
                let why = match error.kind() {
                    std::io::ErrorKind::NotFound => format!("the path of a file; there is none at {path}"),
                    std::io::ErrorKind::IsADirectory => format!("the path of a file; {path} is a folder"),
                    _ => format!("a file that can be read; {path} cannot be: {error}"),
                };
                self.mistake(said.mistake(why).advise("paths are relative to the study file"));
                None
            }
        }
    }

    /// The study and every data file read so far, in the order of reading.
    pub fn inputs(&self) -> Vec<Input> {
        self.inputs.borrow().clone()
    }

    /// Notes a mistake; reading goes on.
    pub fn mistake(&self, mistake: Mistake) {
        self.mistakes.borrow_mut().push(mistake);
    }

    /// Notes something lawful but odd.
    pub fn warning(&self, warning: Mistake) {
        self.warnings.borrow_mut().push(warning);
    }

    /// Whether no mistake has been noted so far.
    pub fn is_clean(&self) -> bool {
        self.mistakes.borrow().is_empty()
    }

    /// The warnings noted so far.
    ///
    /// # Errors
    /// All mistakes noted so far, if there is one.
    pub fn verdict(&self) -> Result<Vec<Mistake>, Mistakes> {
        Mistakes::none_in(self.mistakes.borrow().clone())?;
        Ok(self.warnings.borrow().clone())
    }

    /// Whether the TOML is at fault somewhere, so that keys may be there that the parser did not reach.
    pub fn has_faults(&self) -> bool {
        self.has_faults
    }

    pub(super) fn place(&self, offset: usize) -> Place {
        place(&self.file, &self.text, &self.line_starts, offset)
    }

    /// The words at `span` as a message shows them: one line, not too long, without control characters.
    pub(super) fn words(&self, span: &Range<usize>) -> String {
        let whole = self.text.get(span.clone()).unwrap_or_default().trim();
        let line = whole.lines().next().unwrap_or_default();
        let shown: String = line.chars().take(60).map(|c| if c.is_control() { ' ' } else { c }).collect();
        if shown.len() < whole.len() { format!("{} ...", shown.trim_end()) } else { shown }
    }

    /// Notes the first fault of each line, since the parser's others there mostly follow from it, and but one for all the
    /// lines that a list or inline table swallows where it is not closed.
    fn note_faults(&self, faults: &[toml::de::Error]) {
        if !faults.is_empty() && self.text.trim_start().starts_with('{') {
            let mistake = Mistake::new(Place::file(&self.file), "this looks like JSON", "a study file in TOML");
            self.mistake(mistake.advise("name the study, not the file of patches"));
            return;
        }
        let mut lines_told = BTreeSet::new();
        let mut inside = false;
        for fault in faults {
            let line = self.line_starts.partition_point(|start| *start <= start_of(fault));
            let was_inside = std::mem::replace(&mut inside, is_inside(fault.message()));
            if lines_told.len() < FAULTS_SHOWN && lines_told.insert(line) && !(inside && was_inside) {
                self.mistake(self.fault(fault));
            }
        }
    }

    fn fault(&self, fault: &toml::de::Error) -> Mistake {
        let start = self.text.floor_char_boundary(start_of(fault));
        let line_start = self.text[..start].rfind('\n').map_or(0, |newline| newline + 1);
        let line_end = self.text[start..].find('\n').map_or(self.text.len(), |length| start + length);
        let found = match self.words(&(line_start..line_end)) {
            nothing if nothing.is_empty() && line_end == self.text.len() => "the end of the file".to_owned(),
            nothing if nothing.is_empty() => "an empty line".to_owned(),
            words => words,
        };
        let (expected, advice) = plainly(fault.message(), &self.text[line_start..line_end]);
        Mistake { advice, ..Mistake::new(self.place(start), found, expected) }
    }
}

fn start_of(fault: &toml::de::Error) -> usize {
    fault.span().map_or(0, |span| span.start)
}

fn place(file: &Path, text: &str, line_starts: &[usize], offset: usize) -> Place {
    let offset = text.floor_char_boundary(offset);
    let line = line_starts.partition_point(|start| *start <= offset).max(1);
    let before = text.get(line_starts[line - 1]..offset).unwrap_or_default();
    Place::Text { file: file.to_path_buf(), line, column: before.chars().count() + 1 }
}

fn line_starts(text: &str) -> Vec<usize> {
    let first = if text.starts_with('\u{feff}') { '\u{feff}'.len_utf8() } else { 0 };
    std::iter::once(first).chain(text.match_indices('\n').map(|(at, _)| at + 1)).collect()
}

fn sha256(bytes: &[u8]) -> String {
    Sha256::digest(bytes).iter().map(|byte| format!("{byte:02x}")).collect()
}

/// The entries of a TOML table in the order in which the file has them. `fault_starts` say where the TOML is at fault, in
/// order: what the parser put there in place of a key or value is nothing that the user wrote.
fn entries(table: &DeTable<'_>, fault_starts: &[usize]) -> Vec<Entry> {
    let mut entries: Vec<Entry> = table
        .iter()
        .filter(|(key, _)| fault_starts.is_empty() || !key.span().is_empty())
        .map(|(key, value)| Entry {
            key: key.get_ref().to_string(),
            key_span: key.span(),
            node: node(value.get_ref(), value.span(), fault_starts),
        })
        .collect();
    entries.sort_by_key(|entry| entry.key_span.start);
    entries
}

fn node(value: &DeValue<'_>, span: Range<usize>, fault_starts: &[usize]) -> Node {
    let next_fault = fault_starts.get(fault_starts.partition_point(|start| *start < span.start));
    if !fault_starts.is_empty() && (span.is_empty() || next_fault.is_some_and(|start| *start <= span.end)) {
        return Node { span, value: Value::Faulty };
    }
    let value = match value {
        DeValue::String(text) => Value::Text(text.to_string()),
        // A number too large for its type is read as infinite, which every check of a range then refuses in words.
        DeValue::Integer(digits) => match i64::from_str_radix(digits.as_str(), digits.radix()) {
            Ok(whole) => Value::Whole(whole),
            Err(_) => Value::Number(f64::INFINITY),
        },
        DeValue::Float(digits) => Value::Number(digits.as_str().parse().unwrap_or(f64::NAN)),
        DeValue::Boolean(flag) => Value::Flag(*flag),
        DeValue::Datetime(_) => Value::Date,
        DeValue::Array(items) => {
            Value::List(items.iter().map(|item| node(item.get_ref(), item.span(), fault_starts)).collect())
        }
        DeValue::Table(table) => Value::Table(entries(table, fault_starts)),
    };
    Node { span, value }
}
