/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What information is worth, by name, and what knowing everything is (information.h). Owns nothing
 * beyond the arenas it is given. */
#include "decide/branching_choice.h"
#include "decide/information.h"

#include <string.h>

#include "decide/sure.h"

#define MARK ".worth-knowing"

/* --- perfect information --- */

struct sampled information_perfect(struct arena *a, const struct information *x,
                                   const struct sampling *s)
{
    struct arena *scratch = arena_child(a);
    const struct choice *c = x->choice;
    double *values = NEW_ARRAY(scratch, c->n_targets, double);
    double *means = NEW_ARRAY(scratch, s->sets, double);
    for (size_t i = 0; i < s->sets * s->points; i++) {
        size_t unused;
        for (size_t k = 0; k < c->n_targets; k++)
            values[k] = s->values[k][i];
        double now = c->worth ? c->worth(c->ctx, values, x->best) : x->worth;
        means[i / s->points] += (c->best(c->ctx, values, &unused) - now) / (double)s->points;
    }
    struct sampled found = statistics_of_sets(s->sets, means);
    arena_free(scratch);
    return found;
}

/* --- names --- */

const char *information_name(struct arena *a, const struct weighing *w, const char *input)
{
    return input ? arena_printf(a, "%s" MARK "[%s]", w->id, input)
                 : arena_printf(a, "%s" MARK, w->id);
}

bool information_is_named(const char *name)
{
    const char *mark = strstr(name, MARK);
    char end = mark ? mark[strlen(MARK)] : 'x';
    return mark && mark == strchr(name, '.') && (end == 0 || end == '[');
}

/* --- by name --- */

struct information_sample information_sample_of(struct arena *a, const struct figures *f,
                                                const struct sure *s)
{
    size_t n = s->weighing->alternatives.n;
    node_id *roots = NEW_ARRAY(a, n, node_id);
    for (size_t k = 1; k < n; k++)
        roots[s->root[k]] = figure_at(f, s->weighing->alternatives.at[k].net)->node;
    return (struct information_sample){.plan = &s->plan,
                                       .n_roots = n - 1,
                                       .roots = roots,
                                       .values = &s->sample,
                                       .root = s->root + 1};
}

static ohmen_status pick_input(struct figures *f, const char *name, struct information_value *v,
                               ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, name);
    for (size_t i = 0; i < v->information->list.n; i++) {
        const struct information_input *in = &v->information->list.at[i];
        const char *known = information_name(f->arena, v->weighing, in->name);
        nearest_offer(&near, known);
        if (!text_equal(known, name))
            continue;
        v->input = in;
        return OHMEN_OK;
    }
    return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" has no figure \"%s\"%s",
                     v->weighing->id, name + strlen(v->weighing->id) + 1,
                     nearest_hint(f->arena, &near));
}

/* A tree is sampled once more, all of it. */
static void find_in_tree(struct figures *f, struct arena *a, const struct sampling_plan *plan,
                         const struct information_watch *watch, size_t n_states,
                         const struct unknown_state *states, struct information_whole *out)
{
    out->has_sample = branching_sample(f, a, &out->choice, plan, &out->sample, NULL) == OHMEN_OK;
    information_find(f, &out->choice, NULL, n_states, states, watch, &out->all);
    if (out->has_sample)
        out->everything = information_perfect(a, &out->all, &out->sample);
}

void information_of_decision(struct figures *f, struct arena *a, struct weighing *w,
                             const struct sure *sure, const struct sampling_plan *plan,
                             const struct information_watch *watch, struct information_whole *out)
{
    const struct unknown_state *states;
    size_t n_states = states_of_decision(a, f, &states);
    struct information_sample sample = {0};
    *out = (struct information_whole){.w = w, .choice = choice_of_decision(a, f, w)};
    if (w->branching) {
        find_in_tree(f, a, plan, watch, n_states, states, out);
        return;
    }
    out->has_sample = sure != NULL;
    if (sure) {
        sample = information_sample_of(a, f, sure);
        out->everything = sure->of[w->order[0]].regret;
        out->sample = sure->sample;
    }
    information_find(f, &out->choice, sure ? &sample : NULL, n_states, states, watch, &out->all);
}

ohmen_status information_value_find(struct figures *f, const char *name,
                                    const struct sampling_plan *plan, struct information_value *out,
                                    ohmen_error *e)
{
    struct weighing *w;
    struct sure *sure = NEW(f->arena, struct sure);
    struct information_whole *whole = NEW(f->arena, struct information_whole);
    const char *mark = strstr(name, MARK);
    ohmen_status status = weigh_ranked(f, arena_strn(f->arena, name, (size_t)(mark - name)), &w, e);
    if (status == OHMEN_OK)
        status = sure_find(f, f->arena, w, plan, sure, e);
    if (status != OHMEN_OK)
        return status;
    information_of_decision(f, f->arena, w, sure, plan, NULL, whole);
    struct information_value v = {.name = name, .weighing = w, .information = &whole->all};
    v.everything = whole->everything;
    v.sample = whole->sample;
    status = mark[strlen(MARK)] ? pick_input(f, name, &v, e) : OHMEN_OK;
    if (status == OHMEN_OK)
        *out = v;
    return status;
}
