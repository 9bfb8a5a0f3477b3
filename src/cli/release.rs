//! `release`: pins the current plan as the one that the floor works to.

use std::path::Path;

use serde_json::json;

use super::demo::failed;
use super::exit::{Error, Outcome, text};
use super::models::{self, RELEASE};
use super::screen::Screen;
use super::show::object::{number, since_release};
use super::show::{Shown, since};
use crate::keep::pinned::Pinned;
use crate::model::escape::Plain;
use crate::plan::release::{self, Release};
use crate::store::{Durability, Written, atomic};

pub(super) fn run(screen: &mut Screen, model: &Path) -> Result<Outcome, Error> {
    let found = Shown::find(model)?;
    if !found.standing.is_current() {
        let help = found.standing.cure(&found);
        return Err(Error::faulty(format_args!("nothing is released: {}", found.standing.reason(&found)), help));
    }
    let path = models::with_ending(&models::stem(model), RELEASE);
    let before = Pinned::look(&path);
    let release = Release::of(&found.plan, &found.seal);
    let written = atomic::write(&path, release::write(&release).as_bytes(), release::is_ours, Durability::Synced);
    let written = written.map_err(|error| failed(&error))?;
    if screen.json() {
        let word = match written {
            Written::New => "new",
            Written::Replaced => "replaced",
            Written::Same => "same",
        };
        screen.object(&json!({
            "model": found.name,
            "path": text(&found.model_path),
            "release": text(&path),
            "written": word,
            "aim": number(found.plan.aim),
            "pins": found.seal,
            "since_release": before.map(|before| since_release(&before, &found.plan)),
        }));
        return Ok(Outcome::Good);
    }
    let path = Plain(&path.to_string_lossy()).to_string();
    match (written, before.as_ref().map(Pinned::release)) {
        (Written::Same, _) => screen.say(format_args!("{path}: this plan is released already")),
        (_, Some(Ok(before))) => {
            screen.say(format_args!("{path}: released; since the last release: {}", since::told(before, &found.plan)));
        }
        _ => screen.say(format_args!("{path}: released; {}", since::aim(&found.plan))),
    }
    Ok(Outcome::Good)
}
