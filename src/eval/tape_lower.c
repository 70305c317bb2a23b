/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Choosing kernels for the programs of a tape, by their codes and by which operands are constants
 * (tape_kernels.h). Owns nothing. */
#include "eval/tape_kernels.h"

#include <assert.h>
#include <string.h>

/* How many programs are looked through for an equal one. */
enum { LOOK_BACK = 64 };

struct lowering_tape {
    struct arena *arena;
    struct tape *tape;
    const struct tape_kernels *kernels;
    bool by_point;
    ARRAY(const struct tape_program *) programs;
    struct tape_codes codes;
};

static const struct tape_kernels *kernels_of(enum isa isa)
{
    static const struct tape_kernels *const all[ISA_COUNT] = {
#define X(name, needs) &tape_kernels_##name,
        ISAS(X)
#undef X
    };
    return all[isa];
}

/* Which of TAPE_PAIRS, or TAPE_PAIR_COUNT. */
static size_t pair_of(unsigned first, unsigned second)
{
    static const uint8_t pairs[][2] = {
#define X(first, second) {TAPE_##first, TAPE_##second},
        TAPE_PAIRS(X)
#undef X
    };
    size_t i = 0;
    while (i < TAPE_PAIR_COUNT && (pairs[i][0] != first || pairs[i][1] != second))
        i++;
    return i;
}

/* The loop of a short program, in the form of its operands; NULL: there is none. */
static tape_kernel *loop_of(const struct tape_kernels *k, const struct tape_codes *codes,
                            unsigned form)
{
    const uint8_t *c = codes->at;
    if (codes->n < 2 || codes->n > 3 || c[0] != TAPE_take)
        return NULL;
    if (codes->n == 2 && c[1] == TAPE_blend)
        return k->blend[form];
    if (codes->n == 2)
        return c[1] < TAPE_plus ? k->alone[c[1]] : form < TAPE_FORMS ? k->with[c[1]][form] : NULL;
    if (c[1] == TAPE_complement && c[2] == TAPE_times)
        return k->complement_times[form];
    size_t pair = pair_of(c[1], c[2]);
    return pair < TAPE_PAIR_COUNT ? k->pair[pair][form] : NULL;
}

bool tape_has_loop(const struct tape_codes *codes)
{
    return loop_of(kernels_of(ISA_plain), codes, 0);
}

/* A bit for each of the n arguments from the first one on. */
static unsigned form_of(const struct tape_step *s, size_t first, size_t n)
{
    unsigned form = 0;
    for (size_t i = 0; i < n; i++)
        form |= (unsigned)(s->args.at[first + i] >= s->first_constant) << i;
    return form;
}

/* Equal programs are one, so that what many figures have in common stays in the cache. */
static const struct tape_program *program_of(struct lowering_tape *l, const struct tape_step *s)
{
    struct tape_program p = {s->codes.n, NULL};
    l->codes.n = 0;
    size_t arg = 0;
    for (size_t i = 0; i < s->codes.n; i++) {
        size_t n = tape_operands((enum tape_code)s->codes.at[i]);
        *array_push(l->arena, &l->codes) =
            (uint8_t)(TAPE_FORMS * s->codes.at[i] + form_of(s, arg, n));
        arg += n;
    }
    assert(arg == s->args.n);
    for (size_t i = l->programs.n; i-- > 0 && l->programs.n - i <= LOOK_BACK;)
        if (l->programs.at[i]->n == p.n && memcmp(l->programs.at[i]->code, l->codes.at, p.n) == 0)
            return l->programs.at[i];
    p.code = arena_copy(l->tape->arena, l->codes.at, p.n);
    return *array_push(l->arena, &l->programs) = arena_copy(l->tape->arena, &p, sizeof p);
}

static void lower(struct lowering_tape *l, struct tape_step *s, struct tape_call *c)
{
    unsigned form = s->args.n <= 3 ? form_of(s, 0, s->args.n) : 0;
    *c = (struct tape_call){.run = s->run, .more = s};
    if (s->run == tape_diagram_by_point && !l->by_point)
        c->run = l->kernels->diagram;
    if (s->codes.n == 0)
        return;
    c->run = loop_of(l->kernels, &s->codes, form);
    if (!c->run) {
        c->run = l->kernels->program;
        c->more = program_of(l, s);
    }
}

/* The rows of all calls, one after the other: a second result comes last; constants are counted
 * from 0. */
static void lay_rows(const struct tape *t)
{
    size_t n = 0;
    for (size_t i = 0; i < t->steps.n; i++)
        n += t->steps.at[i].codes.n ? t->steps.at[i].to.n + t->steps.at[i].args.n : 0;
    uint32_t *rows = NEW_ARRAY(t->arena, n, uint32_t);
    for (size_t i = 0; i < t->steps.n; i++) {
        const struct tape_step *s = &t->steps.at[i];
        t->calls[i].rows = rows;
        if (s->codes.n == 0)
            continue;
        *rows++ = s->to.at[0];
        for (size_t k = 0; k < s->args.n; k++) {
            uint32_t at = s->args.at[k];
            *rows++ = at < s->first_constant ? at : at - s->first_constant;
        }
        if (s->to.n > 1)
            *rows++ = s->to.at[1];
    }
}

void tape_lower(struct tape_maker *m)
{
    struct tape *t = m->tape;
    struct lowering_tape l = {
        .arena = m->arena, .tape = t, .kernels = kernels_of(t->isa), .by_point = m->how.by_point};
    t->calls = NEW_ARRAY(t->arena, t->steps.n, struct tape_call);
    for (size_t i = 0; i < t->steps.n; i++)
        lower(&l, &t->steps.at[i], &t->calls[i]);
    lay_rows(t);
}
