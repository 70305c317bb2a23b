/* SPDX-License-Identifier: GPL-3.0-or-later */
/* 100,000 random expressions: their text parses to an equal tree with the same text,
 * and those without names have the value that an evaluation in long double gives,
 * computed while the tree is made. */
#include <math.h>
#include <string.h>

#include "quantity_test.h"
#include "random.h"

enum { EXPRESSIONS = 100000, DEEPEST = 6 };

struct maker {
    struct arena *a;
    struct random r;
};

/* A tree and its value; not a number when it holds a name. `error` bounds what
 * rounding may have done to it. */
struct made {
    struct expr *e;
    long double value, error;
};

static struct made make(struct maker *m, int depth);

static struct expr *node(struct maker *m, enum expr_op op, size_t n)
{
    struct expr *e = NEW(m->a, struct expr);
    e->op = op;
    e->n = n;
    e->args = NEW_ARRAY(m->a, n, struct expr *);
    return e;
}

static const struct {
    const char *text;
    long double value;
} literals[] = {
    {"2.385", 2.385L}, {"7", 7}, {"0.5", 0.5L}, {"1e-3", 1e-3L}, {"3 h", 3.0L / 8760},
    {"90 %", 0.9L}, {"1 in 340 a", 1.0L / 340}, {"3 per 100 km a", 0.03L},
    {"9 EUR/kWh", 78840}, {"2 m^2", 2e-6L}, {"40 ms", 40.0L / 31536000000.0L}, {"1 in 20", 0.05L},
    {"4.7 kEUR per section a", 4700}, {"0.3 km^-1 h", 0.3L / 8760}, {"12 week", 84.0L / 365},
};

static struct made literal(struct maker *m)
{
    size_t i = random_index(&m->r, sizeof literals / sizeof literals[0]);
    struct expr *e = node(m, EXPR_LITERAL, 0);
    e->text = literals[i].text;
    return (struct made){e, literals[i].value, fabsl(literals[i].value) * 4e-16L};
}

static struct made leaf(struct maker *m)
{
    static const char *const names[] = {"x", "bus-load", "NH-51A", "y"};
    static const enum expr_op ops[] = {EXPR_NAME, EXPR_WAS, EXPR_CLEARANCE, EXPR_FAILS,
                                       EXPR_FREQUENCY, EXPR_UNWANTED, EXPR_SHARE};
    if (random_index(&m->r, 6) > 0)
        return literal(m);
    struct expr *e = node(m, random_pick(&m->r, ops), 0);
    if (e->op != EXPR_WAS && e->op != EXPR_CLEARANCE)
        e->name = random_pick(&m->r, names);
    if (e->op == EXPR_SHARE)
        e->text = random_pick(&m->r, names);
    if (e->op != EXPR_UNWANTED)
        return (struct made){e, NAN, 0};
    e->n = 2 * random_index(&m->r, 3);
    e->args = NEW_ARRAY(m->a, e->n, struct expr *);
    for (size_t i = 0; i < e->n; i += 2) {
        e->args[i] = node(m, EXPR_NAME, 0);
        e->args[i]->name = "through-fault";
        e->args[i + 1] = literal(m).e;
    }
    return (struct made){e, NAN, 0};
}

static struct made binary(struct maker *m, int depth)
{
    static const enum expr_op ops[] = {EXPR_ADD, EXPR_SUBTRACT, EXPR_MULTIPLY, EXPR_DIVIDE};
    struct expr *e = node(m, random_pick(&m->r, ops), 2);
    struct made x = make(m, depth), y = make(m, depth);
    e->args[0] = x.e;
    e->args[1] = y.e;
    struct made out = {e, 0, 0};
    if (e->op == EXPR_ADD || e->op == EXPR_SUBTRACT) {
        out.value = e->op == EXPR_ADD ? x.value + y.value : x.value - y.value;
        out.error = x.error + y.error;
    } else if (e->op == EXPR_MULTIPLY) {
        out.value = x.value * y.value;
        out.error = fabsl(x.value) * y.error + fabsl(y.value) * x.error + x.error * y.error;
    } else {
        out.value = x.value / y.value;
        long double least = fabsl(y.value) - y.error;
        out.error = least > 0 ? (x.error + fabsl(out.value) * y.error) / least : INFINITY;
    }
    out.error += fabsl(out.value) * 2.3e-16L;
    return out;
}

static struct made extreme(struct maker *m, int depth)
{
    size_t n = 2 + random_index(&m->r, 3);
    struct expr *e = node(m, random_index(&m->r, 2) ? EXPR_MIN : EXPR_MAX, n);
    struct made out = {e, 0, 0};
    for (size_t i = 0; i < n; i++) {
        struct made x = make(m, depth);
        e->args[i] = x.e;
        bool better = e->op == EXPR_MIN ? x.value < out.value : x.value > out.value;
        if (i == 0 || better || isnan(x.value) || isnan(out.value))
            out.value = isnan(out.value) ? out.value : x.value;
        out.error = fmaxl(out.error, x.error);
    }
    return out;
}

static struct made lookup(struct maker *m, int depth)
{
    static const char *const bounds[] = {"0", "0.1", "2.5", "1e3"};
    static const long double values[] = {0, 0.1L, 2.5L, 1000};
    size_t n = 1 + random_index(&m->r, 4);
    struct expr *e = node(m, EXPR_LOOKUP, 1 + 2 * n);
    struct made x = make(m, depth), out = {e, NAN, INFINITY};
    e->args[0] = x.e;
    for (size_t i = 0; i < n; i++) {
        struct expr *bound = node(m, EXPR_LITERAL, 0);
        bound->text = bounds[i];
        struct made value = make(m, depth);
        e->args[1 + 2 * i] = bound;
        e->args[2 + 2 * i] = value.e;
        if (i == 0 || x.value >= values[i]) {
            out.value = value.value;
            out.error = value.error;
        }
        if (fabsl(x.value - values[i]) <= x.error) /* too near to tell */
            x.value = NAN;
    }
    if (isnan(x.value))
        out.value = NAN;
    return out;
}

static struct made single(struct maker *m, int depth)
{
    static const enum expr_op ops[] = {EXPR_NEGATE, EXPR_SQRT, EXPR_EXP, EXPR_LOG};
    struct expr *e = node(m, random_pick(&m->r, ops), 1);
    struct made x = make(m, depth), out = {e, 0, 0};
    e->args[0] = x.e;
    long double low = x.value - x.error, high = x.value + x.error;
    switch (e->op) {
    case EXPR_NEGATE:
        return (struct made){e, -x.value, x.error};
    case EXPR_SQRT:
        out.value = sqrtl(x.value);
        out.error = low > 0 ? sqrtl(high) - sqrtl(low) : INFINITY;
        break;
    case EXPR_EXP:
        out.value = expl(x.value);
        out.error = expl(high) - expl(low);
        break;
    default:
        out.value = logl(x.value);
        out.error = low > 0 ? logl(high) - logl(low) : INFINITY;
    }
    out.error += fabsl(out.value) * 5e-16L;
    return out;
}

static struct made power(struct maker *m, int depth)
{
    static const char *const texts[] = {"2", "-1", "3", "-2"};
    static const int exponents[] = {2, -1, 3, -2};
    size_t i = random_index(&m->r, 4);
    struct expr *e = node(m, EXPR_POWER, 2);
    struct made x = make(m, depth);
    e->args[0] = x.e;
    e->args[1] = node(m, EXPR_LITERAL, 0);
    e->args[1]->text = texts[i];
    long double value = powl(x.value, exponents[i]), away = x.error / fabsl(x.value);
    long double error = away < 0.01L ? fabsl(value) * (4 * away + 5e-16L) : INFINITY;
    return (struct made){e, value, error};
}

static struct made make_any(struct maker *m, int depth)
{
    if (depth == 0)
        return leaf(m);
    switch (random_index(&m->r, 12)) {
    case 0:
        return extreme(m, depth - 1);
    case 1:
        return lookup(m, depth - 1);
    case 2:
        return single(m, depth - 1);
    case 3:
        return power(m, depth - 1);
    case 4:
    case 5:
        return leaf(m);
    default:
        return binary(m, depth - 1);
    }
}

/* A part that a double cannot hold makes the whole uncertain. */
static struct made make(struct maker *m, int depth)
{
    struct made made = make_any(m, depth);
    long double size = fabsl(made.value);
    if (size > 1e290L || (size != 0 && size < 1e-290L))
        made.error = INFINITY;
    return made;
}

/* Returns whether the value could be compared. */
static bool check_value(const struct made *made, const struct expr *e, const char *text)
{
    if (!isfinite(made->value) || !isfinite(made->error))
        return false;
    double got = expr_constant(e);
    ck_assert_msg(fabsl(got - made->value) <= made->error, "%s: %.17g instead of %.20Lg", text,
                  got, made->value);
    return true;
}

static bool round_trip(struct arena *a, uint64_t seed)
{
    struct maker m = {a, random_seed(seed)};
    struct diags d;
    diags_init(&d, a);
    struct made made = make(&m, 1 + (int)random_index(&m.r, DEEPEST));
    const char *text = written(a, made.e);
    if (strlen(text) > EXPR_BYTES)
        return false;
    struct expr *e = expr_parse(a, &test_units, text, test_place, &d);
    ck_assert_msg(e != NULL, "%s: %s at %u", text, d.count ? d.list.at[0].text : "",
                  d.count ? d.list.at[0].place.column : 0);
    ck_assert_msg(expr_equal(made.e, e), "%s: another tree, %s", text, written(a, e));
    ck_assert_str_eq(written(a, e), text);
    return check_value(&made, e, text);
}

START_TEST(random_expressions)
{
    size_t valued = 0;
    struct arena *a = arena_new(NULL);
    for (uint64_t i = 0; i < EXPRESSIONS; i++) {
        struct arena *scratch = arena_child(a);
        valued += round_trip(scratch, i + 1);
        arena_free(scratch);
    }
    ck_assert_uint_ge(valued, EXPRESSIONS / 5);
    arena_free(a);
}
END_TEST

Suite *suite_random(void)
{
    Suite *s = suite_create("random expressions");
    TCase *t = tcase_create("random");
    tcase_set_timeout(t, 0);
    tcase_add_test(t, random_expressions);
    suite_add_tcase(s, t);
    return s;
}
