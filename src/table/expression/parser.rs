//! From tokens to a tree.
//!
//! Recursive descent. Sums and products keep all their terms in one node, so the depth of the tree is
//! bounded by the nesting of the text, which is checked; neither parsing nor evaluating nor dropping a
//! tree can exhaust the stack.

use super::lexer::{Token, tokens};
use super::{DEEPEST_NESTING, ExpressionFault};
use crate::number::effort::charge;
use rug::Rational;
use std::ops::Range;

/// The cost of reading one byte.
const READING_STEP: u64 = 100;

/// A part of an expression and its place.
#[derive(Clone, Debug)]
pub(super) struct Node {
    pub(super) span: Range<usize>,
    pub(super) kind: Kind,
}

/// What a node is.
#[derive(Clone, Debug)]
pub(super) enum Kind {
    Number(Rational),
    Name(String),
    /// Terms; true for those that are subtracted.
    Sum(Vec<(bool, Node)>),
    /// Factors; true for those that are divided by.
    Product(Vec<(bool, Node)>),
    Negated(Box<Node>),
    Power(Box<Node>, Box<Node>),
    Call {
        name: String,
        name_span: Range<usize>,
        arguments: Vec<Node>,
    },
}

/// The tree of an expression.
pub(super) fn parse(text: &str) -> Result<Node, ExpressionFault> {
    charge(READING_STEP * text.len() as u64);
    let mut parser = Parser {
        tokens: tokens(text)?,
        next: 0,
        end: text.len(),
        depth: 0,
    };
    if parser.tokens.is_empty() {
        let help = "write a number, such as `3/4` or `sqrt(2)`";
        return Err(ExpressionFault::new(
            &(0..text.len()),
            "the expression is empty",
            help,
        ));
    }
    let tree = parser.sum()?;
    match parser.tokens.get(parser.next) {
        None => Ok(tree),
        Some((token, span)) => Err(left_over(token, span)),
    }
}

fn left_over(token: &Token, span: &Range<usize>) -> ExpressionFault {
    match token {
        Token::Mark(')') => ExpressionFault::new(
            span,
            "this `)` closes nothing",
            "remove it, or open a parenthesis before",
        ),
        Token::Mark(',') => ExpressionFault::new(
            span,
            "unexpected `,`",
            "write a decimal point for decimals, and each number as an expression of its own",
        ),
        _ => ExpressionFault::new(
            span,
            "an operator is missing here",
            "write `*` for a product, such as `2*pi`",
        ),
    }
}

struct Parser {
    tokens: Vec<(Token, Range<usize>)>,
    next: usize,
    end: usize,
    depth: usize,
}

impl Parser {
    fn mark(&self) -> Option<char> {
        match self.tokens.get(self.next) {
            Some((Token::Mark(c), _)) => Some(*c),
            _ => None,
        }
    }

    fn here(&self) -> Range<usize> {
        self.tokens
            .get(self.next)
            .map_or(self.end..self.end, |(_, span)| span.clone())
    }

    /// Runs a rule one level deeper.
    fn deeper<T>(
        &mut self,
        rule: impl FnOnce(&mut Parser) -> Result<T, ExpressionFault>,
    ) -> Result<T, ExpressionFault> {
        if self.depth == DEEPEST_NESTING {
            return Err(ExpressionFault::new(
                &self.here(),
                format!("the expression is nested deeper than {DEEPEST_NESTING} levels"),
                "simplify it",
            ));
        }
        self.depth += 1;
        let result = rule(self);
        self.depth -= 1;
        result
    }

    /// Operands joined by one of two marks; the second mark sets the flag.
    fn chain(
        &mut self,
        marks: [char; 2],
        operand: fn(&mut Parser) -> Result<Node, ExpressionFault>,
        join: fn(Vec<(bool, Node)>) -> Kind,
    ) -> Result<Node, ExpressionFault> {
        let first = operand(self)?;
        let start = first.span.start;
        let mut parts = vec![(false, first)];
        while let Some(mark) = self.mark().filter(|c| marks.contains(c)) {
            self.next += 1;
            parts.push((mark == marks[1], operand(self)?));
        }
        if parts.len() == 1 {
            return Ok(parts.pop().expect("one part").1);
        }
        let end = parts.last().expect("nonempty").1.span.end;
        Ok(Node {
            span: start..end,
            kind: join(parts),
        })
    }

    fn sum(&mut self) -> Result<Node, ExpressionFault> {
        self.chain(['+', '-'], Parser::product, Kind::Sum)
    }

    fn product(&mut self) -> Result<Node, ExpressionFault> {
        self.chain(['*', '/'], Parser::signed, Kind::Product)
    }

    fn signed(&mut self) -> Result<Node, ExpressionFault> {
        let start = self.here().start;
        match self.mark() {
            Some('-') => {
                self.next += 1;
                let inner = self.deeper(Parser::signed)?;
                Ok(Node {
                    span: start..inner.span.end,
                    kind: Kind::Negated(Box::new(inner)),
                })
            }
            Some('+') => {
                self.next += 1;
                self.deeper(Parser::signed)
            }
            _ => self.power(),
        }
    }

    fn power(&mut self) -> Result<Node, ExpressionFault> {
        let base = self.atom()?;
        if self.mark() != Some('^') {
            return Ok(base);
        }
        self.next += 1;
        let exponent = self.deeper(Parser::signed)?;
        Ok(Node {
            span: base.span.start..exponent.span.end,
            kind: Kind::Power(Box::new(base), Box::new(exponent)),
        })
    }

    fn atom(&mut self) -> Result<Node, ExpressionFault> {
        let Some((token, span)) = self.tokens.get(self.next).cloned() else {
            return Err(ExpressionFault::new(
                &(self.end..self.end),
                "the expression ends too early",
                "write a number here",
            ));
        };
        self.next += 1;
        let kind = match token {
            Token::Number(value) => Kind::Number(value),
            Token::Name(name) if self.mark() == Some('(') => return self.call(name, span),
            Token::Name(name) => Kind::Name(name),
            Token::Mark('(') => {
                self.next -= 1;
                return self.parenthesised();
            }
            Token::Mark(c) => {
                let message = format!("a number is missing before `{c}`");
                return Err(ExpressionFault::new(&span, message, "write a number here"));
            }
        };
        Ok(Node { span, kind })
    }

    fn parenthesised(&mut self) -> Result<Node, ExpressionFault> {
        let open = self.here();
        self.next += 1;
        let inner = self.deeper(Parser::sum)?;
        let close = self.close(&open)?;
        Ok(Node {
            span: open.start..close,
            kind: inner.kind,
        })
    }

    fn call(&mut self, name: String, name_span: Range<usize>) -> Result<Node, ExpressionFault> {
        let open = self.here();
        self.next += 1;
        let mut arguments = vec![self.deeper(Parser::sum)?];
        while self.mark() == Some(',') {
            self.next += 1;
            arguments.push(self.deeper(Parser::sum)?);
        }
        let close = self.close(&open)?;
        Ok(Node {
            span: name_span.start..close,
            kind: Kind::Call {
                name,
                name_span,
                arguments,
            },
        })
    }

    /// Expects the `)` of a parenthesis; returns where it ends.
    fn close(&mut self, open: &Range<usize>) -> Result<usize, ExpressionFault> {
        match self.tokens.get(self.next) {
            Some((Token::Mark(')'), span)) => {
                self.next += 1;
                Ok(span.end)
            }
            None => Err(ExpressionFault::new(
                open,
                "this `(` is never closed",
                "add a `)`",
            )),
            Some((token, span)) => Err(left_over(token, span)),
        }
    }
}
