//! Where a command's language comes from: a table, a file of words, or the rule of a reference file.

use super::arguments::GraphOptions;
use super::fault::Fault;
use super::output::read_table;
use super::words::total_words;
use super::work::Work;
use crate::language::suffixes::{Evidence, TextFault, factors_of_words};
use crate::language::tree::BYTES_PER_WORD;
use crate::language::{Language, walk};
use crate::number::Tiers;
use crate::reference::{self, ReferenceFault};
use crate::run::memory;
use crate::study::results::check_memory;
use crate::table::{MOST_SIDES, Table};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use clap::Args;
use serde::Serialize;
use std::path::{Path, PathBuf};

/// Exactly one source of a language.
#[derive(Clone, Debug, Args)]
#[group(required = true, multiple = false)]
pub struct LanguageSource {
    /// The table file
    pub table: Option<PathBuf>,
    /// A word set, one word a line: the language is their factors, taken as complete
    #[arg(long, value_name = "FILE")]
    pub words: Option<PathBuf>,
    /// Long words, one a line: their factors are a lower bound of the language that they come from
    #[arg(long, value_name = "FILE")]
    pub sequence: Option<PathBuf>,
    /// The output of `orbits`, in any of its formats: like --sequence
    #[arg(long, value_name = "FILE")]
    pub orbits: Option<PathBuf>,
    /// A reference file: the rule of a language (substitution, exchange, pattern, forbidden words)
    #[arg(long, value_name = "FILE")]
    pub reference: Option<PathBuf>,
}

/// How the language stands to what it is to be.
#[derive(Clone, Debug, Serialize)]
pub struct Completeness {
    /// table, words, sequence, orbits, or the kind of reference.
    pub kind: &'static str,
    /// True when every word is there; false when counts are lower bounds.
    pub complete: bool,
    /// For lower bounds: up to this length, every word was seen in both halves of the text.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub trusted_to: Option<usize>,
    /// For lower bounds: places, words seen once, words seen in one half only, by length.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub evidence: Vec<Evidence>,
    /// Whether every word has an extension on both sides.
    pub bi_extendable: bool,
}

/// A language with its letters.
pub struct Loaded {
    /// Its title.
    pub title: String,
    /// Its letters in their order.
    pub letters: Vec<char>,
    /// All words up to one more than the order that was asked for.
    pub language: Language,
    /// How it stands to what it is to be.
    pub completeness: Completeness,
    /// The table, when it comes from one.
    pub table: Option<Table>,
    /// How signs were decided, when any were.
    pub signs: Option<&'static str>,
    /// How often each tier decided.
    pub tiers: Option<Tiers>,
}

/// Orders that are computed when none is asked for.
pub const DEFAULT_ORDER: usize = 30;

/// Computes the words up to length `order` + 1; without an order, up to the default one, or as far as the words of a file
/// reach.
pub fn load(options: &GraphOptions, order: Option<usize>, work: &Work) -> Result<Loaded, Fault> {
    let (source, settings, exactness) = (&options.source, &options.settings, options.exactness);
    let (budget_memory, quiet) = (options.limits.budget_memory, options.common.quiet);
    let (control, progress) = (&*work.control, &work.progress);
    let longest = order.unwrap_or(DEFAULT_ORDER) + 1;
    if let Some(path) = &source.table {
        let loaded = read_table(path, settings, quiet)?;
        let mesh = Mesh::new(&loaded.table);
        let engine = AnyEngine::new(&loaded.table, longest, exactness.arithmetic());
        progress.begin("counting", None);
        let words = total_words(&loaded.table, &engine, &mesh, longest, control)?;
        check_memory(words, longest, budget_memory)?;
        progress.begin("language", Some(words));
        let (language, tiers) = walk::grow(&engine, &mesh, longest, control)?;
        return Ok(Loaded {
            title: loaded.table.title().into(),
            letters: loaded.table.letters().to_vec(),
            completeness: complete("table", &language),
            language,
            table: Some(loaded.table),
            signs: Some(engine.describe()),
            tiers: Some(tiers),
        });
    }
    progress.begin("language", None);
    if let Some(path) = &source.reference {
        let reference = reference::file::load(path, &settings.set)?;
        let allowed = words_that_fit();
        let language = reference.rule.language(longest, allowed);
        let language = language.map_err(|fault| reference_fault(path, &fault))?;
        return Ok(Loaded {
            title: reference.title,
            letters: reference.letters,
            completeness: complete(reference.rule.kind(), &language),
            language,
            table: None,
            signs: None,
            tiers: None,
        });
    }
    if !settings.set.is_empty() {
        let text = "--set goes with a table or a reference file; leave it out for a file of words";
        return Err(Fault::BadInput(text.into()));
    }
    match (&source.words, &source.sequence, &source.orbits) {
        (Some(path), _, _) => words_file(path, "words", order),
        (_, Some(path), _) => words_file(path, "sequence", order),
        (_, _, Some(path)) => words_file(path, "orbits", order),
        _ => unreachable!("one source is required"),
    }
}

fn complete(kind: &'static str, language: &Language) -> Completeness {
    Completeness {
        kind,
        complete: true,
        trusted_to: None,
        evidence: Vec::new(),
        bi_extendable: language.is_bi_extendable(),
    }
}

fn words_that_fit() -> u64 {
    let free = memory::available().unwrap_or(4 << 30);
    // A level is copied once while it is made.
    free / 10 * 8 / (2 * BYTES_PER_WORD)
}

fn reference_fault(path: &Path, fault: &ReferenceFault) -> Fault {
    let file = path.display();
    let help = match fault {
        ReferenceFault::TooManyWords { .. } | ReferenceFault::ImagesTooLong { .. } => {
            "ask for a smaller --length"
        }
        ReferenceFault::StillShrinking { .. } => {
            "choose lengths and shifts for which they settle: a map of finite type"
        }
        ReferenceFault::Empty => "forbid fewer words",
        ReferenceFault::TooManyStates { .. } => "forbid shorter words, or use fewer letters",
        ReferenceFault::Text(_) => "ask for a smaller --length",
    };
    Fault::BadInput(format!("{file}: {fault}; {help}"))
}

/// Long words in known letters; plain, or the output of `orbits`.
pub fn read_words(path: &Path, letters: &[char]) -> Result<Vec<Vec<u8>>, Fault> {
    let bad = |text: String| Fault::BadInput(format!("{}: {text}", path.display()));
    let words = file_words(path, true)?;
    let number = |c: char| {
        let place = letters.iter().position(|l| *l == c);
        place.map(|p| p as u8).ok_or_else(|| {
            let listed: String = letters.iter().collect();
            bad(format!(
                "`{}` is no letter of the language; the letters are {listed}",
                c.escape_debug()
            ))
        })
    };
    words
        .iter()
        .map(|word| word.chars().map(number).collect())
        .collect()
}

fn file_words(path: &Path, of_orbits: bool) -> Result<Vec<String>, Fault> {
    let bad = |text: String| Fault::BadInput(format!("{}: {text}", path.display()));
    let bytes = std::fs::read(path).map_err(|e| bad(format!("cannot read this file: {e}")))?;
    let text = String::from_utf8(bytes).map_err(|e| {
        let offset = e.utf8_error().valid_up_to();
        bad(format!("this is not a text file in UTF-8: byte {offset} fits no character; write one word a line"))
    })?;
    let text = text.strip_prefix('\u{feff}').unwrap_or(&text);
    match of_orbits {
        true => orbit_words(text).map_err(bad),
        false => plain_words(text).map_err(bad),
    }
}

/// Words from a file, their characters as letters in the order of characters.
fn words_file(path: &Path, kind: &'static str, order: Option<usize>) -> Result<Loaded, Fault> {
    let bad = |text: String| Fault::BadInput(format!("{}: {text}", path.display()));
    let words = file_words(path, kind == "orbits")?;
    let mut letters: Vec<char> = words.iter().flat_map(|w| w.chars()).collect();
    letters.sort_unstable();
    letters.dedup();
    if letters.len() > MOST_SIDES {
        let count = letters.len();
        return Err(bad(format!(
            "the words have {count} letters; at most {MOST_SIDES} can be told apart"
        )));
    }
    let numbers: Vec<Vec<u8>> = words
        .iter()
        .map(|word| {
            let number = |c: char| letters.binary_search(&c).unwrap_or(0) as u8;
            word.chars().map(number).collect()
        })
        .collect();
    let reach = numbers.iter().map(Vec::len).max().unwrap_or(0);
    if reach < 2 {
        return Err(bad(
            "a factor graph needs a word of at least 2 letters".into()
        ));
    }
    let order = match order {
        Some(order) if order >= reach => {
            return Err(bad(format!(
                "the longest word has {reach} letters; ask for a --length of at most {}",
                reach - 1
            )));
        }
        Some(order) => order,
        None if kind == "words" => reach - 1,
        None => DEFAULT_ORDER.min(reach - 1),
    };
    let texts = numbers.iter().map(Vec::as_slice);
    let found = factors_of_words(letters.len(), texts, order + 1, words_that_fit());
    let found = found.map_err(|fault| match fault {
        TextFault::TooMany { .. } => bad(format!("{fault}; ask for a smaller --length")),
        other => bad(other.to_string()),
    })?;
    let exact = kind == "words";
    let stem = path.file_stem().unwrap_or_default();
    Ok(Loaded {
        title: stem.to_string_lossy().into_owned(),
        letters,
        completeness: Completeness {
            kind,
            complete: exact,
            trusted_to: (!exact).then_some(found.trusted),
            evidence: if exact { Vec::new() } else { found.evidence },
            bi_extendable: found.language.is_bi_extendable(),
        },
        language: found.language,
        table: None,
        signs: None,
        tiers: None,
    })
}

/// One word a line; empty lines are nothing.
fn plain_words(text: &str) -> Result<Vec<String>, String> {
    let mut words = Vec::new();
    for (number, line) in (1..).zip(text.lines()) {
        let word = line.trim();
        let odd = |c: &char| c.is_whitespace() || c.is_control();
        if let Some(c) = word.chars().find(odd) {
            let c = c.escape_debug();
            return Err(format!(
                "line {number}: `{c}` is no letter; write one word a line, without spaces"
            ));
        }
        if !word.is_empty() {
            words.push(word.to_string());
        }
    }
    if words.is_empty() {
        return Err("there is no word in this file; write one word a line".into());
    }
    Ok(words)
}

/// The words of `orbits`: JSON Lines or CSV when the first line looks like it, else one a line.
fn orbit_words(text: &str) -> Result<Vec<String>, String> {
    let first = text.lines().next().unwrap_or_default();
    if first.starts_with('{') {
        let mut words = Vec::new();
        for (number, line) in (1..).zip(text.lines()) {
            let row: serde_json::Value = serde_json::from_str(line)
                .map_err(|e| format!("line {number} is no JSON object: {e}"))?;
            match row.get("word").and_then(|w| w.as_str()) {
                Some(word) => words.push(word.to_string()),
                None => {
                    return Err(format!(
                        "line {number} has no `word`; give the output of `reboundary orbits --format json`"
                    ));
                }
            }
        }
        return plain_words(&words.join("\n"));
    }
    if !first.contains(',') {
        return plain_words(text);
    }
    let mut rows = csv::Reader::from_reader(text.as_bytes());
    let header = rows.headers().map_err(|e| e.to_string())?;
    let Some(column) = header.iter().position(|name| name == "word") else {
        return Err(
            "the header has no column `word`; give the output of `reboundary orbits --format csv`"
                .into(),
        );
    };
    let mut words = Vec::new();
    for row in rows.records() {
        let row = row.map_err(|e| e.to_string())?;
        words.push(row.get(column).unwrap_or_default().to_string());
    }
    plain_words(&words.join("\n"))
}
