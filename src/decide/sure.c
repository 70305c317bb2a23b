/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure the choice is (sure.h). Owns nothing beyond the arenas it is given. */
#include "decide/sure.h"

#include <string.h>

/* Correlations below this size are no more than chance in a sample of usual size. */
static const double LEAST_CORRELATION = 0.1;

static const char *const kind_words[SURE_KINDS] = {
    [SURE_BEST] = "best",        [SURE_WORTH_IT] = "worth-it",
    [SURE_REGRET] = "regret",    [SURE_P5] = "p5",
    [SURE_P50] = "p50",          [SURE_P95] = "p95",
    [SURE_MOVES] = "moves-with",
};

/* ---- one sample after the other ---- */

/* What alternative k (by the order of the weighing) is worth in sample i. */
static double worth_of(const struct sure *x, size_t k, size_t i)
{
    return k ? x->sample.values[x->root[k]][i] : 0;
}

/* The best alternative in sample i; of equals the first in the ranking. */
static size_t best_in(const struct sure *x, size_t i)
{
    const struct weighing *w = x->weighing;
    size_t best = w->order[0];
    for (size_t k = 1; k < w->alternatives.n; k++)
        if (worth_of(x, w->order[k], i) > worth_of(x, best, i))
            best = w->order[k];
    return best;
}

/* Sums over the samples of one set, by alternative. */
struct sums {
    double *best, *worth_it, *regret;
};

static void add_set(const struct sure *x, size_t set, struct sums *to)
{
    size_t n = x->weighing->alternatives.n, points = x->sample.points;
    for (size_t i = set * points; i < (set + 1) * points; i++) {
        size_t best = best_in(x, i);
        to->best[best]++;
        for (size_t k = 0; k < n; k++) {
            to->worth_it[k] += worth_of(x, k, i) > 0;
            to->regret[k] += worth_of(x, best, i) - worth_of(x, k, i);
        }
    }
}

static struct sampled over_sets(struct arena *a, const struct sure *x, const struct sums *sets,
                                size_t offset, size_t k)
{
    double *means = NEW_ARRAY(a, x->sample.sets, double);
    for (size_t s = 0; s < x->sample.sets; s++) {
        double *const sums[] = {sets[s].best, sets[s].worth_it, sets[s].regret};
        means[s] = sums[offset][k] / (double)x->sample.points;
    }
    return statistics_of_sets(x->sample.sets, means);
}

static void count(struct arena *a, struct sure *x)
{
    struct arena *scratch = arena_child(a);
    size_t n = x->weighing->alternatives.n;
    struct sums *sets = NEW_ARRAY(scratch, x->sample.sets, struct sums);
    for (size_t s = 0; s < x->sample.sets; s++) {
        sets[s] = (struct sums){NEW_ARRAY(scratch, n, double), NEW_ARRAY(scratch, n, double),
                                NEW_ARRAY(scratch, n, double)};
        add_set(x, s, &sets[s]);
    }
    for (size_t k = 0; k < n; k++) {
        x->of[k].best = over_sets(scratch, x, sets, 0, k);
        x->of[k].worth_it = over_sets(scratch, x, sets, 1, k);
        x->of[k].regret = over_sets(scratch, x, sets, 2, k);
    }
    arena_free(scratch);
}

/* ---- what moves it ---- */

static size_t place_of(const struct weighing *w, const struct alternative *alt)
{
    return (size_t)(alt - w->alternatives.at);
}

static node_id net_node(const struct figures *f, const struct alternative *alt)
{
    return figure_at(f, alt->net)->node;
}

/* `nets` are the figures of the sample. */
static ohmen_status find_moves(struct figures *f, struct arena *a, const figure_id *nets,
                               struct sure *x, ohmen_error *e)
{
    const struct weighing *w = x->weighing;
    size_t n_values = x->sample.sets * x->sample.points, n = w->alternatives.n;
    double *difference = NEW_ARRAY(a, n_values, double);
    if (!x->next)
        return OHMEN_OK;
    for (size_t i = 0; i < n_values; i++)
        difference[i] = worth_of(x, place_of(w, x->best), i) - worth_of(x, place_of(w, x->next), i);
    node_id nodes[2];
    size_t n_nodes = 0;
    if (x->best->n)
        nodes[n_nodes++] = net_node(f, x->best);
    if (x->next->n)
        nodes[n_nodes++] = net_node(f, x->next);
    return figure_ranks(f, a, &x->plan, n - 1, nets, n_nodes, nodes, difference, x->sample.sets,
                        LEAST_CORRELATION, &x->moves, e);
}

/* ---- all of it ---- */

/* The net present values in the order of the ranking, so that those that matter decide which inputs
 * get the first places. */
static figure_id *roots_of(struct arena *a, struct sure *x)
{
    const struct weighing *w = x->weighing;
    figure_id *ids = NEW_ARRAY(a, w->alternatives.n, figure_id);
    x->root = NEW_ARRAY(a, w->alternatives.n, size_t);
    for (size_t i = 0, n = 0; i < w->alternatives.n; i++) {
        size_t k = w->order[i];
        if (k == 0)
            continue;
        x->root[k] = n;
        ids[n++] = w->alternatives.at[k].net;
    }
    return ids;
}

ohmen_status sure_find(struct figures *f, struct arena *a, const struct weighing *w,
                       const struct sampling_plan *plan, struct sure *out, ohmen_error *e)
{
    struct sure x = {.weighing = w, .plan = *plan};
    size_t n = w->alternatives.n;
    figure_id *ids = roots_of(a, &x);
    x.plan.n_judged = n - 1;
    ohmen_status status = figures_sample(f, a, &x.plan, n - 1, ids, &x.sample, e);
    if (status != OHMEN_OK)
        return status;
    x.of = NEW_ARRAY(a, n, struct sure_alternative);
    x.best = &w->alternatives.at[w->order[0]];
    x.next = n > 1 ? &w->alternatives.at[w->order[1]] : NULL;
    x.of[0].net.is_certain = true;
    for (size_t k = 1; k < n; k++)
        x.of[k].net = figure_spread_of(f, a, &x.sample, x.root[k], w->alternatives.at[k].net);
    count(a, &x);
    status = find_moves(f, a, ids, &x, e);
    if (status == OHMEN_OK)
        *out = x;
    return status;
}

/* ---- names ---- */

const char *sure_name(struct arena *a, const struct weighing *w, enum sure_kind kind,
                      const char *of)
{
    return arena_printf(a, "%s.%s[%s]", w->id, kind_words[kind], of);
}

/* Where ".best[" stands, with the kind; NULL where no such word stands at the first point. */
static const char *find_mark(const char *name, enum sure_kind *kind)
{
    const char *point = strchr(name, '.');
    for (int k = 0; point && k < SURE_KINDS; k++) {
        size_t n = strlen(kind_words[k]);
        if (strncmp(point + 1, kind_words[k], n) == 0 && point[1 + n] == '[') {
            *kind = (enum sure_kind)k;
            return point;
        }
    }
    return NULL;
}

bool sure_is_named(const char *name)
{
    enum sure_kind kind;
    return find_mark(name, &kind) != NULL;
}

static struct sampled value_of(const struct sure *x, enum sure_kind kind, size_t k)
{
    switch (kind) {
    case SURE_BEST: return x->of[k].best;
    case SURE_WORTH_IT: return x->of[k].worth_it;
    case SURE_REGRET: return x->of[k].regret;
    case SURE_P5:
    case SURE_P50:
    case SURE_P95: return x->of[k].net.at[kind - SURE_P5];
    default: return (struct sampled){x->moves.at[k].correlation, 0};
    }
}

static bool pick_value(struct figures *f, const struct sure *x, const char *name,
                       enum sure_kind kind, struct nearest *near, struct sure_value *out)
{
    const struct weighing *w = x->weighing;
    size_t n = kind == SURE_MOVES ? x->moves.n : w->alternatives.n;
    for (size_t k = 0; k < n; k++) {
        const char *of = kind == SURE_MOVES ? x->moves.at[k].name : w->alternatives.at[k].name;
        const char *known = sure_name(f->arena, w, kind, of);
        nearest_offer(near, known);
        if (!text_equal(known, name))
            continue;
        *out =
            (struct sure_value){.name = known,
                                .kind = kind,
                                .weighing = w,
                                .of = of,
                                .value = value_of(x, kind, k),
                                .sure = x,
                                .figure = kind == SURE_MOVES ? x->moves.at[k].figure : FIGURE_NONE};
        return true;
    }
    return false;
}

ohmen_status sure_value_find(struct figures *f, const char *name, const struct sampling_plan *plan,
                             struct sure_value *out, ohmen_error *e)
{
    struct weighing *w;
    struct nearest near;
    struct sure *x = NEW(f->arena, struct sure);
    enum sure_kind kind = SURE_BEST; /* sure_is_named: it is found */
    const char *mark = find_mark(name, &kind);
    const char *decision = arena_strn(f->arena, name, (size_t)(mark - name));
    ohmen_status status = weigh_compile(f, decision, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(f, e);
    if (status != OHMEN_OK)
        return status;
    weigh_rank(f, w);
    status = sure_find(f, f->arena, w, plan, x, e);
    if (status != OHMEN_OK)
        return status;
    nearest_init(&near, name);
    if (pick_value(f, x, name, kind, &near, out))
        return OHMEN_OK;
    return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" has no figure \"%s\"%s", w->id,
                     name + strlen(w->id) + 1, nearest_hint(f->arena, &near));
}
