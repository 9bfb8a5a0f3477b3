//! The real program against faults and bad input: partial writes, editors' habits, git, full disks, crashes, hostile files.

#![expect(clippy::unwrap_used, clippy::expect_used, clippy::panic, reason = "a test that cannot go on has failed")]

#[path = "faults/edits.rs"]
mod edits;
#[path = "faults/folders.rs"]
mod folders;
#[path = "faults/git.rs"]
mod git;
#[path = "faults/hostile.rs"]
mod hostile;
#[path = "faults/lab.rs"]
mod lab;
#[path = "faults/limits.rs"]
mod limits;
#[path = "faults/names.rs"]
mod names;
#[path = "faults/operating.rs"]
mod operating;
#[path = "faults/parts.rs"]
mod parts;
#[path = "faults/support.rs"]
mod support;
#[path = "faults/system.rs"]
mod system;
#[path = "faults/trouble.rs"]
mod trouble;
#[path = "faults/writes.rs"]
mod writes;
