//! `reboundary compare`.

use super::analysis_arguments::CompareOptions;
use super::arguments::{Format, Settings};
use super::fault::Fault;
use super::grown::{Needs, grow};
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::export::spell;
use crate::language::compare::{
    Comparison, Renaming, compare_under, compare_up_to_renaming, differences,
};
use crate::language::distribution::{heaviest_first, probabilities};
use crate::language::measure::measure;
use crate::language::{Language, WordId};
use crate::number::Enclosure;
use crate::run::Control;
use crate::study::record::decimal;
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::collections::BTreeMap;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

/// A table with its words.
struct Entry {
    file: String,
    table: Table,
    language: Language,
}

/// Which maps of letters are tried.
enum Matching {
    AnyRenaming,
    AsWritten,
    Given(Renaming),
}

impl Matching {
    fn name(&self) -> &'static str {
        match self {
            Matching::AnyRenaming => "up to a renaming of letters",
            Matching::AsWritten => "letters as they are written",
            Matching::Given(_) => "under the given renaming",
        }
    }

    fn compare(&self, a: &Entry, b: &Entry, control: &Control) -> Result<Comparison, Fault> {
        let (first, second) = (&a.language, &b.language);
        Ok(match self {
            Matching::AnyRenaming => compare_up_to_renaming(first, second, control)?,
            Matching::Given(renaming) => compare_under(first, second, renaming, control)?,
            Matching::AsWritten => {
                let renaming = as_written(&a.table, &b.table);
                compare_under(first, second, &renaming, control)?
            }
        })
    }
}

pub fn run(options: &CompareOptions) -> Result<(), Fault> {
    let files = table_files(&options.tables)?;
    if options.rename.is_some() && files.len() != 2 {
        return Err(Fault::BadInput(format!(
            "--rename is for two tables, not {}; leave it out to look for renamings",
            files.len()
        )));
    }
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    // Every file is read before any is walked, so that a bad one is told at once.
    let none = Settings { set: Vec::new() };
    let mut tables = Vec::new();
    for file in &files {
        tables.push(read_table(file, &none, options.common.quiet)?.table);
    }
    let matching = match (&options.rename, options.as_written) {
        (Some(text), _) => Matching::Given(given_renaming(text, &tables[0], &tables[1])?),
        (None, true) => Matching::AsWritten,
        (None, false) => Matching::AnyRenaming,
    };
    let needs = Needs {
        more_bytes_a_word: 16,
        allowed: options.budget_memory,
    };
    let mut entries = Vec::new();
    for (file, table) in files.iter().zip(tables) {
        let arithmetic = options.exactness.arithmetic();
        let grown = grow(
            &table,
            options.length,
            arithmetic,
            needs,
            &control,
            &progress,
        )?;
        entries.push(Entry {
            file: file.display().to_string(),
            language: grown.language,
            table,
        });
    }
    progress.begin("comparing", None);
    if let [a, b] = &entries[..] {
        let pair = compare_pair(a, b, &matching, options, &control)?;
        drop(progress);
        return emit(options.out.as_deref(), |out| match options.format {
            Format::Text => write_pair(&pair, out),
            Format::Csv => write_pair_csv(&pair, out),
            Format::Json => write_json(out, &pair),
        });
    }
    let record = classify(&entries, &matching, options.length, &control)?;
    drop(progress);
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_classes(&record, out),
        Format::Csv => write_classes_csv(&record, out),
        Format::Json => write_json(out, &record),
    })
}

/// The files named, and those of folders in the order of their names.
fn table_files(named: &[PathBuf]) -> Result<Vec<PathBuf>, Fault> {
    let mut files = Vec::new();
    for path in named {
        if !path.is_dir() {
            files.push(path.clone());
            continue;
        }
        let found = toml_files(path).map_err(|e| {
            Fault::BadInput(format!("{}: cannot read this folder: {e}", path.display()))
        })?;
        if found.is_empty() {
            return Err(Fault::BadInput(format!(
                "{}: no table file (*.toml) is in this folder",
                path.display()
            )));
        }
        files.extend(found);
    }
    if files.len() < 2 {
        return Err(Fault::BadInput(
            "one table cannot be compared; name a second one, or a folder of tables".into(),
        ));
    }
    Ok(files)
}

fn toml_files(folder: &Path) -> io::Result<Vec<PathBuf>> {
    let mut files = Vec::new();
    for entry in std::fs::read_dir(folder)? {
        let path = entry?.path();
        if path.is_file() && path.extension().is_some_and(|e| e == "toml") {
            files.push(path);
        }
    }
    files.sort();
    Ok(files)
}

/// Each letter becomes itself, where the second table has it.
fn as_written(first: &Table, second: &Table) -> Renaming {
    let image = |letter: &char| position(second, *letter);
    Renaming::new(first.letters().iter().map(image).collect())
        .expect("the letters of a table differ")
}

fn position(table: &Table, letter: char) -> Option<u8> {
    let at = table.letters().iter().position(|l| *l == letter);
    at.map(|at| at as u8)
}

/// Reads `a=x,b=y`. Letters that are not named stay as they are, unless their name is taken.
fn given_renaming(text: &str, first: &Table, second: &Table) -> Result<Renaming, Fault> {
    let bad = |what: String| Fault::BadInput(format!("--rename: {what}"));
    let mut named: BTreeMap<char, char> = BTreeMap::new();
    for part in text.split(',') {
        let letters: Vec<char> = part.chars().collect();
        let [from, '=', to] = letters[..] else {
            return Err(bad(format!(
                "'{part}' is no pair of letters; write a letter of the first table, = and a letter of the second, \
                 with commas between pairs, such as a=x,b=y"
            )));
        };
        for (letter, table, which) in [(from, first, "first"), (to, second, "second")] {
            if position(table, letter).is_none() {
                let letters: String = table.letters().iter().collect();
                return Err(bad(format!(
                    "'{letter}' is no letter of the {which} table, whose letters are {letters}"
                )));
            }
        }
        if named.insert(from, to).is_some() {
            return Err(bad(format!(
                "the letter '{from}' is named twice; name it once"
            )));
        }
    }
    let taken = |to: char| named.values().any(|t| *t == to);
    let image = |letter: &char| match named.get(letter) {
        Some(to) => position(second, *to),
        None if taken(*letter) => None,
        None => position(second, *letter),
    };
    let images = first.letters().iter().map(image).collect();
    Renaming::new(images).map_err(|fault| {
        let name = |table: &Table, l: u8| table.letters()[l as usize];
        bad(format!(
            "'{}' and '{}' both become '{}'; a renaming keeps letters apart",
            name(first, fault.first),
            name(first, fault.second),
            name(second, fault.image)
        ))
    })
}

#[derive(Serialize)]
struct Named {
    file: String,
    title: String,
    letters: String,
}

impl Named {
    fn new(entry: &Entry) -> Named {
        Named {
            file: entry.file.clone(),
            title: entry.table.title().into(),
            letters: entry.table.letters().iter().collect(),
        }
    }
}

/// A word of one table that the other does not have.
#[derive(Serialize)]
struct Lone {
    word: String,
    /// In the letters of the other table; null when one of its letters has none there.
    renamed: Option<String>,
    /// Its share of the measure of all lines.
    probability: String,
}

/// The words of the first length at which two tables differ.
#[derive(Serialize)]
struct LoneWords {
    /// How many there are.
    count: usize,
    /// The heaviest of them.
    words: Vec<Lone>,
}

#[derive(Serialize)]
struct PairRecord {
    schema: &'static str,
    tables: [Named; 2],
    length: usize,
    matching: &'static str,
    agree_to: usize,
    first_difference: Option<usize>,
    /// Letters of the first table with those of the second that they become.
    renaming: Option<BTreeMap<String, String>>,
    /// p(0), p(1), … of both.
    p: [Vec<u64>; 2],
    /// The first length at which p differs.
    first_difference_of_p: Option<usize>,
    /// Null while they agree, and when no renaming is there to compare words under.
    only_first: Option<LoneWords>,
    only_second: Option<LoneWords>,
}

fn compare_pair(
    a: &Entry,
    b: &Entry,
    matching: &Matching,
    options: &CompareOptions,
    control: &Control,
) -> Result<PairRecord, Fault> {
    let comparison = matching.compare(a, b, control)?;
    let letter = |entry: &Entry, l: u8| entry.table.letters()[l as usize].to_string();
    let renaming = comparison.renaming.as_ref();
    let (mut only_first, mut only_second) = (None, None);
    if let (Some(n), Some(renaming)) = (comparison.first_difference(), renaming) {
        let lone = differences(&a.language, &b.language, renaming, n);
        let mut back = vec![None; b.language.alphabet()];
        renaming
            .pairs()
            .for_each(|(letter, image)| back[image as usize] = Some(letter));
        let back = Renaming::new(back).expect("the inverse of a one-to-one map");
        only_first = Some(lone_words(
            a,
            b,
            n,
            &lone.only_first,
            renaming,
            options,
            control,
        )?);
        only_second = Some(lone_words(
            b,
            a,
            n,
            &lone.only_second,
            &back,
            options,
            control,
        )?);
    }
    let p = [a, b].map(|entry| entry.language.complexity());
    Ok(PairRecord {
        schema: "reboundary-compare/1",
        tables: [Named::new(a), Named::new(b)],
        length: comparison.length,
        matching: matching.name(),
        agree_to: comparison.agree_to,
        first_difference: comparison.first_difference(),
        renaming: renaming.map(|renaming| {
            let pairs = renaming.pairs();
            pairs.map(|(l, m)| (letter(a, l), letter(b, m))).collect()
        }),
        first_difference_of_p: (0..p[0].len()).find(|n| p[0][*n] != p[1][*n]),
        p,
        only_first,
        only_second,
    })
}

/// Measures words of one table and spells the heaviest in the letters of both.
fn lone_words(
    entry: &Entry,
    other: &Entry,
    length: usize,
    words: &[WordId],
    renaming: &Renaming,
    options: &CompareOptions,
    control: &Control,
) -> Result<LoneWords, Fault> {
    let mut listed = Vec::new();
    if !words.is_empty() && options.most > 0 {
        let table = &entry.table;
        let engine = AnyEngine::new(table, length, options.exactness.arithmetic());
        let measured = measure(table, &engine, &Mesh::new(table), length, length, control)?;
        let all = probabilities(&measured.kept, &measured.whole);
        let lone: Vec<Enclosure> = words.iter().map(|w| all[*w as usize].clone()).collect();
        for at in heaviest_first(&lone).into_iter().take(options.most) {
            let word = words[at as usize];
            let letters = entry.language.word(length, word);
            let renamed = letters.iter().map(|l| {
                let image = renaming.image(*l)?;
                Some(other.table.letters()[image as usize])
            });
            listed.push(Lone {
                word: spell(&entry.language, length, word, table.letters()),
                renamed: renamed.collect(),
                probability: decimal(&lone[at as usize]),
            });
        }
    }
    Ok(LoneWords {
        count: words.len(),
        words: listed,
    })
}

fn write_pair(pair: &PairRecord, out: &mut dyn Write) -> io::Result<()> {
    let [first, second] = &pair.tables;
    writeln!(out, "first:  {} ({})", first.title, first.file)?;
    writeln!(out, "second: {} ({})", second.title, second.file)?;
    match pair.first_difference {
        None => writeln!(out, "equal {}, to length {}", pair.matching, pair.length)?,
        Some(n) => writeln!(out, "first different at length {n}, {}", pair.matching)?,
    }
    match &pair.renaming {
        Some(map) if pair.agree_to > 0 => {
            let pairs: Vec<String> = map.iter().map(|(a, b)| format!("{a}={b}")).collect();
            let (map, n) = (pairs.join(" "), pair.agree_to);
            writeln!(out, "renaming, good to length {n}: {map}")?;
        }
        Some(_) => {}
        None => writeln!(
            out,
            "{} letters against {}: no renaming",
            first.letters.chars().count(),
            second.letters.chars().count()
        )?,
    }
    writeln!(out)?;
    let rows: Vec<Vec<String>> = (0..=pair.length)
        .map(|n| {
            let (p, q) = (pair.p[0][n], pair.p[1][n]);
            vec![n.to_string(), p.to_string(), q.to_string()]
        })
        .collect();
    write_columns(out, &["n", "first p(n)", "second p(n)"], &rows)?;
    for (name, lone) in [("first", &pair.only_first), ("second", &pair.only_second)] {
        let Some(lone) = lone else {
            continue;
        };
        writeln!(out, "\nonly in the {name}: {} words", lone.count)?;
        if lone.words.is_empty() {
            continue;
        }
        let rows: Vec<Vec<String>> = lone
            .words
            .iter()
            .map(|w| {
                let renamed = w.renamed.clone().unwrap_or_else(|| "-".into());
                vec![w.word.clone(), renamed, w.probability.clone()]
            })
            .collect();
        write_columns(out, &["word", "renamed", "probability"], &rows)?;
        if lone.words.len() < lone.count {
            writeln!(out, "and {} more", lone.count - lone.words.len())?;
        }
    }
    Ok(())
}

fn write_pair_csv(pair: &PairRecord, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["n", "p_first", "p_second", "languages_agree"])?;
    for n in 0..=pair.length {
        csv.write_record([
            n.to_string(),
            pair.p[0][n].to_string(),
            pair.p[1][n].to_string(),
            (n <= pair.agree_to).to_string(),
        ])?;
    }
    csv.flush()
}

/// A table in its class.
#[derive(Serialize)]
struct Member {
    #[serde(flatten)]
    named: Named,
    /// Letters of the class's first table with those of this one that they become.
    renaming: BTreeMap<String, String>,
}

/// Tables with equal languages to the length.
#[derive(Serialize)]
struct Class {
    class: usize,
    /// p(0), p(1), …
    p: Vec<u64>,
    members: Vec<Member>,
    /// The longest length to which it agrees with an earlier class; null for the first.
    agree_to: Option<usize>,
    /// The first such class.
    nearest: Option<usize>,
}

#[derive(Serialize)]
struct ClassesRecord {
    schema: &'static str,
    length: usize,
    matching: &'static str,
    tables: usize,
    /// Entry n: how many classes there are at length n.
    classes_by_length: Vec<usize>,
    classes: Vec<Class>,
}

/// Puts each table into the class whose first table it equals, or makes it the first of a new one.
///
/// Agreeing to length n is an equivalence, so one table speaks for its class; and a class is new at length n exactly when it
/// agrees with no earlier class to that length.
fn classify(
    entries: &[Entry],
    matching: &Matching,
    length: usize,
    control: &Control,
) -> Result<ClassesRecord, Fault> {
    let mut classes: Vec<Class> = Vec::new();
    let mut firsts: Vec<&Entry> = Vec::new();
    'tables: for entry in entries {
        let mut nearest: Option<(usize, usize)> = None;
        for (class, first) in firsts.iter().enumerate() {
            let found = matching.compare(first, entry, control)?;
            if found.agree_to == length {
                let renaming = found.renaming.as_ref();
                classes[class].members.push(Member {
                    named: Named::new(entry),
                    renaming: spelled_map(renaming, &first.table, &entry.table),
                });
                continue 'tables;
            }
            if nearest.is_none_or(|(_, agree_to)| found.agree_to > agree_to) {
                nearest = Some((class, found.agree_to));
            }
        }
        let own = as_written(&entry.table, &entry.table);
        classes.push(Class {
            class: classes.len() + 1,
            p: entry.language.complexity(),
            members: vec![Member {
                named: Named::new(entry),
                renaming: spelled_map(Some(&own), &entry.table, &entry.table),
            }],
            agree_to: nearest.map(|(_, agree_to)| agree_to),
            nearest: nearest.map(|(class, _)| class + 1),
        });
        firsts.push(entry);
    }
    let at = |n: usize| {
        let new = |class: &&Class| class.agree_to.is_none_or(|agree_to| agree_to < n);
        classes.iter().filter(new).count()
    };
    Ok(ClassesRecord {
        schema: "reboundary-compare-classes/1",
        length,
        matching: matching.name(),
        tables: entries.len(),
        classes_by_length: (0..=length).map(at).collect(),
        classes,
    })
}

fn spelled_map(
    renaming: Option<&Renaming>,
    first: &Table,
    second: &Table,
) -> BTreeMap<String, String> {
    let letter = |table: &Table, l: u8| table.letters()[l as usize].to_string();
    let pairs = renaming.into_iter().flat_map(Renaming::pairs);
    pairs
        .map(|(a, b)| (letter(first, a), letter(second, b)))
        .collect()
}

fn write_classes(record: &ClassesRecord, out: &mut dyn Write) -> io::Result<()> {
    writeln!(
        out,
        "{} tables, {} classes with equal words to length {}, {}",
        record.tables,
        record.classes.len(),
        record.length,
        record.matching
    )?;
    let rows: Vec<Vec<String>> = record
        .classes_by_length
        .iter()
        .enumerate()
        .map(|(n, count)| vec![n.to_string(), count.to_string()])
        .collect();
    write_columns(out, &["length", "classes"], &rows)?;
    for class in &record.classes {
        let p = class.p[class.p.len() - 1];
        write!(out, "\nclass {}: p({}) = {p}", class.class, record.length)?;
        match (class.agree_to, class.nearest) {
            (Some(n), Some(nearest)) => {
                writeln!(out, ", agrees with class {nearest} to length {n}")?
            }
            _ => writeln!(out)?,
        }
        for member in &class.members {
            writeln!(out, "  {} ({})", member.named.title, member.named.file)?;
        }
    }
    Ok(())
}

fn write_classes_csv(record: &ClassesRecord, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["file", "title", "class", "nearest", "agree_to", "p"])?;
    let optional = |value: Option<usize>| value.map_or(String::new(), |v| v.to_string());
    for class in &record.classes {
        for member in &class.members {
            let p: Vec<String> = class.p.iter().map(u64::to_string).collect();
            csv.write_record([
                member.named.file.clone(),
                member.named.title.clone(),
                class.class.to_string(),
                optional(class.nearest),
                optional(class.agree_to),
                p.join(" "),
            ])?;
        }
    }
    csv.flush()
}
