//! Faults of the polygon in the words of the file.

use super::rings::{WrittenRing, of_ring};
use super::source::Source;
use crate::table::TableFault;
use crate::table::diagnostic::Diagnostic;
use std::ops::Range;

/// Where the parts of a table stand in its file.
pub(super) struct Layout<'a> {
    /// The rings, the outline first, with letters.
    pub(super) rings: &'a [WrittenRing],
    /// The span of the plane form, if the file has one.
    pub(super) form: Option<Range<usize>>,
}

/// A corner, or the side after it, on its ring.
#[derive(Clone, Copy, PartialEq, Eq)]
struct Place {
    ring: usize,
    index: usize,
}

impl Layout<'_> {
    /// The place of a corner or side that is numbered through.
    fn place(&self, number: usize) -> Place {
        let mut index = number;
        for (ring, written) in self.rings.iter().enumerate() {
            if index < written.corners.len() {
                return Place { ring, index };
            }
            index -= written.corners.len();
        }
        unreachable!("a fault names corners of the file")
    }

    fn ring(&self, place: Place) -> &WrittenRing {
        &self.rings[place.ring]
    }

    fn span(&self, place: Place) -> Range<usize> {
        self.ring(place).spans[place.index].clone()
    }

    fn letter(&self, place: Place) -> char {
        let letters = self.ring(place).letters.as_ref();
        letters.expect("letters are complete")[place.index]
    }

    /// The corner at the other end of a side.
    fn end(&self, side: Place) -> Place {
        let count = self.ring(side).corners.len();
        Place {
            index: (side.index + 1) % count,
            ..side
        }
    }

    /// "side b, from corner 1 to corner 2", with the hole if it is one.
    fn side(&self, side: Place) -> String {
        format!(
            "side {}, from corner {} to corner {}{}",
            self.letter(side),
            side.index,
            self.end(side).index,
            of_ring(side.ring)
        )
    }
}

/// "corner 2", with the hole if it is in one.
fn corner_name(place: Place) -> String {
    format!("corner {}{}", place.index, of_ring(place.ring))
}

/// The diagnostic for a fault that [`crate::table::validity`] found.
pub(super) fn diagnostic(
    source: Source,
    layout: &Layout<'_>,
    fault: &TableFault,
) -> Box<Diagnostic> {
    let counting = "(counting from 0)";
    let outline = &layout.rings[0].all;
    let hole_span = |hole: usize| layout.rings[hole + 1].all.clone();
    match *fault {
        TableFault::TooFewCorners { .. } | TableFault::TooManyCorners { .. } => {
            source.diagnostic(outline, fault.to_string(), "write one pair for each corner")
        }
        TableFault::HoleTooFewCorners { hole, .. } => source.diagnostic(
            &hole_span(hole),
            fault.to_string(),
            "write one pair for each corner",
        ),
        TableFault::ZeroArea => source.diagnostic(
            outline,
            fault.to_string(),
            "move at least one corner off the line through the others",
        ),
        TableFault::HoleZeroArea { hole } => source.diagnostic(
            &hole_span(hole),
            format!("hole {hole} {counting} has zero area: all its corners lie on one line"),
            "move at least one corner off the line through the others",
        ),
        TableFault::HoleOutside { hole } => source.diagnostic(
            &hole_span(hole),
            format!("hole {hole} {counting} lies outside the outline of the table"),
            "move the hole into the table; all its corners must lie inside the outline",
        ),
        TableFault::HoleInHole { inner, outer } => {
            let mut found = source.diagnostic(
                &hole_span(inner),
                format!("hole {inner} lies inside hole {outer} {counting}"),
                "remove one of the two: what lies inside a hole is not part of the table",
            );
            found
                .context
                .push((hole_span(outer), format!("hole {outer}")));
            found
        }
        TableFault::FormNotPositive { ref value } => source.diagnostic(
            layout.form.as_ref().unwrap_or(outline),
            format!("the plane form must be positive, it is {value}"),
            "write a positive number, such as `form = \"3\"`",
        ),
        TableFault::LetterCount { .. } => {
            source.diagnostic(outline, fault.to_string(), "write one letter for each side")
        }
        TableFault::RepeatedCorner { first, second } => {
            let (first, second) = (layout.place(first), layout.place(second));
            let names = if first.ring == second.ring {
                format!(
                    "corners {} and {}{}",
                    first.index,
                    second.index,
                    of_ring(first.ring)
                )
            } else {
                format!("{} and {}", corner_name(first), corner_name(second))
            };
            let mut found = source.diagnostic(
                &layout.span(second),
                format!("{names} {counting} are the same point"),
                repeated_help(layout, first, second),
            );
            found.label = corner_name(second);
            found.context.push((layout.span(first), corner_name(first)));
            found
        }
        TableFault::CornerOnSide { corner, side } => {
            let (corner, side) = (layout.place(corner), layout.place(side));
            let mut found = source.diagnostic(
                &layout.span(corner),
                format!(
                    "{} {counting} lies on {}",
                    corner_name(corner),
                    layout.side(side)
                ),
                "move the corner off that side: the boundary must not touch itself",
            );
            found.label = corner_name(corner);
            add_corners(&mut found, layout, &[side, layout.end(side)], corner);
            found
        }
        TableFault::SidesCross { first, second } => {
            let (first, second) = (layout.place(first), layout.place(second));
            let help = if first.ring == second.ring {
                "write the corners in the order in which they follow each other round the table"
            } else {
                "move the hole: it must lie inside the outline and apart from the other holes"
            };
            let mut found = source.diagnostic(
                &layout.span(second),
                format!(
                    "{}, and {} {counting}, cross",
                    layout.side(first),
                    layout.side(second)
                ),
                help,
            );
            found.label = corner_name(second);
            let others = [first, layout.end(first), second, layout.end(second)];
            add_corners(&mut found, layout, &others, second);
            found
        }
        TableFault::StraightCorner { corner } => {
            let corner = layout.place(corner);
            let name = corner_name(corner);
            let written = source.text.get(layout.span(corner)).unwrap_or_default();
            let mut help = format!("remove {name}, {written}: the table stays the same");
            if !layout.ring(corner).letter_spans.is_empty() {
                help += &format!(
                    "; and remove a letter, `{}`, from `sides`",
                    layout.letter(corner)
                );
            }
            let message = format!(
                "{name} {counting} is straight: it lies on the segment between its neighbours"
            );
            let mut found = source.diagnostic(&layout.span(corner), message, help);
            found.label = format!("{name} has an angle of 180 degrees");
            found
        }
        TableFault::FoldedCorner { corner } => {
            let corner = layout.place(corner);
            let k = layout.ring(corner).corners.len();
            let before = Place {
                index: (corner.index + k - 1) % k,
                ..corner
            };
            let message = format!(
                "at {} {counting} the boundary turns back: {}, runs along side {}",
                corner_name(corner),
                layout.side(corner),
                layout.letter(before),
            );
            let help = "move the corner, or remove it: its two sides must not lie on each other";
            let mut found = source.diagnostic(&layout.span(corner), message, help);
            found.label = corner_name(corner);
            found
        }
    }
}

fn repeated_help(layout: &Layout<'_>, first: Place, second: Place) -> String {
    if first.ring != second.ring {
        return "move the hole: it must not touch the outline or another hole".into();
    }
    if first.index == 0 && second.index + 1 == layout.ring(second).corners.len() {
        return "remove the last corner: the table closes by itself".into();
    }
    if second.index == first.index + 1 {
        let second = second.index;
        return format!("remove one of the two: corner {second} repeats the one before");
    }
    "move one of the two: the boundary must not touch itself".into()
}

/// Labels other corners that belong to the fault, each once.
fn add_corners(found: &mut Diagnostic, layout: &Layout<'_>, corners: &[Place], except: Place) {
    let mut seen = vec![except];
    for &corner in corners {
        if !seen.contains(&corner) {
            seen.push(corner);
            found
                .context
                .push((layout.span(corner), corner_name(corner)));
        }
    }
}
