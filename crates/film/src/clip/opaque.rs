use bedswell_painter::Image;

/// Lays a picture on white where it is not opaque.
pub(super) fn over_white(image: &mut Image) {
    for pixel in image.pixels.as_chunks_mut::<4>().0 {
        let alpha = u32::from(pixel[3]);
        if alpha < 255 {
            for channel in &mut pixel[..3] {
                *channel = ((u32::from(*channel) * alpha + 255 * (255 - alpha) + 127) / 255) as u8;
            }
            pixel[3] = 255;
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_painter::Size;

    #[test]
    fn clear_is_white_and_half_clear_is_half_way() {
        let mut image = Image {
            size: Size { width: 3, height: 1 },
            pixels: vec![10, 20, 30, 0, 0, 100, 255, 51, 10, 20, 30, 255],
        };
        over_white(&mut image);
        assert_eq!(image.pixels, [255, 255, 255, 255, 204, 224, 255, 255, 10, 20, 30, 255]);
    }
}
