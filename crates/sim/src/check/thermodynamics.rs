use super::CheckLine;
use super::line::Subject;
use bedswell_gel::{Gel, GelNumbers, Surroundings};

const FREE: &str = "Flory-Huggins gel (Hong et al. 2008, from memory) solved with scipy";
const DONNAN: &str = "the same with Donnan ions (Ricka & Tanaka 1984, from memory)";
const MODULI: &str = "drained moduli (form of Bouklas & Huang 2012, from memory), by finite differences";
/// The references have nine digits.
const DIGITS: f64 = 1e-8;

const SUBJECT: Subject = Subject("thermodynamics");

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || {
        SUBJECT.line(
            "free stretch, n 1e-3, chi 0.2",
            gel(1e-3, 0.2, 0.0, 0.0).free_stretch(),
            3.215_021_51,
            FREE,
            DIGITS,
        )
    },
    || {
        SUBJECT.line(
            "free stretch, n 1e-4, chi 0.4",
            gel(1e-4, 0.4, 0.0, 0.0).free_stretch(),
            4.070_460_60,
            FREE,
            DIGITS,
        )
    },
    || {
        SUBJECT.line(
            "free stretch, n 1e-5, chi 0.5",
            gel(1e-5, 0.5, 0.0, 0.0).free_stretch(),
            3.717_379_48,
            FREE,
            DIGITS,
        )
    },
    || {
        let value = gel(1e-3, 0.45, 0.1, 1e-3).free_stretch();
        SUBJECT.line("free stretch, charges 0.1, salt 0.001 mol/L", value, 8.885_689_48, DONNAN, DIGITS)
    },
    || {
        let value = gel(1e-3, 0.45, 0.1, 0.154).free_stretch();
        SUBJECT.line("free stretch, charges 0.1, salt 0.154 mol/L", value, 3.983_266_92, DONNAN, DIGITS)
    },
    || {
        let gel = gel(1e-3, 0.2, 0.0, 0.0);
        SUBJECT.line(
            "bulk modulus over kT/Ω, n 1e-3, chi 0.2",
            gel.moduli().bulk() / gel.energy_density(),
            4.978_162e-4,
            MODULI,
            1e-6,
        )
    },
    || {
        SUBJECT.line(
            "Poisson ratio, n 1e-4, chi 0.4",
            gel(1e-4, 0.4, 0.0, 0.0).moduli().poisson(),
            0.248_095_35,
            MODULI,
            1e-7,
        )
    },
    || {
        let gel = gel(1e-3, 0.2, 0.0, 0.0);
        let value = gel.confining_pressure(0.5 * gel.free_volume_ratio()) / gel.energy_density();
        SUBJECT.line(
            "pressure over kT/Ω in a rigid cavity of half the free volume",
            value,
            8.310_277_25e-4,
            FREE,
            DIGITS,
        )
    },
    || {
        let value = gel(1e-3, 0.45, 0.1, 1e-3).confining_pressure(422.898_067);
        SUBJECT.line("pressure on a charged gel at J 422.9 (Pa)", value, 1e4, DONNAN, 1e-6)
    },
];

fn gel(crosslinks: f64, chi: f64, charges: f64, salt: f64) -> Gel {
    Gel::new(GelNumbers { crosslinks, chi, charges }, Surroundings { salt, ..Surroundings::default() })
}
