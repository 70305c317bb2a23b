/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decisions in several stages against an oracle of another kind (branching_world.h): the value of
 * the root, of each alternative and of doing nothing. */
#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "branching_world.h"
#include "decide/branching.h"
#include "loaded.h"

enum { WORLDS = 250 };

static const double PART = 1e-9;

/* Magnitude of what is summed, so that a sum near 0 is told from a wrong one. */
static double size_of(const struct tree_world *w)
{
    double size = 1;
    for (size_t h = 0; h < TREE_HAZARDS; h++)
        size += w->frequency[h] * w->damage[h] * w->horizon;
    return size;
}

static void expect(const struct tree_world *w, double got, double want, const char *what,
                   const char *text)
{
    ck_assert_msg(fabs(got - want) <= PART * (fabs(want) + size_of(w)), "%s: %.17g, not %.17g\n%s",
                  what, got, want, text);
}

static struct weighing *weigh(struct loaded *l, struct arena *a, const char *text)
{
    struct weighing *w = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, a, text, NULL);
    ohmen_status status = weigh_compile(l->figures, "D", &w, &e);
    ck_assert_msg(status == OHMEN_OK, "%s\n%s", e.text, text);
    return w;
}

static double total_of(struct loaded *l, const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (text_equal(w->alternatives.at[i].name, name))
            return figure_value(l->figures, w->alternatives.at[i].total);
    return NAN;
}

static void check_alternatives(struct loaded *l, struct weighing *g, struct tree_world *w,
                               const char *text)
{
    for (size_t k = 0; k < w->n; k++) {
        const char *name = arena_printf(w->a, w->repeats ? "%s-first" : "%s", tree_branch(k));
        double total = total_of(l, g, name);
        if (!isnan(total) && !w->repeats)
            expect(w, total, tree_world_value(w, k), name, text);
    }
    expect(w, total_of(l, g, "do-nothing"), tree_world_nothing(w), "do-nothing", text);
    if (w->repeats)
        expect(w, total_of(l, g, "policy"), tree_world_value(w, SIZE_MAX), "policy", text);
}

/* False where it has too many policies. */
static bool try_world(uint64_t seed, enum tree_sort sort)
{
    bool too_many = false;
    struct arena *a = arena_new(NULL);
    struct random r = random_seed(seed);
    struct tree_world w = {.a = a, .r = &r, .too_many = &too_many};
    struct loaded l;
    const char *text = tree_world_draw(&w, sort);
    struct weighing *g =
        weigh(&l, a, arena_printf(a, "# %llu\n%s", (unsigned long long)seed, text));
    loaded_evaluate(&l);
    double best = tree_world_value(&w, SIZE_MAX);
    if (!too_many) {
        expect(&w, g->branching->points.at[0].value, best, "root", text);
        check_alternatives(&l, g, &w, text);
    }
    arena_free(a);
    return !too_many;
}

START_TEST(worth_as_the_best_of_all_policies)
{
    size_t tried = 0;
    for (uint64_t seed = 1; seed <= WORLDS; seed++)
        tried += try_world(seed, (enum tree_sort)_i);
    ck_assert_uint_ge(tried, WORLDS * 4 / 5);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("branching");
    TCase *t = tcase_create("random");
    tcase_set_timeout(t, 300);
    tcase_add_loop_test(t, worth_as_the_best_of_all_policies, 0, TREE_SORTS);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
