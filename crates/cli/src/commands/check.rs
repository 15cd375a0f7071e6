use crate::exit::Exit;
use crate::output::{say, say_json};
use bedswell_sim::{CheckLine, checks};
use serde::Serialize;

/// A check with its verdict, as JSON shows it.
#[derive(Serialize)]
struct Judged<'a> {
    #[serde(flatten)]
    line: &'a CheckLine,
    deviation: f64,
    passes: bool,
}

/// Recomputes every check and prints the table, line by line as they are done.
pub(super) fn check(json: bool) -> anyhow::Result<Exit> {
    let mut lines = Vec::new();
    let mut subject = "";
    for check in checks() {
        let line = check();
        if !json {
            if line.subject != subject {
                subject = line.subject;
                say(&heading(subject))?;
            }
            say(&row(&line))?;
        }
        lines.push(line);
    }
    let failed = lines.iter().filter(|line| !line.passes()).count();
    if json {
        let judged: Vec<Judged<'_>> = lines
            .iter()
            .map(|line| Judged { line, deviation: line.deviation(), passes: line.passes() })
            .collect();
        say_json(&serde_json::json!({ "checks": judged, "failed": failed }))?;
    } else if failed == 0 {
        say(&format!("\nall {} values agree with their references", lines.len()))?;
    } else {
        say(&format!("\n{failed} of {} values do not agree with their references", lines.len()))?;
    }
    Ok(if failed == 0 { Exit::Done } else { Exit::Failed })
}

fn heading(subject: &str) -> String {
    format!(
        "\n{subject:<68} {:>15} {:>15} {:>10} {:>8}  {:<7}  source",
        "value", "reference", "deviation", "allowed", "verdict"
    )
}

fn row(line: &CheckLine) -> String {
    format!(
        "{:<68} {:>15} {:>15} {:>10} {:>8}  {:<7}  {}",
        line.quantity,
        nine_digits(line.value),
        nine_digits(line.reference),
        format!("{:+.1e}", line.deviation()),
        format!("{:.0e}", line.tolerance),
        if line.passes() { "agrees" } else { "differs" },
        line.source,
    )
}

fn nine_digits(value: f64) -> String {
    if value != 0.0 && !(1e-3..1e6).contains(&value.abs()) {
        return format!("{value:.8e}");
    }
    let decimals = if value == 0.0 { 0 } else { (8.0 - value.abs().log10().floor()).max(0.0) as usize };
    format!("{value:.decimals$}")
}
