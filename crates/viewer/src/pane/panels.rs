use bevy_egui::EguiRenderOutput;
use bevy_egui::egui::epaint::{ClippedPrimitive, Primitive};

/// Frames for which the panels must have looked the same before they are left as they are.
const CALM: u32 = 3;

/// Spares drawing panels that have not changed: what is in the window stays there.
///
/// On a CPU driver the panels cost as much as all else while the bed is turned.
#[derive(Default)]
pub(crate) struct Panels {
    drawn: Vec<ClippedPrimitive>,
    same: u32,
}

impl Panels {
    /// Drops what the panels would draw if it is there already; `may` tells whether nothing
    /// of it lies over something that is drawn anew.
    pub(crate) fn spare(&mut self, output: &mut EguiRenderOutput, may: bool) {
        let unchanged = output.textures_delta.is_empty()
            && self.drawn.len() == output.paint_jobs.len()
            && self.drawn.iter().zip(&output.paint_jobs).all(|(drawn, job)| is_same(drawn, job));
        self.same = if unchanged { self.same.saturating_add(1) } else { 0 };
        if may && self.same >= CALM {
            output.paint_jobs.clear();
        } else if !unchanged {
            self.drawn = output.paint_jobs.clone();
        }
    }
}

fn is_same(one: &ClippedPrimitive, other: &ClippedPrimitive) -> bool {
    one.clip_rect == other.clip_rect
        && match (&one.primitive, &other.primitive) {
            (Primitive::Mesh(one), Primitive::Mesh(other)) => one == other,
            _ => false,
        }
}

#[cfg(test)]
mod tests {
    use super::*;
    use bevy_egui::egui::{Color32, Mesh, Rect, pos2};

    fn output(colour: Color32) -> EguiRenderOutput {
        let clip_rect = Rect::from_min_max(pos2(0.0, 0.0), pos2(9.0, 9.0));
        let mut mesh = Mesh::default();
        mesh.add_colored_rect(clip_rect, colour);
        let primitive = Primitive::Mesh(mesh);
        EguiRenderOutput { paint_jobs: vec![ClippedPrimitive { clip_rect, primitive }], ..Default::default() }
    }

    #[test]
    fn only_panels_that_stay_the_same_are_left_out() {
        let mut panels = Panels::default();
        let mut drawn = |colour, may| {
            let mut output = output(colour);
            panels.spare(&mut output, may);
            !output.paint_jobs.is_empty()
        };
        let frames = [Color32::RED; 6].map(|colour| drawn(colour, true));
        assert_eq!(frames, [true, true, true, false, false, false]);
        assert!(drawn(Color32::RED, false), "something lies over the pane");
        assert!(drawn(Color32::BLUE, true), "the panels changed");
    }
}
