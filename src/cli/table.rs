//! `reboundary table`.

use super::arguments::{Format, TableOptions};
use super::fault::Fault;
use super::output::{emit, read_table, write_json};
use crate::table::facts::facts;
use crate::table::summary::{Exact, TableSummary, summary};
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

fn exact(value: &Exact) -> String {
    if value.exact.contains('t') || value.exact.contains('/') {
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
    writeln!(out, "  area             {}", table.area)?;
    writeln!(out, "  perimeter        {}", table.perimeter)?;
    writeln!(out, "  mean chord       {}", table.mean_chord)?;
    for (i, corner) in table.corners.iter().enumerate() {
        writeln!(out, "  corner {i:<9} x = {}", exact(&corner.x))?;
        writeln!(out, "                   y = {}", exact(&corner.y))?;
        writeln!(out, "                   angle {}", table.angles[i])?;
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
