/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Common causes: who fails together, and in which numbers. */
#include "model/check.h"

#include <math.h>

/* Alpha factors that sum to 1 within this are taken as they are. */
#define FACTOR_TOLERANCE 1e-9

static void check_members(struct checking *c, const struct object *o)
{
    const struct common_cause *x = o->data;
    const struct node *of = node_get(o->node, "of");
    size_t most = x->factors.n ? COMMON_CAUSE_MOST : COMMON_CAUSE_BETA;
    if (x->of.n > most)
        diag_add(c->diags, of->place, "a common cause %s is for at most %zu elements; here are %zu",
                 x->factors.n ? "with \"factors\"" : "with \"beta\"", most, x->of.n);
    for (size_t i = 0; x->found_by && i < x->of.n; i++)
        if (text_equal(x->of.at[i], x->found_by))
            return;
    if (x->found_by)
        diag_add(c->diags, node_get(o->node, "found-by")->place,
                 "\"%s\" is none of the elements that may fail together", x->found_by);
}

static void check_factors(struct checking *c, const struct object *o)
{
    const struct common_cause *x = o->data;
    const struct node *factors = node_get(o->node, "factors");
    double sum = 0;
    char text[32];
    for (size_t i = 0; i < x->factors.n; i++)
        sum += expr_constant(((struct quantity *const *)x->factors.at)[i]->expr);
    if (x->factors.n != x->of.n)
        diag_add(c->diags, factors->place,
                 "there are %zu alpha factors for %zu elements; expected one for each number of "
                 "elements that fail together, from 1 to %zu",
                 x->factors.n, x->of.n, x->of.n);
    else if (fabs(sum - 1) > FACTOR_TOLERANCE)
        diag_add(c->diags, factors->place, "the alpha factors sum to %s, expected 1",
                 text_double(text, round(sum * 1e10) / 1e10));
}

void check_common_cause(struct checking *c, const struct object *o)
{
    const struct common_cause *x = o->data;
    check_members(c, o);
    if (x->factors.n)
        check_factors(c, o);
    else if (node_get(o->node, "factors"))
        diag_add(c->diags, node_get(o->node, "factors")->place, "there are no alpha factors");
    if (x->staggered && !x->factors.n)
        diag_add(c->diags, node_get(o->node, "staggered")->place,
                 "\"staggered\" belongs to \"factors\", which is missing");
}
