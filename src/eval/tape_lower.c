/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Choosing kernels for the programs of a tape, by their codes and by which operands are constants
 * (tape_kernels.h). Owns nothing. */
#include "eval/tape_kernels.h"

#include <assert.h>

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

static void lower_program(struct tape *t, struct tape_step *s)
{
    struct tape_program *p = NEW(t->arena, struct tape_program);
    uint8_t *code = NEW_ARRAY(t->arena, s->codes.n, uint8_t);
    size_t arg = 0;
    for (size_t i = 0; i < s->codes.n; i++) {
        size_t n = tape_operands((enum tape_code)s->codes.at[i]);
        code[i] = (uint8_t)(TAPE_FORMS * s->codes.at[i] + form_of(s, arg, n));
        arg += n;
    }
    assert(arg == s->args.n);
    *p = (struct tape_program){s->codes.n, code};
    s->more = p;
    s->run = kernels_of(t->isa)->program;
}

void tape_lower(struct tape *t)
{
    for (size_t i = 0; i < t->steps.n; i++) {
        struct tape_step *s = &t->steps.at[i];
        if (s->codes.n == 0)
            continue;
        unsigned form = s->args.n <= 3 ? form_of(s, 0, s->args.n) : 0;
        s->run = loop_of(kernels_of(t->isa), &s->codes, form);
        if (!s->run)
            lower_program(t, s);
    }
}
