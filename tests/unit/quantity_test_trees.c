/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Trees: replacing `was`, factors, walking, equality. */
#include "quantity_test.h"

static struct expr *parse(struct arena *a, const char *s)
{
    struct diags d;
    diags_init(&d, a);
    struct expr *e = expr_parse(a, &test_units, s, test_place, &d);
    ck_assert_msg(e != NULL, "%s: %s", s, d.count ? d.list.at[0].text : "");
    return e;
}

START_TEST(replace_was)
{
    static const struct {
        const char *change, *before, *after;
    } cases[] = {
        {"0.6 * was", "x + y", "0.6 * (x + y)"},
        {"was / 2", "x * y", "x * y / 2"},
        {"2 / was", "x * y", "2 / (x * y)"},
        {"was", "x + y", "x + y"},
        {"-was", "x * y", "-(x * y)"},
        {"-was", "-x", "-(-x)"},
        {"was^2", "5 km", "(5 km)^2"},
        {"was^2", "5", "5^2"},
        {"was^2", "-5", "(-5)^2"},
        {"1 - was", "x - y", "1 - (x - y)"},
        {"was - 1", "x - y", "x - y - 1"},
        {"3 * was", "3 per 100 km a", "3 * 3 per 100 km a"},
        {"was * was", "x / y", "x / y * (x / y)"},
        {"min(was; 2 * was)", "x + 1", "min(x + 1; 2 * (x + 1))"},
        {"lookup(was; 1 -> was; 2 -> 3)", "x", "lookup(x; 1 -> x; 2 -> 3)"},
        {"0.5 * was", "0.6 * was", "0.5 * (0.6 * was)"},
    };
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct expr *change = parse(a, cases[i].change), *before = parse(a, cases[i].before);
        struct expr *after = expr_replace_was(a, change, before);
        ck_assert_str_eq(written(a, after), cases[i].after);
        ck_assert(expr_equal(parse(a, cases[i].after), after));
        ck_assert_str_eq(written(a, change), cases[i].change);
        ck_assert_str_eq(written(a, before), cases[i].before);
    }
    arena_free(a);
}
END_TEST

START_TEST(was_is_factor)
{
    static const struct {
        const char *text;
        bool factor;
    } cases[] = {{"was", true}, {"0.6 * was", true}, {"was / 2", true}, {"-was", true},
                 {"2 * (was * 3)", true}, {"x * was / (y + 1)", true}, {"2", false},
                 {"was + 1", false}, {"2 / was", false}, {"was * was", false},
                 {"was / was", false}, {"was^2", false}, {"exp(was)", false},
                 {"2 * (was + 1)", false}, {"x * min(was; 2)", false}};
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++)
        ck_assert_msg(expr_was_is_factor(parse(a, cases[i].text)) == cases[i].factor, "%s",
                      cases[i].text);
    arena_free(a);
}
END_TEST

struct visit {
    struct text text;
};

static void note(void *ctx, const struct expr *e)
{
    struct visit *v = ctx;
    text_printf(&v->text, "%d%s ", (int)e->op, e->name ? e->name : e->text ? e->text : "");
}

START_TEST(walk)
{
    struct arena *a = arena_new(NULL);
    struct visit v;
    text_init(&v.text, a);
    expr_walk(parse(a, "x + 2 * (y - was) / min(3; 4)"), note, &v);
    struct text expected;
    text_init(&expected, a);
    text_printf(&expected, "%d %dx %d %d %d2 %d %dy %d %d %d3 %d4 ", EXPR_ADD, EXPR_NAME,
                EXPR_DIVIDE, EXPR_MULTIPLY, EXPR_LITERAL, EXPR_SUBTRACT, EXPR_NAME, EXPR_WAS,
                EXPR_MIN, EXPR_LITERAL, EXPR_LITERAL);
    ck_assert_str_eq(text_str(&v.text), text_str(&expected));
    struct visit w;
    text_init(&w.text, a);
    expr_walk(parse(a, "unwanted(T1; inrush 3 per a)"), note, &w);
    ck_assert_str_eq(text_str(&w.text), arena_printf(a, "%dT1 ", EXPR_UNWANTED));
    arena_free(a);
}
END_TEST

START_TEST(uses_and_equal)
{
    static const char *const texts[] = {
        "x", "y", "2", "2 h", "x + y", "x - y", "y + x", "x + x + y", "x + (x + y)", "min(x; y)",
        "max(x; y)", "min(x; y; 2)", "-x", "fails(x)", "frequency(x)", "unwanted(x)", "was",
        "share(x; y)", "share(x; z)", "share(z; y)"};
    struct arena *a = arena_new(NULL);
    size_t n = sizeof texts / sizeof texts[0];
    for (size_t i = 0; i < n; i++)
        for (size_t j = 0; j < n; j++)
            ck_assert_msg(expr_equal(parse(a, texts[i]), parse(a, texts[j])) == (i == j), "%s, %s",
                          texts[i], texts[j]);
    struct expr *e = parse(a, "2 * (clearance-time + min(1 h; 2 h)) - frequency(H) * fails(E)");
    ck_assert(expr_uses(e, EXPR_CLEARANCE) && expr_uses(e, EXPR_MIN) && expr_uses(e, EXPR_FAILS));
    ck_assert(expr_uses(e, EXPR_SUBTRACT) && expr_uses(e, EXPR_LITERAL));
    ck_assert(!expr_uses(e, EXPR_WAS) && !expr_uses(e, EXPR_NAME) && !expr_uses(e, EXPR_MAX));
    arena_free(a);
}
END_TEST

/* Columns of parts: a sign's own, others where they begin; characters, not bytes. */
START_TEST(columns)
{
    struct arena *a = arena_new(NULL);
    struct expr *e = parse(a, "  x + 2 h * (y)");
    ck_assert_uint_eq(e->column, 4);
    ck_assert_uint_eq(e->args[0]->column, 2);
    ck_assert_uint_eq(e->args[1]->column, 10);
    ck_assert_uint_eq(e->args[1]->args[0]->column, 6);
    ck_assert_uint_eq(e->args[1]->args[1]->column, 13);
    arena_free(a);
}
END_TEST

Suite *suite_trees(void)
{
    Suite *s = suite_create("trees");
    TCase *t = tcase_create("trees");
    tcase_add_test(t, replace_was);
    tcase_add_test(t, was_is_factor);
    tcase_add_test(t, walk);
    tcase_add_test(t, uses_and_equal);
    tcase_add_test(t, columns);
    suite_add_tcase(s, t);
    return s;
}
