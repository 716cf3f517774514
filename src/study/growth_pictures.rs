//! The pictures of p(n)/n³ with its estimated and its known limit, and of generalized diagonals beside quadratic growth.

use super::pictures::{Picture, picture, series};
use super::results::Results;
use crate::complexity::growth::over_cube;
use crate::figure::{Chart, FigureError, Mark, draw_chart};

/// p(n)/n³ from n on.
pub(super) fn quotient(results: &Results, from: usize) -> Result<Picture, FigureError> {
    let p = &results.counts.p;
    let last = results.length;
    let ends = [from as f64, last as f64];
    let mut curves = Vec::new();
    let mut text = format!(
        "p(n)/n³ for {from} ≤ n ≤ {last}. It stays between positive bounds exactly when p grows like n³."
    );
    if let Some(limit) = &results.growth.limit {
        let (low, high) = (limit.limit - limit.error, limit.limit + limit.error);
        let around = vec![
            (ends[0], low),
            (ends[1], low),
            (ends[1], high),
            (ends[0], high),
        ];
        curves.push(series("estimate", around, Mark::Band, Some(5)));
        text.push_str(&format!(
            " The band is the estimate of its limit, if there is one, {:.4} ± {:.4}: a spread of fits, not a confidence interval.",
            limit.limit, limit.error
        ));
    }
    if let Some(known) = &results.growth.known_constant {
        let line = ends.map(|n| (n, known.value)).to_vec();
        curves.push(series(known.text, line, Mark::Dashed, Some(1)));
        text.push_str(&format!(
            " The dashed line is the value known from outside, {}.",
            known.text
        ));
    }
    // One curve alone is named by its axis.
    let name = if curves.is_empty() { "" } else { "p(n)/n³" };
    let points = (from..=last).map(|n| (n as f64, over_cube(p, n))).collect();
    curves.push(series(name, points, Mark::LineDots, Some(0)));
    let chart = Chart {
        x_label: "length n".into(),
        y_label: "p(n)/n³".into(),
        series: curves,
        ..Chart::default()
    };
    picture("quotient.svg", "The quotient p(n)/n³", text, |c| {
        draw_chart(&chart, c)
    })
}

/// (N(0) + … + N(n))/n².
pub(super) fn diagonals(results: &Results) -> Result<Picture, FigureError> {
    let mut sum = 0;
    let mut points = Vec::new();
    for (n, count) in results.diagonals.iter().enumerate() {
        sum += count;
        if n > 0 {
            points.push((n as f64, sum as f64 / (n as f64).powi(2)));
        }
    }
    let chart = Chart {
        x_label: "sides crossed, at most n".into(),
        y_label: "(N(0) + … + N(n))/n²".into(),
        series: vec![series("", points, Mark::LineDots, Some(0))],
        ..Chart::default()
    };
    picture(
        "diagonals.svg",
        "Generalized diagonals beside quadratic growth",
        "The number N(0) + … + N(n) of oriented generalized diagonals that cross at most n sides, divided by n². It stays between positive bounds exactly when their number grows like n².",
        |c| draw_chart(&chart, c),
    )
}
