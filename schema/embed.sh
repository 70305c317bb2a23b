#!/bin/sh
# SPDX-License-Identifier: GPL-3.0-or-later
# Makes a C file of a text: embed.sh FILE FILE.c [NAME] defines `const char NAME[]`, with
# a zero byte behind the text (numbers, since C limits the length of a string literal).
set -eu
name=${3:-layout_sql}
{
    echo "/* Made from $(basename "$1") by schema/embed.sh. */"
    echo "extern const char $name[];"
    echo "const char $name[] = {"
    od -An -v -tu1 "$1" | sed -e 's/^ *//' -e 's/  */, /g' -e 's/$/,/'
    echo '0};'
} >"$2"
