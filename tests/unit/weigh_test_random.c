/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random decisions: alternatives by trying every set, present values year by year. */
#include <math.h>

#include "loaded.h"
#include "weigh_test.h"
#include "weigh_world.h"

static struct {
    size_t alternatives, without_cost, negative, left_out, pairs, renewed, early, settled;
} met;

struct weighed {
    struct decision_world *w;
    struct loaded loaded;
    struct weighing *weighing;
    uint64_t seed;
};

static void compare(struct weighed *x, const struct alternative *alt, figure_id id,
                    long double expected, long double size, const char *what)
{
    double got = figure_value(x->loaded.figures, id);
    ck_assert_msg(fabsl(got - expected) <= 1e-12L * size, "decision %llu, %s of %s: %.17g, %.17Lg",
                  (unsigned long long)x->seed, what, alt->name, got, expected);
}

static void compare_alternative(struct weighed *x, const struct alternative *alt, unsigned set)
{
    struct present_values v = decision_worth(x->w, set);
    long double net = v.benefit - v.cost, all = v.damage + v.size;
    compare(x, alt, alt->present_damage, v.damage, all, "damage");
    compare(x, alt, alt->present_cost, v.cost, v.cost_size, "cost");
    compare(x, alt, alt->annual_cost, v.annual_cost, v.cost_size, "cost a year");
    compare(x, alt, alt->total, v.damage + v.cost, all + v.cost_size, "total");
    met.alternatives++;
    if (set == 0) {
        ck_assert(alt->net == FIGURE_NONE && alt->benefit == FIGURE_NONE);
        ck_assert_uint_eq(alt->ratio, FIGURE_NONE);
        return;
    }
    compare(x, alt, alt->benefit, v.benefit, v.size, "benefit");
    compare(x, alt, alt->net, net, v.size + v.cost_size, "net");
    met.negative += net < 0;
    ck_assert_int_eq(alt->ratio != FIGURE_NONE, v.cost > 0);
    met.without_cost += v.cost == 0;
    long double rounding = (v.size + fabsl(v.benefit) * v.cost_size / v.cost) / v.cost;
    if (v.cost > 0)
        compare(x, alt, alt->ratio, v.benefit / v.cost, rounding, "ratio");
}

/* --- which and in what order --- */

static unsigned size_of(unsigned set)
{
    unsigned n = 0;
    for (; set; set &= set - 1)
        n++;
    return n;
}

/* By size, then by name. */
static bool comes_before(const struct decision_world *w, unsigned p, unsigned q)
{
    if (size_of(p) != size_of(q))
        return size_of(p) < size_of(q);
    return text_compare(decision_name(w, p), decision_name(w, q)) < 0;
}

static size_t possible_sets(const struct decision_world *w, unsigned *sets)
{
    size_t n = 0;
    for (unsigned set = 0; set < 1u << w->n_options; set++) {
        if (!decision_possible(w, set))
            continue;
        size_t k = n++;
        for (; k > 0 && comes_before(w, set, sets[k - 1]); k--)
            sets[k] = sets[k - 1];
        sets[k] = set;
    }
    return n;
}

static void check_left_out(const struct weighed *x)
{
    const struct weighing *g = x->weighing;
    for (size_t i = 0; i < g->left_out.n; i++) {
        bool known = false;
        for (unsigned set = 1; set < 1u << x->w->n_options; set++)
            known = known || (!decision_possible(x->w, set) &&
                              text_equal(decision_name(x->w, set), g->left_out.at[i].options));
        ck_assert_msg(known, "%s", g->left_out.at[i].options);
        ck_assert_ptr_nonnull(g->left_out.at[i].why);
        met.left_out++;
    }
}

static double net_of(const struct weighed *x, size_t i)
{
    const struct alternative *alt = &x->weighing->alternatives.at[i];
    return alt->net == FIGURE_NONE ? 0 : figure_value(x->loaded.figures, alt->net);
}

static void check_order(const struct weighed *x)
{
    const struct weighing *g = x->weighing;
    for (size_t i = 0; i < g->alternatives.n; i++) {
        const struct alternative *alt = &g->alternatives.at[g->order[i]];
        ck_assert_uint_eq(alt->rank, i + 1);
        if (i == 0)
            continue;
        const struct alternative *before = &g->alternatives.at[g->order[i - 1]];
        double better = net_of(x, g->order[i - 1]), worse = net_of(x, g->order[i]);
        ck_assert(better > worse || (better == worse && text_compare(before->name, alt->name) < 0));
    }
}

static void count_set(const struct decision_world *w, unsigned set)
{
    for (size_t i = 0; i < w->n_options; i++)
        for (size_t k = 0; set >> i & 1 && k < w->n_options; k++) {
            met.renewed += k == i && w->option[i].renewed;
            met.early += k == i && w->option[i].early_for > 0;
            met.settled += k < i && set >> k & 1 && w->settled[i][k] > 0;
        }
}

static void check_decision(uint64_t seed, size_t options)
{
    static unsigned sets[1u << OPTIONS];
    struct arena *a = arena_new(NULL);
    struct weighed x = {.w = decision_random(a, seed, options), .seed = seed};
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(&x.loaded, a, decision_text(x.w), NULL);
    ohmen_status status = weigh_compile(x.loaded.figures, "D", &x.weighing, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(&x.loaded);
    weigh_rank(x.loaded.figures, x.weighing);
    size_t n = possible_sets(x.w, sets);
    ck_assert_uint_eq(x.weighing->alternatives.n, n);
    ck_assert_int_eq(x.weighing->only_pairs, options > WEIGH_ALL);
    for (size_t i = 0; i < n; i++) {
        const struct alternative *alt = &x.weighing->alternatives.at[i];
        ck_assert_str_eq(alt->name, decision_name(x.w, sets[i]));
        compare_alternative(&x, alt, sets[i]);
        count_set(x.w, sets[i]);
    }
    check_left_out(&x);
    check_order(&x);
    met.pairs += x.weighing->only_pairs;
    arena_free(a);
}

START_TEST(random_decisions)
{
    for (uint64_t seed = 1; seed <= 300; seed++)
        check_decision(seed, 1 + seed % 5);
    for (uint64_t seed = 1001; seed <= 1012; seed++)
        check_decision(seed, 7 + seed % 4); /* eight: every combination */
    ck_assert_uint_gt(met.alternatives, 2000);
    ck_assert_uint_gt(met.without_cost, 20);
    ck_assert_uint_gt(met.negative, 100);
    ck_assert_uint_gt(met.left_out, 100);
    ck_assert_uint_gt(met.pairs, 2);
    ck_assert_uint_gt(met.renewed, 500);
    ck_assert_uint_gt(met.early, 500);
    ck_assert_uint_gt(met.settled, 40);
}
END_TEST

TCase *weigh_random_case(void)
{
    TCase *t = tcase_create("random decisions");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, random_decisions);
    return t;
}
