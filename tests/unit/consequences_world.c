/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random hazards that interrupt and harm, and what they do by enumeration. Owns nothing beyond
 * the world's arena. Group 2 is harmed by nothing. */
#include "consequences_world.h"

#include "base/text.h"

/* --- drawing --- */

static double share(struct random *r)
{
    return (double)random_range(r, 1, 99) / 100;
}

static unsigned some(struct random *r, int64_t most)
{
    return (unsigned)random_range(r, 0, most);
}

/* Around the limit, at it, or anything. */
static unsigned seconds(struct random *r, unsigned limit)
{
    switch (some(r, 4)) {
    case 0: return limit;
    case 1: return limit + 1;
    case 2: return limit > 0 ? limit - 1 : 0;
    case 3: return 3600 * (1 + some(r, 40));
    default: return some(r, 900);
    }
}

static struct cut cut(struct random *r, unsigned limit)
{
    struct cut c = {.customers = 1 + some(r, 4000), .kilowatts = 10 + some(r, 9000)};
    unsigned form = some(r, 4);
    c.customers = form == 0 ? 0 : c.customers; /* load that no customer is counted for */
    c.kilowatts = form == 1 ? 0 : c.kilowatts;
    c.seconds = seconds(r, limit);
    return c;
}

static struct world_outcome outcome(struct random *r, unsigned limit)
{
    struct world_outcome o = {.n_cuts = some(r, CUTS)};
    for (unsigned i = 0; i < o.n_cuts; i++)
        o.cut[i] = cut(r, limit);
    for (unsigned g = 0; g + 1 < GROUPS; g++)
        o.harm[g] = (struct harmed){some(r, 1) == 1, share(r), share(r), share(r)};
    return o;
}

static struct world_end end(struct random *r)
{
    struct world_end e = {some(r, OUTCOMES), some(r, OUTCOMES), some(r, 2) ? 1 : share(r)};
    e.outcome = e.outcome == OUTCOMES ? NO_OUTCOME : e.outcome;
    e.other = e.other == OUTCOMES ? NO_OUTCOME : e.other;
    return e;
}

static struct world_hazard hazard(struct random *r, unsigned limit)
{
    struct world_hazard h = {.frequency = (double)random_range(r, 1, 5000) / 1000};
    h.n_rows = some(r, ROWS);
    for (unsigned i = 0; i < h.n_rows; i++)
        h.row[i] = (struct world_row){1 + some(r, (1 << ELEMENTS) - 2), some(r, 1) == 1,
                                      some(r, 1) ? 1 : share(r)};
    for (unsigned i = 0; i <= ROWS; i++)
        h.end[i] = end(r);
    h.end[ROWS + 1] = (struct world_end){OUTCOMES, NO_OUTCOME, 1};
    for (unsigned i = 0; i <= OUTCOMES; i++)
        h.outcome[i] = outcome(r, limit);
    return h;
}

static const struct limit {
    unsigned seconds;
    const char *text;
} limits[] = {{300, NULL},     {300, "5 min"}, {300, "300 s"}, {60, "1 min"},
              {90, "1.5 min"}, {0, "0 s"},     {180, "3 min"}, {7200, "2 h"}};

struct world *world_random(struct arena *a, uint64_t seed)
{
    struct random r = random_seed(seed);
    struct world *w = NEW(a, struct world);
    const struct limit *limit = &random_pick(&r, limits);
    *w = (struct world){.arena = a, .limit = limit->seconds, .limit_text = limit->text};
    for (unsigned i = 0; i <= ELEMENTS; i++)
        w->fails[i] = share(&r);
    for (unsigned i = 0; i < HAZARDS; i++)
        w->hazard[i] = hazard(&r, w->limit);
    for (unsigned i = 0; i < GROUPS; i++)
        w->persons[i] = 1 + some(&r, 500);
    w->served = some(&r, 4) ? 1 + some(&r, 90000) : 0;
    struct world_outcome *o = &w->hazard[0].outcome[0];
    o->n_cuts = o->n_cuts ? o->n_cuts : 1;
    o->cut[0] = (struct cut){100, 200, 600};
    o->harm[0] = (struct harmed){true, share(&r), share(&r), share(&r)};
    w->bad = share(&r);
    w->bad_cut = (struct cut){1 + some(&r, 4000), 200, seconds(&r, w->limit)};
    w->bad_death = share(&r);
    return w;
}

/* --- changes --- */

void world_fit(struct world *w)
{
    w->hazard[0].fitted = true;
}

void world_turn_bad(struct world *w)
{
    w->fails[0] = 1;
    w->hazard[0].outcome[0].cut[0] = w->bad_cut;
    w->hazard[0].outcome[0].harm[0].death = w->bad_death;
}

/* --- the document --- */

/* One time in several ways. */
static const char *time_text(struct arena *a, unsigned s)
{
    if (s > 0 && s % 3600 == 0)
        return arena_printf(a, "%u h", s / 3600);
    if (s > 0 && s % 60 == 0)
        return arena_printf(a, "%u min", s / 60);
    return s % 2 || s == 0 ? arena_printf(a, "%u s", s) : arena_printf(a, "%u000 ms", s);
}

static void write_cut(struct text *t, struct arena *a, const struct cut *c)
{
    text_printf(t, "{for: %s", time_text(a, c->seconds));
    if (c->customers)
        text_printf(t, ", customers: %u", c->customers);
    if (c->kilowatts)
        text_printf(t, ", load: %u kW", c->kilowatts);
    text_add(t, "}");
}

static void write_harm(struct text *t, const struct world_outcome *o)
{
    unsigned n = 0;
    for (unsigned g = 0; g < GROUPS; g++)
        if (o->harm[g].is)
            text_printf(t, "%sG%u: {present: %g, death: %g, injury: %g}", n++ ? ", " : ", harm: {",
                        g, o->harm[g].present, o->harm[g].death, o->harm[g].injury);
    text_add(t, n ? "}" : "");
}

static void write_outcome(struct text *t, struct arena *a, const struct world_outcome *o,
                          unsigned k)
{
    text_printf(t, "      o%u: {name: Outcome", k);
    for (unsigned i = 0; i < o->n_cuts; i++) {
        text_printf(t, "%si%u: ", i ? ", " : ", interruptions: {", i);
        write_cut(t, a, &o->cut[i]);
    }
    text_add(t, o->n_cuts ? "}" : "");
    write_harm(t, o);
    text_add(t, "}\n");
}

static const char *outcome_text(struct arena *a, unsigned k)
{
    return k == NO_OUTCOME ? "none" : arena_printf(a, "o%u", k);
}

static void write_end(struct text *t, struct arena *a, const struct world_end *e)
{
    if (e->share < 1)
        text_printf(t, "split: {p: {share: %g, outcome: %s}, q: {share: rest, outcome: %s}}",
                    e->share, outcome_text(a, e->outcome), outcome_text(a, e->other));
    else
        text_printf(t, "outcome: %s", outcome_text(a, e->outcome));
}

static void write_hazard(struct text *t, struct arena *a, const struct world_hazard *h, unsigned k)
{
    text_printf(t, "  H%u:\n    name: Hazard\n    frequency: %g per a\n    response:\n", k,
                h->frequency);
    for (unsigned i = 0; i < h->n_rows; i++) {
        text_printf(t, "      r%u: {cleared-by: S%u-%u, in: 0.%u s, ", i, k, i, i + 1);
        if (h->row[i].sees < 1)
            text_printf(t, "sees: %g, ", h->row[i].sees);
        write_end(t, a, &h->end[i]);
        text_add(t, "}\n");
    }
    text_add(t, "      never: {");
    write_end(t, a, &h->end[ROWS]);
    text_add(t, "}\n    outcomes:\n");
    for (unsigned i = 0; i < OUTCOMES; i++)
        write_outcome(t, a, &h->outcome[i], i);
}

static void write_schemes(struct text *t, const struct world *w)
{
    text_add(t, "schemes:\n  UNUSED: {all: [E0]}\n");
    for (unsigned k = 0; k < HAZARDS; k++)
        for (unsigned i = 0; i < w->hazard[k].n_rows; i++) {
            const struct world_row *row = &w->hazard[k].row[i];
            const char *before = row->any ? "any: [" : "all: [";
            text_printf(t, "  S%u-%u: {", k, i);
            for (unsigned e = 0; e < ELEMENTS; e++)
                if (row->elements & 1U << e) {
                    text_printf(t, "%sE%u", before, e);
                    before = ", ";
                }
            text_add(t, "]}\n");
        }
}

/* An element that clears before all others, into an outcome of its own. */
static void write_option(struct text *t, const struct world *w)
{
    text_printf(t,
                "options:\n  FIT:\n    name: Fit\n    change:\n"
                "     elements: {NEW: {kind: relay, per-demand: %g}}\n     hazards:\n"
                "      H0:\n       response: {new: {cleared-by: NEW, in: 10 ms, outcome: o%d}}\n"
                "       outcomes:\n",
                w->fails[NEW_ELEMENT], OUTCOMES);
    text_add(t, "  ");
    write_outcome(t, w->arena, &w->hazard[0].outcome[OUTCOMES], OUTCOMES);
}

static void write_state(struct text *t, const struct world *w)
{
    text_printf(t,
                "states:\n  ST:\n    varies: {normal: rest, bad: %g}\n    when:\n      bad:\n"
                "        elements: {E0: {per-demand: 1}}\n        hazards: {H0: {outcomes: {o0: "
                "{interruptions: {i0: ",
                w->bad);
    write_cut(t, w->arena, &w->bad_cut);
    text_printf(t, "}, harm: {G0: {death: %g}}}}}}\n", w->bad_death);
}

const char *world_text(const struct world *w)
{
    struct text t;
    text_init(&t, w->arena);
    text_add(&t, "register: {title: World, currency: EUR, prices: 2026, horizon: 10 a, "
                 "discount: 0 per a");
    if (w->served)
        text_printf(&t, ", customers-served: %u", w->served);
    if (w->limit_text)
        text_printf(&t, ", sustained-over: %s", w->limit_text);
    text_add(&t, "}\ngroups:\n");
    for (unsigned i = 0; i < GROUPS; i++)
        text_printf(&t, "  G%u: {name: Group, persons: %u}\n", i, w->persons[i]);
    text_add(&t, "elements:\n");
    for (unsigned i = 0; i < ELEMENTS; i++)
        text_printf(&t, "  E%u: {kind: relay, per-demand: %g}\n", i, w->fails[i]);
    write_schemes(&t, w);
    text_add(&t, "hazards:\n");
    for (unsigned i = 0; i < HAZARDS; i++)
        write_hazard(&t, w->arena, &w->hazard[i], i);
    write_option(&t, w);
    write_state(&t, w);
    return text_str(&t);
}

/* --- enumeration --- */

static bool works(const struct world_row *row, unsigned sound)
{
    unsigned fit = row->elements & sound;
    return row->any ? fit != 0 : fit == row->elements;
}

static void add_end(const struct world_end *e, long double p, long double *probability)
{
    probability[e->outcome] += p * e->share;
    probability[e->other] += p * (1 - (long double)e->share);
}

/* Where a fault ends while these elements are sound, p the probability of that. */
static void follow(const struct world_hazard *h, unsigned sound, long double p,
                   long double *probability)
{
    if (h->fitted && (sound & 1U << NEW_ELEMENT)) {
        add_end(&h->end[ROWS + 1], p, probability);
        return;
    }
    for (unsigned i = 0; i < h->n_rows; i++)
        if (works(&h->row[i], sound)) {
            add_end(&h->end[i], p * h->row[i].sees, probability);
            p *= 1 - (long double)h->row[i].sees;
        }
    add_end(&h->end[ROWS], p, probability);
}

static void add_outcome(const struct world *w, const struct world_outcome *o, long double often,
                        struct done *d)
{
    for (unsigned i = 0; i < o->n_cuts; i++) {
        const struct cut *c = &o->cut[i];
        bool sustained = c->seconds > w->limit;
        d->interruptions += sustained ? often * c->customers : 0;
        d->momentary += sustained ? 0 : often * c->customers;
        d->customer_seconds += sustained ? often * c->customers * c->seconds : 0;
        d->kilowatt_seconds += often * c->kilowatts * c->seconds;
    }
    for (unsigned g = 0; g < GROUPS; g++)
        if (o->harm[g].is) {
            d->death[g] += often * o->harm[g].present * o->harm[g].death;
            d->injury[g] += often * o->harm[g].present * o->harm[g].injury;
        }
}

struct done world_enumerate(const struct world *w, unsigned hazard)
{
    const struct world_hazard *h = &w->hazard[hazard];
    long double probability[OUTCOMES + 2] = {0};
    struct done d = {0};
    for (unsigned sound = 0; sound < 1U << (ELEMENTS + 1); sound++) {
        long double p = 1;
        for (unsigned e = 0; e <= ELEMENTS; e++)
            p *= sound & 1U << e ? 1 - (long double)w->fails[e] : w->fails[e];
        follow(h, sound, p, probability);
    }
    for (unsigned k = 0; k <= OUTCOMES; k++)
        add_outcome(w, &h->outcome[k], h->frequency * probability[k], &d);
    return d;
}
