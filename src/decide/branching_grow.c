/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Growing a tree: from the steps of the document to points and branches.
 *
 * Depth first in the order of names; a point is found again by its place in the document, its time,
 * what is in service, and what is believed (branching_standing.c). */
#include "decide/branching_standing.h"

#include <math.h>

#include "figure/horizon.h"
#include "figure/service.h"

/* --- steps --- */

static void say(struct text *t, const char *format, const char *what)
{
    text_add(t, t->n ? "; " : "");
    text_printf(t, format, what);
}

static const char *quantity_words(struct growing *g, const struct quantity *q)
{
    return quantity_reads(g->f, q);
}

/* The option that is applied already and excludes this one, or is excluded by it; or NULL. */
static const char *excluded_by(const struct growing *g, const struct path *p, const char *option)
{
    const struct option *o = model_get(g->f->base, KIND_OPTION, option);
    for (size_t i = 0; i < p->applied.n; i++) {
        const char *other = p->applied.at[i].option;
        const struct option *q = model_get(g->f->base, KIND_OPTION, other);
        if (standing_has_name(&o->excludes, other) || standing_has_name(&q->excludes, option))
            return other;
    }
    return NULL;
}

/* Why an option cannot be applied here, or NULL. */
static const char *why_not(const struct growing *g, const struct standing *s, const char *option)
{
    const struct option *o = model_get(g->f->base, KIND_OPTION, option);
    const char *other = excluded_by(g, &s->done, option);
    if (other)
        return arena_printf(g->f->arena,
                            "the options \"%s\" and \"%s\" exclude each other, and both are "
                            "applied",
                            other, option);
    for (size_t k = 0; k < o->requires.n; k++)
        if (!standing_applied(&s->done, o->requires.at[k]))
            return arena_printf(g->f->arena,
                                "the option \"%s\" requires \"%s\", which is not applied before it",
                                option, o->requires.at[k]);
    return NULL;
}

/* An option that is applied again replaces what it brought before. */
static ohmen_status apply(struct growing *g, struct way *b, struct standing *s, const char *option,
                          ohmen_error *e)
{
    const struct applied *before = standing_applied(&s->done, option);
    struct life life = life_later(g->f, option, s->time);
    const struct compiled *unused;
    ohmen_status status = cost_compile(g->f, option, &unused, e);
    if (status != OHMEN_OK)
        return status;
    if (before && (!g->b->repeats || life.renewed))
        return standing_fail(
            g, b->path, e, arena_printf(g->f->arena, "the option \"%s\" is applied twice", option));
    const char *why = why_not(g, s, option);
    if (why)
        return standing_fail(g, b->path, e, why);
    struct move *m = standing_move(g, b, MOVE_APPLY, s->time);
    m->what = option;
    m->before = before ? before->later : -1;
    standing_apply(g, &s->done, option, s->time);
    if (life.begin <= s->time)
        standing_reset(g, b, s, option);
    return OHMEN_OK;
}

static const struct reading_test *test_of(struct growing *g, const char *inspect, size_t *state,
                                          const char **test)
{
    const struct hidden *h = &g->b->worlds.hidden;
    for (size_t i = 0; i < h->n_states; i++) {
        size_t n = strlen(h->states[i]->id);
        const struct state *s = h->states[i]->data;
        if (strncmp(inspect, h->states[i]->id, n) != 0 || inspect[n] != '.')
            continue;
        for (size_t k = 0; k < s->tests.n; k++)
            if (text_equal(s->tests.keys[k], inspect + n + 1)) {
                *state = i;
                *test = s->tests.keys[k];
                return ROW(struct reading_test, s->tests, k);
            }
    }
    return NULL;
}

/* What is paid at the end of the horizon, or would be behind it, is no cost. */
static void pay(struct growing *g, struct way *b, const struct standing *s,
                const struct quantity *paid, const char *what)
{
    if (s->time >= g->horizon - SAME_TIME)
        return;
    struct move *m = standing_move(g, b, MOVE_PAY, s->time);
    m->paid = paid;
    m->what = what;
}

static void pay_for_test(struct growing *g, struct way *b, const struct standing *s,
                         const char *inspect)
{
    size_t state;
    const char *name;
    const struct reading_test *t = test_of(g, inspect, &state, &name);
    if (t && t->costs)
        pay(g, b, s, t->costs, inspect);
}

static ohmen_status grow_point(struct growing *g, enum point_kind kind, const struct step *step,
                               const struct standing *at, struct way *by, ohmen_error *e);
static ohmen_status grow_stage(struct growing *g, const struct standing *at, size_t *out,
                               ohmen_error *e);

static ohmen_status end_of_branch(struct growing *g, struct way *b, struct standing *s,
                                  ohmen_error *e)
{
    const struct decision *d = g->b->weighing->decision;
    if (!d->every) {
        ohmen_status status = standing_pass(g, b, s, g->horizon, e);
        return status == OHMEN_OK ? grow_point(g, POINT_END, NULL, s, b, e) : status;
    }
    double next = (floor(s->time / g->b->every + SAME_TIME) + 1) * g->b->every;
    ohmen_status status = standing_pass(g, b, s, next, e);
    if (status != OHMEN_OK)
        return status;
    if (s->time >= g->horizon - SAME_TIME)
        return grow_point(g, POINT_END, NULL, s, b, e);
    return grow_stage(g, s, &b->to, e);
}

static const struct list *subtree_of(const struct decision *d, const char *name)
{
    for (size_t i = 0; i < d->subtrees.n; i++)
        if (text_equal(d->subtrees.keys[i], name))
            return &((const struct list *)d->subtrees.at)[i];
    return NULL;
}

/* One step that is not the last one of its branch. */
static ohmen_status take_step(struct growing *g, struct way *b, struct standing *s,
                              const struct step *step, struct text *words, ohmen_error *e)
{
    if (step->pay) {
        pay(g, b, s, step->pay, "pay");
        say(words, "pay %s", quantity_words(g, step->pay));
        return OHMEN_OK;
    }
    if (step->wait) {
        double to = s->time + expr_constant(step->wait->expr);
        say(words, "wait %s", quantity_words(g, step->wait));
        if (to > g->horizon - SAME_TIME && !g->b->repeats)
            return standing_fail(g, b->path, e, "it waits beyond the horizon");
        return standing_pass(g, b, s, to, e);
    }
    if (step->apply) {
        say(words, "apply %s", step->apply);
        return apply(g, b, s, step->apply, e);
    }
    if (step->change) {
        const char *name = arena_printf(g->f->arena, "%s: %s, change %zu", g->b->weighing->id,
                                        b->path, s->done.changed.n + 1);
        say(words, "%s", "change the register");
        standing_change(g, &s->done, name, step->change, s->time);
    }
    return OHMEN_OK;
}

/* Follows steps to the next point or the end. */
static ohmen_status follow(struct growing *g, struct way *b, struct standing *s,
                           const struct list *steps, struct text *words, ohmen_error *e)
{
    for (size_t i = 0; i < steps->n; i++) {
        const struct step *step = ((struct step *const *)steps->at)[i];
        if (step->choose.n)
            return grow_point(g, POINT_CHOOSE, step, s, b, e);
        if (step->chance.n)
            return grow_point(g, POINT_CHANCE, step, s, b, e);
        if (step->inspect) {
            say(words, "inspect %s", step->inspect);
            pay_for_test(g, b, s, step->inspect);
            return grow_point(g, POINT_READ, step, s, b, e);
        }
        if (step->go)
            return follow(g, b, s, subtree_of(g->b->weighing->decision, step->go), words, e);
        ohmen_status status = take_step(g, b, s, step, words, e);
        if (status != OHMEN_OK)
            return status;
    }
    return end_of_branch(g, b, s, e);
}

static ohmen_status grow_branch(struct growing *g, const struct point *from, struct way *b,
                                const struct list *steps, ohmen_error *e)
{
    struct text words;
    struct standing s = {from->time, from->done, b->belief, b->path};
    if (++g->n_branches > BRANCHING_MOST)
        return error_set(e, OHMEN_COMPUTE, "\"%s\" has more than %d branches", g->b->weighing->id,
                         BRANCHING_MOST);
    text_init(&words, g->f->arena);
    b->value_figure = b->probability_figure = b->reach_figure = FIGURE_NONE;
    ohmen_status status = follow(g, b, &s, steps, &words, e);
    b->steps = text_str(&words);
    return status;
}

/* --- points --- */

static struct way *add_branch(struct growing *g, struct point *p, const char *label,
                              const double *belief, double probability)
{
    struct way *b = &p->branches[p->n++];
    *b = (struct way){.label = label, .belief = belief, .probability = probability};
    b->path = standing_join(g, p->path, label);
    return b;
}

/* What is believed once something was read or seen that has these likelihoods; its probability. */
static double posterior(struct growing *g, const double *belief, const double *likelihood,
                        const double **out)
{
    size_t n = standing_hidden(g);
    double *after = NEW_ARRAY(g->f->arena, n, double), sum = 0;
    for (size_t k = 0; k < n; k++)
        sum += belief[k] * likelihood[k];
    for (size_t k = 0; k < n && sum > 0; k++)
        after[k] = belief[k] * likelihood[k] / sum;
    *out = after;
    return sum;
}

/* Branches for what may be read or seen: likelihoods[r] by hidden state. */
static void add_told(struct growing *g, struct point *p, const char *label,
                     const double *likelihood)
{
    const double *after;
    double probability = posterior(g, p->belief, likelihood, &after);
    if (probability > 0)
        add_branch(g, p, label, after, probability)->likelihood = likelihood;
}

static const double *likelihood_of(struct growing *g, const struct reading_test *t, size_t state,
                                   size_t reading)
{
    const struct hidden *h = &g->b->worlds.hidden;
    double *all = NEW_ARRAY(g->f->arena, h->n, double);
    const struct rows *values = state_values(h->states[state]->data);
    for (size_t k = 0; k < h->n; k++) {
        const char *value = values->keys[hidden_value(h, k, state)];
        for (size_t r = 0; r < t->given.n; r++)
            if (text_equal(t->given.keys[r], value)) {
                const struct list *row = &((const struct list *)t->given.at)[r];
                const struct quantity *q = ((struct quantity *const *)row->at)[reading];
                all[k] = expr_constant(q->expr);
            }
    }
    return all;
}

/* --- what is at a point --- */

static void add_readings(struct growing *g, struct point *p, const struct step *step)
{
    size_t state = 0;
    const char *name;
    const struct reading_test *t = test_of(g, step->inspect, &state, &name);
    p->test = step->inspect;
    p->branches = NEW_ARRAY(g->f->arena, t->reads.n, struct way);
    for (size_t r = 0; r < t->reads.n; r++)
        add_told(g, p, t->reads.at[r], likelihood_of(g, t, state, r));
}

static ohmen_status add_chances(struct growing *g, struct point *p, const struct step *step,
                                ohmen_error *e)
{
    double left = 1;
    size_t rest = step->chance.n;
    ohmen_status status = OHMEN_OK;
    p->branches = NEW_ARRAY(g->f->arena, step->chance.n, struct way);
    for (size_t i = 0; status == OHMEN_OK && i < step->chance.n; i++) {
        const struct fork *fork = ROW(struct fork, step->chance, i);
        struct way *b = add_branch(g, p, step->chance.keys[i], p->belief, 0);
        bool is_rest = fork->p->shape == SHAPE_EXPRESSION && !fork->p->expr;
        b->share = is_rest ? NULL : fork->p;
        if (is_rest)
            rest = i;
        else
            status = branching_certain(g->f, g->b->weighing, fork->p, &b->probability, e);
        left -= b->probability;
    }
    if (rest < p->n)
        p->branches[rest].probability = fmax(left, 0);
    return status;
}

static void add_choices(struct growing *g, struct point *p, const struct rows *rows)
{
    p->branches = NEW_ARRAY(g->f->arena, rows->n, struct way);
    for (size_t i = 0; i < rows->n; i++)
        add_branch(g, p, rows->keys[i], p->belief, 1);
}

/* The steps behind branch k of a point, by its label. */
static const struct list *steps_behind(enum point_kind kind, const struct step *step,
                                       const char *label)
{
    const struct rows *rows = kind == POINT_READ ? &step->reads : &step->choose;
    for (size_t i = 0; kind != POINT_CHANCE && i < rows->n; i++)
        if (text_equal(rows->keys[i], label))
            return &((const struct list *)rows->at)[i];
    for (size_t i = 0; kind == POINT_CHANCE && i < step->chance.n; i++)
        if (text_equal(step->chance.keys[i], label))
            return &ROW(struct fork, step->chance, i)->then;
    return NULL;
}

/* A new point; the number of one that is known, with *known. */
static size_t place_point(struct growing *g, enum point_kind kind, const void *place,
                          const struct standing *s, bool *known)
{
    const char *key = standing_key(g, place, s);
    void *at = strmap_get(&g->points, key);
    *known = at != NULL;
    if (at)
        return (size_t)at - 1;
    struct point *p = array_push(g->f->arena, &g->b->points);
    *p = (struct point){
        .kind = kind, .path = s->path, .time = s->time, .done = s->done, .belief = s->belief};
    p->value_figure = p->reach_figure = FIGURE_NONE;
    strmap_set(g->f->arena, &g->points, key, (void *)g->b->points.n);
    return g->b->points.n - 1;
}

static void close_point(struct growing *g, size_t at)
{
    *array_push(g->f->arena, &g->order) = at;
}

static ohmen_status grow_point(struct growing *g, enum point_kind kind, const struct step *step,
                               const struct standing *at, struct way *by, ohmen_error *e)
{
    bool known;
    struct standing s = *at;
    s.path = by->path;
    by->to = place_point(g, kind, kind == POINT_END ? (const void *)g : step, &s, &known);
    if (known)
        return OHMEN_OK;
    size_t number = by->to;
    struct point p = g->b->points.at[number];
    ohmen_status status = OHMEN_OK;
    if (kind == POINT_CHOOSE)
        add_choices(g, &p, &step->choose);
    if (kind == POINT_CHANCE)
        status = add_chances(g, &p, step, e);
    if (kind == POINT_READ)
        add_readings(g, &p, step);
    for (size_t i = 0; status == OHMEN_OK && i < p.n; i++)
        status =
            grow_branch(g, &p, &p.branches[i], steps_behind(kind, step, p.branches[i].label), e);
    g->b->points.at[number] = p;
    close_point(g, number);
    return status;
}

/* --- choices that come again --- */

/* Which states are seen. */
static bool is_seen(const struct growing *g, size_t state)
{
    const struct names *sees = &g->b->weighing->decision->sees;
    for (size_t i = 0; i < sees->n; i++)
        if (text_equal(sees->at[i], g->b->worlds.hidden.states[state]->id))
            return true;
    return false;
}

/* The values of the states that are seen: "aged, wet"; with what is believed of the others where
 * that is not certain. */
static const char *seen_words(struct growing *g, size_t hidden)
{
    const struct hidden *h = &g->b->worlds.hidden;
    struct text t;
    text_init(&t, g->f->arena);
    for (size_t i = 0; i < h->n_states; i++)
        if (is_seen(g, i))
            text_printf(&t, "%s%s", t.n ? ", " : "",
                        state_values(h->states[i]->data)->keys[hidden_value(h, hidden, i)]);
    return text_str(&t);
}

static bool sees_alike(const struct growing *g, size_t p, size_t q)
{
    const struct hidden *h = &g->b->worlds.hidden;
    for (size_t i = 0; i < h->n_states; i++)
        if (is_seen(g, i) && hidden_value(h, p, i) != hidden_value(h, q, i))
            return false;
    return true;
}

/* One branch for each set of values that may be seen. */
static void add_sights(struct growing *g, struct point *p)
{
    size_t n = standing_hidden(g);
    p->branches = NEW_ARRAY(g->f->arena, n, struct way);
    for (size_t k = 0; k < n; k++) {
        bool first = true;
        double *likelihood = NEW_ARRAY(g->f->arena, n, double);
        for (size_t i = 0; i < n; i++) {
            likelihood[i] = sees_alike(g, i, k);
            first = first && !(i < k && likelihood[i] > 0);
        }
        if (first)
            add_told(g, p, seen_words(g, k), likelihood);
    }
}

/* "34 % aged": what is believed, but for the likeliest state where there are two. */
static const char *belief_words(struct growing *g, const double *belief)
{
    const struct hidden *h = &g->b->worlds.hidden;
    struct text t;
    text_init(&t, g->f->arena);
    for (size_t k = 0; k < h->n; k++)
        if (belief[k] > 0)
            text_printf(&t, "%s%.3g %% %s", t.n ? ", " : "", 100 * belief[k], h->names[k]);
    return text_str(&t);
}

static const char *state_words(struct growing *g, const struct standing *s, const char *seen)
{
    struct text t;
    text_init(&t, g->f->arena);
    text_add(&t, seen);
    for (size_t i = 0; i < s->done.applied.n; i++) {
        const struct applied *x = &s->done.applied.at[i];
        if (!standing_leaves_trace(g, s, x))
            continue;
        text_printf(&t, "%s%s", t.n ? ", " : "", x->option);
        if (timeline_is_dated(g->f, &s->done, x, s->time))
            text_printf(&t, " of %s",
                        horizon_label(g->f->arena, g->f->base->settings, (uint32_t)x->later));
    }
    return text_str(&t);
}

static size_t stage_at(const struct growing *g, double time)
{
    return (size_t)floor(time / g->b->every + 0.5);
}

/* A path that no other point has. */
static const char *own_path(struct growing *g, const char *stage, const char *state)
{
    const char *path = *state ? arena_printf(g->f->arena, "%s/%s", stage, state) : stage;
    const char *own = path;
    for (size_t n = 2; strmap_has(&g->paths, own); n++)
        own = arena_printf(g->f->arena, "%s #%zu", path, n);
    strmap_set(g->f->arena, &g->paths, own, NULL);
    return own;
}

/* Is the branch possible here: nothing is applied for good twice, nor with what it excludes, nor
 * without what it requires? */
static bool may_apply(struct growing *g, const struct standing *s, const struct list *steps,
                      size_t at)
{
    const char *option = ((const struct step *const *)steps->at)[at]->apply;
    const struct option *o = model_get(g->f->base, KIND_OPTION, option);
    if (standing_applied(&s->done, option) && (!standing_sets_states(g, option) || o->renewed))
        return false;
    if (excluded_by(g, &s->done, option))
        return false;
    for (size_t k = 0; k < o->requires.n; k++) {
        bool there = standing_applied(&s->done, o->requires.at[k]) != NULL;
        for (size_t i = 0; i < at && !there; i++) {
            const char *before = ((const struct step *const *)steps->at)[i]->apply;
            there = before && text_equal(before, o->requires.at[k]);
        }
        if (!there)
            return false;
    }
    return true;
}

static bool is_possible(struct growing *g, const struct standing *s, const struct list *steps)
{
    for (size_t i = 0; i < steps->n; i++)
        if (((const struct step *const *)steps->at)[i]->apply && !may_apply(g, s, steps, i))
            return false;
    return true;
}

static void add_possible(struct growing *g, struct point *p, const struct standing *s)
{
    const struct rows *rows = &g->b->weighing->decision->choose;
    p->branches = NEW_ARRAY(g->f->arena, rows->n, struct way);
    for (size_t i = 0; i < rows->n; i++)
        if (is_possible(g, s, &((const struct list *)rows->at)[i]))
            add_branch(g, p, rows->keys[i], p->belief, 1);
}

/* Beliefs at one stage are counted: some trees have no end of them. */
static ohmen_status count_beliefs(struct growing *g, const struct standing *s, ohmen_error *e)
{
    const struct decision *d = g->b->weighing->decision;
    size_t stage = stage_at(g, s->time), most = d->beliefs ? (size_t)d->beliefs : BELIEFS_MOST;
    struct text t;
    text_init(&t, g->f->arena);
    text_printf(&t, "%zu", stage);
    standing_write_belief(g, &t, s->belief);
    if (strmap_has(&g->believed, text_str(&t)))
        return OHMEN_OK;
    strmap_set(g->f->arena, &g->believed, text_str(&t), NULL);
    if (++g->beliefs[stage] <= most)
        return OHMEN_OK;
    return error_set(e, OHMEN_COMPUTE,
                     "\"%s\", at the choice of %s: there are more than %zu beliefs, which do not "
                     "merge; allow more with \"beliefs\", or choose or inspect less often",
                     d->question ? g->b->weighing->id : "", g->b->stages[stage], most);
}

static ohmen_status grow_choice(struct growing *g, const struct standing *at, const char *seen,
                                size_t *out, ohmen_error *e)
{
    bool known;
    struct standing s = *at;
    size_t number = *out =
        place_point(g, POINT_CHOOSE, &g->b->weighing->decision->choose, &s, &known);
    if (known)
        return OHMEN_OK;
    ohmen_status status = count_beliefs(g, &s, e);
    if (status != OHMEN_OK)
        return status;
    struct point p = g->b->points.at[number];
    if (!*seen && standing_hidden(g) > 1)
        seen = belief_words(g, s.belief);
    p.is_stage = true;
    p.state = state_words(g, &s, seen);
    p.path = own_path(g, g->b->stages[stage_at(g, s.time)], p.state);
    if (!*p.state)
        p.state = "as it is";
    add_possible(g, &p, &s);
    if (p.n == 0)
        return standing_fail(g, p.path, e,
                             "no branch is possible any more; add one that does nothing");
    for (size_t i = 0; i < p.n; i++)
        p.branches[i].path = standing_join(g, p.path, p.branches[i].label);
    struct step stage = {.choose = g->b->weighing->decision->choose};
    for (size_t i = 0; status == OHMEN_OK && i < p.n; i++)
        status = grow_branch(g, &p, &p.branches[i],
                             steps_behind(POINT_CHOOSE, &stage, p.branches[i].label), e);
    g->b->points.at[number] = p;
    close_point(g, number);
    return status;
}

/* What is seen leads to the choice, at once. */
static ohmen_status grow_sight(struct growing *g, const struct standing *at, size_t *out,
                               ohmen_error *e)
{
    bool known;
    size_t number = *out = place_point(g, POINT_SEE, &g->b->weighing->decision->sees, at, &known);
    if (known)
        return OHMEN_OK;
    struct point p = g->b->points.at[number];
    ohmen_status status = OHMEN_OK;
    p.path = own_path(g, g->b->stages[stage_at(g, at->time)], state_words(g, at, ""));
    add_sights(g, &p);
    for (size_t i = 0; status == OHMEN_OK && i < p.n; i++) {
        struct way *b = &p.branches[i];
        struct standing s = *at;
        s.belief = b->belief;
        b->path = standing_join(g, p.path, b->label);
        b->steps = "";
        b->value_figure = b->probability_figure = b->reach_figure = FIGURE_NONE;
        status = grow_choice(g, &s, b->label, &b->to, e);
        if (status == OHMEN_OK)
            b->path = g->b->points.at[b->to].path;
    }
    g->b->points.at[number] = p;
    close_point(g, number);
    return status;
}

static ohmen_status grow_stage(struct growing *g, const struct standing *at, size_t *out,
                               ohmen_error *e)
{
    if (g->b->weighing->decision->sees.n)
        return grow_sight(g, at, out, e);
    return grow_choice(g, at, "", out, e);
}

/* --- the whole --- */

/* To the end of the horizon without any choice. */
static ohmen_status grow_nothing(struct growing *g, ohmen_error *e)
{
    const struct point *root = &g->b->points.at[0];
    struct way *b = NEW(g->f->arena, struct way);
    struct standing s = {0, {{0}, {0}}, root->belief, "do-nothing"};
    *b = (struct way){.label = "do-nothing",
                      .path = "do-nothing",
                      .steps = "",
                      .belief = root->belief,
                      .probability = 1};
    b->value_figure = b->probability_figure = b->reach_figure = FIGURE_NONE;
    g->b->nothing = b;
    ohmen_status status = standing_pass(g, b, &s, g->horizon, e);
    return status == OHMEN_OK ? grow_point(g, POINT_END, NULL, &s, b, e) : status;
}

static ohmen_status name_stages(struct growing *g, ohmen_error *e)
{
    struct branching *b = g->b;
    const struct decision *d = b->weighing->decision;
    if (!d->every)
        return OHMEN_OK;
    b->repeats = true;
    b->every = expr_constant(d->every->expr);
    double n = ceil(g->horizon / b->every - SAME_TIME);
    if (n > STAGES_MOST)
        return error_set(e, OHMEN_COMPUTE,
                         "\"%s\": the choice comes again %.0f times, at most %d are possible",
                         b->weighing->id, n, STAGES_MOST);
    b->n_stages = (size_t)n;
    b->stages = NEW_ARRAY(g->f->arena, b->n_stages, const char *);
    g->beliefs = NEW_ARRAY(g->f->arena, b->n_stages + 1, size_t);
    for (size_t i = 0; i < b->n_stages; i++) {
        char text[DATE_TEXT];
        double t = (double)i * b->every;
        bool whole = b->every == floor(b->every);
        day first = day_years_behind(horizon_start(g->f->base->settings), t);
        b->stages[i] = whole ? horizon_label(g->f->arena, g->f->base->settings, (uint32_t)t)
                             : arena_str(g->f->arena, date_write(text, first));
    }
    return OHMEN_OK;
}

ohmen_status branching_grow(struct growing *g, ohmen_error *e)
{
    const struct decision *d = g->b->weighing->decision;
    struct step *root = NEW(g->f->arena, struct step);
    struct way by = {.path = ""};
    struct standing s = {0, {{0}, {0}}, g->b->worlds.hidden.start, ""};
    ohmen_status status = name_stages(g, e);
    root->choose = d->choose;
    if (status == OHMEN_OK)
        status = g->b->repeats ? grow_stage(g, &s, &by.to, e)
                               : grow_point(g, POINT_CHOOSE, root, &s, &by, e);
    if (status == OHMEN_OK)
        status = grow_nothing(g, e);
    g->b->order = g->order.at;
    return status;
}
