/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Texts of a report made fit for its writers. */
#ifndef REPORT_CLEAN_H
#define REPORT_CLEAN_H

#include <stdbool.h>

#include "base/arena.h"

/* s with every byte that is not valid UTF-8 replaced by U+FFFD; "" for NULL. The
 * result is s itself when nothing was wrong. */
const char *clean_valid(struct arena *a, const char *s);

/* The same, then harmless to print (utf8_clean). */
const char *clean_text(struct arena *a, const char *s, bool ascii);

#endif
