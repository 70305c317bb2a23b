/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Interruptions of supply and harm to people: random registers against enumeration, their sums,
 * and by hand what is uncertain, what lies at the limit, and what is not there. */
#include <check.h>
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "consequences_world.h"
#include "loaded.h"
#include "registers.h"

static const double SECONDS = 31536000; /* in a year, as the register has it */

static void expect_near(struct loaded *l, const char *name, long double expected)
{
    double got = loaded_value(l, name);
    ck_assert_msg(fabsl(got - expected) <= 1e-12L * fabsl(expected), "%s: %.17g, expected %.17Lg",
                  name, got, expected);
}

/* --- random registers --- */

/* What was met, so that the test cannot pass by meeting nothing. */
static struct {
    size_t figures, at_limit, nobody, momentary;
} met;

struct asked {
    struct loaded *l;
    const char *of, *change; /* "H0.", "@FIT" */
};

static void expect(const struct asked *q, const char *property, const char *qualifier,
                   long double expected)
{
    expect_near(q->l, arena_printf(q->l->arena, "%s%s%s%s", q->of, property, qualifier, q->change),
                expected);
    met.figures++;
}

static void expect_supply(const struct asked *q, const struct done *d)
{
    expect(q, "interruptions", "", d->interruptions);
    expect(q, "momentary-interruptions", "", d->momentary);
    expect(q, "customer-time", "", d->customer_seconds / SECONDS);
    expect(q, "energy-not-supplied", "", d->kilowatt_seconds / SECONDS);
    met.momentary += d->momentary > 0;
}

/* A hazard has no figures for a group that none of its outcomes harms. */
static bool harms(const struct world *w, unsigned hazard, unsigned group, bool fitted)
{
    for (unsigned k = 0; k < OUTCOMES + (fitted ? 1U : 0U); k++)
        if (w->hazard[hazard].outcome[k].harm[group].is)
            return true;
    return false;
}

static void expect_none(const struct asked *q, const char *name)
{
    figure_id id;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *whole = arena_printf(q->l->arena, "%s%s%s", q->of, name, q->change);
    ck_assert_int_eq(weigh_find(q->l->figures, whole, &id, &e), OHMEN_UNKNOWN);
    met.nobody++;
}

static void expect_harm(const struct asked *q, const struct world *w, unsigned hazard,
                        const struct done *d, bool fitted)
{
    for (unsigned g = 0; g < GROUPS; g++) {
        const char *group = arena_printf(w->arena, ".G%u", g);
        if (!harms(w, hazard, g, fitted)) {
            expect_none(q, arena_printf(w->arena, "individual-risk%s", group));
            continue;
        }
        expect(q, "individual-risk", group, d->death[g]);
        expect(q, "injury-risk", group, d->injury[g]);
        expect(q, "fatalities", group, d->death[g] * w->persons[g]);
    }
}

static void add_done(struct done *sum, const struct done *d, long double share)
{
    sum->interruptions += share * d->interruptions;
    sum->momentary += share * d->momentary;
    sum->customer_seconds += share * d->customer_seconds;
    sum->kilowatt_seconds += share * d->kilowatt_seconds;
    for (unsigned g = 0; g < GROUPS; g++) {
        sum->death[g] += share * d->death[g];
        sum->injury[g] += share * d->injury[g];
    }
}

/* The mean over the operating states. */
static struct done mean_of(const struct world *w, unsigned hazard, bool fitted)
{
    struct world normal = *w, bad = *w;
    struct done mean = {0};
    if (fitted) {
        world_fit(&normal);
        world_fit(&bad);
    }
    world_turn_bad(&bad);
    struct done often = world_enumerate(&normal, hazard), seldom = world_enumerate(&bad, hazard);
    add_done(&mean, &often, 1 - (long double)w->bad);
    add_done(&mean, &seldom, w->bad);
    return mean;
}

static void check_hazard(struct loaded *l, const struct world *w, unsigned hazard, bool fitted)
{
    const char *id = arena_printf(w->arena, "H%u.", hazard);
    struct asked q = {l, id, fitted ? "@FIT" : ""};
    struct done d = mean_of(w, hazard, fitted);
    expect_supply(&q, &d);
    expect_harm(&q, w, hazard, &d, fitted && hazard == 0);
}

/* One operating state alone, as its name fixes it. */
static void check_bad(struct loaded *l, const struct world *w)
{
    struct world bad = *w;
    struct asked q = {l, "H0.", "@ST=bad"}, fitted = {l, "H0.", "@FIT+ST=bad"};
    world_turn_bad(&bad);
    struct done d = world_enumerate(&bad, 0);
    expect_supply(&q, &d);
    expect_harm(&q, &bad, 0, &d, false);
    world_fit(&bad);
    d = world_enumerate(&bad, 0);
    expect_supply(&fitted, &d);
    expect_harm(&fitted, &bad, 0, &d, true);
}

static void check_indices(const struct asked *q, const struct world *w, const struct done *all)
{
    long double served = w->served, time = all->customer_seconds / SECONDS;
    if (w->served == 0) {
        expect_none(q, "saifi");
        return;
    }
    expect(q, "saifi", "", all->interruptions / served);
    expect(q, "saidi", "", time / served);
    expect(q, "caidi", "", all->interruptions > 0 ? time / all->interruptions : 0);
    expect(q, "maifi", "", all->momentary / served);
    /* may be below 0 where the numbers make no sense: no more customers are served than said */
    long double asai = 1 - time / served;
    double got = loaded_value(q->l, "register.asai");
    ck_assert_msg(fabsl(got - asai) <= 1e-12L * (1 + time / served), "asai %.17g", got);
}

static void check_sums(struct loaded *l, const struct world *w)
{
    struct done all = {0};
    struct asked q = {l, "register.", ""};
    for (unsigned i = 0; i < HAZARDS; i++) {
        struct done d = mean_of(w, i, false);
        add_done(&all, &d, 1);
    }
    expect_supply(&q, &all);
    check_indices(&q, w, &all);
    for (unsigned g = 0; g < GROUPS; g++) {
        struct asked group = {l, arena_printf(w->arena, "G%u.", g), ""};
        expect(&group, "individual-risk", "", all.death[g]);
        expect(&group, "injury-risk", "", all.injury[g]);
        expect(&group, "fatalities", "", all.death[g] * w->persons[g]);
    }
}

static size_t at_limit(const struct world *w)
{
    size_t n = 0;
    for (unsigned h = 0; h < HAZARDS; h++)
        for (unsigned k = 0; k < OUTCOMES; k++)
            for (unsigned i = 0; i < w->hazard[h].outcome[k].n_cuts; i++)
                n += w->hazard[h].outcome[k].cut[i].seconds == w->limit;
    return n;
}

START_TEST(random_worlds)
{
    for (uint64_t seed = 1; seed <= 150; seed++) {
        struct arena *a = arena_new(NULL);
        struct world *w = world_random(a, seed);
        struct loaded l;
        loaded_text(&l, a, world_text(w), NULL);
        for (unsigned i = 0; i < HAZARDS; i++) {
            check_hazard(&l, w, i, false);
            check_hazard(&l, w, i, true);
        }
        check_bad(&l, w);
        check_sums(&l, w);
        met.at_limit += at_limit(w);
        arena_free(a);
    }
    ck_assert_uint_gt(met.figures, 8000);
    ck_assert_uint_gt(met.at_limit, 300);
    ck_assert_uint_gt(met.nobody, 1000);
    ck_assert_uint_gt(met.momentary, 800);
}
END_TEST

/* What a group that a hazard does not harm has is unknown, whether or not states reach it; what
 * belongs to single ends is said to be of one state. */
START_TEST(unknown_figures)
{
    static const struct {
        const char *name, *message;
    } cases[] = {
        {"H0.individual-risk.G2", "\"H0\" has no figure \"individual-risk.G2\" (did you mean "},
        {"H0.individual-risk.G2@ST=bad", "\"H0\" has no figure \"individual-risk.G2\" (did you"},
        {"H0.damage.o0.arc", "\"H0\" has no figure \"damage.o0.arc\": it is a mean over states"},
        {"H0.end.r0", "\"H0\" has no figure \"end.r0\": it is a mean over states"},
    };
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, world_text(world_random(a, 1)), NULL);
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        figure_id id;
        ohmen_error e = OHMEN_ERROR_INIT;
        ck_assert_int_eq(weigh_find(l.figures, cases[i].name, &id, &e), OHMEN_UNKNOWN);
        ck_assert_msg(text_starts(e.text, cases[i].message), "%s: %s", cases[i].name, e.text);
    }
    arena_free(a);
}
END_TEST

/* --- sums over registers of any content --- */

/* The sum over the hazards that have such a figure. */
static double sum_over(struct loaded *l, const char *rest, size_t *n)
{
    const struct objects *hazards = &l->model->of[KIND_HAZARD];
    double sum = 0;
    for (size_t i = 0; i < hazards->n; i++) {
        figure_id id = FIGURE_NONE;
        const char *name = arena_printf(l->arena, "%s.%s", hazards->at[i]->id, rest);
        if (weigh_find(l->figures, name, &id, NULL) != OHMEN_OK)
            continue;
        loaded_evaluate(l);
        sum += figure_value(l->figures, id);
        (*n)++;
    }
    return sum;
}

static size_t check_register(struct loaded *l)
{
    static const char *const supply[] = {"interruptions", "momentary-interruptions",
                                         "customer-time", "energy-not-supplied"};
    const struct objects *groups = &l->model->of[KIND_GROUP];
    size_t n = 0, moved = 0;
    for (size_t i = 0; i < sizeof supply / sizeof *supply; i++) {
        double sum = sum_over(l, supply[i], &n);
        expect_near(l, arena_printf(l->arena, "register.%s", supply[i]), sum);
        moved += sum > 0;
    }
    ck_assert_uint_eq(n, 4 * l->model->of[KIND_HAZARD].n);
    for (size_t i = 0; i < groups->n; i++) {
        const char *id = groups->at[i]->id;
        double sum = sum_over(l, arena_printf(l->arena, "individual-risk.%s", id), &n);
        expect_near(l, arena_printf(l->arena, "%s.individual-risk", id), sum);
        sum = sum_over(l, arena_printf(l->arena, "fatalities.%s", id), &n);
        expect_near(l, arena_printf(l->arena, "%s.fatalities", id), sum);
        moved += sum > 0;
    }
    return moved;
}

START_TEST(sums_of_random_registers)
{
    size_t moved = 0;
    for (uint64_t seed = 1; seed <= 24; seed++) {
        struct arena *a = arena_new(NULL);
        const struct node *root = random_register(a, seed, &register_small);
        struct model_sources none = {0}, all = {0};
        struct diags d;
        struct loaded l;
        diags_init(&d, a);
        ck_assert(documents_merge(a, &none, 1, &root, &all, &d));
        loaded_objects(&l, a, &all, NULL);
        l.figures->points_only = true; /* the same graph at the same point */
        moved += check_register(&l);
        arena_free(a);
    }
    ck_assert_uint_gt(moved, 20);
}
END_TEST

/* --- by hand --- */

#define REGISTER(more)                                                                             \
    "register: {title: By hand, currency: EUR, prices: 2026, horizon: 10 a, discount: 0 per "      \
    "a" more "}\n"
#define HAZARD(frequency, outcome)                                                                 \
    "hazards: {H: {name: H, frequency: " frequency ", response: {never: {outcome: dark}}, "        \
    "outcomes: {dark: {name: Dark, " outcome "}}}}\n"

static double value_of(const char *text, const char *name)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a, text, NULL);
    double x = loaded_value(&l, name);
    arena_free(a);
    return x;
}

/* An uncertain time is longer than the limit with a probability: of 2 to 10 min, evenly, 5/8 are
 * longer than 5 min. Of a jump the mean is computed to 4e-4 of its height (eval/mean.h). */
START_TEST(uncertain_times)
{
    static const char text[] = REGISTER("") HAZARD(
        "2 per a", "interruptions: {i: {customers: 100, load: 60 kW, for: {shape: uniform, from: "
                   "2 min, to: 10 min}}}");
    const double minutes = 525600, jump = 200 * 4e-4;
    ck_assert_double_eq_tol(value_of(text, "H.interruptions"), 200 * 5. / 8, jump);
    ck_assert_double_eq_tol(value_of(text, "H.momentary-interruptions"), 200 * 3. / 8, jump);
    /* the integral of t/8 over 5 to 10 min */
    ck_assert_double_eq_tol(value_of(text, "H.customer-time") * minutes, 200 * 75. / 16, 5 * jump);
    ck_assert_double_eq_tol(value_of(text, "H.energy-not-supplied") * minutes, 2 * 60 * 6,
                            1e-9 * 720);
}
END_TEST

/* The same unknown makes faults frequent and repairs slow: the mean of x^2, for x evenly between 1
 * and 3, is 13/3 and not 4. */
START_TEST(one_unknown_in_frequency_and_time)
{
    static const char text[] =
        REGISTER(", customers-served: 1000") "values: {x: {is: {shape: uniform, from: 1, to: "
                                             "3}}}\n" HAZARD("x * 1 per a",
                                                             "interruptions: {i: {customers: 100, "
                                                             "load: 3 MW, for: x * 1 h}}");
    ck_assert_double_eq_tol(value_of(text, "H.interruptions"), 200, 1e-7);
    ck_assert_double_eq_tol(value_of(text, "H.customer-time") * 8760, 1300. / 3, 1e-7);
    ck_assert_double_eq_tol(value_of(text, "H.energy-not-supplied") * 8760, 13000, 1e-5);
    ck_assert_double_eq_tol(value_of(text, "register.saifi"), .2, 1e-10);
    ck_assert_double_eq_tol(value_of(text, "register.saidi") * 8760, 1.3 / 3, 1e-10);
}
END_TEST

/* At the limit, however it is written, an interruption is momentary. */
START_TEST(at_the_limit)
{
    static const char *const limits[] = {"", ", sustained-over: 5 min", ", sustained-over: 300 s",
                                         ", sustained-over: 1 h / 12",
                                         ", sustained-over: 10 min * 0.5"};
    static const char *const times[] = {"5 min",         "300 s",     "300000 ms", "1 h / 12",
                                        "2 min + 3 min", "3 * 100 s", "2 h / 24"};
    for (size_t i = 0; i < sizeof limits / sizeof *limits; i++)
        for (size_t k = 0; k < sizeof times / sizeof *times; k++) {
            struct arena *a = arena_new(NULL);
            struct loaded l;
            const char *format =
                "%s" HAZARD("2 per a", "interruptions: {i: {customers: 7, for: %s}}");
            const char *settings = arena_printf(a, REGISTER("%s"), limits[i]);
            loaded_text(&l, a, arena_printf(a, format, settings, times[k]), NULL);
            expect_near(&l, "H.interruptions", 0);
            expect_near(&l, "H.momentary-interruptions", 14);
            expect_near(&l, "H.customer-time", 0);
            arena_free(a);
        }
}
END_TEST

/* Longer by a microsecond. */
START_TEST(beyond_the_limit)
{
    static const char text[] =
        REGISTER("") HAZARD("2 per a", "interruptions: {i: {customers: 7, for: 300.000001 s}}");
    ck_assert_double_eq(value_of(text, "H.interruptions"), 14);
    ck_assert_double_eq(value_of(text, "H.momentary-interruptions"), 0);
}
END_TEST

/* Nothing is interrupted and nobody harmed: figures are 0, and ratios too. */
START_TEST(nothing_happens)
{
    static const char text[] =
        REGISTER(", customers-served: 10") "groups: {G: {name: G, persons: "
                                           "3}}\n" HAZARD("2 per a", "note: None");
    static const char *const zero[] = {"register.saifi",    "register.saidi",  "register.caidi",
                                       "register.maifi",    "H.interruptions", "H.customer-time",
                                       "G.individual-risk", "G.injury-risk",   "G.fatalities"};
    for (size_t i = 0; i < sizeof zero / sizeof *zero; i++)
        ck_assert_double_eq(value_of(text, zero[i]), 0);
    ck_assert_double_eq(value_of(text, "register.asai"), 1);
}
END_TEST

/* Faults that grow by a tenth each year interrupt more: the mean over ten years, from the day of
 * evaluation at the start of the horizon, is that of the frequency. */
START_TEST(growing_faults)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(&l, a,
                REGISTER(", customers-served: 50") "hazards: {H: {name: H, frequency: 2 per a, "
                                                   "growth: 10 % per a, response: {never: "
                                                   "{outcome: dark}}, outcomes: {dark: {name: "
                                                   "Dark, interruptions: {i: {customers: 7, "
                                                   "load: 2 MW, for: 3 h}}}}}}\n",
                NULL);
    double often = loaded_value(&l, "H.frequency");
    ck_assert_double_gt(often, 2.5);
    expect_near(&l, "H.interruptions", 7 * often);
    expect_near(&l, "H.customer-time", 21 * often / 8760);
    expect_near(&l, "H.energy-not-supplied", 6000 * often / 8760);
    expect_near(&l, "register.saifi", 7 * often / 50);
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("consequences");
    TCase *t = tcase_create("consequences");
    tcase_set_timeout(t, 120);
    tcase_add_test(t, random_worlds);
    tcase_add_test(t, unknown_figures);
    tcase_add_test(t, sums_of_random_registers);
    tcase_add_test(t, uncertain_times);
    tcase_add_test(t, one_unknown_in_frequency_and_time);
    tcase_add_test(t, at_the_limit);
    tcase_add_test(t, beyond_the_limit);
    tcase_add_test(t, nothing_happens);
    tcase_add_test(t, growing_faults);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
