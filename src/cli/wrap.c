/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Greedy filling of lines. Owns nothing. Help is as wide on every terminal, so that it
 * reads the same in a manual, a pull request and a shell. */
#include "cli/wrap.h"

#include <string.h>

/* Ends a line and leaves the next one at its indent. */
static size_t break_line(FILE *to, const char *end, unsigned indent)
{
    fprintf(to, "%s%*s", end, (int)indent, "");
    return indent;
}

void wrap_text(FILE *to, const char *text, unsigned column, unsigned indent)
{
    size_t at = column, gap = 0; /* gap: the space that parts the next word from the last */
    while (*text) {
        size_t n = strcspn(text, " \n");
        if (at + gap + n > WRAP_WIDTH && at > indent) {
            at = break_line(to, "\n", indent);
            gap = 0;
        }
        fprintf(to, "%*s%.*s", (int)gap, "", (int)n, text);
        at += gap + n;
        text += n;
        gap = *text == ' ';
        if (*text == '\n')
            at = break_line(to, "\n\n", indent);
        text += *text != 0;
    }
    fputc('\n', to);
}
