#!/bin/sh
# Installs what building Millreeve needs and this machine lacks: a C++ compiler, make, cmake and libclang for the solver, and
# Rust. On Debian and Ubuntu by apt-get (with sudo, unless run as root); elsewhere it names what is missing. Where nothing is
# missing it says and does nothing. Arguments name further programs, each a package of the same name: `git`, for the tests.
set -eu
cd "$(dirname "$0")/.."
PATH=$PATH:${CARGO_HOME:-$HOME/.cargo}/bin

have() { command -v "$1" >/dev/null 2>&1; }

have_libclang() {
    [ -n "${LIBCLANG_PATH:-}" ] && return 0
    # The places where the build looks for it.
    for folder in /usr/lib /usr/lib64 /usr/local/lib /usr/local/lib64 /usr/lib/*-linux-gnu* /usr/lib/llvm*/lib /usr/lib64/llvm*/lib; do
        for file in "$folder"/libclang.so* "$folder"/libclang-[0-9]*.so*; do
            [ -e "$file" ] && return 0
        done
    done
    return 1
}

# The Rust that Cargo.toml asks for, and whether the one at hand is as new.
needed=$(sed -n 's/^rust-version *= *"\(.*\)"/\1/p' Cargo.toml)
have_rust() {
    have cargo && have rustc || return 1
    found=$(rustc --version 2>/dev/null | sed -n 's/^rustc \([0-9.]*\).*/\1/p')
    [ -n "$found" ] && [ "$(printf '%s\n%s\n' "$needed" "$found" | sort -V | head -n 1)" = "$needed" ]
}

packages=
missing=
need() { # need PACKAGE WORDS
    packages="$packages $1"
    missing="$missing
  - $2"
}
for program in "$@"; do
    have "$program" || need "$program" "$program"
done
have c++ || need g++ "a C++ compiler (c++)"
have make || need make "make"
have cmake || need cmake "cmake"
have_libclang || need libclang-dev "libclang, with its headers"
if ! have_rust; then
    rust=missing
    missing="$missing
  - Rust $needed or newer (cargo, rustc)"
    # For fetching it.
    have curl || packages="$packages curl"
    [ -e /etc/ssl/certs/ca-certificates.crt ] || packages="$packages ca-certificates"
else
    rust=there
fi
[ -n "$missing" ] || exit 0

if ! have apt-get; then
    echo "To build Millreeve this machine lacks:$missing" >&2
    echo "Install these and start again. Only on Debian and Ubuntu can this script do it by itself." >&2
    exit 1
fi

as_root() {
    if [ "$(id -u)" -eq 0 ]; then
        "$@"
    elif have sudo; then
        sudo "$@"
    else
        echo "To build Millreeve this machine lacks:$missing" >&2
        echo "Run this as root, or install sudo, to have it installed." >&2
        exit 1
    fi
}
apt() { as_root env DEBIAN_FRONTEND=noninteractive apt-get "$@"; }

updated=
update() {
    [ -n "$updated" ] || apt update -q
    updated=yes
}
if [ -n "$packages" ]; then
    echo "Installing:$packages"
    update
    # shellcheck disable=SC2086 # one word per package
    apt install -q -y --no-install-recommends $packages
fi

[ "$rust" = missing ] || exit 0
if ! have rustup; then
    echo "Installing Rust"
    update
    # Never at the cost of a package that is there: then the official installer puts Rust beside it, in the home folder.
    if [ -z "$(apt-cache search --names-only '^rustup$')" ] \
        || ! apt install -q -y --no-install-recommends --no-remove rustup; then
        installer=$(mktemp)
        curl --proto '=https' --tlsv1.2 -sSf https://sh.rustup.rs -o "$installer"
        sh "$installer" -y -q --profile minimal --no-modify-path
        rm -f "$installer"
    fi
    hash -r
fi
if ! have_rust; then
    rustup toolchain install stable --profile minimal --no-self-update
    rustup default >/dev/null 2>&1 || rustup default stable
fi
# What was installed stands in the home folder, which an older cargo of the system may hide.
PATH=${CARGO_HOME:-$HOME/.cargo}/bin:$PATH
hash -r
if ! have_rust; then
    echo "Rust $needed or newer is needed, and this is $(rustc --version 2>&1 | head -n 1)." >&2
    echo "\`rustup default stable\` may be all it takes." >&2
    exit 1
fi
