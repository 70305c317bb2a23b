/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing a world and enumerating it. Knows nothing of the program but arena and text. */
#include "figure_world.h"

#include <string.h>

/* --- drawing --- */

static bool one_in(struct world *w, size_t n)
{
    return random_index(&w->random, n) == 0;
}

/* From one in ten million to one half; now and then surely sound or surely failed. */
static double random_failure(struct world *w)
{
    switch (random_index(&w->random, 24)) {
    case 0: return 0;
    case 1: return 1;
    case 2: return random_uniform(&w->random, 0.5, 1);
    default: return random_log_uniform(&w->random, 1e-7, 0.5);
    }
}

static void draw_elements(struct world *w)
{
    for (size_t t = 0; t < TYPES; t++)
        w->type_q[t] = random_failure(w);
    for (size_t i = 0; i < w->n_elements; i++) {
        w->type[i] = one_in(w, 4) ? random_index(&w->random, TYPES) : TYPES;
        w->q[i] = w->type[i] < TYPES ? w->type_q[w->type[i]] : random_failure(w);
    }
}

static struct part *leaf(struct world *w, size_t schemes)
{
    struct part *p = NEW(w->arena, struct part);
    p->op = schemes && one_in(w, 3) ? PART_SCHEME : PART_ELEMENT;
    p->index = random_index(&w->random, p->op == PART_SCHEME ? schemes : w->n_elements);
    return p;
}

static bool same_leaf(const struct part *p, const struct part *q)
{
    return p->op == q->op && p->op != PART_AT_LEAST && p->index == q->index;
}

/* k of n parts, no name twice among them. */
static struct part *draw_part(struct world *w, size_t schemes, int depth)
{
    struct part *p = NEW(w->arena, struct part);
    size_t want = 1 + random_index(&w->random, 4);
    p->op = PART_AT_LEAST;
    p->of = NEW_ARRAY(w->arena, want, struct part *);
    for (size_t i = 0; i < want; i++) {
        bool deep = depth > 0 && one_in(w, 3);
        struct part *q = deep ? draw_part(w, schemes, depth - 1) : leaf(w, schemes);
        size_t k = 0;
        while (k < p->n && !same_leaf(p->of[k], q))
            k++;
        if (k == p->n)
            p->of[p->n++] = q;
    }
    p->k = 1 + random_index(&w->random, p->n);
    return p;
}

static void draw_schemes(struct world *w)
{
    w->n_schemes = 2 + random_index(&w->random, SCHEMES - 1);
    for (size_t i = 0; i < w->n_schemes; i++)
        w->scheme[i] = one_in(w, 9) ? NULL : draw_part(w, i, 2);
}

/* What clears a row or is asked for: mostly a scheme, and rather one that holds others. */
static struct part *draw_function(struct world *w)
{
    struct part *p = NEW(w->arena, struct part);
    p->op = one_in(w, 6) ? PART_ELEMENT : PART_SCHEME;
    size_t a = random_index(&w->random, w->n_schemes), b = random_index(&w->random, w->n_schemes);
    p->index = p->op == PART_ELEMENT ? random_index(&w->random, w->n_elements) : a > b ? a : b;
    return p;
}

static struct twig *draw_twig(struct world *w, size_t row, const char *path, int depth);

/* Shares with a rest of at least 1/10, so that the rest keeps its digits; or two halves. */
static void draw_split(struct world *w, struct twig *t, size_t row, const char *path, int depth)
{
    t->n = 2 + random_index(&w->random, 2);
    t->rest = random_index(&w->random, t->n);
    for (size_t i = 0; i < t->n; i++)
        t->share[i] = i == t->rest ? -1 : random_log_uniform(&w->random, 1e-6, 0.45);
    if (t->n == 2 && one_in(w, 3)) {
        t->share[0] = t->share[1] = 0.5;
        t->rest = t->n;
    }
    for (size_t i = 0; i < t->n; i++)
        t->child[i] = draw_twig(w, row, arena_printf(w->arena, "%s.b%zu", path, i), depth - 1);
}

static struct twig *draw_twig(struct world *w, size_t row, const char *path, int depth)
{
    struct twig *t = NEW(w->arena, struct twig);
    size_t what = depth > 0 ? random_index(&w->random, 5) : 4;
    if (what == 0) {
        t->kind = TWIG_SPLIT;
        draw_split(w, t, row, path, depth);
    } else if (what == 1) {
        t->kind = TWIG_QUESTION;
        t->question = draw_function(w);
        t->child[0] = draw_twig(w, row, arena_printf(w->arena, "%s.yes", path), depth - 1);
        t->child[1] = draw_twig(w, row, arena_printf(w->arena, "%s.no", path), depth - 1);
    } else {
        t->kind = TWIG_OUTCOME;
        t->outcome = random_index(&w->random, w->n_outcomes + 1);
        t->end = w->n_ends++;
        w->end[t->end] = (struct world_end){path, row, t->outcome, 0};
    }
    return t;
}

/* Clearance times differ; the order on the page is not that of the times. */
static void draw_rows(struct world *w)
{
    static const double times[] = {0.04, 0.1, 0.25, 0.5, 0.8, 1.1, 2.4, 60};
    size_t shift = random_index(&w->random, 8), step = 1 + 2 * random_index(&w->random, 4);
    w->n_rows = 1 + random_index(&w->random, ROWS);
    for (size_t i = 0; i < w->n_rows; i++) {
        const char *path = arena_printf(w->arena, "r%zu", i);
        w->row[i].cleared_by = draw_function(w);
        w->row[i].seconds = times[(shift + step * i) % 8];
        w->row[i].sees = one_in(w, 2) ? random_uniform(&w->random, 0.3, 1) : -1;
        w->row[i].then = draw_twig(w, i, path, 2);
        w->order[i] = i;
        for (size_t k = i; k > 0 && w->row[w->order[k - 1]].seconds > w->row[i].seconds; k--) {
            w->order[k] = w->order[k - 1];
            w->order[k - 1] = i;
        }
    }
    w->row[w->n_rows].seconds = 180;
    w->row[w->n_rows].sees = -1;
    w->row[w->n_rows].then = draw_twig(w, w->n_rows, "never", 2);
    w->order[w->n_rows] = w->n_rows;
}

static void draw_items(struct world *w)
{
    for (size_t o = 0; o < w->n_outcomes; o++) {
        w->n_items[o] = random_index(&w->random, ITEMS + 1);
        for (size_t i = 0; i < w->n_items[o]; i++) {
            struct world_item *x = &w->item[o][i];
            static const double bounds[BOUNDS] = {0.1, 0.5, 1.25};
            x->kind = (int)random_index(&w->random, 3);
            x->category = random_index(&w->random, 3);
            x->euros = random_log_uniform(&w->random, 1, 1e6);
            for (size_t k = 0; k < BOUNDS; k++) {
                x->bound[k] = bounds[k];
                x->step[k] = random_log_uniform(&w->random, 1, 1e6);
            }
        }
    }
}

struct world *world_random(struct arena *a, uint64_t seed, size_t elements)
{
    struct world *w = NEW(a, struct world);
    w->arena = a;
    w->random = random_seed(seed);
    w->n_elements = elements;
    w->n_outcomes = 1 + random_index(&w->random, OUTCOMES);
    w->frequency = random_log_uniform(&w->random, 1e-4, 3);
    draw_elements(w);
    draw_schemes(w);
    draw_rows(w);
    draw_items(w);
    return w;
}

/* --- enumeration --- */

struct state {
    const struct world *world;
    uint32_t failed; /* bit i: element i */
    bool works[SCHEMES];
};

static bool part_works(const struct state *s, const struct part *p)
{
    if (p->op == PART_ELEMENT)
        return !(s->failed >> p->index & 1);
    if (p->op == PART_SCHEME)
        return s->works[p->index];
    size_t n = 0;
    for (size_t i = 0; i < p->n; i++)
        n += part_works(s, p->of[i]);
    return n >= p->k;
}

static quad share_of(const struct twig *t, size_t i)
{
    quad others = 0;
    if (i != t->rest)
        return t->share[i];
    for (size_t k = 0; k < t->n; k++)
        others += k == i ? 0 : (quad)t->share[k];
    return 1 - others;
}

static void spread(struct world *w, const struct state *s, const struct twig *t, quad p)
{
    if (t->kind == TWIG_OUTCOME)
        w->end[t->end].probability += p;
    else if (t->kind == TWIG_QUESTION)
        spread(w, s, t->child[part_works(s, t->question) ? 0 : 1], p);
    for (size_t i = 0; t->kind == TWIG_SPLIT && i < t->n; i++)
        spread(w, s, t->child[i], p * share_of(t, i));
}

/* One state of the elements, of probability p: row by row, what is seen and what is not. */
static void respond(struct world *w, const struct state *s, quad p)
{
    for (size_t i = 0; i <= w->n_rows; i++) {
        const struct world_row *row = &w->row[w->order[i]];
        if (row->cleared_by && !part_works(s, row->cleared_by))
            continue;
        quad seen = row->sees < 0 ? 1 : (quad)row->sees;
        spread(w, s, row->then, p * seen);
        p *= 1 - seen;
    }
}

void world_enumerate(struct world *w)
{
    size_t n = (size_t)1 << w->n_elements;
    quad *weight = NEW_ARRAY(w->arena, n, quad);
    weight[0] = 1;
    for (size_t i = 0; i < w->n_elements; i++)
        for (size_t k = 0; k < (size_t)1 << i; k++) {
            weight[k | (size_t)1 << i] = weight[k] * w->q[i];
            weight[k] *= 1 - (quad)w->q[i];
        }
    for (size_t k = 0; k < n; k++) {
        struct state s = {.world = w, .failed = (uint32_t)k};
        for (size_t i = 0; i < w->n_schemes; i++) {
            s.works[i] = w->scheme[i] && part_works(&s, w->scheme[i]);
            w->scheme_fails[i] += s.works[i] ? 0 : weight[k];
        }
        respond(w, &s, weight[k]);
    }
}

/* --- damage --- */

static quad item_damage(const struct world_item *x, double seconds)
{
    if (x->kind == ITEM_PLAIN)
        return x->euros;
    if (x->kind == ITEM_TIMED)
        return (quad)x->euros * seconds;
    size_t k = 0;
    while (k + 1 < BOUNDS && seconds >= x->bound[k + 1])
        k++;
    return x->step[k];
}

quad world_damage(const struct world *w, size_t end, unsigned categories)
{
    const struct world_end *e = &w->end[end];
    quad sum = 0;
    for (size_t i = 0; e->outcome < w->n_outcomes && i < w->n_items[e->outcome]; i++) {
        const struct world_item *x = &w->item[e->outcome][i];
        if (categories >> x->category & 1)
            sum += item_damage(x, w->row[e->row].seconds);
    }
    return sum;
}

bool world_is_damaging(const struct world *w, size_t outcome, unsigned categories)
{
    for (size_t i = 0; i < w->n_items[outcome]; i++)
        if (categories >> w->item[outcome][i].category & 1)
            return true;
    return false;
}

bool world_is_timed(const struct world *w, size_t outcome, unsigned categories)
{
    for (size_t i = 0; i < w->n_items[outcome]; i++) {
        const struct world_item *x = &w->item[outcome][i];
        if (categories >> x->category & 1 && x->kind != ITEM_PLAIN)
            return true;
    }
    return false;
}
