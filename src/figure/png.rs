//! Pictures of this room as PNG.
//!
//! The SVG text of a picture is read back and drawn by an anti-aliasing rasteriser. Every picture goes through one
//! writer (the canvas), which uses few kinds of elements: a ground, polygons, open lines, discs and lines of text, all with
//! plain attributes and without nesting. So they are read here directly, and whatever else a picture
//! should hold one day is refused, never left out. Text is drawn from the outlines of the built-in font, the one that labels are
//! measured with, so it lies as it was laid out, with no fonts of the machine.
//!
//! Considered: the bitmap backend of `plotters` draws thick lines and discs without smooth edges; a full SVG renderer
//! brings some fifty more crates for what this file does with the rasteriser that such a renderer uses.
//!
//! Cost: memory of 4 bytes a pixel; time linear in the pixels, and in the points drawn.

use super::FigureError;
use super::font::BYTES;
use ab_glyph::{Font, FontRef, GlyphId, OutlineCurve};
use quick_xml::Reader;
use quick_xml::events::{BytesStart, Event};
use std::collections::BTreeMap;
use tiny_skia::{
    Color, FillRule, LineCap, LineJoin, Paint, Path, PathBuilder, Pixmap, Stroke, Transform,
};

/// The widest picture in pixels.
pub const WIDEST: u32 = 8192;
/// The most pixels of a picture: 256 MiB while it is drawn.
const MOST_PIXELS: u64 = 1 << 26;

/// Height of `x` over em in the built-in font (1120 of 2048 units); the writer centres text by half of it.
const X_HEIGHT: f32 = 1120.0 / 2048.0;

/// A picture of this room, given as its SVG text, as the bytes of a PNG file `width` pixels wide.
///
/// The same text and width give the same bytes. The picture keeps its proportions; the ground is white.
///
/// # Errors
/// When the width is 0 or above [`WIDEST`], the picture would have more than 2²⁶ pixels, or the text is none of this
/// room's pictures.
pub fn from_svg(svg: &str, width: u32) -> Result<Vec<u8>, FigureError> {
    let (view_width, view_height) = view_box(svg)?;
    let scale = width as f32 / view_width;
    let height = (view_height * scale).round().max(1.0);
    if width == 0 || width > WIDEST || f64::from(width) * f64::from(height) > MOST_PIXELS as f64 {
        return Err(FigureError::BadPixels {
            width,
            widest: WIDEST,
        });
    }
    let mut pixmap = Pixmap::new(width, height as u32).ok_or(FigureError::BadPixels {
        width,
        widest: WIDEST,
    })?;
    pixmap.fill(Color::WHITE);
    let font = FontRef::try_from_slice(BYTES).map_err(|e| FigureError::Font {
        reason: e.to_string(),
    })?;
    let mut sheet = Sheet {
        pixmap,
        to_pixels: Transform::from_scale(scale, scale),
        font,
    };
    sheet.draw_all(svg)?;
    sheet.pixmap.encode_png().map_err(|e| FigureError::Backend {
        reason: e.to_string(),
    })
}

fn unreadable(reason: impl Into<String>) -> FigureError {
    FigureError::NotAPicture {
        reason: reason.into(),
    }
}

/// Width and height of the `viewBox`.
fn view_box(svg: &str) -> Result<(f32, f32), FigureError> {
    let mut reader = Reader::from_str(svg);
    loop {
        match reader.read_event().map_err(|e| unreadable(e.to_string()))? {
            Event::Start(element) if element.name().as_ref() == "svg" => {
                let attributes = Attributes::of(&element)?;
                let view = numbers(attributes.text("viewBox")?)?;
                return match view[..] {
                    [0.0, 0.0, w, h] if w > 0.0 && h > 0.0 => Ok((w, h)),
                    _ => Err(unreadable("its viewBox does not begin at 0, 0")),
                };
            }
            Event::Eof => return Err(unreadable("it has no svg element")),
            Event::Start(_) | Event::Empty(_) => {
                return Err(unreadable("its first element is not svg"));
            }
            _ => {}
        }
    }
}

/// The attributes of an element, by name.
struct Attributes {
    element: String,
    values: BTreeMap<String, String>,
}

impl Attributes {
    fn of(element: &BytesStart<'_>) -> Result<Attributes, FigureError> {
        let mut values = BTreeMap::new();
        for attribute in element.attributes() {
            let attribute = attribute.map_err(|e| unreadable(e.to_string()))?;
            values.insert(
                attribute.key.as_ref().into(),
                attribute.value.as_ref().into(),
            );
        }
        let element = element.name().as_ref().into();
        Ok(Attributes { element, values })
    }

    fn text(&self, name: &str) -> Result<&str, FigureError> {
        let value = self.values.get(name).map(String::as_str);
        value.ok_or_else(|| unreadable(format!("an element {} has no {name}", self.element)))
    }

    fn number(&self, name: &str) -> Result<f32, FigureError> {
        number(self.text(name)?)
    }

    /// The colour that an attribute names, with the element's opacity; `None` for `none`.
    fn paint(&self, name: &str) -> Result<Option<Paint<'static>>, FigureError> {
        let text = self.text(name)?;
        if text == "none" {
            return Ok(None);
        }
        let digits = text.strip_prefix('#').filter(|d| d.len() == 6);
        let code = digits.and_then(|d| u32::from_str_radix(d, 16).ok());
        let code = code.ok_or_else(|| unreadable(format!("`{text}` is not a colour")))?;
        let [_, red, green, blue] = code.to_be_bytes();
        let opacity = self.number("opacity")?.clamp(0.0, 1.0);
        let mut paint = Paint::default();
        paint.set_color_rgba8(red, green, blue, (opacity * 255.0).round() as u8);
        Ok(Some(paint))
    }
}

fn number(text: &str) -> Result<f32, FigureError> {
    let value = text.parse::<f32>().ok().filter(|v| v.is_finite());
    value.ok_or_else(|| unreadable(format!("`{text}` is not a number")))
}

/// Numbers between spaces, commas or parentheses.
fn numbers(text: &str) -> Result<Vec<f32>, FigureError> {
    let parts = text.split([' ', ',', '(', ')']);
    parts.filter(|p| !p.is_empty()).map(number).collect()
}

/// A text element under way.
struct Line {
    attributes: Attributes,
    text: String,
}

/// What is drawn on.
struct Sheet {
    pixmap: Pixmap,
    to_pixels: Transform,
    font: FontRef<'static>,
}

impl Sheet {
    fn draw_all(&mut self, svg: &str) -> Result<(), FigureError> {
        let mut reader = Reader::from_str(svg);
        let mut line: Option<Line> = None;
        // Titles and descriptions are for readers who cannot see the picture.
        let mut told = false;
        loop {
            match reader.read_event().map_err(|e| unreadable(e.to_string()))? {
                Event::Eof => return Ok(()),
                Event::Start(element) => match element.name().as_ref() {
                    "svg" => {}
                    "title" | "desc" => told = true,
                    "text" => {
                        line = Some(Line {
                            attributes: Attributes::of(&element)?,
                            text: String::new(),
                        });
                    }
                    _ => self.shape(&Attributes::of(&element)?)?,
                },
                Event::Empty(element) => self.shape(&Attributes::of(&element)?)?,
                Event::End(element) => match element.name().as_ref() {
                    "title" | "desc" => told = false,
                    "text" => {
                        if let Some(line) = line.take() {
                            self.words(&line)?;
                        }
                    }
                    _ => {}
                },
                Event::Text(text) if !told => {
                    if let Some(line) = &mut line {
                        line.text += text.as_ref();
                    }
                }
                Event::GeneralRef(name) if !told => {
                    if let Some(line) = &mut line {
                        line.text.push(referred(name.as_ref())?);
                    }
                }
                _ => {}
            }
        }
    }

    fn shape(&mut self, attributes: &Attributes) -> Result<(), FigureError> {
        let mut builder = PathBuilder::new();
        match attributes.element.as_str() {
            "rect" => {
                let [x, y, w, h] = ["x", "y", "width", "height"].map(|n| attributes.number(n));
                let (x, y, w, h) = (x?, y?, w?, h?);
                polygon(&mut builder, &[x, y, x + w, y, x + w, y + h, x, y + h]);
                builder.close();
            }
            "polygon" => {
                polygon(&mut builder, &numbers(attributes.text("points")?)?);
                builder.close();
            }
            "polyline" => polygon(&mut builder, &numbers(attributes.text("points")?)?),
            "circle" => {
                let (x, y) = (attributes.number("cx")?, attributes.number("cy")?);
                builder.push_circle(x, y, attributes.number("r")?);
            }
            other => return Err(unreadable(format!("it has an element {other}"))),
        }
        // Nothing to see, such as a disc of radius 0.
        let Some(path) = builder.finish() else {
            return Ok(());
        };
        if let Some(paint) = attributes.paint("fill")? {
            self.fill(&path, &paint, self.to_pixels);
        }
        let outlined = attributes.values.contains_key("stroke");
        if let Some(paint) = outlined
            .then(|| attributes.paint("stroke"))
            .transpose()?
            .flatten()
        {
            let stroke = Stroke {
                width: attributes.number("stroke-width")?,
                line_cap: LineCap::Round,
                line_join: LineJoin::Round,
                ..Stroke::default()
            };
            self.pixmap
                .stroke_path(&path, &paint, &stroke, self.to_pixels, None);
        }
        Ok(())
    }

    fn fill(&mut self, path: &Path, paint: &Paint<'_>, transform: Transform) {
        self.pixmap
            .fill_path(path, paint, FillRule::Winding, transform, None);
    }

    /// A line of text; its anchor is on the middle of the height of `x`.
    fn words(&mut self, line: &Line) -> Result<(), FigureError> {
        let attributes = &line.attributes;
        let size = attributes.number("font-size")?;
        let (x, y) = (attributes.number("x")?, attributes.number("y")?);
        if attributes.text("dy")? != "0.5ex" {
            return Err(unreadable("a line of text is not centred on its height"));
        }
        let turn = match attributes.values.get("transform") {
            None => Transform::identity(),
            Some(text) => match text
                .strip_prefix("rotate")
                .map(numbers)
                .transpose()?
                .as_deref()
            {
                Some(&[angle, x, y]) => Transform::from_rotate_at(angle, x, y),
                _ => return Err(unreadable(format!("`{text}` is not a rotation"))),
            },
        };
        let (outline, width) = outlined(&self.font, line.text.trim(), size);
        let start = match attributes.text("text-anchor")? {
            "start" => x,
            "middle" => x - width / 2.0,
            "end" => x - width,
            other => return Err(unreadable(format!("`{other}` is not an anchor"))),
        };
        let place = Transform::from_translate(start, y + 0.5 * X_HEIGHT * size);
        if let (Some(path), Some(paint)) = (outline, attributes.paint("fill")?) {
            let all = self.to_pixels.pre_concat(turn).pre_concat(place);
            self.fill(&path, &paint, all);
        }
        Ok(())
    }
}

/// The character that a reference such as `&amp;` stands for.
fn referred(name: &str) -> Result<char, FigureError> {
    match name {
        "amp" => Ok('&'),
        "lt" => Ok('<'),
        "gt" => Ok('>'),
        "quot" => Ok('"'),
        "apos" => Ok('\''),
        _ => Err(unreadable("it has a character reference of its own")),
    }
}

fn polygon(builder: &mut PathBuilder, coordinates: &[f32]) {
    for (i, point) in coordinates.chunks_exact(2).enumerate() {
        match i {
            0 => builder.move_to(point[0], point[1]),
            _ => builder.line_to(point[0], point[1]),
        }
    }
}

/// The outlines of a line of text that begins at the origin, and its width. Characters that the font lacks are boxes one em
/// wide, as they were laid out.
fn outlined(font: &FontRef<'_>, text: &str, size: f32) -> (Option<Path>, f32) {
    let units = font.units_per_em().unwrap_or(2048.0);
    let scale = size / units;
    let mut builder = PathBuilder::new();
    let (mut at, mut before) = (0.0, None);
    for c in text.chars() {
        let glyph = font.glyph_id(c);
        at += before.map_or(0.0, |b| font.kern_unscaled(b, glyph));
        if let Some(outline) = font.outline(glyph) {
            curves(&mut builder, &outline.curves, at, scale);
        }
        let missing = glyph == GlyphId(0);
        at += if missing {
            units
        } else {
            font.h_advance_unscaled(glyph)
        };
        before = Some(glyph);
    }
    (builder.finish(), at * scale)
}

/// Adds the contours of a glyph; font units have y upward.
fn curves(builder: &mut PathBuilder, curves: &[OutlineCurve], at: f32, scale: f32) {
    let place = |p: ab_glyph::Point| ((at + p.x) * scale, -p.y * scale);
    let mut pen = None;
    for curve in curves {
        let (from, to) = match curve {
            OutlineCurve::Line(a, b) => (*a, *b),
            OutlineCurve::Quad(a, _, b) => (*a, *b),
            OutlineCurve::Cubic(a, _, _, b) => (*a, *b),
        };
        if pen != Some(from) {
            if pen.is_some() {
                builder.close();
            }
            let (x, y) = place(from);
            builder.move_to(x, y);
        }
        let (x, y) = place(to);
        match curve {
            OutlineCurve::Line(..) => builder.line_to(x, y),
            OutlineCurve::Quad(_, c, _) => {
                let (cx, cy) = place(*c);
                builder.quad_to(cx, cy, x, y);
            }
            OutlineCurve::Cubic(_, c, d, _) => {
                let ((cx, cy), (dx, dy)) = (place(*c), place(*d));
                builder.cubic_to(cx, cy, dx, dy, x, y);
            }
        }
        pen = Some(to);
    }
    if pen.is_some() {
        builder.close();
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::figure::font::text_width;

    fn font() -> FontRef<'static> {
        FontRef::try_from_slice(BYTES).expect("the built-in font")
    }

    #[test]
    fn the_height_of_x_is_that_of_the_font() {
        let font = font();
        let outline = font.outline(font.glyph_id('x')).expect("x has an outline");
        let units = font.units_per_em().expect("a scalable font");
        assert_eq!(
            outline.bounds.min.y.max(outline.bounds.max.y),
            X_HEIGHT * units
        );
    }

    #[test]
    fn text_is_as_wide_as_it_was_laid_out() {
        for text in ["p(n)/n³", "Wolke 17", "αβγ ≤ 1", ""] {
            let (_, width) = outlined(&font(), text, 24.0);
            let laid_out = text_width(text, 24.0) as f32;
            assert!(
                (width - laid_out).abs() <= 0.05 * laid_out + 0.5,
                "{text}: {width}, {laid_out}"
            );
        }
    }

    #[test]
    fn other_elements_are_refused() {
        let svg = |inner: &str| format!("<svg viewBox=\"0 0 100 50\">{inner}</svg>");
        assert!(from_svg(&svg(""), 100).is_ok());
        for (text, told) in [
            (svg("<path d=\"M 0 0\"/>"), "path"),
            (
                svg("<rect x=\"0\" y=\"0\" width=\"1\" height=\"one\"/>"),
                "one",
            ),
            (
                svg("<circle cx=\"0\" cy=\"0\" r=\"1\" fill=\"red\" opacity=\"1\"/>"),
                "red",
            ),
            ("<html/>".into(), "svg"),
            (String::new(), "svg"),
        ] {
            let fault = from_svg(&text, 100).expect_err("refused").to_string();
            assert!(fault.contains(told), "{fault}");
        }
        for width in [0, WIDEST + 1] {
            assert!(matches!(
                from_svg(&svg(""), width),
                Err(FigureError::BadPixels { .. })
            ));
        }
        let tall = "<svg viewBox=\"0 0 1 100000\"></svg>";
        assert!(matches!(
            from_svg(tall, 1000),
            Err(FigureError::BadPixels { .. })
        ));
    }

    /// Colours of pixels of a picture with one shape of each kind.
    #[test]
    fn shapes_lie_where_they_are_written() {
        let svg = "<svg viewBox=\"0 0 100 50\">\
            <rect x=\"0\" y=\"0\" width=\"100\" height=\"50\" opacity=\"1\" fill=\"#FFFFFF\" stroke=\"none\"/>\
            <polygon opacity=\"0.5\" fill=\"#000000\" points=\"0,0 20,0 20,20 0,20 \"/>\
            <circle cx=\"60\" cy=\"25\" r=\"10\" opacity=\"1\" fill=\"#FF0000\" stroke=\"none\" stroke-width=\"0\"/>\
            <polyline fill=\"none\" opacity=\"1\" stroke=\"#0000FF\" stroke-width=\"4\" points=\"80,0 80,50 \"/>\
            <text x=\"40\" y=\"40\" dy=\"0.5ex\" text-anchor=\"middle\" font-size=\"20\" opacity=\"1\" fill=\"#008000\">\nl&lt;\n</text></svg>";
        let bytes = from_svg(svg, 200).expect("drawn");
        let picture = Pixmap::decode_png(&bytes).expect("a PNG");
        assert_eq!((picture.width(), picture.height()), (200, 100));
        let colour = |x: u32, y: u32| {
            let p = picture.pixel(x, y).expect("inside").demultiply();
            [p.red(), p.green(), p.blue()]
        };
        assert!(colour(20, 20).iter().all(|c| c.abs_diff(127) <= 1));
        assert_eq!(colour(120, 50), [255, 0, 0]);
        assert_eq!(colour(160, 90), [0, 0, 255]);
        assert_eq!(colour(100, 10), [255, 255, 255]);
        let green =
            |x0: u32, x1: u32| (x0..x1).any(|x| (60..100).any(|y| colour(x, y) == [0, 128, 0]));
        assert!(green(60, 80) && green(80, 100), "both characters are drawn");
        assert!(!green(100, 160));
    }
}
