//! The rows of `orbits` as an Apache Parquet file.
//!
//! Columns as in [`orbit_rows`](super::orbit_rows), all required: `orbit` is a 64-bit integer, the others are strings. Pages
//! are not compressed; words that repeat are stored once in a row group by the dictionary. A row group is written when its
//! text has [`GROUP_BYTES`], so memory does not depend on the number of orbits.

use super::orbit_rows::Row;
use parquet::data_type::{ByteArray, ByteArrayType, Int64Type};
use parquet::errors::ParquetError;
use parquet::file::properties::WriterProperties;
use parquet::file::writer::SerializedFileWriter;
use parquet::schema::parser::parse_message_type;
use std::io::{self, Write};
use std::sync::{Arc, Mutex};

const SCHEMA: &str = "message orbits {
    required int64 orbit;
    required binary side (string);
    required binary fraction (string);
    required binary aim_x (string);
    required binary aim_y (string);
    required binary word (string);
}";

/// Bytes of text in a row group.
const GROUP_BYTES: usize = 16 << 20;

/// What the Parquet writer fills and the output is handed: the writer wants to own its output and send it between
/// threads, which the output cannot.
#[derive(Clone, Default)]
struct Shared(Arc<Mutex<Vec<u8>>>);

impl Shared {
    fn take(&self) -> Vec<u8> {
        std::mem::take(&mut self.0.lock().expect("no writer panicked"))
    }
}

impl Write for Shared {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        self.0
            .lock()
            .expect("no writer panicked")
            .extend_from_slice(bytes);
        Ok(bytes.len())
    }

    fn flush(&mut self) -> io::Result<()> {
        Ok(())
    }
}

/// Writes rows in groups.
pub struct ParquetRows<'a> {
    out: &'a mut dyn Write,
    shared: Shared,
    file: SerializedFileWriter<Shared>,
    orbits: Vec<i64>,
    texts: [Vec<ByteArray>; 5],
    bytes: usize,
}

fn failed(error: ParquetError) -> io::Error {
    io::Error::other(error)
}

impl<'a> ParquetRows<'a> {
    pub fn new(out: &'a mut dyn Write) -> io::Result<ParquetRows<'a>> {
        let schema = parse_message_type(SCHEMA).map_err(failed)?;
        let shared = Shared::default();
        let properties = Arc::new(WriterProperties::builder().build());
        let file = SerializedFileWriter::new(shared.clone(), Arc::new(schema), properties);
        Ok(ParquetRows {
            out,
            shared,
            file: file.map_err(failed)?,
            orbits: Vec::new(),
            texts: Default::default(),
            bytes: 0,
        })
    }

    pub fn write(&mut self, row: &Row) -> io::Result<()> {
        let [x, y] = &row.aim;
        self.orbits
            .push(i64::try_from(row.orbit).map_err(io::Error::other)?);
        for (column, text) in self
            .texts
            .iter_mut()
            .zip([&row.side, &row.fraction, x, y, &row.word])
        {
            self.bytes += text.len();
            column.push(ByteArray::from(text.as_str()));
        }
        if self.bytes >= GROUP_BYTES {
            self.write_group()?;
        }
        Ok(())
    }

    fn write_group(&mut self) -> io::Result<()> {
        let mut group = self.file.next_row_group().map_err(failed)?;
        let mut texts = self.texts.iter();
        let mut first = true;
        while let Some(mut column) = group.next_column().map_err(failed)? {
            if first {
                let typed = column.typed::<Int64Type>();
                typed
                    .write_batch(&self.orbits, None, None)
                    .map_err(failed)?;
                first = false;
            } else if let Some(values) = texts.next() {
                let typed = column.typed::<ByteArrayType>();
                typed.write_batch(values, None, None).map_err(failed)?;
            }
            column.close().map_err(failed)?;
        }
        group.close().map_err(failed)?;
        self.orbits.clear();
        self.texts.iter_mut().for_each(Vec::clear);
        self.bytes = 0;
        self.out.write_all(&self.shared.take())
    }

    pub fn finish(mut self) -> io::Result<()> {
        if !self.orbits.is_empty() {
            self.write_group()?;
        }
        let ParquetRows {
            out, shared, file, ..
        } = self;
        file.close().map_err(failed)?;
        out.write_all(&shared.take())
    }
}
