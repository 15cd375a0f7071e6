//! Films an invented pack of grains with a gel bead by the standard shot list and tells how
//! long that took: `cargo run -p bedswell-film --example sample -- film.mp4`.

use bedswell_film::{Bounds, Clip, HotSpot, ShotList, Stage};
use bedswell_painter::{
    Align, Ball, Camera, Colour, Drawing, Item, Overlay, Plane, Point, Quality, Rod, paint, paint_overlay,
};
use std::path::PathBuf;
use std::time::{Duration, Instant};

/// Half an edge of the bed (m).
const HALF: f32 = 8e-3;
/// Places of the bead and radius it grows to (m).
const BEAD: ([f32; 3], f32) = ([1e-3, 2e-3, 0.0], 2.2e-3);

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let path = std::env::args_os().nth(1).map_or_else(|| PathBuf::from("film.mp4"), PathBuf::from);
    let list = ShotList::standard();
    let stage = stage();
    let grains = grains();
    let begun = Instant::now();
    let mut painting = Duration::ZERO;
    let mut clip = Clip::create(&path, list.size, list.frames_per_second)?;
    for frame in 0..list.frames() {
        let moment = list.moment(frame).expect("the film has this frame");
        let pose = moment.shot.pose(moment.progress, &stage, list.size)?;
        let ghosts = moment.shot.grains.as_ref().is_some_and(|grains| grains.text == "ghosted");
        let mut drawing = drawing(&grains, moment.run as f32, ghosts);
        drawing.cut = moment.shot.cut.map(|cut| {
            let normal = Point::from(cut.normal.map(|along| along as f32));
            let middle = normal.dot(&Point::from(stage.beads[0].centre));
            Plane { normal, offset: middle + cut.offset(moment.progress) as f32 }
        });
        let painted = Instant::now();
        let mut image = paint(&drawing, &Camera::new(&pose, list.size), Quality::default());
        paint_overlay(&mut image, &caption(moment.shot.caption.as_deref().unwrap_or_default()));
        painting += painted.elapsed();
        clip.push(image)?;
    }
    let pushed = begun.elapsed();
    clip.finish()?;
    let told = format!(
        "{} frames in {:.1} s: {:.1} s to paint, {:.1} s after the last was painted",
        list.frames(),
        begun.elapsed().as_secs_f64(),
        painting.as_secs_f64(),
        (begun.elapsed() - pushed).as_secs_f64()
    );
    std::io::Write::write_all(&mut std::io::stderr(), format!("{told}\n").as_bytes())?;
    Ok(())
}

fn stage() -> Stage {
    let bead = Bounds { centre: BEAD.0, radius: BEAD.1 };
    let spot = Bounds { centre: [BEAD.0[0] + 2e-3, BEAD.0[1], BEAD.0[2]], radius: 1.2e-3 };
    Stage {
        bed: Bounds { centre: [0.0; 3], radius: HALF * 3_f32.sqrt() },
        beads: vec![bead],
        hot_spots: vec![HotSpot { bounds: spot, outward: [1.0, 0.4, 0.3] }],
    }
}

/// Grains on a shaken lattice, three thousand of them.
fn grains() -> Vec<Ball> {
    let (mut state, side) = (1_u32, 15_i32);
    let mut random = move || {
        state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
        (state >> 8) as f32 / (1 << 24) as f32
    };
    let step = 2.0 * HALF / side as f32;
    let mut grains = Vec::new();
    for index in 0..side * side * side {
        let at = |axis: i32| (index / side.pow(axis as u32) % side) as f32 * step - HALF + 0.5 * step;
        let shake = Point::new(random() - 0.5, random() - 0.5, random() - 0.5) * (0.4 * step);
        let centre = Point::new(at(0), at(1), at(2)) + shake;
        let tone = (30.0 * random()) as u8;
        let radius = step * (0.42 + 0.12 * random());
        if (centre - Point::from(BEAD.0)).norm() > BEAD.1 + radius {
            grains.push(Ball { centre, radius, colour: Colour::new(180 + tone, 168 + tone, 142 + tone) });
        }
    }
    grains
}

fn drawing(grains: &[Ball], swollen: f32, ghosts: bool) -> Drawing {
    let middle = Point::from(BEAD.0);
    let radius = BEAD.1 * (0.45 + 0.55 * swollen);
    let mut drawing = Drawing { background: Colour::new(250, 250, 248), ..Drawing::default() };
    drawing.balls = grains.to_vec();
    if ghosts {
        drawing.balls.iter_mut().for_each(|ball| ball.colour = ball.colour.with_alpha(50));
        drawing.rods = bonds(middle, radius);
    } else {
        let colour = Colour::new(70, 140, 200);
        drawing.balls.push(Ball { centre: middle, radius, colour });
    }
    drawing
}

/// Bonds of a cubic lattice in a ball, coloured along x.
fn bonds(middle: Point, radius: f32) -> Vec<Rod> {
    let half = 8_i32;
    let step = radius / half as f32;
    let place = |x: i32, y: i32, z: i32| Point::new(x as f32, y as f32, z as f32) * step;
    let colour = |x: i32| {
        let share = (x + half) as f32 / (2 * half) as f32;
        Colour::new((40.0 + 200.0 * share) as u8, 90, (220.0 - 180.0 * share) as u8)
    };
    let mut rods = Vec::new();
    for (x, y, z) in
        (-half..half).flat_map(|x| (-half..half).flat_map(move |y| (-half..half).map(move |z| (x, y, z))))
    {
        for (dx, dy, dz) in [(1, 0, 0), (0, 1, 0), (0, 0, 1)] {
            let ends = [place(x, y, z), place(x + dx, y + dy, z + dz)];
            if ends.iter().all(|end| end.norm() <= radius) {
                let ends = ends.map(|end| middle + end);
                rods.push(Rod { ends, radius: 0.04 * step, colours: [colour(x), colour(x + dx)] });
            }
        }
    }
    rods
}

fn caption(text: &str) -> Overlay {
    let colour = Colour::new(30, 34, 40);
    let line = |at, size: f32, text: &str| Item::Text {
        at,
        align: Align::Left,
        size,
        colour,
        text: text.to_owned(),
    };
    Overlay {
        items: vec![
            line([40.0, 672.0], 30.0, text),
            line([40.0, 700.0], 15.0, "Invented pack; strain 0.12, uptake 34 g/g, step 117 of 240"),
            Item::Ramp {
                from: [1220.0, 200.0],
                to: [1240.0, 520.0],
                colours: (0..32).map(|i| Colour::new(40 + 6 * i, 90, 220 - 6 * i)).collect(),
            },
            Item::Line { ends: [[1150.0, 680.0], [1240.0, 680.0]], width: 2.0, colour },
        ],
    }
}
