//! What the ratio p(n+1)/p(n) suggests about its limit.
//!
//! The excess s(n)/p(n) = p(n+1)/p(n) − 1 is compared over the last half of the orders and over the quarter before
//! it, by its largest values, so that a language that jumps again and again is not taken for one that settles between its jumps.

use crate::factor_graph::criterion::LineFigures;

/// What the figures suggest.
#[derive(Clone, Debug, PartialEq)]
pub enum RatioTrend {
    /// Towards the limit 1; the figures in words.
    Falls(String),
    /// Away from it: the excess comes back to the size that it had.
    Stays(String),
    /// Too few figures, or neither.
    Unclear,
}

/// Fewer orders than this suggest nothing.
const FEWEST_ORDERS: usize = 8;
/// An excess below this at the end is not called a jump: it would be below 3/n for n up to 60.
const SMALLEST_JUMP: f64 = 0.05;

/// Judges the ratio over the orders of a study, in order from 1.
///
/// Falls: the last excess is at most 3/4 of that in the middle, and the largest over the last half at most 9/10 of the
/// largest over the quarter before (a cubic p gives 1/2). Stays: the largest over the last half is more than 9/10 of that before and no
/// less than 0.05.
pub fn ratio_trend(line: &[LineFigures]) -> RatioTrend {
    let count = line.len();
    if count < FEWEST_ORDERS {
        return RatioTrend::Unclear;
    }
    let largest = |part: &[LineFigures]| {
        let jumps = part.iter().max_by(|a, b| a.growth.total_cmp(&b.growth));
        jumps
            .map(|f| (f.growth, f.order))
            .expect("a part is not empty")
    };
    let (before, _) = largest(&line[count / 4..count / 2]);
    let (late, at) = largest(&line[count / 2..]);
    let (half, last) = (&line[count / 2], &line[count - 1]);
    if last.growth <= 0.75 * half.growth && late <= 0.9 * before {
        return RatioTrend::Falls(format!(
            "p(n+1)/p(n) − 1 fell from {:.4} at n = {} to {:.4} at n = {}",
            half.growth, half.order, last.growth, last.order
        ));
    }
    if late > 0.9 * before && late >= SMALLEST_JUMP {
        return RatioTrend::Stays(format!(
            "p(n+1)/p(n) − 1 is {late:.4} at n = {at}, and its largest value over the quarter of the orders before n = {} is {before:.4}: it does not die out",
            half.order
        ));
    }
    RatioTrend::Unclear
}
