/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The graph: op table, equal nodes, sections, dimensions, degree, dump.
 * Loops over the op table fail for a row that has no rule or no example here. */
#include "graph/diagram.h"
#include "graph/ops.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

static struct arena *arena;
static struct graph *g;

static const struct dim number = {{0}}, metre = {{0, 1}}, area = {{0, 2}}, money = {{0, 0, 0, 1}};

static void setup(void)
{
    arena = arena_new(NULL);
    g = graph_new(arena);
    graph_section_begin(g, 0);
}

static void teardown(void)
{
    arena_free(arena);
}

static node_id con(double x)
{
    return graph_const(g, x, number);
}

static node_id in(uint32_t i)
{
    return graph_input(g, i, 0.25 + i, number);
}

/* ---- the op table ---- */

static bool is_leaf(int op)
{
    return op == OP_CONST || op == OP_INPUT;
}

START_TEST(every_row_has_its_rules)
{
    for (int op = 0; op < OP_COUNT; op++) {
        const struct op_rule *rule = op_rule(op);
        bool many = op == OP_DIAGRAM || op == OP_PICK || op == OP_YEARS || op == OP_COURSE ||
                    op == OP_CHAIN;
        ck_assert_msg(rule->lower != NULL, "%s: lower", graph_op_info(op)->name);
        ck_assert_msg(rule->degree != DEGREE_MISSING, "%s: degree", graph_op_info(op)->name);
        ck_assert_msg((rule->unit != NULL) == !is_leaf(op), "%s: unit", graph_op_info(op)->name);
        ck_assert_msg((rule->point != NULL) == (!is_leaf(op) && !many), "%s: point",
                      graph_op_info(op)->name);
        ck_assert_msg((rule->backward != NULL) == (!is_leaf(op) && !many), "%s: backward",
                      graph_op_info(op)->name);
    }
}
END_TEST

START_TEST(names_are_distinct)
{
    for (int i = 0; i < OP_COUNT; i++) {
        ck_assert_uint_le(graph_op_info(i)->least, graph_op_info(i)->most);
        for (int j = 0; j < i; j++)
            ck_assert_str_ne(graph_op_info(i)->name, graph_op_info(j)->name);
    }
}
END_TEST

/* Examples: all results can be had by hand, or in closed form from <math.h>. */
struct example {
    enum graph_op op;
    size_t n;
    double x[9];
    double y;
};

static const struct example examples[] = {
    {OP_ADD, 2, {2.385, 0.04}, 2.425},
    {OP_SUBTRACT, 2, {2.385, 0.04}, 2.345},
    {OP_MULTIPLY, 2, {2.385, 0.04}, 0.0954},
    {OP_DIVIDE, 2, {2.385, 0.04}, 59.625},
    {OP_RATIO, 2, {2.385, 0.04}, 59.625},
    {OP_RATIO, 2, {0, 0}, 0},
    {OP_NEGATE, 1, {2.385}, -2.385},
    {OP_HELD, 1, {2.385}, 2.385},
    {OP_POWER, 2, {2.385, 3}, 13.566416625},
    {OP_POWER, 2, {2.385, 0}, 1},
    {OP_POWER, 2, {2.25, -1.5}, 1 / 3.375},
    {OP_COMPLEMENT, 1, {0.385}, 0.615},
    {OP_SUM, 4, {1e16, 2.385, -1e16, 0.04}, 2.425}, /* plain adding gives 2.04 */
    {OP_SUM, 4, {2.385, 1e100, 0.04, -1e100}, 2.425},
    {OP_SUM, 1, {2.385}, 2.385},
    {OP_MIN, 3, {2.385, -0.04, 7}, -0.04},
    {OP_MIN, 1, {2.385}, 2.385},
    {OP_MAX, 3, {2.385, -0.04, 7.25}, 7.25},
    {OP_EXP, 1, {0.6931471805599453094}, 2},
    {OP_LOG, 1, {7.389056098930650227}, 2},
    {OP_SQRT, 1, {5.688225}, 2.385},
    {OP_LOOKUP, 7, {0.3, 0.1, 5, 0.25, 40, 0.5, 90}, 40},
    {OP_LOOKUP, 7, {0.05, 0.1, 5, 0.25, 40, 0.5, 90}, 5},
    {OP_LOOKUP, 7, {0.7, 0.1, 5, 0.25, 40, 0.5, 90}, 90},
    {OP_LOOKUP, 3, {0.7, 0.1, 5}, 5},
    {OP_EITHER, 1, {0.385}, 0.385},
    {OP_EITHER, 3, {0.2, 0.25, 0.5}, 0.7},
    {OP_EITHER, 2, {1e-20, 3e-20}, 4e-20},
    {OP_EITHER, 3, {0.25, 1, 0.5}, 1},
    {OP_ANNUITY, 3, {0, 1.25, 7.5}, 6.25},
    {OP_ANNUITY, 3, {0.21, 0, 2}, (1 + 1 / 1.21) / 1.1},      /* middles: 1.21^.5 = 1.1 */
    {OP_ANNUITY, 3, {0.21, 0.25, 0.75}, 0.5 / 1.1},           /* inside one year */
    {OP_ANNUITY, 3, {0.4641, 0.5, 1.5}, 0.5 / 1.331 + 0.5 / 1.61051}, /* 1.1^3, 1.1^5 */
};
enum { N_EXAMPLES = sizeof examples / sizeof *examples };

START_TEST(examples_hold)
{
    int seen[OP_COUNT] = {0};
    for (int i = 0; i < N_EXAMPLES; i++) {
        const struct example *e = &examples[i];
        double y = graph_point(e->op, e->n, e->x);
        ck_assert_msg(fabs(y - e->y) <= 4e-16 * fabs(e->y), "example %d (%s): %.17g",
                      i, graph_op_info(e->op)->name, y);
        seen[e->op]++;
    }
    for (int op = 0; op < OP_COUNT; op++)
        ck_assert_msg(seen[op] || !op_rule(op)->point, "%s: no example", graph_op_info(op)->name);
}
END_TEST

/* Fourth-order central difference. */
static double slope(const struct example *e, size_t i)
{
    double x[9], h = 1e-3 * (fabs(e->x[i]) + 1e-3), y[4];
    memcpy(x, e->x, sizeof x);
    for (int k = 0; k < 4; k++) {
        static const int steps[] = {-2, -1, 1, 2};
        x[i] = e->x[i] + steps[k] * h;
        y[k] = graph_point(e->op, e->n, x);
    }
    return (y[0] - 8 * y[1] + 8 * y[2] - y[3]) / (12 * h);
}

/* Where a difference says nothing: sums that cancel, the ends of an annuity in whole years
 * or at 0, and a mean over nothing, which has a rule and no slope. */
static bool is_smooth(const struct example *e, size_t i)
{
    for (size_t k = 0; k < e->n; k++)
        if (fabs(e->x[k]) > 1e6)
            return false;
    if (e->op == OP_RATIO && e->x[1] == 0)
        return false;
    return e->op != OP_ANNUITY || i == 0 || e->x[i] != floor(e->x[i]);
}

START_TEST(derivatives_match_differences)
{
    int checked[OP_COUNT] = {0};
    for (int n = 0; n < N_EXAMPLES; n++) {
        const struct example *e = &examples[n];
        double back[9] = {0};
        graph_backward(e->op, e->n, e->x, e->y, 2.385, back);
        for (size_t i = 0; i < e->n; i++) {
            if (!is_smooth(e, i))
                continue;
            double want = 2.385 * slope(e, i);
            ck_assert_msg(fabs(back[i] - want) <= 1e-9 * (fabs(want) + 1), "example %d (%s) %zu: "
                          "%.17g, not %.17g", n, graph_op_info(e->op)->name, i, back[i], want);
            checked[e->op]++;
        }
    }
    for (int op = 0; op < OP_COUNT; op++)
        ck_assert_msg(checked[op] || !op_rule(op)->backward, "%s: unchecked",
                      graph_op_info(op)->name);
}
END_TEST

START_TEST(backward_adds_to_what_is_there)
{
    double back[3] = {1, 2, 3}, x[3] = {4, 5, 6};
    graph_backward(OP_SUM, 3, x, 15, 0.5, back);
    ck_assert(back[0] == 1.5 && back[1] == 2.5 && back[2] == 3.5);
}
END_TEST

START_TEST(minimum_and_maximum_have_their_own_rules)
{
    double nan_last[] = {1, 2, NAN}, nan_first[] = {NAN, 1, 2};
    double zeros[] = {0.0, -0.0}, turned[] = {-0.0, 0.0};
    ck_assert(isnan(graph_point(OP_MIN, 3, nan_last)) && isnan(graph_point(OP_MAX, 3, nan_last)));
    ck_assert(isnan(graph_point(OP_MIN, 3, nan_first)) && isnan(graph_point(OP_MAX, 3, nan_first)));
    ck_assert(signbit(graph_point(OP_MIN, 2, zeros)) && signbit(graph_point(OP_MIN, 2, turned)));
    ck_assert(!signbit(graph_point(OP_MAX, 2, zeros)) && !signbit(graph_point(OP_MAX, 2, turned)));
    double tie[] = {3, 2, 2}, back[3] = {0};
    graph_backward(OP_MIN, 3, tie, 2, 1, back);
    ck_assert(back[0] == 0 && back[1] == 1 && back[2] == 0);
    double zero_back[2] = {0};
    graph_backward(OP_MIN, 2, zeros, -0.0, 1, zero_back);
    ck_assert(zero_back[0] == 1 && zero_back[1] == 0);
}
END_TEST

START_TEST(lookup_reaches_its_bounds)
{
    double x[] = {0.25, 0.1, 5, 0.25, 40};
    ck_assert(graph_point(OP_LOOKUP, 5, x) == 40);
    x[0] = nextafter(0.25, 0);
    ck_assert(graph_point(OP_LOOKUP, 5, x) == 5);
    x[0] = NAN;
    ck_assert(isnan(graph_point(OP_LOOKUP, 5, x)));
}
END_TEST

/* ---- the annuity at its edges ---- */

static double annuity(double rate, double from, double to)
{
    return graph_point(OP_ANNUITY, 3, (double[]){rate, from, to});
}

/* Year by year in long double: an oracle of another kind. */
static long double annuity_by_years(long double rate, double from, double to)
{
    long double total = 0;
    for (double t = from; t < to;) {
        double end = fmin(floor(t) + 1, to);
        long double d = (long double)end - t;
        total += d * expl(-(t + d / 2) * log1pl(rate));
        t = end;
    }
    return total;
}

START_TEST(annuity_is_the_sum_over_years)
{
    static const double rates[] = {0,      1e-300, 1e-18, 1e-12, 1e-9, 3e-5,
                                   0.0025, 0.04,   0.12,  1.5,   -0.03};
    static const double spans[][2] = {{0, 1}, {0, 25}, {0.3, 24.7}, {2.4, 2.6}, {3, 3}, {4.5, 4.5},
                                      {1.5, 2}, {1, 1.5}, {0.75, 1.25}, {7, 107}};
    for (size_t i = 0; i < sizeof rates / sizeof *rates; i++)
        for (size_t k = 0; k < sizeof spans / sizeof *spans; k++) {
            double got = annuity(rates[i], spans[k][0], spans[k][1]);
            long double want = annuity_by_years(rates[i], spans[k][0], spans[k][1]);
            ck_assert_msg(fabsl(got - want) <= 2e-15L * want, "rate %g, %g to %g: %.17g",
                          rates[i], spans[k][0], spans[k][1], got);
        }
}
END_TEST

/* Derivative with respect to the rate, year by year in long double. */
START_TEST(annuity_slope_is_the_sum_over_years)
{
    static const double rates[] = {0, 1e-300, 1e-12, 1e-6, 0.0025, 0.04, 0.12, 1.5, -0.03};
    for (size_t i = 0; i < sizeof rates / sizeof *rates; i++) {
        double x[] = {rates[i], 0.3, 40.7}, back[3] = {0};
        graph_backward(OP_ANNUITY, 3, x, annuity(x[0], x[1], x[2]), 1, back);
        long double want = 0;
        for (double t = x[1]; t < x[2];) {
            double end = fmin(floor(t) + 1, x[2]);
            long double d = (long double)end - t, middle = t + d / 2;
            want -= d * middle * expl(-(middle + 1) * log1pl(rates[i]));
            t = end;
        }
        ck_assert_msg(fabsl(back[0] - want) <= -4e-15L * want, "rate %g: %.17g", rates[i], back[0]);
    }
}
END_TEST

START_TEST(annuity_refuses_what_has_no_value)
{
    ck_assert(isnan(annuity(0.04, 2, 1)));
    ck_assert(isnan(annuity(-1, 0, 1)));
    ck_assert(isnan(annuity(0.04, 0, 0x1p54)));
    ck_assert(isnan(annuity(NAN, 0, 1)) && isnan(annuity(0.04, NAN, 1)));
    ck_assert(annuity(0.04, 0, 0x1p53) > 25 && annuity(0.04, 0, 0x1p53) < 26);
}
END_TEST

/* ---- years ---- */

static double years_value(node_id n, const double *x)
{
    return graph_node_point(g, n, x);
}

static long double power_of(double rate, long double t)
{
    return expl(t * log1pl(rate));
}

/* Year by year in long double, with the derivatives; the years are counted from the beginning. */
START_TEST(years_are_summed_one_by_one)
{
    static const double rates[] = {0, 1e-300, 1e-18, 1e-12, 1e-6, 0.0025, 0.04, 1.5, -0.03};
    static const uint32_t of[] = {0, 1, 2, 2, 0, 1, 1};
    static const double spans[][3] = {{0, 7, 7}, {0.3, 6.7, 7}, {2.4, 2.6, 1}, {3, 3, 0},
                                      {-1.5, 2, 4}, {4.25, 6, 2}};
    for (size_t s = 0; s < sizeof spans / sizeof *spans; s++) {
        struct years y = {spans[s][0], spans[s][1], (size_t)spans[s][2], of};
        node_id n = graph_years(g, in(0), 3, (node_id[]){in(1), in(2), in(3)}, &y);
        for (size_t r = 0; r < sizeof rates / sizeof *rates; r++) {
            double x[] = {rates[r], 2.385, 1e5, -0.04}, back[4] = {0};
            long double want = 0, slope = 0, part[3] = {0}, scale = 0;
            for (size_t i = 0; i < y.n_years; i++) {
                long double begin = fmax(floor(y.from) + (double)i, y.from);
                long double end = fmin(floor(y.from) + (double)i + 1, y.to);
                long double f = (end - begin) * power_of(x[0], -(begin + end) / 2);
                part[of[i]] += f;
                want += f * x[1 + of[i]];
                scale += f * fabs(x[1 + of[i]]);
                slope -= (begin + end) / 2 * f * x[1 + of[i]] / (1 + (long double)x[0]);
            }
            ck_assert_msg(fabsl(years_value(n, x) - want) <= 2e-15L * scale, "%zu, rate %g", s,
                          x[0]);
            graph_node_backward(g, n, x, years_value(n, x), 0.5, back);
            ck_assert(fabsl(back[0] - slope / 2) <= 2e-14L * scale);
            for (int i = 0; i < 3; i++)
                ck_assert(fabsl(back[1 + i] - part[i] / 2) <= 4e-15L * (part[i] + 1));
        }
    }
}
END_TEST

/* The same in each year is an annuity. */
START_TEST(equal_years_are_an_annuity)
{
    static const uint32_t of[25] = {0};
    struct years y = {0.3, 24.7, 25, of};
    node_id n = graph_years(g, in(0), 1, (node_id[]){in(1)}, &y);
    double x[] = {0.04, 2.385}, bad[] = {-1, 2.385};
    double want = 2.385 * annuity(0.04, 0.3, 24.7);
    ck_assert(fabs(years_value(n, x) - want) <= 2e-15 * want);
    ck_assert(isnan(years_value(n, bad)));
}
END_TEST

/* ---- courses ---- */

static const struct course tested = {.from = -3.5, .first = -2, .every = 1.5, .born = -7.25};

/* dh/dt = rate (1 - h) - ending h by small steps of fourth order (Runge, Kutta). */
static double grow(double h, double rate, double ending, double time)
{
    enum { STEPS = 2000 };
    double d = time / STEPS, s = rate + ending;
    for (int i = 0; i < STEPS; i++) {
        double a = rate - s * h, b = rate - s * (h + d / 2 * a), c = rate - s * (h + d / 2 * b);
        h += d / 6 * (a + 2 * b + 2 * c + (rate - s * (h + d * c)));
    }
    return h;
}

START_TEST(courses_follow_their_equation)
{
    static const double xs[][5] = {{0.01, 0.3, 2.385, 0.1, 0.02}, {0, 0.04, 0, 0, 0},
                                   {0.2, 0, 0, 0.4, 0.05},        {0, 0, 5, 0.4, 0},
                                   {0.5, 3, 7, 1, 2}};
    /* time, beginning of its stretch, whether before the first reset */
    static const double times[][3] = {{-3.25, -3.5, 1}, {-2, -2, 0}, {-0.75, -2, 0},
                                      {-0.5, -0.5, 0},  {0, -0.5, 0}, {9.9, 8.5, 0}};
    for (int fresh = 0; fresh < 2; fresh++)
        for (size_t i = 0; i < sizeof xs / sizeof *xs; i++)
            for (size_t k = 0; k < sizeof times / sizeof *times; k++) {
                struct course c = tested;
                c.fresh = fresh;
                const double *x = xs[i];
                double start = fresh && times[k][2] != 0 ? 0 : x[3];
                double h = grow(start, x[1], x[2], times[k][0] - times[k][1]);
                double m = grow(0, x[4], x[2], times[k][0] - c.born);
                double want = 1 - (1 - x[0]) * (1 - h) * (1 - m);
                double got = course_at(&c, x, times[k][0]);
                ck_assert_msg(fabs(got - want) <= 1e-11, "%zu, %zu: %.17g, not %.17g", i, k, got,
                              want);
            }
}
END_TEST

START_TEST(small_courses_keep_their_digits)
{
    double x[] = {1e-20, 1e-12, 1e-9, 1e-15, 1e-13};
    struct course c = tested;
    double want = 1e-20 + 1e-12 * 0.5 * (1 - 0.5e-9 / 2) + 1e-15 * (1 - 0.5e-9) + 
                  7.25e-13 * (1 - 3.6254e-9);
    ck_assert(fabs(course_at(&c, x, 0) - want) <= 1e-11 * want);
    c.first = INFINITY; /* 1 - exp(-1e-12 * 3.5) */
    double alone[] = {0, 1e-12, 0, 0, 0};
    long double exact = -expm1l(-3.5e-12L);
    ck_assert(fabsl(course_at(&c, alone, 0) - exact) <= 4e-16L * exact);
}
END_TEST

/* Against fourth-order differences, also where s x is near 0 and about 0.5, where the series
 * ends. */
START_TEST(slopes_of_courses_match_differences)
{
    static const double xs[][5] = {{0.01, 0.3, 2.385, 0.1, 0.02}, {0.01, 1e-3, 1e-3, 0.2, 1e-3},
                                   {0.02, 0.4, 0.599, 0.01, 0.05}, {0.02, 0.4, 0.601, 0.01, 0.05},
                                   {0.5, 3, 7, 0.9, 2}};
    node_id args[] = {in(0), in(1), in(2), in(3), in(4)}, n = graph_course(g, &tested, args);
    for (size_t i = 0; i < sizeof xs / sizeof *xs; i++) {
        double back[5] = {0}, x[5];
        graph_node_backward(g, n, xs[i], graph_node_point(g, n, xs[i]), 2.385, back);
        for (int k = 0; k < 5; k++) {
            double y[4], h = 1e-3 * xs[i][k];
            for (int j = 0; j < 4; j++) {
                memcpy(x, xs[i], sizeof x);
                x[k] += (j < 2 ? j - 2 : j - 1) * h;
                y[j] = course_at(&tested, x, 0);
            }
            double want = 2.385 * (y[0] - 8 * y[1] + 8 * y[2] - y[3]) / (12 * h);
            ck_assert_msg(fabs(back[k] - want) <= 1e-9 * fabs(want) + 1e-13 / h, "%zu, %d: %.12g, "
                          "not %.12g", i, k, back[k], want);
        }
    }
    double still[5] = {0}, back[5] = {0};
    graph_node_backward(g, n, still, 0, 1, back);
    ck_assert(back[0] == 1 && back[1] == 0.5 && back[2] == 0 && back[3] == 1 && back[4] == 7.25);
}
END_TEST

/* ---- dimensions ---- */

static bool fits(enum graph_op op, size_t n, const node_id *args, struct dim want)
{
    struct dim out = {{0}};
    return op_rule(op)->unit(g, n, args, &out) && dim_equal(out, want);
}

static bool clashes(enum graph_op op, size_t n, const node_id *args)
{
    struct dim out = {{0}};
    return !op_rule(op)->unit(g, n, args, &out);
}

START_TEST(unit_rules)
{
    node_id x = graph_input(g, 0, 1, number), m = graph_input(g, 1, 1, metre);
    node_id a = graph_input(g, 2, 1, area), e = graph_input(g, 3, 1, money);
    node_id half = con(0.5), two = con(2), third = con(0.3), bound = graph_const(g, 3, metre);
    struct dim per_metre = dim_divide(number, metre);
#define ARGS(...) sizeof((node_id[]){__VA_ARGS__}) / sizeof(node_id), (node_id[]){__VA_ARGS__}
#define FITS(op, want, ...) ck_assert(fits(OP_##op, ARGS(__VA_ARGS__), want))
#define CLASHES(op, ...) ck_assert(clashes(OP_##op, ARGS(__VA_ARGS__)))
    FITS(ADD, metre, m, m), FITS(SUBTRACT, metre, m, m), FITS(SUM, metre, m, m, m);
    FITS(MIN, metre, m, m, m), FITS(MAX, metre, m, m), FITS(NEGATE, metre, m);
    CLASHES(ADD, m, a), CLASHES(SUBTRACT, x, a), CLASHES(SUM, m, m, a), CLASHES(MIN, m, e);
    CLASHES(MAX, m, m, x);
    FITS(MULTIPLY, area, m, m), FITS(DIVIDE, per_metre, m, a);
    FITS(RATIO, per_metre, m, a);
    FITS(POWER, area, m, two), FITS(POWER, metre, a, half), FITS(POWER, number, x, third);
    CLASHES(POWER, m, third), CLASHES(POWER, m, half), CLASHES(POWER, x, x);
    CLASHES(POWER, x, bound);
    FITS(SQRT, metre, a), CLASHES(SQRT, m);
    FITS(EXP, number, x), CLASHES(EXP, m), FITS(LOG, number, x), CLASHES(LOG, m);
    FITS(COMPLEMENT, number, x), CLASHES(COMPLEMENT, m);
    FITS(ANNUITY, number, x, x, x), CLASHES(ANNUITY, x, x, m);
    FITS(LOOKUP, money, m, bound, e), FITS(LOOKUP, money, m, bound, e, bound, e);
    CLASHES(LOOKUP, m, bound, e, bound, x), CLASHES(LOOKUP, x, bound, e), CLASHES(LOOKUP, m, m, e);
    CLASHES(LOOKUP, m, bound, e, bound);
    node_id per = graph_input(g, 4, 1, per_metre);
    FITS(HELD, metre, m), FITS(HELD, number, x);
    FITS(EITHER, number, x, x), CLASHES(EITHER, x, m);
    FITS(YEARS, money, x, e, e), CLASHES(YEARS, m, e), CLASHES(YEARS, x, e, x);
    FITS(COURSE, number, x, per, per, x, per), CLASHES(COURSE, x, per, x, x, per);
    CLASHES(COURSE, per, per, per, x, per), CLASHES(COURSE, x, per, per, x, x);
    CLASHES(COURSE, x, per, per, per, per), FITS(COURSE, number, x, x, x, x, x);
    FITS(CHAIN, number, per, per), FITS(CHAIN, number, x), CLASHES(CHAIN, per, x);
    FITS(DIAGRAM, number, x, x), CLASHES(DIAGRAM, x, m), CLASHES(PICK, x);
#undef ARGS
#undef FITS
#undef CLASHES
}
END_TEST

/* ---- equal nodes, sections ---- */

START_TEST(equal_nodes_are_one)
{
    node_id x = in(1), y = in(2), s = graph_op2(g, OP_ADD, x, y);
    ck_assert_uint_eq(graph_op2(g, OP_ADD, x, y), s);
    ck_assert_uint_ne(graph_op2(g, OP_ADD, y, x), s);
    ck_assert_uint_ne(graph_op2(g, OP_MULTIPLY, x, y), s);
    ck_assert_uint_ne(graph_op(g, OP_SUM, 2, (node_id[]){x, y}), s);
    ck_assert_uint_eq(in(1), x);
    ck_assert_uint_ne(graph_input(g, 1, 9, number), x);
    ck_assert_uint_ne(graph_input(g, 1, 1.25, metre), x);
    ck_assert_uint_eq(con(2.385), con(2.385));
    ck_assert_uint_ne(con(0.0), con(-0.0));
    ck_assert_uint_eq(con(NAN), con(NAN));
    ck_assert_uint_ne(graph_const(g, 2.385, metre), con(2.385));
}
END_TEST

/* What is equal by chance keeps apart, what has one number is one, and what is elsewhere or
 * has an identity of its own stays. */
START_TEST(apart_by_number)
{
    node_id plain = con(2.385), input = in(3), sum = graph_op2(g, OP_ADD, plain, input);
    node_id one = graph_apart(g, plain, 1), two = graph_apart(g, plain, 2);
    ck_assert_uint_ne(one, plain);
    ck_assert_uint_ne(two, plain);
    ck_assert_uint_ne(one, two);
    ck_assert_uint_eq(graph_apart(g, plain, 1), one);
    ck_assert_uint_eq(con(2.385), plain);
    ck_assert_double_eq(graph_at(g, two)->constant, 2.385);
    node_id other = graph_apart(g, sum, 1);
    ck_assert_uint_ne(other, sum);
    ck_assert_uint_eq(graph_args(g, other)[0], plain);
    ck_assert_uint_eq(graph_args(g, other)[1], input);
    ck_assert_uint_eq(graph_op2(g, OP_ADD, plain, input), sum);
    ck_assert_uint_eq(graph_apart(g, input, 1), input);
    graph_section_end(g);
    graph_section_begin(g, 1);
    ck_assert_uint_eq(graph_apart(g, sum, 7), sum);
}
END_TEST

/* What stands in a table tells nodes apart, and its copy outlives the caller's. */
START_TEST(equal_tables_are_one)
{
    node_id x = in(1), p[] = {x, x, x, x, x};
    uint32_t of[] = {0, 0, 1};
    struct years y = {0.5, 2.5, 3, of};
    node_id first = graph_years(g, x, 2, p, &y);
    ck_assert_uint_eq(graph_years(g, x, 2, p, &y), first);
    of[1] = 1;
    ck_assert_uint_ne(graph_years(g, x, 2, p, &y), first);
    ck_assert_uint_eq(graph_years_of(g, first)->of_year[1], 0);
    ck_assert_uint_ne(graph_apart(g, first, 1), first);
    ck_assert_ptr_eq(graph_years_of(g, graph_apart(g, first, 1)), graph_years_of(g, first));
    struct course c = tested;
    node_id course = graph_course(g, &c, p);
    ck_assert_uint_eq(graph_course(g, &c, p), course);
    c.fresh = true;
    ck_assert_uint_ne(graph_course(g, &c, p), course);
    c.first = INFINITY;
    node_id never = graph_course(g, &c, p);
    c.every = 77; /* of no meaning */
    ck_assert_uint_eq(graph_course(g, &c, p), never);
    for (uint32_t i = 0; i < 500; i++) {
        c = (struct course){.from = -(double)i, .first = 0, .every = 1 + i};
        ck_assert_ptr_eq(graph_course_of(g, graph_course(g, &c, p)),
                         graph_course_of(g, graph_course(g, &c, (node_id[]){x, x, x, x, x})));
    }
    ck_assert_double_eq(graph_course_of(g, course)->every, 1.5);
}
END_TEST

START_TEST(many_equal_nodes_are_one)
{
    enum { N = 5000 };
    static node_id first[N];
    for (uint32_t i = 0; i < N; i++)
        first[i] = graph_op2(g, OP_MULTIPLY, in(i), in(i / 2));
    size_t size = graph_size(g);
    for (uint32_t i = 0; i < N; i++)
        ck_assert_uint_eq(graph_op2(g, OP_MULTIPLY, in(i), in(i / 2)), first[i]);
    ck_assert_uint_eq(graph_size(g), size);
    ck_assert_uint_eq(size, 2 * N);
}
END_TEST

/* What was written stays to be explained: nothing is computed while building. */
START_TEST(operations_on_constants_stay)
{
    for (int i = 0; i < N_EXAMPLES; i++) {
        const struct example *e = &examples[i];
        node_id args[9];
        for (size_t k = 0; k < e->n; k++)
            args[k] = con(e->x[k]);
        node_id n = graph_op(g, e->op, e->n, args);
        ck_assert_int_eq(graph_at(g, n)->op, e->op);
        for (size_t k = 0; k < e->n; k++)
            ck_assert_uint_eq(graph_args(g, n)[k], args[k]);
    }
}
END_TEST

START_TEST(sections_are_ranges)
{
    node_id x = in(1), y = in(2), sum = graph_op2(g, OP_ADD, x, y);
    graph_section_end(g);
    ck_assert_uint_eq(graph_section_begin(g, 77), 1);
    graph_section_end(g);
    ck_assert_uint_eq(graph_section_begin(g, 99), 2);
    node_id again = in(1), twice = graph_op2(g, OP_ADD, sum, sum);
    ck_assert_uint_ne(again, x);
    ck_assert_uint_ne(graph_op2(g, OP_ADD, x, y), sum);
    graph_section_end(g);
    node_id first;
    size_t count;
    uint32_t tag;
    ck_assert_uint_eq(graph_sections(g), 3);
    graph_section(g, 0, &first, &count, &tag);
    ck_assert(first == 0 && count == 3 && tag == 0);
    graph_section(g, 1, &first, &count, &tag);
    ck_assert(first == 3 && count == 0 && tag == 77);
    graph_section(g, 2, &first, &count, &tag);
    ck_assert(first == 3 && count == 3 && tag == 99);
    ck_assert_uint_eq(graph_section_of(g, sum), 0);
    ck_assert_uint_eq(graph_section_of(g, again), 2);
    ck_assert_uint_eq(graph_section_of(g, twice), 2);
}
END_TEST

/* ---- degree ---- */

static int degree(enum graph_op op, node_id x, node_id y)
{
    return graph_degree(g, graph_op2(g, op, x, y));
}

START_TEST(degree_of_arithmetic)
{
    node_id c = con(2.385), x = in(1), y = in(2), xy = graph_op2(g, OP_MULTIPLY, x, y);
    ck_assert_int_eq(graph_degree(g, c), 0);
    ck_assert_int_eq(graph_degree(g, x), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, x, y), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, x, x), 2);
    ck_assert_int_eq(degree(OP_MULTIPLY, x, c), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, xy, in(3)), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, xy, y), 2);
    node_id left = graph_op2(g, OP_ADD, x, c), right = graph_op2(g, OP_ADD, x, y);
    ck_assert_int_eq(degree(OP_MULTIPLY, left, right), 2);
    ck_assert_int_eq(degree(OP_ADD, x, x), 1);
    ck_assert_int_eq(degree(OP_ADD, xy, x), 1);
    ck_assert_int_eq(degree(OP_SUBTRACT, xy, y), 1);
    ck_assert_int_eq(degree(OP_DIVIDE, x, c), 1);
    ck_assert_int_eq(degree(OP_DIVIDE, c, x), 2);
    ck_assert_int_eq(degree(OP_DIVIDE, x, y), 2);
    node_id square = graph_op2(g, OP_MULTIPLY, x, x);
    ck_assert_int_eq(degree(OP_ADD, square, y), 2);
    ck_assert_int_eq(graph_degree(g, graph_op(g, OP_SUM, 3, (node_id[]){x, xy, c})), 1);
    ck_assert_int_eq(graph_degree(g, graph_op(g, OP_SUM, 3, (node_id[]){x, square, c})), 2);
    ck_assert_int_eq(graph_degree(g, graph_op1(g, OP_NEGATE, xy)), 1);
    node_id held = graph_op1(g, OP_HELD, square);
    ck_assert_int_eq(graph_degree(g, held), 0);
    ck_assert_int_eq(graph_degree(g, graph_op2(g, OP_MULTIPLY, held, xy)), 1);
    ck_assert_int_eq(graph_degree(g, graph_op1(g, OP_EXP, held)), 0);
    ck_assert_int_eq(graph_degree(g, graph_op1(g, OP_COMPLEMENT, x)), 1);
}
END_TEST

START_TEST(degree_of_curved_operations)
{
    node_id c = con(2.385), x = in(1), y = in(2), never = graph_op2(g, OP_DIVIDE, c, con(0));
    static const enum graph_op curved[] = {OP_EXP, OP_LOG, OP_SQRT};
    for (size_t i = 0; i < 3; i++) {
        ck_assert_int_eq(graph_degree(g, graph_op1(g, curved[i], x)), 2);
        ck_assert_int_eq(graph_degree(g, graph_op1(g, curved[i], never)), 0);
    }
    ck_assert_int_eq(degree(OP_MIN, x, c), 2);
    ck_assert_int_eq(degree(OP_MAX, c, y), 2);
    ck_assert_int_eq(degree(OP_POWER, x, con(1)), 1);
    ck_assert_int_eq(degree(OP_POWER, x, con(2)), 2);
    ck_assert_int_eq(degree(OP_POWER, never, con(2)), 0);
    ck_assert_int_eq(graph_degree(g, graph_annuity(g, x, con(0), con(3))), 2);
    ck_assert_int_eq(graph_degree(g, graph_annuity(g, con(0.04), con(0), x)), 2);
    ck_assert_int_eq(graph_degree(g, graph_op(g, OP_LOOKUP, 5, (node_id[]){c, c, x, c, y})), 1);
    ck_assert_int_eq(graph_degree(g, graph_op(g, OP_LOOKUP, 3, (node_id[]){x, c, c})), 2);
    node_id exp_x = graph_op1(g, OP_EXP, x);
    ck_assert_int_eq(graph_degree(g, graph_op(g, OP_LOOKUP, 5, (node_id[]){c, c, exp_x, c, y})), 2);
}
END_TEST

/* x or (y and z), with variable 3 beside it in no function. */
static const struct diagram *or_and(void)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun v[4];
    for (uint32_t i = 0; i < 4; i++)
        v[i] = diagram_variable(b, i);
    bfun f = diagram_or(b, v[0], diagram_and(b, v[1], v[2]));
    return diagram_freeze(arena, b, 2, (bfun[]){f, diagram_not(b, f)});
}

static int diagram_degree(node_id a, node_id b, node_id c, node_id d)
{
    node_id n = graph_diagram(g, or_and(), 4, (node_id[]){a, b, c, d});
    return graph_degree(g, graph_pick(g, n, 1));
}

START_TEST(degree_of_diagrams)
{
    node_id x = in(1), y = in(2), z = in(3), xz = graph_op2(g, OP_MULTIPLY, x, z);
    ck_assert_int_eq(diagram_degree(x, y, z, con(0.5)), 1);
    ck_assert_int_eq(diagram_degree(x, y, x, con(0.5)), 2);
    ck_assert_int_eq(diagram_degree(xz, y, z, con(0.5)), 2);
    ck_assert_int_eq(diagram_degree(xz, y, con(0.25), con(0.5)), 1);
    ck_assert_int_eq(diagram_degree(x, y, con(0.25), x), 1);
    ck_assert_int_eq(diagram_degree(graph_op1(g, OP_EXP, x), y, z, y), 2);
    ck_assert_int_eq(diagram_degree(con(0.125), con(0.25), con(0.375), con(0.5)), 0);
    node_id d = graph_diagram(g, or_and(), 3, (node_id[]){x, y, z});
    node_id works = graph_pick(g, d, 0), fails = graph_pick(g, d, 1);
    ck_assert_int_eq(degree(OP_ADD, works, fails), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, works, fails), 2);
    ck_assert_int_eq(degree(OP_MULTIPLY, works, in(4)), 1);
}
END_TEST

START_TEST(inputs_are_told_apart_by_number_across_sections)
{
    node_id x = in(1);
    graph_section_end(g);
    graph_section_begin(g, 1);
    node_id again = in(1);
    ck_assert_uint_ne(x, again);
    ck_assert_int_eq(degree(OP_MULTIPLY, x, again), 2);
}
END_TEST

START_TEST(degree_of_a_large_sum)
{
    enum { N = 3000 };
    static node_id terms[N];
    for (uint32_t i = 0; i < N; i++)
        terms[i] = graph_op2(g, OP_MULTIPLY, in(N - i), in(N + 1 + i % 7));
    node_id total = graph_op(g, OP_SUM, N, terms);
    ck_assert_int_eq(graph_degree(g, total), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, total, in(2 * N)), 1);
    ck_assert_int_eq(degree(OP_MULTIPLY, total, in(N + 3)), 2);
    ck_assert_int_eq(degree(OP_MULTIPLY, in(1), total), 2);
}
END_TEST

/* ---- diagrams in the graph, dump ---- */

START_TEST(equal_diagrams_are_one)
{
    node_id x = in(1), y = in(2), z = in(3);
    const struct diagram *one = or_and(), *two = or_and();
    ck_assert_ptr_ne(one, two);
    node_id d = graph_diagram(g, one, 3, (node_id[]){x, y, z});
    ck_assert_uint_eq(graph_diagram(g, two, 3, (node_id[]){x, y, z}), d);
    ck_assert_ptr_eq(graph_diagram_of(g, d), one);
    node_id other = graph_diagram(g, two, 3, (node_id[]){x, y, y});
    ck_assert_uint_ne(other, d);
    ck_assert_ptr_eq(graph_diagram_of(g, other), one);
    ck_assert_uint_eq(graph_pick(g, d, 1), graph_pick(g, d, 1));
    ck_assert_uint_ne(graph_pick(g, d, 1), graph_pick(g, d, 0));
}
END_TEST

START_TEST(windows_tell_diagrams_apart)
{
    node_id x = in(1), c = graph_course(g, &tested, (node_id[]){x, x, x, x, x}), args[] = {c, x, c};
    struct window at[] = {{0, 1}, {1, 2.5}};
    struct windows two = {2, at}, one = {1, at}, none = {0, NULL};
    const struct diagram *d = or_and();
    node_id plain = graph_diagram(g, d, 3, args), over = graph_diagram_over(g, d, 3, args, &two);
    ck_assert_uint_eq(graph_diagram_over(g, d, 3, args, NULL), plain);
    ck_assert_uint_eq(graph_diagram_over(g, d, 3, args, &none), plain);
    ck_assert_uint_ne(over, plain);
    ck_assert_uint_ne(graph_diagram_over(g, d, 3, args, &one), over);
    ck_assert_uint_eq(graph_diagram_over(g, d, 3, args, &two), over);
    at[1].to = 3; /* the table is a copy */
    ck_assert_uint_ne(graph_diagram_over(g, d, 3, args, &two), over);
    ck_assert_uint_eq(graph_windows_of(g, over).n, 2);
    ck_assert_double_eq(graph_windows_of(g, over).at[1].to, 2.5);
    ck_assert_uint_eq(graph_windows_of(g, plain).n, 0);
    node_id pick = graph_pick_in(g, over, 1, 0);
    uint32_t window = 9, root = 9;
    graph_pick_of(g, pick, &window, &root);
    ck_assert(window == 1 && root == 0 && graph_at(g, pick)->extra == 2);
    ck_assert_uint_eq(graph_pick(g, over, 1), graph_pick_in(g, over, 0, 1));
    graph_pick_of(g, graph_pick(g, plain, 1), &window, &root);
    ck_assert(window == 0 && root == 1);
}
END_TEST

START_TEST(dump_tells_what_stands_in_tables)
{
    node_id p = graph_input(g, 8, 1e-7, number), args[] = {p, p, p, p, p};
    struct course c = {.from = -1, .first = INFINITY, .fresh = true};
    graph_course(g, &tested, args);
    node_id never = graph_course(g, &c, args);
    struct window at[] = {{0, 1}, {1, 2.5}};
    node_id changing[] = {never, p, p};
    node_id d = graph_diagram_over(g, or_and(), 3, changing, &(struct windows){2, at});
    graph_pick_in(g, d, 1, 1);
    struct years y = {0.5, 2, 2, (uint32_t[]){1, 0}};
    graph_years(g, p, 2, args, &y);
    struct text out;
    text_init(&out, arena);
    graph_dump(&out, g);
    ck_assert_str_eq(text_str(&out),
                     "0 input #8 1e-7\n"
                     "1 course (0; 0; 0; 0; 0) from -3.5 first -2 every 1.5 born -7.25\n"
                     "2 course (0; 0; 0; 0; 0) from -1 born 0 fresh\n"
                     "3 diagram #0 (2; 0; 0) over 0 1; 1 2.5\n"
                     "4 pick (3) window 1 root 1\n"
                     "5 years (0; 0; 0) from 0.5 to 2 of 1 0\n");
}
END_TEST

START_TEST(many_diagrams_keep_their_numbers)
{
    enum { N = 300 };
    static node_id made[N];
    node_id x = in(1);
    for (int pass = 0; pass < 2; pass++)
        for (uint32_t k = 0; k < N; k++) {
            struct diagram_builder *b = diagram_builder_new(arena);
            bfun f[N + 1];
            node_id args[N + 1];
            for (uint32_t i = 0; i <= N; i++)
                f[i] = i < 4 || i == k ? diagram_variable(b, i) : BFUN_FALSE, args[i] = x;
            bfun root = diagram_at_least(b, 2, N + 1, f);
            const struct diagram *d = diagram_freeze(arena, b, 2, (bfun[]){root, f[k]});
            node_id n = graph_diagram(g, d, N + 1, args);
            if (pass == 0)
                made[k] = n;
            ck_assert_uint_eq(n, made[k]);
            ck_assert(diagram_equal(graph_diagram_of(g, n), d));
        }
}
END_TEST

START_TEST(dump_is_one_line_a_node)
{
    node_id price = graph_const(g, 2.385, dim_divide(money, metre));
    node_id length = graph_input(g, 7, 0.25, metre);
    node_id cost = graph_op2(g, OP_MULTIPLY, price, length);
    node_id p = graph_input(g, 8, 1e-7, number);
    node_id d = graph_diagram(g, or_and(), 3, (node_id[]){p, p, con(0.5)});
    node_id risk = graph_op2(g, OP_MULTIPLY, graph_pick(g, d, 1), cost);
    graph_op(g, OP_SUM, 3, (node_id[]){risk, cost, risk});
    graph_op1(g, OP_LOG, con(-1));
    con(INFINITY);
    struct text out;
    text_init(&out, arena);
    graph_dump(&out, g);
    ck_assert_str_eq(text_str(&out), "0 const 2.385 {1:-1 3:1}\n"
                                     "1 input #7 0.25 {1:1}\n"
                                     "2 multiply (0; 1) {3:1}\n"
                                     "3 input #8 1e-7\n"
                                     "4 const 0.5\n"
                                     "5 diagram #0 (3; 3; 4)\n"
                                     "6 pick (5) root 1\n"
                                     "7 multiply (6; 2) {3:1}\n"
                                     "8 sum (7; 2; 7) {3:1}\n"
                                     "9 const -1\n"
                                     "10 log (9)\n"
                                     "11 const inf\n");
}
END_TEST

static Suite *graph_suite(void)
{
    Suite *s = suite_create("graph");
    TCase *t = tcase_create("graph");
    tcase_set_timeout(t, 60);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, every_row_has_its_rules);
    tcase_add_test(t, names_are_distinct);
    tcase_add_test(t, examples_hold);
    tcase_add_test(t, derivatives_match_differences);
    tcase_add_test(t, backward_adds_to_what_is_there);
    tcase_add_test(t, minimum_and_maximum_have_their_own_rules);
    tcase_add_test(t, lookup_reaches_its_bounds);
    tcase_add_test(t, annuity_is_the_sum_over_years);
    tcase_add_test(t, annuity_slope_is_the_sum_over_years);
    tcase_add_test(t, annuity_refuses_what_has_no_value);
    tcase_add_test(t, years_are_summed_one_by_one);
    tcase_add_test(t, equal_years_are_an_annuity);
    tcase_add_test(t, courses_follow_their_equation);
    tcase_add_test(t, small_courses_keep_their_digits);
    tcase_add_test(t, slopes_of_courses_match_differences);
    tcase_add_test(t, unit_rules);
    tcase_add_test(t, equal_tables_are_one);
    tcase_add_test(t, windows_tell_diagrams_apart);
    tcase_add_test(t, dump_tells_what_stands_in_tables);
    tcase_add_test(t, equal_nodes_are_one);
    tcase_add_test(t, apart_by_number);
    tcase_add_test(t, many_equal_nodes_are_one);
    tcase_add_test(t, operations_on_constants_stay);
    tcase_add_test(t, sections_are_ranges);
    tcase_add_test(t, degree_of_arithmetic);
    tcase_add_test(t, degree_of_curved_operations);
    tcase_add_test(t, degree_of_diagrams);
    tcase_add_test(t, inputs_are_told_apart_by_number_across_sections);
    tcase_add_test(t, degree_of_a_large_sum);
    tcase_add_test(t, equal_diagrams_are_one);
    tcase_add_test(t, many_diagrams_keep_their_numbers);
    tcase_add_test(t, dump_is_one_line_a_node);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *runner = srunner_create(graph_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
