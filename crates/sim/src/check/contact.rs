use super::CheckLine;
use super::lattice::{reference_gel, sphere, squeeze};
use super::line::Subject;
use bedswell_grains::{Normal, mindlin_ratio};

const JOHNSON: &str = "Hertz law, worked from Johnson 1985 ch. 4 (from memory)";
const MINDLIN: &str = "Mindlin 1949 (from memory)";
const ELEMENTS: &str = "quadratic finite elements over Hertz with drained moduli";

const SUBJECT: Subject = Subject("contact");

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || {
        let (force, _) = Normal::Hertz { effective_modulus: 20_000.0 / 3.0 }.push(6.325_745e-5, 5.0e-4);
        SUBJECT.line("force of two soft spheres pressed 63 µm together (N)", force, 1e-4, JOHNSON, 1e-6)
    },
    || {
        let (_, stiffness) = Normal::Hertz { effective_modulus: 3.678_016e10 }.push(9.403_909e-7, 5.0e-4);
        SUBJECT.line("stiffness of two glass spheres under 1 N (N/m)", stiffness, 1.595_081e6, JOHNSON, 1e-6)
    },
    || {
        SUBJECT.line(
            "tangential over normal stiffness, Poisson ratio 0.25",
            mindlin_ratio(0.25),
            0.857_143,
            MINDLIN,
            1e-6,
        )
    },
    || {
        let value = over_hertz(0.05);
        SUBJECT.line(
            "force on a bead indented by 0.05 R over the Hertz law, 32 across",
            value,
            1.096,
            ELEMENTS,
            0.04,
        )
    },
];

/// Force of a bead between two spheres of half its radius over that of Hertz's law.
fn over_hertz(indentation: f64) -> f64 {
    let spheres = [sphere(0, 1.0, 0.5, indentation), sphere(0, -1.0, 0.5, indentation)];
    let moduli = reference_gel().moduli();
    let law = Normal::Hertz { effective_modulus: moduli.plane_strain() / moduli.shear };
    squeeze(32, &spheres, true).1 / law.push(indentation, 1.0 / 3.0).0
}
