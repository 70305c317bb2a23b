/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What information is worth (information.h): each unknown quantity is moved for all targets at
 * once. Owns nothing beyond the arena of the figures. */
#include "decide/information.h"

#include <math.h>
#include <stdlib.h>

#include "decide/gain.h"
#include "decide/regress.h"

/* How narrow changes are made, in z. */
static const double NARROW = 1e-14, NARROW_POINT = 1e-9;
/* Where quadrature stops: of what costs no evaluation, and of what does. */
static const double TOLERANCE = 1e-9, TOLERANCE_POINT = 1e-3;
/* Nodes will do where they set the worth off by no more than the first part of itself, or the
 * second part of the greatest mean of a target; where no other choice is met, the third part of it.
 * */
static const double OFF = 1e-3, OFF_TARGET = 1e-6, OFF_NOWHERE = 1e-4;

/* Of the range: how far from the mean the line is taken that touches `best` there. */
static const double TOUCH = 1e-4;
/* Gains above that line below this part of the worth are rounding. */
static const double ROUNDING = 1e-10;

struct looking {
    struct moving moving;
    struct figures *f;
    const struct choice *choice;
    struct information *out;
    struct regress *regress; /* or NULL */
    double greatest;         /* mean of a target, without its sign */
    bool *seen;              /* by input of the graph */
};

/* A quantity, and what is had at a value of it without knowing it. */
struct along {
    struct looking *l;
    struct unknown u;
    double now;            /* its mean */
    double touches, slope; /* of a line, without choice.worth */
    const struct correction *correction;
};

/* --- choices of weighings --- */

static double best_of_weighing(void *ctx, const double *values, size_t *which)
{
    const struct weighing *w = ctx;
    size_t best = 0;
    for (size_t k = 1; k < w->alternatives.n; k++) {
        double before = best ? values[best - 1] : 0;
        bool is_level = values[k - 1] == before;
        if (values[k - 1] > before || (is_level && text_compare(w->alternatives.at[k].name,
                                                                w->alternatives.at[best].name) < 0))
            best = k;
    }
    *which = best;
    return best ? values[best - 1] : 0;
}

static double worth_in_weighing(void *ctx, const double *values, size_t which)
{
    (void)ctx;
    return which ? values[which - 1] : 0;
}

struct choice choice_of_weighing(struct arena *a, const struct figures *f, struct weighing *w)
{
    size_t n = w->alternatives.n - 1;
    node_id *targets = NEW_ARRAY(a, n, node_id);
    for (size_t k = 0; k < n; k++)
        targets[k] = figure_at(f, w->alternatives.at[k + 1].net)->node;
    return (struct choice){.ctx = w,
                           .n_targets = n,
                           .targets = targets,
                           .best = best_of_weighing,
                           .worth = worth_in_weighing};
}

/* --- gains --- */

static double without(const struct along *x, const double *values)
{
    const struct choice *c = x->l->choice;
    if (c->worth)
        return c->worth(c->ctx, values, x->l->out->best);
    if (x->u.way == UNKNOWN_LINE)
        return x->touches + x->slope * (x->u.x[0] - x->now);
    return x->l->out->worth;
}

static double gain_of(const struct along *x, double *values, size_t *best)
{
    const struct choice *c = x->l->choice;
    if (x->correction)
        correction_apply(x->correction, values);
    double worth = c->best(c->ctx, values, best), before = without(x, values);
    double gain = worth - before;
    bool is_rounding = !c->worth && fabs(gain) <= ROUNDING * (fabs(worth) + fabs(before));
    return is_rounding ? 0 : gain;
}

static bool gain_at(void *ctx, double z, double *gain, size_t *best)
{
    struct along *x = ctx;
    if (!unknown_put(&x->u, z))
        return false;
    double *values = unknown_values(&x->u, z, fabs(z) > GAIN_RANGE);
    if (!values)
        return false;
    *gain = gain_of(x, values, best);
    return isfinite(*gain);
}

/* A gain that is found as the difference of two sums, when the choice cannot say what is had
 * without knowing: what rounding leaves of it is none. */
static double above_rounding(const struct looking *l, double gain)
{
    double least = l->choice->worth ? 0 : ROUNDING * fabs(l->out->worth);
    return gain > least ? gain : 0;
}

static double best_at(struct along *x, double value)
{
    const struct choice *c = x->l->choice;
    size_t unused;
    x->u.x[0] = value;
    return c->best(c->ctx, unknown_values(&x->u, 0, true), &unused);
}

static void find_touching_line(struct along *x)
{
    double step = TOUCH * (x->u.end[1] - x->u.end[0]);
    x->touches = best_at(x, x->now);
    x->slope = (best_at(x, x->now + step) - x->touches) / step;
}

/* --- changes --- */

/* Beyond is where the choice of today is not the best one; of two such sides the one that is
 * farther from the mean. */
static enum information_side side_of(const struct along *x, size_t below, size_t above, double at)
{
    if (below == x->l->out->best)
        return INFORMATION_ABOVE;
    if (above == x->l->out->best)
        return INFORMATION_BELOW;
    return at > x->now ? INFORMATION_ABOVE : INFORMATION_BELOW;
}

static void add_change(struct along *x, struct information_input *in, const struct gain_change *c)
{
    if (fabs(c->z) > GAIN_RANGE || !unknown_put(&x->u, c->z))
        return;
    enum information_side side = side_of(x, c->below, c->above, x->u.x[0]);
    bool above = side == INFORMATION_ABOVE;
    *array_push(x->l->f->arena, &in->changes) = (struct information_change){
        .side = side,
        .at = x->u.x[0],
        .beyond = above ? c->above : c->below,
        .before = above ? c->below : c->above,
        .probability = dist_normal_probability(above ? -c->z : c->z),
    };
}

/* --- continuous quantities --- */

static bool find_gain(struct along *x, struct gain *out)
{
    bool is_point = x->u.way == UNKNOWN_POINTS;
    struct gain_curve curve = {.ctx = x,
                               .at = gain_at,
                               .none = x->l->choice->worth ? x->l->out->best : SIZE_MAX,
                               .far = x->u.way == UNKNOWN_LINE ? GAIN_FAR : UNKNOWN_FAR,
                               .narrow = is_point ? NARROW_POINT : NARROW,
                               .tolerance = is_point ? TOLERANCE_POINT : TOLERANCE};
    return gain_find(x->l->f->arena, &curve, out);
}

/* With as many nodes as it needs; false where it is not possible. *enough: nodes will do. */
static bool find_by_nodes(struct along *x, struct gain *out, bool *enough)
{
    *enough = false;
    for (size_t n = UNKNOWN_LEAST; n <= UNKNOWN_MOST && !*enough; n *= 2) {
        if (!unknown_nodes(&x->u, n) || !find_gain(x, out))
            return false;
        out->error += x->u.off;
        double target = out->mean == 0 ? OFF_NOWHERE : OFF_TARGET;
        *enough = x->u.off <= fmax(OFF * out->mean, target * x->l->greatest);
    }
    return true;
}

static bool find_along(struct along *x, struct gain *out)
{
    bool enough;
    if (x->u.is_linear) {
        if (!unknown_line(&x->u))
            return false;
        if (x->u.way == UNKNOWN_LINE && !x->l->choice->worth)
            find_touching_line(x);
        return find_gain(x, out);
    }
    if (!find_by_nodes(x, out, &enough))
        return false;
    if (enough)
        return true;
    x->u.way = UNKNOWN_POINTS;
    return find_gain(x, out);
}

static double worth_of(const struct along *x, const struct gain *gain)
{
    bool is_difference = !x->l->choice->worth && x->u.way != UNKNOWN_LINE;
    return is_difference && gain->mean <= gain->error ? 0 : above_rounding(x->l, gain->mean);
}

/* --- errors --- */

/* What knowing it is worth, by values as they are told now. */
typedef bool find_worth(struct along *x, void *ctx, double *worth);

static bool worth_over_range(struct along *x, void *ctx, double *worth)
{
    struct gain gain = {0};
    (void)ctx;
    if (!find_gain(x, &gain))
        return false;
    *worth = worth_of(x, &gain);
    return true;
}

static double off_without_missing(struct along *x, find_worth *find, void *ctx, double worth)
{
    double bare = worth;
    x->u.bare = true;
    find(x, ctx, &bare);
    x->u.bare = false;
    return fabs(worth - bare);
}

/* How far it is from what all sets make of it, and by the jackknife how sure that is. */
static double off_by_sample(struct along *x, find_worth *find, void *ctx, double worth, size_t sets,
                            const struct correction *all)
{
    double whole = worth, sum = 0, squares = 0, n = (double)sets;
    x->correction = &all[0];
    find(x, ctx, &whole);
    for (size_t i = 1; i <= sets; i++) {
        double one = worth;
        x->correction = &all[i];
        find(x, ctx, &one);
        sum += one - whole;
        squares += (one - whole) * (one - whole);
    }
    x->correction = NULL;
    double variance = fmax(0, squares - sum * sum / n) * (n - 1) / n;
    return fabs(worth - whole) + sqrt(variance);
}

static double off_of(struct along *x, find_worth *find, void *ctx, double worth)
{
    const struct information *out = x->l->out;
    size_t sets = 0;
    const struct correction *all = NULL;
    if (x->u.is_exact)
        return 0;
    if (x->l->regress)
        all = regress_corrections(x->l->regress, &x->u, x->l->choice, out->means, out->best, &sets);
    return all ? off_by_sample(x, find, ctx, worth, sets, all)
               : off_without_missing(x, find, ctx, worth);
}

static bool look_over_range(struct along *x, struct information_input *in)
{
    struct gain gain = {0};
    if (!find_along(x, &gain))
        return false;
    in->worth = worth_of(x, &gain);
    in->error = gain.error;
    for (size_t i = 0; i < gain.changes.n; i++)
        add_change(x, in, &gain.changes.at[i]);
    in->error += off_of(x, worth_over_range, NULL, in->worth);
    return true;
}

/* --- discrete ones --- */

struct atom {
    double x, probability;
    size_t best;
};

/* Those that have a probability, rising. */
static size_t find_atoms(const struct quantity *q, struct atom *out)
{
    size_t n = 0;
    for (size_t i = 0; i < q->n; i++) {
        size_t k = q->times < 0 ? q->n - 1 - i : i;
        if (q->probabilities[k] > 0)
            out[n++] =
                (struct atom){.x = q->values[k] * q->times, .probability = q->probabilities[k]};
    }
    return n;
}

/* Between two neighbours, of which the best alternatives differ. */
static void add_jump(const struct along *x, struct information_input *in, size_t n,
                     const struct atom *atoms, size_t low)
{
    size_t below = atoms[low].best, above = atoms[low + 1].best;
    enum information_side side = side_of(x, below, above, atoms[low + 1].x);
    bool is_above = side == INFORMATION_ABOVE;
    struct information_change c = {.side = side,
                                   .at = atoms[is_above ? low + 1 : low].x,
                                   .beyond = is_above ? above : below,
                                   .before = is_above ? below : above};
    for (size_t i = is_above ? low + 1 : 0; i < (is_above ? n : low + 1); i++)
        c.probability += atoms[i].probability;
    *array_push(x->l->f->arena, &in->changes) = c;
}

struct atoms {
    size_t n;
    struct atom *at;
};

/* The mean gain over the atoms; false where one is not possible. */
static bool worth_of_atoms(struct along *x, void *ctx, double *worth)
{
    struct atoms *all = ctx;
    double sum = 0;
    for (size_t i = 0; i < all->n; i++) {
        x->u.x[0] = all->at[i].x;
        double *values = unknown_values(&x->u, 0, false);
        if (!values)
            return false;
        sum += all->at[i].probability * gain_of(x, values, &all->at[i].best);
    }
    *worth = above_rounding(x->l, sum);
    return true;
}

static bool look_at_atoms(struct along *x, struct information_input *in)
{
    struct atom *atoms = NEW_ARRAY(x->l->f->arena, x->u.spread[0]->n, struct atom);
    size_t n = find_atoms(x->u.spread[0], atoms);
    struct atoms all = {n, atoms};
    if (!worth_of_atoms(x, &all, &in->worth))
        return false;
    for (size_t i = 0; i + 1 < n; i++)
        if (atoms[i].best != atoms[i + 1].best)
            add_jump(x, in, n, atoms, i);
    in->error = off_of(x, worth_of_atoms, &all, in->worth); /* which changes what is best */
    return true;
}

/* --- one quantity --- */

static void note_seen(struct looking *l, const struct unknown *u)
{
    for (size_t i = 0; i < u->n; i++)
        for (size_t k = 0; k < u->parts[i]->nodes.n; k++) {
            const struct graph_node *n = graph_at(l->f->graph, u->parts[i]->nodes.at[k].node);
            if (n->op == OP_INPUT)
                l->seen[n->extra] = true;
        }
}

static void look_at(struct looking *l, size_t first)
{
    struct along x = {.l = l};
    bool any = unknown_take(&l->moving, first, &x.u);
    const struct turn_input *input = x.u.parts[0];
    note_seen(l, &x.u);
    if (!any)
        return;
    x.now = input->now;
    struct information_input in = {.name = input->name,
                                   .figure = input->figure,
                                   .now = input->now,
                                   .is_exact = x.u.is_exact,
                                   .is_linear = x.u.is_linear,
                                   .is_discrete = x.u.is_discrete};
    if (!(x.u.is_discrete ? look_at_atoms(&x, &in) : look_over_range(&x, &in))) {
        *array_push(l->f->arena, &l->out->not_possible) = in.name;
        return;
    }
    l->out->is_exact = l->out->is_exact && in.is_exact;
    *array_push(l->f->arena, &l->out->list) = in;
}

/* --- unknown states --- */

static bool values_in_state(struct looking *l, const struct unknown_state *s, size_t state,
                            double *values)
{
    if (!prober_at(l->moving.prober, s->values + state * s->n_nodes))
        return false;
    for (size_t k = 0; k < l->choice->n_targets; k++)
        values[k] = prober_value(l->moving.prober, l->choice->targets[k]);
    return true;
}

static bool look_at_states(struct looking *l, const struct unknown_state *s,
                           struct information_input *in)
{
    struct along x = {.l = l, .u = {.way = UNKNOWN_POINTS}};
    double sum = 0, *values = NEW_ARRAY(l->f->arena, l->choice->n_targets, double);
    for (size_t i = 0; i < s->n; i++) {
        size_t best;
        if (s->probabilities[i] == 0)
            continue;
        if (!values_in_state(l, s, i, values))
            return false;
        sum += s->probabilities[i] * gain_of(&x, values, &best);
        if (best != l->out->best)
            *array_push(l->f->arena, &in->changes) =
                (struct information_change){.side = INFORMATION_IF,
                                            .state = s->states[i],
                                            .beyond = best,
                                            .before = l->out->best,
                                            .probability = s->probabilities[i]};
    }
    in->worth = above_rounding(l, sum);
    return true;
}

/* The inputs that make its probabilities. */
static void see_state(struct looking *l, const struct unknown_state *s)
{
    for (size_t k = 0; k < s->n_nodes; k++) {
        size_t n;
        const uint32_t *inputs = graph_uncertain(l->f->graph, s->nodes[k], &n);
        for (size_t i = 0; i < n; i++)
            l->seen[inputs[i]] = true;
    }
}

static void add_state(struct looking *l, const struct unknown_state *s)
{
    struct information_input in = {.name = s->name, .figure = FIGURE_NONE, .is_discrete = true};
    see_state(l, s);
    prober_open(l->moving.prober, s->n_nodes, s->nodes);
    in.is_exact = prober_is_exact(l->moving.prober);
    in.is_linear = prober_is_linear(l->moving.prober);
    if (!look_at_states(l, s, &in)) {
        *array_push(l->f->arena, &l->out->not_possible) = in.name;
        return;
    }
    l->out->is_exact = l->out->is_exact && in.is_exact;
    *array_push(l->f->arena, &l->out->list) = in;
}

/* --- the whole --- */

static int by_worth(const void *p, const void *q)
{
    const struct information_input *a = p, *b = q;
    if (a->worth != b->worth)
        return a->worth > b->worth ? -1 : 1;
    return text_compare(a->name, b->name);
}

static int by_bytes(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

static void find_now(struct looking *l)
{
    const struct choice *c = l->choice;
    double *means = NEW_ARRAY(l->f->arena, c->n_targets, double);
    for (size_t k = 0; k < c->n_targets; k++) {
        means[k] = moving_mean(&l->moving, c->targets[k]);
        l->greatest = fmax(l->greatest, fabs(means[k]));
    }
    l->out->choice = c;
    l->out->means = means;
    l->out->worth = c->best(c->ctx, means, &l->out->best);
}

static bool is_told(const struct information *out, const char *name)
{
    for (size_t i = 0; i < out->not_seen.n; i++)
        if (text_equal(out->not_seen.at[i], name))
            return true;
    return false;
}

static void find_not_seen(struct looking *l)
{
    struct information *out = l->out;
    for (size_t k = 0; k < l->choice->n_targets; k++) {
        size_t n;
        const uint32_t *inputs = graph_uncertain(l->f->graph, l->choice->targets[k], &n);
        for (size_t i = 0; i < n; i++) {
            const char *name = l->f->input_names.at[inputs[i]];
            if (!l->seen[inputs[i]] && !l->f->input_varies.at[inputs[i]] && !is_told(out, name))
                *array_push(l->f->arena, &out->not_seen) = name;
        }
    }
    if (out->not_seen.n > 1)
        qsort(out->not_seen.at, out->not_seen.n, sizeof *out->not_seen.at, by_bytes);
}

static bool goes_on(struct information *out, const struct information_watch *watch)
{
    if (watch && watch->go_on && !watch->go_on(watch->ctx, out->n_looked, out->n_all))
        out->interrupted = true;
    return !out->interrupted;
}

/* Probabilities of an unknown state are known together, with it. */
static bool is_of_state(const struct looking *l, figure_id id)
{
    const struct object *o = l->f->units.at[figure_at(l->f, id)->unit]->object;
    return o && o->kind == KIND_STATE && ((const struct state *)o->data)->is.n;
}

static void look_at_all(struct looking *l, size_t n_states, const struct unknown_state *states,
                        const struct information_watch *watch)
{
    struct information *out = l->out;
    size_t n = l->moving.inputs.n, n_first = 0;
    size_t *first = NEW_ARRAY(l->f->arena, n, size_t);
    for (size_t i = 0; i < n; i++)
        if (unknown_is_first(&l->moving, i) && !is_of_state(l, l->moving.inputs.at[i].figure))
            first[n_first++] = i;
    out->n_all = n_first + n_states;
    for (; out->n_looked < out->n_all && goes_on(out, watch); out->n_looked++)
        if (out->n_looked < n_states)
            add_state(l, &states[out->n_looked]);
        else
            look_at(l, first[out->n_looked - n_states]);
}

void information_find(struct figures *f, const struct choice *c,
                      const struct information_sample *sample, size_t n_states,
                      const struct unknown_state *states, const struct information_watch *watch,
                      struct information *out)
{
    struct looking l = {.f = f, .choice = c, .out = out};
    *out = (struct information){.is_exact = true};
    l.regress = sample ? regress_new(f, sample) : NULL;
    l.seen = NEW_ARRAY(f->arena, f->inputs.n, bool);
    moving_open_nodes(&l.moving, f, c->n_targets, c->targets);
    find_now(&l);
    look_at_all(&l, n_states, states, watch);
    if (!out->interrupted)
        find_not_seen(&l);
    if (out->list.n > 1)
        qsort(out->list.at, out->list.n, sizeof *out->list.at, by_worth);
    while (out->n_turning < out->list.n && out->list.at[out->n_turning].worth > 0)
        out->n_turning++;
}
