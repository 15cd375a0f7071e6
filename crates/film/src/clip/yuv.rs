use bedswell_painter::{Image, Size};
use openh264::formats::YUVSource;

/// A picture as luma and halved chroma planes, BT.709 with 16 to 235 for black to white.
pub(super) struct Yuv {
    size: Size,
    luma: Vec<u8>,
    blue: Vec<u8>,
    red: Vec<u8>,
}

/// Luma and chroma per unit of red, green and blue (ITU-R BT.709-6, items 3.2 to 3.5,
/// scaled from 0..255 to 219 and 224 steps), in 1/65536; chroma rows sum to zero so that
/// greys stay grey.
const LUMA: [i32; 3] = [11966, 40254, 4064];
const BLUE: [i32; 3] = [-6596, -22189, 28785];
const RED: [i32; 3] = [28785, -26145, -2640];
const HALF: i32 = 1 << 15;

impl Yuv {
    /// An empty picture; both sides are even.
    pub(super) fn new(size: Size) -> Self {
        let pixels = size.width as usize * size.height as usize;
        Self { size, luma: vec![0; pixels], blue: vec![0; pixels / 4], red: vec![0; pixels / 4] }
    }

    /// Takes over a picture at least as large; what is beyond is left out.
    pub(super) fn fill(&mut self, image: &Image) {
        let width = self.size.width as usize;
        let stride = 4 * image.size.width as usize;
        let pairs = image.pixels.chunks_exact(2 * stride);
        let luma = self.luma.chunks_exact_mut(2 * width);
        let chroma = self.blue.chunks_exact_mut(width / 2).zip(self.red.chunks_exact_mut(width / 2));
        for ((rows, luma), (blue, red)) in pairs.zip(luma).zip(chroma) {
            let (upper, lower) = rows.split_at(stride);
            let (upper, lower) = (&upper[..4 * width], &lower[..4 * width]);
            for (row, luma) in [upper, lower].into_iter().zip(luma.chunks_exact_mut(width)) {
                for (pixel, luma) in row.as_chunks::<4>().0.iter().zip(luma) {
                    let sum = weigh(LUMA, [pixel[0].into(), pixel[1].into(), pixel[2].into()]);
                    *luma = (16 + ((sum + HALF) >> 16)) as u8;
                }
            }
            let blocks = upper.as_chunks::<8>().0.iter().zip(lower.as_chunks::<8>().0);
            for ((upper, lower), (blue, red)) in blocks.zip(blue.iter_mut().zip(red)) {
                let sum = [0, 1, 2].map(|c| {
                    i32::from(upper[c])
                        + i32::from(upper[c + 4])
                        + i32::from(lower[c])
                        + i32::from(lower[c + 4])
                });
                *blue = (128 + ((weigh(BLUE, sum) + 4 * HALF) >> 18)) as u8;
                *red = (128 + ((weigh(RED, sum) + 4 * HALF) >> 18)) as u8;
            }
        }
    }
}

fn weigh(weights: [i32; 3], colour: [i32; 3]) -> i32 {
    weights[0] * colour[0] + weights[1] * colour[1] + weights[2] * colour[2]
}

impl YUVSource for Yuv {
    fn dimensions(&self) -> (usize, usize) {
        (self.size.width as usize, self.size.height as usize)
    }

    fn strides(&self) -> (usize, usize, usize) {
        let width = self.size.width as usize;
        (width, width / 2, width / 2)
    }

    fn y(&self) -> &[u8] {
        &self.luma
    }

    fn u(&self) -> &[u8] {
        &self.blue
    }

    fn v(&self) -> &[u8] {
        &self.red
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Luma and chroma of one colour by the formulas of BT.709 in floating point.
    fn reference(rgb: [u8; 3]) -> [f64; 3] {
        let [r, g, b] = rgb.map(|channel| f64::from(channel) / 255.0);
        let luma = 0.2126 * r + 0.7152 * g + 0.0722 * b;
        [16.0 + 219.0 * luma, 128.0 + 224.0 * (b - luma) / 1.8556, 128.0 + 224.0 * (r - luma) / 1.5748]
    }

    #[test]
    fn colours_follow_the_standard() {
        for rgb in
            [[0, 0, 0], [255, 255, 255], [255, 0, 0], [0, 255, 0], [0, 0, 255], [12, 130, 201], [90, 90, 90]]
        {
            let size = Size { width: 2, height: 2 };
            let image = Image { size, pixels: [[rgb[0], rgb[1], rgb[2], 255]; 4].concat() };
            let mut yuv = Yuv::new(size);
            yuv.fill(&image);
            for (got, wanted) in [yuv.luma[0], yuv.blue[0], yuv.red[0]].iter().zip(reference(rgb)) {
                assert!((f64::from(*got) - wanted).abs() < 0.51, "{rgb:?}: {got} for {wanted}");
            }
        }
    }

    #[test]
    fn an_odd_row_and_column_are_left_out() {
        let mut image = Image { size: Size { width: 3, height: 3 }, pixels: vec![255; 36] };
        for (index, pixel) in image.pixels.as_chunks_mut::<4>().0.iter_mut().enumerate() {
            if index % 3 == 2 || index / 3 == 2 {
                *pixel = [0, 0, 0, 255];
            }
        }
        let mut yuv = Yuv::new(Size { width: 2, height: 2 });
        yuv.fill(&image);
        assert_eq!((yuv.luma.as_slice(), yuv.blue[0], yuv.red[0]), ([235; 4].as_slice(), 128, 128));
    }
}
