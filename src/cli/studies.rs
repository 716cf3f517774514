//! `reboundary study` of many tables: each in a subfolder, in parallel, and an index.
//!
//! A table that cannot be studied loses nobody else: its row in the index says why, and the command ends with code 2 when the
//! input was bad (1 when the machine failed). A signal stops all; studies that are finished stay.

use super::arguments::StudyOptions;
use super::fault::Fault;
use super::output::{emit, read_table};
use super::progress::{Progress, interruptible_control};
use super::study::{Input, request};
use crate::complexity::claim::Claim;
use crate::run::files::ResultFolder;
use crate::run::{Control, memory};
use crate::study::collection::{Found, Member, prepare, write_index};
use crate::study::folder::MARK;
use crate::study::results::compute;
use rayon::prelude::*;
use std::collections::BTreeSet;
use std::fs;
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicUsize, Ordering};

/// The folder when none is named.
const DEFAULT_FOLDER: &str = "studies";

/// The table files meant: those named, and those in the folders named.
fn files(options: &StudyOptions) -> Result<Vec<PathBuf>, Fault> {
    let mut all = Vec::new();
    for path in &options.tables {
        if !path.is_dir() {
            all.push(path.clone());
            continue;
        }
        let fault =
            |e| Fault::BadInput(format!("{}: cannot read this folder: {e}", path.display()));
        let mut found = Vec::new();
        for entry in fs::read_dir(path).map_err(fault)? {
            let file = entry.map_err(fault)?.path();
            if file.extension().is_some_and(|e| e == "toml") && file.is_file() {
                found.push(file);
            }
        }
        if found.is_empty() {
            return Err(Fault::BadInput(format!(
                "{}: this folder holds no table file; name one with files that end in .toml",
                path.display()
            )));
        }
        found.sort();
        all.extend(found);
    }
    Ok(all)
}

/// A subfolder for each file: its name without the ending, numbered when another file has it.
fn subfolders(files: &[PathBuf]) -> Vec<String> {
    let mut taken = BTreeSet::new();
    let stem = |file: &Path| {
        let stem = file.file_stem().unwrap_or_default().to_string_lossy();
        // A subfolder must not look like a file of the index, nor hide.
        format!("{}{stem}", if stem.starts_with('.') { "_" } else { "" })
    };
    let free = |file: &PathBuf| {
        let stem = stem(file);
        let names = std::iter::once(stem.clone()).chain((2..).map(|i| format!("{stem}-{i}")));
        // Some file systems do not tell capitals apart.
        let mut free = names.filter(|name| taken.insert(name.to_lowercase()));
        free.next().expect("there are more numbers than files")
    };
    files.iter().map(free).collect()
}

/// Runs the studies.
pub fn run(options: &StudyOptions, claims: &[Claim]) -> Result<(), Fault> {
    for (given, name) in [
        (options.budget_time.is_some(), "--budget-time"),
        (options.keeping.checkpoint.is_some(), "--checkpoint"),
        (options.stats, "--stats"),
    ] {
        if given {
            return Err(Fault::BadInput(format!(
                "{name} is for the study of one table; leave it out, or name one table file"
            )));
        }
    }
    let files = &files(options)?[..];
    let default = PathBuf::from(DEFAULT_FOLDER);
    let folder = options.out.as_ref().unwrap_or(&default);
    prepare(folder)?;
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("tables", None);
    let side_by_side = rayon::current_num_threads().min(files.len()).max(1) as u64;
    let allowed = options
        .budget_memory
        .or_else(|| memory::available().map(|free| free / 10 * 9));
    let work = Shared {
        options,
        claims,
        memory: allowed.map(|bytes| bytes / side_by_side),
        control: &control,
    };
    let names = subfolders(files);
    let finished: Vec<Result<Found, Fault>> =
        one_each(&work, folder, files, &names, side_by_side as usize);
    drop(progress);
    let stopped = |f: &Result<Found, Fault>| matches!(f, Err(Fault::Stopped(_)));
    if finished.iter().any(stopped) {
        let done = finished.iter().filter(|f| f.is_ok()).count();
        return Err(Fault::Stopped(format!(
            "a signal came; {done} of {} studies are finished in {}, and there is no index",
            files.len(),
            folder.display()
        )));
    }
    conclude(options, folder, files, names, finished)
}

/// What the studies share.
struct Shared<'a> {
    options: &'a StudyOptions,
    claims: &'a [Claim],
    /// Bytes that one study may take; `None` when the system does not tell what is free.
    memory: Option<u64>,
    control: &'a Control,
}

impl Shared<'_> {
    /// Studies one table into a folder.
    fn study(&self, table: &Path, out: &Path) -> Result<Found, Fault> {
        let options = self.options;
        let loaded = read_table(table, &options.settings, options.common.quiet)?;
        drop(ResultFolder::new(out, MARK)?);
        let request = request(options, self.memory);
        let mut results = compute(&loaded.table, &request, self.control, |_| {})?;
        results.judge_claims(self.claims);
        let input = Input {
            options,
            table,
            loaded: &loaded,
            notices: &loaded.notices,
            stop: "complete",
        };
        input.write(&results, out, self.control)?;
        Ok(Found::of(&results))
    }
}

/// Studies the tables, so many at a time; the next table begins when one ends. Results are in the order of the files.
fn one_each(
    work: &Shared<'_>,
    folder: &Path,
    files: &[PathBuf],
    names: &[String],
    side_by_side: usize,
) -> Vec<Result<Found, Fault>> {
    let next = AtomicUsize::new(0);
    let mut found: Vec<(usize, Result<Found, Fault>)> = (0..side_by_side)
        .into_par_iter()
        .flat_map_iter(|_| {
            let mut mine = Vec::new();
            loop {
                let i = next.fetch_add(1, Ordering::Relaxed);
                if i >= files.len() {
                    return mine;
                }
                let out = folder.join(&names[i]);
                let result = work.study(&files[i], &out);
                mine.push((i, result));
            }
        })
        .collect();
    found.sort_by_key(|(i, _)| *i);
    found.into_iter().map(|(_, result)| result).collect()
}

fn conclude(
    options: &StudyOptions,
    folder: &Path,
    files: &[PathBuf],
    names: Vec<String>,
    finished: Vec<Result<Found, Fault>>,
) -> Result<(), Fault> {
    let (mut bad, mut failed) = (0, 0);
    let members: Vec<Member> = files
        .iter()
        .zip(names)
        .zip(&finished)
        .map(|((file, name), result)| {
            if let Err(fault) = result {
                match fault.exit_code() {
                    super::fault::BAD_INPUT => bad += 1,
                    _ => failed += 1,
                }
            }
            Member {
                file: file
                    .file_name()
                    .unwrap_or_default()
                    .to_string_lossy()
                    .into(),
                folder: result.is_ok().then_some(name),
                fault: result.as_ref().err().map(Fault::to_string),
                study: result.as_ref().ok().cloned(),
            }
        })
        .collect();
    write_index(folder, &members)?;
    if !options.common.quiet {
        emit(None, |out| {
            for member in &members {
                match &member.study {
                    Some(found) => writeln!(
                        out,
                        "{}: p({}) = {}",
                        found.title, found.length, found.words
                    )?,
                    None => writeln!(out, "{}: not studied", member.file)?,
                }
            }
            writeln!(out, "Open {}", folder.join("index.html").display())
        })?;
    }
    if bad + failed == 0 {
        return Ok(());
    }
    let faults: Vec<&str> = members.iter().filter_map(|m| m.fault.as_deref()).collect();
    let text = format!(
        "{} of {} tables were not studied; {} says why:\n{}",
        bad + failed,
        files.len(),
        folder.join("index.html").display(),
        faults.join("\n")
    );
    Err(match failed {
        0 => Fault::BadInput(text),
        _ => Fault::Failed(text),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn subfolders_are_told_apart() {
        let files = ["a/quay.toml", "b/quay.toml", "b/Quay.toml", ".toml"].map(PathBuf::from);
        assert_eq!(subfolders(&files), ["quay", "quay-2", "Quay-3", "_.toml"]);
    }
}
