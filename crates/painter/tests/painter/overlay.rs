use super::*;
use bedswell_painter::{Align, Item, Overlay, paint_overlay, text_width};

const WORDS: &str = "Uptake 12 µm³ · 3×10² Pa";

fn drawn(item: Item, background: Colour) -> Image {
    let mut image = Image::new(Size { width: 300, height: 80 }, background);
    paint_overlay(&mut image, &Overlay { items: vec![item] });
    image
}

fn text(align: Align, x: f32) -> Item {
    let colour = Colour::new(20, 30, 40);
    Item::Text { at: [x, 50.0], align, size: 16.0, colour, text: WORDS.into() }
}

/// Leftmost, topmost, rightmost and bottommost pixel that is not clear.
fn ink(image: &Image) -> [u32; 4] {
    let mut ink = [u32::MAX, u32::MAX, 0, 0];
    for (x, y) in (0..image.size.height).flat_map(|y| (0..image.size.width).map(move |x| (x, y))) {
        if image.pixel(x, y).a > 0 {
            ink = [ink[0].min(x), ink[1].min(y), ink[2].max(x), ink[3].max(y)];
        }
    }
    ink
}

#[test]
fn text_stays_within_its_box_wherever_it_is_aligned() {
    let width = text_width(WORDS, 16.0);
    for (align, x) in [(Align::Left, 40.0), (Align::Middle, 40.0 + 0.5 * width), (Align::Right, 40.0 + width)]
    {
        let [left, top, right, bottom] = ink(&drawn(text(align, x), Colour::default()));
        assert!((40..=43).contains(&left), "{left}");
        assert!((right as f32 - 40.0 - width).abs() < 3.0, "{right} for a width of {width}");
        assert!(top >= 36 && (52..=55).contains(&bottom), "{top} to {bottom}");
    }
}

#[test]
fn text_on_nothing_keeps_its_colour() {
    let image = drawn(text(Align::Left, 10.0), Colour::default());
    let inked: Vec<_> = image.pixels.chunks_exact(4).filter(|pixel| pixel[3] > 0).collect();
    assert!(inked.len() > 300);
    assert!(inked.iter().all(|pixel| pixel[..3] == [20, 30, 40]));
    assert!(inked.iter().filter(|pixel| pixel[3] > 200).count() > 40, "stems are nearly solid");
}

#[test]
fn signs_of_science_are_drawn() {
    for sign in "·²³−–×°µλσΔ→Ω".chars() {
        let item = Item::Text {
            at: [20.0, 50.0],
            align: Align::Left,
            size: 20.0,
            colour: white(),
            text: sign.to_string(),
        };
        assert!(area(&drawn(item, Colour::default())) > 1.0, "{sign}");
    }
}

#[test]
fn panel_covers_parts_of_pixels() {
    let item = Item::Panel { from: [10.25, 10.0], to: [20.5, 12.5], colour: white() };
    let image = drawn(item, Colour::default());
    assert_near(area(&image), 10.25 * 2.5, 0.01);
    assert_eq!((image.pixel(15, 10), image.pixel(10, 10).a), (white(), 191));
}

#[test]
fn half_clear_panel_lets_half_of_what_is_below_through() {
    let item = Item::Panel { from: [0.0; 2], to: [9.0; 2], colour: white().with_alpha(128) };
    let pixel = drawn(item, Colour::new(0, 0, 0)).pixel(4, 4);
    assert!(pixel.r.abs_diff(128) <= 1 && pixel.a == 255, "{pixel:?}");
}

#[test]
fn line_and_ring_have_their_areas() {
    let line = Item::Line { ends: [[20.0, 10.0], [120.0, 60.0]], width: 2.5, colour: white() };
    assert_near(area(&drawn(line, Colour::default())), 2.5 * 100.0_f64.hypot(50.0), 0.02);
    let ring = Item::Ring { at: [150.0, 40.0], radius: 25.0, width: 3.0, colour: white() };
    let round = 2.0 * std::f64::consts::PI * 25.0 * 3.0;
    assert_near(area(&drawn(ring, Colour::default())), round, 0.02);
}

#[test]
fn ramp_has_even_bands_from_the_bottom() {
    let colours: Vec<Colour> = (1..=4).map(|step| Colour::new(60 * step, 10, 10)).collect();
    let ramp = Item::Ramp { from: [10.0, 10.0], to: [30.0, 50.0], colours: colours.clone() };
    let image = drawn(ramp, Colour::default());
    for (y, band) in [(49, 0), (41, 0), (38, 1), (25, 2), (11, 3)] {
        assert_eq!(image.pixel(20, y), colours[band], "row {y}");
    }
}

#[test]
fn rubbish_is_left_out() {
    let (nan, far) = (f32::NAN, 1e30);
    let colour = white();
    let items = vec![
        Item::Panel { from: [nan, 0.0], to: [50.0; 2], colour },
        Item::Panel { from: [50.0; 2], to: [20.0; 2], colour },
        Item::Panel { from: [far; 2], to: [2.0 * far; 2], colour },
        Item::Line { ends: [[nan; 2], [1.0; 2]], width: 1.0, colour },
        Item::Line { ends: [[5.0; 2]; 2], width: 1.0, colour },
        Item::Ring { at: [5.0; 2], radius: nan, width: 1.0, colour },
        Item::Ramp { from: [0.0; 2], to: [50.0; 2], colours: Vec::new() },
        Item::Text { at: [far, nan], align: Align::Left, size: 12.0, colour, text: WORDS.into() },
        Item::Text { at: [5.0; 2], align: Align::Left, size: nan, colour, text: WORDS.into() },
        Item::Text { at: [5.0, 40.0], align: Align::Left, size: 12.0, colour, text: "\n\t ".into() },
    ];
    for item in items {
        assert_eq!(area(&drawn(item.clone(), Colour::default())), 0.0, "{item:?}");
    }
}
