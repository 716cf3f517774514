//! Pictures of orbits in their table.

use super::fault::Fault;
use crate::figure::{Caption, orbit_picture};
use crate::study::pictures::shape;
use crate::table::{Table, Vector};

/// An orbit through the given points, in order, as SVG.
pub fn draw_orbit(
    table: &Table,
    points: &[Vector],
    title: &str,
    description: &str,
) -> Result<String, Fault> {
    let root = table.form().to_f64().sqrt();
    let hits: Vec<[f64; 2]> = points
        .iter()
        .map(|p| [p.x.to_f64(), p.y.to_f64() * root])
        .collect();
    orbit_picture(&shape(table), &hits, &Caption::new(title, description))
        .map_err(|e| Fault::Failed(format!("cannot draw the orbit: {e}")))
}
