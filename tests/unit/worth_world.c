/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The registers of worth_world.h. Owns nothing: all is the caller's arena's. */
#include "worth_world.h"

#include "base/text.h"

struct adding {
    struct arena *arena;
    struct random random;
};

static bool one_in(struct adding *x, size_t n)
{
    return random_index(&x->random, n) == 0;
}

static struct node *scalar(struct adding *x, const char *text)
{
    return node_scalar(x->arena, FORM_TEXT, text, (struct place){.file = "added", .line = 1});
}

static struct node *map(struct adding *x)
{
    return node_map(x->arena, (struct place){.file = "added", .line = 1});
}

static void put(struct adding *x, struct node *m, const char *key, const char *text)
{
    node_set(x->arena, m, key, scalar(x, text));
}

/* A number with a unit behind it. */
static void put_number(struct adding *x, struct node *m, const char *key, double low, double high,
                       const char *unit)
{
    double number = random_uniform(&x->random, low, high);
    put(x, m, key, arena_printf(x->arena, "%.3f%s", number, unit));
}

static void put_count(struct adding *x, struct node *m, const char *key, int64_t high)
{
    long long n = random_range(&x->random, 0, high);
    put(x, m, key, arena_printf(x->arena, "%lld", n));
}

/* --- outcomes --- */

static void add_interruptions(struct adding *x, struct node *outcome)
{
    struct node *rows = map(x), *town = map(x), *others = map(x);
    put_count(x, town, "customers", 4000);
    put_number(x, town, "for", 0.2, 30, " h");
    put_count(x, others, "customers", 900);
    put_number(x, others, "for", 0.5, 9.5, " min");
    node_set(x->arena, rows, "town", town);
    node_set(x->arena, rows, "others", others);
    node_set(x->arena, outcome, "interruptions", rows);
}

static void add_harm(struct adding *x, struct node *outcome)
{
    struct node *groups = map(x);
    for (int i = 1; i <= 2; i++) {
        struct node *harm = map(x);
        if (one_in(x, 3))
            continue;
        put_number(x, harm, "present", 0.1, 40, " %");
        if (!one_in(x, 4))
            put_number(x, harm, "death", 0.1, 60, " %");
        if (one_in(x, 3))
            put_number(x, harm, "injury", 0.1, 60, " %");
        node_set(x->arena, groups, arena_printf(x->arena, "CREW-%d", i), harm);
    }
    if (groups->n)
        node_set(x->arena, outcome, "harm", groups);
}

static void add_to_hazard(struct adding *x, struct node *hazard)
{
    const struct node *outcomes = node_get(hazard, "outcomes");
    if (one_in(x, 3))
        put_number(x, hazard, "growth", -4, 9, " % per a");
    for (size_t i = 0; i < outcomes->n; i++) {
        if (one_in(x, 2))
            add_interruptions(x, outcomes->pairs[i].value);
        if (one_in(x, 2))
            add_harm(x, outcomes->pairs[i].value);
    }
}

/* --- options --- */

static const char *some_date(struct adding *x)
{
    int year = (int)random_range(&x->random, 2025, 2040);
    if (one_in(x, 3))
        return arena_printf(x->arena, "%d", year);
    return arena_printf(x->arena, "%d-%02d-%02d", year, (int)random_range(&x->random, 1, 12),
                        (int)random_range(&x->random, 1, 28));
}

/* The option but for renewals, commissioning, worth at the end and what it settles: those are told
 * apart in weigh_world.h. */
static struct node *plain_option(struct adding *x, const struct node *option)
{
    static const char *const skip[] = {"renewed", "early", "residual", "combine"};
    struct node *plain = map(x);
    for (size_t i = 0; i < option->n; i++) {
        bool skipped = false;
        for (size_t k = 0; k < sizeof skip / sizeof *skip; k++)
            skipped = skipped || text_equal(option->pairs[i].key, skip[k]);
        if (!skipped)
            node_set(x->arena, plain, option->pairs[i].key, option->pairs[i].value);
    }
    return plain;
}

static void add_to_option(struct adding *x, struct node *option)
{
    if (!one_in(x, 3)) {
        struct node *invest = map(x);
        put_number(x, invest, "is", 1, 900, " kEUR");
        if (one_in(x, 2))
            put(x, invest, "on", some_date(x));
        node_set(x->arena, option, "invest", invest);
    }
    if (one_in(x, 2))
        put_number(x, option, "running", 0.1, 9, " kEUR per a");
    if (one_in(x, 2))
        put(x, option, "in-service", some_date(x));
    if (one_in(x, 3))
        put_number(x, option, "life", 1, 20, " a");
}

/* --- the register --- */

/* `was` goes with what options make of frequencies. */
static void add_state(struct adding *x, struct node *root)
{
    struct node *hazards = map(x), *change = map(x), *when = map(x), *shares = map(x);
    struct node *state = map(x), *states = map(x);
    for (int i = 1; i <= 2; i++) {
        struct node *hazard = map(x);
        double factor = random_uniform(&x->random, 0, 3);
        put(x, hazard, "frequency", arena_printf(x->arena, "%.3f * was", factor));
        node_set(x->arena, hazards, arena_printf(x->arena, "H-%d", i), hazard);
    }
    node_set(x->arena, change, "hazards", hazards);
    node_set(x->arena, when, "out", change);
    put(x, shares, "normal", "rest");
    put_number(x, shares, "out", 1, 30, " %");
    node_set(x->arena, state, "varies", shares);
    node_set(x->arena, state, "when", when);
    node_set(x->arena, states, "ST-OUT", state);
    node_set(x->arena, root, "states", states);
}

static void add_worth_of_life(struct adding *x, struct node *settings)
{
    struct node *criteria = map(x), *people = map(x);
    put_number(x, people, "per-fatality", 0.5, 9, " MEUR");
    node_set(x->arena, criteria, "people", people);
    node_set(x->arena, settings, "criteria", criteria);
}

static struct node *section(const struct node *root, const char *name)
{
    return node_get(root, name);
}

struct node *worth_register(struct arena *a, uint64_t seed)
{
    struct register_shape shape = register_small;
    struct adding x = {a, random_seed(seed ^ 0x70ffee)};
    shape.stored = false;
    struct node *root = random_register(a, seed, &shape);
    struct node *hazards = section(root, "hazards"), *options = section(root, "options");
    for (size_t i = 0; i < hazards->n; i++)
        add_to_hazard(&x, hazards->pairs[i].value);
    for (size_t i = 0; i < options->n; i++) {
        options->pairs[i].value = plain_option(&x, options->pairs[i].value);
        add_to_option(&x, options->pairs[i].value);
    }
    if (one_in(&x, 3))
        add_state(&x, root);
    if (!one_in(&x, 4))
        add_worth_of_life(&x, section(root, "register"));
    return root;
}
