//! The built-in font and the width of text in it.
//!
//! Labels are laid out before the viewer's fonts are known, so text is measured in DejaVu Sans, one of the
//! widest of the common faces: a viewer that substitutes another sans-serif leaves labels a little looser,
//! never overlapping. The family name written to the SVG is a list that ends in `sans-serif`.

use super::FigureError;
use plotters::style::{FontDesc, FontFamily, FontStyle, register_font};
use std::sync::OnceLock;

pub(super) static BYTES: &[u8] = include_bytes!("font/dejavu-sans-subset.ttf");

/// Family list written to the SVG; also the name under which the font is registered.
pub(crate) const FAMILY: &str = "DejaVu Sans, Verdana, Helvetica, Arial, sans-serif";

/// Line height over em of the font (`hhea` ascent 1901 and descent 483 over 2048 units): the font
/// layer scales by line height, SVG by em. A test compares the outcome with an advance width.
const HEIGHT_PER_EM: f64 = (1901.0 + 483.0) / 2048.0;

/// Widths are measured at this multiple of the size because the font layer truncates to whole pixels.
const MEASURE_SCALE: f64 = 64.0;

/// Registers the font once for the life of the process; must run before any text is drawn.
pub(crate) fn ensure_registered() -> Result<(), FigureError> {
    static DONE: OnceLock<bool> = OnceLock::new();
    if *DONE.get_or_init(|| register_font(FAMILY, FontStyle::Normal, BYTES).is_ok()) {
        Ok(())
    } else {
        Err(FigureError::Font {
            reason: "its bytes are not a font".to_owned(),
        })
    }
}

/// Width in pixels of `text` at `size` pixels per em.
///
/// Characters beyond the subset count one em each, the width of an ideograph: too wide rather than too narrow.
/// If the font cannot be used every character counts one em; drawing then reports the error.
pub(crate) fn text_width(text: &str, size: f64) -> f64 {
    let known: String = text.chars().filter(|&c| is_covered(c)).collect();
    let unknown = text.chars().count() - known.chars().count();
    let measured = ensure_registered().ok().and_then(|()| {
        let px = size * HEIGHT_PER_EM * MEASURE_SCALE;
        FontDesc::new(FontFamily::Name(FAMILY), px, FontStyle::Normal)
            .layout_box(&known)
            .ok()
    });
    let known_width = match measured {
        Some(((left, _), (right, _))) => f64::from(right - left) / MEASURE_SCALE,
        None => known.chars().count() as f64 * size,
    };
    known_width + unknown as f64 * size
}

/// Whether the subset has a glyph for this character (the list it was made from).
fn is_covered(c: char) -> bool {
    matches!(c,
        ' '..='~' | '\u{a0}'..='\u{ff}' | '\u{370}'..='\u{3ff}' | '\u{430}'..='\u{44f}' | '\u{451}'
        | '–' | '—' | '‘' | '’' | '“' | '”' | '…' | '′' | '\u{2070}' | '\u{2074}'..='\u{207b}' | 'ⁿ'
        | '\u{2080}'..='\u{2089}' | 'ₙ' | '←'..='↓' | '−' | '√' | '∞' | '≈' | '≠' | '≤' | '≥' | '⋅' | '∕')
}

/// `text` cut with an ellipsis so that it is at most `limit` pixels wide.
pub(crate) fn shorten(text: &str, size: f64, limit: f64) -> String {
    if text_width(text, size) <= limit {
        return text.to_owned();
    }
    let mut kept: Vec<char> = text.chars().collect();
    // Ends because every round removes a character.
    while kept.pop().is_some() {
        let cut: String = kept.iter().collect::<String>().trim_end().to_owned() + "…";
        if text_width(&cut, size) <= limit {
            return cut;
        }
    }
    "…".to_owned()
}

/// Breaks `text` at spaces into lines at most `limit` pixels wide; a longer word is shortened.
pub(crate) fn wrap(text: &str, size: f64, limit: f64) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for word in text.split_whitespace() {
        let word = shorten(word, size, limit);
        if let Some(line) = lines.last_mut() {
            let joined = format!("{line} {word}");
            if text_width(&joined, size) <= limit {
                *line = joined;
                continue;
            }
        }
        lines.push(word);
    }
    lines
}
