use bedswell_painter::{Image, Size};

/// An opaque picture made no larger, each pixel the mean of the area it covers; three
/// bytes per pixel.
pub(super) fn shrink(image: &Image, size: Size) -> Vec<u8> {
    let columns = spans(image.size.width, size.width);
    let rows = spans(image.size.height, size.height);
    let width = image.size.width as usize;
    let mut shrunk = Vec::with_capacity(3 * size.width as usize * size.height as usize);
    let mut line = vec![[0.0_f32; 3]; width];
    for row in &rows {
        line.fill([0.0; 3]);
        for (index, weight) in row.parts() {
            let pixels = image.pixels[4 * width * index..4 * width * (index + 1)].as_chunks::<4>().0;
            for (sum, pixel) in line.iter_mut().zip(pixels) {
                for channel in 0..3 {
                    sum[channel] += weight * f32::from(pixel[channel]);
                }
            }
        }
        for column in &columns {
            let mut mean = [0.0_f32; 3];
            for (index, weight) in column.parts() {
                for channel in 0..3 {
                    mean[channel] += weight * line[index][channel];
                }
            }
            shrunk.extend(mean.map(|value| value.round() as u8));
        }
    }
    shrunk
}

/// Pixels that one smaller pixel covers: the first, and the share of each in it.
struct Span {
    first: usize,
    shares: Vec<f32>,
}

impl Span {
    fn parts(&self) -> impl Iterator<Item = (usize, f32)> {
        self.shares.iter().enumerate().map(|(index, &share)| (self.first + index, share))
    }
}

fn spans(from: u32, to: u32) -> Vec<Span> {
    let scale = f64::from(from) / f64::from(to);
    (0..to)
        .map(|index| {
            let (start, end) =
                (f64::from(index) * scale, (f64::from(index + 1) * scale).min(f64::from(from)));
            let first = start as usize;
            let share = |pixel: usize| ((pixel + 1) as f64).min(end) - (pixel as f64).max(start);
            let last = (end.ceil() as usize).max(first + 1);
            Span { first, shares: (first..last).map(|pixel| (share(pixel) / scale) as f32).collect() }
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    fn grey(width: u32, height: u32, values: &[u8]) -> Image {
        Image { size: Size { width, height }, pixels: values.iter().flat_map(|&v| [v, v, v, 255]).collect() }
    }

    #[test]
    fn pixels_are_means_of_what_they_cover() {
        let image = grey(4, 2, &[0, 100, 200, 200, 100, 200, 0, 0]);
        assert_eq!(shrink(&image, Size { width: 2, height: 1 }), [100; 6]);
        let image = grey(3, 1, &[0, 90, 240]);
        assert_eq!(shrink(&image, Size { width: 2, height: 1 }), [30, 30, 30, 190, 190, 190]);
        assert_eq!(shrink(&image, Size { width: 3, height: 1 }), [0, 0, 0, 90, 90, 90, 240, 240, 240]);
    }

    #[test]
    fn an_even_picture_stays_even() {
        let image = grey(37, 23, &[201; 37 * 23]);
        assert!(shrink(&image, Size { width: 19, height: 7 }).iter().all(|&value| value == 201));
    }
}
