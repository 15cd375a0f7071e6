use serde::{Deserialize, Serialize};

/// What the gel is coloured by.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, Serialize, Deserialize)]
#[serde(rename_all = "snake_case")]
pub enum Field {
    /// Largest principal stress: the tension that tears.
    #[default]
    LargestPrincipal,
    /// Smallest principal stress: the squeeze of the grains.
    SmallestPrincipal,
    /// Mean of the principal stresses, positive in tension.
    MeanStress,
    /// Largest shear stress, half the difference of the outer principal stresses
    /// (Tresca 1864).
    LargestShear,
    /// Water per mass of dry gel.
    Uptake,
    /// Share of the bead's tear probability that a volume holds, by the weakest link.
    TearShare,
}

/// How a field's values are printed.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Unit {
    /// Its symbol.
    pub symbol: &'static str,
    /// One of it in SI units.
    pub size: f32,
}

/// Stress.
pub const KILOPASCAL: Unit = Unit { symbol: "kPa", size: 1e3 };
/// Length.
pub const MILLIMETRE: Unit = Unit { symbol: "mm", size: 1e-3 };

impl Field {
    /// All of them.
    pub const ALL: [Self; 6] = [
        Self::LargestPrincipal,
        Self::SmallestPrincipal,
        Self::MeanStress,
        Self::LargestShear,
        Self::Uptake,
        Self::TearShare,
    ];

    /// What a mechanician calls it.
    pub fn name(self) -> &'static str {
        match self {
            Self::LargestPrincipal => "largest principal stress",
            Self::SmallestPrincipal => "smallest principal stress",
            Self::MeanStress => "mean stress",
            Self::LargestShear => "largest shear stress",
            Self::Uptake => "water uptake",
            Self::TearShare => "share of tear probability",
        }
    }

    /// The unit its values are printed in.
    pub fn unit(self) -> Unit {
        match self {
            Self::Uptake => Unit { symbol: "g/g", size: 1.0 },
            // Per volume of swollen gel, so that it does not depend on the voxels.
            Self::TearShare => Unit { symbol: "% per mm³", size: 0.01 / 1e-9 },
            _ => KILOPASCAL,
        }
    }

    /// Whether it is a stress that is tension above zero and compression below.
    pub fn is_signed_stress(self) -> bool {
        matches!(self, Self::LargestPrincipal | Self::SmallestPrincipal | Self::MeanStress)
    }
}
