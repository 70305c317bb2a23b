/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantiles of a sample (statistics.h): sets are sorted, some side by side (math/columns.h), and
 * what stands at a place among all values is searched for in the sorted sets. Owns nothing beyond
 * its scratch. */
#include "math/columns.h"
#include "math/statistics.h"

#include <math.h>
#include <string.h>

static const struct columns_kernels *const kernels[ISA_COUNT] = {
#define X(name, needs) &columns_kernels_##name,
    ISAS(X)
#undef X
};

enum { LINE = 64 }; /* bytes */

/* Sets, each sorted: COLUMNS_TOGETHER of them are the columns of a block. */
struct sorted {
    size_t sets, points;
    double (*rows)[COLUMNS_TOGETHER];
    size_t *low, *high;   /* by set: which values may still be those that are looked for */
    size_t *below, *upto; /* and how many are below the last guess, or not above it */
};

static double value_at(const struct sorted *s, size_t set, size_t i)
{
    return s->rows[set / COLUMNS_TOGETHER * s->points + i][set % COLUMNS_TOGETHER];
}

/* Rows that begin with lines of the cache. */
static void *new_rows(struct arena *a, size_t n)
{
    char *at = arena_array(a, n + 1, sizeof(double[COLUMNS_TOGETHER]));
    return at + (-(uintptr_t)at & (LINE - 1));
}

/* Columns of a block that has fewer sets stay 0. */
static struct sorted sorted_new(struct arena *a, size_t sets, size_t points, const double *x)
{
    size_t blocks = (sets + COLUMNS_TOGETHER - 1) / COLUMNS_TOGETHER;
    struct sorted s = {.sets = sets, .points = points};
    s.rows = new_rows(a, blocks * points);
    s.low = NEW_ARRAY(a, sets, size_t);
    s.high = NEW_ARRAY(a, sets, size_t);
    s.below = NEW_ARRAY(a, sets, size_t);
    s.upto = NEW_ARRAY(a, sets, size_t);
    for (size_t set = 0; set < sets; set++)
        for (size_t i = 0; i < points; i++)
            s.rows[set / COLUMNS_TOGETHER * points + i][set % COLUMNS_TOGETHER] =
                x[set * points + i];
    for (size_t b = 0; b < blocks; b++)
        kernels[isa_best()]->sort(points, s.rows + b * points);
    return s;
}

/* ---- the k-th of all ---- */

/* How many of a set's values are below x, as far as that is open. Without a branch that chance
 * decides. */
static size_t count_below(const struct sorted *s, size_t set, double x)
{
    size_t low = s->low[set], n = s->high[set] - low;
    while (n > 0) {
        size_t half = n / 2;
        bool is_below = value_at(s, set, low + half) < x;
        low += is_below ? half + 1 : 0;
        n = is_below ? n - half - 1 : half;
    }
    return low;
}

static size_t count_all_below(const struct sorted *s, double x)
{
    size_t n = 0;
    for (size_t set = 0; set < s->sets; set++)
        n += s->below[set] = count_below(s, set, x);
    return n;
}

/* How many are not above x, where those below it are counted; few are equal to it. */
static size_t count_all_upto(const struct sorted *s, double x)
{
    size_t n = 0;
    for (size_t set = 0; set < s->sets; set++) {
        size_t upto = s->below[set];
        while (upto < s->high[set] && value_at(s, set, upto) == x)
            upto++;
        n += s->upto[set] = upto;
    }
    return n;
}

/* From the middle of the longest stretch that is open. */
static double guess(const struct sorted *s)
{
    size_t longest = 0;
    for (size_t set = 1; set < s->sets; set++)
        if (s->high[set] - s->low[set] > s->high[longest] - s->low[longest])
            longest = set;
    return value_at(s, longest, s->low[longest] + (s->high[longest] - s->low[longest]) / 2);
}

static void narrow(const struct sorted *s, size_t *end, const size_t *at)
{
    memcpy(end, at, s->sets * sizeof *end);
}

/* The k-th of all values, from 0, which is open; *rank is how many are not above it. */
static double value_of_rank(const struct sorted *s, size_t k, size_t *rank)
{
    for (;;) {
        double x = guess(s);
        if (k < count_all_below(s, x)) {
            narrow(s, s->high, s->below);
            continue;
        }
        *rank = count_all_upto(s, x);
        if (k < *rank)
            return x;
        narrow(s, s->low, s->upto);
    }
}

/* The least one above the value that was found last. */
static double value_behind(const struct sorted *s)
{
    double least = INFINITY;
    for (size_t set = 0; set < s->sets; set++)
        if (s->upto[set] < s->points && value_at(s, set, s->upto[set]) < least)
            least = value_at(s, set, s->upto[set]);
    return least;
}

/* ---- quantiles ---- */

/* Of n values the k-th stands at (k + 1/2) / n: how far behind which one p is. */
struct place {
    size_t k;
    double part;
};

static struct place place_of(size_t n, double p)
{
    double at = p * (double)n - 0.5;
    if (at <= 0)
        return (struct place){0, 0};
    if (at >= (double)(n - 1))
        return (struct place){n - 1, 0};
    return (struct place){(size_t)at, at - (double)(size_t)at};
}

static double quantile_of_all(const struct sorted *s, double p)
{
    struct place at = place_of(s->sets * s->points, p);
    for (size_t set = 0; set < s->sets; set++) {
        s->low[set] = 0;
        s->high[set] = s->points;
    }
    size_t rank;
    double x = value_of_rank(s, at.k, &rank);
    double next = at.k + 1 < rank ? x : value_behind(s);
    return at.part > 0 ? x + at.part * (next - x) : x;
}

static double quantile_of_set(const struct sorted *s, size_t set, double p)
{
    struct place at = place_of(s->points, p);
    double x = value_at(s, set, at.k);
    return at.part > 0 ? x + at.part * (value_at(s, set, at.k + 1) - x) : x;
}

void statistics_quantiles(struct arena *a, size_t sets, size_t points, const double *x, size_t n,
                          const double *p, struct sampled *out)
{
    struct arena *scratch = arena_child(a);
    struct sorted s = sorted_new(scratch, sets, points, x);
    for (size_t k = 0; k < n; k++) {
        double squares = 0, q = quantile_of_all(&s, p[k]);
        for (size_t set = 0; set < sets; set++) {
            double away = quantile_of_set(&s, set, p[k]) - q;
            squares += away * away;
        }
        out[k] = (struct sampled){q, sqrt(squares / (double)sets / (double)(sets - 1))};
    }
    arena_free(scratch);
}
