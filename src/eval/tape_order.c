/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The order of the steps of a tape: each root is worked out with all that it asks for before the
 * next one, so that what only it asks for is not kept for long. The order of nodes, where whole
 * sections come before those that read them, keeps far more. Owns nothing. */
#include "eval/tape_parts.h"

/* A step that is being visited, and how many of its arguments were. */
struct opened {
    uint32_t step, next;
};

struct orderer {
    const struct tape_maker *m;
    uint32_t *maker; /* the step that makes each value, or TAPE_NONE: an input */
    bool *is_met;    /* each step */
    ARRAY(struct opened) open;
    struct tape_step *to;
    size_t n;
};

static uint32_t *find_makers(const struct tape_maker *m)
{
    uint32_t *maker = NEW_ARRAY(m->arena, m->n_values, uint32_t);
    for (size_t i = 0; i < m->n_values; i++)
        maker[i] = TAPE_NONE;
    for (size_t i = 0; i < m->tape->steps.n; i++)
        for (size_t k = 0; k < m->tape->steps.at[i].to.n; k++)
            maker[m->tape->steps.at[i].to.at[k]] = (uint32_t)i;
    return maker;
}

static void open_maker(struct orderer *o, uint32_t value)
{
    if (value & TAPE_CONSTANT || o->maker[value] == TAPE_NONE || o->is_met[o->maker[value]])
        return;
    o->is_met[o->maker[value]] = true;
    *array_push(o->m->arena, &o->open) = (struct opened){.step = o->maker[value]};
}

/* A step comes behind all whose results it reads. */
static void visit(struct orderer *o, uint32_t value)
{
    const struct tape_step *steps = o->m->tape->steps.at;
    open_maker(o, value);
    while (o->open.n) {
        struct opened *last = array_last(&o->open);
        const struct tape_step *s = &steps[last->step];
        if (last->next < s->args.n) {
            open_maker(o, s->args.at[last->next++]);
        } else {
            o->to[o->n++] = *s;
            o->open.n--;
        }
    }
}

void tape_order(struct tape_maker *m)
{
    struct tape *t = m->tape;
    struct orderer o = {.m = m, .maker = find_makers(m)};
    o.is_met = NEW_ARRAY(m->arena, t->steps.n, bool);
    o.to = NEW_ARRAY(t->arena, t->steps.n, struct tape_step);
    for (size_t k = 0; k < m->roots.n; k++)
        visit(&o, m->roots.at[k]);
    t->steps.at = o.to;
    t->steps.n = t->steps.cap = o.n;
}
