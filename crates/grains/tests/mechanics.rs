//! Contacts and motion of grains against laws that hold exactly.

use approx::assert_relative_eq;
use bedswell_geometry::{Cell, Sphere, Vector, stream};
use bedswell_grains::{Assembly, AssemblyError, ContactLaw, Lid, Normal, Partner, mindlin_ratio};
use rand::RngExt;

const FRICTION: f64 = 0.4;

/// Elastic spheres with friction (Poisson ratio 0.25).
fn rough_spheres() -> ContactLaw {
    ContactLaw {
        normal: Normal::Hertz { effective_modulus: 1.0e6 },
        friction: FRICTION,
        tangential_ratio: mindlin_ratio(0.25),
        rolling: 0.0,
    }
}

/// Two grains of 1 mm radius, pressed together by `overlap` along `direction`, in
/// an open cell far from floor and lid.
fn two_grains(overlap: f64, direction: Vector, law: ContactLaw) -> Assembly {
    let cell = Cell { size: Vector::repeat(0.02), periodic: [false; 3] };
    let first = Vector::repeat(0.01);
    let second = first + direction.normalize() * (2.0e-3 - overlap);
    let spheres = [first, second].map(|centre| Sphere { centre, radius: 1.0e-3 });
    Assembly::new(cell, &spheres, law, Lid::Fixed).unwrap()
}

/// One step with prescribed velocities: the contact's own loads are cancelled.
fn carry(grains: &mut Assembly, velocities: [Vector; 2], spins: [Vector; 2]) {
    grains.compute_contacts();
    for grain in 0..2 {
        let (force, torque) = (grains.forces[grain], grains.torques[grain]);
        grains.add_load(grain, -force, -torque, 0.0);
        grains.velocities[grain] = velocities[grain];
        grains.spins[grain] = spins[grain];
    }
    grains.advance(0.0);
}

/// A loose cloud of grains between floor and lid, seeded.
fn cloud(count: usize, cell: Cell, law: ContactLaw, lid: Lid) -> Assembly {
    let mut random = stream(3, &[count as u64]);
    let spheres: Vec<Sphere> = (0..count)
        .map(|_| Sphere {
            centre: cell.size.map(|length| length * (0.05 + 0.9 * random.random::<f64>())),
            radius: 0.4e-3 * 2.0_f64.powf(random.random::<f64>()),
        })
        .collect();
    Assembly::new(cell, &spheres, law, lid).unwrap()
}

/// Slides two pressed grains on each other in short steps, up to 1.2 times the way at
/// which they slip, and visits the way (m), the tangential force and the push (N).
fn slide(law: ContactLaw, way_to_slip: f64, mut visit: impl FnMut(f64, f64, f64)) {
    let direction = Vector::new(1.0, 2.0, -0.5).normalize();
    let sideways = direction.cross(&Vector::z()).normalize();
    let mut grains = two_grains(OVERLAP, direction, law);
    let step = 1.0e-3 * way_to_slip;
    for count in 1..=1200 {
        carry(&mut grains, [Vector::zeros(), sideways * step], [Vector::zeros(); 2]);
        grains.compute_contacts();
        assert_relative_eq!(grains.torques[0], grains.torques[1], max_relative = 1.0e-9);
        let forces = grains.forces[0].dot(&sideways);
        visit(f64::from(count) * step, forces, grains.forces[1].dot(&direction));
    }
}

/// Overlap (m) of the sliding grains: so little that the contact plane does not turn.
const OVERLAP: f64 = 2.0e-7;

/// Mindlin 1949 (from memory): spheres of Poisson ratio ν and shear modulus G, pressed by P
/// on a patch of radius a, move sideways by 3(2-ν)μP/(8Ga) [1 - (1 - Q/μP)^(2/3)].
#[test]
fn an_oblique_contact_sticks_as_mindlin_and_slips_as_coulomb() {
    let poisson = 0.25;
    let (shear, radius) = (1.0e6 * (1.0 - poisson), 1.0e-3);
    let patch = (0.5 * radius * OVERLAP).sqrt();
    // P = 8 G a³/(3 (1-ν) R) between equal spheres of radius R (Hertz 1882).
    let push = 8.0 * shear * patch.powi(3) / (3.0 * (1.0 - poisson) * radius);
    let to_slip = 3.0 * (2.0 - poisson) * FRICTION * push / (8.0 * shear * patch);
    // Q/μP and the way it takes, of the way to slip.
    let mut curve = [
        (0.1, 0.067830),
        (0.25, 0.174518),
        (0.5, 0.370039),
        (0.75, 0.603150),
        (0.9, 0.784557),
        (1.0, 1.0),
        (1.0, 1.19),
    ]
    .into_iter()
    .peekable();
    let mut last = (0.0, 0.0);
    slide(rough_spheres(), to_slip, |way, drag, pressed| {
        assert_relative_eq!(pressed, push, max_relative = 2.0e-3);
        while let Some((ratio, part)) = curve.next_if(|(_, part)| part * to_slip <= way) {
            let between = (part * to_slip - last.0) / (way - last.0);
            let drag = last.1 + between * (drag - last.1);
            assert_relative_eq!(drag, ratio * FRICTION * push, max_relative = 5.0e-3);
        }
        last = (way, drag);
    });
    assert!(curve.peek().is_none());
}

#[test]
fn a_linear_contact_stretches_a_spring_and_slips_as_coulomb() {
    let law = ContactLaw::for_stress(1.0e3, 1.0e-3, FRICTION);
    let (push, stiffness) = law.normal.push(OVERLAP, 0.5e-3);
    let tangential = mindlin_ratio(0.25) * stiffness;
    slide(law, FRICTION * push / tangential, |way, drag, pressed| {
        assert_relative_eq!(pressed, push, max_relative = 2.0e-3);
        assert_relative_eq!(drag, (tangential * way).min(FRICTION * push), max_relative = 2.0e-3);
    });
}

#[test]
fn grains_that_roll_on_each_other_like_gears_do_not_rub() {
    let mut grains = two_grains(2.0e-7, Vector::x(), rough_spheres());
    let spin = Vector::z() * 1.0e-5;
    for _ in 0..100 {
        carry(&mut grains, [Vector::zeros(); 2], [spin, -spin]);
    }
    grains.compute_contacts();
    assert_eq!(grains.torques[0].norm(), 0.0);
    carry(&mut grains, [Vector::zeros(); 2], [spin, spin]);
    grains.compute_contacts();
    assert!(grains.torques[0].z < 0.0, "grains that turn the same way rub and brake each other");
}

#[test]
fn forces_and_moments_of_a_cloud_sum_to_nothing() {
    let cell = Cell { size: Vector::repeat(0.01), periodic: [false; 3] };
    let mut grains = cloud(400, cell, rough_spheres(), Lid::Fixed);
    let gap = Vector::new(0.0, 0.0, 1.0);
    grains.cell.size.z += 2.0 * gap.z;
    grains.centres.iter_mut().for_each(|centre| *centre += gap);
    for _ in 0..5 {
        grains.compute_contacts();
        grains.advance(0.3);
    }
    grains.compute_contacts();
    let contacts: Vec<_> = grains.contacts().collect();
    assert!(contacts.len() > 100, "{} contacts", contacts.len());
    let scale: f64 = contacts.iter().map(|contact| contact.force).sum();
    let force: Vector = grains.forces.iter().sum();
    let moment: Vector = (grains.centres.iter().zip(&grains.forces).zip(&grains.torques))
        .map(|((centre, force), torque)| (centre - gap).cross(force) + torque)
        .sum();
    assert!(force.norm() < 1.0e-12 * scale, "net force {force:?}");
    assert!(moment.norm() < 1.0e-12 * scale * 0.01, "net moment {moment:?}");
}

#[test]
fn a_squeezed_bed_let_go_only_loses_energy() {
    let law = ContactLaw::for_stress(1.0e3, 1.0e-3, FRICTION);
    let Normal::Linear { modulus } = law.normal else { unreachable!() };
    let mut grains = cloud(700, Cell::with_floor_and_lid(Vector::repeat(0.01)), law, Lid::Fixed);
    let energy = |grains: &Assembly| -> f64 {
        let stored = |contact: bedswell_grains::Contact| {
            let radius = grains.radii[contact.grain];
            let reduced = match contact.partner {
                Partner::Grain(other) => radius * grains.radii[other] / (radius + grains.radii[other]),
                Partner::Floor | Partner::Lid | Partner::Wall => radius,
            };
            contact.force.powi(2) / (4.0 * modulus * reduced)
        };
        let motion = (grains.velocities.iter().zip(&grains.stiffnesses))
            .map(|(velocity, mass)| 0.5 * mass * velocity.norm_squared());
        grains.contacts().map(stored).sum::<f64>() + motion.sum::<f64>()
    };
    grains.compute_contacts();
    let start = energy(&grains);
    let mut last = start;
    for _ in 0..20 {
        for _ in 0..50 {
            grains.advance(0.3);
            grains.compute_contacts();
        }
        let now = energy(&grains);
        assert!(now <= last * 1.02, "energy grows from {last:e} to {now:e} J");
        last = now;
    }
    assert!(last < 0.2 * start);
}

#[test]
fn a_bed_under_its_lid_comes_to_rest_and_its_floor_carries_the_lid() {
    let stress = 1.0e3;
    // Stiff enough for overlaps of about 10⁻⁴ of the diameter.
    let springs = ContactLaw::for_stress(stress, 1.0e-4, FRICTION);
    let hertz = Normal::Hertz { effective_modulus: 1.5e6 * stress };
    // Hertz contacts that barely touch are soft, and come to rest more slowly.
    for (law, tolerance) in [(springs, 1.0e-4), (ContactLaw { normal: hertz, ..springs }, 5.0e-3)] {
        let cell = Cell::with_floor_and_lid(Vector::new(0.008, 0.008, 0.012));
        let mut grains = cloud(500, cell, springs.with_friction(0.0), Lid::Fixed);
        for _ in 0..300 {
            grains.compute_contacts();
            grains.advance(0.3);
        }
        grains.stop();
        grains.law = law;
        grains.lid = Lid::Stress(stress);
        let mut steps = 0;
        loop {
            grains.compute_contacts();
            let rest = grains.rest();
            if rest.mean_contact_force > 0.0 && rest.residual() < tolerance && rest.lid_unbalance < 1.0e-4 {
                break;
            }
            grains.advance(0.7);
            steps += 1;
            assert!(steps < 20_000, "{law:?}: {rest:?}");
        }
        let floor: f64 = (grains.contacts().filter(|contact| contact.partner == Partner::Floor))
            .map(|contact| contact.force)
            .sum();
        let load = stress * cell.size.x * cell.size.y;
        assert_relative_eq!(floor, load, max_relative = 10.0 * tolerance);
        assert!(grains.rest().deepest_overlap < 1.0e-3, "{law:?}: {:?}", grains.rest());
    }
}

#[test]
fn held_grains_do_not_move() {
    let law = ContactLaw::for_stress(1.0e3, 1.0e-4, FRICTION);
    let cell = Cell::with_floor_and_lid(Vector::repeat(0.01));
    let mut grains = cloud(200, cell, law, Lid::Stress(1.0e3));
    grains.held = true;
    let before = grains.spheres();
    grains.compute_contacts();
    grains.add_load(0, Vector::x(), Vector::zeros(), 1.0);
    grains.advance(0.3);
    assert_eq!(grains.spheres(), before);
    assert_eq!(grains.cell, cell);
}

#[test]
fn a_grain_wider_than_its_periodic_cell_is_refused() {
    let cell = Cell::with_floor_and_lid(Vector::repeat(0.01));
    let wide = Sphere { centre: Vector::repeat(0.005), radius: 0.006 };
    let refused = Assembly::new(cell, &[wide], ContactLaw::for_stress(1.0, 1.0e-4, 0.0), Lid::Fixed);
    assert_eq!(
        refused.unwrap_err(),
        AssemblyError::WiderThanCell { index: 0, diameter: 0.012, length: 0.01 }
    );
}
