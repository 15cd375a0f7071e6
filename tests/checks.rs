use crate::support::TestEnv;
use std::collections::BTreeSet;

#[test]
fn check_agrees_and_spans_the_model() {
    let ended = TestEnv::new().succeed(&["check", "--json"]);
    let value: serde_json::Value = serde_json::from_str(&ended.stdout).unwrap();
    let lines = value["checks"].as_array().unwrap();
    assert!(lines.len() >= 15, "{} lines", lines.len());
    let subjects: BTreeSet<&str> = lines.iter().map(|line| line["subject"].as_str().unwrap()).collect();
    for subject in ["thermodynamics", "lattice", "contact", "packing", "statistics"] {
        assert!(subjects.contains(subject), "no {subject} among {subjects:?}");
    }
}

#[test]
fn check_prints_value_reference_source_and_deviation() {
    let text = TestEnv::new().succeed(&["check"]).stdout;
    // Free stretch at n = 1e-3, chi = 0.2: 3.215 in print.
    let line = text.lines().find(|line| line.contains("n 1e-3, chi 0.2")).unwrap();
    assert!(line.contains("3.21502151") && line.contains("Hong et al. 2008"), "{line}");
}
