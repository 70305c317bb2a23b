/* SPDX-License-Identifier: GPL-3.0-or-later */
/* ANNUITY: present value of 1 per year paid in the middle of each year (graph.h).
 *
 * Years begin at whole numbers. What lies between `from` and `to` is cut into a
 * broken year at the head, n whole years and a broken year at the tail, or is one
 * piece inside a single year. With L = log(1 + rate) a piece of length d and middle
 * t is worth d exp(-t L); the whole years from m on are worth
 * exp(-(m + 1/2) L) (1 - v^n) / (1 - v) with v = exp(-L), both differences by expm1
 * and therefore accurate for any rate; for rate 0 the quotient is n. */
#include "graph/ops.h"

#include "math/elementary.h"

#include <math.h>

/* Years from now beyond which a fraction of a year cannot be told. */
static const double LONGEST = 0x1p53;

struct piece {
    double d, middle;
};

struct pieces {
    struct piece head, tail; /* d = 0: none */
    double first, n;         /* whole years: first .. first + n */
};

static struct pieces cut(double from, double to)
{
    double first = ceil(from), last = floor(to);
    if (first > last)
        return (struct pieces){.head = {to - from, from + (to - from) / 2}};
    return (struct pieces){.head = {first - from, (from + first) / 2},
                           .tail = {to - last, (last + to) / 2},
                           .first = first,
                           .n = last - first};
}

/* Refuses what has no value: the wrong order, a rate of -100 % or less. */
static bool valid(const double *x)
{
    return x[0] > -1 && x[1] <= x[2] && fabs(x[1]) <= LONGEST && fabs(x[2]) <= LONGEST;
}

/* 1 + v + v^2 + ... + v^(n-1) with v = exp(-log_rate). */
static double series(double n, double log_rate)
{
    return log_rate == 0 ? n : math_expm1(-n * log_rate) / math_expm1(-log_rate);
}

double annuity_worth(double d, double middle, double log_rate)
{
    return d > 0 ? d * math_exp(-middle * log_rate) : 0;
}

static double worth(struct piece p, double log_rate)
{
    return annuity_worth(p.d, p.middle, log_rate);
}

double annuity_point(size_t n, const double *x)
{
    (void)n;
    if (!valid(x))
        return NAN;
    double log_rate = math_log1p(x[0]);
    struct pieces p = cut(x[1], x[2]);
    double whole = 0;
    if (p.n > 0)
        whole = math_exp(-(p.first + 0.5) * log_rate) * series(p.n, log_rate);
    return worth(p.head, log_rate) + whole + worth(p.tail, log_rate);
}

/* Sum over j = 0 .. n-1 of j v^j, by doubling: what is added is never negative, so
 * the result is accurate where a closed form would cancel. Walks the binary digits
 * of n from the top; s0 and s1 are the sums of v^j and of j v^j so far. */
static double moment(double n, double log_rate)
{
    uint64_t all = (uint64_t)n;
    double s0 = 0, s1 = 0, done = 0;
    for (int bit = 54; bit >= 0; bit--) {
        double v = math_exp(-done * log_rate);
        s1 += v * (done * s0 + s1);
        s0 += v * s0;
        done *= 2;
        if (all >> bit & 1) {
            v = math_exp(-done * log_rate);
            s1 += done * v;
            s0 += v;
            done += 1;
        }
    }
    return s1;
}

/* Minus the derivative of a piece with respect to log_rate. */
static double piece_duration(struct piece p, double log_rate)
{
    return p.d > 0 ? p.middle * worth(p, log_rate) : 0;
}

static double duration(const struct pieces *p, double log_rate)
{
    double whole = 0;
    if (p->n > 0)
        whole = math_exp(-(p->first + 0.5) * log_rate) *
                ((p->first + 0.5) * series(p->n, log_rate) + moment(p->n, log_rate));
    return piece_duration(p->head, log_rate) + whole + piece_duration(p->tail, log_rate);
}

/* At whole `from` and `to` the derivatives are those on the side of a longer
 * stretch, which a new broken year begins. */
void annuity_backward(size_t n, const double *x, double y, double w, double *back)
{
    (void)n;
    (void)y;
    if (!valid(x))
        return;
    double log_rate = math_log1p(x[0]);
    struct pieces p = cut(x[1], x[2]);
    bool single = ceil(x[1]) > floor(x[2]);
    struct piece first = p.head, last = single ? p.head : p.tail;
    back[0] -= w * duration(&p, log_rate) / (1 + x[0]);
    back[1] -= w * math_exp(-first.middle * log_rate) * (1 + first.d * log_rate / 2);
    back[2] += w * math_exp(-last.middle * log_rate) * (1 - last.d * log_rate / 2);
}
