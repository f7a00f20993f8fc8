//! CSV tables that a study names.

use eyot::mistake::{Mistake, Place};
use eyot::study::{CsvTable, Document, NOT_NEGATIVE};

use super::mistakes;

fn read_csv(bytes: &[u8]) -> (Option<CsvTable>, Vec<String>) {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("a.csv"), bytes).unwrap();
    let document = Document::parse(&folder.path().join("s.toml"), "t = 'a.csv'".to_owned());
    let table = CsvTable::read(&document, &document.root().text("t").unwrap());
    if let Some(table) = &table {
        assert_eq!(document.inputs().len(), 2);
        for (row, column) in table.rows.iter().flat_map(|row| table.column(&document, "n").map(|column| (row, column)))
        {
            table.number(&document, row, column, NOT_NEGATIVE);
        }
    }
    let line = |mistake: Mistake| match mistake.place {
        Place::Row { line, .. } => format!("{line} {} | {}", mistake.found, mistake.expected),
        other => panic!("{other}"),
    };
    (table, mistakes(&document).into_iter().map(line).collect())
}

#[test]
fn csv_rows_know_their_line_as_an_editor_counts() {
    for line_end in ["\n", "\r\n", "\r"] {
        let text = "\u{feff}patch, n \n\nA,1\n\"B\nb\",2\n,\n\n C ,x\nD,3".replace('\n', line_end);
        let (table, found) = read_csv(text.as_bytes());
        let table = table.unwrap();
        assert_eq!(table.header, ["patch", "n"]);
        let rows: Vec<(usize, &str)> = table.rows.iter().map(|row| (row.line, row.cells[1].as_str())).collect();
        assert_eq!(rows, [(3, "1"), (4, "2"), (8, "x"), (9, "3")], "{line_end:?}");
        assert_eq!(found, ["8 n = x | a number 0 or above"], "{line_end:?}");
    }
}

#[test]
fn csv_tables_tell_every_row_that_is_wrong() {
    let told = |bytes: &[u8]| read_csv(bytes).1;
    assert_eq!(
        told(b"n,m\r\n1\r\n1,2,3\r\n\xff,2\r\n1,2\r\n"),
        [
            "2 1 | 2 cells, as the header has",
            "3 1,2,3 | 2 cells, as the header has",
            "4 a row that cannot be read | CSV in UTF-8"
        ]
    );
    assert_eq!(told(b"n,\xff\n1,2\n"), ["1 a header that cannot be read | CSV in UTF-8"]);
    assert_eq!(told(b"n;m\n1;2\n"), ["1 n;m | columns parted by commas"]);
    assert_eq!(told(b"n\tm\n1\t2\n"), ["1 n\tm | columns parted by commas"]);
    assert_eq!(told(b"n,m,n\n1,2,3\n"), ["1 header n,m,n | each column once"]);
    let cells = "n\nnan\ninf\n-1\n1e999\n0x10\n\"\"\n1 2\n";
    assert_eq!(told(cells.as_bytes()).len(), 6, "all but the empty row");
}

#[test]
fn a_csv_table_without_the_column_says_what_it_has() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("a.csv"), "patch,count\n").unwrap();
    let document = Document::parse(&folder.path().join("s.toml"), "t = 'a.csv'\nu = 'b.csv'".to_owned());
    let table = CsvTable::read(&document, &document.root().text("t").unwrap()).unwrap();
    assert_eq!((table.column(&document, "count"), table.column(&document, "Count")), (Some(1), None));
    assert!(CsvTable::read(&document, &document.root().text("u").unwrap()).is_none());
    let found = mistakes(&document);
    assert_eq!(found[0].found, "u = 'b.csv'");
    assert!(found[0].expected.starts_with("the path of a file"));
    assert_eq!((found[1].found.as_str(), found[1].expected.as_str()), ("header patch,count", "a column Count"));
}
