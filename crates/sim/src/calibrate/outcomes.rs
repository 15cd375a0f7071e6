use crate::scene::nearest_word;
use crate::{
    BeadAmount, Gel, Place, RunError, Scene, SceneError, Strength, TensionField, read_scene, run_pack,
};
use csv::{ReaderBuilder, StringRecord, Trim};
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// The columns of a table of outcomes.
const COLUMNS: [&str; 3] = ["geometry", "grade", "torn"];

/// What became of beads on the bench.
#[derive(Clone, Debug, PartialEq)]
pub struct BenchOutcomes {
    /// The arrays that beads were swollen in, each once, as the table first names them.
    pub arrays: Vec<BenchArray>,
    /// The grades tested, as the table first names them.
    pub grades: Vec<BenchGrade>,
}

/// An array on the bench.
#[derive(Clone, Debug, PartialEq)]
pub struct BenchArray {
    /// The scene file, as the table names it.
    pub name: String,
    /// The array, with one bead among spheres that are held.
    pub scene: Scene,
}

/// The beads of one grade: one gel, one law of strength.
#[derive(Clone, Debug, PartialEq)]
pub struct BenchGrade {
    /// What the table calls it.
    pub name: String,
    /// The gel that its scenes share.
    pub gel: Gel,
    /// The strength that its scenes share: its volume is the reference volume of a fit, its
    /// modulus is assumed where the outcomes do not tell it.
    pub strength: Strength,
    /// Voxels across a bead that its scenes share: the highest tensions depend on them, and a
    /// fitted strength with them.
    pub across: usize,
    /// Beads in each array where it was tested.
    pub counts: Vec<BenchCount>,
}

/// The beads of one grade in one array.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct BenchCount {
    /// Which of the arrays.
    pub array: usize,
    /// Beads that tore.
    pub torn: u64,
    /// All beads.
    pub beads: u64,
}

impl BenchArray {
    /// The tension in the array's bead at equilibrium.
    ///
    /// # Errors
    /// When the bead finds no equilibrium among the spheres.
    pub fn tension(&self) -> Result<TensionField, RunError> {
        let mut tensions = run_pack(&self.scene, 0, &mut ())?.tensions;
        Ok(tensions.pop().unwrap_or_default())
    }
}

impl BenchGrade {
    /// Torn beads in all arrays.
    pub fn torn(&self) -> u64 {
        self.counts.iter().map(|count| count.torn).sum()
    }

    /// Beads in all arrays.
    pub fn beads(&self) -> u64 {
        self.counts.iter().map(|count| count.beads).sum()
    }
}

/// Reads a table of outcomes and the scenes that it names.
///
/// The table is text with comma- or semicolon-separated columns, whose first line names them:
/// `geometry`, a scene file relative to the table; `grade`, what the gel is called; `torn`,
/// `yes` or `no`. It has one row per bead. Other columns are left alone, as are lines that
/// start with `#`. A scene must hold one bead at a given place among listed spheres with
/// `fixed_grains = true`; the scenes of one grade must agree in gel, strength and voxels
/// across a bead.
///
/// # Errors
/// When a file cannot be read or says something that cannot be used; the error names the line
/// and what to write instead.
pub fn read_bench_outcomes(path: &Path) -> Result<BenchOutcomes, SceneError> {
    let text = std::fs::read_to_string(path)
        .map_err(|cause| SceneError::Unreadable { path: path.to_owned(), cause })?;
    let table = Sheet { file: path.into() };
    let mut outcomes = BenchOutcomes { arrays: Vec::new(), grades: Vec::new() };
    for row in table.rows(&text)? {
        let array = match outcomes.arrays.iter().position(|array| array.name == row.geometry) {
            Some(array) => array,
            None => {
                outcomes.arrays.push(table.array(path, &row)?);
                outcomes.arrays.len() - 1
            }
        };
        let grade = table.grade(&mut outcomes, array, &row)?;
        let torn = u64::from(row.torn);
        match grade.counts.iter_mut().find(|count| count.array == array) {
            Some(count) => *count = BenchCount { array, torn: count.torn + torn, beads: count.beads + 1 },
            None => grade.counts.push(BenchCount { array, torn, beads: 1 }),
        }
    }
    Ok(outcomes)
}

/// A table under its file name, for messages.
struct Sheet {
    file: Arc<Path>,
}

struct Row {
    line: usize,
    geometry: String,
    grade: String,
    torn: bool,
}

impl Sheet {
    fn wrong(&self, line: usize, message: String) -> SceneError {
        SceneError::Syntax { place: Place { file: Arc::clone(&self.file), line }, message }
    }

    fn rows(&self, text: &str) -> Result<Vec<Row>, SceneError> {
        let text = text.trim_start_matches('\u{feff}');
        let content = |line: &&str| !line.trim().is_empty() && !line.starts_with('#');
        let header = text.lines().find(content).unwrap_or("");
        let separator = if header.contains(';') { b';' } else { b',' };
        let mut reader = ReaderBuilder::new()
            .delimiter(separator)
            .comment(Some(b'#'))
            .trim(Trim::All)
            .flexible(true)
            .has_headers(false)
            .from_reader(text.as_bytes());
        let lines: Vec<&str> = text.lines().collect();
        // The reader's place is where it starts to look for a record, before what it passes over.
        let line_of = |position: Option<&csv::Position>| {
            let from = position.map_or(0, |position| position.line() as usize - 1);
            let passed = lines.iter().skip(from).take_while(|line| !content(line)).count();
            from + passed + 1
        };
        let mut records = reader
            .records()
            .map(|record| match record {
                Ok(record) => Ok((line_of(record.position()), record)),
                Err(error) => {
                    Err(self.wrong(line_of(error.position()), format!("not a table of text: {error}")))
                }
            })
            .filter(|record| !matches!(record, Ok((_, cells)) if cells.iter().all(str::is_empty)));
        let Some(header) = records.next() else {
            return Err(self.wrong(1, format!("the table is empty; {}", self.what_to_write())));
        };
        let (header_line, header) = header?;
        let columns = self.columns(header_line, &header)?;
        let rows = records
            .map(|record| record.and_then(|(line, record)| self.row(line, &record, &columns)))
            .collect::<Result<Vec<Row>, _>>()?;
        if rows.is_empty() {
            return Err(self.wrong(
                header_line,
                "no outcomes below the header; write a line per bead, such as bench-array.toml,soft,yes"
                    .into(),
            ));
        }
        Ok(rows)
    }

    fn what_to_write(&self) -> &'static str {
        "the first line must name the columns geometry,grade,torn"
    }

    /// Where each column stands.
    fn columns(&self, line: usize, header: &StringRecord) -> Result<[usize; 3], SceneError> {
        let headings: Vec<String> = header.iter().map(str::to_lowercase).collect();
        let mut columns = [0; 3];
        for (column, name) in columns.iter_mut().zip(COLUMNS) {
            *column = headings.iter().position(|heading| heading == name).ok_or_else(|| {
                let given: Vec<&str> = headings.iter().map(String::as_str).collect();
                let slip = nearest_word(name, &given)
                    .filter(|near| !COLUMNS.contains(near))
                    .map_or(String::new(), |near| format!(" (is `{near}` meant?)"));
                self.wrong(line, format!("no column `{name}`{slip}; {}", self.what_to_write()))
            })?;
        }
        Ok(columns)
    }

    fn row(&self, line: usize, record: &StringRecord, columns: &[usize; 3]) -> Result<Row, SceneError> {
        let [geometry, grade, torn] = columns.map(|column| record.get(column).unwrap_or(""));
        for (name, cell, example) in [
            ("geometry", geometry, "a scene file, such as bench-array.toml"),
            ("grade", grade, "a name, such as soft"),
        ] {
            if cell.is_empty() {
                return Err(self.wrong(line, format!("{name} is missing; write {example}")));
            }
        }
        let torn = match torn.to_lowercase().as_str() {
            "yes" => true,
            "no" => false,
            _ => return Err(self.wrong(line, format!("torn = {torn:?}; write yes or no"))),
        };
        Ok(Row { line, geometry: geometry.into(), grade: grade.into(), torn })
    }

    /// The array that a row names.
    fn array(&self, table: &Path, row: &Row) -> Result<BenchArray, SceneError> {
        let file: PathBuf = table.parent().unwrap_or(Path::new("")).join(&row.geometry);
        let refuse =
            |problem: &str| self.wrong(row.line, format!("geometry = {:?}: {problem}", row.geometry));
        let scene = read_scene(&file).map_err(|error| match error {
            SceneError::Unreadable { path, cause } => refuse(&format!(
                "cannot read {}: {cause}; write the name of a scene file, relative to the table",
                path.display()
            )),
            other => other,
        })?;
        match &scene.beads.amount {
            BeadAmount::At(centres) if centres.len() == 1 && scene.bed.fixed_grains => {
                Ok(BenchArray { name: row.geometry.clone(), scene })
            }
            _ => Err(refuse(
                "no array of the bench; its scene must hold one bead at a given place (beads.centres) among listed \
                 spheres (soil.spheres) that stay where they are (bed.fixed_grains = true)",
            )),
        }
    }

    /// The grade that a row names, which must be one gel.
    fn grade<'a>(
        &self,
        outcomes: &'a mut BenchOutcomes,
        array: usize,
        row: &Row,
    ) -> Result<&'a mut BenchGrade, SceneError> {
        let BenchOutcomes { arrays, grades } = outcomes;
        let Scene { gel, strength, beads, .. } = &arrays[array].scene;
        let Some(index) = grades.iter().position(|grade| grade.name == row.grade) else {
            let (gel, strength, across) = (*gel, *strength, beads.across);
            grades.push(BenchGrade { name: row.grade.clone(), gel, strength, across, counts: Vec::new() });
            return Ok(grades.last_mut().unwrap_or_else(|| unreachable!("pushed above")));
        };
        let grade = &mut grades[index];
        let alike = [
            ("[gel]", grade.gel == *gel),
            ("[strength]", grade.strength == *strength),
            ("beads.across", grade.across == beads.across),
        ];
        let Some((what, _)) = alike.iter().find(|part| !part.1) else { return Ok(grade) };
        let first = grade.counts.first().map_or("", |count| &arrays[count.array].name);
        Err(self.wrong(
            row.line,
            format!(
                "grade = {:?}: {first} and {} differ in {what}; one grade is one gel, computed alike: make both \
                 scenes agree, or tell two grades apart by their names",
                row.grade, row.geometry
            ),
        ))
    }
}
