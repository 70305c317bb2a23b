#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Builds ohmen and runs every test; the last line is "N passed, N failed".
#
#   tests/run.sh          with gcc
#   tests/run.sh --all    with gcc, with clang, and with clang and both sanitizers: address and
#                         undefined behaviour
#
# Counts single cases: the checks of a Check program, one for any other test.
# A failed build, a test that ran nothing and a suite without tests are failures.
set -u

suites='unit published golden docs fault fuzz house bytes'

all=no
case "$#:${1-}" in
0:) ;;
1:--all) all=yes ;;
*) echo "usage: tests/run.sh [--all]" >&2; exit 2 ;;
esac

cd "$(dirname "$0")/.." || exit 1
.ci/prepare || { echo "0 passed, 1 failed"; exit 1; }

# What a user's environment must not decide: language, forking of Check (a
# sanitizer then sees the whole program), a choice of cases, random fill of memory.
export LC_ALL=C.UTF-8 CK_FORK=no MALLOC_PERTURB_=165 PYTHONUNBUFFERED=1
export ASAN_OPTIONS=detect_leaks=1:halt_on_error=1:abort_on_error=1
export UBSAN_OPTIONS=halt_on_error=1:print_stacktrace=1
unset CK_RUN_SUITE CK_RUN_CASE CK_INCLUDE_TAGS CK_EXCLUDE_TAGS CK_XML_LOG_FILE_NAME OHMEN_REGISTER \
    OHMEN_CLOCK OHMEN_FEW CFLAGS LDFLAGS LSAN_OPTIONS
# Registers of tests stand in memory where there is room: SQLite waits for the disk at each entry,
# and nobody cuts the power of the machine (the tests of failures have a disk of their own making).
room_wanted=1048576 # KiB
room=$(df -Pk /dev/shm 2>/dev/null | awk 'NR == 2 { print $4 }')
if [ -z "${TMPDIR-}" ] && [ -w /dev/shm ] && [ "${room:-0}" -gt "$room_wanted" ]; then
    export TMPDIR=/dev/shm
fi
trap 'exit 130' INT

passed=0 failed=0 seen=' ' complaints=

complain()
{
    failed=$((failed + 1))
    complaints="$complaints
  $*"
}

# build NAME COMPILER [OPTION...]: sets up, or sets up again, and builds build/NAME.
build()
{
    dir=build/$1 cc=$2
    shift 2
    mkdir -p build
    echo "== $dir: building"
    again=
    [ -f "$dir/build.ninja" ] && again=--reconfigure
    if ! CC=$cc meson setup $again "$dir" "$@" >"$dir.log" 2>&1; then
        tail -n 40 "$dir.log"
        return 1
    fi
    # One moving line on a terminal; elsewhere only what went wrong.
    if [ -t 1 ]; then ninja -C "$dir"; else ninja --quiet -C "$dir"; fi
}

# Reads meson's testlog.json, one test a line; prints "passed failed", a line
# "suite NAME" for each suite that ran, and "! why" for each failure.
count_tests()
{
    awk '
    function field(name,    rest) { # the value of a plain string field
        if (!match($0, "\"" name "\": \"")) return ""
        rest = substr($0, RSTART + RLENGTH)
        return substr(rest, 1, index(rest, "\"") - 1)
    }
    {
        name = field("name"); suite = name
        sub(/ \/ .*/, "", suite); sub(/^[^:]*:/, "", suite)
        cut = index($0, "\", \"result\": \"")
        if (!cut) cut = index($0, ", \"result\": \"")
        out = substr($0, 1, cut)
        $0 = substr($0, cut)
        result = field("result")
        checks = bad = lines = 0
        while (match(out, /Checks: [0-9]+, Failures: [0-9]+, Errors: [0-9]+/)) {
            split(substr(out, RSTART, RLENGTH), n, /[^0-9]+/)
            out = substr(out, RSTART + RLENGTH)
            lines++; checks += n[2]; bad += n[3] + n[4]
            if (n[2] == 0) { bad++; why = "ran nothing" }
        }
        if (!lines) { checks = 1; bad = result != "OK" }
        if (result != "OK" && !bad) bad = 1
        good = checks - bad; if (good < 0) good = 0
        passed += good; failed += bad
        if (bad) print "! " name ": " (why ? why : bad " of " checks " failed (" result ")")
        why = ""
        if (result != "SKIP") print "suite " suite
    }
    END { print "count", passed + 0, failed + 0 }' "$1" | sort -u
}

# run NAME TIME: runs the tests of build/NAME and adds up.
run()
{
    dir=build/$1
    log=$dir/meson-logs/testlog.json
    echo "== $dir: testing"
    rm -f "$log"
    meson test -C "$dir" --no-rebuild --print-errorlogs --timeout-multiplier "$2" || :
    expected=$(meson test -C "$dir" --no-rebuild --list 2>/dev/null | grep -c .)
    if [ ! -f "$log" ] || [ "$(grep -c . "$log")" -ne "$expected" ]; then
        complain "$dir: not all of the $expected tests were run"
    fi
    [ -f "$log" ] || return
    while read -r word rest; do
        case $word in
        count) passed=$((passed + ${rest% *})) failed=$((failed + ${rest#* })) ;;
        suite) seen="$seen$rest " ;;
        !) complaints="$complaints
  $dir: $rest" ;;
        esac
    done <<EOT
$(count_tests "$log")
EOT
}

# job NAME COMPILER TIME [OPTION...]: builds, then tests, with TIME times the usual patience.
job()
{
    name=$1 compiler=$2 patience=$3
    shift 3
    if build "$name" "$compiler" "$@"; then
        run "$name" "$patience"
    else
        complain "build/$name: the build failed"
    fi
}

# compare NAME NAME: two builds print the same bytes.
compare()
{
    echo "== build/$1 and build/$2: the same bytes"
    result=$(OHMEN=build/$1/src/cli/ohmen OTHER=build/$2/src/cli/ohmen sh tests/tools/bytes.sh)
    printf '%s\n' "$result" | tail -n 40
    counts=$(printf '%s\n' "$result" | sed -n 's/^Checks: \([0-9]*\), Failures: \([0-9]*\),.*/\1 \2/p')
    if [ -z "$counts" ] || [ "${counts% *}" -eq 0 ]; then
        complain "build/$1 and build/$2: nothing was compared"
        return
    fi
    passed=$((passed + ${counts% *} - ${counts#* })) failed=$((failed + ${counts#* }))
    [ "${counts#* }" -eq 0 ] || complaints="$complaints
  build/$1 and build/$2: ${counts#* } outputs differ"
}

# Built with few optimizations: the compiler takes three quarters of the time, the tests no more.
sanitize='-Db_sanitize=address,undefined -Db_lundef=false -Dc_args=-fno-sanitize-recover=all'
sanitize="$sanitize -Doptimization=1"

job gcc gcc 1
if [ $all = yes ]; then
    export OHMEN_FEW=8 # one golden case in so many: gcc runs all, and clang prints the same
    job clang clang 1
    compare gcc clang
    export OHMEN_FEW=16
    # shellcheck disable=SC2086
    job sanitize clang 4 $sanitize
fi
for suite in $suites; do
    case $seen in
    *" $suite "*) ;;
    *) complain "no test of the suite '$suite' was run" ;;
    esac
done

[ -z "$complaints" ] || echo "Failed:$complaints"
echo "$passed passed, $failed failed"
[ "$failed" -eq 0 ]
