/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Schemes under repair: published values, and enumeration of random ones. */
#include <math.h>

#include "random.h"
#include "unwanted_test.h"

/* A repairable element of MTBF 30 a and MTTR 168 h is unavailable 6.39e-4 (a source at second
 * hand): 168 / (30 x 8760) = 6.3927e-4. */
START_TEST(one_element)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements: {A: {detected: 1 in 30 a, repair: 168 h}}\n"
                  "schemes: {S: {all: [A]}}\n");
    unwanted_expect(&l, "S.unavailability", 168 / (30 * 8760.0), 1e-14);
    ck_assert(fabs(loaded_value(&l, "S.unavailability") - 6.39e-4) < .005e-4);
    unwanted_expect(&l, "S.availability", 1 - 168 / (30 * 8760.0), 1e-15);
    unwanted_expect(&l, "S.failure-frequency", 1 / 30.0, 1e-15);
    unwanted_expect(&l, "S.outage-time", 168 / 8760.0, 1e-14);
    unwanted_reads(&l, "S.unavailability", "probability(not up.A)");
    arena_free(a);
}
END_TEST

static const char feeder[] = "values: {per-mile: {is: 2 per 10 a}}\n"
                             "elements:\n"
                             "  LINE: {detected: 3 * per-mile, repair: 3 h}\n"
                             "  CABLE: {detected: 1 per 10 a, repair: 28 h}\n"
                             "  ENDS: {detected: 2 * 0.003 per a, repair: 3 h}\n"
                             "schemes: {S: {all: [LINE, CABLE, ENDS]}}\n";

/* Gonen, Electric Power Distribution System Engineering, example 11.2 (at second hand): 3 mi of
 * overhead line with 2 faults per mile in 10 a (3 h each), 1 mi of cable with 1 in 10 a (28 h) and
 * two terminations with .003 per a (3 h) in series: .706 per a, 6.54108 h, 4.618 h per a.
 * The source adds rates and products of rate and time, which counts overlaps twice. The sums of
 * what the elements show are its values; the figures leave overlaps out:
 *     unavailability   1 - (1 - 1.8/8760)(1 - 2.8/8760)(1 - .018/8760)
 *     frequency        .6 (1 - u2)(1 - u3) + .1 (1 - u1)(1 - u3) + .006 (1 - u1)(1 - u2) */
START_TEST(a_feeder_in_series)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a, feeder);
    double rates = loaded_value(&l, "LINE.detected") + loaded_value(&l, "CABLE.detected") +
                   loaded_value(&l, "ENDS.detected");
    double out = loaded_value(&l, "LINE.in-repair") + loaded_value(&l, "CABLE.in-repair") +
                 loaded_value(&l, "ENDS.in-repair");
    ck_assert(fabs(rates - .706) < 1e-12);
    ck_assert(fabs(out / rates * 8760 - 6.54108) < 5e-6);
    ck_assert(fabs(out * 8760 - 4.618) < 1e-12);
    double u1 = 1.8 / 8760, u2 = 2.8 / 8760, u3 = .018 / 8760;
    double u = u1 + u2 + u3 - u1 * u2 - u1 * u3 - u2 * u3 + u1 * u2 * u3;
    double f = .6 * (1 - u2) * (1 - u3) + .1 * (1 - u1) * (1 - u3) + .006 * (1 - u1) * (1 - u2);
    unwanted_expect(&l, "S.unavailability", u, 1e-13);
    unwanted_expect(&l, "S.failure-frequency", f, 1e-13);
    unwanted_expect(&l, "S.outage-time", u / f, 1e-13);
    ck_assert(fabs(f - .706) < .0005); /* to its digits */
    unwanted_reads(&l, "S.failure-frequency.LINE",
                   "LINE.detected * probability(up.CABLE and up.ENDS)");
    unwanted_reads(&l, "S.outage-time", "ratio(S.unavailability; S.failure-frequency)");
    arena_free(a);
}
END_TEST

/* Two in parallel, by hand: u1 u2, and d1 u2 + d2 u1; what is out together from a common cause is
 * one failure of both. Failures on demand do not count. */
START_TEST(two_in_parallel)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    unwanted_load(&l, a,
                  "elements:\n"
                  "  A: {detected: 0.5 per a, repair: 87.6 h, per-demand: 0.25}\n"
                  "  B: {detected: 0.2 per a, repair: 43.8 h}\n"
                  "  C: {detected: 0.3 per a, repair: 20 h, plant-out-while-repaired: yes}\n"
                  "  D: {detected: 0.4 per a, repair: 87.6 h}\n"
                  "  E: {detected: 0.4 per a, repair: 43.8 h}\n"
                  "common-cause: {CC: {of: [D, E], beta: 0.1, beta-detected: 0.25}}\n"
                  "schemes: {S: {any: [A, B]}, T: {all: [S, C]}, U: {any: [D, E]}}\n");
    double u1 = .005, u2 = .001;
    unwanted_expect(&l, "S.unavailability", u1 * u2, 1e-13);
    unwanted_expect(&l, "S.failure-frequency", .5 * u2 + .2 * u1, 1e-13);
    unwanted_expect(&l, "T.unavailability", u1 * u2, 1e-13);
    double both = .1 * .01, d = .3 * .01, e = .3 * .005;
    unwanted_expect(&l, "U.unavailability", both + (1 - both) * d * e, 1e-13);
    unwanted_expect(&l, "U.failure-frequency",
                    .1 * (1 - d * e) + .3 * (1 - both) * e + .3 * (1 - both) * d, 1e-13);
    unwanted_reads(&l, "S.failure-frequency.A", "A.detected * probability(not up.B)");
    arena_free(a);
}
END_TEST

/* --- random ones --- */

enum { MOST = 6, ROUNDS = 80 };

struct part {
    int element;
    int k, n;
    struct part *of[3];
};

struct world {
    struct random random;
    struct arena *arena;
    int n;
    double rate[MOST], hours[MOST];
    struct part *root;
};

static struct part *draw_part(struct world *w, int depth)
{
    struct part *p = NEW(w->arena, struct part);
    p->element = (int)random_index(&w->random, (size_t)w->n);
    if (depth == 0 || random_index(&w->random, 4) == 0)
        return p;
    p->n = 2 + (int)random_index(&w->random, 2);
    p->k = 1 + (int)random_index(&w->random, (size_t)p->n);
    for (int i = 0; i < p->n; i++)
        p->of[i] = draw_part(w, depth - 1);
    return p;
}

static void write_part(struct text *t, const struct part *p)
{
    if (p->n == 0)
        text_printf(t, "E%d", p->element);
    else
        text_printf(t, "{at-least: %d, of: [", p->k);
    for (int i = 0; i < p->n; i++) {
        text_add(t, i ? ", " : "");
        write_part(t, p->of[i]);
    }
    text_add(t, p->n ? "]}" : "");
}

static bool holds(const struct part *p, unsigned failed)
{
    if (p->n == 0)
        return !(failed >> p->element & 1);
    int met = 0;
    for (int i = 0; i < p->n; i++)
        met += holds(p->of[i], failed);
    return met >= p->k;
}

/* The probability of a set of failures, without element `but`. */
static double weight(const struct world *w, unsigned failed, int but)
{
    double p = 1;
    for (int i = 0; i < w->n; i++) {
        double u = w->rate[i] * w->hours[i] / 8760;
        p *= i == but ? 1 : failed >> i & 1 ? u : 1 - u;
    }
    return p;
}

/* From each state in which the scheme works, the failures that end that. */
static void enumerate(const struct world *w, double *out, double *frequency)
{
    *out = *frequency = 0;
    for (unsigned failed = 0; failed < 1u << w->n; failed++) {
        if (!holds(w->root, failed))
            *out += weight(w, failed, -1);
        for (int i = 0; i < w->n; i++)
            if (!(failed >> i & 1) && holds(w->root, failed) && !holds(w->root, failed | 1u << i))
                *frequency += w->rate[i] * weight(w, failed, i);
    }
}

START_TEST(random_schemes_are_enumerated)
{
    struct world w = {.random = random_seed(1907 + (uint64_t)_i), .arena = arena_new(NULL)};
    struct loaded l;
    struct text t;
    double out, frequency;
    text_init(&t, w.arena);
    text_add(&t, "elements:\n");
    w.n = 1 + (int)random_index(&w.random, MOST);
    for (int i = 0; i < w.n; i++) {
        w.rate[i] = random_log_uniform(&w.random, 1e-3, 2);
        w.hours[i] = random_log_uniform(&w.random, 1, 2000);
        text_printf(&t, "  E%d: {detected: %.17g per a, repair: %.17g h}\n", i, w.rate[i],
                    w.hours[i]);
    }
    w.root = draw_part(&w, 3);
    text_add(&t, "schemes: {S: {all: [");
    write_part(&t, w.root);
    text_add(&t, "]}}\n");
    unwanted_load(&l, w.arena, text_str(&t));
    enumerate(&w, &out, &frequency);
    unwanted_expect(&l, "S.unavailability", out, 1e-11);
    unwanted_expect(&l, "S.failure-frequency", frequency, 1e-11);
    unwanted_expect(&l, "S.outage-time", out / frequency, 1e-11);
    unwanted_explains(&l, "S.failure-frequency");
    unwanted_explains(&l, "S.unavailability");
    arena_free(w.arena);
}
END_TEST

TCase *repairs_case(void)
{
    TCase *t = tcase_create("repairs");
    tcase_add_test(t, one_element);
    tcase_add_test(t, a_feeder_in_series);
    tcase_add_test(t, two_in_parallel);
    tcase_add_loop_test(t, random_schemes_are_enumerated, 0, ROUNDS);
    return t;
}
