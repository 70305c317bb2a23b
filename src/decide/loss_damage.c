/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What one occurrence costs (loss_damage.h). Owns nothing beyond the arenas that it is given. */
#include "decide/loss_damage.h"

#include <math.h>

#include "eval/tape.h"
#include "math/elementary.h"
#include "math/statistics.h"

/* Parts of a distribution: between normal deviates -PARTS_TO .. PARTS_TO in equal steps. */
#define PARTS_TO 6.5
enum { PARTS_PER_ONE = 128, PARTS = 13 * PARTS_PER_ONE + 2 };
/* Probabilities below this are none. */
#define VANISHING 1e-9
/* What is beyond the lattice with less probability is rounding. */
#define NOTHING_BEYOND 1e-12
/* Factors that differ by less in all samples are the same. */
#define SAME_FACTOR 1e-12
static const double HIGH_TAIL = 1e-3;

/* ---- the form ---- */

static bool varies_below(const struct figures *f, node_id n)
{
    size_t count;
    const uint32_t *inputs = graph_uncertain(f->graph, n, &count);
    for (size_t i = 0; i < count; i++)
        if (f->input_varies.at[inputs[i]])
            return true;
    return false;
}

/* Is the node b + a1 Z1 + a2 Z2 + ... in what varies, b and a free of it? */
static bool is_affine(const struct figures *f, node_id n)
{
    const struct graph_node *node = graph_at(f->graph, n);
    const node_id *args = graph_args(f->graph, n);
    size_t moving = 0;
    if (node->op == OP_INPUT || !varies_below(f, n))
        return true;
    for (size_t i = 0; i < node->n; i++) {
        moving += varies_below(f, args[i]);
        if (!is_affine(f, args[i]))
            return false;
    }
    switch (node->op) {
    case OP_ADD:
    case OP_SUBTRACT:
    case OP_NEGATE:
    case OP_COMPLEMENT:
    case OP_SUM: return true;
    case OP_MULTIPLY: return moving == 1;
    case OP_DIVIDE: return !varies_below(f, args[1]);
    default: return false;
    }
}

static struct loss_varying varying_of(const struct figures *f, uint32_t input)
{
    const struct quantity *q = f->inputs.at[input];
    struct loss_varying v = {.input = input, .dist = quantity_dist(q), .scale = q->times};
    v.mean = quantity_mean(q);
    quantity_range(q, &v.low, &v.high);
    return v;
}

void loss_damage_init(struct figures *f, struct arena *a, node_id node, struct loss_damage *out)
{
    size_t count;
    const uint32_t *inputs = graph_uncertain(f->graph, node, &count);
    uint32_t *unknown = NEW_ARRAY(a, count, uint32_t);
    *out = (struct loss_damage){.node = node, .unknown = unknown};
    out->varying = NEW_ARRAY(a, count, struct loss_varying);
    for (size_t i = 0; i < count; i++) {
        if (f->input_varies.at[inputs[i]])
            out->varying[out->n_varying++] = varying_of(f, inputs[i]);
        else
            unknown[out->n_unknown++] = inputs[i];
    }
    if (out->n_varying)
        out->form = is_affine(f, node) ? LOSS_AFFINE : LOSS_DRAWN;
}

/* ---- values, by a tape ---- */

struct taping {
    const struct loss_damage *d;
    struct tape *tape;
    struct tape_work *work;
    size_t block;
    const double **in;               /* rows, by input of the tape */
    size_t *unknown_at, *varying_at; /* which row of the tape */
    double *constant;                /* rows of one value: [input * block ..] */
};

/* Inputs of both sorts in rising order. */
static uint32_t *merge_inputs(struct arena *a, struct taping *t)
{
    const struct loss_damage *d = t->d;
    uint32_t *all = NEW_ARRAY(a, d->n_unknown + d->n_varying, uint32_t);
    size_t i = 0, k = 0;
    t->unknown_at = NEW_ARRAY(a, d->n_unknown, size_t);
    t->varying_at = NEW_ARRAY(a, d->n_varying, size_t);
    while (i + k < d->n_unknown + d->n_varying) {
        bool first = k == d->n_varying || (i < d->n_unknown && d->unknown[i] < d->varying[k].input);
        all[i + k] = first ? d->unknown[i] : d->varying[k].input;
        if (first) {
            t->unknown_at[i] = i + k;
            i++;
        } else {
            t->varying_at[k] = i + k;
            k++;
        }
    }
    return all;
}

static void taping_init(struct figures *f, struct arena *a, const struct sampling_plan *p,
                        const struct loss_damage *d, struct taping *t)
{
    size_t n = d->n_unknown + d->n_varying;
    *t = (struct taping){.d = d};
    struct tape_inputs inputs = {.n = n, .inputs = merge_inputs(a, t)};
    means_change_over(f->means);
    t->tape = tape_new(a, means_eval(f->means), p->isa, &inputs, 1, &d->node);
    t->block = tape_block(t->tape);
    t->block = t->block < LOSS_DRAWS ? t->block : LOSS_DRAWS;
    t->work = tape_work_new(a, t->tape, t->block);
    means_change_over(f->means);
    t->in = NEW_ARRAY(a, n, const double *);
    t->constant = NEW_ARRAY(a, n * t->block, double);
}

/* The row of the tape holds one value. */
static void hold(struct taping *t, size_t row, double x)
{
    double *to = t->constant + row * t->block;
    for (size_t i = 0; i < t->block; i++)
        to[i] = x;
    t->in[row] = to;
}

/* One value for each sample, what varies being held. */
static void over_samples(struct taping *t, const struct loss_samples *s, double *out)
{
    for (size_t from = 0; from < t->d->n; from += t->block) {
        size_t n = t->d->n - from < t->block ? t->d->n - from : t->block;
        double *to = out + from;
        for (size_t i = 0; i < t->d->n_unknown; i++)
            t->in[t->unknown_at[i]] = s->rows[t->d->unknown[i]] + from;
        tape_run(t->tape, t->work, n, t->in, &to);
    }
}

/* b where all that varies is 0; then a_j = (value where Z_j is at its mean - b) / mean. Where the
 * mean is 0 it is taken at 1. */
static void find_affine(struct arena *a, struct taping *t, const struct loss_samples *s,
                        struct loss_damage *d)
{
    for (size_t j = 0; j < d->n_varying; j++)
        hold(t, t->varying_at[j], 0);
    over_samples(t, s, d->shift);
    d->times = NEW_ARRAY(a, d->n_varying, double *);
    for (size_t j = 0; j < d->n_varying; j++) {
        double at = d->varying[j].mean != 0 ? d->varying[j].mean : 1;
        d->times[j] = NEW_ARRAY(a, d->n, double);
        hold(t, t->varying_at[j], at);
        over_samples(t, s, d->times[j]);
        hold(t, t->varying_at[j], 0);
        for (size_t i = 0; i < d->n; i++)
            d->times[j][i] = (d->times[j][i] - d->shift[i]) / at;
    }
}

static bool are_same_times(const struct loss_damage *d)
{
    for (size_t j = 0; j < d->n_varying; j++)
        for (size_t i = 1; i < d->n; i++)
            if (fabs(d->times[j][i] - d->times[j][0]) > SAME_FACTOR * fabs(d->times[j][0]))
                return false;
    return true;
}

/* ---- values, drawn ---- */

static ohmen_status draw_varying(struct figures *f, struct arena *a, const struct sampling_plan *p,
                                 struct taping *t, ohmen_error *e)
{
    const struct loss_damage *d = t->d;
    struct draw_input *inputs = NEW_ARRAY(a, d->n_varying, struct draw_input);
    struct draw_plan plan = {.method = DRAW_SCRAMBLED, .seed = p->seed, .isa = p->isa};
    struct draws *draws;
    while ((1 << plan.log2_points) < LOSS_DRAWS)
        plan.log2_points++;
    for (size_t j = 0; j < d->n_varying; j++)
        inputs[j] = (struct draw_input){f->input_names.at[d->varying[j].input], d->varying[j].dist,
                                        d->varying[j].scale, (unsigned)j};
    ohmen_status status = draws_new(a, &plan, d->n_varying, inputs, &draws, e);
    for (size_t j = 0; status == OHMEN_OK && j < d->n_varying; j++) {
        double *row = NEW_ARRAY(a, LOSS_DRAWS, double);
        draws_fill(draws, j, 0, NEW_ARRAY(a, draws_work(draws), double), row);
        t->in[t->varying_at[j]] = row;
    }
    return status;
}

static void over_draws(struct taping *t, double *out)
{
    const double **from = t->in;
    for (size_t i = 0; i < LOSS_DRAWS; i += t->block) {
        size_t n = LOSS_DRAWS - i < t->block ? LOSS_DRAWS - i : t->block;
        double *to = out + i;
        tape_run(t->tape, t->work, n, from, &to);
        for (size_t j = 0; j < t->d->n_varying; j++)
            from[t->varying_at[j]] += n;
    }
    for (size_t j = 0; j < t->d->n_varying; j++)
        from[t->varying_at[j]] -= LOSS_DRAWS;
}

static ohmen_status find_drawn(struct figures *f, struct arena *a, const struct sampling_plan *p,
                               struct taping *t, const struct loss_samples *s,
                               struct loss_damage *d, ohmen_error *e)
{
    ohmen_status status = draw_varying(f, a, p, t, e);
    d->amounts = NEW_ARRAY(a, d->n * LOSS_DRAWS, double);
    for (size_t i = 0; status == OHMEN_OK && i < d->n; i++) {
        for (size_t k = 0; k < d->n_unknown; k++)
            hold(t, t->unknown_at[k], s->rows[d->unknown[k]][i]);
        over_draws(t, d->amounts + i * LOSS_DRAWS);
    }
    return status;
}

/* ---- all of it ---- */

static bool all_finite(size_t n, const double *x)
{
    for (size_t i = 0; x && i < n; i++)
        if (!isfinite(x[i]))
            return false;
    return true;
}

static bool is_finite(const struct loss_damage *d)
{
    bool fine = all_finite(d->n, d->shift) && all_finite(d->n * LOSS_DRAWS, d->amounts);
    for (size_t j = 0; d->times && j < d->n_varying; j++)
        fine = fine && all_finite(d->n, d->times[j]);
    return fine;
}

ohmen_status loss_damage_sample(struct figures *f, struct arena *a,
                                const struct loss_samples *samples, const struct sampling_plan *p,
                                struct loss_damage *d, ohmen_error *e)
{
    struct arena *scratch = arena_child(a);
    struct taping t;
    ohmen_status status = OHMEN_OK;
    d->n = d->n_unknown ? samples->n : 1;
    d->shift = NEW_ARRAY(a, d->n, double);
    taping_init(f, scratch, p, d, &t);
    if (d->form == LOSS_AMOUNT)
        over_samples(&t, samples, d->shift);
    if (d->form == LOSS_AFFINE)
        find_affine(a, &t, samples, d);
    d->same_times = d->form == LOSS_AFFINE && are_same_times(d);
    if (d->form == LOSS_AFFINE && !d->same_times && d->n_varying > 1)
        d->form = LOSS_DRAWN;
    if (d->form == LOSS_DRAWN)
        status = find_drawn(f, a, p, &t, samples, d, e);
    arena_free(scratch);
    if (status == OHMEN_OK && !is_finite(d))
        return error_set(e, OHMEN_COMPUTE,
                         "the damage of an occurrence is not a finite number for "
                         "some of what its inputs may be");
    return status;
}

/* ---- means and ranges ---- */

double loss_damage_mean(const struct loss_damage *d, size_t sample)
{
    size_t s = d->n == 1 ? 0 : sample;
    double mean = d->shift[s];
    if (d->form == LOSS_DRAWN)
        return statistics_mean(1, LOSS_DRAWS, d->amounts + s * LOSS_DRAWS).value;
    for (size_t j = 0; d->form == LOSS_AFFINE && j < d->n_varying; j++)
        mean += d->times[j][s] * d->varying[j].mean;
    return mean;
}

static double quantile_of(const struct loss_varying *v, double p, double q)
{
    return v->scale >= 0 ? v->scale * dist_quantile(&v->dist, p, q)
                         : v->scale * dist_quantile(&v->dist, q, p);
}

double loss_damage_high(const struct loss_damage *d, size_t sample)
{
    size_t s = d->n == 1 ? 0 : sample;
    double high = d->shift[s];
    if (d->form == LOSS_DRAWN) {
        high = d->amounts[s * LOSS_DRAWS];
        for (size_t i = 1; i < LOSS_DRAWS; i++)
            high = fmax(high, d->amounts[s * LOSS_DRAWS + i]);
        return high;
    }
    for (size_t j = 0; d->form == LOSS_AFFINE && j < d->n_varying; j++) {
        double times = d->times[j][s];
        high += times * (times > 0 ? quantile_of(&d->varying[j], 1 - HIGH_TAIL, HIGH_TAIL)
                                   : quantile_of(&d->varying[j], HIGH_TAIL, 1 - HIGH_TAIL));
    }
    return high;
}

static double low_of(const struct loss_damage *d, size_t s)
{
    double low = d->shift[s];
    for (size_t j = 0; d->form == LOSS_AFFINE && j < d->n_varying; j++) {
        double times = d->times[j][s];
        low += times * (times > 0 ? quantile_of(&d->varying[j], VANISHING, 1 - VANISHING)
                                  : quantile_of(&d->varying[j], 1 - VANISHING, VANISHING));
    }
    return low;
}

bool loss_damage_is_below_zero(const struct loss_damage *d)
{
    for (size_t s = 0; s < d->n; s++) {
        if (d->form != LOSS_DRAWN && low_of(d, s) < 0)
            return true;
        for (size_t i = 0; d->form == LOSS_DRAWN && i < LOSS_DRAWS; i++)
            if (d->amounts[s * LOSS_DRAWS + i] < 0)
                return true;
    }
    return false;
}

/* ---- on a lattice ---- */

static void find_parts(struct arena *a, const struct loss_varying *v, struct loss_parts *p)
{
    double edge = v->low, below = 0, above = 1;
    p->low = NEW_ARRAY(a, PARTS, double);
    p->high = NEW_ARRAY(a, PARTS, double);
    p->probability = NEW_ARRAY(a, PARTS, double);
    for (p->n = 0; p->n < PARTS; p->n++) {
        double z = (double)p->n / PARTS_PER_ONE - PARTS_TO;
        bool last = p->n == PARTS - 1;
        double to_below = last ? 1 : dist_normal_probability(z);
        double to_above = last ? 0 : dist_normal_probability(-z);
        p->low[p->n] = edge;
        edge = last ? v->high : quantile_of(v, to_below, to_above);
        p->high[p->n] = edge;
        p->probability[p->n] = z < 0 ? to_below - below : above - to_above;
        below = to_below;
        above = to_above;
    }
}

/* Sums on the lattice of what is added, for the means of its ends. */
struct tally {
    double sum[2], inside[2], last;
};

static void tally_add(struct tally *t, const struct lattice *l, struct severity_place at, double w)
{
    const size_t place[] = {at.down, at.up};
    for (int end = 0; end < 2; end++)
        if (place[end] < l->n) {
            t->sum[end] += w * (double)place[end];
            t->inside[end] += w;
        }
    if (at.down + 1 == l->n)
        t->last += w * (double)at.down;
}

/* Of what is beyond the lattice the mean tells: that of all less that of the inside, which lies
 * between the two ends of the inside. */
static void tally_means(const struct tally *t, const struct lattice *l, double exact, double out[2])
{
    double beyond = 1 - t->inside[0], least = exact - t->sum[1] - t->last;
    out[0] = t->sum[0];
    out[1] = t->sum[1];
    if (beyond > NOTHING_BEYOND)
        out[0] += fmax((double)l->n * beyond, least);
    if (1 - t->inside[1] > NOTHING_BEYOND)
        out[1] += fmax(exact - t->sum[0] + t->last, 0);
}

static void place_fixed(struct arena *a, const struct lattice *l, struct loss_damage *d)
{
    double shift = d->n == 1 ? d->shift[0] : 0;
    struct tally t = {0};
    if (d->form == LOSS_DRAWN)
        d->placed = severity_of_amounts(a, l, LOSS_DRAWS, d->amounts);
    else
        d->placed = severity_of_dist(a, l, &d->varying[0].dist,
                                     d->times[0][0] * d->varying[0].scale, shift);
    for (size_t j = 1; d->form == LOSS_AFFINE && j < d->n_varying; j++) {
        struct severity next =
            severity_of_dist(a, l, &d->varying[j].dist, d->times[j][0] * d->varying[j].scale, 0);
        d->placed = severity_sum(a, l, &d->placed, &next);
    }
    for (size_t i = d->placed.first; i < d->placed.end; i++) {
        tally_add(&t, l, (struct severity_place){i, l->n}, d->placed.down[i - d->placed.first]);
        tally_add(&t, l, (struct severity_place){l->n, i}, d->placed.up[i - d->placed.first]);
    }
    d->placed_exact = (loss_damage_mean(d, 0) - d->shift[0] + shift) / l->step;
    if (d->form == LOSS_DRAWN)
        d->placed_exact = loss_damage_mean(d, 0) / l->step;
    tally_means(&t, l, d->placed_exact, d->placed_mean);
}

void loss_damage_place(struct arena *a, const struct lattice *l, struct loss_damage *d)
{
    d->is_placed =
        (d->form == LOSS_AFFINE && d->same_times) || (d->form == LOSS_DRAWN && d->n == 1);
    if (d->is_placed)
        place_fixed(a, l, d);
    else if (d->form == LOSS_AFFINE && !d->parts.n)
        find_parts(a, &d->varying[0], &d->parts);
}

/* What is placed once for all samples moves by a shift that differs. */
static struct severity_place moved(const struct loss_damage *d, const struct lattice *l,
                                   size_t sample)
{
    if (d->n == 1)
        return (struct severity_place){0, 0};
    return severity_place_of(l, d->shift[sample]);
}

/* Part i, or drawn amount i, of a sample. */
static struct severity_place part_place(const struct loss_damage *d, const struct lattice *l,
                                        size_t s, size_t i)
{
    if (d->form == LOSS_DRAWN)
        return severity_place_of(l, d->amounts[s * LOSS_DRAWS + i]);
    double times = d->times[0][s], shift = d->shift[s];
    double x = times * d->parts.low[i] + shift, y = times * d->parts.high[i] + shift;
    if (times == 0)
        x = y = shift;
    if (x > y)
        return (struct severity_place){severity_place_of(l, y).down, severity_place_of(l, x).up};
    return (struct severity_place){severity_place_of(l, x).down, severity_place_of(l, y).up};
}

static size_t n_parts(const struct loss_damage *d)
{
    return d->form == LOSS_DRAWN ? LOSS_DRAWS : d->parts.n;
}

static double part_weight(const struct loss_damage *d, size_t i)
{
    return d->form == LOSS_DRAWN ? 1. / LOSS_DRAWS : d->parts.probability[i];
}

static void put(const struct lattice *l, struct severity_place at, double weight, double *down,
                double *up)
{
    if (at.down < l->n)
        down[at.down] += weight;
    if (at.up < l->n)
        up[at.up] += weight;
}

static void add_once(const struct lattice *l, struct severity_place at, double weight, double p,
                     double *down, double *up, struct tally *t)
{
    put(l, at, weight * p, down, up);
    tally_add(t, l, at, p);
}

void loss_damage_add(const struct loss_damage *d, const struct lattice *l, size_t sample,
                     double weight, double *down, double *up, double means[2])
{
    size_t s = d->n == 1 ? 0 : sample;
    struct tally t = {0};
    if (d->is_placed) {
        struct severity_place by = moved(d, l, s);
        severity_add(l, &d->placed, weight, by, down, up);
        means[0] = d->placed_mean[0] + (double)by.down;
        means[1] = d->placed_mean[1] + (double)by.up;
        return;
    }
    if (d->form == LOSS_AMOUNT)
        add_once(l, severity_place_of(l, d->shift[s]), weight, 1, down, up, &t);
    for (size_t i = 0; d->form != LOSS_AMOUNT && i < n_parts(d); i++)
        add_once(l, part_place(d, l, s, i), weight, part_weight(d, i), down, up, &t);
    tally_means(&t, l, loss_damage_mean(d, s) / l->step, means);
}
