//! `reboundary orbits`.

use super::fault::Fault;
use super::launch::{Launcher, side_name};
use super::orbit_arguments::{OrbitsFormat, OrbitsOptions};
use super::orbit_rows::{Row, RowWriter, check_format};
use super::output::{emit, note, read_table};
use super::progress::{Progress, interruptible_control};
use crate::language::{measure, walk};
use crate::number::{Enclosure, Real};
use crate::orbit::ensemble::Sample;
use crate::orbit::law::{Ensemble, Law};
use crate::orbit::statistics::{
    Estimate, OrbitShares, PathMeter, Statistics, decimal_order, orbit_shares, power_of_ten,
};
use crate::orbit::trace::StartFault;
use crate::orbit::{Start, TraceTables};
use crate::run::Control;
use crate::run::files::{check_place, write_whole};
use crate::study::folder::spell_code;
use crate::study::record::decimal;
use crate::table::facts::{facts, squared_area};
use crate::table::{LetterId, Table};
use crate::unfold::Mesh;
use crate::unfold::engine::{AnyEngine, Arithmetic};
use rayon::prelude::*;
use std::io::{self, Write};
use std::path::Path;

/// Letters that are traced before they are written: bounds the memory, whatever the length of an orbit.
const BATCH_LETTERS: usize = 1 << 22;

pub fn run(options: &OrbitsOptions) -> Result<(), Fault> {
    check_format(options)?;
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    if let Some(file) = &options.statistics {
        check_place(file)?;
    }
    let (table, generator, law) = read_law(options, &loaded.table)?;
    let tables = TraceTables::new(&table);
    let ensemble = Ensemble::new(&tables, law);
    let count = match (options.count, ensemble.count()) {
        (Some(count), Some(most)) if count > most => {
            return Err(Fault::BadInput(format!(
                "--count {count} is more than the {most} starts that there are"
            )));
        }
        (Some(count), _) | (None, Some(count)) => count,
        (None, None) => 1000,
    };
    if options.statistics.is_some() && (count < 2 || options.hits < options.blocks.max(2)) {
        return Err(Fault::BadInput(
            "--statistics needs at least two orbits, and as many hits as the longest blocks and two"
                .into(),
        ));
    }
    let meter = PathMeter::new(&table);
    if options.statistics.is_some() && !meter.fits() {
        return Err(Fault::BadInput(
            "--statistics measures chords in floating point, which does not hold this table: it is more than 10^300 times as \
             long as wide"
                .into(),
        ));
    }
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("orbits", Some(count));
    let mut job = Job {
        options,
        table: &table,
        generator,
        ensemble: &ensemble,
        meter,
        count,
        control: &control,
        statistics: Statistics::default(),
        refused: None,
    };
    let done = emit(options.out.as_deref(), |out| job.write_all(out));
    drop(progress);
    if let Some((index, fault)) = job.refused {
        return Err(Fault::BadInput(format!("start {index} (from 0): {fault}")));
    }
    if control.is_stopped() {
        let what = match options.out {
            Some(_) => "nothing was written",
            None => "the orbits printed so far are complete",
        };
        return Err(Fault::Stopped(format!(
            "a signal came before all orbits were traced; {what}"
        )));
    }
    done?;
    match &options.statistics {
        Some(path) => {
            let found = (&job.statistics, job.meter.order());
            write_statistics(options, &table, found, path, &control)
        }
        None => Ok(()),
    }
}

/// The table in the field that the starts of a law need, that field's generator as it is written, and the law.
type ReadLaw = (Table, String, Law);

fn read_law(options: &OrbitsOptions, table: &Table) -> Result<ReadLaw, Fault> {
    let mut launcher = Launcher::new(table);
    let own = |law: Law| Ok((table.clone(), "t".into(), law));
    if let Some((places, directions)) = options.grid {
        return own(Law::Grid { places, directions });
    }
    if let Some(path) = &options.starts {
        return read_starts(launcher, path);
    }
    if let Some(start) = &options.start {
        let (side, fraction) = launcher.side_start(start)?;
        let (table, lifter) = launcher.finish();
        let fraction = lifter.number(&fraction);
        let generator = lifter.generator().to_string();
        return Ok((table, generator, Law::Point { side, fraction }));
    }
    let aim = match (&options.aim, &options.heading) {
        (Some(aim), _) => launcher.aim(aim)?,
        (None, Some(heading)) => launcher.heading(heading)?,
        (None, None) => return own(Law::Cosine),
    };
    let (table, lifter) = launcher.finish();
    let aim = lifter.vector(&aim);
    Ok((table, lifter.generator().to_string(), Law::Direction(aim)))
}

fn read_starts(mut launcher: Launcher<'_>, path: &Path) -> Result<ReadLaw, Fault> {
    let place = |row: usize, text: String| {
        Fault::BadInput(format!("{}, row {row}: {text}", path.display()))
    };
    let whole = |e: csv::Error| Fault::BadInput(format!("{}: {e}", path.display()));
    let mut rows = csv::Reader::from_path(path).map_err(whole)?;
    let header = rows.headers().map_err(whole)?.clone();
    let column = |name: &str| {
        header.iter().position(|h| h == name).ok_or_else(|| {
            Fault::BadInput(format!(
                "{} has no column `{name}`; it needs side, fraction, aim_x and aim_y",
                path.display()
            ))
        })
    };
    let columns = [
        column("side")?,
        column("fraction")?,
        column("aim_x")?,
        column("aim_y")?,
    ];
    let mut read = Vec::new();
    for (number, row) in (1..).zip(rows.records()) {
        let row = row.map_err(whole)?;
        let [side, fraction, x, y] = columns.map(|c| row.get(c).unwrap_or_default());
        let inner = |f: Fault| place(number, f.to_string());
        let (side, fraction) = launcher
            .side_start(&format!("{side}@{fraction}"))
            .map_err(inner)?;
        let aim = launcher.aim(&format!("{x},{y}")).map_err(inner)?;
        read.push((side, fraction, aim));
    }
    let (table, lifter) = launcher.finish();
    let starts: Vec<Start> = read
        .into_iter()
        .map(|(side, fraction, aim)| Start {
            side,
            fraction: lifter.number(&fraction),
            aim: lifter.vector(&aim),
        })
        .collect();
    Ok((table, lifter.generator().to_string(), Law::List(starts)))
}

struct Job<'a> {
    options: &'a OrbitsOptions,
    table: &'a Table,
    generator: String,
    ensemble: &'a Ensemble<'a>,
    meter: PathMeter,
    count: u64,
    control: &'a Control,
    statistics: Statistics,
    refused: Option<(u64, StartFault)>,
}

impl Job<'_> {
    fn write_all(&mut self, out: &mut dyn Write) -> io::Result<()> {
        let mut writer = RowWriter::new(self.options.format, out)?;
        let most = (BATCH_LETTERS / self.options.hits).clamp(1, 4096) as u64;
        let mut first = 0;
        while first < self.count {
            let batch = most.min(self.count - first);
            let rows: Vec<Result<Traced, StartFault>> = (first..first + batch)
                .into_par_iter()
                .map(|index| self.trace(index))
                .collect();
            for (index, row) in (first..).zip(rows) {
                match row {
                    Ok(traced) => {
                        writer.write(&traced.row)?;
                        if let Some(shares) = traced.shares {
                            self.statistics.add(shares);
                        }
                    }
                    Err(fault) => {
                        self.refused = Some((index, fault));
                        return Err(io::Error::other("a start was refused"));
                    }
                }
            }
            first += batch;
            if self.control.tick(batch).is_err() {
                return Err(io::Error::other("stopped"));
            }
        }
        writer.finish()
    }

    fn trace(&self, index: u64) -> Result<Traced, StartFault> {
        let options = self.options;
        let sample = self.ensemble.sample(options.seed, index, options.hits)?;
        let shares = options.statistics.is_some().then(|| {
            let length = self.meter.path_length(&sample.start, &sample.word);
            let word = sample.word.iter().map(|s| self.table.letter_id(*s));
            orbit_shares(&word.collect::<Vec<_>>(), options.blocks, length)
        });
        Ok(Traced {
            row: self.row(index, &sample),
            shares,
        })
    }

    fn row(&self, index: u64, sample: &Sample) -> Row {
        let word = spell_code(self.table, &sample.word);
        if self.options.format == OrbitsFormat::Text {
            return Row::of_word(word);
        }
        let exact = |number: &Real| number.display_in(&self.generator);
        Row {
            orbit: index,
            side: side_name(self.table, sample.start.side),
            fraction: exact(&sample.start.fraction),
            aim: [exact(&sample.start.aim.x), exact(&sample.start.aim.y)],
            word,
        }
    }
}

/// An orbit, ready to be written and counted.
struct Traced {
    row: Row,
    shares: Option<OrbitShares>,
}

/// One row of the statistics.
struct Compared {
    quantity: String,
    estimate: Estimate,
    exact: Enclosure,
    /// Both are in units of ten to this power.
    order: i32,
}

impl Compared {
    /// A number of this row in the table's unit. The exponent is written when floating point might not reach.
    fn in_unit(&self, number: f64) -> String {
        match self.order {
            -99..=99 => (number * 10f64.powi(self.order)).to_string(),
            order => format!("{number}e{order}"),
        }
    }

    fn exact_in_unit(&self) -> String {
        match self.order {
            0 => decimal(&self.exact),
            -99..=99 => self.in_unit(self.exact.to_f64()),
            order => format!("{}e{order}", decimal(&self.exact)),
        }
    }
}

/// π·area/perimeter in units of ten to a power.
fn mean_chord(table: &Table, order: i32) -> Enclosure {
    // Absolute bits suffice once the numbers are near 1; a thin table has a small area.
    let squared = &squared_area(table, &facts(table)) / &power_of_ten(4 * order);
    let small = decimal_order(&squared).min(0).unsigned_abs();
    let bits = 160 + 8 * small;
    let area = squared.enclosure_within(bits).sqrt();
    let mut perimeter = Enclosure::zero(bits);
    for side in 0..table.sides() {
        let square = table.side_vector(side).squared_length(table.form());
        let square = &square / &power_of_ten(2 * order);
        perimeter.add_assign(&square.enclosure_within(bits).sqrt());
    }
    let chord = Enclosure::pi(bits).mul(&area).div(&perimeter);
    chord.expect("a perimeter is positive")
}

fn write_statistics(
    options: &OrbitsOptions,
    table: &Table,
    (statistics, order): (&Statistics, i32),
    path: &Path,
    control: &Control,
) -> Result<(), Fault> {
    let rows = compare(options, table, statistics, order, control)?;
    let z = |row: &Compared| row.estimate.z(row.exact.to_f64());
    write_whole(path, |out| {
        let mut csv = csv::Writer::from_writer(out);
        csv.write_record(["quantity", "observed", "standard_error", "exact", "z"])?;
        for row in &rows {
            csv.write_record([
                row.quantity.clone(),
                row.in_unit(row.estimate.mean),
                row.in_unit(row.estimate.standard_error),
                row.exact_in_unit(),
                // Without variation there is no standard error to measure in.
                Some(z(row))
                    .filter(|z| z.is_finite())
                    .map_or(String::new(), |z| format!("{z:.3}")),
            ])?;
        }
        csv.flush()
    })?;
    if !options.common.quiet {
        let largest = rows
            .iter()
            .map(|r| z(r).abs())
            .filter(|z| z.is_finite())
            .fold(0.0, f64::max);
        note(&format!(
            "{} quantities compared; the largest z-score is {largest:.2}",
            rows.len()
        ));
    }
    Ok(())
}

/// The mean chord, then all blocks by length, in the order of the sides.
fn compare(
    options: &OrbitsOptions,
    table: &Table,
    statistics: &Statistics,
    order: i32,
    control: &Control,
) -> Result<Vec<Compared>, Fault> {
    let mut rows = vec![Compared {
        quantity: "mean chord".into(),
        estimate: statistics.chord().expect("at least two orbits"),
        exact: mean_chord(table, order),
        order,
    }];
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.blocks, Arithmetic::Tiered);
    let (language, _) = walk::grow(&engine, &mesh, options.blocks, control)?;
    for length in 1..=options.blocks {
        let measures = measure::measure(table, &engine, &mesh, length, length, control)?;
        for (word, measure) in (0..).zip(&measures.kept) {
            let block: Vec<LetterId> = language
                .word(length, word)
                .into_iter()
                .map(LetterId)
                .collect();
            rows.push(Compared {
                quantity: block
                    .iter()
                    .map(|l| table.letters()[l.0 as usize])
                    .collect(),
                estimate: statistics.block(&block).expect("at least two orbits"),
                exact: measure
                    .div(&measures.whole)
                    .expect("a perimeter is positive"),
                order: 0,
            });
        }
    }
    Ok(rows)
}
