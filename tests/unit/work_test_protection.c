/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The chapter on what protection hinges on, on a register in which each of its parts occurs.
 * Expected values are worked out here by the formulas of each hazard, written down by hand. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "json_check.h"
#include "work_test.h"

#define SETTINGS                                                                                   \
    "register: {title: Weir Lane, currency: EUR, prices: 2026, horizon: 20 a, "                    \
    "discount: 4 % per a}\n"

/* A hazard that burns the plant when none of these rows clears it. */
#define HAZARD(id, site, frequency, rows, damage)                                                  \
    "  " id ":\n    name: N\n    site: " site "\n    frequency: " frequency                        \
    "\n    response:\n" rows "      never: {outcome: burnt}\n"                                     \
    "    outcomes: {burnt: {name: Burnt, damage: {x: {category: c, is: " damage "}}}}\n"
#define ROW_OF(scheme) "      main: {cleared-by: " scheme ", in: 0.1 s, outcome: none}\n"

/* clang-format off */
static const char weir[] = SETTINGS
    "sites: {WL: {name: Weir Lane}, EA: {name: East Mill}}\n"
    "types: {VAC: {kind: breaker, per-demand: 4.1e-4}}\n"
    "elements:\n"
    "  BAT: {name: DC supply, kind: dc-supply, per-demand: 3.1e-4}\n"
    "  CT: {kind: ct, per-demand: 1.5e-4}\n"
    "  RA: {name: Main relay A, kind: relay, per-demand: 1.35 %}\n"
    "  RB: {kind: relay, per-demand: 1.35 %}\n"
    "  R1: {kind: relay, undetected: 0.012 per a,\n"
    "    test: {every: 4 a, last: 2017-05-16, finds: 95 %}}\n"
    "  R2: {kind: relay, undetected: 0.0107 per a, test: {every: 2 a, last: 2025-03-10,\n"
    "    next: 2027-02-15, leaves-failed: 2e-3, trips: 0.5 %}}\n"
    "  R3: {kind: relay, undetected: 0.0041 per a, since: 2011-06-01}\n"
    "  R4: {kind: relay, undetected: 0.0083 per a, test: {every: 3 a}}\n"
    "  R5: {kind: relay, undetected: 0.0062 per a, since: 2021-02-01, test: {every: 1.5 a}}\n"
    "  Q1: {kind: breaker, per-demand: 2.55e-3}\n"
    "  Q2: {name: Breaker of the cable, type: VAC}\n"
    "common-cause: {SETTINGS: {beta: 8 %, of: [RA, RB]}}\n"
    "schemes:\n"
    "  MAIN: {all: [BAT, CT, {any: [RA, RB]}, Q1]}\n"
    "  BACKUP: {all: [R1, Q2]}\n"
    "  CABLE: {all: [BAT, R2, Q2]}\n"
    "  FEEDER: {all: [BAT, R3, Q1]}\n"
    "  PUMP: {all: [R4, Q1]}\n"
    "  LIFT: {all: [R5, Q1]}\n"
    "  BF: absent\n"
    "  BF-2: {all: [BAT, Q2]}\n"
    "hazards:\n"
    "  H-BUS:\n"
    "    name: Bus\n"
    "    site: WL\n"
    "    frequency: 0.0173 per a\n"
    "    disables: {BAT: 2.385 %}\n"
    "    response:\n"
    "      main: {cleared-by: MAIN, in: 0.1 s, outcome: short}\n"
    "      bf: {cleared-by: BF, breaker-failure-of: main, in: 0.4 s, outcome: short}\n"
    "      backup: {cleared-by: BACKUP, in: 1.2 s, outcome: short}\n"
    "      never: {outcome: burnt}\n"
    "    outcomes:\n"
    "      short: {name: Short, damage: {x: {category: c, is: 17 kEUR}}}\n"
    "      burnt: {name: Burnt, damage: {x: {category: c, is: 2.3 MEUR}}}\n"
    HAZARD("H-CABLE", "WL", "0.31 per a", ROW_OF("CABLE"), "140 kEUR")
    HAZARD("H-FEEDER", "EA", "0.113 per a", ROW_OF("FEEDER")
        "      bf: {cleared-by: BF-2, breaker-failure-of: main, in: 0.4 s, outcome: none}\n",
        "61 kEUR")
    HAZARD("H-PUMP", "EA", "0.02 per a", ROW_OF("PUMP"), "35 kEUR")
    HAZARD("H-LIFT", "EA", "0.027 per a", ROW_OF("LIFT"), "11 kEUR");
/* clang-format on */

/* --- by hand --- */

/* Probabilities of everything that can happen; `taken`: the fault puts BAT out of action. */
enum { BAT, TAKEN, CT, SHOCK, RA, RB, R1, R2, R3, R4, R5, Q1, Q2, THINGS };

static const char *const names[THINGS] = {"BAT", "BAT in H-BUS", "CT", "SETTINGS", "RA", "RB", "R1",
                                          "R2",  "R3",           "R4", "R5",       "Q1", "Q2"};

/* The average of 1 - w exp(-a (t - reset) - b (t - born)) over years 0 to 20, with resets at
 * first, first + every, ... and before that at `from`; w is 1 before the first reset. */
static double mean_over_horizon(double a, double b, double left, double from, double first,
                                double every, double born, bool left_before)
{
    double s = a + b, sum = 0, begin = 0;
    double reset = from, w = left_before ? 1 - left : 1;
    while (begin < 20) {
        double end = fmin(20, first);
        sum += w * exp(a * reset + b * born) * (exp(-s * begin) - exp(-s * end)) / s;
        begin = end;
        reset = first;
        first += every;
        w = 1 - left;
    }
    return 1 - sum / 20;
}

/* Years from 2026-01-01, by hand: days of the year over 365. */
#define TODAY (334.0 / 365)                 /* 2026-12-01 */
#define R1_LAST (2017 - 2026 + 135.0 / 365) /* 2017-05-16 */
#define R2_LAST (2025 - 2026 + 68.0 / 365)  /* 2025-03-10 */
#define R2_NEXT (2027 - 2026 + 45.0 / 365)  /* 2027-02-15 */
#define R3_BORN (2011 - 2026 + 151.0 / 365) /* 2011-06-01 */
#define R5_BORN (2021 - 2026 + 31.0 / 365)  /* 2021-02-01 */

static void by_hand(double p[THINGS])
{
    p[BAT] = 3.1e-4;
    p[TAKEN] = 0.02385;
    p[CT] = 1.5e-4;
    p[SHOCK] = 0.08 * 0.0135;
    p[RA] = p[RB] = 0.92 * 0.0135;
    p[Q1] = 2.55e-3;
    p[Q2] = 4.1e-4;
    p[R1] = mean_over_horizon(0.95 * 0.012, 0.05 * 0.012, 0, R1_LAST, R1_LAST + 12, 4, 0, false);
    p[R2] = mean_over_horizon(0.0107, 0, 2e-3, R2_LAST, R2_NEXT, 2, 0, true);
    p[R3] = mean_over_horizon(0, 0.0041, 0, 0, 20, 1, R3_BORN, false);
    p[R4] = 1 - (1 - exp(-0.0083 * 3)) / (0.0083 * 3);
    p[R5] = mean_over_horizon(0.0062, 0, 0, R5_BORN, R5_BORN + 6, 1.5, 0, false);
}

enum { BUS, CABLE, FEEDER, LIFT, PUMP, HAZARDS };

/* The probability that nobody clears the fault. */
static double uncleared(int hazard, const double p[THINGS])
{
    double works[THINGS];
    for (int i = 0; i < THINGS; i++)
        works[i] = 1 - p[i];
    double relays = works[SHOCK] * (1 - p[RA] * p[RB]);
    switch (hazard) {
    case BUS:
        return (1 - works[BAT] * works[TAKEN] * works[CT] * relays * works[Q1]) *
               (1 - works[R1] * works[Q2]);
    case CABLE: return 1 - works[BAT] * works[R2] * works[Q2];
    case FEEDER: return 1 - works[BAT] * works[R3] * (1 - p[Q1] * p[Q2]);
    case LIFT: return 1 - works[R5] * works[Q1];
    default: return 1 - works[R4] * works[Q1];
    }
}

static const double frequency[HAZARDS] = {0.0173, 0.31, 0.113, 0.027, 0.02};

static double risk_of(int hazard, const double p[THINGS])
{
    static const double damage[HAZARDS] = {2.3e6, 140e3, 61e3, 11e3, 35e3};
    double never = uncleared(hazard, p), cleared = hazard == BUS ? 17e3 : 0;
    return frequency[hazard] * (never * damage[hazard] + (1 - never) * cleared);
}

static double risk(const double p[THINGS])
{
    double sum = 0;
    for (int h = 0; h < HAZARDS; h++)
        sum += risk_of(h, p);
    return sum;
}

/* The risk of all where thing i happens with probability x. */
static double risk_with(const double p[THINGS], int i, double x)
{
    double q[THINGS];
    memcpy(q, p, sizeof q);
    q[i] = x;
    return risk(q);
}

/* --- reading the report --- */

struct chapter {
    struct arena *a;
    const char *reg, *json;
};

static void ask(struct chapter *c, const ohmen_query *q)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *reg = test_open(c->reg, OHMEN_READ);
    must(ohmen_protection(reg, q, &r, &e), &e);
    c->json = test_json(c->a, r);
    ohmen_close(reg);
}

static struct chapter chapter_of(const char *more)
{
    struct chapter c = {.a = test_arena()};
    c.reg = test_new(c.a);
    test_import_text(c.a, c.reg, weir);
    if (more)
        test_import_text(c.a, c.reg, more);
    ask(&c, NULL);
    return c;
}

/* The block of this key, or -1. */
static int block(const struct chapter *c, const char *key)
{
    const char *quoted = arena_printf(c->a, "\"%s\"", key);
    size_t n;
    for (int i = 0; json_pick(c->json, arena_printf(c->a, "blocks/%d", i), &n); i++)
        if (json_is(c->json, arena_printf(c->a, "blocks/%d/key", i), quoted))
            return i;
    return -1;
}

/* A text of a row, a whole note, or "" where there is none. */
static const char *picked(const struct chapter *c, const char *path)
{
    size_t n;
    const char *s = json_pick(c->json, path, &n);
    return !s ? "" : *s == '"' ? arena_strn(c->a, s + 1, n - 2) : arena_strn(c->a, s, n);
}

static const char *text_in(const struct chapter *c, const char *table, int row, const char *key)
{
    return picked(c, arena_printf(c->a, "blocks/%d/rows/%d/%s", block(c, table), row, key));
}

static const char *note(const struct chapter *c, const char *key)
{
    return picked(c, arena_printf(c->a, "blocks/%d/text", block(c, key)));
}

static void expect(const struct chapter *c, const char *table, int row, const char *key, double x)
{
    const char *text = text_in(c, table, row, arena_printf(c->a, "%s/value", key));
    double y = strtod(text, NULL);
    ck_assert_msg(*text && fabs(x - y) <= 1e-10 * fabs(x), "%s of %s, row %d: %s, expected %.17g",
                  key, table, row, text, x);
}

static void expect_rows(const struct chapter *c, const char *table, int n)
{
    ck_assert_str_ne(picked(c, arena_printf(c->a, "blocks/%d/rows/%d", block(c, table), n - 1)),
                     "");
    ck_assert_str_eq(picked(c, arena_printf(c->a, "blocks/%d/rows/%d", block(c, table), n)), "");
}

/* --- the parts --- */

START_TEST(importance_of_each_event)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS], last = INFINITY;
    static const int hazards[THINGS] = {3, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 4, 3};
    bool seen[THINGS] = {false};
    by_hand(p);
    double whole = risk(p);
    expect_rows(&c, "importance", THINGS);
    for (int row = 0; row < THINGS; row++) {
        int i = 0;
        while (i < THINGS && !text_equal(names[i], text_in(&c, "importance", row, "element")))
            i++;
        ck_assert_int_lt(i, THINGS);
        ck_assert(!seen[i]);
        seen[i] = true;
        double share = whole - risk_with(p, i, 0);
        expect(&c, "importance", row, "fails", p[i]);
        expect(&c, "importance", row, "hazards", hazards[i]);
        expect(&c, "importance", row, "achievement-worth", risk_with(p, i, 1) / whole);
        expect(&c, "importance", row, "reduction-worth", whole / risk_with(p, i, 0));
        const char *shown = text_in(&c, "importance", row, "risk/value");
        ck_assert_double_eq_tol(strtod(shown, NULL), share, 1e-10 * whole);
        shown = text_in(&c, "importance", row, "fussell-vesely/value");
        ck_assert_double_eq_tol(strtod(shown, NULL), share / whole, 1e-10);
        ck_assert_double_le(share, last + 1e-9);
        last = share;
    }
    ck_assert_str_eq(text_in(&c, "importance", 3, "name"), "DC supply, put out of action");
    ck_assert_ptr_nonnull(strstr(c.json, "\"RA and RB together\""));
    ck_assert_ptr_nonnull(strstr(c.json, "\"Main relay A, by itself\""));
    ck_assert_ptr_nonnull(strstr(note(&c, "importance-note"), "All failures that carry risk."));
    arena_free(c.a);
}
END_TEST

/* Of many only the first fifteen. */
START_TEST(only_the_most_important)
{
    struct text t;
    struct arena *a = test_arena();
    text_init(&t, a);
    text_add(&t, "elements:\n");
    for (int i = 10; i < 27; i++)
        text_printf(&t, "  E%d: {kind: relay, per-demand: 1.%de-3}\n", i, i);
    text_add(&t, "schemes: {ALL: {all: [E10");
    for (int i = 11; i < 27; i++)
        text_printf(&t, ", E%d", i);
    text_add(&t, "]}}\nhazards:\n" HAZARD("H-BUS", "WL", "2 per a", ROW_OF("ALL"), "385 kEUR"));
    struct chapter c = chapter_of(text_str(&t));
    expect_rows(&c, "importance", 15);
    ck_assert_ptr_nonnull(
        strstr(note(&c, "importance-note"), "The first 15 of 24 failures that carry risk."));
    arena_free(c.a);
    arena_free(a);
}
END_TEST

START_TEST(single_points_of_failure)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS];
    by_hand(p);
    const struct {
        const char *element, *hazards;
        int thing;
        double frequency;
    } rows[] = {
        {"R3", "H-FEEDER", R3, 0.113},
        {"R2", "H-CABLE", R2, 0.31},
        {"R4", "H-PUMP", R4, 0.02},
        {"R5", "H-LIFT", R5, 0.027},
        {"BAT", "H-CABLE and H-FEEDER", BAT, 0.31 + 0.113},
        {"Q2", "H-CABLE", Q2, 0.31},
        {"Q1", "H-LIFT and H-PUMP", Q1, 0.027 + 0.02},
    };
    const int n = sizeof rows / sizeof *rows;
    expect_rows(&c, "single-points", n);
    for (int i = 0; i < n; i++) {
        ck_assert_str_eq(text_in(&c, "single-points", i, "element"), rows[i].element);
        ck_assert_str_eq(text_in(&c, "single-points", i, "hazards"), rows[i].hazards);
        expect(&c, "single-points", i, "fails", p[rows[i].thing]);
        expect(&c, "single-points", i, "frequency", rows[i].frequency * p[rows[i].thing]);
    }
    arena_free(c.a);
}
END_TEST

/* In one of two operating states a line has no second breaker. */
START_TEST(a_single_point_in_one_operating_state)
{
    static const char document[] =
        "schemes: {EITHER: {any: [Q1, Q2]}}\n"
        "hazards:\n" HAZARD("H-BUS", "WL", "2 per a", ROW_OF("EITHER"),
                            "385 kEUR") "states:\n"
                                        "  WORK: {varies: {normal: rest, on: 3 %}, when: {on: "
                                        "{schemes: {EITHER: Q1}}}}\n"
                                        "removed: [H-CABLE, H-FEEDER, H-LIFT, H-PUMP]\n";
    struct chapter c = chapter_of(document);
    expect_rows(&c, "single-points", 1);
    ck_assert_str_eq(text_in(&c, "single-points", 0, "element"), "Q1");
    ck_assert_str_eq(text_in(&c, "single-points", 0, "hazards"), "H-BUS");
    expect(&c, "single-points", 0, "frequency", 0.03 * 2 * 2.55e-3);
    ck_assert_str_eq(text_in(&c, "importance", 0, "element"), "Q1");
    ck_assert_str_eq(text_in(&c, "importance", 0, "reduction-worth/value"), ""); /* infinite */
    expect(&c, "importance", 0, "hazards", 1); /* not one for each state */
    arena_free(c.a);
}
END_TEST

START_TEST(breakers_that_nobody_backs_up)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS], q[THINGS];
    by_hand(p);
    expect_rows(&c, "no-breaker-failure", 2);
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 0, "breaker"), "Q2");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 0, "name"), "Breaker of the cable");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 0, "rows"), "H-BUS: backup; H-CABLE: main");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 1, "rows"),
                     "H-BUS: main; H-LIFT: main; H-PUMP: main");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 0, "remark"), "");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 1, "remark"),
                     "there is a row, but BF is absent");
    memcpy(q, p, sizeof q);
    q[Q1] = 0;
    double share = risk(p) - risk(q) - (risk_of(FEEDER, p) - risk_of(FEEDER, q));
    double shown = strtod(text_in(&c, "no-breaker-failure", 1, "risk/value"), NULL);
    ck_assert_double_eq_tol(shown, share, 1e-9);
    expect(&c, "no-breaker-failure", 1, "fails", p[Q1]);
    arena_free(c.a);
}
END_TEST

/* Once fitted it backs up; a scheme that needs an absent one never can. */
START_TEST(breaker_failure_protection_that_can_operate)
{
    struct chapter c = chapter_of("schemes: {BF: {all: [BAT, Q2]}}\n");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 1, "rows"), "H-LIFT: main; H-PUMP: main");
    ck_assert_int_eq((int)test_count(c.json, "there is a row"), 0);
    arena_free(c.a);
    c = chapter_of("schemes: {OFF: absent, BF: {at-least: 2, of: [BAT, OFF]}}\n");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 1, "rows"),
                     "H-BUS: main; H-LIFT: main; H-PUMP: main");
    ck_assert_str_eq(text_in(&c, "no-breaker-failure", 1, "remark"),
                     "there is a row, but BF can never operate");
    arena_free(c.a);
}
END_TEST

START_TEST(tests_overdue_and_on_time)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS], on_time = 0;
    by_hand(p);
    expect_rows(&c, "tests", 3);
    ck_assert_ptr_nonnull(strstr(note(&c, "tests-note"),
                                 "Of 3 routine tests with a date, 2 are overdue on 2026-12-01."));
    ck_assert_str_eq(text_in(&c, "tests", 0, "element"), "R1");
    ck_assert_str_eq(text_in(&c, "tests", 0, "last"), "2017-05-16");
    ck_assert_str_eq(text_in(&c, "tests", 0, "due"), "2021-05-16");
    ck_assert_str_eq(text_in(&c, "tests", 0, "remark"), "finds only 95 % of failures");
    expect(&c, "tests", 0, "every", 4);
    expect(&c, "tests", 0, "overdue", 5 + (334 - 135) / 365.0);
    expect(&c, "tests", 0, "today", -expm1(-0.0114 * (TODAY - R1_LAST) - 0.0006 * TODAY));
    expect(&c, "tests", 0, "mean", p[R1]);
    on_time = mean_over_horizon(0.0114, 0.0006, 0, 0, 4, 4, 0, false);
    expect(&c, "tests", 0, "on-time", on_time);

    ck_assert_str_eq(text_in(&c, "tests", 1, "element"), "R5");
    ck_assert_str_eq(text_in(&c, "tests", 1, "due"), "2022-08-03"); /* 182.5 days: 183 */
    ck_assert_str_eq(text_in(&c, "tests", 1, "remark"), "no test since it was sound on 2021-02-01");
    expect(&c, "tests", 1, "today", -expm1(-0.0062 * (TODAY - R5_BORN)));
    expect(&c, "tests", 1, "mean", p[R5]);
    expect(&c, "tests", 1, "on-time", 1 + expm1(-0.0062 * 1.5) / (0.0062 * 1.5));

    ck_assert_str_eq(text_in(&c, "tests", 2, "element"), "R2");
    ck_assert_str_eq(text_in(&c, "tests", 2, "planned"), "2027-02-15");
    ck_assert_str_eq(text_in(&c, "tests", 2, "remark"),
                     "may leave it failed (2e-3); may trip the plant (0.5 %)");
    ck_assert_str_eq(text_in(&c, "tests", 2, "overdue/value"), "");
    expect(&c, "tests", 2, "today", 1 - (1 - 2e-3) * exp(-0.0107 * (TODAY - R2_LAST)));
    expect(&c, "tests", 2, "mean", p[R2]);
    on_time = 1 + (1 - 2e-3) * expm1(-0.0107 * 2) / (0.0107 * 2);
    expect(&c, "tests", 2, "on-time", on_time);
    arena_free(c.a);
}
END_TEST

/* The day of evaluation decides what is overdue. */
START_TEST(tests_on_another_day)
{
    struct chapter c = chapter_of(NULL);
    ohmen_query q = ohmen_query_defaults();
    q.date = "2027-03-11";
    ask(&c, &q);
    ck_assert_ptr_nonnull(strstr(note(&c, "tests-note"), "3 are overdue on 2027-03-11."));
    ck_assert_str_eq(text_in(&c, "tests", 2, "element"), "R2");
    expect(&c, "tests", 2, "overdue", 1 / 365.0);
    ck_assert_ptr_nonnull(
        strstr(text_in(&c, "tests", 2, "remark"), "the planned test is taken as done"));
    double since = 1 + 69.0 / 365 - R2_NEXT;
    expect(&c, "tests", 2, "today", 1 - (1 - 2e-3) * exp(-0.0107 * since));
    q.date = "2021-05-16";
    ask(&c, &q);
    ck_assert_ptr_nonnull(strstr(note(&c, "tests-note"), "none is overdue on 2021-05-16."));
    for (int i = 0; i < 3; i++)
        if (text_equal(text_in(&c, "tests", i, "element"), "R2"))
            ck_assert_str_eq(text_in(&c, "tests", i, "today/value"), ""); /* nobody knows */
    arena_free(c.a);
}
END_TEST

/* A test behind the first day of the horizon counts from its own day. */
START_TEST(a_test_in_the_first_year)
{
    struct chapter c = chapter_of("elements: {R2: {kind: relay, undetected: 0.0107 per a,\n"
                                  "  test: {every: 2 a, last: 2026-04-14}}}\n");
    ck_assert_str_eq(text_in(&c, "tests", 2, "due"), "2028-04-14");
    expect(&c, "tests", 2, "today", -expm1(-0.0107 * (334 - 103) / 365.0));
    arena_free(c.a);
}
END_TEST

START_TEST(tests_that_nobody_dates_or_makes)
{
    struct chapter c = chapter_of(NULL);
    ck_assert_str_eq(note(&c, "tests-undated"),
                     "No date of a test is known of R4: it is taken as tested on the first day of "
                     "the horizon.");
    ck_assert_str_eq(note(&c, "never-shown"),
                     "Nothing shows a failure of R3: there is neither a routine test nor a demand "
                     "that would.");
    arena_free(c.a);
    c = chapter_of("elements: {R3: {kind: relay, undetected: 0.0041 per a, exercised: 2 per a},\n"
                   "  R2: {kind: relay, undetected: 0.0041 per a, test: {every: 2 a}},\n"
                   "  R1: {kind: relay, undetected: 0.0041 per a, test: {every: 2 a}}}\n");
    ck_assert_ptr_nonnull(
        strstr(note(&c, "tests-undated"), "R1, R2 and R4: they are taken as tested together"));
    ck_assert_int_eq(block(&c, "never-shown"), -1);
    arena_free(c.a);
}
END_TEST

START_TEST(what_the_fault_takes_away)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS];
    by_hand(p);
    expect_rows(&c, "taken-away", 1);
    ck_assert_str_eq(text_in(&c, "taken-away", 0, "hazard"), "H-BUS");
    ck_assert_str_eq(text_in(&c, "taken-away", 0, "element"), "BAT");
    ck_assert_str_eq(text_in(&c, "taken-away", 0, "alone"), "false");
    expect(&c, "taken-away", 0, "probability", 0.02385);
    double shown = strtod(text_in(&c, "taken-away", 0, "risk/value"), NULL);
    ck_assert_double_eq_tol(shown, risk(p) - risk_with(p, TAKEN, 0), 1e-9);
    arena_free(c.a);
    c = chapter_of("schemes: {BACKUP: {all: [BAT, R1, Q2]}}\n");
    ck_assert_str_eq(text_in(&c, "taken-away", 0, "alone"), "true");
    arena_free(c.a);
}
END_TEST

/* The scheme is named wherever the frequency finds it, whether it is computed or not. */
START_TEST(unwanted_operation)
{
    static const char document[] =
        "elements: {RX: {kind: relay, per-demand: 1 %, unwanted: {per-event: {inrush: 1 %, "
        "through-fault: 1e-3}}}}\n"
        "values: {trips: {is: unwanted(FEEDER; inrush 3 per a)}}\n"
        "hazards:\n"
        "  H-TRIP:\n"
        "    name: The bus trips without need\n"
        "    site: WL\n"
        "    frequency: unwanted(MAIN; through-fault 14 per a) + trips\n"
        "    response: {never: {outcome: dark}}\n"
        "    outcomes: {dark: {name: Dark, damage: {x: {category: c, is: 1 kEUR}}}}\n";
    struct chapter c = chapter_of(document);
    expect_rows(&c, "unwanted", 1);
    ck_assert_str_eq(text_in(&c, "unwanted", 0, "hazard"), "H-TRIP");
    ck_assert_str_eq(text_in(&c, "unwanted", 0, "scheme"), "MAIN and FEEDER");
    ohmen_query q = ohmen_query_defaults();
    q.site = "EA";
    ask(&c, &q);
    ck_assert_int_eq(block(&c, "unwanted"), -1);
    arena_free(c.a);
}
END_TEST

START_TEST(common_causes)
{
    struct chapter c = chapter_of(NULL);
    double p[THINGS];
    by_hand(p);
    expect_rows(&c, "common-causes", 1);
    ck_assert_str_eq(text_in(&c, "common-causes", 0, "group"), "SETTINGS");
    ck_assert_str_eq(text_in(&c, "common-causes", 0, "members"), "RA and RB");
    expect(&c, "common-causes", 0, "beta", 0.08);
    expect(&c, "common-causes", 0, "probability", 0.08 * 0.0135);
    double shown = strtod(text_in(&c, "common-causes", 0, "risk/value"), NULL);
    ck_assert_double_eq_tol(shown, risk(p) - risk_with(p, SHOCK, 0), 1e-9);
    arena_free(c.a);
}
END_TEST

/* --- the chapter --- */

START_TEST(a_site_leaves_its_own)
{
    struct chapter c = chapter_of(NULL);
    ohmen_query q = ohmen_query_defaults();
    double p[THINGS];
    by_hand(p);
    q.site = "EA";
    ask(&c, &q);
    ck_assert_str_eq(text_in(&c, "importance", 0, "element"), "R3");
    ck_assert_int_eq((int)test_count(c.json, "\"R2\""), 0);
    double whole = risk_of(FEEDER, p) + risk_of(LIFT, p) + risk_of(PUMP, p);
    double with = whole - risk_of(FEEDER, p) + 0.113 * 61e3;
    expect(&c, "importance", 0, "achievement-worth", with / whole);
    ck_assert_int_eq(block(&c, "taken-away"), -1);
    ck_assert_int_eq(block(&c, "common-causes"), -1);
    arena_free(c.a);
}
END_TEST

START_TEST(nothing_to_say)
{
    struct chapter c = {.a = test_arena()};
    c.reg = test_new(c.a);
    test_import_text(c.a, c.reg,
                     SETTINGS "hazards:\n" HAZARD("H", "S", "2 per a", "",
                                                  "385 kEUR") "sites: {S: {name: S}}\n");
    ask(&c, NULL);
    ck_assert_str_eq(note(&c, "protection-none"),
                     "No hazard here depends on whether protection works.");
    ck_assert_int_eq(block(&c, "importance"), -1);
    arena_free(c.a);
}
END_TEST

/* Every figure that the chapter names can be explained, and is the same there. */
START_TEST(its_figures_are_explained)
{
    struct chapter c = chapter_of(NULL);
    ohmen_register *reg = test_open(c.reg, OHMEN_READ);
    const char mark[] = "\"figure\": \"";
    size_t n = 0;
    for (const char *s = c.json; (s = strstr(s, mark)) != NULL; n++) {
        ohmen_report *r = NULL;
        ohmen_error e = OHMEN_ERROR_INIT;
        const char *begin = s;
        s += sizeof mark - 1;
        const char *name = arena_strn(c.a, s, (size_t)(strchr(s, '"') - s));
        while (strncmp(begin, "{\"value\": ", 10) != 0)
            begin--;
        double value = strtod(begin + 10, NULL);
        must(ohmen_explain(reg, NULL, name, 0, &r, &e), &e);
        struct chapter derived = {c.a, c.reg, test_json(c.a, r)};
        const char *shown = text_in(&derived, "derivation", 0, "exact");
        double again = strtod(shown, NULL);
        ck_assert_msg(*shown && fabs(again - value) <= 1e-12 * value, "%s: %s and %.17g", name,
                      shown, value);
    }
    ck_assert_uint_ge(n, 30);
    ohmen_close(reg);
    arena_free(c.a);
}
END_TEST

/* The report has the chapter, with the same tables. */
START_TEST(a_chapter_of_the_report)
{
    struct chapter c = chapter_of(NULL), whole = c;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *reg = test_open(c.reg, OHMEN_READ);
    must(ohmen_report_all(reg, NULL, &r, &e), &e);
    whole.json = test_json(c.a, r);
    static const char *const keys[] = {"importance", "single-points", "no-breaker-failure",
                                       "tests",      "taken-away",    "common-causes"};
    for (size_t i = 0; i < sizeof keys / sizeof *keys; i++) {
        const char *mine = picked(&c, arena_printf(c.a, "blocks/%d/rows", block(&c, keys[i])));
        const char *its =
            picked(&whole, arena_printf(c.a, "blocks/%d/rows", block(&whole, keys[i])));
        ck_assert_str_ne(mine, "");
        ck_assert_str_eq(mine, its);
    }
    ohmen_close(reg);
    arena_free(c.a);
}
END_TEST

void work_protection_tests(Suite *suite)
{
    TCase *t = tcase_create("protection");
    tcase_set_timeout(t, 120);
    tcase_add_test(t, importance_of_each_event);
    tcase_add_test(t, only_the_most_important);
    tcase_add_test(t, single_points_of_failure);
    tcase_add_test(t, a_single_point_in_one_operating_state);
    tcase_add_test(t, breakers_that_nobody_backs_up);
    tcase_add_test(t, breaker_failure_protection_that_can_operate);
    tcase_add_test(t, tests_overdue_and_on_time);
    tcase_add_test(t, tests_on_another_day);
    tcase_add_test(t, a_test_in_the_first_year);
    tcase_add_test(t, tests_that_nobody_dates_or_makes);
    tcase_add_test(t, what_the_fault_takes_away);
    tcase_add_test(t, unwanted_operation);
    tcase_add_test(t, common_causes);
    tcase_add_test(t, a_site_leaves_its_own);
    tcase_add_test(t, nothing_to_say);
    tcase_add_test(t, its_figures_are_explained);
    tcase_add_test(t, a_chapter_of_the_report);
    suite_add_tcase(suite, t);
}
