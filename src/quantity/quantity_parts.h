/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What quantity.c and quantity_build.c share: certain parameters. */
#ifndef QUANTITY_QUANTITY_PARTS_H
#define QUANTITY_QUANTITY_PARTS_H

#include "quantity/quantity.h"

/* Shape parameters of gamma and beta lie between these; beyond, the functions of
 * src/math lose digits. */
#define QUANTITY_LEAST_SHAPE 1e-6
#define QUANTITY_GREATEST_GAMMA 1e4
#define QUANTITY_GREATEST_BETA 1e9

struct maker {
    struct arena *a;
    const struct units *u;
    struct diags *d;
};

struct parameter {
    double value; /* finite, in base units */
    struct dim dim;
};

/* The value of an expression that must be free of names; `at` is where its text
 * begins. false with a diagnostic when it has names, does not agree with itself or
 * cannot be computed. */
bool certain_parameter(const struct maker *m, struct expr *e, struct place at,
                       struct parameter *out);

/* Canonical text of an expression. */
const char *expr_text(struct arena *a, const struct expr *e);

#endif
