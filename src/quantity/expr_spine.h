/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Walking down trees without deep recursion. `a + b * c - ...` parses into a
 * tree whose left arms are as long as the text; only nested parentheses make it
 * deep otherwise. A function over expressions therefore takes up to SPINE nodes
 * of the left arm at a time, works on what hangs below them, and then comes back
 * up over their right arms. */
#ifndef QUANTITY_EXPR_SPINE_H
#define QUANTITY_EXPR_SPINE_H

#include "quantity/expr.h"

#define SPINE 32

/* + - * / : two arguments, written between them. */
static inline bool expr_is_binary(const struct expr *e)
{
    return e->op >= EXPR_ADD && e->op <= EXPR_DIVIDE;
}

/* Fills nodes[] with e, its left argument, ..., as long as they are binary, and
 * returns how many (0..SPINE). What hangs below the last is its args[0]. */
static inline size_t expr_spine(const struct expr *e, const struct expr *nodes[SPINE])
{
    size_t n = 0;
    for (; n < SPINE && expr_is_binary(e); e = e->args[0])
        nodes[n++] = e;
    return n;
}

#endif
