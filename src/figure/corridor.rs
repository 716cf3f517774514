//! Pictures of corridors: unfolded copies of a table with the beam that crosses them.
//!
//! The picture is turned so that the corridor runs from left to right in the lowest strip that holds it.
//! Letters stand at the ends of the crossed sides, above or below.

use super::canvas::Canvas;
use super::font::text_width;
use super::geometry::{Placer, Point, Rect, add, along, edges, length, mean, sub, times, unit};
use super::plane::Frame;
use super::style::{
    BLACK, BOLD_STROKE, INKS, PALE, PAPER, STROKE, TEXT, THIN_STROKE, WHITE, WIDTH,
};
use super::{Caption, FigureError, check_points};

/// An unfolded corridor.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Corridor {
    /// The copies of the table in the order in which they are crossed. Up to about 30 stay legible.
    pub copies: Vec<Vec<[f64; 2]>>,
    /// The crossed sides: both ends and the letter.
    pub gates: Vec<([f64; 2], [f64; 2], String)>,
    /// The beam as polygons.
    pub beam: Vec<Vec<[f64; 2]>>,
    /// The corner images that bound the beam.
    pub pivots: Vec<[f64; 2]>,
    /// A line that crosses all gates.
    pub line: Option<([f64; 2], [f64; 2])>,
}

impl Corridor {
    fn points(&self) -> Vec<Point> {
        let polygons = self.copies.iter().chain(&self.beam).flatten().copied();
        let gates = self.gates.iter().flat_map(|g| [g.0, g.1]);
        let line = self.line.iter().flat_map(|l| [l.0, l.1]);
        polygons
            .chain(gates)
            .chain(self.pivots.iter().copied())
            .chain(line)
            .collect()
    }

    /// The corridor turned so that it runs to the right.
    fn levelled(&self) -> Corridor {
        let turn = |p: Point| -> Point {
            let angle = self.level_angle();
            let (sin, cos) = angle.sin_cos();
            [cos * p[0] - sin * p[1], sin * p[0] + cos * p[1]]
        };
        let all = |polygons: &[Vec<Point>]| -> Vec<Vec<Point>> {
            polygons
                .iter()
                .map(|polygon| polygon.iter().map(|&p| turn(p)).collect())
                .collect()
        };
        Corridor {
            copies: all(&self.copies),
            gates: self
                .gates
                .iter()
                .map(|g| (turn(g.0), turn(g.1), g.2.clone()))
                .collect(),
            beam: all(&self.beam),
            pivots: self.pivots.iter().map(|&p| turn(p)).collect(),
            line: self.line.map(|l| (turn(l.0), turn(l.1))),
        }
    }

    /// The angle, in whole degrees, that makes the picture lowest, with the last copy to the right of the
    /// first. A corridor of one copy is not turned.
    fn level_angle(&self) -> f64 {
        let (Some(first), Some(last)) = (self.copies.first(), self.copies.last()) else {
            return 0.0;
        };
        if self.copies.len() < 2 {
            return 0.0;
        }
        let points: Vec<Point> = self.points();
        let height = |angle: f64| {
            let (sin, cos) = angle.sin_cos();
            let heights = points.iter().map(|p| sin * p[0] + cos * p[1]);
            let (low, high) = heights.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), y| {
                (l.min(y), h.max(y))
            });
            high - low
        };
        let angles = (0..180).map(|degrees| f64::from(degrees).to_radians());
        let angle = angles
            .min_by(|a, b| height(*a).total_cmp(&height(*b)))
            .unwrap_or(0.0);
        let way = sub(mean(last), mean(first));
        let rightward = angle.cos() * way[0] - angle.sin() * way[1];
        if rightward < 0.0 {
            angle + std::f64::consts::PI
        } else {
            angle
        }
    }
}

/// Draws a corridor.
///
/// # Errors
/// [`FigureError::BadCoordinate`], and what the backend reports.
pub fn corridor_picture(corridor: &Corridor, caption: &Caption) -> Result<String, FigureError> {
    let (canvas, size) = compose_corridor(corridor)?;
    canvas.finish(size[0], size[1], caption)
}

pub(crate) fn compose_corridor(corridor: &Corridor) -> Result<(Canvas, Point), FigureError> {
    check_points("a point of the corridor", &corridor.points())?;
    let level = corridor.levelled();
    let margin = [34.0, 58.0];
    let frame = Frame::fitting(
        &level.points(),
        WIDTH - 2.0 * margin[0],
        560.0,
        margin,
        520.0,
    );
    let mut canvas = Canvas::default();
    for copy in &level.copies {
        canvas.fill(&frame.pixels(copy), PAPER, 1.0);
    }
    let beam: Vec<Vec<Point>> = level.beam.iter().map(|part| frame.pixels(part)).collect();
    for part in &beam {
        canvas.fill(part, INKS[5], 0.4);
    }
    for copy in &level.copies {
        canvas.outline(&frame.pixels(copy), PALE, THIN_STROKE);
    }
    for part in &beam {
        canvas.outline(part, INKS[0], THIN_STROKE);
    }
    for gate in &level.gates {
        canvas.stroke(
            &[frame.pixel(gate.0), frame.pixel(gate.1)],
            BLACK,
            BOLD_STROKE,
        );
    }
    if let Some((from, to)) = level.line {
        let (from, to) = (frame.pixel(from), frame.pixel(to));
        canvas.stroke(&[from, to], INKS[1], STROKE);
        canvas.arrowhead(to, unit(sub(to, from)), 18.0, INKS[1]);
    }
    for &pivot in &level.pivots {
        canvas.disc(frame.pixel(pivot), 7.5, WHITE);
        canvas.disc(frame.pixel(pivot), 6.0, INKS[4]);
    }
    label_gates(&mut canvas, &level, &frame);
    Ok((canvas, frame.size))
}

/// Places the letters at the ends of the gates; on the gate itself if both ends are taken.
fn label_gates(canvas: &mut Canvas, level: &Corridor, frame: &Frame) {
    let mut placer = Placer::within(frame.canvas_bounds());
    for part in &level.beam {
        placer.avoid_region(frame.pixels(part), 300.0);
    }
    for (a, b) in level.copies.iter().flat_map(|copy| edges(copy)) {
        placer.avoid_segment(frame.pixel(a), frame.pixel(b), 8.0);
    }
    for gate in &level.gates {
        placer.avoid_segment(frame.pixel(gate.0), frame.pixel(gate.1), 60.0);
    }
    if let Some((a, b)) = level.line {
        placer.avoid_segment(frame.pixel(a), frame.pixel(b), 200.0);
    }
    for &pivot in &level.pivots {
        placer.avoid_box(Rect::around(frame.pixel(pivot), 14.0, 14.0));
    }
    for (a, b, letter) in &level.gates {
        let (a, b) = (frame.pixel(*a), frame.pixel(*b));
        let width = text_width(letter, TEXT);
        let way = unit(sub(b, a));
        let reach = (way[0].abs() * width + way[1].abs() * TEXT * 0.8) / 2.0;
        let mut candidates = Vec::new();
        for gap in [9.0, 14.0, 20.0, 27.0, 35.0] {
            // The upper end is preferred a little, so that letters line up.
            let (below, above) = if a[1] > b[1] { (5.0, 0.0) } else { (0.0, 5.0) };
            for aside in [0.0, 9.0, -9.0, 16.0, -16.0] {
                let cost = gap + f64::abs(aside);
                candidates.push((
                    add(a, [aside - way[0] * (reach + gap), -way[1] * (reach + gap)]),
                    cost + below,
                ));
                candidates.push((
                    add(b, [aside + way[0] * (reach + gap), way[1] * (reach + gap)]),
                    cost + above,
                ));
            }
        }
        if length(sub(b, a)) > 2.0 * TEXT {
            for t in [0.5, 0.3, 0.7, 0.15, 0.85] {
                candidates.push((along(a, b, t), 250.0));
                candidates.push((
                    add(along(a, b, t), times([way[1], -way[0]], width / 2.0 + 8.0)),
                    90.0,
                ));
            }
        }
        if let Some(rect) = placer.place(width + 3.0, TEXT * 0.84, &candidates) {
            canvas.rect(&rect, WHITE, 0.75);
            canvas.label(letter, rect.centre(), TEXT, BLACK);
        }
    }
}
