//! `reboundary ask`.

use super::arguments::Format;
use super::ask_answers::{
    Contained, Counted, Followed, Numbered, Placed, SpecialWord, Word, write_answers,
};
use super::ask_arguments::AskOptions;
use super::fault::Fault;
use super::output::{emit, write_json};
use crate::language::store::{Everything, StoredLanguage, WordsOfLength, open};
use crate::run::memory;
use rand::SeedableRng;
use rand_chacha::ChaCha8Rng;
use serde::Serialize;
use std::collections::BTreeMap;
use std::collections::btree_map::Entry;
use std::fs::File;
use std::io::{self, BufRead, BufReader, Write};
use std::ops::ControlFlow;
use std::path::Path;

pub fn run(options: &AskOptions) -> Result<(), Fault> {
    let language = open(&options.file)?;
    let mut result = Ok(());
    emit(options.out.as_deref(), |out| {
        result = answer(options, &language, out);
        match &result {
            Err(Fault::PipeClosed) => Err(io::ErrorKind::BrokenPipe.into()),
            Err(_) => Err(io::Error::other("not finished")),
            Ok(()) => Ok(()),
        }
    })
    // What went wrong first says more than that the output was not finished.
    .or_else(|fault| result.and(Err(fault)))
}

fn answer(
    options: &AskOptions,
    language: &StoredLanguage,
    out: &mut dyn Write,
) -> Result<(), Fault> {
    let longest = language.longest();
    if options.contains || options.after || options.count || options.place {
        return about_words(options, language, out);
    }
    let format = options.format;
    if let Some(side) = options.special {
        let length = options.length.unwrap_or(longest.saturating_sub(1));
        return write_answers::<SpecialWord, _>(format, out, |answers| {
            each(|see| {
                language.special(side.into(), length, |special| {
                    see(answers.write(&SpecialWord {
                        word: language.spell(&special.word),
                        left: language.spell(&special.left),
                        right: language.spell(&special.right),
                    }))
                })
            })
        });
    }
    let length = options.length.unwrap_or(longest);
    let mut words = language.words_of_length(length)?;
    let spelled = |word: &[u8]| Word {
        word: language.spell(word),
    };
    if !options.nth.is_empty() {
        // All of them before the first is written: a number may be too great.
        let found: Result<Vec<_>, _> = options.nth.iter().map(|i| words.nth(*i)).collect();
        let found = found?;
        write_answers::<Numbered, _>(format, out, |answers| {
            for (index, word) in options.nth.iter().zip(&found) {
                let (index, word) = (*index, language.spell(word));
                answers.write(&Numbered { index, word })?;
            }
            Ok(())
        })
    } else if let Some(count) = options.random {
        let mut random = ChaCha8Rng::seed_from_u64(options.seed.unwrap_or(0));
        write_answers::<Word, _>(format, out, |answers| {
            for _ in 0..count {
                answers.write(&spelled(&words.random(&mut random)))?;
            }
            Ok(())
        })
    } else if let Some(pattern) = &options.pattern {
        let pattern = language.pattern(pattern)?;
        write_answers::<Word, _>(format, out, |answers| {
            each(|see| {
                language.matches(&pattern, length, |word| see(answers.write(&spelled(word))))
            })
        })
    } else if options.list {
        write_answers::<Word, _>(format, out, |answers| {
            each(|see| {
                language.visit_length(length, &Everything, |word, _, ()| {
                    see(answers.write(&spelled(word)))
                })
            })
        })
    } else {
        facts(format, language, out)
    }
}

/// Runs a visit that writes what it sees, until writing fails.
fn each<E>(
    visit: impl FnOnce(&mut dyn FnMut(io::Result<()>) -> ControlFlow<()>) -> Result<(), E>,
) -> Result<(), Fault>
where
    Fault: From<E>,
{
    let mut written = Ok(());
    visit(&mut |result| {
        written = result;
        match written {
            Ok(()) => ControlFlow::Continue(()),
            Err(_) => ControlFlow::Break(()),
        }
    })?;
    Ok(written?)
}

fn about_words(
    options: &AskOptions,
    language: &StoredLanguage,
    out: &mut dyn Write,
) -> Result<(), Fault> {
    let format = options.format;
    if options.contains {
        return write_answers::<Contained, _>(format, out, |answers| {
            for_each_word(options, language, |word, text| {
                let in_language = language.find(word)?.is_some();
                let prefix = language.longest_prefix(word).length();
                Ok(answers.write(&Contained {
                    word: text.into(),
                    in_language,
                    longest_prefix: language.spell(&word[..prefix]),
                })?)
            })
        });
    }
    if options.after {
        return write_answers::<Followed, _>(format, out, |answers| {
            for_each_word(options, language, |word, text| {
                let letters = match language.find(word)? {
                    Some(cursor) => Some(language.spell(&language.continuations(&cursor)?)),
                    None => None,
                };
                let word = text.into();
                Ok(answers.write(&Followed { word, letters })?)
            })
        });
    }
    if options.count {
        let length = options.length.unwrap_or(language.longest());
        let mut of_length = language.words_of_length(length)?;
        return write_answers::<Counted, _>(format, out, |answers| {
            for_each_word(options, language, |word, text| {
                let cursor = language.find(word)?;
                Ok(answers.write(&Counted {
                    word: text.into(),
                    length,
                    words: cursor.map_or(0, |cursor| of_length.count(&cursor)),
                })?)
            })
        });
    }
    let mut by_length: BTreeMap<usize, WordsOfLength<'_>> = BTreeMap::new();
    write_answers::<Placed, _>(format, out, |answers| {
        for_each_word(options, language, |word, text| {
            let words = match by_length.entry(word.len()) {
                Entry::Occupied(known) => known.into_mut(),
                // Words that are too long are refused here.
                Entry::Vacant(free) => free.insert(language.words_of_length(word.len())?),
            };
            let index = words.place(word);
            let word = text.into();
            Ok(answers.write(&Placed { word, index })?)
        })
    })
}

/// Shows each word that was asked about, as letters and as text. A fault says where the word stands.
fn for_each_word(
    options: &AskOptions,
    language: &StoredLanguage,
    mut see: impl FnMut(&[u8], &str) -> Result<(), Fault>,
) -> Result<(), Fault> {
    let mut one = |text: &str, place: &dyn Fn() -> String| {
        let read = language.parse(text).map_err(Fault::from);
        read.and_then(|word| see(&word, text))
            .map_err(|fault| match fault {
                Fault::BadInput(text) => Fault::BadInput(format!("{}: {text}", place())),
                other => other,
            })
    };
    let Some(path) = &options.words else {
        if options.word.is_empty() {
            let text = "which words? Write them behind the file, or give a file of words with --words FILE";
            return Err(Fault::BadInput(text.into()));
        }
        for word in &options.word {
            one(word, &|| format!("the word `{word}`"))?;
        }
        return Ok(());
    };
    let (name, input) = input(path)?;
    for (number, line) in (1u64..).zip(input.lines()) {
        let line = line.map_err(|e| Fault::BadInput(format!("cannot read {name}: {e}")))?;
        let word = line.trim();
        if !word.is_empty() {
            one(word, &|| format!("{name}, line {number}"))?;
        }
    }
    Ok(())
}

fn input(path: &Path) -> Result<(String, Box<dyn BufRead>), Fault> {
    if path == Path::new("-") {
        let input = BufReader::new(io::stdin());
        return Ok(("standard input".into(), Box::new(input)));
    }
    let name = path.display().to_string();
    match File::open(path) {
        Ok(file) => Ok((name, Box::new(BufReader::new(file)))),
        Err(error) => Err(Fault::BadInput(format!("cannot read {name}: {error}"))),
    }
}

#[derive(Serialize)]
struct Facts<'a> {
    schema: &'static str,
    title: &'a str,
    letters: String,
    length: usize,
    words: u64,
    bytes: u64,
    graph_order: usize,
    complexity: &'a [u64],
    program: &'a str,
    settings: &'a [String],
    table: &'a str,
}

/// What the file is, when nothing else is asked.
fn facts(format: Format, language: &StoredLanguage, out: &mut dyn Write) -> Result<(), Fault> {
    let said = language.description();
    let facts = Facts {
        schema: "reboundary-stored/1",
        title: &said.title,
        letters: said.letters.iter().collect(),
        length: said.length,
        words: said.complexity[said.length],
        bytes: language.bytes(),
        graph_order: said.order,
        complexity: &said.complexity,
        program: &said.program,
        settings: &said.settings,
        table: &said.table,
    };
    match format {
        Format::Json => Ok(write_json(out, &facts)?),
        Format::Csv => {
            let mut csv = csv::Writer::from_writer(out);
            csv.write_record(["n", "p"]).map_err(io::Error::from)?;
            for (n, p) in facts.complexity.iter().enumerate() {
                csv.write_record([n.to_string(), p.to_string()])
                    .map_err(io::Error::from)?;
            }
            Ok(csv.flush()?)
        }
        Format::Text => {
            writeln!(out, "{}", facts.title)?;
            writeln!(out, "letters: {}", facts.letters)?;
            let (length, words) = (facts.length, facts.words);
            writeln!(
                out,
                "all words up to length {length}, {words} of that length"
            )?;
            let size = memory::display(facts.bytes);
            let each = facts.bytes as f64 / words as f64;
            writeln!(out, "{size}, {each:.2} bytes for each of them")?;
            if !facts.settings.is_empty() {
                writeln!(out, "parameters: {}", facts.settings.join(", "))?;
            }
            Ok(writeln!(out, "stored by version {}", facts.program)?)
        }
    }
}
