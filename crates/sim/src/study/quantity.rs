/// The number and the unit of a quantity such as `1.5 mm` or `2e-3m`; a plain number has
/// an empty unit. `None` if it does not begin with a finite number.
pub(super) fn number_and_unit(text: &str) -> Option<(f64, &str)> {
    let text = text.trim();
    // The longest beginning that is a number, so that the exponent belongs to it.
    let ends = text.char_indices().map(|(at, letter)| at + letter.len_utf8()).rev();
    let (at, number) = ends.into_iter().find_map(|at| Some((at, text[..at].trim().parse::<f64>().ok()?)))?;
    number.is_finite().then(|| (number, text[at..].trim()))
}

#[cfg(test)]
mod tests {
    use super::number_and_unit;

    #[test]
    fn numbers_part_from_their_units() {
        assert_eq!(number_and_unit("1.5 mm"), Some((1.5, "mm")));
        assert_eq!(number_and_unit("2e-3m"), Some((2e-3, "m")));
        assert_eq!(number_and_unit(" -2 kPa "), Some((-2.0, "kPa")));
        assert_eq!(number_and_unit("8"), Some((8.0, "")));
        assert_eq!(number_and_unit("3µm"), Some((3.0, "µm")));
        assert_eq!(number_and_unit("bed.csv"), None);
        assert_eq!(number_and_unit("inf"), None);
        assert_eq!(number_and_unit(""), None);
    }
}
