/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What information is worth: published and closed cases of choices between lines of one target,
 * which need no decision, and of decisions; and registers that state a quantity as certain, drawn
 * many times and weighed anew. */
#include "decide/information.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "decide/sure.h"
#include "information_world.h"
#include "loaded.h"
#include "random.h"
#include "restated.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* What is found without quadrature differs by rounding only; lines, by 1e-9 (information.h). */
#define EXACT 1e-12
#define LINE 1e-9

static void check(const char *what, double x, double expected, double tolerance)
{
    restated_check(what, x, expected, 0, tolerance);
}

static void look(struct loaded *l, const struct lines *lines, const char *values,
                 struct information *x)
{
    lines_look(l, arena, lines, values, x);
}

static const struct information_change *change_of(const struct information *x, size_t n, size_t i)
{
    ck_assert_uint_eq(x->list.at[0].changes.n, n);
    return &x->list.at[0].changes.at[i];
}

/* --- published cases --- */

/* Howard (1996): three alternatives pay 100/0, 90/20 and 40/50 as an event of probability p occurs
 * or does not. With p = .4 they are worth 40, 48 and 46, and clairvoyance on the event 22. By p the
 * third one is best below .375, the first one above .667. */
static const struct lines howard = {3, {0, 20, 50}, {100, 70, -10}, true};

START_TEST(clairvoyance_on_an_event)
{
    struct loaded l;
    struct information x;
    look(&l, &howard, "V: {is: {values: {spared: {is: 0, p: 60 %}, struck: {is: 1, p: 40 %}}}}",
         &x);
    check("worth", x.worth, 48, EXACT);
    ck_assert_uint_eq(x.best, 1);
    ck_assert_uint_eq(x.list.n, 1);
    ck_assert_uint_eq(x.n_turning, 1);
    check("clairvoyance", x.list.at[0].worth, 22, EXACT);
    ck_assert(x.list.at[0].is_exact && x.list.at[0].error == 0);
    ck_assert_str_eq(x.list.at[0].name, "V.value");
    /* Another one is best on both sides, the one above lies farther from the mean .4. */
    const struct information_change *c = change_of(&x, 1, 0);
    ck_assert_int_eq(c->side, INFORMATION_ABOVE);
    ck_assert(c->at == 1 && c->beyond == 0 && c->before == 2);
    check("yes", c->probability, 0.4, EXACT);
}
END_TEST

/* The same by p, of which the mean is .4: beta (2, 3). The gain is 80 (.375 - p) below the first
 * threshold, 30 (p - 2/3) above the second, in the mean by the beta distributions of one event
 * more: E[p; p <= t] = .4 I(t; 3, 3). */
START_TEST(thresholds_of_a_probability)
{
    struct loaded l;
    struct information x;
    struct dist d = {DIST_BETA, {2, 3}, 0, NULL, NULL}, more = {DIST_BETA, {3, 3}, 0, NULL, NULL};
    double low = 0.375, high = 2 / 3., below = dist_cdf(&d, low), above = 1 - dist_cdf(&d, high);
    double expected = 80 * (low * below - 0.4 * dist_cdf(&more, low)) +
                      30 * (0.4 * (1 - dist_cdf(&more, high)) - high * above);
    look(&l, &howard, "V: {is: {a: 2, b: 3}}", &x);
    check("worth", x.list.at[0].worth, expected, LINE);
    ck_assert(x.list.at[0].is_linear);
    const struct information_change *c = change_of(&x, 2, 0);
    ck_assert_int_eq(c[0].side, INFORMATION_BELOW);
    ck_assert_int_eq(c[1].side, INFORMATION_ABOVE);
    check("low", c[0].at, low, LINE);
    check("high", c[1].at, high, LINE);
    check("below", c[0].probability, below, LINE);
    check("above", c[1].probability, above, LINE);
    ck_assert(c[0].beyond == 2 && c[0].before == 1 && c[1].beyond == 0 && c[1].before == 1);
}
END_TEST

/* Hillier & Lieberman, oil prospect: drill for 700 or -100, or sell for 90; oil with .25. Perfect
 * information is worth 142.5; as a quantity and as a state. */
static const struct lines prospect = {2, {90, -100}, {0, 800}, true};

START_TEST(oil_prospect)
{
    struct loaded l;
    struct information x;
    look(&l, &prospect, "V: {is: {values: {dry: {is: 0, p: 75 %}, oil: {is: 1, p: 25 %}}}}", &x);
    check("drilling", x.worth, 100, EXACT);
    check("perfect information", x.list.at[0].worth, 142.5, EXACT);
    ck_assert_int_eq(change_of(&x, 1, 0)->side, INFORMATION_BELOW);
    check("dry", x.list.at[0].changes.at[0].probability, 0.75, EXACT);
}
END_TEST

START_TEST(oil_prospect_as_a_state)
{
    static const char *const names[] = {"dry", "oil"};
    static const double probabilities[] = {0.75, 0.25}, values[] = {0, 1};
    struct loaded l;
    struct information x;
    struct choice c = lines_choice(&l, arena, &prospect, "V: {is: 25 %}");
    node_id node = figure_at(l.figures, loaded_find(&l, "V.value"))->node;
    struct unknown_state s = {"S", 1, &node, 2, names, probabilities, values};
    information_find(l.figures, &c, NULL, 1, &s, NULL, &x);
    ck_assert_uint_eq(x.list.n, 1);
    check("perfect information", x.list.at[0].worth, 142.5, EXACT);
    ck_assert_str_eq(x.list.at[0].name, "S");
    ck_assert_uint_eq(x.list.at[0].figure, FIGURE_NONE);
    ck_assert_int_eq(change_of(&x, 1, 0)->side, INFORMATION_IF);
    ck_assert_str_eq(x.list.at[0].changes.at[0].state, "dry");
    ck_assert_uint_eq(x.list.at[0].changes.at[0].beyond, 0);
    check("dry", x.list.at[0].changes.at[0].probability, 0.75, EXACT);
}
END_TEST

/* --- closed cases --- */

/* A worth v - c against 0, v by a distribution F of mean m: E[(v - c)+] - (m - c)+, with
 * E[v; v > c] by the distribution that is weighted by v. Unit normal loss integral L(u) = phi(u) -
 * u (1 - Phi(u)) (Raiffa & Schlaifer 1961, from memory): sigma L(|m - c| / sigma). */
struct closed {
    const char *stated;
    double c, worth, at, beyond;
};

static double gain(double m, double c, double above, double mean_above)
{
    return m * mean_above - c * above - fmax(0, m - c);
}

static double of_dist(struct dist d, struct dist weighted, double c, double *beyond)
{
    double m = dist_mean(&d), above = 1 - dist_cdf(&d, c);
    *beyond = c > m ? above : 1 - above;
    return gain(m, c, above, 1 - dist_cdf(&weighted, c));
}

static void check_closed(const char *stated, double c, double worth, double beyond,
                         double tolerance)
{
    struct loaded l;
    struct information x;
    struct lines lines = {2, {0, -c}, {0, 1}, true};
    look(&l, &lines, arena_printf(arena, "V: {is: %s}", stated), &x);
    ck_assert_uint_eq(x.list.n, 1);
    check(stated, x.list.at[0].worth, worth, tolerance);
    check(stated, change_of(&x, 1, 0)->at, c, LINE);
    check(stated, x.list.at[0].changes.at[0].probability, beyond, LINE);
    ck_assert_msg(fabs(x.list.at[0].worth - worth) <= x.list.at[0].error + EXACT * worth,
                  "%s: %.17g is off more than %g from %.17g", stated, x.list.at[0].worth,
                  x.list.at[0].error, worth);
}

START_TEST(normal_loss_integral)
{
    double u = 0.3, sigma = 40;
    double density = exp(-u * u / 2) / sqrt(2 * acos(-1)), beyond = erfc(u / sqrt(2)) / 2;
    double worth = sigma * (density - u * beyond);
    check_closed("{mean: 100, standard-deviation: 40}", 100 + u * sigma, worth, beyond, LINE);
    check_closed("{mean: 100, standard-deviation: 40}", 100 - u * sigma, worth, beyond, LINE);
}
END_TEST

START_TEST(lognormal_partial_expectation)
{
    double s = log(4) / 1.6448536269514722, c = 2.5, z = log(c) / s, m = exp(s * s / 2);
    double above = erfc(z / sqrt(2)) / 2, weighted = erfc((z - s) / sqrt(2)) / 2;
    check_closed("{median: 1, error-factor: 4}", c, gain(m, c, above, weighted), above, LINE);
}
END_TEST

START_TEST(gamma_and_beta_and_pert)
{
    double beyond;
    struct dist g = {DIST_GAMMA, {3, 0.7}, 0, NULL, NULL};
    struct dist g1 = {DIST_GAMMA, {3 * 1.7 / 0.7, 1.7}, 0, NULL, NULL};
    double worth = of_dist(g, g1, 4, &beyond);
    check_closed("{mean: 3, shape-parameter: 0.7}", 4, worth, beyond, LINE);
    struct dist b = {DIST_BETA, {0.6, 5}, 0, NULL, NULL};
    struct dist b1 = {DIST_BETA, {1.6, 5}, 0, NULL, NULL};
    worth = of_dist(b, b1, 0.05, &beyond);
    check_closed("{a: 0.6, b: 5}", 0.05, worth, beyond, LINE);
    /* 2 + 6 y with y of beta (1 + 4/6, 1 + 20/6). */
    struct dist p = {DIST_BETA, {1 + 4 / 6., 1 + 20 / 6.}, 0, NULL, NULL};
    struct dist p1 = {DIST_BETA, {2 + 4 / 6., 1 + 20 / 6.}, 0, NULL, NULL};
    worth = 6 * of_dist(p, p1, 2 / 6., &beyond);
    check_closed("{shape: pert, from: 2, most-likely: 3, to: 8}", 4, worth, beyond, LINE);
}
END_TEST

/* Uniform in a .. b: (b - c)^2 / 2 (b - a). Triangular, above the top: the density is 2 (b - x) /
 * ((b - a)(b - top)), and E[(x - c)+] = (b - c)^3 / (3 (b - a)(b - top)). */
START_TEST(straight_densities)
{
    check_closed("{shape: uniform, from: 1, to: 5}", 4, 1 / 8., 1 / 4., LINE);
    check_closed("{shape: triangular, from: 1, most-likely: 2, to: 5}", 4, 1 / 36., 1 / 12., LINE);
}
END_TEST

/* Several are best by turns; the mean lies in the second stretch. Uniform in 0 .. 10: gains of 2 (2
 * - v), (v - 6) and beyond 8 of 2 + 3 (v - 8). */
START_TEST(several_thresholds)
{
    static const struct lines four = {4, {4, 0, -6, -22}, {-1, 1, 2, 4}, true};
    struct loaded l;
    struct information x;
    look(&l, &four, "V: {is: {shape: uniform, from: 0, to: 10}}", &x);
    ck_assert_uint_eq(x.best, 1);
    check("worth", x.list.at[0].worth, (4 + 2 + 4 + 6) / 10., LINE);
    const struct information_change *c = change_of(&x, 3, 0);
    check("first", c[0].at, 2, LINE);
    check("second", c[1].at, 6, LINE);
    check("third", c[2].at, 8, LINE);
    check("beyond the third", c[2].probability, 0.2, LINE);
    ck_assert(c[0].side == INFORMATION_BELOW && c[1].side == INFORMATION_ABOVE &&
              c[2].side == INFORMATION_ABOVE);
    ck_assert(c[2].beyond == 3 && c[2].before == 2 && c[1].before == 1 && c[0].before == 1);
}
END_TEST

/* Knowing V never changes the choice: exactly 0, whoever tells what is had without knowing. */
START_TEST(nothing_to_gain)
{
    struct lines never = {2, {-1, 0}, {0.1, 3}, true};
    struct loaded l;
    struct information x;
    for (int k = 0; k < 2; k++) {
        never.tells = k;
        look(&l, &never, "V: {is: {shape: uniform, from: 1, to: 7}}", &x);
        ck_assert_uint_eq(x.list.n, 1);
        ck_assert_uint_eq(x.n_turning, 0);
        ck_assert(x.list.at[0].worth == 0 && x.list.at[0].changes.n == 0);
        look(&l, &never, "V: {is: {values: {low: {is: 2, p: 60 %}, high: {is: 3.3, p: 40 %}}}}",
             &x);
        ck_assert(x.list.at[0].worth == 0 && x.list.at[0].changes.n == 0);
    }
}
END_TEST

/* --- curves --- */

/* The target is v^2, v uniform in 1 .. 3: worth v^2 - 5 against 0; mean 13/3. The gain is
 * the integral of v^2 - 5 from sqrt 5 to 3 over 2. */
static const double SQUARE = (9 - 15 - (5 / 3. - 5) * 2.23606797749978969) / 2;

START_TEST(curves_in_the_quantity)
{
    struct lines five = {2, {0, -5}, {0, 1}, true};
    struct loaded l;
    struct information x;
    for (int k = 0; k < 2; k++) {
        five.tells = k;
        look(&l, &five, "V: {is: U * U}, U: {is: {shape: uniform, from: 1, to: 3}}", &x);
        ck_assert_uint_eq(x.list.n, 1);
        ck_assert(x.list.at[0].is_exact && !x.list.at[0].is_linear);
        check("worth", x.list.at[0].worth, SQUARE, 1e-6);
        ck_assert(x.list.at[0].error <= 1e-3 * SQUARE);
        check("at", change_of(&x, 1, 0)->at, sqrt(5), 1e-6);
    }
}
END_TEST

/* min (v; 4) has a kink, which polynomials do not follow: each point is evaluated. Worth 3 - min
 * (v; 4) against 0 with v uniform in 0 .. 6: mean 8/3, so 1/3; the loss avoided beyond 3 is 1/2 of
 * the stretch 3 .. 4 and 1 of 4 .. 6. */
START_TEST(kinks)
{
    static const struct lines three = {2, {0, 3}, {0, -1}, true};
    struct loaded l;
    struct information x;
    look(&l, &three, "V: {is: min(U; 4)}, U: {is: {shape: uniform, from: 0, to: 6}}", &x);
    check("worth", x.list.at[0].worth, 2.5 / 6, 1e-3);
    ck_assert(fabs(x.list.at[0].worth - 2.5 / 6) <= x.list.at[0].error);
    check("at", change_of(&x, 1, 0)->at, 3, 1e-6);
}
END_TEST

/* What is told without choice.worth is the same. */
START_TEST(choices_that_do_not_tell)
{
    static const struct lines all[] = {
        {3, {0, 20, 50}, {100, 70, -10}, false},
        {2, {90, -100}, {0, 800}, false},
    };
    static const char *const stated[] = {
        "V: {is: {a: 2, b: 3}}", "V: {is: {shape: uniform, from: 0.1, to: 0.9}}",
        "V: {is: {values: {spared: {is: 0, p: 60 %}, struck: {is: 1, p: 40 %}}}}"};
    for (size_t i = 0; i < 2; i++)
        for (size_t k = 0; k < 3; k++) {
            struct loaded l, m;
            struct information x, y;
            struct lines tells = all[i];
            tells.tells = true;
            look(&l, &all[i], stated[k], &x);
            look(&m, &tells, stated[k], &y);
            check(stated[k], x.list.at[0].worth, y.list.at[0].worth, 1e-8);
            ck_assert_uint_eq(x.list.at[0].changes.n, y.list.at[0].changes.n);
        }
}
END_TEST

/* --- which quantities --- */

/* What varies from one occurrence to the next is no knowledge; what has mean 0 is told as not seen;
 * what reaches nothing is not told. */
START_TEST(what_is_looked_at)
{
    static const struct lines against_one = {2, {0, -1}, {0, 1}, true};
    struct loaded l;
    struct information x;
    look(&l, &against_one,
         "V: {is: A + B * C}, A: {is: {shape: uniform, from: -1, to: 1}}, B: {varies: {shape: "
         "uniform, from: 0, to: 2}}, C: {is: {shape: uniform, from: 0.4, to: 1.8}}, D: {is: "
         "{shape: uniform, from: 0, to: 1}}",
         &x);
    ck_assert_uint_eq(x.list.n, 1);
    ck_assert_str_eq(x.list.at[0].name, "C.value");
    check("worth", x.list.at[0].worth, 0.8 * 0.8 / 2 / 1.4 - 0.1, LINE);
    ck_assert_uint_eq(x.not_seen.n, 1);
    ck_assert_str_eq(x.not_seen.at[0], "A#0");
    ck_assert_uint_eq(x.n_all, 1);
}
END_TEST

/* X Y - .3 against 0, both 0 or 1 with .5: knowing both is worth .25 x .7, each alone .5 x .2. */
START_TEST(both_and_each)
{
    static const struct lines product = {2, {0, -0.3}, {0, 1}, true};
    struct loaded l;
    struct information x;
    look(&l, &product,
         "V: {is: X * Y}, X: {is: {values: {low: {is: 0, p: 50 %}, high: {is: 1, p: rest}}}}, Y: "
         "{is: {values: {low: {is: 0, p: 50 %}, high: {is: 1, p: rest}}}}",
         &x);
    ck_assert_uint_eq(x.n_turning, 2);
    check("one", x.list.at[0].worth, 0.1, EXACT);
    check("the other", x.list.at[1].worth, 0.1, EXACT);
    ck_assert_double_gt(x.list.at[0].worth + x.list.at[1].worth, 0.25 * 0.7);
    ck_assert_str_eq(x.list.at[0].name, "X.value");
}
END_TEST

static bool stop_behind_one(void *ctx, size_t done, size_t all)
{
    (void)ctx;
    ck_assert_uint_eq(all, 2);
    return done < 1;
}

START_TEST(interrupted)
{
    static const struct lines against_one = {2, {0, -1}, {0, 1}, true};
    struct information_watch watch = {stop_behind_one, NULL};
    struct loaded l;
    struct information x;
    struct choice c = lines_choice(&l, arena, &against_one,
                                   "V: {is: A + B}, A: {is: {shape: uniform, from: 0, to: 1}}, B: "
                                   "{is: {shape: uniform, from: 0, to: 2}}");
    information_find(l.figures, &c, NULL, 0, NULL, &watch, &x);
    ck_assert(x.interrupted);
    ck_assert_uint_eq(x.n_looked, 1);
    ck_assert_uint_eq(x.list.n, 1);
    ck_assert_str_eq(x.list.at[0].name, "A.value");
}
END_TEST

/* --- decisions --- */

#define HOWARD                                                                                     \
    "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 % per a}\n"       \
    "values: {X: {is: {values: {spared: {is: 0 EUR, p: 60 %}, struck: {is: 110 EUR, p: "           \
    "rest}}}}}\n"                                                                                  \
    "hazards: {H: {name: H, frequency: 1 per a, response: {never: {outcome: lost}}, outcomes: "    \
    "{lost: {name: Lost, damage: {loss: {category: c, is: X}}}}}}\n"                               \
    "options:\n"                                                                                   \
    "  A: {name: A, invest: 50 EUR, excludes: [B], change: {hazards: {H: {frequency: 0 * "         \
    "was}}}}\n"                                                                                    \
    "  B: {name: B, invest: 30 EUR, change: {hazards: {H: {frequency: 3 / 11 * was}}}}\n"          \
    "decisions: {D: {question: What?, options: [A, B]}}\n"

static void look_at_decision(struct loaded *l, const char *text, struct weighing **w,
                             struct sure *sure, struct information *x)
{
    struct choice *c = NEW(arena, struct choice);
    struct sampling_plan p = sampling_defaults();
    ohmen_error e = OHMEN_ERROR_INIT;
    *w = restated_weigh(l, arena, text);
    *c = choice_of_weighing(arena, l->figures, *w);
    ck_assert_int_eq(sure_find(l->figures, arena, *w, &p, sure, &e), OHMEN_OK);
    struct information_sample sample = information_sample_of(arena, l->figures, sure);
    information_find(l->figures, c, &sample, 0, NULL, NULL, x);
}

/* Each is worth no more than everything, which comes from a sample. */
static void check_bounds(const struct sure *sure, const struct information *x)
{
    struct sampled all = sure->of[sure->weighing->order[0]].regret;
    for (size_t i = 0; i < x->list.n; i++) {
        const struct information_input *in = &x->list.at[i];
        ck_assert_msg(in->worth <= all.value + 4 * all.error + in->error, "%s: %g of %g +- %g",
                      in->name, in->worth, all.value, all.error);
        ck_assert(i == 0 || in->worth <= x->list.at[i - 1].worth);
        ck_assert_int_eq(in->worth > 0, i < x->n_turning);
    }
}

/* The case of Howard as a register, against its third alternative; and what knowing everything is
 * worth, which is one quantity here, from a sample: the regret of the best alternative. */
START_TEST(howard_as_a_register)
{
    struct loaded l;
    struct weighing *w;
    struct information x;
    struct sure sure;
    look_at_decision(&l, HOWARD, &w, &sure, &x);
    ck_assert_uint_eq(x.best, 2);
    check("worth", x.worth, 2, EXACT);
    check("clairvoyance", x.list.at[0].worth, 22, EXACT);
    struct sampled regret = sure.of[w->order[0]].regret;
    struct sampling in_order = sure.sample;
    double **values = NEW_ARRAY(arena, 2, double *);
    for (size_t k = 1; k < 3; k++)
        values[k - 1] = sure.sample.values[sure.root[k]];
    in_order.values = values;
    struct sampled everything = information_perfect(arena, &x, &in_order);
    check("sample", everything.value, regret.value, EXACT);
    check("its error", everything.error, regret.error, 1e-9);
    ck_assert(fabs(everything.value - 22) <= 4 * everything.error && everything.error < 0.3);
}
END_TEST

/* The hand calculation of docs/methods.md, digits by a program of its own. */
START_TEST(the_wall_and_the_masts)
{
    static const char *const text = SETTINGS
        "rates: {slip: {name: S, per: a, is: {median: 0.3 per a, error-factor: 4}}}\n"
        "values: {crane: {name: C, is: {values: {here: {is: 2 kEUR, p: 70 %}, away: {is: 9 kEUR, "
        "p: rest}}}}, paint: {name: P, is: {shape: uniform, from: 90 EUR, to: 110 EUR}}}\n"
        "hazards: {H: {name: H, frequency: slip, " LOST(
            "crane + paint") "}}\n"
                             "options:\n"
                             "  WALL: {name: W, invest: {is: {shape: triangular, from: 4 kEUR, "
                             "most-likely: 6 kEUR, to: "
                             "14 kEUR}}, change: {hazards: {H: {frequency: 0.3 * was}}}}\n"
                             "  MOVE: {name: M, invest: 16 kEUR, excludes: [WALL], change: "
                             "{hazards: {H: {frequency: 0 "
                             "* was}}}}\n"
                             "decisions: {D: {question: What?, options: [WALL, MOVE]}}\n";
    struct loaded l;
    struct weighing *w;
    struct information x;
    struct sure sure;
    look_at_decision(&l, text, &w, &sure, &x);
    ck_assert_uint_eq(x.list.n, 4);
    ck_assert_uint_eq(x.n_turning, 3);
    check("now", x.worth, 1954.5810979031157, LINE);
    const struct information_input *slip = lines_input(&x, "slip.rate");
    check("slip", slip->worth, 2664.0984885300277, LINE);
    ck_assert_uint_eq(slip->changes.n, 2);
    check("low", slip->changes.at[0].at, 0.34390074600260684, LINE);
    check("below", slip->changes.at[0].probability, 0.5643638247774355, LINE);
    check("high", slip->changes.at[1].at, 0.8024350740060825, LINE);
    check("above", slip->changes.at[1].probability, 0.12153031909701084, LINE);
    check("crane", lines_input(&x, "crane.value")->worth, 2488.9584930069204, LINE);
    ck_assert(lines_input(&x, "paint.value")->worth == 0);
    check_bounds(&sure, &x);
}
END_TEST

START_TEST(names)
{
    struct loaded l;
    struct weighing *w;
    struct information x;
    struct information_value v;
    struct sampling_plan p = sampling_defaults();
    ohmen_error e = OHMEN_ERROR_INIT;
    struct sure sure;
    look_at_decision(&l, HOWARD, &w, &sure, &x);
    ck_assert_str_eq(information_name(arena, w, "X.value"), "D.worth-knowing[X.value]");
    ck_assert(information_is_named("D.worth-knowing") &&
              information_is_named("D.worth-knowing[X]"));
    ck_assert(!information_is_named("D.worth-knowings") && !information_is_named("worth-knowing"));
    ck_assert_int_eq(information_value_find(l.figures, "D.worth-knowing[X.value]", &p, &v, &e),
                     OHMEN_OK);
    check("by name", v.input->worth, 22, EXACT);
    ck_assert_int_eq(information_value_find(l.figures, "D.worth-knowing", &p, &v, &e), OHMEN_OK);
    ck_assert(!v.input && fabs(v.everything.value - 22) <= 4 * v.everything.error);
    ck_assert_int_eq(information_value_find(l.figures, "D.worth-knowing[Y.value]", &p, &v, &e),
                     OHMEN_UNKNOWN);
    ck_assert_str_eq(e.text, "the decision \"D\" has no figure \"worth-knowing[Y.value]\" (did you "
                             "mean \"D.worth-knowing[X.value]\"?)");
}
END_TEST

/* Option A states the rate anew. Samples take both as one quantity: where one is at its point of
 * some probability so is the other; so is it here. Both uniform: worth 1000 (r - s) - 300 with r =
 * .2 + .6 p and s = .1 + .1 p, that is 500 p - 200 for p uniform in 0 .. 1. */
START_TEST(stated_anew)
{
    static const char *const text =
        "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 % per a}\n"
        "rates: {r: {name: R, per: a, is: {shape: uniform, from: 0.2 per a, to: 0.8 per a}}}\n"
        "hazards: {H: {name: H, frequency: r, response: {never: {outcome: lost}}, outcomes: "
        "{lost: {name: Lost, damage: {loss: {category: c, is: 1000 EUR}}}}}}\n"
        "options: {A: {name: A, invest: 300 EUR, change: {rates: {r: {is: {shape: uniform, from: "
        "0.1 per a, to: 0.2 per a}}}}}}\n"
        "decisions: {D: {question: What?, options: [A]}}\n";
    struct loaded l;
    struct weighing *w;
    struct information x;
    struct sure sure;
    look_at_decision(&l, text, &w, &sure, &x);
    ck_assert_uint_eq(x.list.n, 1);
    ck_assert_str_eq(x.list.at[0].name, "r.rate");
    check("now", x.worth, 50, EXACT);
    check("worth", x.list.at[0].worth, 200 * 0.4 / 2, 1e-6);
    check("at", change_of(&x, 1, 0)->at, 0.2 + 0.6 * 0.4, 1e-6);
    check("probability", x.list.at[0].changes.at[0].probability, 0.4, 1e-6);
}
END_TEST

/* A share of more than 1 is left for another one at the high end. */
START_TEST(not_possible)
{
    static const char *const text = SETTINGS
        "hazards: {H: {name: H, frequency: 0.5 per a, response: {never: {split: {bad: {share: "
        "{shape: uniform, from: 0.1, to: 0.7}, outcome: lost}, good: {share: 0.5, outcome: none}, "
        "other: {share: rest, outcome: none}}}}, outcomes: {lost: {name: Lost, damage: {loss: "
        "{category: c, is: 1000 EUR}}}}}}\n"
        "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * was}}}}}\n"
        "decisions: {D: {question: What?, options: [A]}}\n";
    struct loaded l;
    struct weighing *w;
    struct information x;
    struct sure sure;
    look_at_decision(&l, text, &w, &sure, &x);
    ck_assert_uint_eq(x.list.n, 0);
    ck_assert_uint_eq(x.not_possible.n, 1);
    ck_assert_str_eq(x.not_possible.at[0], "H.share.never.bad");
}
END_TEST

/* --- nested sampling --- */

enum { REGISTERS = 6, DRAWS = 100 };

/* The mean of the best worth, in registers that state a drawn value as certain, beyond that of
 * today's best. z is drawn once in each of as many equal parts of -FAR .. FAR, and weighted with
 * its density. Of independent draws the standard error is what their spread tells; one in each part
 * is far nearer, and a quarter of it is allowed. */
static const double FAR = 5, QUARTER = 0.25;

/* What is gained at z, in the register anew. */
static double gain_anew(const struct restated *r, size_t input, const struct quantity *q,
                        const char *best, double z)
{
    struct arena *before = arena;
    struct loaded l;
    ohmen_error e = OHMEN_ERROR_INIT;
    double *at = NEW_ARRAY(arena, r->n, double);
    for (size_t i = 0; i < r->n; i++)
        at[i] = NAN;
    ck_assert_int_eq(
        quantity_tail(q, erfc(-z / sqrt(2)) / 2, erfc(z / sqrt(2)) / 2, &at[input], &e), OHMEN_OK);
    arena = arena_child(before);
    const struct weighing *anew = restated_weigh(&l, arena, restated_text(arena, r, at));
    const struct alternative *first = &anew->alternatives.at[anew->order[0]];
    double gain = restated_worth(&l, anew, first->name) - restated_worth(&l, anew, best);
    arena_free(arena);
    arena = before;
    return gain;
}

static void nest(const struct restated *r, size_t input, const struct quantity *q,
                 struct random *random, const struct information *x, const struct weighing *w)
{
    double sum = 0, squares = 0;
    const char *best = w->alternatives.at[x->best].name;
    for (size_t k = 0; k < DRAWS; k++) {
        double z = -FAR + 2 * FAR * ((double)k + random_uniform(random, 0, 1)) / DRAWS;
        double weight = 2 * FAR * exp(-z * z / 2) / sqrt(2 * acos(-1));
        double gain = weight * gain_anew(r, input, q, best, z);
        sum += gain;
        squares += gain * gain;
    }
    double mean = sum / DRAWS, error = sqrt(fmax(0, squares / DRAWS - mean * mean) / DRAWS);
    const struct information_input *in = lines_input(x, r->inputs[input].figure);
    ck_assert_msg(in && fabs(in->worth - mean) <= QUARTER * error + in->error,
                  "%s: %.9g +- %.2g, nested %.9g +- %.2g", r->inputs[input].figure,
                  in ? in->worth : NAN, in ? in->error : NAN, mean, error);
}

/* Two hazards, protection in time, one type for two relays, so that the mean by the breaker is
 * approximate, and options that act on each. */
static const char *const world = SETTINGS
    "rates: {f: {name: F, per: a, is: $0}, g: {name: G, per: a, is: $1}}\n"
    "values: {u: {name: U, is: $2}, k: {name: K, is: $3}}\n"
    "types: {T: {name: T, kind: relay, undetected: $4}}\n"
    "elements: {R: {type: T, test: {every: 4 a, last: 2025-06-01}}, R2: {type: T, test: {every: 2 "
    "a, last: 2025-02-01}}, Q: {kind: breaker, per-demand: $6}}\n"
    "schemes: {MAIN: {name: M, works: {all: [R, Q]}}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: f, response: {p: {cleared-by: MAIN, in: 0.1 s, outcome: none}, q: "
    "{cleared-by: R2, in: 0.4 s, outcome: slow}, never: {outcome: lost}}, outcomes: {lost: {name: "
    "Lost, damage: {loss: {category: c, is: 40 * u}}}, slow: {name: Slow, damage: {loss: "
    "{category: c, is: 4 * u}}}}}\n"
    "  K: {name: K, frequency: g, " LOST(
        "u * (1 + k * k)") "}\n"
                           "options:\n"
                           "  A: {name: A, invest: $5, change: {hazards: {H: {frequency: 0.3 * "
                           "was}}}}\n"
                           "  B: {name: B, invest: 4 kEUR, change: {types: {T: {undetected: 0.25 * "
                           "was}}}}\n"
                           "  C: {name: C, invest: 6 kEUR, change: {hazards: {K: {frequency: 0.2 * "
                           "was}}}}\n"
                           "decisions: {D: {question: What?, options: [A, B, C]}}\n";

static const char *lognormal(struct random *r, double median, const char *unit)
{
    return arena_printf(arena, "{median: %.4g%s, error-factor: %.3g}",
                        median * random_log_uniform(r, 0.5, 2), unit, random_uniform(r, 1.5, 3.5));
}

static void make(struct random *r, struct restated *out)
{
    enum { INPUTS = 7 };
    struct restated_input *in = NEW_ARRAY(arena, INPUTS, struct restated_input);
    double low = random_uniform(r, 0.1, 1);
    in[0] = (struct restated_input){"f.rate", lognormal(r, 0.4, " per a"), "per a"};
    in[1] = (struct restated_input){"g.rate", lognormal(r, 0.9, " per a"), "per a"};
    in[2] = (struct restated_input){"u.value", lognormal(r, 700, " EUR"), "EUR"};
    in[3] = (struct restated_input){
        "k.value", arena_printf(arena, "{shape: uniform, from: %.3g, to: %.3g}", low, low + 0.8),
        ""};
    in[4] = (struct restated_input){"T.undetected", lognormal(r, 0.08, " per a"), "per a"};
    in[5] = (struct restated_input){
        "A.invest",
        arena_printf(arena,
                     "{shape: triangular, from: %.4g EUR, most-likely: %.4g EUR, to: 9 kEUR}",
                     1000 * low, 2000 * low),
        "EUR"};
    in[6] = (struct restated_input){
        "Q.fails", arena_printf(arena, "{a: 2, b: %.3g}", random_uniform(r, 8, 20)), ""};
    *out = (struct restated){world, INPUTS, in};
}

static const struct quantity *quantity_of(const struct loaded *l, const char *figure)
{
    struct loaded same = *l;
    node_id node = figure_at(l->figures, loaded_find(&same, figure))->node;
    return l->figures->inputs.at[graph_at(l->figures->graph, node)->extra];
}

START_TEST(random_registers)
{
    struct random r = random_seed(20261202 + (uint64_t)_i);
    struct restated stated;
    struct loaded l;
    struct weighing *w;
    struct information x;
    make(&r, &stated);
    struct sure sure;
    look_at_decision(&l, restated_text(arena, &stated, NULL), &w, &sure, &x);
    ck_assert_uint_eq(x.list.n, stated.n);
    ck_assert_uint_eq(x.not_seen.n + x.not_possible.n, 0);
    ck_assert_uint_gt(x.n_turning, 3);
    check_bounds(&sure, &x);
    for (size_t i = 0; i < stated.n; i++)
        nest(&stated, i, quantity_of(&l, stated.inputs[i].figure), &r, &x, w);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("information");
    TCase *t = tcase_create("information");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, clairvoyance_on_an_event);
    tcase_add_test(t, thresholds_of_a_probability);
    tcase_add_test(t, oil_prospect);
    tcase_add_test(t, oil_prospect_as_a_state);
    tcase_add_test(t, normal_loss_integral);
    tcase_add_test(t, lognormal_partial_expectation);
    tcase_add_test(t, gamma_and_beta_and_pert);
    tcase_add_test(t, straight_densities);
    tcase_add_test(t, several_thresholds);
    tcase_add_test(t, nothing_to_gain);
    tcase_add_test(t, curves_in_the_quantity);
    tcase_add_test(t, kinks);
    tcase_add_test(t, choices_that_do_not_tell);
    tcase_add_test(t, what_is_looked_at);
    tcase_add_test(t, both_and_each);
    tcase_add_test(t, interrupted);
    tcase_add_test(t, howard_as_a_register);
    tcase_add_test(t, the_wall_and_the_masts);
    tcase_add_test(t, names);
    tcase_add_test(t, stated_anew);
    tcase_add_test(t, not_possible);
    tcase_add_loop_test(t, random_registers, 0, REGISTERS);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
