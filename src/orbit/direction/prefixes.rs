//! The words of all orbits that start in one direction, on any table.
//!
//! The parallel lines that enter the table through a side are an interval of moments; unfolding cuts it at the
//! moments of corner images. With an infinite reflection group these words are not closed under taking suffixes,
//! since after a bounce an orbit runs in another direction; so they are a tree and no language.
//!
//! Cost: one exact isometry and as many comparisons as the copy has triangles for each word.

use crate::number::Real;
use crate::run::{Control, Stopped};
use crate::table::{LetterId, SideId, Table, Vector};
use crate::unfold::isometry::side_reflections;
use crate::unfold::mesh::{Exit, GateId};
use crate::unfold::{Isometry, Mesh};

/// The words of one length that start in a direction, and how many there are of each length up to it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Prefixes {
    /// Entry n: how many words of length n, from 0.
    pub counts: Vec<u64>,
    /// The words of the greatest length, in the order of the letters.
    pub words: Vec<Vec<LetterId>>,
}

struct Walk<'a> {
    table: &'a Table,
    mesh: Mesh,
    corners: &'a [Vector],
    form: &'a Real,
    reflections: Vec<Isometry>,
    aim: &'a Vector,
    control: &'a Control,
    longest: usize,
    found: Prefixes,
}

/// Lines between two moments that have just entered a copy through a gate.
struct Band {
    pose: Isometry,
    gate: GateId,
    low: Real,
    high: Real,
}

/// All words up to a length of orbits that start in the direction of `aim` on some side.
///
/// # Errors
/// When the control asks to stop.
///
/// # Panics
/// If the aim is the zero vector.
pub fn prefixes(
    table: &Table,
    aim: &Vector,
    longest: usize,
    control: &Control,
) -> Result<Prefixes, Stopped> {
    assert!(!aim.is_zero(), "the zero vector has no direction");
    let mut walk = Walk {
        table,
        mesh: Mesh::new(table),
        corners: table.corners(),
        form: table.form(),
        reflections: side_reflections(table),
        aim,
        control,
        longest,
        found: Prefixes {
            counts: vec![0; longest + 1],
            words: Vec::new(),
        },
    };
    walk.found.counts[0] = 1;
    if longest == 0 {
        walk.found.words.push(Vec::new());
        return Ok(walk.found);
    }
    let mut first: Vec<(LetterId, Band)> = Vec::new();
    for side in 0..table.sides() {
        let (low, high) = (
            aim.cross(table.corner(table.after(side))),
            aim.cross(table.corner(side)),
        );
        if low < high {
            let side = SideId(side as u8);
            let band = Band {
                pose: Isometry::identity(),
                gate: walk.mesh.gate_of_side(side),
                low,
                high,
            };
            first.push((table.letter_id(side), band));
        }
    }
    walk.follow(first)?;
    Ok(walk.found)
}

/// Bands by letter, the letters in order.
fn grouped(mut bands: Vec<(LetterId, Band)>) -> Vec<(LetterId, Vec<Band>)> {
    bands.sort_by_key(|(letter, _)| *letter);
    let mut groups: Vec<(LetterId, Vec<Band>)> = Vec::new();
    for (letter, band) in bands {
        match groups.last_mut() {
            Some((last, group)) if *last == letter => group.push(band),
            _ => groups.push((letter, vec![band])),
        }
    }
    groups
}

impl Walk<'_> {
    /// Depth first, on a stack of its own: words may be long. A word with holes or shared letters may have
    /// several bands.
    fn follow(&mut self, first: Vec<(LetterId, Band)>) -> Result<(), Stopped> {
        let mut word: Vec<LetterId> = Vec::new();
        let mut stack: Vec<(usize, LetterId, Vec<Band>)> = Vec::new();
        let mut next = grouped(first);
        loop {
            let length = word.len() + 1;
            stack.extend(
                next.drain(..)
                    .rev()
                    .map(|(letter, bands)| (length, letter, bands)),
            );
            let Some((length, letter, bands)) = stack.pop() else {
                return Ok(());
            };
            word.truncate(length - 1);
            word.push(letter);
            self.found.counts[length] += 1;
            self.control.tick(1)?;
            if length == self.longest {
                self.found.words.push(word.clone());
            } else {
                let beyond = bands.into_iter().flat_map(|band| self.beyond(band));
                let letters = beyond.map(|(side, band)| (self.table.letter_id(side), band));
                next = grouped(letters.collect());
            }
        }
    }

    /// The bands that leave a copy, with the sides they leave by.
    fn beyond(&self, band: Band) -> Vec<(SideId, Band)> {
        let pose = band.pose.clone();
        let mut left = Vec::new();
        let mut open = vec![band];
        while let Some(band) = open.pop() {
            let entry = self.mesh.enter(band.gate, pose.mirrored);
            let image = pose.apply(&self.corners[entry.apex.0 as usize], self.form);
            let apex = self.aim.cross(&image);
            let mut parts = Vec::new();
            if apex > band.low {
                let high = if apex < band.high { &apex } else { &band.high };
                parts.push((entry.right, band.low.clone(), high.clone()));
            }
            if apex < band.high {
                let low = if apex > band.low { &apex } else { &band.low };
                parts.push((entry.left, low.clone(), band.high.clone()));
            }
            for (exit, low, high) in parts {
                let (gate, side) = match exit {
                    Exit::Pass(gate) => (gate, None),
                    Exit::Bounce(side, gate) => (gate, Some(side)),
                };
                let band = Band {
                    pose: pose.clone(),
                    gate,
                    low,
                    high,
                };
                match side {
                    None => open.push(band),
                    Some(side) => {
                        let pose = pose.after(&self.reflections[side.0 as usize], self.form);
                        left.push((side, Band { pose, ..band }));
                    }
                }
            }
        }
        left
    }
}
