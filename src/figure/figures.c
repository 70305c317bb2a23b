/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The table of figures and units: names, lookups, values.
 *
 * Owns the graph and its evaluation. Invariant: a unit's figures are contiguous; the
 * first figure of a node is the one by which formulas name it. */
#include "figure/compile.h"

#include <math.h>

const struct property_info properties[PROPERTY_COUNT] = {
#define X(property, word, help) {word, help},
    FIGURE_PROPERTIES(X)
#undef X
};

static ohmen_status find_perspective(struct figures *f, const char *name, ohmen_error *e)
{
    const struct rows *rows = &f->base->settings->perspectives;
    struct nearest near;
    nearest_init(&near, name);
    for (size_t i = 0; i < rows->n; i++) {
        if (text_equal(rows->keys[i], name)) {
            f->perspective = rows->keys[i];
            f->categories = &((const struct names *)rows->at)[i];
            return OHMEN_OK;
        }
        nearest_offer(&near, rows->keys[i]);
    }
    return error_set(e, OHMEN_UNKNOWN, "there is no perspective \"%s\"%s", name,
                     nearest_hint(f->arena, &near));
}

/* --- what the means ask of inputs --- */

static ohmen_status input_quantile(void *ctx, uint32_t input, double p, double q, double *x,
                                   ohmen_error *e)
{
    const struct figures *f = ctx;
    return quantity_tail(f->inputs.at[input], p, q, x, e);
}

static size_t input_atoms(void *ctx, uint32_t input, const double **values,
                          const double **probabilities)
{
    const struct figures *f = ctx;
    const struct quantity *q = f->inputs.at[input];
    if (q->shape != SHAPE_DISCRETE)
        return 0;
    double *scaled = NEW_ARRAY(f->arena, q->n, double);
    for (size_t i = 0; i < q->n; i++)
        scaled[i] = q->times * q->values[i];
    *values = scaled;
    *probabilities = q->probabilities;
    return q->n;
}

static const char *input_name(void *ctx, uint32_t input)
{
    const struct figures *f = ctx;
    return f->input_names.at[input];
}

static double input_dist(void *ctx, uint32_t input, struct dist *dist)
{
    const struct figures *f = ctx;
    *dist = quantity_dist(f->inputs.at[input]);
    return f->inputs.at[input]->times;
}

static bool input_varies(void *ctx, uint32_t input)
{
    const struct figures *f = ctx;
    return f->input_varies.at[input];
}

static const struct mean_source source_rules = {.quantile = input_quantile,
                                                .atoms = input_atoms,
                                                .name = input_name,
                                                .dist = input_dist,
                                                .varies = input_varies};

ohmen_status figures_new(struct arena *a, const struct model *base, const char *perspective,
                         day date, struct figures **out, ohmen_error *e)
{
    struct figures *f = NEW(a, struct figures);
    f->arena = a;
    f->base = base;
    f->date = date;
    text_init(&f->key, a);
    f->graph = graph_new(a);
    f->eval = eval_new(a, f->graph);
    struct mean_source *source = NEW(a, struct mean_source);
    *source = source_rules;
    source->ctx = f;
    f->source = source;
    f->means = means_new(a, f->eval, source);
    const char *wanted = perspective ? perspective : base->settings->perspective;
    if (wanted && !text_equal(wanted, "all")) {
        ohmen_status status = find_perspective(f, wanted, e);
        if (status != OHMEN_OK)
            return status;
    }
    *out = f;
    return OHMEN_OK;
}

/* --- units --- */

/* "ID", "ID@A+B", "ID/part@A+B"; readable until the next one. */
static const char *compiled_key(struct figures *f, const char *id, const char *part,
                                const struct variant *v)
{
    struct text *t = &f->key;
    if (v->n == 0 && !part)
        return id;
    t->n = 0;
    text_add(t, id);
    text_add(t, part ? "/" : "");
    text_add(t, part ? part : "");
    text_byte(t, '@');
    for (size_t i = 0; i < v->n; i++) {
        text_add(t, i ? "+" : "");
        text_add(t, v->changes[i].name);
    }
    return text_str(t);
}

void compiled_begin(struct figures *f, const struct variant *projected, const struct object *o,
                    const char *id, struct building *b)
{
    compiled_begin_part(f, projected, o, id, NULL, b);
}

void compiled_begin_part(struct figures *f, const struct variant *projected, const struct object *o,
                         const char *id, const char *part, struct building *b)
{
    struct compiled *u = NEW(f->arena, struct compiled);
    *u = (struct compiled){
        .object = o, .id = id, .variant = projected, .main = FIGURE_NONE, .part = part};
    u->first = (figure_id)f->list.n;
    u->section = graph_section_begin(f->graph, (uint32_t)f->units.n);
    *array_push(f->arena, &f->units) = u;
    const char *key = compiled_key(f, id, part, projected);
    strmap_set(f->arena, &f->compiled_by_key, key == id ? id : arena_str(f->arena, key), u);
    *b = (struct building){.figures = f, .variant = projected, .unit = u};
}

void compiled_end(struct building *b)
{
    graph_section_end(b->figures->graph);
}

void compiled_give_up(struct building *b)
{
    struct figures *f = b->figures;
    compiled_end(b);
    const struct compiled *u = b->unit;
    strmap_set(f->arena, &f->compiled_by_key, compiled_key(f, u->id, u->part, b->variant), NULL);
}

static void name_node(struct figures *f, node_id node, figure_id id)
{
    while (f->of_node.n <= node)
        *array_push(f->arena, &f->of_node) = FIGURE_NONE;
    if (f->of_node.at[node] == FIGURE_NONE)
        f->of_node.at[node] = id;
}

figure_id compiled_add(struct building *b, enum property p, const char *q1, const char *q2,
                       node_id node, const char *source, const char *text)
{
    struct figures *f = b->figures;
    figure_id id = (figure_id)f->list.n;
    *array_push(f->arena, &f->list) = (struct figure){.unit = (uint32_t)(f->units.n - 1),
                                                      .property = p,
                                                      .q1 = q1,
                                                      .q2 = q2,
                                                      .node = node,
                                                      .source = source,
                                                      .text = text};
    b->unit->n++;
    name_node(f, node, id);
    return id;
}

const struct compiled *compiled_of(const struct building *b, const char *id)
{
    return compiled_part(b, id, NULL);
}

const struct compiled *compiled_part(const struct building *b, const char *id, const char *part)
{
    const struct variant *projected;
    if (variant_project(b->figures, b->variant, id, &projected, NULL) != OHMEN_OK)
        return NULL;
    return strmap_get(&b->figures->compiled_by_key, compiled_key(b->figures, id, part, projected));
}

node_id compiled_main_node(const struct building *b, const char *id)
{
    const struct compiled *u = compiled_of(b, id);
    return b->figures->list.at[u->main].node;
}

static bool same(const char *a, const char *b)
{
    return a == b || (a && b && text_equal(a, b));
}

figure_id compiled_figure(const struct figures *f, const struct compiled *u, enum property p,
                          const char *q1, const char *q2)
{
    for (figure_id i = u->first; i < u->first + u->n; i++) {
        const struct figure *g = &f->list.at[i];
        if (g->property == p && same(g->q1, q1) && same(g->q2, q2))
            return i;
    }
    return u->also ? compiled_figure(f, u->also, p, q1, q2) : FIGURE_NONE;
}

/* --- figures --- */

const struct figure *figure_at(const struct figures *f, figure_id id)
{
    return &f->list.at[id];
}

double figure_value(const struct figures *f, figure_id id)
{
    node_id n = f->list.at[id].node;
    return f->points_only ? eval_value(f->eval, n) : means_value(f->means, n);
}

double figure_error(const struct figures *f, figure_id id)
{
    return means_error(f->means, f->list.at[id].node);
}

enum mean_method figure_method(const struct figures *f, figure_id id)
{
    return means_method(f->means, f->list.at[id].node);
}

double figure_at_means(const struct figures *f, figure_id id)
{
    return eval_value(f->eval, f->list.at[id].node);
}

struct dim figure_dim(const struct figures *f, figure_id id)
{
    return graph_dim(f->graph, f->list.at[id].node);
}

const char *figure_name(const struct figures *f, struct arena *a, figure_id id)
{
    const struct figure *g = &f->list.at[id];
    const struct compiled *u = f->units.at[g->unit];
    struct text t;
    text_init(&t, a);
    text_printf(&t, "%s.%s", u->id, properties[g->property].word);
    if (g->q1)
        text_printf(&t, ".%s", g->q1);
    if (g->q2)
        text_printf(&t, ".%s", g->q2);
    for (size_t i = 0; i < u->variant->n; i++)
        text_printf(&t, "%s%s", i ? "+" : "@", u->variant->changes[i].name);
    return text_str(&t);
}

/* --- evaluation --- */

static ohmen_status not_finite(struct figures *f, node_id culprit, ohmen_error *e)
{
    figure_id best = FIGURE_NONE;
    for (figure_id i = 0; i < f->list.n; i++)
        if (f->list.at[i].node >= culprit &&
            (best == FIGURE_NONE || f->list.at[i].node < f->list.at[best].node))
            best = i;
    const char *name = best == FIGURE_NONE ? "a figure" : figure_name(f, f->arena, best);
    return error_set(
        e, OHMEN_COMPUTE,
        "%s does not give a finite number: look for a division by zero or a number that "
        "is far too large",
        name);
}

bool property_is_probability(enum property p)
{
    return p == PROPERTY_FAILS || p == PROPERTY_SHARE || p == PROPERTY_ON_DEMAND ||
           p == PROPERTY_IN_REPAIR || p == PROPERTY_IN_TEST || p == PROPERTY_OUT ||
           p == PROPERTY_FINDS || p == PROPERTY_LEFT || p == PROPERTY_STANDING ||
           p == PROPERTY_COURSE || p == PROPERTY_BETA || p == PROPERTY_PRESENT ||
           p == PROPERTY_DIES || p == PROPERTY_INJURED || p == PROPERTY_UNWANTED_PER_EVENT ||
           p == PROPERTY_ASSERTS || p == PROPERTY_AVAILABILITY || p == PROPERTY_UNAVAILABILITY;
}

static bool must_not_be_negative(enum property p)
{
    return p == PROPERTY_FREQUENCY || p == PROPERTY_DAMAGE || p == PROPERTY_RATE ||
           p == PROPERTY_UNDETECTED || p == PROPERTY_DETECTED || p == PROPERTY_REPAIR ||
           p == PROPERTY_UNWANTED || p == PROPERTY_REVEALED || p == PROPERTY_INVEST ||
           p == PROPERTY_RUNNING || p == PROPERTY_TEST_COSTS;
}

/* What is certain may come out as more than 1 by the rounding of an average over time. */
static const double MOST_PROBABLE = 1 + 1e-11;

bool property_allows(enum property p, double x)
{
    if (property_is_probability(p))
        return x >= 0 && x <= MOST_PROBABLE;
    return x >= 0 || !must_not_be_negative(p);
}

/* What an expression of names gives can only be seen here. */
static ohmen_status check_ranges(struct figures *f, ohmen_error *e)
{
    for (figure_id i = 0; i < f->list.n; i++) {
        enum property p = f->list.at[i].property;
        if (!property_is_probability(p) && !must_not_be_negative(p))
            continue;
        double x = figure_value(f, i);
        char text[32];
        if (property_allows(p, x))
            continue;
        if (property_is_probability(p))
            return error_set(e, OHMEN_COMPUTE, "%s is %s, which is no probability",
                             figure_name(f, f->arena, i), text_double(text, x));
        return error_set(e, OHMEN_COMPUTE, "%s is negative", figure_name(f, f->arena, i));
    }
    return OHMEN_OK;
}

ohmen_status figures_evaluate(struct figures *f, ohmen_error *e)
{
    node_id culprit = NODE_NONE;
    ohmen_error inner = OHMEN_ERROR_INIT;
    ohmen_status status = eval_point(f->eval, &culprit, &inner);
    if (status == OHMEN_OK && !f->points_only)
        status = means_update(f->means, &culprit, &inner);
    if (status == OHMEN_COMPUTE && culprit != NODE_NONE)
        return not_finite(f, culprit, e);
    if (status != OHMEN_OK)
        return error_set(e, status, "%s", inner.text);
    return check_ranges(f, e);
}
