#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Does a memo answer for itself? A reader who has nothing but the memo of a decision must find in
# it what is asked, what is recommended, how sure that is, what it costs, what it avoids per year
# and for whom, how often the bad ends occur, which input would turn it and where, what is not
# covered, and who must sign.
#
#   OHMEN=path/to/ohmen tests/tools/answers.sh
#
# For each decision of the sample there is a file tests/golden/memo/DECISION.answers of lines
#
#   QUESTION: ANSWER
#
# with the questions of the list below, each at least once. The answers were written down by a
# reader of the memo. Each must stand in its text, in UTF-8 at 60 and at 100 columns and in ASCII,
# whatever the lines are broken at.
set -u

questions='asked recommended sure costs avoids ends turns not-covered signs'

if [ ! -x "${OHMEN-}" ]; then
    echo "usage: OHMEN=path/to/ohmen tests/tools/answers.sh" >&2
    exit 2
fi

source=$(cd "$(dirname "$0")/../.." && pwd -P) || exit 1
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM
unset OHMEN_REGISTER
export OHMEN_CLOCK=2026-12-01T08:00:00Z OHMEN_AUTHOR='A. Lindqvist' LC_ALL=C.UTF-8
register=$work/sample.ohmen
checks=0 failed=0

complain()
{
    failed=$((failed + 1))
    printf '%s\n' "$*"
}

# The text as one line with single blanks.
flat()
{
    tr -s ' \n' '  ' <"$1"
}

# check NAME: every question is answered, and every answer is in "$work/text".
check()
{
    for question in $questions; do
        checks=$((checks + 1))
        grep -q "^$question: ." "$answers" || complain "$1: nothing answers \"$question\""
    done
    while IFS= read -r line; do
        case $line in '' | '#'*) continue ;; esac
        question=${line%%: *}
        checks=$((checks + 1))
        case " $questions " in
        *" $question "*) ;;
        *) complain "$1: \"$question\" is no question" ;;
        esac
        printf '%s' "${line#*: }" >"$work/answer"
        case $(flat "$work/text") in
        *"$(flat "$work/answer")"*) ;;
        *) complain "$1: the memo does not say \"${line#*: }\"" ;;
        esac
    done <"$answers"
}

"$OHMEN" -r "$register" new >/dev/null || exit 1
"$OHMEN" -r "$register" import "$source"/samples/skerry/*.yaml --why 'First survey' >/dev/null || exit 1
decisions=$("$OHMEN" -r "$register" list decisions --csv | sed -n 's/^\(D-[A-Z0-9-]*\),.*/\1/p')
[ -n "$decisions" ] || complain "the sample has no decisions"
for decision in $decisions; do
    answers=$source/tests/golden/memo/$decision.answers
    if [ ! -f "$answers" ]; then
        complain "$decision has no file of answers"
        continue
    fi
    for how in '--width 60' '--width 100' '--width 100 --ascii'; do
        # Few samples, which no answer is about, so that it does not take long.
        # shellcheck disable=SC2086
        "$OHMEN" -r "$register" memo "$decision" --samples 256 $how >"$work/text" || complain "$decision: no memo"
        check "$decision $how"
    done
done
echo "Checks: $checks, Failures: $failed, Errors: 0"
[ "$failed" -eq 0 ] && [ "$checks" -gt 0 ]
