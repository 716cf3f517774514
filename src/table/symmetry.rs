//! The isometries that keep a table, and what they do to its letters.
//!
//! A polygon is determined up to a proper isometry by the cyclic sequence of its squared side lengths and of the inner
//! and cross products of consecutive sides. So the table has a rotation that takes side i to side i + j exactly when
//! the sequence is periodic with j, and a reflection that takes side i to side j − i exactly when the sequence read
//! backwards is the sequence itself moved by j: with R·u_i = −u_{j−i} the inner product of u_i and u_{i+1} must
//! be that of u_{j−i−1} and u_{j−i}, and so must the cross product, which changes its sign twice (by the reflection and
//! by the order). All comparisons are of exact numbers. Cost: 2k comparisons of sequences of length k.
//!
//! An isometry that keeps the table takes orbits to orbits, so its letter permutation keeps the language.

use super::{LetterId, SideId, Table, Vector};
use crate::number::Real;

/// An isometry that takes a table to itself.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Symmetry {
    /// True when it reverses orientation.
    pub mirrored: bool,
    /// Side i goes to side `sides[i]`.
    pub sides: Vec<SideId>,
    /// Letter i goes to letter `letters[i]`; `None` when sides that share a letter go to different letters.
    pub letters: Option<Vec<LetterId>>,
}

impl Symmetry {
    /// The permutation of the letters in cycles, such as `(a b)(c d)`; letters that stay are left out.
    pub fn cycles(&self, letters: &[char]) -> Option<String> {
        let moved = self.letters.as_ref()?;
        let mut seen = vec![false; moved.len()];
        let mut text = String::new();
        for first in 0..moved.len() {
            let mut cycle = Vec::new();
            let mut at = first;
            while !seen[at] {
                seen[at] = true;
                cycle.push(letters[at].to_string());
                at = moved[at].0 as usize;
            }
            if cycle.len() > 1 {
                text.push_str(&format!("({})", cycle.join(" ")));
            }
        }
        Some(text)
    }
}

/// All symmetries but the identity: rotations by the image of side 0, then reflections by the image of side 0.
pub fn symmetries(table: &Table) -> Vec<Symmetry> {
    let k = table.rings().next().expect("an outline").len();
    let sides: Vec<_> = (0..k).map(|i| table.side_vector(i)).collect();
    let form = table.form();
    let lengths: Vec<Real> = sides.iter().map(|u| u.squared_length(form)).collect();
    let joints: Vec<(Real, Real)> = (0..k)
        .map(|i| {
            let (u, v) = (&sides[i], &sides[(i + 1) % k]);
            (u.dot(v, form), u.cross(v))
        })
        .collect();
    let rotation = |j: usize| {
        (0..k).all(|i| lengths[i] == lengths[(i + j) % k] && joints[i] == joints[(i + j) % k])
    };
    let reflection = |j: usize| {
        (0..k).all(|i| {
            lengths[i] == lengths[(j + k - i) % k] && joints[i] == joints[(j + 2 * k - i - 1) % k]
        })
    };
    let image = |mirrored: bool, j: usize| -> Option<Symmetry> {
        let outline = (0..k).map(|i| {
            if mirrored {
                (j + k - i) % k
            } else {
                (i + j) % k
            }
        });
        let mut moved: Vec<usize> = outline.collect();
        moved.extend(moved_holes(table, k, mirrored, j)?);
        let sides: Vec<SideId> = moved.into_iter().map(|i| SideId(i as u8)).collect();
        Some(Symmetry {
            mirrored,
            letters: moved_letters(table, &sides),
            sides,
        })
    };
    let rotations = (1..k)
        .filter(|&j| rotation(j))
        .filter_map(|j| image(false, j));
    let reflections = (0..k)
        .filter(|&j| reflection(j))
        .filter_map(|j| image(true, j));
    rotations.chain(reflections).collect()
}

/// Where the isometry that takes side 0 to side j takes the sides of the holes; `None` when not to sides.
fn moved_holes(table: &Table, k: usize, mirrored: bool, j: usize) -> Option<Vec<usize>> {
    let holes = k..table.sides();
    let form = table.form();
    let along = table.side_vector(0);
    let image = table.side_vector(j);
    // Corner 0 goes to the start of side j, or when mirrored to its end, and side 0 then runs back along it.
    let (start, image) = match mirrored {
        false => (table.corner(j), image),
        true => (table.corner(table.after(j)), image.times(&Real::from(-1))),
    };
    let place = |p: &Vector, origin: &Vector, axis: &Vector, flip: bool| {
        let offset = p.minus(origin);
        let cross = axis.cross(&offset);
        (axis.dot(&offset, form), if flip { -cross } else { cross })
    };
    let targets: Vec<(Real, Real)> = holes
        .clone()
        .map(|i| place(table.corner(i), start, &image, mirrored))
        .collect();
    let corner_images: Vec<usize> = holes
        .clone()
        .map(|i| {
            let own = place(table.corner(i), table.corner(0), &along, false);
            targets.iter().position(|t| *t == own).map(|at| k + at)
        })
        .collect::<Option<_>>()?;
    holes
        .map(|i| {
            let from = corner_images[i - k];
            let to = corner_images[table.after(i) - k];
            match mirrored {
                false => (table.after(from) == to).then_some(from),
                true => (table.after(to) == from).then_some(to),
            }
        })
        .collect()
}

/// The letter permutation that a permutation of the sides induces.
fn moved_letters(table: &Table, sides: &[SideId]) -> Option<Vec<LetterId>> {
    let mut moved: Vec<Option<LetterId>> = vec![None; table.letters().len()];
    for (side, image) in sides.iter().enumerate() {
        let letter = table.letter_id(SideId(side as u8)).0 as usize;
        let image = table.letter_id(*image);
        if *moved[letter].get_or_insert(image) != image {
            return None;
        }
    }
    let moved: Vec<LetterId> = moved.into_iter().collect::<Option<_>>()?;
    // Two letters that go to one: the inverse would tear it apart.
    let distinct: std::collections::BTreeSet<u8> = moved.iter().map(|letter| letter.0).collect();
    (distinct.len() == moved.len()).then_some(moved)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::file::parse;

    fn found(text: &str) -> (Table, Vec<Symmetry>) {
        let table = parse("test.toml", text).unwrap().table;
        let symmetries = symmetries(&table);
        (table, symmetries)
    }

    fn cycles(text: &str) -> Vec<String> {
        let (table, symmetries) = found(text);
        let cycles = symmetries.iter().map(|s| s.cycles(table.letters()));
        let none = || "no letters".to_string();
        cycles.map(|c| c.unwrap_or_else(none)).collect()
    }

    #[test]
    fn a_regular_polygon_has_twice_its_sides_of_them() {
        for k in 3..=12 {
            let (_, symmetries) = found(&format!("regular = {k}"));
            assert_eq!(symmetries.len(), 2 * k - 1, "k = {k}");
            assert_eq!(symmetries.iter().filter(|s| s.mirrored).count(), k);
        }
    }

    #[test]
    fn quadrilaterals() {
        let square = r#"corners = [["0","0"],["1","0"],["1","1"],["0","1"]]"#;
        assert_eq!(cycles(square).len(), 7);
        let rectangle = r#"corners = [["0","0"],["2","0"],["2","1"],["0","1"]]"#;
        assert_eq!(cycles(rectangle), ["(a c)(b d)", "(b d)", "(a c)"]);
        let parallelogram = r#"corners = [["0","0"],["3","0"],["4","1"],["1","1"]]"#;
        assert_eq!(cycles(parallelogram), ["(a c)(b d)"]);
        let rhombus = r#"corners = [["0","0"],["2","-1"],["4","0"],["2","1"]]"#;
        assert_eq!(cycles(rhombus), ["(a c)(b d)", "(a b)(c d)", "(a d)(b c)"]);
        let dart = r#"corners = [["0","0"],["4","1"],["1","1"],["1","4"]]"#;
        assert_eq!(cycles(dart), ["(a d)(b c)"]);
        let trapezoid = r#"corners = [["0","0"],["4","0"],["3","1"],["1","1"]]"#;
        assert_eq!(cycles(trapezoid), ["(b d)"]);
        let crooked = r#"corners = [["0","0"],["7","1"],["5","6"],["-1","4"]]"#;
        assert!(cycles(crooked).is_empty());
    }

    #[test]
    fn nearly_symmetric_is_not_symmetric() {
        let text = r#"corners = [["0","0"],["1","0"],["1","1"],["0","1 + 1e-40"]]"#;
        assert!(cycles(text).is_empty());
    }

    #[test]
    fn holes_and_shared_letters_break_symmetries() {
        let room = |hole: &str| {
            format!(
                r#"corners = [["-5","-5"],["5","-5"],["5","5"],["-5","5"]]
[[holes]]
corners = [{hole}]"#
            )
        };
        let count = |hole: &str| found(&room(hole)).1.len();
        assert_eq!(count(r#"["-1","-1"],["1","-1"],["1","1"],["-1","1"]"#), 7);
        assert_eq!(count(r#"["-2","-1"],["2","-1"],["2","1"],["-2","1"]"#), 3);
        assert_eq!(count(r#"["1","1"],["2","1"],["2","2"],["1","2"]"#), 1);
        assert_eq!(count(r#"["1","1"],["3","1"],["3","2"],["1","2"]"#), 0);
        // A pinwheel keeps its rotations alone.
        let pinwheel = r#"["3","1"],["-1","3"],["-3","-1"],["1","-3"]"#;
        let (_, symmetries) = found(&room(pinwheel));
        assert_eq!(symmetries.len(), 3);
        assert!(symmetries.iter().all(|s| !s.mirrored));
        // Opposite sides with one letter: all symmetries permute; two neighbours with one letter: few do.
        let square = r#"corners = [["0","0"],["1","0"],["1","1"],["0","1"]]"#;
        let lettered = |letters: &str| {
            let (_, symmetries) = found(&format!("{square}\nsides = [{letters}]"));
            symmetries.iter().filter(|s| s.letters.is_some()).count()
        };
        assert_eq!(lettered(r#""a","b","a","b""#), 7);
        assert_eq!(lettered(r#""a","a","b","c""#), 1);
        assert_eq!(lettered(r#""a","a","b","b""#), 3);
    }
}
