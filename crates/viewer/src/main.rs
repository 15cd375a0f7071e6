//! The window on a run.

fn main() {}
