#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Holds the table of the layers and the rules of the house that a script can see.
# Prints "file:line: what is wrong" for each slip; exit status 1 when there is one.
#
#   layers.sh [ROOT [COMPILER...]]     with a compiler, each header is compiled alone
set -eu

cd "${1:-.}"
[ $# -eq 0 ] || shift
export LC_ALL=C
found=$(mktemp -d)
trap 'rm -rf "$found"' EXIT

list()
{
    find "$@" -type f 2>/dev/null | sort
}

# Whoever includes "layer/file.h" must have that layer in its row. Each layer sees
# itself. Of the public headers (in quotes or angles), the lower layers see only
# ohmen/error.h.
table='
base
math      base
quantity  base math
doc       base math quantity
model     base math quantity doc
store     base math quantity doc model
evidence  base math quantity doc model
graph     base math
eval      base math graph
figure    base math quantity doc model evidence graph eval
decide    base math quantity doc model evidence graph eval figure
plan      base math quantity doc model evidence graph eval figure decide
report    base math
work      base math quantity doc model store evidence graph eval figure decide plan report ohmen
cli       ohmen
include   ohmen
'

# header   the only files that may include it (a pattern of awk)
libraries='
sqlite3.h   ^src/store/
sodium.h    ^src/store/
sodium/     ^src/store/
yaml.h      ^src/doc/yaml_read[.]c$
gsl/        ^src/math/gsl_[a-z0-9_]*[.]c$
glpk.h      ^src/plan/
utf8proc.h  ^src/base/utf8[.]c$
mpfr.h      ^tests/
Rmath.h     ^tests/
bdd.h       ^tests/
fdd.h       ^tests/
bvec.h      ^tests/
'

check_includes()
{
    list src include | grep '\.[ch]$' | xargs awk -v table="$table" -v libraries="$libraries" '
    function tell(what) { print FILENAME ":" FNR ": " what }
    BEGIN {
        n = split(table, row, "\n")
        for (i = 1; i <= n; i++) {
            m = split(row[i], word, " ")
            if (m) { known[word[1]] = 1; may[word[1], word[1]] = 1 }
            for (k = 2; k <= m; k++) may[word[1], word[k]] = 1
        }
        n = split(libraries, row, "\n")
        for (i = 1; i <= n; i++)
            if (split(row[i], word, " ") == 2) home[word[1]] = word[2]
    }
    FNR == 1 {
        split(FILENAME, part, "/")
        layer = part[1] == "include" ? "include" : part[2]
        if (!(layer in known)) tell("the folder " layer " has no row in the table of layers")
    }
    /^[ \t]*#[ \t]*include[ \t]*("|<ohmen\/)/ {
        split($0, piece, /["<>]/); split(piece[2], part, "/"); seen = part[1]
        if (piece[2] !~ /^[a-z0-9]+\/[a-z0-9_]+[.](h|inc)$/)
            tell("write \"" piece[2] "\" as \"layer/file.h\"")
        else if (piece[2] == "ohmen/error.h") next
        else if (!((layer, seen) in may)) tell(layer " must not include " piece[2])
    }
    /^[ \t]*#[ \t]*include[ \t]*</ {
        split($0, piece, /[<>]/)
        for (name in home) {
            hit = name ~ /\/$/ ? index(piece[2], name) == 1 : piece[2] == name
            if (hit && FILENAME !~ home[name]) tell("<" piece[2] "> is not for this file")
        }
        if (piece[2] == "glpk.h" && FILENAME ~ home["glpk.h"]) {
            if (solver == "") solver = FILENAME
            if (FILENAME != solver) tell("<glpk.h> is already in " solver)
        }
    }'
}

# Opening, length of lines, tabs, and words of the trade where they do not belong.
check_text()
{
    list src include tests | grep '\.[ch]$' | xargs awk '
    function tell(what) { print FILENAME ":" FNR ": " what }
    FNR == 1 && $0 != "/* SPDX-License-Identifier: GPL-3.0-or-later */" {
        tell("the first line is not the SPDX line in a comment")
    }
    FNR == 2 && !/^\/\*/ { tell("no comment that says what the file is") }
    FNR == 1 { neutral = FILENAME ~ /^src\/(base|math|graph|eval|report)\// }
    index($0, "\t") { tell("a tab") }
    { low = tolower($0); gsub(/color-scheme/, "color-styles", low) } # a word of style sheets
    neutral && match(low, /hazard|relay|scheme|breaker|outcome/) {
        tell("a word of the trade in a neutral layer: " substr($0, RSTART, RLENGTH))
    }
    length($0) > 100 {
        line = $0
        gsub(/[\200-\277]/, "", line) # the inner bytes of UTF-8
        if (length(line) > 100) tell(length(line) " columns, 100 is the most")
    }'
    { list src include tests samples schema .ci | grep -E '\.sh$|/meson\.build$|^\.ci/' || :
        [ ! -f meson.build ] || echo meson.build; } |
        xargs -r awk '
    function close_last() { if (last != "" && !spdx) print last ":1: no SPDX line" }
    FNR == 1 { close_last(); last = FILENAME; spdx = 0 }
    FNR <= 2 && $0 == "# SPDX-License-Identifier: GPL-3.0-or-later" { spdx = 1 }
    END { close_last() }'
}

# Paths that the documents name. A name is cut before <, { and the like, back to its
# folder; a pattern must match something.
check_documents()
{
    { list docs | grep '\.md$' || :; ls README.md DEVELOPERS.md 2>/dev/null || :; } | xargs -r awk '
    {
        line = " " $0
        while (match(line, /[^A-Za-z0-9_.\/*-](\.\/)?(src|tests|docs|include|schema|samples)\/[A-Za-z0-9_.\/*-]*/)) {
            path = substr(line, RSTART + 1, RLENGTH - 1)
            line = substr(line, RSTART + RLENGTH)
            sub(/^\.\//, "", path)
            if (line ~ /^[<{$\[]/) sub(/[^\/]*$/, "", path)
            sub(/[.-]+$/, "", path)
            print FILENAME ":" FNR ":" path
        }
    }' | while IFS=: read -r file line path; do
        # shellcheck disable=SC2086
        set -- $path
        [ -e "$1" ] || echo "$file:$line: there is no $path"
    done
}

check_headers()
{
    list src include | grep '\.h$' | while read -r header; do
        name=${header#src/}
        name=${name#include/}
        if ! printf '#include "%s"\n' "$name" | "$@" -std=c17 -D_XOPEN_SOURCE=700 \
            -D_DEFAULT_SOURCE -Wall -Wextra -Werror -fsyntax-only -Iinclude -Isrc -x c - \
            >"$found/compiler" 2>&1; then
            echo "$header:1: does not compile alone"
            cat "$found/compiler" >&2
        fi
    done
}

{
    check_includes
    check_text
    check_documents
    [ $# -eq 0 ] || check_headers "$@"
} >"$found/all"
cat "$found/all"
files=$(list src include tests | grep -c '\.[ch]$' || :)
[ "$files" -gt 0 ] || { echo "no source files here" && exit 1; }
[ ! -s "$found/all" ] || exit 1
echo "$files source files, nothing wrong"
