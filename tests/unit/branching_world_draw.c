/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Drawing a random decision in several stages, and writing its document. Numbers are short
 * decimals, so that document and world hold the same. Owns nothing. */
#include "branching_world.h"

#include <math.h>

static const char *const names[] = {"left", "middle", "right"};
static const char *const option_names[] = {"O-A", "O-B", "O-C", "O-D"};

enum { DEPTH = 3 };

const char *tree_branch(size_t k)
{
    return names[k];
}

static bool one_in(struct tree_world *w, int n)
{
    return random_range(w->r, 1, n) == 1;
}

static double parts(struct tree_world *w, int lo, int hi, double of)
{
    return (double)random_range(w->r, lo, hi) / of;
}

/* --- what there is --- */

static double draw_time(struct tree_world *w, int most)
{
    return w->fractions ? parts(w, 1, most * 4, 4) : (double)random_range(w->r, 1, most);
}

static void draw_option(struct tree_world *w, struct tree_option *o)
{
    *o = (struct tree_option){.on = NAN, .service = NAN, .bare = w->repeats && one_in(w, 2)};
    o->invest = (double)random_range(w->r, 1, 400);
    for (size_t h = 0; h < TREE_HAZARDS; h++)
        o->factor[h] = o->bare ? 1 : parts(w, 10, 120, 100);
    for (size_t i = 0; i < TREE_STATES; i++)
        o->sets[i] = i < w->n_states && one_in(w, 3) ? (int)random_index(w->r, w->states[i].n) : -1;
    if (!o->bare && one_in(w, 3))
        o->running = (double)random_range(w->r, 1, 20);
    if (!o->bare && one_in(w, 3))
        o->residual = (double)random_range(w->r, 1, 50);
    if (o->bare)
        return;
    if (one_in(w, 3))
        o->on = (double)random_range(w->r, 0, 2);
    if (!w->repeats && one_in(w, 2))
        o->service = (double)random_range(w->r, 0, 2);
    if (one_in(w, 2))
        o->life = (double)random_range(w->r, 1, 4);
    o->renewed = o->life > 0 && one_in(w, 2);
    if (one_in(w, 3)) {
        o->early = o->life == 1 ? 1 : w->fractions ? 0.5 : 1;
        o->early_factor = parts(w, 100, 300, 100);
    }
}

static void draw_state(struct tree_world *w, struct tree_state *s, bool first)
{
    int left = 100;
    *s = (struct tree_state){.renewed_by_failure = -1};
    s->n = w->n_states > 1 ? 2 : (size_t)random_range(w->r, 2, TREE_VALUES);
    for (size_t v = 0; v < s->n; v++) {
        int p = v + 1 == s->n ? left : (int)random_range(w->r, 1, 40);
        left -= p;
        s->p[v] = p / 100.0;
        for (size_t h = 0; h < TREE_HAZARDS; h++)
            s->factor[v][h] = v ? parts(w, 10, 600, 100) : 1;
        for (size_t to = 0; to < s->n; to++)
            if (w->evolves && to != v && one_in(w, 2))
                s->becomes[v][to] = parts(w, 1, 80, 100);
        int percent = one_in(w, 6) ? 100 : (int)random_range(w->r, 0, 100);
        s->given[v][0] = percent / 100.0;
        s->given[v][1] = (100 - percent) / 100.0;
    }
    s->costs = (double)random_range(w->r, 0, 30);
    if (w->evolves && first && one_in(w, 2))
        s->renewed_by_failure = (int)random_index(w->r, s->n);
}

/* --- steps --- */

/* What a path may still do. */
struct left {
    double time;
    unsigned options, depth;
};

static struct tree_steps *draw_steps(struct tree_world *w, struct left left);

static struct tree_step *add(struct tree_world *w, struct tree_steps *s, enum tree_step_kind kind)
{
    struct tree_step *step = array_push(w->a, s);
    *step = (struct tree_step){.kind = kind};
    return step;
}

static void draw_point(struct tree_world *w, struct tree_steps *s, struct left left)
{
    struct tree_step *step = add(w, s, TREE_CHOOSE + (enum tree_step_kind)random_index(w->r, 3));
    int p = (int)random_range(w->r, 0, 100);
    left.depth--;
    step->which = random_index(w->r, w->n_states);
    step->n =
        step->kind == TREE_READ ? READINGS : (size_t)random_range(w->r, 2, 2 + (left.depth > 1));
    if (step->kind == TREE_CHANCE)
        step->n = 2;
    step->p[0] = p / 100.0;
    step->p[1] = (100 - p) / 100.0;
    for (size_t b = 0; b < step->n; b++)
        step->branches[b] = draw_steps(w, left);
}

/* Behind a point of a choice that comes again only what may be applied any number of times. */
static bool may_apply(const struct tree_world *w, size_t option, unsigned depth)
{
    const struct tree_option *o = &w->options[option];
    return !w->repeats || depth > 0 ||
           (!w->exclude && (o->sets[0] >= 0 || o->sets[1] >= 0) && !o->renewed);
}

static struct tree_steps *draw_steps(struct tree_world *w, struct left left)
{
    struct tree_steps *s = NEW(w->a, struct tree_steps);
    int n = (int)random_range(w->r, 0, 3);
    for (int i = 0; i < n; i++) {
        size_t option = random_index(w->r, w->n_options);
        if (one_in(w, 4))
            add(w, s, TREE_PAY)->number = (double)random_range(w->r, -100, 200);
        if (!w->repeats && one_in(w, 6))
            add(w, s, TREE_CHANGE)->number = parts(w, 20, 200, 100);
        if (left.options >> option & 1 && may_apply(w, option, left.depth) && one_in(w, 2)) {
            left.options &= ~(1u << option);
            add(w, s, TREE_APPLY)->which = option;
        }
        double time = draw_time(w, 2);
        if (left.time - time > 0.1 && one_in(w, 3)) {
            left.time -= time;
            add(w, s, TREE_WAIT)->number = time;
        }
    }
    if (left.depth > 0 && !one_in(w, 4))
        draw_point(w, s, left);
    return s;
}

/* Shallow and without waits, where the choice comes again. */
static void draw_choices(struct tree_world *w)
{
    struct left left = {w->repeats ? w->every : w->horizon - 1, (1u << w->n_options) - 1,
                        w->repeats ? 1 : DEPTH};
    w->n = (size_t)random_range(w->r, 2, TREE_BRANCHES);
    for (size_t k = 0; k < w->n; k++) {
        struct left here = left;
        if (w->exclude)
            here.options &= ~(1u << random_index(w->r, 2));
        w->choose[k] = draw_steps(w, here);
    }
    if (w->repeats) /* one that is always possible */
        *w->choose[0] = (struct tree_steps){0};
}

/* --- text --- */

static void put_number(struct text *t, double x)
{
    char digits[32];
    text_add(t, text_double(digits, x));
}

static void put_option(struct tree_world *w, struct text *t, size_t k)
{
    const struct tree_option *o = &w->options[k];
    text_printf(t, "  %s:\n    name: Something\n    invest: {is: %g EUR", option_names[k],
                o->invest);
    if (!isnan(o->on))
        text_printf(t, ", on: %d-01-01", 2026 + (int)o->on);
    text_add(t, "}\n");
    if (!isnan(o->service))
        text_printf(t, "    in-service: %d-01-01\n", 2026 + (int)o->service);
    if (o->life > 0)
        text_printf(t, "    life: %g a\n", o->life);
    if (o->renewed)
        text_add(t, "    renewed: yes\n");
    if (o->running > 0)
        text_printf(t, "    running: %g EUR per a\n", o->running);
    if (o->residual > 0)
        text_printf(t, "    residual: %g EUR\n", o->residual);
    if (o->early > 0)
        text_printf(t, "    early: {for: %g a, change: {hazards: {H-0: {frequency: %g * was}}}}\n",
                    o->early, o->early_factor);
    if (w->exclude && k == 0)
        text_printf(t, "    excludes: [%s]\n", option_names[1]);
    text_add(t, o->bare ? "    change: {}\n" : "    change: {hazards: {");
    for (size_t h = 0; h < TREE_HAZARDS && !o->bare; h++)
        text_printf(t, "%sH-%zu: {frequency: %g * was}", h ? ", " : "", h, o->factor[h]);
    text_add(t, o->bare ? "" : "}}\n");
}

static void put_becomes(struct text *t, const struct tree_state *s)
{
    bool any = false;
    for (size_t v = 0; v < s->n; v++) {
        size_t n = 0;
        for (size_t to = 0; to < s->n; to++)
            if (s->becomes[v][to] > 0) {
                text_add(t, any ? "" : "    becomes:\n");
                any = true;
                if (n++ == 0)
                    text_printf(t, "      %s: {", names[v]);
                text_printf(t, "%s%s: %g per a", n > 1 ? ", " : "", names[to], s->becomes[v][to]);
            }
        text_add(t, n ? "}\n" : "");
    }
}

static void put_state(struct tree_world *w, struct text *t, size_t i)
{
    const struct tree_state *s = &w->states[i];
    text_printf(t, "  S-%zu:\n    name: Unknown\n    is: {", i);
    for (size_t v = 0; v < s->n; v++)
        text_printf(t, "%s%s: %g", v ? ", " : "", names[v], s->p[v]);
    text_add(t, "}\n    when:\n");
    for (size_t v = 1; v < s->n; v++)
        text_printf(
            t, "      %s: {hazards: {H-0: {frequency: %g * was}, H-1: {frequency: %g * was}}}\n",
            names[v], s->factor[v][0], s->factor[v][1]);
    put_becomes(t, s);
    if (s->renewed_by_failure >= 0)
        text_printf(t, "    failures: {H-0: {hit: %s}}\n", names[s->renewed_by_failure]);
    size_t n = 0;
    for (size_t k = 0; k < w->n_options; k++)
        if (w->options[k].sets[i] >= 0)
            text_printf(t, "%s%s: %s", n++ ? ", " : "    renewed-by: {", option_names[k],
                        names[w->options[k].sets[i]]);
    text_printf(t, "%s    tests: {T: {reads: [left, middle], costs: %g EUR, given: {",
                n ? "}\n" : "", s->costs);
    for (size_t v = 0; v < s->n; v++)
        text_printf(t, "%s%s: [%g, %g]", v ? ", " : "", names[v], s->given[v][0], s->given[v][1]);
    text_add(t, "}}}\n");
}

static void put_steps(struct text *t, const struct tree_steps *steps);

static void put_point(struct text *t, const struct tree_step *s)
{
    if (s->kind == TREE_READ)
        text_printf(t, "{inspect: S-%zu.T, reads: {", s->which);
    else
        text_add(t, s->kind == TREE_CHOOSE ? "{choose: {" : "{chance: {");
    for (size_t b = 0; b < s->n; b++) {
        text_printf(t, "%s%s: ", b ? ", " : "", names[b]);
        if (s->kind == TREE_CHANCE && b == 0)
            text_printf(t, "{p: %g, then: ", s->p[b]);
        else if (s->kind == TREE_CHANCE)
            text_add(t, "{p: rest, then: ");
        put_steps(t, s->branches[b]);
        text_add(t, s->kind == TREE_CHANCE ? "}" : "");
    }
    text_add(t, "}}");
}

static void put_steps(struct text *t, const struct tree_steps *steps)
{
    text_add(t, "[");
    for (size_t i = 0; i < steps->n; i++) {
        const struct tree_step *s = &steps->at[i];
        text_add(t, i ? ", " : "");
        if (s->kind == TREE_PAY)
            text_printf(t, "{pay: %g EUR}", s->number);
        else if (s->kind == TREE_WAIT)
            text_printf(t, "{wait: %g a}", s->number);
        else if (s->kind == TREE_APPLY)
            text_printf(t, "{apply: %s}", option_names[s->which]);
        else if (s->kind == TREE_CHANGE)
            text_printf(t, "{change: {hazards: {H-0: {frequency: %g * was}}}}", s->number);
        else
            put_point(t, s);
    }
    text_add(t, "]");
}

static void put_decision(struct tree_world *w, struct text *t)
{
    text_add(t, "decisions:\n  D:\n    question: What now\n    focus: [H-0, H-1]\n");
    if (w->repeats)
        text_printf(t, "    every: %g a\n", w->every);
    if (w->sees[0] || w->sees[1])
        text_printf(t, "    sees: [%s%s%s]\n", w->sees[0] ? "S-0" : "",
                    w->sees[0] && w->sees[1] ? ", " : "", w->sees[1] ? "S-1" : "");
    text_add(t, "    choose:\n");
    for (size_t k = 0; k < w->n; k++) {
        text_printf(t, "      %s: ", names[k]);
        put_steps(t, w->choose[k]);
        text_add(t, "\n");
    }
}

static const char *write_world(struct tree_world *w)
{
    struct text t;
    text_init(&t, w->a);
    text_printf(&t,
                "register: {title: Tree, currency: EUR, prices: 2026, start: 2026-01-01, "
                "horizon: %g a, discount: ",
                w->horizon);
    put_number(&t, w->discount * 100);
    text_add(&t, " % per a}\nhazards:\n");
    for (size_t h = 0; h < TREE_HAZARDS; h++)
        text_printf(&t,
                    "  H-%zu:\n    name: Fault\n    frequency: %g per a\n    response: {only: "
                    "{outcome: hit}}\n    outcomes: {hit: {name: Hit, damage: {x: {category: "
                    "c, is: %g EUR}}}}\n",
                    h, w->frequency[h], w->damage[h]);
    text_add(&t, "states:\n");
    for (size_t i = 0; i < w->n_states; i++)
        put_state(w, &t, i);
    text_add(&t, "options:\n");
    for (size_t k = 0; k < w->n_options; k++)
        put_option(w, &t, k);
    put_decision(w, &t);
    return text_str(&t);
}

const char *tree_world_draw(struct tree_world *w, enum tree_sort sort)
{
    w->evolves = sort != TREE_ONCE;
    w->repeats = sort == TREE_REPEATED;
    w->fractions = one_in(w, 3);
    w->discount = w->fractions ? 0 : (double)random_range(w->r, 0, 9) / 100;
    w->horizon = (double)random_range(w->r, 2, w->repeats ? 4 : 6);
    w->every = w->horizon > 2 && one_in(w, 4) ? 2 : 1;
    w->n_states = (size_t)random_range(w->r, 1, TREE_STATES);
    w->n_options = (size_t)random_range(w->r, 1, TREE_OPTIONS - 1);
    w->exclude = w->repeats && w->n_options > 1 && one_in(w, 2);
    for (size_t i = 0; i < TREE_STATES; i++)
        w->sees[i] = w->repeats && i < w->n_states && one_in(w, 2);
    for (size_t h = 0; h < TREE_HAZARDS; h++) {
        w->frequency[h] = parts(w, 1, 60, 100);
        w->damage[h] = (double)random_range(w->r, 10, 900);
    }
    for (size_t i = 0; i < w->n_states; i++)
        draw_state(w, &w->states[i], i == 0);
    for (size_t k = 0; k < w->n_options; k++)
        draw_option(w, &w->options[k]);
    draw_choices(w);
    return write_world(w);
}
