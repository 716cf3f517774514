//! Messages that point into a text: file, line, column, the line itself, a caret, and what to write
//! instead.

use annotate_snippets::{AnnotationKind, Level, Renderer, Snippet};
use std::fmt;
use std::ops::Range;

/// A fault in a text that the user wrote.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// The name of the file, as the user gave it.
    pub file: String,
    /// The whole text.
    pub source: String,
    /// The bytes at fault.
    pub span: Range<usize>,
    /// A few words at the caret; may be empty.
    pub label: String,
    /// Other places that belong to the fault, with a few words each.
    pub context: Vec<(Range<usize>, String)>,
    /// One lower-case sentence.
    pub message: String,
    /// What to write instead.
    pub help: String,
}

impl Diagnostic {
    /// The line of the fault, from 1.
    pub fn line(&self) -> usize {
        self.before().matches('\n').count() + 1
    }

    /// The column of the fault in characters, from 1.
    pub fn column(&self) -> usize {
        let before = self.before();
        before[before.rfind('\n').map_or(0, |at| at + 1)..]
            .chars()
            .count()
            + 1
    }

    fn before(&self) -> &str {
        &self.source[..floor(&self.source, self.span.start)]
    }
}

/// The last character boundary that is not past the byte.
fn floor(text: &str, byte: usize) -> usize {
    (0..=byte.min(text.len()))
        .rev()
        .find(|at| text.is_char_boundary(*at))
        .unwrap_or(0)
}

/// A span inside the text, on character boundaries.
fn within(text: &str, span: &Range<usize>) -> Range<usize> {
    let start = floor(text, span.start);
    start..floor(text, span.end).max(start)
}

impl fmt::Display for Diagnostic {
    /// Plain text without colours.
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let primary = AnnotationKind::Primary.span(within(&self.source, &self.span));
        let mut snippet = Snippet::source(self.source.as_str())
            .path(self.file.as_str())
            .annotation(if self.label.is_empty() {
                primary
            } else {
                primary.label(self.label.as_str())
            });
        for (span, label) in &self.context {
            let place = AnnotationKind::Context.span(within(&self.source, span));
            snippet = snippet.annotation(place.label(label.as_str()));
        }
        let mut group = Level::ERROR
            .primary_title(self.message.as_str())
            .element(snippet);
        if !self.help.is_empty() {
            group = group.element(Level::HELP.message(self.help.as_str()));
        }
        f.write_str(&Renderer::plain().render(&[group]))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sample(source: &str, span: Range<usize>) -> Diagnostic {
        Diagnostic {
            file: "quay.toml".into(),
            source: source.into(),
            span,
            label: "here".into(),
            context: Vec::new(),
            message: "something is wrong".into(),
            help: "write something else".into(),
        }
    }

    #[test]
    fn the_text_names_file_line_column_and_shows_the_line() {
        let shown = sample("title = \"é\"\nform = \"1/0\"\n", 22..23).to_string();
        for part in [
            "error: something is wrong",
            "quay.toml:2:10",
            "form = \"1/0\"",
            "^ here",
            "help: write",
        ] {
            assert!(shown.contains(part), "{part} in\n{shown}");
        }
    }

    #[test]
    fn any_span_can_be_shown() {
        for source in ["", "é", "a\nb\n", "\n\n\n"] {
            for start in 0..=source.len() + 2 {
                for end in start..=source.len() + 3 {
                    let diagnostic = sample(source, start..end);
                    assert!(diagnostic.to_string().contains("quay.toml"));
                    assert!(diagnostic.line() >= 1 && diagnostic.column() >= 1);
                }
            }
        }
    }
}
