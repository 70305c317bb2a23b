#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# One register, one output: the bytes that ohmen prints do not depend on the locale, the
# time zone, the threads and kernels that compute it, the width of the machine's instructions, or the
# compiler that built it.
#
#   OHMEN=path/to/ohmen [OTHER=path/to/another/ohmen] tests/tools/bytes.sh
#
# A register of the sample network is made and each command of the list below is run in a
# plain environment; then again in each of the other environments, or by OTHER (the same
# source, built by another compiler) on that register and on one that OTHER made itself.
# Each output must be the first one, byte for byte. With OTHER only the two builds are compared:
# the other environments are for the run without. A locale that the machine lacks is a
# failure: .ci/prepare makes it.
set -u

if [ ! -x "${OHMEN-}" ] || { [ -n "${OTHER-}" ] && [ ! -x "$OTHER" ]; }; then
    echo "usage: OHMEN=path/to/ohmen [OTHER=path/to/another/ohmen] tests/tools/bytes.sh" >&2
    exit 2
fi

absolute()
{
    printf '%s/%s' "$(cd "$(dirname "$1")" && pwd -P)" "$(basename "$1")"
}

source=$(cd "$(dirname "$0")/../.." && pwd -P) || exit 1
ohmen=$(absolute "$OHMEN")
other=
[ -z "${OTHER-}" ] || other=$(absolute "$OTHER")
work=$(mktemp -d) || exit 1
trap 'rm -rf "$work"' EXIT
trap 'exit 130' INT TERM
checks=0 failed=0

# What is compared, one command line a line. Text is forced to ASCII or has a twin below:
# the locale's name decides between UTF-8 and ASCII where nothing else does.
commands='report --ascii --width 100 --samples 256
memo D-VH-DARK --json
memo D-VH-DARK --html
memo D-GU --csv --samples 256
hazards --ascii
hazards --csv --site VH --perspective company
supply --json
people --csv
protection --csv --site GU
grid D-GU --json
weigh D-TQ --csv --samples 256
sensitivity D-VH-DARK --json
damage --json
damage D-TQ --json
sensitivity D-VH-DARK --ascii --width 80
weigh D-GU --html --samples 256
show H-TQ-BUS --json
show VH-INC1 --ascii
list options --where site=VH --sort invest --csv
gaps --json
explain H-VH-BUS1.risk --json
explain H-TQ-BUS.risk --csv
explain H-VH-T2.risk[p95] --json
history --json
history H-VH-BUS1 --ascii
verify --json
export
export --observations
schema
help --markdown'
unicode='hazards --width 120
weigh D-GU --samples 256
explain H-GU-CABLE.risk'

# What is sampled, which threads and kernels have to give the same of. Options are put behind.
sampled='memo D-VH-DARK --json --seed 7
explain H-TQ-SHORE.damaging[p5] --json --samples 4096
explain H-VH-DUCT.risk[p50] --json'

complain()
{
    failed=$((failed + 1))
    echo "$*"
}

# plain TOOL ARGUMENT...: with nothing of the caller's environment that could matter but
# what steers the sanitizers.
plain()
{
    env -i PATH=/usr/bin:/bin HOME=/ OHMEN_CLOCK=2026-12-01T08:00:00Z LC_ALL=C.UTF-8 TZ=UTC0 \
        ASAN_OPTIONS="${ASAN_OPTIONS-}" UBSAN_OPTIONS="${UBSAN_OPTIONS-}" \
        LSAN_OPTIONS="${LSAN_OPTIONS-}" "$@"
}

# make FOLDER TOOL [NAME=VALUE...]: a register of the sample in a folder of its own.
make()
{
    mkdir "$work/$1" && cd "$work/$1" || exit 1
    made=$2
    shift 2
    plain env "$@" "$made" -r r.ohmen new >/dev/null &&
        plain env "$@" "$made" -r r.ohmen import "$source"/samples/skerry/*.yaml \
            "$source/samples/skerry/observations.csv" --why 'First survey' --by 'A. Lindqvist' \
            >import.out || complain "no register could be made by: $made $*"
    cd "$work" || exit 1
}

# run LIST FOLDER PREFIX TOOL [NAME=VALUE...]: runs a list of commands on the register of a
# folder; what each prints goes to $work/PREFIX.N.
run()
{
    list=$1 folder=$2 prefix=$3 tool=$4
    shift 4
    n=0
    cd "$work/$folder" || exit 1
    while IFS= read -r line; do
        n=$((n + 1))
        # shellcheck disable=SC2086
        plain env "$@" OHMEN_REGISTER=r.ohmen "$tool" $line >"$work/$prefix.$n" 2>&1 ||
            complain "failed ($prefix): ohmen $line"
        [ -s "$work/$prefix.$n" ] || complain "printed nothing ($prefix): ohmen $line"
    done <<EOT
$list
EOT
    cd "$work" || exit 1
}

# compare LIST FIRST SECOND WHAT
compare()
{
    n=0
    while IFS= read -r line; do
        n=$((n + 1)) checks=$((checks + 1))
        cmp -s "$work/$2.$n" "$work/$3.$n" && continue
        complain "$4: ohmen $line"
        diff "$work/$2.$n" "$work/$3.$n" | head -n 6
    done <<EOT
$1
EOT
}

# again WHAT FOLDER TOOL [NAME=VALUE...]: all commands once more, and their comparison.
again()
{
    what=$1
    shift
    place=$1 program=$2
    shift 2
    run "$commands" "$place" again "$program" "$@"
    compare "$commands" first again "$what"
}

make first "$ohmen"
run "$commands" first first "$ohmen"
run "$unicode" first unicode "$ohmen"

# The C library picks its functions by what the processor can do; here it can do little.
narrow=glibc.cpu.hwcaps=-AVX512F,-AVX512VL,-AVX512BW,-AVX512DQ,-AVX512CD,-AVX2,-AVX,-FMA
narrow=$narrow,-FMA4,-BMI1,-BMI2,-LZCNT,-MOVBE,-SSE4_2,-SSE4_1,-SSSE3,-ERMS

# with OPTION...: sampled commands with these options, and their comparison.
with()
{
    list=
    while IFS= read -r line; do
        list="$list$line $*
"
    done <<EOT
$sampled
EOT
    list=${list%?}
    run "$list" first again "$ohmen"
    compare "$list" sampled again 'with other threads or kernels'
}

# Does the processor have what these kernels need? The tool knows.
has()
{
    plain env OHMEN_REGISTER="$work/first/r.ohmen" "$ohmen" explain H-VH-DARK.damaging \
        --depth 1 --kernels "$1" >/dev/null 2>"$work/kernels"
}

by_threads_and_kernels()
{
    run "$sampled" first sampled "$ohmen"
    with --threads 1
    with --threads 2
    for kernels in plain wide widest; do
        if has "$kernels"; then
            with --threads 2 --kernels "$kernels"
        elif grep -q 'this processor' "$work/kernels"; then
            echo "Not compared: this processor has not what the kernels \"$kernels\" need."
        else
            complain "the kernels \"$kernels\" do not run: $(cat "$work/kernels")"
        fi
    done
}

in_locales()
{
    for locale in C de_DE.UTF-8 tr_TR.UTF-8; do
        name=$(printf '%s' "$locale" | sed 's/UTF-8/utf8/')
        locale -a | grep -qx "$name" || complain "this machine lacks the locale $locale"
        again "in the locale $locale" first "$ohmen" "LC_ALL=$locale" "LANG=$locale"
        case $locale in
        *UTF-8)
            run "$unicode" first again "$ohmen" "LC_ALL=$locale" "LANG=$locale"
            compare "$unicode" unicode again "in the locale $locale"
            ;;
        esac
    done
}

elsewhere()
{
    again 'in another time zone' first "$ohmen" TZ=Pacific/Kiritimati
    again 'with narrow instructions' first "$ohmen" "GLIBC_TUNABLES=$narrow"
    make turkish "$ohmen" LC_ALL=tr_TR.UTF-8 LANG=tr_TR.UTF-8 TZ=Pacific/Kiritimati \
        "GLIBC_TUNABLES=$narrow"
    again 'of a register that was made elsewhere' turkish "$ohmen"
}

by_other()
{
    again 'by the other compiler' first "$other"
    make other "$other"
    again 'of a register made by the other compiler' other "$ohmen"
    again 'by the other compiler, with narrow instructions' other "$other" "GLIBC_TUNABLES=$narrow"
    run "$unicode" first again "$other"
    compare "$unicode" unicode again 'by the other compiler'
    checks=$((checks + 1))
    cmp -s first/import.out other/import.out || complain 'by the other compiler: import'
}

if [ -n "$other" ]; then
    by_other
else
    by_threads_and_kernels
    in_locales
    elsewhere
fi
echo "Checks: $checks, Failures: $failed, Errors: 0"
[ "$failed" -eq 0 ]
