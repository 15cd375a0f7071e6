use bedswell_sim::Measure;

/// Columns of a terminal that a table may take.
const WIDTH: usize = 100;
/// Spaces in front of a table, between its figures, and between their groups.
const INDENT: usize = 2;
const GAP: usize = 2;
const GROUP_GAP: usize = 3;

/// Figures with their limits for the terminal: labels to the left, and a group of three
/// columns for each kind of figure. Where that is too wide, labels take a line of their own.
pub(super) struct FigureTable {
    /// Heading of each label.
    pub(super) labels: Vec<String>,
    /// Each kind of figure.
    pub(super) groups: Vec<Group>,
    /// What the first column of a group is, such as `mean`.
    pub(super) figure: &'static str,
    /// Its rows.
    pub(super) rows: Vec<Row>,
}

/// Labels and figures.
pub(super) type Row = (Vec<String>, Vec<Option<Measure>>);

/// A kind of figure: its heading, and how a figure is written.
pub(super) struct Group {
    pub(super) heading: String,
    pub(super) show: Box<dyn Fn(f64) -> String>,
}

impl FigureTable {
    /// The lines of the table, of which the first two are headings (three where labels have
    /// lines of their own).
    pub(super) fn lines(&self) -> Vec<String> {
        let (labels, figures) = (self.label_lines(), self.figure_lines());
        let indent = " ".repeat(INDENT);
        let together =
            |labels: &str, figures: &str| format!("{indent}{labels}{}{figures}", " ".repeat(GROUP_GAP));
        if width(&together(&labels[0], &figures[0])) <= WIDTH {
            return labels.iter().zip(&figures).map(|(labels, figures)| together(labels, figures)).collect();
        }
        let above = |labels: &str| format!("{indent}{}", labels.trim_end());
        let below = |figures: &str| format!("{indent}{indent}{figures}");
        let mut lines = vec![above(&labels[1]), below(&figures[0]), below(&figures[1])];
        for (labels, figures) in labels.iter().zip(&figures).skip(2) {
            lines.extend([above(labels), below(figures)]);
        }
        lines
    }

    /// The labels' side of each line.
    fn label_lines(&self) -> Vec<String> {
        let blank = vec![String::new(); self.labels.len()];
        let rows = [&blank, &self.labels].into_iter().chain(self.rows.iter().map(|row| &row.0));
        let widths: Vec<usize> =
            (0..self.labels.len()).map(|label| widest(rows.clone().map(|row| &row[label]))).collect();
        let line = |texts: &Vec<String>| {
            let padded = texts.iter().zip(&widths).map(|(text, width)| format!("{text:<width$}"));
            padded.collect::<Vec<_>>().join(&" ".repeat(GAP))
        };
        rows.map(line).collect()
    }

    /// The figures' side of each line.
    fn figure_lines(&self) -> Vec<String> {
        let heads = vec![[self.figure, "low", "high"].map(str::to_owned); self.groups.len()];
        let rows: Vec<Vec<[String; 3]>> =
            [heads].into_iter().chain(self.rows.iter().map(|(_, figures)| self.cells(figures))).collect();
        let groups = self.groups.iter().enumerate().map(|(group, Group { heading, .. })| {
            let widths = [0, 1, 2].map(|side| widest(rows.iter().map(|row| &row[group][side])));
            let line = |row: &Vec<[String; 3]>| {
                [0, 1, 2].map(|side| right(&row[group][side], widths[side])).join(&" ".repeat(GAP))
            };
            let lines: Vec<String> = [heading.clone()].into_iter().chain(rows.iter().map(line)).collect();
            let width = widest(lines.iter());
            lines.iter().map(|line| right(line, width)).collect::<Vec<_>>()
        });
        let groups: Vec<Vec<String>> = groups.collect();
        let line = |index: usize| groups.iter().map(|group| group[index].as_str()).collect::<Vec<_>>();
        (0..rows.len() + 1).map(|index| line(index).join(&" ".repeat(GROUP_GAP))).collect()
    }

    fn cells(&self, figures: &[Option<Measure>]) -> Vec<[String; 3]> {
        let cell = |(group, figure): (&Group, &Option<Measure>)| {
            let show = |value: Option<f64>| value.map_or_else(|| "-".to_owned(), &group.show);
            [figure.map(|at| at.value), figure.and_then(|at| at.low), figure.and_then(|at| at.high)].map(show)
        };
        self.groups.iter().zip(figures).map(cell).collect()
    }
}

fn widest<'a>(texts: impl Iterator<Item = &'a String>) -> usize {
    texts.map(|text| width(text)).max().unwrap_or(0)
}

fn width(text: &str) -> usize {
    text.chars().count()
}

fn right(text: &str, width: usize) -> String {
    format!("{text:>width$}")
}

#[cfg(test)]
mod tests {
    use super::*;

    fn table(label: &str) -> FigureTable {
        let group =
            |heading: &str| Group { heading: heading.into(), show: Box::new(|value| value.to_string()) };
        let row = |value: f64| Some(Measure { value, low: Some(value - 1.0), high: None });
        FigureTable {
            labels: vec!["bed.depth".into(), "packs".into()],
            groups: vec![group("water uptake (g/g)"), group("heave (mm)")],
            figure: "mean",
            rows: vec![
                (vec![label.into(), "8".into()], vec![row(68.5), row(0.25)]),
                (vec!["20 cm".into(), "12".into()], vec![row(7.5), None]),
            ],
        }
    }

    #[test]
    fn figures_stand_beside_their_labels_under_their_headings() {
        let expected = "
                     water uptake (g/g)          heave (mm)
  bed.depth  packs     mean   low  high   mean    low  high
  3 cm       8         68.5  67.5     -   0.25  -0.75     -
  20 cm      12         7.5   6.5     -      -      -     -";
        assert_eq!(format!("\n{}", table("3 cm").lines().join("\n")), expected);
    }

    #[test]
    fn long_labels_take_a_line_of_their_own() {
        let lines = table(&"a long value ".repeat(6)).lines();
        assert!(lines.iter().all(|line| line.len() <= WIDTH), "{lines:#?}");
        assert_eq!(lines.len(), 7, "{lines:#?}");
    }
}
