/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Windows of time for things that fail together: a common cycle, or years of the horizon.
 * Owns nothing; what it makes lives with the figures. */
#include "figure/span.h"

#include <math.h>

#include "figure/horizon.h"

/* Instants closer than this are one: a fraction of a second. */
static const double SAME_INSTANT = 1e-9;

/* --- a common cycle --- */

static const double MINUTES = 525600; /* in a year */

static uint64_t greatest_divisor(uint64_t a, uint64_t b)
{
    while (b) {
        uint64_t r = a % b;
        a = b;
        b = r;
    }
    return a;
}

/* The interval in whole minutes; 0 where it is not. */
static uint64_t whole_minutes(double every)
{
    double minutes = round(every * MINUTES);
    bool whole =
        minutes >= 1 && minutes <= SPAN_CYCLE * MINUTES && fabs(minutes - every * MINUTES) <= 1e-6;
    return whole ? (uint64_t)minutes : 0;
}

/* The least common multiple of all intervals in years; 0 where it is too long. */
static double common_cycle(size_t n, const struct behaviour *const *parts)
{
    uint64_t cycle = 1, shortest = UINT64_MAX;
    for (size_t i = 0; i < n; i++) {
        if (!parts[i]->timed)
            continue;
        uint64_t every = whole_minutes(parts[i]->when.every);
        if (every == 0)
            return 0;
        cycle = cycle / greatest_divisor(cycle, every) * every;
        shortest = every < shortest ? every : shortest;
        if ((double)cycle > SPAN_CYCLE * MINUTES)
            return 0;
    }
    return cycle / shortest <= SPAN_TESTS ? (double)cycle / MINUTES : 0;
}

/* The last of the first tests: behind it all are in their cycle. */
static double all_tested(size_t n, const struct behaviour *const *parts)
{
    double from = 0;
    for (size_t i = 0; i < n; i++)
        if (parts[i]->timed && parts[i]->dated)
            from = fmax(from, parts[i]->when.first);
    return from;
}

/* --- years that repeat others --- */

static double phase(double t, const struct course *c)
{
    double x = fmod(t - c->first, c->every);
    return c->every - x <= SAME_INSTANT ? 0 : x;
}

static bool repeats(const struct behaviour *p, double year, double earlier)
{
    if (!p->timed)
        return true;
    if (p->ages || earlier < p->when.first - SAME_INSTANT)
        return false;
    return fabs(phase(year, &p->when) - phase(earlier, &p->when)) <= SAME_INSTANT;
}

static bool all_repeat(size_t n, const struct behaviour *const *parts, double year, double earlier)
{
    for (size_t i = 0; i < n; i++)
        if (!repeats(parts[i], year, earlier))
            return false;
    return true;
}

/* The last beginning of one of them; 0 where all are there from the start. */
static double all_there(size_t n, const struct behaviour *const *parts)
{
    double from = 0;
    for (size_t i = 0; i < n; i++)
        if (parts[i]->timed)
            from = fmax(from, fmax(parts[i]->when.from, parts[i]->when.born));
    return from;
}

static bool is_whole(struct window w)
{
    return w.to - w.from == 1;
}

static struct span years(struct figures *f, size_t n, const struct behaviour *const *parts)
{
    uint32_t length = horizon_length(f->base->settings), kept = 0;
    double from = all_there(n, parts);
    struct window *windows = NEW_ARRAY(f->arena, length, struct window);
    uint32_t *of_year = NEW_ARRAY(f->arena, length, uint32_t);
    for (uint32_t y = (uint32_t)from; y < length; y++) {
        struct window year = {fmax(y, from), y + 1.0};
        uint32_t w = 0;
        while (w < kept && !(is_whole(windows[w]) && is_whole(year) &&
                             all_repeat(n, parts, y, windows[w].from)))
            w++;
        if (w == kept)
            windows[kept++] = year;
        of_year[y] = w;
    }
    return (struct span){{kept, windows}, true, length, of_year, from};
}

/* --- the whole --- */

struct span span_of(struct figures *f, size_t n, const struct behaviour *const *parts)
{
    bool timed = false, dated = false;
    for (size_t i = 0; i < n; i++) {
        timed = timed || parts[i]->timed;
        dated = dated || (parts[i]->timed && parts[i]->dated);
    }
    struct span none = {.years = horizon_length(f->base->settings)};
    if (!timed)
        return none;
    bool years_matter = dated && !f->base->settings->steady && !f->whole_cycles;
    double cycle = years_matter ? 0 : common_cycle(n, parts);
    if (cycle == 0)
        return years(f, n, parts);
    struct window *whole = NEW(f->arena, struct window);
    double from = all_tested(n, parts);
    *whole = (struct window){from, from + cycle};
    return (struct span){{1, whole}, false, none.years, NULL};
}

node_id span_mean(struct building *b, const struct span *s, const node_id *values)
{
    if (!s->yearly)
        return values[0];
    struct graph *g = b->figures->graph;
    uint32_t first = (uint32_t)s->from;
    struct years y = {s->from, s->years, s->years - first, s->of_year + first};
    node_id rate = compile_const(b, 0, dim_number, NULL);
    node_id sum = graph_years(g, rate, s->windows.n, values, &y);
    return graph_op2(g, OP_DIVIDE, sum, compile_const(b, s->years - s->from, dim_number, NULL));
}

const char *span_label(struct figures *f, const struct span *s, uint32_t window)
{
    if (!s->yearly)
        return NULL;
    return horizon_label(f->arena, f->base->settings, (uint32_t)s->windows.at[window].from);
}
