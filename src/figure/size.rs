//! The size of a picture on paper.
//!
//! A picture is drawn 900 pixels wide at most, with text of 20 pixels at least. Its printed size is that of its root element, and
//! only that changes here: at column width (88 mm) the smallest text is 5.5 points high, at page width (180 mm) 11 points.

/// Where a picture is to be printed.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum PictureSize {
    /// In pixels, for screens.
    #[default]
    Screen,
    /// 88 mm, one of two columns.
    Column,
    /// 180 mm, a whole page.
    Page,
}

impl PictureSize {
    /// Millimetres that the widest picture takes.
    fn millimetres(self) -> Option<f64> {
        match self {
            PictureSize::Screen => None,
            PictureSize::Column => Some(88.0),
            PictureSize::Page => Some(180.0),
        }
    }
}

/// Sets the size of the root element; the drawing itself, given by its `viewBox`, stays as it is. All pictures of
/// one size have text of one size: narrower drawings become narrower pictures.
pub fn sized(svg: &str, size: PictureSize) -> String {
    let Some(widest) = size.millimetres() else {
        return svg.into();
    };
    let unit = widest / super::style::WIDTH;
    let mut text = svg.to_string();
    for attribute in ["width", "height"] {
        let head = text.find('>').unwrap_or(0);
        let name = format!(" {attribute}=\"");
        let Some(start) = text[..head].find(&name).map(|at| at + name.len()) else {
            continue;
        };
        let Some(end) = text[start..].find('"').map(|at| start + at) else {
            continue;
        };
        if let Ok(pixels) = text[start..end].parse::<f64>() {
            text.replace_range(start..end, &format!("{:.2}mm", pixels * unit));
        }
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn only_the_root_changes() {
        let svg = "<svg width=\"900\" height=\"450\" viewBox=\"0 0 9000 4500\"><rect width=\"900\"/></svg>";
        assert_eq!(sized(svg, PictureSize::Screen), svg);
        assert_eq!(
            sized(svg, PictureSize::Column),
            "<svg width=\"88.00mm\" height=\"44.00mm\" viewBox=\"0 0 9000 4500\"><rect width=\"900\"/></svg>"
        );
        assert!(
            sized(svg, PictureSize::Page).starts_with("<svg width=\"180.00mm\" height=\"90.00mm\"")
        );
    }
}
