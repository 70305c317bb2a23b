/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The pages of single objects: printed numbers against hand calculations of small registers. */
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "json_check.h"
#include "work_test.h"

/* Failures on demand only, so that all figures are polynomials. */
static const double BAT = 1.7e-3, RLY = 0.0213, Q1 = 2.385e-3, OC = 0.0371, Q2 = 3.1e-3;
static const double OFTEN = 0.017, SEEN = 0.85, SMALL = 12e3, LARGE = 140e3, BURNT = 2.3e6;

static const char settings[] = "register:\n"
                               "  title: Mill\n"
                               "  currency: EUR\n"
                               "  prices: 2026\n"
                               "  start: 2027\n"
                               "  horizon: 10 a\n"
                               "  discount: 3 % per a\n";

static const char hazard[] =
    "schemes:\n"
    "  MAIN: {all: [BAT, RLY, Q1]}\n"
    "  BACK: {all: [BAT, OC, Q2]}\n"
    "hazards:\n"
    "  FAULT:\n"
    "    name: Short circuit\n"
    "    frequency: 0.017 per a\n"
    "    response:\n"
    "      main: {cleared-by: MAIN, in: 0.3 s, outcome: small}\n"
    "      back: {cleared-by: BACK, in: 1.2 s, sees: 85 %, outcome: large}\n"
    "      never: {in: 1 h, outcome: burnt}\n"
    "    outcomes:\n"
    "      small: {name: Small, damage: {repair: {category: equipment, is: 12 kEUR}}}\n"
    "      large: {name: Large, damage: {repair: {category: equipment, is: 140 kEUR}}}\n"
    "      burnt: {name: Burnt, damage: {repair: {category: equipment, is: 2.3 MEUR}}}\n";

static const char on_demand[] = "elements:\n"
                                "  BAT: {name: DC supply, kind: dc-supply, per-demand: 1.7e-3}\n"
                                "  RLY: {kind: relay, per-demand: 0.0213}\n"
                                "  Q1: {kind: breaker, per-demand: 2.385e-3}\n"
                                "  OC: {kind: relay, per-demand: 0.0371}\n"
                                "  Q2: {kind: breaker, per-demand: 3.1e-3}\n";

/* --- reading a page --- */

struct shown {
    struct arena *a;
    const char *reg, *json;
};

static struct shown show(const char *const *texts, const char *id)
{
    struct shown s = {.a = test_arena()};
    struct text yaml;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    text_init(&yaml, s.a);
    for (size_t i = 0; texts[i]; i++)
        text_add(&yaml, texts[i]);
    s.reg = test_new(s.a);
    test_import_text(s.a, s.reg, text_str(&yaml));
    ohmen_register *open = test_open(s.reg, OHMEN_READ);
    must(ohmen_show(open, NULL, id, &r, &e), &e);
    s.json = test_json(s.a, r);
    ohmen_close(open);
    return s;
}

static const char *pick(const struct shown *s, const char *path)
{
    size_t n;
    const char *at = json_pick(s->json, path, &n);
    return at ? arena_strn(s->a, at, n) : NULL;
}

/* The path of the block with this key; NULL where there is none. */
static const char *block_of(const struct shown *s, const char *key)
{
    const char *quoted = arena_printf(s->a, "\"%s\"", key);
    for (int i = 0;; i++) {
        const char *found = pick(s, arena_printf(s->a, "blocks/%d/key", i));
        if (!found)
            return NULL;
        if (text_equal(found, quoted))
            return arena_printf(s->a, "blocks/%d", i);
    }
}

static double number_at(const struct shown *s, const char *path)
{
    double x;
    const char *text = pick(s, path);
    ck_assert_msg(text, "nothing at %s", path);
    ck_assert_msg(text_to_double(text, text + strlen(text), &x), "no number at %s", path);
    return x;
}

/* The row of a table whose cell `column` says `text`. */
static const char *row_of(const struct shown *s, const char *block, const char *column,
                          const char *text)
{
    const char *table = block_of(s, block), *quoted = arena_printf(s->a, "\"%s\"", text);
    ck_assert_msg(table, "no block %s", block);
    for (int i = 0;; i++) {
        const char *row = arena_printf(s->a, "%s/rows/%d", table, i);
        const char *cell = pick(s, arena_printf(s->a, "%s/%s", row, column));
        ck_assert_msg(cell, "no row %s in %s", text, block);
        if (text_equal(cell, quoted))
            return row;
    }
}

static double cell(const struct shown *s, const char *row, const char *column)
{
    return number_at(s, arena_printf(s->a, "%s/%s/value", row, column));
}

static void near(double x, double expected, double tolerance)
{
    ck_assert_msg(fabs(x - expected) <= tolerance * fabs(expected), "%.17g, not %.17g", x,
                  expected);
}

static const char *note(const struct shown *s, const char *key)
{
    const char *block = block_of(s, key);
    return block ? pick(s, arena_printf(s->a, "%s/text", block)) : "";
}

static void says(const struct shown *s, const char *key, const char *text)
{
    ck_assert_msg(strstr(note(s, key), text), "%s says %s, not %s", key, note(s, key), text);
}

/* --- a hazard by hand --- */

struct chances {
    double main, back, never;
};

/* Of the ends: the battery is in both schemes. */
static struct chances chances_of(double bat, double rly, double q1, double oc, double q2)
{
    struct chances c;
    double clears = (1 - rly) * (1 - q1), backs = (1 - oc) * (1 - q2) * SEEN;
    c.main = (1 - bat) * clears;
    c.back = (1 - bat) * (1 - clears) * backs;
    c.never = bat + (1 - bat) * (1 - clears) * (1 - backs);
    return c;
}

static double risk_of(struct chances c)
{
    return OFTEN * (c.main * SMALL + c.back * LARGE + c.never * BURNT);
}

static double risk_with_battery(double bat)
{
    return risk_of(chances_of(bat, RLY, Q1, OC, Q2));
}

START_TEST(ends_of_a_hazard)
{
    struct shown s = show((const char *const[]){settings, on_demand, hazard, NULL}, "FAULT");
    struct chances c = chances_of(BAT, RLY, Q1, OC, Q2);
    const char *row = row_of(&s, "ends", "end", "back");
    near(cell(&s, row, "probability"), c.back, 1e-12);
    near(cell(&s, row, "frequency"), OFTEN * c.back, 1e-12);
    near(cell(&s, row, "risk-share"), OFTEN * c.back * LARGE / risk_of(c), 1e-12);
    row = row_of(&s, "ends", "end", "never");
    near(cell(&s, row, "risk-share"), OFTEN * c.never * BURNT / risk_of(c), 1e-12);
    ck_assert_ptr_null(block_of(&s, "risk-years"));
    arena_free(s.a);
}
END_TEST

START_TEST(importance_in_a_hazard)
{
    struct shown s = show((const char *const[]){settings, on_demand, hazard, NULL}, "FAULT");
    double r = risk_with_battery(BAT), r0 = risk_with_battery(0), r1 = risk_with_battery(1);
    const char *row = row_of(&s, "hinges", "event", "BAT");
    near(cell(&s, row, "probability"), BAT, 1e-15);
    near(cell(&s, row, "fussell-vesely"), (r - r0) / r, 1e-11);
    near(cell(&s, row, "achievement"), r1 / r, 1e-11);
    near(cell(&s, row, "reduction"), r / r0, 1e-11);
    near(cell(&s, row, "birnbaum"), r1 - r0, 1e-11);
    arena_free(s.a);
}
END_TEST

START_TEST(cut_sets_of_a_hazard)
{
    struct shown s = show((const char *const[]){settings, on_demand, hazard, NULL}, "FAULT");
    near(cell(&s, row_of(&s, "cut-sets", "set", "BAT"), "probability"), BAT, 1e-15);
    near(cell(&s, row_of(&s, "cut-sets", "set", "RLY + OC"), "probability"), RLY * OC, 1e-15);
    near(cell(&s, row_of(&s, "cut-sets", "set", "Q1 + Q2"), "probability"), Q1 * Q2, 1e-15);
    says(&s, "cut-sets-note", "There are 5.");
    says(&s, "single-failures", "uncleared: BAT (DC supply).");
    says(&s, "no-breaker-failure",
         "breaker Q1 of row main (the fault then lasts until row back "
         "clears it in 1.2 s).");
    says(&s, "not-backed-up", "Nobody backs up: breaker Q2 of row back.");
    arena_free(s.a);
}
END_TEST

/* A breaker that another row can do without is not said to be alone; one that stands in both is. */
START_TEST(breaker_failure_protection)
{
    static const char changed[] =
        "elements:\n"
        "  RLY: {kind: relay, per-demand: 0.0213}\n"
        "  Q1: {kind: breaker, per-demand: 2.385e-3}\n"
        "  Q2: {kind: breaker, per-demand: 3.1e-3}\n"
        "schemes:\n"
        "  MAIN: {all: [RLY, Q1]}\n"
        "  FAILED: {all: [RLY, Q2]}\n"
        "hazards:\n"
        "  FAULT:\n"
        "    name: Short circuit\n"
        "    frequency: 0.017 per a\n"
        "    disables: {RLY: 30 %}\n"
        "    response:\n"
        "      main: {cleared-by: MAIN, in: 0.3 s, outcome: none}\n"
        "      failed: {cleared-by: FAILED, breaker-failure-of: main, in: 0.5 s, outcome: none}\n"
        "      never: {in: 1 h, outcome: burnt}\n"
        "    outcomes:\n"
        "      burnt: {name: Burnt, damage: {repair: {category: equipment, is: 2.3 MEUR}}}\n";
    struct shown s = show((const char *const[]){settings, changed, NULL}, "FAULT");
    ck_assert_ptr_null(block_of(&s, "no-breaker-failure"));
    says(&s, "not-backed-up", "Nobody backs up: breaker Q2 of row failed.");
    says(&s, "disabled", "The fault itself may put out of action: RLY (30 %).");
    says(&s, "single-failures", "RLY put out of action; RLY.");
    arena_free(s.a);
}
END_TEST

/* --- an element in time --- */

static const double RATE = 0.0437, FINDS = 0.85, LEFT = 2.3e-3, DETECTED = 0.11;

static const char in_time[] =
    "types:\n"
    "  OCR: {unwanted: {by-itself: 0.003 per a, per-event: {inrush: 2e-4}}, per-demand: 0.01}\n"
    "elements:\n"
    "  BAT:\n"
    "    undetected: 0.0437 per a\n"
    "    detected: 0.11 per a\n"
    "    repair: 30 h\n"
    "    test: {every: 4 a, last: 2017-05-03, next: 2029-05-03, takes: 3 h, finds: 85 %,\n"
    "           leaves-failed: 2.3e-3}\n"
    "  RLY: {kind: relay, type: OCR, test: {every: 5 a}, undetected: 0.02 per a}\n"
    "  Q1: {kind: breaker, per-demand: 2.385e-3}\n"
    "  OC: {kind: relay, per-demand: 0.0371}\n"
    "  Q2: {kind: breaker, per-demand: 3.1e-3}\n";

/* The integral of 1 - exp(-rate t) from t0 to t1. */
static double lost(double rate, double t0, double t1)
{
    return t1 - t0 + (exp(-rate * t1) - exp(-rate * t0)) / rate;
}

static double contribution(const struct shown *s, const char *part)
{
    return cell(s, row_of(s, "contributions", "part", part), "probability");
}

/* The horizon begins 2027-01-01; the last test was 2017-05-03, the next ones are 2029-05-03 and
 * 2033-05-03 (day 123 of the year, counted from 0: 122). Nothing tells when it was sound before
 * the last test, so that what no test finds counts from the start of the horizon. */
START_TEST(contributions_of_an_element)
{
    struct shown s = show((const char *const[]){settings, in_time, hazard, NULL}, "BAT");
    double year = 122.0 / 365, tested = RATE * FINDS;
    double found = lost(tested, 10 - year, 12) + lost(tested, 0, 4) + lost(tested, 0, 4 - year);
    near(contribution(&s, "Failed undetected, until a test or a demand shows it"), found / 10,
         1e-10);
    near(contribution(&s, "Failed undetected, and no routine test finds it"),
         lost(RATE * (1 - FINDS), 0, 10) / 10, 1e-10);
    near(contribution(&s, "In repair after a failure that supervision showed"),
         DETECTED * 30 / 8760, 1e-12);
    near(contribution(&s, "Out of service for a routine test"), 3.0 / 8760 / 4, 1e-12);
    near(contribution(&s, "Left failed by a routine test"), LEFT, 1e-10);
    arena_free(s.a);
}
END_TEST

/* Every jump is two points of one x: before the test and behind it. */
START_TEST(course_of_an_element)
{
    struct shown s = show((const char *const[]){settings, in_time, hazard, NULL}, "BAT");
    const char *points = arena_printf(s.a, "%s/lines/0/points", block_of(&s, "course"));
    double test = 2029 + 122.0 / 365, x = 0, y = 0;
    double standing = DETECTED * 30 / 8760 + 3.0 / 8760 / 4 - DETECTED * 30 / 8760 * 3.0 / 8760 / 4;
    int jumps = 0;
    for (int i = 0; pick(&s, arena_printf(s.a, "%s/%d", points, i)); i++) {
        double before = x, height = y;
        x = number_at(&s, arena_printf(s.a, "%s/%d/0", points, i));
        y = number_at(&s, arena_printf(s.a, "%s/%d/1", points, i));
        if (x != before)
            continue;
        double untested = exp(-RATE * (1 - FINDS) * (x - 2027));
        if (jumps++ == 0) {
            near(x, test, 1e-14);
            near(height, 1 - (1 - standing) * (1 - LEFT) * exp(-RATE * FINDS * 12) * untested,
                 1e-7);
        }
        near(y, 1 - (1 - standing) * (1 - LEFT) * untested, 1e-10);
    }
    ck_assert_int_eq(jumps, 2);
    arena_free(s.a);
}
END_TEST

START_TEST(tests_of_an_element)
{
    struct shown s = show((const char *const[]){settings, in_time, hazard, NULL}, "BAT");
    says(&s, "tests",
         "Last tested 2017-05-03, every 4 a: due since 2021-05-03, overdue by 5.58 a on 2026-12-01;"
         " the next planned test is on 2029-05-03.");
    says(&s, "single-failures", "uncleared: FAULT.");
    arena_free(s.a);
    s = show((const char *const[]){settings, in_time, hazard, NULL}, "RLY");
    says(&s, "tests",
         "No date of a test is known: it is taken as tested on the first day of the "
         "horizon, together with all others whose dates are not known.");
    ck_assert_str_eq(
        pick(&s, arena_printf(s.a, "%s/stated", row_of(&s, "unwanted", "when", "at each inrush"))),
        "\"2e-4\"");
    ck_assert_ptr_null(block_of(&s, "single-failures"));
    arena_free(s.a);
}
END_TEST

START_TEST(hazards_of_an_element)
{
    struct shown s = show((const char *const[]){settings, on_demand, hazard, NULL}, "RLY");
    double r = risk_with_battery(BAT), r0 = risk_of(chances_of(BAT, 0, Q1, OC, Q2));
    const char *row = row_of(&s, "matters", "hazard", "FAULT");
    near(cell(&s, row, "fussell-vesely"), (r - r0) / r, 1e-11);
    near(cell(&s, row, "risk"), r - r0, 1e-11);
    ck_assert_str_eq(pick(&s, arena_printf(s.a, "%s/alone", row)), "false");
    arena_free(s.a);
}
END_TEST

/* --- common causes --- */

/* Of a group of two: beta times the geometric mean is common, at most the least of them, and the
 * rest each one's own; the figure of that can be explained where nothing else was asked for. */
START_TEST(common_causes_of_an_element)
{
    static const char cause[] = "common-cause:\n"
                                "  MAKE: {name: One make, beta: 7 %, of: [OC, RLY]}\n";
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_report *r = NULL;
    struct shown s = show((const char *const[]){settings, on_demand, cause, hazard, NULL}, "RLY");
    double shared = fmin(0.07 * sqrt(RLY * OC), fmin(RLY, OC)), alone = RLY - shared;
    const char *row = row_of(&s, "common-causes", "members", "OC, RLY");
    near(cell(&s, row, "probability"), shared, 1e-12);
    near(cell(&s, row, "share"), shared / (shared + alone), 1e-12);
    near(cell(&s, row_of(&s, "common-causes", "members", "RLY"), "probability"), alone, 1e-12);
    row = row_of(&s, "matters", "event", "OC, RLY together");
    ck_assert_str_eq(pick(&s, arena_printf(s.a, "%s/alone", row)), "true");
    ohmen_register *reg = test_open(s.reg, OHMEN_READ);
    must(ohmen_explain(reg, NULL, "RLY.fails.alone", 1, &r, &e), &e);
    ohmen_report_free(r);
    ohmen_close(reg);
    arena_free(s.a);
}
END_TEST

/* --- a scheme --- */

START_TEST(page_of_a_scheme)
{
    static const char outer[] = "  OUTER: {any: [MAIN, {at-least: 2, of: [OC, Q1, Q2]}]}\n";
    const char *with = strstr(hazard, "hazards:");
    struct arena *a = test_arena();
    const char *schemes = arena_strn(a, hazard, (size_t)(with - hazard));
    struct shown s =
        show((const char *const[]){settings, on_demand, schemes, outer, with, NULL}, "OUTER");
    row_of(&s, "structure", "needs", "| | | RLY");
    row_of(&s, "structure", "needs", "| 2 of these 3");
    near(cell(&s, row_of(&s, "cut-sets", "set", "Q1 + OC"), "probability"), Q1 * OC, 1e-15);
    says(&s, "not-used-by", "No hazard calls on it.");
    arena_free(s.a);
    s = show((const char *const[]){settings, on_demand, hazard, NULL}, "MAIN");
    double whole = 1 - (1 - BAT) * (1 - RLY) * (1 - Q1), without = 1 - (1 - RLY) * (1 - Q1);
    const char *row = row_of(&s, "hinges", "event", "BAT");
    near(cell(&s, row, "fussell-vesely"), (whole - without) / whole, 1e-11);
    near(cell(&s, row, "birnbaum"), 1 - without, 1e-11);
    row_of(&s, "uses", "row", "main");
    arena_free(s.a);
    arena_free(a);
}
END_TEST

void work_show_tests(Suite *suite)
{
    TCase *t = tcase_create("show");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, ends_of_a_hazard);
    tcase_add_test(t, importance_in_a_hazard);
    tcase_add_test(t, cut_sets_of_a_hazard);
    tcase_add_test(t, breaker_failure_protection);
    tcase_add_test(t, contributions_of_an_element);
    tcase_add_test(t, course_of_an_element);
    tcase_add_test(t, tests_of_an_element);
    tcase_add_test(t, hazards_of_an_element);
    tcase_add_test(t, common_causes_of_an_element);
    tcase_add_test(t, page_of_a_scheme);
    suite_add_tcase(suite, t);
}
