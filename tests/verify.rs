//! `verify` through the real program: each finding, everything that the tests and examples plan, a repository with its history,
//! and the hook, recipe and attributes for git.

#![expect(clippy::disallowed_methods, reason = "tests lay out files as other programs would")]
#![expect(clippy::unwrap_used, clippy::panic, reason = "helpers of tests fail the test")]

#[path = "verify/examples.rs"]
mod examples;
#[path = "verify/findings.rs"]
mod findings;
#[path = "verify/git.rs"]
mod git;
#[path = "verify/history.rs"]
mod history;
#[path = "support/rng.rs"]
mod rng;
#[path = "verify/support.rs"]
mod support;
