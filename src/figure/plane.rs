//! Pictures of tables: the plane at equal scale on both axes, y up.
//!
//! Letters stand outside their side and corner numbers beside their corner, each at the nearest place where
//! it runs into neither an outline nor another label; a letter that had to move away gets a leader.

use super::canvas::Canvas;
use super::font::text_width;
use super::geometry::{
    Placer, Point, Rect, add, along, double_area, edges, inside, length, mean, normal, sub, times,
    unit,
};
use super::style::{
    BLACK, GREY, HAIR_STROKE, INKS, PALE, PAPER, SMALL_TEXT, STROKE, TEXT, THIN_STROKE, WHITE,
};
use super::{Caption, FigureError, check_points};

/// A table as corners and letters, in either orientation.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct TableShape {
    /// The corners of the outer boundary in order.
    pub corners: Vec<[f64; 2]>,
    /// The letter of the side from corner i to the next, one for each corner.
    pub letters: Vec<String>,
    /// Holes; their corners are numbered on after the outer ones.
    pub holes: Vec<HoleShape>,
}

/// A hole of a table.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct HoleShape {
    /// The corners in order.
    pub corners: Vec<[f64; 2]>,
    /// The letter of the side from corner i to the next, one for each corner.
    pub letters: Vec<String>,
}

/// A map from the plane to pixels: equal scale on both axes, y turned.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Frame {
    scale: f64,
    /// Plane coordinates of the upper left corner.
    origin: Point,
    /// Pixels of that corner.
    offset: Point,
    /// Size of the whole canvas in pixels.
    pub size: Point,
}

impl Frame {
    /// Fits the points into `widest` by `highest` pixels and puts the margins around; the canvas is at least
    /// `narrowest` wide.
    pub fn fitting(
        points: &[Point],
        widest: f64,
        highest: f64,
        margin: Point,
        narrowest: f64,
    ) -> Self {
        let bounds = Rect::of_points(points).unwrap_or(Rect {
            x0: 0.0,
            y0: 0.0,
            x1: 0.0,
            y1: 0.0,
        });
        let ratio = |room: f64, extent: f64| {
            if extent > 0.0 {
                room / extent
            } else {
                f64::INFINITY
            }
        };
        let scale = ratio(widest, bounds.width()).min(ratio(highest, bounds.height()));
        let scale = if scale.is_finite() { scale } else { 1.0 };
        let content = [bounds.width() * scale, bounds.height() * scale];
        let width = (content[0] + 2.0 * margin[0]).max(narrowest);
        Frame {
            scale,
            origin: [bounds.x0, bounds.y1],
            offset: [(width - content[0]) / 2.0, margin[1]],
            size: [width, content[1] + 2.0 * margin[1]],
        }
    }

    /// Makes room above the content.
    pub fn add_top(&mut self, height: f64) {
        self.offset[1] += height;
        self.size[1] += height;
    }

    pub fn pixel(&self, p: Point) -> Point {
        [
            self.offset[0] + (p[0] - self.origin[0]) * self.scale,
            self.offset[1] + (self.origin[1] - p[1]) * self.scale,
        ]
    }

    pub fn pixels(&self, points: &[Point]) -> Vec<Point> {
        points.iter().map(|&p| self.pixel(p)).collect()
    }

    pub fn canvas_bounds(&self) -> Rect {
        Rect {
            x0: 0.0,
            y0: 0.0,
            x1: self.size[0],
            y1: self.size[1],
        }
        .grown(-4.0)
    }
}

/// Sixteen directions around a point.
pub(crate) fn compass() -> impl Iterator<Item = Point> {
    (0..16).map(|i| {
        let angle = f64::from(i) * std::f64::consts::PI / 8.0;
        [angle.cos(), angle.sin()]
    })
}

/// The rings of a table in pixels, the outer one first, with their letters.
struct Rings<'a>(Vec<(Vec<Point>, &'a [String])>);

impl Rings<'_> {
    fn in_table(&self, p: Point) -> bool {
        self.0.iter().filter(|(ring, _)| inside(ring, p)).count() % 2 == 1
    }

    fn segments(&self) -> impl Iterator<Item = (Point, Point)> + '_ {
        self.0.iter().flat_map(|(ring, _)| edges(ring))
    }
}

fn check_table(table: &TableShape) -> Result<(), FigureError> {
    let holes = table.holes.iter().map(|h| (&h.corners, &h.letters));
    for (corners, letters) in std::iter::once((&table.corners, &table.letters)).chain(holes) {
        check_points("a corner of the table", corners)?;
        if corners.len() != letters.len() {
            return Err(FigureError::LengthMismatch {
                what: "letters of the sides",
                expected: corners.len(),
                found: letters.len(),
            });
        }
    }
    Ok(())
}

fn rings<'a>(table: &'a TableShape, frame: &Frame) -> Rings<'a> {
    let mut all = vec![(frame.pixels(&table.corners), table.letters.as_slice())];
    all.extend(
        table
            .holes
            .iter()
            .map(|h| (frame.pixels(&h.corners), h.letters.as_slice())),
    );
    Rings(all)
}

fn table_frame(table: &TableShape, others: &[Point]) -> Frame {
    let mut points: Vec<Point> = table.corners.clone();
    points.extend(table.holes.iter().flat_map(|h| h.corners.iter().copied()));
    points.extend_from_slice(others);
    Frame::fitting(&points, 730.0, 520.0, [80.0, 62.0], 520.0)
}

fn fill_table(canvas: &mut Canvas, rings: &Rings) {
    for (i, (ring, _)) in rings.0.iter().enumerate() {
        canvas.fill(ring, if i == 0 { PAPER } else { WHITE }, 1.0);
    }
}

fn outline_table(canvas: &mut Canvas, rings: &Rings) {
    for (ring, _) in &rings.0 {
        canvas.outline(ring, BLACK, STROKE);
    }
}

/// Places the letters of all sides outside the table.
fn label_sides(canvas: &mut Canvas, placer: &mut Placer, rings: &Rings) {
    for (ring, letters) in &rings.0 {
        for ((a, b), letter) in edges(ring).zip(letters.iter()) {
            if letter.is_empty() {
                continue;
            }
            let outward = outward(ring, rings, a, b);
            let width = text_width(letter, TEXT);
            let reach = (outward[0].abs() * width + outward[1].abs() * TEXT * 0.8) / 2.0;
            let mut candidates = Vec::new();
            for (step, gap) in [9.0, 14.0, 22.0, 34.0, 50.0, 70.0, -12.0]
                .into_iter()
                .enumerate()
            {
                for t in [0.5, 0.42, 0.58, 0.34, 0.66, 0.25, 0.75, 0.15, 0.85] {
                    let foot = along(a, b, t);
                    let sign = if gap < 0.0 { -1.0 } else { 1.0 };
                    let centre = add(foot, times(outward, sign * reach + gap));
                    let wrong_side = if rings.in_table(centre) { 400.0 } else { 0.0 };
                    candidates.push((
                        centre,
                        6.0 * step as f64 + 30.0 * f64::abs(t - 0.5) + wrong_side,
                    ));
                }
            }
            let Some(rect) = placer.place(width + 4.0, TEXT * 0.86, &candidates) else {
                continue;
            };
            let middle = along(a, b, 0.5);
            if length(sub(rect.centre(), middle)) > reach + 40.0 {
                let near = add(middle, times(unit(sub(rect.centre(), middle)), 4.0));
                let (cut, _) = rect
                    .clip_segment(near, rect.centre())
                    .unwrap_or((near, near));
                canvas.stroke(&[near, cut], PALE, THIN_STROKE);
            }
            canvas.label(letter, rect.centre(), TEXT, INKS[0]);
        }
    }
}

/// The unit normal of the side that leaves the table. The orientation of the ring tells it; a hole's
/// outside lies within its ring.
fn outward(ring: &[Point], rings: &Rings, a: Point, b: Point) -> Point {
    let n = unit(normal(sub(b, a)));
    let is_outer = std::ptr::eq(ring, rings.0[0].0.as_slice());
    let keep = (double_area(ring) >= 0.0) == is_outer;
    if keep { n } else { times(n, -1.0) }
}

/// Dots with numbers at the corners.
fn number_corners(canvas: &mut Canvas, placer: &mut Placer, rings: &Rings) {
    let corners: Vec<(Point, Point)> = rings
        .0
        .iter()
        .flat_map(|(ring, _)| {
            let k = ring.len();
            (0..k).map(move |i| {
                let to_next = unit(sub(ring[(i + 1) % k], ring[i]));
                let to_last = unit(sub(ring[(i + k - 1) % k], ring[i]));
                (ring[i], unit(add(to_next, to_last)))
            })
        })
        .collect();
    for &(p, _) in &corners {
        placer.avoid_box(Rect::around(p, 8.0, 8.0));
    }
    for (number, &(p, between)) in corners.iter().enumerate() {
        canvas.disc(p, 4.5, BLACK);
        let text = number.to_string();
        let width = text_width(&text, SMALL_TEXT);
        let mut candidates = Vec::new();
        for distance in [17.0, 21.0, 26.0, 33.0, 42.0] {
            for d in compass() {
                let off_axis = 1.0 - (d[0] * between[0] + d[1] * between[1]).abs();
                let centre = add(p, times(d, distance));
                let within = if rings.in_table(centre) { 4.0 } else { 0.0 };
                let rival = corners
                    .iter()
                    .any(|&(q, _)| q != p && length(sub(q, centre)) < 1.4 * distance);
                let unclear = if rival { 20.0 } else { 0.0 };
                candidates.push((centre, distance + 10.0 * off_axis + within + unclear));
            }
        }
        if let Some(rect) = placer.place(width + 2.0, SMALL_TEXT * 0.82, &candidates) {
            canvas.label(&text, rect.centre(), SMALL_TEXT, GREY);
        }
    }
}

/// Draws a table: filled lightly, letters outside its sides, corners numbered from 0.
///
/// # Errors
/// [`FigureError::BadCoordinate`], [`FigureError::LengthMismatch`] if letters and corners differ in number,
/// and what the backend reports.
pub fn table_picture(table: &TableShape, caption: &Caption) -> Result<String, FigureError> {
    let (canvas, size) = compose_table(table)?;
    canvas.finish(size[0], size[1], caption)
}

pub(crate) fn compose_table(table: &TableShape) -> Result<(Canvas, Point), FigureError> {
    check_table(table)?;
    let frame = table_frame(table, &[]);
    let rings = rings(table, &frame);
    let mut canvas = Canvas::default();
    fill_table(&mut canvas, &rings);
    outline_table(&mut canvas, &rings);
    let mut placer = Placer::within(frame.canvas_bounds());
    rings
        .segments()
        .for_each(|(a, b)| placer.avoid_segment(a, b, 1_000.0));
    label_sides(&mut canvas, &mut placer, &rings);
    number_corners(&mut canvas, &mut placer, &rings);
    Ok((canvas, frame.size))
}

/// Draws a table with the orbit through `hits`, points on the boundary in order; the first is marked and an
/// arrow shows the way.
///
/// # Errors
/// As for [`table_picture`].
pub fn orbit_picture(
    table: &TableShape,
    hits: &[[f64; 2]],
    caption: &Caption,
) -> Result<String, FigureError> {
    let (canvas, size) = compose_orbit(table, hits)?;
    canvas.finish(size[0], size[1], caption)
}

pub(crate) fn compose_orbit(
    table: &TableShape,
    hits: &[Point],
) -> Result<(Canvas, Point), FigureError> {
    check_table(table)?;
    check_points("a hit of the orbit", hits)?;
    let frame = table_frame(table, hits);
    let rings = rings(table, &frame);
    let path = frame.pixels(hits);
    let mut canvas = Canvas::default();
    fill_table(&mut canvas, &rings);
    let (width, opacity) = match path.len() {
        0..=40 => (STROKE - 0.3, 1.0),
        41..=200 => (THIN_STROKE, 0.8),
        _ => (HAIR_STROKE, 0.6),
    };
    canvas.faint_stroke(&path, INKS[0], width, opacity);
    outline_table(&mut canvas, &rings);
    if let Some(&start) = path.first() {
        if let Some(&next) = path.iter().find(|&&p| length(sub(p, start)) > 1.0) {
            let way = unit(sub(next, start));
            let tip = along(start, next, 0.5);
            canvas.arrowhead(add(tip, times(way, 9.0)), way, 18.0, INKS[1]);
        }
        canvas.disc(start, 8.0, WHITE);
        canvas.disc(start, 6.5, INKS[1]);
    }
    let mut placer = Placer::within(frame.canvas_bounds());
    rings
        .segments()
        .for_each(|(a, b)| placer.avoid_segment(a, b, 1_000.0));
    path.windows(2)
        .take(400)
        .for_each(|w| placer.avoid_segment(w[0], w[1], 100.0));
    label_sides(&mut canvas, &mut placer, &rings);
    if let Some(&start) = path.first() {
        label_start(&mut canvas, &mut placer, start, mean(&rings.0[0].0));
    }
    Ok((canvas, frame.size))
}

fn label_start(canvas: &mut Canvas, placer: &mut Placer, start: Point, middle: Point) {
    let away = unit(sub(start, middle));
    let width = text_width("start", SMALL_TEXT);
    let mut candidates = Vec::new();
    for d in compass() {
        let turn = 1.0 - d[0] * away[0] - d[1] * away[1];
        let reach = 14.0 + d[0].abs() * width / 2.0 + d[1].abs() * SMALL_TEXT / 2.0;
        for extra in [0.0, 12.0, 26.0] {
            candidates.push((add(start, times(d, reach + extra)), extra + 20.0 * turn));
        }
    }
    if let Some(rect) = placer.place(width + 4.0, SMALL_TEXT, &candidates) {
        canvas.label("start", rect.centre(), SMALL_TEXT, BLACK);
    }
}
