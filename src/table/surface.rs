//! The closed surface on which the orbits of a table with a finite reflection group become straight lines.
//!
//! Let the angles be π·m_i/n_i in lowest terms, N the least common multiple of the n_i. The 2N copies of the table, one
//! for each element of the reflection group, are glued along equal sides. Round corner i the copies close up
//! after 2n_i of them, so corner i gives N/n_i points, each with the angle 2n_i·π·m_i/n_i = 2π·m_i. With N·k edges and
//! 2N faces the Euler characteristic is Σ N/n_i − N·k + 2N, hence
//! genus = 1 + (N/2)·(k − 2 − Σ 1/n_i)
//! With h holes the interior of each copy counts 1 − h instead of 1, so 2h − 2 stands for −2, and N is half the order of
//! the whole reflection group, since the angles between the rings count in it.
//! (Katok and Zemlyakov, 1975; Masur and Tabachnikov, handbook survey on rational billiards; both from memory).

use super::facts::{Angle, Facts, ReflectionGroup};

/// Points of the surface that one corner gives.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ConePoints {
    /// How many points.
    pub points: u64,
    /// The angle round each, in units of 2π; 1 means that the surface is flat there.
    pub turns: u64,
}

/// The surface.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Surface {
    /// How many copies of the table it is made of: 2N.
    pub copies: u64,
    /// Its genus.
    pub genus: u64,
    /// The points that each corner gives, by corner.
    pub cone_points: Vec<ConePoints>,
}

/// The surface of a table with so many holes; `None` when the reflection group is infinite. Cost: O(k).
pub fn surface(holes: u64, facts: &Facts) -> Option<Surface> {
    let ReflectionGroup::Finite { r: n } = facts.group else {
        return None;
    };
    let multiples = facts.angles.iter().map(|angle| match angle {
        Angle::RationalMultipleOfPi(q) => Some((q.numer().to_u64()?, q.denom().to_u64()?)),
        Angle::Irrational => None,
    });
    let multiples: Vec<(u64, u64)> = multiples.collect::<Option<_>>()?;
    let corners = multiples.len() as u64;
    let points: u64 = multiples.iter().map(|(_, den)| n / den).sum();
    // 2·genus − 2 = N·k − 2N(1 − h) − points; never below −2, and even, because the surface is closed and oriented.
    let doubled = n * corners + 2 + 2 * n * holes - 2 * n - points;
    Some(Surface {
        copies: 2 * n,
        genus: doubled / 2,
        cone_points: multiples
            .into_iter()
            .map(|(turns, den)| ConePoints {
                points: n / den,
                turns,
            })
            .collect(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::facts::facts;
    use crate::table::file::parse;

    fn of(text: &str) -> Option<Surface> {
        let table = parse("test.toml", text).unwrap().table;
        surface(table.holes() as u64, &facts(&table))
    }

    #[test]
    fn tables_that_tile_give_a_flat_torus() {
        for text in [
            "regular = 4",
            "regular = 3",
            "triangle = [\"2\", \"1\", \"1\"]",
            "triangle = [\"1\", \"2\", \"3\"]",
        ] {
            let surface = of(text).unwrap();
            assert_eq!(surface.genus, 1);
            assert!(surface.cone_points.iter().all(|c| c.turns == 1));
        }
    }

    #[test]
    fn known_genera() {
        // (π/2, π/8, 3π/8): the regular octagon with opposite sides glued, genus 2 with one point of angle 6π
        // (Veech 1989, from memory).
        let octagon = of("triangle = [\"4\", \"1\", \"3\"]").unwrap();
        assert_eq!((octagon.copies, octagon.genus), (16, 2));
        assert_eq!(
            octagon.cone_points[2],
            ConePoints {
                points: 1,
                turns: 3
            }
        );
        // L of three squares: genus 2, one point of angle 6π.
        let l = r#"corners = [["0","0"],["2","0"],["2","1"],["1","1"],["1","2"],["0","2"]]"#;
        let l = of(l).unwrap();
        assert_eq!((l.copies, l.genus), (4, 2));
        assert_eq!(
            l.cone_points[3],
            ConePoints {
                points: 1,
                turns: 3
            }
        );
        assert_eq!(
            l.cone_points[0],
            ConePoints {
                points: 1,
                turns: 1
            }
        );
        // The regular hexagon: angles 2π/3, N = 3, genus 1 + 3/2·(4 − 2) = 4.
        assert_eq!(of("regular = 6").unwrap().genus, 4);
        // The regular pentagon: 3π/5, N = 5, genus 1 + 5/2·(3 − 1) = 6.
        assert_eq!(of("regular = 5").unwrap().genus, 6);
        assert_eq!(of(r#"corners = [["0","0"],["3","0"],["0","4"]]"#), None);
    }
}
