//! The words of all orbits that start in one direction, on any table.
//!
//! The parallel lines that enter the table through a side are an interval of moments; unfolding cuts it at the
//! moments of corner images. With an infinite reflection group these words are not closed under taking suffixes,
//! since after a bounce an orbit runs in another direction; so they are a tree and no language.
//!
//! Cost: one exact isometry and as many comparisons as the copy has triangles for each word.

use crate::number::Real;
use crate::run::{Control, Stopped};
use crate::table::{SideId, Table, Vector};
use crate::unfold::isometry::side_reflections;
use crate::unfold::mesh::{Exit, GateId};
use crate::unfold::{Isometry, Mesh};

/// The words of one length that start in a direction, and how many there are of each length up to it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Prefixes {
    /// Entry n: how many words of length n, from 0.
    pub counts: Vec<u64>,
    /// The words of the greatest length, in the order of the sides.
    pub words: Vec<Vec<SideId>>,
}

struct Walk<'a> {
    mesh: Mesh,
    corners: &'a [Vector],
    form: &'a Real,
    reflections: Vec<Isometry>,
    aim: &'a Vector,
    control: &'a Control,
    longest: usize,
    found: Prefixes,
    word: Vec<SideId>,
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
        word: Vec::new(),
    };
    walk.found.counts[0] = 1;
    if longest == 0 {
        walk.found.words.push(Vec::new());
        return Ok(walk.found);
    }
    for side in 0..table.sides() {
        let (low, high) = (
            aim.cross(table.corner(side + 1)),
            aim.cross(table.corner(side)),
        );
        if low < high {
            let side = SideId(side as u8);
            let gate = walk.mesh.gate_of_side(side);
            walk.follow(
                side,
                Band {
                    pose: Isometry::identity(),
                    gate,
                    low,
                    high,
                },
            )?;
        }
    }
    Ok(walk.found)
}

impl Walk<'_> {
    fn follow(&mut self, first: SideId, band: Band) -> Result<(), Stopped> {
        // Depth first, on a stack of its own: words may be long.
        let mut stack = vec![(1, first, band)];
        while let Some((length, side, band)) = stack.pop() {
            self.word.truncate(length - 1);
            self.word.push(side);
            self.found.counts[length] += 1;
            self.control.tick(1)?;
            if length == self.longest {
                self.found.words.push(self.word.clone());
                continue;
            }
            let mut next = self.beyond(band);
            next.sort_by_key(|(side, _)| std::cmp::Reverse(*side));
            stack.extend(
                next.into_iter()
                    .map(|(side, band)| (length + 1, side, band)),
            );
        }
        Ok(())
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
