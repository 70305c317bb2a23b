/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whose damage a risk is: over random registers, what a perspective bears is the sum of its
 * categories, the chosen perspective bears the risk, the mean over the years is that over the
 * horizon, and a site or the register has the sum over its hazards. Without operating states what
 * is borne is also worked out from the ends and the items as they were written. */
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "figure/horizon.h"
#include "figure/supply.h"
#include "loaded.h"
#include "random.h"

enum { HAZARDS = 3, ITEMS = 5, CATEGORIES = 3, PERSPECTIVES = 3, YEARS = 6, SEEDS = 120 };

static const char *const categories[CATEGORIES] = {"plant", "load", "fine"};
static const char *const perspectives[PERSPECTIVES] = {"firm", "town", "nobody"};
/* Bit c: it bears category c. `load` is borne twice, `fine` once. */
static const unsigned bears[PERSPECTIVES] = {1 | 2 | 4, 1 | 2, 0};

/* --- a random register --- */

/* Money, per second of clearance time where it is timed. */
struct item {
    unsigned category;
    double amount;
    bool timed;
};
struct drawn {
    struct random r;
    struct arena *arena;
    struct text text;
    bool states;
    double clearance[HAZARDS][3]; /* of the rows main, backup, never */
    struct item items[HAZARDS][2][ITEMS];
    size_t n_items[HAZARDS][2];
};

static void add_head(struct drawn *d)
{
    text_add(&d->text, "register:\n  title: T\n  currency: EUR\n  prices: 2026\n  start: 2027\n"
                       "  horizon: 6 a\n  discount: 4 % per a\n  perspective: town\n"
                       "  perspectives: {firm: [plant, load, fine], town: [plant, load], "
                       "nobody: [other]}\n"
                       "sites: {TOP: {name: Top}, LOW: {name: Low, in: TOP}}\nelements:\n");
    for (int i = 0; i < 4; i++)
        text_printf(&d->text,
                    "  E%d: {undetected: %.4f per a, test: {every: %d a, "
                    "last: 202%d-05-17}}\n",
                    i, random_log_uniform(&d->r, 1e-3, 0.3), (int)random_range(&d->r, 1, 4),
                    (int)random_range(&d->r, 2, 6));
    text_add(&d->text, "schemes: {MAIN: {all: [E0, E1]}, BACK: {any: [E2, E3]}}\n");
    if (d->states)
        text_add(&d->text, "states: {OUT: {varies: {normal: rest, e0: 7 %, h1: 3 %}, when: "
                           "{e0: {elements: {E0: {per-demand: 0.9}}}, "
                           "h1: {hazards: {H1: {frequency: 3.7 per a}}}}}}\n");
    text_add(&d->text, "options: {FIT: {name: Fit, change: {elements: {E2: {undetected: "
                       "0.0007 per a}}, hazards: {H0: {response: {back: {in: 0.61 s}}}}}}}\n");
}

static void add_item(struct drawn *d, size_t h, size_t o, size_t i)
{
    struct item *x = &d->items[h][o][i];
    *x = (struct item){(unsigned)random_index(&d->r, CATEGORIES),
                       (double)random_range(&d->r, 100, 900000), random_index(&d->r, 3) == 0};
    text_printf(&d->text, "          i%zu: {category: %s, is: %.0f EUR%s}\n", i,
                categories[x->category], x->amount, x->timed ? " * (clearance-time / 1 s)" : "");
}

static void add_hazard(struct drawn *d, size_t h)
{
    double *t = d->clearance[h];
    t[0] = (double)random_range(&d->r, 40, 400) / 1000;
    t[1] = (double)random_range(&d->r, 700, 1900) / 1000;
    t[2] = (double)random_range(&d->r, 20, 60);
    text_printf(&d->text,
                "  H%zu:\n    name: H\n    site: %s\n    frequency: %.3f per a\n    response:\n"
                "      main: {cleared-by: MAIN, in: %.3f s, outcome: o0}\n"
                "      back: {cleared-by: BACK, in: %.3f s, outcome: o1}\n"
                "      never: {in: %.0f s, outcome: o1}\n    outcomes:\n",
                h, h == 1 ? "TOP" : "LOW", random_log_uniform(&d->r, 0.01, 9), t[0], t[1], t[2]);
    for (size_t o = 0; o < 2; o++) {
        d->n_items[h][o] = (size_t)random_range(&d->r, 1, ITEMS);
        text_printf(&d->text, "      o%zu:\n        name: O\n        damage:\n", o);
        for (size_t i = 0; i < d->n_items[h][o]; i++)
            add_item(d, h, o, i);
    }
}

static void draw(struct drawn *d, struct arena *a, uint64_t seed)
{
    *d = (struct drawn){.r = random_seed(seed), .arena = a, .states = seed % 2};
    text_init(&d->text, a);
    add_head(d);
    text_add(&d->text, "hazards:\n");
    for (size_t h = 0; h < HAZARDS; h++)
        add_hazard(d, h);
}

/* --- what must hold --- */

static void expect_near(double x, double expected, const char *what)
{
    ck_assert_msg(fabs(x - expected) <= 1e-12 * fabs(expected) + 1e-300,
                  "%s: %.17g, expected %.17g", what, x, expected);
}

/* The value of a figure with its object, behind it what stands after the dot. */
static double value(struct loaded *l, const char *id, const char *rest, const char *of,
                    const char *variant)
{
    return loaded_value(
        l, arena_printf(l->arena, "%s.%s%s%s%s", id, rest, *of ? "." : "", of, variant));
}

static bool has_category(const struct drawn *d, size_t h, unsigned c)
{
    for (size_t o = 0; o < 2; o++)
        for (size_t i = 0; i < d->n_items[h][o]; i++)
            if (d->items[h][o][i].category == c)
                return true;
    return false;
}

static void expect_categories(struct loaded *l, const struct drawn *d, size_t h,
                              const char *variant)
{
    const char *id = arena_printf(l->arena, "H%zu", h);
    for (unsigned p = 0; p < PERSPECTIVES; p++) {
        double sum = 0;
        for (unsigned c = 0; c < CATEGORIES; c++)
            if ((bears[p] & (1u << c)) && has_category(d, h, c))
                sum += value(l, id, "category", categories[c], variant);
        expect_near(value(l, id, "borne", perspectives[p], variant), sum, perspectives[p]);
    }
    expect_near(value(l, id, "borne", "town", variant), value(l, id, "risk", "", variant), "risk");
}

/* The items that a perspective bears, of an end that is cleared in `seconds`. */
static double borne_at(const struct drawn *d, size_t h, size_t o, double seconds, unsigned p)
{
    double sum = 0;
    for (size_t i = 0; i < d->n_items[h][o]; i++) {
        const struct item *x = &d->items[h][o][i];
        if (bears[p] & (1u << x->category))
            sum += x->amount * (x->timed ? seconds : 1);
    }
    return sum;
}

static void expect_items(struct loaded *l, const struct drawn *d, size_t h)
{
    static const char *const rows[] = {"main", "back", "never"};
    const char *id = arena_printf(l->arena, "H%zu", h);
    for (unsigned p = 0; p < PERSPECTIVES; p++) {
        double sum = 0;
        for (size_t row = 0; row < 3; row++)
            sum += value(l, id, "end", rows[row], "") *
                   borne_at(d, h, row > 0, d->clearance[h][row], p);
        expect_near(value(l, id, "borne", perspectives[p], ""),
                    value(l, id, "frequency", "", "") * sum, "from items");
    }
}

/* No rate has a trend: the years weigh alike. */
static void expect_years(struct loaded *l, size_t h, size_t n_options, const char *const *options)
{
    const struct variant *v = loaded_variant(l, n_options, options);
    const struct compiled *c = loaded_compile(l, v, arena_printf(l->arena, "H%zu", h)), *part;
    const struct hazard_exports *x = c->exports;
    ck_assert_int_eq(figures_consequences(l->figures, v, c->id, &part, NULL), OHMEN_OK);
    loaded_evaluate(l);
    ck_assert_ptr_nonnull(x->of_year);
    for (unsigned p = 0; p < PERSPECTIVES; p++) {
        const struct consequence *e = consequence_of(part, PROPERTY_BORNE, perspectives[p]);
        double sum = 0;
        for (uint32_t y = 0; y < YEARS; y++)
            sum += figure_value(l->figures, e->yearly[x->of_year[y]]);
        expect_near(sum / YEARS, figure_value(l->figures, e->mean), "mean over the years");
    }
}

static double sum_over(struct loaded *l, const char *rest, const char *of, bool low_only)
{
    double sum = 0;
    for (size_t h = 0; h < HAZARDS; h++)
        if (!low_only || h != 1)
            sum += value(l, arena_printf(l->arena, "H%zu", h), rest, of, "");
    return sum;
}

static void expect_sums(struct loaded *l)
{
    for (unsigned p = 0; p < PERSPECTIVES; p++) {
        const char *of = perspectives[p];
        expect_near(value(l, "register", "borne", of, ""), sum_over(l, "borne", of, false), of);
        expect_near(value(l, "TOP", "borne", of, ""), sum_over(l, "borne", of, false), of);
        expect_near(value(l, "LOW", "borne", of, ""), sum_over(l, "borne", of, true), of);
    }
    expect_near(value(l, "register", "risk", "", ""), sum_over(l, "risk", "", false), "risk");
    expect_near(value(l, "TOP", "risk", "", ""), sum_over(l, "risk", "", false), "risk");
    expect_near(value(l, "LOW", "risk", "", ""), sum_over(l, "risk", "", true), "risk");
}

static void expect_register(struct arena *a, uint64_t seed)
{
    static const char *const fit[] = {"FIT"};
    struct drawn d;
    struct loaded l;
    draw(&d, a, seed);
    loaded_text(&l, a, text_str(&d.text), NULL);
    for (size_t h = 0; h < HAZARDS; h++) {
        expect_categories(&l, &d, h, "");
        expect_categories(&l, &d, h, "@FIT");
        expect_years(&l, h, 0, NULL);
        expect_years(&l, h, 1, fit);
        if (!d.states)
            expect_items(&l, &d, h);
    }
    expect_sums(&l);
}

START_TEST(accounts_of_random_registers)
{
    for (uint64_t seed = 1; seed <= SEEDS; seed++) {
        struct arena *a = arena_new(NULL);
        expect_register(a, seed);
        arena_free(a);
    }
}
END_TEST

/* --- people by year --- */

/* Growth of 10 % has the mean (1.1^(y+1) - 1.1^y) / ln 1.1 over year y: computed by hand. Two
 * hazards, of which one is the same in all years. */
START_TEST(individual_risk_of_a_year)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_text(
        &l, a,
        "register: {title: T, currency: EUR, prices: 2026, start: 2026-12-01, horizon: 3 a, "
        "discount: 0 % per a}\n"
        "groups: {CREW: {name: Crew, persons: 3}}\n"
        "rates: {arcs: {is: 0.02 per a, growth: 10 % per a, per: a}}\n"
        "hazards:\n"
        "  H-A: {name: A, frequency: arcs, response: {never: {outcome: burn}}, outcomes: {burn: "
        "{name: A, harm: {CREW: {present: 10 %, death: 5 %}}}}}\n"
        "  H-B: {name: B, frequency: 0.3 per a, response: {never: {outcome: fall}}, outcomes: "
        "{fall: {name: B, harm: {CREW: {present: 1 %, death: 1 %}}}}}\n",
        NULL);
    expect_near(loaded_value(&l, "CREW.individual-risk.2026"), 1e-4 * 0.1 / log(1.1) + 3e-5,
                "first year");
    expect_near(loaded_value(&l, "CREW.individual-risk.2028"),
                1e-4 * (1.331 - 1.21) / log(1.1) + 3e-5, "third year");
    expect_near(loaded_value(&l, "CREW.individual-risk"), 1e-4 * 0.331 / (3 * log(1.1)) + 3e-5,
                "mean");
    expect_near(loaded_value(&l, "CREW.fatalities"), 3 * (1e-4 * 0.331 / (3 * log(1.1)) + 3e-5),
                "fatalities");
    expect_near(loaded_value(&l, "H-B.individual-risk.CREW.fall"), 3e-5, "of one outcome");
    arena_free(a);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("perspectives");
    TCase *t = tcase_create("accounts");
    tcase_set_timeout(t, 120);
    tcase_add_test(t, accounts_of_random_registers);
    tcase_add_test(t, individual_risk_of_a_year);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), ran = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || ran == 0 ? EXIT_FAILURE : EXIT_SUCCESS;
}
