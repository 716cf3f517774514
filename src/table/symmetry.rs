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

use super::{SideId, Table};
use crate::number::Real;

/// An isometry that takes a table to itself.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Symmetry {
    /// True when it reverses orientation.
    pub mirrored: bool,
    /// Side i goes to side `sides[i]`.
    pub sides: Vec<SideId>,
}

impl Symmetry {
    /// The permutation of the letters in cycles, such as `(a b)(c d)`; letters that stay are left out.
    pub fn cycles(&self, letters: &[char]) -> String {
        let mut seen = vec![false; self.sides.len()];
        let mut text = String::new();
        for first in 0..self.sides.len() {
            let mut cycle = Vec::new();
            let mut at = first;
            while !seen[at] {
                seen[at] = true;
                cycle.push(letters[at].to_string());
                at = self.sides[at].0 as usize;
            }
            if cycle.len() > 1 {
                text.push_str(&format!("({})", cycle.join(" ")));
            }
        }
        text
    }
}

/// All symmetries but the identity: rotations by the image of side 0, then reflections by the image of side 0.
pub fn symmetries(table: &Table) -> Vec<Symmetry> {
    let k = table.sides();
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
    let image = |mirrored: bool, j: usize| Symmetry {
        mirrored,
        sides: (0..k)
            .map(|i| {
                if mirrored {
                    (j + k - i) % k
                } else {
                    (i + j) % k
                }
            })
            .map(|i| SideId(i as u8))
            .collect(),
    };
    let rotations = (1..k).filter(|&j| rotation(j)).map(|j| image(false, j));
    let reflections = (0..k).filter(|&j| reflection(j)).map(|j| image(true, j));
    rotations.chain(reflections).collect()
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
        cycles.collect()
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
}
