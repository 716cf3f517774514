//! The dark variant of the pictures: style rules that give each ink its dark counterpart.
//!
//! A picture uses the inks of [`style`](super::style) and no other, as attributes. A page that inlines it can
//! therefore redraw it for dark mode without a second copy. The ground and the light fillings become dark, text and lines
//! light; fillings keep their order of lightness reversed, so cells stay apart. The tests recompute the contrast of every pair that
//! meets: inks on the ground, and text on fillings.

use super::style::{BLACK, GREY, GRID, INKS, Ink, PALE, PAPER, TINTS, WHITE};

/// The dark ground.
pub const DARK_GROUND: Ink = Ink(0x14, 0x18, 0x1f);

/// Inks of the light style with their dark counterparts.
pub fn dark_inks() -> Vec<(Ink, Ink)> {
    let inks = [
        Ink(0x7f, 0xad, 0xf2),
        Ink(0xf2, 0x98, 0x4a),
        Ink(0x4f, 0xbf, 0xb0),
        Ink(0xe3, 0x8e, 0xc4),
        Ink(0xd0, 0x86, 0xa8),
        Ink(0x5f, 0xc0, 0xee),
        Ink(0xc9, 0x9f, 0x5a),
    ];
    let tints = [
        Ink(0x2a, 0x2c, 0x2c),
        Ink(0x7a, 0x4a, 0x14),
        Ink(0x44, 0x50, 0x1e),
        Ink(0x2b, 0x50, 0x88),
        Ink(0x1d, 0x46, 0x50),
        Ink(0x70, 0x36, 0x58),
    ];
    let mut all = vec![
        (WHITE, DARK_GROUND),
        (BLACK, Ink(0xe4, 0xe8, 0xee)),
        (GREY, Ink(0xb0, 0xb8, 0xc4)),
        (PALE, Ink(0x6c, 0x75, 0x82)),
        (GRID, Ink(0x2e, 0x35, 0x3f)),
        (PAPER, Ink(0x26, 0x2a, 0x30)),
    ];
    all.extend(INKS.into_iter().zip(inks));
    all.extend(TINTS.into_iter().zip(tints));
    all
}

fn hex(ink: Ink) -> String {
    format!("#{:02X}{:02X}{:02X}", ink.0, ink.1, ink.2)
}

/// Style rules that redraw the pictures under a selector in dark inks.
pub fn dark_rules(selector: &str) -> String {
    let mut rules = String::new();
    for (light, dark) in dark_inks() {
        let (light, dark) = (hex(light), hex(dark));
        rules += &format!(
            "{selector} [fill=\"{light}\"] {{ fill: {dark}; }}\n{selector} [stroke=\"{light}\"] {{ stroke: {dark}; }}\n"
        );
    }
    rules
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Relative luminance and contrast as WCAG 2 defines them.
    fn luminance(ink: Ink) -> f64 {
        let channel = |v: u8| {
            let v = f64::from(v) / 255.0;
            if v <= 0.04045 {
                v / 12.92
            } else {
                ((v + 0.055) / 1.055).powf(2.4)
            }
        };
        0.2126 * channel(ink.0) + 0.7152 * channel(ink.1) + 0.0722 * channel(ink.2)
    }

    fn contrast(a: Ink, b: Ink) -> f64 {
        let (a, b) = (luminance(a), luminance(b));
        (a.max(b) + 0.05) / (a.min(b) + 0.05)
    }

    fn dark(light: Ink) -> Ink {
        let found = dark_inks().into_iter().find(|(l, _)| *l == light);
        found.expect("every ink has a dark counterpart").1
    }

    #[test]
    fn dark_pictures_are_legible() {
        for ink in INKS.into_iter().chain([PALE]) {
            let found = contrast(dark(ink), DARK_GROUND);
            assert!(found >= 3.0, "{ink:?}: {found}");
        }
        for text in [BLACK, GREY] {
            for ground in [WHITE, PAPER] {
                assert!(contrast(dark(text), dark(ground)) >= 4.5);
            }
        }
        for tint in TINTS {
            let found = contrast(dark(BLACK), dark(tint));
            assert!(found >= 4.5, "{tint:?}: {found}");
        }
        let letters = contrast(dark(INKS[0]), dark(PAPER));
        assert!(letters >= 4.5, "{letters}");
    }

    #[test]
    fn each_ink_has_one_rule_and_no_other_meaning() {
        let mut light: Vec<String> = dark_inks().iter().map(|(l, _)| hex(*l)).collect();
        light.sort();
        light.dedup();
        assert_eq!(light.len(), 6 + INKS.len() + TINTS.len());
        let rules = dark_rules("svg");
        assert!(rules.contains("svg [fill=\"#FFFFFF\"] { fill: #14181F; }"));
    }
}
