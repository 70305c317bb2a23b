/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The pieces of windows between the resets of courses (average.h), and where each course is in
 * them. They depend on no value: where there will be a next time, the first ones are kept. Owns
 * their arrays in the arena of the averages. */
#include "graph/average_parts.h"

#include <math.h>
#include <string.h>

/* What the stretches of kept pieces and the pieces themselves may take. */
static const size_t MOST_BYTES = 96 * 1024;

double average_grain(struct window w)
{
    return 1e-12 * fmax(fabs(w.from), fabs(w.to));
}

double average_piece_end(size_t n, const struct course *const *courses, struct window w, double at)
{
    double grain = average_grain(w), end = w.to;
    for (size_t i = 0; i < n; i++)
        end = fmin(end, course_stretch(courses[i], at + grain).next);
    return end < w.to - grain ? end : w.to;
}

static struct piece piece_at(const struct averages *v, size_t index, size_t window, double begin,
                             struct stretch *now)
{
    struct window w = v->windows.at[window];
    for (size_t i = 0; i < v->n_timings; i++)
        now[i] = course_stretch(v->courses[i], begin + average_grain(w));
    double end = average_piece_end(v->n_timings, v->courses, w, begin);
    return (struct piece){index, window, begin, end, now};
}

/* How many pieces there are, up to the most that are kept. */
static size_t count_pieces(const struct averages *v, size_t most)
{
    size_t n = 0;
    for (size_t k = 0; k < v->windows.n; k++) {
        struct window w = v->windows.at[k];
        for (double at = w.from; at < w.to && n < most; n++)
            at = average_piece_end(v->n_timings, v->courses, w, at);
    }
    return n;
}

static void keep_pieces(struct averages *v, size_t n)
{
    struct stretch *now = NEW_ARRAY(v->arena, n * v->n_timings, struct stretch);
    v->pieces = NEW_ARRAY(v->arena, n, struct piece);
    for (size_t k = 0; k < v->windows.n; k++) {
        struct window w = v->windows.at[k];
        for (double at = w.from; at < w.to && v->n_pieces < n; now += v->n_timings) {
            struct piece p = piece_at(v, v->n_pieces, k, at, now);
            v->pieces[v->n_pieces++] = p;
            at = p.end;
        }
    }
}

void averages_make_pieces(struct averages *v)
{
    size_t each = sizeof(struct piece) + v->n_timings * sizeof(struct stretch);
    size_t most = MOST_BYTES / each, n = v->keeps && v->n_timings ? count_pieces(v, most) : 0;
    keep_pieces(v, n);
    if (n == 0 || n == most)
        v->passing = NEW_ARRAY(v->arena, (LANES + 1) * v->n_timings, struct stretch);
}

/* The stretches of one that is not kept stay until so many more have come that none of them is in
 * the set that is gathered. */
struct piece averages_next_piece(struct averages *v, size_t index, size_t window, double begin)
{
    if (index < v->n_pieces)
        return v->pieces[index];
    struct stretch *now = v->passing + v->n_passing++ % (LANES + 1) * v->n_timings;
    return piece_at(v, index, window, begin, now);
}
