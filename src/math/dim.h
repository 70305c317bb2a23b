/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dimensions: integer exponents of independent base kinds of quantity.
 * The algebra only; names of units belong to src/quantity. */
#ifndef MATH_DIM_H
#define MATH_DIM_H

#include <stdbool.h>
#include <stdint.h>

#define DIM_SLOTS 16

/* Which slot is which is the caller's business; a zeroed struct is a pure number. */
struct dim {
    int8_t e[DIM_SLOTS];
};

bool dim_equal(struct dim a, struct dim b);
bool dim_is_number(struct dim a);
struct dim dim_multiply(struct dim a, struct dim b);
struct dim dim_divide(struct dim a, struct dim b);
/* Each exponent times `by`. Exponents saturate at +-100 and then equal nothing. */
struct dim dim_raise(struct dim a, int by);
/* Half of each exponent; false when one is odd. */
bool dim_root(struct dim a, struct dim *out);

#endif
