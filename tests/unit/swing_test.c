/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Swings: worths worked out by hand, and registers that state the end of a swing as a certain
 * value, weighed anew. */
#include "decide/swing.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

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

/* What is equal by the structure differs by rounding only. */
#define EXACT 1e-9

static void find(struct loaded *l, const struct restated *r, struct weighing **w,
                 struct input_swings *s)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    *w = restated_weigh(l, arena, restated_text(arena, r, NULL));
    ck_assert_msg(swings_find(l->figures, *w, s, &e) == OHMEN_OK, "%s", e.text);
}

static const struct input_swing *swing_of(const struct input_swings *s, const char *input)
{
    for (size_t i = 0; i < s->list.n; i++)
        if (text_equal(s->list.at[i].name, input))
            return &s->list.at[i];
    ck_abort_msg("%s does not swing", input);
    return NULL;
}

#define SAVES                                                                                      \
    "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * was}}}}}\n"
#define DECIDE "decisions: {D: {question: What?, options: [A]}}\n"

/* --- by hand --- */

/* net = 0.8 x 2 r x 1000 A - C: the 5 % point of r is 0.05 + 0.05 x 0.4. */
START_TEST(one_option)
{
    static const struct restated_input inputs[] = {
        {"r.rate", "{shape: uniform, from: 0.05 per bay a, to: 0.45 per bay a}", "per bay a"},
        {"A.invest", "{shape: uniform, from: 800 EUR, to: 1000 EUR}", "EUR"},
        {"unused.value", "{shape: uniform, from: 1, to: 2}", ""},
        {"p.value", "{shape: uniform, from: 0.1, to: 0.3}", ""},
    };
    static const struct restated r = {
        SETTINGS "rates: {r: {name: R, per: bay a, is: $0}}\n"
                 "values: {unused: {name: U, is: $2}, p: {name: P, varies: $3}}\n"
                 "hazards: {H: {name: H, frequency: 2 bay * r, " LOST(
                     "1000 EUR * 5 * p") "}}\n"
                                         "options: {A: {name: A, invest: $1, change: {hazards: {H: "
                                         "{frequency: 0.2 * was}}}}}\n" DECIDE,
        4, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    double a = restated_annuity();
    find(&l, &r, &w, &s);
    ck_assert_uint_eq(s.list.n, 2); /* what varies and what reaches nothing do not swing */
    ck_assert(s.is_exact && s.list.at[0].is_exact && s.list.at[1].is_exact);
    ck_assert_str_eq(s.best->name, "A");
    ck_assert_str_eq(s.second->name, "do-nothing");
    const struct input_swing *x = &s.list.at[0], *y = &s.list.at[1];
    ck_assert_str_eq(x->name, "r.rate");
    restated_check("now", x->now, 0.25, 0, 1e-14);
    restated_check("low", x->ends[0].at, 0.07, 0, 1e-14);
    restated_check("high", x->ends[1].at, 0.43, 0, 1e-14);
    restated_check("worth low", x->ends[0].worth[1], 1600 * 0.07 * a - 900, 0, EXACT);
    restated_check("worth high", x->ends[1].worth[1], 1600 * 0.43 * a - 900, 0, EXACT);
    ck_assert(x->ends[0].worth[0] == 0 && x->ends[1].worth[0] == 0);
    restated_check("width", x->width, 1600 * 0.36 * a, 0, EXACT);
    ck_assert_uint_eq(x->ends[0].best, 0);
    ck_assert_uint_eq(x->ends[1].best, 1);
    ck_assert(x->turns && !y->turns);
    ck_assert_str_eq(y->name, "A.invest");
    restated_check("width", y->width, 180, 0, EXACT);
    ck_assert(y->ends[0].difference > y->ends[1].difference);
}
END_TEST

/* Damage 1000 v (4 - v), v uniform in 1 .. 3: the worth at an end is that at the end, without what
 * the spread of v adds to the mean: E[v (4 - v)] = 4 - 1/3. */
START_TEST(curved_in_itself_alone)
{
    static const struct restated_input inputs[] = {
        {"v.value", "{shape: uniform, from: 1, to: 3}", ""}};
    static const struct restated r = {SETTINGS "values: {v: {name: V, is: $0}}\n"
                                               "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                                   "1000 EUR * v * (4 - v)") "}}\n" SAVES DECIDE,
                                      1, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    double a = restated_annuity();
    find(&l, &r, &w, &s);
    restated_check("now", restated_worth(&l, w, "A"), 400 * (4 - 1 / 3.) * a - 900, 0, EXACT);
    const struct input_swing *x = swing_of(&s, "v.value");
    ck_assert(x->is_exact && s.is_exact);
    restated_check("low", x->ends[0].worth[1], 400 * 1.1 * 2.9 * a - 900, 0, EXACT);
    restated_check("high", x->ends[1].worth[1], 400 * 2.9 * 1.1 * a - 900, 0, EXACT);
}
END_TEST

/* Damage 1000 u (v + u): bends in u, and so is approximate for v: the mean of u (v + u) is taken to
 * be in the same proportion to the value at the means. u uniform in 1 .. 3, v in 2 .. 4, so that
 * E[u (v + u)] = 2 v + 13/3. For u nothing else is curved, and it is exact. */
START_TEST(curved_in_another)
{
    static const struct restated_input inputs[] = {
        {"u.value", "{shape: uniform, from: 1, to: 3}", ""},
        {"v.value", "{shape: uniform, from: 2, to: 4}", ""},
    };
    static const struct restated r = {SETTINGS
                                      "values: {u: {name: U, is: $0}, v: {name: V, is: $1}}\n"
                                      "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                          "1000 EUR * (u * (v + u))") "}}\n" SAVES DECIDE,
                                      2, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    double a = restated_annuity(), proportion = (6 + 13 / 3.) / 10;
    find(&l, &r, &w, &s);
    const struct input_swing *x = swing_of(&s, "v.value"), *y = swing_of(&s, "u.value");
    ck_assert(!x->is_exact && y->is_exact && !s.is_exact);
    restated_check("approximate", x->ends[0].worth[1], 400 * 2 * (2.1 + 2) * proportion * a - 900,
                   0, EXACT);
    restated_check("exact", y->ends[0].worth[1], 400 * 1.1 * (3 + 1.1) * a - 900, 0, EXACT);
}
END_TEST

/* Damage 1000 u v^2 (v + u): bends in u and in v, and so for v what u adds, E[v^2] / 3 = 28/9, is
 * taken to be the same at all v. The mean over v is taken of 2 v^2 (v + 2), to which the variance
 * of v adds 22/3: within 2 % of that. */
START_TEST(curved_in_both)
{
    static const struct restated_input inputs[] = {
        {"u.value", "{shape: uniform, from: 1, to: 3}", ""},
        {"v.value", "{shape: uniform, from: 2, to: 4}", ""},
    };
    static const struct restated r = {SETTINGS
                                      "values: {u: {name: U, is: $0}, v: {name: V, is: $1}}\n"
                                      "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                          "1000 EUR * (u * v ^ 2 * (v + u))") "}}\n" SAVES DECIDE,
                                      2, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    double a = restated_annuity();
    find(&l, &r, &w, &s);
    const struct input_swing *x = swing_of(&s, "v.value");
    ck_assert(!x->is_exact);
    for (size_t k = 0; k < 2; k++) {
        double v = x->ends[k].at;
        double by_hand = 400 * (v * v * 2 * (v + 2) + 28 / 9.) * a - 900;
        double off = fabs(x->ends[k].worth[1] - by_hand);
        ck_assert_msg(off <= 0.02 * 400 * 22 / 3 * a, "%.17g, by hand %.17g", x->ends[k].worth[1],
                      by_hand);
        ck_assert_double_gt(28 / 9. * 400 * a, 10 * off);
    }
}
END_TEST

/* --- order --- */

/* A and B do the same to hazards that are alike: B is second and as good. Both rates swing as
 * widely. */
START_TEST(ties_go_by_name)
{
    static const struct restated_input inputs[] = {
        {"z.rate", "{shape: uniform, from: 0.1 per a, to: 0.3 per a}", "per a"},
        {"b.rate", "{shape: uniform, from: 0.1 per a, to: 0.3 per a}", "per a"},
    };
    static const struct restated r = {
        SETTINGS "rates: {z: {name: Z, per: a, is: $0}, b: {name: B, per: a, is: $1}}\n"
                 "hazards: {H: {name: H, frequency: z + b, " LOST(
                     "1000 EUR") "}}\n"
                                 "options: {B: {name: B, invest: 900 EUR, excludes: [A], change: "
                                 "{hazards: {H: {frequency: 0.2 * was}}}}, A: {name: A, invest: "
                                 "900 EUR, change: {hazards: {H: {frequency: 0.2 * was}}}}}\n"
                                 "decisions: {D: {question: What?, options: [A, B]}}\n",
        2, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    find(&l, &r, &w, &s);
    ck_assert_str_eq(s.best->name, "A");
    ck_assert_str_eq(s.second->name, "B");
    ck_assert_uint_eq(s.list.n, 2);
    ck_assert_str_eq(s.list.at[0].name, "b.rate");
    ck_assert_str_eq(s.list.at[1].name, "z.rate");
    for (size_t i = 0; i < 2; i++) {
        ck_assert(s.list.at[i].width == 0 && !s.list.at[i].turns);
        for (size_t k = 0; k < 2; k++)
            ck_assert_str_eq(w->alternatives.at[s.list.at[i].ends[k].best].name, "A");
    }
}
END_TEST

/* Without an option that is possible, and where no unknown matters. */
START_TEST(nothing_swings)
{
    static const struct restated r = {SETTINGS "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                          "1000 EUR") "}}\n" SAVES DECIDE,
                                      0, NULL};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    find(&l, &r, &w, &s);
    ck_assert_uint_eq(s.list.n, 0);
    ck_assert(s.is_exact);
    w->alternatives.n = 1;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(swings_find(l.figures, w, &s, &e), OHMEN_OK);
    ck_assert(s.list.n == 0 && !s.best && !s.second);
}
END_TEST

/* What is left of two shares would be below 0 at the high end: 0.7 + 0.66 > 1. */
START_TEST(ends_that_are_not_possible)
{
    static const struct restated_input inputs[] = {
        {"H.share.never.bad", "{shape: uniform, from: 0.1, to: 0.7}", ""}};
    static const struct restated r = {
        SETTINGS "hazards: {H: {name: H, frequency: 0.5 per a, response: {never: {split: {bad: "
                 "{share: $0, outcome: lost}, good: {share: 0.5, outcome: none}, other: {share: "
                 "rest, outcome: none}}}}, outcomes: {lost: {name: Lost, damage: {loss: {category: "
                 "c, is: 1000 EUR}}}}}}\n" SAVES DECIDE,
        1, inputs};
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    find(&l, &r, &w, &s);
    ck_assert_uint_eq(s.list.n, 0);
    ck_assert_uint_eq(s.not_possible.n, 1);
    ck_assert_str_eq(figure_name(l.figures, arena, s.not_possible.at[0]), "H.share.never.bad");
}
END_TEST

/* --- weighed anew --- */

/* Each end of a swing, stated as a certain value: worths are equal, or where they are approximate
 * within a tenth of how far the alternative swings, or a hundredth of its worth. */
#define NEAR_SWING 0.1
#define NEAR_WORTH 0.01

static const double *worth_anew(const struct restated *r, const struct weighing *w,
                                const struct input_swing *s, enum swing_side side,
                                const char **best)
{
    struct loaded l;
    double *x = NEW_ARRAY(arena, r->n, double);
    double *worth = NEW_ARRAY(arena, w->alternatives.n, double);
    size_t place = restated_place(r, s->name);
    ck_assert_msg(place != SIZE_MAX, "%s is no input of the test", s->name);
    for (size_t i = 0; i < r->n; i++)
        x[i] = i == place ? s->ends[side].at : NAN;
    struct weighing *anew = restated_weigh(&l, arena, restated_text(arena, r, x));
    for (size_t i = 0; i < w->alternatives.n; i++)
        worth[i] = restated_worth(&l, anew, w->alternatives.at[i].name);
    *best = anew->alternatives.at[anew->order[0]].name;
    return worth;
}

static double greatest(const double *worth, size_t n)
{
    double size = 0;
    for (size_t i = 0; i < n; i++)
        size = fmax(size, fabs(worth[i]));
    return size;
}

static size_t weigh_anew(const struct restated *r, const struct weighing *w,
                         const struct input_swing *s)
{
    const char *best[2];
    size_t n = w->alternatives.n;
    const double *worth[] = {worth_anew(r, w, s, SWING_AT_LOW, &best[0]),
                             worth_anew(r, w, s, SWING_AT_HIGH, &best[1])};
    for (size_t k = 0; k < 2; k++) {
        for (size_t i = 0; i < n; i++) {
            double near =
                fmax(NEAR_SWING * fabs(worth[1][i] - worth[0][i]), NEAR_WORTH * fabs(worth[k][i]));
            double size = s->is_exact ? greatest(worth[k], n) / 100 : near / EXACT;
            restated_check(arena_printf(arena, "%s %s %s", s->name, w->alternatives.at[i].name,
                                        swing_sides[k]),
                           s->ends[k].worth[i], worth[k][i], size, EXACT);
        }
        if (s->is_exact)
            ck_assert_str_eq(w->alternatives.at[s->ends[k].best].name, best[k]);
    }
    return s->is_exact;
}

/* Values, rates, failures on demand and in time, investments; multiples by options, a mean that is
 * sampled, and operating states. */
static const struct restated_input many_inputs[] = {
    {"v.value", "{shape: uniform, from: 0.5, to: 3.5}", ""},
    {"u.value", "90 % within 400 EUR .. 2000 EUR", "EUR"},
    {"e.value", "{values: {low: {is: 1, p: 70 %}, high: {is: 3, p: rest}}}", ""},
    {"r.rate", "{median: 0.2 per bay a, error-factor: 2}", "per bay a"},
    {"R.undetected", "{median: 0.01 per a, error-factor: 3}", "per a"},
    {"S.fails", "{a: 1.5, b: 80}", ""},
    {"A.invest", "{shape: triangular, from: 500 EUR, most-likely: 800 EUR, to: 1500 EUR}", "EUR"},
    {"k.value", "80 % within 0.9 .. 1.1 as normal", ""},
    {"x.value", "{shape: uniform, from: 0, to: 1}", ""},
    {"y.value", "{shape: uniform, from: 0, to: 1}", ""},
    {"z.value", "{shape: uniform, from: 0, to: 1}", ""},
};
static const struct restated many = {
    SETTINGS
    "values: {v: {name: V, is: $0}, u: {name: U, is: $1}, e: {name: E, is: $2}, k: {name: K, is: "
    "$7}, x: {name: X, is: $8}, y: {name: Y, is: $9}, z: {name: Z, is: $a}}\n"
    "rates: {r: {name: R, per: bay a, is: $3}}\n"
    "elements:\n"
    "  R: {kind: relay, undetected: $4, test: {every: 3 a, last: 2025-06-01}}\n"
    "  S: {kind: relay, per-demand: $5}\n"
    "states: {Z: {name: Z, varies: {out: 0.1, normal: rest}, when: {out: {hazards: {G: {frequency: "
    "2 * was}}}}}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: 2 bay * r, response: {p: {cleared-by: R, in: 0.1 s, outcome: none}, "
    "never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 30 * "
    "u * v * v * k}}}}}\n"
    "  G: {name: G, frequency: 0.3 per a, response: {p: {cleared-by: S, in: 0.1 s, outcome: slow}, "
    "never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 4 * u "
    "* exp(e / 4)}}}, slow: {name: Slow, damage: {loss: {category: c, is: 50 EUR * k}}}}}\n"
    "  K: {name: K, frequency: 0.01 per a, " LOST(
        "2000 EUR * exp(x * y * z) * k") "}\n"
                                         "options:\n"
                                         "  A: {name: A, invest: $6, change: {hazards: {H: "
                                         "{frequency: 0.2 * was}, K: {frequency: 0.5 * was}}}}\n"
                                         "  B: {name: B, invest: 300 EUR, change: {elements: {R: "
                                         "{undetected: 0.3 * was}, S: {per-demand: 0.5 * was}}}}\n"
                                         "decisions: {D: {question: What?, options: [A, B]}}\n",
    sizeof many_inputs / sizeof *many_inputs, many_inputs};

START_TEST(registers_that_state_an_end)
{
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    size_t exact = 0;
    find(&l, &many, &w, &s);
    ck_assert_uint_eq(s.list.n, many.n);
    ck_assert_uint_eq(s.not_possible.n, 0);
    for (size_t i = 0; i < s.list.n; i++) {
        const struct input_swing *x = &s.list.at[i];
        bool sampled = strchr("xyz", x->name[0]) && text_equal(x->name + 1, ".value");
        ck_assert_msg(x->is_exact == !sampled, "%s", x->name);
        exact += weigh_anew(&many, w, x);
        if (i > 0)
            ck_assert(x->width <= s.list.at[i - 1].width);
    }
    ck_assert_uint_eq(exact, many.n - 3);
}
END_TEST

/* Main and backup are of one type, which is certain then; the diagram bends in it, but is linear in
 * the transformer and in the breaker, for which it is approximate. */
static const struct restated_input shared_inputs[] = {
    {"T.undetected", "{median: 0.02 per a, error-factor: 3}", "per a"},
    {"Q.fails", "{a: 2, b: 40}", ""},
    {"CT.fails", "{a: 2, b: 90}", ""},
    {"f.rate", "90 % within 0.1 per a .. 0.6 per a", "per a"},
};
static const struct restated shared = {
    SETTINGS
    "rates: {f: {name: F, per: a, is: $3}}\n"
    "types: {T: {name: T, kind: relay, undetected: $0}}\n"
    "elements:\n"
    "  R1: {type: T, test: {every: 4 a, last: 2025-06-01}}\n"
    "  R2: {type: T, test: {every: 3 a, last: 2024-02-01}}\n"
    "  Q: {kind: breaker, per-demand: $1}\n"
    "  CT: {kind: ct, per-demand: $2}\n"
    "schemes: {MAIN: {name: M, works: {all: [CT, R1, Q]}}, BACK: {name: B, works: {all: [CT, "
    "R2]}}}\n"
    "hazards:\n"
    "  H: {name: H, frequency: f, response: {p: {cleared-by: MAIN, in: 0.1 s, outcome: none}, q: "
    "{cleared-by: BACK, in: 0.3 s, outcome: slow}, never: {outcome: lost}}, outcomes: {lost: "
    "{name: Lost, damage: {loss: {category: c, is: 400 kEUR}}}, slow: {name: Slow, damage: {loss: "
    "{category: c, is: 20 kEUR}}}}}\n"
    "options:\n"
    "  A: {name: A, invest: 30 kEUR, change: {hazards: {H: {frequency: 0.2 * was}}}}\n"
    "  B: {name: B, invest: 2 kEUR, change: {types: {T: {undetected: 0.3 * was}}}}\n"
    "decisions: {D: {question: What?, options: [A, B]}}\n",
    4, shared_inputs};

START_TEST(diagrams_that_share)
{
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    find(&l, &shared, &w, &s);
    ck_assert_uint_eq(s.list.n, shared.n);
    for (size_t i = 0; i < s.list.n; i++) {
        const struct input_swing *x = &s.list.at[i];
        bool bends = text_equal(x->name, "Q.fails") || text_equal(x->name, "CT.fails");
        ck_assert_msg(x->is_exact == !bends, "%s", x->name);
        weigh_anew(&shared, w, x);
    }
}
END_TEST

START_TEST(values_by_name)
{
    struct loaded l;
    struct weighing *w;
    struct input_swings s;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct swing_value v;
    find(&l, &many, &w, &s);
    for (size_t i = 0; i < s.list.n; i++)
        for (size_t k = 0; k < 2; k++) {
            const struct input_swing *x = &s.list.at[i];
            const char *name =
                swing_name(l.figures, w, x, &w->alternatives.at[3], (enum swing_side)k);
            ck_assert(swing_is_named(name));
            ck_assert_msg(swing_find(l.figures, name, &v, &e) == OHMEN_OK, "%s", e.text);
            ck_assert_str_eq(v.name, name);
            ck_assert(v.worth == x->ends[k].worth[3] && v.side == (enum swing_side)k);
            ck_assert_str_eq(v.of->name, "A+B");
        }
    ck_assert_int_eq(swing_find(l.figures, "D.swing[r.rte].A.low", &v, &e), OHMEN_UNKNOWN);
    ck_assert_msg(strstr(e.text, "D.swing[r.rate].A.low"), "%s", e.text);
    ck_assert(!swing_is_named("D.net-present-value.A"));
    ck_assert(!swing_is_named("H.risk@[D.swing[x]]"));
}
END_TEST

/* --- random registers --- */

enum { VALUES = 5, RATES = 3 };

static const char *random_stated(struct random *r)
{
    double low = random_uniform(r, 0.2, 1), high = low * random_uniform(r, 1.5, 8);
    switch (random_index(r, 5)) {
    case 0: return arena_printf(arena, "{shape: uniform, from: %.3f, to: %.3f}", low, high);
    case 1: return arena_printf(arena, "90 %% within %.3f .. %.3f", low, high);
    case 2:
        return arena_printf(arena, "{values: {low: {is: %.3f, p: 0.4}, high: {is: %.3f, p: rest}}}",
                            low, high);
    case 3:
        return arena_printf(arena, "{mean: %.3f, shape-parameter: %.3f}", high,
                            random_uniform(r, 1, 9));
    default: return arena_printf(arena, "%.3f", low);
    }
}

static void random_factor(struct random *r, struct text *t)
{
    static const char *const forms[] = {"v%d",       "v%d",           "v%d ^ 2",
                                        "sqrt(v%d)", "min(v%d; 1.2)", "(3 + v%d)"};
    text_printf(t, " * ");
    const char *form = forms[random_index(r, sizeof forms / sizeof *forms)];
    const char *at = strstr(form, "%d");
    text_printf(t, "%.*sv%d%s", (int)(at - form - 1), form, (int)random_index(r, VALUES), at + 2);
}

static void random_hazard(struct random *r, struct text *t, int i)
{
    text_printf(t,
                "  H%d: {name: H, frequency: 1 bay * r%d, response: {never: {outcome: lost}}, "
                "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: ",
                i, i);
    for (size_t k = 1 + random_index(r, 2); k > 0; k--) {
        text_printf(t, "%.1f EUR", random_uniform(r, 100, 900));
        for (size_t n = 1 + random_index(r, 3); n > 0; n--)
            random_factor(r, t);
        text_add(t, k > 1 ? " + " : "");
    }
    text_add(t, "}}}}}\n");
}

static struct restated *random_restated(uint64_t seed)
{
    struct random r = random_seed(seed);
    struct restated_input *inputs = NEW_ARRAY(arena, VALUES + RATES, struct restated_input);
    struct restated *out = NEW(arena, struct restated);
    struct text t;
    text_init(&t, arena);
    text_add(&t, SETTINGS "values:\n");
    for (int i = 0; i < VALUES; i++) {
        text_printf(&t, "  v%d: {name: V, is: $%d}\n", i, i);
        inputs[i] =
            (struct restated_input){arena_printf(arena, "v%d.value", i), random_stated(&r), ""};
    }
    text_add(&t, "rates:\n");
    for (int i = 0; i < RATES; i++) {
        text_printf(&t, "  r%d: {name: R, per: bay a, is: $%d}\n", i, VALUES + i);
        inputs[VALUES + i] = (struct restated_input){
            arena_printf(arena, "r%d.rate", i),
            arena_printf(arena, "{median: %.3f per bay a, error-factor: %.2f}",
                         random_uniform(&r, 0.01, 0.5), random_uniform(&r, 1.5, 4)),
            "per bay a"};
    }
    text_add(&t, "hazards:\n");
    for (int i = 0; i < RATES; i++)
        random_hazard(&r, &t, i);
    text_add(&t, "options:\n");
    for (int i = 0; i < RATES; i++)
        text_printf(&t,
                    "  A%d: {name: A, invest: %.0f EUR, change: {hazards: {H%d: {frequency: %.2f "
                    "* was}, H%d: {frequency: %.2f * was}}}}\n",
                    i, random_uniform(&r, 100, 4000), i, random_uniform(&r, 0, 0.9),
                    (i + 1) % RATES, random_uniform(&r, 0, 0.9));
    text_add(&t, "decisions: {D: {question: What?, options: [A0, A1, A2]}}\n");
    *out = (struct restated){text_str(&t), VALUES + RATES, inputs};
    return out;
}

START_TEST(random_registers)
{
    size_t exact = 0, met = 0, turned = 0;
    for (uint64_t seed = 1; seed <= 40; seed++) {
        struct loaded l;
        struct weighing *w;
        struct input_swings s;
        const struct restated *r = random_restated(seed);
        find(&l, r, &w, &s);
        for (size_t i = 0; i < s.list.n; i++) {
            met++;
            turned += s.list.at[i].turns;
            exact += weigh_anew(r, w, &s.list.at[i]);
        }
        teardown();
        setup();
    }
    ck_assert_uint_gt(met, 200);
    ck_assert_uint_gt(exact, 150);
    ck_assert_uint_gt(turned, 50);
    ck_assert_uint_lt(exact, met);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("swing");
    TCase *t = tcase_create("swing");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, one_option);
    tcase_add_test(t, curved_in_itself_alone);
    tcase_add_test(t, curved_in_another);
    tcase_add_test(t, curved_in_both);
    tcase_add_test(t, ties_go_by_name);
    tcase_add_test(t, nothing_swings);
    tcase_add_test(t, ends_that_are_not_possible);
    tcase_add_test(t, registers_that_state_an_end);
    tcase_add_test(t, diagrams_that_share);
    tcase_add_test(t, values_by_name);
    tcase_add_test(t, random_registers);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
