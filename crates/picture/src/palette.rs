use bedswell_painter::Colour;

/// A colour scale over a range of values.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Scale {
    /// Value at the lower end; values below take its colour.
    pub low: f32,
    /// Value at the upper end; values above take its colour.
    pub high: f32,
    kind: Kind,
}

#[derive(Clone, Copy, Debug, PartialEq)]
enum Kind {
    /// Two hues that part at zero.
    Diverging,
    /// From pale to dark or the other way.
    Rising,
}

/// Bands of colour in a scale: enough to look smooth, few enough to read a value back.
const BANDS: usize = 255;

/// Places on the way from the lower to the upper end with their colours: from deep teal
/// over pale straw to dark red-brown. Lightness falls evenly to both sides, and teal against
/// red-brown differ in blue as well as in red against green, for eyes that see only one of them.
const DIVERGING: [(f32, [f32; 3]); 7] = [
    (0.0, [0.0, 62.0, 84.0]),
    (0.18, [12.0, 112.0, 134.0]),
    (0.36, [112.0, 176.0, 184.0]),
    (0.5, [240.0, 234.0, 214.0]),
    (0.64, [236.0, 162.0, 94.0]),
    (0.82, [205.0, 82.0, 42.0]),
    (1.0, [124.0, 22.0, 28.0]),
];

/// From pale straw over green to a deep violet-blue, lightness falling throughout.
const RISING: [(f32, [f32; 3]); 5] = [
    (0.0, [243.0, 236.0, 208.0]),
    (0.25, [176.0, 208.0, 152.0]),
    (0.5, [88.0, 160.0, 142.0]),
    (0.75, [52.0, 98.0, 132.0]),
    (1.0, [46.0, 34.0, 92.0]),
];

impl Scale {
    /// A scale from `-largest` to `largest` that parts at zero.
    pub fn diverging(largest: f32) -> Self {
        let largest = positive(largest);
        Self { low: -largest, high: largest, kind: Kind::Diverging }
    }

    /// A scale from `low` to `high`.
    pub fn rising(low: f32, high: f32) -> Self {
        Self { low, high: low + positive(high - low), kind: Kind::Rising }
    }

    /// The colour of a value.
    pub fn colour(&self, value: f32) -> Colour {
        let share = ((value - self.low) / (self.high - self.low)).clamp(0.0, 1.0);
        band(self.kind, (share * (BANDS - 1) as f32).round() as usize)
    }

    /// Its colours from the lower to the upper end.
    pub fn colours(&self) -> Vec<Colour> {
        (0..BANDS).map(|index| band(self.kind, index)).collect()
    }

    /// The value that a colour stands for, and how far it is from the scale's colours
    /// (largest difference of a channel).
    pub fn value(&self, colour: Colour) -> (f32, u8) {
        let apart = |other: &Colour| {
            colour.r.abs_diff(other.r).max(colour.g.abs_diff(other.g)).max(colour.b.abs_diff(other.b))
        };
        let colours = self.colours();
        let nearest = (0..BANDS).min_by_key(|&index| apart(&colours[index])).unwrap_or(0);
        let share = nearest as f32 / (BANDS - 1) as f32;
        (self.low + share * (self.high - self.low), apart(&colours[nearest]))
    }
}

fn positive(range: f32) -> f32 {
    if range.is_finite() && range > 0.0 { range } else { 1.0 }
}

fn band(kind: Kind, index: usize) -> Colour {
    let stops: &[(f32, [f32; 3])] = match kind {
        Kind::Diverging => &DIVERGING,
        Kind::Rising => &RISING,
    };
    let share = index as f32 / (BANDS - 1) as f32;
    let next = stops.iter().position(|stop| stop.0 >= share).unwrap_or(stops.len() - 1).max(1);
    let (from, to) = (stops[next - 1], stops[next]);
    let along = (share - from.0) / (to.0 - from.0);
    let [r, g, b] = [0, 1, 2].map(|c| (from.1[c] + along * (to.1[c] - from.1[c])).round() as u8);
    Colour::new(r, g, b)
}

/// The next of 1, 1.5, 2, 3, 4, 5, 6, 8 times a power of ten that is not below `value`.
pub fn round_up(value: f32) -> f32 {
    if !(value.is_finite() && value > 0.0) {
        return 1.0;
    }
    let power = 10_f32.powf(value.log10().floor());
    let steps = [1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0];
    steps.iter().map(|step| step * power).find(|&step| step >= value * 0.999_999).unwrap_or(10.0 * power)
}
