/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Diagnostics: what is wrong in documents, each with its place.
 *
 * All errors of all files are collected in one list and reported together,
 * sorted by file (in order of reading), line and column. */
#ifndef BASE_DIAG_H
#define BASE_DIAG_H

#include <stdbool.h>

#include "base/array.h"

/* Where something stands. line and column count from 1 (columns count
 * characters, not bytes); line 0 means that the place is an object of the
 * register (then `file` is "register" and `path` says where in the object). */
struct place {
    const char *file;
    uint32_t line, column;
    const char *path; /* "parts/P-1/size/width", or NULL */
    bool whole;       /* of a text over several lines: a part of it has this place too */
};

struct diag {
    struct place place;
    const char *text; /* one sentence without a final full stop */
    uint32_t order;   /* of `file` among the files read */
};

/* Diagnostics beyond this number are counted, not kept. */
#define DIAG_KEPT 200

struct diags {
    struct arena *arena;
    ARRAY(struct diag) list;
    ARRAY(const char *) files; /* in order of reading */
    size_t count; /* of all, kept or not */
};

void diags_init(struct diags *d, struct arena *a);

/* Tells that `file` (borrowed) is read now: its place in the order of files is
 * after those told before. A file that is not told takes its place with its
 * first diagnostic. */
void diags_file(struct diags *d, const char *file);

/* Adds one. `at.file` NULL means "register"; what `at` points to is borrowed. A
 * second one with the same place and text as a kept one is dropped. */
void diag_add(struct diags *d, struct place at, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* Sorts by file, line, column; stable. */
void diags_sort(struct diags *d);

/* "file:line:column: text", or "path: text" for a place in the register. */
const char *diag_line(struct arena *a, const struct diag *d);

#endif
