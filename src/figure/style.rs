//! Colours, strokes and text sizes that all pictures share.
//!
//! The inks are chosen so that neighbours in the list differ in hue for the common colour deficiencies
//! and in lightness, which keeps them apart in greyscale; every ink has a contrast of at least 3 : 1 with the
//! white ground (the level that WCAG 2 asks of graphics). The tests of this room recompute both.

/// A colour, 8 bits a channel, sRGB.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Ink(
    /// Red.
    pub u8,
    /// Green.
    pub u8,
    /// Blue.
    pub u8,
);

/// Widest canvas, in pixels.
pub const WIDTH: f64 = 900.0;
/// Text of axis labels, side letters and node names, in pixels.
pub const TEXT: f64 = 24.0;
/// Text of tick labels, curve names and corner numbers, in pixels.
pub const TICK_TEXT: f64 = 22.0;
/// Smallest text used, in pixels.
pub const SMALL_TEXT: f64 = 20.0;
/// Distance between lines of text, as a multiple of the text size.
pub const LINE_SPACING: f64 = 1.25;

/// Stroke width of curves and of other lines that carry the message, in pixels.
pub const BOLD_STROKE: f64 = 3.5;
/// Stroke width of outlines, in pixels.
pub const STROKE: f64 = 2.5;
/// Stroke width of axes and cell borders, in pixels.
pub const THIN_STROKE: f64 = 1.5;
/// Stroke width of grid lines and leaders, in pixels.
pub const HAIR_STROKE: f64 = 1.0;
/// Half the size of a marker, in pixels.
pub const MARKER: f64 = 5.5;

/// Text and outlines.
pub const BLACK: Ink = Ink(0x1b, 0x1f, 0x27);
/// Secondary text.
pub const GREY: Ink = Ink(0x55, 0x5c, 0x68);
/// Background lines such as lightly drawn copies.
pub const PALE: Ink = Ink(0xa9, 0xb0, 0xbb);
/// Grid lines.
pub const GRID: Ink = Ink(0xdf, 0xe2, 0xe8);
/// The ground.
pub const WHITE: Ink = Ink(0xff, 0xff, 0xff);
/// The light filling of tables.
pub const PAPER: Ink = Ink(0xf3, 0xf0, 0xe6);

/// Inks of curves and marked parts, dark and lighter in turn.
pub const INKS: [Ink; 7] = [
    Ink(0x12, 0x3c, 0x7c), // harbour blue
    Ink(0xd8, 0x6a, 0x12), // buoy orange
    Ink(0x0b, 0x5e, 0x55), // deep green
    Ink(0xc2, 0x5c, 0x9c), // heather
    Ink(0x5a, 0x1e, 0x3c), // wine
    Ink(0x2f, 0x93, 0xc4), // sky
    Ink(0x6b, 0x4a, 0x12), // rope brown
];

/// Light fillings of cells, told apart by lightness; dark text is legible on each.
pub const TINTS: [Ink; 6] = [
    Ink(0xfb, 0xf6, 0xe4), // cream
    Ink(0xf0, 0xbe, 0x80), // sand
    Ink(0xe4, 0xea, 0xbc), // reed
    Ink(0x78, 0x9d, 0xd0), // slate blue
    Ink(0xb8, 0xde, 0xe6), // mist
    Ink(0xdb, 0xa4, 0xc2), // thrift
];

/// The ink with this number; numbers beyond the list start again.
pub fn ink(number: usize) -> Ink {
    INKS[number % INKS.len()]
}

/// The filling with this number; numbers beyond the list start again.
pub fn tint(number: usize) -> Ink {
    TINTS[number % TINTS.len()]
}

/// Dash patterns (drawn and skipped lengths in turn, pixels), for the first, second … dashed curve.
/// Line ends are round, so a gap looks shorter by one stroke width.
pub(crate) const DASHES: [&[f64]; 3] = [&[11.0, 9.0], &[16.0, 9.0, 1.0, 9.0], &[5.0, 9.0]];
/// The dotted pattern: round dots.
pub(crate) const DOTS: &[f64] = &[0.1, 8.0];

/// Shape of the points of a series, so that curves differ without colour.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Marker {
    Disc,
    Square,
    Triangle,
    Ring,
    Diamond,
    Cross,
}

/// Markers in the order of the series.
pub(crate) const MARKERS: [Marker; 6] = [
    Marker::Disc,
    Marker::Square,
    Marker::Triangle,
    Marker::Ring,
    Marker::Diamond,
    Marker::Cross,
];
