/* SPDX-License-Identifier: GPL-3.0-or-later */
/* course(...) and over(...): probabilities over time, and their averages by adaptive quadrature
 * between the resets of all that changes. Written from the words of docs/figures.md. */
#include <math.h>
#include <string.h>

#include "formula_parts.h"
#include "quadrature.h"

/* --- a course --- */

/* What starts at `start` and comes at `rate` until it ends at `ending`, after the time x. */
static long double grown(long double start, long double rate, long double ending, long double x)
{
    long double s = rate + ending;
    return s == 0 ? start : start * expl(-s * x) + rate * -expm1l(-s * x) / s;
}

long double formula_course_at(const struct formula_course *c, long double t)
{
    bool reset = c->tested && t >= c->first;
    long double since = reset ? c->first + floorl((t - c->first) / c->every) * c->every : c->from;
    long double start = c->fresh && !reset ? 0 : c->left;
    long double h = grown(start, c->rate, c->ending, fmaxl(t - since, 0));
    long double m = grown(0, c->unreset, c->ending, fmaxl(t - c->born, 0));
    return c->standing + (1 - c->standing) * (h + (1 - h) * m);
}

/* "WORD 2.5 a" */
static bool instant(struct reader *r, const char *word, long double *out)
{
    formula_blanks(r);
    return formula_take_word(r, word) ? formula_sum(r, out) : formula_fail(r, word);
}

/* "; first X a; every Y a", if it is there. */
static bool resets(struct reader *r, struct formula_course *c)
{
    formula_blanks(r);
    c->tested = strncmp(r->p, "first", 5) == 0;
    if (!c->tested)
        return true;
    return instant(r, "first", &c->first) && formula_expect(r, ';') &&
           instant(r, "every", &c->every) && formula_expect(r, ';');
}

bool formula_read_course(struct reader *r, struct formula_course *c)
{
    long double *parts[] = {&c->standing, &c->rate, &c->ending, &c->left, &c->unreset};
    *c = (struct formula_course){0};
    for (int i = 0; i < 5; i++)
        if (!formula_sum(r, parts[i]) || !formula_expect(r, ';'))
            return false;
    if (!instant(r, "from", &c->from) || !formula_expect(r, ';') || !resets(r, c) ||
        !instant(r, "born", &c->born))
        return false;
    if (formula_take(r, ';')) {
        formula_blanks(r);
        c->fresh = formula_take_word(r, "fresh");
        if (!c->fresh)
            return formula_fail(r, "expected fresh");
    }
    return formula_expect(r, ')');
}

bool formula_find_course(struct reader *r, const char *name, struct formula_course *out)
{
    const struct formula_world *w = r->world;
    return w->course && w->course(w->ctx, name, out);
}

/* A course by its text, or by the name of another one that is the same. */
bool formula_course(const char *formula, const struct formula_world *w, struct formula_course *out,
                    char error[FORMULA_ERROR])
{
    struct reader r = {.start = formula, .p = formula, .world = w, .error = error};
    char name[NAME_BYTES];
    *error = 0;
    bool fine;
    if (strncmp(formula, "course(", 7) == 0) {
        r.p += 7;
        fine = formula_read_course(&r, out);
    } else {
        fine = formula_name(&r, name) && formula_find_course(&r, name, out);
    }
    return (fine && *r.p == 0) || formula_fail(&r, "no course");
}

/* --- averages --- */

static void at_time(void *ctx, long double t, long double *out)
{
    struct formula_timed *x = ctx;
    *out = x->value(x, t);
}

/* The next reset of anything behind t, at most `to`. */
static long double next_reset(const struct formula_timed *x, long double t, long double to)
{
    for (size_t i = 0; i < x->n; i++) {
        const struct formula_course *c = &x->course[i];
        if (!c->tested)
            continue;
        long double k = t < c->first ? 0 : floorl((t - c->first) / c->every) + 1;
        long double next = c->first + k * c->every;
        if (next <= t + 1e-12L)
            next += c->every;
        to = next < to ? next : to;
    }
    return to;
}

long double formula_average(struct formula_timed *x, long double from, long double to)
{
    long double sum = 0;
    for (long double t = from, next; t < to; t = next) {
        next = next_reset(x, t, to);
        quadrature_add(at_time, x, 1, t, next, &sum);
    }
    return sum / (to - from);
}

static long double one_course(struct formula_timed *x, long double t)
{
    return formula_course_at(&x->course[0], t);
}

static bool course_over(struct reader *r, long double from, long double to, long double *out)
{
    struct formula_timed x = {.n = 1, .value = one_course};
    char name[NAME_BYTES];
    if (!formula_name(r, name) || !formula_find_course(r, name, &x.course[0]))
        return formula_fail(r, "expected a course");
    *out = formula_average(&x, from, to);
    return true;
}

bool formula_over(struct reader *r, long double *out)
{
    static const char word[] = "probability(";
    long double from, to;
    if (!formula_sum(r, &from) || !formula_expect(r, ';') || !formula_sum(r, &to) ||
        !formula_expect(r, ';'))
        return false;
    if (!(from < to))
        return formula_fail(r, "no time between");
    formula_blanks(r);
    if (strncmp(r->p, word, sizeof word - 1) != 0)
        return course_over(r, from, to, out) && formula_expect(r, ')');
    r->p += sizeof word - 1;
    return formula_probability_over(r, from, to, out) && formula_expect(r, ')');
}
