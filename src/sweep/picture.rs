//! p(N) and N(n) over the first parameter; one curve for each combination of the others.

use super::member::Row;
use crate::figure::{Caption, Chart, FigureError, Mark, Series, draw_chart};

/// The most curves of one picture; further combinations are left out, and the picture says so.
const MOST_CURVES: usize = 12;

/// A quantity of a row.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Quantity {
    /// p(n).
    Words(usize),
    /// N(n).
    Diagonals(usize),
}

impl Quantity {
    fn name(self) -> String {
        match self {
            Quantity::Words(n) => format!("p({n})"),
            Quantity::Diagonals(n) => format!("N({n})"),
        }
    }

    fn of(self, row: &Row) -> Option<u64> {
        match self {
            Quantity::Words(n) => row.p.get(n).copied(),
            Quantity::Diagonals(n) => row.diagonals.as_ref()?.get(n).copied(),
        }
    }
}

/// Draws one or several quantities. Members that are no table leave a gap.
///
/// # Errors
/// When drawing fails.
pub fn draw(rows: &[Row], quantities: &[Quantity]) -> Result<String, FigureError> {
    let mut curves: Vec<(String, Vec<(f64, f64)>)> = Vec::new();
    for row in rows {
        let others: Vec<String> = row
            .settings
            .iter()
            .skip(1)
            .map(|s| format!("{} = {}", s.name, s.value))
            .collect();
        for quantity in quantities {
            let mut name = others.clone();
            if quantities.len() > 1 || others.is_empty() {
                name.insert(0, quantity.name());
            }
            let name = name.join(", ");
            let x = row.settings.first().map_or(0.0, |s| s.approximate);
            let y = quantity.of(row).map_or(f64::NAN, |count| count as f64);
            match curves.iter_mut().find(|(known, _)| *known == name) {
                Some((_, points)) => points.push((x, y)),
                None => curves.push((name, vec![(x, y)])),
            }
        }
    }
    let left_out = curves.len().saturating_sub(MOST_CURVES);
    let gaps = rows.iter().filter(|row| !row.is_table).count();
    let mut notes = Vec::new();
    if gaps > 0 {
        notes.push(format!(
            "Gaps: no simple polygon at {gaps} of {} members.",
            rows.len()
        ));
    }
    if left_out > 0 {
        notes.push(format!(
            "{left_out} further curves are left out; the files have all."
        ));
    }
    curves.truncate(MOST_CURVES);
    for (_, points) in &mut curves {
        points.sort_by(|a, b| a.0.total_cmp(&b.0));
    }
    let names: Vec<String> = quantities.iter().map(|q| q.name()).collect();
    let parameter = rows
        .first()
        .and_then(|row| row.settings.first())
        .map_or(String::new(), |s| s.name.clone());
    let chart = Chart {
        x_label: parameter.clone(),
        y_label: names.join(", "),
        series: curves
            .into_iter()
            .map(|(name, points)| Series {
                name,
                points,
                mark: Mark::LineDots,
                ink: None,
            })
            .collect(),
        note: (!notes.is_empty()).then(|| notes.join(" ")),
        ..Chart::default()
    };
    let caption = Caption::new(
        format!("{} over {parameter}", names.join(", ")),
        "Exact counts for each member of the family; a gap where the values give no table.",
    );
    draw_chart(&chart, &caption)
}
