//! Pointing into the text of a table file, and the plain values in it.

use crate::number::Real;
use crate::number::effort::{self, Exhausted};
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::{Evaluator, MOST_DIGITS, MOST_WORK};
use rug::Integer;
use std::ops::Range;
use toml::Spanned;
use toml::de::DeValue;

pub(crate) type Value<'i> = Spanned<DeValue<'i>>;
pub(crate) type Outcome<T> = Result<T, Box<Diagnostic>>;

/// The text that spans point into.
#[derive(Clone, Copy)]
pub(crate) struct Source<'a> {
    pub(crate) file: &'a str,
    pub(crate) text: &'a str,
}

impl Source<'_> {
    pub(crate) fn fault<T>(
        self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Outcome<T> {
        Err(self.diagnostic(span, message, help))
    }

    /// Does work within the budget of the file; when that ends here, the fault points at `span` and says what
    /// took too much.
    pub(super) fn affordable<T>(
        self,
        span: &Range<usize>,
        what: &str,
        work: impl FnOnce() -> Outcome<T>,
    ) -> Outcome<T> {
        effort::within(MOST_WORK, work).unwrap_or_else(|Exhausted| {
            let message = format!("{what} takes more work than one table file may cause");
            let help = "use shorter numbers, roots of lower degree, or fewer corners";
            self.fault(span, message, help)
        })
    }

    pub(crate) fn diagnostic(
        self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Box<Diagnostic> {
        Box::new(Diagnostic {
            file: self.file.into(),
            source: self.text.into(),
            span: span.clone(),
            label: String::new(),
            context: Vec::new(),
            message: message.into(),
            help: help.into(),
        })
    }
}

/// What a value is, for messages.
pub(crate) fn kind(value: &DeValue) -> &'static str {
    match value {
        DeValue::String(_) => "a string",
        DeValue::Integer(_) => "an integer",
        DeValue::Float(_) => "a floating-point number",
        DeValue::Boolean(_) => "a truth value",
        DeValue::Datetime(_) => "a date or time",
        DeValue::Array(_) => "an array",
        DeValue::Table(_) => "a table of keys",
    }
}

/// The exact number in a value.
pub(crate) fn number(
    source: Source,
    evaluator: &mut Evaluator,
    value: &Value,
    what: &str,
) -> Outcome<Real> {
    let span = value.span();
    match value.get_ref() {
        DeValue::Integer(integer) => {
            let digits = integer.as_str().replace('_', "");
            if digits.len() > MOST_DIGITS {
                let message = format!("{what}: a number of {} digits is too long", digits.len());
                return source.fault(
                    &span,
                    message,
                    format!("write at most {MOST_DIGITS} digits"),
                );
            }
            match Integer::from_str_radix(&digits, integer.radix() as i32) {
                Ok(value) => Ok(Real::from(value)),
                Err(_) => source.fault(&span, "this integer cannot be read", "write it in quotes"),
            }
        }
        DeValue::String(text) => evaluator.evaluate(text).map_err(|fault| {
            let inside = place_in_string(source.text, &span, text, &fault.span);
            source.diagnostic(&inside, format!("{what}: {}", fault.message), fault.help)
        }),
        DeValue::Float(float) => {
            let written = source.text.get(span.clone()).unwrap_or(float.as_str());
            let finite = written.chars().any(|c| c.is_ascii_digit());
            let help = if finite {
                format!(
                    "write it in quotes, as the exact decimal \"{}\"",
                    written.replace('_', "")
                )
            } else {
                "write a finite number in quotes".into()
            };
            let message = format!("{what} is a floating-point number, which is not exact");
            source.fault(&span, message, help)
        }
        other => {
            let message = format!("{what} must be a number, this is {}", kind(other));
            source.fault(
                &span,
                message,
                "write an exact expression in quotes, such as \"3/4\"",
            )
        }
    }
}

/// Where a part of a string's content stands in the file: exact when the string is written without
/// escapes, the whole string otherwise.
pub(crate) fn place_in_string(
    text: &str,
    string: &Range<usize>,
    content: &str,
    part: &Range<usize>,
) -> Range<usize> {
    let raw = &text[string.clone()];
    let mut quotes = if raw.starts_with("\"\"\"") || raw.starts_with("'''") {
        3
    } else {
        1
    };
    // A line break right after three quotes is not part of the string.
    if quotes == 3 {
        let rest = &raw[3..];
        quotes += if rest.starts_with("\r\n") {
            2
        } else {
            usize::from(rest.starts_with('\n'))
        };
    }
    let start = string.start + quotes;
    if raw.get(quotes..quotes + content.len()) != Some(content) {
        return string.clone();
    }
    if part.is_empty() {
        // The end of the text, or an empty string: show the closing quote.
        return start + part.start..start + part.start + 1;
    }
    start + part.start..start + part.end
}

/// The items of an array.
pub(crate) fn array<'v, 'i>(
    source: Source,
    value: &'v Value<'i>,
    what: &str,
    help: &str,
) -> Outcome<&'v [Value<'i>]> {
    match value.get_ref() {
        DeValue::Array(items) => Ok(items),
        other => source.fault(
            &value.span(),
            format!("{what} must be an array, this is {}", kind(other)),
            help,
        ),
    }
}
