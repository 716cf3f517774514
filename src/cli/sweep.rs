//! `reboundary sweep`.

use super::arguments::{Route, SweepOptions};
use super::fault::Fault;
use super::output::note;
use super::progress::{Progress, interruptible_control};
use crate::sweep::folder::{Family, Outcome, SweepFault, sweep};
use crate::sweep::member::Request;
use crate::sweep::range::{RangeFault, Sweep, members, parse};
use crate::table::file::LARGEST_FILE;
use std::fs::File;
use std::io::{self, Read, Write};
use std::path::Path;

pub fn run(options: &SweepOptions) -> Result<(), Fault> {
    let bad = |fault: RangeFault| Fault::BadInput(fault.to_string());
    let sweeps: Vec<Sweep> = options
        .set
        .iter()
        .map(|text| parse(text).map_err(bad))
        .collect::<Result<_, _>>()?;
    let file = options.table.display().to_string();
    let text = read_text(&options.table)
        .map_err(|e| Fault::BadInput(format!("{file}: cannot read this file: {e}")))?;
    let request = Request {
        length: options.length,
        by_diagonals: options.route != Route::Beams,
        by_beams: options.route != Route::Diagonals,
        exact_only: options.exactness.exact_only,
    };
    let last = options.length.saturating_sub(2);
    if let Some(n) = options.diagonals.iter().find(|n| **n > last) {
        return Err(Fault::BadInput(format!(
            "N({n}) is not computed: words of length {} need generalized diagonals that cross at most {last} sides",
            options.length
        )));
    }
    let shown = match options.diagonals.is_empty() {
        true => vec![last],
        false => options.diagonals.clone(),
    };
    let family = Family {
        file: &file,
        text: &text,
        names: sweeps.iter().map(|s| s.name.as_str()).collect(),
        members: members(&sweeps).map_err(bad)?,
        request,
        shown_diagonals: shown,
    };
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("members", None);
    let outcome = sweep(&options.out, &family, &control)?;
    drop(progress);
    report(options, outcome)
}

/// The text of the file, cut a byte past the most that a table file can have: loading it then refuses it.
fn read_text(path: &Path) -> io::Result<String> {
    let mut text = String::new();
    let file = File::open(path)?;
    file.take(LARGEST_FILE as u64 + 1)
        .read_to_string(&mut text)?;
    Ok(text)
}

fn report(options: &SweepOptions, outcome: Outcome) -> Result<(), Fault> {
    let folder = options.out.display();
    let (members, finished) = (outcome.members, outcome.finished);
    if outcome.disagreeing > 0 {
        return Err(Fault::Failed(format!(
            "the two routes to p(n) differ for {} members; please report this table as a fault of the program",
            outcome.disagreeing
        )));
    }
    if finished < members {
        return Err(Fault::Stopped(format!(
            "a signal came; {finished} of {members} members are finished in {folder}, and the same command continues"
        )));
    }
    if let Some(fault) = &outcome.first_fault
        && outcome.without_table == members
    {
        return Err(Fault::BadInput(format!(
            "none of the {members} members gives a table; the first: {fault}"
        )));
    }
    if !options.common.quiet {
        if outcome.without_table > 0 {
            note(&match outcome.without_table {
                1 => format!("1 of {members} members gives no table; its row says why"),
                without => {
                    format!("{without} of {members} members give no table; their rows say why")
                }
            });
        }
        let kept = match outcome.kept {
            0 => String::new(),
            kept => format!(", {kept} of them from before"),
        };
        let plural = if members == 1 { "" } else { "s" };
        writeln!(io::stdout(), "{folder}: {members} member{plural}{kept}")?;
    }
    Ok(())
}

impl From<SweepFault> for Fault {
    fn from(fault: SweepFault) -> Fault {
        match fault {
            SweepFault::UnknownParameter { .. } | SweepFault::Occupied { .. } => {
                Fault::BadInput(fault.to_string())
            }
            SweepFault::System { .. } => Fault::BadInput(fault.to_string()),
            SweepFault::Output(output) => output.into(),
            SweepFault::Growth(growth) => growth.into(),
            SweepFault::Figure(_) => Fault::Failed(fault.to_string()),
        }
    }
}
