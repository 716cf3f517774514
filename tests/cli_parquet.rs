//! `orbits --format parquet`, read back by the Parquet reader: only with the feature `parquet`.
#![cfg(feature = "parquet")]

mod program;

use parquet::file::reader::{FileReader, SerializedFileReader};
use parquet::record::RowAccessor;
use program::{done, place, polygon, run_in, text};

#[test]
fn parquet_rows_are_those_of_the_csv() {
    let place = place();
    let table = polygon("right-isosceles");
    let orbits = [
        "orbits", &table, "--count", "700", "--hits", "30000", "--quiet", "--seed", "5",
    ];
    let more = ["--format", "parquet", "--out", "orbits.parquet"];
    let output = run_in(&place, &[&orbits[..], &more].concat());
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let file = std::fs::File::open(place.path().join("orbits.parquet")).expect("a file");
    let reader = SerializedFileReader::new(file).expect("a Parquet file");
    // 21 million letters: more than one row group.
    assert!(reader.metadata().num_row_groups() >= 2);
    let schema = reader.metadata().file_metadata().schema_descr();
    let names: Vec<&str> = schema.columns().iter().map(|c| c.name()).collect();
    assert_eq!(
        names,
        ["orbit", "side", "fraction", "aim_x", "aim_y", "word"]
    );
    let csv = done(&[&orbits[..], &["--format", "csv"]].concat());
    let mut expected = csv::Reader::from_reader(csv.as_bytes());
    let mut found = reader.get_row_iter(None).expect("rows");
    let mut count = 0;
    for row in expected.records() {
        let (row, read) = (
            row.expect("a row"),
            found.next().expect("as many rows").expect("a row"),
        );
        assert_eq!(read.get_long(0).expect("a number").to_string(), row[0]);
        for i in 1..6 {
            assert_eq!(
                read.get_string(i).expect("text"),
                &row[i],
                "column {i} of orbit {}",
                &row[0]
            );
        }
        count += 1;
    }
    assert_eq!(count, 700);
    assert!(found.next().is_none());
}
