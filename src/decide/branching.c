/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling a decision that is a tree: what its steps do to the register, which hazards and unknown
 * states are in it, its alternatives; then growing, rolling back and figures, each in its file. */
#include "decide/branching_parts.h"

#include <stdlib.h>

#include "decide/alternatives.h"
#include "decide/worth.h"
#include "figure/states.h"

/* --- what stands in the document --- */

/* All steps of a decision, wherever they stand. */
struct found {
    struct figures *f;
    const struct decision *decision;
    ARRAY(const char *) options;
    ARRAY(const char *) inspected; /* "STATE.TEST" */
    ARRAY(const struct node *) changes;
    ARRAY(const char *) failing; /* hazards whose outcomes renew a state that is followed */
};

static void add_name(struct found *x, const char *name)
{
    for (size_t i = 0; i < x->options.n; i++)
        if (text_equal(x->options.at[i], name))
            return;
    *array_push(x->f->arena, &x->options) = name;
}

static void find_in_steps(struct found *x, const struct list *steps);

static void find_in_rows(struct found *x, const struct rows *rows)
{
    for (size_t i = 0; i < rows->n; i++)
        find_in_steps(x, &((const struct list *)rows->at)[i]);
}

static void find_in_steps(struct found *x, const struct list *steps)
{
    for (size_t i = 0; i < steps->n; i++) {
        const struct step *s = ((const struct step *const *)steps->at)[i];
        if (s->apply)
            add_name(x, s->apply);
        if (s->inspect)
            *array_push(x->f->arena, &x->inspected) = s->inspect;
        if (s->change)
            *array_push(x->f->arena, &x->changes) = s->change;
        find_in_rows(x, &s->choose);
        find_in_rows(x, &s->reads);
        for (size_t k = 0; k < s->chance.n; k++)
            find_in_steps(x, &ROW(struct fork, s->chance, k)->then);
    }
}

/* --- hazards --- */

static bool is_weighed(const struct weighing *w, const char *id)
{
    for (size_t i = 0; i < w->hazards.n; i++)
        if (text_equal(w->hazards.at[i].id, id))
            return true;
    return false;
}

static bool in_focus(const struct decision *d, const char *id)
{
    for (size_t i = 0; i < d->focus.n; i++)
        if (text_equal(d->focus.at[i], id))
            return true;
    return false;
}

static void add_hazard(struct figures *f, struct weighing *w, const char *id)
{
    if (!is_weighed(w, id))
        *array_push(f->arena, &w->hazards) =
            (struct weighed_hazard){id, in_focus(w->decision, id), NULL};
}

/* Hazards that the changes of a variant reach, and those that it adds. */
static void add_reached(struct figures *f, struct weighing *w, const struct variant *v)
{
    const struct objects *hazards = &f->base->of[KIND_HAZARD];
    for (size_t i = 0; i < hazards->n; i++)
        if (in_focus(w->decision, hazards->at[i]->id) || variant_reaches(v, hazards->at[i]->id))
            add_hazard(f, w, hazards->at[i]->id);
    for (const struct model *m = v->model; m->below; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            if (o && o->kind == KIND_HAZARD)
                add_hazard(f, w, o->id);
        }
}

static ohmen_status reached_by_options(const struct found *x, struct weighing *w, ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < x->options.n; i++) {
        struct stretches cut = {0};
        struct path alone = {0};
        *array_push(x->f->arena, &alone.applied) = (struct applied){x->options.at[i], 0};
        status = timeline_cut_path(x->f, &alone, w->horizon, &cut, e);
        for (size_t k = 0; status == OHMEN_OK && k < cut.n; k++)
            add_reached(x->f, w, cut.at[k].variant);
    }
    return status;
}

static ohmen_status reached_by_changes(const struct found *x, struct weighing *w, ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < x->changes.n; i++) {
        const struct variant *v;
        const char *name = arena_printf(x->f->arena, "%s: a change, %zu", w->id, i + 1);
        status = figures_variant_with(x->f, base, name, x->changes.at[i], &v, e);
        if (status == OHMEN_OK)
            add_reached(x->f, w, v);
    }
    return status;
}

/* --- states --- */

static bool is_inspected(const struct found *x, const char *state)
{
    size_t n = strlen(state);
    for (size_t i = 0; i < x->inspected.n; i++)
        if (strncmp(x->inspected.at[i], state, n) == 0 && x->inspected.at[i][n] == '.')
            return true;
    return false;
}

static bool is_renewed(const struct found *x, const struct state *s)
{
    for (size_t i = 0; i < x->options.n; i++)
        if (state_renewed(s, x->options.at[i]))
            return true;
    return false;
}

static bool is_seen(const struct decision *d, const char *state)
{
    for (size_t i = 0; i < d->sees.n; i++)
        if (text_equal(d->sees.at[i], state))
            return true;
    return false;
}

/* The hazards that some value of a state reaches. */
static ohmen_status reached_by_state(const struct found *x, struct weighing *w,
                                     const struct object *o, bool add, bool *reaches,
                                     ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    ohmen_status status = OHMEN_OK;
    size_t n = w->hazards.n;
    for (size_t k = 0; status == OHMEN_OK && k < state_values(o->data)->n; k++) {
        const struct variant *v;
        status = variant_in_state(x->f, base, o, k, &v, e);
        if (status != OHMEN_OK)
            break;
        if (add)
            add_reached(x->f, w, v);
        for (size_t i = 0; i < n; i++)
            *reaches = *reaches || variant_reaches(v, w->hazards.at[i].id);
    }
    return status;
}

static void add_failing(struct found *x, struct weighing *w, const struct state *s)
{
    for (size_t i = 0; i < s->failures.n; i++) {
        add_hazard(x->f, w, s->failures.keys[i]);
        *array_push(x->f->arena, &x->failing) = s->failures.keys[i];
    }
}

/* Does some value of a state reach a hazard that renews a state which is followed? How often that
 * is depends on what is the case, and is no mean over it. */
static ohmen_status reaches_failing(const struct found *x, const struct weighing *w,
                                    const struct object *o, bool *reaches, ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    ohmen_status status = OHMEN_OK;
    for (size_t k = 0; status == OHMEN_OK && k < state_values(o->data)->n; k++) {
        const struct variant *v;
        status = variant_in_state(x->f, base, o, k, &v, e);
        for (size_t i = 0; status == OHMEN_OK && i < x->failing.n; i++)
            *reaches = *reaches || variant_reaches(v, x->failing.at[i]);
    }
    return status;
}

/* Is the state to be followed: by its name; or since it changes with time and reaches what is
 * weighed, or reaches what renews another one? */
static ohmen_status find_state(struct found *x, struct weighing *w, const struct object *o,
                               bool named, bool *chosen, ohmen_error *e)
{
    bool reaches = false, renews = false;
    ohmen_status status = OHMEN_OK;
    if (named || state_evolves(o->data))
        status = reached_by_state(x, w, o, named, &reaches, e);
    if (status == OHMEN_OK)
        status = reaches_failing(x, w, o, &renews, e);
    *chosen = named || reaches || renews;
    if (status == OHMEN_OK && *chosen)
        add_failing(x, w, o->data);
    return status;
}

/* Unknown states that the tree follows: what it inspects, sees or renews, with the hazards that
 * they reach; then what follows from these, until nothing is added. */
static ohmen_status find_states(struct found *x, struct weighing *w, size_t *n,
                                const struct object **out, ohmen_error *e)
{
    const struct objects *states = &x->f->base->of[KIND_STATE];
    ohmen_status status = OHMEN_OK;
    bool *chosen = NEW_ARRAY(x->f->arena, states->n, bool), again = true;
    for (int round = 0; again; round++) {
        again = round == 0;
        for (size_t i = 0; status == OHMEN_OK && i < states->n; i++) {
            const struct object *o = states->at[i];
            const struct state *s = o->data;
            bool named = is_inspected(x, o->id) || is_seen(x->decision, o->id) || is_renewed(x, s);
            if (!s->is.n || chosen[i] || (round == 0 && !named))
                continue;
            status = find_state(x, w, o, named, &chosen[i], e);
            again = again || chosen[i];
        }
        again = again && status == OHMEN_OK;
    }
    *n = 0;
    for (size_t i = 0; i < states->n; i++)
        if (chosen[i])
            out[(*n)++] = states->at[i];
    return status;
}

static int by_id(const void *p, const void *q)
{
    return text_compare(((const struct weighed_hazard *)p)->id,
                        ((const struct weighed_hazard *)q)->id);
}

/* No one register is that of a branch: what is in service depends on time and chance. */
static const struct compiled **hazards_today(struct figures *f, const struct weighing *w)
{
    const struct compiled **all = NEW_ARRAY(f->arena, w->hazards.n, const struct compiled *);
    for (size_t i = 0; i < w->hazards.n; i++)
        all[i] = w->hazards.at[i].now;
    return all;
}

static ohmen_status compile_today(struct figures *f, struct weighing *w, ohmen_error *e)
{
    const struct variant *base = w->alternatives.at[0].variant;
    ohmen_status status = OHMEN_OK;
    if (w->hazards.n > 1)
        qsort(w->hazards.at, w->hazards.n, sizeof *w->hazards.at, by_id);
    for (size_t i = 0; status == OHMEN_OK && i < w->hazards.n; i++)
        if (model_find(f->base, w->hazards.at[i].id))
            status = figures_compile(f, base, w->hazards.at[i].id, &w->hazards.at[i].now, e);
    w->alternatives.at[0].hazards = hazards_today(f, w);
    return status;
}

/* --- alternatives --- */

static void add_alternative(struct figures *f, struct weighing *w, const char *name,
                            const char *label)
{
    struct alternative *alt = array_push(f->arena, &w->alternatives);
    const char **self = NEW(f->arena, const char *);
    *self = label;
    alternative_clear(alt);
    alt->name = name;
    alt->n = 1;
    alt->options = self;
    alt->variant = w->alternatives.at[0].variant;
    alt->of = NEW_ARRAY(f->arena, f->base->settings->perspectives.n, struct perspective_worth);
    alt->hazards = hazards_today(f, w);
    for (size_t k = 0; k < f->base->settings->perspectives.n; k++)
        alt->of[k] = (struct perspective_worth){FIGURE_NONE, FIGURE_NONE, FIGURE_NONE};
}

static ohmen_status add_nothing(struct figures *f, struct weighing *w, ohmen_error *e)
{
    struct alternative *alt = array_push(f->arena, &w->alternatives);
    alternative_clear(alt);
    alt->name = DO_NOTHING;
    return figures_variant(f, 0, NULL, &alt->variant, e);
}

/* One for each branch of the first choice that does something; every place where it comes first
 * must have it. */
static void find_alternatives(struct figures *f, struct branching *b)
{
    struct weighing *w = b->weighing;
    const struct point *root = &b->points.at[0];
    const struct point *p = root->kind == POINT_SEE ? &b->points.at[root->branches[0].to] : root;
    if (b->repeats)
        add_alternative(f, w, POLICY, POLICY);
    for (size_t k = 0; k < p->n; k++) {
        const struct way *x = &p->branches[k];
        bool nothing = !b->repeats && !*x->steps && b->points.at[x->to].kind == POINT_END;
        bool everywhere = true;
        for (size_t i = 0; root->kind == POINT_SEE && i < root->n; i++) {
            const struct point *other = &b->points.at[root->branches[i].to];
            bool has = false;
            for (size_t j = 0; j < other->n; j++)
                has = has || text_equal(other->branches[j].label, x->label);
            everywhere = everywhere && has;
        }
        const char *name = b->repeats ? arena_printf(f->arena, "%s-first", x->label) : x->label;
        if (!nothing && everywhere)
            add_alternative(f, w, name, x->label);
    }
}

ohmen_status branching_certain(struct figures *f, const struct weighing *w,
                               const struct quantity *q, double *out, ohmen_error *e)
{
    struct building b;
    if (quantity_is_constant(q)) {
        *out = expr_constant(q->expr);
        return OHMEN_OK;
    }
    compiled_begin_part(f, w->alternatives.at[0].variant, model_find(f->base, w->id), w->id,
                        arena_printf(f->arena, "certain %p", (const void *)q), &b);
    node_id n = compile_quantity(&b, q);
    compiled_end(&b);
    ohmen_status status = figures_evaluate(f, e);
    if (status == OHMEN_OK)
        *out = means_value(f->means, n);
    return status;
}

/* --- the whole --- */

static ohmen_status prepare(struct figures *f, struct weighing *w, struct branching *b,
                            ohmen_error *e)
{
    struct found x = {.f = f, .decision = w->decision};
    const struct object **states =
        NEW_ARRAY(f->arena, f->base->of[KIND_STATE].n, const struct object *);
    size_t n = 0;
    find_in_rows(&x, &w->decision->choose);
    find_in_rows(&x, &w->decision->subtrees);
    ohmen_status status = add_nothing(f, w, e);
    if (status == OHMEN_OK)
        status =
            compile_references(f, w->alternatives.at[0].variant, model_find(f->base, w->id), e);
    if (status == OHMEN_OK)
        add_reached(f, w, w->alternatives.at[0].variant);
    if (status == OHMEN_OK)
        status = reached_by_options(&x, w, e);
    if (status == OHMEN_OK)
        status = reached_by_changes(&x, w, e);
    if (status == OHMEN_OK)
        status = find_states(&x, w, &n, states, e);
    if (status == OHMEN_OK)
        status = compile_today(f, w, e);
    if (status == OHMEN_OK)
        status = worlds_begin(&b->worlds, f, w, n, states, e);
    return status;
}

/* The figures of the worlds are found under the name of the decision. */
static void join_units(struct branching *b)
{
    struct compiled *last = (struct compiled *)b->weighing->unit;
    for (size_t i = 0; i < b->worlds.by_variant.n; i++) {
        const struct world *w = b->worlds.by_variant.at[i].value;
        while (last->also)
            last = (struct compiled *)last->also;
        last->also = w->unit;
    }
}

ohmen_status branching_compile(struct figures *f, struct weighing *w, ohmen_error *e)
{
    struct branching *b = NEW(f->arena, struct branching);
    struct growing g = {.f = f, .b = b, .horizon = w->horizon};
    b->weighing = w;
    figures_settings(f); /* a section of its own, to be there before another is open */
    ohmen_status status = prepare(f, w, b, e);
    if (status == OHMEN_OK)
        status = branching_grow(&g, e);
    if (status == OHMEN_OK)
        status = branching_roll_back(b, f, e);
    if (status != OHMEN_OK)
        return status;
    find_alternatives(f, b);
    w->branching = b;
    status = branching_figures(b, f, e);
    if (status == OHMEN_OK)
        join_units(b);
    return status;
}
