//! Pictures of orbits in their table.

use super::fault::Fault;
use crate::figure::{Caption, Corridor, corridor_picture, orbit_picture, png};
use crate::orbit::trace::State;
use crate::run::files::{check_place, write_whole};
use crate::study::pictures::shape;
use crate::table::{SideId, Table, Vector};
use crate::unfold::Isometry;
use crate::unfold::isometry::side_reflections;
use std::path::Path;

/// Refuses a file for a picture that could not be written, or whose name does not say what it is to be.
pub fn check_picture(file: &Path) -> Result<(), Fault> {
    if kind(file).is_none() {
        return Err(Fault::BadInput(format!(
            "{} is to be a picture, but its name says not which: write a name that ends in .svg or .png",
            file.display()
        )));
    }
    Ok(check_place(file)?)
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Kind {
    Svg,
    Png,
}

fn kind(file: &Path) -> Option<Kind> {
    let ending = file.extension()?.to_str()?.to_ascii_lowercase();
    match ending.as_str() {
        "svg" => Some(Kind::Svg),
        "png" => Some(Kind::Png),
        _ => None,
    }
}

/// Writes a picture, given as SVG, as what the file's name says; a PNG as wide as stated, in pixels.
pub fn write_picture(file: &Path, svg: &str, width: u32) -> Result<(), Fault> {
    if kind(file) != Some(Kind::Png) {
        return Ok(write_whole(file, |out| out.write_all(svg.as_bytes()))?);
    }
    let bytes = png::from_svg(svg, width)
        .map_err(|e| Fault::BadInput(format!("cannot write {}: {e}", file.display())))?;
    Ok(write_whole(file, |out| out.write_all(&bytes))?)
}

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

/// The most copies of an unfolding; more are not legible.
const MOST_COPIES: usize = 30;

/// An orbit that starts on a side as a straight line through unfolded copies of its table, as SVG.
pub fn draw_unfolding(table: &Table, word: &[SideId], states: &[State]) -> Result<String, Fault> {
    let root = table.form().to_f64().sqrt();
    let flat = |v: &Vector| [v.x.to_f64(), v.y.to_f64() * root];
    let reflections = side_reflections(table);
    let shown = word.len().min(MOST_COPIES + 1);
    let mut pose = Isometry::identity();
    let mut corridor = Corridor::default();
    let mut end = None;
    for (i, side) in word[..shown].iter().enumerate() {
        let s = side.0 as usize;
        let place = |c: usize| flat(&pose.apply(table.corner(c), table.form()));
        let letter = table.letters()[s].to_string();
        corridor
            .gates
            .push((place(s), place(table.after(s)), letter));
        end = Some(flat(&pose.apply(&states[i].point, table.form())));
        if i > 0 {
            pose = pose.after(&reflections[s], table.form());
        }
        if i + 1 < shown || word.len() == 1 {
            let place = |c: usize| flat(&pose.apply(table.corner(c), table.form()));
            corridor
                .copies
                .push((0..table.sides()).map(place).collect());
        }
    }
    if let (true, Some(end)) = (shown > 1, end) {
        corridor.line = Some((flat(&states[0].point), end));
    }
    let title = format!("Unfolded orbit in {}", table.title());
    let description = format!("The first {shown} hits of an orbit as a straight line.");
    corridor_picture(&corridor, &Caption::new(title, description))
        .map_err(|e| Fault::Failed(format!("cannot draw the unfolding: {e}")))
}
