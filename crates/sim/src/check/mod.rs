mod contact;
mod lattice;
mod line;
mod packing;
mod soil;
mod statistics;
mod thermodynamics;

pub use line::CheckLine;

/// Every check, in the order of the table; each recomputes its value when called.
pub fn checks() -> Vec<fn() -> CheckLine> {
    [thermodynamics::LINES, lattice::LINES, contact::LINES, soil::LINES, packing::LINES, statistics::LINES]
        .concat()
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
