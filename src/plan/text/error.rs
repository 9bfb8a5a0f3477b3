//! Why a text gives no plan.

/// Why a file gives no plan.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum PlanError {
    /// Its first line is not that of our plans.
    #[error("not a plan written by millreeve")]
    NotOurs,
    /// A later version wrote it.
    #[error("written by a newer millreeve: {what} {found}, this one knows up to {known}")]
    Newer {
        /// The version that is ahead: `format` or `rules`.
        what: &'static str,
        /// Its number in the file.
        found: u32,
        /// The highest number known.
        known: u32,
    },
    /// Its first line is ours, but what follows is no plan. One line, safe to show.
    #[error("not a whole plan: {0}")]
    Broken(String),
    /// It has been edited since it was written.
    #[error("edited since it was written: its seal does not fit")]
    Edited,
}
