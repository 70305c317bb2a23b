/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random hazards: every figure against enumeration of all states in quad precision. */
#include "figure_test.h"
#include "figure_world.h"
#include "loaded.h"

/* What was met, so that the test cannot pass by meeting nothing. */
static struct {
    size_t figures, tiny, impossible, absent, timed;
} met;

/* One world as the program sees it from one perspective. */
struct seen_world {
    struct world *w;
    struct loaded loaded;
    const struct compiled *hazard;
    unsigned categories;
    uint64_t seed;
};

/* Within 1e-13 of what was enumerated; exactly 0 where it is impossible. */
static void compare(double got, quad expected, const char *what, uint64_t seed)
{
    double e = (double)expected, error = (double)(got - expected);
    ck_assert_msg((error < 0 ? -error : error) <= 1e-13 * e,
                  "world %llu, %s: %.17g, enumerated %.17g", (unsigned long long)seed, what, got,
                  e);
    met.figures++;
}

static void expect(struct seen_world *s, const char *name, quad expected)
{
    figure_id id = FIGURE_NONE;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = compiled_find(s->loaded.figures, s->hazard, name, &id, &e);
    ck_assert_msg(status == OHMEN_OK, "world %llu: %s", (unsigned long long)s->seed, e.text);
    compare(figure_value(s->loaded.figures, id), expected, name, s->seed);
}

static const char *name_of(struct seen_world *s, const char *property, size_t outcome)
{
    return arena_printf(s->w->arena, "%s.o%zu", property, outcome);
}

/* --- the event tree --- */

static void expect_ends(struct seen_world *s)
{
    struct world *w = s->w;
    quad sum = 0;
    for (size_t i = 0; i < w->n_ends; i++) {
        quad p = w->end[i].probability;
        expect(s, arena_printf(w->arena, "end.%s", w->end[i].path), p);
        met.tiny += p > 0 && p <= 1e-12;
        met.impossible += p == 0;
        sum += p;
    }
    compare(1, sum, "all ends together", s->seed);
    ck_assert_uint_eq(((struct hazard_exports *)s->hazard->exports)->n_ends, w->n_ends);
}

static void expect_schemes(struct seen_world *s)
{
    for (size_t i = 0; i < s->w->n_schemes; i++) {
        const char *name = arena_printf(s->w->arena, "S%zu.fails", i);
        compare(loaded_value(&s->loaded, name), s->w->scheme_fails[i], name, s->seed);
        met.absent += s->w->scheme[i] == NULL;
    }
}

/* --- outcomes --- */

struct outcome_sums {
    quad probability, risk; /* risk: of one hazard a year */
};

static struct outcome_sums sums_of(const struct seen_world *s, size_t outcome)
{
    struct outcome_sums sums = {0};
    for (size_t i = 0; i < s->w->n_ends; i++) {
        const struct world_end *e = &s->w->end[i];
        if (e->outcome != outcome)
            continue;
        sums.probability += e->probability;
        sums.risk += e->probability * world_damage(s->w, i, s->categories);
    }
    return sums;
}

/* Damage at each end where it depends on the clearance time, then the mean over the ends,
 * which is 0 where none is possible; else what the outcome costs wherever it comes. */
static void expect_damage(struct seen_world *s, size_t outcome, const struct outcome_sums *sums)
{
    struct world *w = s->w;
    bool timed = world_is_timed(w, outcome, s->categories);
    quad plain = 0, mean = sums->probability > 0 ? sums->risk / sums->probability : 0;
    for (size_t i = 0; i < w->n_ends; i++) {
        if (w->end[i].outcome != outcome)
            continue;
        plain = world_damage(w, i, s->categories);
        if (timed)
            expect(s, arena_printf(w->arena, "damage.o%zu.at.%s", outcome, w->end[i].path), plain);
        met.timed += timed;
    }
    struct world_end nowhere = {.outcome = outcome};
    w->end[w->n_ends] = nowhere;
    if (!timed)
        plain = world_damage(w, w->n_ends, s->categories);
    expect(s, name_of(s, "damage", outcome), timed ? mean : plain);
}

static void expect_outcomes(struct seen_world *s)
{
    quad f = s->w->frequency, damaging = 0, risk = 0;
    for (size_t o = 0; o < s->w->n_outcomes; o++) {
        struct outcome_sums sums = sums_of(s, o);
        expect(s, name_of(s, "probability", o), sums.probability);
        expect(s, name_of(s, "frequency", o), f * sums.probability);
        expect(s, name_of(s, "risk", o), f * sums.risk);
        expect_damage(s, o, &sums);
        if (world_is_damaging(s->w, o, s->categories))
            damaging += f * sums.probability;
        risk += f * sums.risk;
    }
    expect(s, "frequency", f);
    expect(s, "damaging", damaging);
    expect(s, "risk", risk);
    expect(s, "damage", damaging > 0 ? risk / damaging : 0);
}

static void look_from(struct world *w, uint64_t seed, const char *perspective, unsigned categories)
{
    struct seen_world s = {.w = w, .seed = seed, .categories = categories};
    loaded_text(&s.loaded, w->arena, world_text(w), perspective);
    s.hazard = loaded_compile(&s.loaded, loaded_variant(&s.loaded, 0, NULL), "H");
    loaded_evaluate(&s.loaded);
    expect_ends(&s);
    expect_outcomes(&s);
    expect_schemes(&s);
}

static void check_worlds(uint64_t first, size_t n, size_t least, size_t most)
{
    for (uint64_t seed = first; seed < first + n; seed++) {
        struct arena *a = arena_new(NULL);
        size_t elements = least + seed % (most - least + 1);
        struct world *w = world_random(a, seed, elements);
        world_enumerate(w);
        look_from(w, seed, "first", 3);
        look_from(w, seed, "second", 6);
        look_from(w, seed, "all", 7);
        arena_free(a);
    }
}

START_TEST(random_hazards)
{
    check_worlds(1, 400, 2, 10);
    check_worlds(1000, 12, 14, 16);
    ck_assert_uint_gt(met.figures, 20000);
    ck_assert_uint_gt(met.tiny, 100);
    ck_assert_uint_gt(met.impossible, 100);
    ck_assert_uint_gt(met.absent, 50);
    ck_assert_uint_gt(met.timed, 1000);
}
END_TEST

TCase *figure_hazard_case(void)
{
    TCase *t = tcase_create("hazards");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, random_hazards);
    return t;
}
