use super::histogram::histogram;
use super::read::{PackFigures, PackRow, Packs};
use crate::theme::Palette;
use bedswell_sim::figures::{digits, length, stress};
use bevy_egui::egui::{Align, Layout, Response, RichText, ScrollArea, Sense, Ui, UiBuilder};

/// How the table of packs stands.
#[derive(Clone, Debug, PartialEq)]
pub(crate) struct Table {
    /// By which outcome packs are sorted; it is the one in the histogram.
    pub(crate) by: usize,
    /// Whether the largest comes first.
    pub(crate) falling: bool,
    /// The pack that is open, by its row.
    pub(crate) open: Option<usize>,
}

impl Default for Table {
    fn default() -> Self {
        Self { by: 1, falling: true, open: None }
    }
}

/// An outcome of a pack: its name, its value, and the value in words.
pub(super) struct Outcome {
    pub(super) name: &'static str,
    pub(super) value: fn(&PackFigures) -> f64,
    pub(super) words: fn(f64) -> String,
}

/// The outcomes that the table shows.
pub(super) const OUTCOMES: [Outcome; 5] = [
    Outcome { name: "torn", value: |pack| pack.torn / pack.beads, words: torn },
    Outcome { name: "tear prob.", value: |pack| pack.tear_probability, words: percent },
    Outcome { name: "uptake", value: |pack| pack.uptake, words: |value| format!("{} g/g", digits(value)) },
    Outcome { name: "99 % tension", value: |pack| pack.tension, words: stress },
    Outcome { name: "heave", value: |pack| pack.heave, words: length },
];

/// The share of a pack's beads that tore.
fn torn(value: f64) -> String {
    match value {
        0.0 => "none".to_owned(),
        1.0 => "all".to_owned(),
        _ => percent(value),
    }
}

fn percent(value: f64) -> String {
    format!("{} %", digits(100.0 * value))
}

impl Table {
    /// The rows of the packs, sorted; packs without outcome come last.
    pub(crate) fn order(&self, packs: &Packs) -> Vec<usize> {
        let value = |row: &PackRow| row.outcome.as_ref().ok().map(OUTCOMES[self.by].value);
        let mut order: Vec<usize> = (0..packs.rows.len()).collect();
        order.sort_by(|a, b| match (value(&packs.rows[*a]), value(&packs.rows[*b])) {
            (Some(a), Some(b)) if self.falling => b.total_cmp(&a),
            (Some(a), Some(b)) => a.total_cmp(&b),
            (a, b) => b.is_some().cmp(&a.is_some()),
        });
        order
    }

    /// The row a number of steps from the open one, round and round.
    pub(crate) fn beside(&self, packs: &Packs, steps: isize) -> Option<usize> {
        let order = self.order(packs);
        let open = order.iter().position(|row| Some(*row) == self.open);
        let at = open.map_or(0, |place| (place as isize + steps).rem_euclid(order.len() as isize) as usize);
        order.get(at).copied()
    }

    /// Sorts by the next outcome.
    pub(crate) fn sort_by_next(&mut self) {
        self.by = (self.by + 1) % OUTCOMES.len();
    }
}

/// Shows a study; returns the row that was chosen.
pub(crate) fn table(ui: &mut Ui, palette: &Palette, packs: &Packs, table: &mut Table) -> Option<usize> {
    ui.label(RichText::new(format!("Study {}", packs.name)).size(15.0).strong());
    for line in summary(packs) {
        ui.label(RichText::new(line).color(palette.quiet));
    }
    ui.add_space(4.0);
    histogram(ui, palette, packs, &OUTCOMES[table.by], table.open);
    ui.add_space(4.0);
    let columns = Columns::new(ui.available_width() - 14.0, packs);
    head(ui, palette, packs, &columns, table);
    let order = table.order(packs);
    let mut chosen = None;
    let height = ui.text_style_height(&bevy_egui::egui::TextStyle::Body) + 4.0;
    ScrollArea::vertical().auto_shrink(false).show_rows(ui, height, order.len(), |ui, seen| {
        for row in &order[seen] {
            if row_line(ui, palette, packs, &columns, *row, table.open == Some(*row)).clicked() {
                chosen = Some(*row);
            }
        }
    });
    chosen
}

/// What the study came to, in words.
fn summary(packs: &Packs) -> Vec<String> {
    let Some(summary) = &packs.summary else {
        return vec![format!("{} packs to compute; choose one to run it", packs.rows.len())];
    };
    let overall = &summary.overall;
    let mut lines = vec![format!(
        "{} packs, {} of {} beads torn{}",
        overall.packs,
        overall.torn,
        overall.beads,
        if summary.complete { "" } else { "; not complete" }
    )];
    let limits = (
        overall.tear_fraction,
        overall.tear_fraction_clustered_low.or(overall.tear_fraction_wilson_low),
        overall.tear_fraction_clustered_high.or(overall.tear_fraction_wilson_high),
    );
    if let (Some(fraction), Some(low), Some(high)) = limits {
        lines.push(format!("tear fraction {} (95 %: {} to {})", digits(fraction), digits(low), digits(high)));
    }
    lines
}

/// Widths of the columns.
struct Columns {
    level: f32,
    pack: f32,
    outcome: f32,
}

impl Columns {
    fn new(width: f32, packs: &Packs) -> Self {
        let level = match (packs.levels.len(), packs.factors.len()) {
            (0 | 1, _) => 0.0,
            (_, 0 | 1) => 0.17,
            _ => 0.3,
        };
        let (level, pack) = (level * width, 0.1 * width);
        Self { level, pack, outcome: (width - level - pack) / OUTCOMES.len() as f32 }
    }

    /// Puts words into a column, at its right side but for names.
    fn put(ui: &mut Ui, width: f32, right: bool, words: RichText) {
        let layout =
            if right { Layout::right_to_left(Align::Center) } else { Layout::left_to_right(Align::Center) };
        let size = bevy_egui::egui::vec2(width, ui.available_height());
        ui.allocate_ui_with_layout(size, layout, |ui| {
            ui.set_min_width(width);
            ui.add(bevy_egui::egui::Label::new(words).truncate().selectable(false));
        });
    }
}

fn head(ui: &mut Ui, palette: &Palette, packs: &Packs, columns: &Columns, table: &mut Table) {
    ui.horizontal(|ui| {
        ui.spacing_mut().item_spacing.x = 0.0;
        ui.set_height(20.0);
        let quiet = |words: &str| RichText::new(words).color(palette.quiet);
        if columns.level > 0.0 {
            let factor = match packs.factors.as_slice() {
                [factor] => factor.key.rsplit('.').next().unwrap_or(&factor.key),
                _ => "combination",
            };
            Columns::put(ui, columns.level, false, quiet(factor));
        }
        Columns::put(ui, columns.pack, false, quiet("pack"));
        for (number, outcome) in OUTCOMES.iter().enumerate() {
            let sorted = number == table.by;
            let words = match (sorted, table.falling) {
                (false, _) => quiet(outcome.name),
                (true, true) => RichText::new(format!("{} ⏷", outcome.name)).color(palette.text),
                (true, false) => RichText::new(format!("{} ⏶", outcome.name)).color(palette.text),
            };
            let cell = ui.scope_builder(UiBuilder::new().sense(Sense::click()), |ui| {
                Columns::put(ui, columns.outcome, true, words);
            });
            if cell.response.clicked() {
                table.falling = !sorted || !table.falling;
                table.by = number;
            }
        }
    });
    ui.separator();
}

fn row_line(
    ui: &mut Ui,
    palette: &Palette,
    packs: &Packs,
    columns: &Columns,
    row: usize,
    open: bool,
) -> Response {
    let pack = &packs.rows[row];
    let scope = ui.scope_builder(UiBuilder::new().sense(Sense::click()), |ui| {
        let rect = ui.available_rect_before_wrap();
        let height = ui.text_style_height(&bevy_egui::egui::TextStyle::Body) + 4.0;
        let rect =
            bevy_egui::egui::Rect::from_min_size(rect.min, bevy_egui::egui::vec2(rect.width(), height));
        let hovered = ui.rect_contains_pointer(rect);
        if open || hovered {
            let fill = if open { palette.chosen } else { palette.button };
            ui.painter().rect_filled(rect, 3.0, fill);
        }
        let ink = palette.text;
        ui.horizontal(|ui| {
            ui.spacing_mut().item_spacing.x = 0.0;
            ui.set_height(height);
            if columns.level > 0.0 {
                Columns::put(ui, columns.level, false, RichText::new(&packs.levels[pack.level].0).color(ink));
            }
            Columns::put(ui, columns.pack, false, RichText::new(format!(" {}", pack.pack)).color(ink));
            match &pack.outcome {
                Ok(figures) => {
                    for outcome in &OUTCOMES {
                        let words = (outcome.words)((outcome.value)(figures));
                        Columns::put(ui, columns.outcome, true, RichText::new(words).color(ink));
                    }
                }
                Err(reason) => {
                    Columns::put(ui, ui.available_width(), false, RichText::new(reason).color(palette.quiet));
                }
            }
        });
    });
    scope.response
}

#[cfg(test)]
mod tests {
    use super::*;

    fn packs(values: &[Option<f64>]) -> Packs {
        let row = |(pack, value): (usize, &Option<f64>)| PackRow {
            level: 0,
            pack: pack as u64,
            outcome: value
                .map(|tear_probability| PackFigures {
                    tear_probability,
                    beads: 1.0,
                    ..PackFigures::default()
                })
                .ok_or_else(|| "no equilibrium".to_owned()),
        };
        Packs {
            name: String::new(),
            summary: None,
            factors: Vec::new(),
            levels: Vec::new(),
            rows: values.iter().enumerate().map(row).collect(),
            folder: std::path::PathBuf::new(),
        }
    }

    #[test]
    fn packs_are_sorted_by_the_outcome_and_failed_ones_come_last() {
        let packs = packs(&[Some(0.2), None, Some(0.5), Some(0.1)]);
        let mut table = Table::default();
        assert_eq!(table.order(&packs), [2, 0, 3, 1]);
        table.falling = false;
        assert_eq!(table.order(&packs), [3, 0, 2, 1]);
    }

    #[test]
    fn the_pack_beside_the_open_one_is_the_next_in_the_table() {
        let packs = packs(&[Some(0.2), None, Some(0.5)]);
        let mut table = Table::default();
        assert_eq!(table.beside(&packs, 1), Some(2));
        table.open = Some(2);
        assert_eq!(table.beside(&packs, 1), Some(0));
        assert_eq!(table.beside(&packs, -1), Some(1));
    }
}
