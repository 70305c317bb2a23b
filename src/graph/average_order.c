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
#include <string.h>

static const double COARSE = 1e-5, FINE = 1e-12;

/* How likely a variable is at the most, and on which of its arms something grows from 0. */
struct extreme {
    double p, q;
    bool grows_true, grows_false;
};

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

static struct extreme extreme_of(const struct averaged *what, size_t i)
{
    const struct course *c = what->course[i];
    if (!c)
        return (struct extreme){what->p[i], what->q[i], false, false};
    const double *x = what->x[i];
    double age = 0;
    for (size_t k = 0; k < what->windows.n; k++)
        age = fmax(age, what->windows.at[k].to - c->born);
    double young = course_change(x, c->fresh, 0, age), left = course_change(x, false, 0, age);
    double old = course_change(x, c->fresh, oldest(c, &what->windows), age);
    bool falls = x[COURSE_LEFT] * (x[COURSE_RATE] + x[COURSE_ENDING]) > x[COURSE_RATE];
    double most = fmax(fmax(young, left), old), least = fmin(left, old);
    return (struct extreme){.p = x[COURSE_STANDING] + most * (1 - x[COURSE_STANDING]),
                            .q = (1 - x[COURSE_STANDING]) * (1 - (falls ? least : 0)),
                            .grows_true = !falls || c->fresh || x[COURSE_UNRESET] > 0,
                            .grows_false = falls};
}

/* Adds p times the parts of an arm, one order higher where it grows. */
static void add_arm(double *to, const double *arm, double p, bool grows)
{
    enum { LAST = LEGENDRE_ORDERS - 1 };
    for (int j = 0; j <= LAST; j++)
        to[grows && j < LAST ? j + 1 : j] += p * arm[j];
}

static double (*node_orders(struct arena *scratch, const struct averaged *what))[LEGENDRE_ORDERS]
{
    const struct diagram *d = what->diagram;
    double(*part)[LEGENDRE_ORDERS] = arena_array(scratch, d->n_nodes + 2, sizeof *part);
    struct extreme *extremes = NEW_ARRAY(scratch, what->n, struct extreme);
    for (size_t i = 0; i < what->n; i++)
        extremes[i] = extreme_of(what, i);
    part[1][0] = 1;
    for (size_t i = 0; i < d->n_nodes; i++) {
        const struct diagram_node *n = &d->nodes[i];
        const struct extreme *e = &extremes[n->variable];
        add_arm(part[i + 2], part[n->high], e->p, e->grows_true);
        add_arm(part[i + 2], part[n->low], e->q, e->grows_false);
    }
    return part;
}

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

struct reach average_reach(struct arena *scratch, const struct averaged *what)
{
    const struct diagram *d = what->diagram;
    double(*part)[LEGENDRE_ORDERS] = node_orders(scratch, what);
    int coarse = 0, fine = 0;
    for (size_t k = 0; k < d->n_roots; k++) {
        int c = greatest_order(part[d->roots[k]], COARSE);
        int f = greatest_order(part[d->roots[k]], FINE);
        coarse = c > coarse ? c : coarse;
        fine = f > fine ? f : fine;
    }
    struct reach r;
    for (int i = 0; i < LEGENDRE_RULES; i++)
        r.of[i] = fmin(legendre_reach[0][coarse][i], legendre_reach[1][fine][i]);
    return r;
}

const struct legendre_rule *average_rule(const struct reach *r, double x, double *parts)
{
    double fewest = INFINITY;
    const struct legendre_rule *best = NULL;
    for (int i = 0; i < LEGENDRE_RULES; i++) {
        if (r->of[i] == 0)
            continue;
        double n = fmax(1, ceil(x / r->of[i])), points = n * (double)legendre_rules[i].n;
        if (points < fewest) {
            best = &legendre_rules[i];
            fewest = points;
            *parts = n;
        }
    }
    return best ? best : &legendre_rules[LEGENDRE_RULES - 1];
}
