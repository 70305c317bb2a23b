/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Integration of one node. The nodes between it and its curved inputs are found once; then, at
 * each point, these are evaluated anew in the values of the evaluation itself, where everything
 * else stands at its point value, and in the end once more with the inputs at their means, which
 * gives the old values back. A DIAGRAM is a blend (blend.h) at each point. Owns its scratch
 * arrays.
 *
 * Invariant: no sum depends on numbers of nodes or inputs; two inputs are taken in the order of
 * their names. */
#include "eval/knot.h"

#include "eval/blend.h"
#include "eval/memo.h"

#include <math.h>
#include <string.h>

/* When a level of the rule changes no result by more than this part of its size, it is the last:
 * the error of smooth functions is squared from level to level, or nearly. */
#define AGREED 1e-6

/* The last level, by the number of inputs. Two inputs that have not come as near as this to one
 * another then are sampled: there is a jump, or a kink that weighs. */
static const size_t last_level[3] = {0, SPREAD_LEVELS - 1, 2};
#define NEAR 1e-3

/* A pair of points of less weight, of 1 in the middle, is left out: z1^2 + z2^2 > 12^2, further
 * out than either rule goes. Probabilities are at most 1, and so need not go that far: 8.5^2. */
#define LEAST_WEIGHT 5.4e-32
#define LEAST_OF_PROBABILITIES 2e-16

#define NO_INPUT UINT32_MAX

/* ---- what depends on the inputs ---- */

uint32_t knot_place(const uint32_t *inputs, size_t n, uint32_t input)
{
    size_t low = 0, high = n;
    while (low < high) {
        size_t middle = low + (high - low) / 2;
        if (inputs[middle] < input)
            low = middle + 1;
        else
            high = middle;
    }
    return low < n && inputs[low] == input ? (uint32_t)low : NO_INPUT;
}

static void begin_search(struct knot_search *k)
{
    k->search++;
    size_t size = graph_size(k->g), had = k->seen.n;
    if (had >= size)
        return;
    array_reserve(k->arena, &k->seen, size - had);
    array_zero(k->seen.at + had, (size - had) * sizeof *k->seen.at);
    k->seen.n = size;
}

/* Goes down to a node, unless it was met or is certain. True when it is known to depend. */
static bool descend(struct knot_search *k, node_id n)
{
    if (k->seen.at[n] >> 1 == k->search)
        return k->seen.at[n] & 1;
    k->seen.at[n] = 2 * k->search;
    if (graph_degree(k->g, n) > 0)
        *array_push(k->arena, &k->stack) = (struct knot_frame){.node = n};
    return false;
}

static void leave(struct knot_search *k, struct knot_frame f, uint32_t input, struct knot_steps *to)
{
    k->stack.n--;
    if (!f.depends && input == NO_INPUT)
        return;
    k->seen.at[f.node] |= 1;
    *array_push(k->arena, to) = (struct knot_step){f.node, input};
    if (k->stack.n)
        array_last(&k->stack)->depends = true;
}

static void search(struct knot_search *k, size_t n_inputs, const uint32_t *inputs,
                   struct knot_steps *to)
{
    while (k->stack.n) {
        struct knot_frame *f = array_last(&k->stack);
        const struct graph_node *node = graph_at(k->g, f->node);
        if (f->next < node->n) {
            node_id arg = graph_args(k->g, f->node)[f->next++];
            size_t at = k->stack.n - 1;
            if (descend(k, arg))
                k->stack.at[at].depends = true;
            continue;
        }
        bool is_input = node->op == OP_INPUT;
        leave(k, *f, is_input ? knot_place(inputs, n_inputs, node->extra) : NO_INPUT, to);
    }
}

void knot_find_steps(struct knot_search *k, size_t n_roots, const node_id *roots, size_t n_inputs,
                     const uint32_t *inputs, struct knot_steps *to)
{
    begin_search(k);
    for (size_t i = 0; i < n_roots; i++) {
        descend(k, roots[i]);
        search(k, n_inputs, inputs, to);
    }
}

/* ---- one point ---- */

static void take_step(struct eval *v, struct knot_step s, const double *x)
{
    double *value = v->value.at;
    bool is_diagram = graph_at(v->g, s.node)->op == OP_DIAGRAM;
    if (s.input != NO_INPUT && x)
        value[s.node] = x[s.input];
    else
        value[s.node] = eval_node(v, s.node, is_diagram ? (size_t)value[s.node] : 0);
}

void knot_walk(struct eval *v, const struct knot_steps *steps, const double *x)
{
    for (size_t i = 0; i < steps->n; i++)
        take_step(v, steps->at[i], x);
}

static void look_up(struct knots *k, const struct knot_lookup *l)
{
    struct eval *v = k->v;
    node_id n = k->steps.at[l->step].node;
    for (size_t i = 0; i < l->n; i++)
        l->x[i] = k->x.at[l->place[i]];
    memo_diagram(l->memo, l->x, v->results.at + (size_t)v->value.at[n]);
}

static const double *blend_results(struct knots *k)
{
    const double *known = k->blend_memo ? memo_find(k->blend_memo, k->x.at) : NULL;
    if (known)
        return known;
    const double *results = blend_at(k->blend, k->x.at);
    if (k->blend_memo)
        memo_keep(k->blend_memo, k->x.at, results);
    return results;
}

static const double *results_at(struct knots *k)
{
    if (k->blend)
        return blend_results(k);
    for (size_t i = 0, next = 0; i < k->steps.n; i++) {
        if (next < k->lookups.n && k->lookups.at[next].step == i)
            look_up(k, &k->lookups.at[next++]);
        else
            take_step(k->v, k->steps.at[i], k->x.at);
    }
    return &k->v->value.at[k->node];
}

/* Adds weight times the results at the inputs k->x to sum; false when one is not finite. */
static bool add_point(struct knots *k, double weight, double *sum)
{
    const double *value = results_at(k);
    for (size_t i = 0; i < k->n_results; i++) {
        if (!isfinite(value[i]))
            return false;
        sum[i] += weight * value[i];
        k->size.at[i] += weight * fabs(value[i]);
    }
    k->weight += weight;
    return true;
}

/* ---- quadrature ---- */

/* The points that the level has more than the one before. */
static bool add_line(struct knots *k, size_t level)
{
    const struct spread *a = k->inputs.at[0];
    for (size_t i = level ? a->n[level - 1] : 0; i < a->n[level]; i++) {
        k->x.at[0] = a->x[i];
        if (!add_point(k, a->weight[i], k->mean.at))
            return false;
    }
    return true;
}

/* Point i of one input with point j of the other, where their weight matters. */
static bool add_pair(struct knots *k, size_t first, size_t i, size_t j)
{
    const struct spread *a = k->inputs.at[first], *b = k->inputs.at[1 - first];
    double weight = a->weight[i] * b->weight[j];
    k->x.at[first] = a->x[i];
    k->x.at[1 - first] = b->x[j];
    double least = k->blend ? LEAST_OF_PROBABILITIES : LEAST_WEIGHT;
    return weight < least || add_point(k, weight, k->mean.at);
}

/* Is neither of the two inputs discrete? Then there are two stages for each level. */
static bool is_lattice(const struct knots *k)
{
    return k->n_inputs == 2 && !k->inputs.at[0]->is_discrete && !k->inputs.at[1]->is_discrete;
}

/* Does something between the node and its inputs jump, or turn sharply? Two lattices may then agree
 * by chance: only whole levels are compared. */
static bool has_corners(const struct knots *k)
{
    for (size_t i = 0; !k->blend && i < k->steps.n; i++) {
        uint16_t op = graph_at(k->v->g, k->steps.at[i].node)->op;
        if (op == OP_MIN || op == OP_MAX || op == OP_LOOKUP)
            return true;
    }
    return false;
}

static size_t level_of(const struct knots *k, size_t stage)
{
    return is_lattice(k) ? (stage + 1) / 2 : stage;
}

/* Of two inputs; the first is the one whose name comes first. A level is the lattice of the level
 * before with the middles of its squares (stages with odd numbers), then with the middles of the
 * sides too: twice as many points each time. With atoms a level comes in one stage. */
static bool add_plane(struct knots *k, size_t stage)
{
    size_t first = strcmp(k->inputs.at[0]->name, k->inputs.at[1]->name) > 0;
    size_t level = level_of(k, stage);
    const struct spread *a = k->inputs.at[first], *b = k->inputs.at[1 - first];
    size_t a_had = level ? a->n[level - 1] : 0, b_had = level ? b->n[level - 1] : 0;
    bool lattice = is_lattice(k), is_middle = lattice && stage % 2 == 1;
    for (size_t i = is_middle ? a_had : 0; i < a->n[level]; i++)
        for (size_t j = is_middle || i < a_had ? b_had : 0; j < b->n[level]; j++) {
            bool was_middle = lattice && stage > 0 && !is_middle && i >= a_had && j >= b_had;
            if (!was_middle && !add_pair(k, first, i, j))
                return false;
        }
    return true;
}

static bool add_points(struct knots *k, size_t level)
{
    switch (k->n_inputs) {
    case 0: return add_point(k, 1, k->mean.at);
    case 1: return add_line(k, level);
    default: return add_plane(k, level);
    }
}

/* How much the level has changed the means, as a part of their sizes: the most of all results.
 * The means of now become those of before. */
static double change(struct knots *k)
{
    double most = 0;
    for (size_t i = 0; i < k->n_results; i++) {
        double mean = k->mean.at[i] / k->weight, size = k->size.at[i] / k->weight;
        if (size > 0)
            most = fmax(most, fabs(mean - k->before.at[i]) / size);
        k->before.at[i] = mean;
    }
    return most;
}

static ohmen_status find_rules(struct knots *k, size_t level, bool *are_discrete, ohmen_error *e)
{
    *are_discrete = true;
    for (size_t i = 0; i < k->n_inputs; i++) {
        ohmen_status status = spread_rule(&k->spreads, k->inputs.at[i], level, e);
        if (status != OHMEN_OK)
            return status;
        *are_discrete = *are_discrete && k->inputs.at[i]->is_discrete;
    }
    return OHMEN_OK;
}

static ohmen_status no_mean(const struct knots *k, ohmen_error *e)
{
    node_id n = k->node;
    return error_set(e, OHMEN_COMPUTE, "node %u (%s) of the calculation has no finite mean",
                     (unsigned)n, graph_op_info(graph_at(k->v->g, n)->op)->name);
}

/* Level by level; *reached says how far the last two are apart. */
static ohmen_status integrate(struct knots *k, double *reached, ohmen_error *e)
{
    bool is_done = false;
    for (size_t stage = 0; !is_done && level_of(k, stage) <= last_level[k->n_inputs]; stage++) {
        bool are_discrete;
        ohmen_status status = find_rules(k, level_of(k, stage), &are_discrete, e);
        if (status != OHMEN_OK)
            return status;
        if (!add_points(k, stage))
            return no_mean(k, e);
        if (is_lattice(k) && stage % 2 == 1 && has_corners(k))
            continue;
        *reached = change(k);
        if (are_discrete)
            *reached = 0;
        is_done = are_discrete || (stage > 0 && *reached <= AGREED);
    }
    for (size_t i = 0; i < k->n_results; i++)
        k->mean.at[i] = k->before.at[i];
    return OHMEN_OK;
}

/* ---- sample ---- */

static ohmen_status sample(struct knots *k, ohmen_error *e)
{
    for (size_t i = 0; i < k->n_inputs; i++) {
        ohmen_status status = spread_sample(&k->spreads, k->inputs.at[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    for (size_t i = 0; i < MEAN_SETS * MEAN_STRATA; i++) {
        for (size_t a = 0; a < k->n_inputs; a++)
            k->x.at[a] = k->inputs.at[a]->sample[i];
        double *sum = k->mean.at + i / MEAN_STRATA * k->n_results;
        if (!add_point(k, 1.0 / MEAN_STRATA, sum))
            return no_mean(k, e);
    }
    return OHMEN_OK;
}

/* ---- one knot ---- */

static void find_inputs(struct knots *k, const uint32_t *curved)
{
    k->inputs.n = k->x.n = 0;
    array_reserve(k->arena, &k->x, k->n_inputs + 1);
    for (size_t i = 0; i < k->n_inputs; i++)
        *array_push(k->arena, &k->inputs) = spreads_find(&k->spreads, curved[i]);
}

static double *cleared(struct arena *a, double *at, size_t *cap, size_t n)
{
    at = array_room(a, at, 0, cap, n, sizeof *at);
    array_zero(at, n * sizeof *at);
    return at;
}

static void clear_sums(struct knots *k, size_t sets)
{
    size_t n = k->n_results;
    k->mean.at = cleared(k->arena, k->mean.at, &k->mean.cap, sets * n);
    k->size.at = cleared(k->arena, k->size.at, &k->size.cap, n);
    k->before.at = cleared(k->arena, k->before.at, &k->before.cap, n);
    k->weight = 0;
}

/* By quadrature where there are few inputs and it gets there, by a sample elsewhere. */
static ohmen_status integrate_or_sample(struct knots *k, size_t *sets, ohmen_error *e)
{
    double reached = INFINITY;
    *sets = 1;
    if (k->n_inputs <= 2) {
        clear_sums(k, 1);
        ohmen_status status = integrate(k, &reached, e);
        if (status != OHMEN_OK || k->n_inputs < 2 || reached <= NEAR)
            return status;
    }
    *sets = MEAN_SETS;
    clear_sums(k, MEAN_SETS);
    return sample(k, e);
}

void knots_init(struct knots *k, struct arena *a, struct eval *v, const struct mean_source *source)
{
    k->arena = a;
    k->v = v;
    k->spreads = (struct spreads){.arena = a, .source = source};
    k->search = (struct knot_search){.arena = a, .g = v->g};
}

/* ---- memos ---- */

/* The one that was not used for longest, or NULL where all are in use. */
static struct knot_memo *oldest_memo(struct knots *k)
{
    struct knot_memo *oldest = &k->memos[0];
    for (size_t i = 1; i < KNOT_MEMOS; i++)
        if (k->memos[i].used < oldest->used)
            oldest = &k->memos[i];
    return oldest->used < k->knot ? oldest : NULL;
}

/* Of a DIAGRAM over windows; NULL where there is none. */
static struct memo *memo_for(struct knots *k, node_id diagram, size_t n, const uint32_t *inputs)
{
    if (graph_windows_of(k->v->g, diagram).n == 0)
        return NULL;
    for (size_t i = 0; i < KNOT_MEMOS; i++)
        if (k->memos[i].memo && memo_is_of(k->memos[i].memo, diagram, n, inputs)) {
            k->memos[i].used = k->knot;
            return k->memos[i].memo;
        }
    struct knot_memo *m = oldest_memo(k);
    if (!m)
        return NULL;
    arena_free(m->arena);
    *m = (struct knot_memo){.used = k->knot};
    m->arena = arena_child(k->arena);
    return m->memo = memo_new(m->arena, k->v, diagram, n, inputs);
}

static void find_lookup(struct knots *k, size_t step, const uint32_t *curved)
{
    size_t n_all, n = 0;
    node_id diagram = k->steps.at[step].node;
    const uint32_t *all = graph_uncertain(k->v->g, diagram, &n_all);
    uint32_t *inputs = NEW_ARRAY(k->scratch, k->n_inputs, uint32_t);
    struct knot_lookup l = {.step = step};
    l.place = NEW_ARRAY(k->scratch, k->n_inputs, uint32_t);
    l.x = NEW_ARRAY(k->scratch, k->n_inputs, double);
    for (size_t i = 0; i < k->n_inputs; i++)
        if (knot_place(all, n_all, curved[i]) != NO_INPUT) {
            l.place[n] = (uint32_t)i;
            inputs[n++] = curved[i];
        }
    l.n = n;
    l.memo = memo_for(k, diagram, n, inputs);
    if (l.memo)
        *array_push(k->arena, &k->lookups) = l;
}

static void find_lookups(struct knots *k, const uint32_t *curved)
{
    k->lookups.n = 0;
    for (size_t i = 0; i < k->steps.n; i++)
        if (graph_at(k->v->g, k->steps.at[i].node)->op == OP_DIAGRAM)
            find_lookup(k, i, curved);
}

/* ---- one node ---- */

static ohmen_status integrate_blend(struct knots *k, size_t *sets, ohmen_error *e)
{
    ohmen_status status =
        blend_new(k->scratch, k->v, &k->spreads, &k->search, k->node, &k->blend, e);
    if (status == OHMEN_OK) {
        const uint32_t *inputs = blend_inputs(k->blend, &k->n_inputs);
        find_inputs(k, inputs);
        k->blend_memo = blend_has_own(k->blend) ? NULL : memo_for(k, k->node, k->n_inputs, inputs);
        status = integrate_or_sample(k, sets, e);
        blend_end(k->blend);
    }
    k->blend = NULL;
    return status;
}

static ohmen_status integrate_plainly(struct knots *k, size_t *sets, ohmen_error *e)
{
    const uint32_t *curved = graph_curved(k->v->g, k->node, &k->n_inputs);
    find_inputs(k, curved);
    k->steps.n = 0;
    knot_find_steps(&k->search, 1, &k->node, k->n_inputs, curved, &k->steps);
    find_lookups(k, curved);
    ohmen_status status = integrate_or_sample(k, sets, e);
    knot_walk(k->v, &k->steps, NULL);
    return status;
}

ohmen_status knot_integrate(struct knots *k, node_id n, size_t *sets, ohmen_error *e)
{
    bool is_diagram = graph_at(k->v->g, n)->op == OP_DIAGRAM;
    k->node = n;
    k->knot++;
    k->n_results = is_diagram ? eval_results(k->v, n) : 1;
    k->scratch = arena_child(k->arena);
    ohmen_status status = is_diagram ? integrate_blend(k, sets, e) : integrate_plainly(k, sets, e);
    arena_free(k->scratch);
    return status;
}
