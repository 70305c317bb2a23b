/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling a decision, and ranking its alternatives.
 *
 * All hazards are compiled first, under every set of options that is ever in service
 * together; then the decision's own section (worth.c) reads them. */
#include "decide/weigh.h"

#include <string.h>

#include "decide/alternatives.h"
#include "decide/branching.h"
#include "decide/cost.h"
#include "decide/flow.h"
#include "decide/loss.h"
#include "decide/worth.h"
#include "figure/compile.h"
#include "figure/supply.h"

/* --- hazards first --- */

static bool in_focus(const struct decision *d, const char *id)
{
    for (size_t i = 0; i < d->focus.n; i++)
        if (text_equal(d->focus.at[i], id))
            return true;
    return false;
}

/* Does the alternative change something that the hazard depends on, once or for a time? */
static bool alternative_reaches(const struct alternative *x, const struct stretches *s,
                                const char *id)
{
    bool reached = variant_reaches(x->variant, id);
    for (size_t i = 0; i < s->n && !reached; i++)
        reached = variant_reaches(s->at[i].variant, id);
    return reached;
}

/* Hazards that some option reaches, or that are in focus, in byte order; those that
 * exist now. */
static void find_hazards(struct figures *f, struct weighing *w, const struct stretches *stretches)
{
    const struct objects *hazards = &f->base->of[KIND_HAZARD];
    for (size_t i = 0; i < hazards->n; i++) {
        const char *id = hazards->at[i]->id;
        bool reached = in_focus(w->decision, id);
        for (size_t k = 0; k < w->alternatives.n && !reached; k++)
            reached = alternative_reaches(&w->alternatives.at[k], &stretches[k], id);
        if (reached)
            *array_push(f->arena, &w->hazards) =
                (struct weighed_hazard){id, in_focus(w->decision, id), NULL};
    }
}

static void add_new_hazard(struct figures *f, struct weighing *w, const struct object *o)
{
    bool known = !o || o->kind != KIND_HAZARD;
    for (size_t h = 0; h < w->hazards.n && !known; h++)
        known = text_equal(w->hazards.at[h].id, o->id);
    if (!known)
        *array_push(f->arena, &w->hazards) = (struct weighed_hazard){o->id, false, NULL};
}

static void find_new_hazards_of(struct figures *f, struct weighing *w, const struct variant *v)
{
    for (const struct model *m = v->model; m->below; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++)
            add_new_hazard(f, w, m->by_id.at[i].value);
}

/* A hazard that a variant adds is damage that only it has; one that it removes has none. */
static void find_new_hazards(struct figures *f, struct weighing *w,
                             const struct stretches *stretches)
{
    for (size_t k = 0; k < w->alternatives.n; k++) {
        find_new_hazards_of(f, w, w->alternatives.at[k].variant);
        for (size_t i = 0; i < stretches[k].n; i++)
            find_new_hazards_of(f, w, stretches[k].at[i].variant);
    }
}

static ohmen_status compile_hazards_under(struct figures *f, struct weighing *w,
                                          const struct variant *v, const struct compiled **out,
                                          ohmen_error *e)
{
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct compiled *c = NULL, *part;
        ohmen_status status = OHMEN_OK;
        if (model_find(v->model, w->hazards.at[i].id))
            status = figures_compile(f, v, w->hazards.at[i].id, &c, e);
        if (c)
            status = figures_consequences(f, v, w->hazards.at[i].id, &part, e);
        if (status != OHMEN_OK)
            return status;
        if (out)
            out[i] = c;
    }
    return OHMEN_OK;
}

static ohmen_status compile_alternative_hazards(struct figures *f, struct weighing *w,
                                                struct alternative *x,
                                                const struct stretches *stretches, ohmen_error *e)
{
    x->hazards = NEW_ARRAY(f->arena, w->hazards.n, const struct compiled *);
    ohmen_status status = compile_hazards_under(f, w, x->variant, x->hazards, e);
    for (size_t i = 0; status == OHMEN_OK && i < stretches->n; i++)
        status = compile_hazards_under(f, w, stretches->at[i].variant, NULL, e);
    return status;
}

/* --- people --- */

static bool harms(const struct figures *f, const struct compiled *hazard, const char *group)
{
    struct building under = {.figures = (struct figures *)f, .variant = hazard->variant};
    const struct compiled *part = compiled_part(&under, hazard->id, PART_CONSEQUENCES);
    return consequence_of(part, PROPERTY_DEATH, group) != NULL;
}

static bool is_harmed(const struct figures *f, const struct weighing *w, const char *group)
{
    for (size_t k = 0; k < w->alternatives.n; k++)
        for (size_t i = 0; i < w->hazards.n; i++) {
            const struct compiled *c = w->alternatives.at[k].hazards[i];
            if (c && harms(f, c, group))
                return true;
        }
    return false;
}

/* Every hazard of the register that can be computed. */
static ohmen_status compile_register(struct figures *f, struct weighing *w, size_t *n,
                                     const struct compiled **out, ohmen_error *e)
{
    const struct objects *all = &f->base->of[KIND_HAZARD];
    const struct variant *base = w->alternatives.at[0].variant;
    *n = 0;
    for (size_t i = 0; i < all->n; i++) {
        ohmen_error why = OHMEN_ERROR_INIT;
        ohmen_status status = figures_compile(f, base, all->at[i]->id, &out[*n], &why);
        if (status == OHMEN_OK)
            (*n)++;
        else if (status == OHMEN_COMPUTE)
            *array_push(f->arena, &w->not_counted) =
                (struct not_possible){all->at[i]->id, arena_str(f->arena, why.text)};
        else
            return error_set(e, status, "%s", why.text);
    }
    return OHMEN_OK;
}

/* The groups that matter here, and what their people bear now. */
static ohmen_status find_groups(struct figures *f, struct weighing *w, ohmen_error *e)
{
    const struct objects *groups = &f->base->of[KIND_GROUP];
    const struct compiled **hazards =
        NEW_ARRAY(f->arena, f->base->of[KIND_HAZARD].n, const struct compiled *);
    struct harm_to *people = NULL;
    size_t n;
    for (size_t i = 0; i < groups->n; i++)
        if (is_harmed(f, w, groups->at[i]->id))
            *array_push(f->arena, &w->groups) = (struct weighed_group){groups->at[i]->id, 0};
    if (w->groups.n == 0)
        return OHMEN_OK;
    ohmen_status status = compile_register(f, w, &n, hazards, e);
    if (status == OHMEN_OK)
        status = figures_people(f, n, hazards, &people, e);
    for (size_t i = 0; status == OHMEN_OK && i < w->groups.n; i++)
        for (size_t k = 0; k < groups->n; k++)
            if (text_equal(groups->at[k]->id, w->groups.at[i].id))
                w->groups.at[i].now = people[k].death;
    return status;
}

/* --- the whole --- */

static ohmen_status compile_options(struct figures *f, const struct decision *d, ohmen_error *e)
{
    for (size_t i = 0; i < d->options.n; i++) {
        const struct compiled *unused;
        ohmen_status status = cost_compile(f, d->options.at[i], &unused, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

static bool is_left_out(const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->left_out.n; i++)
        if (text_equal(w->left_out.at[i].options, name))
            return true;
    return false;
}

/* Larger sets fail with the pairs in them. */
static bool has_pair_left_out(struct figures *f, const struct weighing *w,
                              const struct alternative *x)
{
    for (size_t i = 0; i < x->n; i++)
        for (size_t k = 0; k < i; k++) {
            const char *pair[] = {x->options[k], x->options[i]};
            if (is_left_out(w, alternative_name(f->arena, 2, pair)))
                return true;
        }
    return false;
}

/* Makes the variants, and cuts the horizon. Options that are right alone may leave the register
 * wrong together, such as two that add a row of the same clearance time: then they are no
 * alternative. */
static ohmen_status find_variants(struct figures *f, struct weighing *w,
                                  struct stretches *stretches, ohmen_error *e)
{
    size_t kept = 0;
    for (size_t i = 0; i < w->alternatives.n; i++) {
        struct alternative x = w->alternatives.at[i];
        struct stretches cut = {0};
        ohmen_error why = OHMEN_ERROR_INIT;
        if (has_pair_left_out(f, w, &x))
            continue;
        ohmen_status status = figures_variant(f, x.n, x.options, &x.variant, &why);
        if (status == OHMEN_OK)
            status = timeline_cut(f, &x, w->horizon, &cut, &why);
        if (status == OHMEN_OK) {
            stretches[kept] = cut;
            w->alternatives.at[kept++] = x;
        } else if (status == OHMEN_COMPUTE && x.n > 1) {
            *array_push(f->arena, &w->left_out) = (struct not_possible){
                x.name,
                arena_printf(f->arena, "together they leave the register wrong: %s", why.text)};
        } else {
            return error_set(e, status, "%s", why.text);
        }
    }
    w->alternatives.n = kept;
    return OHMEN_OK;
}

static ohmen_status compile_all(struct figures *f, struct weighing *w,
                                const struct stretches *stretches, ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    ohmen_status status = compile_options(f, w->decision, e);
    for (size_t i = 0; status == OHMEN_OK && i < w->alternatives.n; i++)
        status = compile_alternative_hazards(f, w, &w->alternatives.at[i], &stretches[i], e);
    if (status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < w->hazards.n; i++)
        w->hazards.at[i].now = w->alternatives.at[0].hazards[i];
    status = find_groups(f, w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(f, e);
    if (status != OHMEN_OK)
        return status;
    worth_compile(f, w, base, stretches);
    status = figures_evaluate(f, e);
    if (status == OHMEN_OK)
        prices_compile(f, w);
    return status;
}

static ohmen_status unknown_decision(struct figures *f, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    const struct objects *all = &f->base->of[KIND_DECISION];
    for (size_t i = 0; i < all->n; i++)
        nearest_offer(&near, all->at[i]->id);
    return error_set(e, OHMEN_UNKNOWN, "there is no decision \"%s\"%s", id,
                     nearest_hint(f->arena, &near));
}

ohmen_status weigh_compile(struct figures *f, const char *decision, struct weighing **out,
                           ohmen_error *e)
{
    const struct decision *d = model_get(f->base, KIND_DECISION, decision);
    const struct compiled *known = strmap_get(&f->compiled_by_key, decision);
    if (!d)
        return unknown_decision(f, decision, e);
    if (known) {
        *out = known->exports;
        return OHMEN_OK;
    }
    struct weighing *w = NEW(f->arena, struct weighing);
    w->id = model_find(f->base, decision)->id;
    w->decision = d;
    w->horizon = expr_constant(f->base->settings->horizon->expr);
    if (d->choose.n) {
        ohmen_status done = branching_compile(f, w, e);
        if (done == OHMEN_OK)
            *out = w;
        return done;
    }
    alternatives_find(f, &d->options, w);
    struct stretches *stretches = NEW_ARRAY(f->arena, w->alternatives.n, struct stretches);
    ohmen_status status = find_variants(f, w, stretches, e);
    if (status != OHMEN_OK)
        return status;
    find_hazards(f, w, stretches);
    find_new_hazards(f, w, stretches);
    status = compile_all(f, w, stretches, e);
    if (status == OHMEN_OK)
        *out = w;
    return status;
}

static double net_of(const struct figures *f, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? 0 : figure_value(f, x->net);
}

/* Is alternative i better than k? */
static bool is_better(struct figures *f, const struct weighing *w, size_t i, size_t k)
{
    double p = net_of(f, &w->alternatives.at[i]), q = net_of(f, &w->alternatives.at[k]);
    if (p != q)
        return p > q;
    return text_compare(w->alternatives.at[i].name, w->alternatives.at[k].name) < 0;
}

void weigh_rank(struct figures *f, struct weighing *w)
{
    w->order = NEW_ARRAY(f->arena, w->alternatives.n, size_t);
    for (size_t i = 0; i < w->alternatives.n; i++) {
        size_t k = i;
        for (; k > 0 && is_better(f, w, i, w->order[k - 1]); k--)
            w->order[k] = w->order[k - 1];
        w->order[k] = i;
    }
    for (size_t i = 0; i < w->alternatives.n; i++)
        w->alternatives.at[w->order[i]].rank = i + 1;
}

ohmen_status weigh_ranked(struct figures *f, const char *decision, struct weighing **out,
                          ohmen_error *e)
{
    ohmen_status status = weigh_compile(f, decision, out, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(f, e);
    if (status == OHMEN_OK)
        weigh_rank(f, *out);
    return status;
}

/* By the whole name: figures of worlds under some changes have these in theirs. */
static bool find_named(struct figures *f, const struct compiled *u, const char *name,
                         figure_id *out)
{
    for (const struct compiled *part = u; part; part = part->also)
        for (figure_id i = part->first; i < part->first + part->n; i++)
            if (text_equal(figure_name(f, f->arena, i), name)) {
                *out = i;
                return true;
            }
    return false;
}

ohmen_status weigh_find(struct figures *f, const char *name, figure_id *out, ohmen_error *e)
{
    const char *dot = strchr(name, '.');
    const char *id = dot ? arena_strn(f->arena, name, (size_t)(dot - name)) : name;
    const struct object *o = model_find(f->base, id);
    const struct compiled *c = NULL;
    struct weighing *w;
    ohmen_status status = OHMEN_OK;
    if (o && o->kind == KIND_DECISION) {
        status = weigh_compile(f, id, &w, e);
        c = status == OHMEN_OK ? w->unit : NULL;
        const struct flow *unused;
        const struct alternative *x = c && dot ? flow_alternative(f, w, dot + 1) : NULL;
        if (x)
            status = flow_compile(f, w, x, &unused, e);
        const struct loss_case *cases;
        if (c && dot && loss_is_figure(dot + 1))
            status = loss_of_weighing(f, w, &cases, e);
    } else if (o && o->kind == KIND_OPTION) {
        status = cost_compile(f, o->id, &c, e);
    } else {
        return figures_find(f, name, out, e);
    }
    if (status == OHMEN_OK && find_named(f, c, name, out))
        return OHMEN_OK;
    return status == OHMEN_OK ? compiled_find(f, c, dot ? dot + 1 : "", out, e) : status;
}
