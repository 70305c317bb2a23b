/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Filled paragraphs for help texts. */
#ifndef CLI_WRAP_H
#define CLI_WRAP_H

#include <stdio.h>

enum { WRAP_WIDTH = 80 };

/* Writes ASCII text in lines of at most WRAP_WIDTH columns, broken at spaces; a word
 * that is too long stands alone. `column` is where the first line goes on, `indent`
 * where the others begin. A newline in the text ends a line, and an empty line
 * follows. Ends with a newline. */
void wrap_text(FILE *to, const char *text, unsigned column, unsigned indent);

#endif
