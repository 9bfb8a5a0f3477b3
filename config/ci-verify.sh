#!/bin/sh
# Verifies all plans of a repository: a step for continuous integration, on a fresh clone, without state or network. Each plan is
# worked out from nothing but its model and must come out byte for byte as it was committed.
#
#   verify-plans:
#     script: sh config/ci-verify.sh works
#
# Arguments are folders, models or plans; without any it is the folder in which it is started. The environment variable MILLREEVE
# names the program where it is not in PATH. Standard output says what was found of each plan. The status is that of
# `millreeve verify`: 0 all as they should be, 1 not all, 2 the command line is wrong, 3 some could not be read or worked out.
set -eu
[ $# -gt 0 ] || set -- .
exec "${MILLREEVE:-millreeve}" --color never verify "$@"
