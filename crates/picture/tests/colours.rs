//! Colours are true: what a picture shows at a known place reads back, through the legend,
//! to the stress that independent finite elements found there.

use approx::assert_relative_eq;
use bedswell_painter::{Camera, Colour, Point, Pose, Quality, Size, paint};
use bedswell_picture::{Cut, GrainLook, Look, Run, draw, legends};
use bedswell_sim::{Observer, State, Step, read_scene, run_pack};
use std::ops::ControlFlow;

/// A bead that swells sixfold, to a radius of 3 mm, between two spheres of half its radius
/// that indent it by a fifth of it.
const SCENE: &str = r#"
[scene]
name = "Between two spheres"
seed = 1

[bed]
lid_stress = "0 kPa"
fixed_grains = true

[soil]
density = "2500 kg/m3"
friction = 0.0
spheres = "spheres.csv"
cell = ["16 mm", "10 mm", "10 mm"]

[beads]
centres = [["8 mm", "5 mm", "5 mm"]]
dry_diameter = "1 mm"
across = 24
held = true

[gel]
crosslinks = 2.6659866e-5
chi = 0.30
charges = 0.0
dry_density = "1400 kg/m3"

[water]
temperature = "25 degC"

[strength]
scale = "0.5 kPa"
modulus = 8
volume = "1 mm3"

[march]
increments = 6
"#;

const SPHERES: &str = "x [mm],y [mm],z [mm],d [mm]\n4.1,5,5,3\n11.9,5,5,3\n";

/// Tension peak over the swollen shear modulus, and its distance from the bead's centre
/// along the axis of the spheres over the swollen radius: 0.26 behind a contact that lies
/// at 0.8. Finite elements (quadratic, three meshes or more) made for this project, as in
/// the gel's reference scenes; no outside source.
const PEAK: f32 = 0.0698;
const PEAK_AT: f32 = 0.8 - 0.26;

struct Watch(Run);

impl Observer for Watch {
    fn step(&mut self, _: &Step, _: usize) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }

    fn looks(&self) -> bool {
        true
    }

    fn look(&mut self, state: State) -> ControlFlow<()> {
        self.0.push(state);
        ControlFlow::Continue(())
    }
}

#[test]
fn the_pixel_at_the_tension_peak_decodes_to_its_tension() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("scene.toml"), SCENE).unwrap();
    std::fs::write(folder.path().join("spheres.csv"), SPHERES).unwrap();
    let scene = read_scene(&folder.path().join("scene.toml")).unwrap();
    let mut watch = Watch(Run::new(scene.clone(), 0));
    run_pack(&scene, 0, &mut watch).unwrap();
    let run = watch.0;
    let frame = run.frame(f64::INFINITY).unwrap();

    let look = Look {
        grains: GrainLook::Hidden,
        bonds: false,
        skin: true,
        cut: Some(Cut { azimuth: 90.0, elevation: 0.0, offset: 0.0 }),
        ..Look::default()
    };
    let centre = frame.middle();
    let pose = Pose { target: centre.into(), azimuth: 90.0, elevation: 0.0, distance: 15e-3 };
    let camera = Camera::new(&pose, Size { width: 900, height: 700 });
    let image = paint(&draw(&run, &frame, &look), &camera, Quality { samples: 2, outlines: true });

    // Shear modulus of the swollen gel, kT/Ω n / λ0, with the water molecule's volume Ω from
    // 18.07 cm³/mol at 25 °C (CODATA 2018 constants).
    let modulus = (8.314_462_6 * 298.15 / 18.07e-6 * 2.665_986_6e-5 / 6.0) as f32;
    let legend = &legends(&run, &look)[0];
    assert_eq!(legend.unit.symbol, "kPa");
    for side in [-1.0, 1.0] {
        let place = centre + Point::new(side * PEAK_AT * 3e-3, 0.0, 0.0);
        let (at, _) = camera.project(&place).unwrap();
        let first = 4 * (at.y as usize * 900 + at.x as usize);
        let [r, g, b] = [0, 1, 2].map(|channel| image.pixels[first + channel]);
        let (tension, apart) = legend.scale.value(Colour::new(r, g, b));
        assert!(apart <= 2, "the colour {r} {g} {b} is not in the legend");
        assert_relative_eq!(tension, PEAK * modulus, max_relative = 0.1);
    }
}
