use crate::Image;
use png::{BitDepth, ColorType, Compression, Encoder, SrgbRenderingIntent};

/// The bytes of a PNG file of a picture, marked as sRGB.
///
/// # Panics
///
/// If the picture has no pixels at all, which a PNG cannot hold, or not as many as its size says.
#[track_caller]
pub fn encode_png(image: &Image) -> Vec<u8> {
    let mut file = Vec::new();
    let mut encoder = Encoder::new(&mut file, image.size.width, image.size.height);
    encoder.set_color(ColorType::Rgba);
    encoder.set_depth(BitDepth::Eight);
    encoder.set_compression(Compression::Fast);
    encoder.set_source_srgb(SrgbRenderingIntent::Perceptual);
    encoder
        .write_header()
        .and_then(|mut writer| writer.write_image_data(&image.pixels))
        .expect("a picture has pixels, as many as its size says");
    file
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::{Colour, Size};

    #[test]
    fn what_is_written_can_be_read() {
        let mut image = Image::new(Size { width: 7, height: 5 }, Colour::new(1, 2, 3));
        image.pixels[4 * 9..4 * 10].copy_from_slice(&[200, 100, 50, 25]);
        let file = encode_png(&image);
        let mut reader = png::Decoder::new(std::io::Cursor::new(file)).read_info().unwrap();
        let mut pixels = vec![0; reader.output_buffer_size().unwrap()];
        let info = reader.next_frame(&mut pixels).unwrap();
        assert_eq!((info.width, info.height, info.color_type), (7, 5, ColorType::Rgba));
        assert_eq!(pixels, image.pixels);
    }
}
