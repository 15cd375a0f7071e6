use super::{BenchGrade, StrengthFit};
use crate::Strength;
use crate::figures::{digits, stress};
use crate::scene::gel_and_strength;
use crate::statistics::Measure;

/// The tables `[gel]` and `[strength]` with a fitted strength, to take the place of those in a
/// scene, under a comment that says where they come from; none where the outcomes give no more
/// than a bound. `source` names the table of outcomes.
pub fn gel_table(grade: &BenchGrade, fit: &StrengthFit, source: &str) -> Option<String> {
    let strength = fit.strength(&grade.strength)?;
    let mut comment = format!(
        "Grade {}: strength from {source}, {} of {} beads torn, by their tension at {} voxels across.",
        grade.name,
        grade.torn(),
        grade.beads(),
        grade.across,
    );
    comment += &match fit {
        StrengthFit::Both { scale, modulus, .. } => {
            format!(" Scale {}, modulus {}.", with_limits(scale, stress), with_limits(modulus, digits))
        }
        StrengthFit::Scale { scale, .. } => {
            format!(" Scale {}; the modulus is assumed.", with_limits(scale, stress))
        }
        StrengthFit::AtLeast { .. } | StrengthFit::AtMost { .. } => String::new(),
    };
    // A name with a line break must not end the comment.
    let comment = comment.replace(char::is_control, " ");
    let rounded =
        Strength { scale: six_digits(strength.scale), modulus: six_digits(strength.modulus), ..strength };
    Some(format!("# {comment}\n{}", gel_and_strength(&grade.gel, &rounded)))
}

/// A figure with its 95 % limits in words.
fn with_limits(measure: &Measure, show: fn(f64) -> String) -> String {
    let limit = |limit: Option<f64>| limit.map_or("no limit".into(), show);
    format!("{} ({} to {} at 95 %)", show(measure.value), limit(measure.low), limit(measure.high))
}

/// More digits than any bench gives.
fn six_digits(value: f64) -> f64 {
    format!("{value:.5e}").parse().unwrap_or(value)
}
