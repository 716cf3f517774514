//! The parts of the report on standings and on growth.

use super::folder::window_rows;
use super::growth::{ERROR_MEANS, UNCERTAINTY_MEANS};
use super::html::{DataTable, escape, heading, strings};
use super::pictures::Picture;
use super::report::{figure, number_table};
use super::results::Results;
use super::statement::{Standing, Statement};
use crate::complexity::growth::over_cube;

const EVERY_STANDING: [(Standing, &str); 5] = [
    (
        Standing::Proved,
        "a named theorem whose hypotheses were checked exactly for this table, or by definition",
    ),
    (Standing::Computed, "exact for every n of this study"),
    (
        Standing::Trend,
        "figures that suggest it, or its negation, and prove nothing",
    ),
    (Standing::NotDecided, "left open"),
    (Standing::Violated, "computed to be false"),
];

/// The name of a standing in files and style rules.
pub(super) fn standing_class(standing: Standing) -> String {
    let name = serde_json::to_value(standing).expect("a plain name");
    name.as_str().unwrap_or_default().into()
}

/// Every statement with its standing, the summary first.
pub(super) fn standings(page: &mut String, results: &Results) {
    heading(page, "standings", "What is known, and how firmly");
    page.push_str("<ul>\n");
    for (standing, meaning) in EVERY_STANDING {
        let all = results.statements.iter();
        let count = all.filter(|s| s.standing == standing).count();
        page.push_str(&format!(
            "<li><span class=\"standing {}\">{}</span>: {count} of {}. {}.</li>\n",
            standing_class(standing),
            capital(standing.label()),
            results.statements.len(),
            capital(meaning)
        ));
    }
    page.push_str("</ul>\n<div class=\"standings\">\n");
    let table = DataTable {
        name: "standings",
        caption: "Every statement with its standing and its grounds",
        header: strings(["Standing", "Statement", "Grounds"]),
        numbers: false,
    };
    table.write_marked(page, results.statements.iter().map(row));
    page.push_str("</div>\n");
}

fn capital(text: &str) -> String {
    let mut letters = text.chars();
    let first = letters.next().map(|c| c.to_uppercase().to_string());
    first.unwrap_or_default() + letters.as_str()
}

fn row(statement: &Statement) -> Vec<String> {
    let standing = statement.standing;
    let mut grounds = escape(&statement.grounds);
    if let Some(theorem) = &statement.theorem {
        grounds.push_str("<ul>");
        for hypothesis in &theorem.hypotheses {
            grounds.push_str(&format!(
                "<li><em>{}</em>: {}</li>",
                escape(&hypothesis.asks),
                escape(&hypothesis.checked)
            ));
        }
        grounds.push_str("</ul>");
    }
    if let Some(sentence) = statement.cannot_decide {
        grounds.push_str(&format!("<br><em>{}</em>", escape(sentence)));
    }
    vec![
        format!(
            "<span class=\"standing {}\">{}</span>{}",
            standing_class(standing),
            standing.label(),
            statement.reach()
        ),
        escape(&statement.sentence()),
        grounds,
    ]
}

/// Counts, pictures, estimates.
pub(super) fn growth_section(page: &mut String, results: &Results, pictures: &[Picture]) {
    heading(page, "growth", "Growth of the complexity");
    let agree = match results.disagreement {
        None if results.p_by_diagonals.is_none() => format!(
            "The words are counted by beams. A word is a bundle of beams here, because {}, so the generalized diagonals do not give p(n).",
            super::verdict::Coding::of(&results.table).why_bundles()
        ),
        None => format!(
            "Counting words by beams and by generalized diagonals gives the same p(n) for every n ≤ {}.",
            results.length
        ),
        Some(n) => {
            format!("The two routes to p(n) differ, first at n = {n}: do not use these counts.")
        }
    };
    page.push_str(&format!("<p>{agree}</p>\n"));
    figure(page, pictures, "growth.svg");
    figure(page, pictures, "quotient.svg");
    estimates(page, results);
    figure(page, pictures, "ratio.svg");
    figure(page, pictures, "diagonals.svg");
    if !results.growth.windows.is_empty() {
        let header = strings([
            "from n",
            "to n",
            "smallest p(n)/n³",
            "at n",
            "largest p(n)/n³",
            "at n",
            "exponent",
            "residual",
            "mean b(n)/(6n)",
            "smallest D(n)/n²",
            "largest D(n)/n²",
        ]);
        let caption = "Dyadic windows, the last first; D(n) = N(0) + … + N(n), the exponent is the slope of log p(n) against log n";
        number_table(page, ("growth", caption), &header, window_rows(results));
    }
    page.push_str("<details><summary>All counts: p(n), s(n) = p(n+1) − p(n), b(n) = s(n+1) − s(n), and the number N(n) of oriented generalized diagonals that cross n sides</summary>\n");
    let counts = &results.counts;
    let rows = (0..counts.p.len()).map(|n| {
        let cell = |values: &[i64]| values.get(n).map_or(String::new(), i64::to_string);
        vec![
            n.to_string(),
            counts.p[n].to_string(),
            cell(&counts.first_difference),
            cell(&counts.second_difference),
            results
                .diagonals
                .get(n)
                .map_or(String::new(), u64::to_string),
            match n {
                0 => String::new(),
                n => format!("{:.6}", over_cube(&counts.p, n)),
            },
        ]
    });
    number_table(
        page,
        ("complexity", "Counts by length n"),
        &strings(["n", "p(n)", "s(n)", "b(n)", "N(n)", "p(n)/n³"]),
        rows,
    );
    page.push_str("</details>\n");
}

/// The estimates beside what is known, and what their errors mean.
fn estimates(page: &mut String, results: &Results) {
    let growth = &results.growth;
    let (Some(exponent), Some(limit)) = (&growth.exponent, &growth.limit) else {
        return;
    };
    page.push_str(&format!(
        "<p>Exponent of p(n): {:.4} ± {:.4}, where the uncertainty is {UNCERTAINTY_MEANS}.</p>\n\
         <p>Limit of p(n)/n³, if there is one: {:.6} ± {:.6}, where the error is {ERROR_MEANS}.",
        exponent.exponent, exponent.uncertainty, limit.limit, limit.error
    ));
    if let Some(known) = &growth.known_constant {
        page.push_str(&format!(
            " Known from outside: {} ({:.6}); {}.",
            known.text,
            known.value,
            escape(known.source)
        ));
    }
    page.push_str("</p>\n");
}
