/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Products of probabilities in two qualities: quick ones that carry a bound of their
 * error, and exact ones as whole numbers for the few cases where that bound does not
 * decide (above all when products are equal).
 *
 * Invariant of struct exact: `balance` is all 0 between calls. Its arrays live in the
 * caller's arena. */
#include "graph/cuts_parts.h"

#include <assert.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

/* ---- quick ---- */

struct product product_one(void)
{
    return (struct product){.mantissa = 0.5, .exponent = 1};
}

struct product product_of(double p)
{
    assert(p >= 0 && p <= 1);
    struct product x = product_one();
    x.n_members = 1;
    x.n_zero = p == 0;
    if (p > 0) {
        int exponent;
        x.mantissa = frexp(p, &exponent);
        x.exponent = exponent;
    }
    return x;
}

struct product product_join(struct product x, struct product y)
{
    int exponent;
    x.mantissa = frexp(x.mantissa * y.mantissa, &exponent);
    x.exponent += y.exponent + exponent;
    x.n_zero += y.n_zero;
    x.n_members += y.n_members;
    return x;
}

int product_compare(struct product x, struct product y)
{
    if (x.n_zero != y.n_zero)
        return x.n_zero < y.n_zero ? -1 : 1;
    int64_t apart = x.exponent - y.exponent;
    if (apart > 1 || apart < -1)
        return apart > 0 ? -1 : 1;
    double mx = apart > 0 ? 2 * x.mantissa : x.mantissa;
    double my = apart < 0 ? 2 * y.mantissa : y.mantissa;
    double doubt = ((double)x.n_members + y.n_members + 2) * 0x1p-51;
    if (fabs(mx - my) <= doubt)
        return 0;
    return mx > my ? -1 : 1;
}

/* ---- exact ---- */

/* Digits of 27 bits: the mantissa of a double has two of them, and a digit times both,
 * with what is carried, is below 2^63. */
enum { DIGIT = 27, DIGIT_MASK = (1 << DIGIT) - 1 };

struct whole { /* the number `digits` times 2^exponent */
    uint32_t *digits;
    size_t n; /* the last one is not 0 */
    int64_t exponent;
};

struct exact {
    const double *p;
    uint32_t *class;  /* variables of equal p are of one class */
    int32_t *balance; /* of a class: members of x less those of y */
    struct whole x, y;
};

static void whole_one(struct whole *w)
{
    w->digits[0] = 1;
    w->n = 1;
    w->exponent = 0;
}

/* w *= p, p > 0. */
static void whole_multiply(struct whole *w, double p)
{
    int exponent;
    uint64_t mantissa = (uint64_t)(frexp(p, &exponent) * 0x1p53);
    uint64_t low = mantissa & DIGIT_MASK, high = mantissa >> DIGIT, carry = 0;
    uint32_t before = 0;
    for (size_t i = 0; i < w->n + 2; i++) {
        uint32_t digit = i < w->n ? w->digits[i] : 0;
        carry += digit * low + before * high;
        w->digits[i] = (uint32_t)(carry & DIGIT_MASK);
        carry >>= DIGIT;
        before = digit;
    }
    for (w->n += 2; w->digits[w->n - 1] == 0;)
        w->n--;
    w->exponent += exponent - 53;
}

/* Shifts the digits until the last one has its highest bit: the same number. */
static void whole_align(struct whole *w)
{
    int shift = 0;
    while (!(w->digits[w->n - 1] << shift >> (DIGIT - 1)))
        shift++;
    uint32_t carry = 0;
    for (size_t i = 0; i < w->n; i++) {
        uint64_t digit = (uint64_t)w->digits[i] << shift | carry;
        w->digits[i] = (uint32_t)(digit & DIGIT_MASK);
        carry = (uint32_t)(digit >> DIGIT);
    }
    w->exponent -= shift;
}

/* Digit k from above; below the last one all are 0. */
static uint32_t from_above(const struct whole *w, size_t k)
{
    return k < w->n ? w->digits[w->n - 1 - k] : 0;
}

/* 1, 0, -1 for x >, =, < y. */
static int whole_compare(struct whole *x, struct whole *y)
{
    whole_align(x);
    whole_align(y);
    int64_t ex = x->exponent + (int64_t)x->n * DIGIT, ey = y->exponent + (int64_t)y->n * DIGIT;
    if (ex != ey)
        return ex > ey ? 1 : -1;
    for (size_t k = 0; k < x->n || k < y->n; k++) {
        uint32_t dx = from_above(x, k), dy = from_above(y, k);
        if (dx != dy)
            return dx > dy ? 1 : -1;
    }
    return 0;
}

/* 64 bits from above, of which the last one says whether there is anything further
 * down, are rounded to 53 by the conversion. */
static double whole_to_double(struct whole *w)
{
    whole_align(w);
    int64_t exponent = w->exponent + (int64_t)w->n * DIGIT - 64;
    uint32_t third = from_above(w, 2);
    uint64_t bits =
        (uint64_t)from_above(w, 0) << 37 | (uint64_t)from_above(w, 1) << 10 | third >> (DIGIT - 10);
    bool more = third & ((1u << (DIGIT - 10)) - 1);
    for (size_t k = 3; k < w->n && !more; k++)
        more = from_above(w, k) != 0;
    if (exponent < -4096)
        return 0;
    return ldexp((double)(bits | more), (int)exponent);
}

/* ---- sets ---- */

struct ranked {
    double p;
    uint32_t variable;
};

static int by_probability(const void *a, const void *b)
{
    const struct ranked *x = a, *y = b;
    if (x->p != y->p)
        return x->p < y->p ? -1 : 1;
    return (x->variable > y->variable) - (x->variable < y->variable);
}

/* The variables of a family, each once, by rising p. */
static size_t rank_variables(struct arena *a, const struct family *f, uint32_t n_variables,
                             const double *p, struct ranked **out)
{
    bool *seen = NEW_ARRAY(a, n_variables, bool);
    struct ranked *ranked = NEW_ARRAY(a, n_variables, struct ranked);
    size_t n = 0;
    for (size_t i = 0; i < f->n_nodes; i++) {
        uint32_t v = f->nodes[i].variable;
        if (!seen[v])
            ranked[n++] = (struct ranked){p[v], v};
        seen[v] = true;
    }
    if (n)
        qsort(ranked, n, sizeof *ranked, by_probability);
    *out = ranked;
    return n;
}

struct exact *exact_new(struct arena *a, const struct family *f, uint32_t n_variables,
                        const double *p)
{
    struct exact *e = NEW(a, struct exact);
    struct ranked *ranked;
    size_t n = rank_variables(a, f, n_variables, p, &ranked);
    e->p = p;
    e->class = NEW_ARRAY(a, n_variables, uint32_t);
    uint32_t n_classes = 0;
    for (size_t i = 0; i < n; i++) {
        n_classes += i > 0 && ranked[i].p != ranked[i - 1].p;
        e->class[ranked[i].variable] = n_classes;
    }
    e->balance = NEW_ARRAY(a, (size_t)n_classes + 1, int32_t);
    e->x.digits = NEW_ARRAY(a, 2 * n + 1, uint32_t);
    e->y.digits = NEW_ARRAY(a, 2 * n + 1, uint32_t);
    return e;
}

/* Takes out of the balance what has the given sign, as a product. */
static void take(struct exact *e, struct whole *w, int sign, size_t n, const uint32_t *members)
{
    whole_one(w);
    for (size_t i = 0; i < n; i++) {
        int32_t *balance = &e->balance[e->class[members[i]]];
        if (*balance * sign <= 0)
            continue;
        *balance -= sign;
        if (e->p[members[i]] > 0)
            whole_multiply(w, e->p[members[i]]);
    }
}

int exact_compare(struct exact *e, size_t nx, const uint32_t *x, size_t ny, const uint32_t *y)
{
    for (size_t i = 0; i < nx; i++)
        e->balance[e->class[x[i]]]++;
    for (size_t i = 0; i < ny; i++)
        e->balance[e->class[y[i]]]--;
    take(e, &e->x, 1, nx, x);
    take(e, &e->y, -1, ny, y);
    return -whole_compare(&e->x, &e->y);
}

double exact_product(struct exact *e, size_t n, const uint32_t *members)
{
    whole_one(&e->x);
    for (size_t i = 0; i < n; i++) {
        if (e->p[members[i]] == 0)
            return 0;
        whole_multiply(&e->x, e->p[members[i]]);
    }
    return whole_to_double(&e->x);
}
