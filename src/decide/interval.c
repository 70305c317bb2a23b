/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What an element's test costs at each interval, and what it saves.
 *
 * Invariant: all intervals are variants of one `struct figures`, and share what they do not
 * change; hazards that cannot be evaluated under one of them are left out under all. What it makes
 * lives in the arena of the register's figures. */
#include "decide/interval.h"

#include <math.h>
#include <string.h>

#define CYCLES ", whole cycles" /* ends the name of a change */

/* --- elements --- */

static ohmen_status unknown_element(const struct figures *f, const char *id, ohmen_error *e)
{
    const struct objects *all = &f->base->of[KIND_ELEMENT];
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < all->n; i++)
        nearest_offer(&near, all->at[i]->id);
    return error_set(e, OHMEN_UNKNOWN, "there is no element \"%s\"%s", id,
                     nearest_hint(f->arena, &near));
}

/* There must be such an element, and it must have a test. */
static ohmen_status check_element(const struct figures *f, const char *id, ohmen_error *e)
{
    const struct element *x = model_get(f->base, KIND_ELEMENT, id);
    if (!x)
        return unknown_element(f, id, e);
    if (!x->test)
        return error_set(e, OHMEN_COMPUTE, "the element \"%s\" has no \"test\"", id);
    return OHMEN_OK;
}

/* --- intervals --- */

/* Round ones, in rising order. */
static const struct round_interval {
    const char *every;
    double years;
} round_intervals[] = {
    {"1 d", 1 / 365.},    {"2 d", 2 / 365.},    {"1 week", 7 / 365.}, {"2 week", 14 / 365.},
    {"1 month", 1 / 12.}, {"2 month", 2 / 12.}, {"3 month", 3 / 12.}, {"4 month", 4 / 12.},
    {"6 month", 6 / 12.}, {"9 month", 9 / 12.}, {"1 a", 1},           {"1.5 a", 1.5},
    {"2 a", 2},           {"3 a", 3},           {"4 a", 4},           {"5 a", 5},
    {"6 a", 6},           {"8 a", 8},           {"10 a", 10},         {"12 a", 12},
    {"15 a", 15},         {"20 a", 20},         {"30 a", 30},         {"40 a", 40},
};
#define N_ROUND (sizeof round_intervals / sizeof *round_intervals)

static const struct element *element_of(const struct interval_search *s)
{
    return s->element->data;
}

static const char *present_words(const struct interval_search *s)
{
    return node_get(node_get(s->element->node, "test"), "every")->text;
}

static void try_interval(struct interval_search *s, const char *every, double years, bool today)
{
    *array_push(s->figures->arena, &s->tried) = (struct tried_interval){
        .every = every, .years = years, .today = today, .tests = FIGURE_NONE};
}

/* The present interval, and round ones around it. */
static void choose_intervals(struct interval_search *s)
{
    double present = expr_constant(element_of(s)->test->every->expr);
    bool done = false;
    for (size_t i = 0; i < N_ROUND; i++) {
        const struct round_interval *r = &round_intervals[i];
        bool same = fabs(r->years - present) <= 1e-9 * present;
        if (!done && (same || r->years > present)) {
            try_interval(s, present_words(s), present, true);
            done = true;
        }
        if (!same && r->years >= INTERVAL_LEAST * present && r->years <= INTERVAL_MOST * present)
            try_interval(s, r->every, r->years, false);
    }
    if (!done)
        try_interval(s, present_words(s), present, true);
}

static ohmen_status cycle_figures(const struct figures *of, struct figures **out, ohmen_error *e)
{
    ohmen_status status = figures_new(of->arena, of->base,
                                      of->perspective ? of->perspective : "all", of->date, out, e);
    if (status == OHMEN_OK)
        (*out)->whole_cycles = true;
    return status;
}

/* --- changes --- */

/* {elements: {ELEMENT: {test: {every: T}}}} */
static const struct node *change_of(struct arena *a, const char *element, const char *every)
{
    struct place at = {.file = "change", .path = "change"};
    const char *const keys[] = {"every", "test", element, kinds[KIND_ELEMENT].section};
    struct node *node = node_scalar(a, FORM_TEXT, every, at);
    for (size_t i = 0; i < sizeof keys / sizeof *keys; i++) {
        struct node *map = node_map(a, at);
        node_add(a, map, keys[i], at, node);
        node = map;
    }
    return node;
}

static ohmen_status variant_every(struct figures *f, const char *element, const char *every,
                                  const struct variant **out, ohmen_error *e)
{
    const struct variant *base;
    const char *name = arena_printf(f->arena, "%s.test.every=%s" CYCLES, element, every);
    ohmen_status status = figures_variant(f, 0, NULL, &base, e);
    if (status == OHMEN_OK)
        status = figures_variant_with(f, base, name, change_of(f->arena, element, every), out, e);
    return status;
}

/* The variants; an interval shorter than its test is none. */
static ohmen_status make_variants(struct interval_search *s, ohmen_error *e)
{
    size_t kept = 0;
    const struct quantity *takes = element_of(s)->test->takes;
    for (size_t i = 0; i < s->tried.n; i++) {
        struct tried_interval t = s->tried.at[i];
        if (takes && expr_constant(takes->expr) > t.years && !t.today)
            continue;
        ohmen_status status = variant_every(s->figures, s->element->id, t.every, &t.variant, e);
        if (status != OHMEN_OK)
            return status;
        s->tried.at[kept++] = t;
    }
    s->tried.n = kept;
    return OHMEN_OK;
}

/* --- hazards --- */

/* Is one of its averages over years of the horizon, for want of a common cycle? */
static bool is_yearly(const struct compiled *c)
{
    const struct hazard_exports *x = c->exports;
    bool yearly = x->span.yearly;
    for (size_t i = 0; i < x->n_states && !yearly; i++)
        yearly = x->states[i].unit && is_yearly(x->states[i].unit);
    return yearly;
}

/* The hazard at every interval. */
static ohmen_status compile_hazard_at_all(struct interval_search *s, const char *id,
                                          const struct compiled **out, ohmen_error *e)
{
    for (size_t i = 0; i < s->tried.n; i++) {
        ohmen_status status = figures_compile(s->figures, s->tried.at[i].variant, id, &out[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

static void add_hazard(struct interval_search *s, const struct object *o,
                       const struct compiled *const *at_all)
{
    const struct hazard *h = o->data;
    for (size_t i = 0; i < s->tried.n; i++)
        s->tried.at[i].hazards[s->hazards.n] = at_all[i];
    *array_push(s->figures->arena, &s->hazards) =
        (struct interval_hazard){o->id, expr_uses(h->frequency->expr, EXPR_UNWANTED)};
}

static ohmen_status compile_hazards(struct interval_search *s, ohmen_error *e)
{
    struct arena *a = s->figures->arena;
    const struct objects *all = &s->figures->base->of[KIND_HAZARD];
    const struct compiled **at_all = NEW_ARRAY(a, s->tried.n, const struct compiled *);
    for (size_t i = 0; i < s->tried.n; i++)
        s->tried.at[i].hazards = NEW_ARRAY(a, all->n, const struct compiled *);
    for (size_t i = 0; i < all->n; i++) {
        ohmen_error why = OHMEN_ERROR_INIT;
        if (!variant_reaches(s->tried.at[s->today].variant, all->at[i]->id))
            continue;
        ohmen_status status = compile_hazard_at_all(s, all->at[i]->id, at_all, &why);
        if (status == OHMEN_OK)
            add_hazard(s, all->at[i], at_all);
        else if (status == OHMEN_COMPUTE)
            *array_push(a, &s->left_out) =
                (struct interval_left_out){all->at[i]->id, arena_str(a, why.text)};
        else
            return error_set(e, status, "%s", why.text);
    }
    return OHMEN_OK;
}

/* --- tests --- */

static ohmen_status compile_tests(struct interval_search *s, ohmen_error *e)
{
    for (size_t i = 0; i < s->tried.n; i++) {
        struct tried_interval *t = &s->tried.at[i];
        const struct compiled *c;
        ohmen_status status = figures_compile(s->figures, t->variant, s->element->id, &c, e);
        if (status != OHMEN_OK)
            return status;
        t->tests = compiled_figure(s->figures, c, PROPERTY_TEST_COSTS, NULL, NULL);
    }
    return OHMEN_OK;
}

/* --- the whole --- */

static void find_today(struct interval_search *s)
{
    for (size_t i = 0; i < s->tried.n; i++)
        if (s->tried.at[i].today)
            s->today = i;
}

static bool has_cycle(const struct interval_search *s, const struct tried_interval *t)
{
    for (size_t i = 0; i < s->hazards.n; i++)
        if (is_yearly(t->hazards[i]))
            return false;
    return true;
}

/* Leaves out intervals without a common cycle; the present one must have one. */
static ohmen_status drop_broken(struct interval_search *s, ohmen_error *e)
{
    size_t kept = 0;
    if (!has_cycle(s, &s->tried.at[s->today]))
        return error_set(e, OHMEN_COMPUTE,
                         "the test of \"%s\" has no common cycle with those of other elements that "
                         "is short enough to average over",
                         s->element->id);
    for (size_t i = 0; i < s->tried.n; i++)
        if (has_cycle(s, &s->tried.at[i]))
            s->tried.at[kept++] = s->tried.at[i];
    s->tried.n = kept;
    find_today(s);
    return OHMEN_OK;
}

static ohmen_status no_hazard(const struct interval_search *s, ohmen_error *e)
{
    if (s->left_out.n)
        return error_set(e, OHMEN_COMPUTE,
                         "no hazard that can be computed depends on how often \"%s\" is tested: %s",
                         s->element->id, s->left_out.at[0].why);
    return error_set(e, OHMEN_COMPUTE, "no hazard depends on how often \"%s\" is tested",
                     s->element->id);
}

static ohmen_status compile_all(struct interval_search *s, ohmen_error *e)
{
    choose_intervals(s);
    ohmen_status status = make_variants(s, e);
    if (status != OHMEN_OK)
        return status;
    find_today(s);
    status = compile_hazards(s, e);
    if (status == OHMEN_OK && s->hazards.n == 0)
        return no_hazard(s, e);
    if (status == OHMEN_OK)
        status = drop_broken(s, e);
    return status == OHMEN_OK ? compile_tests(s, e) : status;
}

ohmen_status interval_compile(const struct figures *f, const char *element,
                              struct interval_search **out, ohmen_error *e)
{
    ohmen_status status = check_element(f, element, e);
    if (status != OHMEN_OK)
        return status;
    struct interval_search *s = NEW(f->arena, struct interval_search);
    s->element = model_find(f->base, element);
    status = cycle_figures(f, &s->figures, e);
    if (status == OHMEN_OK)
        status = compile_all(s, e);
    if (status == OHMEN_OK)
        *out = s;
    return status;
}

/* --- costs --- */

static void sum_costs(const struct interval_search *s, struct tried_interval *t)
{
    t->costs = t->tests == FIGURE_NONE ? 0 : figure_value(s->figures, t->tests);
    t->faults = t->trips = 0;
    for (size_t i = 0; i < s->hazards.n; i++) {
        const struct hazard_exports *x = t->hazards[i]->exports;
        *(s->hazards.at[i].by_trips ? &t->trips : &t->faults) += figure_value(s->figures, x->risk);
    }
    t->total = t->costs + t->faults + t->trips;
}

void interval_rank(struct interval_search *s)
{
    s->best = 0;
    for (size_t i = 0; i < s->tried.n; i++) {
        sum_costs(s, &s->tried.at[i]);
        if (s->tried.at[i].total < s->tried.at[s->best].total)
            s->best = i;
    }
    double most = (1 + INTERVAL_NEAR) * s->tried.at[s->best].total;
    s->near_from = s->near_to = s->best;
    while (s->near_from > 0 && s->tried.at[s->near_from - 1].total <= most)
        s->near_from--;
    while (s->near_to + 1 < s->tried.n && s->tried.at[s->near_to + 1].total <= most)
        s->near_to++;
}

/* --- figures by name --- */

/* Cuts "ELEMENT.test.every=T, whole cycles" at `from`; where it ends, or NULL. */
static const char *cut_change(const char *from, size_t *element, const char **every, size_t *length)
{
    static const char key[] = ".test.every=";
    const char *end = strchr(from, ']'), *at = strstr(from, key),
               *cycles = strstr(from, CYCLES "]");
    if (!end || !at || !cycles || at > end || cycles + strlen(CYCLES) != end || cycles < at)
        return NULL;
    *element = (size_t)(at - from);
    *every = at + strlen(key);
    if (*every > cycles)
        return NULL;
    *length = (size_t)(cycles - *every);
    return end;
}

bool interval_is_named(const char *figure)
{
    const char *every;
    size_t element, length;
    for (const char *p = figure; (p = strchr(p, '[')) != NULL; p++)
        if (cut_change(p + 1, &element, &every, &length))
            return true;
    return false;
}

static ohmen_status make_up(struct figures *f, const char *element, const char *every,
                            ohmen_error *e)
{
    const struct variant *made;
    ohmen_status status = check_element(f, element, e);
    return status == OHMEN_OK ? variant_every(f, element, every, &made, e) : status;
}

ohmen_status interval_find(const struct figures *of, const char *name, struct figures **figures,
                           figure_id *out, ohmen_error *e)
{
    struct figures *f = NULL;
    ohmen_status status = cycle_figures(of, &f, e);
    for (const char *p = name; status == OHMEN_OK && (p = strchr(p, '[')) != NULL; p++) {
        const char *every;
        size_t element, length;
        if (cut_change(p + 1, &element, &every, &length))
            status = make_up(f, arena_strn(f->arena, p + 1, element),
                             arena_strn(f->arena, every, length), e);
    }
    if (status == OHMEN_OK)
        status = figures_find(f, name, out, e);
    if (status == OHMEN_OK)
        *figures = f;
    return status;
}
