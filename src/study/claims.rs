//! Stated bounds in a verdict: what the counts say of them, for people and for scripts.

use super::statement::{Standing, Statement};
use super::theorem::cannot_decide;
use crate::complexity::claim::{Checked, Claim, Sequences, check};
use crate::complexity::counts::Counts;
use rug::Rational;
use serde::Serialize;

/// A claim and what the counts say of it.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ClaimRecord {
    /// The text of the claim.
    pub claim: String,
    /// `computed`, `violated` or `not_decided`. Never proved: counts are finite.
    pub standing: Standing,
    /// True, false, or null when it is not decided.
    pub holds: Option<bool>,
    /// The first n of its range.
    pub from: u64,
    /// The last n of its range; null when it has no end.
    pub to: Option<u64>,
    /// The last n up to which it was found true.
    pub checked_to: Option<u64>,
    /// True when the whole range was checked.
    pub whole_range: bool,
    /// Where it fails first.
    pub first_violation: Option<ViolationRecord>,
    /// In words.
    pub grounds: String,
}

/// Where a claim fails first: both sides of the comparison, exact and rounded.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ViolationRecord {
    /// The n.
    pub n: u64,
    /// The left side, an integer or a fraction.
    pub left: String,
    /// The right side.
    pub right: String,
    /// The left side, rounded.
    pub left_decimal: f64,
    /// The right side, rounded.
    pub right_decimal: f64,
}

fn shown(value: &Rational) -> String {
    match value.is_integer() {
        true => value.to_string(),
        false => format!("{value} ≈ {:.6}", value.to_f64()),
    }
}

/// Checks a claim on counts; `diagonals` when they were counted.
pub fn judge(claim: &Claim, counts: &Counts, diagonals: Option<&[u64]>) -> ClaimRecord {
    let sequences = Sequences {
        words: &counts.p,
        first: &counts.first_difference,
        second: &counts.second_difference,
        diagonals,
    };
    let mut record = ClaimRecord {
        claim: claim.text.clone(),
        standing: Standing::NotDecided,
        holds: None,
        from: claim.from,
        to: claim.to,
        checked_to: None,
        whole_range: false,
        first_violation: None,
        grounds: String::new(),
    };
    match check(claim, &sequences) {
        Checked::HoldsTo { last, whole } => {
            record.standing = Standing::Computed;
            record.holds = Some(true);
            record.checked_to = Some(last);
            record.whole_range = whole;
            let reach = if whole { ", its whole range" } else { "" };
            record.grounds = format!(
                "compared in rational arithmetic for {} ≤ n ≤ {last}{reach}",
                claim.from
            );
        }
        Checked::Fails(violation) => {
            record.standing = Standing::Violated;
            record.holds = Some(false);
            record.checked_to = violation.n.checked_sub(1).filter(|n| *n >= claim.from);
            record.grounds = format!(
                "first false at n = {}, where the left side is {} and the right side {}",
                violation.n,
                shown(&violation.left),
                shown(&violation.right)
            );
            record.first_violation = Some(ViolationRecord {
                n: violation.n,
                left: violation.left.to_string(),
                right: violation.right.to_string(),
                left_decimal: violation.left.to_f64(),
                right_decimal: violation.right.to_f64(),
            });
        }
        Checked::Undecided(why) => record.grounds = why,
    }
    record
}

impl ClaimRecord {
    /// As a statement of the verdict.
    pub fn statement(&self) -> Statement {
        let violated = self.first_violation.as_ref().map(|v| v.n);
        Statement {
            id: "claim",
            claim: self.claim.clone(),
            standing: self.standing,
            holds: self.holds,
            at: violated.or(self.checked_to).map(|n| n as usize),
            grounds: format!("a stated bound: {}", self.grounds),
            theorem: None,
            cannot_decide: match self.standing {
                Standing::NotDecided => cannot_decide("claim"),
                _ => None,
            },
        }
    }
}
