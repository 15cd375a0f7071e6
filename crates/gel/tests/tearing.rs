//! Beads that tear, hold, and remember.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_gel::{
    Bead, Criterion, Face, Gel, GelNumbers, Grip, Lattice, Obstacle, Relaxation, Rupture, RuptureError,
    RuptureSnapshot, Surroundings, Tolerance, Toughness, ToughnessError,
};
use bedswell_geometry::Vector;
use std::sync::Arc;

/// Radius of the free-swollen bead (m).
const RADIUS: f64 = 1e-3;
const TOLERANCE: Tolerance = Tolerance { residual: 1e-4, corrections: 2, held: true };

fn gel() -> Gel {
    Gel::new(GelNumbers { crosslinks: 2.6659866e-5, chi: 0.30, charges: 0.0 }, Surroundings::default())
}

/// A fracture energy as a share of G* R* (J/m²), and stress averaged over a third of the radius.
fn toughness(energy: f64) -> Toughness {
    let energy = energy * gel().moduli().shear * RADIUS;
    Toughness { energy, length: Some(RADIUS / 3.0), ..Toughness::default() }
}

fn bead(across: usize, stretch: f64) -> Bead {
    Bead::new(Arc::new(Lattice::new(across)), RADIUS / gel().free_stretch(), Vector::zeros(), stretch)
}

/// Six grains on the axes, of 0.4 radii, at a distance of their surface from the centre.
fn grains(distance: f64) -> Vec<Obstacle> {
    let grain = |axis, side: f64| Obstacle::Sphere {
        centre: Vector::ith(axis, side * RADIUS * (distance + 0.4)),
        radius: RADIUS * 0.4,
    };
    (0..3).flat_map(|axis| [1.0, -1.0].map(|side| grain(axis, side))).collect()
}

/// Swells a bead from where it touches nothing, and lets it tear.
fn swell(across: usize, toughness: &Toughness, distance: f64) -> Rupture {
    let (gel, free) = (gel(), gel().free_stretch());
    let mut stretch = 0.98 * distance * free;
    let mut rupture = Rupture::new(bead(across, stretch), toughness, &gel).unwrap();
    while stretch < free {
        stretch = (1.05 * stretch).min(free);
        rupture.relax(&gel.limited_to(stretch), &grains(distance), TOLERANCE).unwrap();
    }
    rupture
}

#[test]
fn an_avalanche_among_grains_runs_to_arrest_at_any_resolution() {
    for across in [12, 16, 24] {
        let rupture = swell(across, &toughness(1.5e-3), 0.65);
        let section = std::f64::consts::PI * RADIUS * RADIUS;
        println!(
            "{across} across: {} ruptures, crack area {:.3} of the mid-section, {} bodies",
            rupture.events().len(),
            rupture.crack_area() / section,
            rupture.fragments().len()
        );
        assert!(!rupture.events().is_empty());
        assert_eq!(rupture.load(&gel(), 1.0), 0.0, "nothing is overloaded at rest");
        let area: f64 = rupture.events().iter().map(|event| event.area).sum();
        assert!((area / rupture.crack_area() - 1.0).abs() < 1e-9);
        let share: f64 = rupture.fragments().iter().map(|fragment| fragment.share).sum();
        assert!((share - 1.0).abs() < 1e-12, "no gel is lost");
        assert!(rupture.events().iter().all(|event| event.ratio >= 1.0 && event.depth >= 0.0));
    }
}

#[test]
fn a_bead_that_only_touches_its_grains_does_not_tear() {
    let rupture = swell(12, &toughness(1e-6), 1.0);
    assert!(rupture.events().is_empty() && rupture.crack_area() == 0.0);
}

#[test]
fn closer_grains_tear_more() {
    let areas = [0.8, 0.7, 0.65].map(|distance| swell(12, &toughness(1e-3), distance).crack_area());
    println!("{areas:?}");
    assert!(areas[0] == 0.0 && areas[1] <= areas[2] && areas[2] > 0.0, "{areas:?}");
}

/// The mean stress over the mid-section at which a bead that is gripped at its caps gives way.
fn nucleation_stress(across: usize) -> f64 {
    let gel = gel();
    let stretch = gel.free_stretch();
    let tough = Toughness { scatter: 0.0, ..toughness(0.3) };
    let mut rupture = Rupture::new(bead(across, stretch), &tough, &gel).unwrap();
    let lattice = Arc::new(Lattice::new(across));
    let edge = 2.0 * RADIUS / across as f64;
    let capped: Vec<usize> = (0..lattice.node_count())
        .filter(|&node| 4.0 * lattice.node_offset(node)[2].abs() >= across as f64 - 1e-6)
        .collect();
    let pulled = |by: f64| -> Vec<Grip> {
        let grip = |&node: &usize| {
            let [x, y, z] = lattice.node_offset(node).map(|c| c * edge);
            Grip { node: node as u32, place: Vector::new(x, y, z + by * z.signum()), along: [true; 3] }
        };
        capped.iter().map(grip).collect()
    };
    let mut before = (0.0, 0.0);
    for step in 1..40 {
        rupture.grip(pulled(0.02 * RADIUS * f64::from(step))).unwrap();
        rupture.settle(&gel, &[], TOLERANCE).unwrap();
        let load = rupture.load(&gel, 1e-3);
        let force: f64 = rupture.grip_forces().iter().map(|force| force.z.abs()).sum::<f64>() / 2.0;
        if load >= 1.0 {
            let share = (1.0 - before.0) / (load - before.0);
            let force = before.1 + share * (force - before.1);
            return force / (std::f64::consts::PI * RADIUS * RADIUS * gel.moduli().shear);
        }
        before = (load, force);
    }
    panic!("it never gives way");
}

/// No outside source: the criterion's promise that the voxel size does not matter.
#[test]
fn a_bead_pulled_at_its_poles_gives_way_at_one_stress_at_any_resolution() {
    let stresses = [12, 16, 24].map(nucleation_stress);
    println!("nucleation at {stresses:?} G");
    let [least, most] = [f64::min, f64::max].map(|pick| stresses.into_iter().reduce(pick).unwrap());
    assert!(most / least < 1.05, "{stresses:?}");
}

/// Weakest link: N times the volume has N^(-1/m) times the strength in the mean, with m =
/// 12.15 for a scatter of 0.1 (Weibull 1951, J. Appl. Mech. 18:293, from memory).
#[test]
fn larger_blocks_are_weaker_by_weibulls_law() {
    let (gel, seeds) = (gel(), 150);
    let strength = |cubes: usize| {
        let lattice = Arc::new(Lattice::block([2 * cubes; 3]));
        let free = gel.free_stretch();
        let strengths: Vec<f64> = (0..seeds)
            .map(|seed| {
                let block = Bead::new(Arc::clone(&lattice), 1.0, Vector::zeros(), 1.1 * free);
                let length = free * 2.0 / (2 * cubes) as f64 * 2.0;
                let tough = Toughness { energy: 1e3, length: Some(length), scatter: 0.1, seed };
                let even = Toughness { scatter: 0.0, ..tough };
                let load = |tough| Rupture::new(block.clone(), &tough, &gel).unwrap().load(&gel, 1e-9);
                load(even) / load(tough)
            })
            .collect();
        strengths.iter().sum::<f64>() / seeds as f64
    };
    let modulus = 12.15;
    for cubes in [4, 6] {
        let mean = strength(cubes);
        let expected = ((cubes * cubes * cubes) as f64).powf(-1.0 / modulus);
        // The weakest of any number scatters by a tenth too.
        let error = 0.1 / (seeds as f64).sqrt();
        println!("{cubes}³ cubes: strength {mean:.4} ({expected:.4}), sampling error {error:.4}");
        assert!((mean / expected - 1.0).abs() < 3.0 * error, "{cubes}: {mean} {expected}");
    }
}

#[test]
fn ruptures_are_remembered_through_shrinking_and_swelling_again() {
    let mut rupture = swell(12, &toughness(1e-3), 0.65);
    let area = rupture.crack_area();
    assert!(area > 0.0);
    let free = gel().free_stretch();
    let mut relax = |share: f64| {
        rupture.relax(&gel().limited_to(share * free), &grains(0.65), TOLERANCE).unwrap();
        (rupture.events().len(), rupture.crack_area(), rupture.bead().volume() / rupture.bead().dry_volume())
    };
    let shrunk = [0.9, 0.75, 0.6].map(&mut relax)[2];
    let swollen = [0.63, 0.75, 0.9, 1.0].map(&mut relax);
    println!("{area:e}, {shrunk:?}, {swollen:?}");
    assert!(shrunk.1 >= area, "cracks do not heal");
    assert!((shrunk.2 / (0.6 * free).powi(3) - 1.0).abs() < 1e-3, "a torn bead shrinks as a whole one");
    assert_eq!(swollen[0].0, shrunk.0, "a bead that touches nothing tears no further");
    assert!(swollen[3].1 >= shrunk.1);
}

#[test]
fn a_run_resumed_from_what_was_written_goes_on_to_the_same_bits() {
    let (gel, free, grains) = (gel(), gel().free_stretch(), grains(0.65));
    let start = || Rupture::new(bead(12, 0.6 * free), &toughness(1.2e-3), &gel).unwrap();
    let stages = [0.7, 0.8, 0.9, 0.95, 1.0];
    let relax = |rupture: &mut Rupture, share: f64| {
        rupture.relax(&gel.limited_to(share * free), &grains, TOLERANCE).unwrap();
    };
    let mut whole = start();
    stages[..4].iter().for_each(|&share| relax(&mut whole, share));
    let written = serde_json::to_string(&whole.snapshot()).unwrap();
    let snapshot: RuptureSnapshot = serde_json::from_str(&written).unwrap();
    assert!(!snapshot.ruptured.is_empty() && !snapshot.pressures.is_empty());
    let mut resumed = start().resume(&snapshot).unwrap();
    relax(&mut whole, stages[4]);
    relax(&mut resumed, stages[4]);
    assert!(whole.events().len() > snapshot.events.len());
    assert_eq!(whole.snapshot(), resumed.snapshot());
}

/// A fragment of one voxel that nothing holds keeps its place and swells as it would alone.
#[test]
fn a_voxel_cut_out_of_a_bead_is_a_body_of_its_own_with_a_state() {
    let gel = gel();
    let mut rupture = Rupture::new(bead(12, gel.free_stretch()), &toughness(1.0), &gel).unwrap();
    let lattice = rupture.bead().lattice();
    let middle = (0..lattice.voxel_count()).find(|&v| lattice.voxel_offset(v) == [0.5; 3]).unwrap();
    let around: Vec<_> = lattice
        .bonds()
        .into_iter()
        .filter(|&(low, high, _)| low == middle || high == middle)
        .map(|(low, _, axis)| Face { low: low as u32, axis: axis as u8 })
        .collect();
    assert_eq!(around.len(), 6);
    rupture.cut(&around);
    rupture.settle(&gel.limited_to(0.9 * gel.free_stretch()), &[], TOLERANCE).unwrap();
    let fragments = rupture.fragments();
    assert_eq!(fragments.iter().map(|fragment| fragment.voxels).collect::<Vec<_>>()[1..], [1]);
    let voxel = (2.0 * RADIUS / 12.0 * 0.9).powi(3);
    assert!((fragments[1].volume / voxel - 1.0).abs() < 0.02, "{} {voxel}", fragments[1].volume);
}

#[test]
fn what_cannot_be_used_is_refused_with_what_would_do() {
    let gel = gel();
    let with = |toughness: Toughness| match Rupture::new(bead(12, 6.0), &toughness, &gel) {
        Err(RuptureError::Toughness(error)) => error,
        other => panic!("{other:?}"),
    };
    let good = toughness(1e-3);
    assert_eq!(with(Toughness { energy: 0.0, ..good }), ToughnessError::Energy(0.0));
    assert_eq!(with(Toughness { energy: -1.0, ..good }), ToughnessError::Energy(-1.0));
    assert_eq!(with(Toughness { length: Some(-1e-4), ..good }), ToughnessError::Length(-1e-4));
    assert_eq!(with(Toughness { scatter: 0.7, ..good }), ToughnessError::Scatter(0.7));
    assert_eq!(with(Toughness { scatter: -0.1, ..good }), ToughnessError::Scatter(-0.1));
    assert!(matches!(with(Toughness { energy: f64::NAN, ..good }), ToughnessError::Energy(_)));
    assert!(matches!(with(Toughness { length: Some(1e-2), ..good }), ToughnessError::TooLong { .. }));
    let coarse = with(Toughness { length: Some(RADIUS / 10.0), ..good });
    assert!(matches!(coarse, ToughnessError::TooCoarse { across: 40, .. }), "{coarse}");
    assert!(coarse.to_string().contains("40 voxels across"), "{coarse}");
    let mut rupture = Rupture::new(bead(12, 6.0), &good, &gel).unwrap();
    let far = Grip { node: 1_000_000, place: Vector::zeros(), along: [true; 3] };
    assert!(matches!(rupture.grip(vec![far]), Err(RuptureError::OtherLattice { .. })));
    let other = Rupture::new(bead(16, 6.0), &good, &gel).unwrap().snapshot();
    assert!(matches!(rupture.resume(&other), Err(RuptureError::OtherLattice { .. })));
}

/// Two halves in a round hole press on each other, face to face, as the whole bead would:
/// by damped steps and by Newton's method.
#[test]
fn halves_of_a_bead_bear_on_each_other_as_a_whole_one_does() {
    let gel = gel();
    let hole = [Obstacle::Cavity { centre: Vector::zeros(), radius: 0.9 * RADIUS }];
    let lattice = Lattice::new(8);
    let middle = |&(low, _, axis): &(usize, usize, usize)| axis == 2 && lattice.voxel_offset(low)[2] == -0.5;
    let face = |(low, _, axis): (usize, usize, usize)| Face { low: low as u32, axis: axis as u8 };
    let faces: Vec<Face> = lattice.bonds().into_iter().filter(middle).map(face).collect();
    let start = || bead(8, 0.9 * gel.free_stretch());
    let solved = |faces: &[Face]| {
        let mut rupture = Rupture::new(start(), &two_voxels(1.0), &gel).unwrap();
        rupture.cut(faces);
        rupture.settle(&gel, &hole, Tolerance { residual: 1e-6, corrections: 8, held: true }).unwrap();
        rupture.bead().volume()
    };
    let mut marching = Relaxation::new(start());
    marching.cut(&faces);
    marching.look(&gel, &hole, 0.2 * RADIUS);
    marching.weigh(&gel, &hole, 0.2 * RADIUS);
    for _ in 0..5_000 {
        marching.compute_forces(&gel, &hole);
        // Loads cancel in the hole: the residual is over 1e-3 G R².
        if marching.residual(&gel) < 0.1 {
            break;
        }
        marching.advance(0.7);
    }
    let (whole, halves) = (solved(&[]), solved(&faces));
    let marched = marching.bead().volume();
    println!(
        "volumes over that of a whole bead: {:.5} solved, {:.5} marched",
        halves / whole,
        marched / whole
    );
    assert!(marching.residual(&gel) < 0.1, "{}", marching.residual(&gel));
    assert!((halves / whole - 1.0).abs() < 5e-4 && (marched / whole - 1.0).abs() < 1e-3);
}

#[test]
fn a_marching_bead_tears_where_a_solved_one_does() {
    let gel = gel();
    let toughness = Toughness { energy: 1e9, ..toughness(1.0) };
    let rest = swell(12, &toughness, 0.65);
    let weak = Toughness { scatter: 0.1, ..two_voxels(1e-3) };
    let mut solved = Rupture::new(bead(12, 6.0), &weak, &gel).unwrap().resume(&rest.snapshot()).unwrap();
    let mut marching = Relaxation::new(solved.bead().clone());
    let criterion = Criterion::new(&weak, &gel, marching.bead()).unwrap();
    let events = marching.tear(&gel, &criterion);
    let count = solved.rupture_once(&gel, &grains(0.65), true).unwrap();
    assert!(count > 0 && events.len() == count);
    for (marched, solved) in events.iter().zip(solved.events()) {
        assert_eq!((marched.place, marched.ratio), (solved.place, solved.ratio));
    }
    assert!(marching.bead().lattice().ruptured().eq(solved.bead().lattice().ruptured()));
}

/// As `toughness`, with a length that 8 voxels across resolve.
fn two_voxels(energy: f64) -> Toughness {
    Toughness { length: Some(RADIUS / 2.0), ..toughness(energy) }
}
