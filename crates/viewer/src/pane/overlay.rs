use bedswell_painter::{Align, Colour, Item, Overlay};
use bevy::color::Srgba;
use bevy_egui::egui::{self, Align2, Color32, FontId, Mesh, Painter, Pos2, Rect, Stroke, pos2};

/// Draws flat things over the pane, whose top left and pixels per point are given.
pub(crate) fn draw(overlay: &Overlay, painter: &Painter, origin: Pos2, pixels_per_point: f32) {
    let point = |[x, y]: [f32; 2]| pos2(origin.x + x / pixels_per_point, origin.y + y / pixels_per_point);
    for item in &overlay.items {
        match item {
            Item::Text { at, align, size, colour, text } => {
                let anchor = match align {
                    Align::Left => Align2::LEFT_BOTTOM,
                    Align::Middle => Align2::CENTER_BOTTOM,
                    Align::Right => Align2::RIGHT_BOTTOM,
                };
                let font = FontId::proportional(0.82 * size / pixels_per_point);
                // The base line lies a little above the lowest point of the letters.
                let below = egui::vec2(0.0, 0.22 * size / pixels_per_point);
                painter.text(point(*at) + below, anchor, text, font, ink(*colour));
            }
            Item::Panel { from, to, colour } => {
                painter.rect_filled(Rect::from_min_max(point(*from), point(*to)), 2.0, ink(*colour));
            }
            Item::Line { ends, width, colour } => {
                let stroke = Stroke::new(width / pixels_per_point, ink(*colour));
                painter.line_segment(ends.map(point), stroke);
            }
            Item::Ramp { from, to, colours } => {
                painter.add(ramp(point(*from), point(*to), colours));
            }
            Item::Ring { at, radius, width, colour } => {
                let stroke = Stroke::new(width / pixels_per_point, ink(*colour));
                painter.circle_stroke(point(*at), radius / pixels_per_point, stroke);
            }
        }
    }
}

/// Even bands of colour, the first at the bottom, without seams.
fn ramp(from: Pos2, to: Pos2, colours: &[Colour]) -> Mesh {
    let height = (to.y - from.y) / colours.len().max(1) as f32;
    let mut mesh = Mesh::default();
    for (band, colour) in colours.iter().rev().enumerate() {
        let top = from.y + band as f32 * height;
        mesh.add_colored_rect(Rect::from_min_max(pos2(from.x, top), pos2(to.x, top + height)), ink(*colour));
    }
    mesh
}

/// A colour as the window knows it: weighted by its opacity in linear light, in which the
/// window blends.
pub(crate) fn ink(Colour { r, g, b, a }: Colour) -> Color32 {
    let [r, g, b] = [r, g, b].map(|part| {
        let light = Srgba::gamma_function(f32::from(part) / 255.0) * f32::from(a) / 255.0;
        (255.0 * Srgba::gamma_function_inverse(light)).round() as u8
    });
    Color32::from_rgba_premultiplied(r, g, b, a)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn opaque_colours_stay_as_they_are() {
        for byte in 0..=255 {
            assert_eq!(ink(Colour::new(byte, 7, 255 - byte)), Color32::from_rgb(byte, 7, 255 - byte));
        }
    }

    #[test]
    fn half_of_white_is_half_its_light() {
        assert_eq!(
            ink(Colour::new(255, 255, 255).with_alpha(128)),
            Color32::from_rgba_premultiplied(188, 188, 188, 128)
        );
    }
}
