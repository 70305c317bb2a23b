/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Long sums of a tape in parts, each as soon as its terms are there: a sum over thousands of things
 * must not keep the terms of all of them. What is carried from part to part is the sum and what
 * rounding has lost of it, so that the sum is what it was. Owns nothing. */
#include "eval/tape_kernels.h"

/* Terms of a part; sums of fewer than twice as many stay whole. */
enum { TERMS = 8 };

struct splitter {
    struct tape_maker *m;
    ARRAY(struct tape_step) parts;
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

static void begin_part(struct splitter *sp, const struct tape_step *s, const uint32_t *carried)
{
    struct arena *a = sp->m->tape->arena;
    struct tape_step part = {.run = s->run, .node = s->node, .room = TAPE_NONE};
    *array_push(a, &part.codes) = carried ? TAPE_resume : TAPE_begin_sum;
    for (int k = 0; carried && k < 2; k++)
        *array_push(a, &part.args) = carried[k];
    *array_push(sp->m->arena, &sp->parts) = part;
}

static void put_code(struct splitter *sp, const struct tape_step *s, size_t i, size_t *arg)
{
    struct arena *a = sp->m->tape->arena;
    struct tape_step *part = array_last(&sp->parts);
    *array_push(a, &part->codes) = s->codes.at[i];
    for (size_t n = tape_operands((enum tape_code)s->codes.at[i]); n > 0; n--)
        *array_push(a, &part->args) = s->args.at[(*arg)++];
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
    s->codes = last->codes;
    s->args = last->args;
}

/* The parts come behind all other steps: tape_order puts them where they belong. */
void tape_split(struct tape_maker *m)
{
    struct splitter sp = {.m = m};
    struct tape *t = m->tape;
    for (size_t i = 0; i < t->steps.n; i++)
        split(&sp, &t->steps.at[i]);
    for (size_t i = 0; i < sp.parts.n; i++)
        *array_push(t->arena, &t->steps) = sp.parts.at[i];
}
