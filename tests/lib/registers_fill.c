/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Filling objects by their field tables, and the objects that are only stored.
 *
 * A field of a new kind needs nothing here unless it must agree with another field.
 * Invariant: what is added keeps the object valid. */
#include <string.h>

#include "model/tables_all.h"
#include "registers_parts.h"

static struct node *any_value(struct generator *g, const struct field *f);

static bool is_among(const char *const *keys, const char *key)
{
    for (; keys && *keys; keys++)
        if (text_equal(*keys, key))
            return true;
    return false;
}

static bool in_group(const struct table *t, const char *key)
{
    for (size_t i = 0; i < t->n_groups; i++)
        for (size_t k = 0; k < 8 && t->groups[i].keys[k]; k++)
            if (text_equal(t->groups[i].keys[k], key))
                return true;
    return false;
}

/* Are there objects for it to name? */
static bool can_be(const struct generator *g, const struct field *f)
{
    if (!f->kinds)
        return true;
    for (int k = 0; k < KIND_COUNT; k++)
        if ((f->kinds & KIND_BIT(k)) && g->ids[k].n)
            return true;
    return false;
}

/* What makes a figure depend on time, on operations without need, or on more than the elements'
 * failures on demand: for registers of which no oracle computes the figures. */
static const char *const involved[] = {
    "undetected",     "detected",  "repair",   "plant-out-while-repaired",
    "out-of-service", "exercised", "test",     "unwanted",
    "steady",         "disables",  "trips-on", "growth",
    "ageing",         NULL};
/* Must agree with other fields: only where somebody puts them. */
static const char *const agreed[] = {"per-event",  "takes", "repair",      "since",
                                     "when-known", "next",  "revealed-by", "breaker-failure-of",
                                     NULL};

static bool is_wanted(struct generator *g, const struct field *f)
{
    if (f->flags & REQUIRED)
        return true;
    if (is_among(agreed, f->key))
        return false;
    if (((f->flags & LATER) || is_among(involved, f->key)) && !g->shape.stored)
        return false;
    return random_chance(g, 5) && can_be(g, f);
}

/* The share of time in repair is their product: so that it stays below 1. */
static const struct {
    const char *key, *unit;
    double low, high;
} bounded[] = {{"detected", "per a", 1e-3, 3}, {"repair", "h", 1, 90}};

static struct node *wanted_value(struct generator *g, const struct field *f)
{
    for (size_t i = 0; i < sizeof bounded / sizeof *bounded; i++)
        if (text_equal(f->key, bounded[i].key) && f->part == NULL)
            return make_scalar(g, arena_printf(g->arena, "%s %s",
                                               random_number(g, bounded[i].low, bounded[i].high),
                                               bounded[i].unit));
    return any_value(g, f);
}

void fill_fields(struct generator *g, struct node *m, const struct table *t,
                 const char *const *skip)
{
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        if (!is_among(skip, f->key) && !in_group(t, f->key) && !node_get(m, f->key) &&
            is_wanted(g, f))
            put_node(g, m, f->key, wanted_value(g, f));
    }
}

/* --- values by type --- */

static const char *some_id(struct generator *g, unsigned allowed)
{
    enum kind some[KIND_COUNT];
    size_t n = 0;
    for (int k = 0; k < KIND_COUNT; k++)
        if ((allowed & KIND_BIT(k)) && g->ids[k].n)
            some[n++] = (enum kind)k;
    return random_id(g, some[random_index(&g->random, n)]);
}

/* Up to three different ones. */
static struct node *some_names(struct generator *g, const struct field *f)
{
    static const char *const words[] = {"good", "fair", "poor", "odd"};
    struct node *names = make_list(g), *seen = make_map(g);
    for (unsigned n = random_draw(g, 1, 3); n > 0; n--) {
        const char *name = f->kinds ? some_id(g, f->kinds) : random_pick(&g->random, words);
        if (node_get(seen, name))
            continue;
        put_node(g, seen, name, names);
        node_push(g->arena, names, make_scalar(g, name));
    }
    return names;
}

static struct node *some_quantity(struct generator *g, const struct field *f)
{
    static const char *const intervals[] = {"6 month", "1 a", "2 a", "4 a", "6 a"};
    enum field_dim dim = f->dim == ANY ? NUMBER : f->dim;
    if (text_equal(f->key ? f->key : "", "every")) /* not a test each second */
        return make_scalar(g, random_pick(&g->random, intervals));
    if (f->flags & (CERTAIN | CONSTANT))
        return make_scalar(g, random_literal(g, dim));
    return random_quantity(g, dim);
}

static struct node *some_rows(struct generator *g, const struct field *f)
{
    static const char *const names[] = {"inrush", "through-fault", "third"};
    static const char *const years[] = {"2027", "2028", "2031"};
    struct node *rows = make_map(g);
    for (unsigned i = 0, n = random_draw(g, 1, 3); i < n; i++) {
        const char *key = f->kinds ? some_id(g, f->kinds) : f->year_keys ? years[i] : names[i];
        if (!node_get(rows, key))
            put_node(g, rows, key, any_value(g, f->part));
    }
    return rows;
}

static const char *some_count(struct generator *g, const struct field *f)
{
    int64_t high = f->high && f->high < 100000 ? f->high : 100000;
    return arena_printf(g->arena, "%lld", (long long)random_range(&g->random, f->low, high));
}

/* A change that any register takes: what it touches is there. */
static struct node *small_change(struct generator *g)
{
    struct node *part = make_map(g);
    put_text(g, part, "note", random_text(g));
    return make_pair(g, "elements", make_pair(g, random_id(g, KIND_ELEMENT), part));
}

static struct node *some_map(struct generator *g, const struct table *t)
{
    struct node *m = make_map(g);
    for (size_t i = 0; i < t->n_groups; i++) {
        size_t n = 0;
        while (n < 8 && t->groups[i].keys[n])
            n++;
        const char *key = t->groups[i].keys[random_index(&g->random, n)];
        put_node(g, m, key, any_value(g, table_field(t, key)));
    }
    fill_fields(g, m, t, NULL);
    bool is_short = m->n == 1 && t->short_key && text_equal(m->pairs[0].key, t->short_key);
    return is_short && random_chance(g, 2) ? m->pairs[0].value : m;
}

static struct node *any_value(struct generator *g, const struct field *f)
{
    switch (f->type) {
    case FIELD_TEXT: return make_scalar(g, random_text(g));
    case FIELD_NAME: return make_scalar(g, "some-name");
    case FIELD_REF: return make_scalar(g, some_id(g, f->kinds));
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return some_names(g, f);
    case FIELD_WORD: {
        size_t n = 0;
        while (f->words[n])
            n++;
        return make_scalar(g, f->words[random_index(&g->random, n)]);
    }
    case FIELD_YES: return make_scalar(g, random_chance(g, 2) ? "yes" : "no");
    case FIELD_COUNT: return make_scalar(g, some_count(g, f));
    case FIELD_DATE: return make_scalar(g, random_date(g));
    case FIELD_WHEN: return make_scalar(g, random_chance(g, 2) ? "2029" : random_date(g));
    case FIELD_UNIT: return make_scalar(g, "section a");
    case FIELD_QUANTITY: return some_quantity(g, f);
    case FIELD_STRUCT: return some_map(g, f->table);
    case FIELD_ROWS: return some_rows(g, f);
    case FIELD_LIST: {
        struct node *items = make_list(g);
        node_push(g->arena, items, any_value(g, f->part));
        return items;
    }
    case FIELD_STRUCTURE: return random_structure(g, 0, 1);
    case FIELD_CHANGE: return small_change(g);
    }
    return make_map(g);
}

/* --- elements and schemes --- */

struct node *random_record(struct generator *g)
{
    static const char *const skip[] = {"failures", "demands", NULL};
    const struct table *t = table_field(kinds[KIND_ELEMENT].table, "per-demand")->table;
    struct node *m = make_map(g);
    if (random_chance(g, 3)) {
        unsigned demands = random_draw(g, 1, 400);
        put_text(g, m, "prior", random_chance(g, 2) ? "jeffreys" : "uniform");
        put_text(g, m, "demands", arena_printf(g->arena, "%u", demands));
        put_text(g, m, "failures", arena_printf(g->arena, "%u", random_draw(g, 0, demands)));
    } else {
        put_node(g, m, "is", random_quantity(g, PROBABILITY));
    }
    if (m->n == 1 && m->pairs[0].value->type == NODE_SCALAR && random_chance(g, 2))
        return m->pairs[0].value;
    fill_fields(g, m, t, skip);
    return m;
}

static const char *random_part(struct generator *g, unsigned around)
{
    bool scheme = g->ids[KIND_SCHEME].n && random_chance(g, 6);
    return random_near_id(g, scheme ? KIND_SCHEME : KIND_ELEMENT, around, scheme ? 4 : 12);
}

struct node *random_structure(struct generator *g, unsigned around, unsigned depth)
{
    unsigned op = random_draw(g, 0, 2), n = op == 2 ? random_draw(g, 2, 4) : random_draw(g, 1, 3);
    struct node *m = make_map(g), *parts = make_list(g);
    if (depth == 0 || random_chance(g, 6))
        return make_scalar(g, random_part(g, around));
    for (unsigned i = 0; i < n; i++)
        node_push(g->arena, parts, random_structure(g, around, depth - 1));
    if (op == 2)
        put_text(g, m, "at-least", arena_printf(g->arena, "%u", random_draw(g, 1, n)));
    put_node(g, m, op == 0 ? "all" : op == 1 ? "any" : "of", parts);
    return m;
}

/* --- states, plans, trees --- */

static struct node *shares(struct generator *g)
{
    struct node *m = make_map(g);
    put_text(g, m, "sound", arena_printf(g->arena, "%u %%", random_draw(g, 20, 95)));
    put_text(g, m, "aged", "rest");
    return m;
}

static struct node *reliability(struct generator *g)
{
    unsigned good = random_draw(g, 1, 99);
    struct node *p = make_list(g);
    node_push(g->arena, p, make_scalar(g, arena_printf(g->arena, "%u %%", good)));
    node_push(g->arena, p, make_scalar(g, arena_printf(g->arena, "%u %%", 100 - good)));
    return p;
}

static struct node *survey(struct generator *g)
{
    struct node *m = make_map(g), *reads = make_list(g), *given = make_map(g);
    node_push(g->arena, reads, make_scalar(g, "good"));
    node_push(g->arena, reads, make_scalar(g, "bad"));
    put_node(g, given, "sound", reliability(g));
    put_node(g, given, "aged", reliability(g));
    put_node(g, m, "reads", reads);
    put_node(g, m, "given", given);
    if (random_chance(g, 2))
        put_node(g, m, "costs", random_quantity(g, MONEY));
    return m;
}

/* Behind each outcome of the hazard the asset is sound. */
static void put_failures(struct generator *g, struct node *state, const char *hazard)
{
    const struct node *h = node_get(node_get(g->root, "hazards"), hazard);
    const struct node *outcomes = node_get(h, "outcomes");
    struct node *to = make_map(g);
    for (size_t i = 0; outcomes && i < outcomes->n; i++)
        put_text(g, to, outcomes->pairs[i].key, "sound");
    if (to->n)
        put_node(g, state, "failures", make_pair(g, hazard, to));
}

static void add_states(struct generator *g)
{
    static const char *const skip[] = {"when", "becomes", "failures", "renewed-by", "tests", NULL};
    bool varies = random_chance(g, 3);
    g->winding_is_unknown = !varies;
    struct node *m = make_pair(g, varies ? "varies" : "is", shares(g));
    if (random_chance(g, 2) && !varies) /* what varies must agree with every option */
        put_node(g, m, "when", make_pair(g, "aged", small_change(g)));
    if (random_chance(g, 2) && !varies)
        put_node(g, m, "becomes",
                 make_pair(g, "sound", make_pair(g, "aged", random_quantity(g, FREQUENCY))));
    if (random_chance(g, 2) && !varies && g->ids[KIND_HAZARD].n)
        put_failures(g, m, random_id(g, KIND_HAZARD));
    if (random_chance(g, 2) && !varies && g->ids[KIND_OPTION].n)
        put_node(g, m, "renewed-by",
                 make_pair(g, random_id(g, KIND_OPTION), make_scalar(g, "sound")));
    if (!varies)
        put_node(g, m, "tests", make_pair(g, "OIL", survey(g)));
    fill_fields(g, m, kinds[KIND_STATE].table, skip);
    *array_push(g->arena, &g->ids[KIND_STATE]) = "WINDING";
    put_node(g, g->root, "states", make_pair(g, "WINDING", m));
}

static void add_plans(struct generator *g)
{
    struct node *m = make_map(g);
    fill_fields(g, m, kinds[KIND_PLAN].table, NULL);
    put_node(g, g->root, "plans", make_pair(g, "P-1", m));
}

static struct node *steps(struct generator *g, unsigned depth, bool may_go);

static struct node *alternatives(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = make_map(g);
    put_node(g, m, "keep", make_list(g));
    put_node(g, m, "act", steps(g, depth, may_go));
    return m;
}

static struct node *readings(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = make_map(g);
    put_node(g, m, "good", make_list(g));
    put_node(g, m, "bad", steps(g, depth, may_go));
    return m;
}

static struct node *last_step(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = make_map(g), *low = make_map(g), *high = make_map(g), *forks = make_map(g);
    switch (random_draw(g, g->winding_is_unknown ? 0 : 1, 3)) {
    case 0:
        put_text(g, m, "inspect", "WINDING.OIL");
        put_node(g, m, "reads", readings(g, depth, may_go));
        return m;
    case 1: return make_pair(g, "choose", alternatives(g, depth, may_go));
    case 2:
        put_text(g, low, "p", random_literal(g, PROBABILITY));
        put_node(g, low, "then", steps(g, depth, may_go));
        put_text(g, high, "p", "rest");
        put_node(g, forks, "low", low);
        put_node(g, forks, "high", high);
        return make_pair(g, "chance", forks);
    default:
        return may_go ? make_pair(g, "go", make_scalar(g, "later"))
                      : make_pair(g, "pay", make_scalar(g, "15 kEUR"));
    }
}

static struct node *plain_step(struct generator *g)
{
    switch (random_draw(g, 0, 3)) {
    case 0: return make_pair(g, "pay", random_quantity(g, MONEY));
    case 1: /* all of them together are shorter than any horizon */
        return make_pair(g, "wait",
                         make_scalar(g, arena_printf(g->arena, "%u d", random_draw(g, 1, 30))));
    case 2: /* none twice */
        if (g->applied < g->ids[KIND_OPTION].n)
            return make_pair(g, "apply", make_scalar(g, g->ids[KIND_OPTION].at[g->applied++]));
        return make_pair(g, "pay", make_scalar(g, "3 kEUR"));
    default: return make_pair(g, "change", small_change(g));
    }
}

static struct node *steps(struct generator *g, unsigned depth, bool may_go)
{
    struct node *all = make_list(g);
    for (unsigned n = random_draw(g, 0, 2); n > 0; n--)
        node_push(g->arena, all, plain_step(g));
    if (depth > 0)
        node_push(g->arena, all, last_step(g, depth - 1, may_go));
    return all;
}

/* A decision by a tree, beside those by options. */
static void add_trees(struct generator *g)
{
    static const char *const skip[] = {"options", "choose", "subtrees", "every", "sees", NULL};
    struct node *m = make_map(g), *sees = make_list(g);
    g->applied = 0;
    put_node(g, m, "choose", alternatives(g, 3, true));
    put_node(g, m, "subtrees", make_pair(g, "later", steps(g, 1, false)));
    node_push(g->arena, sees, make_scalar(g, "WINDING"));
    if (g->years > 1 && random_chance(g, 2)) {
        put_text(g, m, "every", "1 a");
        if (g->winding_is_unknown)
            put_node(g, m, "sees", sees);
    }
    fill_fields(g, m, kinds[KIND_DECISION].table, skip);
    struct node *section = (struct node *)node_get(g->root, "decisions");
    put_node(g, section, "D-TREE", m);
}

/* --- rates --- */

static const char *const fault_kinds[] = {"earth", "two-phase", "three-phase", "evolving"};

static void random_kinds(struct generator *g, struct node *rate, const char *id)
{
    struct node *counts = make_map(g);
    for (unsigned i = 0, n = random_draw(g, 2, 4); i < n; i++) {
        put_text(g, counts, fault_kinds[i], arena_printf(g->arena, "%u", random_draw(g, 0, 30)));
        *array_push(g->arena, &g->shares) =
            arena_printf(g->arena, "share(%s; %s)", id, fault_kinds[i]);
    }
    put_node(g, rate, "kinds", counts);
    if (random_chance(g, 2))
        put_text(g, rate, "kinds-prior", share_priors[random_draw(g, 0, 1)]);
}

void random_course(struct generator *g, struct node *rate, const char *id)
{
    bool stored = g->shape.stored;
    if (stored && random_chance(g, 4))
        put_text(g, rate, "growth",
                 arena_printf(g->arena, "%s%s %% per a", random_chance(g, 3) ? "-" : "",
                              random_number(g, 0.2, 9)));
    if (stored && random_chance(g, 4)) {
        put_text(g, rate, "ageing", random_number(g, 0.4, 5));
        put_text(g, rate, "since", arena_printf(g->arena, "200%u-02-03", random_draw(g, 0, 9)));
    }
    if (random_chance(g, 3))
        random_kinds(g, rate, id);
}

/* --- objects that nothing leads to --- */

/* Priors by percentiles. */
static void add_percentile_rate(struct generator *g)
{
    static const char *const skip[] = {"per",    "events", "exposure",    "growth", "since",
                                       "ageing", "kinds",  "kinds-prior", NULL};
    struct node *prior = make_map(g), *m = make_map(g);
    bool mean = random_chance(g, 2), high = random_chance(g, 2);
    put_text(g, prior, mean ? "mean" : random_chance(g, 2) ? "p5" : "p50", "1.3e-3 per km a");
    put_text(g, prior, high ? "p99" : "p95", high ? "8e-3 per km a" : "4e-3 per km a");
    if (mean)
        put_text(g, prior, "solution", prior_solutions[random_draw(g, 0, 1)]);
    else if (random_chance(g, 2))
        put_text(g, prior, "form", random_chance(g, 2) ? "gamma" : "lognormal");
    if (g->ids[KIND_SOURCE].n)
        put_text(g, prior, "source", random_id(g, KIND_SOURCE));
    put_text(g, m, "per", "km a");
    put_node(g, m, "prior", prior);
    random_course(g, m, "rate-stored");
    fill_fields(g, m, kinds[KIND_RATE].table, skip);
    put_node(g, (struct node *)node_get(g->root, "rates"), "rate-stored", m);
}

/* How often a scheme operates without need. */
static void add_unwanted(struct generator *g)
{
    const char *text =
        arena_printf(g->arena, "2.5 * unwanted(%s; inrush 3 per a; through-fault 1 in 4 a)",
                     random_id(g, KIND_SCHEME));
    put_node(g, (struct node *)node_get(g->root, "values"), "unwanted-trips", make_scalar(g, text));
}

/* Two elements of which one fails with the other, by beta or by alpha factors. */
static void add_common_causes(struct generator *g)
{
    static const char *const skip[] = {"of", "found-by", "staggered", NULL};
    struct node *m = make_map(g), *of = make_list(g), *factors = make_list(g);
    node_push(g->arena, of, make_scalar(g, "E-DATED"));
    node_push(g->arena, of, make_scalar(g, "E-OTHER"));
    put_node(g, m, "of", of);
    if (random_chance(g, 2))
        put_text(g, m, "found-by", "E-OTHER");
    if (random_chance(g, 2)) {
        put_text(g, m, "beta", "4 %");
    } else {
        node_push(g->arena, factors, make_scalar(g, "0.95"));
        node_push(g->arena, factors, make_scalar(g, "5 %"));
        put_node(g, m, "factors", factors);
        if (random_chance(g, 2))
            put_text(g, m, "staggered", "yes");
    }
    fill_fields(g, m, kinds[KIND_COMMON_CAUSE].table, skip);
    put_node(g, g->root, "common-cause", make_pair(g, "CC-1", m));
}

/* Elements whose dates agree. */
static void add_dated_elements(struct generator *g)
{
    struct node *m = make_map(g), *test = make_map(g), *by = make_list(g);
    struct node *section = (struct node *)node_get(g->root, "elements");
    put_text(g, test, "every", "4 a");
    put_text(g, test, "takes", "3 h");
    put_text(g, test, "last", "2021-05-06");
    put_text(g, test, "next", "2027-02-03");
    put_node(g, m, "test", test);
    put_text(g, m, "since", "2011-03-01");
    put_text(g, m, "when-known", "2019-03-01");
    put_text(g, m, "undetected", "0.01 per a");
    if (g->ids[KIND_HAZARD].n) {
        node_push(g->arena, by, make_scalar(g, random_id(g, KIND_HAZARD)));
        put_node(g, m, "revealed-by", by);
    }
    put_node(g, section, "E-DATED", m);
    struct node *other = make_map(g), *per_event = make_map(g);
    put_text(g, other, "per-demand", "2e-3");
    put_text(g, per_event, "inrush", "0.015");
    put_text(g, per_event, "through-fault", "3e-3");
    put_node(g, other, "unwanted", make_pair(g, "per-event", per_event));
    put_node(g, section, "E-OTHER", other);
}

/* A hazard whose second row backs up the breaker of the first one. */
static void add_breaker_failure(struct generator *g)
{
    struct node *m = make_map(g), *rows = make_map(g), *first = make_map(g), *second = make_map(g);
    put_text(g, first, "cleared-by", "E-OTHER");
    put_text(g, first, "in", "100 ms");
    put_text(g, first, "outcome", "none");
    put_text(g, second, "cleared-by", "E-OTHER");
    put_text(g, second, "in", "300 ms");
    put_text(g, second, "breaker-failure-of", "first");
    put_text(g, second, "outcome", "none");
    put_node(g, rows, "first", first);
    put_node(g, rows, "second", second);
    put_node(g, rows, "never", make_pair(g, "outcome", make_scalar(g, "none")));
    put_text(g, m, "name", "Breaker failure");
    put_text(g, m, "frequency", "0.1 per a");
    put_node(g, m, "response", rows);
    put_node(g, m, "outcomes", make_map(g));
    put_node(g, (struct node *)node_get(g->root, "hazards"), "H-BACKED", m);
}

void registers_add_stored(struct generator *g)
{
    add_states(g);
    add_plans(g);
    add_trees(g);
    add_percentile_rate(g);
    add_dated_elements(g);
    add_common_causes(g);
    add_breaker_failure(g);
    if (g->ids[KIND_SCHEME].n)
        add_unwanted(g);
}
