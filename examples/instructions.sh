#!/usr/bin/env bash
# Instructions of one request or entry, by the difference of two run lengths under valgrind: repeatable to the digit.
# usage: examples/instructions.sh FOLDER [WHAT …]   (WHAT as in `measure -- steps`; the folder is written into)
set -eu
folder=$1
shift
[ $# -gt 0 ] || set -- /sign-in /week counts entry /review /lots
program=${CARGO_TARGET_DIR:-target}/release/examples/measure
count() {
    valgrind --tool=callgrind --callgrind-out-file=/dev/null "$program" steps "$folder" "$1" "$2" 2>&1 |
        awk '/Collected/ { print $NF }'
}
for what in "$@"; do
    few=$(count "$what" 5)
    many=$(count "$what" 25)
    awk -v what="$what" -v few="$few" -v many="$many" \
        'BEGIN { printf "%s: %.3f million instructions each\n", what, (many - few) / 20 / 1e6 }'
done
