/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the fuzz drivers share. Each defines LLVMFuzzerTestOneInput and the words
 * of its dictionary; replay.c is a main that feeds it seeds and mutations, and
 * any fuzzing engine may take its place. */
#ifndef TESTS_FUZZ_H
#define TESTS_FUZZ_H

#include <stdio.h>
#include <stdlib.h>

#include "base/diag.h"

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size);

/* Ends with NULL. */
extern const char *const fuzz_words[];

/* An invariant; where it is broken, the program is aborted. */
#define REQUIRE(condition)                                                               \
    do {                                                                                 \
        if (!(condition)) {                                                              \
            fprintf(stderr, "%s:%d: broken: %s\n", __FILE__, __LINE__, #condition);      \
            abort();                                                                     \
        }                                                                                \
    } while (0)

/* An arena whose lack of memory aborts the program. */
struct arena *fuzz_arena(void);

/* Each diagnostic is a sentence in UTF-8 and stands inside the text or right
 * behind it. LF, CR LF and CR end a line. */
void fuzz_check_diags(const struct diags *d, const char *text, size_t n);

#endif
