//! Pieces of a page: escaping, data tables, pictures, the frame with its style and script.
//!
//! A page loads nothing and works without its script; the script adds sorting and CSV
//! downloads to the tables that are marked for it. Pictures follow the reader's dark mode by style rules over
//! their few inks.

use super::pictures::Picture;
use crate::figure::dark_rules;

const STYLE: &str = include_str!("report.css");
const SCRIPT: &str = include_str!("report.js");

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

/// A whole page around its content.
pub fn frame(title: &str, content: &str) -> String {
    format!(
        "<!DOCTYPE html>\n<html lang=\"en\">\n<head>\n<meta charset=\"utf-8\">\n\
         <meta name=\"viewport\" content=\"width=device-width, initial-scale=1\">\n\
         <meta name=\"color-scheme\" content=\"light dark\">\n\
         <title>{}</title>\n<style>\n{STYLE}@media (prefers-color-scheme: dark) {{\n{}}}\n</style>\n</head>\n<body>\n\
         <main>\n{content}</main>\n<script>\n{SCRIPT}</script>\n</body>\n</html>\n",
        escape(title),
        dark_rules("figure svg"),
    )
}

/// A heading that links can reach.
pub fn heading(page: &mut String, id: &str, text: &str) {
    page.push_str(&format!("<h2 id=\"{id}\">{}</h2>\n", escape(text)));
}

/// The list of contents: identifiers and names of the headings.
pub fn contents(page: &mut String, headings: &[(&str, &str)]) {
    page.push_str("<nav aria-label=\"Contents\">\n<ol>\n");
    for (id, name) in headings {
        page.push_str(&format!(
            "<li><a href=\"#{id}\">{}</a></li>\n",
            escape(name)
        ));
    }
    page.push_str("</ol>\n</nav>\n");
}

/// A picture with its number and caption. The picture carries its own title and description for screen readers.
pub fn figure(page: &mut String, picture: &Picture, number: usize) {
    let id = picture.file.trim_end_matches(".svg");
    page.push_str(&format!(
        "<figure id=\"figure-{id}\">\n{}\n<figcaption><strong>Figure {number}. {}.</strong> {} <a href=\"{}\">{}</a></figcaption>\n</figure>\n",
        picture.svg,
        escape(&picture.title),
        escape(&picture.caption),
        picture.file,
        picture.file,
    ));
}

/// A table of data: sortable and downloadable when the script runs.
#[derive(Clone, Debug)]
pub struct DataTable<'a> {
    /// Name of the downloaded file, without its ending.
    pub name: &'a str,
    /// What the table holds, for everybody.
    pub caption: &'a str,
    /// Names of the columns.
    pub header: Vec<String>,
    /// True when the cells are numbers: aligned to the right.
    pub numbers: bool,
}

impl DataTable<'_> {
    /// Writes the table. Cells are plain text; the first cell of a row is its header.
    pub fn write(&self, page: &mut String, rows: impl Iterator<Item = Vec<String>>) {
        self.write_marked(
            page,
            rows.map(|row| row.iter().map(|cell| escape(cell)).collect()),
        );
    }

    /// As [`DataTable::write`] with cells that are HTML already.
    pub fn write_marked(&self, page: &mut String, rows: impl Iterator<Item = Vec<String>>) {
        let kind = if self.numbers { "numbers" } else { "texts" };
        let caption = escape(self.caption);
        page.push_str(&format!(
            "<div class=\"scroll\" tabindex=\"0\" role=\"region\" aria-label=\"{caption}\"><table class=\"{kind}\" data-name=\"{}\"><caption>{caption}</caption><thead><tr>",
            escape(self.name)
        ));
        for cell in &self.header {
            page.push_str(&format!("<th scope=\"col\">{}</th>", escape(cell)));
        }
        page.push_str("</tr></thead><tbody>\n");
        for row in rows {
            page.push_str("<tr>");
            for (column, cell) in row.iter().enumerate() {
                match column {
                    0 => page.push_str(&format!("<th scope=\"row\">{cell}</th>")),
                    _ => page.push_str(&format!("<td>{cell}</td>")),
                }
            }
            page.push_str("</tr>\n");
        }
        page.push_str("</tbody></table></div>\n");
    }
}

/// Column names.
pub fn strings<const N: usize>(cells: [&str; N]) -> Vec<String> {
    cells.iter().map(|c| c.to_string()).collect()
}
