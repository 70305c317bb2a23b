/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Compiling values and rates; expressions and quantities as nodes; what an object needs first.
 *
 * Sections do not nest: whatever an object reads is compiled before its own section is
 * opened. */
#include "figure/states.h"

#include "evidence/posterior.h"

/* Objects may depend on objects this deep. */
#define COMPILE_DEPTH 400

/* --- nodes --- */

static void remember_literal(struct figures *f, node_id n, const char *text)
{
    while (f->literals.n <= n)
        *array_push(f->arena, &f->literals) = NULL;
    if (!f->literals.at[n])
        f->literals.at[n] = text;
}

node_id compile_const(struct building *b, double value, struct dim d, const char *text)
{
    struct figures *f = b->figures;
    node_id n = graph_const(f->graph, value, d);
    remember_literal(f, n, text);
    return n;
}

node_id ratio_of_means(struct building *b, node_id x, node_id y)
{
    struct graph *g = b->figures->graph;
    return graph_op2(g, OP_RATIO, graph_op1(g, OP_HELD, x), graph_op1(g, OP_HELD, y));
}

static node_id compile_call(struct building *b, enum graph_op op, const struct expr *e)
{
    node_id *args = NEW_ARRAY(b->figures->arena, e->n, node_id);
    for (size_t i = 0; i < e->n; i++)
        args[i] = compile_expr(b, e->args[i]);
    return graph_op(b->figures->graph, op, e->n, args);
}

static node_id compile_frequency(struct building *b, const char *hazard)
{
    return figure_at(b->figures, compiled_part(b, hazard, PART_FREQUENCY)->main)->node;
}

static node_id compile_share(struct building *b, const struct expr *e)
{
    const struct compiled *u = compiled_of(b, e->name);
    figure_id id = compiled_figure(b->figures, u, PROPERTY_SHARE, e->text, NULL);
    return b->figures->list.at[id].node;
}

node_id compile_expr(struct building *b, const struct expr *e)
{
    switch (e->op) {
    case EXPR_LITERAL: return compile_const(b, e->value, e->dim, e->text);
    case EXPR_NAME:
        return compile_has_year(b, e->name) ? compile_in_year(b, e->name)
                                            : compiled_main_node(b, e->name);
    case EXPR_FAILS: return compiled_main_node(b, e->name);
    case EXPR_FREQUENCY:
        return compile_has_year(b, e->name) ? compile_in_year(b, e->name)
                                            : compile_frequency(b, e->name);
    case EXPR_SHARE: return compile_share(b, e);
    case EXPR_CLEARANCE: return b->clearance;
    case EXPR_ADD: return compile_call(b, OP_ADD, e);
    case EXPR_SUBTRACT: return compile_call(b, OP_SUBTRACT, e);
    case EXPR_MULTIPLY: return compile_call(b, OP_MULTIPLY, e);
    case EXPR_DIVIDE: return compile_call(b, OP_DIVIDE, e);
    case EXPR_NEGATE: return compile_call(b, OP_NEGATE, e);
    case EXPR_POWER: return compile_call(b, OP_POWER, e);
    case EXPR_MIN: return compile_call(b, OP_MIN, e);
    case EXPR_MAX: return compile_call(b, OP_MAX, e);
    case EXPR_EXP: return compile_call(b, OP_EXP, e);
    case EXPR_LOG: return compile_call(b, OP_LOG, e);
    case EXPR_SQRT: return compile_call(b, OP_SQRT, e);
    case EXPR_LOOKUP: return compile_call(b, OP_LOOKUP, e);
    case EXPR_UNWANTED: return compile_unwanted_expr(b, e);
    case EXPR_WAS: break;
    }
    return NODE_NONE; /* a change has replaced `was` */
}

/* What is stated in two places is two figures with a source each, though it be the same. */
static node_id compile_stated(struct building *b, const struct expr *e)
{
    struct figures *f = b->figures;
    node_id n = compile_expr(b, e), apart = graph_apart(f->graph, n, ++f->n_stated);
    if (e->op == EXPR_LITERAL)
        remember_literal(f, apart, e->text);
    return apart;
}

static node_id compile_input(struct building *b, const struct quantity *q, bool varies)
{
    struct figures *f = b->figures;
    if (q->shape == SHAPE_EXPRESSION)
        return compile_stated(b, q->expr);
    *array_push(f->arena, &f->inputs) = q;
    *array_push(f->arena, &f->input_varies) = varies;
    const char *part = b->unit->part;
    *array_push(f->arena, &f->input_names) = arena_printf(
        f->arena, "%s%s%s#%u", b->unit->id, part ? "/" : "", part ? part : "", b->unit->n_inputs++);
    return graph_input(f->graph, (uint32_t)(f->inputs.n - 1), quantity_mean(q), q->dim);
}

node_id compile_quantity(struct building *b, const struct quantity *q)
{
    return compile_input(b, q, false);
}

node_id compile_drawn(struct building *b, const struct quantity *is, const struct quantity *varies)
{
    return compile_input(b, is ? is : varies, !is);
}

static const char *expr_reads(struct arena *a, const struct expr *e)
{
    struct text t;
    text_init(&t, a);
    expr_write(&t, e);
    return text_str(&t);
}

const char *quantity_reads(struct figures *f, const struct quantity *q)
{
    return q->shape == SHAPE_EXPRESSION ? expr_reads(f->arena, q->expr) : q->text;
}

/* --- objects --- */

/* Opens a unit whose main figure is a leaf or an expression. */
static void begin_main(struct figures *f, const struct variant *v, const struct object *o,
                       enum property p, const struct quantity *q, const char *source,
                       struct building *b)
{
    compiled_begin(f, v, o, o->id, b);
    node_id n = compile_quantity(b, q);
    b->unit->main = compiled_add(b, p, NULL, NULL, n, source, quantity_reads(f, q));
}

static ohmen_status compile_value(struct figures *f, const struct variant *v,
                                  const struct object *o, struct compiled **out, ohmen_error *e)
{
    const struct value *value = o->data;
    struct building b;
    (void)e;
    compiled_begin(f, v, o, o->id, &b);
    node_id n = compile_drawn(&b, value->is, value->varies);
    const char *reads = quantity_reads(f, value->is ? value->is : value->varies);
    b.unit->main = compiled_add(&b, PROPERTY_VALUE, NULL, NULL, n, value->source, reads);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* The shares of its kinds of fault. */
static void add_shares(struct building *b, const struct rate *r)
{
    for (size_t i = 0; i < r->kinds_of_fault.n; i++) {
        const struct quantity *q = posterior_share(b->figures->arena, r, i);
        compiled_add(b, PROPERTY_SHARE, r->kinds_of_fault.keys[i], NULL, compile_quantity(b, q),
                     r->source, q->text);
    }
}

static ohmen_status compile_rate(struct figures *f, const struct variant *v, const struct object *o,
                                 struct compiled **out, ohmen_error *e)
{
    const struct rate *r = o->data, *before = model_get(f->base, KIND_RATE, o->id);
    const struct quantity *q;
    ohmen_status status =
        posterior_rate_trended(f->arena, r, before ? before : r, o->id, f->date, &q, e);
    if (status != OHMEN_OK)
        return status;
    const char *source = r->prior && r->prior->source ? r->prior->source : r->source;
    struct building b;
    begin_main(f, v, o, PROPERTY_RATE, q, source, &b);
    add_shares(&b, r);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}

/* --- references first --- */

ohmen_status compile_frequency_of(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e)
{
    const struct variant *projected;
    const struct combinations *c = NULL;
    ohmen_status status = variant_project(f, v, o->id, &projected, e);
    struct building under = {.figures = f, .variant = projected};
    if (status != OHMEN_OK || compiled_part(&under, o->id, PART_FREQUENCY))
        return status;
    o = model_find(projected->model, o->id);
    if (projected->stem->varying.n)
        status = states_of(f, projected, o->id, &c, e);
    if (status != OHMEN_OK)
        return status;
    if (c && c->list.at[0].n)
        return compile_mean_frequency(f, projected, o, c, e);
    status = compile_references_at(f, projected, o, "frequency", e);
    if (status == OHMEN_OK)
        compile_frequency_unit(f, projected, o);
    return status;
}

/* Schemes export nothing to others but their unwanted operation: their elements do. An element
 * comes with its common causes, but not where one of these asks for it. */
static ohmen_status compile_referred(struct figures *f, const struct variant *v,
                                     const struct object *from, const struct reference *r,
                                     const struct object *to, ohmen_error *e)
{
    const struct compiled *unused;
    if (to->kind == KIND_SCHEME)
        return r->unwanted ? compile_unwanted(f, v, to, e) : compile_references(f, v, to, e);
    if (to->kind == KIND_HAZARD && r->frequency)
        return compile_frequency_of(f, v, to, e);
    ohmen_status status = figures_compile(f, v, to->id, &unused, e);
    if (status == OHMEN_OK && to->kind == KIND_ELEMENT && from->kind != KIND_COMMON_CAUSE)
        status = compile_alone(f, v, to->id, e);
    return status;
}

static ohmen_status compile_one_reference(struct figures *f, const struct variant *v,
                                          const struct object *from, const struct reference *r,
                                          const struct object *to, ohmen_error *e)
{
    if (f->depth >= COMPILE_DEPTH)
        return error_set(e, OHMEN_COMPUTE, "\"%s\" depends on others more than %d deep", to->id,
                         COMPILE_DEPTH);
    f->depth++;
    ohmen_status status = compile_referred(f, v, from, r, to, e);
    f->depth--;
    return status;
}

/* Only what stands at this path of the object; NULL: everything. */
ohmen_status compile_references_at(struct figures *f, const struct variant *v,
                                   const struct object *o, const char *path, ohmen_error *e)
{
    for (size_t i = 0; i < o->refs.n; i++) {
        const struct reference *r = &o->refs.at[i];
        const struct object *to = model_find(v->model, r->id);
        if (r->trace || r->later || !to || !kinds[to->kind].computes || to->kind == KIND_STATE ||
            to->kind == KIND_GROUP || to->kind == KIND_COMMON_CAUSE ||
            (o->kind == KIND_STATE && to->kind == KIND_HAZARD) ||
            (path && !text_equal(path, r->path)))
            continue;
        ohmen_status status = compile_one_reference(f, v, o, r, to, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

ohmen_status compile_references(struct figures *f, const struct variant *v, const struct object *o,
                                ohmen_error *e)
{
    return compile_references_at(f, v, o, NULL, e);
}

static ohmen_status compile_object(struct figures *f, const struct variant *v,
                                   const struct object *o, struct compiled **out, ohmen_error *e)
{
    const struct combinations *c = NULL;
    ohmen_status status = OHMEN_OK;
    if (o->kind == KIND_HAZARD && v->stem->varying.n)
        status = states_of(f, v, o->id, &c, e);
    if (status == OHMEN_OK && o->kind == KIND_HAZARD)
        status = compile_frequency_of(f, v, o, e);
    if (status == OHMEN_OK && c && c->list.at[0].n)
        return compile_mean_hazard(f, v, o, c, out, e);
    if (status == OHMEN_OK)
        status = compile_references(f, v, o, e);
    if (status != OHMEN_OK)
        return status;
    switch (o->kind) {
    case KIND_VALUE: return compile_value(f, v, o, out, e);
    case KIND_RATE: return compile_rate(f, v, o, out, e);
    case KIND_TYPE: return compile_type(f, v, o, out, e);
    case KIND_ELEMENT: return compile_element(f, v, o, out, e);
    case KIND_SCHEME: return compile_scheme(f, v, o, out, e);
    case KIND_HAZARD: return compile_hazard(f, v, o, out, e);
    case KIND_COMMON_CAUSE: return compile_group(f, v, o, out, e);
    case KIND_STATE: return compile_state(f, v, o, out, e);
    case KIND_SITE: return compile_site(f, v, o, out, e);
    default:
        return error_set(e, OHMEN_COMPUTE, "\"%s\" is %s, which has no figures in this version",
                         o->id, kinds_words(f->arena, KIND_BIT(o->kind)));
    }
}

ohmen_status figures_compile(struct figures *f, const struct variant *v, const char *id,
                             const struct compiled **out, ohmen_error *e)
{
    const struct variant *projected;
    ohmen_status status = variant_project(f, v, id, &projected, e);
    if (status != OHMEN_OK)
        return status;
    struct building b = {.figures = f, .variant = projected};
    const struct compiled *known = compiled_of(&b, id);
    if (known) {
        *out = known;
        return OHMEN_OK;
    }
    const struct object *o = model_find(projected->model, id);
    if (!o)
        return error_set(e, OHMEN_UNKNOWN, "there is no \"%s\"", id);
    struct compiled *u;
    status = compile_object(f, projected, o, &u, e);
    if (status == OHMEN_OK)
        *out = u;
    return status;
}
