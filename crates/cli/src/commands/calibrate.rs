use crate::args::Calibrate;
use crate::exit::{Exit, Usage};
use crate::output::{say, say_json};
use crate::progress::Progress;
use anyhow::Context;
use bedswell_sim::figures::{digits, probability, stress};
use bedswell_sim::{
    BenchCount, BenchGrade, BenchOutcomes, Interval, LoadCase, Measure, Strength, StrengthFit, TensionField,
    fit_strength, gel_table, read_bench_outcomes, wilson,
};
use std::io::Write;
use std::path::Path;

/// A grade, what it was put to, and what that tells.
struct Fitted<'a> {
    grade: &'a BenchGrade,
    cases: Vec<LoadCase>,
    fit: StrengthFit,
}

/// Fits each grade of a table of outcomes, and writes the tables of one if asked.
pub(super) fn calibrate(arguments: &Calibrate, json: bool) -> anyhow::Result<Exit> {
    let mut outcomes = read_bench_outcomes(&arguments.outcomes)?;
    choose(&mut outcomes, arguments)?;
    let fields = tensions(&outcomes)?;
    let fitted = |grade| {
        let cases = load_cases(&outcomes, grade, &fields);
        let fit = fit_strength(&cases, &grade.strength).with_context(|| format!("grade {}", grade.name))?;
        anyhow::Ok(Fitted { grade, cases, fit })
    };
    let fitted: Vec<Fitted<'_>> = outcomes.grades.iter().map(fitted).collect::<Result<_, _>>()?;
    if json {
        let grades: Vec<serde_json::Value> = fitted.iter().map(as_json).collect();
        say_json(&serde_json::json!({ "grades": grades }))?;
    } else {
        for one in &fitted {
            say(&in_words(one))?;
        }
        say(STIFFNESS)?;
    }
    if let (Some(path), [one]) = (&arguments.out, fitted.as_slice()) {
        write(path, one, &arguments.outcomes)?;
        if !json {
            say(&format!("written to {}; put its tables in place of those of a scene", path.display()))?;
        }
    }
    Ok(Exit::Done)
}

const STIFFNESS: &str = "The gel's stiffness is taken from the scenes: among held spheres a stiffer and as much \
                         stronger gel would tear alike.";

/// Keeps the grade asked for; a file can hold one only.
fn choose(outcomes: &mut BenchOutcomes, arguments: &Calibrate) -> Result<(), Usage> {
    let names: Vec<String> = outcomes.grades.iter().map(|grade| grade.name.clone()).collect();
    if let Some(name) = &arguments.grade {
        outcomes.grades.retain(|grade| grade.name == *name);
        if outcomes.grades.is_empty() {
            let known = names.join(", ");
            return Err(Usage(format!("--grade {name}: the table has no such grade; it has {known}")));
        }
    }
    if let (Some(path), 2..) = (&arguments.out, outcomes.grades.len()) {
        let known = names.join(", ");
        let path = path.display();
        return Err(Usage(format!("--out {path} holds one grade; choose it with --grade: {known}")));
    }
    Ok(())
}

/// The tension in each array in which a chosen grade was tested.
fn tensions(outcomes: &BenchOutcomes) -> anyhow::Result<Vec<TensionField>> {
    let used: Vec<bool> = (0..outcomes.arrays.len())
        .map(|array| {
            outcomes.grades.iter().any(|grade| grade.counts.iter().any(|count| count.array == array))
        })
        .collect();
    let of = used.iter().filter(|used| **used).count() as u64;
    let mut progress = Progress::new("arrays");
    let mut done = 0;
    let mut fields = vec![TensionField::default(); used.len()];
    for (index, array) in outcomes.arrays.iter().enumerate().filter(|(index, _)| used[*index]) {
        fields[index] = array.tension().with_context(|| array.name.clone())?;
        done += 1;
        progress.advance(done, of);
    }
    Ok(fields)
}

fn load_cases(outcomes: &BenchOutcomes, grade: &BenchGrade, fields: &[TensionField]) -> Vec<LoadCase> {
    let case = |count: &BenchCount| LoadCase {
        name: outcomes.arrays[count.array].name.clone(),
        field: fields[count.array].clone(),
        torn: count.torn,
        beads: count.beads,
    };
    grade.counts.iter().map(case).collect()
}

fn as_json(Fitted { grade, cases, fit }: &Fitted<'_>) -> serde_json::Value {
    let law = fit.strength(&grade.strength);
    let array = |case: &LoadCase| {
        serde_json::json!({
            "geometry": case.name,
            "beads": case.beads,
            "torn": case.torn,
            "tear_probability": law.map(|law| case.field.tear_probability(&law)),
        })
    };
    let arrays: Vec<_> = cases.iter().map(array).collect();
    serde_json::json!({ "grade": grade.name, "volume_m3": grade.strength.volume, "across": grade.across, "arrays": arrays, "fit": fit })
}

fn write(path: &Path, Fitted { grade, fit, .. }: &Fitted<'_>, source: &Path) -> anyhow::Result<()> {
    let source = source.file_name().unwrap_or_default().to_string_lossy();
    let table = gel_table(grade, fit, &source).ok_or_else(|| {
        Usage(format!(
            "--out {}: a bound alone is no strength, so no table is written; test where some beads tear and some \
             stay whole, or run without --out",
            path.display()
        ))
    })?;
    let mut file = std::fs::File::create_new(path)
        .with_context(|| format!("cannot write {}; choose a name that is free", path.display()))?;
    file.write_all(table.as_bytes()).with_context(|| format!("cannot write {}", path.display()))
}

fn in_words(Fitted { grade, cases, fit }: &Fitted<'_>) -> String {
    let count = cases.len();
    let mut text = format!(
        "grade {}: {} of {} beads torn, in {count} {}\n",
        grade.name,
        grade.torn(),
        grade.beads(),
        if count == 1 { "array" } else { "arrays" },
    );
    let volume = format!("in {} mm3", digits(1e9 * grade.strength.volume));
    match fit {
        StrengthFit::Both { scale, modulus, .. } => {
            text += &format!(
                "  strength scale    {}, {volume}\n  modulus           {}\n",
                with_limits(scale, stress),
                with_limits(modulus, modulus_in_words),
            );
        }
        StrengthFit::Scale { scale, assumed_modulus, .. } => {
            text += &format!(
                "  strength scale    {}, {volume}\n  modulus           {}, assumed: these outcomes cannot fix both; \
                 test more beads, under loads that differ more\n",
                with_limits(scale, stress),
                digits(*assumed_modulus),
            );
        }
        StrengthFit::AtLeast { scale, assumed_modulus } => {
            text += &bound("none tore", "at least", "harder", *scale, &volume, *assumed_modulus);
        }
        StrengthFit::AtMost { scale, assumed_modulus } => {
            text += &bound("all tore", "at most", "less", *scale, &volume, *assumed_modulus);
        }
    }
    let (StrengthFit::Both { agreement, .. } | StrengthFit::Scale { agreement, .. }) = fit else {
        return text;
    };
    text +=
        &format!("  tension           at {} voxels across; strength holds for beads as fine\n", grade.across);
    if let Some(law) = fit.strength(&grade.strength) {
        text += &in_arrays(cases, &law);
    }
    if let Some(p_value) = agreement.p_value {
        text += &format!(
            "  agreement: chi-squared {}, degrees of freedom {}, p {}\n",
            digits(agreement.chi_squared),
            agreement.degrees_of_freedom,
            probability(p_value)
        );
    }
    text
}

fn bound(what: &str, side: &str, mend: &str, scale: f64, volume: &str, modulus: f64) -> String {
    format!(
        "  strength scale    {side} {} (one-sided, 95 %), {volume}, if the modulus is {}\n  {what}: outcomes of one \
         kind cannot fix both numbers; add arrays that press the beads {mend}\n",
        stress(scale),
        digits(modulus),
    )
}

/// A Weibull modulus; a fit may end at either end of what scenes allow.
fn modulus_in_words(modulus: f64) -> String {
    match modulus {
        ..1.001 => "1, the smallest there is".into(),
        99.9.. => "100, the largest there is".into(),
        _ => digits(modulus),
    }
}

/// A figure with its limits.
fn with_limits(measure: &Measure, show: fn(f64) -> String) -> String {
    let value = show(measure.value);
    match (measure.low, measure.high) {
        (Some(low), Some(high)) => format!("{value} ({} to {}, 95 %)", show(low), show(high)),
        (Some(low), None) => format!("{value} ({} or more, 95 %)", show(low)),
        (None, Some(high)) => format!("{value} ({} or less, 95 %)", show(high)),
        (None, None) => value,
    }
}

/// Observed and fitted shares, array by array.
fn in_arrays(cases: &[LoadCase], law: &Strength) -> String {
    let mut text =
        format!("\n  {:<28} {:>5} {:>5}  {:<26} fitted\n", "array", "beads", "torn", "share torn (95 %)");
    for LoadCase { name, field, torn, beads } in cases {
        let Interval { low, high } = wilson(*torn, *beads);
        let observed = digits(*torn as f64 / *beads as f64);
        let share = format!("{observed} ({} to {})", digits(low), digits(high));
        let fitted = probability(field.tear_probability(law));
        text += &format!("  {name:<28} {beads:>5} {torn:>5}  {share:<26} {fitted}\n");
    }
    text
}
