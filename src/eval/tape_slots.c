/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where the values of a tape are kept: a slot is used again after its last reader, also by what
 * that reader itself makes. A root is written into its own row at once. Owns nothing. */
#include "eval/tape_parts.h"

/* A row of the caller's in place of a slot. */
static void place_roots(struct tape_maker *m, uint32_t *row)
{
    for (size_t k = 0; k < m->roots.n; k++) {
        uint32_t value = m->roots.at[k];
        if (!(value & TAPE_CONSTANT) && value >= m->tape->n_in && row[value] == TAPE_NONE)
            row[value] = (uint32_t)(m->tape->n_in + k) | TAPE_CONSTANT;
    }
}

/* The last step that reads each value. */
static uint32_t *find_last(struct tape_maker *m)
{
    uint32_t *last = NEW_ARRAY(m->arena, m->n_values, uint32_t);
    for (size_t i = 0; i < m->tape->steps.n; i++) {
        const struct tape_step *s = &m->tape->steps.at[i];
        for (size_t k = 0; k < s->args.n; k++)
            if (!(s->args.at[k] & TAPE_CONSTANT))
                last[s->args.at[k]] = (uint32_t)i;
        for (size_t k = 0; k < s->to.n; k++)
            last[s->to.at[k]] = (uint32_t)i;
    }
    return last;
}

/* Slots that stand free: the one that was left last is taken first. */
struct slots {
    struct tape_maker *m;
    struct tape_rows free;
    uint32_t *row, *last;
};

static void leave(struct slots *s, uint32_t value, size_t step)
{
    if (value & TAPE_CONSTANT || value < s->m->tape->n_in || s->last[value] != step)
        return;
    s->last[value] = TAPE_NONE; /* once */
    if (!(s->row[value] & TAPE_CONSTANT) && !s->m->how.keeps_slots)
        *array_push(s->m->arena, &s->free) = s->row[value];
}

static void take(struct slots *s, uint32_t value)
{
    if (s->row[value] != TAPE_NONE)
        return;
    if (s->free.n)
        s->row[value] = s->free.at[--s->free.n];
    else
        s->row[value] = (uint32_t)s->m->tape->n_slots++;
}

static void place_values(struct slots *s)
{
    struct tape *t = s->m->tape;
    for (size_t i = 0; i < t->steps.n; i++) {
        const struct tape_step *step = &t->steps.at[i];
        for (size_t k = 0; k < step->args.n; k++)
            leave(s, step->args.at[k], i);
        for (size_t k = 0; k < step->to.n; k++)
            take(s, step->to.at[k]);
        for (size_t k = 0; k < step->to.n; k++)
            leave(s, step->to.at[k], i);
    }
}

/* From the number of a value to that of its row, now that the number of slots is known. */
static uint32_t row_of(const struct tape *t, const uint32_t *row, uint32_t value)
{
    uint32_t slots = (uint32_t)t->n_slots, in = (uint32_t)t->n_in;
    if (value == TAPE_NONE)
        return TAPE_NONE;
    if (value & TAPE_CONSTANT)
        return (value & ~TAPE_CONSTANT) + slots + in + (uint32_t)t->n_roots;
    if (value < in)
        return slots + value;
    return row[value] & TAPE_CONSTANT ? slots + (row[value] & ~TAPE_CONSTANT) : row[value];
}

static void rename_all(const struct tape *t, const uint32_t *row, struct tape_rows *values)
{
    for (size_t k = 0; k < values->n; k++)
        values->at[k] = row_of(t, row, values->at[k]);
}

void tape_place(struct tape_maker *m)
{
    struct tape *t = m->tape;
    struct slots s = {.m = m, .row = NEW_ARRAY(m->arena, m->n_values, uint32_t)};
    for (uint32_t i = 0; i < m->n_values; i++)
        s.row[i] = TAPE_NONE;
    place_roots(m, s.row);
    s.last = find_last(m);
    place_values(&s);
    for (size_t i = 0; i < t->steps.n; i++) {
        rename_all(t, s.row, &t->steps.at[i].args);
        rename_all(t, s.row, &t->steps.at[i].to);
        t->steps.at[i].first_constant = (uint32_t)(t->n_slots + t->n_in + t->n_roots);
    }
    for (size_t k = 0; k < m->roots.n; k++)
        *array_push(t->arena, &t->roots) = row_of(t, s.row, m->roots.at[k]);
}
