/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every figure that a report names can be explained, by the value that the report shows. */
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "json_check.h"
#include "work_test.h"

struct named {
    struct arena *a;
    ohmen_register *reg;
    struct strmap seen; /* what was explained already */
    size_t compared;    /* figures whose value was compared */
    size_t one_in;      /* of so many figures one is explained; 0: all */
};

static struct named named_new(const char *make(struct arena *a))
{
    struct named n = {.a = test_arena()};
    n.reg = test_open(make(n.a), OHMEN_READ);
    return n;
}

/* The text of a string that begins at s, up to its closing quote. */
static const char *string_at(struct arena *a, const char *s)
{
    size_t n = 0;
    while (s[n] != '"')
        n += s[n] == '\\' ? 2 : 1;
    return arena_strn(a, s, n);
}

static double read_number(const char *from, const char *to)
{
    double x;
    bool negative = *from == '-';
    ck_assert_msg(text_to_double(from + negative, to, &x), "no number: %.40s", from);
    return negative ? -x : x;
}

static const char *pick_string(struct arena *a, const char *json, const char *path)
{
    size_t n;
    const char *s = json_pick(json, path, &n);
    ck_assert_msg(s && *s == '"', "no text at %s", path);
    return string_at(a, s + 1);
}

/* The first row of a derivation: the figure itself, exactly, in base units. Where a cell
 * has another unit, or its row tells the unit, only the name is compared. */
static void expect_value(struct named *n, const char *json, const char *name, double value,
                         const char *unit)
{
    const char *row = "blocks/1/rows/0";
    const char *explained = pick_string(n->a, json, arena_printf(n->a, "%s/figure", row));
    ck_assert_str_eq(explained, name);
    const char *exact = pick_string(n->a, json, arena_printf(n->a, "%s/exact", row));
    double x = read_number(exact, exact + strlen(exact));
    if (!*unit || !text_equal(unit, pick_string(n->a, json, arena_printf(n->a, "%s/unit", row))))
        return;
    n->compared++;
    ck_assert_msg(x == value, "%s: %.17g in the report, %.17g explained", name, value, x);
}

static const char *explained(struct named *n, const ohmen_query *q, const char *name)
{
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (ohmen_explain(n->reg, q, name, 1, &r, &e) != OHMEN_OK)
        ck_abort_msg("%s is named in a report and cannot be explained: %s", name, e.text);
    return test_json(n->a, r);
}

/* Of `{"value": X, "unit": "U", "figure": "NAME"}` that ends at `end`: X and U. */
static double value_before(struct named *n, const char *json, const char *end, const char **unit)
{
    static const char head[] = "{\"value\": ", unit_key[] = "\"unit\": \"";
    const char *s = end;
    while (s > json && strncmp(s, head, sizeof head - 1) != 0)
        s--;
    const char *number = s + sizeof head - 1, *after = number + strcspn(number, ",}");
    const char *u = strstr(after, unit_key);
    *unit = u && u < end ? string_at(n->a, u + sizeof unit_key - 1) : "";
    return read_number(number, after);
}

/* Explains each figure of a report that no report before named. */
static void explain_all(struct named *n, const ohmen_query *q, ohmen_report *r)
{
    static const char mark[] = ", \"figure\": \"";
    const char *json = test_json(n->a, r);
    for (const char *s = json; (s = strstr(s, mark)) != NULL;) {
        const char *end = s, *unit;
        s += sizeof mark - 1;
        const char *name = string_at(n->a, s);
        if (s[strlen(name) + 1] != '}' || strmap_has(&n->seen, name))
            continue; /* a column of texts, or known */
        strmap_set(n->a, &n->seen, name, n->a);
        if (n->one_in && n->seen.n % n->one_in)
            continue;
        double x = value_before(n, json, end, &unit);
        expect_value(n, explained(n, q, name), name, x, unit);
    }
}

/* Of a small register, since each figure is computed anew to be explained. */
START_TEST(figures_of_the_report)
{
    struct named n = named_new(test_mill);
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_report_all(n.reg, NULL, &r, &e), &e);
    explain_all(&n, NULL, r);
    ck_assert_uint_ge(n.seen.n, 19);
    ck_assert_uint_ge(n.compared, 10);
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

/* Every one: points, probabilities, regrets, swings, elasticities, correlations, values at which it
 * turns. */
START_TEST(figures_of_a_sensitivity)
{
    struct named n = named_new(test_mill);
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_sensitivity(n.reg, NULL, "D-RELAY", NULL, NULL, &r, &e), &e);
    explain_all(&n, NULL, r);
    static const char *const some[] = {
        "D-RELAY.best[NEW-RELAY]",
        "D-RELAY.worth-it[NEW-RELAY]",
        "D-RELAY.regret[do-nothing]",
        "D-RELAY.p5[NEW-RELAY]",
        "D-RELAY.swing[lost-load.value].NEW-RELAY.low",
        "D-RELAY.moves-with[lost-load.value]",
        "D-RELAY.elasticity[lost-load.value].NEW-RELAY",
    };
    for (size_t i = 0; i < sizeof some / sizeof *some; i++)
        ck_assert_msg(strmap_has(&n.seen, some[i]), "%s is not in the report", some[i]);
    ck_assert_uint_ge(n.compared, 8);
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

START_TEST(figures_of_protection)
{
    struct named n = named_new(test_skerry);
    n.one_in = 13;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_protection(n.reg, NULL, &r, &e), &e);
    explain_all(&n, NULL, r);
    ck_assert_uint_ge(n.seen.n, 100);
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

START_TEST(figures_of_a_perspective)
{
    struct named n = named_new(test_skerry);
    n.one_in = 13;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_query q = ohmen_query_defaults();
    q.perspective = "company";
    must(ohmen_hazards(n.reg, &q, &r, &e), &e);
    explain_all(&n, &q, r);
    ck_assert_uint_eq(n.seen.n, 80);
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

START_TEST(figures_of_single_reports)
{
    static const char *const shown[] = {"H-VH-BUS1", "H-TQ-BUS", "H-GU-CABLE", "VH-51A",  "VH-INC1",
                                        "bus-fault", "vh-load",  "OC-EM",      "FIT-87B", "D-TQ"};
    struct named n = named_new(test_skerry);
    n.one_in = 13;
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    for (size_t i = 0; i < sizeof shown / sizeof *shown; i++) {
        must(ohmen_show(n.reg, NULL, shown[i], &r, &e), &e);
        explain_all(&n, NULL, r);
    }
    must(ohmen_grid(n.reg, NULL, "D-GU", &r, &e), &e);
    explain_all(&n, NULL, r);
    must(ohmen_weigh(n.reg, NULL, "D-GU", &r, &e), &e);
    explain_all(&n, NULL, r);
    ck_assert_uint_ge(n.seen.n, 100);
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

/* The whole derivation names only figures that have a derivation of their own. */
START_TEST(figures_of_a_derivation)
{
    struct named n = named_new(test_skerry);
    ohmen_report *r = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_explain(n.reg, NULL, "H-TQ-BUS.risk", 0, &r, &e), &e);
    const char *json = test_json(n.a, r), mark[] = ", \"figure\": \"";
    size_t figures = 0;
    for (const char *s = json; (s = strstr(s, mark)) != NULL; figures++) {
        s += sizeof mark - 1;
        const char *name = string_at(n.a, s);
        if (figures % 31)
            continue; /* each is a job of its own */
        const char *row = pick_string(n.a, explained(&n, NULL, name), "blocks/1/rows/0/figure");
        ck_assert_str_eq(row, name);
    }
    ck_assert_uint_ge(figures, 40);
    ck_assert_ptr_nonnull(strstr(json, "SK-PANEL"));
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

START_TEST(depth_cuts_a_derivation)
{
    struct named n = named_new(test_skerry);
    size_t before = 0;
    ohmen_error e = OHMEN_ERROR_INIT;
    for (unsigned depth = 1; depth <= 4; depth++) {
        ohmen_report *r = NULL;
        must(ohmen_explain(n.reg, NULL, "H-TQ-BUS.risk", depth, &r, &e), &e);
        size_t rows = test_count(test_json(n.a, r), "{\"level\": ");
        ck_assert_uint_gt(rows, before);
        before = rows;
    }
    ohmen_close(n.reg);
    arena_free(n.a);
}
END_TEST

void work_figure_tests(Suite *suite)
{
    TCase *t = tcase_create("figures");
    tcase_set_timeout(t, 600);
    tcase_add_test(t, figures_of_the_report);
    tcase_add_test(t, figures_of_a_sensitivity);
    tcase_add_test(t, figures_of_protection);
    tcase_add_test(t, figures_of_a_perspective);
    tcase_add_test(t, figures_of_single_reports);
    tcase_add_test(t, figures_of_a_derivation);
    tcase_add_test(t, depth_cuts_a_derivation);
    suite_add_tcase(suite, t);
}
