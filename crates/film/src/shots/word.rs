use super::{Place, ShotError};
use bedswell_sim::nearest_word;
use std::fmt;

/// A word of a shot list whose meaning is settled by whoever draws, with its line for the
/// message if it has none.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Word {
    /// The word.
    pub text: String,
    /// Its key, with the table.
    pub key: String,
    /// Where it stands.
    pub place: Place,
}

impl Word {
    /// What the word stands for among those known.
    ///
    /// # Errors
    ///
    /// A word that is not among them; the error names its line and lists them.
    pub fn one_of<T: Clone>(&self, known: &[(&str, T)]) -> Result<T, ShotError> {
        let found = known.iter().find(|(word, _)| *word == self.text).map(|(_, meaning)| meaning.clone());
        found.ok_or_else(|| {
            let words: Vec<&str> = known.iter().map(|&(word, _)| word).collect();
            let guess = nearest_word(&self.text, &words)
                .map_or(String::new(), |word| format!(" did you mean {word:?}?"));
            let words: Vec<String> = words.iter().map(|word| format!("{word:?}")).collect();
            self.refuse(format!("not known;{guess} choose one of {}", words.join(", ")))
        })
    }

    /// An error about the word that names its line.
    pub fn refuse(&self, problem: impl Into<String>) -> ShotError {
        ShotError::Value {
            place: self.place.clone(),
            key: self.key.clone(),
            value: format!("{:?}", self.text),
            problem: problem.into(),
        }
    }
}

impl fmt::Display for Word {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(&self.text)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::path::Path;

    #[test]
    fn an_unknown_word_is_told_with_its_line_and_the_known_ones() {
        let place = Place { file: Path::new("film.toml").into(), line: 12 };
        let word = |text: &str| Word { text: text.into(), key: "shot[2].field".into(), place: place.clone() };
        let known = [("tension", 1), ("damage", 2)];
        assert_eq!(word("damage").one_of(&known).unwrap(), 2);
        assert_eq!(
            word("tenson").one_of(&known).unwrap_err().to_string(),
            "film.toml, line 12: shot[2].field = \"tenson\": not known; did you mean \"tension\"? choose one of \
             \"tension\", \"damage\""
        );
        assert!(!word("x").one_of(&known).unwrap_err().to_string().contains("did you mean"));
    }
}
