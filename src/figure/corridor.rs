//! Pictures of corridors: unfolded copies of a table with the beam that crosses them.
//!
//! The picture is turned so that the corridor runs from left to right in the lowest strip that holds it.
//! Letters stand on the crossed sides while these are long, and otherwise in a row above, in the order of
//! crossing: neighbouring sides often share a corner, so a letter at an end would be ambiguous.

use super::canvas::Canvas;
use super::font::text_width;
use super::geometry::{Placer, Point, Rect, along, edges, length, mean, normal, spread, sub, unit};
use super::plane::Frame;
use super::style::{
    BLACK, BOLD_STROKE, GREY, HAIR_STROKE, INKS, LINE_SPACING, PALE, PAPER, STROKE, TEXT,
    THIN_STROKE, WHITE, WIDTH,
};
use super::{Caption, FigureError, check_points};

/// An unfolded corridor.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Corridor {
    /// The copies of the table in the order in which they are crossed. Up to about 30 stay legible.
    pub copies: Vec<Vec<[f64; 2]>>,
    /// The holes of all copies.
    pub holes: Vec<Vec<[f64; 2]>>,
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
            holes: all(&self.holes),
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
    let margin = [26.0, 26.0];
    let mut frame = Frame::fitting(
        &level.points(),
        WIDTH - 2.0 * margin[0],
        560.0,
        margin,
        520.0,
    );
    let lettering = Lettering::choose(&level, &frame);
    frame.add_top(lettering.height());
    let mut canvas = Canvas::default();
    for copy in &level.copies {
        canvas.fill(&frame.pixels(copy), PAPER, 1.0);
    }
    for hole in &level.holes {
        canvas.fill(&frame.pixels(hole), WHITE, 1.0);
    }
    let beam: Vec<Vec<Point>> = level.beam.iter().map(|part| frame.pixels(part)).collect();
    for part in &beam {
        canvas.fill(part, INKS[5], 0.4);
    }
    for copy in level.copies.iter().chain(&level.holes) {
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
    match lettering {
        Lettering::OnGates => letter_gates(&mut canvas, &level, &frame),
        Lettering::InRows(rows) => letter_rows(&mut canvas, &level, &frame, rows),
    }
    Ok((canvas, frame.size))
}

/// Gates at least this long, in pixels, carry their letters themselves.
const LONG_GATE: f64 = 130.0;
/// Room between letters in a row.
const LETTER_GAP: f64 = 6.0;

/// Where the letters of a corridor stand.
enum Lettering {
    /// On the gates.
    OnGates,
    /// In rows above the corridor, in the order of crossing, so that a single row reads as the word.
    InRows(usize),
}

impl Lettering {
    fn choose(level: &Corridor, frame: &Frame) -> Self {
        let long = |gate: &(Point, Point, String)| {
            length(sub(frame.pixel(gate.1), frame.pixel(gate.0))) >= LONG_GATE
        };
        if level.gates.iter().all(long) {
            return Lettering::OnGates;
        }
        let total: f64 = level
            .gates
            .iter()
            .map(|g| text_width(&g.2, TEXT) + LETTER_GAP)
            .sum();
        Lettering::InRows((total / (frame.size[0] - 24.0)).ceil().max(1.0) as usize)
    }

    /// Height of the rows above the corridor.
    fn height(&self) -> f64 {
        match self {
            Lettering::OnGates => 0.0,
            Lettering::InRows(rows) => *rows as f64 * TEXT * LINE_SPACING + 10.0,
        }
    }
}

/// A letter on each gate, beside the beam and the line where there is room.
fn letter_gates(canvas: &mut Canvas, level: &Corridor, frame: &Frame) {
    let mut placer = Placer::within(frame.canvas_bounds());
    for part in &level.beam {
        placer.avoid_region(frame.pixels(part), 100.0);
        edges(&frame.pixels(part)).for_each(|(a, b)| placer.avoid_segment(a, b, 60.0));
    }
    if let Some((a, b)) = level.line {
        placer.avoid_segment(frame.pixel(a), frame.pixel(b), 200.0);
    }
    for gate in &level.gates {
        placer.avoid_segment(frame.pixel(gate.0), frame.pixel(gate.1), 30.0);
    }
    for &pivot in &level.pivots {
        placer.avoid_box(Rect::around(frame.pixel(pivot), 16.0, 16.0));
    }
    for (a, b, letter) in &level.gates {
        let (a, b) = (frame.pixel(*a), frame.pixel(*b));
        let candidates: Vec<(Point, f64)> = (0..=14)
            .map(|i| 0.15 + 0.05 * f64::from(i))
            .map(|t| (along(a, b, t), 20.0 * f64::abs(t - 0.5)))
            .collect();
        let width = text_width(letter, TEXT);
        if let Some(rect) = placer.place(width + 10.0, TEXT, &candidates) {
            canvas.rect(&rect, WHITE, 1.0);
            canvas.outline(&rect.corners(), BLACK, THIN_STROKE);
            canvas.label(letter, rect.centre(), TEXT, BLACK);
        }
    }
}

/// Rows of letters above the corridor, each with a leader to the place where its gate is crossed.
fn letter_rows(canvas: &mut Canvas, level: &Corridor, frame: &Frame, rows: usize) {
    let targets: Vec<Point> = level
        .gates
        .iter()
        .map(|gate| crossing(level, frame, gate))
        .collect();
    for row in 0..rows {
        let members: Vec<usize> = (row..level.gates.len()).step_by(rows).collect();
        let widest = members
            .iter()
            .map(|&i| text_width(&level.gates[i].2, TEXT))
            .fold(0.0, f64::max);
        // Crossed in this order, so sorted but for rounding; `spread` needs it exactly.
        let mut reached = f64::NEG_INFINITY;
        let wishes: Vec<f64> = members
            .iter()
            .map(|&i| {
                reached = reached.max(targets[i][0]);
                reached
            })
            .collect();
        let half = widest / 2.0 + 6.0;
        let room = frame.size[0] - 2.0 * half;
        let gap = (widest + LETTER_GAP).min(room / members.len().max(1) as f64);
        let y = 12.0 + TEXT * (0.5 + LINE_SPACING * row as f64);
        let foot = TEXT * 0.5 + 3.0;
        for (&i, x) in members
            .iter()
            .zip(spread(&wishes, gap, half, frame.size[0] - half))
        {
            let target = targets[i];
            canvas.stroke(&[[x, y + foot], target], GREY, HAIR_STROKE);
            canvas.disc(target, 3.5, BLACK);
            canvas.label(&level.gates[i].2, [x, y], TEXT, BLACK);
        }
    }
}

/// Where the line crosses a gate; the middle of the gate if there is no line or it misses the gate.
fn crossing(level: &Corridor, frame: &Frame, gate: &(Point, Point, String)) -> Point {
    let (a, b) = (frame.pixel(gate.0), frame.pixel(gate.1));
    let cut = level.line.and_then(|(from, to)| {
        let (from, to) = (frame.pixel(from), frame.pixel(to));
        let n = normal(sub(to, from));
        let side = |p: Point| n[0] * (p[0] - from[0]) + n[1] * (p[1] - from[1]);
        let (s, t) = (side(a), side(b));
        (s * t < 0.0).then(|| along(a, b, s / (s - t)))
    });
    cut.unwrap_or_else(|| along(a, b, 0.5))
}
