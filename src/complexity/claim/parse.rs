//! From the text of a claim to a [`Claim`], by recursive descent; the grammar is that of the module above.

use super::{Claim, Comparison, Expression, Sequence};
use crate::table::diagnostic::Diagnostic;
use rug::{Integer, Rational};
use std::ops::Range;

/// Nesting beyond this is refused, so that no text overflows the stack.
const DEEPEST: usize = 100;
/// The longest text.
const LONGEST_TEXT: usize = 10_000;
/// What a claim looks like, for every message.
const EXAMPLE: &str =
    "write a comparison of p(n), s(n), b(n), N(n) and n, such as `p(n) <= 0.07*n^3 for n >= 10`";

type Parsed<T> = Result<T, Box<Diagnostic>>;

#[derive(Clone, Debug, PartialEq)]
enum Token {
    Number(Rational),
    Word(String),
    Sign(char),
    Compare(Comparison),
}

/// Reads a claim.
///
/// # Errors
/// A diagnostic that points at what is wrong and says what to write.
pub fn parse(text: &str) -> Parsed<Claim> {
    if text.len() > LONGEST_TEXT {
        let message = format!(
            "a claim has at most {LONGEST_TEXT} bytes, this one {}",
            text.len()
        );
        return Err(fault("", 0..0, message, EXAMPLE));
    }
    let mut reader = Reader {
        text,
        tokens: tokens(text)?,
        next: 0,
        depth: 0,
    };
    let claim = reader.claim()?;
    match reader.tokens.get(reader.next) {
        None => Ok(claim),
        Some((_, place)) => Err(fault(
            text,
            place.clone(),
            "the claim should end here".into(),
            "write `*` between factors; after the comparison only `for` and a range may follow",
        )),
    }
}

fn fault(text: &str, span: Range<usize>, message: String, help: &str) -> Box<Diagnostic> {
    Box::new(Diagnostic {
        file: "--claim".into(),
        source: text.into(),
        span,
        label: String::new(),
        context: Vec::new(),
        message,
        help: help.into(),
    })
}

fn tokens(text: &str) -> Parsed<Vec<(Token, Range<usize>)>> {
    let mut all = Vec::new();
    let mut rest = text.char_indices().peekable();
    while let Some((at, c)) = rest.next() {
        let mut end = at + c.len_utf8();
        let mut take_while = |test: fn(char) -> bool| {
            while let Some((i, d)) = rest.next_if(|(_, d)| test(*d)) {
                end = i + d.len_utf8();
            }
            end
        };
        let token = match c {
            c if c.is_whitespace() => continue,
            '0'..='9' | '.' => {
                let end = take_while(|d| d.is_ascii_digit() || d == '.');
                let written = &text[at..end];
                let number = number(written).ok_or_else(|| {
                    let message = format!("`{written}` is no number");
                    fault(
                        text,
                        at..end,
                        message,
                        "write an integer or a decimal, such as 3 or 0.07",
                    )
                })?;
                Token::Number(number)
            }
            c if c.is_alphabetic() => {
                let end = take_while(char::is_alphanumeric);
                Token::Word(text[at..end].into())
            }
            '<' | '>' | '=' | '!' | '≤' | '≥' | '≠' => {
                let equal = rest.next_if(|(_, d)| *d == '=').is_some();
                end += usize::from(equal);
                Token::Compare(match (c, equal) {
                    ('<', true) | ('≤', false) => Comparison::AtMost,
                    ('<', false) => Comparison::Below,
                    ('>', true) | ('≥', false) => Comparison::AtLeast,
                    ('>', false) => Comparison::Above,
                    ('=', _) => Comparison::Equal,
                    ('!', true) | ('≠', false) => Comparison::Different,
                    _ => {
                        let message = format!("`{}` is no comparison", &text[at..end]);
                        return Err(fault(text, at..end, message, "write <=, <, >=, >, = or !="));
                    }
                })
            }
            '+' | '*' | '/' | '^' | '(' | ')' | '-' => Token::Sign(c),
            '−' => Token::Sign('-'),
            '·' | '×' => Token::Sign('*'),
            _ => {
                let message = format!("`{c}` has no meaning in a claim");
                return Err(fault(text, at..end, message, EXAMPLE));
            }
        };
        all.push((token, at..end));
    }
    Ok(all)
}

/// An integer or a decimal, exactly.
fn number(written: &str) -> Option<Rational> {
    let (whole, fraction) = written.split_once('.').unwrap_or((written, ""));
    if whole.is_empty() || (written.contains('.') && fraction.is_empty()) || fraction.contains('.')
    {
        return None;
    }
    let digits: Integer = format!("{whole}{fraction}").parse().ok()?;
    let unit = Integer::from(Integer::u_pow_u(10, fraction.len() as u32));
    Some(Rational::from((digits, unit)))
}

struct Reader<'a> {
    text: &'a str,
    tokens: Vec<(Token, Range<usize>)>,
    next: usize,
    depth: usize,
}

impl Reader<'_> {
    fn peek(&self) -> Option<&Token> {
        self.tokens.get(self.next).map(|(token, _)| token)
    }

    /// The place of the next token, or of the end.
    fn place(&self) -> Range<usize> {
        let end = self.text.len();
        self.tokens
            .get(self.next)
            .map_or(end..end, |(_, place)| place.clone())
    }

    fn refuse<T>(&self, span: Range<usize>, message: impl Into<String>, help: &str) -> Parsed<T> {
        Err(fault(self.text, span, message.into(), help))
    }

    fn takes(&mut self, signs: &str) -> Option<char> {
        match self.peek() {
            Some(Token::Sign(c)) if signs.contains(*c) => {
                let c = *c;
                self.next += 1;
                Some(c)
            }
            _ => None,
        }
    }

    fn comparison(&mut self) -> Option<Comparison> {
        match self.peek() {
            Some(Token::Compare(how)) => {
                let how = *how;
                self.next += 1;
                Some(how)
            }
            _ => None,
        }
    }

    fn claim(&mut self) -> Parsed<Claim> {
        let (sides, places, comparisons) = self.chain()?;
        if comparisons.is_empty() {
            return self.refuse(self.place(), "a comparison is missing", EXAMPLE);
        }
        let (mut from, mut to) = (1, None);
        if self.peek() == Some(&Token::Word("for".into())) {
            self.next += 1;
            (from, to) = self.range()?;
        }
        Ok(Claim {
            text: self.text.trim().into(),
            sides,
            places,
            comparisons,
            from,
            to,
        })
    }

    #[expect(clippy::type_complexity, reason = "the three lists of a claim")]
    fn chain(&mut self) -> Parsed<(Vec<Expression>, Vec<Range<usize>>, Vec<Comparison>)> {
        let (mut sides, mut places, mut comparisons) = (Vec::new(), Vec::new(), Vec::new());
        loop {
            let start = self.place().start;
            sides.push(self.sum()?);
            let end = self.tokens[self.next - 1].1.end;
            places.push(start..end);
            match self.comparison() {
                Some(how) => comparisons.push(how),
                None => return Ok((sides, places, comparisons)),
            }
        }
    }

    /// A range: a chain of at most two comparisons between n and whole numbers.
    fn range(&mut self) -> Parsed<(u64, Option<u64>)> {
        const HELP: &str = "write a range such as `n >= 10`, `4 <= n <= 60` or `n = 12`";
        let start = self.place().start;
        let (sides, places, comparisons) = self.chain()?;
        let span = start..places[places.len() - 1].end;
        let middle = sides.iter().position(|side| *side == Expression::Variable);
        let (Some(middle), 1..=2) = (middle, comparisons.len()) else {
            return self.refuse(span, "this is no range of n", HELP);
        };
        let (mut from, mut to) = (Integer::from(0), None::<Integer>);
        for (i, how) in comparisons.iter().enumerate() {
            let (bound, flipped) = match middle {
                m if m == i => (i + 1, false),
                m if m == i + 1 => (i, true),
                _ => return self.refuse(span, "this is no range of n", HELP),
            };
            let value = match &sides[bound] {
                Expression::Number(q) if q.is_integer() => q.numer().clone(),
                _ => {
                    return self.refuse(
                        places[bound].clone(),
                        "a bound of n is a whole number",
                        HELP,
                    );
                }
            };
            let (low, high) = match (how, flipped) {
                (Comparison::AtLeast, false) | (Comparison::AtMost, true) => (Some(value), None),
                (Comparison::Above, false) | (Comparison::Below, true) => {
                    (Some(value + 1u32), None)
                }
                (Comparison::AtMost, false) | (Comparison::AtLeast, true) => (None, Some(value)),
                (Comparison::Below, false) | (Comparison::Above, true) => {
                    (None, Some(value - 1u32))
                }
                (Comparison::Equal, _) => (Some(value.clone()), Some(value)),
                (Comparison::Different, _) => {
                    return self.refuse(span, "`!=` gives no range of n", HELP);
                }
            };
            if let Some(low) = low {
                from = from.max(low);
            }
            if let Some(high) = high {
                to = Some(to.map_or(high.clone(), |old| old.min(high)));
            }
        }
        if to.as_ref().is_some_and(|to| *to < from) {
            return self.refuse(span, "this range holds no n", HELP);
        }
        // Nothing is counted beyond 64 bits; such a range is merely never reached.
        let small = |value: Integer| value.to_u64().unwrap_or(u64::MAX);
        Ok((small(from), to.map(small)))
    }

    fn sum(&mut self) -> Parsed<Expression> {
        let mut left = self.product()?;
        while let Some(sign) = self.takes("+-") {
            left = Expression::Joined(sign, Box::new(left), Box::new(self.product()?));
        }
        Ok(left)
    }

    fn product(&mut self) -> Parsed<Expression> {
        let mut left = self.factor()?;
        while let Some(sign) = self.takes("*/") {
            let start = self.place().start;
            let right = self.factor()?;
            let zero = matches!(&right, Expression::Number(q) if *q == 0);
            if sign == '/' && zero {
                let span = start..self.tokens[self.next - 1].1.end;
                return self.refuse(span, "division by zero", "write a divisor that is not 0");
            }
            left = Expression::Joined(sign, Box::new(left), Box::new(right));
        }
        Ok(left)
    }

    fn factor(&mut self) -> Parsed<Expression> {
        self.depth += 1;
        if self.depth > DEEPEST {
            let message = format!("a claim is nested at most {DEEPEST} deep");
            return self.refuse(
                self.place(),
                message,
                "write it with fewer brackets and signs",
            );
        }
        let found = match self.takes("-") {
            Some(_) => Expression::Negative(Box::new(self.factor()?)),
            None => self.power()?,
        };
        self.depth -= 1;
        Ok(found)
    }

    fn power(&mut self) -> Parsed<Expression> {
        let base = self.atom()?;
        if self.takes("^").is_none() {
            return Ok(base);
        }
        let start = self.place().start;
        let exponent = self.factor()?;
        if !exponent.is_whole() {
            let span = start..self.tokens[self.next - 1].1.end;
            return self.refuse(
                span,
                "an exponent is built of integers and n by + - *",
                "write a whole exponent; for a root raise both sides to a power, such as p(n)^2 <= n^3",
            );
        }
        Ok(Expression::Joined('^', Box::new(base), Box::new(exponent)))
    }

    fn atom(&mut self) -> Parsed<Expression> {
        let place = self.place();
        let Some((token, _)) = self.tokens.get(self.next).cloned() else {
            return self.refuse(place, "the claim ends where a value should stand", EXAMPLE);
        };
        self.next += 1;
        match token {
            Token::Number(q) => Ok(Expression::Number(q)),
            Token::Sign('(') => {
                let inner = self.sum()?;
                self.close(place)?;
                Ok(inner)
            }
            Token::Word(word) => self.word(&word, place),
            Token::Sign(_) | Token::Compare(_) => {
                self.refuse(place, "a value should stand here", EXAMPLE)
            }
        }
    }

    fn close(&mut self, opening: Range<usize>) -> Parsed<()> {
        match self.takes(")") {
            Some(_) => Ok(()),
            None => {
                let mut fault = fault(
                    self.text,
                    self.place(),
                    "a closing bracket is missing".into(),
                    "write `)` here",
                );
                fault.context.push((opening, "opened here".into()));
                Err(fault)
            }
        }
    }

    fn word(&mut self, word: &str, place: Range<usize>) -> Parsed<Expression> {
        let sequence = match word {
            "n" => return Ok(Expression::Variable),
            "p" => Sequence::Words,
            "s" => Sequence::First,
            "b" => Sequence::Second,
            "N" => Sequence::Diagonals,
            "pi" | "π" | "e" | "sqrt" | "log" | "ln" => {
                return self.refuse(
                    place,
                    format!("claims are checked in rational arithmetic, which has no `{word}`"),
                    "write a rational bound on the safe side, such as 0.4053 for 4/π²",
                );
            }
            _ => {
                let message = format!("`{word}` is no name in a claim");
                return self.refuse(
                    place,
                    message,
                    "write n, p(n), s(n), b(n) or N(n), with `*` between factors",
                );
            }
        };
        let opening = self.place();
        if self.takes("(").is_none() {
            let help = format!("write {word}(n)");
            return self.refuse(
                opening,
                format!("`{word}` needs an argument in brackets"),
                &help,
            );
        }
        let start = self.place().start;
        let argument = self.sum()?;
        let span = start..self.tokens[self.next - 1].1.end;
        self.close(opening)?;
        if !argument.is_whole() {
            return self.refuse(
                span,
                "an argument is built of integers and n by + - *",
                "write an argument such as n, n + 1 or 2*n",
            );
        }
        Ok(Expression::Value(sequence, Box::new(argument)))
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ranges() {
        for (range, expected) in [
            ("", (1, None)),
            (" for n >= 10", (10, None)),
            (" for 10 <= n", (10, None)),
            (" for n > 10", (11, None)),
            (" for 4 <= n <= 60", (4, Some(60))),
            (" for 60 > n >= 4", (4, Some(59))),
            (" for n = 12", (12, Some(12))),
            (" for n ≤ 5", (0, Some(5))),
        ] {
            let claim = parse(&format!("p(n) <= n^3{range}")).unwrap();
            assert_eq!((claim.from, claim.to), expected, "{range}");
        }
    }

    #[test]
    fn precedence_and_exact_decimals() {
        let claim = parse("-n^2*0.07 + 6/2/3 = p(2*n-1)").unwrap();
        let Expression::Joined('+', left, right) = &claim.sides[0] else {
            panic!("{claim:?}");
        };
        let Expression::Joined('*', square, seven) = &**left else {
            panic!("{left:?}");
        };
        assert!(
            matches!(&**square, Expression::Negative(inner) if matches!(**inner, Expression::Joined('^', ..)))
        );
        assert_eq!(**seven, Expression::Number(Rational::from((7, 100))));
        assert!(
            matches!(&**right, Expression::Joined('/', inner, _) if matches!(**inner, Expression::Joined('/', ..)))
        );
    }

    #[test]
    fn faults_point_at_what_is_wrong() {
        for (text, column, message) in [
            ("", 1, "ends where a value"),
            ("p(n)", 5, "comparison is missing"),
            ("p(n) <= 0.07 n^3", 14, "should end here"),
            ("p(n) <= 0.07*n^3 for", 21, "ends where a value"),
            ("p(n) <= n^3 for m > 3", 17, "`m` is no name"),
            ("p(n) <= n^3 for n > 3.5", 21, "whole number"),
            ("p(n) <= n^3 for 9 < n < 5", 17, "holds no n"),
            ("p(n) <= n^3 for n != 5", 17, "no range"),
            ("p(n) <= n^(3/2)", 11, "exponent"),
            ("p(n) <= n^1.5", 11, "exponent"),
            ("p(n/2) <= n", 3, "argument"),
            ("p <= n", 3, "needs an argument"),
            ("p(n <= n", 5, "closing bracket"),
            ("p(n) <= pi*n", 9, "rational arithmetic"),
            ("p(n) <= 1..2", 9, "is no number"),
            ("p(n) ! 3", 6, "no comparison"),
            ("p(n) <= n/0", 11, "division by zero"),
            ("p(n) <= $", 9, "no meaning"),
            ("p(n) <= * n", 9, "a value should"),
            ("p(n) é 3", 6, "should end here"),
        ] {
            // The last case: a word where the comparison should be.
            let text = text.to_string();
            match parse(&text) {
                Err(fault) if text.contains('é') => assert_eq!(fault.column(), 6),
                Err(fault) => {
                    assert!(fault.message.contains(message), "{text}: {}", fault.message);
                    assert_eq!(fault.column(), column, "{text}: {fault}");
                    assert!(fault.to_string().contains("help"), "{text}");
                }
                Ok(claim) => panic!("{text}: {claim:?}"),
            }
        }
        assert!(parse(&"(".repeat(5000)).is_err());
        assert!(parse(&"-".repeat(9000)).is_err());
    }
}
