/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What turns a decision: thresholds worked out by hand from the annuity and the numbers of small
 * registers; and registers that state the value found, through documents, figures and ranking. */
#include "decide/turn.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "loaded.h"
#include "weigh_world.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* Present value of 1 per year in the middle of each of n years. */
static double annuity(double rate, int n)
{
    long double sum = 0;
    for (int y = 0; y < n; y++)
        sum += powl(1 + (long double)rate, -(y + 0.5L));
    return (double)sum;
}

static void find(struct loaded *l, const char *text, struct weighing **w, struct turns *t)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, arena, text, NULL);
    ck_assert_msg(weigh_compile(l->figures, "D", w, &e) == OHMEN_OK, "%s", e.text);
    loaded_evaluate(l);
    weigh_rank(l->figures, *w);
    ck_assert_msg(turns_find(l->figures, *w, TURN_FAR, t, &e) == OHMEN_OK, "%s", e.text);
}

static const struct turn *turn_of(const struct turns *t, const char *name)
{
    for (size_t i = 0; i < t->list.n; i++)
        if (text_equal(t->list.at[i].name, name))
            return &t->list.at[i];
    return NULL;
}

static const char *names(const struct turns *t)
{
    struct text all;
    text_init(&all, arena);
    for (size_t i = 0; i < t->list.n; i++)
        text_printf(&all, "%s\n", t->list.at[i].name);
    return text_str(&all);
}

static void check_at(const struct turns *t, const char *name, double now, double at)
{
    const struct turn *x = turn_of(t, name);
    ck_assert_msg(x != NULL, "%s is not among\n%s", name, names(t));
    ck_assert_msg(fabs(x->at - at) <= 1e-10 * at, "%s: %.17g, by hand %.17g", name, x->at, at);
    ck_assert_msg(fabs(x->now - now) <= 1e-12 * now, "%s: now %.17g, by hand %.17g", name, x->now,
                  now);
    ck_assert_msg(x->low <= x->at && x->at <= x->high && x->high - x->low <= 1.01e-10 * x->at,
                  "%s: %.17g .. %.17g", name, x->low, x->high);
    ck_assert_double_eq(x->factor, x->at / x->now);
    ck_assert_int_eq(x->side, x->at > x->now ? TURN_ABOVE : TURN_BELOW);
    ck_assert_double_gt(x->difference, 0);
}

#define SETTINGS(discount)                                                                         \
    "register: {title: T, currency: EUR, prices: 2026, counts: [bay], horizon: 10 a, "             \
    "discount: " discount "}\n"
#define LOST(damage)                                                                               \
    "response: {never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: " \
    "c, is: " damage "}}}}"

/* --- one line each --- */

/* net = 0.8 x 0.5 x 1000 A - 900 - 20 A = 380 A - 900: the frequency is multiplied by the option,
 * and so is moved before it and behind it. */
START_TEST(a_frequency_that_is_multiplied)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    find(&l,
         SETTINGS("5 % per a") "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
             "1000 EUR") "}}\n"
                         "options: {A: {name: A, invest: 900 EUR, running: 20 EUR/a, change: "
                         "{hazards: {H: {frequency: 0.2 * was}}}}}\n"
                         "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[A.invest].A.do-nothing.above", 900, 380 * a);
    check_at(&t, "D.turns-at[A.running].A.do-nothing.above", 20, (400 * a - 900) / a);
    check_at(&t, "D.turns-at[H.frequency].A.do-nothing.below", 0.5, (900 + 20 * a) / (800 * a));
    check_at(&t, "D.turns-at[H.damage.lost.loss].A.do-nothing.below", 1000,
             (900 + 20 * a) / (0.4 * a));
    double low = 0.05, high = 1; /* of interest: 380 A(r) = 900 */
    for (int i = 0; i < 80; i++) {
        double r = (low + high) / 2;
        *(380 * annuity(r, 10) > 900 ? &low : &high) = r;
    }
    check_at(&t, "D.turns-at[register.discount].A.do-nothing.above", 0.05, low);
    ck_assert_uint_eq(t.list.n, 5);
    ck_assert(!t.shifted);
    ck_assert(turn_of(&t, "D.turns-at[A.invest].A.do-nothing.above")->is_linear);
    ck_assert(!turn_of(&t, "D.turns-at[register.discount].A.do-nothing.above")->is_linear);
    for (size_t i = 1; i < t.list.n; i++)
        ck_assert(fabs(log(t.list.at[i - 1].factor)) <= fabs(log(t.list.at[i].factor)) + 1e-15);
}
END_TEST

/* The option states the frequency anew: two inputs. net = (f - g) 1000 A - 900. */
START_TEST(a_frequency_that_is_stated_anew)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    find(&l,
         SETTINGS("5 % per a") "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
             "1000 EUR") "}}\n"
                         "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: "
                         "{frequency: 0.1 per a}}}}}\n"
                         "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[H.frequency].A.do-nothing.below", 0.5, 0.1 + 0.9 / a);
    check_at(&t, "D.turns-at[H.frequency@A].A.do-nothing.above", 0.1, 0.5 - 0.9 / a);
}
END_TEST

/* Rates behind a frequency, and the frequency that is made of them as a whole; what is known of a
 * rate. The hazard is multiplied by 0.2: net = 0.8 x 2 r x 1000 A - 900. */
START_TEST(rates_and_what_is_known_of_them)
{
    static const struct {
        const char *is;
        double mean;
        enum turn_spread spread;
    } cases[] = {
        {"0.25 per bay a", 0.25, TURN_CERTAIN},
        {"{shape: uniform, from: 0.05 per bay a, to: 0.45 per bay a}", 0.25, TURN_WITHIN},
        {"{shape: uniform, from: 0.2 per bay a, to: 0.3 per bay a}", 0.25, TURN_OUTSIDE},
    };
    double a = annuity(0.05, 10), root = 900 / (1600 * a);
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        struct loaded l;
        struct weighing *w;
        struct turns t;
        find(&l,
             arena_printf(
                 arena,
                 SETTINGS("5 %% per a") "rates: {r: {name: R, per: bay a, is: %s}}\n"
                                        "hazards: {H: {name: H, frequency: 2 bay * r, " LOST(
                                            "1000 EUR") "}}\n"
                                                        "options: {A: {name: A, invest: "
                                                        "900 EUR, change: {hazards: {H: "
                                                        "{frequency: 0.2 * was}}}}}\n"
                                                        "decisions: {D: {question: What?, "
                                                        "options: [A]}}\n",
                 cases[i].is),
             &w, &t);
        check_at(&t, "D.turns-at[r.rate].A.do-nothing.below", 0.25, root);
        check_at(&t, "D.turns-at[H.frequency].A.do-nothing.below", 0.5, 2 * root);
        ck_assert_int_eq(turn_of(&t, "D.turns-at[r.rate].A.do-nothing.below")->spread,
                         cases[i].spread);
        ck_assert_int_eq(turn_of(&t, "D.turns-at[H.frequency].A.do-nothing.below")->spread,
                         TURN_CERTAIN);
    }
}
END_TEST

/* What varies from one occurrence to the next is no lack of knowledge. */
START_TEST(what_varies_has_no_percentiles)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    find(&l,
         SETTINGS("5 % per a") "values: {v: {name: V, varies: {shape: uniform, from: 100 EUR, to: "
                               "1900 EUR}}}\n"
                               "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                   "v") "}}\n"
                                        "options: {A: {name: A, invest: 900 EUR, change: {hazards: "
                                        "{H: {frequency: 0.2 * was}}}}}\n"
                                        "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[v.value].A.do-nothing.below", 1000, 900 / (0.4 * a));
    ck_assert_int_eq(turn_of(&t, "D.turns-at[v.value].A.do-nothing.below")->spread, TURN_CERTAIN);
}
END_TEST

/* Under operating states, of which one doubles the frequency: what is stated once moves in all.
 * net = 0.8 x 0.5 (0.9 + 2 x 0.1) 1000 A - 900 = 440 A - 900. */
START_TEST(operating_states)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    find(&l,
         SETTINGS("5 % per a") "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
             "1000 EUR") "}}\n"
                         "states: {S: {name: S, varies: {b-out: 0.1, normal: rest}, when: {b-out: "
                         "{hazards: {H: {frequency: 2 * was}}}}}}\n"
                         "options: {A: {name: A, invest: 900 EUR, change: {hazards: {H: "
                         "{frequency: 0.2 * was}}}}}\n"
                         "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[A.invest].A.do-nothing.above", 900, 440 * a);
    check_at(&t, "D.turns-at[H.frequency@S=normal].A.do-nothing.below", 0.5, 900 / (880 * a));
    check_at(&t, "D.turns-at[H.damage.lost.loss@S=b-out].A.do-nothing.below", 1000,
             900 / (0.44 * a));
    ck_assert_uint_eq(t.list.n, 4); /* interest too; the share cannot be below 0 */
}
END_TEST

/* --- shares --- */

/* A relay that fails with q; the option's own with q' = 0.01. Damage 100 kEUR when it fails.
 * net = 0.1 (q - q') 1e5 A - C. The root in q' is below 1 or it is none. */
static const char *shares(const char *invest)
{
    return arena_printf(
        arena,
        SETTINGS("5 %% per a") "elements: {R: {kind: relay, per-demand: 0.05}}\n"
                               "hazards: {H: {name: H, frequency: 0.1 per a, response: {p: "
                               "{cleared-by: R, in: 0.1 s, outcome: none}, never: {outcome: "
                               "lost}}, outcomes: {lost: {name: Lost, damage: {loss: {category: c, "
                               "is: 100 kEUR}}}}}}\n"
                               "options: {A: {name: A, invest: %s, change: {elements: {R: "
                               "{per-demand: 0.01}}}}}\n"
                               "decisions: {D: {question: What?, options: [A]}}\n",
        invest);
}

START_TEST(probabilities_stay_between_0_and_1)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    find(&l, shares("2 kEUR"), &w, &t);
    check_at(&t, "D.turns-at[R.fails].A.do-nothing.below", 0.05, 0.01 + 2000 / (1e4 * a));
    check_at(&t, "D.turns-at[R.fails@A].A.do-nothing.above", 0.01, 0.05 - 2000 / (1e4 * a));
    find(&l, shares("20 kEUR"), &w, &t); /* doing nothing is best: against the best option */
    check_at(&t, "D.turns-at[R.fails].do-nothing.A.above", 0.05, 0.01 + 20000 / (1e4 * a));
    ck_assert_ptr_null(turn_of(&t, "D.turns-at[R.fails@A].do-nothing.A.below"));
    find(&l, shares("200 kEUR"), &w, &t); /* 2.6: no probability */
    ck_assert_msg(strstr(names(&t), "R.fails") == NULL, "%s", names(&t));
    check_at(&t, "D.turns-at[A.invest].do-nothing.A.below", 2e5, 400 * a);
}
END_TEST

/* The rest of a split must be a share too: net = 0.1 x 0.8 s 1e5 A - C, where s is one branch and
 * t = 0.3 the other one, so that s ends at 0.7. */
START_TEST(the_rest_is_a_share)
{
    for (int i = 0; i < 2; i++) {
        struct loaded l;
        struct weighing *w;
        struct turns t;
        double a = annuity(0.05, 10), c = i ? 0.72 : 0.65;
        char invest[32];
        find(&l,
             arena_printf(
                 arena,
                 SETTINGS("5 %% per a") "hazards: {H: {name: H, frequency: 0.1 per a, response: "
                                        "{never: {split: {bad: {share: 0.5, outcome: lost}, good: "
                                        "{share: 0.3, outcome: none}, other: {share: rest, "
                                        "outcome: none}}}}, outcomes: {lost: {name: Lost, damage: "
                                        "{loss: {category: c, is: 100 kEUR}}}}}}\n"
                                        "options: {A: {name: A, invest: %s EUR, change: {hazards: "
                                        "{H: {frequency: 0.2 * was}}}}}\n"
                                        "decisions: {D: {question: What?, options: [A]}}\n",
                 text_double(invest, 8000 * c * a)),
             &w, &t);
        const char *name = "D.turns-at[H.share.never.bad].do-nothing.A.above";
        if (i)
            ck_assert_msg(!turn_of(&t, name), "%s", names(&t));
        else
            check_at(&t, name, 0.5, c);
    }
}
END_TEST

/* --- curved --- */

/* Damage 1000 v (4 - v): net = 400 v (4 - v) A - C has two roots, 2 -+ sqrt(4 - C / (400 A)). */
START_TEST(two_roots)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10), away = sqrt(4 - 5000 / (400 * a));
    find(&l,
         SETTINGS("5 % per a") "values: {v: {name: V, is: 1.7}}\n"
                               "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
                                   "1000 EUR * v * (4 - v)") "}}\n"
                                                             "options: {A: {name: A, invest: 5000 "
                                                             "EUR, change: {hazards: {H: "
                                                             "{frequency: 0.2 * was}}}}}\n"
                                                             "decisions: {D: {question: What?, "
                                                             "options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[v.value].A.do-nothing.below", 1.7, 2 - away);
    check_at(&t, "D.turns-at[v.value].A.do-nothing.above", 1.7, 2 + away);
    ck_assert(!turn_of(&t, "D.turns-at[v.value].A.do-nothing.above")->is_linear);
}
END_TEST

/* A clearance time moves between its neighbours only: 10 kEUR/s of it. The fast row of the option
 * is at 0.2 s: the saving is 0.5 x 10 kEUR (t - 0.2 s). */
START_TEST(clearance_times_keep_their_order)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10), year = 365. * 86400;
    find(&l,
         SETTINGS("5 % per a") "elements: {R: {kind: relay, per-demand: 0}}\n"
                               "hazards: {H: {name: H, frequency: 0.5 per a, response: {p: "
                               "{cleared-by: R, in: 1 s, outcome: lost}, never: {outcome: none}}, "
                               "outcomes: {lost: {name: Lost, damage: {loss: {category: c, is: 10 "
                               "kEUR/s * clearance-time}}}}}}\n"
                               "options: {A: {name: A, invest: 20 kEUR, change: {elements: {F: "
                               "{kind: relay, per-demand: 0}}, hazards: {H: {response: {q: "
                               "{cleared-by: F, in: 0.2 s, outcome: lost}}}}}}}\n"
                               "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    check_at(&t, "D.turns-at[H.clearance-time.p].A.do-nothing.below", 1 / year,
             (0.2 + 20000 / (5000 * a)) / year);
    check_at(&t, "D.turns-at[H.clearance-time.q@A].A.do-nothing.above", 0.2 / year,
             (1 - 20000 / (5000 * a)) / year);
}
END_TEST

/* --- pairs --- */

/* A saves 400 A, B 300 A and costs less: A against doing nothing and against B; B's own figures
 * turn the second pair. */
START_TEST(against_the_second)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    double a = annuity(0.05, 10);
    const char *text = SETTINGS("5 % per a") "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
        "1000 EUR") "}}\n"
                    "options:\n"
                    "  A: {name: A, invest: 900 EUR, change: {hazards: {H: {frequency: 0.2 * "
                    "was}}}}\n"
                    "  B: {name: B, invest: 700 EUR, excludes: [A], change: {hazards: {H: "
                    "{frequency: 0.4 * was}}}}\n"
                    "decisions: {D: {question: What?, options: [A, B]}}\n";
    find(&l, text, &w, &t);
    check_at(&t, "D.turns-at[A.invest].A.B.above", 900, 700 + 100 * a);
    check_at(&t, "D.turns-at[A.invest].A.do-nothing.above", 900, 400 * a);
    check_at(&t, "D.turns-at[H.frequency].A.B.below", 0.5, 200 / (200 * a));
    check_at(&t, "D.turns-at[H.frequency].A.do-nothing.below", 0.5, 900 / (800 * a));
    ck_assert_ptr_null(turn_of(&t, "D.turns-at[B.invest].A.do-nothing.below"));
    struct turn found;
    ohmen_error e = OHMEN_ERROR_INIT;
    for (size_t i = 0; i < t.list.n; i++) {
        const char *name = t.list.at[i].name;
        ck_assert(turn_is_named(name));
        ck_assert_msg(turn_find(l.figures, name, &found, &e) == OHMEN_OK, "%s", e.text);
        ck_assert(found.at == t.list.at[i].at && found.input == t.list.at[i].input);
    }
    ck_assert_int_eq(turn_find(l.figures, "D.turns-at[A.invst].A.B.above", &found, &e),
                     OHMEN_UNKNOWN);
    ck_assert_msg(strstr(e.text, "D.turns-at[A.invest].A.B.above"), "%s", e.text);
    ck_assert(!turn_is_named("D.net-present-value.A"));
    ck_assert(!turn_is_named("H.risk@[D.turns-at[x]]"));
}
END_TEST

/* Two that are level, and a decision in which nothing is possible. */
START_TEST(nothing_to_turn)
{
    struct loaded l;
    struct weighing *w;
    struct turns t;
    find(&l,
         SETTINGS("5 % per a") "hazards: {H: {name: H, frequency: 0.5 per a, " LOST(
             "1000 EUR") "}}\n"
                         "options: {A: {name: A, change: {elements: {X: {kind: relay, per-demand: "
                         "0.5}}}}}\n"
                         "decisions: {D: {question: What?, options: [A]}}\n",
         &w, &t);
    ck_assert_uint_eq(t.list.n, 0);
}
END_TEST

/* --- through documents --- */

/* Sets the number behind an input of a random decision; false where this test knows none. */
static bool set_input(struct decision_world *d, const char *input, double x)
{
    size_t k = (size_t)strtoul(input + 1, NULL, 10);
    if (strchr(input, '@'))
        return false;
    if (input[0] == 'H' && k < HAZARDS && strstr(input, ".frequency"))
        d->frequency[k] = x;
    else if (input[0] == 'H' && k < HAZARDS && strstr(input, ".damage"))
        d->euros[k] = x;
    else if (input[0] == 'O' && strstr(input, ".invest"))
        d->option[k].invest = x;
    else if (input[0] == 'O' && strstr(input, ".running"))
        d->option[k].running = x;
    else if (text_equal(input, "register.discount"))
        d->interest = x;
    else
        return false;
    return true;
}

static double net_named(struct loaded *l, const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        if (text_equal(x->name, name))
            return x->net == FIGURE_NONE ? 0 : figure_value(l->figures, x->net);
    }
    ck_abort_msg("there is no alternative %s", name);
    return NAN;
}

/* A document that states the value has both alternatives level. */
static bool states_it(uint64_t seed, size_t options, const struct loaded *before,
                      const struct turn *t)
{
    struct loaded l;
    struct weighing *w;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct decision_world *d = decision_random(arena, seed, options);
    if (!set_input(d, figure_name(before->figures, arena, t->input), t->at))
        return false;
    loaded_text(&l, arena, decision_text(d), NULL);
    ck_assert_msg(weigh_compile(l.figures, "D", &w, &e) == OHMEN_OK, "%s", e.text);
    loaded_evaluate(&l);
    double best = net_named(&l, w, t->best->name), other = net_named(&l, w, t->other->name);
    double size = fmax(fmax(fabs(best), fabs(other)), t->difference);
    ck_assert_msg(fabs(best - other) <= 1e-8 * size, "decision %llu, %s: %.17g and %.17g",
                  (unsigned long long)seed, t->name, best, other);
    return true;
}

START_TEST(documents_that_state_the_value)
{
    size_t stated = 0, met = 0;
    for (uint64_t seed = 1; seed <= 400; seed++) {
        struct loaded l;
        struct weighing *w;
        struct turns t;
        size_t options = 1 + seed % 4;
        find(&l, decision_text(decision_random(arena, seed, options)), &w, &t);
        for (size_t i = 0; i < t.list.n; i++) {
            met++;
            stated += states_it(seed, options, &l, &t.list.at[i]);
        }
        teardown();
        setup();
    }
    ck_assert_uint_gt(met, 400);
    ck_assert_uint_gt(stated, 300);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("turn");
    TCase *t = tcase_create("turn");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, a_frequency_that_is_multiplied);
    tcase_add_test(t, a_frequency_that_is_stated_anew);
    tcase_add_test(t, rates_and_what_is_known_of_them);
    tcase_add_test(t, what_varies_has_no_percentiles);
    tcase_add_test(t, operating_states);
    tcase_add_test(t, probabilities_stay_between_0_and_1);
    tcase_add_test(t, the_rest_is_a_share);
    tcase_add_test(t, two_roots);
    tcase_add_test(t, clearance_times_keep_their_order);
    tcase_add_test(t, against_the_second);
    tcase_add_test(t, nothing_to_turn);
    tcase_add_test(t, documents_that_state_the_value);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
