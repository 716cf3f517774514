//! Making certificates.

use super::format::{End, Entry, FieldText, Header, Kind, PLACES, Refutation, SCHEMA, TableText};
use super::locate::{Located, locate};
use super::refutation::refute;
use super::verify::plane::Plane;
use super::{format, witness};
use crate::language::beams::{WordBeam, beams_of_length};
use crate::language::measure::{RootSum, beam_measure};
use crate::number::{Field, Real};
use crate::run::{Control, Stopped};
use crate::table::triangulation::triangulate;
use crate::table::{LetterId, SideId, Table};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use rayon::prelude::*;
use rug::{Integer, Rational};
use std::io::{self, Write};
use thiserror::Error;

/// Why a certificate was not made.
#[derive(Debug, Error)]
pub enum MakingFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// Writing failed.
    #[error("{0}")]
    Writing(#[from] io::Error),
}

/// A number as the format writes it.
pub fn write_number(value: &Real) -> String {
    let den = value.denominator();
    let used = value
        .coordinates()
        .iter()
        .rposition(|c| *c != 0)
        .unwrap_or(0);
    let coordinates = value.coordinates()[..=used].iter();
    let text: Vec<String> = coordinates
        .map(|c| Rational::from((c, den)).to_string())
        .collect();
    text.join(" ")
}

fn write_field(field: &Field) -> FieldText {
    let (low, high) = field.isolating_interval();
    FieldText {
        polynomial: field
            .minimal_polynomial()
            .iter()
            .map(Integer::to_string)
            .collect(),
        root: [low.to_string(), high.to_string()],
    }
}

/// The table as the format writes it.
pub fn write_table(table: &Table) -> TableText {
    let corner = |i: usize| {
        let v = table.corner(i);
        [write_number(&v.x), write_number(&v.y)]
    };
    TableText {
        title: table.title().into(),
        field: write_field(table.field()),
        form: write_number(table.form()),
        rings: table
            .rings()
            .map(|ring| ring.map(corner).collect())
            .collect(),
        letters: table.letters().to_vec(),
        sides: (0..table.sides())
            .map(|side| table.letter(SideId(side as u8)))
            .collect(),
    }
}

/// The first line of a certificate about a table.
pub fn header(table: &Table, kind: Kind, length: Option<usize>) -> Header {
    let triangles = triangulate(table);
    Header {
        schema: SCHEMA.into(),
        kind,
        program: concat!("reboundary ", env!("CARGO_PKG_VERSION")).into(),
        length,
        table: write_table(table),
        triangles: triangles
            .iter()
            .map(|triangle| triangle.corners.map(|corner| corner.0 as usize))
            .collect(),
    }
}

/// What answers are made from.
pub struct Witnesses<'a> {
    /// The table.
    table: &'a Table,
    /// The table as the verifier reads it.
    plane: Plane,
}

impl<'a> Witnesses<'a> {
    /// Prepares a table.
    pub fn new(table: &'a Table) -> Witnesses<'a> {
        let header = header(table, Kind::Answers, None);
        Witnesses {
            table,
            plane: Plane::read(&header).expect("a checked table with its triangulation"),
        }
    }

    /// The refutations of a word that is not in the language.
    pub fn refute(&self, word: &[LetterId]) -> Option<Vec<Refutation>> {
        let word: Vec<usize> = word.iter().map(|letter| letter.0 as usize).collect();
        refute(&self.plane, &word)
    }

    /// The entry for a word.
    ///
    /// Cost: a walk along the word, an orbit with it, and for a word outside the language its refutations.
    pub fn answer(&self, engine: &AnyEngine, mesh: &Mesh, word: &[LetterId]) -> Entry {
        let found = locate(engine, mesh, word, self.table.form());
        self.entry(word, &found)
    }

    /// The entry for a word that was looked for.
    pub fn entry(&self, word: &[LetterId], found: &Located) -> Entry {
        let inside = found.longest_prefix == word.len();
        Entry {
            word: word
                .iter()
                .map(|l| self.table.letters()[l.0 as usize])
                .collect(),
            prefix: (!inside).then_some(found.longest_prefix),
            witness: found.beams.first().map(|beam| self.witness(beam)),
            measure: inside.then(|| cut_off(&found.measure)),
            refutations: if inside {
                Vec::new()
            } else {
                self.refute(&word[..found.longest_prefix + 1])
                    .expect("the walk found no line for the word")
            },
        }
    }

    fn witness(&self, beam: &WordBeam) -> format::Witness {
        let found = witness::witness(self.table, beam);
        format::Witness {
            side: found.side.0 as usize,
            start: found.fraction.to_string(),
            aim: found.aim.map(|c| c.to_string()),
        }
    }
}

/// A sum of roots to [`PLACES`] places, cut off.
fn cut_off(measure: &RootSum) -> String {
    let scale = Integer::from(Integer::u_pow_u(10, PLACES));
    let mut precision = 192;
    loop {
        let sum = measure.enclosure(precision);
        let cut = |bound: &rug::Float| {
            let exact = bound.to_rational().expect("finite") * &scale;
            Integer::from(exact.floor_ref())
        };
        let (low, high) = (cut(sum.lo()), cut(sum.hi()));
        // A measure that is a decimal itself never settles; the larger one is then exact.
        if low == high || precision >= 2048 {
            let digits = format!("{high:0>width$}", width = PLACES as usize + 1);
            let (whole, places) = digits.split_at(digits.len() - PLACES as usize);
            return format!("{whole}.{places}");
        }
        precision *= 2;
    }
}

fn write_line(out: &mut dyn Write, value: &impl serde::Serialize) -> io::Result<()> {
    serde_json::to_writer(&mut *out, value)?;
    out.write_all(b"\n")
}

/// Entries made at a time, between looks at the control.
const BATCH: usize = 4096;

/// Writes a certificate for all words of one length.
///
/// Cost: a walk over all beams, and for each word an exact orbit and measure. Memory: the beams of the words.
///
/// # Errors
/// When the control asks to stop, or writing fails.
pub fn certify_language(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    length: usize,
    control: &Control,
    out: &mut dyn Write,
) -> Result<u64, MakingFault> {
    let beams = beams_of_length(engine, mesh, length, control)?;
    write_line(out, &header(table, Kind::Language, Some(length)))?;
    let witnesses = Witnesses::new(table);
    let letters = |beam: &WordBeam| -> Vec<LetterId> {
        beam.word.iter().map(|side| mesh.letter(*side)).collect()
    };
    let words: Vec<&[WordBeam]> = beams.chunk_by(|a, b| letters(a) == letters(b)).collect();
    for batch in words.chunks(BATCH) {
        control.tick(batch.len() as u64)?;
        let entries: Vec<Entry> = batch
            .par_iter()
            .map(|beams| {
                let found = Located {
                    longest_prefix: length,
                    beams: beams.to_vec(),
                    measure: beams.iter().fold(RootSum::default(), |mut sum, beam| {
                        sum.add_sum(&beam_measure(beam, table.form()));
                        sum
                    }),
                };
                witnesses.entry(&letters(&beams[0]), &found)
            })
            .collect();
        for entry in &entries {
            write_line(out, entry)?;
        }
    }
    let entries = words.len() as u64;
    write_line(out, &End { entries })?;
    Ok(entries)
}

/// Writes a certificate that answers for each word whether it is in the language. Words come as letters, in batches.
///
/// # Errors
/// When the control asks to stop, writing fails, or the words cannot be read.
pub fn certify_answers(
    table: &Table,
    (engine, mesh): (&AnyEngine, &Mesh),
    words: impl Iterator<Item = io::Result<Vec<LetterId>>>,
    control: &Control,
    out: &mut dyn Write,
) -> Result<u64, MakingFault> {
    write_line(out, &header(table, Kind::Answers, None))?;
    let witnesses = Witnesses::new(table);
    let mut words = words.peekable();
    let mut entries = 0;
    while words.peek().is_some() {
        let batch: Vec<Vec<LetterId>> = words.by_ref().take(BATCH).collect::<io::Result<_>>()?;
        control.tick(batch.len() as u64)?;
        let answers: Vec<Entry> = batch
            .par_iter()
            .map(|word| witnesses.answer(engine, mesh, word))
            .collect();
        for answer in &answers {
            write_line(out, answer)?;
        }
        entries += answers.len() as u64;
    }
    write_line(out, &End { entries })?;
    Ok(entries)
}
