//! A statement of a verdict, and how firmly it stands.

use super::theorem::Theorem;
use serde::Serialize;

/// How firmly a statement stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "snake_case")]
pub enum Standing {
    /// By a theorem whose hypotheses were checked, or by definition.
    Proved,
    /// Exact up to the length of the study.
    Computed,
    /// Suggested by figures.
    Trend,
    /// Left open.
    NotDecided,
    /// False at some n.
    Violated,
}

impl Standing {
    /// For people.
    pub fn label(self) -> &'static str {
        match self {
            Standing::Proved => "proved",
            Standing::Computed => "computed",
            Standing::Trend => "trend",
            Standing::NotDecided => "not decided",
            Standing::Violated => "violated",
        }
    }
}

/// One statement with its standing.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Statement {
    /// A fixed name for scripts.
    pub id: &'static str,
    /// The statement.
    pub claim: String,
    /// How firmly it, or its negation, stands.
    pub standing: Standing,
    /// True when the statement is said to hold, false when its negation is; null when neither.
    pub holds: Option<bool>,
    /// For a violated statement the n at which it fails; for a computed one the last n.
    pub at: Option<usize>,
    /// The theorem and its checked hypotheses, or the figures, or what is missing.
    pub grounds: String,
    /// For a proved statement: by what, and how each hypothesis was checked. Null for every other.
    pub theorem: Option<Theorem>,
    /// For a trend and what is not decided: what no finite data can tell, in one sentence.
    pub cannot_decide: Option<&'static str>,
}

impl Statement {
    /// The same standing for the negation.
    pub(super) fn negated(self) -> Statement {
        Statement {
            holds: Some(false),
            ..self
        }
    }

    /// The statement for people, with its negation in words.
    pub fn sentence(&self) -> String {
        match (self.standing, self.holds) {
            (Standing::Proved, Some(false)) => format!("{} — does not hold", self.claim),
            (Standing::Trend, Some(false)) => format!("{} — seems not to hold", self.claim),
            _ => self.claim.clone(),
        }
    }

    /// How far a computed or violated statement reaches: ` to n = 60`, ` at n = 7`, or nothing.
    pub fn reach(&self) -> String {
        match (self.standing, self.at) {
            (Standing::Computed, Some(n)) => format!(" to n = {n}"),
            (Standing::Violated, Some(n)) => format!(" at n = {n}"),
            _ => String::new(),
        }
    }
}
