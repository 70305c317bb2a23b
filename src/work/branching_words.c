/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Points and branches of a decision in several stages, in words. Owns nothing. */
#include "work/branching.h"

enum { MOST_READINGS = 4 /* in one sentence */ };

const struct way *first_way(const struct branching *b, const struct alternative *x)
{
    const struct point *p = &b->points.at[0];
    for (size_t k = 0; p->kind == POINT_CHOOSE && x->n && k < p->n; k++)
        if (text_equal(p->branches[k].label, x->options[0]))
            return &p->branches[k];
    return NULL;
}

/* Of a point at which one chooses, the branch to take; else NULL. */
static const struct way *taken_at(const struct branching *b, size_t point)
{
    const struct point *p = &b->points.at[point];
    return p->kind == POINT_CHOOSE && p->n ? &p->branches[p->best] : NULL;
}

const char *way_words(struct job *j, const struct branching *b, const struct way *x)
{
    const struct way *taken = taken_at(b, x->to);
    if (!taken)
        return *x->steps ? x->steps : "go on as it is";
    return *x->steps ? arena_printf(j->arena, "%s, then %s", x->steps, taken->label) : taken->label;
}

const char *way_words_long(struct job *j, const struct branching *b, const struct way *x)
{
    const struct way *taken = taken_at(b, x->to);
    if (!taken || !*taken->steps)
        return way_words(j, b, x);
    return arena_printf(j->arena, "%s: %s", way_words(j, b, x), taken->steps);
}

static void say_branch(struct job *j, struct text *t, const struct branching *b,
                       const struct point *p, size_t k, bool first)
{
    const struct way *x = &p->branches[k];
    const char *probability = percent_words(j, x->probability);
    if (p->kind == POINT_READ && first)
        text_printf(t, "After a reading \"%s\" of %s", x->label, p->test);
    else if (p->kind == POINT_READ)
        text_printf(t, ", after \"%s\"", x->label);
    else
        text_printf(t, "%s \"%s\"", first ? "Where chance brings" : ", where it brings", x->label);
    text_printf(t, " (%s) %s", probability, way_words(j, b, x));
}

const char *following_sentence(struct job *j, const struct branching *b, const struct way *x)
{
    const struct way *taken = x ? taken_at(b, x->to) : NULL;
    const struct point *p;
    struct text t;
    text_init(&t, j->arena);
    if (taken) {
        text_printf(&t, "Then %s. ", taken->label);
        x = taken;
    }
    if (!x)
        return "";
    p = &b->points.at[x->to];
    if (p->kind != POINT_READ && p->kind != POINT_CHANCE)
        return text_str(&t);
    for (size_t k = 0; k < p->n && k < MOST_READINGS; k++)
        say_branch(j, &t, b, p, k, k == 0);
    if (p->n > MOST_READINGS)
        text_printf(&t, "; the table of what to do has %zu more", p->n - MOST_READINGS);
    text_byte(&t, '.');
    return text_str(&t);
}
