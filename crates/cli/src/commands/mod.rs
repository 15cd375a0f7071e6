mod calibrate;
mod check;
mod completions;
mod describe;
mod film;
mod new;
mod run;
mod still;
mod study;
mod view;

use crate::args::{Arguments, Verb};
use crate::exit::Exit;

/// Does what the arguments ask for.
pub(crate) fn perform(arguments: &Arguments) -> anyhow::Result<Exit> {
    let json = arguments.json;
    match &arguments.verb {
        Verb::New { file, film } => new::new(file, *film, json),
        Verb::Describe { scene } => describe::describe(scene, json),
        Verb::Run(run) => run::run(run, json),
        Verb::Study(study) => study::study(study, json),
        Verb::Calibrate(calibrate) => calibrate::calibrate(calibrate, json),
        Verb::View(view) => view::view(view),
        Verb::Film(film) => film::film(film, json),
        Verb::Still(still) => still::still(still, json),
        Verb::Check => check::check(json),
        Verb::Completions { shell } => completions::completions(*shell, json),
    }
}
