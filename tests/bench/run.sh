#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Prints how long things take, each the median of 11 runs beside a reference.
#
#   tests/bench/run.sh [BUILD]
#
# BUILD is a build folder, build/gcc where none is named. The comparison with NumPy wants the
# package python3-numpy, which nothing else needs; without it a line says so.
set -eu

source=$(cd "$(dirname "$0")/../.." && pwd -P)
build=${1:-$source/build/gcc}
ohmen=$build/src/cli/ohmen
work=$(mktemp -d)
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM

"$ohmen" -r "$work/skerry.ohmen" new >"$work/out"
"$ohmen" -r "$work/skerry.ohmen" import "$source"/samples/skerry/*.yaml \
    "$source/samples/skerry/observations.csv" --why 'First survey' --by 'A. Lindqvist' >"$work/out"
"$build/tests/bench/start" "$ohmen" "$build/tests/bench/empty" "$work/skerry.ohmen"
"$build/tests/bench/load" 10000
"$build/tests/bench/diagrams" 10000
"$build/tests/bench/averages" "$work/skerry.ohmen"
"$build/tests/bench/protection" 10000 "$work"
"$build/tests/bench/lanes" 1000000
"$build/tests/bench/aggregate" 16
"$build/tests/bench/tape" 1000 10240
python3 "$source/tests/bench/numpy_model.py" "$build/tests/bench/tape" 50 16384
"$build/tests/bench/draws"
"$build/tests/bench/rollback" 10000000
"$build/tests/bench/branching"
"$build/tests/bench/sampling" 200
"$build/tests/bench/sampling_diagrams" "$work/skerry.ohmen"
"$build/tests/bench/sampling_many" 5000
