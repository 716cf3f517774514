//! Pictures of words that are not in a language.

use crate::figure::Corridor;
use crate::language::beams::WordBeam;
use crate::study::pictures::corridor_shape;
use crate::table::{Table, Vector};
use crate::unfold::Isometry;
use crate::unfold::isometry::side_reflections;

/// The corridor of a prefix with the copy where it cannot go on, and the corner images (crossings, corner) that no line passes
/// as it should.
pub fn closed_corridor(table: &Table, prefix: &WordBeam, pins: &[(usize, usize)]) -> Corridor {
    let mut corridor = corridor_shape(table, prefix);
    let root = table.form().to_f64().sqrt();
    let flat = |v: &Vector| [v.x.to_f64(), v.y.to_f64() * root];
    let home = table.moved_to_origin();
    let reflections = side_reflections(&home);
    let mut poses = vec![Isometry::identity()];
    for side in &prefix.word[1..] {
        let last = &poses[poses.len() - 1];
        poses.push(last.after(&reflections[side.0 as usize], home.form()));
    }
    let place = |crossings: usize, corner: usize| {
        flat(&poses[crossings].apply(home.corner(corner), home.form()))
    };
    let last = poses.len() - 1;
    let mut rings = home
        .rings()
        .map(|ring| ring.map(|corner| place(last, corner)).collect());
    if last > 0 {
        corridor.copies.extend(rings.next());
        corridor.holes.extend(rings);
    }
    corridor.pivots = pins
        .iter()
        .map(|(crossings, corner)| place(*crossings, *corner))
        .collect();
    corridor
}
