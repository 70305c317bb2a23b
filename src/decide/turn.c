/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The search for what turns a decision (turn.h). Each input is moved once for all pairs; a root is
 * then narrowed for one of them. Owns nothing beyond the arena of the figures. */
#include "decide/turn.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "decide/turn_inputs.h"
#include "math/elementary.h"

#define STEPS_PER_DECADE 4
#define MARK ".turns-at["
#define MOST_NARROWINGS 200
#define MARGIN 1.01 /* a line's root may lie so far off, by rounding */

const char *const turn_sides[] = {"below", "above"};

enum { MOST_PAIRS = 2 };

struct contest {
    const struct alternative *best, *other;
    double shift;      /* mean - point(now) */
    double difference; /* d(now) */
};

struct search {
    struct figures *f;
    const struct weighing *w;
    double reach;
    struct prober *prober;
    size_t n_pairs;
    struct contest pairs[MOST_PAIRS];
    const struct turn_input *input; /* the one that is moved */
    double *x;                      /* of its nodes */
    struct turns *out;
};

/* d of every pair at one value of the input; false where something is not finite. */
struct point {
    double x, d[MOST_PAIRS];
};

/* --- pairs --- */

static void add_pair(struct search *s, const struct alternative *best,
                     const struct alternative *other)
{
    s->pairs[s->n_pairs++] = (struct contest){.best = best, .other = other};
}

static void find_pairs(struct search *s)
{
    const struct weighing *w = s->w;
    if (w->alternatives.n < 2)
        return;
    const struct alternative *nothing = &w->alternatives.at[0];
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    const struct alternative *second = &w->alternatives.at[w->order[1]];
    if (best != nothing)
        add_pair(s, best, nothing);
    if (second != nothing)
        add_pair(s, best, second);
}

static node_id net_node(const struct search *s, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? NODE_NONE : figure_at(s->f, x->net)->node;
}

static double mean_net(const struct search *s, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? 0 : figure_value(s->f, x->net);
}

static double point_net(const struct search *s, const struct alternative *x)
{
    node_id n = net_node(s, x);
    return n == NODE_NONE ? 0 : prober_value(s->prober, n);
}

static double point_difference(const struct search *s, const struct contest *p)
{
    return point_net(s, p->best) - point_net(s, p->other);
}

struct targets ARRAY_BODY(node_id);

/* What is left of other shares must be seen, whether damage follows from it or not. */
static void add_rests(const struct search *s, struct targets *to)
{
    for (figure_id i = 0; i < s->f->list.n; i++) {
        const struct figure *g = figure_at(s->f, i);
        if (g->property == PROPERTY_SHARE && !g->text)
            *array_push(s->f->arena, to) = g->node;
    }
}

static bool is_exact(const struct search *s, const struct alternative *x)
{
    return x->net == FIGURE_NONE || figure_method(s->f, x->net) == MEAN_EXACT;
}

static void open_prober(struct search *s)
{
    struct targets targets = {0};
    for (size_t i = 0; i < s->n_pairs; i++) {
        node_id of[] = {net_node(s, s->pairs[i].best), net_node(s, s->pairs[i].other)};
        for (size_t k = 0; k < 2; k++)
            if (of[k] != NODE_NONE)
                *array_push(s->f->arena, &targets) = of[k];
    }
    add_rests(s, &targets);
    s->prober = prober_new(s->f->arena, s->f->eval, targets.n, targets.at);
    for (size_t i = 0; i < s->n_pairs; i++) {
        struct contest *p = &s->pairs[i];
        p->difference = mean_net(s, p->best) - mean_net(s, p->other);
        p->shift = p->difference - point_difference(s, p);
        s->out->shifted = s->out->shifted || !is_exact(s, p->best) || !is_exact(s, p->other);
    }
}

/* --- points --- */

static bool evaluate(struct search *s, double x, struct point *out)
{
    for (size_t i = 0; i < s->input->nodes.n; i++)
        s->x[i] = s->input->nodes.at[i].times * x;
    out->x = x;
    if (!prober_at(s->prober, s->x))
        return false;
    for (size_t i = 0; i < s->n_pairs; i++)
        out->d[i] = point_difference(s, &s->pairs[i]) + s->pairs[i].shift;
    return true;
}

/* Is every probability one, and nothing negative that must not be, at the last point? */
static bool is_possible(const struct search *s)
{
    for (figure_id i = 0; i < s->f->list.n; i++) {
        const struct figure *g = figure_at(s->f, i);
        if (prober_moves(s->prober, g->node) && graph_at(s->f->graph, g->node)->op != OP_DIAGRAM &&
            !property_allows(g->property, prober_value(s->prober, g->node)))
            return false;
    }
    return true;
}

/* --- narrowing --- */

/* The ends of a bracket of one pair: best is ahead at `ahead`, the other one behind it. */
struct bracket {
    double ahead, behind;
    double d_ahead, d_behind; /* > 0, <= 0 */
};

static double width(const struct bracket *b)
{
    return fabs(b->behind - b->ahead);
}

static bool is_narrow(const struct bracket *b)
{
    return width(b) <= TURN_TOLERANCE * fabs(b->behind);
}

static bool try_at(struct search *s, size_t pair, struct bracket *b, double x)
{
    struct point p;
    if (x == b->ahead || x == b->behind)
        return true;
    if (!evaluate(s, x, &p))
        return false;
    if (p.d[pair] > 0)
        b->ahead = x, b->d_ahead = p.d[pair];
    else
        b->behind = x, b->d_behind = p.d[pair];
    return true;
}

/* The point at which the line through both ends is 0, between them. */
static double line_root(const struct bracket *b)
{
    double x = b->ahead + (b->behind - b->ahead) * (b->d_ahead / (b->d_ahead - b->d_behind));
    return fmin(fmax(x, fmin(b->ahead, b->behind)), fmax(b->ahead, b->behind));
}

/* Half a tolerance from x, which is one end, towards the other end, but not past that. */
static double towards_other_end(const struct bracket *b, double x)
{
    double other = b->behind == x ? b->ahead : b->behind;
    double step = fmin(TURN_TOLERANCE / 2 * fabs(x), fabs(other - x));
    return other > x ? x + step : x - step;
}

/* By turns the root of the line, a little step from it, which brings the far end near when the line
 * was good, and the middle, when it was not. False where something is not finite on the way. */
static bool narrow(struct search *s, size_t pair, struct bracket *b)
{
    for (int i = 0; i < MOST_NARROWINGS && !is_narrow(b); i++) {
        double x = line_root(b), before = width(b);
        if (!try_at(s, pair, b, x) || !try_at(s, pair, b, towards_other_end(b, x)))
            return false;
        double middle = b->ahead + (b->behind - b->ahead) / 2;
        if (width(b) > before / 2 && !try_at(s, pair, b, middle))
            return false;
    }
    return is_narrow(b);
}

/* --- roots --- */

static enum turn_spread spread_of(const struct quantity *q, double p5, double p95, double x)
{
    if (!q)
        return TURN_CERTAIN;
    return x > p5 && x < p95 ? TURN_WITHIN : TURN_OUTSIDE;
}

static ohmen_status find_spread(const struct search *s, struct turn *t, ohmen_error *e)
{
    const struct quantity *q = turn_unknown(s->f, t->input);
    double p5 = 0, p95 = 0;
    ohmen_status status = OHMEN_OK;
    if (q)
        status = quantity_tail(q, 0.05, 0.95, &p5, e);
    if (q && status == OHMEN_OK)
        status = quantity_tail(q, 0.95, 0.05, &p95, e);
    t->spread = spread_of(q, p5, p95, t->at);
    return status;
}

static const char *turn_name(const struct search *s, const struct turn *t)
{
    struct arena *a = s->f->arena;
    return arena_printf(a, "%s%s%s].%s.%s.%s", s->w->id, MARK, figure_name(s->f, a, t->input),
                        t->best->name, t->other->name, turn_sides[t->side]);
}

/* The best point of the bracket: where d is nearer to 0. */
static ohmen_status add_root(struct search *s, size_t pair, enum turn_side side,
                             const struct bracket *b, ohmen_error *e)
{
    struct point p;
    double at = fabs(b->d_ahead) < fabs(b->d_behind) ? b->ahead : b->behind;
    if (!evaluate(s, at, &p) || !is_possible(s))
        return OHMEN_OK;
    struct turn t = {.input = s->input->figure,
                     .best = s->pairs[pair].best,
                     .other = s->pairs[pair].other,
                     .side = side,
                     .now = s->input->now,
                     .at = at,
                     .factor = at / s->input->now,
                     .low = fmin(b->ahead, b->behind),
                     .high = fmax(b->ahead, b->behind),
                     .difference = s->pairs[pair].difference,
                     .there = p.d[pair],
                     .is_linear = prober_is_linear(s->prober)};
    t.name = turn_name(s, &t);
    ohmen_status status = find_spread(s, &t, e);
    if (status == OHMEN_OK)
        *array_push(s->f->arena, &s->out->list) = t;
    return status;
}

/* --- looking outward --- */

/* How far an input may go on a side. */
static double farthest(const struct search *s, enum turn_side side)
{
    const struct turn_input *in = s->input;
    return side == TURN_ABOVE ? fmin(in->high, in->now * s->reach)
                              : fmax(in->low, in->now / s->reach);
}

static double step_outward(const struct search *s, enum turn_side side, size_t k)
{
    double factor = math_pow(10, (double)k / STEPS_PER_DECADE), end = farthest(s, side);
    return side == TURN_ABOVE ? fmin(s->input->now * factor, end)
                              : fmax(s->input->now / factor, end);
}

/* Does going to the end change the differences so little that nothing is to be expected between? */
static bool is_quiet(struct search *s, enum turn_side side)
{
    struct point end;
    if (!evaluate(s, farthest(s, side), &end))
        return false;
    for (size_t i = 0; i < s->n_pairs; i++)
        if (!(fabs(end.d[i] - s->pairs[i].difference) < TURN_QUIET * s->pairs[i].difference))
            return false;
    return true;
}

static ohmen_status look(struct search *s, enum turn_side side, const bool *wanted, ohmen_error *e)
{
    bool open[MOST_PAIRS] = {wanted[0], wanted[1]};
    struct point before = {.x = s->input->now}, now;
    double end = farthest(s, side);
    for (size_t i = 0; i < s->n_pairs; i++)
        before.d[i] = s->pairs[i].difference;
    if (is_quiet(s, side))
        return OHMEN_OK;
    for (size_t k = 1; before.x != end && (open[0] || open[1]); k++) {
        if (!evaluate(s, step_outward(s, side, k), &now))
            return OHMEN_OK;
        for (size_t i = 0; i < s->n_pairs; i++) {
            if (!open[i] || now.d[i] > 0)
                continue;
            struct bracket b = {before.x, now.x, before.d[i], now.d[i]};
            ohmen_status status = OHMEN_OK;
            open[i] = false;
            if (narrow(s, i, &b))
                status = add_root(s, i, side, &b, e);
            if (status != OHMEN_OK)
                return status;
        }
        before = now;
    }
    return OHMEN_OK;
}

/* Of a line: on which side its root may be, within reach. */
static bool line_meets(const struct search *s, size_t pair, const struct point *half,
                       enum turn_side side)
{
    double now = s->input->now, d = s->pairs[pair].difference;
    double slope = (d - half->d[pair]) / (now - half->x);
    if (slope == 0 || (slope > 0) != (side == TURN_BELOW))
        return false;
    double root = now - d / slope, end = farthest(s, side);
    return side == TURN_ABOVE ? root <= end * MARGIN : root >= end / MARGIN;
}

static ohmen_status look_around(struct search *s, ohmen_error *e)
{
    struct point half;
    bool linear = prober_is_linear(s->prober) && evaluate(s, s->input->now / 2, &half);
    ohmen_status status = OHMEN_OK;
    for (int side = TURN_BELOW; side <= TURN_ABOVE && status == OHMEN_OK; side++) {
        bool wanted[MOST_PAIRS] = {false}, any = false;
        for (size_t i = 0; i < s->n_pairs; i++) {
            wanted[i] = s->pairs[i].difference > 0 && (!linear || line_meets(s, i, &half, side));
            any = any || wanted[i];
        }
        if (any)
            status = look(s, (enum turn_side)side, wanted, e);
    }
    return status;
}

static ohmen_status move_input(struct search *s, const struct turn_input *in, ohmen_error *e)
{
    node_id *nodes = NEW_ARRAY(s->f->arena, in->nodes.n, node_id);
    s->input = in;
    s->x = NEW_ARRAY(s->f->arena, in->nodes.n, double);
    for (size_t i = 0; i < in->nodes.n; i++)
        nodes[i] = in->nodes.at[i].node;
    prober_open(s->prober, in->nodes.n, nodes);
    return look_around(s, e);
}

/* --- the whole --- */

static int by_distance(const void *p, const void *q)
{
    const struct turn *a = p, *b = q;
    double x = fmax(a->factor, 1 / a->factor), y = fmax(b->factor, 1 / b->factor);
    if (x != y)
        return x < y ? -1 : 1;
    return text_compare(a->name, b->name);
}

ohmen_status turns_find(struct figures *f, const struct weighing *w, double reach,
                        struct turns *out, ohmen_error *e)
{
    struct search s = {.f = f, .w = w, .reach = reach, .out = out};
    struct turn_inputs inputs = {0};
    *out = (struct turns){.reach = reach};
    find_pairs(&s);
    if (s.n_pairs == 0)
        return OHMEN_OK;
    open_prober(&s);
    turn_inputs_of(f, w, s.prober, &inputs);
    for (size_t i = 0; i < inputs.n; i++) {
        ohmen_status status = move_input(&s, &inputs.at[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    if (out->list.n > 1)
        qsort(out->list.at, out->list.n, sizeof *out->list.at, by_distance);
    return OHMEN_OK;
}

/* --- by name --- */

bool turn_is_named(const char *name)
{
    const char *mark = strstr(name, MARK), *dot = strchr(name, '.');
    return mark && mark == dot;
}

static const struct turn *named(const struct turns *all, const char *name, struct nearest *near)
{
    for (size_t i = 0; i < all->list.n; i++) {
        if (text_equal(all->list.at[i].name, name))
            return &all->list.at[i];
        nearest_offer(near, all->list.at[i].name);
    }
    return NULL;
}

/* As reports look first, and farther where they have not found it. */
ohmen_status turn_find(struct figures *f, const char *name, struct turn *out, ohmen_error *e)
{
    static const double reaches[] = {TURN_NEAR, TURN_FAR};
    struct arena *a = f->arena;
    struct weighing *w;
    struct nearest near;
    const char *decision = arena_strn(a, name, (size_t)(strstr(name, MARK) - name));
    ohmen_status status = weigh_ranked(f, decision, &w, e);
    nearest_init(&near, name);
    for (size_t i = 0; status == OHMEN_OK && i < sizeof reaches / sizeof *reaches; i++) {
        struct turns all;
        status = turns_find(f, w, reaches[i], &all, e);
        const struct turn *t = status == OHMEN_OK ? named(&all, name, &near) : NULL;
        if (t) {
            *out = *t;
            return OHMEN_OK;
        }
    }
    if (status != OHMEN_OK)
        return status;
    return error_set(e, OHMEN_UNKNOWN, "nothing turns the decision \"%s\" at \"%s\"%s", w->id,
                     name + strlen(w->id) + 1, nearest_hint(a, &near));
}
