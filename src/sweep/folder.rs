//! A sweep's folder.
//!
//! `members/` holds one file for each finished member, with everything that it was made from: the text of its table
//! file, the request and the version of the program. A member is computed again only when one of these differs,
//! so an interrupted sweep continues, and a refined one keeps what it shares. `sweep.json`, `sweep.csv` and the
//! pictures are written from the members at the end, also after a stop (`complete` then says false).

use super::member::{Request, Row, Setting, compute};
use super::picture::{Quantity, draw};
use super::range::Value;
use crate::figure::FigureError;
use crate::language::walk::GrowthFault;
use crate::run::Control;
use crate::run::files::{OutputFault, write_whole};
use crate::table::file::{bases, parse};
use rayon::prelude::*;
use serde::{Deserialize, Serialize};
use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicUsize, Ordering};
use thiserror::Error;

/// Why a sweep did not end well.
#[derive(Debug, Error)]
pub enum SweepFault {
    /// There is no such parameter.
    #[error("the table file has no parameter `{name}`; {known}")]
    UnknownParameter {
        /// The name.
        name: String,
        /// Which parameters there are, as a sentence.
        known: String,
    },
    /// The folder holds something else.
    #[error("{} is not empty and holds no earlier sweep: choose another folder", path.display())]
    Occupied {
        /// The folder.
        path: PathBuf,
    },
    /// The system refused.
    #[error("cannot use {}: {source}", path.display())]
    System {
        /// The folder or file.
        path: PathBuf,
        /// The reason.
        source: io::Error,
    },
    /// A file could not be written.
    #[error(transparent)]
    Output(#[from] OutputFault),
    /// A member's language is too large.
    #[error(transparent)]
    Growth(#[from] GrowthFault),
    /// A picture could not be drawn.
    #[error(transparent)]
    Figure(#[from] FigureError),
}

/// A family to compute.
#[derive(Clone, Debug)]
pub struct Family<'a> {
    /// The name of the table file, for messages.
    pub file: &'a str,
    /// The text of the table file.
    pub text: &'a str,
    /// The parameters.
    pub names: Vec<&'a str>,
    /// The values of each member.
    pub members: Vec<Vec<Value>>,
    /// What to compute.
    pub request: Request,
    /// The n of the N(n) in the picture.
    pub shown_diagonals: Vec<usize>,
}

/// How a sweep ended.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Outcome {
    /// Members of the family.
    pub members: usize,
    /// Members that are finished.
    pub finished: usize,
    /// Members that an earlier sweep had finished.
    pub kept: usize,
    /// Members that are no table.
    pub without_table: usize,
    /// What the first of these says.
    pub first_fault: Option<String>,
    /// Members whose routes differ: a fault of the program.
    pub disagreeing: usize,
}

/// A member's file.
#[derive(Debug, PartialEq, Serialize, Deserialize)]
struct Finished {
    version: String,
    request: Request,
    table_text: String,
    row: Row,
}

#[derive(Serialize)]
struct SweepRecord<'a> {
    schema: &'static str,
    request: Request,
    complete: bool,
    members: usize,
    rows: &'a [Row],
}

const VERSION: &str = env!("CARGO_PKG_VERSION");

/// Computes a family into a folder.
///
/// Cost: for each member that is not kept, that of counting its generalized diagonals, about p(length) steps, and about
/// Σ p(n) more by beams. Members run in parallel.
///
/// # Errors
/// As [`SweepFault`] says; after [`GrowthFault::Stopped`] the finished members are not an error: the outcome
/// tells how many there are.
pub fn sweep(folder: &Path, family: &Family<'_>, control: &Control) -> Result<Outcome, SweepFault> {
    check_names(family)?;
    let members: Vec<Vec<Setting>> = (family.members.iter())
        .map(|values| settings_of(family, values))
        .collect();
    prepare(folder)?;
    let texts = all_texts(family);
    let kept = AtomicUsize::new(0);
    let finish = |settings: &Vec<Setting>| -> Result<Option<Row>, SweepFault> {
        let path = folder.join("members").join(file_name(settings));
        if let Some(row) = earlier(&path, family, &texts, settings) {
            kept.fetch_add(1, Ordering::Relaxed);
            return Ok(Some(row));
        }
        if control.is_stopped() {
            return Ok(None);
        }
        let computed = compute(
            (family.file, family.text),
            settings.clone(),
            family.request,
            control,
        );
        let row = match computed {
            Ok(row) => row,
            Err(GrowthFault::Stopped(_)) => return Ok(None),
            Err(fault) => return Err(fault.into()),
        };
        let finished = Finished {
            version: VERSION.into(),
            request: family.request,
            table_text: texts.clone(),
            row,
        };
        write_whole(&path, |out| write_json(out, &finished))?;
        Ok(Some(finished.row))
    };
    let rows: Vec<Option<Row>> = members.par_iter().map(finish).collect::<Result<_, _>>()?;
    let rows: Vec<Row> = rows.into_iter().flatten().collect();
    let outcome = Outcome {
        members: members.len(),
        finished: rows.len(),
        kept: kept.into_inner(),
        without_table: rows.iter().filter(|row| !row.is_table).count(),
        first_fault: rows.iter().find_map(|row| row.fault.clone()),
        disagreeing: rows
            .iter()
            .filter(|row| row.routes_agree == Some(false))
            .count(),
    };
    write_results(folder, family, &rows, outcome.finished == outcome.members)?;
    Ok(outcome)
}

fn settings_of(family: &Family<'_>, values: &[Value]) -> Vec<Setting> {
    (family.names.iter().zip(values))
        .map(|(name, value)| Setting {
            name: (*name).into(),
            value: value.text.clone(),
            approximate: value.approximate,
        })
        .collect()
}

/// Makes the folder, or accepts an empty one or that of an earlier sweep.
fn prepare(folder: &Path) -> Result<(), SweepFault> {
    let system = |path: &Path| {
        let path = path.to_path_buf();
        move |source| SweepFault::System { path, source }
    };
    let members = folder.join("members");
    if folder.exists() && !members.is_dir() {
        let mut entries = fs::read_dir(folder).map_err(system(folder))?;
        if entries.next().is_some() {
            return Err(SweepFault::Occupied {
                path: folder.into(),
            });
        }
    }
    if !folder.exists() {
        // One level only: a mistyped path should not grow a tree of folders.
        fs::create_dir(folder).map_err(system(folder))?;
    }
    if !members.is_dir() {
        fs::create_dir(&members).map_err(system(&members))?;
    }
    Ok(())
}

/// The text of the table file and those that it stands on.
fn all_texts(family: &Family<'_>) -> String {
    let mut texts = family.text.to_string();
    for base in bases(family.file, family.text) {
        texts += &format!("\n[base {}]\n{}", base.name, base.text);
    }
    texts
}

/// The row of an earlier sweep, when it was made from the same.
fn earlier(path: &Path, family: &Family<'_>, texts: &str, settings: &[Setting]) -> Option<Row> {
    let finished: Finished = serde_json::from_str(&fs::read_to_string(path).ok()?).ok()?;
    let same = finished.version == VERSION
        && finished.request == family.request
        && finished.table_text == texts
        && finished.row.settings == settings;
    same.then_some(finished.row)
}

/// Refuses names that the file does not have. A file whose own values give no table is not looked at: its members
/// may be tables, and their rows say what is wrong otherwise.
fn check_names(family: &Family<'_>) -> Result<(), SweepFault> {
    let Ok(loaded) = parse(family.file, family.text) else {
        return Ok(());
    };
    let known: Vec<&str> = loaded.parameters.iter().map(|p| p.name.as_str()).collect();
    match family.names.iter().find(|name| !known.contains(name)) {
        None => Ok(()),
        Some(name) => Err(SweepFault::UnknownParameter {
            name: (*name).into(),
            known: match known.len() {
                0 => "it has none: add a line `t = \"1/3\"` under `[parameters]`".into(),
                _ => format!("it has {}", known.join(", ")),
            },
        }),
    }
}

/// A file name that tells the values apart: letters, digits and `=-.` stay, everything else becomes its code.
fn file_name(settings: &[Setting]) -> String {
    let mut name = String::new();
    for setting in settings {
        for c in format!("{}={} ", setting.name, setting.value)
            .trim_end()
            .chars()
        {
            match c {
                'a'..='z' | '0'..='9' | '=' | '-' | '.' => name.push(c),
                '/' => name.push('_'),
                // Capitals too: some file systems do not tell them apart.
                other => name.push_str(&format!("%{:x}%", other as u32)),
            }
        }
        name.push('+');
    }
    name.pop();
    // Long names are cut and told apart by a sum over the whole name (FNV-1a); two members with one name would only
    // be computed again each time, since a file is believed only when its settings agree.
    if name.len() > 120 {
        let sum = name.bytes().fold(0xcbf2_9ce4_8422_2325_u64, |sum, byte| {
            (sum ^ u64::from(byte)).wrapping_mul(0x0100_0000_01b3)
        });
        name.truncate(100);
        name.push_str(&format!("+{sum:016x}"));
    }
    name + ".json"
}

fn write_json(out: &mut dyn Write, value: &impl Serialize) -> io::Result<()> {
    serde_json::to_writer_pretty(&mut *out, value)?;
    out.write_all(b"\n")
}

fn write_results(
    folder: &Path,
    family: &Family<'_>,
    rows: &[Row],
    complete: bool,
) -> Result<(), SweepFault> {
    let record = SweepRecord {
        schema: "reboundary-sweep/1",
        request: family.request,
        complete,
        members: family.members.len(),
        rows,
    };
    write_whole(&folder.join("sweep.csv"), |out| {
        write_csv(out, family, rows)
    })?;
    let words = draw(rows, &[Quantity::Words(family.request.length)])?;
    write_whole(&folder.join("words.svg"), |out| {
        out.write_all(words.as_bytes())
    })?;
    if family.request.by_diagonals && !family.shown_diagonals.is_empty() {
        let shown: Vec<Quantity> = (family.shown_diagonals.iter())
            .map(|n| Quantity::Diagonals(*n))
            .collect();
        let diagonals = draw(rows, &shown)?;
        write_whole(&folder.join("diagonals.svg"), |out| {
            out.write_all(diagonals.as_bytes())
        })?;
    }
    Ok(write_whole(&folder.join("sweep.json"), |out| {
        write_json(out, &record)
    })?)
}

fn write_csv(out: &mut dyn Write, family: &Family<'_>, rows: &[Row]) -> io::Result<()> {
    let length = family.request.length;
    let mut csv = csv::Writer::from_writer(out);
    let mut header: Vec<String> = Vec::new();
    for name in &family.names {
        header.extend([(*name).to_string(), format!("{name}_decimal")]);
    }
    let facts = [
        "table",
        "fault",
        "sides",
        "field_degree",
        "convex",
        "reflection_group_order",
        "routes_agree",
    ];
    header.extend(facts.map(String::from));
    header.extend((0..=length).map(|n| format!("p{n}")));
    let crossings = if family.request.by_diagonals {
        length.saturating_sub(1)
    } else {
        0
    };
    header.extend((0..crossings).map(|n| format!("N{n}")));
    csv.write_record(&header)?;
    let text = |value: Option<String>| value.unwrap_or_default();
    for row in rows {
        let mut cells: Vec<String> = Vec::new();
        for setting in &row.settings {
            cells.extend([setting.value.clone(), setting.approximate.to_string()]);
        }
        cells.extend([
            row.is_table.to_string(),
            text(row.fault.clone()),
            text(row.sides.map(|n| n.to_string())),
            text(row.field_degree.map(|n| n.to_string())),
            text(row.convex.map(|c| c.to_string())),
            match (row.is_table, row.reflection_group_order) {
                (true, None) => "infinite".into(),
                (_, order) => text(order.map(|n| n.to_string())),
            },
            text(row.routes_agree.map(|a| a.to_string())),
        ]);
        let at = |values: &[u64], n: usize| text(values.get(n).map(u64::to_string));
        cells.extend((0..=length).map(|n| at(&row.p, n)));
        let diagonals = row.diagonals.as_deref().unwrap_or(&[]);
        cells.extend((0..crossings).map(|n| at(diagonals, n)));
        csv.write_record(&cells)?;
    }
    csv.flush()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn file_names_tell_values_apart() {
        let name = |value: &str| {
            file_name(&[Setting {
                name: "t".into(),
                value: value.into(),
                approximate: 0.0,
            }])
        };
        assert_eq!(name("1/10"), "t=1_10.json");
        assert_ne!(name("sqrt(2)"), name("sqrt(2))"));
        assert_ne!(name("T"), name("t"));
        let long = |end: &str| name(&("1+".repeat(100) + end));
        assert!(long("1").len() < 140);
        assert_ne!(long("1"), long("2"));
    }
}
