/* SPDX-License-Identifier: GPL-3.0-or-later */
/* CHAIN: a Markov chain in continuous time (graph.h). Owns nothing.
 *
 * Uniformization: with a rate L not below any sum of rates out of one state, the chain is a Poisson
 * process of jumps at rate L, at each of which it goes along a flow with the probability of its
 * rate / L, or stays. With a = L years, w[k] = exp(-a) a^k / k!, the probability of k jumps, and
 * v[k] the probability of being in `end` behind k jumps,
 *
 *     probability = sum of w[k] v[k]
 *     mean share  = sum of w[k] (v[0] + ... + v[k - 1]) / a
 *
 * (the second since w[k + 1] + w[k + 2] + ... is L times the integral of w[k] over time; over all
 * states the sums are 1 and k, and a is the sum of w[k] k). Nothing
 * is subtracted but L less the rates out of a state, whose error counts as one of L: 1e-16 a.
 * Jumps are taken one after the other, and weights with them: from where they begin to be worth
 * something below the most probable number, up to where all that is left cannot matter. The sum is
 * divided by the same sum over all states, so that it does not matter with which weight they began
 * (B. L. Fox & P. W. Glynn, "Computing Poisson probabilities", CACM 31 (1988) 440-445, from
 * memory), nor what all states together gain or lose by rounding.
 *
 * For a slope L is held, and each probability of staying or going differentiated: the derivative
 * u[k] of the row of probabilities takes the same jumps, and behind each of them the flow's own
 * share of what its state had is added at its end and taken off at its beginning. */
#include "graph/ops.h"

#include <math.h>

#define MOST_JUMPS 1e5      /* on the average */
#define LEAST_WEIGHT 1e-280 /* of a number of jumps; that of the most probable is near 1 */
#define REST 0x1p-60        /* what is left out, as a part of the sum */
#define NO_FLOW UINT32_MAX

struct series {
    const struct chain *c;
    double rate, jumps;             /* L, a */
    double stay[CHAIN_MOST_STATES]; /* of a jump */
    double go[CHAIN_MOST_FLOWS];
};

/* False where there is no value. */
static bool begin(const struct chain *c, const double *x, struct series *s)
{
    double out[CHAIN_MOST_STATES] = {0}, most = 0;
    for (uint32_t f = 0; f < c->n_flows; f++) {
        if (!(x[f] >= 0))
            return false;
        out[c->from[f]] += x[f];
    }
    for (uint32_t i = 0; i < c->n_states; i++)
        most = out[i] > most ? out[i] : most;
    s->c = c;
    s->rate = most > 0 ? most : c->years > 0 ? 1 / c->years : 1;
    s->jumps = s->rate * c->years;
    for (uint32_t i = 0; i < c->n_states; i++)
        s->stay[i] = (s->rate - out[i]) / s->rate;
    for (uint32_t f = 0; f < c->n_flows; f++)
        s->go[f] = x[f] / s->rate;
    return s->jumps <= MOST_JUMPS;
}

static void jump(const struct series *s, double *v)
{
    const struct chain *c = s->c;
    double next[CHAIN_MOST_STATES];
    for (uint32_t i = 0; i < c->n_states; i++)
        next[i] = v[i] * s->stay[i];
    for (uint32_t f = 0; f < c->n_flows; f++)
        next[c->to[f]] += v[c->from[f]] * s->go[f];
    for (uint32_t i = 0; i < c->n_states; i++)
        v[i] = next[i];
}

/* How far it has come: behind k jumps. */
struct state {
    double k, weight;
    double v[CHAIN_MOST_STATES], u[CHAIN_MOST_STATES]; /* u: slope, times L */
    double all;                                        /* sum of v */
    struct compensated before, u_before, all_before;   /* sums of `end` over fewer jumps */
    struct compensated whole, value, slope;            /* so far */
};

/* The first number of jumps that has a weight worth anything, and that weight. */
static double first_weight(double jumps, double *weight)
{
    double k = floor(jumps), w = 1;
    for (; k > 0 && w > LEAST_WEIGHT; k--)
        w *= k / jumps;
    *weight = w;
    return k;
}

static void advance(const struct series *s, uint32_t flow, struct state *t)
{
    const struct chain *c = s->c;
    compensated_add(&t->before, t->v[c->end]);
    compensated_add(&t->all_before, t->all);
    if (flow != NO_FLOW) {
        double moved = t->v[c->from[flow]];
        compensated_add(&t->u_before, t->u[c->end]);
        jump(s, t->u);
        t->u[c->to[flow]] += moved;
        t->u[c->from[flow]] -= moved;
    }
    jump(s, t->v);
    t->all = 0;
    for (uint32_t i = 0; i < c->n_states; i++)
        t->all += t->v[i];
    t->k++;
}

static double sum_of(struct compensated c)
{
    return c.sum + c.lost;
}

static void add_terms(const struct series *s, struct state *t)
{
    const struct chain *c = s->c;
    double v = c->mean ? sum_of(t->before) : t->v[c->end];
    double u = c->mean ? sum_of(t->u_before) : t->u[c->end];
    compensated_add(&t->whole, t->weight * (c->mean ? sum_of(t->all_before) : t->all));
    compensated_add(&t->value, t->weight * v);
    compensated_add(&t->slope, t->weight * u);
}

/* Terms behind k jumps are at most k^2 times their weights, which fall as powers of jumps / k.
 * While the sum is 0, since no way has been met yet or there is none, weights alone tell. */
static bool is_enough(const struct series *s, uint32_t flow, const struct state *t)
{
    if (t->k < s->jumps)
        return false;
    double rest = t->weight * (t->k + 2) / (t->k + 2 - s->jumps);
    double least = sum_of(t->value), slope = fabs(sum_of(t->slope));
    if (flow != NO_FLOW && slope < least)
        least = slope;
    return t->weight < LEAST_WEIGHT || rest * (t->k + 2) * (t->k + 2) <= REST * least;
}

/* With a flow: the slope by its rate. */
static double run(const struct series *s, uint32_t flow)
{
    struct state t = {.all = 1};
    double weight = 0, first = first_weight(s->jumps, &weight);
    t.v[s->c->start] = 1;
    while (t.k < first)
        advance(s, flow, &t);
    t.weight = weight;
    for (;;) {
        add_terms(s, &t);
        if (is_enough(s, flow, &t))
            break;
        advance(s, flow, &t);
        t.weight *= s->jumps / t.k;
    }
    double whole = sum_of(t.whole);
    return flow == NO_FLOW ? sum_of(t.value) / whole : sum_of(t.slope) / whole / s->rate;
}

double chain_point(const struct chain *c, const double *x)
{
    struct series s;
    return begin(c, x, &s) ? run(&s, NO_FLOW) : NAN;
}

void chain_backward(const struct chain *c, const double *x, double w, double *back)
{
    struct series s;
    if (!begin(c, x, &s))
        return;
    for (uint32_t f = 0; f < c->n_flows; f++)
        back[f] += w * run(&s, f);
}
