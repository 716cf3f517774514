//! Collinear corner images that a symmetry proves collinear.
//!
//! Let the angle at corner C be π/(2m). The 2m reflections of a straight line that passes close to an image
//! of C compose to the half-turn about that image. So an orbit that runs into C would come back on its own
//! path, and in the unfolding everything before the image Q of C appears again behind it, turned by π about Q:
//! an image P of a corner before Q has its counterpart R = 2Q − P of the same corner behind, and P, Q, R are collinear. In
//! tables with such a corner and an infinite reflection group (a right triangle, say) nearly all exact
//! zeros are of this kind.
//!
//! **What is decided**: whether the image V lies on the line through the images P and Q, all named by (crossings,
//! corner) on one path, by a chain of half-turns. Poses along the path are pose_n = R_{s₁} ∘ … ∘ R_{s_n}. Suppose
//! the 2m crossings round index c are exactly those of the two sides at C, and beyond these the path is a palindrome about
//! c out to crossing i, that is s_{c−j} = s_{c+1+j} for m ≤ j < c − i. Then pose_{2c−i} = h ∘ pose_i with h the half-turn about the image (c, C),
//! because x·ρ·x⁻¹, with x the product of the reflections from i up to those 2m crossings and ρ the half-turn about C, is the
//! half-turn about x(C). So if V is (2c − i, corner of T) for T = (i, its corner) in {P, Q}, then V = 2·(c, C) − T, and V
//! is on the line as soon as (c, C) is: because it is P or Q, or by the same argument again, with fewer
//! crossings. That reaches every point of a line through several images of C, which then repeats for ever.
//!
//! The half-turn about C is the same product in either order of the two sides, so a whole block of 2m crossings at
//! any such corner counts as one symbol in the palindrome.
//!
//! A name is not unique: crossing a side at a corner leaves its image where it is. Names are compared up to
//! such crossings.
//!
//! A positive answer is a proof. A negative one says nothing. Cost: a bounded number of passes over the path.

use super::exact_path::ImageName;
use super::symmetry::common_corner;
use crate::table::facts::{Angle, angle};
use crate::table::{CornerId, SideId, Table};

/// Centres that one proof may argue about.
const MOST_TRIED: usize = 12;

/// Points of a line that are kept to argue from.
const MOST_KNOWN: usize = 6;

/// The corners of a table whose angle is π/(2m), by corner: m.
#[derive(Clone, Debug)]
pub struct HalfTurns {
    half_orders: Vec<Option<usize>>,
    /// The side that ends at each corner: corners of holes follow each other on their own rings.
    before: Vec<usize>,
}

/// What a crossing counts as in a palindrome beside its side.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Symbol {
    /// Itself only.
    Crossing,
    /// One of the whole block of crossings round an image of a corner.
    Block {
        corner: CornerId,
        /// Place in the block, from 0.
        offset: usize,
        /// 2m.
        length: usize,
    },
}

/// A path with its symbols.
#[derive(Clone, Copy)]
pub(super) struct Path<'a> {
    pub(super) sides: &'a [SideId],
    pub(super) symbols: &'a [Symbol],
}

impl Path<'_> {
    /// True when the crossings i … j − 1 read backward are, up to the order inside whole blocks, the crossings
    /// from … from + (j − i) − 1.
    pub(super) fn mirrors(&self, i: usize, j: usize, from: usize) -> bool {
        let end = from + (j - i);
        (0..j - i).all(|step| {
            let (l, r) = (j - 1 - step, from + step);
            if self.sides[l] == self.sides[r] {
                return true;
            }
            // Equal blocks at mirrored places, both whole inside the ranges: every crossing of them passes here.
            match (self.symbols[l], self.symbols[r]) {
                (
                    Symbol::Block {
                        corner,
                        offset,
                        length,
                    },
                    Symbol::Block {
                        corner: other,
                        offset: place,
                        ..
                    },
                ) => {
                    corner == other
                        && offset + place + 1 == length
                        && l >= i + offset
                        && r + (length - place) <= end
                }
                _ => false,
            }
        })
    }
}

impl HalfTurns {
    /// Looks at all angles of a table.
    pub fn new(table: &Table) -> HalfTurns {
        let half_order = |corner| match angle(table, corner) {
            Angle::RationalMultipleOfPi(q) if *q.numer() == 1 && q.denom().is_even() => {
                Some((q.denom().to_usize()?) / 2)
            }
            _ => None,
        };
        HalfTurns {
            half_orders: (0..table.sides()).map(half_order).collect(),
            before: (0..table.sides())
                .map(|corner| table.before(corner))
                .collect(),
        }
    }

    /// True when `v` is proved to be on the line through the two images by a chain of half-turns.
    pub(super) fn prove(&self, path: Path<'_>, line: [ImageName; 2], v: ImageName) -> bool {
        if self.half_orders.iter().all(Option::is_none) {
            return false;
        }
        let mut known = line.to_vec();
        // The centre of a half-turn between two points of the line is a third one.
        let mut pair = (0, 1);
        while pair.1 < known.len() && known.len() < MOST_KNOWN {
            let centre = self.centre_between(path, known[pair.0], known[pair.1]);
            known.extend(
                centre.filter(|c| !known.iter().any(|k| self.same_point(path.sides, *k, *c))),
            );
            pair = if pair.0 + 1 < pair.1 {
                (pair.0 + 1, pair.1)
            } else {
                (0, pair.1 + 1)
            };
        }
        self.chain(path, &known, v, &mut Vec::new())
    }

    /// For each crossing whether it belongs to a whole block of 2m crossings round one corner.
    pub(super) fn symbols(&self, path: &[SideId]) -> Vec<Symbol> {
        let mut symbols = vec![Symbol::Crossing; path.len()];
        let mut at = 0;
        while at + 1 < path.len() {
            let corner = common_corner(&self.before, path[at], path[at + 1]);
            let image = corner.map(|corner| ImageName {
                crossings: at as u32,
                corner,
            });
            let block = image.and_then(|image| {
                let m = self.half_orders[image.corner.0 as usize]?;
                (self.run(path, image) == (at, at + 2 * m)).then_some((image.corner, at + 2 * m))
            });
            match block {
                Some((corner, end)) => {
                    let length = end - at;
                    for (offset, symbol) in symbols[at..end].iter_mut().enumerate() {
                        *symbol = Symbol::Block {
                            corner,
                            offset,
                            length,
                        };
                    }
                    at = end;
                }
                None => at += 1,
            }
        }
        symbols
    }

    /// `tried` holds the centres that were argued about before; each is argued about once.
    fn chain(
        &self,
        path: Path<'_>,
        known: &[ImageName],
        v: ImageName,
        tried: &mut Vec<ImageName>,
    ) -> bool {
        known.iter().any(|target| {
            let Some(centre) = self.centre_between(path, *target, v) else {
                return false;
            };
            if known
                .iter()
                .any(|on_line| self.same_point(path.sides, *on_line, centre))
            {
                return true;
            }
            if tried.len() == MOST_TRIED || tried.contains(&centre) {
                return false;
            }
            tried.push(centre);
            self.chain(path, known, centre, tried)
        })
    }

    /// The image about which a half-turn takes the one image to the other.
    fn centre_between(&self, path: Path<'_>, a: ImageName, b: ImageName) -> Option<ImageName> {
        if a.corner != b.corner {
            return None;
        }
        let (a, b) = if a.crossings <= b.crossings {
            (a, b)
        } else {
            (b, a)
        };
        let (starts, ends) = (self.run(path.sides, a), self.run(path.sides, b));
        // Twice the centre is the sum of two indices at which the images are a and b.
        let sums = starts.0 + ends.0..=starts.1 + ends.1;
        sums.filter(|sum| sum.is_multiple_of(2))
            .find_map(|sum| self.centre(path, sum / 2, starts, ends))
    }

    /// The image about which the path is a palindrome round index c, far enough to take an index in `starts` to one
    /// in `ends`.
    fn centre(
        &self,
        path: Path<'_>,
        c: usize,
        starts: (usize, usize),
        ends: (usize, usize),
    ) -> Option<ImageName> {
        let length = path.sides.len();
        if c == 0 || c >= length {
            return None;
        }
        let corner = common_corner(&self.before, path.sides[c - 1], path.sides[c])?;
        let m = self.half_orders[corner.0 as usize]?;
        let image = ImageName {
            crossings: c as u32,
            corner,
        };
        if self.run(path.sides, image) != (c.checked_sub(m)?, c + m) {
            return None;
        }
        // The index nearest to the centre that serves both T and V.
        let i = starts.1.min((2 * c).saturating_sub(ends.0));
        let mirror = 2 * c - i;
        let fits =
            starts.0 <= i && i <= c - m && mirror <= length && ends.0 <= mirror && mirror <= ends.1;
        (fits && path.mirrors(i, c - m, c + m)).then_some(image)
    }

    fn same_point(&self, path: &[SideId], a: ImageName, b: ImageName) -> bool {
        let (first, last) = self.run(path, b);
        a.corner == b.corner && (first..=last).contains(&(a.crossings as usize))
    }

    /// The copies first ..= last in which the image is the same point: all crossings between them are of the
    /// two sides at its corner.
    pub(super) fn run(&self, path: &[SideId], image: ImageName) -> (usize, usize) {
        let at = (image.crossings as usize).min(path.len());
        let here = |side: &SideId| self.is_side_at(*side, image.corner);
        let before = path[..at].iter().rev().take_while(|s| here(s)).count();
        let after = path[at..].iter().take_while(|s| here(s)).count();
        (at - before, at + after)
    }

    fn is_side_at(&self, side: SideId, corner: CornerId) -> bool {
        let (side, corner) = (side.0 as usize, corner.0 as usize);
        side == corner || side == self.before[corner]
    }
}
