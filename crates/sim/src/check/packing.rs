use super::CheckLine;
use super::line::Subject;
use bedswell_geometry::stream;
use bedswell_grains::{Grading, PackReport, PackRequest, Sides, pack};

const CLOSE: &str = "random close packing, frictionless (Agnolin & Roux 2007, abstract)";
const ISOSTATIC: &str = "isostatic, frictionless spheres";
const LOGNORMAL: &str = "middle of Desmond & Weeks 2014 and Farr 2013 (coefficients from memory)";

const SUBJECT: Subject = Subject("packing");

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || {
        SUBJECT.line(
            "solid fraction of 2000 equal frictionless spheres",
            solid_fraction(1.0),
            0.639,
            CLOSE,
            0.01,
        )
    },
    || {
        let value = smooth_pack(1.0).map_or(f64::NAN, |report| report.contact_number);
        SUBJECT.line("contacts of one of them that carries load", value, 6.0, ISOSTATIC, 0.1 / 6.0)
    },
    || {
        let value = solid_fraction(0.4_f64.exp());
        SUBJECT.line(
            "solid fraction of 2000 lognormal spheres of log-spread 0.4",
            value,
            0.684_8,
            LOGNORMAL,
            0.02,
        )
    },
];

fn solid_fraction(spread: f64) -> f64 {
    smooth_pack(spread).map_or(f64::NAN, |report| 1.0 - report.porosity)
}

/// A pack of smooth spheres in an endless bed.
fn smooth_pack(spread: f64) -> Option<PackReport> {
    let request = PackRequest {
        grains: Grading::lognormal(1e-3, spread, None).ok()?.packed.sample(2000),
        beads: 0,
        bead_diameter: 1e-3,
        porosity: None,
        accept_loose: false,
        lid_stress: 1e3,
        friction: 0.0,
        rolling: 0.0,
        sides: Sides::Periodic,
    };
    Some(pack(&request, &mut stream(1, &[])).ok()?.report)
}
