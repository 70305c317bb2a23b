#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Runs golden cases: command lines with all that they print and their exit status.
#
#   OHMEN=path/to/ohmen tests/tools/golden.sh [--accept] [CASE...]
#
# Without a CASE all of tests/golden/cli are run. --accept rewrites the cases with what the tool does now; read the difference before
# it is committed. A case is a text file, each of whose lines says by its beginning
# what it is:
#
#   # TEXT       what the case shows
#   @ NAME=VALUE a variable of the environment for the commands behind it; without
#                VALUE (@ NAME) it is unset
#   + NAME       a file in the folder, replaced; the lines behind it are its text:
#   | TEXT
#   $ COMMAND    run by sh in the folder, with nothing on standard input
#   > TEXT       what it must print on standard output
#   ! TEXT       what it must print on standard error
#   \ WHERE      the output on WHERE (stdout, stderr) does not end in a newline
#   = STATUS     its exit status
#
# Each case has a new empty folder; `samples` in it leads to the samples and `docs` to
# the docs of the source. The environment is empty except for PATH (with ohmen first),
# HOME, the clock of 2026-12-01T08:00:00Z, an author, LC_ALL=C.UTF-8, and what steers
# the sanitizers.
set -u

accept=no
if [ "${1-}" = --accept ]; then
    accept=yes
    shift
fi
if [ ! -x "${OHMEN-}" ]; then
    echo "usage: OHMEN=path/to/ohmen tests/tools/golden.sh [--accept] [CASE...]" >&2
    exit 2
fi

source=$(cd "$(dirname "$0")/../.." && pwd -P) || exit 1
[ $# -gt 0 ] || set -- "$source"/tests/golden/cli/*.case
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM
mkdir "$work/bin" || exit 1
ln -s "$(cd "$(dirname "$OHMEN")" && pwd -P)/$(basename "$OHMEN")" "$work/bin/ohmen" || exit 1
passed=0 failed=0

# run COMMAND: in the folder of the case, with the settings in "$work/settings".
run()
(
    cd "$work/folder" || exit 99
    set -- "$1" PATH="$work/bin:$PATH" HOME="$work/folder" OHMEN_CLOCK=2026-12-01T08:00:00Z \
        OHMEN_AUTHOR='A. Lindqvist' LC_ALL=C.UTF-8
    for name in ASAN_OPTIONS UBSAN_OPTIONS LSAN_OPTIONS MALLOC_PERTURB_; do
        eval "value=\${$name-}"
        [ -z "$value" ] || set -- "$@" "$name=$value"
    done
    command=$1
    shift
    while IFS= read -r setting; do
        case $setting in
        *=*) set -- "$@" "$setting" ;;
        *) command="unset $setting; $command" ;;
        esac
    done <"$work/settings"
    exec env -i "$@" sh -c "$command" </dev/null >"$work/stdout" 2>"$work/stderr"
)

# show MARK NAME: what was printed, each line behind its mark.
show()
{
    [ -s "$work/$2" ] || return 0
    awk -v mark="$1" '{ print ($0 == "" ? mark : mark " " $0) }' "$work/$2"
    [ -z "$(tail -c 1 "$work/$2")" ] || printf '%s\n' "\\ $2"
}

# replay CASE: prints the case as it should stand.
replay()
{
    file=
    : >"$work/settings"
    # The shell reads byte by byte: it need not see what was printed before.
    sed '/^[>!=\\]/d' "$1" >"$work/steps"
    while IFS= read -r line; do
        printf '%s\n' "$line"
        case $line in
        '$ '*)
            run "${line#??}"
            status=$?
            show '>' stdout
            show '!' stderr
            printf '= %d\n' "$status"
            ;;
        '@ '*) printf '%s\n' "${line#??}" >>"$work/settings" ;;
        '+ '*)
            file=$work/folder/${line#??}
            : >"$file"
            ;;
        '|') echo >>"$file" ;;
        '| '*) printf '%s\n' "${line#??}" >>"$file" ;;
        '' | '#'*) ;;
        *) echo "what is this line?" ;;
        esac
    done <"$work/steps"
}

# fail CASE WHY
fail()
{
    failed=$((failed + 1))
    printf '%s: %s\n' "${1#"$source"/}" "$2"
}

check()
{
    rm -rf "$work/folder"
    mkdir "$work/folder" && ln -s "$source/samples" "$source/docs" "$work/folder" || exit 1
    if ! grep -q '^\$ ' "$1"; then
        fail "$1" 'runs nothing'
        return
    fi
    replay "$1" >"$work/actual"
    if cmp -s "$1" "$work/actual"; then
        passed=$((passed + 1))
    elif [ $accept = yes ] && cat "$work/actual" >"$1"; then
        passed=$((passed + 1))
        printf '%s: rewritten\n' "${1#"$source"/}"
    else
        fail "$1" 'differs: - is wanted, + is what came'
        diff -U 3 "$1" "$work/actual" | tail -n +3
    fi
}

# One case in OHMEN_FEW is run where that is set: by builds whose outputs are known to be those of
# another one, and under sanitizers, where the ways are searched for wrong memory.
turn=0
for name in "$@"; do
    turn=$((turn + 1))
    [ $((turn % ${OHMEN_FEW:-1})) -eq 0 ] || continue
    check "$name"
done
echo "Checks: $((passed + failed)), Failures: $failed, Errors: 0"
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
