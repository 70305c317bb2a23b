/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A world as a document, with the numbers to the last digit. */
#include "figure_world.h"

static void number(struct text *t, double x)
{
    char buf[32];
    text_add(t, text_double(buf, x));
}

static void part_text(struct text *t, const struct part *p)
{
    if (p->op != PART_AT_LEAST) {
        text_printf(t, "%c%zu", p->op == PART_ELEMENT ? 'E' : 'S', p->index);
        return;
    }
    if (p->k == p->n && p->n != 1)
        text_add(t, "{all: [");
    else if (p->k == 1)
        text_add(t, "{any: [");
    else
        text_printf(t, "{at-least: %zu, of: [", p->k);
    for (size_t i = 0; i < p->n; i++) {
        text_add(t, i ? ", " : "");
        part_text(t, p->of[i]);
    }
    text_add(t, "]}");
}

/* The keys of a branch, without braces. */
static void twig_text(struct text *t, const struct world *w, const struct twig *x)
{
    if (x->kind == TWIG_OUTCOME && x->outcome == w->n_outcomes) {
        text_add(t, "outcome: none");
    } else if (x->kind == TWIG_OUTCOME) {
        text_printf(t, "outcome: o%zu", x->outcome);
    } else if (x->kind == TWIG_QUESTION) {
        text_add(t, "if-works: ");
        part_text(t, x->question);
        text_add(t, ", yes: {");
        twig_text(t, w, x->child[0]);
        text_add(t, "}, no: {");
        twig_text(t, w, x->child[1]);
        text_byte(t, '}');
    } else {
        text_add(t, "split: {");
        for (size_t i = 0; i < x->n; i++) {
            text_printf(t, "%sb%zu: {share: ", i ? ", " : "", i);
            if (i == x->rest)
                text_add(t, "rest");
            else
                number(t, x->share[i]);
            text_add(t, ", ");
            twig_text(t, w, x->child[i]);
            text_byte(t, '}');
        }
        text_byte(t, '}');
    }
}

static void row_text(struct text *t, const struct world *w, size_t i)
{
    const struct world_row *row = &w->row[i];
    text_printf(t, "      %s: {", i == w->n_rows ? "never" : arena_printf(w->arena, "r%zu", i));
    if (row->cleared_by) {
        text_add(t, "cleared-by: ");
        part_text(t, row->cleared_by);
        text_add(t, ", ");
    }
    if (row->sees >= 0) {
        text_add(t, "sees: ");
        number(t, row->sees);
        text_add(t, ", ");
    }
    text_add(t, "in: ");
    number(t, row->seconds);
    text_add(t, " s, ");
    twig_text(t, w, row->then);
    text_add(t, "}\n");
}

static void item_text(struct text *t, const struct world_item *x)
{
    text_printf(t, "{category: c%zu, is: \"", x->category);
    if (x->kind == ITEM_LOOKUP) {
        text_add(t, "lookup(clearance-time");
        for (size_t k = 0; k < BOUNDS; k++) {
            text_add(t, "; ");
            number(t, x->bound[k]);
            text_add(t, " s -> ");
            number(t, x->step[k]);
            text_add(t, " EUR");
        }
        text_byte(t, ')');
    } else {
        number(t, x->euros);
        text_add(t, x->kind == ITEM_TIMED ? " EUR/s * clearance-time" : " EUR");
    }
    text_add(t, "\"}");
}

static void outcomes_text(struct text *t, const struct world *w)
{
    text_add(t, "    outcomes:\n");
    for (size_t o = 0; o < w->n_outcomes; o++) {
        text_printf(t, "      o%zu: {name: Outcome %zu", o, o);
        for (size_t i = 0; i < w->n_items[o]; i++) {
            text_printf(t, "%si%zu: ", i ? ", " : ", damage: {", i);
            item_text(t, &w->item[o][i]);
        }
        text_add(t, w->n_items[o] ? "}}\n" : "}\n");
    }
}

static void elements_text(struct text *t, const struct world *w)
{
    text_add(t, "types:\n");
    for (size_t i = 0; i < TYPES; i++) {
        text_printf(t, "  T%zu: {kind: relay, per-demand: ", i);
        number(t, w->type_q[i]);
        text_add(t, "}\n");
    }
    text_add(t, "elements:\n");
    for (size_t i = 0; i < w->n_elements; i++) {
        text_printf(t, "  E%zu: {kind: relay, ", i);
        if (w->type[i] < TYPES) {
            text_printf(t, "type: T%zu}\n", w->type[i]);
            continue;
        }
        text_add(t, "per-demand: ");
        number(t, w->q[i]);
        text_add(t, "}\n");
    }
}

const char *world_text(const struct world *w)
{
    struct text t;
    text_init(&t, w->arena);
    text_add(&t, "register: {title: A world, currency: EUR, prices: 2026, horizon: 20 a, discount: "
                 "4 % per a, perspectives: {first: [c0, c1], second: [c1, c2]}}\n");
    elements_text(&t, w);
    text_add(&t, "schemes:\n");
    for (size_t i = 0; i < w->n_schemes; i++) {
        text_printf(&t, "  S%zu: ", i);
        if (w->scheme[i])
            part_text(&t, w->scheme[i]);
        else
            text_add(&t, "absent");
        text_byte(&t, '\n');
    }
    text_add(&t, "hazards:\n  H:\n    name: Hazard\n    frequency: ");
    number(&t, w->frequency);
    text_add(&t, " per a\n    response:\n");
    for (size_t i = 0; i <= w->n_rows; i++)
        row_text(&t, w, i);
    outcomes_text(&t, w);
    return text_str(&t);
}
