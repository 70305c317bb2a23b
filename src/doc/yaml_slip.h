/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is wrong with a YAML text that cannot be parsed, in an engineer's words.
 *
 * The parser says where it gave up and why; the slip that led there is looked
 * for in the text itself. Used by the YAML reader only. */
#ifndef DOC_YAML_SLIP_H
#define DOC_YAML_SLIP_H

#include "doc/source.h"

/* Where and why a parser gave up. */
struct slip {
    const char *problem; /* the parser's own words, never NULL */
    struct spot at;      /* where it gave up */
    struct spot opened;  /* where the thing began that it was reading */
};

/* Adds the one diagnostic that explains the slip. */
void slip_report(struct arena *a, struct source *s, const struct slip *slip, struct diags *d);

/* Is `text` a word, a colon, and something right behind it: name:Relay? An
 * address (a colon and a slash) is none. */
bool slip_lacks_blank(const char *text);

/* The message for such a text. */
void slip_report_blank(struct arena *a, struct diags *d, struct place at, const char *text);

#endif
