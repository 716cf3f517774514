//! `reboundary locate`.

use super::arguments::Format;
use super::certify::write_file;
use super::fault::Fault;
use super::launch::side_name;
use super::output::{emit, note, read_table, write_json};
use super::progress::{Progress, interruptible_control};
use super::word_arguments::LocateOptions;
use super::word_picture::closed_corridor;
use super::word_record::{Brief, Full, WordRecord, write_csv_header, write_text};
use crate::certificate::locate::{locate, measure_of};
use crate::certificate::make::{Witnesses, certify_answers};
use crate::certificate::witness::witness;
use crate::complexity::with_code::with_code;
use crate::figure::{Caption, corridor_picture};
use crate::language::measure::precision_for;
use crate::run::files::{check_place, write_whole};
use crate::study::pictures::corridor_shape;
use crate::study::results::LONGEST;
use crate::table::{LetterId, Table};
use crate::unfold::Mesh;
use crate::unfold::engine::{AnyEngine, Arithmetic};
use rayon::prelude::*;
use std::fs::File;
use std::io::{self, BufRead, BufReader, Write};
use std::path::Path;

/// Words looked for at a time.
const BATCH: usize = 4096;

pub fn run(options: &LocateOptions) -> Result<(), Fault> {
    for file in options.picture.iter().chain(&options.certificate) {
        check_place(file)?;
    }
    if options.picture.is_some() && options.word.len() != 1 {
        let text = "--picture draws one word: give a single WORD on the command line";
        return Err(Fault::BadInput(text.into()));
    }
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let seeker = Seeker::new(&loaded.table, options.exactness.arithmetic());
    if let Some(path) = &options.certificate {
        let control = interruptible_control();
        let progress = Progress::new(&control, options.common.quiet);
        progress.begin("certificate", None);
        let words: Vec<Vec<LetterId>> = seeker.words(options)?.collect::<Result<_, _>>()?;
        let longest = words.iter().map(Vec::len).max().unwrap_or(0);
        let engine = seeker.engine(longest);
        let count = write_file(path, |out| {
            let words = words.into_iter().map(Ok);
            Ok(certify_answers(
                seeker.table,
                (&engine, &seeker.mesh),
                words,
                &control,
                out,
            )?)
        })?;
        drop(progress);
        if !options.common.quiet {
            note(&format!(
                "answers written: {count}; check them with `reboundary verify {}`",
                path.display()
            ));
        }
        // From a file the certificate is all that is wanted.
        if options.words.is_some() && options.out.is_none() {
            return Ok(());
        }
    }
    if let Some(path) = &options.picture {
        let word = seeker.words(options)?.next().expect("one word")?;
        let picture = seeker.picture(&word)?;
        write_whole(path, |out| out.write_all(picture.as_bytes()))?;
    }
    let mut result = Ok(());
    emit(options.out.as_deref(), |out| {
        result = seeker.answer(options, out);
        match &result {
            Err(Fault::PipeClosed) => Err(io::ErrorKind::BrokenPipe.into()),
            Err(_) => Err(io::Error::other("not finished")),
            Ok(()) => Ok(()),
        }
    })
    .or_else(|fault| result.and(Err(fault)))
}

/// A table in which words are looked for.
struct Seeker<'a> {
    table: &'a Table,
    mesh: Mesh,
    arithmetic: Arithmetic,
    witnesses: Witnesses<'a>,
}

type Words<'a> = Box<dyn Iterator<Item = Result<Vec<LetterId>, Fault>> + 'a>;

impl<'a> Seeker<'a> {
    fn new(table: &'a Table, arithmetic: Arithmetic) -> Seeker<'a> {
        Seeker {
            table,
            mesh: Mesh::new(table),
            arithmetic,
            witnesses: Witnesses::new(table),
        }
    }

    /// An engine for words up to a length, extended by a letter at either end.
    fn engine(&self, longest: usize) -> AnyEngine {
        AnyEngine::new(self.table, longest + 2, self.arithmetic)
    }

    /// The words that were asked for.
    fn words(&self, options: &LocateOptions) -> Result<Words<'_>, Fault> {
        let Some(path) = &options.words else {
            let given: Vec<Result<_, _>> = options
                .word
                .iter()
                .map(|word| self.read(word, &format!("the word `{word}`")))
                .collect();
            return Ok(Box::new(given.into_iter()));
        };
        let (name, input) = open(path)?;
        let lines = (1u64..).zip(input.lines());
        Ok(Box::new(lines.filter_map(
            move |(number, line)| match line {
                Ok(line) if line.trim().is_empty() => None,
                Ok(line) => Some(self.read(line.trim(), &format!("{name}, line {number}"))),
                Err(error) => Some(Err(Fault::BadInput(format!("cannot read {name}: {error}")))),
            },
        )))
    }

    fn read(&self, word: &str, place: &str) -> Result<Vec<LetterId>, Fault> {
        let letters = self.table.letters();
        let mut read = Vec::new();
        for (at, letter) in (1..).zip(word.chars()) {
            let Some(index) = letters.iter().position(|known| *known == letter) else {
                let known: Vec<String> = letters.iter().map(char::to_string).collect();
                return Err(Fault::BadInput(format!(
                    "{place}: letter {at}, `{letter}`, is not a side of this table; its sides are {}",
                    known.join(", ")
                )));
            };
            read.push(LetterId(index as u8));
        }
        if read.is_empty() || read.len() > LONGEST {
            return Err(Fault::BadInput(format!(
                "{place}: a word has from 1 to {LONGEST} letters, this has {}",
                read.len()
            )));
        }
        Ok(read)
    }

    fn answer(&self, options: &LocateOptions, out: &mut dyn Write) -> Result<(), Fault> {
        let full = options.words.is_none() || options.full;
        let single = options.word.len() == 1;
        if options.format == Format::Csv {
            write_csv_header(out)?;
        }
        let mut words = self.words(options)?;
        let mut first = true;
        let mut reach = 0;
        let mut engine = self.engine(reach);
        loop {
            let batch: Vec<Vec<LetterId>> = words.by_ref().take(BATCH).collect::<Result<_, _>>()?;
            if batch.is_empty() {
                return Ok(());
            }
            let longest = batch.iter().map(Vec::len).max().unwrap_or(0);
            if longest > reach {
                reach = longest.next_power_of_two();
                engine = self.engine(reach);
            }
            let records: Vec<WordRecord> = batch
                .par_iter()
                .map(|word| {
                    if full {
                        WordRecord::Full(Box::new(self.full(&engine, word)))
                    } else {
                        WordRecord::Brief(self.brief(&engine, word))
                    }
                })
                .collect();
            for record in &records {
                match options.format {
                    Format::Text => write_text(record, first, out)?,
                    Format::Csv => record.write_csv(out)?,
                    Format::Json if single => write_json(out, record)?,
                    Format::Json => {
                        serde_json::to_writer(&mut *out, record).map_err(io::Error::from)?;
                        out.write_all(b"\n")?;
                    }
                }
                first = false;
            }
        }
    }

    fn spell(&self, word: &[LetterId]) -> String {
        word.iter()
            .map(|l| self.table.letters()[l.0 as usize])
            .collect()
    }

    fn brief(&self, engine: &AnyEngine, word: &[LetterId]) -> Brief {
        let precision = precision_for(self.table);
        let (reached, measure) = measure_of(engine, &self.mesh, word, precision);
        Brief::new(self.spell(word), word.len(), reached, &measure)
    }

    fn full(&self, engine: &AnyEngine, word: &[LetterId]) -> Full {
        let found = locate(engine, &self.mesh, word, self.table.form());
        let precision = precision_for(self.table);
        let brief = Brief::new(
            self.spell(word),
            word.len(),
            found.longest_prefix,
            &found.measure.enclosure(precision),
        );
        let witness = found.beams.first().map(|beam| {
            let found = witness(self.table, beam);
            let start = format!("{}@{}", side_name(self.table, found.side), found.fraction);
            (start, format!("{},{}", found.aim[0], found.aim[1]))
        });
        let mut full = Full::new(brief, self.table, &found.beams, witness);
        if found.longest_prefix == word.len() {
            full.set_measure(&found.measure);
            let inside = |letters: &[LetterId]| {
                measure_of(engine, &self.mesh, letters, 64).0 == letters.len()
            };
            full.set_extensions(self.table.letters(), word, inside);
            full.set_diagonals(self.table, &with_code(engine, &self.mesh, word));
        } else {
            let refutations = self.witnesses.refute(&word[..found.longest_prefix + 1]);
            full.set_refutations(self.table, refutations.unwrap_or_default());
        }
        full
    }

    /// The corridor of a word, or of its longest prefix with what closes it, as SVG.
    fn picture(&self, word: &[LetterId]) -> Result<String, Fault> {
        let engine = self.engine(word.len());
        let found = locate(&engine, &self.mesh, word, self.table.form());
        let spelled = self.spell(word);
        let beam = found.beams.first();
        let beam = beam.ok_or_else(|| Fault::BadInput("the empty word has no corridor".into()))?;
        let (corridor, caption) = if found.longest_prefix == word.len() {
            let caption = Caption::new(
                format!("Corridor of {spelled} in {}", self.table.title()),
                format!(
                    "Unfolded copies of the table with all lines that have the word {spelled}."
                ),
            );
            (corridor_shape(self.table, beam), caption)
        } else {
            let reached = found.longest_prefix;
            let refutations = self.witnesses.refute(&word[..reached + 1]);
            let pins: Vec<(usize, usize)> = refutations
                .iter()
                .flatten()
                .next()
                .map(|refutation| {
                    refutation
                        .pins
                        .iter()
                        .map(|pin| (pin.crossings, pin.corner))
                        .collect()
                })
                .unwrap_or_default();
            let caption = Caption::new(
                format!("{spelled} is no word of {}", self.table.title()),
                format!(
                    "Unfolded copies of the table along {}, the longest prefix with lines, and the corner images that \
                     no line to the next side passes as it should.",
                    self.spell(&word[..reached])
                ),
            );
            (closed_corridor(self.table, beam, &pins), caption)
        };
        corridor_picture(&corridor, &caption)
            .map_err(|e| Fault::Failed(format!("cannot draw the corridor: {e}")))
    }
}

fn open(path: &Path) -> Result<(String, Box<dyn BufRead>), Fault> {
    if path == Path::new("-") {
        return Ok((
            "standard input".into(),
            Box::new(BufReader::new(io::stdin())),
        ));
    }
    let name = path.display().to_string();
    let file = File::open(path).map_err(|e| Fault::BadInput(format!("cannot read {name}: {e}")))?;
    Ok((name, Box::new(BufReader::new(file))))
}
