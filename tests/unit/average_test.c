/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Averages of diagrams over time against adaptive quadrature in long double that knows the instants
 * of reset, against closed forms and values worked out apart; by every instruction set, and after
 * other values, with the same bytes and no memory asked for; their slopes against differences,
 * effects against variables that are set to true and to false. */
#include "eval/eval.h"
#include "graph/average.h"
#include "graph/legendre.h"
#include "failmem.h"
#include "random.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

enum { MOST = 16, ROOTS = 3 };

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static bool close(double got, long double want, double relative)
{
    return fabsl(got - want) <= relative * fabsl(want);
}

/* ---- rules of quadrature ---- */

/* Zeros of Legendre's polynomial by its recurrence, weights by its slope (Abramowitz and Stegun
 * 22.7.10, 25.4.29). */
START_TEST(rules_are_those_of_the_polynomials)
{
    for (int r = 0; r < LEGENDRE_RULES; r++) {
        const struct legendre_rule *rule = &legendre_rules[r];
        size_t m = rule->n;
        ck_assert(r == 0 || m > legendre_rules[r - 1].n);
        for (size_t i = 0; i < m; i++) {
            long double z = 2 * (long double)rule->nodes[i].at - 1, before = 1, p = z;
            for (size_t k = 2; k <= m; k++) {
                long double next = ((2 * k - 1) * z * p - (k - 1) * before) / k;
                before = p;
                p = next;
            }
            long double slope = m * (before - z * p) / (1 - z * z);
            ck_assert(fabsl(p / slope) < 3e-16L);
            ck_assert(close(rule->nodes[i].weight, 1 / ((1 - z * z) * slope * slope), 2e-14));
            ck_assert(i == 0 || rule->nodes[i].at > rule->nodes[i - 1].at);
        }
    }
    ck_assert_uint_eq(legendre_rules[LEGENDRE_RULES - 1].n, LEGENDRE_MOST);
}
END_TEST

/* ---- worlds: a diagram, courses and windows ---- */

struct world {
    const struct diagram *d;
    size_t n;
    double p[MOST], q[MOST], x[MOST][COURSE_ARGS];
    struct course course[MOST];
    const struct course *at[MOST]; /* NULL: does not change */
    struct window window[4];
    size_t n_windows;
};

static struct averaged averaged(const struct world *w)
{
    return (struct averaged){.diagram = w->d,
                             .n = w->n,
                             .p = w->p,
                             .q = w->q,
                             .course = w->at,
                             .x = w->x,
                             .windows = {w->n_windows, w->window}};
}

static void values(const struct world *w, double *results)
{
    struct averaged what = averaged(w);
    average_values(arena, &what, results);
}

static bfun some_gate(struct random *r, struct diagram_builder *b, const bfun *f, size_t n)
{
    bfun arm[5];
    size_t count = (size_t)random_range(r, 2, 5);
    for (size_t i = 0; i < count; i++)
        arm[i] = f[random_index(r, n)];
    return diagram_at_least(b, (uint32_t)random_range(r, 1, (int64_t)count), count, arm);
}

/* A gate over shared gates, one that needs its opposite beside another, and k of all. */
static const struct diagram *draw_diagram(struct random *r, size_t n)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun f[MOST + 8];
    for (uint32_t i = 0; i < n; i++)
        f[i] = diagram_variable(b, i);
    for (size_t i = n; i < n + 8; i++)
        f[i] = some_gate(r, b, f, i);
    bfun many = diagram_at_least(b, (uint32_t)random_range(r, 1, (int64_t)n), n, f);
    bfun other = diagram_and(b, some_gate(r, b, f, n), diagram_not(b, f[n + 7]));
    return diagram_freeze(arena, b, ROOTS, (bfun[]){f[n + 7], other, many});
}

static double maybe(struct random *r, double low, double high)
{
    return random_index(r, 2) ? 0 : random_log_uniform(r, low, high);
}

static void draw_course(struct random *r, struct world *w, size_t i)
{
    static const double every[] = {0.5, 1, 2, 4, 6, 2.385};
    struct course *c = &w->course[i];
    *c = (struct course){.from = random_uniform(r, -3, 0), .every = random_pick(r, every)};
    c->first = c->from + (random_index(r, 2) ? random_uniform(r, 0, 5) : -c->from);
    if (random_index(r, 8) == 0)
        c->first = INFINITY;
    c->born = random_uniform(r, -20, 0);
    c->fresh = random_index(r, 2);
    w->x[i][COURSE_STANDING] = maybe(r, 1e-7, 1e-2);
    w->x[i][COURSE_RATE] = random_log_uniform(r, 1e-6, 0.3);
    w->x[i][COURSE_ENDING] = maybe(r, 0.01, 12);
    w->x[i][COURSE_LEFT] = maybe(r, 1e-5, 0.3);
    w->x[i][COURSE_UNRESET] = random_index(r, 3) ? 0 : random_log_uniform(r, 1e-6, 0.05);
    w->at[i] = c;
}

static void draw(struct random *r, struct world *w)
{
    static const struct window windows[] = {{0, 1}, {3, 4}, {0, 12}, {0.25, 2.635}, {11, 12}};
    memset(w, 0, sizeof *w);
    w->n = (size_t)random_range(r, 1, 14);
    w->d = draw_diagram(r, w->n);
    for (size_t i = 0; i < w->n; i++) {
        w->p[i] = random_log_uniform(r, 1e-9, 0.5);
        w->q[i] = 1 - w->p[i];
        if (random_index(r, 5) && i < 12)
            draw_course(r, w, i);
    }
    w->n_windows = (size_t)random_range(r, 1, 3);
    for (size_t k = 0; k < w->n_windows; k++)
        w->window[k] = random_pick(r, windows);
}

/* ---- the oracle ---- */

static long double last_reset(const struct course *c, long double t)
{
    long double reset = c->first;
    if (t < reset)
        return c->from;
    while (reset + c->every <= t)
        reset += c->every;
    return reset;
}

/* The probability of false, in the stretch in which `inside` lies. */
static long double false_at(const struct world *w, size_t i, long double t, long double inside)
{
    const struct course *c = &w->course[i];
    const double *x = w->x[i];
    long double start = inside < c->first && c->fresh ? 0 : x[COURSE_LEFT];
    long double s = (long double)x[COURSE_RATE] + x[COURSE_ENDING];
    long double u = (long double)x[COURSE_UNRESET] + x[COURSE_ENDING];
    long double since = t - last_reset(c, inside), age = t - c->born;
    long double h = start * expl(-s * since), m = 0;
    h += s > 0 ? -x[COURSE_RATE] / s * expm1l(-s * since) : 0;
    m += u > 0 ? -x[COURSE_UNRESET] / u * expm1l(-u * age) : 0;
    return (1 - (long double)x[COURSE_STANDING]) * (1 - h) * (1 - m);
}

static long double true_at(const struct world *w, size_t i, long double t, long double inside)
{
    const struct course *c = &w->course[i];
    const double *x = w->x[i];
    long double start = inside < c->first && c->fresh ? 0 : x[COURSE_LEFT];
    long double s = (long double)x[COURSE_RATE] + x[COURSE_ENDING];
    long double u = (long double)x[COURSE_UNRESET] + x[COURSE_ENDING];
    long double since = t - last_reset(c, inside), age = t - c->born, st = x[COURSE_STANDING];
    long double h = start * expl(-s * since), m = 0;
    h += s > 0 ? -x[COURSE_RATE] / s * expm1l(-s * since) : 0;
    m += u > 0 ? -x[COURSE_UNRESET] / u * expm1l(-u * age) : 0;
    return st + h + m - st * h - st * m - h * m + st * h * m;
}

static long double root_at(const struct world *w, size_t root, long double t, long double inside)
{
    double p[MOST], q[MOST], results[ROOTS], work[4096];
    ck_assert(w->d->n_nodes + 2 <= 4096);
    for (size_t i = 0; i < w->n; i++) {
        p[i] = w->at[i] ? (double)true_at(w, i, t, inside) : w->p[i];
        q[i] = w->at[i] ? (double)false_at(w, i, t, inside) : w->q[i];
    }
    diagram_evaluate(w->d, p, q, work, results);
    return results[root];
}

struct part {
    const struct world *w;
    size_t root;
    long double inside;
};

/* Adaptive Simpson with Richardson's last step. */
static long double adapt(const struct part *f, long double a, long double b, long double fa,
                         long double fm, long double fb, long double tolerance, int depth)
{
    long double m = (a + b) / 2;
    long double left = root_at(f->w, f->root, (a + m) / 2, f->inside);
    long double right = root_at(f->w, f->root, (m + b) / 2, f->inside);
    long double whole = (b - a) / 6 * (fa + 4 * fm + fb);
    long double halves = (b - a) / 12 * (fa + 4 * left + 2 * fm + 4 * right + fb);
    if (depth == 0 || fabsl(halves - whole) <= tolerance * fabsl(halves))
        return halves + (halves - whole) / 15;
    return adapt(f, a, m, fa, left, fm, tolerance, depth - 1) +
           adapt(f, m, b, fm, right, fb, tolerance, depth - 1);
}

static long double next_cut(const struct world *w, long double at, long double end)
{
    for (size_t i = 0; i < w->n; i++) {
        if (!w->at[i] || isinf(w->course[i].first))
            continue;
        long double reset = w->course[i].first;
        while (reset <= at + 1e-12L)
            reset += w->course[i].every;
        end = fminl(end, reset);
    }
    return end;
}

static long double oracle(const struct world *w, struct window window, size_t root)
{
    long double total = 0;
    for (long double at = window.from, end; at < window.to; at = end) {
        end = next_cut(w, at, window.to);
        struct part f = {w, root, (at + end) / 2};
        total +=
            adapt(&f, at, end, root_at(w, root, at, f.inside), root_at(w, root, f.inside, f.inside),
                  root_at(w, root, end, f.inside), 1e-11L, 30);
    }
    return total / ((long double)window.to - window.from);
}

START_TEST(averages_equal_adaptive_quadrature)
{
    struct random r = random_seed(2385);
    for (int n = 0; n < 150; n++) {
        teardown(), setup();
        struct world w;
        draw(&r, &w);
        double got[4 * ROOTS];
        values(&w, got);
        for (size_t k = 0; k < w.n_windows * ROOTS; k++) {
            long double want = oracle(&w, w.window[k / ROOTS], k % ROOTS);
            ck_assert_msg(close(got[k], want, 1e-11), "world %d, result %zu: %.17g, not %.17Lg", n,
                          k, got[k], want);
        }
    }
}
END_TEST

/* ---- closed forms and known values ---- */

static const struct course yearly = {.from = 0, .first = 0, .every = 1};

static void one_part(struct world *w, struct course c, double rate, double ending)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun f = diagram_variable(b, 0);
    memset(w, 0, sizeof *w);
    w->d = diagram_freeze(arena, b, 1, &f);
    w->n = w->n_windows = 1;
    w->course[0] = c;
    w->at[0] = &w->course[0];
    w->x[0][COURSE_RATE] = rate;
    w->x[0][COURSE_ENDING] = ending;
}

static long double tested_alone(long double x)
{
    return 1 + expm1l(-x) / x;
}

START_TEST(one_part_alone)
{
    static const double rates[] = {1e-3, 0.01, 0.3, 2.385, 40};
    for (size_t i = 0; i < sizeof rates / sizeof *rates; i++) {
        struct world w;
        double got;
        one_part(&w, yearly, rates[i], 0);
        w.window[0] = (struct window){2, 5};
        values(&w, &got);
        ck_assert_msg(close(got, tested_alone(rates[i]), 1e-12), "%g: %.17g", rates[i], got);
    }
}
END_TEST

/* Ended at demands, too: r/s (1 - (1 - e^-sT)/(sT)), however fast it dies away. */
START_TEST(fast_exponents_die_away)
{
    static const double endings[] = {3, 30, 1e3, 1e5, 1e9};
    for (size_t i = 0; i < sizeof endings / sizeof *endings; i++) {
        struct world w;
        double got;
        one_part(&w, yearly, 0.01, endings[i]);
        w.window[0] = (struct window){0, 3};
        values(&w, &got);
        long double s = 0.01 + (long double)endings[i];
        ck_assert_msg(close(got, 0.01 / s * tested_alone(s), 1e-11), "%g: %.17g", endings[i], got);
    }
    struct world w;
    double got;
    one_part(&w, (struct course){.from = 0, .first = INFINITY}, 0, 12);
    w.x[0][COURSE_LEFT] = 0.1;
    w.window[0] = (struct window){0, 50};
    values(&w, &got);
    ck_assert_msg(close(got, -0.1L * expm1l(-600) / 600, 1e-11), "%.17g", got);
    w.window[0] = (struct window){5, 6}; /* 1e-27 keeps its digits */
    values(&w, &got);
    ck_assert(close(got, 0.1L * expl(-60) * -expm1l(-12) / 12, 1e-11));
}
END_TEST

/* Computed apart: the rate of demands that find it times the average. */
START_TEST(found_by_tests_and_demands)
{
    struct world w;
    double got;
    one_part(&w, (struct course){.from = 0, .first = 0, .every = 4}, 0.01, 3);
    w.window[0] = (struct window){0, 4};
    values(&w, &got);
    ck_assert(fabs(3 * got - 0.00913898) < 5e-9);
}
END_TEST

static void two_parts(struct world *w, double second)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun both = diagram_and(b, diagram_variable(b, 0), diagram_variable(b, 1));
    one_part(w, yearly, 1e-3, 0);
    w->d = diagram_freeze(arena, b, 1, &both);
    w->n = 2;
    w->course[1] = (struct course){.from = second - 1, .first = second, .every = 1};
    w->at[1] = &w->course[1];
    w->x[1][COURSE_RATE] = 1e-3;
    w->window[0] = (struct window){0, 1};
}

/* To leading order 1/3 and 5/24 of (rate times interval) squared; Rausand (2014), ch. 8, from
 * memory; the exact values are worked out from the integrals by hand. */
START_TEST(two_parts_together_and_staggered)
{
    struct world w;
    double got;
    long double x = 1e-3L, together = 1 + 2 * expm1l(-x) / x - expm1l(-2 * x) / (2 * x);
    two_parts(&w, 0);
    values(&w, &got);
    ck_assert(close(got, together, 1e-11));
    ck_assert(fabs(got / 1e-6 - 1.0 / 3) < 3e-4);
    /* 1 - 2 (1 - e^-x)/x + e^(-x/2) (1 - e^-x)/x */
    long double staggered = 1 + (2 - expl(-x / 2)) * expm1l(-x) / x;
    two_parts(&w, 0.5);
    values(&w, &got);
    ck_assert(close(got, staggered, 1e-11));
    ck_assert(fabs(got / 1e-6 - 0.208208) < 5e-7);
}
END_TEST

/* Two that are built alike but for their intervals, a common supply and a common last element:
 * computed apart. */
START_TEST(two_with_a_common_supply)
{
    struct diagram_builder *b = diagram_builder_new(arena);
    bfun v[4];
    for (uint32_t i = 0; i < 4; i++)
        v[i] = diagram_variable(b, i);
    bfun none = diagram_or(b, diagram_or(b, v[2], v[3]), diagram_and(b, v[0], v[1]));
    struct world w = {.n = 4, .n_windows = 1, .window = {{0, 12}}};
    static const double rates[] = {0.001, 0.03, 0.02}, every[] = {4, 6, 1};
    w.d = diagram_freeze(arena, b, 1, &none);
    for (int i = 0; i < 3; i++) {
        w.course[i] = (struct course){.from = 0, .first = 0, .every = every[i]};
        w.at[i] = &w.course[i];
        w.x[i][COURSE_RATE] = rates[i];
    }
    w.p[3] = 2.5e-3, w.q[3] = 1 - 2.5e-3;
    double got;
    values(&w, &got);
    ck_assert_msg(fabs(got - 0.0125850) < 5e-8, "%.9g", got);
}
END_TEST

/* Twelve in series and in parallel with one that hardly ever allows a shorter way. */
START_TEST(many_may_outweigh_few)
{
    enum { N = 12 };
    static const double doors[] = {1e-3, 1e-9, 1e-15, 0};
    for (size_t k = 0; k < sizeof doors / sizeof *doors; k++) {
        struct diagram_builder *b = diagram_builder_new(arena);
        bfun all = BFUN_TRUE;
        struct world w = {.n = N + 1, .n_windows = 1, .window = {{0, 1}}};
        for (uint32_t i = 0; i < N; i++) {
            all = diagram_and(b, all, diagram_variable(b, i));
            w.course[i] = yearly;
            w.at[i] = &w.course[i];
            w.x[i][COURSE_RATE] = 0.1 + 0.01 * i;
        }
        bfun way = diagram_and(b, diagram_variable(b, 0), diagram_variable(b, N));
        bfun roots[ROOTS] = {diagram_or(b, all, way), all, way};
        w.d = diagram_freeze(arena, b, ROOTS, roots);
        w.p[N] = doors[k], w.q[N] = 1 - doors[k];
        double got[ROOTS];
        values(&w, got);
        for (size_t i = 0; i < ROOTS; i++)
            ck_assert_msg(close(got[i], oracle(&w, w.window[0], i), 1e-11), "%g, %zu: %.17g",
                          doors[k], i, got[i]);
    }
}
END_TEST

/* Instants that differ by rounding are one; windows that begin or end at resets; shifted ones. */
START_TEST(cuts_may_coincide)
{
    struct world w;
    double got[4];
    one_part(&w, (struct course){.from = 0, .first = 0.1, .every = 0.1, .fresh = true}, 0.3, 0);
    w.n_windows = 3;
    w.window[0] = (struct window){0, 1};
    w.window[1] = (struct window){7.0 * 0.1, 12 * 0.1};
    w.window[2] = (struct window){1000, 1001};
    values(&w, got);
    for (int k = 0; k < 3; k++)
        ck_assert_msg(close(got[k], tested_alone(0.03L), 1e-11), "%d: %.17g", k, got[k]);
    two_parts(&w, 0.1 + 0.2); /* 4e-17 beside 0.3 */
    w.course[0].first = 0.3 - 1, w.course[0].from = -1;
    values(&w, got);
    long double x = 1e-3L;
    ck_assert(close(got[0], 1 + 2 * expm1l(-x) / x - expm1l(-2 * x) / (2 * x), 1e-11));
}
END_TEST

START_TEST(what_does_not_change_is_exact)
{
    struct world w;
    double got[ROOTS];
    one_part(&w, yearly, 0.3, 0);
    w.at[0] = NULL;
    w.p[0] = 0.3, w.q[0] = 0.7;
    w.window[0] = (struct window){0.1, 17.3};
    values(&w, got);
    ck_assert(got[0] == 0.3);
    struct diagram_builder *b = diagram_builder_new(arena);
    w.d = diagram_freeze(arena, b, 2, (bfun[]){BFUN_TRUE, BFUN_FALSE});
    values(&w, got);
    ck_assert(got[0] == 1 && got[1] == 0);
}
END_TEST

START_TEST(too_many_resets_have_no_value)
{
    struct world w;
    double got;
    one_part(&w, (struct course){.from = 0, .first = 0, .every = 1e-7}, 0.3, 0);
    w.window[0] = (struct window){0, 1};
    values(&w, &got);
    ck_assert(isnan(got));
    w.course[0].every = 1e-3;
    w.x[0][COURSE_RATE] = INFINITY;
    values(&w, &got);
    ck_assert(isnan(got));
}
END_TEST

/* ---- again and again ---- */

enum { VERSIONS = 3 };

/* A world and versions of some of its courses. */
struct mixed {
    struct world w;
    double weight[MOST][VERSIONS], x[MOST][VERSIONS][COURSE_ARGS];
    struct mixture mixture[MOST];
    bool changed[MOST];
};

static struct averaged mixed_averaged(const struct mixed *m, enum isa isa)
{
    struct averaged what = averaged(&m->w);
    what.mixture = m->mixture;
    what.isa = isa;
    return what;
}

/* Rates from hardly ever to all the time: other rules, numbers of points, exponents that fade. */
static void redraw_course(struct random *r, struct mixed *m, size_t i)
{
    double *x = m->w.x[i];
    x[COURSE_RATE] = random_log_uniform(r, 1e-9, 3);
    x[COURSE_ENDING] = maybe(r, 1e-3, 2000);
    x[COURSE_STANDING] = maybe(r, 1e-7, 1e-2);
    for (int k = 0; k < VERSIONS; k++) {
        memcpy(m->x[i][k], x, sizeof m->x[i][k]);
        m->x[i][k][COURSE_RATE] *= random_log_uniform(r, 0.1, 10);
        m->weight[i][k] = k < 2 ? 0.25 : 0.5;
    }
}

/* Other values of some variables, of all in the end. */
static void redraw(struct random *r, struct mixed *m)
{
    bool all = random_index(r, 4) == 0;
    for (size_t i = 0; i < m->w.n; i++) {
        m->changed[i] = all || random_index(r, 3) == 0;
        if (m->changed[i] && m->w.at[i])
            redraw_course(r, m, i);
        else if (m->changed[i]) {
            m->w.p[i] = random_log_uniform(r, 1e-9, 0.5);
            m->w.q[i] = 1 - m->w.p[i];
        }
    }
}

static void draw_mixed(struct random *r, struct mixed *m)
{
    memset(m, 0, sizeof *m);
    draw(r, &m->w);
    for (size_t i = 0; i < m->w.n; i++) {
        if (!m->w.at[i])
            continue;
        redraw_course(r, m, i);
        if (random_index(r, 3) == 0)
            m->mixture[i] =
                (struct mixture){VERSIONS, m->weight[i], (const double(*)[COURSE_ARGS])m->x[i]};
    }
}

static void same_bytes(const struct mixed *m, const double *got, const double *want, int n)
{
    size_t size = m->w.n_windows * ROOTS * sizeof *got;
    ck_assert_msg(memcmp(got, want, size) == 0, "world %d", n);
}

START_TEST(instruction_sets_give_the_same_bytes)
{
    struct random r = random_seed(58);
    struct mixed m;
    ck_assert(isa_runs(ISA_plain));
    for (int n = 0; n < 300; n++) {
        teardown(), setup();
        double want[4 * ROOTS], got[4 * ROOTS];
        draw_mixed(&r, &m);
        struct averaged what = mixed_averaged(&m, ISA_plain);
        average_values(arena, &what, want);
        for (int i = 0; i < ISA_COUNT; i++)
            if (isa_runs((enum isa)i)) {
                what.isa = (enum isa)i;
                average_values(arena, &what, got);
                same_bytes(&m, got, want, n);
            }
    }
}
END_TEST

/* After others, some of the values new, by whatever instruction set: as from the beginning. */
START_TEST(what_was_asked_before_does_not_matter)
{
    struct random r = random_seed(59);
    struct mixed m;
    for (int n = 0; n < 60; n++) {
        teardown(), setup();
        double want[4 * ROOTS], got[4 * ROOTS];
        draw_mixed(&r, &m);
        struct averaged what = mixed_averaged(&m, ISA_plain);
        struct averages *v = averages_new(arena, &what);
        for (int k = 0; k < 20; k++, redraw(&r, &m)) {
            what.isa = random_index(&r, 2) ? isa_best() : ISA_plain;
            averages_take(v, &what, k ? m.changed : NULL, got);
            average_values(arena, &what, want);
            same_bytes(&m, got, want, n);
        }
    }
}
END_TEST

/* What has no value leaves nothing behind. */
START_TEST(a_value_follows_where_there_was_none)
{
    struct random r = random_seed(60);
    struct mixed m;
    double want[4 * ROOTS], got[4 * ROOTS];
    do
        draw_mixed(&r, &m);
    while (!m.w.at[0] || m.mixture[0].n);
    struct averaged what = mixed_averaged(&m, isa_best());
    struct averages *v = averages_new(arena, &what);
    average_values(arena, &what, want);
    double rate = m.w.x[0][COURSE_RATE];
    for (int k = 0; k < 3; k++) {
        m.w.x[0][COURSE_RATE] = k % 2 ? rate : INFINITY;
        m.changed[0] = true;
        averages_take(v, &what, k ? m.changed : NULL, got);
        ck_assert(k % 2 ? !isnan(got[0]) : isnan(got[0]));
        if (k % 2)
            same_bytes(&m, got, want, k);
    }
}
END_TEST

/* A block of the least size, again and again, until nothing is left of an arena whose seam refuses
 * more. */
static void exhaust(struct arena *a, struct failmem *f)
{
    jmp_buf full;
    f->fail_at = f->allocations;
    if (setjmp(full) == 0) {
        arena_guard(a, &full);
        for (;;)
            arena_alloc(a, 1);
    }
    f->failed = 0;
}

/* Many windows, so that some worlds keep all, others a part. */
static void lengthen(struct mixed *m, struct window *windows, size_t n)
{
    for (size_t k = 0; k < n; k++)
        windows[k] = (struct window){(double)k, (double)k + 1};
    m->w.n_windows = n;
}

static void take_often(struct random *r, struct averages *v, struct mixed *m, struct averaged *what,
                       double *results)
{
    for (int k = 0; k < 100; k++) {
        redraw(r, m);
        averages_take(v, what, m->changed, results);
    }
}

START_TEST(nothing_is_allocated_after_the_first_time)
{
    enum { YEARS = 120 };
    static struct window windows[YEARS];
    static double results[YEARS * ROOTS];
    static struct mixed m;
    struct random r = random_seed(61);
    for (int n = 0; n < 20; n++) {
        teardown(), setup();
        draw_mixed(&r, &m);
        lengthen(&m, windows, n % 2 ? 3 : YEARS);
        struct failmem f;
        failmem_init(&f, FAILMEM_NEVER);
        struct arena *a = arena_new(&f.mem);
        struct averaged what = mixed_averaged(&m, isa_best());
        what.windows.at = windows;
        struct averages *v = averages_new(a, &what);
        averages_take(v, &what, NULL, results);
        /* Of an arena's blocks less than half may be empty. */
        ck_assert_uint_le(f.bytes / 2, AVERAGES_KEEP + 420 * m.w.d->n_nodes + 4096 * (m.w.n + 1));
        exhaust(a, &f);
        jmp_buf asked;
        if (setjmp(asked))
            ck_abort_msg("asked for memory");
        arena_guard(a, &asked);
        take_often(&r, v, &m, &what, results);
        ck_assert_uint_eq(f.failed, 0);
        arena_free(a);
        failmem_check(&f);
    }
}
END_TEST

/* ---- slopes ---- */

static double weighted(const struct world *w, const double *weight)
{
    double results[4 * ROOTS], total = 0;
    values(w, results);
    for (size_t k = 0; k < w->n_windows * ROOTS; k++)
        total += weight[k] * results[k];
    return total;
}

/* Fourth-order central difference. */
static double difference(struct world *w, double *x, const double *weight)
{
    double was = *x, h = 1e-3 * was, y[4];
    for (int k = 0; k < 4; k++) {
        static const int steps[] = {-2, -1, 1, 2};
        *x = was + steps[k] * h;
        y[k] = weighted(w, weight);
    }
    *x = was;
    return (y[0] - 8 * y[1] + 8 * y[2] - y[3]) / (12 * h);
}

/* Arguments that are 0 have no two sides; the others are compared on the scale of the result. */
START_TEST(slopes_match_differences)
{
    struct random r = random_seed(54);
    int compared = 0;
    for (int n = 0; n < 60; n++) {
        teardown(), setup();
        struct world w;
        draw(&r, &w);
        double weight[4 * ROOTS], by[MOST][COURSE_ARGS] = {0};
        for (size_t k = 0; k < 4 * ROOTS; k++)
            weight[k] = random_uniform(&r, 0.2, 3);
        struct averaged what = averaged(&w);
        average_slopes(arena, &what, weight, &(struct average_slopes){NULL, NULL, by});
        double total = weighted(&w, weight);
        for (size_t i = 0; i < w.n; i++)
            for (int k = 0; k < COURSE_ARGS; k++) {
                double *x = &w.x[i][k];
                if (!w.at[i] || *x == 0)
                    continue;
                double want = difference(&w, x, weight);
                ck_assert_msg(fabs(by[i][k] - want) <= 1e-8 * (fabs(want) + 1e-2 * total / *x),
                              "world %d, %zu %d: %.12g, not %.12g", n, i, k, by[i][k], want);
                compared += fabs(want) * *x > 1e-3 * total;
            }
    }
    ck_assert_int_gt(compared, 150);
}
END_TEST

static double weighted_with(struct world *w, size_t i, double p, const double *weight)
{
    struct world set = *w;
    for (size_t k = 0; k < w->n; k++)
        set.at[k] = w->at[k] ? &set.course[k] : NULL;
    set.at[i] = NULL;
    set.p[i] = p, set.q[i] = 1 - p;
    return weighted(&set, weight);
}

START_TEST(gains_and_shares_are_differences)
{
    struct random r = random_seed(55);
    for (int n = 0; n < 60; n++) {
        teardown(), setup();
        struct world w;
        draw(&r, &w);
        double weight[4 * ROOTS], gain[MOST] = {0}, share[MOST] = {0};
        for (size_t k = 0; k < 4 * ROOTS; k++)
            weight[k] = random_uniform(&r, -2, 3);
        struct averaged what = averaged(&w);
        average_slopes(arena, &what, weight, &(struct average_slopes){gain, share, NULL});
        double total = weighted(&w, weight);
        for (size_t i = 0; i < w.n; i++) {
            double with = weighted_with(&w, i, 1, weight);
            double without = weighted_with(&w, i, 0, weight), scale = fabs(with) + fabs(without);
            ck_assert(fabs(gain[i] - (with - without)) <= 1e-10 * scale);
            ck_assert(fabs(share[i] - (total - without)) <= 1e-10 * (fabs(total) + scale));
        }
    }
}
END_TEST

/* ---- in the graph ---- */

static const struct dim number = {{0}}, year = {{0, 0, 1}};

struct placed {
    struct graph *g;
    struct eval *v;
    node_id args[MOST], diagram, root;
};

static node_id input(struct placed *b, uint32_t i, double mean, struct dim dim)
{
    return graph_input(b->g, i, mean, dim);
}

/* The world as a graph whose root is a sum over all picks. */
static struct placed place(const struct world *w, const double *weight)
{
    struct placed b = {.g = graph_new(arena)};
    struct dim rate = dim_divide(number, year);
    b.v = eval_new(arena, b.g);
    graph_section_begin(b.g, 0);
    for (uint32_t i = 0; i < w->n; i++) {
        node_id x[COURSE_ARGS];
        for (uint32_t k = 0; k < COURSE_ARGS; k++)
            x[k] = input(&b, COURSE_ARGS * i + k, w->x[i][k],
                         k == COURSE_STANDING || k == COURSE_LEFT ? number : rate);
        b.args[i] =
            w->at[i] ? graph_course(b.g, w->at[i], x) : input(&b, 1000 + i, w->p[i], number);
    }
    b.diagram =
        graph_diagram_over(b.g, w->d, w->n, b.args, &(struct windows){w->n_windows, w->window});
    node_id terms[4 * ROOTS];
    for (uint32_t k = 0; k < w->n_windows * ROOTS; k++)
        terms[k] = graph_op2(b.g, OP_MULTIPLY, graph_const(b.g, weight[k], number),
                             graph_pick_in(b.g, b.diagram, k / ROOTS, k % ROOTS));
    b.root = graph_op(b.g, OP_SUM, w->n_windows * ROOTS, terms);
    ck_assert_int_eq(eval_point(b.v, NULL, NULL), OHMEN_OK);
    return b;
}

static double *derivatives(struct eval *v, const struct graph *g, node_id root)
{
    double *derivative = NEW_ARRAY(arena, graph_size(g), double);
    eval_backward(v, root, derivative);
    return derivative;
}

/* The node against its expansion: value and every derivative. */
START_TEST(nodes_equal_their_expansion)
{
    struct random r = random_seed(56);
    for (int n = 0; n < 12; n++) {
        teardown(), setup();
        struct world w;
        do
            draw(&r, &w);
        while (w.n > 6 || w.d->n_nodes > 20);
        double weight[4 * ROOTS];
        for (size_t k = 0; k < 4 * ROOTS; k++)
            weight[k] = random_uniform(&r, 0.2, 3);
        struct placed b = place(&w, weight);
        double *got = derivatives(b.v, b.g, b.root), value = eval_value(b.v, b.root);
        node_id lowered = graph_lower(b.g, b.g, b.root);
        ck_assert_int_eq(eval_point(b.v, NULL, NULL), OHMEN_OK);
        ck_assert(close(eval_value(b.v, lowered), value, 1e-9));
        double *want = derivatives(b.v, b.g, lowered);
        for (node_id i = 0; i < b.diagram; i++) {
            const struct graph_node *node = graph_at(b.g, i);
            if (node->op == OP_INPUT && node->constant > 0)
                ck_assert_msg(fabs(got[i] - want[i]) <=
                                  1e-6 * (fabs(want[i]) + 1e-3 * value / node->constant),
                              "world %d, node %u: %g, not %g", n, i, got[i], want[i]);
        }
    }
}
END_TEST

START_TEST(effects_are_those_of_the_last_derivatives)
{
    struct random r = random_seed(57);
    struct world w;
    draw(&r, &w);
    double weight[4 * ROOTS], gain[MOST], share[MOST], total = 0;
    for (size_t k = 0; k < 4 * ROOTS; k++)
        weight[k] = random_uniform(&r, -2, 3);
    struct placed b = place(&w, weight);
    derivatives(b.v, b.g, b.root);
    eval_effects(b.v, b.diagram, gain, share);
    total = weighted(&w, weight);
    for (size_t i = 0; i < w.n; i++) {
        double without = weighted_with(&w, i, 0, weight);
        ck_assert(fabs(gain[i] - (weighted_with(&w, i, 1, weight) - without)) <= 1e-10);
        ck_assert(fabs(share[i] - (total - without)) <= 1e-10);
    }
    node_id d = graph_diagram(b.g, w.d, w.n, b.args), pick = graph_pick(b.g, d, 0);
    ck_assert_uint_ne(d, b.diagram);
    ck_assert_int_eq(eval_point(b.v, NULL, NULL), OHMEN_OK);
    double *derivative = derivatives(b.v, b.g, pick);
    eval_effects(b.v, d, gain, share);
    for (size_t i = 0; i < w.n; i++) {
        ck_assert(close(gain[i], derivative[b.args[i]], 1e-15));
        ck_assert(close(share[i], derivative[b.args[i]] * eval_value(b.v, b.args[i]), 1e-15));
    }
    eval_effects(b.v, b.diagram, gain, share); /* is no part of the last root */
    for (size_t i = 0; i < w.n; i++)
        ck_assert(gain[i] == 0 && share[i] == 0);
}
END_TEST

static Suite *average_suite(void)
{
    Suite *s = suite_create("average");
    TCase *t = tcase_create("average");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, rules_are_those_of_the_polynomials);
    tcase_add_test(t, averages_equal_adaptive_quadrature);
    tcase_add_test(t, one_part_alone);
    tcase_add_test(t, fast_exponents_die_away);
    tcase_add_test(t, found_by_tests_and_demands);
    tcase_add_test(t, two_parts_together_and_staggered);
    tcase_add_test(t, two_with_a_common_supply);
    tcase_add_test(t, many_may_outweigh_few);
    tcase_add_test(t, cuts_may_coincide);
    tcase_add_test(t, what_does_not_change_is_exact);
    tcase_add_test(t, too_many_resets_have_no_value);
    tcase_add_test(t, instruction_sets_give_the_same_bytes);
    tcase_add_test(t, what_was_asked_before_does_not_matter);
    tcase_add_test(t, a_value_follows_where_there_was_none);
    tcase_add_test(t, nothing_is_allocated_after_the_first_time);
    tcase_add_test(t, slopes_match_differences);
    tcase_add_test(t, gains_and_shares_are_differences);
    tcase_add_test(t, nodes_equal_their_expansion);
    tcase_add_test(t, effects_are_those_of_the_last_derivatives);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *runner = srunner_create(average_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
