/// Units of length and their size as a power of ten (m).
const UNITS: [(&str, i32); 5] = [("m", 0), ("cm", -2), ("mm", -3), ("um", -6), ("µm", -6)];

/// Reads `"1.2 mm"` in metres; the error says what is wrong.
pub(super) fn parse_length(text: &str) -> Result<f64, String> {
    let example = "write a number and a unit, for example \"1.5 mm\"";
    let text = text.trim();
    let start = text.find(|c: char| c.is_alphabetic() && !matches!(c, 'e' | 'E')).unwrap_or(text.len());
    let (number, name) = (text[..start].trim(), text[start..].trim());
    let Ok(value) = number.parse::<f64>() else { return Err(format!("not a length; {example}")) };
    let Some((_, power)) = UNITS.iter().find(|(unit, _)| *unit == name) else {
        let units = UNITS.map(|(unit, _)| unit).join(", ");
        return Err(match name {
            "" => format!("the unit is missing; a length needs one of {units}"),
            _ => format!("unknown unit `{name}`; a length needs one of {units}"),
        });
    };
    if !value.is_finite() {
        return Err("must be a finite number".to_owned());
    }
    Ok(value * 10.0_f64.powi(*power))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn units_scale_to_metres() {
        for (text, metres) in
            [("1.5 mm", 1.5e-3), ("-30cm", -0.3), ("1e-3 m", 1e-3), ("20 µm", 2e-5), ("2e1um", 2e-5)]
        {
            assert!((parse_length(text).unwrap() - metres).abs() < 1e-15, "{text}");
        }
        assert!(parse_length("3").unwrap_err().contains("unit is missing"));
        assert!(parse_length("3 kPa").unwrap_err().contains("unknown unit `kPa`"));
        assert!(parse_length("mm").unwrap_err().contains("not a length"));
        assert!(parse_length("").unwrap_err().contains("not a length"));
        assert!(parse_length("1e999 m").unwrap_err().contains("finite"));
    }
}
