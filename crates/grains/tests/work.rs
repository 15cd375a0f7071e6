//! The account of work.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

use bedswell_geometry::{Vector, stream};
use bedswell_grains::{Assembly, Lid, Normal, PackRequest, Sides, WorkAccount, pack};

fn bed(lid_stress: f64) -> Assembly {
    let request = PackRequest {
        grains: vec![2.0e-3; 300],
        beads: 0,
        bead_diameter: 1.0e-3,
        porosity: Some(0.41),
        accept_loose: false,
        lid_stress,
        friction: 0.5,
        rolling: 0.0,
        sides: Sides::FloorAndLid,
    };
    pack(&request, &mut stream(7, &[])).unwrap().assembly
}

/// Pushes grains near the middle of the bed apart, as a swelling bead does, ever harder,
/// then lets the bed come to rest.
fn pushed(mut grains: Assembly, largest: f64, lid_force: f64) -> WorkAccount {
    let middle = 0.5 * grains.cell.size;
    grains.compute_contacts();
    grains.stop();
    grains.start_account();
    for step in 0..6_000 {
        grains.compute_contacts();
        let strength = largest * (f64::from(step) / 3_000.0).min(1.0);
        for grain in 0..grains.radii.len() {
            let out = grains.centres[grain] - middle;
            let distance = out.norm();
            if distance < 3.0e-3 {
                let torque = Vector::z() * (0.05e-3 * strength);
                grains.add_load(grain, out * (strength / distance), torque, 0.0);
            }
        }
        grains.add_lid_load(lid_force * strength / largest, 0.0);
        grains.advance(0.3);
    }
    grains.compute_contacts();
    grains.account().unwrap()
}

fn assert_closes(name: &str, account: WorkAccount) {
    let share = account.gap() / account.loads;
    println!("{name}: {account:?}, misses {:.2e}", share);
    assert!(account.loads > 0.0 && account.friction > 0.0, "{name}: {account:?}");
    assert!(share.abs() < 2.0e-3, "{name}: {account:?} misses {share}");
}

#[test]
fn the_work_of_loads_is_stored_lifted_or_lost() {
    let stress = 2.0e3;
    let grains = bed(stress);
    let force = 30.0 * grains.rest().mean_contact_force;
    assert_closes("under a lid", pushed(grains.clone(), force, 0.0));
    let lid_force = 0.5 * stress * grains.section();
    assert_closes("lid relieved", pushed(grains.clone(), force, lid_force));
    let mut rolls = grains.clone();
    rolls.law.rolling = 0.2;
    assert_closes("with rolling friction", pushed(rolls, force, 0.0));
    let mut open = grains;
    open.lid = Lid::Open;
    open.weights.fill(Vector::z() * -force / 30.0);
    for _ in 0..6_000 {
        open.compute_contacts();
        open.advance(0.5);
    }
    let account = pushed(open, force, 0.0);
    assert!(account.lifted > 0.0);
    assert_closes("under weights", account);
}

#[test]
fn a_spring_pushed_in_and_let_go_gives_back_what_it_took() {
    let mut grains = bed(2.0e3);
    grains.lid = Lid::Fixed;
    grains.compute_contacts();
    let start = grains.stored_energy();
    let Normal::Linear { modulus } = grains.law.normal else { unreachable!("packs use springs") };
    let pushes: f64 = (grains.contacts())
        .map(|contact| {
            let reduced = match contact.partner {
                bedswell_grains::Partner::Grain(_) => 0.5e-3,
                _ => 1.0e-3,
            };
            let tangential = grains.law.tangential_ratio * 2.0 * modulus * reduced;
            0.5 * contact.force.powi(2) / (2.0 * modulus * reduced)
                + 0.5 * contact.drag.norm_squared() / tangential
        })
        .sum();
    approx::assert_relative_eq!(start, pushes, max_relative = 1.0e-6);
    assert_eq!(grains.account(), None);
}
