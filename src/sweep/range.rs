//! The values that a parameter takes.
//!
//! `t=1/10..9/10/17` is 17 values from 1/10 to 9/10 at equal distances, both ends included: what follows the last slash is
//! the count. `t={1/3, sqrt(2)/3}` is a list, `t=2/5` one value. Ends are rational; the values of a list are any exact
//! expressions.

use crate::number::Real;
use crate::table::expression::Evaluator;
use rug::Rational;
use thiserror::Error;

/// The most values of one parameter.
pub const MOST_VALUES: usize = 10_000;

/// One value of a parameter.
#[derive(Clone, Debug, PartialEq)]
pub struct Value {
    /// The expression, as it goes into the table file.
    pub text: String,
    /// For axes and columns of decimals.
    pub approximate: f64,
}

/// A parameter and its values.
#[derive(Clone, Debug, PartialEq)]
pub struct Sweep {
    /// The name.
    pub name: String,
    /// The values in order.
    pub values: Vec<Value>,
}

/// What is wrong with a range.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum RangeFault {
    /// No `=`, or an empty side of it.
    #[error("`{text}` names no parameter and values: write `t=1/10..9/10/17` or `t={{1/3,2/5}}`")]
    NoName {
        /// The text.
        text: String,
    },
    /// The count is missing or no number.
    #[error("`{text}` has no count: write start..end/count, such as 1/10..9/10/17 for 17 values")]
    NoCount {
        /// The text.
        text: String,
    },
    /// What follows the last slash is no number.
    #[error(
        "`{count}` is no whole number: what follows the last `/` of a range is the count of its values, so write start..end/count, such as 1/10..9/10/17 for 17 values"
    )]
    CountNotWhole {
        /// What stands there.
        count: String,
    },
    /// The count is out of bounds.
    #[error(
        "{count} values are asked for, and a range has from 2 to {MOST_VALUES}: write start..end/count, such as 1/10..9/10/17"
    )]
    BadCount {
        /// The count, as written.
        count: String,
    },
    /// An expression is wrong.
    #[error("`{text}`: {message}; {help}")]
    BadExpression {
        /// The expression.
        text: String,
        /// What is wrong.
        message: String,
        /// What to write.
        help: String,
    },
    /// An end of a range is irrational.
    #[error(
        "`{text}` is irrational, and the ends of a range are rational: write a list {{…}} of values instead"
    )]
    IrrationalEnd {
        /// The expression.
        text: String,
    },
    /// The ends are the same.
    #[error("the range starts and ends at {value}")]
    NoExtent {
        /// Both ends.
        value: String,
    },
    /// A list has no values.
    #[error("the list of values is empty")]
    EmptyList,
    /// A parameter comes twice.
    #[error("the parameter `{name}` is set twice")]
    Twice {
        /// Its name.
        name: String,
    },
    /// The product of the counts is too large.
    #[error("the ranges have {count} members together, and at most {MOST_VALUES} are computed")]
    TooMany {
        /// The product.
        count: usize,
    },
}

fn evaluate(text: &str) -> Result<Real, RangeFault> {
    Evaluator::default()
        .evaluate(text)
        .map_err(|fault| RangeFault::BadExpression {
            text: text.into(),
            message: fault.message,
            help: fault.help,
        })
}

/// Reads `name=values`.
///
/// # Errors
/// As [`RangeFault`] says.
pub fn parse(text: &str) -> Result<Sweep, RangeFault> {
    let no_name = || RangeFault::NoName { text: text.into() };
    let (name, values) = text.split_once('=').ok_or_else(no_name)?;
    let (name, values) = (name.trim(), values.trim());
    if name.is_empty() || values.is_empty() {
        return Err(no_name());
    }
    let values = if let Some(list) = values.strip_prefix('{').and_then(|v| v.strip_suffix('}')) {
        list_of(list)?
    } else if let Some((start, rest)) = values.split_once("..") {
        range_of(values, start.trim(), rest.trim())?
    } else {
        list_of(values)?
    };
    Ok(Sweep {
        name: name.into(),
        values,
    })
}

fn list_of(list: &str) -> Result<Vec<Value>, RangeFault> {
    if list.trim().is_empty() {
        return Err(RangeFault::EmptyList);
    }
    list_items(list)
        .into_iter()
        .map(|text| {
            let approximate = evaluate(text)?.to_f64();
            Ok(Value {
                text: text.into(),
                approximate,
            })
        })
        .collect()
}

/// Parts between commas outside parentheses: `root(x^3-2, 1.26)` holds a comma of its own.
fn list_items(list: &str) -> Vec<&str> {
    let (mut depth, mut from, mut items) = (0_i32, 0, Vec::new());
    for (at, c) in list.char_indices() {
        match c {
            '(' => depth += 1,
            ')' => depth -= 1,
            ',' if depth == 0 => {
                items.push(list[from..at].trim());
                from = at + 1;
            }
            _ => {}
        }
    }
    items.push(list[from..].trim());
    items
}

fn range_of(whole: &str, start: &str, rest: &str) -> Result<Vec<Value>, RangeFault> {
    let no_count = || RangeFault::NoCount { text: whole.into() };
    let (end, count) = rest.rsplit_once('/').ok_or_else(no_count)?;
    let written = count.trim();
    if written.is_empty() {
        return Err(no_count());
    }
    if !written.bytes().all(|digit| digit.is_ascii_digit()) {
        return Err(RangeFault::CountNotWhole {
            count: written.into(),
        });
    }
    // Digits that are no such number are too many.
    let count: Option<usize> = written.parse().ok();
    let Some(count) = count.filter(|count| (2..=MOST_VALUES).contains(count)) else {
        return Err(RangeFault::BadCount {
            count: written.into(),
        });
    };
    let rational = |text: &str| {
        let value = evaluate(text)?.to_rational();
        value.ok_or_else(|| RangeFault::IrrationalEnd { text: text.into() })
    };
    let (start, end) = (rational(start)?, rational(end.trim())?);
    if start == end {
        return Err(RangeFault::NoExtent {
            value: start.to_string(),
        });
    }
    let step = Rational::from(&end - &start) / (count as u32 - 1);
    Ok((0..count as u32)
        .map(|i| {
            let value = Rational::from(&step * i) + &start;
            Value {
                text: value.to_string(),
                approximate: value.to_f64(),
            }
        })
        .collect())
}

/// The members of a family: all combinations of values, the last parameter fastest.
///
/// # Errors
/// When a parameter comes twice or there are too many members.
pub fn members(sweeps: &[Sweep]) -> Result<Vec<Vec<Value>>, RangeFault> {
    for (i, sweep) in sweeps.iter().enumerate() {
        if sweeps[..i].iter().any(|earlier| earlier.name == sweep.name) {
            return Err(RangeFault::Twice {
                name: sweep.name.clone(),
            });
        }
    }
    let product = |n: usize, sweep: &Sweep| n.saturating_mul(sweep.values.len());
    let count = sweeps.iter().fold(1, product);
    if count > MOST_VALUES {
        return Err(RangeFault::TooMany { count });
    }
    Ok(sweeps.iter().fold(vec![Vec::new()], |members, sweep| {
        let with = |member: &Vec<Value>| {
            let member = member.clone();
            sweep.values.iter().map(move |value| {
                let mut longer = member.clone();
                longer.push(value.clone());
                longer
            })
        };
        members.iter().flat_map(with).collect()
    }))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn texts(text: &str) -> Vec<String> {
        let sweep = parse(text).unwrap_or_else(|e| panic!("{text}: {e}"));
        sweep.values.into_iter().map(|v| v.text).collect()
    }

    #[test]
    fn ranges_hold_both_ends() {
        assert_eq!(
            texts("t=1/10..9/10/5"),
            ["1/10", "3/10", "1/2", "7/10", "9/10"]
        );
        assert_eq!(texts("t = 1..2/3"), ["1", "3/2", "2"]);
        assert_eq!(texts("t=0.5..-0.5/3"), ["1/2", "0", "-1/2"]);
        assert_eq!(texts("t=1/10..9/10/17").len(), 17);
    }

    #[test]
    fn lists_hold_expressions() {
        assert_eq!(texts("t={1/3, 2/5,1/2}"), ["1/3", "2/5", "1/2"]);
        assert_eq!(
            texts("t={sqrt(2)/3, root(x^3-2, 1.26)}"),
            ["sqrt(2)/3", "root(x^3-2, 1.26)"]
        );
        assert_eq!(texts("t=2/5"), ["2/5"]);
    }

    #[test]
    fn what_is_wrong_is_said() {
        use RangeFault::*;
        let fault = |text: &str| parse(text).unwrap_err();
        assert!(matches!(fault("1/10..9/10/17"), NoName { .. }));
        assert!(matches!(fault("t="), NoName { .. }));
        assert!(matches!(fault("t=1..2"), NoCount { .. }));
        assert!(matches!(fault("t=1..2/"), NoCount { .. }));
        for (text, count) in [
            ("t=1..2/x", "x"),
            ("t=1..2/-3", "-3"),
            ("t=1..5/2.5", "2.5"),
        ] {
            let said = fault(text).to_string();
            assert!(
                said.starts_with(&format!("`{count}` is no whole number")),
                "{said}"
            );
            assert!(said.contains("1/10..9/10/17"), "{said}");
        }
        assert!(matches!(fault("t=1..2/1"), BadCount { .. }));
        assert!(matches!(
            fault("t=1..2/99999999999999999999999"),
            BadCount { .. }
        ));
        assert!(matches!(fault("t=1..1/3"), NoExtent { .. }));
        assert!(matches!(fault("t=sqrt(2)..2/3"), IrrationalEnd { .. }));
        assert!(matches!(fault("t={}"), EmptyList));
        assert!(matches!(fault("t={1,}"), BadExpression { .. }));
        assert!(matches!(fault("t=1/0"), BadExpression { .. }));
    }

    #[test]
    fn combinations_of_two_parameters() {
        let sweeps = ["t={1,2}", "u={3,4,5}"].map(|t| parse(t).unwrap());
        let all = members(&sweeps).unwrap();
        let text = |m: &Vec<Value>| format!("{} {}", m[0].text, m[1].text);
        let all: Vec<String> = all.iter().map(text).collect();
        assert_eq!(all, ["1 3", "1 4", "1 5", "2 3", "2 4", "2 5"]);
        let twice = [sweeps[0].clone(), sweeps[0].clone()];
        assert!(matches!(members(&twice), Err(RangeFault::Twice { .. })));
        let many = ["t=1..2/101", "u=1..2/101"].map(|t| parse(t).unwrap());
        assert!(matches!(
            members(&many),
            Err(RangeFault::TooMany { count: 10201 })
        ));
    }
}
