/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The choice of a rule of quadrature for averages of a diagram.
 *
 * On a piece between resets each probability is a positive combination of exp(-s t),
 * 1 - exp(-s t) and constants, and so is its complement; the root is one of their products.
 * A product of j factors that grow from 0 behaves like t^j, for which a rule of m nodes is only
 * good while 2 m > j: so the rule depends on how many changing variables make the root true. Not
 * the least number alone counts: where few are improbable for other reasons, more may have the
 * greater part. One pass over the diagram finds the part of the probability with j of them true,
 * for the times when they are most probable, which gives many their greatest part. Parts above
 * COARSE are integrated to 1e-12 relative, those down to FINE to 1e-7.
 *
 * A variable that falls from `left` towards less grows by its complement; it counts where false. */
#include "graph/average_order.h"

#include <math.h>

static const double COARSE = 1e-5, FINE = 1e-12;

static double oldest(const struct course *c, const struct windows *w)
{
    double last = 0, first = INFINITY;
    for (size_t k = 0; k < w->n; k++) {
        last = fmax(last, w->at[k].to - c->from);
        first = fmin(first, w->at[k].from);
    }
    double before = fmin(c->first - c->from, last);
    return fmin(last, first < c->first ? fmax(before, c->every) : c->every);
}

struct extreme average_still(double p, double q)
{
    return (struct extreme){p, q, false, false};
}

/* Whether something falls from `left`, something is never reset, and the mean of not standing. */
struct habits {
    bool falls, ages;
    double rest;
};

static struct habits habits_of(const struct mixture *m)
{
    struct habits h = {0};
    for (size_t i = 0; i < m->n; i++) {
        const double *x = m->x[i];
        h.falls = h.falls || x[COURSE_LEFT] * (x[COURSE_RATE] + x[COURSE_ENDING]) > x[COURSE_RATE];
        h.ages = h.ages || x[COURSE_UNRESET] > 0;
        h.rest += m->weight[i] * (1 - x[COURSE_STANDING]);
    }
    return h;
}

enum { YOUNG, LEFT, OLD };

void average_times(const struct course *c, const struct windows *w, struct extreme_times *to)
{
    double age = 0;
    *to = (struct extreme_times){.at = {.left = {!c->fresh, 1, !c->fresh}}, .fresh = c->fresh};
    for (size_t k = 0; k < w->n; k++)
        age = fmax(age, w->at[k].to - c->born);
    to->at.since[OLD] = to->at.latest_since = oldest(c, w);
    to->at.latest_age = age;
    for (int i = 0; i < LANES; i++)
        to->at.age[i] = age;
}

struct extreme average_extreme(const struct average_kernels *k, const struct extreme_times *t,
                               const struct mixture *m)
{
    struct habits h = habits_of(m);
    _Alignas(LANES_ALIGNED) lanes p;
    _Alignas(LANES_ALIGNED) lanes q;
    k->course(m, &t->at, p, q);
    return (struct extreme){.p = fmax(fmax(p[YOUNG], p[LEFT]), p[OLD]),
                            .q = h.falls ? fmax(q[LEFT], q[OLD]) : h.rest,
                            .grows_true = !h.falls || t->fresh || h.ages,
                            .grows_false = h.falls};
}

/* ---- how fast ---- */

/* The mean of argument k, to say how much of it is of a version. */
static double mean_of(const struct mixture *m, int k)
{
    double mean = 0;
    for (size_t i = 0; i < m->n; i++)
        mean += m->weight[i] * m->x[i][k];
    return mean;
}

/* What part of the whole a version has, at the most, from one of its arguments. */
static double part_of(double weight, double x, double mean)
{
    return mean > 0 ? fmin(fmax(weight, weight * x / mean), 1) : weight;
}

/* An exponent y that has the part w of the whole counts like y w^(1 / 2 m) for m nodes, whose error
 * goes with the power 2 m. */
static void meet(double y, double w, double most[PACES])
{
    double root = sqrt(sqrt(sqrt(w)));
    for (int i = 0; i < PACES; i++, root = sqrt(root))
        most[i] = fmax(most[i], y * root);
}

struct pace average_pace(const struct mixture *m)
{
    struct pace p = {.slowest_reset = INFINITY, .slowest_unreset = INFINITY};
    double rate = mean_of(m, COURSE_RATE), unreset = mean_of(m, COURSE_UNRESET);
    double left = mean_of(m, COURSE_LEFT);
    for (size_t i = 0; i < m->n; i++) {
        const double *x = m->x[i];
        double w = m->weight[i];
        double h = x[COURSE_RATE] + x[COURSE_ENDING], u = x[COURSE_UNRESET] + x[COURSE_ENDING];
        meet(h, fmax(part_of(w, x[COURSE_RATE], rate), part_of(w, x[COURSE_LEFT], left)), p.reset);
        p.slowest_reset = fmin(p.slowest_reset, h);
        if (unreset == 0)
            continue;
        meet(u, part_of(w, x[COURSE_UNRESET], unreset), p.unreset);
        p.slowest_unreset = fmin(p.slowest_unreset, u);
    }
    return p;
}

/* ---- how many at a time ---- */

/* The greatest order whose part of the whole is above a threshold. */
static int greatest_order(const double *part, double threshold)
{
    double total = 0;
    int greatest = 0;
    for (int j = 0; j < LEGENDRE_ORDERS; j++)
        total += part[j];
    for (int j = 0; j < LEGENDRE_ORDERS; j++)
        if (part[j] > threshold * total)
            greatest = j;
    return greatest;
}

struct reach average_reach(size_t n_roots, const uint32_t *roots, orders *part)
{
    int coarse = 0, fine = 0;
    for (size_t k = 0; k < n_roots; k++) {
        int c = greatest_order(part[roots[k]], COARSE), f = greatest_order(part[roots[k]], FINE);
        coarse = c > coarse ? c : coarse;
        fine = f > fine ? f : fine;
    }
    struct reach r;
    for (int i = 0; i < LEGENDRE_RULES; i++)
        r.of[i] = fmin(legendre_reach[0][coarse][i], legendre_reach[1][fine][i]);
    return r;
}

static int pace_of(const struct legendre_rule *rule)
{
    return (rule->n > 4) + (rule->n > 8);
}

/* The next whole number, without a call where it is small. */
static double whole_above(double x)
{
    if (!(x < 1e9))
        return ceil(x);
    double whole = (int32_t)x;
    return whole < x ? whole + 1 : whole;
}

/* Rules rise, so what does with one part ends the search. */
const struct legendre_rule *average_rule(const struct reach *r, const double x[PACES],
                                         double *parts)
{
    double fewest = INFINITY;
    const struct legendre_rule *best = NULL;
    for (int i = 0; i < LEGENDRE_RULES; i++) {
        const struct legendre_rule *rule = &legendre_rules[i];
        double reach = r->of[i], length = x[pace_of(rule)];
        if (reach == 0 || length * (double)rule->n >= fewest * reach)
            continue;
        double n = length <= reach ? 1 : whole_above(length / reach), points = n * (double)rule->n;
        if (points < fewest) {
            best = rule;
            fewest = points;
            *parts = n;
        }
        if (n == 1)
            break;
    }
    return best ? best : &legendre_rules[LEGENDRE_RULES - 1];
}
