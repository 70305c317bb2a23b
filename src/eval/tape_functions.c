/* SPDX-License-Identifier: GPL-3.0-or-later */
/* EXP, LOG and POWER in a tape: the functions over lanes of src/math. Owns nothing. */
#include "eval/tape_parts.h"

#include "math/lanes.h"

static void take_function(const struct tape_step *s, const struct tape_work *w, size_t n,
                          lanes_function *f)
{
    f(n, w->row[s->args.at[0]], w->row[s->to.at[0]]);
}

static void exp_run(const struct tape_call *c, struct tape_work *w, size_t n)
{
    take_function(c->more, w, n, lanes_functions(w->tape->isa)->exp);
}

static void log_run(const struct tape_call *c, struct tape_work *w, size_t n)
{
    take_function(c->more, w, n, lanes_functions(w->tape->isa)->log);
}

/* The exponent is the same in all lanes. */
static void power_run(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_step *s = c->more;
    const double *x = w->row[s->args.at[0]];
    double *to = w->row[s->to.at[0]], y[TAPE_GROUP];
    for (size_t i = 0; i < TAPE_GROUP; i++)
        y[i] = tape_read(s, w, 1, 0);
    for (size_t i = 0; i < n; i += TAPE_GROUP)
        lanes_functions(w->tape->isa)->pow(TAPE_GROUP, x + i, y, to + i);
}

tape_kernel *tape_function(const struct tape_maker *m, const struct tape_step *s)
{
    switch (graph_at(m->v->g, s->node)->op) {
    case OP_EXP: return exp_run;
    case OP_LOG: return log_run;
    case OP_POWER:
        return !(s->args.at[0] & TAPE_CONSTANT) && s->args.at[1] & TAPE_CONSTANT ? power_run : NULL;
    default: return NULL;
    }
}
