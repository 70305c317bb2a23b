/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Long sums of a tape in parts, each as soon as its terms are there: a sum over all hazards must
 * not keep the terms of all of them. What is carried from part to part is the sum and what rounding
 * has lost of it, so that the sum is what it was. Owns nothing. */
#include "eval/tape_kernels.h"

/* Terms of a part; sums of fewer than twice as many stay whole. */
enum { TERMS = 8 };

struct splitter {
    struct tape_maker *m;
    uint32_t *maker; /* the step that makes each value, or TAPE_NONE: an input */
    ARRAY(struct tape_step) parts;
    ARRAY(uint32_t) behind; /* the step that each part comes after */
};

static bool ends_term(unsigned c)
{
    return c == TAPE_add || c == TAPE_add_one || c == TAPE_add_product;
}

static size_t count_terms(const struct tape_step *s)
{
    size_t n = 0;
    for (size_t i = 0; i < s->codes.n; i++)
        n += ends_term(s->codes.at[i]);
    return n;
}

static void find_makers(struct splitter *sp)
{
    struct tape_maker *m = sp->m;
    sp->maker = NEW_ARRAY(m->arena, m->n_values, uint32_t);
    for (size_t i = 0; i < m->n_values; i++)
        sp->maker[i] = TAPE_NONE;
    for (size_t i = 0; i < m->tape->steps.n; i++)
        for (size_t k = 0; k < m->tape->steps.at[i].to.n; k++)
            sp->maker[m->tape->steps.at[i].to.at[k]] = (uint32_t)i;
}

static void begin_part(struct splitter *sp, const struct tape_step *s, const uint32_t *carried)
{
    struct arena *a = sp->m->tape->arena;
    struct tape_step part = {.run = s->run, .node = s->node, .room = TAPE_NONE};
    *array_push(a, &part.codes) = carried ? TAPE_resume : TAPE_begin_sum;
    for (int k = 0; carried && k < 2; k++)
        *array_push(a, &part.args) = carried[k];
    *array_push(sp->m->arena, &sp->parts) = part;
    uint32_t behind = carried ? *array_last(&sp->behind) : 0;
    *array_push(sp->m->arena, &sp->behind) = behind;
}

static void put_code(struct splitter *sp, const struct tape_step *s, size_t i, size_t *arg)
{
    struct arena *a = sp->m->tape->arena;
    struct tape_step *part = array_last(&sp->parts);
    uint32_t *behind = array_last(&sp->behind);
    *array_push(a, &part->codes) = s->codes.at[i];
    for (size_t n = tape_operands((enum tape_code)s->codes.at[i]); n > 0; n--) {
        uint32_t value = s->args.at[(*arg)++];
        *array_push(a, &part->args) = value;
        if (!(value & TAPE_CONSTANT) && sp->maker[value] != TAPE_NONE && sp->maker[value] > *behind)
            *behind = sp->maker[value];
    }
}

/* Ends a part with what the next one begins with. */
static void end_part(struct splitter *sp, const struct tape_step *s)
{
    struct arena *a = sp->m->tape->arena;
    struct tape_step *part = array_last(&sp->parts);
    uint32_t carried[2];
    *array_push(a, &part->codes) = TAPE_end_part;
    for (int k = 0; k < 2; k++)
        *array_push(a, &part->to) = carried[k] = sp->m->n_values++;
    begin_part(sp, s, carried);
}

/* The step itself becomes the last part. */
static void split(struct splitter *sp, struct tape_step *s)
{
    size_t left = count_terms(s), in_part = 0, arg = 0;
    if (left < 2 * (size_t)TERMS || s->codes.at[0] != TAPE_begin_sum)
        return;
    begin_part(sp, s, NULL);
    for (size_t i = 1; i < s->codes.n; i++) {
        put_code(sp, s, i, &arg);
        if (!ends_term(s->codes.at[i]))
            continue;
        in_part++;
        left--;
        if (in_part == TERMS && left > 0) {
            end_part(sp, s);
            in_part = 0;
        }
    }
    struct tape_step *last = &sp->parts.at[--sp->parts.n];
    sp->behind.n--;
    s->codes = last->codes;
    s->args = last->args;
}

/* Steps in their order, each with the parts that come after it; parts of one sum stay in order. */
static void insert_parts(struct splitter *sp)
{
    struct tape *t = sp->m->tape;
    size_t n = t->steps.n, n_parts = sp->parts.n, at = 0;
    size_t *first = NEW_ARRAY(sp->m->arena, n + 1, size_t);
    uint32_t *order = NEW_ARRAY(sp->m->arena, n_parts, uint32_t);
    struct tape_step *steps = NEW_ARRAY(t->arena, n + n_parts, struct tape_step);
    for (size_t k = 0; k < n_parts; k++)
        first[sp->behind.at[k] + 1]++;
    for (size_t i = 0; i < n; i++)
        first[i + 1] += first[i];
    size_t *next = arena_copy(sp->m->arena, first, (n + 1) * sizeof *first);
    for (uint32_t k = 0; k < n_parts; k++)
        order[next[sp->behind.at[k]]++] = k;
    for (size_t i = 0; i < n; i++) {
        steps[at++] = t->steps.at[i];
        for (size_t k = first[i]; k < first[i + 1]; k++)
            steps[at++] = sp->parts.at[order[k]];
    }
    t->steps.at = steps;
    t->steps.n = t->steps.cap = at;
}

void tape_split(struct tape_maker *m)
{
    struct splitter sp = {.m = m};
    find_makers(&sp);
    for (size_t i = 0; i < m->tape->steps.n; i++)
        split(&sp, &m->tape->steps.at[i]);
    if (sp.parts.n)
        insert_parts(&sp);
}
