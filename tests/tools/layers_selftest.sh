#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Sees each rule of layers.sh fire: builds a small right tree, then one wrong tree
# a case, and compares the whole output.
#
#   layers_selftest.sh LAYERS_SH COMPILER...
set -eu

layers=$(realpath "$1")
shift
tree=$(mktemp -d)
trap 'rm -rf "$tree"' EXIT
cases=0 wrong=0 compiler=
spdx='/* SPDX-License-Identifier: GPL-3.0-or-later */'

# put FILE LINE...: a source file with its opening, then the lines.
put()
{
    to=$1
    shift
    mkdir -p "$(dirname "$to")"
    printf '%s\n' "$spdx" '/* A file. */' "$@" >"$to"
}

right_tree()
{
    rm -rf "$tree/t"
    mkdir -p "$tree/t" && cd "$tree/t"
    for file in include/ohmen/error.h include/ohmen/work.h src/base/a.h src/math/m.h src/graph/g.h \
        src/quantity/q.h src/report/r.h src/cli/c.h src/store/s.h src/decide/d.h src/plan/p.h; do
        put "$file" 'struct nothing;'
    done
    file=src/base/utf8.c && put $file '#include <utf8proc.h>' '#include "base/a.h"' '#include "ohmen/error.h"'
    file=src/doc/yaml_read.c && put $file '#include <yaml.h>' '#include "quantity/q.h"'
    file=src/math/gsl_beta.c && put $file '#include <gsl/gsl_cdf.h>' '#include "math/m.h"'
    file=src/store/open.c && put $file '#include <sqlite3.h>' '# include <sodium.h>'
    file=src/plan/solve.c && put $file '#include <glpk.h>' '#include "decide/d.h"'
    file=src/work/use.c && put $file '#include "store/s.h"' '#include "ohmen/work.h"' '/* a relay */'
    file=src/cli/main.c && put $file '#include <ohmen/work.h>' '#include "cli/c.h"'
    file=tests/t.c && put $file '#include <mpfr.h>'
    mkdir docs
    echo 'See `src/base/a.h`, src/math/, ./tests/t.c. `src/<layer>/x.c` and src/*/g.h; build/src/none.' \
        >docs/tree.md
    echo '# SPDX-License-Identifier: GPL-3.0-or-later' >meson.build
}

# sees EXPECTED: the output of layers.sh and its status must be right.
sees()
{
    cases=$((cases + 1))
    status=0
    got=$(sh "$layers" "$tree/t" $compiler 2>/dev/null) || status=$?
    case $1 in *'nothing wrong') good=0 ;; *) good=1 ;; esac
    if [ "$got" != "$1" ] || [ "$status" != $good ]; then
        wrong=$((wrong + 1))
        printf 'expected (status %s): %s\n     got (status %s): %s\n' "$good" "$1" "$status" "$got"
    fi
}

# wrong_include FILE INCLUDE MESSAGE
wrong_include()
{
    right_tree
    file=$1
    put "$file" "" "#include $2"
    sees "$file:4: $3"
}

right_tree
sees '19 source files, nothing wrong'
compiler=$*
sees '19 source files, nothing wrong'
compiler=

wrong_include src/base/x.c '"math/m.h"' 'base must not include math/m.h'
wrong_include src/math/x.c '"quantity/q.h"' 'math must not include quantity/q.h'
wrong_include src/quantity/x.c '"doc/n.h"' 'quantity must not include doc/n.h'
wrong_include src/doc/x.c '"model/n.h"' 'doc must not include model/n.h'
wrong_include src/model/x.c '"store/s.h"' 'model must not include store/s.h'
wrong_include src/store/x.c '"decide/d.h"' 'store must not include decide/d.h'
wrong_include src/graph/x.c '"quantity/q.h"' 'graph must not include quantity/q.h'
wrong_include src/graph/x.c '"eval/n.h"' 'graph must not include eval/n.h'
wrong_include src/eval/x.c '"model/n.h"' 'eval must not include model/n.h'
wrong_include src/figure/x.c '"decide/d.h"' 'figure must not include decide/d.h'
wrong_include src/decide/x.c '"store/s.h"' 'decide must not include store/s.h'
wrong_include src/decide/x.h '"plan/p.h"' 'decide must not include plan/p.h'
wrong_include src/report/x.c '"graph/g.h"' 'report must not include graph/g.h'
wrong_include src/report/x.c '"ohmen/work.h"' 'report must not include ohmen/work.h'
wrong_include src/cli/x.c '"base/a.h"' 'cli must not include base/a.h'
wrong_include src/work/x.c '"cli/c.h"' 'work must not include cli/c.h'
wrong_include include/ohmen/x.h '"base/a.h"' 'include must not include base/a.h'
wrong_include src/base/x.c '"a.h"' 'write "a.h" as "layer/file.h"'
wrong_include src/base/x.c '"../math/m.h"' 'write "../math/m.h" as "layer/file.h"'
wrong_include src/report/x.c '<ohmen/work.h>' 'report must not include ohmen/work.h'
wrong_include src/work/x.c '<sqlite3.h>' '<sqlite3.h> is not for this file'
wrong_include src/work/x.c '<sodium.h>' '<sodium.h> is not for this file'
wrong_include src/work/x.c '<sodium/core.h>' '<sodium/core.h> is not for this file'
wrong_include src/doc/yaml_write.c '<yaml.h>' '<yaml.h> is not for this file'
wrong_include src/math/beta.c '<gsl/gsl_cdf.h>' '<gsl/gsl_cdf.h> is not for this file'
wrong_include src/eval/gsl_x.c '<gsl/gsl_rng.h>' '<gsl/gsl_rng.h> is not for this file'
wrong_include src/decide/x.c '<glpk.h>' '<glpk.h> is not for this file'
wrong_include src/plan/zolve.c '<glpk.h>' '<glpk.h> is already in src/plan/solve.c'
wrong_include src/base/text.c '<utf8proc.h>' '<utf8proc.h> is not for this file'
wrong_include src/math/x.c '<mpfr.h>' '<mpfr.h> is not for this file'
wrong_include src/math/x.c '<Rmath.h>' '<Rmath.h> is not for this file'
wrong_include src/graph/x.c '<bdd.h>' '<bdd.h> is not for this file'

right_tree
mkdir src/util && file=src/util/x.h && put $file
sees 'src/util/x.h:1: the folder util has no row in the table of layers'

for layer in base math graph eval report; do
    right_tree
    file=src/$layer/x.c
    put $file '/* hazard */' '/* Relays */' '/* a scheme */' 'int BREAKER;' 'int outcome_1;'
    told="$file:%d: a word of the trade in a neutral layer: %s\n"
    # shellcheck disable=SC2059
    sees "$(printf "$told" 3 hazard 4 Relay 5 scheme 6 BREAKER 7 outcome)"
done

right_tree
file=src/report/x.c && put $file '/* color-scheme, a word of style sheets */'
sees '20 source files, nothing wrong'

right_tree
file=src/base/x.c && put $file "$(printf '\tint i;')"
sees 'src/base/x.c:3: a tab'
long=$(printf '/* %094d */' 0)
right_tree && file=src/base/x.c && put $file "$long"
sees '20 source files, nothing wrong'
right_tree && file=src/base/x.c && put $file "$long "
sees 'src/base/x.c:3: 101 columns, 100 is the most'
right_tree && file=src/base/x.c && put $file "$(printf '%s' "$long" | sed 's/00/0\xc2\xb5/')"
sees '20 source files, nothing wrong'

right_tree
{ echo; echo "$spdx"; } >src/base/x.c
sees 'src/base/x.c:1: the first line is not the SPDX line in a comment'
right_tree
{ echo "$spdx"; echo '#include <stdio.h>'; } >tests/x.c
sees 'tests/x.c:2: no comment that says what the file is'
right_tree
echo 'echo hello' >tests/x.sh
sees 'tests/x.sh:1: no SPDX line'

for document in docs/tree.md README.md DEVELOPERS.md; do
    right_tree
    printf 'See `%s`.\n' src/none.c tests/none/ docs/none.md include/ohmen/none.h ./schema/none.sql \
        'samples/*.yaml' >$document
    sees "$document:1: there is no src/none.c
$document:2: there is no tests/none/
$document:3: there is no docs/none.md
$document:4: there is no include/ohmen/none.h
$document:5: there is no schema/none.sql
$document:6: there is no samples/*.yaml"
done

compiler=$*
right_tree
file=src/base/x.h && put $file 'size_t length(void);'
sees 'src/base/x.h:1: does not compile alone'

rm -rf "$tree/t/src" "$tree/t/include" "$tree/t/tests" "$tree/t/docs"
compiler=
sees 'no source files here'

echo "$cases cases, $wrong wrong"
[ "$wrong" -eq 0 ]
