use crate::{Align, Colour, Image, Item, Overlay, text};

/// Exponent on the coverage of letters: below one it makes thin stems darker, as print does.
const STEM: f32 = 0.8;

/// Draws flat things over a picture, in order, with smooth edges.
///
/// Unlike the picture they are blended in sRGB, as windows do, so that panels are as clear and
/// letters as dark as they would be there.
///
/// Things of no size or at places that are not numbers are left out.
pub fn paint_overlay(image: &mut Image, overlay: &Overlay) {
    for item in &overlay.items {
        match item {
            Item::Text { at, align, size, colour, text } => write(image, *at, *align, *size, *colour, text),
            Item::Panel { from, to, colour } => fill(image, *from, *to, *colour),
            Item::Line { ends, width, colour } => line(image, *ends, *width, *colour),
            Item::Ramp { from, to, colours } => ramp(image, *from, *to, colours),
            Item::Ring { at, radius, width, colour } => ring(image, *at, *radius, *width, *colour),
        }
    }
}

fn write(image: &mut Image, at: [f32; 2], align: Align, size: f32, colour: Colour, text: &str) {
    let reach = 16.0 * (image.size.width + image.size.height) as f32;
    if !(size > 0.0 && size < reach && at.iter().all(|place| place.abs() < reach)) {
        return;
    }
    let back = match align {
        Align::Left => 0.0,
        Align::Middle => 0.5,
        Align::Right => 1.0,
    } * text::text_width(text, size);
    for outline in text::outlines(text, size, [at[0] - back, at[1].round()]) {
        let corner = outline.px_bounds().min;
        outline.draw(|x, y, coverage| {
            let (x, y) = (corner.x as i64 + i64::from(x), corner.y as i64 + i64::from(y));
            put(image, x, y, colour, coverage.clamp(0.0, 1.0).powf(STEM));
        });
    }
}

fn fill(image: &mut Image, from: [f32; 2], to: [f32; 2], colour: Colour) {
    let inside = |centre: f32, low: f32, high: f32| {
        ((centre + 0.5).min(high) - (centre - 0.5).max(low)).clamp(0.0, 1.0)
    };
    cover(image, from, to, colour, |x, y| inside(x, from[0], to[0]) * inside(y, from[1], to[1]));
}

fn line(image: &mut Image, ends: [[f32; 2]; 2], width: f32, colour: Colour) {
    let [from, to] = ends;
    let along = [to[0] - from[0], to[1] - from[1]];
    let length = along[0].hypot(along[1]);
    if !(length > 0.0 && length.is_finite() && width > 0.0) {
        return;
    }
    let unit = along.map(|part| part / length);
    let reach = 0.5 * width + 1.0;
    let low = std::array::from_fn(|axis| from[axis].min(to[axis]) - reach);
    let high = std::array::from_fn(|axis| from[axis].max(to[axis]) + reach);
    cover(image, low, high, colour, |x, y| {
        let (x, y) = (x - from[0], y - from[1]);
        let forward = x * unit[0] + y * unit[1];
        let aside = (x * unit[1] - y * unit[0]).abs();
        let across = overlap(aside - 0.5 * width, aside + 0.5 * width);
        across * overlap(-forward, length - forward)
    });
}

/// How much of a stretch of one pixel about zero lies between two places.
fn overlap(low: f32, high: f32) -> f32 {
    (high.min(0.5) - low.max(-0.5)).clamp(0.0, 1.0)
}

/// Row by row, each of the mean colour of the bands in it, so that no seams show between bands.
fn ramp(image: &mut Image, from: [f32; 2], to: [f32; 2], colours: &[Colour]) {
    let band = (to[1] - from[1]) / colours.len() as f32;
    if !(band > 0.0 && band.is_finite()) {
        return;
    }
    let top = from[1].max(0.0).floor();
    let rows = (to[1].min(image.size.height as f32) - top).ceil().max(0.0) as usize;
    for y in (0..rows).map(|row| top + row as f32) {
        let (high, low) = (y.max(from[1]), (y + 1.0).min(to[1]));
        let place = |y: f32| (((to[1] - y) / band).max(0.0) as usize).min(colours.len() - 1);
        let mut sum = [0.0; 4];
        for (number, colour) in colours.iter().enumerate().take(place(high) + 1).skip(place(low)) {
            let bottom = to[1] - band * number as f32;
            let share = (bottom.min(low) - (bottom - band).max(high)).max(0.0) / (low - high);
            for (sum, part) in sum.iter_mut().zip(colour.bytes()) {
                *sum += share * f32::from(part);
            }
        }
        let colour = Colour::from(sum.map(|part| (part + 0.5) as u8));
        fill(image, [from[0], high], [to[0], low], colour);
    }
}

fn ring(image: &mut Image, at: [f32; 2], radius: f32, width: f32, colour: Colour) {
    if !(radius > 0.0 && width > 0.0) {
        return;
    }
    let reach = radius + 0.5 * width + 1.0;
    let corner = |sign: f32| [at[0] + sign * reach, at[1] + sign * reach];
    cover(image, corner(-1.0), corner(1.0), colour, |x, y| {
        let off = ((x - at[0]).hypot(y - at[1]) - radius).abs();
        overlap(off - 0.5 * width, off + 0.5 * width)
    });
}

/// Blends a colour into the pixels of a rectangle by how much of each (seen from its middle) is covered.
fn cover(
    image: &mut Image,
    from: [f32; 2],
    to: [f32; 2],
    colour: Colour,
    coverage: impl Fn(f32, f32) -> f32,
) {
    if !from.iter().chain(&to).all(|place| place.is_finite()) {
        return;
    }
    let within = |place: f32, size: u32| place.clamp(0.0, size as f32) as u32;
    for y in within(from[1].floor(), image.size.height)..within(to[1].ceil(), image.size.height) {
        for x in within(from[0].floor(), image.size.width)..within(to[0].ceil(), image.size.width) {
            put(image, x.into(), y.into(), colour, coverage(x as f32 + 0.5, y as f32 + 0.5));
        }
    }
}

/// Lays a colour over one pixel.
fn put(image: &mut Image, x: i64, y: i64, colour: Colour, coverage: f32) {
    let (width, height) = (i64::from(image.size.width), i64::from(image.size.height));
    let over = coverage * f32::from(colour.a) / 255.0;
    if !(0..width).contains(&x) || !(0..height).contains(&y) || over <= 0.0 {
        return;
    }
    let at = 4 * (y * width + x) as usize;
    let Some(pixel) = image.pixels.get_mut(at..at + 4) else { return };
    if over >= 1.0 {
        pixel.copy_from_slice(&colour.bytes());
        return;
    }
    let under = (1.0 - over) * f32::from(pixel[3]) / 255.0;
    let alpha = over + under;
    for (below, above) in pixel.iter_mut().zip([colour.r, colour.g, colour.b]) {
        *below = ((over * f32::from(above) + under * f32::from(*below)) / alpha + 0.5) as u8;
    }
    pixel[3] = (255.0 * alpha + 0.5) as u8;
}
