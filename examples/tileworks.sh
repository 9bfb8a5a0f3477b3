#!/bin/sh
# The whole of Millreeve in a minute: builds it, lays out the demo works in a temporary folder, starts the daemon there, edits
# each team's part of the model in the ways that planners do, and shows what the note says of each edit.
set -eu
cd "$(dirname "$0")/.."
sh config/prerequisites.sh
PATH=${CARGO_HOME:-$HOME/.cargo}/bin:$PATH
cargo build --release --locked
millreeve=${CARGO_TARGET_DIR:-target}/release/millreeve

place=$(mktemp -d "${TMPDIR:-/tmp}/tileworks.XXXXXX")
works=$place/works
parts=$works/tileworks.model
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
note_sum() { cksum 2>/dev/null <"$note" || echo none; }

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

# What the note says of the edit itself, without how everything stands now, which is much the same in each.
show_essence() {
    awk '/^## / { left_out = /^## (What is scarce|Extra capacity|What is bought|What is not made)/ }
        /^A plan is advice/ { left_out = 1 }
        /^Worked out/ { left_out = 0 }
        NR > 3 && !left_out { print "    " $0 }' "$note"
}

# edit HOW PART WHAT SCRIPT: edits a part by an awk program, in place or beside and renamed, and shows the note.
edit() {
    printf '\n---- %s: %s (%s)\n\n' "$2" "$3" "$1"
    before=$(note_sum)
    awk "$4" "$parts/$2" >"$place/edited"
    if cmp -s "$place/edited" "$parts/$2"; then
        echo "The edit has changed nothing" >&2
        exit 1
    fi
    case $1 in
        "in place") cat "$place/edited" >"$parts/$2" ;;
        "renamed") cp "$place/edited" "$parts/.new" && mv "$parts/.new" "$parts/$2" ;;
    esac
    wait_for_other_than "$before"
    show_essence
}

wait_for_other_than none
printf '\n---- The first plan\n\n'
show_note

edit "in place" sales.toml "the first tier of floor tiles sells at 22.4" \
    '{ sub(/= 21\.5$/, "= 22.4") } 1'
edit "renamed" maintenance.toml "the kiln loses a day in the sixth week" \
    '/^capacity/ { sub(/"2027-W04" = 30 }/, "\"2027-W04\" = 30, \"2027-W06\" = 60 }") } 1'
edit "renamed" uses.csv "mosaic takes longer to pack" \
    '{ sub(/^mosaic,packing,0.045$/, "mosaic,packing,0.055") } 1'
edit "in place" draws.csv "a thinner floor tile needs less slip" \
    '{ sub(/^floor_tile,slip,0.020$/, "floor_tile,slip,0.0185") } 1'
edit "in place" works.toml "half of the yard is let: fewer floor tiles in store" \
    '{ sub(/at_most = 4000/, "at_most = 2000") } 1'

printf '\n---- panels.toml: a new part with a new activity (renamed)\n\n'
before=$(note_sum)
cat >"$parts/.new" <<'END'
# A product that the design office brings, in a part of its own.
[activities.facade_panel]
label    = "Facade panel 30x60"
unit     = "m2"
price    = 39.0
cost     = 11.2
uses     = { kiln = 0.030, press = 0.016, dryer = 0.022, packing = 0.011 }
draws    = { slip = 0.031 }
at_most  = 150
END
mv "$parts/.new" "$parts/panels.toml"
wait_for_other_than "$before"
show_essence

edit "in place" panels.toml "wording: another label" \
    '{ sub(/"Facade panel 30x60"/, "\"Facade panel 30x60, combed\"") } 1'

printf '\n---- panels.toml: the part is taken away again (removed)\n\n'
before=$(note_sum)
rm "$parts/panels.toml"
wait_for_other_than "$before"
show_essence

edit "renamed" works.toml "a week later: the first week is dropped, a ninth is planned, the stores are counted" \
    '/^periods/ { sub(/"2027-W01", /, ""); sub(/\]/, ", \"2027-W09\"]") }
    /^days/ { sub(/\[4, /, "["); sub(/\]/, ", 5]") }
    /^opening/ { sub(/= 18$/, "= 15.2"); sub(/= 900$/, "= 364"); sub(/= 600$/, "= 640"); sub(/= 1000/, "= 1280") } 1'
edit "in place" maintenance.toml "a mistake: a week that there is not" \
    '{ sub(/"2027-W07" = 12/, "\"2027-W70\" = 12") } 1'
edit "in place" maintenance.toml "the mistake mended" \
    '{ sub(/"2027-W70" = 12/, "\"2027-W07\" = 12") } 1'

printf '\n---- The plan as it stands now\n\n'
"$millreeve" show "$works/tileworks"
printf '\n---- Should we make the terrace slab?\n\n'
"$millreeve" show "$works/tileworks" --why terrace_slab
printf '\n---- And in the week in which it comes nearest?\n\n'
"$millreeve" show "$works/tileworks" --why terrace_slab.2027-W09

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
