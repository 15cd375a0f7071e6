use ab_glyph::{Font, FontRef, GlyphId, OutlinedGlyph, PxScale, point};
use epaint_default_fonts::{HACK_REGULAR, NOTO_EMOJI_REGULAR, UBUNTU_LIGHT};
use std::sync::LazyLock;

/// The fonts, the first that has a letter draws it.
static FONTS: LazyLock<[FontRef<'static>; 3]> = LazyLock::new(|| {
    [UBUNTU_LIGHT, HACK_REGULAR, NOTO_EMOJI_REGULAR]
        .map(|font| FontRef::try_from_slice(font).expect("a bundled font can be read"))
});

/// Width of a line of text (pixels) with `size` pixels from base line to base line.
pub fn text_width(text: &str, size: f32) -> f32 {
    letters(text, size).last().map_or(0.0, |letter| letter.after)
}

/// The outlines of a line of text that starts at a place on its base line (pixels).
pub(crate) fn outlines(text: &str, size: f32, from: [f32; 2]) -> Vec<OutlinedGlyph> {
    letters(text, size)
        .filter_map(|letter| {
            let place = point(from[0] + letter.before, from[1]);
            letter.font.outline_glyph(letter.glyph.with_scale_and_position(letter.scale, place))
        })
        .collect()
}

struct Letter {
    font: &'static FontRef<'static>,
    glyph: GlyphId,
    scale: PxScale,
    before: f32,
    after: f32,
}

/// The letters of a line, each with where it starts and ends.
fn letters(text: &str, size: f32) -> impl Iterator<Item = Letter> {
    let fonts = &*FONTS;
    let em = size / height_in_ems(&fonts[0]);
    let mut end = 0.0;
    let mut last: Option<(usize, GlyphId)> = None;
    text.chars().filter(|letter| !letter.is_control()).map(move |letter| {
        let which = fonts.iter().position(|font| font.glyph_id(letter).0 != 0).unwrap_or(0);
        let font = &fonts[which];
        let glyph = font.glyph_id(letter);
        let unit = em / font.units_per_em().unwrap_or(1000.0);
        let kerning = match last {
            Some((before, other)) if before == which => unit * font.kern_unscaled(other, glyph),
            _ => 0.0,
        };
        last = Some((which, glyph));
        let before = end + kerning;
        end = before + unit * font.h_advance_unscaled(glyph);
        Letter { font, glyph, scale: PxScale::from(em * height_in_ems(font)), before, after: end }
    })
}

fn height_in_ems(font: &FontRef<'_>) -> f32 {
    font.height_unscaled() / font.units_per_em().unwrap_or(1000.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn scientific_signs_have_glyphs() {
        for sign in "AZaz09·²³−–×°µμλσΔ→φχπ≤≥±√½%‰".chars() {
            assert!(FONTS.iter().any(|font| font.glyph_id(sign).0 != 0), "no font has {sign}");
        }
    }

    #[test]
    fn width_grows_with_size_and_letters() {
        let width = text_width("swelling", 16.0);
        assert!((text_width("swelling", 32.0) / width - 2.0).abs() < 1e-4);
        assert!(text_width("swellings", 16.0) > width);
        assert_eq!(text_width("", 16.0), 0.0);
    }
}
