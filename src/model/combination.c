/* SPDX-License-Identifier: GPL-3.0-or-later */
/* `combine`: what an option settles with another one. Owns nothing.
 *
 * Invariant: what a combination says outright at a path takes the place of what either of its two
 * options says there, whatever third options say: those have to agree with the combination. */
#include "model/combination.h"

static const struct node *said_by(const struct model *base, const char *p, const char *q)
{
    const struct option *o = model_get(base, KIND_OPTION, p);
    for (size_t i = 0; o && i < o->combine.n; i++)
        if (text_equal(o->combine.keys[i], q))
            return ((const struct node *const *)o->combine.at)[i];
    return NULL;
}

const struct node *model_combination(const struct model *base, const char *option_p,
                                     const char *option_q)
{
    const struct node *said = said_by(base, option_p, option_q);
    return said ? said : said_by(base, option_q, option_p);
}

static const struct node *without(struct arena *a, const struct patch_rules *rules,
                                  const struct node *change, const struct node *settled)
{
    return change && settled ? patch_without(a, rules, change, settled) : change;
}

/* "A+B" in byte order. */
static struct model_change combination_of(struct arena *a, const char *p, const char *q,
                                          const struct node *node)
{
    bool in_order = text_compare(p, q) < 0;
    const char *name = arena_printf(a, "%s+%s", in_order ? p : q, in_order ? q : p);
    return (struct model_change){"combination", name, node, node->place, NULL, {p, q}};
}

void combination_settle(struct arena *a, const struct model *base, const struct patch_rules *rules,
                        size_t n, const struct model_change *changes, struct change_list *out)
{
    for (size_t i = 0; i < n; i++)
        *array_push(a, out) = changes[i];
    for (size_t i = 0; i < n; i++)
        for (size_t k = 0; k < i; k++) {
            bool options = changes[i].option && changes[k].option;
            const struct node *settled =
                options ? model_combination(base, changes[k].option, changes[i].option) : NULL;
            if (!settled)
                continue;
            out->at[i].node = without(a, rules, out->at[i].node, settled);
            out->at[k].node = without(a, rules, out->at[k].node, settled);
            *array_push(a, out) = combination_of(a, changes[k].option, changes[i].option, settled);
        }
}

const char *combination_contradiction(struct arena *a, const struct model *base,
                                      const struct patch_rules *rules, const char *p, const char *q)
{
    const struct node *settled = model_combination(base, p, q);
    const struct node *of_p = without(a, rules, model_option_change(base, p).node, settled);
    const struct node *of_q = without(a, rules, model_option_change(base, q).node, settled);
    const char *path = of_p && of_q ? patch_contradiction(a, rules, of_p, of_q) : NULL;
    if (!path && settled && of_p)
        path = patch_contradiction(a, rules, of_p, settled);
    if (!path && settled && of_q)
        path = patch_contradiction(a, rules, of_q, settled);
    return path;
}
