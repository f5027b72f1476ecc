//! SVG to PNG, with the font built in, so that a picture looks the same on every machine.

use std::sync::Arc;

use resvg::{tiny_skia, usvg};

/// DejaVu Sans, cut down; origin and licence in `fonts/README.md`.
const FONT: &[u8] = include_bytes!("fonts/DejaVuSans-subset.ttf");
const FAMILY: &str = "DejaVu Sans";

/// Narrowest and widest picture, pixels.
pub const WIDTH_PX: (u32, u32) = (200, 8000);

/// Why there is no picture.
#[derive(Debug, thiserror::Error)]
pub enum PictureError {
    /// The drawing is not SVG.
    #[error("the drawing cannot be read: {0}")]
    Drawing(#[from] usvg::Error),
    /// The size cannot be made.
    #[error("a picture of {width} x {height} pixels cannot be made; choose a smaller width")]
    Size {
        /// Pixels across.
        width: u32,
        /// Pixels down.
        height: u32,
    },
    /// The picture cannot be written as PNG.
    #[error("the picture cannot be written: {0}")]
    Encoding(String),
}

/// Renders an SVG as PNG, `width_px` pixels across, the height following.
///
/// # Errors
/// When the SVG cannot be read or the size cannot be made.
pub fn png(svg: &str, width_px: u32) -> Result<Vec<u8>, PictureError> {
    let mut fonts = usvg::fontdb::Database::new();
    fonts.load_font_data(FONT.to_vec());
    fonts.set_sans_serif_family(FAMILY);
    let options = usvg::Options { font_family: FAMILY.to_owned(), fontdb: Arc::new(fonts), ..usvg::Options::default() };
    let tree = usvg::Tree::from_str(svg, &options)?;
    let scale = width_px as f32 / tree.size().width();
    let height_px = (tree.size().height() * scale).round() as u32;
    let mut pixels =
        tiny_skia::Pixmap::new(width_px, height_px).ok_or(PictureError::Size { width: width_px, height: height_px })?;
    resvg::render(&tree, tiny_skia::Transform::from_scale(scale, scale), &mut pixels.as_mut());
    pixels.encode_png().map_err(|e| PictureError::Encoding(e.to_string()))
}

#[cfg(test)]
mod tests {
    use super::*;

    const DRAWING: &str = "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 300 100\" width=\"300\" height=\"100\">\
                           <rect width=\"300\" height=\"100\" fill=\"#ffffff\"/>\
                           <text x=\"10\" y=\"60\" font-family=\"sans-serif\" font-size=\"40\">Mm Ωж</text></svg>";

    #[test]
    fn a_drawing_becomes_a_picture_of_the_asked_width_with_its_text() {
        let bytes = png(DRAWING, 600).expect("a picture");
        let picture = tiny_skia::Pixmap::decode_png(&bytes).expect("PNG");
        assert_eq!((picture.width(), picture.height()), (600, 200));
        let dark = picture.pixels().iter().filter(|p| p.red() < 64).count();
        assert!(dark > 1500, "the text is missing: {dark} dark pixels");
        assert_eq!(bytes, png(DRAWING, 600).expect("a picture"), "the same drawing gives the same bytes");
    }

    #[test]
    fn what_is_no_drawing_is_an_error() {
        assert!(matches!(png("no svg", 600), Err(PictureError::Drawing(_))));
    }
}
