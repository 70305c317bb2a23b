/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random registers: drawing, expressions, and the objects around the hazards. Owns
 * nothing beyond the arena; all chance comes from the one generator, in one order. */
#include "registers.h"

#include <math.h>
#include <string.h>

#include "registers_parts.h"

const struct register_shape register_small = {.sources = 4,
                                              .sites = 4,
                                              .groups = 2,
                                              .values = 14,
                                              .rates = 5,
                                              .types = 3,
                                              .elements = 12,
                                              .schemes = 9,
                                              .hazards = 4,
                                              .options = 5,
                                              .decisions = 2,
                                              .rows = 4,
                                              .depth = 3,
                                              .stored = true};

/* --- drawing --- */

bool random_chance(struct generator *g, unsigned n)
{
    return random_index(&g->random, n) == 0;
}

unsigned random_draw(struct generator *g, unsigned low, unsigned high)
{
    return (unsigned)random_range(&g->random, low, high);
}

const char *random_number(struct generator *g, double lo, double hi)
{
    double x = random_log_uniform(&g->random, lo, hi);
    int e = (int)floor(log10(x));
    int digits = (int)(x / pow(10, e) * 100);
    const char *s = arena_printf(g->arena, "%d.%02de%d", digits / 100, digits % 100, e);
    if (!text_to_double(s, s + strlen(s), &x))
        return "1";
    return text_double(arena_alloc(g->arena, 32), x);
}

const char *random_text(struct generator *g)
{
    static const char *const words[] = {"Relay", "of the", "harbour", "no. 7", "schön: \"so\"",
                                        "yes",   "12 kV",  "Ærø",     "#1",    "- or not"};
    struct text t;
    text_init(&t, g->arena);
    for (unsigned n = random_draw(g, 1, 4); n > 0; n--)
        text_printf(&t, "%s%s", t.n ? " " : "", random_pick(&g->random, words));
    return text_str(&t);
}

const char *random_date(struct generator *g)
{
    return arena_printf(g->arena, "20%02u-%02u-%02u", random_draw(g, 10, 40), random_draw(g, 1, 12),
                        random_draw(g, 1, 28));
}

const char *random_id(struct generator *g, enum kind kind)
{
    return g->ids[kind].at[random_index(&g->random, g->ids[kind].n)];
}

const char *random_near_id(struct generator *g, enum kind kind, unsigned around, unsigned width)
{
    const struct ids *ids = &g->ids[kind];
    size_t window = ids->n < width ? ids->n : width;
    size_t first = ids->n > window ? around % (ids->n - window + 1) : 0;
    return ids->at[first + random_index(&g->random, window)];
}

/* --- nodes --- */

static const struct place nowhere = {.file = "random"};

struct node *make_scalar(struct generator *g, const char *text)
{
    return node_scalar(g->arena, FORM_TEXT, text, nowhere);
}

struct node *make_map(struct generator *g)
{
    return node_map(g->arena, nowhere);
}

struct node *make_list(struct generator *g)
{
    return node_list(g->arena, nowhere);
}

void put_node(struct generator *g, struct node *m, const char *key, struct node *value)
{
    node_add(g->arena, m, key, nowhere, value);
}

void put_text(struct generator *g, struct node *m, const char *key, const char *text)
{
    put_node(g, m, key, make_scalar(g, text));
}

struct node *make_pair(struct generator *g, const char *key, struct node *value)
{
    struct node *m = make_map(g);
    put_node(g, m, key, value);
    return m;
}

/* --- expressions --- */

/* What stands behind a number of each dimension, in several ways. */
static const char *random_unit(struct generator *g, enum field_dim dim)
{
    static const char *const time[] = {" s", " min", " h", " d", " week", " a"};
    static const char *const power[] = {" kW", " MW", " GW"};
    static const char *const money[] = {" EUR", " kEUR", " MEUR"};
    static const char *const frequency[] = {" per a", " / h", " per 10 a", " per month"};
    static const char *const rates[] = {" kEUR per a", " EUR/h", " EUR per week"};
    switch (dim) {
    case TIME: return random_pick(&g->random, time);
    case POWER: return random_pick(&g->random, power);
    case MONEY: return random_pick(&g->random, money);
    case FREQUENCY: return random_pick(&g->random, frequency);
    case MONEY_RATE: return random_pick(&g->random, rates);
    case INTEREST: return " % per a";
    default: return "";
    }
}

const char *random_literal(struct generator *g, enum field_dim dim)
{
    if (dim == PROBABILITY && random_chance(g, 2))
        return arena_printf(g->arena, "%s %%", random_number(g, 0.5, 90));
    if (dim == PROBABILITY)
        return random_number(g, 1e-4, 0.9);
    if (dim == FREQUENCY && random_chance(g, 4))
        return arena_printf(g->arena, "1 in %s a", random_number(g, 2, 500));
    return arena_printf(g->arena, "%s%s", random_number(g, 0.2, 30), random_unit(g, dim));
}

/* The name of a value of that dimension, or NULL. */
static const char *known(struct generator *g, enum field_dim dim)
{
    size_t n = g->values.n, from = n ? random_index(&g->random, n) : 0;
    for (size_t i = 0; i < n && i < 40; i++)
        if (g->values.at[(from + i) % n].dim == dim)
            return g->values.at[(from + i) % n].id;
    return NULL;
}

/* The format with x for X and y for Y. */
static const char *print2(struct generator *g, const char *format, const char *x, const char *y)
{
    struct text t;
    text_init(&t, g->arena);
    for (const char *p = format; *p; p++) {
        if (*p == 'X')
            text_add(&t, x);
        else if (*p == 'Y')
            text_add(&t, y);
        else
            text_byte(&t, *p);
    }
    return text_str(&t);
}

static const char *of_probabilities(struct generator *g, unsigned depth)
{
    static const char *const forms[] = {"(X) * (Y)", "min(X; Y)", "max(X; Y)", "exp(-(X)) * (Y)",
                                        "((X) + (Y)) / (3 - (Y))"};
    if (g->ids[KIND_ELEMENT].n && random_chance(g, 4))
        return arena_printf(g->arena, "fails(%s)", random_id(g, KIND_ELEMENT));
    if (g->shares.n && random_chance(g, 4))
        return g->shares.at[random_index(&g->random, g->shares.n)];
    return print2(g, random_pick(&g->random, forms), random_expression(g, PROBABILITY, depth),
                  random_expression(g, PROBABILITY, depth));
}

/* What makes a quantity of one dimension from others. */
static const char *of_others(struct generator *g, enum field_dim dim, unsigned depth)
{
    const char *time = random_expression(g, TIME, depth);
    switch (dim) {
    case MONEY:
        return random_chance(g, 2)
                   ? print2(g, "(X) * (Y) * 7.5 EUR/kWh", random_expression(g, POWER, depth), time)
                   : print2(g, "(X) * (Y)", random_expression(g, MONEY_RATE, depth), time);
    case TIME:
        return print2(g, "(Y) / (1 + log(2 + (X)))", random_expression(g, NUMBER, depth), time);
    case FREQUENCY: return print2(g, "(X) / (0.3 h + (Y))", random_expression(g, NUMBER, 0), time);
    case MONEY_RATE:
        return print2(g, "(X) / (3 d + (Y))", random_expression(g, MONEY, depth), time);
    case POWER:
        return print2(g, "(X)^1 * exp(-(Y) / (2 + (Y)))", random_literal(g, POWER),
                      random_expression(g, NUMBER, depth));
    default: return print2(g, "sqrt(1 + (X)^2)", random_expression(g, NUMBER, depth), time);
    }
}

const char *random_expression(struct generator *g, enum field_dim dim, unsigned depth)
{
    static const char *const forms[] = {"(X) + (Y)", "min(X; Y)",
                                        "max((X) - (Y); 0.1 * (X); 0.2 * (Y))",
                                        "(X) * 0.7 + (Y) / 3", "max(X; Y)"};
    const char *name = known(g, dim);
    if (depth == 0 || random_chance(g, 4))
        return name && !random_chance(g, 3) ? name : random_literal(g, dim);
    if (dim == PROBABILITY)
        return of_probabilities(g, depth - 1);
    if (random_chance(g, 2))
        return of_others(g, dim, depth - 1);
    const char *x = random_expression(g, dim, depth - 1), *y = random_expression(g, dim, depth - 1);
    if (random_chance(g, 5))
        return arena_printf(g->arena, "lookup(%s; 0.3 -> %s; %s -> %s)",
                            random_expression(g, PROBABILITY, 0), x, random_number(g, 0.4, 0.9), y);
    return print2(g, random_pick(&g->random, forms), x, y);
}

/* --- distributions --- */

static struct node *two_parts(struct generator *g, const char *key, const char *value,
                              const char *other, const char *second)
{
    struct node *m = make_map(g);
    put_text(g, m, key, value);
    put_text(g, m, other, second);
    return m;
}

static const char *times_unit(struct generator *g, const char *number, const char *unit)
{
    return arena_printf(g->arena, "%s%s", number, unit);
}

static struct node *three_points(struct generator *g, const char *unit)
{
    struct node *m = make_map(g);
    bool uniform = random_chance(g, 3);
    put_text(g, m, "shape", uniform ? "uniform" : random_chance(g, 2) ? "pert" : "triangular");
    put_text(g, m, "from", times_unit(g, random_number(g, 0.01, 0.1), unit));
    if (!uniform)
        put_text(g, m, "most-likely", times_unit(g, random_number(g, 0.11, 0.3), unit));
    put_text(g, m, "to", times_unit(g, random_number(g, 0.4, 0.9), unit));
    return m;
}

static struct node *discrete(struct generator *g, const char *unit)
{
    struct node *values = make_map(g);
    const char *low = times_unit(g, random_number(g, 0.01, 0.1), unit);
    const char *high = times_unit(g, random_number(g, 0.2, 0.8), unit);
    put_node(g, values, "low", two_parts(g, "is", low, "p", random_literal(g, PROBABILITY)));
    put_node(g, values, "high", two_parts(g, "is", high, "p", "rest"));
    return make_pair(g, "values", values);
}

static struct node *range(struct generator *g, const char *unit)
{
    return make_scalar(g, arena_printf(g->arena, "%u %% within %s%s .. %s%s",
                                       random_draw(g, 80, 99), random_number(g, 0.01, 0.02), unit,
                                       random_number(g, 0.03, 0.05), unit));
}

static struct node *random_distribution(struct generator *g, enum field_dim dim)
{
    const char *unit = random_unit(g, dim);
    switch (random_draw(g, 0, 5)) {
    case 0: return three_points(g, unit);
    case 1: return discrete(g, unit);
    case 2: return range(g, unit);
    case 3: /* far enough from 0 */
        return two_parts(g, "mean", times_unit(g, random_number(g, 0.3, 0.5), unit),
                         "standard-deviation", times_unit(g, random_number(g, 0.01, 0.05), unit));
    case 4:
        if (dim == PROBABILITY || dim == NUMBER)
            return two_parts(g, "a", random_number(g, 0.4, 4), "b", random_number(g, 2, 900));
        return two_parts(g, "mean", times_unit(g, random_number(g, 0.01, 0.5), unit),
                         "shape-parameter", random_number(g, 0.4, 9));
    default: {
        struct node *m = two_parts(g, "median", times_unit(g, random_number(g, 0.01, 0.2), unit),
                                   "error-factor", random_number(g, 1.2, 8));
        if (dim == PROBABILITY || random_chance(g, 3))
            put_text(g, m, "at-most", times_unit(g, "1", unit));
        return m;
    }
    }
}

struct node *random_quantity(struct generator *g, enum field_dim dim)
{
    if (dim != INTEREST && random_chance(g, 3))
        return random_distribution(g, dim);
    return make_scalar(g, random_expression(g, dim, random_draw(g, 0, g->shape.depth)));
}

/* --- objects --- */

static void name_ids(struct generator *g, enum kind kind, const char *prefix, unsigned n)
{
    for (unsigned i = 0; i < n; i++)
        *array_push(g->arena, &g->ids[kind]) = arena_printf(g->arena, "%s-%u", prefix, i + 1);
}

static void add_settings(struct generator *g)
{
    static const char *const skip[] = {"perspectives", "perspective", "criteria", "counts", NULL};
    struct node *m = make_map(g), *money = make_map(g), *people = make_map(g),
                *perspectives = make_map(g);
    struct node *counts = make_list(g), *company = make_list(g), *society = make_list(g);
    put_text(g, m, "currency", "EUR");
    put_text(g, m, "prices", "2026");
    g->years = random_draw(g, 1, 40);
    put_text(g, m, "horizon", arena_printf(g->arena, "%u a", g->years));
    put_text(g, m, "discount", arena_printf(g->arena, "%s %% per a", random_number(g, 0.5, 9)));
    if (random_chance(g, 2))
        put_text(g, m, "start", random_chance(g, 2) ? "2027" : "2027-07-01");
    node_push(g->arena, counts, make_scalar(g, "section"));
    node_push(g->arena, counts, make_scalar(g, "bay"));
    put_node(g, m, "counts", counts);
    node_push(g->arena, company, make_scalar(g, "equipment"));
    node_push(g->arena, company, make_scalar(g, "penalty"));
    node_push(g->arena, society, make_scalar(g, "lost-load"));
    node_push(g->arena, society, make_scalar(g, "equipment"));
    put_node(g, perspectives, "society", society);
    put_node(g, perspectives, "company", company);
    put_node(g, m, "perspectives", perspectives);
    if (random_chance(g, 2))
        put_text(g, m, "perspective", random_chance(g, 2) ? "society" : "all");
    put_text(g, money, "scope", scope_words[random_draw(g, 0, 2)]);
    put_text(g, money, "acceptable-below", "2 kEUR per a");
    put_text(g, money, "intolerable-above", "80 kEUR per a");
    put_text(g, people, "acceptable-below", "1e-6 per a");
    put_text(g, people, "intolerable-above", "1e-3 per a");
    put_text(g, people, "disproportion", "3");
    put_text(g, people, "per-fatality", "2.1 MEUR");
    struct node *criteria = make_pair(g, "money", money);
    if (g->shape.stored)
        put_node(g, criteria, "people", people);
    if (random_chance(g, 2))
        put_node(g, m, "criteria", criteria);
    fill_fields(g, m, kinds[KIND_REGISTER].table, skip);
    put_node(g, g->root, "register", m);
}

/* Objects of which the table says everything. */
static void add_plain(struct generator *g, enum kind kind)
{
    static const char *const skip[] = {"in", NULL};
    struct node *section = make_map(g);
    for (size_t i = 0; i < g->ids[kind].n; i++) {
        struct node *m = make_map(g);
        if (kind == KIND_SITE && i > 0 && random_chance(g, 2))
            put_text(g, m, "in", g->ids[kind].at[random_draw(g, 0, (unsigned)i - 1)]);
        fill_fields(g, m, kinds[kind].table, skip);
        put_node(g, section, g->ids[kind].at[i], m);
    }
    put_node(g, g->root, kinds[kind].section, section);
}

/* Each may use those before it. */
static void add_values(struct generator *g)
{
    static const enum field_dim dims[] = {NUMBER, PROBABILITY, TIME,      POWER,
                                          MONEY,  FREQUENCY,   MONEY_RATE};
    struct node *section = make_map(g);
    for (size_t i = 0; i < g->ids[KIND_VALUE].n; i++) {
        enum field_dim dim = dims[i % 7];
        struct node *m = make_map(g), *q = random_quantity(g, dim);
        if (random_chance(g, 4)) {
            put_node(g, section, g->ids[KIND_VALUE].at[i], q); /* the short form */
        } else {
            put_node(g, m, random_chance(g, 3) ? "varies" : "is", q);
            fill_fields(g, m, kinds[KIND_VALUE].table, NULL);
            put_node(g, section, g->ids[KIND_VALUE].at[i], m);
        }
        *array_push(g->arena, &g->values) = (struct known_value){g->ids[KIND_VALUE].at[i], dim};
    }
    put_node(g, g->root, "values", section);
}

static struct node *usable_prior(struct generator *g, const char *per)
{
    struct node *m = make_map(g);
    const char *rate = arena_printf(g->arena, "%s per %s", random_number(g, 1e-3, 0.3), per);
    unsigned form = random_draw(g, 0, 3);
    put_text(g, m, form == 1 ? "median" : "mean", rate);
    if (form == 0)
        put_text(g, m, "weight", random_number(g, 0.3, 6));
    if (form == 1 || form == 2)
        put_text(g, m, "error-factor", random_number(g, 1.3, 12));
    if (form == 2 && random_chance(g, 2))
        put_text(g, m, "form", "lognormal");
    if (form == 3)
        put_text(g, m, "form", random_chance(g, 2) ? "constrained" : "fixed");
    if (random_chance(g, 3) && g->ids[KIND_SOURCE].n)
        put_text(g, m, "source", random_id(g, KIND_SOURCE));
    return m;
}

/* A prior that events may be added to: not a fixed one. */
static bool learns(const struct node *rate)
{
    const struct node *prior = node_get(rate, "prior");
    const struct node *form = prior ? node_get(prior, "form") : NULL;
    return prior && !(form && text_equal(form->text, "fixed"));
}

static void add_rates(struct generator *g)
{
    static const char *const skip[] = {"per",    "events", "exposure",    "growth", "since",
                                       "ageing", "kinds",  "kinds-prior", NULL};
    static const char *const per[] = {"section a", "km a", "a", "bay h"};
    static const char *const amounts[] = {"8 section", "14 km", "3", "40 bay"};
    struct node *section = make_map(g);
    for (size_t i = 0; i < g->ids[KIND_RATE].n; i++) {
        struct node *m = make_map(g);
        unsigned k = random_draw(g, 0, 3);
        *array_push(g->arena, &g->rate_per) = per[k];
        put_text(g, m, "per", per[k]);
        const char *is = arena_printf(g->arena, "%s per %s", random_number(g, 1e-3, 0.3), per[k]);
        if (random_chance(g, 2))
            put_node(g, m, "prior", usable_prior(g, per[k]));
        else if (random_chance(g, 2))
            put_text(g, m, "is", is);
        else
            put_node(g, m, "is",
                     two_parts(g, "median", is, "error-factor", random_number(g, 1.3, 9)));
        if (learns(m) && random_chance(g, 2)) {
            struct node *stretch = two_parts(g, "from", "2012-01-01", "amount", amounts[k]);
            if (random_chance(g, 2))
                put_text(g, stretch, "to", "2019-12-31");
            put_text(g, m, "events", arena_printf(g->arena, "%u", random_draw(g, 0, 12)));
            put_node(g, m, "exposure", make_pair(g, "first", stretch));
        }
        random_course(g, m, g->ids[KIND_RATE].at[i]);
        fill_fields(g, m, kinds[KIND_RATE].table, skip);
        put_node(g, section, g->ids[KIND_RATE].at[i], m);
    }
    put_node(g, g->root, "rates", section);
}

/* Detected failures are mended in some time. */
static void mend_detected(struct generator *g, struct node *m)
{
    if (node_get(m, "detected") && !node_get(m, "repair"))
        put_text(g, m, "repair", "31 h");
}

static void add_types(struct generator *g)
{
    struct node *section = make_map(g);
    for (size_t i = 0; i < g->ids[KIND_TYPE].n; i++) {
        struct node *m = make_pair(g, "per-demand", random_record(g));
        fill_fields(g, m, kinds[KIND_TYPE].table, NULL);
        mend_detected(g, m);
        put_node(g, section, g->ids[KIND_TYPE].at[i], m);
    }
    put_node(g, g->root, "types", section);
}

static void add_elements(struct generator *g)
{
    static const char *const skip[] = {"type", "per-demand", NULL};
    struct node *section = make_map(g);
    struct ids all = g->ids[KIND_ELEMENT];
    g->ids[KIND_ELEMENT] = (struct ids){0}; /* each is known once it is there */
    for (size_t i = 0; i < all.n; i++) {
        struct node *m = make_map(g);
        if (g->ids[KIND_TYPE].n && random_chance(g, 3)) {
            put_text(g, m, "type", random_id(g, KIND_TYPE));
        } else {
            struct node *record = random_record(g);
            put_node(g, m, "per-demand", record);
            bool plain = record->type == NODE_SCALAR || node_get(record, "is");
            if (plain)
                *array_push(g->arena, &g->own) = all.at[i];
        }
        fill_fields(g, m, kinds[KIND_ELEMENT].table, skip);
        mend_detected(g, m);
        put_node(g, section, all.at[i], m);
        *array_push(g->arena, &g->ids[KIND_ELEMENT]) = all.at[i];
    }
    put_node(g, g->root, "elements", section);
}

static void add_schemes(struct generator *g)
{
    static const char *const skip[] = {"works", "trips-on", NULL};
    struct node *section = make_map(g);
    struct ids all = g->ids[KIND_SCHEME];
    g->ids[KIND_SCHEME] = (struct ids){0};
    for (unsigned i = 0; i < all.n; i++) {
        bool absent = i % 4 == 2;
        struct node *works =
            absent ? make_scalar(g, "absent") : random_structure(g, i, g->shape.depth);
        struct node *m = make_pair(g, "works", works);
        if (absent)
            *array_push(g->arena, &g->absent) = all.at[i];
        fill_fields(g, m, kinds[KIND_SCHEME].table, skip);
        if (g->shape.stored && random_chance(g, 5))
            put_node(g, m, "trips-on", random_structure(g, i, 1));
        bool is_short = m->n == 1 && random_chance(g, 2);
        put_node(g, section, all.at[i], is_short ? works : m);
        *array_push(g->arena, &g->ids[KIND_SCHEME]) = all.at[i];
    }
    put_node(g, g->root, "schemes", section);
}

static void add_decisions(struct generator *g)
{
    static const char *const skip[] = {"options", "choose", "subtrees", "every",
                                       "sees",    "focus",  NULL};
    struct node *section = make_map(g);
    for (size_t i = 0; i < g->ids[KIND_DECISION].n; i++) {
        struct node *m = make_map(g), *options = make_list(g);
        size_t n = g->ids[KIND_OPTION].n, from = n ? random_index(&g->random, n) : 0;
        for (size_t k = 0; k < n && k < 4; k++)
            node_push(g->arena, options, make_scalar(g, g->ids[KIND_OPTION].at[(from + k) % n]));
        put_node(g, m, "options", options);
        if (g->ids[KIND_HAZARD].n && random_chance(g, 2)) {
            struct node *focus = make_list(g);
            node_push(g->arena, focus, make_scalar(g, random_id(g, KIND_HAZARD)));
            put_node(g, m, "focus", focus);
        }
        fill_fields(g, m, kinds[KIND_DECISION].table, skip);
        put_node(g, section, g->ids[KIND_DECISION].at[i], m);
    }
    put_node(g, g->root, "decisions", section);
}

static void name_all(struct generator *g, const struct register_shape *s)
{
    name_ids(g, KIND_SOURCE, "SRC", s->sources);
    name_ids(g, KIND_SITE, "ST", s->sites);
    name_ids(g, KIND_GROUP, "CREW", s->groups);
    name_ids(g, KIND_VALUE, "val", s->values);
    name_ids(g, KIND_RATE, "rate", s->rates);
    name_ids(g, KIND_TYPE, "T", s->types);
    name_ids(g, KIND_ELEMENT, "E", s->elements);
    name_ids(g, KIND_SCHEME, "S", s->schemes);
    name_ids(g, KIND_HAZARD, "H", s->hazards);
    name_ids(g, KIND_OPTION, "OPT", s->options);
    name_ids(g, KIND_DECISION, "D", s->decisions);
}

struct node *random_register(struct arena *a, uint64_t seed, const struct register_shape *shape)
{
    struct generator generator = {.arena = a, .random = random_seed(seed), .shape = *shape};
    struct generator *g = &generator;
    g->root = make_map(g);
    name_all(g, shape);
    struct ids elements = g->ids[KIND_ELEMENT], hazards = g->ids[KIND_HAZARD];
    g->ids[KIND_ELEMENT].n = 0; /* expressions name elements and hazards once they are there */
    g->ids[KIND_HAZARD].n = 0;
    add_settings(g);
    add_plain(g, KIND_SOURCE);
    add_plain(g, KIND_SITE);
    add_plain(g, KIND_GROUP);
    add_values(g);
    add_rates(g);
    add_types(g);
    g->ids[KIND_ELEMENT] = elements;
    add_elements(g);
    add_schemes(g);
    g->ids[KIND_HAZARD] = hazards;
    registers_add_hazards(g);
    registers_add_options(g);
    add_decisions(g);
    if (shape->stored)
        registers_add_stored(g);
    return g->root;
}
