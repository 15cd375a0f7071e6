use super::{bins::STEP, scene::Scene, view::View};
use crate::{OUTLINE, srgb::Srgb};

/// Samples along a side of a tile.
pub(super) const SIDE: usize = 64;

/// Samples on every side that are painted only so that outlines know their neighbours.
pub(super) const APRON: usize = 2;

/// Stands for the light of a thing that shows exactly its colour.
pub(super) const FLAT: f32 = -1.0;

/// How far the depth may bend away between neighbours, as fractions of the height of the picture
/// at that depth, where an outline begins and where it is at its darkest.
const BENDS: [f32; 2] = [0.006, 0.04];

/// A square of samples being painted.
pub(super) struct Tile {
    /// Column and row of its first sample in the picture.
    pub(super) corner: [i32; 2],
    /// Depth of what is seen at each sample, infinite where there is nothing.
    pub(super) depth: Vec<f32>,
    /// Its colour.
    pub(super) base: Vec<[u8; 4]>,
    /// Factor on its linear light, or `FLAT`.
    pub(super) lit: Vec<f32>,
    /// Cosine between the line of sight and the middle one.
    pub(super) slant: Vec<f32>,
    /// What lies over it: red, green and blue in linear light weighted by the opacity, and opacity.
    pub(super) veils: [Vec<f32>; 4],
    /// Whether anything lies over it anywhere.
    veiled: bool,
}

impl Default for Tile {
    fn default() -> Self {
        let even = |value| vec![value; SIDE * SIDE];
        Self {
            corner: [0; 2],
            depth: even(f32::INFINITY),
            base: vec![[0; 4]; SIDE * SIDE],
            lit: even(FLAT),
            slant: even(1.0),
            veils: std::array::from_fn(|_| even(0.0)),
            veiled: false,
        }
    }
}

impl Tile {
    /// Makes it an empty tile of the picture.
    #[inline(always)]
    pub(super) fn start(&mut self, scene: &Scene<'_>, place: usize) {
        self.corner = scene.grid.corner(place);
        self.depth.fill(f32::INFINITY);
        self.base.fill(scene.background);
        self.lit.fill(FLAT);
        self.veiled = false;
        let step = (1.0 / scene.view.focal()) as f32;
        let left = scene.view.across(self.corner[0]) as f32;
        for (line, slants) in self.slant.chunks_exact_mut(SIDE).enumerate() {
            let up = scene.view.up(self.corner[1] + line as i32) as f32;
            for (column, slant) in slants.iter_mut().enumerate() {
                let across = left + step * column as f32;
                *slant = 1.0 / (1.0 + up * up + across * across).sqrt();
            }
        }
    }

    /// Whether all of some samples side by side show something nearer than a depth.
    #[inline(always)]
    pub(super) fn hides<const COUNT: usize>(&self, at: usize, depth: f32) -> bool {
        let mut open = 0;
        for &own in &self.depth[at..at + COUNT] {
            open |= u32::from(own > depth);
        }
        open == 0
    }

    /// The rows of the tile that are among rows of the picture.
    #[inline(always)]
    pub(super) fn rows(&self, from: i32, to: i32) -> std::ops::Range<usize> {
        within(from, to, self.corner[1])
    }

    /// The columns of the tile that are among columns of the picture.
    #[inline(always)]
    pub(super) fn columns(&self, from: i32, to: i32) -> std::ops::Range<usize> {
        within(from, to, self.corner[0])
    }

    /// Depth beyond which nothing shows any more.
    #[inline(always)]
    pub(super) fn farthest(&self) -> f32 {
        let mut lanes = [0.0_f32; 8];
        for chunk in self.depth.as_chunks::<8>().0 {
            for (lane, &depth) in lanes.iter_mut().zip(chunk) {
                *lane = if depth > *lane { depth } else { *lane };
            }
        }
        lanes.into_iter().fold(0.0, f32::max)
    }

    /// Puts an opaque thing at a sample.
    #[inline(always)]
    pub(super) fn put(&mut self, at: usize, depth: f32, colour: [u8; 4], lit: f32) {
        (self.depth[at], self.base[at], self.lit[at]) = (depth, colour, lit);
    }

    /// Makes it ready for things that let light through.
    pub(super) fn start_veils(&mut self) {
        self.veiled = true;
        self.veils.iter_mut().for_each(|veil| veil.fill(0.0));
    }

    /// Lays something see-through over a sample.
    #[inline(always)]
    pub(super) fn veil(&mut self, at: usize, _depth: f32, colour: [u8; 4], lit: f32) {
        let opacity = f32::from(colour[3]) / 255.0;
        let factor = factor(lit);
        for channel in 0..3 {
            let own = factor * Srgb::tables().linear(colour[channel]);
            self.veils[channel][at] += opacity * (own - self.veils[channel][at]);
        }
        self.veils[3][at] += opacity * (1.0 - self.veils[3][at]);
    }

    /// Darkens lit samples that have something much farther beside them.
    #[inline(always)]
    pub(super) fn outline(&mut self, view: &View) {
        let near = view.samples;
        let scale = view.heights() / (BENDS[1] - BENDS[0]);
        let start = BENDS[0] / (BENDS[1] - BENDS[0]);
        for row in APRON..SIDE - APRON {
            let own_place = row * SIDE + APRON;
            let line = |place: usize| -> &[f32; STEP] {
                self.depth[place..].first_chunk().expect("the apron is as wide as a pixel")
            };
            let own = line(own_place);
            let (above, below) = (line(own_place - near * SIDE), line(own_place + near * SIDE));
            let (left, right) = (line(own_place - near), line(own_place + near));
            let lit: &mut [f32; STEP] =
                self.lit[own_place..].first_chunk_mut().expect("a row has as many samples");
            for at in 0..STEP {
                let (upright, level) = (above[at] + below[at], left[at] + right[at]);
                let farther = if upright > level { upright } else { level };
                let amount = (farther - 2.0 * own[at]) / own[at] * scale - start;
                let amount = if amount > 0.0 { amount } else { 0.0 };
                let amount = if amount < 1.0 { amount } else { 1.0 };
                let darker = lit[at] * (1.0 - (1.0 - OUTLINE) * amount);
                lit[at] = if lit[at] == FLAT { FLAT } else { darker };
            }
        }
    }

    /// The bytes of its pixels (without the apron), each the mean of its samples.
    #[inline(always)]
    pub(super) fn average(&self, samples: usize) -> Vec<u8> {
        let side = STEP / samples;
        let mut pixels = vec![0; 4 * side * side];
        for (row, line) in pixels.chunks_exact_mut(4 * side).enumerate() {
            for (column, pixel) in line.as_chunks_mut::<4>().0.iter_mut().enumerate() {
                let at = (APRON + row * samples) * SIDE + APRON + column * samples;
                *pixel = match samples {
                    1 => self.mean([at]),
                    _ => self.mean([at, at + 1, at + SIDE, at + SIDE + 1]),
                };
            }
        }
        pixels
    }

    /// The mean colour of some samples.
    #[inline(always)]
    fn mean<const COUNT: usize>(&self, samples: [usize; COUNT]) -> [u8; 4] {
        let srgb = Srgb::tables();
        let share = 1.0 / COUNT as f32;
        let base = self.base[samples[0]];
        if !self.veiled && samples.iter().all(|&at| self.base[at] == base) {
            if samples.iter().all(|&at| self.lit[at] == FLAT) {
                return base;
            }
            let factor = share * samples.iter().map(|&at| factor(self.lit[at])).sum::<f32>();
            let byte = |channel: usize| srgb.byte(srgb.linear(base[channel]) * factor);
            return [byte(0), byte(1), byte(2), base[3]];
        }
        let mut sum = [0.0; 4];
        for at in samples {
            let veil = |channel: usize| if self.veiled { self.veils[channel][at] } else { 0.0 };
            let base = self.base[at];
            let opacity = f32::from(base[3]) / 255.0 * (1.0 - veil(3));
            let factor = factor(self.lit[at]) * opacity;
            for channel in 0..3 {
                sum[channel] += srgb.linear(base[channel]) * factor + veil(channel);
            }
            sum[3] += opacity + veil(3);
        }
        let whole = if sum[3] > 0.0 { 1.0 / sum[3] } else { 0.0 };
        let byte = |channel: usize| srgb.byte(sum[channel] * whole);
        [byte(0), byte(1), byte(2), (255.0 * share * sum[3] + 0.5) as u8]
    }
}

/// Factor on linear light, 1 for things that show exactly their colour.
#[inline(always)]
fn factor(lit: f32) -> f32 {
    if lit == FLAT { 1.0 } else { lit }
}

fn within(from: i32, to: i32, corner: i32) -> std::ops::Range<usize> {
    let clamp = |place: i32| place.saturating_sub(corner).clamp(0, SIDE as i32) as usize;
    clamp(from)..clamp(to).max(clamp(from))
}
