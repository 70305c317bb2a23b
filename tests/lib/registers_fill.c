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

static bool is_wanted(struct generator *g, const struct field *f)
{
    if (f->flags & REQUIRED)
        return true;
    if ((f->flags & LATER) && !g->shape.stored)
        return false;
    return chance(g, 5) && can_be(g, f);
}

void fill(struct generator *g, struct node *m, const struct table *t, const char *const *skip)
{
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        if (!is_among(skip, f->key) && !in_group(t, f->key) && !node_get(m, f->key) &&
            is_wanted(g, f))
            add(g, m, f->key, any_value(g, f));
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
    struct node *names = list(g), *seen = map(g);
    for (unsigned n = draw(g, 1, 3); n > 0; n--) {
        const char *name = f->kinds ? some_id(g, f->kinds) : random_pick(&g->random, words);
        if (node_get(seen, name))
            continue;
        add(g, seen, name, names);
        node_push(g->arena, names, scalar(g, name));
    }
    return names;
}

static struct node *some_quantity(struct generator *g, const struct field *f)
{
    enum field_dim dim = f->dim == ANY ? NUMBER : f->dim;
    if (f->flags & (CERTAIN | CONSTANT))
        return scalar(g, random_literal(g, dim));
    return random_quantity(g, dim);
}

static struct node *some_rows(struct generator *g, const struct field *f)
{
    static const char *const names[] = {"inrush", "through-fault", "third"};
    static const char *const years[] = {"2027", "2028", "2031"};
    struct node *rows = map(g);
    for (unsigned i = 0, n = draw(g, 1, 3); i < n; i++) {
        const char *key = f->kinds ? some_id(g, f->kinds) : f->year_keys ? years[i] : names[i];
        if (!node_get(rows, key))
            add(g, rows, key, any_value(g, f->part));
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
    struct node *part = map(g);
    add_text(g, part, "note", random_text(g));
    return pair_of(g, "elements", pair_of(g, random_id(g, KIND_ELEMENT), part));
}

static struct node *some_map(struct generator *g, const struct table *t)
{
    struct node *m = map(g);
    for (size_t i = 0; i < t->n_groups; i++) {
        size_t n = 0;
        while (n < 8 && t->groups[i].keys[n])
            n++;
        const char *key = t->groups[i].keys[random_index(&g->random, n)];
        add(g, m, key, any_value(g, table_field(t, key)));
    }
    fill(g, m, t, NULL);
    bool is_short = m->n == 1 && t->short_key && text_equal(m->pairs[0].key, t->short_key);
    return is_short && chance(g, 2) ? m->pairs[0].value : m;
}

static struct node *any_value(struct generator *g, const struct field *f)
{
    switch (f->type) {
    case FIELD_TEXT: return scalar(g, random_text(g));
    case FIELD_NAME: return scalar(g, "some-name");
    case FIELD_REF: return scalar(g, some_id(g, f->kinds));
    case FIELD_REFS:
    case FIELD_NAMES:
    case FIELD_ORDERED: return some_names(g, f);
    case FIELD_WORD: {
        size_t n = 0;
        while (f->words[n])
            n++;
        return scalar(g, f->words[random_index(&g->random, n)]);
    }
    case FIELD_YES: return scalar(g, chance(g, 2) ? "yes" : "no");
    case FIELD_COUNT: return scalar(g, some_count(g, f));
    case FIELD_DATE: return scalar(g, random_date(g));
    case FIELD_WHEN: return scalar(g, chance(g, 2) ? "2029" : random_date(g));
    case FIELD_UNIT: return scalar(g, "section a");
    case FIELD_QUANTITY: return some_quantity(g, f);
    case FIELD_STRUCT: return some_map(g, f->table);
    case FIELD_ROWS: return some_rows(g, f);
    case FIELD_LIST: {
        struct node *items = list(g);
        node_push(g->arena, items, any_value(g, f->part));
        return items;
    }
    case FIELD_STRUCTURE: return random_structure(g, 0, 1);
    case FIELD_CHANGE: return small_change(g);
    }
    return map(g);
}

/* --- elements and schemes --- */

struct node *random_record(struct generator *g)
{
    static const char *const skip[] = {"failures", "demands", NULL};
    const struct table *t =
        table_field(kinds[KIND_ELEMENT].table, "per-demand")->table;
    struct node *m = map(g);
    if (chance(g, 3)) {
        unsigned demands = draw(g, 1, 400);
        add_text(g, m, "prior", chance(g, 2) ? "jeffreys" : "uniform");
        add_text(g, m, "demands", arena_printf(g->arena, "%u", demands));
        add_text(g, m, "failures", arena_printf(g->arena, "%u", draw(g, 0, demands)));
    } else {
        add(g, m, "is", random_quantity(g, PROBABILITY));
    }
    if (m->n == 1 && m->pairs[0].value->type == NODE_SCALAR && chance(g, 2))
        return m->pairs[0].value;
    fill(g, m, t, skip);
    return m;
}

static const char *random_part(struct generator *g, unsigned around)
{
    bool scheme = g->ids[KIND_SCHEME].n && chance(g, 3);
    return near_id(g, scheme ? KIND_SCHEME : KIND_ELEMENT, around, scheme ? 4 : 12);
}

struct node *random_structure(struct generator *g, unsigned around, unsigned depth)
{
    unsigned op = draw(g, 0, 2), n = op == 2 ? draw(g, 2, 4) : draw(g, 1, 3);
    struct node *m = map(g), *parts = list(g);
    if (depth == 0 || chance(g, 6))
        return scalar(g, random_part(g, around));
    for (unsigned i = 0; i < n; i++)
        node_push(g->arena, parts, random_structure(g, around, depth - 1));
    if (op == 2)
        add_text(g, m, "at-least", arena_printf(g->arena, "%u", draw(g, 1, n)));
    add(g, m, op == 0 ? "all" : op == 1 ? "any" : "of", parts);
    return m;
}

/* --- states, plans, trees --- */

static struct node *shares(struct generator *g)
{
    struct node *m = map(g);
    add_text(g, m, "sound", arena_printf(g->arena, "%u %%", draw(g, 20, 95)));
    add_text(g, m, "aged", "rest");
    return m;
}

static struct node *reliability(struct generator *g)
{
    unsigned good = draw(g, 1, 99);
    struct node *p = list(g);
    node_push(g->arena, p, scalar(g, arena_printf(g->arena, "%u %%", good)));
    node_push(g->arena, p, scalar(g, arena_printf(g->arena, "%u %%", 100 - good)));
    return p;
}

static struct node *survey(struct generator *g)
{
    struct node *m = map(g), *reads = list(g), *given = map(g);
    node_push(g->arena, reads, scalar(g, "good"));
    node_push(g->arena, reads, scalar(g, "bad"));
    add(g, given, "sound", reliability(g));
    add(g, given, "aged", reliability(g));
    add(g, m, "reads", reads);
    add(g, m, "given", given);
    if (chance(g, 2))
        add(g, m, "costs", random_quantity(g, MONEY));
    return m;
}

void add_states(struct generator *g)
{
    static const char *const skip[] = {"when", "becomes", "renewed-by", "tests", NULL};
    struct node *m = pair_of(g, chance(g, 3) ? "varies" : "is", shares(g));
    if (chance(g, 2))
        add(g, m, "when", pair_of(g, "aged", small_change(g)));
    if (chance(g, 2))
        add(g, m, "becomes",
            pair_of(g, "sound", pair_of(g, "aged", random_quantity(g, FREQUENCY))));
    if (chance(g, 2) && g->ids[KIND_OPTION].n)
        add(g, m, "renewed-by", pair_of(g, random_id(g, KIND_OPTION), scalar(g, "sound")));
    add(g, m, "tests", pair_of(g, "OIL", survey(g)));
    fill(g, m, kinds[KIND_STATE].table, skip);
    *array_push(g->arena, &g->ids[KIND_STATE]) = "WINDING";
    add(g, g->root, "states", pair_of(g, "WINDING", m));
}

void add_plans(struct generator *g)
{
    struct node *m = map(g);
    fill(g, m, kinds[KIND_PLAN].table, NULL);
    add(g, g->root, "plans", pair_of(g, "P-1", m));
}

static struct node *steps(struct generator *g, unsigned depth, bool may_go);

static struct node *alternatives(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = map(g);
    add(g, m, "keep", list(g));
    add(g, m, "act", steps(g, depth, may_go));
    return m;
}

static struct node *readings(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = map(g);
    add(g, m, "good", list(g));
    add(g, m, "bad", steps(g, depth, may_go));
    return m;
}

static struct node *last_step(struct generator *g, unsigned depth, bool may_go)
{
    struct node *m = map(g), *low = map(g), *high = map(g), *forks = map(g);
    switch (draw(g, 0, 3)) {
    case 0:
        add_text(g, m, "inspect", "WINDING.OIL");
        add(g, m, "reads", readings(g, depth, may_go));
        return m;
    case 1: return pair_of(g, "choose", alternatives(g, depth, may_go));
    case 2:
        add_text(g, low, "p", random_literal(g, PROBABILITY));
        add(g, low, "then", steps(g, depth, may_go));
        add_text(g, high, "p", "rest");
        add(g, forks, "low", low);
        add(g, forks, "high", high);
        return pair_of(g, "chance", forks);
    default:
        return may_go ? pair_of(g, "go", scalar(g, "later"))
                      : pair_of(g, "pay", scalar(g, "15 kEUR"));
    }
}

static struct node *plain_step(struct generator *g)
{
    switch (draw(g, 0, 3)) {
    case 0: return pair_of(g, "pay", random_quantity(g, MONEY));
    case 1: return pair_of(g, "wait", scalar(g, random_literal(g, TIME)));
    case 2:
        if (g->ids[KIND_OPTION].n)
            return pair_of(g, "apply", scalar(g, random_id(g, KIND_OPTION)));
        return pair_of(g, "pay", scalar(g, "3 kEUR"));
    default: return pair_of(g, "change", small_change(g));
    }
}

static struct node *steps(struct generator *g, unsigned depth, bool may_go)
{
    struct node *all = list(g);
    for (unsigned n = draw(g, 0, 2); n > 0; n--)
        node_push(g->arena, all, plain_step(g));
    if (depth > 0)
        node_push(g->arena, all, last_step(g, depth - 1, may_go));
    return all;
}

/* A decision by a tree, beside those by options. */
void add_trees(struct generator *g)
{
    static const char *const skip[] = {"options", "choose", "subtrees", "sees", NULL};
    struct node *m = map(g), *sees = list(g);
    add(g, m, "choose", alternatives(g, 3, true));
    add(g, m, "subtrees", pair_of(g, "later", steps(g, 1, false)));
    node_push(g->arena, sees, scalar(g, "WINDING"));
    add(g, m, "sees", sees);
    fill(g, m, kinds[KIND_DECISION].table, skip);
    struct node *section = (struct node *)node_get(g->root, "decisions");
    add(g, section, "D-TREE", m);
}

/* --- objects that nothing leads to --- */

/* Priors that this version does not evaluate. */
static void add_stored_rate(struct generator *g)
{
    static const char *const skip[] = {"per", "exposure", NULL};
    struct node *prior = map(g), *m = map(g);
    bool mean = chance(g, 2);
    add_text(g, prior, mean ? "mean" : "p5", "1.3e-3 per km a");
    add_text(g, prior, mean && chance(g, 2) ? "p99" : "p95", "8e-3 per km a");
    if (chance(g, 2))
        add_text(g, prior, "p50", "2e-3 per km a");
    if (mean)
        add_text(g, prior, "solution", prior_solutions[draw(g, 0, 1)]);
    if (chance(g, 2))
        add_text(g, prior, "form", prior_forms[draw(g, 0, 4)]);
    if (g->ids[KIND_SOURCE].n)
        add_text(g, prior, "source", random_id(g, KIND_SOURCE));
    add_text(g, m, "per", "km a");
    add(g, m, "prior", prior);
    fill(g, m, kinds[KIND_RATE].table, skip);
    add(g, (struct node *)node_get(g->root, "rates"), "rate-stored", m);
}

/* How often a scheme operates without need. */
static void add_unwanted(struct generator *g)
{
    const char *text =
        arena_printf(g->arena, "2.5 * unwanted(%s; inrush 3 per a; through-fault 1 in 4 a)",
                     random_id(g, KIND_SCHEME));
    add(g, (struct node *)node_get(g->root, "values"), "unwanted-trips", scalar(g, text));
}

static void add_common_causes(struct generator *g)
{
    struct node *m = map(g);
    fill(g, m, kinds[KIND_COMMON_CAUSE].table, NULL);
    add(g, g->root, "common-cause", pair_of(g, "CC-1", m));
}

void add_stored(struct generator *g)
{
    add_states(g);
    add_plans(g);
    add_trees(g);
    add_stored_rate(g);
    add_common_causes(g);
    if (g->ids[KIND_SCHEME].n)
        add_unwanted(g);
}
