use super::read::Packs;
use super::table::Outcome;
use crate::theme::Palette;
use bevy_egui::egui::{Align2, FontId, Rect, Sense, Stroke, Ui, pos2, vec2};

/// Shows how an outcome is spread over the packs; the bar with the open pack stands out.
pub(super) fn histogram(
    ui: &mut Ui,
    palette: &Palette,
    packs: &Packs,
    outcome: &Outcome,
    open: Option<usize>,
) {
    let value = |row: usize| packs.rows[row].outcome.as_ref().ok().map(outcome.value);
    let values: Vec<f64> = (0..packs.rows.len()).filter_map(value).collect();
    if values.is_empty() {
        return;
    }
    let bars = Bars::new(&values);
    let (whole, _) = ui.allocate_exact_size(vec2(ui.available_width(), 96.0), Sense::hover());
    let inner = Rect::from_min_max(whole.min + vec2(0.0, 18.0), whole.max - vec2(0.0, 16.0));
    let painter = ui.painter();
    let small = FontId::proportional(11.0);
    let words = |at, anchor, text: String| painter.text(at, anchor, text, small.clone(), palette.quiet);
    words(whole.left_top(), Align2::LEFT_TOP, format!("{} of {} packs", outcome.name, values.len()));
    let most = bars.counts.iter().copied().max().unwrap_or(1).max(1) as f32;
    words(whole.right_top(), Align2::RIGHT_TOP, format!("up to {most} packs a bar"));
    let width = inner.width() / bars.counts.len() as f32;
    let own = open.and_then(value).map(|value| bars.of(value));
    for (number, count) in bars.counts.iter().enumerate() {
        let left = inner.left() + number as f32 * width;
        let top = inner.bottom() - *count as f32 / most * inner.height();
        let bar = Rect::from_min_max(pos2(left + 1.0, top), pos2(left + width - 1.0, inner.bottom()));
        painter.rect_filled(bar, 1.0, if own == Some(number) { palette.accent } else { palette.quiet });
    }
    painter.line_segment([inner.left_bottom(), inner.right_bottom()], Stroke::new(1.0, palette.line));
    words(pos2(inner.left(), whole.bottom()), Align2::LEFT_BOTTOM, (outcome.words)(bars.low));
    words(pos2(inner.right(), whole.bottom()), Align2::RIGHT_BOTTOM, (outcome.words)(bars.high));
}

/// How many values lie in each of equal parts of their range.
struct Bars {
    low: f64,
    high: f64,
    counts: Vec<usize>,
}

impl Bars {
    /// As many bars as the root of the number of values, 5 to 20.
    fn new(values: &[f64]) -> Self {
        let low = values.iter().copied().fold(f64::INFINITY, f64::min);
        let high = values.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        let bars = (values.len() as f64).sqrt().ceil().clamp(5.0, 20.0) as usize;
        let mut all = Self { low, high, counts: vec![0; bars] };
        for value in values {
            let bar = all.of(*value);
            all.counts[bar] += 1;
        }
        all
    }

    /// The bar of a value.
    fn of(&self, value: f64) -> usize {
        if self.high <= self.low {
            return self.counts.len() / 2;
        }
        let part = (value - self.low) / (self.high - self.low);
        ((part * self.counts.len() as f64) as usize).min(self.counts.len() - 1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_value_is_in_one_bar_and_the_largest_in_the_last() {
        let bars = Bars::new(&[0.0, 0.1, 0.2, 0.9, 1.0]);
        assert_eq!(bars.counts, [2, 1, 0, 0, 2]);
        assert_eq!(bars.of(1.0), 4);
    }

    #[test]
    fn equal_values_stand_in_the_middle() {
        assert_eq!(Bars::new(&[3.0, 3.0]).counts, [0, 0, 2, 0, 0]);
    }
}
