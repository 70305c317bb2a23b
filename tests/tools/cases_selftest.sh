#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Proves that golden.sh and docs_blocks.sh see what is wrong: each case below must end
# as it is marked, good or bad. No ohmen is needed: the commands are those of the shell.
set -u

tools=$(cd "$(dirname "$0")" && pwd -P)
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM
OHMEN=$work/tool
export OHMEN
printf '#!/bin/sh\n' >"$OHMEN" && chmod +x "$OHMEN" || exit 1
passed=0 failed=0

# expect good|bad TOOL WHAT: the case is in $work/case
expect()
{
    if "$tools/$2" "$work/case" >"$work/said" 2>&1; then came=good; else came=bad; fi
    if [ $came = "$1" ] && grep -Eq '^[0-9]+ passed, [0-9]+ failed$' "$work/said"; then
        passed=$((passed + 1))
    else
        failed=$((failed + 1))
        echo "$2, $3: $1 is wanted, $came came"
        cat "$work/said"
    fi
}

# golden good|bad WHAT LINE...
golden()
{
    wanted=$1 what=$2
    shift 2
    printf '%s\n' "$@" >"$work/case"
    expect "$wanted" golden.sh "$what"
}

# block good|bad WHAT LINE...: the lines in a console block
block()
{
    wanted=$1 what=$2
    shift 2
    printf '%s\n' 'A text.' '```console' "$@" '```' >"$work/case"
    expect "$wanted" docs_blocks.sh "$what"
}

golden good 'all streams' '# what' '$ echo a; echo; echo b >&2; exit 3' '> a' '>' '! b' '= 3'
golden bad 'other output' '$ echo a' '> b' '= 0'
golden bad 'missing output' '$ echo a' '= 0'
golden bad 'more wanted' '$ echo a' '> a' '> b' '= 0'
golden bad 'the other stream' '$ echo a >&2' '> a' '= 0'
golden bad 'other status' '$ exit 1' '= 0'
golden bad 'no status' '$ echo a' '> a'
golden bad 'blank at the end' '$ echo "a "' '> a' '= 0'
golden good 'no last newline' '$ printf a' '> a' '\ stdout' '= 0'
golden bad 'no last newline, not told' '$ printf a' '> a' '= 0'
golden bad 'no command' '# nothing' '> a'
golden bad 'a slip in the form' '$ echo a' '> a' '= 0' 'echo b'
golden good 'a file' '+ in.txt' '| x' '|' '|  y' '$ cat in.txt' '> x' '>' '>  y' '= 0'
golden good 'settings' '@ A=1 2' '$ echo "$A $LC_ALL"' '> 1 2 C.UTF-8' '= 0' '@ LC_ALL=C' '@ A' \
    '$ echo "${A-none} $LC_ALL"' '> none C' '= 0'
golden good 'one folder a case' '$ ls' '> docs' '> samples' '= 0' '$ cat' '= 0'

printf '%s\n' '# kept' '$ echo a; exit 2' '> b' >"$work/case"
"$tools/golden.sh" --accept "$work/case" >/dev/null
expect good golden.sh 'what was accepted'
[ "$(cat "$work/case")" = '# kept
$ echo a; exit 2
> a
= 2' ] || { failed=$((failed + 1)); echo '--accept: the case is not as it should be'; }

block good 'output' '$ echo a; echo b >&2' a b '$ :' '$ echo c' c
block bad 'other output' '$ echo a' b
block bad 'unwanted output' '$ echo a'
block bad 'missing output' '$ :' a
block good 'any lines' '$ printf "1\n2\n3\n"' 1 ... 3
block good 'any lines, which are none' '$ echo 1' ... 1 ...
block good 'the last of two' '$ printf "1\n2\n2\n"' ... 2
block bad 'a line too much' '$ printf "1\n2\n3\n"' ... 2
block bad 'one line for two' '$ printf "1\n2\n"' 1 ... 1 2
block bad 'a failure' '$ false'
block bad 'a failure behind any lines' '$ echo a; false' ...
block good 'a status shown' '$ false' '$ echo $?' 1
block bad 'another status' '$ false' '$ echo $?' 0
block good 'one shell' '$ a=1; cd /' '$ echo $a $PWD' '1 /'
block good 'a long command' '$ echo a \' '  b' 'a b'
block bad 'no command first' 'a' '$ echo b' b
block bad 'the shell ends' '$ exit 0' '$ echo a' a
printf '%s\n' '```' '$ echo a' '```' >"$work/case"
expect bad docs_blocks.sh 'no console block'
printf '%s\n' '```console' '$ echo a' 'a' >"$work/case"
expect bad docs_blocks.sh 'no end'

echo "Checks: $((passed + failed)), Failures: $failed, Errors: 0"
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
