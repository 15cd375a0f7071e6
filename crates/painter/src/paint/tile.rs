use super::{bins::STEP, scene::Scene, view::View};
use crate::{OUTLINE, srgb::Srgb};

/// Samples along a side of a tile.
pub(super) const SIDE: usize = 64;

/// Samples on every side that are painted only so that outlines know their neighbours.
pub(super) const APRON: usize = 2;

/// Stands for the light of a thing that shows exactly its colour.
pub(super) const FLAT: f32 = -1.0;

/// Depth steps between neighbours, as fractions of the height of the picture at that depth,
/// where an outline begins and where it is at its darkest.
const STEPS: [f32; 2] = [0.006, 0.04];

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
    /// Red, green, blue and opacity in linear light, weighted by the opacity, once developed.
    pub(super) light: [Vec<f32>; 4],
}

impl Default for Tile {
    fn default() -> Self {
        let even = |value| vec![value; SIDE * SIDE];
        Self {
            corner: [0; 2],
            depth: even(f32::INFINITY),
            base: vec![[0; 4]; SIDE * SIDE],
            lit: even(FLAT),
            light: std::array::from_fn(|_| even(0.0)),
        }
    }
}

impl Tile {
    /// Makes it an empty tile of the picture.
    pub(super) fn start(&mut self, scene: &Scene<'_>, place: usize) {
        self.corner = scene.grid.corner(place);
        self.depth.fill(f32::INFINITY);
        self.base.fill(scene.background);
        self.lit.fill(FLAT);
    }

    /// The rows of the tile that are among rows of the picture.
    pub(super) fn rows(&self, from: i32, to: i32) -> std::ops::Range<usize> {
        within(from, to, self.corner[1])
    }

    /// The columns of the tile that are among columns of the picture.
    pub(super) fn columns(&self, from: i32, to: i32) -> std::ops::Range<usize> {
        within(from, to, self.corner[0])
    }

    /// Depth beyond which nothing shows any more.
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

    /// Lays something see-through over a sample.
    #[inline(always)]
    pub(super) fn veil(&mut self, at: usize, _depth: f32, colour: [u8; 4], lit: f32) {
        let opacity = f32::from(colour[3]) / 255.0;
        let factor = if lit == FLAT { 1.0 } else { lit };
        for channel in 0..3 {
            let own = factor * Srgb::tables().linear(colour[channel]);
            self.light[channel][at] += opacity * (own - self.light[channel][at]);
        }
        self.light[3][at] += opacity * (1.0 - self.light[3][at]);
    }

    /// Darkens lit samples that have something much farther beside them.
    pub(super) fn outline(&mut self, view: &View) {
        let near = view.samples;
        let scale = view.heights() / (STEPS[1] - STEPS[0]);
        let start = STEPS[0] / (STEPS[1] - STEPS[0]);
        for row in near..SIDE - near {
            let line = |row: usize, shift: usize| &self.depth[row * SIDE + shift..][..SIDE - 2 * near];
            let (own, above, below) = (line(row, near), line(row - near, near), line(row + near, near));
            let (left, right) = (line(row, 0), line(row, 2 * near));
            let lit = &mut self.lit[row * SIDE + near..][..SIDE - 2 * near];
            for at in 0..lit.len() {
                let larger = |a: f32, b: f32| if a > b { a } else { b };
                let farthest = larger(larger(above[at], below[at]), larger(left[at], right[at]));
                let amount = (farthest - own[at]) / own[at] * scale - start;
                let amount = if amount > 1.0 { 1.0 } else { amount };
                let dark = amount > 0.0 && lit[at] != FLAT;
                lit[at] = if dark { lit[at] * (1.0 - (1.0 - OUTLINE) * amount) } else { lit[at] };
            }
        }
    }

    /// Turns colours into linear light.
    pub(super) fn develop(&mut self) {
        let srgb = Srgb::tables();
        let [red, green, blue, opacity] = &mut self.light;
        let things = self.base.iter().zip(&self.lit);
        let light = red.iter_mut().zip(green).zip(blue).zip(opacity);
        for ((&base, &lit), (((red, green), blue), opacity)) in things.zip(light) {
            *opacity = f32::from(base[3]) / 255.0;
            let factor = if lit == FLAT { *opacity } else { lit * *opacity };
            *red = srgb.linear(base[0]) * factor;
            *green = srgb.linear(base[1]) * factor;
            *blue = srgb.linear(base[2]) * factor;
        }
    }

    /// The bytes of its pixels (without the apron), each the mean of its samples.
    pub(super) fn average(&self, samples: usize) -> Vec<u8> {
        let srgb = Srgb::tables();
        let side = STEP / samples;
        let share = 1.0 / (samples * samples) as f32;
        let mut pixels = Vec::with_capacity(4 * side * side);
        for row in 0..side {
            for column in 0..side {
                let at = (APRON + row * samples) * SIDE + APRON + column * samples;
                let [red, green, blue, opacity] = self.light.each_ref().map(|light| {
                    let sum = if samples == 1 {
                        light[at]
                    } else {
                        light[at] + light[at + 1] + light[at + SIDE] + light[at + SIDE + 1]
                    };
                    sum * share
                });
                let whole = if opacity > 0.0 { 1.0 / opacity } else { 0.0 };
                let [red, green, blue] = [red, green, blue].map(|light| srgb.byte(light * whole));
                pixels.extend([red, green, blue, (255.0 * opacity + 0.5) as u8]);
            }
        }
        pixels
    }
}

fn within(from: i32, to: i32, corner: i32) -> std::ops::Range<usize> {
    let clamp = |place: i32| (place - corner).clamp(0, SIDE as i32) as usize;
    clamp(from)..clamp(to).max(clamp(from))
}
