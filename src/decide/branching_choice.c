/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A tree as a choice of which the means of its amounts and of hidden states may be others: it is
 * rolled back anew, with beliefs by Bayes' rule from the start on. For what information is worth,
 * which changes what is done later too. */
#include "decide/branching_choice.h"

#include "figure/states.h"

struct rerolling {
    const struct branching *b;
    struct rollback layout; /* with amounts and probabilities of its own */
    double *belief;         /* [point * n + hidden] */
    bool *known;
    double *value, *scratch;
    size_t n;            /* hidden states */
    const size_t *which; /* target of each thing that is asked for */
    double *all;         /* values of these */
    size_t n_all;
};

static const node_id *amounts_of(const struct branching *b, size_t branch)
{
    for (size_t i = 0; i < b->points.n; i++) {
        if (branch < b->points.at[i].n)
            return b->points.at[i].branches[branch].amounts;
        branch -= b->points.at[i].n;
    }
    return b->nothing->amounts;
}

/* All that is asked for: shares of the hidden states, then amounts by branch and hidden state,
 * those of doing nothing last. What is never asked for stands for the first share. */
static node_id *wanted_of(struct arena *a, const struct branching *b, size_t n_branches)
{
    size_t n = b->worlds.hidden.n;
    node_id *all = NEW_ARRAY(a, n * (n_branches + 2), node_id);
    for (size_t k = 0; k < n; k++)
        all[k] = b->worlds.hidden.share[k];
    for (size_t i = 0; i <= n_branches; i++) {
        const node_id *amounts = amounts_of(b, i);
        for (size_t k = 0; k < n; k++)
            all[n * (i + 1) + k] = amounts[k] == NODE_NONE ? all[0] : amounts[k];
    }
    return all;
}

/* Each of them once: how many, and which one each is. */
static size_t only_different(struct arena *a, size_t n, const node_id *all, node_id *out,
                             size_t *which)
{
    struct strmap known = {0};
    size_t count = 0;
    for (size_t i = 0; i < n; i++) {
        const char *key = arena_printf(a, "%u", (unsigned)all[i]);
        size_t at = (size_t)(const char *)strmap_get(&known, key);
        if (at == 0) {
            out[count++] = all[i];
            at = count;
            strmap_set(a, &known, key, (void *)at);
        }
        which[i] = at - 1;
    }
    return count;
}

static double amount(const struct rerolling *r, const struct way *x, const double *values,
                     const double *belief)
{
    double sum = 0;
    for (size_t k = 0; k < r->n; k++)
        if (x->amounts[k] != NODE_NONE && belief[k] > 0)
            sum += belief[k] * values[k];
    return sum;
}

/* What is believed behind the moves of a branch, in place. */
static void move_on(struct rerolling *r, const struct way *x, double *belief)
{
    double *after = r->scratch;
    for (size_t i = 0; i < x->moves.n; i++) {
        const struct move *m = &x->moves.at[i];
        const struct passage *p = NULL;
        bool flows = m->kind == MOVE_TIME && m->world->flows.n;
        if (m->kind != MOVE_RESET && !flows)
            continue;
        if (flows)
            p = world_passage_known(m->world, m->to - m->at);
        for (size_t k = 0; k < r->n; k++)
            after[k] = 0;
        for (size_t h = 0; h < r->n; h++)
            for (size_t k = 0; k < r->n; k++)
                after[k] += belief[h] * (p ? p->p[h * r->n + k] : (double)(m->map[h] == k));
        for (size_t k = 0; k < r->n; k++)
            belief[k] = after[k];
    }
}

/* Beliefs at the beginning of a branch; its probability. What cannot be read leads to what was
 * believed there before: others may lead to the same place. */
static double begin(const struct rerolling *r, const struct point *p, const struct way *x,
                    const double *at, double *belief)
{
    double sum = 0;
    (void)p;
    if (!x->likelihood) {
        for (size_t k = 0; k < r->n; k++)
            belief[k] = at[k];
        return x->probability;
    }
    for (size_t k = 0; k < r->n; k++)
        sum += at[k] * x->likelihood[k];
    for (size_t k = 0; k < r->n; k++)
        belief[k] = sum > 0 ? at[k] * x->likelihood[k] / sum : x->belief[k];
    return sum;
}

static void prepare(struct rerolling *r, const double *values)
{
    const struct branching *b = r->b;
    double *belief = &r->belief[b->points.n * r->n];
    for (size_t i = 0; i < b->points.n; i++)
        r->known[i] = i == 0;
    for (size_t k = 0; k < r->n; k++)
        r->belief[k] = values[k];
    for (size_t i = b->points.n; i > 0; i--) {
        size_t at = b->order[i - 1];
        const struct point *p = &b->points.at[at];
        for (size_t k = 0; k < p->n && r->known[at]; k++) {
            const struct way *x = &p->branches[k];
            size_t number = p->first_branch + k, place = r->layout.place[b->points.n + number];
            double probability = begin(r, p, x, &r->belief[at * r->n], belief);
            r->layout.amount[place] = -amount(r, x, &values[r->n * (number + 1)], belief);
            if (p->kind != POINT_CHOOSE)
                r->layout.probability[place] = probability;
            if (r->known[x->to])
                continue;
            move_on(r, x, belief);
            for (size_t h = 0; h < r->n; h++)
                r->belief[x->to * r->n + h] = belief[h];
            r->known[x->to] = true;
        }
    }
}

/* What the branches by which an alternative begins are worth on average. */
static double begins(const struct rerolling *r, size_t which)
{
    const struct branching *b = r->b;
    const struct point *root = &b->points.at[0];
    const char *label = b->weighing->alternatives.at[which].options[0];
    const size_t *place = r->layout.place;
    double sum = 0;
    if (b->repeats && text_equal(label, POLICY))
        return r->value[place[0]];
    for (size_t i = 0; i < (root->kind == POINT_SEE ? root->n : 1); i++) {
        const struct way *seen = root->kind == POINT_SEE ? &root->branches[i] : NULL;
        const struct point *p = seen ? &b->points.at[seen->to] : root;
        double share =
            seen ? r->layout.probability[place[b->points.n + root->first_branch + i]] : 1;
        for (size_t k = 0; k < p->n; k++)
            if (text_equal(p->branches[k].label, label))
                sum += share * r->value[place[b->points.n + p->first_branch + k]];
    }
    return sum;
}

static double roll(void *ctx, const double *values, size_t which)
{
    struct rerolling *r = ctx;
    size_t nothing = branching_count(r->b) + 1;
    double worth = amount(r, r->b->nothing, &values[r->n * nothing], values);
    return which == 0 ? 0 : worth + begins(r, which);
}

/* Ties by name. */
static double best_of(void *ctx, const double *targets, size_t *which)
{
    struct rerolling *r = ctx;
    const struct weighing *w = r->b->weighing;
    const double *values = r->all;
    double best = 0;
    *which = 0;
    for (size_t i = 0; i < r->n_all; i++)
        r->all[i] = targets[r->which[i]];
    prepare(r, values);
    rollback_values(&r->layout, isa_best(), r->value);
    for (size_t i = 1; i < w->alternatives.n; i++) {
        double worth = roll(ctx, values, i);
        bool first = text_compare(w->alternatives.at[i].name, w->alternatives.at[*which].name) < 0;
        if (worth > best || (worth == best && first)) {
            best = worth;
            *which = i;
        }
    }
    return best;
}

static double *copied(struct arena *a, const double *from, size_t n)
{
    return arena_copy(a, from, n * sizeof *from);
}

struct choice choice_of_branching(struct arena *a, const struct branching *b)
{
    struct rerolling *r = NEW(a, struct rerolling);
    size_t n = b->worlds.hidden.n, branches = branching_count(b);
    *r = (struct rerolling){.b = b, .layout = *b->laid_out, .n = n};
    r->layout.amount = copied(a, b->laid_out->amount, b->laid_out->n);
    r->layout.probability = copied(a, b->laid_out->probability, b->laid_out->n);
    r->belief = NEW_ARRAY(a, (b->points.n + 1) * n, double);
    r->known = NEW_ARRAY(a, b->points.n, bool);
    r->value = NEW_ARRAY(a, b->laid_out->n, double);
    r->scratch = NEW_ARRAY(a, n, double);
    r->n_all = n * (branches + 2);
    r->all = NEW_ARRAY(a, r->n_all, double);
    size_t *which = NEW_ARRAY(a, r->n_all, size_t);
    node_id *targets = NEW_ARRAY(a, r->n_all, node_id);
    size_t count = only_different(a, r->n_all, wanted_of(a, b, branches), targets, which);
    r->which = which;
    return (struct choice){.ctx = r, .n_targets = count, .targets = targets, .best = best_of};
}

/* --- any decision --- */

struct choice choice_of_decision(struct arena *a, const struct figures *f, struct weighing *w)
{
    return w->branching ? choice_of_branching(a, w->branching) : choice_of_weighing(a, f, w);
}

ohmen_status branching_sample(struct figures *f, struct arena *a, const struct choice *c,
                              const struct sampling_plan *plan, struct sampling *out,
                              ohmen_error *e)
{
    struct sampler *s;
    struct sampling_plan once = *plan;
    once.n_judged = 0;
    once.precision = 0;
    if (c->n_targets > BRANCHING_SAMPLED)
        return error_set(e, OHMEN_COMPUTE, "the tree is too large to be rolled back in samples");
    ohmen_status status = sampler_new(a, f->means, &once, c->n_targets, c->targets, &s, e);
    return status == OHMEN_OK ? sampler_run(a, s, c->n_targets, c->targets, out, NULL, e) : status;
}

/* --- unknown states --- */

/* The state as some variant leaves it alone: under each change that reaches it, as by a hazard
 * whose failures renew it, there is one more. What an option sets is known. */
static bool is_of(const struct figures *f, const struct compiled *u, const struct object *o)
{
    double when;
    return u->object && u->object->kind == KIND_STATE && !u->part && text_equal(u->id, o->id) &&
           !states_reset(f, u->variant, u->object->data, &when);
}

struct share_nodes {
    ARRAY(node_id) nodes;
    ARRAY(size_t) values; /* which value of the state each is the share of */
    const struct compiled *first;
};

static void find_shares(struct arena *a, const struct figures *f, const struct object *o,
                        struct share_nodes *out)
{
    const struct rows *rows = state_values(o->data);
    for (size_t i = 0; i < f->units.n; i++) {
        const struct compiled *u = f->units.at[i];
        for (size_t k = 0; is_of(f, u, o) && k < rows->n; k++) {
            figure_id id = compiled_figure(f, u, PROPERTY_SHARE, rows->keys[k], NULL);
            out->first = out->first ? out->first : u;
            *array_push(a, &out->nodes) = figure_at(f, id)->node;
            *array_push(a, &out->values) = k;
        }
    }
}

static struct unknown_state state_of(struct arena *a, const struct figures *f,
                                     const struct object *o, const struct share_nodes *all)
{
    const struct rows *rows = state_values(o->data);
    double *probabilities = NEW_ARRAY(a, rows->n, double);
    double *values = NEW_ARRAY(a, rows->n * all->nodes.n, double);
    for (size_t i = 0; i < rows->n; i++) {
        probabilities[i] =
            figure_value(f, compiled_figure(f, all->first, PROPERTY_SHARE, rows->keys[i], NULL));
        for (size_t k = 0; k < all->nodes.n; k++)
            values[i * all->nodes.n + k] = all->values.at[k] == i;
    }
    return (struct unknown_state){.name = o->id,
                                  .n_nodes = all->nodes.n,
                                  .nodes = all->nodes.at,
                                  .n = rows->n,
                                  .states = rows->keys,
                                  .probabilities = probabilities,
                                  .values = values};
}

size_t states_of_decision(struct arena *a, const struct figures *f,
                          const struct unknown_state **out)
{
    const struct objects *all = &f->base->of[KIND_STATE];
    struct unknown_state *states = NEW_ARRAY(a, all->n, struct unknown_state);
    size_t n = 0;
    for (size_t i = 0; i < all->n; i++) {
        struct share_nodes shares = {{0}, {0}, NULL};
        if (((const struct state *)all->at[i]->data)->is.n)
            find_shares(a, f, all->at[i], &shares);
        if (shares.nodes.n)
            states[n++] = state_of(a, f, all->at[i], &shares);
    }
    *out = states;
    return n;
}
