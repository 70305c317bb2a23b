/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Known values of protection in time, entered as documents (protection_time.txt, named on the
 * command line), and the worked figures of IEC 61508-6 against integrals of this file's own. */
#include <check.h>
#include <math.h>
#include <stdio.h>
#include <string.h>

#include "loaded.h"
#include "quadrature.h"
#include "rows.h"

static const char *data_file;

static const char head[] = "register: {title: Known, currency: EUR, prices: 2027, horizon: 12 a, "
                           "discount: 0 per a, steady: no}\n";
/* The hazard of 3 per a calls on R; where R fails, it is lost. */
static const char hazard[] =
    "hazards: {H: {name: H, frequency: 3 per a, response: {main: {cleared-by: R, in: 0.1 s, "
    "outcome: none}, never: {outcome: lost}}, outcomes: {lost: {name: Lost}}}}\n";

static const struct known {
    const char *name, *text;
} registers[] = {
    {"revealed", "elements: {R: {kind: relay, undetected: 0.01 per a, test: {every: 4 a}, "
                 "revealed-by: [H]}}\n"},
    {"not-revealed", "elements: {R: {kind: relay, undetected: 0.01 per a, test: {every: 4 a}}}\n"},
    {"nine-years", "elements: {R: {kind: relay, undetected: 0.01 per a, test: {every: 4 a, last: "
                   "2018-01-01, next: 2027-07-01}}}\n"},
    {"four-years", "elements: {R: {kind: relay, undetected: 0.01 per a, test: {every: 4 a}}}\n"},
    {"staggered",
     "elements:\n  R: {kind: relay, undetected: 0.001 per a, test: {every: 1 a, last: 2026-01-01, "
     "next: 2027-01-01}}\n  S: {kind: relay, undetected: 0.001 per a, test: {every: 1 a, last: "
     "2026-07-02, next: 2027-07-02}}\nschemes: {BOTH: {any: [R, S]}}\n"},
    {"together", "elements:\n  R: {kind: relay, undetected: 0.001 per a, test: {every: 1 a}}\n  S: "
                 "{kind: relay, undetected: 0.001 per a, test: {every: 1 a}}\nschemes: {BOTH: "
                 "{any: [R, S]}}\n"},
    {"shared-dc",
     "elements:\n  R: {kind: relay, undetected: 0.001 per a, test: {every: 4 a}}\n  S: {kind: "
     "relay, undetected: 0.03 per a, test: {every: 6 a}}\n  DC: {kind: dc-supply, undetected: "
     "0.02 per a, test: {every: 1 a}}\n  Q: {kind: breaker, per-demand: 2.5e-3}\nschemes:\n  "
     "MAIN: {all: [R, DC, Q]}\n  BACKUP: {all: [S, DC, Q]}\n  EITHER: {any: [MAIN, BACKUP]}\n"},
};

static double value_of(const char *name, const char *figure)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    size_t i = 0;
    while (strcmp(registers[i].name, name) != 0)
        ck_assert_uint_lt(++i, sizeof registers / sizeof *registers);
    loaded_text(&l, a, arena_printf(a, "%s%s%s", head, registers[i].text, hazard), NULL);
    double x = loaded_value(&l, figure);
    arena_free(a);
    return x;
}

static double figure(char *inputs)
{
    char name[40], wanted[40];
    ck_assert_int_eq(sscanf(inputs, "%39s %39s", name, wanted), 2);
    return value_of(name, wanted);
}

START_TEST(known_values)
{
    ck_assert_int_eq(rows_check(data_file, figure), 7);
}
END_TEST

/* Multiplying the schemes as if they shared nothing would give a ninth of it
 * (computed: the averages of the two). */
START_TEST(shared_supply)
{
    double main = value_of("shared-dc", "MAIN.fails"),
           backup = value_of("shared-dc", "BACKUP.fails");
    ck_assert_double_eq_tol(main * backup, .00138255, 5e-9);
}
END_TEST

/* --- IEC 61508-6 --- */

/* Channels of which `votes` must work (k out of n), lambdas in 1/h, tested each T hours. The
 * figures are those of the 61508 Association's Practical guidance in the use of IEC 61508-6:2010
 * (2024), second hand. */
struct voted {
    const char *name;
    int n, votes;
    double undetected, detected, mttr, beta, beta_detected;
    double simplified; /* of the standard's equation, at these numbers */
};
static const struct voted voted[] = {
    {"valve", 2, 1, 2.1e-6, 4e-7, 120, .1, .1, 1.04876764e-3},
    {"transmitter", 3, 2, 5e-7, 8e-7, 8, .15, .15, 3.44085754e-4},
    {"cpu", 2, 1, 4.9e-9, 1.28e-6, 8, .02, .01, 5.33953676e-7},
};
static const double HOURS = 8760; /* between tests, T1 */

/* IEC 61508-6:2010, annex B.3.2.2 (from memory): average probability of failure on demand of 1oo2
 * and 2oo3, with MRT = MTTR. The channels' mean down time tCE and that of the voted group tGE. */
static double simplified(const struct voted *v)
{
    double whole = v->undetected + v->detected, du = v->undetected / whole,
           dd = v->detected / whole;
    double channel = du * (HOURS / 2 + v->mttr) + dd * v->mttr;
    double group = du * (HOURS / 3 + v->mttr) + dd * v->mttr;
    double own = (1 - v->beta_detected) * v->detected + (1 - v->beta) * v->undetected;
    int pairs = v->n == 2 ? 2 : 6;
    return pairs * own * own * channel * group + v->beta_detected * v->detected * v->mttr +
           v->beta * v->undetected * (HOURS / 2 + v->mttr);
}

/* Either of two independent things. */
static long double or_else(long double p, long double q)
{
    return p + q - p * q;
}

/* The standard's beta is that of the voted group: by IEC 61508-6:2010, table D.5, one and a half
 * times that of the channels for 2 of 3. */
static double of_channels(const struct voted *v, double beta)
{
    return v->n == 3 ? beta / 1.5 : beta;
}

/* By the same table, the sets of two and of three of n channels. */
static long double shared(const struct voted *v, int k, double beta)
{
    long double own = of_channels(v, beta);
    if (v->n == 2)
        return k == 2 ? own : 0;
    return k == 3 ? 0.5L * own : own / 3;
}

/* Not repaired yet: a steady share; undetected: since the last test t hours ago, mended at once. */
static long double down(const struct voted *v, long double share, long double share_detected,
                        long double t)
{
    return or_else(share_detected * v->detected * v->mttr, -expm1l(-share * v->undetected * t));
}

static void group_fails(void *ctx, long double t, long double *out)
{
    const struct voted *v = ctx;
    long double two = shared(v, 2, v->beta), three = shared(v, 3, v->beta);
    long double two_d = shared(v, 2, v->beta_detected), three_d = shared(v, 3, v->beta_detected);
    int pairs = v->n == 2 ? 1 : 3, hits = v->n - 1;
    long double alone = down(v, 1 - hits * two - three, 1 - hits * two_d - three_d, t);
    long double pair = down(v, two, two_d, t), all = down(v, three, three_d, t);
    /* n - votes + 1 = 2 channels down: two by themselves, or by a shock */
    *out = v->n == 2 ? alone * alone : alone * alone * (3 - 2 * alone);
    *out = or_else(*out, all);
    for (int i = 0; i < pairs; i++)
        *out = or_else(*out, pair);
}

static const char *voted_text(struct arena *a, const struct voted *v)
{
    static const char *const names[] = {"A", "A, B", "A, B, C"};
    struct text t;
    text_init(&t, a);
    text_printf(&t,
                "%stypes: {CHANNEL: {name: Channel, kind: channel, undetected: %.10g per h, "
                "detected: %.10g per h, repair: %g h}}\nelements:\n",
                head, v->undetected, v->detected, v->mttr);
    for (int i = 0; i < v->n; i++)
        text_printf(&t, "  %c: {type: CHANNEL, test: {every: 8760 h}}\n", 'A' + i);
    text_printf(&t,
                "common-cause: {CC: {of: [%s], beta: %.17g, beta-detected: %.17g}}\n"
                "schemes: {VOTE: {at-least: %d, of: [%s]}}\n",
                names[v->n - 1], of_channels(v, v->beta), of_channels(v, v->beta_detected),
                v->votes, names[v->n - 1]);
    return text_str(&t);
}

/* The standard's equations as it has them; and the register's average (of the valve 1.0149e-3),
 * which takes a failure that a test finds as mended at once: of the standard's MTTR only that of
 * detected failures. So it lies near the equations, by 4 % at most. */
START_TEST(iec_61508_6)
{
    for (size_t i = 0; i < sizeof voted / sizeof *voted; i++) {
        const struct voted *v = &voted[i];
        struct arena *a = arena_new(NULL);
        struct loaded l;
        long double integral = 0;
        ck_assert_double_eq_tol(simplified(v), v->simplified, 5e-9 * v->simplified);
        quadrature_add(group_fails, (void *)v, 1, 0, HOURS, &integral);
        loaded_text(&l, a, voted_text(a, v), NULL);
        double got = loaded_value(&l, "VOTE.fails"), expected = (double)(integral / HOURS);
        ck_assert_msg(fabs(got - expected) <= 1e-11 * expected, "%s: %.12g, integrated %.12g",
                      v->name, got, expected);
        ck_assert_msg(fabs(got / v->simplified - 1) < 0.04, "%s: %.12g", v->name, got);
        arena_free(a);
    }
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s protection_time.txt\n", argv[0]);
        return 2;
    }
    data_file = argv[1];
    Suite *s = suite_create("published protection in time");
    TCase *t = tcase_create("protection in time");
    tcase_add_test(t, known_values);
    tcase_add_test(t, shared_supply);
    tcase_add_test(t, iec_61508_6);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
