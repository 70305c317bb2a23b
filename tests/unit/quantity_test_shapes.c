/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities: ranges, shapes made from keys, discrete ones, moments. */
#include <math.h>
#include <string.h>

#include "quantity_test.h"

static void close_to(double got, double expected, double relative, const char *about)
{
    ck_assert_msg(fabs(got - expected) <= relative * fabs(expected), "%s: %.17g instead of %.17g",
                  about, got, expected);
}

static double quantile(const struct quantity *q, double p)
{
    double x = NAN;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(quantity_quantile(q, p, &x, &e), OHMEN_OK);
    return x;
}

/* A range holds its level: the bounds are the (1 -+ level)/2 quantiles. */
static const struct {
    const char *text, *canonical;
    enum shape shape;
    double level, low, high;
    const char *unit;
} ranges[] = {
    {"90 % within 14 MW .. 22 MW", NULL, SHAPE_LOGNORMAL, 0.9, 14000, 22000, "kW"},
    {"90% within 250 kEUR..600 kEUR", "90 % within 250 kEUR .. 600 kEUR", SHAPE_LOGNORMAL, 0.9,
     250000, 600000, "EUR"},
    {"80 % within -2 .. 3 as normal", NULL, SHAPE_NORMAL, 0.8, -2, 3, ""},
    {"0.5 within 1 h .. 2.50 h as lognormal", "0.5 within 1 h .. 2.5 h as lognormal",
     SHAPE_LOGNORMAL, 0.5, 1.0 / 8760, 2.5 / 8760, "a"},
    {"1 % within 2.385 .. 2.4", NULL, SHAPE_LOGNORMAL, 0.01, 2.385, 2.4, ""},
    {"99.9 % within 2 * 3 km .. 8 km + 1 km as normal", NULL, SHAPE_NORMAL, 0.999, 6, 9, "km"},
    {"95 % within 1e-6 per a .. 1 in 10 a", NULL, SHAPE_LOGNORMAL, 0.95, 1e-6, 0.1, "1/a"},
};

START_TEST(range)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    const char *s = ranges[_i].text, *canonical = ranges[_i].canonical ? ranges[_i].canonical : s;
    struct quantity *q = quantity_parse(a, &test_units, s, test_place, &d);
    ck_assert_msg(q != NULL, "%s: %s", s, d.count ? d.list.at[0].text : "");
    ck_assert_int_eq(q->shape, ranges[_i].shape);
    ck_assert_str_eq(q->text, canonical);
    ck_assert_str_eq(quantity_canonical(a, &test_units, s), canonical);
    ck_assert_str_eq(quantity_canonical(a, &test_units, canonical), canonical);
    ck_assert_str_eq(dim_unit(a, &test_units, q->dim), ranges[_i].unit);
    ck_assert(quantity_check(a, &test_units, q, NULL, test_place, &d) && !quantity_is_constant(q));
    close_to(quantile(q, (1 - ranges[_i].level) / 2), ranges[_i].low, 1e-13, s);
    close_to(quantile(q, (1 + ranges[_i].level) / 2), ranges[_i].high, 1e-13, s);
    arena_free(a);
}
END_TEST

static const struct {
    const char *text;
    unsigned column;
    const char *message;
} bad_ranges[] = {
    {"within 2 .. 3", 1, "the text ends too early; expected a value, such as 180 kEUR, a name, "
     "or '('"},
    {"90 % within 2", 12, "a range needs two bounds parted by '..': 90 % within A .. B"},
    {"90 % within 2 ..", 17, "the text ends too early; expected a value, such as 180 kEUR, a "
     "name, or '('"},
    {"90 within 2 .. 3", 1, "the level of a range is between 1 % and 99.9 %; did you mean 90 %?"},
    {"99.95 % within 2 .. 3", 1, "the level of a range is between 1 % and 99.9 %, not 99.95 %"},
    {"0.9 % within 2 .. 3", 1, "the level of a range is between 1 % and 99.9 %, not 0.9 %"},
    {"2 h within 2 .. 3", 1, "the level of a range is between 1 % and 99.9 %, not 2 h"},
    {"90 % within 3 .. 2", 18, "the upper bound of a range must exceed the lower one: '2' does "
     "not exceed '3'"},
    {"90 % within 2 .. 2", 18, "the upper bound of a range must exceed the lower one: '2' does "
     "not exceed '2'"},
    {"90 % within 2 h .. 3", 20, "both bounds of a range must be of one kind, but the lower is "
     "time and the upper is a pure number"},
    {"90 % within -2 .. 3", 13, "a lognormal range must be above 0; write 'as normal' behind a "
     "range that reaches 0 or below"},
    {"90 % within 0 .. 3 as lognormal", 13, "a lognormal range must be above 0; write 'as "
     "normal' behind a range that reaches 0 or below"},
    {"90 % within 2 .. 3 as beta", 23, "a range is 'as lognormal' or 'as normal', not 'as beta'"},
    {"90 % within x .. 3", 13, "a parameter of a distribution must be certain: numbers with "
     "units, without 'x'"},
    {"90 % within 2 .. 3 / 0", 17, "'3 / 0' has no finite value"},
    {"90 % within 2 .. 3 , 4", 20, "no expression needs a comma; the arguments of a call are "
     "parted by ';'"},
    {"90 % within \u00e4 .. 4", 13, "'\u00e4' is not expected here; expected a value, such as "
     "180 kEUR, a name, or '('"},
    {"90 % within 1e-300 .. 1e300 kW", 23, "both bounds of a range must be of one kind, but the "
     "lower is a pure number and the upper is power"},
    {"90 % within 1e-300 .. 1e300", 13, "the bounds of the range are too far apart"},
};

START_TEST(bad_range)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    ck_assert(!quantity_parse(a, &test_units, bad_ranges[_i].text, test_place, &d));
    one_diagnostic(&d, bad_ranges[_i].column, bad_ranges[_i].message, bad_ranges[_i].text);
    arena_free(a);
}
END_TEST

/* "key value; key value": makes the parts, each on a line of its own, from line 2. */
static struct quantity *build(struct arena *a, const char *shape, const char *s, struct diags *d)
{
    struct quantity_part parts[5] = {{0}};
    struct place shape_at = {"t.yaml", 100, 1, NULL};
    size_t n = 0;
    for (const char *p = s; *p; n++) {
        size_t key = strcspn(p, "="), end = strcspn(p, ",");
        struct place at = {"t.yaml", (uint32_t)n + 2, 1, NULL};
        const char *text = arena_strn(a, p + key + 1, end - key - 1);
        parts[n] = (struct quantity_part){arena_strn(a, p, key),
                                          expr_parse(a, &test_units, text, at, d), at};
        p += end + (p[end] == ',');
    }
    return quantity_build(a, &test_units, shape, shape_at, parts, n, test_place, d);
}

/* Means and variances by the textbook formulas, worked by hand; of the lognormal ones
 * computed with 40 digits, the cut one by quadrature. */
static const struct {
    const char *shape, *parts;
    enum shape made;
    double mean, variance;
    double low, high;
    const char *text;
} builds[] = {
    {NULL, "median=0.01 per a,error-factor=3", SHAPE_LOGNORMAL, 0.012498844582331568,
     8.7829254616134474e-5, 0, INFINITY, "median 0.01 per a, error factor 3"},
    {"lognormal", "error-factor=5,median=0.3,at-most=1", SHAPE_LOGNORMAL, 0.32586787316971488,
     0.05408971580463307, 0, 1, "median 0.3, error factor 5, at most 1"},
    {NULL, "mean=-2.385 kW,standard-deviation=700 W", SHAPE_NORMAL, -2.385, 0.49, -INFINITY,
     INFINITY, "mean -2.385 kW, standard deviation 700 W"},
    {"gamma", "mean=2 km,shape-parameter=1e4", SHAPE_GAMMA, 2, 4e-4, 0, INFINITY,
     "mean 2 km, shape parameter 1e4"},
    {"beta", "a=1e9,b=1e9", SHAPE_BETA, 0.5, 0.25 / 2000000001, 0, 1, "beta, a 1e9, b 1e9"},
    {"gamma", "mean=0.02 per a,shape-parameter=1.6", SHAPE_GAMMA, 0.02, 2.5e-4, 0, INFINITY,
     "mean 0.02 per a, shape parameter 1.6"},
    {NULL, "a=3,b=5", SHAPE_BETA, 0.375, 15.0 / 576, 0, 1, "beta, a 3, b 5"},
    {"uniform", "from=5 km,to=95 km", SHAPE_UNIFORM, 50, 675, 5, 95,
     "uniform, from 5 km, to 95 km"},
    {"triangular", "from=1 a,most-likely=2 a,to=9 a", SHAPE_TRIANGULAR, 4, 57.0 / 18, 1, 9,
     "triangular, from 1 a, most likely 2 a, to 9 a"},
    {"pert", "from=1,most-likely=2,to=9", SHAPE_PERT, 3, 12.0 / 7, 1, 9,
     "pert, from 1, most likely 2, to 9"},
    {"pert", "from=1,most-likely=1,to=9", SHAPE_PERT, 14.0 / 6,
     (14.0 / 6 - 1) * (9 - 14.0 / 6) / 7, 1, 9, "pert, from 1, most likely 1, to 9"},
};

START_TEST(built)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct quantity *q = build(a, builds[_i].shape, builds[_i].parts, &d);
    ck_assert_msg(q != NULL, "%s: %s", builds[_i].parts, d.count ? d.list.at[0].text : "");
    ck_assert_int_eq(q->shape, builds[_i].made);
    ck_assert_str_eq(q->text, builds[_i].text);
    double low, high;
    quantity_range(q, &low, &high);
    ck_assert(low == builds[_i].low && high == builds[_i].high);
    close_to(quantity_mean(q), builds[_i].mean, 1e-12, builds[_i].parts);
    close_to(quantity_variance(q), builds[_i].variance, 1e-12, builds[_i].parts);
    double median = quantile(q, 0.5);
    for (int sign = -1; sign <= 1; sign += 2) {
        double mean = quantity_mean(q), variance = quantity_variance(q), tail = quantile(q, 0.1);
        q->times *= sign * 2;
        close_to(quantity_mean(q), mean * sign * 2, 1e-15, "times");
        close_to(quantity_variance(q), variance * 4, 1e-15, "times");
        close_to(quantile(q, sign > 0 ? 0.1 : 0.9), tail * sign * 2, 1e-14, "times");
        q->times = 1;
    }
    q->times = -1;
    quantity_range(q, &low, &high);
    ck_assert(low == -builds[_i].high && high == -builds[_i].low);
    close_to(quantile(q, 0.5), -median, 1e-15, "times");
    arena_free(a);
}
END_TEST

/* The error factor is p95/p50 with the exact 95 % point. */
START_TEST(error_factor)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct quantity *q = build(a, NULL, builds[0].parts, &d);
    close_to(quantile(q, 0.95), 0.03, 1e-14, "95 %");
    close_to(quantile(q, 0.5), 0.01, 1e-15, "50 %");
    close_to(quantile(q, 0.05), 0.01 / 3, 1e-14, "5 %");
    double s = log(3.0) / 1.6448536269514722;
    close_to(quantity_mean(q), 0.01 * exp(s * s / 2), 1e-14, "mean");
    close_to(quantity_variance(q), 1e-4 * exp(s * s) * expm1(s * s), 1e-14, "variance");
    arena_free(a);
}
END_TEST

static const struct {
    const char *shape, *parts;
    unsigned line;
    const char *message;
} bad_builds[] = {
    {"lognorml", "a=1", 100, "'lognorml' is not a shape; the nearest is 'lognormal'"},
    {"weibull", "a=1", 100, "'weibull' is not a shape; the shapes are lognormal normal gamma beta "
     "uniform triangular pert discrete"},
    {NULL, "", 1, "a distribution needs its keys, such as median and error-factor"},
    {NULL, "medain=1,error-factor=3", 2, "'medain' is not a key of a distribution; the nearest is "
     "'median'"},
    {NULL, "median=1", 1, "these keys do not make one distribution; lognormal takes median, "
     "error-factor and, if wanted, at-most"},
    {NULL, "median=1,error-factor=3,mean=2", 1, "these keys do not make one distribution; "
     "lognormal takes median, error-factor and, if wanted, at-most"},
    {NULL, "from=1,to=2", 1, "these keys need 'shape', which may be 'uniform'"},
    {NULL, "from=1,most-likely=2,to=3", 1, "these keys need 'shape', which may be 'triangular' "
     "or 'pert'"},
    {"uniform", "from=1,too=2,to=3", 3, "'too' is not a key of uniform, which takes from, to; did "
     "you mean 'to'?"},
    {"beta", "a=1", 1, "'b' is missing; beta takes a, b"},
    {"beta", "a=1,b=2 h", 3, "'b' must be a pure number, but it is time"},
    {"beta", "a=0,b=2", 2, "'a' must be between 1e-6 and 1e9, but it is 0"},
    {"beta", "a=1,b=1e10", 3, "'b' must be between 1e-6 and 1e9, but it is 1e10"},
    {"gamma", "mean=0 per a,shape-parameter=1", 2, "'mean' must be above 0, but it is 0 per a"},
    {"gamma", "mean=1,shape-parameter=-1", 3, "'shape-parameter' must be between 1e-6 and 1e4, "
     "but it is -1"},
    {"gamma", "mean=1,shape-parameter=10001", 3, "'shape-parameter' must be between 1e-6 and "
     "1e4, but it is 10001"},
    {"normal", "mean=1 h,standard-deviation=2", 3, "'standard-deviation' must be time, but it is "
     "a pure number"},
    {"normal", "mean=1,standard-deviation=0", 3, "'standard-deviation' must be above 0, but it "
     "is 0"},
    {NULL, "median=1,error-factor=1", 3, "'error-factor' must be above 1, but it is 1"},
    {NULL, "median=-1,error-factor=2", 2, "'median' must be above 0, but it is -1"},
    {NULL, "median=1,error-factor=2,at-most=1", 4, "'at-most' must be above the median, but it "
     "is 1"},
    {"uniform", "from=2,to=2", 3, "'to' must be above 'from', but it is 2"},
    {"pert", "from=2,most-likely=1,to=3", 3, "'most-likely' must be at least 'from', but it is 1"},
    {"pert", "from=2,most-likely=4,to=3", 4, "'to' must be at least 'most-likely', but it is 3"},
    {"pert", "from=2,most-likely=2,to=2", 4, "'to' must be above 'from', but it is 2"},
    {"uniform", "from=x,to=2", 2, "a parameter of a distribution must be certain: numbers with "
     "units, without 'x'"},
    {"uniform", "from=1 / 0,to=2", 2, "'1 / 0' has no finite value"},
    {"discrete", "values=1", 1, "the values of a discrete distribution are a map: "
     "{low: {is: 2 h, p: 30 %}}"},
};

START_TEST(bad_build)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    ck_assert(!build(a, bad_builds[_i].shape, bad_builds[_i].parts, &d));
    one_diagnostic(&d, 1, bad_builds[_i].message, bad_builds[_i].parts);
    ck_assert_msg(d.list.at[0].place.line == bad_builds[_i].line, "%s: line %u",
                  bad_builds[_i].parts, d.list.at[0].place.line);
    arena_free(a);
}
END_TEST

static struct quantity *discrete(struct arena *a, size_t n, const char *const *texts,
                                 const double *p, struct diags *d)
{
    struct quantity_part parts[4] = {{0}};
    for (size_t i = 0; i < n; i++)
        parts[i] = (struct quantity_part){"values", expr_parse(a, &test_units, texts[i],
                                                               test_place, d), test_place};
    return quantity_discrete(a, &test_units, n, parts, p, test_place, d);
}

START_TEST(discrete_values)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct quantity *q = discrete(a, 3, (const char *const[]){"9 km", "1 km", "2 km"},
                                  (const double[]){0.5, 0.2, 0.3}, &d);
    ck_assert(q && d.count == 0);
    ck_assert_str_eq(q->text, "one of 9 km (0.5), 1 km (0.2), 2 km (0.3)");
    close_to(quantity_mean(q), 5.3, 1e-15, "mean");       /* 4.5 + 0.2 + 0.6 */
    close_to(quantity_variance(q), 13.81, 1e-14, "variance"); /* 40.5 + 0.2 + 1.2 - 28.09 */
    static const double quantiles[][2] = {{1e-9, 1}, {0.2, 1}, {0.21, 2}, {0.5, 2}, {0.51, 9},
                                          {0.9999, 9}};
    for (size_t i = 0; i < sizeof quantiles / sizeof quantiles[0]; i++)
        ck_assert_msg(quantile(q, quantiles[i][0]) == quantiles[i][1], "%g", quantiles[i][0]);
    double low, high;
    quantity_range(q, &low, &high);
    ck_assert(low == 1 && high == 9);
    arena_free(a);
}
END_TEST

START_TEST(bad_discrete)
{
    static const struct {
        size_t n;
        const char *texts[2];
        double p[2];
        const char *message;
    } cases[] = {
        {0, {0}, {0}, "a discrete distribution needs at least one value"},
        {2, {"1", "2"}, {0.5, 0.4}, "the probabilities must sum to 1, but they sum to 0.9"},
        {2, {"1", "2"}, {0.5, 0.5 + 0x1p-29}, "the probabilities must sum to 1, but they "
         "sum to 1.0000000018626451"},
        {2, {"1", "2"}, {1.5, -0.5}, "probability 1 must be between 0 and 1, but it is 1.5"},
        {2, {"1", "2"}, {0.5, NAN}, "probability 2 must be between 0 and 1, but it is not finite"},
        {2, {"1", "2 h"}, {0.5, 0.5}, "the values must be of one kind, but the first is a pure "
         "number and this is time"},
        {1, {"x"}, {1}, "a parameter of a distribution must be certain: numbers with units, "
         "without 'x'"},
    };
    struct arena *a = arena_new(NULL);
    for (size_t i = 0; i < sizeof cases / sizeof cases[0]; i++) {
        struct diags d;
        diags_init(&d, a);
        ck_assert(!discrete(a, cases[i].n, cases[i].texts, cases[i].p, &d));
        one_diagnostic(&d, 1, cases[i].message, cases[i].message);
    }
    struct diags d;
    diags_init(&d, a); /* within 1e-9: normalised */
    struct quantity *q = discrete(a, 2, (const char *const[]){"1", "1"},
                                  (const double[]){0.5, 0.5000000009}, &d);
    ck_assert(q && q->probabilities[0] < 0.5);
    close_to(q->probabilities[0] + q->probabilities[1], 1, 2.3e-16, "sum");
    arena_free(a);
}
END_TEST

START_TEST(expressions)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct expr_names names = {&d, test_dim};
    double low, high, x = 7;
    struct quantity *q = quantity_parse(a, &test_units, "2 * 3 h", test_place, &d);
    ck_assert(q && q->shape == SHAPE_EXPRESSION && quantity_is_constant(q));
    ck_assert_str_eq(q->text, "2 * 3 h");
    ck_assert(quantity_check(a, &test_units, q, &names, test_place, &d));
    ck_assert(dim_equal(q->dim, dim_time));
    quantity_range(q, &low, &high);
    ck_assert(low == high && high == 2 * (3.0 / 8760));
    q = quantity_parse(a, &test_units, "2 * bus-load", test_place, &d);
    ck_assert(q && !quantity_is_constant(q));
    quantity_range(q, &low, &high);
    ck_assert(low == -INFINITY && high == INFINITY);
    ck_assert_ptr_null(quantity_canonical(a, &test_units, "2 *"));
    q = build(a, "beta", "a=1,b=2", &d);
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(quantity_quantile(q, 1, &x, &e), OHMEN_COMPUTE);
    ck_assert(x == 7);
    ck_assert_str_eq(e.text, "the quantile at 1 of 'beta, a 1, b 2' cannot be computed");
    arena_free(a);
}
END_TEST

/* The table is whole: every shape that is written with keys once, with keys and help. */
START_TEST(table)
{
    size_t seen[SHAPE_COUNT] = {0};
    for (size_t i = 0; i < quantity_n_shapes; i++) {
        seen[quantity_shapes[i].shape]++;
        ck_assert(quantity_shapes[i].keys[0] && strlen(quantity_shapes[i].help) > 40);
    }
    for (size_t i = 0; i < SHAPE_COUNT; i++)
        ck_assert_uint_eq(seen[i], i != SHAPE_EXPRESSION && i != SHAPE_COUNTED);
}
END_TEST

#define COUNT(rows) ((int)(sizeof rows / sizeof rows[0]))

Suite *suite_quantity(void)
{
    Suite *s = suite_create("quantities");
    TCase *t = tcase_create("quantities");
    tcase_add_loop_test(t, range, 0, COUNT(ranges));
    tcase_add_loop_test(t, bad_range, 0, COUNT(bad_ranges));
    tcase_add_loop_test(t, built, 0, COUNT(builds));
    tcase_add_test(t, error_factor);
    tcase_add_loop_test(t, bad_build, 0, COUNT(bad_builds));
    tcase_add_test(t, discrete_values);
    tcase_add_test(t, bad_discrete);
    tcase_add_test(t, expressions);
    tcase_add_test(t, table);
    suite_add_tcase(s, t);
    return s;
}
