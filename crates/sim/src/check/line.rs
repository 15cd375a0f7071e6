use serde::Serialize;

/// A value recomputed on the spot, next to what an outside source says.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct CheckLine {
    /// What part of the model it checks.
    pub subject: &'static str,
    /// What is compared, with its unit or what it is divided by.
    pub quantity: &'static str,
    /// The value computed now.
    pub value: f64,
    /// The value of the source.
    pub reference: f64,
    /// Where the reference comes from.
    pub source: &'static str,
    /// Deviation at which the line fails: relative, or absolute where the reference is 0.
    pub tolerance: f64,
}

/// The part of the model that some lines check.
pub(super) struct Subject(pub(super) &'static str);

impl Subject {
    /// A line of this part.
    pub(super) fn line(
        &self,
        quantity: &'static str,
        value: f64,
        reference: f64,
        source: &'static str,
        tolerance: f64,
    ) -> CheckLine {
        CheckLine { subject: self.0, quantity, value, reference, source, tolerance }
    }
}

impl CheckLine {
    /// Value over reference less one, or the plain difference where the reference is 0.
    pub fn deviation(&self) -> f64 {
        let difference = self.value - self.reference;
        if self.reference == 0.0 { difference } else { difference / self.reference }
    }

    /// Whether the deviation stays within the tolerance; a value that is no number does not.
    pub fn passes(&self) -> bool {
        self.deviation().abs() <= self.tolerance
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_fails_when_its_value_is_off_or_no_number() {
        let line = |value| CheckLine {
            subject: "",
            quantity: "",
            value,
            reference: 2.0,
            source: "",
            tolerance: 0.01,
        };
        assert!(line(2.01).passes());
        assert!(!line(2.03).passes());
        assert!(!line(f64::NAN).passes());
    }
}
