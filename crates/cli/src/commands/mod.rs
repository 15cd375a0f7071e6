mod check;
mod completions;
mod describe;
mod new;
mod run;
mod study;

use crate::args::{Arguments, Verb};
use crate::exit::Exit;

/// Does what the arguments ask for.
pub(crate) fn perform(arguments: &Arguments) -> anyhow::Result<Exit> {
    let json = arguments.json;
    match &arguments.verb {
        Verb::New { file } => new::new(file, json),
        Verb::Describe { scene } => describe::describe(scene, json),
        Verb::Run(run) => run::run(run, json),
        Verb::Study(study) => study::study(study, json),
        Verb::Check => check::check(json),
        Verb::Completions { shell } => completions::completions(*shell, json),
    }
}
