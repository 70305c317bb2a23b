/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random decisions as documents. Knows nothing of the program but arena and text. */
#include "weigh_world.h"

/* --- drawing --- */

static bool one_in(struct decision_world *w, size_t n)
{
    return random_index(&w->random, n) == 0;
}

/* A year alone, a day, or nothing; days rise to the last of a leap year. */
static struct date draw_date(struct decision_world *w, int from, int to)
{
    static const struct date days[] = {{0, 1, 1}, {0, 2, 28}, {0, 4, 15}, {0, 7, 1}, {0, 12, 31}};
    struct date d = {0};
    if (one_in(w, 5))
        return d;
    if (!one_in(w, 2))
        d = random_pick(&w->random, days);
    d.year = (int)random_range(&w->random, from, to);
    return d;
}

/* Does another option that was drawn before act on the hazard in a way that this action
 * cannot stand beside even when they are not combined? Only one may take a hazard away. */
static bool clashes(const struct decision_world *w, size_t option, const struct action *x)
{
    for (size_t i = 0; i < option; i++)
        for (size_t k = 0; k < w->option[i].n; k++)
            if (w->option[i].action[k].hazard == x->hazard && x->kind == ACTION_REMOVE &&
                w->option[i].action[k].kind == ACTION_REMOVE)
                return true;
    return false;
}

static struct action draw_action(struct decision_world *w, size_t option)
{
    static const double factors[] = {0.9, 0.5, 0.125, 1.2};
    struct action x = {.kind = (enum action_kind)random_index(&w->random, 4),
                       .hazard = random_index(&w->random, HAZARDS)};
    if (x.kind == ACTION_ADD)
        x.hazard = HAZARDS + option;
    if (x.kind == ACTION_SCALE || (x.kind == ACTION_REMOVE && !one_in(w, 2)))
        x = (struct action){ACTION_SCALE, x.hazard, random_pick(&w->random, factors)};
    else if (x.kind == ACTION_PRICE)
        x.number = random_uniform(&w->random, 1e3, 9e5);
    return x;
}

static void draw_option(struct decision_world *w, size_t i)
{
    struct plan_option *o = &w->option[i];
    size_t want = random_index(&w->random, ACTIONS + 1);
    for (size_t k = 0; k < want; k++) {
        struct action x = draw_action(w, i);
        bool fits = !clashes(w, i, &x);
        for (size_t j = 0; j < o->n; j++)
            fits = fits && o->action[j].hazard != x.hazard;
        if (fits)
            o->action[o->n++] = x;
    }
    o->invest = one_in(w, 4) ? -1 : random_uniform(&w->random, 100, 1e5);
    o->running = one_in(w, 2) ? -1 : random_uniform(&w->random, 10, 3000);
    o->on = draw_date(w, 2025, 2040);
    o->in_service = draw_date(w, 2025, 2045);
    o->life = one_in(w, 2) ? 0 : (int)random_range(&w->random, 1, 30);
    o->renewed = o->life && o->invest >= 0 && !one_in(w, 3);
    o->residual = one_in(w, 2) ? -1 : random_uniform(&w->random, 100, 5e4);
}

static bool takes_away(const struct plan_option *o, size_t hazard)
{
    for (size_t k = 0; k < o->n; k++)
        if (o->action[k].hazard == hazard && o->action[k].kind == ACTION_REMOVE)
            return true;
    return false;
}

/* Commissioning on a hazard that is always there, which no other option prices while it is
 * commissioned. */
static void draw_early(struct decision_world *w, size_t i)
{
    static const double lengths[] = {0.25, 1, 2.5, 40};
    struct plan_option *o = &w->option[i];
    size_t hazard = random_index(&w->random, HAZARDS);
    bool price = one_in(w, 3), fits = !one_in(w, 3);
    for (size_t k = 0; k < w->n_options; k++) {
        const struct plan_option *other = &w->option[k];
        fits = fits && !takes_away(other, hazard);
        price = price && !(other->early_for > 0 && other->early.hazard == hazard);
    }
    for (size_t k = 0; k < w->n_options; k++)
        fits = fits && !(w->option[k].early.kind == ACTION_PRICE && w->option[k].early_for > 0 &&
                         w->option[k].early.hazard == hazard);
    if (!fits)
        return;
    o->early_for = random_pick(&w->random, lengths);
    o->early = (struct action){price ? ACTION_PRICE : ACTION_SCALE, hazard,
                               price ? random_uniform(&w->random, 1e3, 9e5) : 3};
}

static void settle(struct decision_world *w)
{
    for (size_t i = 0; i < w->n_options; i++)
        for (size_t k = 0; k < i; k++)
            if (decision_quarrel(w, i, k) != SIZE_MAX && !one_in(w, 3))
                w->settled[i][k] = w->settled[k][i] = random_uniform(&w->random, 1e3, 9e5);
}

static void draw_relations(struct decision_world *w)
{
    for (size_t i = 0; i < w->n_options; i++) {
        size_t k = random_index(&w->random, w->n_options);
        bool together = k != i && !decision_contradicts(w, i, k);
        if (k != i && one_in(w, 5))
            w->option[i].excludes |= 1u << k;
        else if (together && one_in(w, 5) && !(w->option[k].excludes >> i & 1))
        w->option[i].requires |= 1u << k;
    }
}

struct decision_world *decision_random(struct arena *a, uint64_t seed, size_t options)
{
    struct decision_world *w = NEW(a, struct decision_world);
    *w = (struct decision_world){.arena = a, .random = random_seed(seed), .n_options = options};
    w->start = draw_date(w, 2026, 2028);
    w->horizon = (int)random_range(&w->random, 1, 40);
    w->interest = one_in(w, 8) ? 0 : random_uniform(&w->random, 0.001, 0.12);
    w->focus = (unsigned)random_index(&w->random, 1u << HAZARDS);
    for (size_t i = 0; i < HAZARDS + OPTIONS; i++) {
        w->frequency[i] = random_log_uniform(&w->random, 1e-4, 0.1);
        w->euros[i] = random_log_uniform(&w->random, 1e3, 1e6);
    }
    for (size_t i = 0; i < options; i++)
        draw_option(w, i);
    for (size_t i = 0; i < options; i++)
        draw_early(w, i);
    w->end_of_year = one_in(w, 2);
    settle(w);
    draw_relations(w);
    return w;
}

/* --- sets --- */

size_t decision_quarrel(const struct decision_world *w, size_t p, size_t q)
{
    size_t hazard = SIZE_MAX, n = 0;
    for (size_t i = 0; i < w->option[p].n; i++)
        for (size_t k = 0; k < w->option[q].n; k++) {
            const struct action *x = &w->option[p].action[i], *y = &w->option[q].action[k];
            if (x->hazard != y->hazard)
                continue;
            if (x->kind == ACTION_REMOVE || y->kind == ACTION_REMOVE)
                return SIZE_MAX;
            if (x->kind == ACTION_PRICE && y->kind == ACTION_PRICE) {
                hazard = x->hazard;
                n++;
            }
        }
    return n == 1 ? hazard : SIZE_MAX;
}

bool decision_contradicts(const struct decision_world *w, size_t p, size_t q)
{
    if (w->settled[p][q] > 0)
        return false;
    for (size_t i = 0; i < w->option[p].n; i++)
        for (size_t k = 0; k < w->option[q].n; k++) {
            const struct action *x = &w->option[p].action[i], *y = &w->option[q].action[k];
            if (x->hazard != y->hazard)
                continue;
            if (x->kind == ACTION_REMOVE || y->kind == ACTION_REMOVE)
                return true;
            if (x->kind == ACTION_PRICE && y->kind == ACTION_PRICE && x->number != y->number)
                return true;
        }
    return false;
}

/* Three options that price one hazard are at odds even where each two of them settle. */
static bool at_odds(const struct decision_world *w, unsigned set)
{
    for (size_t i = 0; i < w->n_options; i++)
        for (size_t j = 0; j < i; j++)
            for (size_t k = 0; k < j; k++) {
                bool all = set >> i & 1 && set >> j & 1 && set >> k & 1;
                if (all && w->settled[i][j] > 0 && w->settled[i][k] > 0 && w->settled[j][k] > 0 &&
                    decision_quarrel(w, i, j) == decision_quarrel(w, i, k))
                    return true;
            }
    return false;
}

bool decision_possible(const struct decision_world *w, unsigned set)
{
    if (at_odds(w, set))
        return false;
    size_t n = 0;
    for (size_t i = 0; i < w->n_options; i++) {
        const struct plan_option *o = &w->option[i];
        if (!(set >> i & 1))
            continue;
        n++;
        if (o->excludes & set || (o->requires & set) != o->requires)
            return false;
        for (size_t k = 0; k < i; k++)
            if (set >> k & 1 && decision_contradicts(w, i, k))
                return false;
    }
    return w->n_options <= 8 || n <= 2;
}

const char *decision_name(const struct decision_world *w, unsigned set)
{
    struct text t;
    text_init(&t, w->arena);
    for (size_t i = 0; i < w->n_options; i++)
        if (set >> i & 1)
            text_printf(&t, "%sO%zu", t.n ? "+" : "", i);
    return set ? text_str(&t) : "do-nothing";
}

/* --- the document --- */

static void number(struct text *t, double x)
{
    char buf[32];
    text_add(t, text_double(buf, x));
}

static void date_text(struct text *t, const char *key, struct date d)
{
    if (d.year == 0)
        return;
    text_printf(t, ", %s: %d", key, d.year);
    if (d.month)
        text_printf(t, "-%02d-%02d", d.month, d.day);
}

static void hazard_text(struct text *t, const struct decision_world *w, size_t i)
{
    text_printf(t, "H%zu: {name: Hazard, frequency: ", i);
    number(t, w->frequency[i]);
    text_add(t, " per a, response: {never: {outcome: lost}}, outcomes: {lost: {name: Lost, damage: "
                "{loss: {category: all-of-it, is: ");
    number(t, w->euros[i]);
    text_add(t, " EUR}}}}}");
}

static void action_text(struct text *t, const struct decision_world *w, const struct action *x)
{
    switch (x->kind) {
    case ACTION_REMOVE: text_printf(t, "H%zu: no", x->hazard); break;
    case ACTION_ADD: hazard_text(t, w, x->hazard); break;
    case ACTION_SCALE:
        text_printf(t, "H%zu: {frequency: ", x->hazard);
        number(t, x->number);
        text_add(t, " * was}");
        break;
    case ACTION_PRICE:
        text_printf(t, "H%zu: {outcomes: {lost: {damage: {loss: {is: ", x->hazard);
        number(t, x->number);
        text_add(t, " EUR}}}}}");
        break;
    }
}

static void list_text(struct text *t, const struct decision_world *w, const char *key, unsigned set)
{
    const char *between = "";
    if (!set)
        return;
    text_printf(t, ", %s: [", key);
    for (size_t i = 0; i < w->n_options; i++)
        if (set >> i & 1) {
            text_printf(t, "%sO%zu", between, i);
            between = ", ";
        }
    text_byte(t, ']');
}

static void time_text(struct text *t, const struct decision_world *w, const struct plan_option *o)
{
    if (o->life)
        text_printf(t, ", life: %d a", o->life);
    text_add(t, o->renewed ? ", renewed: yes" : "");
    if (o->residual >= 0) {
        text_add(t, ", residual: ");
        number(t, o->residual);
        text_add(t, " EUR");
    }
    if (o->early_for > 0) {
        text_add(t, ", early: {for: ");
        number(t, o->early_for);
        text_add(t, " a, change: {hazards: {");
        action_text(t, w, &o->early);
        text_add(t, "}}}");
    }
}

/* The later of two options says it, both do where their sum is even. */
static void settled_text(struct text *t, const struct decision_world *w, size_t i)
{
    const char *between = "";
    text_add(t, ", combine: {");
    for (size_t k = 0; k < w->n_options; k++) {
        if (w->settled[i][k] == 0 || (k > i && (i + k) % 2))
            continue;
        struct action x = {ACTION_PRICE, decision_quarrel(w, i, k), w->settled[i][k]};
        text_printf(t, "%sO%zu: {hazards: {", between, k);
        action_text(t, w, &x);
        text_add(t, "}}");
        between = ", ";
    }
    text_add(t, "}");
}

/* An option without actions adds an element that nothing uses. */
static void option_text(struct text *t, const struct decision_world *w, size_t i)
{
    const struct plan_option *o = &w->option[i];
    text_printf(t, "  O%zu: {name: Option", i);
    if (o->invest >= 0) {
        text_add(t, ", invest: {is: ");
        number(t, o->invest);
        text_add(t, " EUR");
        date_text(t, "on", o->on);
        text_byte(t, '}');
    }
    if (o->running >= 0) {
        text_add(t, ", running: ");
        number(t, o->running);
        text_add(t, " EUR per a");
    }
    date_text(t, "in-service", o->in_service);
    time_text(t, w, o);
    settled_text(t, w, i);
    list_text(t, w, "excludes", o->excludes);
    list_text(t, w, "requires", o->requires);
    text_printf(t, ", change: {elements: {X%zu: {kind: relay, per-demand: 0.5}}, hazards: {", i);
    for (size_t k = 0; k < o->n; k++) {
        text_add(t, k ? ", " : "");
        action_text(t, w, &o->action[k]);
    }
    text_add(t, "}}}\n");
}

const char *decision_text(const struct decision_world *w)
{
    struct text t;
    text_init(&t, w->arena);
    text_printf(&t, "register: {title: A decision, currency: EUR, prices: 2026, horizon: %d a",
                w->horizon);
    date_text(&t, "start", w->start);
    text_add(&t, w->end_of_year ? ", yearly-amounts: end-of-year" : "");
    text_add(&t, ", discount: ");
    number(&t, w->interest);
    text_add(&t, " per a}\nhazards:\n");
    for (size_t i = 0; i < HAZARDS; i++) {
        text_add(&t, "  ");
        hazard_text(&t, w, i);
        text_byte(&t, '\n');
    }
    text_add(&t, "options:\n");
    for (size_t i = 0; i < w->n_options; i++)
        option_text(&t, w, i);
    text_add(&t, "decisions:\n  D: {question: What?, focus: [");
    const char *between = "";
    for (size_t i = 0; i < HAZARDS; i++)
        if (w->focus >> i & 1) {
            text_printf(&t, "%sH%zu", between, i);
            between = ", ";
        }
    text_byte(&t, ']');
    list_text(&t, w, "options", (1u << w->n_options) - 1);
    text_add(&t, "}\n");
    return text_str(&t);
}
