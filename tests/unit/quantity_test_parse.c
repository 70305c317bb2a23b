/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is understood: canonical texts and values of expressions, and limits. */
#include <math.h>
#include <string.h>

#include "quantity_test.h"

/* Values in base units, from the definitions of the units. NAN: not constant. */
static const struct {
    const char *text, *canonical; /* NULL: the same */
    double value;
    const char *unit; /* of the whole, by dim_unit */
} rows[] = {
    {"180 kEUR", NULL, 180000, "EUR"},
    {"2.50", "2.5", 2.5, ""},
    {"1E-03", "1e-3", 1e-3, ""},
    {"007", "7", 7, ""},
    {"0.0", "0", 0, ""},
    {"000", "0", 0, ""},
    {"1e+05", "1e5", 1e5, ""},
    {"2.0e00", "2e0", 2, ""},
    {"10.050", "10.05", 10.05, ""},
    {"90%", "90 %", 0.9, ""},
    {"5  %", "5 %", 0.05, ""},
    {"1 h", NULL, 1.0 / 8760, "a"},
    {"1 in 340 a", NULL, 1.0 / 340, "1/a"},
    {"1.0 in 1000", "1 in 1000", 1e-3, ""},
    {"3 per 100 km a", NULL, 0.03, "1/km a"},
    {"2.5e-3 per section a", NULL, 2.5e-3, "1/section a"},
    {"4 % per a", NULL, 0.04, "1/a"},
    {"9 EUR/kWh", NULL, 78840, "EUR/kW a"},
    {"9 EUR / kWh", "9 EUR/kWh", 78840, "EUR/kW a"},
    {"9 EUR /kW h", "9 EUR/kW h", 78840, "EUR/kW a"},
    {"3 / h", "3 per h", 26280, "1/a"},
    {"10 MW / 2", NULL, 5000, "kW"},
    {"10 MW / 2 h", NULL, 43800000, "kW/a"},
    {"9 kW h", NULL, 9.0 / 8760, "kW a"},
    {"2 km^2", NULL, 2, "km^2"},
    {"2 m ^ 2", "2 m^2", 2e-6, "km^2"},
    {"7 km^-1", NULL, 7, "1/km"},
    {"2^3", NULL, 8, ""},
    {"2 ^ -1", "2^-1", 0.5, ""},
    {"2^0.50", "2^0.5", 1.4142135623730951, ""},
    {"(5 km)^2", NULL, 25, "km^2"},
    {"-2^2", NULL, -4, ""},
    {"(-2)^2", NULL, 4, ""},
    {"(2^3)^2", NULL, 64, ""},
    {"- 5 kW", "-5 kW", -5, "kW"},
    {"3 * -2", NULL, -6, ""},
    {"1 - -2", NULL, 3, ""},
    {"-(-2)", NULL, 2, ""},
    {"-(2 + 3)", NULL, -5, ""},
    {"-(2 * 3)", NULL, -6, ""},
    {"1+2", "1 + 2", 3, ""},
    {"1 - 2 - 3", NULL, -4, ""},
    {"1 - (2 - 3)", NULL, 2, ""},
    {"(1 - 2) - 3", "1 - 2 - 3", -4, ""},
    {"12 / 2 / 3", NULL, 2, ""},
    {"12 / (2 / 3)", NULL, 18, ""},
    {"2 * (3 * 4)", NULL, 24, ""},
    {"(2 + 3) * 4", NULL, 20, ""},
    {"((2)) + ((3 * 4))", "2 + 3 * 4", 14, ""},
    {"min(3; 2; 5)", NULL, 2, ""},
    {"max( 3 h ;200 min )", "max(3 h; 200 min)", 200.0 / 525600, "a"},
    {"3 h / min(2; 4)", NULL, 1.5 / 8760, "a"},
    {"3 h / min", "3 h/min", 180, ""},
    {"5 min / 2", NULL, 2.5 / 525600, "a"},
    {"sqrt(16 km^2)", NULL, 4, "km"},
    {"exp(0)", NULL, 1, ""},
    {"log(1)", NULL, 0, ""},
    {"lookup(7 MW; 0 MW -> 1 h; 5 MW->3 h)", "lookup(7 MW; 0 MW -> 1 h; 5 MW -> 3 h)",
     3.0 / 8760, "a"},
    {"lookup(5; 5 -> 1; 6 -> 2)", NULL, 1, ""},
    {"lookup(4; 5 -> 1; 6 -> 2)", NULL, 1, ""},
    {"lookup(6; 5 -> 1; 6 -> 2)", NULL, 2, ""},
    {"40 kEUR/s * clearance-time", NULL, NAN, "EUR"},
    {"bus-load * 9 h * 9 EUR/kWh", NULL, NAN, "EUR"},
    {"0.6 * was", NULL, NAN, ""},
    {"was / 2", NULL, NAN, ""},
    {"x - y", NULL, NAN, ""},
    {"unwanted(T1-MAIN; through-fault 14 per a; inrush 3 per a)", NULL, NAN, "1/a"},
    {"unwanted( T1-MAIN )", "unwanted(T1-MAIN)", NAN, "1/a"},
    {"fails(NH-Q1)", NULL, NAN, ""},
    {"share(cable-fault; two-phase)", NULL, NAN, ""},
    {"3 h * share( r ;earth )^2", "3 h * share(r; earth)^2", NAN, "a"},
    {"frequency(H-BUS1) * fails(NH-Q1)", NULL, NAN, "1/a"},
};

enum { N_ROWS = sizeof rows / sizeof rows[0] };

static void close_to(double got, double expected, const char *about)
{
    ck_assert_msg(fabs(got - expected) <= 4e-16 * fabs(expected), "%s: %.17g instead of %.17g",
                  about, got, expected);
}

START_TEST(understood)
{
    const char *s = rows[_i].text, *canonical = rows[_i].canonical ? rows[_i].canonical : s;
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct expr_names names = {&d, test_dim};
    struct expr *e = expr_parse(a, &test_units, s, test_place, &d);
    ck_assert_msg(e != NULL, "%s: %s", s, d.count ? d.list.at[0].text : "");
    ck_assert_str_eq(written(a, e), canonical);
    struct expr *again = expr_parse(a, &test_units, canonical, test_place, &d);
    ck_assert(again && expr_equal(e, again));
    ck_assert_msg(expr_check(a, &test_units, e, &names, test_place, &d), "%s: %s", s,
                  d.count ? d.list.at[0].text : "");
    ck_assert_str_eq(dim_unit(a, &test_units, e->dim), rows[_i].unit);
    ck_assert_uint_eq(d.count, 0);
    if (isnan(rows[_i].value))
        ck_assert(isnan(expr_constant(e)));
    else
        close_to(expr_constant(e), rows[_i].value, s);
    arena_free(a);
}
END_TEST

/* One correctly rounded division: exactly these doubles. */
START_TEST(exact_factors)
{
    static const struct {
        const char *text;
        double value;
    } cases[] = {{"1 h", 1.0 / 8760}, {"90 %", 0.9}, {"2.5 %", 0.025}, {"9 EUR/kWh", 78840},
                 {"1 in 340 a", 1.0 / 340}, {"3 per 100 km a", 0.03}, {"40 min", 40.0 / 525600},
                 {"1 d", 1.0 / 365}, {"1 ms", 1.0 / 31536000000.0}, {"5 kWh/h", 5}};
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct expr *e = expr_parse(a, &test_units, cases[i].text, test_place, &d);
        ck_assert_msg(e && e->value == cases[i].value, "%s", cases[i].text);
    }
    arena_free(a);
}
END_TEST

static char *repeated(struct arena *a, const char *open, size_t n, const char *middle,
                      const char *close)
{
    struct text t;
    text_init(&t, a);
    text_repeat(&t, open, n);
    text_add(&t, middle);
    text_repeat(&t, close, n);
    return arena_str(a, text_str(&t));
}

static struct expr *parse(struct arena *a, struct diags *d, const char *s)
{
    diags_init(d, a);
    return expr_parse(a, &test_units, s, test_place, d);
}

START_TEST(depth_limit)
{
    static const char *const opens[] = {"(", "exp(", "-(", "2 * (", "min(1; "};
    struct arena *a = arena_new(NULL);
    struct diags d;
    for (size_t i = 0; i < sizeof opens / sizeof opens[0]; i++) {
        ck_assert(parse(a, &d, repeated(a, opens[i], EXPR_DEPTH, "2", ")")));
        ck_assert(!parse(a, &d, repeated(a, opens[i], EXPR_DEPTH + 1, "2", ")")));
        unsigned column = (unsigned)(strlen(opens[i]) * EXPR_DEPTH + strcspn(opens[i], "(") + 1);
        one_diagnostic(&d, column, "parentheses are nested deeper than 60", opens[i]);
    }
    arena_free(a);
}
END_TEST

START_TEST(size_limit)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    char *s = repeated(a, " ", EXPR_BYTES - 1, "2", "");
    ck_assert(parse(a, &d, s));
    s = repeated(a, " ", EXPR_BYTES, "2", "");
    ck_assert(!parse(a, &d, s));
    one_diagnostic(&d, 1, "an expression has at most 4000 bytes, this one has 4001", "size");
    s = repeated(a, "1*", EXPR_BYTES / 4 - 1, "1234", "");
    ck_assert(parse(a, &d, s));
    s = repeated(a, "1*", EXPR_BYTES / 4 - 1, "12345", "");
    ck_assert(!parse(a, &d, s));
    one_diagnostic(&d, 1, "an expression has at most 4000 bytes with blanks around its signs, "
                   "this one has 4001", "size");
    arena_free(a);
}
END_TEST

static void count_node(void *ctx, const struct expr *e)
{
    (void)e;
    ++*(size_t *)ctx;
}

/* Chains as long as a text allows: all that works on trees copes. */
START_TEST(long_chains)
{
    static const struct {
        const char *link, *end;
        size_t links;
    } cases[] = {{"x+", "x", EXPR_BYTES / 4 - 1}, {"x*", "x", EXPR_BYTES / 4 - 1},
                 {"x - ", "x", EXPR_BYTES / 4 - 1}, {"x/", "was", EXPR_BYTES / 4 - 1}};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct diags d;
        struct expr_names names = {&d, test_dim};
        struct expr *e = parse(a, &d, repeated(a, cases[i].link, cases[i].links, cases[i].end,
                                               ""));
        ck_assert(e && expr_check(a, &test_units, e, &names, test_place, &d));
        size_t n = 0;
        expr_walk(e, count_node, &n);
        ck_assert_uint_eq(n, 2 * cases[i].links + 1);
        struct expr *copy = expr_replace_was(a, e, parse(a, &d, "2"));
        ck_assert(expr_equal(copy, copy) && expr_equal(e, copy) == !expr_uses(e, EXPR_WAS));
        ck_assert(isnan(expr_constant(copy)));
        ck_assert(!expr_was_is_factor(e));
        ck_assert_uint_eq(strlen(written(a, e)), cases[i].links * 4 + strlen(cases[i].end));
    }
    arena_free(a);
}
END_TEST

Suite *suite_parse(void)
{
    Suite *s = suite_create("parse");
    TCase *t = tcase_create("parse");
    tcase_add_loop_test(t, understood, 0, N_ROWS);
    tcase_add_test(t, exact_factors);
    tcase_add_test(t, depth_limit);
    tcase_add_test(t, size_limit);
    tcase_add_test(t, long_chains);
    suite_add_tcase(s, t);
    return s;
}
