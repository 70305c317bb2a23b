/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing a world in time, and its document. Knows nothing of the program but arena and text. */
#include "timed_world.h"

/* --- drawing --- */

static bool one_in(struct timed_world *w, size_t n)
{
    return random_index(&w->random, n) == 0;
}

static double drawn(struct timed_world *w, size_t one_in_n, double lo, double hi)
{
    return one_in(w, one_in_n) ? random_log_uniform(&w->random, lo, hi) : -1;
}

static struct tw_rates draw_rates(struct timed_world *w)
{
    return (struct tw_rates){
        .per_demand = drawn(w, 2, 1e-5, 0.1),
        .undetected = drawn(w, 1, 1e-4, 0.2),
        .detected = drawn(w, 2, 1e-3, 0.3),
        .repair_h = random_log_uniform(&w->random, 2, 400),
    };
}

static struct tw_date draw_date(struct timed_world *w, int from, int to)
{
    return (struct tw_date){(int)random_range(&w->random, from, to),
                            (int)random_range(&w->random, 1, 12),
                            (int)random_range(&w->random, 1, 28)};
}

/* Dates in order: since, known, last, next; any may be missing. */
static void draw_dates(struct timed_world *w, struct tw_element *x)
{
    if (one_in(w, 3))
        x->since = draw_date(w, 2008, 2014);
    if (one_in(w, 5))
        x->known = draw_date(w, 2015, 2025);
    if (!x->months)
        return;
    if (one_in(w, 2))
        x->last = draw_date(w, 2015, 2026);
    if (one_in(w, 3))
        x->next = draw_date(w, 2027, 2033);
}

static void draw_test(struct timed_world *w, struct tw_element *x)
{
    static const int intervals[] = {6, 12, 18, 24, 36, 48, 72};
    x->finds = x->leaves = x->takes_h = -1;
    if (one_in(w, 4))
        return;
    x->months = random_pick(&w->random, intervals);
    x->takes_h = drawn(w, 3, 1, 30);
    x->leaves = drawn(w, 3, 1e-4, 0.02);
    if (one_in(w, 4))
        x->finds = random_uniform(&w->random, 0.5, 1);
}

static void draw_element(struct timed_world *w, struct tw_element *x, bool dates)
{
    x->type = one_in(w, 2) ? random_index(&w->random, TW_TYPES) : TW_TYPES;
    x->own = draw_rates(w);
    if (x->type < TW_TYPES) /* takes most from its type */
        x->own = (struct tw_rates){drawn(w, 6, 1e-4, 0.1), drawn(w, 6, 1e-3, 0.1), -1,
                                   drawn(w, 6, 3, 90)};
    x->out = drawn(w, 5, 1e-4, 0.05);
    x->exercised = drawn(w, 5, 0.1, 4);
    x->breaker = one_in(w, 4);
    x->plant_out = one_in(w, 8);
    x->revealed_by = one_in(w, 4);
    draw_test(w, x);
    if (dates)
        draw_dates(w, x);
}

static void draw_factors(struct timed_world *w, struct tw_cause *c)
{
    double rest = 1;
    for (size_t k = c->n; k-- > 1;)
        rest -= c->factor[k] = random_log_uniform(&w->random, 1e-3, 0.08);
    c->factor[0] = rest;
    c->staggered = one_in(w, 2);
}

static void draw_cause(struct timed_world *w, struct tw_cause *c)
{
    size_t want = 2 + random_index(&w->random, TW_MEMBERS - 1);
    for (size_t i = 0; i < w->n_elements && c->n < want; i++)
        if (w->n_elements - i <= want - c->n || !one_in(w, 3))
            c->member[c->n++] = i;
    c->beta = c->beta_detected = -1;
    if (one_in(w, 3))
        draw_factors(w, c);
    else
        c->beta = random_log_uniform(&w->random, 0.01, 0.4);
    if (c->beta >= 0 && one_in(w, 2))
        c->beta_detected = random_log_uniform(&w->random, 0.01, 0.4);
    c->settings = one_in(w, 4);
    c->found_by = one_in(w, 3) ? random_index(&w->random, c->n) : c->n;
}

static size_t draw_name(struct timed_world *w, size_t schemes)
{
    bool is_scheme = schemes && one_in(w, 3);
    return is_scheme ? TW_ELEMENTS + random_index(&w->random, schemes)
                     : random_index(&w->random, w->n_elements);
}

static void draw_scheme(struct timed_world *w, struct tw_scheme *s, size_t schemes)
{
    size_t want = 1 + random_index(&w->random, 4);
    for (size_t i = 0; i < want; i++) {
        size_t k = 0, name = draw_name(w, schemes);
        while (k < s->n && s->of[k] != name)
            k++;
        if (k == s->n)
            s->of[s->n++] = name;
    }
    s->k = 1 + random_index(&w->random, s->n);
}

static void draw_row(struct timed_world *w, size_t i)
{
    struct tw_row *r = &w->row[i];
    r->cleared_by = one_in(w, 6) ? random_index(&w->random, w->n_elements)
                                 : TW_ELEMENTS + random_index(&w->random, w->n_schemes);
    r->sees = one_in(w, 3) ? random_uniform(&w->random, 0.3, 1) : -1;
    r->backs_up = i > 0 && one_in(w, 3) ? random_index(&w->random, i) : TW_ROWS;
    static const int kinds[] = {TW_OUTCOME, TW_OUTCOME, TW_SPLIT, TW_QUESTION};
    r->kind = random_pick(&w->random, kinds);
    r->share = random_uniform(&w->random, 0.1, 0.9);
    r->question = draw_name(w, w->n_schemes);
    for (size_t k = 0; k < 2; k++)
        r->outcome[k] = random_index(&w->random, TW_OUTCOMES + 1);
}

struct timed_world *timed_world_random(struct arena *a, uint64_t seed)
{
    struct timed_world *w = NEW(a, struct timed_world);
    w->arena = a;
    w->random = random_seed(seed);
    w->steady = one_in(w, 4);
    w->start = (int)random_range(&w->random, 2025, 2029);
    w->years = (int)random_range(&w->random, 3, 9);
    w->n_elements = 3 + random_index(&w->random, TW_ELEMENTS - 2);
    w->n_causes = random_index(&w->random, TW_CAUSES + 1);
    w->n_schemes = 1 + random_index(&w->random, TW_SCHEMES);
    w->n_rows = 1 + random_index(&w->random, TW_ROWS);
    bool dates = !one_in(w, 3);
    for (size_t t = 0; t < TW_TYPES; t++) {
        w->type[t] = draw_rates(w);
        w->type_is_breaker[t] = one_in(w, 3);
    }
    for (size_t i = 0; i < w->n_elements; i++) {
        draw_element(w, &w->element[i], dates);
        w->disabled[i] = drawn(w, 8, 1e-3, 0.5);
    }
    for (size_t i = 0; i < w->n_causes; i++)
        draw_cause(w, &w->cause[i]);
    for (size_t i = 0; i < w->n_schemes; i++)
        draw_scheme(w, &w->scheme[i], i);
    for (size_t i = 0; i <= w->n_rows; i++)
        draw_row(w, i);
    for (size_t i = 0; i < TW_OUTCOMES; i++)
        w->euros[i] = random_log_uniform(&w->random, 1, 1e6);
    w->rate = random_log_uniform(&w->random, 1e-3, 2);
    w->rate_growth = one_in(w, 3) ? random_uniform(&w->random, -0.05, 0.2) : 0;
    w->growth = one_in(w, 3) ? random_uniform(&w->random, -0.05, 0.2) : 0;
    return w;
}

/* --- the document --- */

static void number(struct text *t, const char *key, double x, const char *unit)
{
    char buf[32];
    if (x >= 0)
        text_printf(t, ", %s: %s%s", key, text_double(buf, x), unit);
}

static void date(struct text *t, const char *key, struct tw_date d)
{
    if (d.year)
        text_printf(t, ", %s: %d-%02d-%02d", key, d.year, d.month, d.day);
}

static void rates_text(struct text *t, const struct tw_rates *r)
{
    number(t, "per-demand", r->per_demand, "");
    number(t, "undetected", r->undetected, " per a");
    number(t, "detected", r->detected, " per a");
    number(t, "repair", r->repair_h, " h");
}

static void element_text(struct text *t, const struct timed_world *w, size_t i)
{
    const struct tw_element *x = &w->element[i];
    text_printf(t, "  E%zu: {name: E%zu", i, i);
    if (x->type == TW_TYPES || x->breaker)
        text_printf(t, ", kind: %s", x->breaker ? "breaker" : "relay");
    if (x->type < TW_TYPES)
        text_printf(t, ", type: T%zu", x->type);
    rates_text(t, &x->own);
    number(t, "out-of-service", x->out, "");
    number(t, "exercised", x->exercised, " per a");
    text_add(t, x->plant_out ? ", plant-out-while-repaired: yes" : "");
    text_add(t, x->revealed_by ? ", revealed-by: [H]" : "");
    date(t, "since", x->since);
    date(t, "when-known", x->known);
    if (x->months) {
        text_printf(t, ", test: {every: %d month", x->months);
        date(t, "last", x->last);
        date(t, "next", x->next);
        number(t, "takes", x->takes_h, " h");
        number(t, "finds", x->finds, "");
        number(t, "leaves-failed", x->leaves, "");
        text_byte(t, '}');
    }
    text_add(t, "}\n");
}

static void cause_text(struct text *t, const struct tw_cause *c, size_t i)
{
    text_printf(t, "  CC%zu: {of: [", i);
    for (size_t k = c->n; k-- > 0;) /* not in order */
        text_printf(t, "E%zu%s", c->member[k], k ? ", " : "]");
    number(t, "beta", c->beta, "");
    number(t, "beta-detected", c->beta_detected, "");
    if (c->beta < 0) {
        char buf[32];
        text_add(t, ", factors: [");
        for (size_t k = 0; k < c->n; k++)
            text_printf(t, "%s%s", k ? ", " : "", text_double(buf, c->factor[k]));
        text_add(t, c->staggered ? "], staggered: yes" : "]");
    }
    text_add(t, c->settings ? ", settings: yes" : "");
    if (c->found_by < c->n)
        text_printf(t, ", found-by: E%zu", c->member[c->found_by]);
    text_add(t, "}\n");
}

static void name_text(struct text *t, size_t name)
{
    bool element = name < TW_ELEMENTS;
    text_printf(t, "%c%zu", element ? 'E' : 'S', element ? name : name - TW_ELEMENTS);
}

static void scheme_text(struct text *t, const struct tw_scheme *s, size_t i)
{
    text_printf(t, "  S%zu: {at-least: %zu, of: [", i, s->k);
    for (size_t k = 0; k < s->n; k++) {
        text_add(t, k ? ", " : "");
        name_text(t, s->of[k]);
    }
    text_add(t, "]}\n");
}

static void outcome_text(struct text *t, size_t outcome)
{
    if (outcome == TW_OUTCOMES)
        text_add(t, "{outcome: none");
    else
        text_printf(t, "{outcome: o%zu", outcome);
}

static void row_text(struct text *t, const struct timed_world *w, size_t i)
{
    const struct tw_row *r = &w->row[i];
    char buf[32];
    text_printf(t, "      %s: ", i < w->n_rows ? arena_printf(w->arena, "r%zu", i) : "never");
    if (r->kind == TW_OUTCOME) {
        outcome_text(t, r->outcome[0]);
    } else if (r->kind == TW_SPLIT) {
        text_add(t, "{split: {x: ");
        outcome_text(t, r->outcome[0]);
        text_printf(t, ", share: %s}, y: ", text_double(buf, r->share));
        outcome_text(t, r->outcome[1]);
        text_add(t, ", share: rest}}");
    } else {
        text_add(t, "{if-works: ");
        name_text(t, r->question);
        text_add(t, ", yes: ");
        outcome_text(t, r->outcome[0]);
        text_add(t, "}, no: ");
        outcome_text(t, r->outcome[1]);
        text_byte(t, '}');
    }
    if (i < w->n_rows) {
        text_printf(t, ", in: %zu ms, cleared-by: ", 100 * i + 50);
        name_text(t, r->cleared_by);
        number(t, "sees", r->sees, "");
        if (r->backs_up < TW_ROWS)
            text_printf(t, ", breaker-failure-of: r%zu", r->backs_up);
    }
    text_add(t, "}\n");
}

static void hazard_text(struct text *t, const struct timed_world *w)
{
    char buf[32];
    text_printf(t, "rates:\n  rate: {per: a, is: %s per a", text_double(buf, w->rate));
    if (w->rate_growth)
        text_printf(t, ", growth: %s per a", text_double(buf, w->rate_growth));
    text_add(t, "}\nhazards:\n  H:\n    name: H\n    frequency: 1.5 * rate\n");
    if (w->growth)
        text_printf(t, "    growth: %s per a\n", text_double(buf, w->growth));
    text_add(t, "    response:\n");
    for (size_t i = w->n_rows + 1; i-- > 0;)
        row_text(t, w, i);
    text_add(t, "    outcomes:\n");
    for (size_t i = 0; i < TW_OUTCOMES; i++)
        text_printf(t, "      o%zu: {name: O, damage: {x: {category: c, is: %s EUR}}}\n", i,
                    text_double(buf, w->euros[i]));
    bool any = false;
    for (size_t i = 0; i < w->n_elements; i++) {
        if (w->disabled[i] < 0)
            continue;
        text_add(t, any ? "" : "    disables:\n");
        text_printf(t, "      E%zu: %s\n", i, text_double(buf, w->disabled[i]));
        any = true;
    }
}

const char *timed_world_text(const struct timed_world *w)
{
    struct text t;
    text_init(&t, w->arena);
    text_printf(&t,
                "register: {title: Time, currency: EUR, prices: 2026, start: %d, horizon: %d a, "
                "discount: 4 %% per a%s}\ntypes:\n",
                w->start, w->years, w->steady ? ", steady: yes" : "");
    for (size_t i = 0; i < TW_TYPES; i++) {
        text_printf(&t, "  T%zu: {name: T, kind: %s", i, w->type_is_breaker[i] ? "breaker" : "ct");
        rates_text(&t, &w->type[i]);
        text_add(&t, "}\n");
    }
    text_add(&t, "elements:\n");
    for (size_t i = 0; i < w->n_elements; i++)
        element_text(&t, w, i);
    text_add(&t, w->n_causes ? "common-cause:\n" : "");
    for (size_t i = 0; i < w->n_causes; i++)
        cause_text(&t, &w->cause[i], i);
    text_add(&t, "schemes:\n");
    for (size_t i = 0; i < w->n_schemes; i++)
        scheme_text(&t, &w->scheme[i], i);
    hazard_text(&t, w);
    return text_str(&t);
}
