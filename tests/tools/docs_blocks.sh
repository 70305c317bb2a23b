#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Runs the console blocks of documents and compares what they print.
#
#   OHMEN=path/to/ohmen tests/tools/docs_blocks.sh [DOCUMENT...]
#
# Without a DOCUMENT those of the source are taken: README.md, DEVELOPERS.md, and all
# *.md files in docs and samples. A block is fenced by ```console and ```. A line that begins with "$ " is a command
# for sh; the lines behind it, up to the next command or the end of the block, are what
# it prints on both streams. A line "..." stands for any number of lines. A command
# must end with status 0, unless the next command of the block is `echo $?`.
#
# A command whose line ends in a backslash goes on in the next one. The blocks of one
# document run one after the other in one new folder, which holds copies of `samples`
# and `docs`, in the environment of tests/tools/golden.sh.
set -u

if [ ! -x "${OHMEN-}" ]; then
    echo "usage: OHMEN=path/to/ohmen tests/tools/docs_blocks.sh [DOCUMENT...]" >&2
    exit 2
fi

source=$(cd "$(dirname "$0")/../.." && pwd -P) || exit 1
[ $# -gt 0 ] ||
    set -- "$source/README.md" "$source/DEVELOPERS.md" "$source"/docs/*.md "$source"/samples/*.md
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM
mkdir "$work/bin" || exit 1
ln -s "$(cd "$(dirname "$OHMEN")" && pwd -P)/$(basename "$OHMEN")" "$work/bin/ohmen" || exit 1
passed=0 failed=0

# split DOCUMENT: writes $work/N.command, N.expected, N.line (where the command stands)
# and N.any (where its status does not count); prints how many there are.
split()
{
    awk -v work="$work" '
    function put(name, text) { printf "%s", text > (work "/" n "." name); close(work "/" n "." name) }
    function finish() {
        if (open) { put("command", command); put("expected", expected); put("line", line "\n") }
        open = 0; expected = ""
    }
    /^```console[ \t]*$/ { inside = 1; next }
    /^```/ { if (inside) finish(); inside = 0; more = 0; next }
    !inside { next }
    more { command = command $0 "\n"; more = /\\$/; next }
    /^\$ / {
        if (open && $0 == "$ echo $?") put("any", "")
        finish(); n++; open = 1; line = NR; command = substr($0, 3) "\n"
        more = /\\$/; next
    }
    open { expected = expected $0 "\n"; next }
    { print FILENAME ":" NR ": a console block begins with a command" > "/dev/stderr"; bad = 1 }
    END { if (inside) { print FILENAME ": a block has no end" > "/dev/stderr"; bad = 1 }
          print n + 0; exit bad }' "$1"
}

# script COUNT: one shell runs all commands, so that what one sets the next one sees.
script()
{
    echo 'last=0'
    i=1
    while [ "$i" -le "$1" ]; do
        printf '(exit $last)\n{\n'
        cat "$work/$i.command"
        printf '} >"$WORK/%d.actual" 2>&1 </dev/null\nlast=$?\necho $last >"$WORK/%d.status"\n' \
            "$i" "$i"
        i=$((i + 1))
    done
}

# Compares two lists of lines, of which the first may hold "..." for any lines: finds
# for each piece between two "..." its first place behind the last one; the last piece
# must stand at the end.
same()
{
    awk '
    function piece_at(from, to, place,    k) {
        for (k = from; k <= to; k++)
            if (want[k] != got[place + k - from]) return 0
        return 1
    }
    FILENAME == ARGV[1] { want[++n] = $0; next }
    { got[++m] = $0 }
    END {
        place = 1; i = 1; free = 0
        while (i <= n) {
            if (want[i] == "...") { free = 1; i++; continue }
            j = i
            while (j < n && want[j + 1] != "...") j++
            size = j - i + 1
            if (!free) { if (place + size - 1 > m || !piece_at(i, j, place)) exit 1 }
            else if (j == n) {
                if (m - size + 1 < place || !piece_at(i, j, m - size + 1)) exit 1
                place = m - size + 1
            } else {
                while (place + size - 1 <= m && !piece_at(i, j, place)) place++
                if (place + size - 1 > m) exit 1
            }
            place += size; i = j + 1; free = 0
        }
        exit !(free || place == m + 1)
    }' "$1" "$2"
}

# fail DOCUMENT NUMBER WHY
fail()
{
    failed=$((failed + 1))
    printf '%s:%s: %s\n$ %s\n' "${1#"$source"/}" "$(cat "$work/$2.line")" "$3" \
        "$(cat "$work/$2.command")"
}

check()
{
    touch "$work/$2.actual" "$work/$2.status"
    status=$(cat "$work/$2.status")
    if ! same "$work/$2.expected" "$work/$2.actual"; then
        fail "$1" "$2" 'prints something else: - is wanted, + is what came'
        diff -U 3 "$work/$2.expected" "$work/$2.actual" | tail -n +3
    elif [ "$status" != 0 ] && [ ! -e "$work/$2.any" ]; then
        fail "$1" "$2" "ends with status ${status:-none}"
        tail -n 5 "$work/$2.actual"
    else
        passed=$((passed + 1))
    fi
}

run()
(
    cd "$work/folder" || exit 1
    set -- PATH="$work/bin:$PATH" HOME="$work/folder" OHMEN_CLOCK=2026-12-01T08:00:00Z \
        OHMEN_AUTHOR='A. Lindqvist' LC_ALL=C.UTF-8 WORK="$work"
    for name in ASAN_OPTIONS UBSAN_OPTIONS LSAN_OPTIONS MALLOC_PERTURB_; do
        eval "value=\${$name-}"
        [ -z "$value" ] || set -- "$@" "$name=$value"
    done
    exec env -i "$@" sh "$work/script"
)

for document in "$@"; do
    rm -rf "$work/folder" "$work"/[0-9]*
    mkdir "$work/folder" && cp -R "$source/samples" "$source/docs" "$work/folder" || exit 1
    if ! count=$(split "$document"); then
        failed=$((failed + 1))
        continue
    fi
    script "$count" >"$work/script"
    run
    i=1
    while [ "$i" -le "$count" ]; do
        check "$document" "$i"
        i=$((i + 1))
    done
done
[ $((passed + failed)) -gt 0 ] || echo 'no document has a console block'
echo "Checks: $((passed + failed)), Failures: $failed, Errors: 0"
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ] && [ "$passed" -gt 0 ]
