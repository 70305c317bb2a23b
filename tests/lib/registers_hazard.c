/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards with their responses and outcomes, and the options that change them.
 *
 * Clearance times: the rows of a hazard lie between 40 ms and some seconds, a row that an
 * option adds at 10 ms and a multiple of 0.1 ms of its own, so that no two are equal
 * whatever is combined. */
#include "model/tables_all.h"
#include "registers_parts.h"

#define OUTCOMES 4

static const char *const outcome_names[OUTCOMES] = {"slow", "quick", "burnt", "dark"};
static const char *const item_names[] = {"rebuild", "arc", "supply", "oil"};
static const char *const categories[] = {"equipment", "lost-load", "penalty"};

/* --- outcomes --- */

/* Arc energy, a limit, or a step: what grows with the clearance time. */
static const char *timed_damage(struct generator *g)
{
    switch (random_draw(g, 0, 2)) {
    case 0: return arena_printf(g->arena, "%s kEUR/s * clearance-time", random_number(g, 1, 90));
    case 1:
        return arena_printf(g->arena,
                            "lookup(clearance-time; 0.05 s -> %s; 0.3 s -> %s; %s s -> %s)",
                            random_literal(g, MONEY), random_expression(g, MONEY, 1),
                            random_number(g, 0.4, 2), random_literal(g, MONEY));
    default:
        return arena_printf(g->arena, "max(%s; 3 MEUR * (clearance-time / 1 s - 0.4)^2)",
                            random_expression(g, MONEY, 1));
    }
}

static struct node *damage_item(struct generator *g)
{
    struct node *m = make_map(g);
    put_text(g, m, "category", random_pick(&g->random, categories));
    if (random_chance(g, 3))
        put_text(g, m, "is", timed_damage(g));
    else
        put_node(g, m, random_chance(g, 2) ? "is" : "varies", random_quantity(g, MONEY));
    const struct table *outcomes = field_table(table_field(kinds[KIND_HAZARD].table, "outcomes"));
    fill_fields(g, m, field_table(table_field(outcomes, "damage")), NULL);
    return m;
}

static struct node *outcome(struct generator *g)
{
    static const char *const skip[] = {"damage", NULL};
    struct node *m = make_map(g), *damage = make_map(g);
    for (unsigned i = 0, n = random_draw(g, 0, 3); i < n; i++)
        put_node(g, damage, item_names[i], damage_item(g));
    if (damage->n)
        put_node(g, m, "damage", damage);
    fill_fields(g, m, field_table(table_field(kinds[KIND_HAZARD].table, "outcomes")), skip);
    return m;
}

/* --- responses --- */

static const char *end_name(struct generator *g, unsigned n_outcomes)
{
    return random_chance(g, 8) ? "none" : outcome_names[random_draw(g, 0, n_outcomes - 1)];
}

static const char *random_scheme(struct generator *g, unsigned around)
{
    bool scheme = g->ids[KIND_SCHEME].n && !random_chance(g, 4);
    return random_near_id(g, scheme ? KIND_SCHEME : KIND_ELEMENT, around, scheme ? 6 : 12);
}

struct branching {
    unsigned around, n_outcomes, depth;
};

static void end_branch(struct generator *g, struct node *m, struct branching b);

/* Two or three branches; the last one is the rest, or shares of 100 % in all. */
static struct node *split(struct generator *g, struct branching b)
{
    static const char *const names[] = {"fire", "arc-out", "held"};
    struct node *rows = make_map(g);
    unsigned n = random_draw(g, 2, 3);
    bool rest = !random_chance(g, 4);
    for (unsigned i = 0; i < n; i++) {
        struct node *m = make_map(g);
        const char *share = i + 1 == n ? "rest" : NULL;
        if (!rest)
            share = i + 1 < n ? "30 %" : n == 2 ? "70 %" : "40 %";
        if (!share)
            share = random_chance(g, 2) ? arena_printf(g->arena, "%u %%", random_draw(g, 1, 45))
                                        : arena_printf(g->arena, "0.4 * (%s)",
                                                       random_expression(g, PROBABILITY, 1));
        put_text(g, m, "share", share);
        end_branch(g, m, b);
        put_node(g, rows, names[i], m);
    }
    return rows;
}

static void end_branch(struct generator *g, struct node *m, struct branching b)
{
    unsigned form = b.depth ? random_draw(g, 0, 3) : 0;
    b.depth -= b.depth > 0;
    if (form == 1) {
        put_node(g, m, "split", split(g, b));
    } else if (form == 2) {
        struct node *yes = make_map(g), *no = make_map(g);
        end_branch(g, yes, b);
        end_branch(g, no, b);
        put_text(g, m, "if-works", random_scheme(g, b.around));
        put_node(g, m, "yes", yes);
        put_node(g, m, "no", no);
    } else {
        put_text(g, m, "outcome", end_name(g, b.n_outcomes));
    }
}

static const char *row_time(struct generator *g, unsigned i)
{
    unsigned ms = 40 + 400 * i + random_draw(g, 0, 380);
    switch (random_draw(g, 0, 2)) {
    case 0: return arena_printf(g->arena, "%u ms", ms);
    case 1: return arena_printf(g->arena, "%u.%03u s", ms / 1000, ms % 1000);
    default: return arena_printf(g->arena, "%u s / 1000", ms);
    }
}

static struct node *response_row(struct generator *g, struct branching b, const char *in)
{
    const struct table *row = field_table(table_field(kinds[KIND_HAZARD].table, "response"));
    const struct field *sees = table_field(row, "sees");
    struct node *m = make_map(g);
    put_text(g, m, "cleared-by", random_scheme(g, b.around));
    put_text(g, m, "in", in);
    if (random_chance(g, 2)) {
        struct node *share = make_map(g);
        put_node(g, share, "is", random_quantity(g, PROBABILITY));
        fill_fields(g, share, sees->table, NULL);
        bool is_short = share->n == 1 && random_chance(g, 2);
        put_node(g, m, "sees", is_short ? share->pairs[0].value : share);
    }
    end_branch(g, m, b);
    return m;
}

/* Names whose order is not that of the times. */
static struct node *response(struct generator *g, struct branching b)
{
    struct node *rows = make_map(g), *last = make_map(g);
    unsigned n = random_draw(g, 0, g->shape.rows), shift = random_draw(g, 0, 4);
    for (unsigned i = 0; i < n; i++) {
        const char *key = arena_printf(g->arena, "row-%c", (char)('a' + (2 * i + shift) % 5));
        if (!node_get(rows, key))
            put_node(g, rows, key, response_row(g, b, row_time(g, i)));
    }
    put_text(g, last, "in", arena_printf(g->arena, "%u s", random_draw(g, 30, 90)));
    end_branch(g, last, b);
    put_node(g, rows, "never", last);
    return rows;
}

/* --- hazards --- */

static const char *random_frequency(struct generator *g, unsigned number)
{
    size_t k = g->ids[KIND_RATE].n ? random_index(&g->random, g->ids[KIND_RATE].n) : 0;
    const char *rate = g->ids[KIND_RATE].n ? g->ids[KIND_RATE].at[k] : "0.4 per a";
    const char *per = g->ids[KIND_RATE].n ? g->rate_per.at[k] : "a";
    const char *amount = text_starts(per, "section") ? " section"
                         : text_starts(per, "bay")   ? " bay"
                         : text_starts(per, "km")    ? " km"
                                                     : "";
    if (number > 0 && random_chance(g, 6))
        return arena_printf(g->arena, "0.3 * frequency(%s)",
                            g->ids[KIND_HAZARD].at[random_index(&g->random, number)]);
    if (random_chance(g, 6))
        return random_expression(g, FREQUENCY, g->shape.depth);
    const char *plain =
        arena_printf(g->arena, "%s%s * %s", random_number(g, 0.4, 20), amount, rate);
    return random_chance(g, 2)
               ? plain
               : arena_printf(g->arena, "%s * (%s)", plain, random_expression(g, PROBABILITY, 2));
}

/* Does the site, or one above it, state customers or load? */
static bool is_supplied(const struct generator *g, const struct node *site)
{
    while (site) {
        const struct node *m = node_get(node_get(g->root, "sites"), site->text);
        if (node_get(m, "customers") || node_get(m, "load"))
            return true;
        site = node_get(m, "in");
    }
    return false;
}

/* Interruptions that leave it to the site say it themselves where no site does. */
static void name_interrupted(struct generator *g, const struct node *hazard)
{
    const struct node *outcomes = node_get(hazard, "outcomes");
    for (size_t i = 0; i < outcomes->n; i++) {
        const struct node *rows = node_get(outcomes->pairs[i].value, "interruptions");
        for (size_t k = 0; rows && k < rows->n; k++) {
            struct node *row = rows->pairs[k].value;
            if (!node_get(row, "customers") && !node_get(row, "load") &&
                !is_supplied(g, node_get(hazard, "site")))
                put_text(g, row, "customers", "1730");
        }
    }
}

static struct node *hazard(struct generator *g, unsigned number)
{
    static const char *const skip[] = {"frequency", "response", "outcomes", NULL};
    struct node *m = make_map(g), *outcomes = make_map(g);
    struct branching b = {number, random_draw(g, 1, OUTCOMES), 2};
    for (unsigned i = 0; i < b.n_outcomes; i++)
        put_node(g, outcomes, outcome_names[i], outcome(g));
    put_text(g, m, "frequency", random_frequency(g, number));
    put_node(g, m, "response", response(g, b));
    put_node(g, m, "outcomes", outcomes);
    fill_fields(g, m, kinds[KIND_HAZARD].table, skip);
    name_interrupted(g, m);
    return m;
}

void registers_add_hazards(struct generator *g)
{
    struct node *section = make_map(g);
    for (unsigned i = 0; i < g->ids[KIND_HAZARD].n; i++)
        put_node(g, section, g->ids[KIND_HAZARD].at[i], hazard(g, i));
    put_node(g, g->root, "hazards", section);
}

/* --- changes --- */

/* One change under construction; what it touches is kept, so that options that require
 * one another never contradict. */
struct changing {
    struct node *elements, *schemes, *hazards, *rates;
    struct node *touched; /* ids */
    unsigned number;
};

static bool touch(struct generator *g, struct changing *c, const char *id)
{
    if (node_get(c->touched, id))
        return false;
    put_text(g, c->touched, id, "");
    return true;
}

static const char *factor(struct generator *g)
{
    static const char *const forms[] = {"0.%02u * was", "was * 0.%02u", "was / 1.%02u"};
    return arena_printf(g->arena, forms[random_draw(g, 0, 2)], random_draw(g, 3, 98));
}

static void scale_rate(struct generator *g, struct changing *c)
{
    const char *id = random_id(g, KIND_RATE);
    const struct node *rate = node_get(node_get(g->root, "rates"), id);
    if (!touch(g, c, id))
        return;
    struct node *is = make_pair(g, "is", make_scalar(g, factor(g)));
    const struct node *prior = node_get(rate, "prior");
    const char *key = prior && node_get(prior, "median") ? "median" : "mean";
    put_node(g, c->rates, id,
             prior ? make_pair(g, "prior", make_pair(g, key, make_scalar(g, factor(g)))) : is);
}

/* Better by a factor, or by a number of its own in place of counts. */
static void change_element(struct generator *g, struct changing *c)
{
    bool scale = g->own.n && random_chance(g, 2);
    const char *id =
        scale ? g->own.at[random_index(&g->random, g->own.n)] : random_id(g, KIND_ELEMENT);
    struct node *record = make_map(g);
    if (!touch(g, c, id))
        return;
    put_text(g, record, "is", scale ? factor(g) : random_literal(g, PROBABILITY));
    if (!scale) {
        put_text(g, record, "prior", "no");
        put_text(g, record, "failures", "no");
        put_text(g, record, "demands", "no");
    }
    put_node(g, c->elements, id, make_pair(g, "per-demand", record));
}

static void fit_absent(struct generator *g, struct changing *c)
{
    if (!g->absent.n)
        return;
    const char *id = g->absent.at[random_index(&g->random, g->absent.n)];
    struct node *parts = make_list(g);
    if (!touch(g, c, id))
        return;
    node_push(g->arena, parts, make_scalar(g, random_id(g, KIND_ELEMENT)));
    node_push(g->arena, parts, make_scalar(g, random_id(g, KIND_ELEMENT)));
    put_node(g, c->schemes, id,
             make_pair(g, "works", make_pair(g, random_chance(g, 2) ? "all" : "any", parts)));
}

/* A new element in a new scheme that clears first, in a new row. */
static struct node *new_row(struct generator *g, struct changing *c, unsigned around)
{
    const char *element = arena_printf(g->arena, "N-%u", c->number + 1);
    const char *scheme = arena_printf(g->arena, "NS-%u", c->number + 1);
    struct node *m = make_map(g), *parts = make_list(g), *row = make_map(g);
    put_node(g, m, "per-demand", random_quantity(g, PROBABILITY));
    put_text(g, m, "kind", "relay");
    put_node(g, c->elements, element, m);
    node_push(g->arena, parts, make_scalar(g, element));
    node_push(g->arena, parts, make_scalar(g, random_near_id(g, KIND_ELEMENT, around, 12)));
    put_node(g, c->schemes, scheme, make_pair(g, "works", make_pair(g, "all", parts)));
    put_text(g, row, "cleared-by", scheme);
    put_text(g, row, "in", arena_printf(g->arena, "10.%04u ms", c->number % 10000));
    put_text(g, row, "outcome", outcome_names[0]);
    return make_pair(g, arena_printf(g->arena, "new-%u", c->number + 1), row);
}

/* What may be said of an item of the first outcome: scaled, or gone. */
static struct node *changed_damage(struct generator *g, const struct node *hazard_node)
{
    const struct node *damage =
        node_get(node_get(node_get(hazard_node, "outcomes"), outcome_names[0]), "damage");
    if (!damage)
        return NULL;
    const struct pair *item = &damage->pairs[random_index(&g->random, damage->n)];
    const char *key = node_get(item->value, "is") ? "is" : "varies";
    struct node *changed =
        random_chance(g, 4) ? make_scalar(g, "no") : make_pair(g, key, make_scalar(g, factor(g)));
    return make_pair(g, outcome_names[0], make_pair(g, "damage", make_pair(g, item->key, changed)));
}

static void change_hazard(struct generator *g, struct changing *c)
{
    unsigned k = (unsigned)random_index(&g->random, g->ids[KIND_HAZARD].n);
    const char *id = g->ids[KIND_HAZARD].at[k];
    struct node *m = make_map(g);
    struct node *damage = changed_damage(g, node_get(node_get(g->root, "hazards"), id));
    if (!touch(g, c, id))
        return;
    if (random_chance(g, 2) || !damage)
        put_node(g, m, "response", new_row(g, c, k));
    if (damage && random_chance(g, 2))
        put_node(g, m, "outcomes", damage);
    if (m->n == 0)
        put_text(g, m, "frequency", factor(g));
    put_node(g, c->hazards, id, m);
}

static struct node *option_change(struct generator *g, struct changing *c)
{
    struct node *change = make_map(g);
    if (g->ids[KIND_HAZARD].n && !random_chance(g, 4))
        change_hazard(g, c);
    if (g->ids[KIND_ELEMENT].n && random_chance(g, 2))
        change_element(g, c);
    if (g->ids[KIND_RATE].n && random_chance(g, 3))
        scale_rate(g, c);
    if (random_chance(g, 3))
        fit_absent(g, c);
    if (c->elements->n)
        put_node(g, change, "elements", c->elements);
    if (c->schemes->n)
        put_node(g, change, "schemes", c->schemes);
    if (c->hazards->n)
        put_node(g, change, "hazards", c->hazards);
    if (c->rates->n)
        put_node(g, change, "rates", c->rates);
    return change;
}

/* --- options --- */

static bool are_apart(const struct node *p, const struct node *q)
{
    for (size_t i = 0; i < p->n; i++)
        if (node_get(q, p->pairs[i].key))
            return false;
    return true;
}

/* An earlier option that it needs or cannot stand. */
static void relate(struct generator *g, struct node *m, const struct changing *all, unsigned i)
{
    unsigned k = i ? random_draw(g, 0, i - 1) : 0;
    if (!i || !random_chance(g, 3))
        return;
    struct node *names = make_list(g);
    node_push(g->arena, names, make_scalar(g, g->ids[KIND_OPTION].at[k]));
    put_node(g, m,
             are_apart(all[i].touched, all[k].touched) && random_chance(g, 2) ? "requires"
                                                                              : "excludes",
             names);
}

/* A life, and perhaps renewals at the end of each. */
static void add_life(struct generator *g, struct node *m)
{
    if (!random_chance(g, 2))
        return;
    put_text(g, m, "life", arena_printf(g->arena, "%u a", random_draw(g, 1, 40)));
    if (node_get(m, "invest") && random_chance(g, 2))
        put_text(g, m, "renewed", random_chance(g, 4) ? "no" : "yes");
}

/* What it settles with an earlier option that it has no quarrel with: an element of its own. */
static void settle(struct generator *g, struct node *m, const struct changing *all, unsigned i)
{
    unsigned k = i ? random_draw(g, 0, i - 1) : 0;
    if (!i || !random_chance(g, 3) || !are_apart(all[i].touched, all[k].touched))
        return;
    struct node *element = make_pair(g, "per-demand", random_quantity(g, PROBABILITY));
    struct node *change =
        make_pair(g, "elements", make_pair(g, arena_printf(g->arena, "C-%u", i + 1), element));
    put_node(g, m, "combine", make_pair(g, g->ids[KIND_OPTION].at[k], change));
}

void registers_add_options(struct generator *g)
{
    static const char *const skip[] = {"excludes", "requires", "change", "life",
                                       "renewed",  "combine",  NULL};
    size_t n = g->ids[KIND_OPTION].n;
    struct changing *all = NEW_ARRAY(g->arena, n, struct changing);
    struct node *section = make_map(g);
    for (unsigned i = 0; i < n; i++) {
        all[i] =
            (struct changing){make_map(g), make_map(g), make_map(g), make_map(g), make_map(g), i};
        struct node *m = make_pair(g, "change", option_change(g, &all[i]));
        fill_fields(g, m, kinds[KIND_OPTION].table, skip);
        relate(g, m, all, i);
        add_life(g, m);
        settle(g, m, all, i);
        put_node(g, section, g->ids[KIND_OPTION].at[i], m);
    }
    put_node(g, g->root, "options", section);
}
