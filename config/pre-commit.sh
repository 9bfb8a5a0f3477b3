#!/bin/sh
# Refuses a commit with a plan that is not what its model gives.
#
# What is checked is what is about to be committed, not what lies in the folder: the models and plans that the commit touches are
# taken from git's index into a temporary folder and verified there. Copy this file to two places in the repository, the second
# of them for merges, and let both be executed:
#
#   cp pre-commit.sh .git/hooks/pre-commit
#   cp pre-commit.sh .git/hooks/pre-merge-commit
#   chmod +x .git/hooks/pre-commit .git/hooks/pre-merge-commit
#
# The environment variable MILLREEVE names the program where it is not in PATH. `git commit --no-verify` goes past the check.
set -eu
millreeve=${MILLREEVE:-millreeve}
if ! command -v "$millreeve" >/dev/null 2>&1; then
    echo "The plans of this commit cannot be verified: there is no program \`$millreeve\`." >&2
    echo "Install it or let MILLREEVE name it; \`git commit --no-verify\` goes without." >&2
    exit 1
fi

place=$(mktemp -d "${TMPDIR:-/tmp}/millreeve.XXXXXX")
trap 'rm -rf "$place"' EXIT
trap 'exit 130' INT TERM
mkdir "$place/commit"

# The first commit of all is compared with nothing.
against=$(git rev-parse --verify --quiet HEAD || git hash-object -t tree /dev/null)

# Names may hold anything but a zero byte, so the zero bytes that part them change places with line ends, and back.
swap() { tr '\n\000' '\000\n'; }
LC_ALL=C
export LC_ALL

# To whichever file of a model was touched belong the others, and the folder's own settings.
{
    git diff --cached --name-only --no-renames -z "$against" -- '*.model.toml' '*.plan.toml' '*.release.toml' | swap |
        sed -e 's/\.model\.toml$//' -e 's/\.plan\.toml$//' -e 's/\.release\.toml$//' |
        sed -n -e h -e 's/$/.model.toml/p' -e g -e 's/$/.plan.toml/p' -e g -e 's/$/.release.toml/p'
    echo .millreeve.toml
} | sort -u >"$place/touched"
git ls-files --cached -z -- '*.model.toml' '*.plan.toml' '*.release.toml' .millreeve.toml | swap | sort -u >"$place/there"
comm -12 "$place/touched" "$place/there" | swap | git checkout-index -z --stdin --prefix="$place/commit/"

[ -n "$(find "$place/commit" -name '*.model.toml' -o -name '*.plan.toml')" ] || exit 0
if ! (cd "$place/commit" && "$millreeve" verify .) >"$place/found" 2>&1; then
    cat "$place/found" >&2
    echo >&2
    echo "Nothing is committed. Mend what is said above, \`git add\` what was written, and commit again." >&2
    exit 1
fi
