use serde::{Deserialize, Serialize};

/// Gas constant over the molar volume of water, R / V₁ (Pa/K): times the
/// temperature it gives kT/Ω. R is exact by the definition of the SI; V₁ is
/// 18.0 cm³/mol.
const GAS_CONSTANT_OVER_MOLAR_VOLUME: f64 = 8.314_462_618 / 18.0e-6;

/// Molar volume of water (L/mol), which turns mol/L into a number per solvent molecule.
pub(crate) const MOLAR_VOLUME_LITRES: f64 = 0.018;

/// Density of water (kg/m³) at 25 °C; 0.2 % more at 15 °C (IAPWS formulation of 1995, from
/// memory).
pub const WATER_DENSITY: f64 = 997.0;

/// What a gel is made of, per solvent-molecule volume Ω of dry polymer.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct GelNumbers {
    /// Elastically active chains, n = NΩ.
    pub crosslinks: f64,
    /// Flory-Huggins interaction parameter.
    pub chi: f64,
    /// Fixed charges, α.
    pub charges: f64,
}

/// The water that a gel can drink.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Surroundings {
    /// Salt, as 1:1 electrolyte (mol/L).
    pub salt: f64,
    /// Water potential (Pa): 0 for free water, negative for soil suction.
    pub potential: f64,
    /// Temperature (K).
    pub temperature: f64,
}

impl Default for Surroundings {
    /// Free, salt-free water at 25 °C.
    fn default() -> Self {
        Self { salt: 0.0, potential: 0.0, temperature: 298.15 }
    }
}

/// A gel in given surroundings: its free energy as a function of deformation.
///
/// Per dry volume and in units of kT/Ω, with J the volume ratio to dry,
/// `W = (n/2)(I1 - 3) + φ(J)`, where
/// `φ = -n ln J + (J-1) ln(1 - 1/J) + χ(1 - 1/J) + ions - ψ(J - 1)`.
/// Network and mixing: Hong, Zhao, Zhou & Suo 2008, J. Mech. Phys. Solids 56:1779
/// (from memory); ions: ideal Donnan equilibrium, Ricka & Tanaka 1984,
/// Macromolecules 17:2916 (from memory).
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Gel {
    numbers: GelNumbers,
    /// Twice the salt outside per solvent molecule, 2s.
    twice_salt: f64,
    /// Water potential over kT/Ω, ψ.
    potential: f64,
    /// kT/Ω (Pa).
    energy_density: f64,
}

impl Gel {
    /// The gel in its surroundings.
    pub fn new(numbers: GelNumbers, surroundings: Surroundings) -> Self {
        let energy_density = GAS_CONSTANT_OVER_MOLAR_VOLUME * surroundings.temperature;
        Self {
            numbers,
            twice_salt: 2.0 * MOLAR_VOLUME_LITRES * surroundings.salt,
            potential: surroundings.potential / energy_density,
            energy_density,
        }
    }

    /// What the gel is made of.
    pub fn numbers(&self) -> GelNumbers {
        self.numbers
    }

    /// kT/Ω (Pa), the unit of `mixing` and its derivatives.
    pub fn energy_density(&self) -> f64 {
        self.energy_density
    }

    /// Shear modulus of the dry network, n kT/Ω (Pa).
    pub fn dry_shear_modulus(&self) -> f64 {
        self.numbers.crosslinks * self.energy_density
    }

    /// φ(J): everything but the stretched chains' (n/2)(I1 - 3), over kT/Ω.
    pub fn mixing(&self, j: f64) -> f64 {
        let GelNumbers { crosslinks, chi, charges } = self.numbers;
        let root = (charges * charges + (self.twice_salt * j).powi(2)).sqrt();
        let ions = if charges > 0.0 {
            charges * ((charges + root) / j).ln() - root + self.twice_salt * j
        } else {
            0.0
        };
        (j - 1.0) * (-1.0 / j).ln_1p() + chi * (1.0 - 1.0 / j) + ions
            - crosslinks * j.ln()
            - self.potential * (j - 1.0)
    }

    /// dφ/dJ, over kT/Ω: the negative of the swelling pressure less the network's.
    #[inline]
    pub fn mixing_slope(&self, j: f64) -> f64 {
        let GelNumbers { crosslinks, chi, .. } = self.numbers;
        let inverse = 1.0 / j;
        (-inverse).ln_1p() + inverse * (1.0 - crosslinks + chi * inverse)
            - self.ion_pressure(j)
            - self.potential
    }

    /// d²φ/dJ², over kT/Ω.
    #[inline]
    pub fn mixing_curvature(&self, j: f64) -> f64 {
        let GelNumbers { crosslinks, chi, charges } = self.numbers;
        let inverse = 1.0 / j;
        let ions = if charges > 0.0 {
            let concentration = charges * inverse;
            concentration * concentration * inverse / concentration.hypot(self.twice_salt)
        } else {
            0.0
        };
        inverse * inverse * (crosslinks + 1.0 / (j - 1.0) - 2.0 * chi * inverse) + ions
    }

    /// Osmotic pressure of the ions over kT/Ω, `√((α/J)² + 4s²) - 2s`.
    #[inline]
    fn ion_pressure(&self, j: f64) -> f64 {
        // Written so that nothing cancels when salt outweighs the charges.
        let concentration = self.numbers.charges / j;
        let square = concentration * concentration;
        if square == 0.0 {
            return 0.0;
        }
        square / ((square + self.twice_salt * self.twice_salt).sqrt() + self.twice_salt)
    }

    /// Pressure (Pa) that a rigid wall must exert to hold the gel, isotropically
    /// swollen, at the volume ratio `j` to dry.
    pub fn confining_pressure(&self, j: f64) -> f64 {
        -(self.mixing_slope(j) + self.numbers.crosslinks / j.cbrt()) * self.energy_density
    }

    /// Linear stretch from dry at which the gel is free-swollen.
    pub fn free_stretch(&self) -> f64 {
        self.free_volume_ratio().cbrt()
    }

    /// Volume ratio to dry at which the gel is free-swollen: the root of
    /// `confining_pressure`, which falls with J.
    pub fn free_volume_ratio(&self) -> f64 {
        // Bisection on ln(J - 1), to the last bits.
        let (mut low, mut high) = (-60.0_f64, 60.0_f64);
        for _ in 0..200 {
            let middle = 0.5 * (low + high);
            if middle <= low || middle >= high {
                break;
            }
            if self.confining_pressure(1.0 + middle.exp()) > 0.0 {
                low = middle;
            } else {
                high = middle;
            }
        }
        1.0 + (0.5 * (low + high)).exp()
    }

    /// The same gel at the water potential at which it swells freely to `stretch`
    /// and no further: one stage of its way from dry.
    pub fn limited_to(&self, stretch: f64) -> Self {
        let excess = self.confining_pressure(stretch.powi(3)) / self.energy_density;
        Self { potential: self.potential - excess, ..*self }
    }

    /// Drained moduli for small strains about the free-swollen state
    /// (form as in Bouklas & Huang 2012, Soft Matter 8:8194, from memory).
    pub fn moduli(&self) -> Moduli {
        let j = self.free_volume_ratio();
        let n = self.numbers.crosslinks;
        let shear = n / j.cbrt();
        let lame = j * self.mixing_curvature(j) - n * j.powf(-1.0 / 3.0);
        Moduli { shear: shear * self.energy_density, lame: lame * self.energy_density }
    }
}

/// Drained isotropic moduli: water is free to move.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Moduli {
    /// Shear modulus G (Pa).
    pub shear: f64,
    /// First Lamé constant (Pa).
    pub lame: f64,
}

impl Moduli {
    /// Bulk modulus (Pa).
    pub fn bulk(&self) -> f64 {
        self.lame + 2.0 / 3.0 * self.shear
    }

    /// Poisson ratio.
    pub fn poisson(&self) -> f64 {
        self.lame / (2.0 * (self.lame + self.shear))
    }

    /// Young's modulus (Pa).
    pub fn young(&self) -> f64 {
        2.0 * self.shear * (1.0 + self.poisson())
    }

    /// Plane-strain modulus E/(1 - ν²) (Pa), which sets contact stiffness.
    pub fn plane_strain(&self) -> f64 {
        self.young() / (1.0 - self.poisson().powi(2))
    }
}
