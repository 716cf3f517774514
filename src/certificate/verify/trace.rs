//! Following one orbit, side by side, in exact numbers.

use super::plane::{Plane, Point, cross, minus};
use crate::number::{Real, Sign};
use rug::Rational;

/// The word of `letters` letters of the orbit that starts at a fraction of a side in a direction; `None` when the start is
/// not inside the side, does not point into the table, or the orbit meets a corner before.
pub fn word(
    plane: &Plane,
    side: usize,
    fraction: &Rational,
    aim: &Point,
    letters: usize,
) -> Option<Vec<usize>> {
    if side >= plane.corners.len() || *fraction <= 0 || *fraction >= 1 {
        return None;
    }
    let along = minus(&plane.corners[plane.next[side]], &plane.corners[side]);
    if cross(&along, aim).sign() != Sign::Positive {
        return None;
    }
    let fraction = Real::from(fraction.clone());
    let start = &plane.corners[side];
    let mut point = [
        &start[0] + &(&along[0] * &fraction),
        &start[1] + &(&along[1] * &fraction),
    ];
    let mut aim = aim.clone();
    let mut side = side;
    let mut word = vec![plane.letter[side]];
    while word.len() < letters {
        let (hit, distance) = next_hit(plane, side, &point, &aim)?;
        point = [
            &point[0] + &(&aim[0] * &distance),
            &point[1] + &(&aim[1] * &distance),
        ];
        aim = plane.reflect(&aim, hit);
        side = hit;
        word.push(plane.letter[hit]);
    }
    Some(word)
}

/// The side that is hit next, and the distance in lengths of the aim; `None` when a corner comes first.
fn next_hit(plane: &Plane, from: usize, point: &Point, aim: &Point) -> Option<(usize, Real)> {
    let offsets: Vec<Sign> = plane
        .corners
        .iter()
        .map(|corner| cross(aim, &minus(corner, point)).sign())
        .collect();
    let mut nearest: Option<(usize, Real)> = None;
    for side in (0..plane.corners.len()).filter(|side| *side != from) {
        let (first, second) = (offsets[side], offsets[plane.next[side]]);
        // Leaving the table has the first corner of the side on the right and the second on the left.
        if first != Sign::Negative || second != Sign::Positive {
            continue;
        }
        let along = minus(&plane.corners[plane.next[side]], &plane.corners[side]);
        let distance = cross(&minus(&plane.corners[side], point), &along)
            .checked_div(&cross(aim, &along))
            .expect("the side is crossed");
        if distance.sign() == Sign::Positive
            && nearest.as_ref().is_none_or(|(_, least)| distance < *least)
        {
            nearest = Some((side, distance));
        }
    }
    let (side, distance) = nearest?;
    let length = plane.square(aim);
    for (corner, offset) in plane.corners.iter().zip(&offsets) {
        if *offset == Sign::Zero {
            let at = plane.dot(aim, &minus(corner, point));
            if at.sign() == Sign::Positive && at <= &distance * &length {
                return None;
            }
        }
    }
    Some((side, distance))
}
