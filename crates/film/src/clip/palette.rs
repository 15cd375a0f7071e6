//! One palette for a whole film.
//!
//! Boxes of colour are split where that lowers the squared error most, as in Wu's quantiser
//! (Graphics Gems II, 1991), and their means then settled by Lloyd's iteration. A colour
//! counts with the root of the pixels that have it, so that thin coloured lines keep
//! their colour beside large plain areas.

/// Colours seen, sorted into 64 levels per channel.
pub(super) struct Histogram {
    bins: Vec<Bin>,
}

/// Colours and the one nearest to each bin of the histogram.
pub(super) struct Palette {
    colours: Vec<[u8; 3]>,
    nearest: Vec<u8>,
}

#[derive(Clone, Copy, Default)]
struct Bin {
    count: u64,
    sum: [u64; 3],
}

/// The mean colour of a bin and its weight.
#[derive(Clone, Copy)]
struct Sample {
    bin: usize,
    colour: [f64; 3],
    weight: f64,
}

const LEVEL_BITS: usize = 6;
const BINS: usize = 1 << (3 * LEVEL_BITS);
const SETTLING_ROUNDS: usize = 3;

fn bin_of(colour: &[u8; 3]) -> usize {
    colour.iter().fold(0, |bin, &channel| (bin << LEVEL_BITS) | usize::from(channel >> (8 - LEVEL_BITS)))
}

impl Histogram {
    pub(super) fn new() -> Self {
        Self { bins: vec![Bin::default(); BINS] }
    }

    /// Counts the pixels of a picture of three bytes each.
    pub(super) fn add(&mut self, pixels: &[u8]) {
        for pixel in pixels.as_chunks::<3>().0 {
            let bin = &mut self.bins[bin_of(pixel)];
            bin.count += 1;
            for channel in 0..3 {
                bin.sum[channel] += u64::from(pixel[channel]);
            }
        }
    }

    fn samples(&self) -> Vec<Sample> {
        let seen = self.bins.iter().enumerate().filter(|(_, bin)| bin.count > 0);
        seen.map(|(index, bin)| Sample {
            bin: index,
            colour: bin.sum.map(|sum| sum as f64 / bin.count as f64),
            weight: (bin.count as f64).sqrt(),
        })
        .collect()
    }
}

impl Palette {
    /// At most `most` colours that stand for all that were counted; the commonest is kept
    /// as it is.
    pub(super) fn new(histogram: &Histogram, most: usize) -> Self {
        let samples = histogram.samples();
        let mut means = split(&samples, most);
        for _ in 0..SETTLING_ROUNDS {
            means = settle(&samples, &means);
        }
        if let Some(commonest) = samples.iter().max_by(|a, b| a.weight.total_cmp(&b.weight)) {
            let stand_in = nearest(&means, &commonest.colour);
            means[stand_in] = commonest.colour;
        }
        let mut table = vec![0; BINS];
        for sample in &samples {
            table[sample.bin] = nearest(&means, &sample.colour) as u8;
        }
        let colours = means.iter().map(|mean| mean.map(|channel| channel.round() as u8)).collect();
        Self { colours, nearest: table }
    }

    /// Colours in the order of their indices.
    pub(super) fn colours(&self) -> &[[u8; 3]] {
        &self.colours
    }

    /// Index of the colour for each pixel of a picture that was counted.
    pub(super) fn indices(&self, pixels: &[u8]) -> Vec<u8> {
        pixels.as_chunks::<3>().0.iter().map(|pixel| self.nearest[bin_of(pixel)]).collect()
    }
}

/// A group of samples and the best place to divide it.
struct Group {
    samples: Vec<Sample>,
    gain: f64,
    axis: usize,
    at: usize,
}

fn split(samples: &[Sample], most: usize) -> Vec<[f64; 3]> {
    let mut groups = vec![Group::new(samples.to_vec())];
    while groups.len() < most {
        let Some((index, _)) = groups
            .iter()
            .enumerate()
            .filter(|(_, group)| group.gain > 0.0)
            .max_by(|a, b| a.1.gain.total_cmp(&b.1.gain))
        else {
            break;
        };
        let mut group = groups.swap_remove(index);
        sort(&mut group.samples, group.axis);
        let upper = group.samples.split_off(group.at);
        groups.push(Group::new(group.samples));
        groups.push(Group::new(upper));
    }
    groups.iter().map(|group| mean(&group.samples)).collect()
}

impl Group {
    /// Finds the division that lowers the squared error most.
    fn new(mut samples: Vec<Sample>) -> Self {
        let (mut gain, mut axis, mut at) = (0.0, 0, 0);
        let (whole, whole_weight) = total(&samples);
        for candidate in 0..3 {
            sort(&mut samples, candidate);
            let (mut sum, mut weight) = ([0.0; 3], 0.0);
            for (index, sample) in samples.iter().enumerate() {
                if index > 0 {
                    let rest = whole_weight - weight;
                    let lowered: f64 = (0..3)
                        .map(|c| {
                            let apart = sum[c] / weight - (whole[c] - sum[c]) / rest;
                            apart * apart * weight * rest / whole_weight
                        })
                        .sum();
                    if lowered > gain {
                        (gain, axis, at) = (lowered, candidate, index);
                    }
                }
                add(&mut sum, &mut weight, sample);
            }
        }
        Self { samples, gain, axis, at }
    }
}

/// Moves each colour to the mean of the samples nearest to it.
fn settle(samples: &[Sample], means: &[[f64; 3]]) -> Vec<[f64; 3]> {
    let mut sums = vec![([0.0; 3], 0.0); means.len()];
    for sample in samples {
        let (sum, weight) = &mut sums[nearest(means, &sample.colour)];
        add(sum, weight, sample);
    }
    let moved = |(&mean, (sum, weight)): (&[f64; 3], ([f64; 3], f64))| match weight {
        0.0 => mean,
        _ => sum.map(|sum| sum / weight),
    };
    means.iter().zip(sums).map(moved).collect()
}

fn nearest(means: &[[f64; 3]], colour: &[f64; 3]) -> usize {
    let distance = |mean: &[f64; 3]| (0..3).map(|c| (mean[c] - colour[c]).powi(2)).sum::<f64>();
    let mut best = (f64::INFINITY, 0);
    for (index, mean) in means.iter().enumerate() {
        let distance = distance(mean);
        if distance < best.0 {
            best = (distance, index);
        }
    }
    best.1
}

fn sort(samples: &mut [Sample], axis: usize) {
    samples.sort_by(|a, b| a.colour[axis].total_cmp(&b.colour[axis]).then(a.bin.cmp(&b.bin)));
}

fn mean(samples: &[Sample]) -> [f64; 3] {
    let (sum, weight) = total(samples);
    sum.map(|sum| sum / weight)
}

fn total(samples: &[Sample]) -> ([f64; 3], f64) {
    let (mut sum, mut weight) = ([0.0; 3], 0.0);
    for sample in samples {
        add(&mut sum, &mut weight, sample);
    }
    (sum, weight)
}

fn add(sum: &mut [f64; 3], weight: &mut f64, sample: &Sample) {
    for channel in 0..3 {
        sum[channel] += sample.weight * sample.colour[channel];
    }
    *weight += sample.weight;
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn few_colours_are_kept_exactly() {
        let pixels = [[255, 255, 255], [18, 52, 86], [255, 255, 255], [200, 30, 30], [0, 0, 0]].concat();
        let mut histogram = Histogram::new();
        histogram.add(&pixels);
        let palette = Palette::new(&histogram, 255);
        assert_eq!(palette.colours().len(), 4);
        let back: Vec<u8> = palette
            .indices(&pixels)
            .iter()
            .flat_map(|&index| palette.colours()[usize::from(index)])
            .collect();
        assert_eq!(back, pixels);
    }

    #[test]
    fn many_colours_come_close_and_rare_ones_survive() {
        let mut pixels: Vec<u8> =
            (0..200_000_u32).flat_map(|i| [(i % 256) as u8, (i / 256 % 256) as u8, 128]).collect();
        pixels.extend([255; 3].repeat(400_000));
        pixels.extend([255, 0, 0].repeat(60));
        let mut histogram = Histogram::new();
        histogram.add(&pixels);
        let palette = Palette::new(&histogram, 255);
        assert!(palette.colours().len() <= 255);
        let indices = palette.indices(&pixels);
        let (mut worst, mut sum) = (0, 0.0);
        for (pixel, &index) in pixels.as_chunks::<3>().0.iter().zip(&indices) {
            let colour = palette.colours()[usize::from(index)];
            let apart = (0..3).map(|c| pixel[c].abs_diff(colour[c])).max().unwrap();
            worst = worst.max(apart);
            sum += f64::from(apart);
        }
        assert!(worst <= 16, "a colour is off by {worst} levels");
        assert!(
            sum / (indices.len() as f64) < 3.0,
            "colours are off by {} levels",
            sum / indices.len() as f64
        );
        assert_eq!(palette.colours()[usize::from(indices[250_000])], [255; 3]);
    }
}
