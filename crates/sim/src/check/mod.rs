mod line;
mod soil;
mod statistics;
mod thermodynamics;

pub use line::CheckLine;

/// Every check, in the order of the table; each recomputes its value when called.
pub fn checks() -> Vec<fn() -> CheckLine> {
    [thermodynamics::LINES, soil::LINES, statistics::LINES].concat()
}

#[cfg(test)]
mod tests {
    #[test]
    fn every_line_meets_its_reference() {
        for check in super::checks() {
            let line = check();
            assert!(line.passes(), "{line:?}, deviation {}", line.deviation());
        }
    }
}
