use std::sync::LazyLock;

/// Steps of linear light that are told apart on the way back to bytes: enough that every
/// byte survives the round trip, also in the dark where sRGB is steepest.
const STEPS: usize = 16384;

/// Added to a number below it, leaves the nearest whole number in the last bits of the sum.
const ROUND: f32 = 8_388_608.0;

/// Both ways between sRGB bytes and linear light (IEC 61966-2-1).
pub(crate) struct Srgb {
    linear: [f32; 256],
    bytes: [u8; 2 * STEPS],
}

static SRGB: LazyLock<Srgb> = LazyLock::new(|| Srgb {
    linear: std::array::from_fn(|byte| decode(byte as f64 / 255.0) as f32),
    bytes: std::array::from_fn(|step| (255.0 * encode(step as f64 / STEPS as f64)).round() as u8),
});

impl Srgb {
    /// The tables; made once.
    pub(crate) fn tables() -> &'static Self {
        &SRGB
    }

    /// Linear light of a byte, 0 to 1.
    #[inline(always)]
    pub(crate) fn linear(&self, byte: u8) -> f32 {
        self.linear[usize::from(byte)]
    }

    /// The nearest byte; light beyond 0 to 1 is cut off.
    #[inline(always)]
    pub(crate) fn byte(&self, linear: f32) -> u8 {
        let light = if linear > 0.0 { linear } else { 0.0 };
        let light = if light < 1.0 { light } else { 1.0 };
        self.bytes[(light * STEPS as f32 + ROUND).to_bits() as usize % (2 * STEPS)]
    }

    /// Linear light of a colour, 0 to 1; opacity as it is.
    #[inline(always)]
    pub(crate) fn light(&self, [red, green, blue, opacity]: [u8; 4]) -> [f32; 4] {
        [self.linear(red), self.linear(green), self.linear(blue), f32::from(opacity)]
    }

    /// Part way from one light to another.
    #[inline(always)]
    pub(crate) fn between(&self, [from, to]: &[[f32; 4]; 2], fraction: f32) -> [u8; 4] {
        let mix = |channel: usize| from[channel] + (to[channel] - from[channel]) * fraction;
        [self.byte(mix(0)), self.byte(mix(1)), self.byte(mix(2)), (mix(3) + 0.5) as u8]
    }

    /// Weighted mean of three lights.
    #[inline(always)]
    pub(crate) fn mean(&self, lights: &[[f32; 4]; 3], weights: [f32; 3]) -> [u8; 4] {
        let [a, b, c] = lights;
        let mix =
            |channel: usize| a[channel] * weights[0] + b[channel] * weights[1] + c[channel] * weights[2];
        [self.byte(mix(0)), self.byte(mix(1)), self.byte(mix(2)), (mix(3) + 0.5) as u8]
    }
}

fn decode(value: f64) -> f64 {
    if value <= 0.04045 { value / 12.92 } else { ((value + 0.055) / 1.055).powf(2.4) }
}

fn encode(light: f64) -> f64 {
    if light <= 0.003_130_8 { 12.92 * light } else { 1.055 * light.powf(1.0 / 2.4) - 0.055 }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_byte_survives_the_round_trip() {
        let tables = Srgb::tables();
        for byte in 0..=255 {
            assert_eq!(tables.byte(tables.linear(byte)), byte);
        }
    }

    /// Worked from the formulas of IEC 61966-2-1 by hand.
    #[test]
    fn values_of_the_standard() {
        let tables = Srgb::tables();
        for (byte, light) in [
            (0, 0.0),
            (10, 0.003_035_3),
            (11, 0.003_346_5),
            (128, 0.215_860_5),
            (188, 0.502_886_5),
            (255, 1.0),
        ] {
            assert!((tables.linear(byte) - light).abs() < 1e-6, "{byte}: {}", tables.linear(byte));
        }
        assert_eq!(tables.byte(0.5), 188);
        assert_eq!(tables.byte(0.18), 118);
        assert_eq!((tables.byte(-1.0), tables.byte(7.0), tables.byte(f32::NAN)), (0, 255, 0));
    }

    #[test]
    fn half_way_between_black_and_white_is_half_the_light() {
        let srgb = Srgb::tables();
        let lights = [srgb.light([0, 0, 0, 255]), srgb.light([255; 4])];
        assert_eq!(srgb.between(&lights, 0.5), [188, 188, 188, 255]);
    }
}
