//! `convert`: an MPS file into a model, or a model into an MPS file.

use std::path::Path;

use super::check::unreadable;
use super::demo::failed;
use super::exit::{Error, Outcome, shown, text};
use super::models::{FOLDER, MODEL, names_model};
use super::screen::{Screen, WARN};
use crate::lp::mps::{self, Warnings};
use crate::model::escape::Plain;
use crate::model::read::{self, Writing};
use crate::model::{Faults, Model, write};
use crate::store::{Durability, atomic};

/// What a file holds, by the ending of its name.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Kind {
    Mps,
    Model,
}

impl Kind {
    fn of(path: &Path) -> Result<Self, Error> {
        let is_mps = path.extension().is_some_and(|ending| ending.eq_ignore_ascii_case("mps"));
        match (is_mps, names_model(path)) {
            (true, _) => Ok(Self::Mps),
            (false, true) => Ok(Self::Model),
            (false, false) => {
                let help = format!("its name must end in .mps, {MODEL} or {FOLDER}");
                Err(Error::usage(format_args!("cannot tell what {} is", shown(path)), help))
            }
        }
    }
}

pub(super) fn run(screen: &mut Screen, from: &Path, to: &Path, force: bool) -> Result<Outcome, Error> {
    let (source, target) = (Kind::of(from)?, Kind::of(to)?);
    if source == target {
        let help = format!("give one name that ends in .mps and one that ends in {MODEL}");
        return Err(Error::usage("there is nothing to convert: both files are of the same kind", help));
    }
    if !force && std::fs::symlink_metadata(to).is_ok() {
        return Err(Error::usage(format_args!("{} is there already", shown(to)), "--force replaces it"));
    }
    if to.file_name().is_some_and(read::is_folder_name) {
        let help = format!("give a name that ends in {MODEL}; whoever divides a model into parts decides which");
        return Err(Error::usage(format_args!("{} would be a folder of parts", shown(to)), help));
    }
    let (content, told) = match source {
        Kind::Mps => from_mps(screen, from, &read::file(from).map_err(|problem| unreadable(&problem))?)?,
        Kind::Model => match to_mps(screen, from, &read::writing(from).map_err(|problem| unreadable(&problem))?)? {
            Some(converted) => converted,
            None => return Ok(Outcome::Amiss),
        },
    };
    // What may be replaced was settled above; a file made in the meantime is safe all the same unless --force was given.
    let ours: fn(&[u8]) -> bool = if force { |_| true } else { |_| false };
    atomic::write(to, content.as_bytes(), ours, Durability::Synced).map_err(|error| failed(&error))?;
    if screen.json() {
        screen.object(&serde_json::json!({
            "from": text(from), "to": text(to), "activities": told.activities, "limits": told.limits, "materials": told.materials,
            "resources": told.resources,
        }));
    } else {
        screen.say(format_args!("wrote {}: {}", Plain(&to.to_string_lossy()), told.words()));
    }
    Ok(Outcome::Good)
}

/// How large the converted model is.
struct Told {
    activities: usize,
    resources: usize,
    materials: usize,
    limits: usize,
}

impl Told {
    fn of(model: &Model) -> Self {
        Self {
            activities: model.activities.len(),
            resources: model.resources.len(),
            materials: model.materials.len(),
            limits: model.limits.len(),
        }
    }

    fn words(&self) -> String {
        use super::check::counted;
        let activities =
            if self.activities == 1 { "1 activity".to_owned() } else { format!("{} activities", self.activities) };
        let mut words = vec![activities];
        // What comes from MPS has neither, so they are told only where there are some.
        let others = [(self.resources, "resource"), (self.materials, "material")];
        words.extend(others.into_iter().filter(|(number, _)| *number > 0).map(|(number, what)| counted(number, what)));
        words.push(counted(self.limits, "limit"));
        words.join(", ")
    }
}

fn from_mps(screen: &mut Screen, path: &Path, bytes: &[u8]) -> Result<(String, Told), Error> {
    let shown = Plain(&path.to_string_lossy()).to_string();
    let text = std::str::from_utf8(bytes).map_err(|error| {
        let line = 1 + bytes[..error.valid_up_to()].iter().filter(|&&byte| byte == b'\n').count();
        Error::faulty(format_args!("{shown}:{line}: this is not UTF-8 text"), "")
    })?;
    let reading = mps::read(text)
        .map_err(|error| Error::faulty(format_args!("{shown}:{}: {}", error.line, error.message), error.help))?;
    let Warnings { reported, more } = &reading.warnings;
    for warning in reported {
        screen.aside(format_args!("{shown}:{}: {WARN}warning:{WARN:#} {}", warning.line, warning.message));
    }
    if *more > 0 {
        screen.aside(format_args!("and {}", super::check::counted(*more, "more warning")));
    }
    Ok((write::model(&reading.model), Told::of(&reading.model)))
}

/// `None` where the model is faulty; its faults are told.
fn to_mps(screen: &mut Screen, path: &Path, writing: &Writing) -> Result<Option<(String, Told)>, Error> {
    let model = match writing.read(path) {
        Ok(reading) => reading.model,
        Err(faults) => {
            tell(screen, &faults);
            return Ok(None);
        }
    };
    let text = mps::write(&model).map_err(|error| Error::faulty(error, ""))?;
    Ok(Some((text, Told::of(&model))))
}

fn tell(screen: &mut Screen, faults: &Faults) {
    screen.aside(faults.terminal(true).to_string().trim_end_matches('\n'));
}
