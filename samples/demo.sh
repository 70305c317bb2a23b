#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Builds ohmen, fills a register from the sample, and prints its report.
#
#   samples/demo.sh                 the register is thrown away afterwards
#   samples/demo.sh --keep FILE     it stays in FILE, which must be new
set -eu

sample=skerry # a folder of documents beside this script

usage()
{
    echo "usage: samples/demo.sh [--keep FILE]" >&2
    exit 2
}

keep=
case "$#:${1-}" in
0:) ;;
2:--keep) keep=$2 ;;
*) usage ;;
esac
case $keep in
'' | /*) ;;
*) keep=$PWD/$keep ;;
esac

cd "$(dirname "$0")/.."
.ci/prepare
mkdir -p build
echo "Building in build/demo ..." >&2
if ! { [ -f build/demo/build.ninja ] || meson setup build/demo --buildtype=release; } >build/demo.log 2>&1 ||
    ! ninja -C build/demo src/cli/ohmen >>build/demo.log 2>&1; then
    tail -n 20 build/demo.log >&2
    exit 1
fi
ohmen=build/demo/src/cli/ohmen

folder=$(mktemp -d)
trap 'rm -rf "$folder"' EXIT
trap 'exit 130' INT TERM
register=${keep:-$folder/$sample.ohmen}
"$ohmen" -r "$register" new >"$folder/new"
"$ohmen" -r "$register" import samples/$sample/*.yaml --why "The sample, as delivered" >"$folder/import"
tail -n 1 "$folder/import" # what was added stands above it
"$ohmen" -r "$register" report
[ -z "$keep" ] || echo "The register is in $keep." >&2
