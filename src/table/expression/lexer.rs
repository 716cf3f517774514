//! Cutting an expression into tokens.

use super::{ExpressionFault, LARGEST_EXPONENT, LONGEST_EXPRESSION, MOST_DIGITS};
use rug::ops::Pow;
use rug::{Integer, Rational};
use std::ops::Range;

/// What a token is.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Token {
    Number(Rational),
    Name(String),
    /// One of `+ - * / ^ ( ) ,`.
    Mark(char),
}

/// The tokens with their places.
pub(super) fn tokens(text: &str) -> Result<Vec<(Token, Range<usize>)>, ExpressionFault> {
    if text.len() > LONGEST_EXPRESSION {
        return Err(ExpressionFault::new(
            &(0..text.len()),
            format!("an expression of {} bytes is too long", text.len()),
            format!("write at most {LONGEST_EXPRESSION} bytes"),
        ));
    }
    let mut found = Vec::new();
    let mut at = 0;
    while let Some(c) = text[at..].chars().next() {
        let start = at;
        if c.is_whitespace() {
            at += c.len_utf8();
        } else if c.is_ascii_digit() || c == '.' {
            at = number_end(text, at);
            found.push((Token::Number(number(text, start..at)?), start..at));
        } else if c.is_ascii_alphabetic() || c == '_' {
            let length = text[at..]
                .find(|c: char| !(c.is_ascii_alphanumeric() || c == '_'))
                .unwrap_or(text.len() - at);
            at += length;
            found.push((Token::Name(text[start..at].to_string()), start..at));
        } else if "+-*/^(),".contains(c) {
            at += 1;
            if text[start..].starts_with("**") {
                let help = "write `^` for a power";
                return Err(ExpressionFault::new(
                    &(start..start + 2),
                    "unexpected `**`",
                    help,
                ));
            }
            found.push((Token::Mark(c), start..at));
        } else {
            let message = format!("unexpected character `{}`", c.escape_debug());
            let span = start..start + c.len_utf8();
            return Err(ExpressionFault::new(&span, message, instead_of(c)));
        }
    }
    Ok(found)
}

fn instead_of(c: char) -> String {
    match c {
        '√' => "write `sqrt(...)`".into(),
        'π' => "write `pi`".into(),
        '×' | '·' | '⋅' | '∗' => "write `*` for a product".into(),
        '÷' | '∕' | ':' => "write `/` for a quotient".into(),
        '−' | '–' | '—' => "write the plain minus sign `-`".into(),
        '²' => "write `^2`".into(),
        '³' => "write `^3`".into(),
        '[' | '{' | ']' | '}' => "write round parentheses".into(),
        '°' => "write angles as multiples of `pi`: 30 degrees is `pi/6`".into(),
        '%' => "write a fraction, such as `1/100`".into(),
        _ => "an expression holds numbers, + - * / ^, parentheses, `pi` and functions".into(),
    }
}

/// The end of the number that starts at a byte: digits, a point, digits, an exponent.
fn number_end(text: &str, start: usize) -> usize {
    let bytes = text.as_bytes();
    let digits = |mut at: usize| {
        while bytes.get(at).is_some_and(u8::is_ascii_digit) {
            at += 1;
        }
        at
    };
    let mut end = digits(start);
    if bytes.get(end) == Some(&b'.') {
        end = digits(end + 1);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits(end + 1 + sign);
        if exponent > end + 1 + sign {
            end = exponent;
        }
    }
    end
}

fn number(text: &str, span: Range<usize>) -> Result<Rational, ExpressionFault> {
    let written = &text[span.clone()];
    let fault = |message: String, help: String| Err(ExpressionFault::new(&span, message, help));
    let (mantissa, exponent) = match written.find(['e', 'E']) {
        Some(at) => (&written[..at], &written[at + 1..]),
        None => (written, "0"),
    };
    let (whole, fraction) = mantissa.split_once('.').unwrap_or((mantissa, ""));
    if mantissa.contains('.') && fraction.is_empty() {
        let whole = if whole.is_empty() { "0" } else { whole };
        let message = "a decimal point without digits after it".into();
        return fault(message, format!("write `{whole}` or `{whole}.0`"));
    }
    let count = whole.len() + fraction.len();
    if count > MOST_DIGITS {
        let message = format!("a number of {count} digits is too long");
        return fault(message, format!("write at most {MOST_DIGITS} digits"));
    }
    let exponent = match exponent.parse::<i64>() {
        Ok(value) if value.unsigned_abs() <= u64::from(LARGEST_EXPONENT) => value,
        _ => {
            let message = "the power of ten of a number is too large".into();
            return fault(
                message,
                format!("write one from -{LARGEST_EXPONENT} to {LARGEST_EXPONENT}"),
            );
        }
    };
    let digits: Integer = format!("{whole}{fraction}")
        .parse()
        .expect("decimal digits");
    let power = exponent - fraction.len() as i64;
    let scale = Integer::from(10).pow(power.unsigned_abs() as u32);
    Ok(if power >= 0 {
        Rational::from(digits * scale)
    } else {
        Rational::from((digits, scale))
    })
}
