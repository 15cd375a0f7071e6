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
    /// The lines of the table.
    pub(super) fn lines(&self) -> Vec<String> {
        let cells: Vec<Vec<[String; 3]>> = self.rows.iter().map(|(_, figures)| self.cells(figures)).collect();
        let heads = [self.figure, "low", "high"].map(str::to_owned);
        let widths: Vec<[usize; 3]> = (0..self.groups.len())
            .map(|group| {
                let column = |side: usize| cells.iter().map(move |row| &row[group][side]);
                [0, 1, 2].map(|side| widest(column(side)).max(width(&heads[side])))
            })
            .collect();
        let group_width = |group: usize| {
            let columns = widths[group].iter().sum::<usize>() + 2 * GAP;
            columns.max(width(&self.groups[group].heading))
        };
        let figures = |cells: &[[String; 3]]| {
            let group = |(group, sides): (usize, &[String; 3])| {
                let [first, low, high] = [0, 1, 2].map(|side| right(&sides[side], widths[group][side]));
                right(&[first, low, high].join(&" ".repeat(GAP)), group_width(group))
            };
            cells.iter().enumerate().map(group).collect::<Vec<_>>().join(&" ".repeat(GROUP_GAP))
        };
        let headings: Vec<String> = self
            .groups
            .iter()
            .enumerate()
            .map(|(group, Group { heading, .. })| right(heading, group_width(group)))
            .collect();
        let headings = headings.join(&" ".repeat(GROUP_GAP));
        let under = figures(&vec![heads.clone(); self.groups.len()]);

        let label_widths: Vec<usize> = (0..self.labels.len())
            .map(|label| widest(self.rows.iter().map(|row| &row.0[label])).max(width(&self.labels[label])))
            .collect();
        let labels = |texts: &[String]| {
            let padded = texts.iter().zip(&label_widths).map(|(text, width)| left(text, *width));
            padded.collect::<Vec<_>>().join(&" ".repeat(GAP))
        };
        let blank = vec![String::new(); self.labels.len()];
        let beside = INDENT + width(&labels(&blank)) + GROUP_GAP + width(&under) <= WIDTH;
        let line = |texts: &[String], figures: &str| {
            let (indent, labels) = (" ".repeat(INDENT), labels(texts));
            if beside {
                vec![format!("{indent}{labels}{}{figures}", " ".repeat(GROUP_GAP))]
            } else {
                vec![format!("{indent}{}", labels.trim_end()), format!("{indent}{indent}{figures}")]
            }
        };
        let mut lines = line(&blank, &headings);
        lines.extend(line(&self.labels, &under));
        if !beside {
            // The labels' headings, then those of the figures below them.
            lines = vec![lines.swap_remove(2), lines.swap_remove(1), lines.swap_remove(2)];
        }
        lines.extend(
            self.rows.iter().zip(&cells).flat_map(|((texts, _), cells)| line(texts, &figures(cells))),
        );
        lines
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

fn left(text: &str, width: usize) -> String {
    format!("{text:<width$}")
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
