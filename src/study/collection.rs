//! Many studies in one folder, and the index that compares them.
//!
//! Each table has a subfolder of its own. `index.html` compares; `index.json` and `index.csv` hold the same for scripts. A table
//! that could not be studied has a row that says why. The index is written twice: at the start, marked incomplete, which
//! makes the folder ours, and whole at the end.

use super::html::{DataTable, contents, escape, frame, heading, strings};
use super::report_growth::standing_class;
use super::results::Results;
use super::statement::Standing;
use crate::run::files::{OutputFault, write_whole};
use serde::Serialize;
use std::collections::BTreeMap;
use std::fs;
use std::io::{self, Write};
use std::path::{Path, PathBuf};

/// The file that marks a folder of studies.
pub const MARK: &str = "index.json";
/// The version of its layout.
pub const SCHEMA: &str = "reboundary-studies/1";

/// The row of a table in the index.
#[derive(Clone, Debug, Serialize)]
pub struct Member {
    /// Name of the table file, without its folder.
    pub file: String,
    /// The subfolder; null when there is no study.
    pub folder: Option<String>,
    /// Why there is no study.
    pub fault: Option<String>,
    /// What was found.
    pub study: Option<Found>,
}

/// What the index tells of a study.
#[derive(Clone, Debug, Serialize)]
pub struct Found {
    /// Title of the table.
    pub title: String,
    /// N, the longest words.
    pub length: usize,
    /// p(N).
    pub words: u64,
    /// p(N)/N³.
    pub quotient: f64,
    /// p(1), …, p(N), so that studies of different lengths can be compared.
    pub p: Vec<u64>,
    /// The exponent and its uncertainty.
    pub exponent: Option<(f64, f64)>,
    /// The limit of p(n)/n³, if there is one, and its error.
    pub limit: Option<(f64, f64)>,
    /// Every statement: its standing, and whether it holds.
    pub standings: BTreeMap<String, Held>,
}

/// A standing in the index.
#[derive(Clone, Copy, Debug, Serialize)]
pub struct Held {
    /// How firmly.
    pub standing: Standing,
    /// True, false when the negation stands so, or null.
    pub holds: Option<bool>,
}

impl Found {
    /// Of a study. Stated bounds are numbered from 1: `claim_1`, ….
    pub fn of(results: &Results) -> Found {
        let n = results.length;
        let words = results.counts.p[n];
        let mut claims = 0;
        let name = |id: &str, claims: &mut usize| match id {
            "claim" => {
                *claims += 1;
                format!("claim_{claims}")
            }
            other => other.to_string(),
        };
        Found {
            title: results.table.title().into(),
            length: n,
            words,
            quotient: words as f64 / (n as f64).powi(3),
            p: results.counts.p[1..].to_vec(),
            exponent: results
                .growth
                .exponent
                .as_ref()
                .map(|e| (e.exponent, e.uncertainty)),
            limit: results.growth.limit.as_ref().map(|l| (l.limit, l.error)),
            standings: (results.statements.iter())
                .map(|s| {
                    let (standing, holds) = (s.standing, s.holds);
                    (name(s.id, &mut claims), Held { standing, holds })
                })
                .collect(),
        }
    }
}

#[derive(Serialize)]
struct Index<'a> {
    schema: &'static str,
    program: super::record::Program,
    complete: bool,
    members: &'a [Member],
}

/// Makes the folder, or accepts an empty one or that of earlier studies, and marks it.
///
/// # Errors
/// When the folder holds something else, its parent is missing, or the system refuses.
pub fn prepare(folder: &Path) -> Result<(), OutputFault> {
    let system = |source| OutputFault::System {
        path: folder.into(),
        source,
    };
    if folder.exists() {
        let empty = folder.is_dir() && fs::read_dir(folder).map_err(system)?.next().is_none();
        if !empty && !folder.join(MARK).is_file() {
            return Err(OutputFault::Occupied {
                path: folder.into(),
            });
        }
    } else {
        let parent = folder.parent().filter(|p| !p.as_os_str().is_empty());
        let parent = parent.map_or_else(|| PathBuf::from("."), Path::to_path_buf);
        if !parent.is_dir() {
            return Err(OutputFault::NoParent { path: parent });
        }
        fs::create_dir(folder).map_err(system)?;
    }
    write_json(folder, &[], false)
}

/// Writes the index of finished studies.
///
/// # Errors
/// When the system refuses.
pub fn write_index(folder: &Path, members: &[Member]) -> Result<(), OutputFault> {
    write_whole(&folder.join("index.csv"), |out| write_csv(members, out))?;
    write_whole(&folder.join("index.html"), |out| {
        out.write_all(page(members).as_bytes())
    })?;
    write_json(folder, members, true)
}

fn write_json(folder: &Path, members: &[Member], complete: bool) -> Result<(), OutputFault> {
    let index = Index {
        schema: SCHEMA,
        program: super::record::Program::this(),
        complete,
        members,
    };
    write_whole(&folder.join(MARK), |out| {
        serde_json::to_writer_pretty(&mut *out, &index)?;
        out.write_all(b"\n")
    })
}

/// The statements that a comparison begins with.
const FIRST: [&str; 6] = [
    "line_limit",
    "ratio_criterion",
    "cubic_bounds",
    "growth_exponent",
    "limit_constant",
    "diagonals_quadratic",
];

/// The names of all statements: claims, then the most telling ones, then the rest in the order of the alphabet.
fn statement_names(members: &[Member]) -> Vec<&str> {
    let mut names: Vec<&str> = members
        .iter()
        .filter_map(|m| m.study.as_ref())
        .flat_map(|s| s.standings.keys().map(String::as_str))
        .collect();
    let rank = |name: &str| match FIRST.iter().position(|first| *first == name) {
        _ if name.starts_with("claim_") => 0,
        Some(place) => 1 + place,
        None => 1 + FIRST.len(),
    };
    names.sort_unstable_by_key(|name| (rank(name), *name));
    names.dedup();
    names
}

/// A standing in a few words: `proved`, `proved, does not hold`.
fn standing_text(held: &Held) -> String {
    match (held.standing, held.holds) {
        (Standing::Proved | Standing::Trend, Some(false)) => {
            format!("{}, does not hold", held.standing.label())
        }
        _ => held.standing.label().into(),
    }
}

/// The longest length that every study reaches.
fn common_length(members: &[Member]) -> Option<usize> {
    let lengths = members.iter().filter_map(|m| m.study.as_ref());
    lengths.map(|s| s.length).min()
}

fn write_csv(members: &[Member], out: &mut dyn Write) -> io::Result<()> {
    let names = statement_names(members);
    let common = common_length(members);
    let mut csv = csv::Writer::from_writer(out);
    let mut header = strings([
        "file",
        "folder",
        "fault",
        "title",
        "length",
        "p",
        "quotient",
        "common_length",
        "p_common",
        "quotient_common",
        "exponent",
        "exponent_uncertainty",
        "limit",
        "limit_error",
    ]);
    header.extend(names.iter().map(|name| name.to_string()));
    csv.write_record(&header)?;
    for member in members {
        let text = |value: &Option<String>| value.clone().unwrap_or_default();
        let mut row = vec![
            member.file.clone(),
            text(&member.folder),
            text(&member.fault),
        ];
        match &member.study {
            None => row.resize(header.len(), String::new()),
            Some(found) => {
                let pair = |pair: Option<(f64, f64)>| match pair {
                    Some((value, error)) => [format!("{value:.6}"), format!("{error:.6}")],
                    None => Default::default(),
                };
                row.extend([
                    found.title.clone(),
                    found.length.to_string(),
                    found.words.to_string(),
                    format!("{:.6}", found.quotient),
                ]);
                row.extend(at_common(found, common));
                row.extend(pair(found.exponent));
                row.extend(pair(found.limit));
                row.extend(names.iter().map(|name| {
                    found
                        .standings
                        .get(*name)
                        .map_or(String::new(), standing_text)
                }));
            }
        }
        csv.write_record(&row)?;
    }
    csv.flush()
}

/// The common length, p and p/n³ there.
fn at_common(found: &Found, common: Option<usize>) -> [String; 3] {
    let Some(n) = common else {
        return Default::default();
    };
    let p = found.p[n - 1];
    [
        n.to_string(),
        p.to_string(),
        format!("{:.6}", p as f64 / (n as f64).powi(3)),
    ]
}

fn link(member: &Member, title: &str) -> String {
    match &member.folder {
        Some(folder) => format!(
            "<a href=\"{0}/report.html\">{1}</a>",
            escape(&in_url(folder)),
            escape(title)
        ),
        None => escape(title),
    }
}

/// A folder's name as part of a link: everything but letters, digits and `-_.` as its bytes.
fn in_url(folder: &str) -> String {
    let plain = |b: u8| b.is_ascii_alphanumeric() || b"-_.".contains(&b);
    folder
        .bytes()
        .map(|b| match plain(b) {
            true => (b as char).to_string(),
            false => format!("%{b:02X}"),
        })
        .collect()
}

fn page(members: &[Member]) -> String {
    let done = members.iter().filter(|m| m.study.is_some()).count();
    let mut page = format!(
        "<header>\n<h1>Studies side by side: {done} of {}</h1>\n<p class=\"lead\">Studies by {} {}; each title opens a study.</p>\n</header>\n",
        members.len(),
        env!("CARGO_PKG_NAME"),
        env!("CARGO_PKG_VERSION")
    );
    let mut headings = vec![
        ("counts", "Counts and estimates"),
        ("standings", "Standings"),
    ];
    if done < members.len() {
        headings.push(("faults", "Tables that were not studied"));
    }
    contents(&mut page, &headings);
    counts(&mut page, members);
    standings(&mut page, members);
    if done < members.len() {
        heading(&mut page, "faults", "Tables that were not studied");
        for member in members {
            if let Some(fault) = &member.fault {
                page.push_str(&format!(
                    "<h3>{}</h3>\n<pre class=\"bad\">{}</pre>\n",
                    escape(&member.file),
                    escape(fault)
                ));
            }
        }
    }
    page.push_str("<p>The same for scripts: <a href=\"index.json\">index.json</a>, <a href=\"index.csv\">index.csv</a>.</p>\n");
    frame("Studies side by side", &page)
}

fn studied(members: &[Member]) -> impl Iterator<Item = (&Member, &Found)> {
    members.iter().filter_map(|m| Some((m, m.study.as_ref()?)))
}

fn counts(page: &mut String, members: &[Member]) {
    heading(page, "counts", "Counts and estimates");
    page.push_str("<p>N is the length of the longest words of a study; p is shown there and at the longest length that all studies reach. The uncertainties are those of the studies: spreads of fits, no confidence intervals.</p>\n");
    let common = common_length(members);
    let m = common.map_or("M".into(), |m| m.to_string());
    let table = DataTable {
        name: "counts",
        caption: "Counts and estimates by table",
        header: vec![
            "table".into(),
            "N".into(),
            "p(N)".into(),
            "p(N)/N³".into(),
            format!("p({m})"),
            format!("p({m})/{m}³"),
            "exponent".into(),
            "±".into(),
            "limit of p(n)/n³, if any".into(),
            "±".into(),
        ],
        numbers: true,
    };
    let pair = |pair: Option<(f64, f64)>| match pair {
        Some((value, error)) => [format!("{value:.4}"), format!("{error:.4}")],
        None => Default::default(),
    };
    table.write_marked(
        page,
        studied(members).map(|(member, found)| {
            let [_, p, quotient] = at_common(found, common);
            let mut row = vec![
                link(member, &found.title),
                found.length.to_string(),
                found.words.to_string(),
                format!("{:.6}", found.quotient),
                p,
                quotient,
            ];
            row.extend(pair(found.exponent));
            row.extend(pair(found.limit));
            row
        }),
    );
}

fn standings(page: &mut String, members: &[Member]) {
    heading(page, "standings", "Standings");
    let names = statement_names(members);
    let mut header = strings(["table"]);
    header.extend(names.iter().map(|name| name.replace('_', " ")));
    let table = DataTable {
        name: "standings",
        caption: "The standing of each statement by table; each study gives its grounds",
        header,
        numbers: false,
    };
    table.write_marked(
        page,
        studied(members).map(|(member, found)| {
            let mut row = vec![link(member, &found.title)];
            row.extend(names.iter().map(|name| match found.standings.get(*name) {
                None => String::new(),
                Some(held) => format!(
                    "<span class=\"standing {}\">{}</span>",
                    standing_class(held.standing),
                    standing_text(held)
                ),
            }));
            row
        }),
    );
}
