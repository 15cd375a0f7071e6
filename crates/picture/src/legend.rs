use crate::field::{KILOPASCAL, MILLIMETRE, Unit};
use crate::look::{GrainLook, GrainShade, Look};
use crate::{Run, Scale, Scales};

/// What one colour scale of a picture means.
#[derive(Clone, Debug, PartialEq)]
pub struct Legend {
    /// What the colours stand for.
    pub title: String,
    /// The scale, in SI units.
    pub scale: Scale,
    /// The unit its values are printed in.
    pub unit: Unit,
    /// Whether values lie beyond the lower and the upper end.
    pub beyond: [bool; 2],
}

/// The legends that a look needs.
pub fn legends(run: &Run, look: &Look) -> Vec<Legend> {
    let scales = Scales::new(run, look);
    let mut legends = Vec::new();
    let beyond = [true, run.exceeds_range(look.range)];
    let fills = look.skin || look.section && look.cut.is_some();
    let mut stress = Vec::new();
    if fills && look.field.is_signed_stress() {
        stress.push(look.field.name());
    }
    if look.bonds {
        stress.push("bond tension");
    }
    if look.crosses {
        stress.push("principal stresses");
    }
    if !stress.is_empty() {
        legends.push(Legend { title: stress.join(", "), scale: scales.stress, unit: KILOPASCAL, beyond });
    }
    if fills && !look.field.is_signed_stress() {
        legends.push(Legend {
            title: look.field.name().into(),
            scale: scales.field,
            unit: look.field.unit(),
            beyond: [false, look.range < 1.0],
        });
    }
    if look.grains != GrainLook::Hidden
        && let Some((title, unit)) = meaning(look.shade)
    {
        legends.push(Legend { title: title.into(), scale: scales.shade, unit, beyond: [false; 2] });
    }
    legends
}

fn meaning(shade: GrainShade) -> Option<(&'static str, Unit)> {
    match shade {
        GrainShade::Plain => None,
        GrainShade::Size => Some(("grain diameter", MILLIMETRE)),
        GrainShade::Displacement => Some(("grain displacement", MILLIMETRE)),
        GrainShade::ContactForce => Some(("largest contact force", Unit { symbol: "mN", size: 1e-3 })),
    }
}

impl Legend {
    /// Values (SI units) to mark, from the lower to the upper end, with their words.
    pub fn marks(&self) -> Vec<(f32, String)> {
        let (low, high) = (self.scale.low, self.scale.high);
        (0..5)
            .map(|step| {
                let value = low + (high - low) * step as f32 / 4.0;
                let printed = value / self.unit.size;
                let words = format!("{:.*}", decimals((high - low) / self.unit.size), printed + 0.0);
                let words = words.replace('-', "−");
                let words = match step {
                    0 if self.beyond[0] => format!("{words} and below"),
                    4 if self.beyond[1] => format!("{words} and above"),
                    _ => words,
                };
                (value, words)
            })
            .collect()
    }
}

/// Fewest decimals that write the quarters of a range without rounding.
fn decimals(range: f32) -> usize {
    let written = |decimals: &usize| {
        let digits = 0.25 * range * 10_f32.powi(*decimals as i32);
        (digits - digits.round()).abs() < 1e-3 * digits
    };
    (0..6).find(written).unwrap_or(6)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn marks_run_from_end_to_end_through_zero() {
        let legend = Legend {
            title: crate::Field::LargestPrincipal.name().into(),
            scale: Scale::diverging(400.0),
            unit: KILOPASCAL,
            beyond: [true, false],
        };
        let words: Vec<String> = legend.marks().into_iter().map(|mark| mark.1).collect();
        assert_eq!(words, ["−0.4 and below", "−0.2", "0.0", "0.2", "0.4"]);
    }
}
