//! One step of a live instance: from the program it holds to another, with a look at its basis there.

use super::change::change;
use super::instance::Instance;
use super::live::Refusal;
use super::look::Look;
use super::vertex::Vertex;
use super::{inherit, opened};
use crate::lp::{Difference, Program};

/// Turns what `instance` holds into `to`, and looks at its basis there; `vertex` is where it was.
pub(super) fn step(instance: &mut Instance, from: &Program, vertex: &Vertex, to: &Program) -> Result<Look, Refusal> {
    let difference = Difference::between(from, to);
    change(instance, from, to, &difference)?;
    opened::stay(instance, from, to, &difference)?;
    Look::near(instance, to, inherit::carried(from, vertex, to, &difference))
}
