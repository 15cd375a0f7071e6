//! Packs in a pot.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use approx::assert_relative_eq;
use bedswell_geometry::stream;
use bedswell_grains::{
    AssemblyError, Lid, POROSITY_TOLERANCE, Pack, PackError, PackRequest, Pot, Sides, pack, submerged_weight,
    wall_porosity_rise,
};

const DIAMETER: f64 = 24.0e-3;

fn pot(open: bool) -> Pot {
    Pot {
        diameter: DIAMETER,
        grain_weight: submerged_weight(2650.0, 1000.0),
        bead_weight: submerged_weight(1600.0, 1000.0),
        open,
    }
}

/// Equal grains with a few beads in a pot twelve grains wide.
fn potful(open: bool) -> PackRequest {
    PackRequest {
        grains: vec![2.0e-3; 1_000],
        beads: 5,
        bead_diameter: 1.0e-3,
        porosity: Some(0.43),
        accept_loose: false,
        lid_stress: if open { 20.0 } else { 2.0e3 },
        friction: 0.5,
        rolling: 0.0,
        sides: Sides::Pot(pot(open)),
    }
}

fn packed(request: &PackRequest) -> Pack {
    pack(request, &mut stream(1, &[0])).unwrap_or_else(|error| panic!("{error}"))
}

/// Floor and wall carry the lid and the weights.
fn assert_carried(pack: &Pack, tolerance: f64) {
    let boundary = pack.assembly.boundary();
    let weight = -pack.assembly.weights.iter().map(|weight| weight.z).sum::<f64>();
    println!("{:?}\n{boundary:?}, weight {weight}", pack.report);
    assert_relative_eq!(
        -boundary.floor.z - boundary.wall.z,
        weight + boundary.lid.z,
        max_relative = tolerance
    );
}

#[test]
fn a_loaded_pot_has_its_porosity_and_floor_and_wall_carry_it() {
    let pack = packed(&potful(false));
    assert!((pack.report.porosity - 0.43).abs() <= POROSITY_TOLERANCE, "{:?}", pack.report);
    assert!(pack.report.stable && pack.report.rest.deepest_overlap < 1.0e-3, "{:?}", pack.report);
    let lid = pack.assembly.boundary().lid.z;
    assert_relative_eq!(lid, 2.0e3 * pack.assembly.section(), max_relative = 0.01);
    assert_carried(&pack, 0.01);
}

#[test]
fn an_open_pot_lies_under_its_own_weight() {
    let pack = packed(&potful(true));
    assert_eq!(pack.assembly.lid, Lid::Open);
    assert!((pack.report.porosity - 0.43).abs() <= POROSITY_TOLERANCE, "{:?}", pack.report);
    assert_carried(&pack, 0.01);
}

#[test]
fn narrow_pots_are_as_loose_as_dixon_found() {
    // Poured beds lie between the densest packs (without friction) and the loosest; the
    // layers at floor and lid are left out.
    for ratio in [0.125, 0.2] {
        let sides = Sides::Pot(Pot { diameter: 2.0e-3 / ratio, ..pot(false) });
        let [dense, loose] = [0.0, 0.5].map(|friction| {
            let grains = vec![2.0e-3; 500];
            let request = PackRequest { grains, porosity: None, friction, beads: 0, sides, ..potful(false) };
            packed(&request).report.core_porosity
        });
        let dixon = 0.40 + wall_porosity_rise(ratio);
        println!("grains of {ratio} of the pot: {dense} to {loose}, Dixon {dixon}");
        assert!(dense < dixon && dixon < loose, "{dense} to {loose}, Dixon {dixon}");
        assert!(dixon - dense < 0.02, "{dense}, Dixon {dixon}");
    }
}

#[test]
fn beads_alone_make_a_bed() {
    let alone = PackRequest { grains: vec![], beads: 400, porosity: None, ..potful(false) };
    let pack = packed(&PackRequest { sides: Sides::Pot(Pot { diameter: 10.0e-3, ..pot(false) }), ..alone });
    assert_eq!((pack.grains().len(), pack.beads().len()), (0, 400));
    assert!((0.38..0.50).contains(&pack.report.porosity), "{:?}", pack.report);
    assert_carried(&pack, 0.02);
}

#[test]
fn pots_that_cannot_be_packed_are_refused() {
    let refused = |request: &PackRequest| pack(request, &mut stream(1, &[0])).expect_err("must be refused");
    let with = |pot: Pot| PackRequest { sides: Sides::Pot(pot), ..potful(false) };
    assert!(matches!(
        refused(&with(Pot { diameter: 1.5e-3, ..pot(false) })),
        PackError::Assembly(AssemblyError::WiderThanPot { index: 0, .. })
    ));
    assert_eq!(
        refused(&with(Pot { diameter: -1.0, ..pot(false) })),
        PackError::Assembly(AssemblyError::WallRadius(-0.5))
    );
    assert_eq!(
        refused(&with(Pot { bead_weight: -1.0, ..pot(false) })),
        PackError::Weight { name: "beads", value: -1.0 }
    );
    assert_eq!(refused(&with(Pot { grain_weight: 0.0, ..pot(true) })), PackError::NothingHoldsDown);
    let flat = PackRequest { beads: 0, ..with(Pot { diameter: 0.2, ..pot(false) }) };
    assert!(matches!(refused(&flat), PackError::TooFewGrains { .. }));
    let small = PackRequest { grains: vec![2.0e-3; 200], ..with(Pot { diameter: 12.0e-3, ..pot(false) }) };
    match refused(&PackRequest { porosity: Some(0.25), ..small }) {
        PackError::PorosityOutOfReach { porosity: 0.25, .. } => {}
        other => panic!("{other}"),
    }
}
