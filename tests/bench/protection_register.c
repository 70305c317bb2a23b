/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing and writing a register of hazards with responses of their own. Owns nothing.
 *
 * Hazards stand in stations of STATION; each station has a pool of POOL elements, and a hazard
 * uses some of its own station's that follow each other in the ring of the pool. */
#include "protection_register.h"

enum { STATION = 10, POOL = 8, LEAST = 12, MOST = 16, SCHEMES = 2 };

struct protection protection_draw(struct arena *a, size_t n, size_t n_options)
{
    struct protection p = {n, n_options, NEW_ARRAY(a, n, struct chains)};
    struct random r = random_seed(4711);
    for (size_t i = 0; i < n; i++)
        p.chains[i] = chains_draw(&r, (unsigned)random_range(&r, LEAST, MOST), SCHEMES);
    return p;
}

static void write_settings(struct text *t)
{
    text_add(t, "register:\n"
                "  title: Responses\n"
                "  currency: EUR\n"
                "  prices: 2026\n"
                "  start: 2027\n"
                "  horizon: 25 a\n"
                "  discount: 4 % per a\n");
}

/* ---- elements ---- */

static void write_element(struct text *t, struct random *r, const char *id, size_t interval)
{
    static const int years[] = {1, 2, 4, 6};
    text_printf(t, "  %s: {kind: relay, undetected: %.4g per a, test: {every: %d a}}\n", id,
                random_log_uniform(r, 1e-4, 2e-2), years[interval % 4]);
}

/* How many elements of a hazard with n are shared: three in ten, the rest carried on to the next
 * hazard of the station. */
static unsigned shared_of(size_t hazard, unsigned n)
{
    return (3 * n + (unsigned)(hazard % STATION)) / 10;
}

/* Variables whose elements are of the pool lie evenly among the others. */
static bool is_shared(size_t hazard, unsigned n, unsigned variable)
{
    unsigned shared = shared_of(hazard, n);
    return (variable + 1) * shared / n != variable * shared / n;
}

static const char *element_id(struct arena *a, size_t hazard, unsigned n, unsigned variable)
{
    if (!is_shared(hazard, n, variable))
        return arena_printf(a, "E-%05zu-%u", hazard, variable);
    size_t nth = variable * shared_of(hazard, n) / n;
    return arena_printf(a, "P-%05zu-%zu", hazard / STATION, (hazard + nth) % POOL);
}

static void write_elements(struct text *t, const struct protection *p)
{
    struct random r = random_seed(2417);
    text_add(t, "elements:\n");
    for (size_t s = 0; s * STATION < p->n; s++)
        for (size_t i = 0; i < POOL; i++)
            write_element(t, &r, arena_printf(t->arena, "P-%05zu-%zu", s, i), i);
    for (size_t h = 0; h < p->n; h++)
        for (unsigned n = p->chains[h].n_elements, v = 0; v < n; v++)
            if (!is_shared(h, n, v))
                write_element(t, &r, element_id(t->arena, h, n, v), v);
}

/* ---- schemes ---- */

static void write_gate(struct text *t, const struct protection *p, size_t hazard, unsigned gate)
{
    const struct chains *c = &p->chains[hazard];
    const struct gate *g = &c->gate[gate];
    if (g->n == 0) {
        text_add(t, element_id(t->arena, hazard, c->n_elements, g->variable));
        return;
    }
    if (g->k == g->n)
        text_add(t, "{all: [");
    else if (g->k == 1)
        text_add(t, "{any: [");
    else
        text_printf(t, "{at-least: %u, of: [", g->k);
    for (unsigned i = 0; i < g->n; i++) {
        text_add(t, i ? ", " : "");
        write_gate(t, p, hazard, g->part[i]);
    }
    text_add(t, "]}");
}

static void write_schemes(struct text *t, const struct protection *p)
{
    text_add(t, "schemes:\n");
    for (size_t h = 0; h < p->n; h++)
        for (unsigned s = 0; s < SCHEMES; s++) {
            text_printf(t, "  S-%05zu-%u: {works: ", h, s);
            write_gate(t, p, h, p->chains[h].scheme[s]);
            text_add(t, "}\n");
        }
}

/* ---- hazards and options ---- */

static void write_hazard(struct text *t, struct random *r, size_t h)
{
    text_printf(
        t,
        "  H-%05zu:\n"
        "    name: Short circuit %zu\n"
        "    frequency: %.4g per a\n"
        "    response:\n"
        "      main: {cleared-by: S-%05zu-0, in: 90 ms, outcome: none}\n"
        "      backup: {cleared-by: S-%05zu-1, in: 0.8 s, outcome: slow}\n"
        "      never: {outcome: burnt}\n"
        "    outcomes:\n"
        "      slow: {name: Slowly cleared, damage: {repair: {category: equipment, is: %.4g "
        "kEUR}}}\n"
        "      burnt: {name: Burnt out, damage: {rebuild: {category: equipment, is: %.4g kEUR}}}\n",
        h, h, random_log_uniform(r, 1e-3, 0.2), h, h, random_log_uniform(r, 5, 80),
        random_log_uniform(r, 100, 3000));
}

static void write_option(struct text *t, const struct protection *p, size_t i)
{
    text_printf(t,
                "  OPT-%02zu: {name: Fewer short circuits, change: {hazards: {H-%05zu: "
                "{frequency: %zu per 1000 a}}}}\n",
                i, i * (p->n / p->n_options), i + 3);
}

void protection_write(struct text *t, const struct protection *p)
{
    struct random r = random_seed(1789);
    write_settings(t);
    write_elements(t, p);
    write_schemes(t, p);
    text_add(t, "hazards:\n");
    for (size_t h = 0; h < p->n; h++)
        write_hazard(t, &r, h);
    text_add(t, "options:\n");
    for (size_t i = 0; i < p->n_options; i++)
        write_option(t, p, i);
}
