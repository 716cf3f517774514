//! A list of shapes in pixels, and its translation to SVG.
//!
//! Shapes are collected first and rendered at the end, so a picture can decide its size last and tests can
//! look at the boxes of all text. `plotters` has whole-number coordinates; the canvas therefore hands it
//! tenths of pixels and scales back through the `viewBox`.

use super::font::{FAMILY, ensure_registered, text_width};
use super::geometry::{Point, Rect, dashes, simplified};
use super::style::{Ink, Marker, WHITE};
use super::{Caption, FigureError};
use plotters::coord::Shift;
use plotters::prelude::*;
use plotters::style::text_anchor::{HPos, Pos, VPos};
use plotters::style::{
    FontDesc, FontFamily, FontStyle, FontTransform, RGBColor, ShapeStyle, TextStyle,
};

/// Units of the drawing backend in a pixel.
const UNITS: f64 = 10.0;
/// Pixel coordinates are cut to this size, so that the conversion to integers is exact.
const PIXEL_LIMIT: f64 = 100_000.0;

/// Lines may deviate by this many pixels, which nobody sees, to save points.
const TOLERANCE: f64 = 0.12;

/// Where the anchor of a text lies.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Align {
    Left,
    Middle,
    Right,
}

/// A piece of text; `at` is the anchor, on the middle of the line's height.
#[derive(Debug, Clone)]
pub(crate) struct Words {
    pub text: String,
    pub at: Point,
    pub size: f64,
    pub ink: Ink,
    pub align: Align,
    /// Read from bottom to top.
    pub upward: bool,
}

impl Words {
    /// The box that the text covers, measured in the built-in font.
    pub fn bounds(&self) -> Rect {
        let width = text_width(&self.text, self.size);
        let shift = match self.align {
            Align::Left => width / 2.0,
            Align::Middle => 0.0,
            Align::Right => -width / 2.0,
        };
        if self.upward {
            Rect::around([self.at[0], self.at[1] - shift], self.size, width)
        } else {
            Rect::around([self.at[0] + shift, self.at[1]], width, self.size)
        }
    }
}

#[derive(Debug, Clone)]
enum Shape {
    Fill {
        points: Vec<Point>,
        ink: Ink,
        opacity: f64,
    },
    Stroke {
        points: Vec<Point>,
        ink: Ink,
        width: f64,
        opacity: f64,
    },
    Disc {
        centre: Point,
        radius: f64,
        ink: Ink,
    },
    Text(Words),
}

/// Shapes in drawing order.
#[derive(Debug, Default)]
pub(crate) struct Canvas {
    shapes: Vec<Shape>,
}

impl Canvas {
    pub fn fill(&mut self, points: &[Point], ink: Ink, opacity: f64) {
        if points.len() > 2 {
            self.shapes.push(Shape::Fill {
                points: simplified(points, TOLERANCE),
                ink,
                opacity,
            });
        }
    }

    pub fn stroke(&mut self, points: &[Point], ink: Ink, width: f64) {
        self.faint_stroke(points, ink, width, 1.0);
    }

    pub fn faint_stroke(&mut self, points: &[Point], ink: Ink, width: f64, opacity: f64) {
        if points.len() > 1 {
            self.shapes.push(Shape::Stroke {
                points: simplified(points, TOLERANCE),
                ink,
                width,
                opacity,
            });
        }
    }

    pub fn outline(&mut self, polygon: &[Point], ink: Ink, width: f64) {
        let mut closed = polygon.to_vec();
        closed.extend(polygon.first());
        self.stroke(&closed, ink, width);
    }

    pub fn dashed(&mut self, points: &[Point], ink: Ink, width: f64, pattern: &[f64]) {
        for dash in dashes(points, pattern) {
            self.stroke(&dash, ink, width);
        }
    }

    pub fn disc(&mut self, centre: Point, radius: f64, ink: Ink) {
        self.shapes.push(Shape::Disc {
            centre,
            radius,
            ink,
        });
    }

    pub fn ring(&mut self, centre: Point, radius: f64, ink: Ink) {
        self.disc(centre, radius, ink);
        self.disc(centre, radius - 2.5, WHITE);
    }

    pub fn rect(&mut self, rect: &Rect, ink: Ink, opacity: f64) {
        self.fill(&rect.corners(), ink, opacity);
    }

    /// A filled triangle with its tip at `tip`, pointing along the unit vector `direction`.
    pub fn arrowhead(&mut self, tip: Point, direction: Point, size: f64, ink: Ink) {
        let [x, y] = tip;
        let [dx, dy] = direction;
        let back = [x - size * dx, y - size * dy];
        let half = 0.42 * size;
        let wing = |side: f64| [back[0] - side * half * dy, back[1] + side * half * dx];
        self.fill(&[tip, wing(1.0), wing(-1.0)], ink, 1.0);
    }

    pub fn marker(&mut self, at: Point, marker: Marker, r: f64, ink: Ink) {
        let [x, y] = at;
        match marker {
            Marker::Disc => self.disc(at, r, ink),
            Marker::Ring => self.ring(at, r + 1.0, ink),
            Marker::Square => self.rect(&Rect::around(at, 1.8 * r, 1.8 * r), ink, 1.0),
            Marker::Triangle => {
                let h = 1.2 * r;
                self.fill(
                    &[[x, y - h], [x + h, y + 0.8 * h], [x - h, y + 0.8 * h]],
                    ink,
                    1.0,
                );
            }
            Marker::Diamond => {
                let h = 1.35 * r;
                self.fill(&[[x, y - h], [x + h, y], [x, y + h], [x - h, y]], ink, 1.0);
            }
            Marker::Cross => {
                self.stroke(&[[x - r, y - r], [x + r, y + r]], ink, 2.5);
                self.stroke(&[[x - r, y + r], [x + r, y - r]], ink, 2.5);
            }
        }
    }

    /// Draws text and tells the box it covers.
    pub fn text(&mut self, words: Words) -> Rect {
        let bounds = words.bounds();
        if !words.text.is_empty() {
            self.shapes.push(Shape::Text(words));
        }
        bounds
    }

    /// Horizontal text centred on `at`.
    pub fn label(&mut self, text: &str, at: Point, size: f64, ink: Ink) -> Rect {
        self.text(Words {
            text: text.to_owned(),
            at,
            size,
            ink,
            align: Align::Middle,
            upward: false,
        })
    }

    /// Horizontal text that starts or ends at `at`.
    pub fn side_label(&mut self, text: &str, at: Point, size: f64, ink: Ink, align: Align) -> Rect {
        self.text(Words {
            text: text.to_owned(),
            at,
            size,
            ink,
            align,
            upward: false,
        })
    }

    /// Boxes of all text drawn so far with the text itself.
    #[cfg(test)]
    pub fn text_boxes(&self) -> Vec<(String, Rect)> {
        let words = self.shapes.iter().filter_map(|shape| match shape {
            Shape::Text(words) => Some((words.text.clone(), words.bounds())),
            _ => None,
        });
        words.collect()
    }

    /// Centres of all discs in drawing order.
    #[cfg(test)]
    pub fn disc_centres(&self) -> Vec<Point> {
        let centres = self.shapes.iter().filter_map(|shape| match shape {
            Shape::Disc { centre, .. } => Some(*centre),
            _ => None,
        });
        centres.collect()
    }

    /// Renders the shapes on a white ground of the given size in pixels.
    pub fn finish(
        &self,
        width: f64,
        height: f64,
        caption: &Caption,
    ) -> Result<String, FigureError> {
        ensure_registered()?;
        let (w, h) = (width.round().max(1.0), height.round().max(1.0));
        let units = ((w * UNITS) as u32, (h * UNITS) as u32);
        let mut svg = String::new();
        {
            let area = SVGBackend::with_string(&mut svg, units).into_drawing_area();
            area.fill(&RGBColor(WHITE.0, WHITE.1, WHITE.2))
                .map_err(refused)?;
            for shape in &self.shapes {
                draw_shape(&area, shape)?;
            }
            area.present().map_err(refused)?;
        }
        let body = svg.find('>').map_or("", |end| &svg[end + 1..]);
        Ok(header(w, h, units, caption) + body)
    }
}

fn refused<E: std::error::Error + Send + Sync>(error: DrawingAreaErrorKind<E>) -> FigureError {
    FigureError::Backend {
        reason: error.to_string(),
    }
}

fn header(width: f64, height: f64, units: (u32, u32), caption: &Caption) -> String {
    let mut text = format!(
        "<svg xmlns=\"http://www.w3.org/2000/svg\" role=\"img\" width=\"{width}\" height=\"{height}\" \
         viewBox=\"0 0 {} {}\" stroke-linejoin=\"round\" stroke-linecap=\"round\">\n<title>{}</title>\n",
        units.0,
        units.1,
        escape(&caption.title)
    );
    if !caption.description.is_empty() {
        text += &format!("<desc>{}</desc>", escape(&caption.description));
    }
    text
}

/// Text made safe for element content.
fn escape(text: &str) -> String {
    plain(text)
        .replace('&', "&amp;")
        .replace('<', "&lt;")
        .replace('>', "&gt;")
}

/// Replaces what XML 1.0 forbids (section 2.2, `Char`) and turns every white space into a plain space.
fn plain(text: &str) -> String {
    let keep = |c: char| match c {
        '\t' | '\n' | '\r' => ' ',
        '\u{0}'..='\u{1f}' | '\u{7f}'..='\u{9f}' | '\u{fffe}' | '\u{ffff}' => '\u{fffd}',
        other => other,
    };
    text.chars().map(keep).collect()
}

fn unit_point(p: Point) -> (i32, i32) {
    let convert = |v: f64| (v.clamp(-PIXEL_LIMIT, PIXEL_LIMIT) * UNITS).round() as i32;
    (convert(p[0]), convert(p[1]))
}

fn shape_style(ink: Ink, opacity: f64, filled: bool, width: f64) -> ShapeStyle {
    ShapeStyle {
        color: RGBColor(ink.0, ink.1, ink.2).mix(opacity),
        filled,
        stroke_width: (width * UNITS).round() as u32,
    }
}

fn draw_shape(area: &DrawingArea<SVGBackend<'_>, Shift>, shape: &Shape) -> Result<(), FigureError> {
    let units = |points: &[Point]| points.iter().map(|&p| unit_point(p)).collect::<Vec<_>>();
    match shape {
        Shape::Fill {
            points,
            ink,
            opacity,
        } => area.draw(&Polygon::new(
            units(points),
            shape_style(*ink, *opacity, true, 0.0),
        )),
        Shape::Stroke {
            points,
            ink,
            width,
            opacity,
        } => area.draw(&PathElement::new(
            units(points),
            shape_style(*ink, *opacity, false, *width),
        )),
        Shape::Disc {
            centre,
            radius,
            ink,
        } => area.draw(&Circle::new(
            unit_point(*centre),
            (radius.max(0.0) * UNITS).round() as i32,
            shape_style(*ink, 1.0, true, 0.0),
        )),
        Shape::Text(words) => return draw_words(area, words),
    }
    .map_err(refused)
}

/// The backend writes `font-size` as its own size over 1.24 and, for vertically centred text, shifts the
/// baseline by half an x-height; a tenth of an em more centres capitals and digits instead.
fn draw_words(area: &DrawingArea<SVGBackend<'_>, Shift>, words: &Words) -> Result<(), FigureError> {
    let font = FontDesc::new(
        FontFamily::Name(FAMILY),
        words.size * UNITS * 1.24,
        FontStyle::Normal,
    );
    let horizontal = match words.align {
        Align::Left => HPos::Left,
        Align::Middle => HPos::Center,
        Align::Right => HPos::Right,
    };
    let nudge = 0.1 * words.size;
    let (turn, at) = if words.upward {
        (FontTransform::Rotate270, [words.at[0] + nudge, words.at[1]])
    } else {
        (FontTransform::None, [words.at[0], words.at[1] + nudge])
    };
    let colour = RGBColor(words.ink.0, words.ink.1, words.ink.2);
    let style = TextStyle::from(font)
        .color(&colour)
        .pos(Pos::new(horizontal, VPos::Center))
        .transform(turn);
    area.draw_text(&plain(&words.text), &style, unit_point(at))
        .map_err(refused)
}
