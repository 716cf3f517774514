//! `tables.tex`: the tables of a study for a paper, with the rules of the `booktabs` package.
//!
//! The file is for `\input`. Long tables use `longtable`. Its preamble is
//! `\usepackage{booktabs,longtable}`, and UTF-8 input, which is LaTeX's default, for titles and letters of the table.

use super::folder::window_rows;
use super::results::Results;
use crate::complexity::growth::over_cube;
use std::io::{self, Write};

/// Text made safe for LaTeX. Mathematical characters of the verdict become formulas; other characters stay as they are.
pub fn escape(text: &str) -> String {
    let mut escaped = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            '&' | '%' | '$' | '#' | '_' | '{' | '}' => escaped.extend(['\\', c]),
            '~' => escaped.push_str("\\textasciitilde{}"),
            '^' => escaped.push_str("\\textasciicircum{}"),
            '\\' => escaped.push_str("\\textbackslash{}"),
            '<' | '>' => escaped.push_str(&format!("\\({c}\\)")),
            '–' => escaped.push_str("--"),
            '—' => escaped.push_str("---"),
            '…' => escaped.push_str("\\ldots{}"),
            '\n' | '\r' => escaped.push(' '),
            c => match formula(c) {
                Some(formula) => escaped.push_str(&format!("\\({formula}\\)")),
                None => escaped.push(c),
            },
        }
    }
    escaped
}

fn formula(c: char) -> Option<&'static str> {
    Some(match c {
        'π' => "\\pi",
        'φ' => "\\varphi",
        'Σ' => "\\Sigma",
        '≤' => "\\le",
        '≥' => "\\ge",
        '≠' => "\\ne",
        '≈' => "\\approx",
        '±' => "\\pm",
        '·' => "\\cdot",
        '×' => "\\times",
        '→' => "\\to",
        '−' => "-",
        '∞' => "\\infty",
        '√' => "\\surd",
        '°' => "^\\circ",
        '₀' => "_0",
        '₁' => "_1",
        '₂' => "_2",
        '₆' => "_6",
        '⁰' => "^0",
        '²' => "^2",
        '³' => "^3",
        '⁻' => "^-",
        'ᵃ' => "^a",
        'ⁿ' => "^n",
        _ => return None,
    })
}

struct Tabular<'a> {
    caption: String,
    label: &'a str,
    /// Column types.
    columns: &'a str,
    header: Vec<&'a str>,
}

impl Tabular<'_> {
    /// Writes a `longtable`; the cells of the rows are LaTeX already.
    fn write(
        &self,
        out: &mut dyn Write,
        rows: impl Iterator<Item = Vec<String>>,
    ) -> io::Result<()> {
        writeln!(out, "\\begin{{longtable}}{{{}}}", self.columns)?;
        writeln!(
            out,
            "\\caption{{{}}}\\label{{tab:{}}}\\\\",
            self.caption, self.label
        )?;
        let head = self.header.join(" & ");
        writeln!(out, "\\toprule\n{head} \\\\\n\\midrule\n\\endfirsthead")?;
        writeln!(
            out,
            "\\toprule\n{head} \\\\\n\\midrule\n\\endhead\n\\bottomrule\n\\endfoot"
        )?;
        for row in rows {
            writeln!(out, "{} \\\\", row.join(" & "))?;
        }
        writeln!(out, "\\end{{longtable}}\n")
    }
}

/// Writes the tables of a study: standings, counts, dyadic windows, factor graphs.
///
/// # Errors
/// Those of the writer.
pub fn write_latex(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let title = escape(results.table.title());
    let caption = |what: &str| format!("{title}: {what}.");
    writeln!(
        out,
        "% Tables of a study by {} {}.\n% In the preamble: \\usepackage{{booktabs,longtable}}\n",
        env!("CARGO_PKG_NAME"),
        env!("CARGO_PKG_VERSION")
    )?;
    let standings = Tabular {
        caption: caption("statements and their standing"),
        label: "standings",
        columns: "p{0.2\\linewidth}p{0.72\\linewidth}",
        header: vec!["standing", "statement"],
    };
    standings.write(
        out,
        results.statements.iter().map(|s| {
            let label = format!("{}{}", s.standing.label(), s.reach());
            vec![escape(&label), escape(&s.sentence())]
        }),
    )?;
    let counts = Tabular {
        caption: caption(
            "the complexity \\(p(n)\\), its differences, and the number \\(N(n)\\) of oriented generalized diagonals that cross \\(n\\) sides",
        ),
        label: "complexity",
        columns: "rrrrrr",
        header: vec![
            "\\(n\\)",
            "\\(p(n)\\)",
            "\\(s(n)\\)",
            "\\(b(n)\\)",
            "\\(N(n)\\)",
            "\\(p(n)/n^3\\)",
        ],
    };
    counts.write(
        out,
        (0..results.counts.p.len()).map(|n| count_row(results, n)),
    )?;
    if !results.growth.windows.is_empty() {
        let windows = Tabular {
            caption: caption("growth over dyadic windows, with \\(D(n) = N(0) + \\cdots + N(n)\\)"),
            label: "growth",
            columns: "rrrrrrrrrrr",
            header: vec![
                "from",
                "to",
                "\\(\\min p(n)/n^3\\)",
                "at",
                "\\(\\max p(n)/n^3\\)",
                "at",
                "exponent",
                "residual",
                "mean \\(b(n)/6n\\)",
                "\\(\\min D(n)/n^2\\)",
                "\\(\\max D(n)/n^2\\)",
            ],
        };
        windows.write(out, window_rows(results))?;
    }
    write_graphs(
        results,
        caption("factor graphs by order, and words whose \\(r\\)-balls are paths"),
        out,
    )
}

fn count_row(results: &Results, n: usize) -> Vec<String> {
    let counts = &results.counts;
    // A hyphen would stand for a minus otherwise.
    let signed = |values: &[i64]| {
        values
            .get(n)
            .map_or(String::new(), |v| format!("\\({v}\\)"))
    };
    let diagonals = results.diagonals.get(n);
    vec![
        n.to_string(),
        counts.p[n].to_string(),
        signed(&counts.first_difference),
        signed(&counts.second_difference),
        diagonals.map_or(String::new(), u64::to_string),
        match n {
            0 => String::new(),
            n => format!("{:.6}", over_cube(&counts.p, n)),
        },
    ]
}

fn write_graphs(results: &Results, caption: String, out: &mut dyn Write) -> io::Result<()> {
    let radii = results.graphs.first().map_or(0, |g| g.path_balls.len());
    let balls: Vec<String> = (1..=radii).map(|r| format!("\\(r = {r}\\)")).collect();
    let mut header = vec![
        "\\(n\\)",
        "vertices",
        "arcs",
        "left sp.",
        "right sp.",
        "bispecial",
    ];
    header.extend(balls.iter().map(String::as_str));
    let graphs = Tabular {
        caption,
        label: "factor-graphs",
        columns: &"r".repeat(header.len()),
        header,
    };
    graphs.write(
        out,
        results.graphs.iter().map(|g| {
            let mut row = vec![
                g.order as u64,
                g.vertices,
                g.arcs,
                g.left_special,
                g.right_special,
                g.bispecial,
            ];
            row.extend(&g.path_balls);
            row.iter().map(u64::to_string).collect()
        }),
    )
}

#[cfg(test)]
mod tests {
    use super::escape;

    #[test]
    fn nothing_special_is_left() {
        assert_eq!(
            escape("50% of $x_1 & {y}^2 \\ #~"),
            "50\\% of \\$x\\_1 \\& \\{y\\}\\textasciicircum{}2 \\textbackslash{} \\#\\textasciitilde{}"
        );
        assert_eq!(
            escape("c₁n³ ≤ p(n) → π — x"),
            "c\\(_1\\)n\\(^3\\) \\(\\le\\) p(n) \\(\\to\\) \\(\\pi\\) --- x"
        );
    }
}
