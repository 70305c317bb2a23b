/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Choices between alternatives whose worths are straight lines in the mean of one value, V.value,
 * of a register that has nothing but values. */
#ifndef TESTS_INFORMATION_WORLD_H
#define TESTS_INFORMATION_WORLD_H

#include "decide/information.h"
#include "loaded.h"

enum { LINES_MOST = 4 };

/* Alternative k is worth base[k] + slope[k] v. */
struct lines {
    size_t n;
    double base[LINES_MOST], slope[LINES_MOST];
    bool tells; /* what a single alternative is worth: choice.worth */
};

/* `values`: the rows of the section, of which V is one. The lines are borrowed. */
struct choice lines_choice(struct loaded *l, struct arena *a, const struct lines *lines,
                           const char *values);
void lines_look(struct loaded *l, struct arena *a, const struct lines *lines, const char *values,
                struct information *out);

/* The one of that name, or NULL. */
const struct information_input *lines_input(const struct information *x, const char *name);

#endif
