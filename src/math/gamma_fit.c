/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Gamma shapes from percentiles, by a bracket on the logarithm of the shape. Owns nothing.
 * Invariant: every bracket holds a change of sign, so that its root cannot be lost. */
#include "math/gamma_fit.h"

#include <math.h>

#include "math/dist.h"
#include "math/elementary.h"

enum { MOST_STEPS = 200 };

/* What is sought: percentile `high` over percentile `low`, or over the mean. */
struct sought {
    struct gamma_level low, high;
    bool over_mean;
};

/* Percentiles of small shapes may underflow: a quotient over 0 is taken as infinite. */
static double quotient_at(const struct sought *s, double u)
{
    double shape = math_exp(u), high = dist_gamma_quantile(shape, s->high.p, s->high.q);
    if (s->over_mean)
        return high / shape;
    double low = dist_gamma_quantile(shape, s->low.p, s->low.q);
    return low > 0 ? high / low : INFINITY;
}

/* One end of a bracket: a logarithm of a shape, and by how much the quotient exceeds the
 * wanted one, which may be infinite. It is measured on a scale on which the quotient is
 * nearly straight: two percentiles of a small shape a lie about exp(1/a) apart. */
struct side {
    double u, excess;
};

static struct side side_at(const struct sought *s, double u, double wanted)
{
    double x = quotient_at(s, u);
    if (s->over_mean)
        return (struct side){u, math_log(x / wanted)};
    return (struct side){u, math_log(math_log(x) / math_log(wanted))};
}

/* False position, the excess of the end that stays halved (the Illinois method: Dowell &
 * Jarratt, BIT 11 (1971) 168-174); the middle where that is not inside. */
static double between(const struct side *a, const struct side *b)
{
    double u = (a->u * b->excess - b->u * a->excess) / (b->excess - a->excess);
    return u > a->u && u < b->u ? u : a->u + (b->u - a->u) / 2;
}

/* The root of quotient_at = wanted between two logarithms of shapes; false where the
 * quotients there do not enclose it. */
static bool find(const struct sought *s, double from, double to, double wanted, double *shape)
{
    struct side a = side_at(s, from, wanted), b = side_at(s, to, wanted);
    int stayed = 0; /* the end that the last step left: 1 is b */
    if (isnan(a.excess) || isnan(b.excess) || (a.excess > 0) == (b.excess > 0))
        return false;
    for (int step = 0; step < MOST_STEPS && b.u - a.u > 1e-15; step++) {
        struct side x = side_at(s, between(&a, &b), wanted);
        bool is_b = (x.excess > 0) == (b.excess > 0);
        struct side *moves = is_b ? &b : &a, *stays = is_b ? &a : &b;
        if (x.u == a.u || x.u == b.u)
            break;
        *moves = x;
        if (stayed == (is_b ? -1 : 1))
            stays->excess /= 2;
        stayed = is_b ? -1 : 1;
    }
    *shape = math_exp(a.u + (b.u - a.u) / 2);
    return true;
}

bool gamma_fit_quotient(struct gamma_level low, struct gamma_level high, double quotient,
                        double *shape)
{
    struct sought s = {low, high, false};
    return find(&s, math_log(GAMMA_FIT_LEAST), math_log(GAMMA_FIT_GREATEST), quotient, shape);
}

/* Where a percentile over the mean is greatest, by golden section. */
static double top(const struct sought *s, double from, double to)
{
    const double golden = 0.6180339887498949;
    double a = to - golden * (to - from), b = from + golden * (to - from);
    double at_a = quotient_at(s, a), at_b = quotient_at(s, b);
    while (to - from > 1e-9) {
        if (at_a < at_b) {
            from = a;
            a = b;
            at_a = at_b;
            b = from + golden * (to - from);
            at_b = quotient_at(s, b);
        } else {
            to = b;
            b = a;
            at_b = at_a;
            a = to - golden * (to - from);
            at_a = quotient_at(s, a);
        }
    }
    return from + (to - from) / 2;
}

int gamma_fit_mean(struct gamma_level level, double ratio, double shapes[2])
{
    struct sought s = {.high = level, .over_mean = true};
    double least = math_log(GAMMA_FIT_LEAST), greatest = math_log(GAMMA_FIT_GREATEST);
    int n = 0;
    if (level.p <= level.q)
        return find(&s, least, greatest, ratio, &shapes[0]) ? 1 : 0;
    double middle = top(&s, least, greatest);
    n += find(&s, least, middle, ratio, &shapes[n]);
    n += find(&s, middle, greatest, ratio, &shapes[n]);
    return n;
}
