/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Running a tape, and its work space (tape.h). Whole groups of lanes are read from and written to
 * the caller's rows; a broken group at the end is copied into rows of the work space, where its
 * last lane fills what is missing. */
#include "eval/tape_parts.h"

#include <assert.h>
#include <string.h>

/* What the slots may take of the first cache, and how few or many lanes are worth a step. */
enum { CACHE = 24 * 1024, FEWEST = 64, MOST = 512 };

/* Doubles in a line of the cache. */
enum { LINE = 8 };

size_t tape_block(const struct tape *t)
{
    size_t n = t->n_slots ? CACHE / sizeof(double) / t->n_slots : MOST;
    n -= n % TAPE_GROUP;
    return n < FEWEST ? FEWEST : n > MOST ? MOST : n;
}

/* Rows begin with a line of the cache, and each with another of its sets, so that the same lane of
 * two rows never is at the same place of two pages. */
static double **new_rows(struct arena *a, size_t n, size_t length)
{
    double **row = NEW_ARRAY(a, n, double *);
    size_t step = length + LINE;
    double *all = NEW_ARRAY(a, n * step + LINE, double);
    size_t beyond = (uintptr_t)all / sizeof *all % LINE;
    for (size_t i = 0; i < n; i++)
        row[i] = all + (LINE - beyond) + i * step;
    return row;
}

static size_t whole_groups(size_t n)
{
    return n - n % TAPE_GROUP;
}

struct tape_work *tape_work_new(struct arena *a, const struct tape *t, size_t block)
{
    struct tape_work *w = NEW(a, struct tape_work);
    *w = (struct tape_work){.tape = t, .block = block, .constant = t->constants.at};
    w->row = NEW_ARRAY(a, t->n_slots + t->n_in + t->n_roots, double *);
    w->slot = new_rows(a, t->n_slots, whole_groups(block + TAPE_GROUP - 1));
    w->spare = new_rows(a, t->n_in + t->n_roots, TAPE_GROUP);
    w->x = NEW_ARRAY(a, t->most_args, double);
    w->room = *new_rows(a, 1, t->most_room);
    w->at = NEW_ARRAY(a, t->most_at, const double *);
    w->averages = NEW_ARRAY(a, t->n_rooms, struct tape_average *);
    for (size_t i = 0; i < t->n_slots; i++)
        w->row[i] = w->slot[i];
    for (size_t i = 0; i < t->steps.n; i++)
        if (t->steps.at[i].room != TAPE_NONE)
            w->averages[t->steps.at[i].room] = tape_average_new(a, &t->steps.at[i], t->isa);
    return w;
}

/* Roots that no step writes: constants, inputs, and what is a root already. */
static void copy_roots(const struct tape *t, const struct tape_work *w, size_t n)
{
    uint32_t first = (uint32_t)(t->n_slots + t->n_in), constants = first + (uint32_t)t->n_roots;
    double *const *row = w->row;
    for (uint32_t k = 0; k < t->n_roots; k++) {
        uint32_t from = t->roots.at[k];
        if (from == first + k)
            continue;
        for (size_t i = 0; i < n; i++)
            row[first + k][i] = from < constants ? row[from][i] : w->constant[from - constants];
    }
}

/* `count` of the n lanes are asked for. */
static void run_steps(const struct tape *t, struct tape_work *w, size_t n, size_t count)
{
    w->count = count;
    for (size_t i = 0; i < t->steps.n; i++)
        t->calls[i].run(&t->calls[i], w, n);
    copy_roots(t, w, count);
}

static void run_whole(const struct tape *t, struct tape_work *w, size_t n, const double *const *in,
                      double *const *out)
{
    double **row = w->row + t->n_slots;
    for (size_t i = 0; i < t->n_in; i++)
        row[i] = (double *)in[i]; /* no step writes it */
    for (size_t k = 0; k < t->n_roots; k++)
        row[t->n_in + k] = out[k];
    run_steps(t, w, n, n);
}

static void run_broken(const struct tape *t, struct tape_work *w, size_t begin, size_t n,
                       const double *const *in, double *const *out)
{
    double **row = w->row + t->n_slots;
    for (size_t i = 0; i < t->n_in + t->n_roots; i++)
        row[i] = w->spare[i];
    for (size_t i = 0; i < t->n_in; i++)
        for (size_t k = 0; k < TAPE_GROUP; k++)
            row[i][k] = in[i][begin + (k < n ? k : n - 1)];
    run_steps(t, w, TAPE_GROUP, n);
    for (size_t k = 0; k < t->n_roots; k++)
        memcpy(out[k] + begin, row[t->n_in + k], n * sizeof *out[k]);
}

void tape_run(const struct tape *t, struct tape_work *w, size_t n, const double *const *in,
              double *const *out)
{
    assert(w->tape == t && n <= w->block);
    size_t whole = whole_groups(n);
    if (whole)
        run_whole(t, w, whole, in, out);
    if (n > whole)
        run_broken(t, w, whole, n - whole, in, out);
}
