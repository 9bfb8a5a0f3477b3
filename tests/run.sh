#!/bin/sh
# Runs all tests, in the release profile, so that the solver is built once. Installs what is missing first.
set -eu
cd "$(dirname "$0")/.."
sh config/prerequisites.sh git
# Where rustup puts Rust; after what the caller has, unless that is no Rust at all.
PATH=${CARGO_HOME:-$HOME/.cargo}/bin:$PATH
exec cargo test --release --locked "$@"
