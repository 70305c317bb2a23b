/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Schemes as Boolean functions of their elements.
 *
 * A variable is true when its element *fails*: so the small probability is the one that
 * is given, and its complement is the one that is rounded. Variables are numbered depth
 * first along the chain of each scheme, which keeps diagrams small. */
#include "figure/compile.h"

/* Schemes may stand in schemes this deep. */
#define SCHEME_DEPTH 200

void wiring_init(struct wiring *w, struct figures *f, const struct model *m)
{
    *w = (struct wiring){.figures = f, .model = m, .builder = diagram_builder_new(f->arena)};
}

static size_t variable_of(struct wiring *w, const char *id, bool sees)
{
    const char *key = sees ? arena_printf(w->figures->arena, "sees/%s", id) : id;
    uintptr_t known = (uintptr_t)strmap_get(&w->index, key);
    if (known)
        return known - 1;
    *array_push(w->figures->arena, &w->variables) = id;
    *array_push(w->figures->arena, &w->is_sees) = sees;
    strmap_set(w->figures->arena, &w->index, key, (void *)(uintptr_t)w->variables.n);
    return w->variables.n - 1;
}

static void order_structure(struct wiring *w, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        wiring_order(w, s->name);
    for (size_t i = 0; i < s->n; i++)
        order_structure(w, s->of[i]);
}

void wiring_order(struct wiring *w, const char *id)
{
    const struct object *o = model_find(w->model, id);
    if (o->kind == KIND_ELEMENT) {
        variable_of(w, id, false);
        return;
    }
    if (strmap_has(&w->works, id))
        return;
    strmap_set(w->figures->arena, &w->works, id, NULL); /* seen; its function comes later */
    if (w->depth >= SCHEME_DEPTH) {
        w->too_deep = true;
        return;
    }
    w->depth++;
    order_structure(w, ((const struct scheme *)o->data)->works);
    w->depth--;
}

static bfun structure_works(struct wiring *w, const struct structure *s)
{
    switch (s->op) {
    case STRUCTURE_NAME: return wiring_works(w, s->name);
    case STRUCTURE_ABSENT: return BFUN_FALSE;
    case STRUCTURE_AT_LEAST: break;
    }
    bfun *parts = NEW_ARRAY(w->figures->arena, s->n, bfun);
    for (size_t i = 0; i < s->n; i++)
        parts[i] = structure_works(w, s->of[i]);
    return diagram_at_least(w->builder, s->k, s->n, parts);
}

bfun wiring_works(struct wiring *w, const char *id)
{
    const struct object *o = model_find(w->model, id);
    if (o->kind == KIND_ELEMENT) {
        uint32_t v = (uint32_t)variable_of(w, id, false);
        return diagram_not(w->builder, diagram_variable(w->builder, v));
    }
    uintptr_t known = (uintptr_t)strmap_get(&w->works, id);
    if (known)
        return (bfun)(known - 1);
    bfun works = structure_works(w, ((const struct scheme *)o->data)->works);
    if (works != DIAGRAM_FULL)
        strmap_set(w->figures->arena, &w->works, id, (void *)((uintptr_t)works + 1));
    return works;
}

bfun wiring_sees(struct wiring *w, const char *row)
{
    return diagram_variable(w->builder, (uint32_t)variable_of(w, row, true));
}

node_id wiring_argument(struct building *b, const struct wiring *w, size_t variable)
{
    const char *id = w->variables.at[variable];
    if (!w->is_sees.at[variable])
        return compiled_main_node(b, id);
    figure_id share = compiled_figure(b->figures, b->unit, PROPERTY_SHARE, id, "sees");
    return b->figures->list.at[share].node;
}

/* --- text --- */

static void structure_text(struct text *t, const struct model *m, const struct structure *s,
                           bool bare);

static void join_parts(struct text *t, const struct model *m, const struct structure *s,
                       const char *between)
{
    for (size_t i = 0; i < s->n; i++) {
        text_add(t, i ? between : "");
        structure_text(t, m, s->of[i], false);
    }
}

/* A composite stands in parentheses, unless it is bare; one part is itself. */
static void structure_text(struct text *t, const struct model *m, const struct structure *s,
                           bool bare)
{
    if (s->op == STRUCTURE_NAME) {
        wiring_text(t, m, s->name, bare);
    } else if (s->op == STRUCTURE_ABSENT) {
        text_add(t, "absent");
    } else if (s->n == 1) {
        structure_text(t, m, s->of[0], bare);
    } else if (s->k == s->n || s->k == 1) {
        text_add(t, bare ? "" : "(");
        join_parts(t, m, s, s->k == 1 ? " or " : " and ");
        text_add(t, bare ? "" : ")");
    } else {
        text_printf(t, "at-least(%u; ", s->k);
        join_parts(t, m, s, "; ");
        text_byte(t, ')');
    }
}

void wiring_text(struct text *t, const struct model *m, const char *id, bool bare)
{
    const struct object *o = model_find(m, id);
    if (o->kind == KIND_ELEMENT)
        text_add(t, id);
    else
        structure_text(t, m, ((const struct scheme *)o->data)->works, bare);
}
