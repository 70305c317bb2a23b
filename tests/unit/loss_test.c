/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How bad it may get: closed cases, brute simulation, and the mean of the graph, through documents,
 * figures and samples. */
#include "decide/loss.h"

#include <check.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>

#include "figure/horizon.h"
#include "loaded.h"
#include "math/dist.h"
#include "random.h"

static struct arena *arena;
static const char *sample_folder;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

#define SETTINGS                                                                                   \
    "register: {title: T, currency: EUR, prices: 2026, horizon: 20 a, discount: 4 % per a}\n"

/* Of all hazards that can be computed. */
static struct loss_result of_register(struct loaded *l)
{
    const struct objects *all = &l->model->of[KIND_HAZARD];
    const struct compiled **hazards = NEW_ARRAY(arena, all->n, const struct compiled *);
    const struct variant *base = loaded_variant(l, 0, NULL);
    const struct loss_case *one;
    struct sampling_plan plan = sampling_defaults();
    struct loss_world *world;
    struct loss_result x;
    ohmen_error e = OHMEN_ERROR_INIT;
    size_t n = 0;
    for (size_t i = 0; i < all->n; i++)
        if (figures_compile(l->figures, base, all->at[i]->id, &hazards[n], NULL) == OHMEN_OK)
            n++;
    ck_assert_int_eq(loss_of_register(l->figures, n, hazards, &one, &e), OHMEN_OK);
    loaded_evaluate(l);
    ck_assert_msg(loss_world_new(l->figures, arena, 1, one, &plan, &world, &e) == OHMEN_OK, "%s",
                  e.text);
    loss_find_case(world, arena, one, &x);
    return x;
}

static struct loss_result of_text(const char *text)
{
    static struct loaded l;
    loaded_text(&l, arena, text, NULL);
    return of_register(&l);
}

/* The value lies between the ends, but for 4 standard errors of the sample and `more`. */
static void check_holds(const char *what, const struct loss_number *x, double value, double more)
{
    double slack = 4 * x->error + more + 1e-9 * fabs(value);
    ck_assert_msg(x->low <= x->high && value >= x->low - slack && value <= x->high + slack,
                  "%s: %.9g .. %.9g +- %.3g does not hold %.9g", what, x->low, x->high, x->error,
                  value);
}

/* ---- closed cases ---- */

/* Damage of 1000 a Poisson number of times, 1 on average: P(N <= 2) = 2.5 / e = .9197, and so on.
 * The worst 5 %: P(N >= 4) = .018988 of them, the rest at 3. E[N; N >= 4] = P(N >= 3) = .080301.
 */
START_TEST(constant_damage)
{
    struct loss_result x = of_text(
        SETTINGS "hazards: {H: {name: H, frequency: 0.05 per a, response: {never: {outcome: "
                 "lost}}, outcomes: {lost: {name: Lost, damage: {r: {category: c, is: 1000 "
                 "EUR}}}}}}\n");
    double e1 = exp(-1), above_2 = 1 - 2.5 * e1, above_3 = above_2 - e1 / 6;
    ck_assert(x.at[LOSS_NONE].low == x.at[LOSS_NONE].high);
    ck_assert(fabs(x.at[LOSS_NONE].low - e1) < 1e-15);
    ck_assert(x.at[LOSS_EXCEEDED_10].low == 2000 && x.at[LOSS_EXCEEDED_10].high == 2000);
    ck_assert(x.at[LOSS_EXCEEDED_5].low == 3000 && x.at[LOSS_EXCEEDED_1].high == 4000);
    double worst = (above_2 + 3 * (0.05 - above_3)) / 0.05 * 1000;
    ck_assert(fabs(x.at[LOSS_WORST_5].low - worst) < 1e-6);
    ck_assert(fabs(x.at[LOSS_WORST_5].high - worst) < 1e-6);
    ck_assert(fabs(x.mean.low - 1000) < 1e-9 && fabs(x.mean.high - 1000) < 1e-9);
    ck_assert(x.at[LOSS_WORST_5].error == 0 && !x.is_drawn && !x.is_below_zero);
}
END_TEST

/* A gamma rate with shape 2 makes the number negative binomial: with the mean m over the horizon
 * P(N = 0) = (1 + m / 2)^-2. */
START_TEST(gamma_rate)
{
    struct loss_result x = of_text(
        SETTINGS "hazards: {H: {name: H, frequency: {shape: gamma, mean: 0.05 per a, "
                 "shape-parameter: 2}, response: {never: {outcome: lost}}, outcomes: {lost: {name: "
                 "Lost, damage: {r: {category: c, is: 1000 EUR}}}}}}\n");
    double p[12], sum = 0, above = 0;
    for (int k = 0; k < 12; k++) {
        p[k] = k ? p[k - 1] * (double)(k + 1) / k / 3 : 4. / 9;
        sum += p[k];
    }
    for (int k = 4; k < 12; k++)
        above += p[k];
    check_holds("none", &x.at[LOSS_NONE], 4. / 9, 0);
    ck_assert_double_le(x.at[LOSS_NONE].error, 2e-3);
    ck_assert_double_le(fabs(sum - 1), 1e-3);
    for (size_t i = 0; i < x.curve.n; i++)
        if (x.curve.at[i].damage >= 3000 && x.curve.at[i].damage < 4000)
            ck_assert(fabs(x.curve.at[i].low - above) < 2e-3);
}
END_TEST

/* An occurrence is certain to be rare: the damage is that of one, whose distribution is known. */
START_TEST(affine_damage)
{
    struct loss_result x = of_text(
        SETTINGS
        "hazards: {H: {name: H, frequency: 0.0005 per a, response: {never: {outcome: lost}}, "
        "outcomes: {lost: {name: Lost, damage: {r: {category: c, is: 1000 EUR}, t: {category: c, "
        "varies: {shape: uniform, from: 2 kEUR, to: 6 kEUR}}, u: {category: c, varies: {shape: "
        "uniform, from: 1 kEUR, to: 5 kEUR}}}}}}}\n");
    /* P(S > s) = .01 (1 - F(s)) nearly: .001 where (12 - s)^2 / 32 = .1 */
    ck_assert(fabs(x.at[LOSS_NONE].low - exp(-0.01)) < 1e-12);
    ck_assert(x.at[LOSS_EXCEEDED_1].low == 0);
    check_holds("worst 1 %", &x.at[LOSS_WORST_1], 8000 * 0.01 / 0.01, 1);
    check_holds("mean", &x.mean, 80, 0);
    ck_assert(x.at[LOSS_WORST_1].high - x.at[LOSS_WORST_1].low < 20);
    ck_assert(!x.is_drawn);
}
END_TEST

/* The square of what varies cannot be said in a straight line: drawn. E[u^2] = 1/3 for u of 0..1.
 */
START_TEST(drawn_damage)
{
    struct loss_result x = of_text(
        SETTINGS "values: {U: {varies: {shape: uniform, from: 0, to: 1}}}\n"
                 "hazards: {H: {name: H, frequency: 0.1 per a, response: {never: {outcome: lost}}, "
                 "outcomes: {lost: {name: Lost, damage: {r: {category: c, is: U * U * 3000 "
                 "EUR}}}}}}\n");
    ck_assert(x.is_drawn);
    check_holds("mean", &x.mean, 2000, 1);
}
END_TEST

/* ---- brute simulation ---- */

#define TINY                                                                                       \
    SETTINGS                                                                                       \
    "values: {price: {is: 90 % within 2 EUR per kWh .. 6 EUR per kWh}, load: {varies: 90 % "       \
    "within "                                                                                      \
    "300 kWh .. 900 kWh}}\n"                                                                       \
    "hazards:\n"                                                                                   \
    "  A: {name: A, frequency: 90 % within 0.02 per a .. 0.2 per a, response: {never: {split: "    \
    "{small: {share: 70 %, outcome: small}, great: {share: rest, outcome: great}}}}, outcomes: "   \
    "{small: {name: S, damage: {r: {category: c, is: 90 % within 1 kEUR .. 3 kEUR}}}, great: "     \
    "{name: G, damage: {r: {category: c, varies: 90 % within 4 kEUR .. 30 kEUR}, l: {category: "   \
    "c, is: price * load}}}}}\n"                                                                   \
    "  B: {name: B, frequency: 0.08 per a, growth: 3 % per a, response: {never: {outcome: "        \
    "lost}}, outcomes: {lost: {name: L, damage: {r: {category: c, varies: {shape: gamma, mean: "   \
    "5 kEUR, shape-parameter: 2}}}}}}\n"                                                           \
    "options: {O: {name: O, in-service: 2031-01-01, invest: 1 kEUR, change: {hazards: {A: "        \
    "{frequency: 0.3 * was}}}}}\n"                                                                 \
    "decisions: {D: {question: What?, options: [O], focus: [A, B]}}\n"

static double normal(struct random *r)
{
    return dist_normal_deviate(random_uniform(r, 1e-12, 1 - 1e-12));
}

/* A lognormal by its 5 and 95 % points. */
static double between(struct random *r, double low, double high)
{
    return sqrt(low * high) * exp(log(high / low) / 2 / DIST_Z95 * normal(r));
}

static int poisson(struct random *r, double mean)
{
    double p = exp(-mean), u = random_uniform(r, 0, 1);
    int n = 0;
    while (u > p && n < 200) {
        u -= p;
        p *= mean / ++n;
    }
    return n;
}

/* One world: its rate, prices and damages, and one future in it. */
static double future(struct random *r, bool option)
{
    double rate = between(r, 0.02, 0.2), price = between(r, 2, 6), small = between(r, 1000, 3000);
    const double evaluated = 334 / 365.; /* growth counts from that day on */
    double expected = rate * (option ? 5 + 0.3 * 15 : 20), sum = 0, often = 0;
    for (int n = poisson(r, 0.7 * expected); n > 0; n--)
        sum += small;
    for (int n = poisson(r, 0.3 * expected); n > 0; n--)
        sum += between(r, 4000, 30000) + price * between(r, 300, 900);
    for (int y = 0; y < 20; y++)
        often += 0.08 * pow(1.03, y + 0.5 - evaluated);
    for (int n = poisson(r, often); n > 0; n--)
        sum += 2500 * -log(random_uniform(r, 0, 1) * random_uniform(r, 0, 1));
    return sum;
}

static int by_size(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

enum { FUTURES = 400000 };

/* Against the share of futures above it: the standard error of a share. */
static void check_exceeded(const struct loss_result *x, enum loss_kind kind, const double *sorted)
{
    double tail = loss_tail[kind], error = sqrt(tail * (1 - tail) / FUTURES);
    size_t from = (size_t)((1 - tail - 4 * error) * FUTURES);
    size_t to = (size_t)((1 - tail + 4 * error) * FUTURES);
    const struct loss_number *n = &x->at[kind];
    ck_assert_msg(n->high + 4 * n->error >= sorted[from] && n->low - 4 * n->error <= sorted[to],
                  "exceeded with %g: %g .. %g +- %g, simulated %g .. %g", tail, n->low, n->high,
                  n->error, sorted[from], sorted[to]);
    ck_assert(n->high - n->low < 0.02 * n->high && n->error < 0.05 * n->high);
}

static void check_worst(const struct loss_result *x, enum loss_kind kind, const double *sorted)
{
    size_t n = (size_t)(loss_tail[kind] * FUTURES);
    double sum = 0, squares = 0;
    for (size_t i = FUTURES - n; i < FUTURES; i++) {
        sum += sorted[i];
        squares += sorted[i] * sorted[i];
    }
    double mean = sum / (double)n, error = sqrt((squares / (double)n - mean * mean) / (double)n);
    /* the bound of the tail is uncertain, too: as much again */
    check_holds("worst", &x->at[kind], mean, 4 * 2 * error);
    ck_assert(x->at[kind].high - x->at[kind].low < 0.02 * mean);
}

static void check_simulated(const struct loss_result *x, bool option)
{
    struct random r = random_seed(option ? 7 : 3);
    double *all = NEW_ARRAY(arena, FUTURES, double), none = 0, sum = 0;
    for (size_t i = 0; i < FUTURES; i++) {
        all[i] = future(&r, option);
        none += all[i] == 0;
        sum += all[i];
    }
    qsort(all, FUTURES, sizeof *all, by_size);
    none /= FUTURES;
    check_holds("none", &x->at[LOSS_NONE], none, 4 * sqrt(none * (1 - none) / FUTURES));
    check_exceeded(x, LOSS_EXCEEDED_10, all);
    check_exceeded(x, LOSS_EXCEEDED_5, all);
    check_exceeded(x, LOSS_EXCEEDED_1, all);
    check_worst(x, LOSS_WORST_5, all);
    check_worst(x, LOSS_WORST_1, all);
    check_holds("mean", &x->mean, sum / FUTURES, 0.01 * sum / FUTURES);
}

START_TEST(simulation)
{
    struct loaded l;
    struct weighing *w;
    const struct loss_case *cases;
    struct loss_world *world;
    struct sampling_plan plan = sampling_defaults();
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(&l, arena, TINY, NULL);
    ck_assert_msg(weigh_compile(l.figures, "D", &w, &e) == OHMEN_OK, "%s", e.text);
    ck_assert_int_eq(loss_of_weighing(l.figures, w, &cases, &e), OHMEN_OK);
    loaded_evaluate(&l);
    ck_assert_int_eq(loss_world_new(l.figures, arena, 2, cases, &plan, &world, &e), OHMEN_OK);
    for (size_t k = 0; k < 2; k++) {
        struct loss_result x;
        loss_find_case(world, arena, &cases[k], &x);
        check_simulated(&x, k == 1);
        check_holds("figure", &x.mean, figure_value(l.figures, cases[k].expected), 0);
        ck_assert(x.is_drawn);
    }
}
END_TEST

/* Two paths, of which the second has no source: the distribution is the mean of both. */
START_TEST(paths)
{
    struct loaded l;
    const struct loss_case *one;
    struct loss_world *world;
    struct loss_result x;
    struct loss_sources nothing = {0};
    struct sampling_plan plan = sampling_defaults();
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(&l, arena,
                SETTINGS "hazards: {H: {name: H, frequency: 0.05 per a, response: {never: "
                         "{outcome: lost}}, outcomes: {lost: {name: Lost, damage: {r: {category: "
                         "c, is: 1000 EUR}}}}}}\n",
                NULL);
    const struct compiled *h = loaded_compile(&l, loaded_variant(&l, 0, NULL), "H");
    ck_assert_int_eq(loss_of_register(l.figures, 1, &h, &one, &e), OHMEN_OK);
    loaded_evaluate(&l);
    struct loss_path both[] = {{0.25, one->paths[0].sources}, {0.75, &nothing}};
    struct loss_case of = {"both", 2, both, FIGURE_NONE};
    ck_assert_int_eq(loss_world_new(l.figures, arena, 1, &of, &plan, &world, &e), OHMEN_OK);
    loss_find_case(world, arena, &of, &x);
    ck_assert(fabs(x.at[LOSS_NONE].low - (0.75 + 0.25 * exp(-1))) < 1e-12);
    ck_assert(fabs(x.mean.low - 250) < 1e-9);
    ck_assert(x.at[LOSS_EXCEEDED_1].low == 3000); /* .25 P(N > 2) = .0201, .25 P(N > 3) = .0047 */
}
END_TEST

/* ---- the mean ---- */

/* What one hazard costs over the horizon: the sum of the risks of its years. */
static double over_years(const struct loaded *l, const struct compiled *hazard)
{
    const struct hazard_exports *x = hazard->exports;
    uint32_t years = horizon_length(l->model->settings);
    double sum = 0;
    for (uint32_t y = 0; y < years; y++)
        sum += figure_value(l->figures, x->yearly[x->of_year ? x->of_year[y] : 0]);
    return sum;
}

/* The mean of the sample register lies between the ends, and that of the graph is the sum of the
 * risks of the years. */
START_TEST(mean_of_the_graph)
{
    struct loaded l;
    loaded_folder(&l, arena, sample_folder, NULL);
    struct loss_result x = of_register(&l);
    double sum = 0, expected = figure_value(l.figures, x.of->expected);
    const struct objects *all = &l.model->of[KIND_HAZARD];
    for (size_t i = 0; i < all->n; i++)
        sum += over_years(&l, loaded_compile(&l, loaded_variant(&l, 0, NULL), all->at[i]->id));
    ck_assert(fabs(sum - expected) < 1e-9 * sum);
    check_holds("mean", &x.mean, expected, 0);
    ck_assert(x.mean.error < 0.05 * expected);
    for (int k = LOSS_EXCEEDED_10; k < LOSS_KINDS; k++)
        ck_assert(x.at[k].low <= x.at[k].high);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s FOLDER\n", argv[0]);
        return 2;
    }
    sample_folder = argv[1];
    Suite *s = suite_create("loss");
    TCase *t = tcase_create("loss");
    tcase_set_timeout(t, 240);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, constant_damage);
    tcase_add_test(t, gamma_rate);
    tcase_add_test(t, affine_damage);
    tcase_add_test(t, drawn_damage);
    tcase_add_test(t, simulation);
    tcase_add_test(t, paths);
    tcase_add_test(t, mean_of_the_graph);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
