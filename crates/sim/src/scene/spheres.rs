//! A bed given as a table of spheres.

use super::error::{Place, SceneError};
use super::unit::{Kind, parse_quantity};
use bedswell_geometry::{Cell, Sphere, Vector, close_pairs};
use std::path::Path;
use std::sync::Arc;

/// Overlap of two spheres over the smaller diameter that measuring may leave.
const OVERLAP_TOLERANCE: f64 = 1e-3;
/// The columns of the table.
const COLUMNS: [&str; 4] = ["x", "y", "z", "d"];

/// Spheres and the line each was written in.
pub(crate) struct SphereTable {
    pub(crate) spheres: Vec<Sphere>,
    pub(crate) lines: Vec<usize>,
    file: Arc<Path>,
}

/// Reads spheres from comma- or semicolon-separated columns x, y, z, d, whose unit
/// stands in the header (`x [mm]`, `x_mm`) or is given as `unit`.
pub(crate) fn read_spheres(path: &Path, unit: Option<&str>) -> Result<SphereTable, SceneError> {
    let text = std::fs::read_to_string(path)
        .map_err(|cause| SceneError::Unreadable { path: path.to_owned(), cause })?;
    let file: Arc<Path> = path.into();
    let syntax = |line: usize, message: String| SceneError::Syntax {
        place: Place { file: Arc::clone(&file), line },
        message,
    };
    let mut lines = text
        .lines()
        .enumerate()
        .map(|(index, line)| (index + 1, line.trim()))
        .filter(|(_, line)| !line.is_empty() && !line.starts_with('#'));
    let (header_line, header) =
        lines.next().ok_or_else(|| syntax(1, "no spheres; the first line must name x, y, z, d".into()))?;
    let separator = if header.contains(';') { ';' } else { ',' };
    let columns = find_columns(header, separator, unit).map_err(|message| syntax(header_line, message))?;

    let mut table = SphereTable { spheres: Vec::new(), lines: Vec::new(), file: Arc::clone(&file) };
    for (line, row) in lines {
        let cells: Vec<&str> = row.split(separator).map(str::trim).collect();
        let mut values = [0.0; 4];
        for ((value, (column, scale)), name) in values.iter_mut().zip(&columns).zip(COLUMNS) {
            let cell = cells.get(*column).copied().unwrap_or("");
            *value = match cell.parse::<f64>() {
                Ok(number) if number.is_finite() => number * scale,
                _ => return Err(syntax(line, format!("{name} = {cell:?} must be a finite number"))),
            };
        }
        if values[3] <= 0.0 {
            return Err(syntax(line, format!("d = {} m must be above zero", values[3])));
        }
        table
            .spheres
            .push(Sphere { centre: Vector::new(values[0], values[1], values[2]), radius: 0.5 * values[3] });
        table.lines.push(line);
    }
    if table.spheres.is_empty() {
        return Err(syntax(header_line, "no spheres below the header".into()));
    }
    Ok(table)
}

/// For each of x, y, z, d: the column it stands in and the size of its unit (m).
fn find_columns(header: &str, separator: char, unit: Option<&str>) -> Result<[(usize, f64); 4], String> {
    let headings: Vec<(String, Option<String>)> = header
        .split(separator)
        .map(|heading| {
            let mut parts = heading.split(|c: char| !c.is_alphanumeric()).filter(|part| !part.is_empty());
            (parts.next().unwrap_or("").to_lowercase(), parts.next().map(str::to_owned))
        })
        .collect();
    let mut columns = [(0, 1.0); 4];
    for (column, name) in columns.iter_mut().zip(COLUMNS) {
        let index = headings.iter().position(|(heading, _)| heading == name).ok_or_else(|| {
            format!("no column `{name}`; the first line must name x, y, z, d, such as `x [mm], y [mm], z [mm], d [mm]`")
        })?;
        let unit = headings[index].1.as_deref().or(unit).ok_or_else(|| {
            format!(
                "the unit of column `{name}` is missing; write `{name} [mm]` or soil.spheres_unit = \"mm\""
            )
        })?;
        let scale = parse_quantity(&format!("1 {unit}"), Kind::Length)
            .map_err(|problem| format!("column `{name}`: {problem}"))?;
        *column = (index, scale);
    }
    Ok(columns)
}

impl SphereTable {
    /// The smallest box round all spheres: its lower corner and its size (m).
    pub(crate) fn bounding_box(&self) -> (Vector, Vector) {
        let mut low = Vector::repeat(f64::INFINITY);
        let mut high = Vector::repeat(f64::NEG_INFINITY);
        for sphere in &self.spheres {
            let reach = Vector::repeat(sphere.radius);
            low = low.inf(&(sphere.centre - reach));
            high = high.sup(&(sphere.centre + reach));
        }
        (low, high - low)
    }

    /// Refuses spheres that stand outside the cell or inside each other.
    pub(crate) fn check(&self, cell: &Cell) -> Result<(), SceneError> {
        let refuse = |index: usize, message: String| SceneError::Syntax {
            place: Place { file: Arc::clone(&self.file), line: self.lines[index] },
            message,
        };
        for (index, sphere) in self.spheres.iter().enumerate() {
            for (axis, name) in COLUMNS.iter().enumerate().take(3) {
                let (at, size) = (sphere.centre[axis], cell.size[axis]);
                if !(0.0..=size).contains(&at) {
                    return Err(refuse(
                        index,
                        format!("{name} = {at} m lies outside the cell, 0 to {size} m"),
                    ));
                }
                if 2.0 * sphere.radius > size * (1.0 + OVERLAP_TOLERANCE) {
                    return Err(refuse(
                        index,
                        format!("the sphere is wider than the cell, {size} m along {name}"),
                    ));
                }
            }
        }
        let centres: Vec<Vector> = self.spheres.iter().map(|sphere| cell.wrap(&sphere.centre)).collect();
        let radii: Vec<f64> = self.spheres.iter().map(|sphere| sphere.radius).collect();
        for pair in close_pairs(cell, &centres, &radii, 0.0) {
            let (a, b) = (pair.a as usize, pair.b as usize);
            let gap = (centres[b] + bedswell_geometry::offset(cell, pair.image) - centres[a]).norm();
            let overlap = radii[a] + radii[b] - gap;
            if overlap > OVERLAP_TOLERANCE * 2.0 * radii[a].min(radii[b]) {
                return Err(refuse(
                    b,
                    format!(
                        "the sphere overlaps that of line {} by {overlap:.3e} m; at most {OVERLAP_TOLERANCE} of the \
                         smaller diameter is allowed",
                        self.lines[a]
                    ),
                ));
            }
        }
        Ok(())
    }
}
