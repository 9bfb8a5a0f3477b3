#!/bin/sh
# The whole of Millreeve in a minute: builds it, lays out the demo works in a temporary folder, starts the daemon there, edits
# the model in every way a planner does, and shows the note that each edit gets.
set -eu
cd "$(dirname "$0")/.."
sh config/prerequisites.sh
PATH=${CARGO_HOME:-$HOME/.cargo}/bin:$PATH
cargo build --release --locked
millreeve=${CARGO_TARGET_DIR:-target}/release/millreeve

place=$(mktemp -d "${TMPDIR:-/tmp}/tileworks.XXXXXX")
works=$place/works
model=$works/tileworks.model.toml
plan=$works/tileworks.plan.toml
note=$works/tileworks.note.md
replans=$place/replans.jsonl
log=$place/daemon.log
"$millreeve" demo "$works"

daemon=
cleanup() {
    [ -z "$daemon" ] || kill "$daemon" 2>/dev/null || :
}
trap cleanup EXIT
trap 'exit 130' INT TERM

"$millreeve" --json keep "$works" >"$replans" 2>"$log" &
daemon=$!

# The seal that the plan carries, and that of the plan which the note speaks of.
plan_seal() { sed -n 's/^seal *= *"\(.*\)"/\1/p' "$plan" 2>/dev/null || :; }
note_seal() { sed -n '1s/.*Plan: \([0-9a-f]*\).*/\1/p' "$note" 2>/dev/null || :; }
note_sum() { cksum <"$note" 2>/dev/null || echo none; }

# Waits until there is another note than the one whose sum is $1, and the plan it speaks of; for half a minute at most.
wait_for_other_than() {
    looks=0
    while [ "$(note_sum)" = "$1" ] || [ "$(note_seal)" != "$(plan_seal)" ]; do
        if ! kill -0 "$daemon" 2>/dev/null; then
            echo "The daemon has stopped; its last words:" >&2
            tail -n 5 "$log" >&2
            exit 1
        fi
        looks=$((looks + 1))
        if [ "$looks" -gt 600 ]; then
            echo "No note after half a minute; the daemon's log is $log" >&2
            exit 1
        fi
        sleep 0.05
    done
}

show_note() { sed 's/^/    /' "$note"; }

# edit HOW WHAT SCRIPT: edits the model by an awk program, in place or beside and renamed, and shows the note.
edit() {
    printf '\n---- %s (%s)\n\n' "$2" "$1"
    before=$(note_sum)
    awk "$3" "$model" >"$place/edited"
    case $1 in
        "in place") cat "$place/edited" >"$model" ;;
        "renamed") cp "$place/edited" "$works/.tileworks.new" && mv "$works/.tileworks.new" "$model" ;;
    esac
    wait_for_other_than "$before"
    show_note
}

# append WHAT TEXT: adds a table to the end of the model.
append() {
    printf '\n---- %s (appended)\n\n' "$1"
    before=$(note_sum)
    printf '%s\n' "$2" >>"$model"
    wait_for_other_than "$before"
    show_note
}

# within TABLE: the start of an awk program whose rule acts on one table only.
within() { printf '/^\\[/ { here = ($0 == "[%s]") } ' "$1"; }

wait_for_other_than none
printf '\n---- The first plan\n\n'
show_note

edit "in place" "Price: floor tile sells at 22.4" \
    "$(within activities.floor_tile) here && /^price/ { \$0 = \"price    = 22.4\" } 1"
edit "renamed" "Capacity: the kiln loses a day" \
    "$(within resources.kiln) here && /^capacity/ { \$0 = \"capacity = 154          # one day less: the burner\" } 1"
append "New activity that pays" '
[activities.facade_panel]
label    = "Facade panel 30x60"
unit     = "m2"
price    = 39.0
cost     = 11.2
uses     = { kiln = 0.030, press = 0.016, dryer = 0.022, packing = 0.011 }
at_most  = 650
tags     = ["plain"]'
append "New activity that does not pay" '
[activities.garden_edging]
label    = "Garden edging"
unit     = "m2"
price    = 12.5
cost     = 3.6
uses     = { kiln = 0.018, press = 0.012, dryer = 0.021, packing = 0.006 }
tags     = ["plain"]'
append "New constraint: pallets run short" '
[limits.pallets]
label    = "Euro pallets in the yard"
terms    = { floor_tile = 0.021, terracotta = 0.019, wall_tile = 0.017, facade_panel = 0.026, stair_tread = 0.031 }
at_most  = 110'
edit "renamed" "Withdrawn activity: no border tile any more" \
    "$(within activities.border_tile) !here"
edit "in place" "Recipe: the new cycle fires mosaic in less time" \
    "$(within activities.mosaic) here { sub(/kiln = 0.030/, \"kiln = 0.026\") } 1"
edit "renamed" "Wording: another title" \
    '/^title/ { $0 = "title    = \"Tileworks, weeks 3 and 4\"" } 1'
edit "in place" "A mistake: a resource that does not exist" \
    "$(within activities.wall_tile) here { sub(/kiln = /, \"kilm = \") } 1"
edit "in place" "The mistake mended" \
    "$(within activities.wall_tile) here { sub(/kilm = /, \"kiln = \") } 1"

printf '\n---- The plan as it stands now\n\n'
"$millreeve" show "$model"
printf '\n---- Should we make the terrace slab?\n\n'
"$millreeve" show "$model" --why terrace_slab

kill -TERM "$daemon"
wait "$daemon" && ended=0 || ended=$?
daemon=
if [ "$ended" -ne 0 ]; then
    echo "The daemon ended with status $ended; its log is $log" >&2
    exit 1
fi
cat <<END

The daemon has ended. What is left to look at:
  $works   models, plans and notes
  $replans   every replan: kind of edit, start expected and taken, pivots, times
  $log   the daemon's log
END
