use crate::theme::Palette;
use bedswell_sim::figures::digits;
use bevy_egui::egui::{Align2, CursorIcon, FontId, Pos2, Rect, Sense, Shape, Stroke, Ui, Vec2, pos2, vec2};

/// How long it takes to play a whole run (s).
pub(crate) const PLAY_SECONDS: f64 = 8.0;

/// Width of a curve (points) that has room for more words.
const ROOMY: f32 = 230.0;

/// One figure over the course of swelling.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Curve {
    /// What it is.
    pub(crate) name: &'static str,
    /// Its unit.
    pub(crate) unit: &'static str,
    /// Its value after each increment; the first is the dry bed.
    pub(crate) values: Vec<f64>,
}

impl Curve {
    /// Its value at a time (increments), evenly between two.
    fn at(&self, time: f64) -> Option<f64> {
        let before = *self.values.get(time.floor() as usize)?;
        let after = self.values.get(time.ceil() as usize).copied().unwrap_or(before);
        Some(before + (after - before) * time.fract()).filter(|value| value.is_finite())
    }
}

/// Curves side by side which share a cursor; pressing or dragging in one moves it.
///
/// `last` is the last increment there may be, `time` where the cursor stands (increments).
/// Returns the increment asked for.
pub(crate) fn strip(
    ui: &mut Ui,
    palette: &Palette,
    curves: &[Curve],
    last: usize,
    time: f64,
) -> Option<usize> {
    let gap = 14.0;
    let whole = ui.available_rect_before_wrap();
    let count = curves.len().max(1) as f32;
    let size = Vec2::new((whole.width() - gap * (count - 1.0)) / count, whole.height());
    let mut asked = None;
    for (number, curve) in curves.iter().enumerate() {
        let corner = whole.min + vec2(number as f32 * (size.x + gap), 0.0);
        let rect = Rect::from_min_size(corner, size);
        let response = ui
            .interact(rect, ui.id().with(("curve", number)), Sense::click_and_drag())
            .on_hover_cursor(CursorIcon::ResizeHorizontal);
        let frame = Frame::new(rect, curve, last);
        frame.draw(ui, palette, curve, time);
        let pressed = response.clicked() || response.dragged() || response.drag_started();
        if let Some(at) = response.interact_pointer_pos().filter(|_| pressed) {
            asked = Some(frame.increment(at.x, last).min(curve.values.len().saturating_sub(1)));
        }
    }
    asked.filter(|asked| *asked as f64 != time)
}

/// Where one curve is drawn.
struct Frame {
    rect: Rect,
    inner: Rect,
    low: f64,
    high: f64,
    last: usize,
}

impl Frame {
    fn new(rect: Rect, curve: &Curve, last: usize) -> Self {
        let finite = || curve.values.iter().copied().filter(|value| value.is_finite());
        let low = finite().fold(0.0, f64::min);
        let high = finite().fold(0.0, f64::max);
        let inner = Rect::from_min_max(rect.min + vec2(0.0, 20.0), rect.max - vec2(0.0, 15.0));
        Self { rect, inner, low, high: if high > low { high } else { low + 1.0 }, last }
    }

    fn place(&self, time: f64, value: f64) -> Pos2 {
        let along = time as f32 / self.last.max(1) as f32;
        let up = ((value - self.low) / (self.high - self.low)) as f32;
        pos2(self.inner.left() + along * self.inner.width(), self.inner.bottom() - up * self.inner.height())
    }

    fn increment(&self, x: f32, last: usize) -> usize {
        let along = ((x - self.inner.left()) / self.inner.width()).clamp(0.0, 1.0);
        (along * last as f32).round() as usize
    }

    fn draw(&self, ui: &Ui, palette: &Palette, curve: &Curve, time: f64) {
        let painter = ui.painter();
        let small = FontId::proportional(11.0);
        let line = Stroke::new(1.0, palette.line);
        let words = |at, anchor, text: String, colour| painter.text(at, anchor, text, small.clone(), colour);
        let mut name = curve.name.to_owned();
        if self.rect.width() > ROOMY && !curve.values.is_empty() {
            name += &format!(", up to {} {}", digits(self.high), curve.unit);
        }
        words(self.rect.left_top(), Align2::LEFT_TOP, name, palette.quiet);
        let value = curve.at(time);
        if let Some(value) = value {
            let text = format!("{} {}", digits(value), curve.unit);
            painter.text(
                self.rect.right_top(),
                Align2::RIGHT_TOP,
                text,
                FontId::proportional(13.0),
                palette.text,
            );
        }
        painter.line_segment([self.inner.left_bottom(), self.inner.right_bottom()], line);
        let below = |x: f32| pos2(x, self.rect.bottom());
        words(below(self.inner.left()), Align2::LEFT_BOTTOM, "dry".to_owned(), palette.quiet);
        words(below(self.inner.right()), Align2::RIGHT_BOTTOM, self.last.to_string(), palette.quiet);
        let points: Vec<Pos2> = curve
            .values
            .iter()
            .enumerate()
            .filter(|(_, value)| value.is_finite())
            .map(|(increment, value)| self.place(increment as f64, *value))
            .collect();
        painter.add(Shape::line(points, Stroke::new(1.5, palette.text)));
        let x = self.place(time, self.low).x;
        let accent = Stroke::new(1.0, palette.accent);
        painter.line_segment([pos2(x, self.inner.top()), pos2(x, self.inner.bottom())], accent);
        if let Some(value) = value {
            painter.circle_filled(self.place(time, value), 3.5, palette.accent);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_move_evenly_between_increments() {
        let curve = Curve { name: "", unit: "", values: vec![0.0, 1.0, 4.0] };
        assert_eq!(
            [0.0, 0.5, 1.5, 2.0, 2.5].map(|time| curve.at(time)),
            [Some(0.0), Some(0.5), Some(2.5), Some(4.0), Some(4.0)]
        );
        assert_eq!(curve.at(3.0), None);
    }

    #[test]
    fn the_cursor_goes_to_the_nearest_increment() {
        let curve = Curve { name: "", unit: "", values: vec![0.0, 1.0, 4.0] };
        let frame = Frame::new(Rect::from_min_size(pos2(10.0, 0.0), vec2(100.0, 80.0)), &curve, 2);
        assert_eq!([9.0, 30.0, 40.0, 90.0, 500.0].map(|x| frame.increment(x, 2)), [0, 0, 1, 2, 2]);
    }
}
