//! Packs against densities and contact numbers found by others.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_geometry::{Cell, offset, stream};
use bedswell_grains::{
    Grading, Normal, POROSITY_TOLERANCE, Pack, PackError, PackRequest, Partner, Sides, beads_for_dose, pack,
};

/// Equal grains with one small bead, at an ordinary porosity.
fn bed() -> PackRequest {
    PackRequest {
        grains: vec![2.0e-3; 600],
        beads: 1,
        bead_diameter: 1.0e-3,
        porosity: Some(0.40),
        accept_loose: false,
        lid_stress: 2.0e3,
        friction: 0.5,
        rolling: 0.0,
        sides: Sides::FloorAndLid,
    }
}

/// Grains alone, compressed without friction in a box without walls.
fn endless(grains: Vec<f64>) -> PackRequest {
    PackRequest { grains, beads: 0, porosity: None, friction: 0.0, sides: Sides::Periodic, ..bed() }
}

fn packed(request: &PackRequest, seed: u64) -> Pack {
    pack(request, &mut stream(seed, &[0])).unwrap_or_else(|error| panic!("{request:?}: {error}"))
}

fn refused(request: &PackRequest) -> PackError {
    pack(request, &mut stream(1, &[0])).expect_err("this must be refused")
}

/// Mean overlap of the contacts over the smaller diameter, from the places alone.
fn mean_overlap(pack: &Pack) -> f64 {
    let grains = &pack.assembly;
    let overlaps: Vec<f64> = (grains.contacts())
        .filter_map(|contact| {
            let Partner::Grain(other) = contact.partner else { return None };
            let apart = grains.cell.separation(&grains.centres[contact.grain], &grains.centres[other]);
            let (a, b) = (grains.radii[contact.grain], grains.radii[other]);
            Some((a + b - apart.norm()) / (2.0 * a.min(b)))
        })
        .collect();
    overlaps.iter().sum::<f64>() / overlaps.len() as f64
}

/// Deepest overlap over the smaller diameter, by looking at every pair.
fn deepest_overlap(pack: &Pack) -> f64 {
    let spheres = pack.assembly.spheres();
    let cell: &Cell = &pack.assembly.cell;
    let mut deepest = 0.0_f64;
    for (index, a) in spheres.iter().enumerate() {
        for b in &spheres[index + 1..] {
            for x in -1..=1 {
                for y in -1..=1 {
                    let gap = (b.centre + offset(cell, [x, y, 0]) - a.centre).norm() - a.radius - b.radius;
                    deepest = deepest.max(-gap / (2.0 * a.radius.min(b.radius)));
                }
            }
        }
    }
    deepest
}

#[test]
fn a_target_porosity_is_met_by_a_bed_at_rest() {
    for porosity in [0.39, 0.40, 0.43] {
        let pack = packed(&PackRequest { porosity: Some(porosity), ..bed() }, 1);
        let report = pack.report;
        assert!((report.porosity - porosity).abs() <= POROSITY_TOLERANCE, "{porosity}: {report:?}");
        assert!(report.stable && report.rest.lid_unbalance < 0.01, "{porosity}: {report:?}");
        // At least the isostatic number of rough grains, at most that of smooth ones.
        assert!((4.0..6.0).contains(&(report.contact_number + 0.1)), "{porosity}: {report:?}");
        assert!(deepest_overlap(&pack) < 1.0e-3, "{porosity}: {}", deepest_overlap(&pack));
        assert_eq!((pack.grains().len(), pack.beads().len()), (600, 1));
        let lid: f64 = (pack.assembly.contacts())
            .filter(|contact| contact.partner == Partner::Lid)
            .map(|contact| contact.force)
            .sum();
        let size = pack.assembly.cell.size;
        assert!((lid / (2.0e3 * size.x * size.y) - 1.0).abs() < 0.01, "the lid is carried: {lid}");
    }
}

#[test]
fn wide_gradings_keep_small_grains_from_being_crushed() {
    let openings = [0.4e-3, 0.6e-3, 1.0e-3, 2.0e-3, 3.0e-3];
    let grading = Grading::from_sieves(&openings, &[0.0, 10.0, 25.0, 60.0, 100.0], None).unwrap();
    let pack = packed(&PackRequest { grains: grading.packed.sample(900), porosity: None, ..bed() }, 1);
    assert!(deepest_overlap(&pack) < 1.0e-3, "{}", deepest_overlap(&pack));
    assert!(pack.report.porosity < 0.40, "a wide grading packs densely: {:?}", pack.report);
}

#[test]
fn smooth_equal_spheres_pack_to_random_close_packing() {
    // 0.639 and contact number 6 (Agnolin & Roux 2007); a small box, so a wider bar
    // than for the 5,000 spheres below.
    let pack = packed(&endless(vec![2.0e-3; 800]), 1);
    let solid = 1.0 - pack.report.porosity;
    assert!((0.630..0.650).contains(&solid), "{solid}");
    assert!((pack.report.contact_number - 6.0).abs() < 0.15, "{:?}", pack.report);
}

#[test]
#[ignore = "reference density at full size, about ten seconds"]
fn five_thousand_smooth_equal_spheres_reach_the_reference_density() {
    let pack = packed(&endless(vec![2.0e-3; 5000]), 1);
    let solid = 1.0 - pack.report.porosity;
    let contacts = pack.report.contact_number;
    println!(
        "5,000 equal: solid {solid:.4}, contact number {contacts:.3}, mean overlap {:.1e}",
        mean_overlap(&pack)
    );
    assert!((0.635..0.645).contains(&solid), "{solid}");
    assert!((pack.report.contact_number - 6.0).abs() < 0.1, "{:?}", pack.report);
    assert!(mean_overlap(&pack) < 1.0e-3, "{}", mean_overlap(&pack));
}

#[test]
#[ignore = "two packs of 3,000 grains, about ten seconds"]
fn smooth_lognormal_spheres_pack_inside_the_published_band() {
    // Between Desmond & Weeks 2014 (coefficients from memory) and Farr 2013, ± 0.01.
    for (sigma, band) in [(0.2_f64, 0.6494..0.6570), (0.4, 0.6811..0.6885)] {
        let grading = Grading::lognormal(2.0e-3, sigma.exp(), None).unwrap();
        let pack = packed(&endless(grading.packed.sample(3000)), 2);
        let solid = 1.0 - pack.report.porosity;
        println!("lognormal {sigma}: solid {solid:.4}");
        assert!(solid > band.start - 0.01 && solid < band.end + 0.01, "sigma {sigma}: {solid}");
    }
}

#[test]
#[ignore = "20,000 grains, about ten seconds"]
fn twenty_thousand_well_graded_grains_meet_their_porosity() {
    let grading = Grading::from_sieves(&[0.5e-3, 0.625e-3, 2.5e-3, 5.0e-3], &[0.0, 10.0, 60.0, 100.0], None);
    let grading = grading.unwrap();
    assert!((grading.soil.numbers().uniformity.unwrap() - 4.0).abs() < 1.0e-9);
    let grains = grading.packed.sample(20_000);
    let pack = packed(&PackRequest { grains, accept_loose: true, ..bed() }, 1);
    println!("20,000 graded: {:?}", pack.report);
    assert!((pack.report.porosity - 0.40).abs() <= POROSITY_TOLERANCE, "{:?}", pack.report);
    assert!(pack.report.rest.deepest_overlap < 1.0e-3, "{:?}", pack.report);
}

#[test]
fn friction_makes_loose_beds() {
    let collapsed = |friction| {
        let request = PackRequest { porosity: None, friction, sides: Sides::Periodic, beads: 0, ..bed() };
        packed(&request, 3).report
    };
    let (smooth, rough) = (collapsed(0.0), collapsed(0.5));
    // Random loose packing of rough spheres is 0.550 (Jerkins et al. 2008).
    assert!((0.54..0.58).contains(&(1.0 - rough.porosity)), "{rough:?}");
    assert!(rough.porosity > smooth.porosity + 0.05);
}

#[test]
fn a_porosity_out_of_reach_is_refused_with_the_range() {
    for porosity in [0.30, 0.55] {
        match refused(&PackRequest { porosity: Some(porosity), ..bed() }) {
            PackError::PorosityOutOfReach { densest, loosest, .. } => {
                assert!((0.35..0.40).contains(&densest) && (0.42..0.48).contains(&loosest));
            }
            other => panic!("{other}"),
        }
    }
    let loose = packed(&PackRequest { porosity: Some(0.50), accept_loose: true, ..bed() }, 1);
    assert!((loose.report.porosity - 0.50).abs() < POROSITY_TOLERANCE && !loose.report.stable);
}

#[test]
fn twice_the_stiffness_leaves_a_collapsed_bed_as_it_is() {
    let pack = packed(&PackRequest { porosity: None, friction: 0.3, ..bed() }, 1);
    let mut grains = pack.assembly.clone();
    let Normal::Linear { modulus } = grains.law.normal else { unreachable!("packs use springs") };
    grains.law.normal = Normal::Linear { modulus: 2.0 * modulus };
    for _ in 0..4_000 {
        grains.compute_contacts();
        grains.advance(0.7);
    }
    grains.compute_contacts();
    let porosity = 1.0 - grains.solid_fraction();
    assert!((porosity - pack.report.porosity).abs() < 1.0e-3, "{porosity}, {:?}", pack.report);
    let (before, after) = (pack.report.contact_number, grains.contact_number());
    assert!((after - before).abs() < 0.3, "{before} contacts become {after}");
    let force = grains.rest().mean_contact_force / pack.report.rest.mean_contact_force;
    assert!((force - 1.0).abs() < 0.1, "mean contact force changes by {force}");
}

#[test]
fn packs_do_not_depend_on_threads() {
    let places = |seed| {
        let spheres = packed(&PackRequest { grains: vec![2.0e-3; 200], ..bed() }, seed).assembly.spheres();
        spheres.into_iter().flat_map(|sphere| sphere.centre.data.0[0].map(f64::to_bits)).collect::<Vec<_>>()
    };
    let alone: Vec<_> = (0..2).map(places).collect();
    let together = std::thread::scope(|scope| {
        let packs: Vec<_> = (0..2).map(|seed| scope.spawn(move || places(seed))).collect();
        packs.into_iter().map(|pack| pack.join().unwrap()).collect::<Vec<_>>()
    });
    assert_eq!(alone, together);
    assert_ne!(alone[0], alone[1], "seeds matter");
}

#[test]
fn beads_taken_out_leave_the_grains_in_place() {
    let pack = packed(&bed(), 1);
    let mut grains = pack.assembly.clone();
    grains.truncate(pack.grain_count);
    assert_eq!(grains.spheres(), pack.grains());
    let before: Vec<_> = pack.assembly.contacts().filter(|c| c.grain < 600).collect();
    grains.compute_contacts();
    let after: Vec<_> = grains.contacts().collect();
    assert!(after.len() + 12 >= before.len() && after.len() <= before.len());
}

#[test]
fn doses_become_beads() {
    // 600 grains of 2 mm at 2650 kg/m³ weigh 6.66 g; 5 g/kg of them is 33.3 mg, and a
    // bead of 2 mm at 1500 kg/m³ weighs 6.28 mg.
    let grains = vec![2.0e-3; 600];
    assert_eq!(beads_for_dose(5.0e-3, 2.0e-3, 1500.0, &grains, 2650.0), Ok(5));
    assert!(matches!(
        beads_for_dose(1.0e-4, 2.0e-3, 1500.0, &grains, 2650.0),
        Err(PackError::DoseLeavesNoBead { needed: 5661, .. })
    ));
    assert!(matches!(
        beads_for_dose(1.0, 2.0e-3, 1500.0, &grains, 2650.0),
        Err(PackError::DoseLeavesNoGrains { .. })
    ));
    assert!(matches!(
        beads_for_dose(-1.0, 2.0e-3, 1500.0, &grains, 2650.0),
        Err(PackError::NotPositive { value: -1.0, .. })
    ));
    assert_eq!(beads_for_dose(5.0e-3, 2.0e-3, 1500.0, &[], 2650.0), Err(PackError::NoGrains));
}

#[test]
fn bad_requests_are_refused_with_the_value() {
    assert_eq!(refused(&PackRequest { grains: vec![], ..bed() }), PackError::NoGrains);
    assert_eq!(
        refused(&PackRequest { bead_diameter: -1.0, ..bed() }),
        PackError::Diameter { index: 600, diameter: -1.0 }
    );
    assert_eq!(refused(&PackRequest { porosity: Some(1.2), ..bed() }), PackError::Porosity(1.2));
    assert_eq!(refused(&PackRequest { lid_stress: 0.0, ..bed() }), PackError::LidStress(0.0));
    assert!(matches!(
        refused(&PackRequest { bead_diameter: 0.05, ..bed() }),
        PackError::BeadLargerThanBed { diameter: 0.05, .. }
    ));
    assert!(matches!(
        refused(&PackRequest { grains: vec![2.0e-3; 5], beads: 0, ..bed() }),
        PackError::TooFewGrains { .. }
    ));
    assert!(matches!(refused(&PackRequest { friction: f64::NAN, ..bed() }), PackError::Assembly(_)));
}

#[test]
fn grains_that_resist_rolling_pack_looser() {
    let poured = |rolling: f64| {
        packed(&PackRequest { porosity: None, friction: 0.5, rolling, ..bed() }, 1).report.porosity
    };
    let (round, angular) = (poured(0.0), poured(0.3));
    assert!(angular > round + 0.005, "round {round}, angular {angular}");
}
