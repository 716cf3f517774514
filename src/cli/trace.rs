//! `reboundary trace`.

use super::fault::Fault;
use super::launch::{Launcher, fault, side_name};
use super::orbit_arguments::{TraceFormat, TraceOptions};
use super::orbit_picture::{check_picture, draw_orbit, draw_unfolding, write_picture};
use super::output::{emit, note, read_table, write_json};
use super::progress::interruptible_control;
use super::trace_record::{record, write_csv, write_lines};
use crate::number::Real;
use crate::orbit::ensemble::{StartLaw, random_start};
use crate::orbit::launch::{FirstHit, PointFault, backward, first_hit};
use crate::orbit::path::{Limits, Path, PathEnd, follow_until};
use crate::orbit::{Start, TraceTables};
use crate::study::folder::spell_code;
use crate::table::{SideId, Table, Vector};

/// What a trace found, with what is needed to write and draw it.
pub struct Traced {
    /// The table, in the field of start and aim.
    pub table: Table,
    /// The generator of that field, as it is written.
    pub generator: String,
    /// The point inside the table that the orbit started from, when it did.
    pub from: Option<Vector>,
    /// Followed back in time.
    pub backward: bool,
    /// The orbit; `None` when it ran into a corner before any side.
    pub path: Option<Path>,
    /// Why it ended.
    pub end: PathEnd,
}

impl Traced {
    /// The word, as text.
    pub fn word(&self) -> String {
        let word = self.path.as_ref().map_or(&[][..], |p| &p.word);
        spell_code(&self.table, word)
    }
}

pub fn run(options: &TraceOptions) -> Result<(), Fault> {
    for file in options.picture.iter().chain(&options.unfolding) {
        check_picture(file)?;
    }
    let traced = trace(options)?;
    emit(options.out.as_deref(), |out| match options.format {
        TraceFormat::Text => writeln!(out, "{}", traced.word()),
        TraceFormat::Csv => write_csv(&traced, out),
        TraceFormat::Json => write_json(out, &record(&traced)),
        TraceFormat::Jsonl => write_lines(&traced, out),
    })?;
    draw(options, &traced)?;
    if !options.quiet {
        describe(&traced).iter().for_each(|text| note(text));
    }
    if traced.end == PathEnd::Stopped {
        let letters = traced.path.as_ref().map_or(0, |p| p.word.len());
        return Err(Fault::Stopped(format!(
            "a signal came after {letters} letters; the orbit up to there was written"
        )));
    }
    Ok(())
}

/// Where an orbit starts.
enum Launch {
    Side(Start),
    Inside(Vector, Vector),
}

fn trace(options: &TraceOptions) -> Result<Traced, Fault> {
    let loaded = read_table(&options.table, &options.settings, options.quiet)?;
    let (table, generator, launch, distance) = launch(options, &loaded.table)?;
    let tables = TraceTables::new(&table);
    let refused = |text: String| Fault::BadInput(text);
    let (start, from, gone) = match launch {
        Launch::Side(start) => {
            // Refuses a bad start before it is turned round.
            crate::orbit::Tracer::new(&tables, start.clone())
                .map_err(|f| refused(f.to_string()))?;
            let start = if options.backward {
                backward(&table, &start)
            } else {
                start
            };
            (start, None, Real::from(0))
        }
        Launch::Inside(point, aim) => {
            let aim = match options.backward {
                true => aim.times(&Real::from(-1)),
                false => aim,
            };
            let text = options.from.as_deref().unwrap_or_default();
            let hit = first_hit(&table, &point, &aim).map_err(|f| point_fault(&table, text, f))?;
            match hit {
                FirstHit::Side(start, way) => (start, Some(point), way),
                FirstHit::Corner(corner, _) => {
                    let end = PathEnd::Corner(corner);
                    return Ok(Traced {
                        table,
                        generator,
                        from: Some(point),
                        backward: options.backward,
                        path: None,
                        end,
                    });
                }
            }
        }
    };
    // The field may hold no root of |aim|², so distances are compared as squares.
    let squared = start.aim.squared_length(table.form());
    let limits = Limits {
        letters: options
            .hits
            .unwrap_or(if distance.is_some() { usize::MAX } else { 100 }),
        squared_distance: distance.map(|d| &(&d * &d) / &squared),
        gone,
    };
    let too_far = |most: &Real| &limits.gone * &limits.gone > *most;
    if limits.squared_distance.as_ref().is_some_and(too_far) {
        return Ok(Traced {
            table,
            generator,
            from,
            backward: options.backward,
            path: None,
            end: PathEnd::Distance,
        });
    }
    let wants_states = options.format != TraceFormat::Text
        || options.picture.is_some()
        || options.unfolding.is_some();
    let control = interruptible_control();
    let path = follow_until(&tables, start, &limits, wants_states, &control)
        .map_err(|f| refused(f.to_string()))?;
    Ok(Traced {
        generator,
        from,
        backward: options.backward,
        end: path.end,
        path: Some(path),
        table,
    })
}

/// The table in the field that start, aim and distance need, that field's generator as it is written, and all three.
type Launched = (Table, String, Launch, Option<Real>);

/// Reads where to start, and the greatest distance.
fn launch(options: &TraceOptions, table: &Table) -> Result<Launched, Fault> {
    let mut launcher = Launcher::new(table);
    let distance = match &options.distance {
        Some(text) => Some(launcher.positive("--distance", text)?),
        None => None,
    };
    if let Some(seed) = options.seed {
        let start = random_start(&StartLaw::new(table), seed, 0);
        if !options.quiet {
            note(&format!(
                "the random start is --start {}@{} --aim {},{}",
                side_name(table, start.side),
                start.fraction,
                start.aim.x,
                start.aim.y
            ));
        }
        let (table, lifter) = launcher.finish();
        let distance = distance.map(|d| lifter.number(&d));
        let generator = lifter.generator().to_string();
        return Ok((table, generator, Launch::Side(start), distance));
    }
    let start = match &options.start {
        Some(text) => Some(launcher.side_start(text)?),
        None => None,
    };
    let from = match &options.from {
        Some(text) => Some(launcher.point(text)?),
        None => None,
    };
    let aim = match (&options.aim, &options.heading) {
        (Some(aim), _) => launcher.aim(aim)?,
        (None, Some(heading)) => launcher.heading(heading)?,
        (None, None) => unreachable!("the parser asks for an aim, a heading or a seed"),
    };
    let (table, lifter) = launcher.finish();
    let aim = lifter.vector(&aim);
    let launch = match (start, from) {
        (Some((side, fraction)), _) => Launch::Side(Start {
            side,
            fraction: lifter.number(&fraction),
            aim,
        }),
        (None, Some(point)) => Launch::Inside(lifter.vector(&point), aim),
        (None, None) => unreachable!("the parser asks for a start, a point or a seed"),
    };
    let distance = distance.map(|d| lifter.number(&d));
    Ok((table, lifter.generator().to_string(), launch, distance))
}

fn point_fault(table: &Table, text: &str, refused: PointFault) -> Fault {
    let help = match refused {
        PointFault::OnSide(side) => format!(
            "start on the side with --start {}@FRACTION",
            side_name(table, side)
        ),
        _ => "write a point strictly inside the table; `reboundary table` lists its corners".into(),
    };
    fault("--from", text, 0..text.len(), refused.to_string(), &help)
}

/// What is told beside the result.
fn describe(traced: &Traced) -> Vec<String> {
    let table = &traced.table;
    let letters = traced.path.as_ref().map_or(0, |p| p.word.len());
    let mut notes = Vec::new();
    if let Some(period) = traced.path.as_ref().and_then(|p| p.period) {
        notes.push(format!(
            "the orbit is periodic: after {period} hits it is exactly at its start again, in the same direction"
        ));
    }
    match traced.end {
        PathEnd::Corner(corner) => {
            let before = SideId(table.before(corner.0 as usize) as u8);
            notes.push(format!(
                "the orbit runs into corner {} (between sides {} and {}) after {letters} {}{}, and ends there",
                corner.0,
                table.letter(before),
                table.letter(SideId(corner.0)),
                if letters == 1 { "hit" } else { "hits" },
                if traced.from.is_some() { "" } else { ", the start included" },
            ))
        }
        PathEnd::Distance => notes.push(format!(
            "the next hit is farther than the distance allows; the word has {letters} letters"
        )),
        PathEnd::Letters | PathEnd::Stopped => {}
    }
    notes
}

fn draw(options: &TraceOptions, traced: &Traced) -> Result<(), Fault> {
    let Some(path) = &traced.path else {
        return Ok(());
    };
    let title = format!("Orbit in {}", traced.table.title());
    let mut points: Vec<Vector> = traced.from.iter().cloned().collect();
    points.extend(path.states.iter().map(|s| s.point.clone()));
    if let Some(file) = &options.picture {
        let description = format!("An orbit with {} hits.", path.word.len());
        let svg = draw_orbit(&traced.table, &points, &title, &description)?;
        write_picture(file, &svg, options.picture_width)?;
    }
    if let Some(file) = &options.unfolding {
        let svg = draw_unfolding(&traced.table, &path.word, &path.states)?;
        write_picture(file, &svg, options.picture_width)?;
    }
    Ok(())
}
