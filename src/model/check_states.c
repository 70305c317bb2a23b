/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What states make of a register: each state's change alone, with each option alone, and with
 * each change of another state leaves a register without fault. So a later contradiction can
 * only come from two options, or from three changes together. */
#include "model/check.h"
#include "model/variant.h"

/* An option (NULL: none) and the register as it leaves it. */
struct state_check {
    struct arena *arena;
    const struct model *base, *under;
    const char *option;
    struct diags *diags;
};

/* In each state the commissioning period of the option must leave a register without fault too. */
static void lay_early_over(struct state_check *s, const struct model *m)
{
    struct model_change early = model_early_change(s->arena, s->base, s->option);
    if (early.node)
        model_change(s->arena, m, 1, &early, s->diags);
}

static const struct model *under_changes(struct state_check *s, size_t n,
                                         const struct model_change *changes)
{
    struct model_change all[3];
    size_t k = 0;
    if (s->option)
        all[k++] = model_option_change(s->base, s->option);
    for (size_t i = 0; i < n; i++)
        all[k++] = changes[i];
    const struct model *m = model_change(s->arena, s->base, k, all, s->diags);
    if (m && s->option)
        lay_early_over(s, m);
    return m;
}

/* A hazard that there is only in one state, or an outcome of that sort, would stand in no list:
 * it is stated for the register, with frequency or probability 0. */
static void check_nothing_new(struct state_check *s, const struct model_change *c,
                              const struct model *m)
{
    for (size_t i = 0; i < m->by_id.n; i++) {
        const struct object *o = m->by_id.at[i].value;
        const struct hazard *after = o && o->kind == KIND_HAZARD ? o->data : NULL;
        const struct hazard *before = after ? model_get(s->under, KIND_HAZARD, o->id) : NULL;
        if (after && !before)
            diag_add(s->diags, c->place, "a state cannot add a hazard, such as \"%s\"", o->id);
        for (size_t k = 0; before && k < after->outcomes.n; k++)
            if (!check_has_row(&before->outcomes, after->outcomes.keys[k]))
                diag_add(s->diags, c->place,
                         "a state cannot add an outcome to a hazard, such as \"%s\" to \"%s\"",
                         after->outcomes.keys[k], o->id);
    }
}

static void check_pairs(struct state_check *s, const struct model_change *second,
                        const struct object *other)
{
    const struct state *data = other->data;
    for (size_t i = 0; i < state_values(data)->n; i++) {
        struct model_change both[] = {model_state_change(s->arena, other, i), *second};
        if (both[0].node)
            under_changes(s, 2, both);
    }
}

static void check_one_state(struct state_check *s, const struct object_list *all, size_t at)
{
    const struct state *data = all->at[at]->data;
    for (size_t i = 0; i < state_values(data)->n; i++) {
        struct model_change c = model_state_change(s->arena, all->at[at], i);
        const struct model *m = c.node ? under_changes(s, 1, &c) : NULL;
        if (m)
            check_nothing_new(s, &c, m);
        for (size_t k = 0; m && !s->option && k < at; k++)
            check_pairs(s, &c, all->at[k]);
    }
}

void check_states(struct arena *a, const struct model *base, const struct model *under,
                  const char *option, struct diags *d)
{
    struct state_check s = {a, base, under, option, d};
    struct object_list all = {0};
    model_varying(a, under, &all);
    for (size_t i = 0; i < all.n; i++)
        check_one_state(&s, &all, i);
}
