//! `report.html`: the study as one self-contained page.
//!
//! The summary of standings comes first; tables scroll inside themselves on a narrow screen; pictures are
//! inline SVG. No script, no network, no time stamps: the same study gives the same bytes.

use super::folder::{Extras, find, spell_code};
use super::pictures::Picture;
use super::record::Record;
use super::results::Results;
use crate::complexity::diagonals::Diagonal;
use crate::table::summary::{Exact, TableSummary, root_decimal};

const STYLE: &str = include_str!("report.css");

/// Rows of generalized diagonals in the page; the file has more.
const SHOWN_DIAGONALS: usize = 60;

/// Escapes text for HTML.
pub fn escape(text: &str) -> String {
    let mut escaped = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' => escaped.push_str("&amp;"),
            '<' => escaped.push_str("&lt;"),
            '>' => escaped.push_str("&gt;"),
            '"' => escaped.push_str("&quot;"),
            _ => escaped.push(c),
        }
    }
    escaped
}

/// The page.
pub fn report(
    results: &Results,
    record: &Record<'_>,
    pictures: &[Picture],
    diagonals: &[Diagonal],
    extras: &Extras<'_>,
) -> String {
    let title = escape(results.table.title());
    let mut page = format!(
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <title>{title}: coding language to length {n}</title>\n<style>\n{STYLE}</style>\n</head>\n<body>\n<main>\n\
         <h1>{title}</h1>\n<p class=\"lead\">The complete billiard coding language to length {n}: {words} words of length {n}, \
         computed with exact arithmetic{routes}.</p>\n",
        routes = if results.p_by_diagonals.is_some() {
            " by two routes"
        } else {
            ""
        },
        n = results.length,
        words = results.counts.p[results.length],
    );
    page.push_str(
        "<nav aria-label=\"Contents\"><a href=\"#standings\">Standings</a><a href=\"#table\">Table</a>\
         <a href=\"#growth\">Growth</a><a href=\"#graphs\">Factor graphs</a><a href=\"#cells\">Beams and measures</a>\
         <a href=\"#diagonals\">Generalized diagonals</a><a href=\"#method\">Method</a><a href=\"#again\">Reproduce</a></nav>\n",
    );
    for parameter in extras.parameters {
        let from = if parameter.set {
            "set on the command line"
        } else {
            "as in the table file"
        };
        page.push_str(&format!(
            "<p class=\"notice\">Parameter {} = {}, {from}.</p>\n",
            escape(&parameter.name),
            escape(&parameter.expression)
        ));
    }
    for notice in extras.notices {
        page.push_str(&format!("<p class=\"notice\">{}</p>\n", escape(notice)));
    }
    standings(&mut page, results);
    table_section(&mut page, &record.table, pictures);
    growth_section(&mut page, results, pictures);
    graph_section(&mut page, results, pictures, record.options.graph_order);
    cell_section(&mut page, results, record, pictures);
    diagonal_section(&mut page, results, diagonals);
    method_section(&mut page, results);
    again_section(&mut page, record, extras);
    page.push_str("</main>\n</body>\n</html>\n");
    page
}

fn heading(page: &mut String, id: &str, text: &str) {
    page.push_str(&format!("<h2 id=\"{id}\">{text}</h2>\n"));
}

fn figure(page: &mut String, pictures: &[Picture], file: &str) {
    let Some(picture) = find(pictures, file) else {
        return;
    };
    page.push_str(&format!(
        "<figure>\n{}\n<figcaption><strong>{}.</strong> {}</figcaption>\n</figure>\n",
        picture.svg,
        escape(&picture.title),
        escape(&picture.caption)
    ));
}

/// A table of numbers with its header.
fn number_table(page: &mut String, header: &[String], rows: impl Iterator<Item = Vec<String>>) {
    page.push_str("<div class=\"scroll\" tabindex=\"0\"><table class=\"numbers\"><thead><tr>");
    for cell in header {
        page.push_str(&format!("<th scope=\"col\">{}</th>", escape(cell)));
    }
    page.push_str("</tr></thead><tbody>\n");
    for row in rows {
        page.push_str("<tr>");
        for cell in row {
            page.push_str(&format!("<td>{}</td>", escape(&cell)));
        }
        page.push_str("</tr>\n");
    }
    page.push_str("</tbody></table></div>\n");
}

fn strings<const N: usize>(cells: [&str; N]) -> Vec<String> {
    cells.iter().map(|c| c.to_string()).collect()
}

fn standings(page: &mut String, results: &Results) {
    heading(page, "standings", "What is known, and how firmly");
    page.push_str(
        "<p><strong>Proved</strong>: a named theorem whose hypotheses were checked exactly for this table, or by definition. \
         <strong>Computed</strong>: exact for every n of this study. <strong>Trend</strong>: figures that suggest it and prove \
         nothing. <strong>Not decided</strong>: left open. <strong>Violated</strong>: computed to be false.</p>\n\
         <table class=\"standings\"><thead><tr><th scope=\"col\">Standing</th><th scope=\"col\">Statement</th>\
         <th scope=\"col\">Grounds</th></tr></thead><tbody>\n",
    );
    for statement in &results.statements {
        let standing = statement.standing;
        let id = serde_json::to_value(standing).expect("a plain name");
        let at = statement.reach();
        page.push_str(&format!(
            "<tr><td><span class=\"standing {}\">{}</span>{at}</td><td>{}</td><td>{}</td></tr>\n",
            id.as_str().unwrap_or_default(),
            standing.label(),
            escape(&statement.sentence()),
            escape(&statement.grounds)
        ));
    }
    page.push_str("</tbody></table>\n");
}

fn exact(value: &Exact) -> String {
    if value.exact.contains('t') || value.exact.contains('/') {
        format!("{} ≈ {}", value.exact, short(&value.decimal))
    } else {
        value.exact.clone()
    }
}

/// A decimal rounded to six places.
fn short(decimal: &str) -> String {
    const PLACES: usize = 6;
    let Some((whole, fraction)) = decimal.split_once('.') else {
        return decimal.into();
    };
    let sign = if whole.starts_with('-') { "-" } else { "" };
    let kept = format!("{}{:0<7.7}", whole.trim_start_matches('-'), fraction);
    match kept.parse::<rug::Integer>() {
        Ok(tenfold) => {
            let rounded = (tenfold + 5u32) / 10u32;
            let digits = format!("{:0>7}", rounded.to_string());
            let (whole, fraction) = digits.split_at(digits.len() - PLACES);
            format!("{sign}{whole}.{fraction}")
        }
        Err(_) => decimal.into(),
    }
}

fn table_section(page: &mut String, table: &TableSummary, pictures: &[Picture]) {
    heading(page, "table", "The table");
    figure(page, pictures, "table.svg");
    let yes = |b: bool| if b { "yes" } else { "no" }.to_string();
    let field = if table.field.degree == 1 {
        "the rationals".into()
    } else {
        format!(
            "degree {}: generated by t ≈ {}, a root of {}",
            table.field.degree,
            short(&table.field.generator),
            table.field.minimal_polynomial
        )
    };
    let form = if table.form.exact == "1" {
        "x² + y²".into()
    } else {
        format!(
            "x² + g·y² with g = {}: second coordinates are in units of √g",
            exact(&table.form)
        )
    };
    let group = match table.reflection_group_order {
        Some(order) => format!("finite, order {order}"),
        None => "infinite".into(),
    };
    let facts = [
        ("Sides", table.sides.len().to_string()),
        ("Convex", yes(table.convex)),
        ("Right-angled", yes(table.right_angled)),
        ("Tiles by reflection", yes(table.integrable)),
        ("Reflection group", group),
        ("Area", short(&table.area)),
        ("Perimeter", short(&table.perimeter)),
        ("Mean chord π·area/perimeter", short(&table.mean_chord)),
        ("Field of the coordinates", field),
        ("Plane form", form),
    ];
    page.push_str("<table class=\"facts\"><tbody>\n");
    for (name, value) in &facts {
        page.push_str(&format!(
            "<tr><th scope=\"row\">{name}</th><td>{}</td></tr>\n",
            escape(value)
        ));
    }
    page.push_str("</tbody></table>\n");
    let rows = table.corners.iter().enumerate().map(|(i, corner)| {
        let side = &table.sides[i];
        vec![
            i.to_string(),
            exact(&corner.x),
            exact(&corner.y),
            table.angles[i].clone(),
            side.letter.clone(),
            short(&side.length),
        ]
    });
    number_table(
        page,
        &strings(["corner", "x", "y", "angle", "side after it", "length"]),
        rows,
    );
}

fn growth_section(page: &mut String, results: &Results, pictures: &[Picture]) {
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
    for file in ["growth.svg", "quotient.svg", "ratio.svg"] {
        figure(page, pictures, file);
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
        ]
    });
    number_table(page, &strings(["n", "p(n)", "s(n)", "b(n)", "N(n)"]), rows);
    page.push_str("</details>\n");
}

fn graph_section(page: &mut String, results: &Results, pictures: &[Picture], exported: usize) {
    heading(page, "graphs", "Factor graphs");
    page.push_str(&format!(
        "<p>The factor graph of order n has the words of length n as vertices and those of length n + 1 as arcs. \
         The file <code>factor-graph.graphml</code> holds the one of order {exported}.</p>\n"
    ));
    figure(page, pictures, "path-balls.svg");
    page.push_str(
        "<details><summary>Special words, and words whose balls are paths, by order</summary>\n",
    );
    let radii = results.graphs.first().map_or(0, |g| g.path_balls.len());
    let mut header = strings([
        "n",
        "vertices",
        "arcs",
        "left special",
        "right special",
        "bispecial",
        "unique both ways",
    ]);
    header.extend((1..=radii).map(|r| format!("path balls r = {r}")));
    let rows = results.graphs.iter().map(|g| {
        let mut row = vec![
            g.order as u64,
            g.vertices,
            g.arcs,
            g.left_special,
            g.right_special,
            g.bispecial,
            g.unique_both,
        ];
        row.extend(&g.path_balls);
        row.iter().map(u64::to_string).collect()
    });
    number_table(page, &header, rows);
    page.push_str("</details>\n");
}

fn cell_section(page: &mut String, results: &Results, record: &Record<'_>, pictures: &[Picture]) {
    heading(page, "cells", "Beams and measures");
    figure(page, pictures, "corridor.svg");
    figure(page, pictures, "cells.svg");
    let last = record.measure.levels.last();
    if let Some(level) = last {
        page.push_str(&format!(
            "<p>The measures of the words of length {} sum to {} with certainty to within {}; 2·perimeter is {}.</p>\n",
            level.length,
            short(&level.sum),
            level.width,
            short(&record.measure.whole)
        ));
    }
    page.push_str(&format!(
        "<details><summary>Measures of the {} words of length {}</summary>\n",
        record.cylinders.words.len(),
        results.shown_length
    ));
    let rows = record
        .cylinders
        .words
        .iter()
        .map(|c| vec![c.word.clone(), c.measure.clone()]);
    number_table(page, &strings(["word", "measure"]), rows);
    page.push_str("</details>\n");
}

fn diagonal_section(page: &mut String, results: &Results, diagonals: &[Diagonal]) {
    heading(page, "diagonals", "Generalized diagonals");
    let crossings = diagonals.last().map_or(0, |d| d.code.len());
    page.push_str(&format!(
        "<p>Segments of the unfolded table from corner to corner, oriented. The file <code>diagonals.csv</code> lists the {} that cross at most {crossings} sides, with exact displacements.</p>\n\
         <details><summary>The first {}</summary>\n",
        diagonals.len(),
        diagonals.len().min(SHOWN_DIAGONALS)
    ));
    let table = &results.table;
    let rows = diagonals.iter().take(SHOWN_DIAGONALS).map(|d| {
        vec![
            d.code.len().to_string(),
            d.start.0.to_string(),
            d.end.0.to_string(),
            spell_code(table, &d.code),
            d.displacement.x.display_in("t"),
            d.displacement.y.display_in("t"),
            short(&root_decimal(&d.displacement.squared_length(table.form()))),
        ]
    });
    number_table(
        page,
        &strings([
            "sides crossed",
            "from corner",
            "to corner",
            "code",
            "x",
            "y",
            "length",
        ]),
        rows,
    );
    page.push_str("</details>\n");
}

fn method_section(page: &mut String, results: &Results) {
    heading(page, "method", "Method");
    let (fans, beams) = (results.tiers.fans, results.tiers.beams);
    page.push_str(&format!(
        "<p>Every decision is the exact sign of an orientation of three corner images. For this table: {}. \
         Walking the fans took {} decisions ({} in floating point with a proved bound, {} in machine integers, {} in big integers); \
         walking the beams took {} ({}, {}, {}).</p>\n",
        escape(results.engine),
        fans.total(), fans.float, fans.integer, fans.big,
        beams.total(), beams.float, beams.integer, beams.big,
    ));
    page.push_str(
        "<p><em>Beams.</em> The lines with one coding form a convex cell; a new corner cuts it or not. \
         <em>Generalized diagonals.</em> When each word is one such cell, the second difference of p counts them, so p follows from fans of rays from the corners. \
         <em>Measures.</em> The invariant measure of a cell is a signed sum of distances between corner images (crossed-belt formula), \
         and all cells of one length fill the phase space, whose measure is 2·perimeter.</p>\n<ul>\n",
    );
    for source in [
        "J. Cassaigne, P. Hubert, S. Troubetzkoy: complexity and generalized diagonals of convex tables, cubic bounds. Ann. Inst. Fourier 52 (2002) 835–847.",
        "J. Cassaigne: second difference and bispecial words. Bull. Belg. Math. Soc. 4 (1997) 67–88.",
        "A. Katok: subexponential growth in every polygon. Comm. Math. Phys. 111 (1987).",
        "H. Masur: quadratic bounds for generalized diagonals by length in rational polygons (1988, 1990).",
        "Criterion for the local limit of factor graphs: arXiv 2402.15877.",
        "L. A. Santaló: Integral Geometry and Geometric Probability, 1976.",
    ] {
        page.push_str(&format!("<li>{}</li>\n", escape(source)));
    }
    page.push_str("</ul>\n");
}

fn again_section(page: &mut String, record: &Record<'_>, extras: &Extras<'_>) {
    heading(page, "again", "Reproduce");
    page.push_str(&format!(
        "<p>{} {}. With the table file below saved under its name, the command</p>\n<pre>{}</pre>\n\
         <p>gives the same files, byte for byte, with any number of threads.</p>\n<pre>{}</pre>\n",
        record.program.name,
        record.program.version,
        escape(extras.command),
        escape(extras.table_file)
    ));
    for base in extras.bases {
        page.push_str(&format!(
            "<p>It stands on this file:</p>\n<pre>{}</pre>\n",
            escape(&base.text)
        ));
    }
}

#[cfg(test)]
mod tests {
    use super::short;

    #[test]
    fn short_decimals_are_rounded() {
        assert_eq!(short("1.41421356237309504880"), "1.414214");
        assert_eq!(short("-0.99999950000000000000"), "-1.000000");
        assert_eq!(short("0.00000149999999999999"), "0.000001");
        assert_eq!(short("59.00847396772772066262"), "59.008474");
        assert_eq!(short("7"), "7");
        assert_eq!(short("0.5"), "0.500000");
    }
}
