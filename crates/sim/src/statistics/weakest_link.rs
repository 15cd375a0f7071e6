use crate::Strength;
use statrs::function::gamma::gamma;

/// Probability that a body tears somewhere: `1 - exp(-Σ (V/V₀) (σ/σ₀)^m)` over its
/// parts, each with a volume (m³) and its principal tension (Pa); parts in
/// compression add nothing (Weibull 1951, J. Appl. Mech. 18:293, from memory).
///
/// # Panics
/// When the two lists differ in length.
#[track_caller]
pub fn tear_probability(volumes: &[f64], tensions: &[f64], strength: &Strength) -> f64 {
    assert_eq!(volumes.len(), tensions.len(), "one tension per volume");
    let risk: f64 = volumes
        .iter()
        .zip(tensions)
        .map(|(volume, tension)| {
            volume / strength.volume * (tension.max(0.0) / strength.scale).powf(strength.modulus)
        })
        .sum();
    -(-risk).exp_m1()
}

/// Mean tension (Pa) at which a body of `volume` (m³) under uniform tension tears:
/// `σ₀ Γ(1 + 1/m) (V₀/V)^(1/m)`.
pub fn mean_strength(volume: f64, strength: &Strength) -> f64 {
    strength.scale * gamma(1.0 + 1.0 / strength.modulus) * strength_ratio(volume / strength.volume, strength)
}

/// Strength of a body over that of another, `volume_ratio` times smaller.
pub fn strength_ratio(volume_ratio: f64, strength: &Strength) -> f64 {
    volume_ratio.powf(-1.0 / strength.modulus)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn of_modulus(modulus: f64) -> Strength {
        Strength { scale: 1.0, modulus, volume: 1.0, length: None }
    }

    /// Weibull modulus, mean/σ₀, median/σ₀, strength at 8 and at 1000 times the volume; computed
    /// independently with scipy from the printed formulas.
    const TABLE: [(f64, f64, f64, f64, f64); 7] = [
        (2.0, 0.886227, 0.832555, 0.353553, 0.031623),
        (3.0, 0.892980, 0.884997, 0.500000, 0.100000),
        (5.0, 0.918169, 0.929320, 0.659754, 0.251189),
        (8.0, 0.941743, 0.955220, 0.771105, 0.421697),
        (10.0, 0.951351, 0.964012, 0.812252, 0.501187),
        (15.0, 0.965664, 0.975862, 0.870551, 0.630957),
        (20.0, 0.973504, 0.981841, 0.901250, 0.707946),
    ];

    #[test]
    fn means_and_the_volume_effect_agree_with_the_table_to_its_last_digit() {
        for (modulus, mean, _, at_8, at_1000) in TABLE {
            let strength = of_modulus(modulus);
            for (value, reference) in [
                (mean_strength(1.0, &strength), mean),
                (strength_ratio(8.0, &strength), at_8),
                (strength_ratio(1000.0, &strength), at_1000),
            ] {
                assert!((value - reference).abs() < 0.51e-6, "m = {modulus}: {value} for {reference}");
            }
        }
    }

    #[test]
    fn half_of_all_bodies_tear_at_the_median_of_the_table() {
        for (modulus, _, median, ..) in TABLE {
            // Six digits in the median leave m times as much in the probability.
            let probability = tear_probability(&[1.0], &[median], &of_modulus(modulus));
            assert!((probability - 0.5).abs() < 0.5e-6 * modulus, "m = {modulus}: {probability}");
        }
    }

    #[test]
    fn three_parts_agree_with_the_worked_example() {
        // m = 5, V/V₀ = (1, 2, 0.5), σ/σ₀ = (0.5, 0.8, 1.1); computed independently.
        let probability = tear_probability(&[1.0, 2.0, 0.5], &[0.5, 0.8, 1.1], &of_modulus(5.0));
        assert!((probability - 0.775_047_272_8).abs() < 0.5e-10, "{probability}");
    }

    #[test]
    fn bent_beams_agree_with_their_effective_volumes() {
        // Pure bending of a rectangular beam: the tension rises linearly over the tensile half, and
        // V_eff/V = 1/(2(m+1)), tabled to six digits (0.083333 at m = 5).
        let parts = 200_000;
        let volumes = vec![1.0 / f64::from(parts); parts as usize];
        let tensions: Vec<f64> =
            (0..parts).map(|i| 2.0 * (f64::from(i) + 0.5) / f64::from(parts) - 1.0).collect();
        let probability = tear_probability(&volumes, &tensions, &of_modulus(5.0));
        assert!((-(-probability).ln_1p() - 0.083333).abs() < 0.5e-6, "{probability}");
    }

    #[test]
    fn compression_does_not_tear() {
        assert_eq!(tear_probability(&[1.0], &[-3.0], &of_modulus(3.0)), 0.0);
    }
}
