//! A frame that needs the smallest field.
//!
//! Orientations survive every affine map that keeps orientation, so a walk may look at a table in coordinates of its
//! own. Here side 0 becomes the first unit vector: with z = x + y·√(−g), z_i = (v_i − v_0)/(v_1 − v_0) = X_i + Y_i·√(−g).
//! Then the second unit is stretched to the first nonzero |Y|, call it Y: coordinates (X_i, Y_i/Y) and plane form
//! g·Y². The numbers that a walk needs are these coordinates and the entries of the side reflections
//! (x, y) ↦ (w.x·x + g·w.y·y, w.y·x − w.x·y).
//!
//! **Smallest.** Suppose that in some affine frame all corners (with corner 0 at the origin) and all entries lie in
//! a field F. The reflection in side 0 has two eigenlines over F, so the axes may be turned along them, and each
//! axis scaled by a coordinate in F: that is the frame above, and all of it lies in F. So no affine frame needs less.
//! The entries generate g·Y² together with the coordinates, unless every w.y is zero: then all sides are parallel
//! to the axes, the reflections are the same for every form, and the frame takes the form 1.
//!
//! Examples: a rectangle with irrational sides is the unit square; an equilateral triangle has rational coordinates.

use super::{Table, Vector};
use crate::number::adjoin::embed;
use crate::number::subfield::smaller_field;
use crate::number::{Field, Real, Sign};

/// A table in its frame, and the way back.
#[derive(Clone, Debug)]
pub struct Frame {
    /// The table in the frame: corner 0 at the origin, corner 1 at (1, 0).
    pub table: Table,
    /// True when lengths in the frame, by its own form, are proportional to those in the table.
    pub keeps_proportions: bool,
    /// The generator of the frame's field as an element of the table's.
    generator: Real,
    /// The first unit vector in the table's coordinates.
    first: Vector,
    /// The second unit vector in the table's coordinates.
    second: Vector,
    /// The squares of the lengths of the two unit vectors.
    squared_units: [Real; 2],
}

impl Frame {
    /// The frame of a table when it needs a smaller field than the table's coordinates; otherwise `None`.
    ///
    /// Cost: k products and one [`smaller_field`] of at most 2k + 1 elements.
    pub fn smaller(table: &Table) -> Option<Frame> {
        if table.field().is_rational() {
            return None;
        }
        let form = table.form();
        let first = table.side_vector(0);
        let squared = first.squared_length(form);
        let turn = first.conjugate().times(&squared.inverse()?);
        let turned: Vec<Vector> = table
            .corners()
            .iter()
            .map(|v| v.minus(table.corner(0)).product(&turn, form))
            .collect();
        // Not all corners lie on the line of side 0.
        let unit = turned.iter().find(|v| !v.y.is_zero())?.y.abs();
        let inverse = unit.inverse()?;
        let stretched: Vec<Vector> = turned
            .iter()
            .map(|v| Vector::new(v.x.clone(), &v.y * &inverse))
            .collect();
        let own_form = form * &(&unit * &unit);
        let keeps_proportions = !parallel_to_axes(table, &stretched);
        let needed: Vec<Real> = stretched
            .iter()
            .flat_map(|v| [v.x.clone(), v.y.clone()])
            .chain(keeps_proportions.then(|| own_form.clone()))
            .collect();
        let small = smaller_field(table.field(), &needed)?;
        let written = &small.elements;
        let corners = written[..2 * stretched.len()]
            .chunks(2)
            .map(|c| Vector::new(c[0].clone(), c[1].clone()))
            .collect();
        let frame_form = match keeps_proportions {
            true => written[2 * stretched.len()].clone(),
            false => Real::from(1).lifted_to(&small.field),
        };
        let across = Vector::new(Real::from(0), unit).product(&first, form);
        Some(Frame {
            table: Table {
                corners,
                form: frame_form,
                field: small.field,
                ..table.clone()
            },
            keeps_proportions,
            generator: small.generator,
            squared_units: [squared.clone(), &squared * &own_form],
            first,
            second: across,
        })
    }

    /// A vector of the frame in the table's coordinates.
    pub fn to_table(&self, vector: &Vector) -> Vector {
        let x = embed(&vector.x, &self.generator);
        let y = embed(&vector.y, &self.generator);
        self.first.times(&x).plus(&self.second.times(&y))
    }

    /// The squares of the lengths, in the table's plane, of the frame's two unit vectors, which are at right angles.
    pub fn squared_units(&self) -> &[Real; 2] {
        &self.squared_units
    }

    /// The frame's field.
    pub fn field(&self) -> &Field {
        self.table.field()
    }
}

fn parallel_to_axes(table: &Table, corners: &[Vector]) -> bool {
    (0..corners.len()).all(|i| {
        let side = corners[table.after(i)].minus(&corners[i]);
        side.x.sign() == Sign::Zero || side.y.sign() == Sign::Zero
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::file::parse;
    use crate::table::orientation;

    fn table(text: &str) -> Table {
        parse("test.toml", text).unwrap().table
    }

    /// Degree of the frame's field; checks that the frame shows the same figure.
    fn degree(text: &str) -> usize {
        let table = table(text);
        let Some(frame) = Frame::smaller(&table) else {
            return table.field().degree();
        };
        assert!(frame.field().degree() < table.field().degree());
        let [along, across] = frame.squared_units();
        for i in 0..table.sides() {
            let from_first = table.corner(i).minus(table.corner(0));
            let seen = frame.table.corner(i);
            assert_eq!(frame.to_table(seen), from_first);
            let x = embed(&seen.x, &frame.generator);
            let y = embed(&seen.y, &frame.generator);
            assert_eq!(
                along * &x.pow(2) + across * &y.pow(2),
                from_first.squared_length(table.form())
            );
            for j in 0..table.sides() {
                let corner = |t: &Table, n: usize| t.corner(n).clone();
                let at = |t: &Table| orientation(&corner(t, 0), &corner(t, i), &corner(t, j));
                assert_eq!(at(&table), at(&frame.table));
            }
        }
        frame.field().degree()
    }

    #[test]
    fn rectangles_are_rational_in_their_frame() {
        assert_eq!(
            degree(
                r#"corners = [["0","0"], ["sqrt(2)","0"], ["sqrt(2)","root(x^3-2, 1.26)"], ["0","root(x^3-2, 1.26)"]]"#
            ),
            1
        );
        // Turned by an irrational angle.
        assert_eq!(
            degree(
                r#"corners = [["1","0"], ["1+sqrt(2)","sqrt(3)"], ["1+sqrt(2)-sqrt(3)","sqrt(3)+sqrt(2)"], ["1-sqrt(3)","sqrt(2)"]]"#
            ),
            1
        );
    }

    #[test]
    fn fields_in_frames() {
        // Equilateral with its height written out.
        assert_eq!(
            degree(r#"corners = [["0","0"], ["1","0"], ["1/2","sqrt(3)/2"]]"#),
            1
        );
        // An L with ratios 1 : 1 + √2 in one direction only.
        assert_eq!(
            degree(
                r#"corners = [["0","0"], ["sqrt(3)+sqrt(6)","0"], ["sqrt(3)+sqrt(6)","sqrt(5)"], ["sqrt(3)","sqrt(5)"], ["sqrt(3)","3*sqrt(5)"], ["0","3*sqrt(5)"]]"#
            ),
            2
        );
        // The angle π/12 written with square roots: its frame needs √3.
        assert_eq!(
            degree(
                r#"corners = [["0","0"], ["sqrt(2)*(sqrt(6)+sqrt(2))/4","0"], ["0","sqrt(2)*(sqrt(6)-sqrt(2))/4"]]"#
            ),
            2
        );
        // A scaled triangle over the cube root keeps its cubic field.
        assert_eq!(
            degree(r#"corners = [["0","0"], ["sqrt(2)","0"], ["0","sqrt(2)*root(x^3-2, 1.26)"]]"#),
            3
        );
        assert_eq!(degree("regular = 5"), 2);
        assert_eq!(degree("regular = 8"), 2);
        assert_eq!(degree("regular = 7"), 3);
    }
}
