/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Deterministic mutations of seed inputs.
 *
 * The same seeds, words and number give the same bytes on any machine. A mutation
 * makes one to six steps: it flips, removes, repeats or overwrites bytes, removes
 * or indents a line, puts a word of the dictionary somewhere, cuts the end off, or
 * splices two seeds. Every other mutation keeps the form: it only changes words for
 * words of the same text and digits for digits, or removes lines, so that much of it is
 * still taken by what stands behind the reader. */
#ifndef TESTS_MUTATE_H
#define TESTS_MUTATE_H

#include "base/arena.h"
#include "random.h"

struct input {
    const char *name; /* of the seed's file */
    const char *bytes;
    size_t n;
};

struct corpus {
    struct input *seeds; /* sorted by name */
    size_t n;
    const char *const *words; /* ends with NULL; may be empty */
};

/* Inputs do not grow beyond this. */
#define MUTATE_BYTES 65536

/* Reads all files of a folder (not those that begin with a dot); n is 0 when the
 * folder cannot be read or is empty. */
struct corpus corpus_read(struct arena *a, const char *folder, const char *const *words);

/* The mutation of that number, from 0. The corpus has at least one seed. */
struct input mutate(struct arena *a, const struct corpus *c, uint64_t number);

#endif
