//! The rows of `orbits`, in each format, as a stream.
//!
//! | column | content |
//! |--------|---------|
//! | `orbit` | the number of the orbit, from 0; with the seed and the law it decides the start |
//! | `side` | the side that it starts on, as `--start` reads it |
//! | `fraction` | how far along that side, exactly |
//! | `aim_x`, `aim_y` | the direction, exactly, in the table's coordinates |
//! | `word` | the sides met, the first included |
//!
//! Memory: one batch of rows; Parquet keeps the rows of one row group.

use super::fault::Fault;
use super::orbit_arguments::{OrbitsFormat, OrbitsOptions};
use serde::Serialize;
use std::io::{self, Write};

/// One orbit.
#[derive(Debug, Default)]
pub struct Row {
    pub orbit: u64,
    pub side: String,
    pub fraction: String,
    pub aim: [String; 2],
    pub word: String,
}

impl Row {
    /// A row of which only the word is wanted.
    pub fn of_word(word: String) -> Row {
        Row {
            word,
            ..Row::default()
        }
    }
}

#[derive(Serialize)]
struct Object<'a> {
    orbit: u64,
    side: &'a str,
    fraction: &'a str,
    aim: &'a [String; 2],
    word: &'a str,
}

/// Refuses what a format cannot do, before any work.
pub fn check_format(options: &OrbitsOptions) -> Result<(), Fault> {
    if options.format != OrbitsFormat::Parquet {
        return Ok(());
    }
    if cfg!(not(feature = "parquet")) {
        return Err(Fault::BadInput(
            "this program was built without Parquet: build it with `cargo build --release --features parquet`, or write \
             --format csv"
                .into(),
        ));
    }
    if options.out.is_none() {
        return Err(Fault::BadInput(
            "--format parquet writes no text: name a file with --out PATH".into(),
        ));
    }
    Ok(())
}

/// Writes rows as they come.
pub enum RowWriter<'a> {
    Text(&'a mut dyn Write),
    Json(&'a mut dyn Write),
    Csv(Box<csv::Writer<&'a mut dyn Write>>),
    #[cfg(feature = "parquet")]
    Parquet(Box<super::orbit_parquet::ParquetRows<'a>>),
}

impl<'a> RowWriter<'a> {
    pub fn new(format: OrbitsFormat, out: &'a mut dyn Write) -> io::Result<RowWriter<'a>> {
        Ok(match format {
            OrbitsFormat::Text => RowWriter::Text(out),
            OrbitsFormat::Json => RowWriter::Json(out),
            OrbitsFormat::Csv => {
                let mut csv = csv::Writer::from_writer(out);
                csv.write_record(["orbit", "side", "fraction", "aim_x", "aim_y", "word"])?;
                RowWriter::Csv(Box::new(csv))
            }
            #[cfg(feature = "parquet")]
            OrbitsFormat::Parquet => {
                RowWriter::Parquet(Box::new(super::orbit_parquet::ParquetRows::new(out)?))
            }
            #[cfg(not(feature = "parquet"))]
            OrbitsFormat::Parquet => unreachable!("refused before the work began"),
        })
    }

    pub fn write(&mut self, row: &Row) -> io::Result<()> {
        match self {
            RowWriter::Text(out) => writeln!(out, "{}", row.word),
            RowWriter::Json(out) => {
                let object = Object {
                    orbit: row.orbit,
                    side: &row.side,
                    fraction: &row.fraction,
                    aim: &row.aim,
                    word: &row.word,
                };
                serde_json::to_writer(&mut **out, &object)?;
                out.write_all(b"\n")
            }
            RowWriter::Csv(csv) => {
                let [x, y] = &row.aim;
                let orbit = row.orbit.to_string();
                Ok(csv.write_record([&orbit, &row.side, &row.fraction, x, y, &row.word])?)
            }
            #[cfg(feature = "parquet")]
            RowWriter::Parquet(rows) => rows.write(row),
        }
    }

    pub fn finish(self) -> io::Result<()> {
        match self {
            RowWriter::Text(_) | RowWriter::Json(_) => Ok(()),
            RowWriter::Csv(mut csv) => csv.flush(),
            #[cfg(feature = "parquet")]
            RowWriter::Parquet(rows) => rows.finish(),
        }
    }
}
