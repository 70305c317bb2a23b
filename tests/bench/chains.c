/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing structures like those of protection, and making diagrams of them. Owns nothing. */
#include "chains.h"

#include <assert.h>

struct drawing {
    struct random *r;
    struct chains *c;
    unsigned n_before;              /* elements of schemes before this one: what may be shared */
    uint8_t element[MOST_ELEMENTS]; /* gate of each */
};

static uint8_t add_gate(struct drawing *d, struct gate g)
{
    assert(d->c->n_gates < MOST_GATES);
    d->c->gate[d->c->n_gates] = g;
    return d->c->n_gates++;
}

static uint8_t new_element(struct drawing *d)
{
    uint8_t variable = d->c->n_elements++;
    return d->element[variable] = add_gate(d, (struct gate){.variable = variable});
}

/* All, any or, of three and more, k of n. */
static uint8_t how_many(struct random *r, unsigned n)
{
    switch (random_index(r, n > 2 ? 4 : 3)) {
    case 0:
    case 1: return (uint8_t)n;
    case 2: return 1;
    default: return (uint8_t)random_range(r, 2, n - 1);
    }
}

/* A tree over so many new elements, and now and then one of an earlier scheme. */
static uint8_t new_part(struct drawing *d, unsigned elements)
{
    if (elements == 1)
        return new_element(d);
    struct gate g = {.n = (uint8_t)random_range(d->r, 2, elements < 4 ? elements : 4)};
    for (unsigned i = 0; i < g.n; i++) {
        unsigned after = g.n - 1 - i, most = elements - after;
        unsigned here = after ? (unsigned)random_range(d->r, 1, most) : elements;
        g.part[i] = new_part(d, here);
        elements -= here;
    }
    if (d->n_before && random_index(d->r, 8) == 0)
        g.part[g.n++] = d->element[random_index(d->r, d->n_before)];
    g.k = how_many(d->r, g.n);
    return add_gate(d, g);
}

/* supply and breaker: gates of the first scheme, or NULL for new ones. */
static uint8_t new_scheme(struct drawing *d, unsigned elements, const uint8_t *supply,
                          const uint8_t *breaker)
{
    struct gate g = {.n = 3, .k = 3};
    d->n_before = d->c->n_elements;
    g.part[0] = supply ? *supply : new_element(d);
    g.part[1] = new_part(d, elements - !supply - !breaker);
    g.part[2] = breaker ? *breaker : new_element(d);
    return add_gate(d, g);
}

struct chains chains_draw(struct random *r, unsigned n_elements, unsigned n_schemes)
{
    struct chains c = {.n_schemes = (uint8_t)n_schemes};
    struct drawing d = {.r = r, .c = &c};
    const struct gate *first = NULL;
    assert(n_elements >= 4 * n_schemes && n_elements <= MOST_ELEMENTS);
    for (unsigned i = 0; i < n_schemes; i++) {
        unsigned here = (n_elements - c.n_elements) / (n_schemes - i);
        bool shares_supply = first && random_index(r, 2),
             shares_breaker = first && random_index(r, 3);
        c.scheme[i] = new_scheme(&d, here, shares_supply ? &first->part[0] : NULL,
                                 shares_breaker ? &first->part[2] : NULL);
        first = &c.gate[c.scheme[0]];
    }
    return c;
}

static bfun gate_works(struct diagram_builder *b, const struct gate *g, const bfun *works)
{
    bfun parts[MOST_PARTS];
    if (g->n == 0)
        return diagram_not(b, diagram_variable(b, g->variable));
    for (unsigned i = 0; i < g->n; i++)
        parts[i] = works[g->part[i]];
    return diagram_at_least(b, g->k, g->n, parts);
}

const struct diagram *chains_diagram(struct arena *a, const struct chains *c)
{
    struct arena *scratch = arena_child(a);
    struct diagram_builder *b = diagram_builder_new(scratch);
    bfun works[MOST_GATES], ends[MOST_SCHEMES + 1], none = BFUN_TRUE;
    for (unsigned i = 0; i < c->n_gates; i++)
        works[i] = gate_works(b, &c->gate[i], works);
    for (unsigned i = 0; i < c->n_schemes; i++) {
        bfun f = works[c->scheme[i]];
        ends[i] = diagram_and(b, none, f);
        none = diagram_ite(b, f, BFUN_FALSE, none);
    }
    ends[c->n_schemes] = none;
    const struct diagram *d = diagram_freeze(a, b, c->n_schemes + 1u, ends);
    arena_free(scratch);
    return d;
}
