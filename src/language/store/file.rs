//! The layout of the file: writing with a sum, and opening with a check.
//!
//! ```text
//! mark            8 bytes
//! version         u32, little endian as all numbers
//! reserved        u32, zero
//! graph           see `graph`
//! automaton       as the crate `fst` writes it
//! description     JSON
//! footer          u64 bytes of the graph, u64 of the automaton, u64 of the description,
//!                 u32 CRC-32 of everything before it, the mark's last 4 bytes
//! ```

use super::graph::Graph;
use super::{Description, StoreFault, StoredLanguage};
use fst::raw::Fst;
use mmap_io::MemoryMappedFile;
use std::io::{self, Write};
use std::ops::Range;
use std::path::Path;

/// The layout that is written and read.
pub const VERSION: u32 = 1;

const MARK: [u8; 8] = *b"\x8bwords\r\n";
pub(super) const HEADER: usize = 16;
const FOOTER: usize = 32;

/// Passes bytes on, counts them and keeps their sum.
pub(super) struct Summed<W> {
    inner: W,
    sum: crc32fast::Hasher,
    pub(super) written: u64,
}

impl<W: Write> Summed<W> {
    /// Writes the header.
    pub(super) fn begin(inner: W) -> io::Result<Summed<W>> {
        let mut out = Summed {
            inner,
            sum: crc32fast::Hasher::new(),
            written: 0,
        };
        out.write_all(&MARK)?;
        out.write_all(&VERSION.to_le_bytes())?;
        out.write_all(&[0; 4])?;
        Ok(out)
    }

    /// Writes the footer, given the bytes of the three parts.
    pub(super) fn end(mut self, parts: [u64; 3]) -> io::Result<()> {
        for size in parts {
            self.write_all(&size.to_le_bytes())?;
        }
        let sum = self.sum.clone().finalize();
        self.write_all(&sum.to_le_bytes())?;
        self.write_all(&MARK[4..])?;
        self.inner.flush()
    }
}

impl<W: Write> Write for Summed<W> {
    fn write(&mut self, bytes: &[u8]) -> io::Result<usize> {
        let taken = self.inner.write(bytes)?;
        self.sum.update(&bytes[..taken]);
        self.written += taken as u64;
        Ok(taken)
    }

    fn flush(&mut self) -> io::Result<()> {
        self.inner.flush()
    }
}

/// A file in memory, as the system maps it, with its parts.
#[derive(Debug)]
pub(super) struct Mapped {
    map: MemoryMappedFile,
    bytes: u64,
    graph: Range<u64>,
    automaton: Range<u64>,
}

impl Mapped {
    pub(super) fn bytes(&self) -> u64 {
        self.bytes
    }

    fn slice(&self, range: &Range<u64>) -> &[u8] {
        self.map
            .as_slice_bytes(range.start, range.end - range.start)
            .expect("a read-only map, and the ranges were checked when it was opened")
    }

    pub(super) fn graph(&self) -> Graph<'_> {
        Graph::view(self.slice(&self.graph)).expect("checked when the file was opened")
    }

    pub(super) fn automaton(&self) -> Fst<&[u8]> {
        Fst::new(self.slice(&self.automaton)).expect("checked when the file was opened")
    }
}

/// Opens a stored language.
///
/// Cost: reads the file once, for its sum.
///
/// # Errors
/// When the file cannot be read, is something else, of another version, or damaged.
pub fn open(path: &Path) -> Result<StoredLanguage, StoreFault> {
    let system = |source| StoreFault::System {
        path: path.into(),
        source,
    };
    let metadata = std::fs::metadata(path).map_err(system)?;
    if !metadata.is_file() {
        return Err(StoreFault::NotStored { path: path.into() });
    }
    // An empty file cannot be mapped.
    if metadata.len() < (HEADER + FOOTER) as u64 {
        let bytes = std::fs::read(path).map_err(system)?;
        return Err(match bytes.starts_with(&MARK) {
            true => damaged(path, "its end is missing"),
            false => StoreFault::NotStored { path: path.into() },
        });
    }
    let map = MemoryMappedFile::open_ro(path).map_err(|e| system(io::Error::other(e)))?;
    let bytes = map.len();
    let (graph, automaton, description) = {
        let all = map
            .as_slice_bytes(0, bytes)
            .map_err(|e| system(io::Error::other(e)))?;
        check(path, all)?
    };
    let language = StoredLanguage {
        file: Mapped {
            map,
            bytes,
            graph,
            automaton,
        },
        description,
    };
    check_parts(path, &language)?;
    Ok(language)
}

fn damaged(path: &Path, what: &'static str) -> StoreFault {
    StoreFault::Damaged {
        path: path.into(),
        what,
    }
}

/// Checks mark, version, sizes and sum, and finds the parts.
fn check(path: &Path, all: &[u8]) -> Result<(Range<u64>, Range<u64>, Description), StoreFault> {
    let damaged = |what| damaged(path, what);
    if !all.starts_with(&MARK) {
        return Err(StoreFault::NotStored { path: path.into() });
    }
    let version = u32::from_le_bytes(all[8..12].try_into().expect("four bytes"));
    if version != VERSION {
        return Err(StoreFault::Version {
            path: path.into(),
            found: version,
        });
    }
    let (body, footer) = all.split_at(all.len() - FOOTER);
    let (numbers, end) = footer.split_at(24);
    if end[4..] != MARK[4..] {
        return Err(damaged("its end is missing"));
    }
    let mut sum = crc32fast::Hasher::new();
    sum.update(body);
    sum.update(numbers);
    if end[..4] != sum.finalize().to_le_bytes() {
        return Err(damaged("its checksum does not fit its content"));
    }
    let size =
        |i: usize| u64::from_le_bytes(numbers[8 * i..8 * i + 8].try_into().expect("eight bytes"));
    let ends: Option<Vec<u64>> = (0..3)
        .scan(Some(HEADER as u64), |end, i| {
            *end = end.and_then(|end| end.checked_add(size(i)));
            Some(*end)
        })
        .collect();
    let ends = ends
        .filter(|ends| ends[2] == body.len() as u64)
        .ok_or(damaged("its parts have not the sizes that it says"))?;
    let description = serde_json::from_slice(&body[ends[1] as usize..])
        .map_err(|_| damaged("its description cannot be read"))?;
    Ok((HEADER as u64..ends[0], ends[0]..ends[1], description))
}

/// Checks that the parts fit each other, so that questions find what they rely on.
fn check_parts(path: &Path, language: &StoredLanguage) -> Result<(), StoreFault> {
    let (file, description) = (&language.file, language.description());
    let (alphabet, p) = (description.letters.len(), &description.complexity);
    let graph = Graph::view(file.slice(&file.graph));
    let automaton = Fst::new(file.slice(&file.automaton));
    let fits = alphabet <= u8::MAX as usize
        && p.len() == description.length + 1
        && graph.is_some_and(|graph| graph.is_sound(alphabet))
        && automaton.is_ok_and(|automaton| automaton.len() as u64 == p[description.length]);
    if fits {
        Ok(())
    } else {
        Err(damaged(path, "its parts do not fit each other"))
    }
}
