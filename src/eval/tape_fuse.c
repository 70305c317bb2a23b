/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Programs of operations, and longer ones of several (tape_kernels.h). A step whose result is used
 * once, by a program, becomes a part of that, so that the result needs no row: the first value that
 * the other takes, or a term of its sum. Owns nothing.
 *
 * Invariant: the same operations on the same values are left, each with its own rounding. */
#include "eval/tape_kernels.h"

#include "graph/ops.h"
#include "math/elementary.h"

#include <math.h>

/* ---- the program of one operation ---- */

static void code(struct tape_maker *m, struct tape_step *s, enum tape_code c)
{
    *array_push(m->tape->arena, &s->codes) = (uint8_t)c;
}

/* The first argument, and then the others by c. */
static void chain(struct tape_maker *m, struct tape_step *s, enum tape_code c)
{
    code(m, s, TAPE_take);
    for (size_t i = 1; i < s->args.n; i++)
        code(m, s, c);
}

static bool is_plain_number(const struct tape_maker *m, uint32_t value)
{
    if (!(value & TAPE_CONSTANT))
        return false;
    double x = m->tape->constants.at[value & ~TAPE_CONSTANT];
    return x < 0 || x > 0;
}

/* MIN or MAX; most are of one value and a number. */
static void limit(struct tape_maker *m, struct tape_step *s, enum tape_code any,
                  enum tape_code by_number)
{
    uint32_t *args = s->args.at;
    if (s->args.n == 2 && args[0] & TAPE_CONSTANT) {
        uint32_t first = args[0];
        args[0] = args[1];
        args[1] = first;
    }
    code(m, s, TAPE_take);
    for (size_t i = 1; i < s->args.n; i++)
        code(m, s, is_plain_number(m, args[i]) ? by_number : any);
}

static void function(struct tape_maker *m, struct tape_step *s, enum tape_code c)
{
    code(m, s, TAPE_take);
    code(m, s, c);
}

static void gather(struct tape_maker *m, struct tape_step *s, enum tape_code begin,
                   enum tape_code each, enum tape_code end)
{
    code(m, s, begin);
    for (size_t i = 0; i < s->args.n; i++)
        code(m, s, each);
    code(m, s, end);
}

/* x, b1, v1, b2, v2, ... become v1, x, b2, v2, ... */
static void look_up(struct tape_maker *m, struct tape_step *s)
{
    uint32_t *args = s->args.at;
    uint32_t key = args[0], lowest = args[2];
    s->args.n--;
    for (size_t i = 2; i < s->args.n; i++)
        args[i] = args[i + 1];
    args[0] = lowest;
    args[1] = key;
    code(m, s, TAPE_take);
    code(m, s, TAPE_key);
    for (size_t i = 2; i < s->args.n; i += 2)
        code(m, s, TAPE_reach);
    code(m, s, TAPE_end_lookup);
}

/* A sum of values times what 1 in each part of a year is worth, where that is certain. */
static void years(struct tape_maker *m, struct tape_step *s)
{
    const struct years *y = graph_years_of(m->v->g, s->node);
    if (!(s->args.at[0] & TAPE_CONSTANT) || y->n_years == 0)
        return;
    double rate = m->tape->constants.at[s->args.at[0] & ~TAPE_CONSTANT];
    double log_rate = rate > -1 ? math_log1p(rate) : NAN;
    struct tape_rows values = s->args;
    s->args = (struct tape_rows){0};
    code(m, s, TAPE_begin_sum);
    for (size_t i = 0; i < y->n_years; i++) {
        double middle, length = years_length(y, i, &middle);
        double worth = annuity_worth(length, middle, log_rate);
        *array_push(m->tape->arena, &s->args) = values.at[1 + y->of_year[i]];
        *array_push(m->tape->arena, &s->args) = tape_constant(m, worth);
        code(m, s, TAPE_add_product);
    }
    code(m, s, TAPE_end_sum);
}

void tape_begin_program(struct tape_maker *m, struct tape_step *s)
{
    switch (graph_at(m->v->g, s->node)->op) {
    case OP_ADD: chain(m, s, TAPE_plus); break;
    case OP_SUBTRACT: chain(m, s, TAPE_minus); break;
    case OP_MULTIPLY: chain(m, s, TAPE_times); break;
    case OP_DIVIDE: chain(m, s, TAPE_over); break;
    case OP_RATIO: chain(m, s, TAPE_part); break;
    case OP_MIN: limit(m, s, TAPE_min, TAPE_at_most); break;
    case OP_MAX: limit(m, s, TAPE_max, TAPE_at_least); break;
    case OP_NEGATE: function(m, s, TAPE_negate); break;
    case OP_COMPLEMENT: function(m, s, TAPE_complement); break;
    case OP_SQRT: function(m, s, TAPE_root); break;
    case OP_SUM: gather(m, s, TAPE_begin_sum, TAPE_add_one, TAPE_end_sum); break;
    case OP_EITHER: gather(m, s, TAPE_begin_either, TAPE_unite_one, TAPE_end_either); break;
    case OP_LOOKUP: look_up(m, s); break;
    case OP_YEARS: years(m, s); break;
    default: break;
    }
}

/* ---- several operations ---- */

struct fuser {
    struct tape_maker *m;
    uint32_t *uses;  /* of each value, roots too */
    uint32_t *maker; /* the step with a program that makes it, or TAPE_NONE */
    /* The program that is being made, of step `s`, and what of the tape it takes in: */
    const struct tape_step *s;
    struct tape_codes codes;
    struct tape_rows args, taken;
};

static void count_uses(struct fuser *f)
{
    struct tape_maker *m = f->m;
    f->uses = NEW_ARRAY(m->arena, m->n_values, uint32_t);
    f->maker = NEW_ARRAY(m->arena, m->n_values, uint32_t);
    for (size_t i = 0; i < m->n_values; i++)
        f->maker[i] = TAPE_NONE;
    for (size_t i = 0; i < m->tape->steps.n; i++) {
        const struct tape_step *s = &m->tape->steps.at[i];
        for (size_t k = 0; k < s->args.n; k++)
            if (!(s->args.at[k] & TAPE_CONSTANT))
                f->uses[s->args.at[k]]++;
        if (s->codes.n)
            f->maker[s->to.at[0]] = (uint32_t)i;
    }
    for (size_t k = 0; k < m->roots.n; k++)
        if (!(m->roots.at[k] & TAPE_CONSTANT))
            f->uses[m->roots.at[k]]++;
}

/* The program that makes a value for one reader only; NULL: there is none. */
static const struct tape_step *part(const struct fuser *f, uint32_t value)
{
    if (value & TAPE_CONSTANT || f->uses[value] != 1 || f->maker[value] == TAPE_NONE)
        return NULL;
    return &f->m->tape->steps.at[f->maker[value]];
}

static bool is_product(const struct tape_step *s)
{
    return s->codes.n == 2 && s->codes.at[0] == TAPE_take && s->codes.at[1] == TAPE_times;
}

/* Without a sum and the like, which a program has only one of at a time. */
static bool is_plain(const struct tape_step *s)
{
    for (size_t i = 0; i < s->codes.n; i++)
        if (s->codes.at[i] >= TAPE_begin_sum)
            return false;
    return true;
}

static void put(struct fuser *f, enum tape_code c)
{
    *array_push(f->m->arena, &f->codes) = (uint8_t)c;
}

static void put_arg(struct fuser *f, uint32_t value)
{
    *array_push(f->m->arena, &f->args) = value;
}

static void take_in(struct fuser *f, const struct tape_step *s)
{
    *array_push(f->m->arena, &f->taken) = (uint32_t)(s - f->m->tape->steps.at);
    for (size_t i = 0; i < s->args.n; i++)
        put_arg(f, s->args.at[i]);
}

static void put_part(struct fuser *f, const struct tape_step *s)
{
    for (size_t i = 0; i < s->codes.n; i++)
        put(f, s->codes.at[i]);
    take_in(f, s);
}

/* The code that does the same with a and its operand exchanged. */
static enum tape_code exchanged(enum tape_code c)
{
    switch (c) {
    case TAPE_minus: return TAPE_from;
    case TAPE_over: return TAPE_under;
    case TAPE_part: return TAPE_whole;
    default: return c;
    }
}

/* p a + (1 - p) b, of which the sum is the only reader; y ends in what is made of 1 - p. */
static bool put_blend(struct fuser *f, const struct tape_step *x, const struct tape_step *y)
{
    bool fits = is_product(x) && y->codes.n == 3 && y->codes.at[0] == TAPE_take &&
                y->codes.at[1] == TAPE_complement && y->codes.at[2] == TAPE_times;
    uint32_t p = y->args.at[0];
    if (!fits || (x->args.at[0] != p && x->args.at[1] != p))
        return false;
    put(f, TAPE_take);
    put(f, TAPE_blend);
    take_in(f, x);
    take_in(f, y);
    uint32_t other = x->args.at[0] == p ? x->args.at[1] : x->args.at[0];
    f->args.n = 0;
    put_arg(f, p);
    put_arg(f, other);
    put_arg(f, y->args.at[1]);
    return true;
}

/* A sum of two parts in one program. */
static bool put_both(struct fuser *f, const struct tape_step *x, const struct tape_step *y)
{
    if (put_blend(f, x, y) || put_blend(f, y, x))
        return true;
    const struct tape_step *product = is_product(y) ? y : x, *other = product == y ? x : y;
    if (!is_product(product))
        return false;
    put_part(f, other);
    put(f, TAPE_plus_product);
    take_in(f, product);
    return true;
}

/* The first code and, where it is one of two operands, the second; returns how many were done. */
static size_t put_head(struct fuser *f)
{
    const struct tape_step *s = f->s, *x = part(f, s->args.at[0]);
    bool has_two = s->codes.n > 1 && s->codes.at[1] >= TAPE_plus && s->codes.at[1] <= TAPE_max;
    const struct tape_step *y = has_two ? part(f, s->args.at[1]) : NULL;
    if (x && y && s->codes.at[1] == TAPE_plus && put_both(f, x, y))
        return 2;
    if (y && (!x || y->codes.n > x->codes.n)) {
        put_part(f, y);
        put(f, exchanged((enum tape_code)s->codes.at[1]));
        put_arg(f, s->args.at[0]);
        return 2;
    }
    if (x) {
        put_part(f, x);
        return 1;
    }
    put(f, TAPE_take);
    put_arg(f, s->args.at[0]);
    return 1;
}

static void put_term(struct fuser *f, enum tape_code one, uint32_t value)
{
    const struct tape_step *x = part(f, value);
    if (!x || !is_plain(x)) {
        put(f, one);
        put_arg(f, value);
    } else if (one == TAPE_add_one && is_product(x)) {
        put(f, TAPE_add_product);
        take_in(f, x);
    } else {
        put_part(f, x);
        put(f, one == TAPE_add_one ? TAPE_add : TAPE_unite);
    }
}

size_t tape_operands(enum tape_code c)
{
    switch (c) {
    case TAPE_plus_product:
    case TAPE_blend:
    case TAPE_add_product:
    case TAPE_resume:
    case TAPE_reach: return 2;
    case TAPE_take:
    case TAPE_add_one:
    case TAPE_unite_one:
    case TAPE_key: return 1;
    default: return c >= TAPE_plus && c <= TAPE_max;
    }
}

static void put_rest(struct fuser *f, size_t done)
{
    const struct tape_step *s = f->s;
    size_t arg = 0;
    for (size_t i = 0; i < s->codes.n; i++) {
        enum tape_code c = (enum tape_code)s->codes.at[i];
        size_t n = tape_operands(c);
        if (i >= done && (c == TAPE_add_one || c == TAPE_unite_one))
            put_term(f, c, s->args.at[arg]);
        else if (i >= done) {
            put(f, c);
            for (size_t k = 0; k < n; k++)
                put_arg(f, s->args.at[arg + k]);
        }
        arg += n;
    }
}

/* Takes the longer program for the step, and its parts out of the tape. */
static void replace(struct fuser *f, struct tape_step *s)
{
    struct arena *a = f->m->tape->arena;
    s->codes.n = s->args.n = 0;
    for (size_t i = 0; i < f->codes.n; i++)
        *array_push(a, &s->codes) = f->codes.at[i];
    for (size_t i = 0; i < f->args.n; i++)
        *array_push(a, &s->args) = f->args.at[i];
    for (size_t i = 0; i < f->taken.n; i++) {
        struct tape_step *part_of_it = &f->m->tape->steps.at[f->taken.at[i]];
        s->operations += part_of_it->operations;
        part_of_it->operations = 0;
    }
}

static void fuse_step(struct fuser *f, struct tape_step *s)
{
    f->s = s;
    f->codes.n = f->args.n = f->taken.n = 0;
    put_rest(f, s->codes.at[0] == TAPE_take ? put_head(f) : 0);
    if (f->taken.n && (f->m->how.fusing == TAPE_FUSED || tape_has_loop(&f->codes)))
        replace(f, s);
}

void tape_fuse(struct tape_maker *m)
{
    struct fuser f = {.m = m};
    struct tape *t = m->tape;
    if (m->how.fusing == TAPE_SINGLE)
        return;
    count_uses(&f);
    for (size_t i = 0; i < t->steps.n; i++)
        if (t->steps.at[i].codes.n)
            fuse_step(&f, &t->steps.at[i]);
    size_t left = 0;
    for (size_t i = 0; i < t->steps.n; i++)
        if (t->steps.at[i].operations)
            t->steps.at[left++] = t->steps.at[i];
    t->steps.n = left;
}
