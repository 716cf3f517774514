//! `reboundary table`.

use super::arguments::{Format, TableOptions};
use super::fault::Fault;
use super::output::{emit, read_table, write_json};
use crate::table::facts::facts;
use crate::table::summary::{AngleStanding, ConeSummary, Exact, TableSummary, summary};
use serde::Serialize;
use std::io::{self, Write};

#[derive(Serialize)]
struct TableRecord {
    schema: &'static str,
    #[serde(flatten)]
    summary: TableSummary,
}

pub fn run(options: &TableOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.quiet)?;
    let summary = summary(&loaded.table, &facts(&loaded.table));
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(&summary, out),
        Format::Json => write_json(
            out,
            &TableRecord {
                schema: "reboundary-table/1",
                summary,
            },
        ),
        Format::Csv => write_csv(&summary, out),
    })
}

/// Integers up to this length need no decimal beside them.
const READABLE: usize = 24;

fn exact(value: &Exact) -> String {
    let plain = !value.exact.contains('t') && !value.exact.contains('/');
    if !plain || value.exact.len() > READABLE {
        format!("{} = {}", value.exact, value.decimal)
    } else {
        value.exact.clone()
    }
}

fn write_text(table: &TableSummary, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "{}", table.title)?;
    if table.field.degree == 1 {
        writeln!(out, "  field            the rationals")?;
    } else {
        writeln!(
            out,
            "  field            degree {}, t = {}, root of {}",
            table.field.degree, table.field.generator, table.field.minimal_polynomial
        )?;
        writeln!(
            out,
            "                   discriminant of the polynomial {}",
            table.field.polynomial_discriminant
        )?;
        match table.walk_field.degree {
            d if d == table.field.degree => writeln!(out, "  walks need       all of the field")?,
            1 => writeln!(out, "  walks need       the rationals")?,
            d => writeln!(out, "  walks need       a subfield of degree {d}")?,
        }
    }
    if table.form.exact != "1" {
        writeln!(
            out,
            "  plane form       x^2 + g*y^2 with g = {}",
            exact(&table.form)
        )?;
    }
    let yes = |b: bool| if b { "yes" } else { "no" };
    writeln!(out, "  convex           {}", yes(table.convex))?;
    writeln!(out, "  right-angled     {}", yes(table.right_angled))?;
    writeln!(out, "  tiles            {}", yes(table.integrable))?;
    match table.reflection_group_order {
        Some(order) => writeln!(out, "  reflection group finite, order {order}")?,
        None => writeln!(out, "  reflection group infinite")?,
    }
    if let Some(surface) = &table.surface {
        writeln!(
            out,
            "  surface          genus {}, from {} copies",
            surface.genus, surface.copies
        )?;
    }
    write_symmetries(table, out)?;
    writeln!(out, "  area             {}", table.area)?;
    writeln!(out, "  perimeter        {}", table.perimeter)?;
    writeln!(out, "  mean chord       {}", table.mean_chord)?;
    for (i, corner) in table.corners.iter().enumerate() {
        writeln!(out, "  corner {i:<9} x = {}", exact(&corner.x))?;
        writeln!(out, "                   y = {}", exact(&corner.y))?;
        let AngleStanding { kind, .. } = &table.angle_standing[i];
        let kind = if *kind == "right" { "" } else { kind };
        let comma = if kind.is_empty() { "" } else { ", " };
        writeln!(
            out,
            "                   angle {}{comma}{kind}",
            table.angles[i]
        )?;
        if let Some(surface) = &table.surface {
            writeln!(out, "                   {}", cone(&surface.cone_points[i]))?;
        }
    }
    for side in &table.sides {
        let [from, to] = side.corners;
        writeln!(
            out,
            "  side {:<11} corner {from} to corner {to}, length {}",
            side.letter, side.length
        )?;
    }
    Ok(())
}

fn write_symmetries(table: &TableSummary, out: &mut dyn Write) -> io::Result<()> {
    if table.symmetries.is_empty() {
        return writeln!(out, "  symmetries       none");
    }
    for (i, symmetry) in table.symmetries.iter().enumerate() {
        let label = if i == 0 { "symmetries" } else { "" };
        let cycles = symmetry
            .cycles
            .as_deref()
            .unwrap_or("(permutes no letters)");
        writeln!(out, "  {label:<16} {} {cycles}", symmetry.kind)?;
    }
    Ok(())
}

/// What a corner becomes on the surface.
fn cone(cone: &ConeSummary) -> String {
    let points = match cone.points {
        1 => "1 point".to_string(),
        n => format!("{n} points"),
    };
    match cone.turns {
        1 => format!("{points} of the surface, flat (angle 2π)"),
        turns => format!("{points} of the surface with angle {}π", 2 * turns),
    }
}

/// One row for each corner with the side after it.
fn write_csv(table: &TableSummary, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record([
        "corner",
        "x",
        "y",
        "x_decimal",
        "y_decimal",
        "angle",
        "side",
        "squared_length",
        "length",
    ])?;
    for (i, corner) in table.corners.iter().enumerate() {
        let side = &table.sides[i];
        csv.write_record([
            &i.to_string(),
            &corner.x.exact,
            &corner.y.exact,
            &corner.x.decimal,
            &corner.y.decimal,
            &table.angles[i],
            &side.letter,
            &side.squared_length.exact,
            &side.length,
        ])?;
    }
    csv.flush()
}
