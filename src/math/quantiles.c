/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantiles of a sample (statistics.h): sets are sorted, some side by side (math/columns.h), and
 * what stands at a place among all values is searched for in the sorted sets. Owns nothing beyond
 * its scratch. */
#include "math/columns.h"
#include "math/statistics.h"

#include <math.h>

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
    size_t *low, *high; /* by set: which values may still be those that are looked for */
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
    for (size_t set = 0; set < sets; set++)
        for (size_t i = 0; i < points; i++)
            s.rows[set / COLUMNS_TOGETHER * points + i][set % COLUMNS_TOGETHER] =
                x[set * points + i];
    for (size_t b = 0; b < blocks; b++)
        kernels[isa_best()]->sort(points, s.rows + b * points);
    return s;
}

/* ---- the k-th of all ---- */

/* How many of a set's values are below x, or not above it, as far as that is open. */
static size_t count_below(const struct sorted *s, size_t set, double x, bool and_equal)
{
    size_t low = s->low[set], high = s->high[set];
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        double y = value_at(s, set, middle);
        if (y < x || (and_equal && y == x))
            low = middle + 1;
        else
            high = middle;
    }
    return low;
}

static size_t count_all(const struct sorted *s, double x, bool and_equal)
{
    size_t n = 0;
    for (size_t set = 0; set < s->sets; set++)
        n += count_below(s, set, x, and_equal);
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

/* The k-th of all values, from 0; what is open beforehand holds it. */
static double value_of_rank(const struct sorted *s, size_t k)
{
    for (;;) {
        double x = guess(s);
        bool is_below = k < count_all(s, x, false);
        if (!is_below && k < count_all(s, x, true))
            return x;
        for (size_t set = 0; set < s->sets; set++) {
            size_t *end = is_below ? &s->high[set] : &s->low[set];
            *end = count_below(s, set, x, !is_below);
        }
    }
}

/* The same for the one that follows it, where x is the k-th. */
static double value_behind(const struct sorted *s, size_t k, double x)
{
    double least = INFINITY;
    if (k + 1 < count_all(s, x, true))
        return x;
    for (size_t set = 0; set < s->sets; set++) {
        size_t next = count_below(s, set, x, true);
        if (next < s->points && value_at(s, set, next) < least)
            least = value_at(s, set, next);
    }
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
    double x = value_of_rank(s, at.k);
    return at.part > 0 ? x + at.part * (value_behind(s, at.k, x) - x) : x;
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
