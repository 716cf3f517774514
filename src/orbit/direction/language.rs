//! The words of a direction, level by level.
//!
//! A word of length n is a set of parts of cells that take the same n − 1 branches one after the other. Each level
//! cuts the parts of the level before at the branches of the cells they are in. The number of parts grows
//! linearly with n, since each corner adds at most one cut a level; so N levels cost O(N²) additions.

use super::flow::{Flow, Height, MOST_ADDITIONS};
use crate::language::tree::LanguageFault;
use crate::language::{Language, WordId};
use crate::run::{Control, Stopped};
use std::cmp::Ordering;
use thiserror::Error;

/// Why a direction's language was not found.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum DirectionFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// Longer words than heights can be followed for.
    #[error("words of {length} letters are too long, at most {MOST_ADDITIONS} can be followed")]
    TooLong {
        /// The length.
        length: usize,
    },
    /// The levels are no language; that would be a mistake in the flow.
    #[error(transparent)]
    Language(#[from] LanguageFault),
}

/// A part of a cell, where the flow has brought it.
struct Part {
    cell: u32,
    low: Height,
    high: Height,
}

/// All words up to a length.
///
/// Memory: the parts of one level, and the language.
///
/// # Errors
/// When the control asks to stop, and for lengths past [`MOST_ADDITIONS`].
pub fn direction_language(
    flow: &Flow,
    longest: usize,
    control: &Control,
) -> Result<Language, DirectionFault> {
    if longest > MOST_ADDITIONS {
        return Err(DirectionFault::TooLong { length: longest });
    }
    let k = flow.table().letters().len();
    let mut levels: Vec<(Vec<u8>, Vec<WordId>)> = Vec::new();
    // The parts of the present level, word by word.
    let mut words: Vec<Vec<Part>> = Vec::new();
    if longest > 0 {
        let mut by_letter: Vec<Vec<Part>> = (0..k).map(|_| Vec::new()).collect();
        for (index, cell) in flow.cells().iter().enumerate() {
            by_letter[letter_of(flow, index)].push(Part {
                cell: index as u32,
                low: cell.low.clone(),
                high: cell.high.clone(),
            });
        }
        let mut letters = Vec::new();
        for (letter, parts) in by_letter.into_iter().enumerate() {
            if !parts.is_empty() {
                letters.push(letter as u8);
                words.push(parts);
            }
        }
        let parents = vec![0; letters.len()];
        levels.push((letters, parents));
    }
    for _ in 1..longest {
        let mut longer = Vec::with_capacity(words.len() + k);
        let (mut letters, mut parents) = (Vec::new(), Vec::new());
        let mut steps = 0;
        for (parent, parts) in words.iter().enumerate() {
            let mut by_letter: Vec<Vec<Part>> = (0..k).map(|_| Vec::new()).collect();
            for part in parts {
                steps += 1;
                follow(flow, part, &mut by_letter);
            }
            for (letter, parts) in by_letter.into_iter().enumerate() {
                if !parts.is_empty() {
                    letters.push(letter as u8);
                    parents.push(parent as WordId);
                    longer.push(parts);
                }
            }
        }
        control.tick(steps)?;
        levels.push((letters, parents));
        words = longer;
    }
    Ok(Language::from_levels(k, levels)?)
}

/// Takes a part through the branches of its cell.
fn follow(flow: &Flow, part: &Part, by_letter: &mut [Vec<Part>]) {
    let range = flow.cells()[part.cell as usize].branches.clone();
    for branch in &flow.branches()[range] {
        if flow.order(&branch.high, &part.low) != Ordering::Greater {
            continue;
        }
        if flow.order(&branch.low, &part.high) != Ordering::Less {
            break;
        }
        let low = match flow.order(&branch.low, &part.low) {
            Ordering::Greater => &branch.low,
            _ => &part.low,
        };
        let high = match flow.order(&branch.high, &part.high) {
            Ordering::Less => &branch.high,
            _ => &part.high,
        };
        let letter = letter_of(flow, branch.target);
        by_letter[letter].push(Part {
            cell: branch.target as u32,
            low: low.plus(&branch.shift),
            high: high.plus(&branch.shift),
        });
    }
}

fn letter_of(flow: &Flow, cell: usize) -> usize {
    flow.table().letter_id(flow.cells()[cell].side).0 as usize
}
