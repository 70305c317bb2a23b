/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Stated quantities and their nodes. A quantity that is stated once has a figure under each
 * variant of its object; these are brought together here by their name without the variant, and by
 * what they say. Owns nothing beyond the arena of the figures. */
#include "decide/turn_inputs.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "figure/compile.h"

struct numbers ARRAY_BODY(size_t);

struct gathering {
    struct figures *f;
    const struct weighing *w;
    const struct prober *p;
    struct strmap by_name; /* name without variant -> struct numbers of inputs */
    struct turn_inputs *out;
};

/* --- which figures --- */

static const struct compiled *unit_of(const struct figures *f, figure_id id)
{
    return f->units.at[figure_at(f, id)->unit];
}

static bool is_weighed(const struct gathering *x, const char *id)
{
    for (size_t i = 0; x->w && i < x->w->hazards.n; i++)
        if (text_equal(x->w->hazards.at[i].id, id))
            return true;
    return false;
}

/* How often a weighed hazard occurs, over the whole horizon. */
static bool is_frequency(const struct gathering *x, figure_id id)
{
    const struct figure *g = figure_at(x->f, id);
    return g->property == PROPERTY_FREQUENCY && !g->q1 && is_weighed(x, unit_of(x->f, id)->id);
}

bool turn_is_stated(struct figures *f, figure_id id)
{
    struct figure_ids inputs = {0};
    figure_inputs(f, f->arena, id, &inputs);
    return inputs.n == 0;
}

/* A figure that repeats the node of another one is that one. */
static bool is_input(const struct gathering *x, figure_id id)
{
    const struct figure *g = figure_at(x->f, id);
    return g->text && x->f->of_node.at[g->node] == id && prober_leads(x->p, g->node) &&
           (is_frequency(x, id) || turn_is_stated(x->f, id));
}

/* --- the same quantity --- */

/* "ID.property.q1.q2" */
static const char *plain_name(const struct figures *f, figure_id id)
{
    const char *name = figure_name(f, f->arena, id), *at = strchr(name, '@');
    return at ? arena_strn(f->arena, name, (size_t)(at - name)) : name;
}

static bool ends_word(char c)
{
    return c == 0 || c == ' ' || c == '(' || c == ')';
}

/* Is `text` a product in which `factor` stands: what `0.5 * was` makes of it? */
static bool has_factor(struct arena *a, const char *text, const char *factor)
{
    const char *at = strstr(text, factor);
    size_t n = strlen(factor);
    if (!at || (at > text && !ends_word(at[-1])) || !ends_word(at[n]))
        return false;
    const char *rest = arena_printf(a, "%s%s", arena_strn(a, text, (size_t)(at - text)), at + n);
    return !strstr(rest, " + ") && !strstr(rest, " - ") && !strchr(rest, ';');
}

static const struct quantity *distribution(const struct figures *f, figure_id id)
{
    const struct graph_node *n = graph_at(f->graph, figure_at(f, id)->node);
    return n->op == OP_INPUT ? f->inputs.at[n->extra] : NULL;
}

/* Distributions that differ by the factor in front only. */
static bool is_multiple(const struct quantity *p, const struct quantity *q)
{
    if (!p || !q || p->shape != q->shape || p->n != q->n || p->shape == SHAPE_DISCRETE)
        return false;
    return memcmp(p->p, q->p, sizeof p->p) == 0;
}

static bool moves_with(const struct figures *f, figure_id first, figure_id other)
{
    const char *text = figure_at(f, other)->text, *said = figure_at(f, first)->text;
    return text_equal(text, said) || has_factor(f->arena, text, said) ||
           has_factor(f->arena, said, text) ||
           is_multiple(distribution(f, first), distribution(f, other));
}

const struct quantity *turn_unknown(const struct figures *f, figure_id id)
{
    const struct figure *g = figure_at(f, id);
    const struct object *o = unit_of(f, id)->object;
    if (o && o->kind == KIND_VALUE && ((const struct value *)o->data)->varies)
        return NULL;
    if (!o || o->kind != KIND_HAZARD || g->property != PROPERTY_DAMAGE || !g->q1 || !g->q2)
        return distribution(f, id);
    const struct hazard *h = o->data;
    for (size_t k = 0; k < h->outcomes.n; k++) {
        const struct rows *items = &ROW(struct outcome, h->outcomes, k)->damage;
        for (size_t i = 0; i < items->n; i++)
            if (text_equal(h->outcomes.keys[k], g->q1) && text_equal(items->keys[i], g->q2) &&
                ROW(struct damage_item, *items, i)->varies)
                return NULL;
    }
    return distribution(f, id);
}

/* --- ranges --- */

/* Between the clearance times of the rows beside it, which decide what acts first. */
static void bound_clearance(const struct figures *f, figure_id id, struct turn_input *in)
{
    const struct hazard *h = unit_of(f, id)->object->data;
    const char *row = figure_at(f, id)->q1;
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *r = ROW(struct response_row, h->response, i);
        if (!r->in || text_equal(h->response.keys[i], row))
            continue;
        double t = expr_constant(r->in->expr);
        if (t < in->now)
            in->low = fmax(in->low, t);
        else
            in->high = fmin(in->high, t);
    }
}

static void add_node(const struct gathering *x, struct turn_input *in, figure_id id)
{
    const struct figure *g = figure_at(x->f, id);
    double times = eval_value(x->f->eval, g->node) / in->now;
    *array_push(x->f->arena, &in->nodes) = (struct turn_node){g->node, times};
    if (property_is_probability(g->property) && times > 0)
        in->high = fmin(in->high, 1 / times);
    if (g->property == PROPERTY_CLEARANCE)
        bound_clearance(x->f, id, in);
}

/* --- gathering --- */

static void gather(struct gathering *x, figure_id id)
{
    const char *name = plain_name(x->f, id);
    struct numbers *known = strmap_get(&x->by_name, name);
    if (!known) {
        known = NEW(x->f->arena, struct numbers);
        strmap_set(x->f->arena, &x->by_name, name, known);
    }
    for (size_t i = 0; i < known->n; i++) {
        struct turn_input *in = &x->out->at[known->at[i]];
        if (moves_with(x->f, in->figure, id)) {
            add_node(x, in, id);
            return;
        }
    }
    double now = eval_value(x->f->eval, figure_at(x->f, id)->node);
    if (!(now > 0))
        return;
    *array_push(x->f->arena, known) = x->out->n;
    struct turn_input *in = array_push(x->f->arena, x->out);
    *in = (struct turn_input){
        .figure = id, .name = figure_name(x->f, x->f->arena, id), .now = now, .high = INFINITY};
    add_node(x, in, id);
}

/* Figures with fewer changes first, then those that say less, so that the most basic one gives its
 * name to the input, whatever was compiled before. */
struct named {
    figure_id id;
    size_t n_changes, length;
    const char *name;
};

static int by_changes(const void *p, const void *q)
{
    const struct named *a = p, *b = q;
    if (a->n_changes != b->n_changes)
        return a->n_changes < b->n_changes ? -1 : 1;
    if (a->length != b->length)
        return a->length < b->length ? -1 : 1;
    return text_compare(a->name, b->name);
}

void turn_inputs_of(struct figures *f, const struct weighing *w, const struct prober *p,
                    struct turn_inputs *out)
{
    struct gathering x = {.f = f, .w = w, .p = p, .out = out};
    ARRAY(struct named) all = {0};
    for (figure_id id = 0; id < f->list.n; id++)
        if (is_input(&x, id))
            *array_push(f->arena, &all) =
                (struct named){id, unit_of(f, id)->variant->n, strlen(figure_at(f, id)->text),
                               figure_name(f, f->arena, id)};
    if (all.n > 1)
        qsort(all.at, all.n, sizeof *all.at, by_changes);
    for (size_t i = 0; i < all.n; i++)
        gather(&x, all.at[i].id);
}
