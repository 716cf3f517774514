//! Faults of the polygon in the words of the file.

use super::read::Source;
use crate::table::TableFault;
use crate::table::diagnostic::Diagnostic;
use std::ops::Range;

/// Where the parts of a table stand in its file.
pub(super) struct Layout {
    /// The span of each corner.
    pub(super) corners: Vec<Range<usize>>,
    /// The span of the whole shape.
    pub(super) all: Range<usize>,
    /// The span of the plane form, if the file has one.
    pub(super) form: Option<Range<usize>>,
    /// The letter of each side.
    pub(super) letters: Vec<char>,
    /// The span of each letter; empty when the file names none.
    pub(super) letter_spans: Vec<Range<usize>>,
}

impl Layout {
    /// "side b, from corner 1 to corner 2".
    fn side(&self, side: usize) -> String {
        let next = (side + 1) % self.corners.len();
        format!(
            "side {}, from corner {side} to corner {next}",
            self.letters[side]
        )
    }

    /// The corners at the two ends of a side.
    fn ends(&self, side: usize) -> [usize; 2] {
        [side, (side + 1) % self.corners.len()]
    }
}

/// The diagnostic for a fault that [`crate::table::validity`] found.
pub(super) fn diagnostic(source: Source, layout: &Layout, fault: &TableFault) -> Box<Diagnostic> {
    let counting = "(counting from 0)";
    let at = |corner: usize| layout.corners[corner].clone();
    match *fault {
        TableFault::TooFewCorners { .. } | TableFault::TooManyCorners { .. } => source.diagnostic(
            &layout.all,
            fault.to_string(),
            "write one pair for each corner",
        ),
        TableFault::ZeroArea => source.diagnostic(
            &layout.all,
            fault.to_string(),
            "move at least one corner off the line through the others",
        ),
        TableFault::FormNotPositive { ref value } => source.diagnostic(
            layout.form.as_ref().unwrap_or(&layout.all),
            format!("the plane form must be positive, it is {value}"),
            "write a positive number, such as `form = \"3\"`",
        ),
        TableFault::LetterCount { .. } => source.diagnostic(
            &layout.all,
            fault.to_string(),
            "write one letter for each side",
        ),
        TableFault::RepeatedLetter {
            first,
            second,
            letter,
        } => {
            let span = |side: usize| layout.letter_spans.get(side).unwrap_or(&layout.all).clone();
            let mut found = source.diagnostic(
                &span(second),
                format!("sides {first} and {second} have the same letter `{letter}`; repeated letters are not supported in this version"),
                "give every side a letter of its own",
            );
            found.context.push((span(first), "the same letter".into()));
            found
        }
        TableFault::RepeatedCorner { first, second } => {
            let mut found = source.diagnostic(
                &at(second),
                format!("corners {first} and {second} {counting} are the same point"),
                repeated_help(layout, first, second),
            );
            found.label = format!("corner {second}");
            found.context.push((at(first), format!("corner {first}")));
            found
        }
        TableFault::CornerOnSide { corner, side } => {
            let mut found = source.diagnostic(
                &at(corner),
                format!("corner {corner} {counting} lies on {}", layout.side(side)),
                "move the corner off that side: the boundary must not touch itself",
            );
            found.label = format!("corner {corner}");
            add_corners(&mut found, layout, &layout.ends(side), corner);
            found
        }
        TableFault::SidesCross { first, second } => {
            let mut found = source.diagnostic(
                &at(second),
                format!(
                    "{}, and {} {counting}, cross",
                    layout.side(first),
                    layout.side(second)
                ),
                "write the corners in the order in which they follow each other round the table",
            );
            found.label = format!("corner {second}");
            let mut others = layout.ends(first).to_vec();
            others.extend(layout.ends(second));
            add_corners(&mut found, layout, &others, second);
            found
        }
        TableFault::StraightCorner { corner } => {
            let written = source.text.get(at(corner)).unwrap_or_default();
            let mut help = format!("remove corner {corner}, {written}: the table stays the same");
            if !layout.letter_spans.is_empty() {
                help += &format!(
                    "; and remove a letter, `{}`, from `sides`",
                    layout.letters[corner]
                );
            }
            let message = format!(
                "corner {corner} {counting} is straight: it lies on the segment between its neighbours"
            );
            let mut found = source.diagnostic(&at(corner), message, help);
            found.label = format!("corner {corner} has an angle of 180 degrees");
            found
        }
        TableFault::FoldedCorner { corner } => {
            let k = layout.corners.len();
            let message = format!(
                "at corner {corner} {counting} the boundary turns back: {}, runs along side {}",
                layout.side(corner),
                layout.letters[(corner + k - 1) % k],
            );
            let help = "move the corner, or remove it: its two sides must not lie on each other";
            let mut found = source.diagnostic(&at(corner), message, help);
            found.label = format!("corner {corner}");
            found
        }
    }
}

fn repeated_help(layout: &Layout, first: usize, second: usize) -> String {
    if first == 0 && second + 1 == layout.corners.len() {
        return "remove the last corner: the table closes by itself".into();
    }
    if second == first + 1 {
        return format!("remove one of the two: corner {second} repeats the one before");
    }
    "move one of the two: the boundary must not touch itself".into()
}

/// Labels other corners that belong to the fault, each once.
fn add_corners(found: &mut Diagnostic, layout: &Layout, corners: &[usize], except: usize) {
    let mut seen = vec![except];
    for &corner in corners {
        if !seen.contains(&corner) {
            seen.push(corner);
            found
                .context
                .push((layout.corners[corner].clone(), format!("corner {corner}")));
        }
    }
}
