/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random registers: what alternatives are worth to each perspective, to customers and to people,
 * against registers loaded from that perspective, sums year by year, and registers patched and
 * loaded anew. */
#include <math.h>

#include "figure_merge.h"
#include "worth_test.h"
#include "worth_world.h"

static struct {
    size_t alternatives, perspectives, worse_for_customers, better_for_customers, deaths;
    size_t by_hour, by_life, no_life, together, individual, in_states, growing, states;
} met;

static const double EXACT = 1e-12;

struct opened {
    struct loaded loaded;
    struct weighing *w;
};

static void open_register(struct opened *x, struct arena *a, const struct node *root,
                          const char *perspective, const char *decision)
{
    struct model_sources none = {0}, all = {0};
    struct diags d;
    ohmen_error e = OHMEN_ERROR_INIT;
    diags_init(&d, a);
    bool merged = documents_merge(a, &none, 1, &root, &all, &d);
    ck_assert_msg(merged, "%s", d.count ? diag_line(a, &d.list.at[0]) : "not merged");
    loaded_objects(&x->loaded, a, &all, perspective);
    x->loaded.figures->points_only = true;
    ohmen_status status = weigh_compile(x->loaded.figures, decision, &x->w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    loaded_evaluate(&x->loaded);
}

static double value(const struct opened *x, figure_id id)
{
    return figure_value(x->loaded.figures, id);
}

static void near(const struct opened *x, figure_id id, long double expected, long double size,
                 const char *what)
{
    double got = value(x, id);
    ck_assert_msg(fabsl(got - expected) <= EXACT * size, "%s: %.17g, not %.17Lg (of %.3Lg)",
                  figure_name(x->loaded.figures, x->loaded.arena, id), got, expected, size);
    ck_assert_msg(isfinite(got), "%s", what);
}

static void near_sum(const struct opened *x, figure_id id, struct worth_sum s, const char *what)
{
    near(x, id, s.avoided, s.size, what);
}

/* --- perspectives --- */

/* The money that goes into a net present value. */
static long double size_of(const struct opened *x, const struct alternative *alt)
{
    const struct alternative *nothing = &x->w->alternatives.at[0];
    return fabs(value(x, nothing->present_damage)) + fabs(value(x, alt->present_damage)) +
           value(x, alt->present_cost);
}

/* Here as the perspective of number p, there as the chosen one. */
static void compare_perspective(const struct opened *here, const struct opened *there, size_t i,
                                size_t p)
{
    const struct alternative *x = &here->w->alternatives.at[i], *y = &there->w->alternatives.at[i];
    long double size = size_of(there, y);
    ck_assert_str_eq(x->name, y->name);
    near(here, x->of[p].net, value(there, y->net), size, "net");
    near(here, x->of[p].benefit, value(there, y->benefit), size, "benefit");
    near(here, x->of[p].avoids, value(there, y->avoids), size, "avoids");
    ck_assert_double_eq(value(there, y->of[p].net), value(there, y->net));
    ck_assert_double_eq(value(there, y->of[p].benefit), value(there, y->benefit));
    ck_assert_double_eq(value(here, x->present_cost), value(there, y->present_cost));
    met.perspectives++;
}

static void check_perspectives(struct arena *a, const struct node *root, const char *decision)
{
    struct opened here, there;
    open_register(&here, a, root, NULL, decision);
    const struct rows *rows = &here.loaded.model->settings->perspectives;
    ck_assert_uint_eq(rows->n, 2);
    for (size_t p = 0; p < rows->n; p++) {
        open_register(&there, a, root, rows->keys[p], decision);
        ck_assert_uint_eq(here.w->alternatives.n, there.w->alternatives.n);
        for (size_t i = 1; i < here.w->alternatives.n; i++)
            compare_perspective(&here, &there, i, p);
    }
}

/* --- sums --- */

static void check_categories(struct opened *x, const struct alternative *alt, size_t p)
{
    const struct rows *rows = &x->loaded.model->settings->perspectives;
    const struct names *categories = &((const struct names *)rows->at)[p];
    struct worth_sum all = {0};
    for (size_t i = 0; i < categories->n; i++) {
        struct worth_sum one =
            worth_mean(&x->loaded, x->w, alt, PROPERTY_CATEGORY, categories->at[i]);
        all.avoided += one.avoided;
        all.size += one.size;
    }
    near_sum(x, alt->of[p].avoids, all, "categories");
}

static void check_money(struct opened *x, const struct alternative *alt)
{
    const struct rows *rows = &x->loaded.model->settings->perspectives;
    near_sum(x, alt->benefit, worth_present(&x->loaded, x->w, alt, PROPERTY_RISK, NULL), "risk");
    near_sum(x, alt->avoids, worth_mean(&x->loaded, x->w, alt, PROPERTY_RISK, NULL), "risk");
    for (size_t p = 0; p < rows->n; p++) {
        struct worth_sum s = worth_present(&x->loaded, x->w, alt, PROPERTY_BORNE, rows->keys[p]);
        long double cost = value(x, alt->present_cost);
        near_sum(x, alt->of[p].benefit, s, "borne");
        near(x, alt->of[p].net, s.avoided - cost, s.size + cost, "borne");
        check_categories(x, alt, p);
    }
}

static void check_customers(struct opened *x, const struct alternative *alt)
{
    enum property p = PROPERTY_CUSTOMER_TIME;
    near_sum(x, alt->present_time, worth_present(&x->loaded, x->w, alt, p, NULL), "time");
    near_sum(x, alt->avoids_time, worth_mean(&x->loaded, x->w, alt, p, NULL), "time");
    double time = value(x, alt->present_time), cost = value(x, alt->present_cost);
    met.better_for_customers += time > 0;
    met.worse_for_customers += time < 0;
    ck_assert_int_eq(alt->per_hour != FIGURE_NONE, time > 0 && cost > 0);
    if (alt->per_hour == FIGURE_NONE)
        return;
    near(x, alt->per_hour, cost / time, cost / time, "hour");
    met.by_hour++;
}

static void check_life(struct opened *x, const struct alternative *alt, double deaths)
{
    const struct criteria *criteria = x->loaded.model->settings->criteria;
    const struct quantity *worth =
        criteria && criteria->people ? criteria->people->per_fatality : NULL;
    double cost = value(x, alt->present_cost), benefit = value(x, alt->benefit);
    bool priced = deaths > 0 && cost > benefit;
    ck_assert_int_eq(alt->per_fatality != FIGURE_NONE, priced);
    ck_assert_int_eq(alt->disproportion != FIGURE_NONE, priced && worth);
    met.no_life += deaths > 0 && !priced;
    if (!priced)
        return;
    long double net = (long double)cost - benefit, size = (cost + fabsl(benefit)) / deaths;
    near(x, alt->per_fatality, net / deaths, size, "life");
    met.by_life++;
    if (worth) {
        double spent = expr_constant(worth->expr);
        near(x, alt->disproportion, net / deaths / spent, size / spent, "disproportion");
    }
}

static void check_deaths(struct opened *x, const struct alternative *alt)
{
    struct worth_sum present = {0}, mean = {0};
    for (size_t i = 0; i < x->w->groups.n; i++) {
        const char *group = x->w->groups.at[i].id;
        struct worth_sum p = worth_present(&x->loaded, x->w, alt, PROPERTY_FATALITIES, group);
        struct worth_sum m = worth_mean(&x->loaded, x->w, alt, PROPERTY_FATALITIES, group);
        present = (struct worth_sum){present.avoided + p.avoided, present.size + p.size};
        mean = (struct worth_sum){mean.avoided + m.avoided, mean.size + m.size};
    }
    if (x->w->groups.n == 0) {
        ck_assert_uint_eq(alt->avoids_fatalities, FIGURE_NONE);
        ck_assert_uint_eq(alt->per_fatality, FIGURE_NONE);
        return;
    }
    near_sum(x, alt->present_fatalities, present, "deaths");
    near_sum(x, alt->avoids_fatalities, mean, "deaths");
    met.deaths += present.avoided != 0;
    check_life(x, alt, value(x, alt->present_fatalities));
}

static const struct alternative *alone(const struct weighing *w, const char *option)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[i].n == 1 && text_equal(w->alternatives.at[i].name, option))
            return &w->alternatives.at[i];
    return NULL;
}

static void check_together(const struct opened *x, const struct alternative *alt)
{
    long double apart = 0, size = size_of(x, alt);
    bool all = alt->n > 1;
    for (size_t i = 0; i < alt->n && all; i++) {
        const struct alternative *one = alone(x->w, alt->options[i]);
        all = one != NULL;
        apart += one ? value(x, one->net) : 0;
        size += one ? size_of(x, one) : 0;
    }
    ck_assert_int_eq(alt->together != FIGURE_NONE, all);
    if (!all)
        return;
    near(x, alt->together, value(x, alt->net) - apart, size, "together");
    met.together++;
}

static void count_hazards(const struct weighing *w)
{
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct hazard_exports *h =
            w->hazards.at[i].now ? w->hazards.at[i].now->exports : NULL;
        met.growing += h && h->of_year;
        met.states += h && h->n_states > 0;
    }
}

static void check_sums(struct arena *a, const struct node *root, const char *decision)
{
    struct opened x;
    open_register(&x, a, root, NULL, decision);
    count_hazards(x.w);
    for (size_t i = 1; i < x.w->alternatives.n; i++) {
        const struct alternative *alt = &x.w->alternatives.at[i];
        check_money(&x, alt);
        check_customers(&x, alt);
        check_deaths(&x, alt);
        check_together(&x, alt);
        met.alternatives++;
    }
}

/* --- people --- */

/* The merge leaves operating states out; these options touch none. */
static void keep_states(struct arena *a, const struct model *base, struct model_sources *out)
{
    const struct objects *states = &base->of[KIND_STATE];
    for (size_t i = 0; i < states->n; i++)
        *array_push(a, out) =
            (struct model_source){KIND_STATE, states->at[i]->id, states->at[i]->node};
}

static double risk_anew(const struct opened *x, const struct alternative *alt, const char *group)
{
    struct model_sources sources = {0};
    struct loaded fresh;
    struct arena *a = arena_new(NULL);
    merge_options(a, x->loaded.model, alt->n, alt->options, &sources);
    keep_states(a, x->loaded.model, &sources);
    loaded_objects(&fresh, a, &sources, "all");
    fresh.figures->points_only = true;
    double risk = loaded_value(&fresh, arena_printf(a, "%s.individual-risk", group));
    arena_free(a);
    return risk;
}

static void check_people(struct arena *a, const struct node *root, const char *decision)
{
    struct opened x;
    open_register(&x, a, root, NULL, decision);
    for (size_t i = 0; i < x.w->alternatives.n; i++)
        for (size_t g = 0; g < x.w->groups.n; g++) {
            const struct alternative *alt = &x.w->alternatives.at[i];
            double now = value(&x, x.w->groups.at[g].now);
            double then = risk_anew(&x, alt, x.w->groups.at[g].id);
            near(&x, alt->individual[g], then, now + then, "risk of a person");
            met.individual += now != then;
            met.in_states += now != then && x.loaded.model->of[KIND_STATE].n > 0;
        }
}

/* --- all of it --- */

typedef void check_decision(struct arena *a, const struct node *root, const char *decision);

static void each_decision(uint64_t first, uint64_t last, check_decision *check)
{
    for (uint64_t seed = first; seed <= last; seed++) {
        struct arena *a = arena_new(NULL);
        const struct node *root = worth_register(a, seed);
        check(a, root, seed % 2 ? "D-1" : "D-2");
        arena_free(a);
    }
}

START_TEST(other_perspectives)
{
    each_decision(1, 60, check_perspectives);
    ck_assert_uint_gt(met.perspectives, 400);
}
END_TEST

START_TEST(sums_by_year)
{
    each_decision(101, 220, check_sums);
    ck_assert_uint_gt(met.alternatives, 500);
    ck_assert_uint_gt(met.better_for_customers, 100);
    ck_assert_uint_gt(met.worse_for_customers, 10);
    ck_assert_uint_gt(met.deaths, 100);
    ck_assert_uint_gt(met.by_hour, 50);
    ck_assert_uint_gt(met.by_life, 20);
    ck_assert_uint_gt(met.no_life, 20);
    ck_assert_uint_gt(met.together, 100);
    ck_assert_uint_gt(met.growing, 50);
    ck_assert_uint_gt(met.states, 20);
}
END_TEST

START_TEST(people_anew)
{
    each_decision(301, 330, check_people);
    ck_assert_uint_gt(met.individual, 50);
    ck_assert_uint_gt(met.in_states, 10);
}
END_TEST

TCase *worth_random_case(void)
{
    TCase *t = tcase_create("random registers");
    tcase_set_timeout(t, 120);
    tcase_add_test(t, other_perspectives);
    tcase_add_test(t, sums_by_year);
    tcase_add_test(t, people_anew);
    return t;
}
