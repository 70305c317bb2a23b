/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The kernels of a tape, inside src/eval: compiled once for each instruction set, chosen by table.
 *
 * Arithmetic is written as a program of codes that work on one value, `a`, which is kept in
 * registers from the first code to the last; codes take their operands one after the other from
 * the arguments of the step. Between begin_sum and end_sum terms are added to a compensated sum;
 * (a part of it between resume and end_part);
 * between begin_either and end_either they are united; between key and end_lookup each `reach`
 * takes its value where the key has come to its bound. Short programs that occur often have loops
 * of their own.
 *
 * Invariant: each code rounds as the point rule of its operation does. MIN and MAX do not mind the
 * order of their arguments, but for which NaN it is that comes out. */
#ifndef EVAL_TAPE_KERNELS_H
#define EVAL_TAPE_KERNELS_H

#include "eval/tape_parts.h"

/* Without operands. */
#define TAPE_CODES_0(X)                                                                            \
    X(complement)                                                                                  \
    X(negate)                                                                                      \
    X(root)

/* With one, b. from: b - a; under: b / a; part: RATIO of a and b; whole: RATIO of b and a.
 * at_most, at_least: min and max with a constant that is neither 0 nor NaN. */
#define TAPE_CODES_1(X)                                                                            \
    X(plus)                                                                                        \
    X(minus)                                                                                       \
    X(from)                                                                                        \
    X(times)                                                                                       \
    X(over)                                                                                        \
    X(under)                                                                                       \
    X(part)                                                                                        \
    X(whole)                                                                                       \
    X(at_most)                                                                                     \
    X(at_least)                                                                                    \
    X(min)                                                                                         \
    X(max)

/* What is not a function of a and its operands alone. */
#define TAPE_CODES_OTHER(X)                                                                        \
    X(take)         /* a = b */                                                                    \
    X(plus_product) /* a + b * c */                                                                \
    X(blend)        /* a * b + (1 - a) * c */                                                      \
    X(begin_sum)                                                                                   \
    X(add)         /* a to the sum */                                                              \
    X(add_one)     /* b */                                                                         \
    X(add_product) /* b * c */                                                                     \
    X(end_sum)                                                                                     \
    X(resume)   /* a sum, from b and what was lost of it, c */                                     \
    X(end_part) /* a is the sum so far; the second result what was lost of it */                   \
    X(begin_either)                                                                                \
    X(unite)     /* a */                                                                           \
    X(unite_one) /* b */                                                                           \
    X(end_either)                                                                                  \
    X(key)   /* b; a is its value below the first bound */                                         \
    X(reach) /* bound, value */                                                                    \
    X(end_lookup)

enum tape_code {
#define X(name) TAPE_##name,
    TAPE_CODES_0(X) TAPE_CODES_1(X) TAPE_CODES_OTHER(X)
#undef X
        TAPE_CODES
};

/* How many it takes. */
size_t tape_operands(enum tape_code c);

/* A code with its operands' forms: 1 where the first is a constant, 2 where the second is. */
enum { TAPE_FORMS = 4, TAPE_FORMS_3 = 8 };

/* Two codes behind a take that have loops of their own, in all forms of the three operands. */
#define TAPE_PAIRS(X)                                                                              \
    X(times, plus)                                                                                 \
    X(times, minus)                                                                                \
    X(times, from)                                                                                 \
    X(times, min)                                                                                  \
    X(times, at_most)                                                                              \
    X(times, times)                                                                                \
    X(plus, times)                                                                                 \
    X(minus, times)                                                                                \
    X(times, over)

enum tape_pair {
#define X(first, second) TAPE_##first##_##second,
    TAPE_PAIRS(X)
#undef X
        TAPE_PAIR_COUNT
};

struct tape_kernels {
    tape_kernel *alone[TAPE_CODES];            /* take, code */
    tape_kernel *with[TAPE_CODES][TAPE_FORMS]; /* take, code with one operand */
    tape_kernel *pair[TAPE_PAIR_COUNT][TAPE_FORMS_3];
    tape_kernel *complement_times[TAPE_FORMS]; /* take, complement, times */
    tape_kernel *blend[TAPE_FORMS_3];          /* take, blend */
    tape_kernel *program; /* any; `more` of the call is a struct tape_program */
    tape_kernel *diagram; /* args: p, then q of each variable; TAPE_NONE: 1 - p */
};

struct tape_program {
    size_t n;
    const uint8_t *code; /* TAPE_FORMS * code + form */
};

/* A diagram's rows take this many lanes at a time; the doubles and the pointers of its tile. */
enum { TAPE_LONG_TILE = TAPE_GROUP, TAPE_SHORT_TILE = TAPE_GROUP / 2, TAPE_TILE_ROWS = 48 };

static inline size_t tape_tile_rows(const struct diagram *d)
{
    return d->n_nodes + 2 + 2 * (size_t)d->n_variables;
}

static inline size_t tape_tile(const struct diagram *d)
{
    return tape_tile_rows(d) <= TAPE_TILE_ROWS ? TAPE_LONG_TILE : TAPE_SHORT_TILE;
}

#define X(name, needs)                                                                             \
    extern const struct tape_kernels tape_kernels_##name;                                          \
    tape_kernel tape_diagram_##name;
ISAS(X)
#undef X

#endif
