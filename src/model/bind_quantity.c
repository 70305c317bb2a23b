/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Binding of quantities: scalars, maps of a distribution, `rest`, and parts of
 * quantities inside changes. Ranges of constants and distributions are checked here;
 * dimensions need other objects and are checked in check.c. */
#include "model/binder.h"

#include <math.h>

/* Calls offer for every key that makes a distribution. */
static void quantity_keys(void (*offer)(void *ctx, const char *key), void *ctx)
{
    static const char *const own[] = {"shape", "times", "range", "values"};
    for (size_t i = 0; i < sizeof own / sizeof *own; i++)
        offer(ctx, own[i]);
    for (size_t s = 0; s < quantity_n_shapes; s++) {
        const struct quantity_shape *shape = &quantity_shapes[s];
        for (size_t k = 0; k < 3 && shape->keys[k]; k++)
            offer(ctx, shape->keys[k]);
        if (shape->also)
            offer(ctx, shape->also);
    }
}

struct wanted_key {
    const char *key;
    bool found;
};

static void compare_key(void *ctx, const char *key)
{
    struct wanted_key *wanted = ctx;
    wanted->found = wanted->found || text_equal(wanted->key, key);
}

bool bind_is_quantity_key(const char *key)
{
    struct wanted_key wanted = {key, false};
    quantity_keys(compare_key, &wanted);
    return wanted.found;
}

static void offer_key(void *near, const char *key)
{
    nearest_offer(near, key);
}

static void unknown_key(struct binding *b, const struct pair *p)
{
    struct nearest near;
    nearest_init(&near, p->key);
    quantity_keys(offer_key, &near);
    diag_add(b->diags, p->place, "a distribution has no key \"%s\"%s", p->key,
             nearest_hint(b->arena, &near));
}

/* --- ranges --- */

static const char *range_words(const struct field *f)
{
    if (f->dim == PROBABILITY)
        return "a probability lies between 0 and 1 (0 % and 100 %)";
    if (f->dim == INTEREST)
        return "interest lies above -100 % per a";
    return f->flags & POSITIVE ? "it must be greater than 0" : "it must be 0 or more";
}

static bool in_range(const struct field *f, double low, double high)
{
    if (f->dim == PROBABILITY && (low < 0 || high > 1))
        return false;
    if (f->dim == INTEREST && low <= -1)
        return false;
    if ((f->flags & POSITIVE) && low <= 0)
        return false;
    return !((f->flags & NOT_NEGATIVE) && low < 0);
}

/* Where all but one part in 5,000 of a distribution lies. */
static bool practical_range(const struct quantity *q, double *low, double *high)
{
    quantity_range(q, low, high);
    if (q->shape == SHAPE_NORMAL || q->shape == SHAPE_LOGNORMAL || q->shape == SHAPE_GAMMA) {
        double p, r;
        if (quantity_quantile(q, 1e-4, &p, NULL) != OHMEN_OK ||
            quantity_quantile(q, 1 - 1e-4, &r, NULL) != OHMEN_OK)
            return false;
        *low = p > *low ? p : *low;
        *high = r < *high ? r : *high;
    }
    return true;
}

static bool check_constant(struct binding *b, const struct field *f, const struct quantity *q,
                           struct place at)
{
    double x = expr_constant(q->expr);
    if (!isfinite(x)) {
        diag_add(b->diags, at, "this does not give a finite number");
        return false;
    }
    if (in_range(f, x, x))
        return true;
    diag_add(b->diags, at, "this is %s: %s", x < 0 ? "negative" : "out of range", range_words(f));
    return false;
}

static bool check_distribution(struct binding *b, const struct field *f, const struct quantity *q,
                               struct place at)
{
    if (f->flags & (CERTAIN | CONSTANT)) {
        diag_add(b->diags, at,
                 "a certain number is needed here, not a distribution: it decides the shape of the "
                 "computation");
        return false;
    }
    double low, high;
    if (!practical_range(q, &low, &high)) {
        diag_add(b->diags, at, "the percentiles of this distribution cannot be computed");
        return false;
    }
    if (in_range(f, low, high))
        return true;
    diag_add(b->diags, at, "this distribution reaches values that are out of range: %s",
             range_words(f));
    return false;
}

static bool check_value(struct binding *b, const struct field *f, const struct quantity *q,
                        struct place at)
{
    if (q->shape != SHAPE_EXPRESSION)
        return check_distribution(b, f, q, at);
    if (expr_uses(q->expr, EXPR_WAS)) {
        diag_add(b->diags, at, "\"was\" has a meaning only inside the change of an option");
        return false;
    }
    if (quantity_is_constant(q))
        return check_constant(b, f, q, at);
    if (!(f->flags & CONSTANT))
        return true;
    diag_add(b->diags, at, "a plain number with its unit is needed here, without names");
    return false;
}

/* --- scalars --- */

static struct node *rest_node(struct binding *b, const struct node *node, void *member)
{
    if (member) {
        struct quantity *rest = NEW(b->arena, struct quantity);
        rest->times = 1;
        rest->text = "rest";
        *(struct quantity **)member = rest;
    }
    return node_scalar(b->arena, FORM_TEXT, "rest", node->place);
}

/* Inside a change a quantity is checked for what it says alone: its syntax, and that
 * `was` is a factor. */
static bool check_part(struct binding *b, const struct quantity *q, struct place at)
{
    if (q->shape != SHAPE_EXPRESSION || !expr_uses(q->expr, EXPR_WAS) ||
        expr_was_is_factor(q->expr))
        return true;
    diag_add(
        b->diags, at,
        "\"was\" may only be multiplied or divided, such as 0.6 * was: then the order of several "
        "changes does not matter");
    return false;
}

static struct node *bind_scalar_quantity(struct binding *b, const struct field *f,
                                         const struct node *node, void *member)
{
    if ((f->flags & REST) && text_equal(node->text, "rest"))
        return rest_node(b, node, member);
    struct quantity *q = quantity_parse(b->arena, b->units, node->text, node->place, b->diags);
    if (!q)
        return NULL;
    bool fine = b->change ? check_part(b, q, node->place) : check_value(b, f, q, node->place);
    if (!fine)
        return NULL;
    if (member)
        *(struct quantity **)member = q;
    return node_scalar(b->arena, FORM_TEXT, quantity_canonical(b->arena, b->units, node->text),
                       node->place);
}

/* --- maps of a distribution --- */

struct parts {
    const char *shape;
    struct place shape_at;
    ARRAY(struct quantity_part) list;
    const struct node *values, *range;
    double times;
    const char *times_text;
    bool fine;
};

static struct expr *constant_expr(struct binding *b, const struct node *node)
{
    if (node->type != NODE_SCALAR) {
        diag_add(b->diags, node->place, "expected a number with its unit, found %s",
                 bind_node_words(node));
        return NULL;
    }
    struct expr *e = expr_parse(b->arena, b->units, node->text, node->place, b->diags);
    if (!e)
        return NULL;
    struct quantity q = {.shape = SHAPE_EXPRESSION, .expr = e, .times = 1};
    if (!quantity_is_constant(&q) || !isfinite(expr_constant(e))) {
        diag_add(b->diags, node->place,
                 "the parameter of a distribution is a plain number with its unit, without names");
        return NULL;
    }
    return e;
}

static const char *expr_text(struct arena *a, const struct expr *e)
{
    struct text t;
    text_init(&t, a);
    expr_write(&t, e);
    return text_str(&t);
}

static struct node *take_times(struct binding *b, struct parts *p, const struct node *node)
{
    struct expr *e = constant_expr(b, node);
    if (!e)
        return NULL;
    p->times = expr_constant(e);
    if (!(p->times > 0)) {
        diag_add(b->diags, node->place, "\"times\" is a factor greater than 0");
        return NULL;
    }
    p->times_text = expr_text(b->arena, e);
    return node_scalar(b->arena, FORM_TEXT, p->times_text, node->place);
}

static struct node *take_parameter(struct binding *b, struct parts *p, const struct pair *pair)
{
    if (b->change && pair->value->type == NODE_SCALAR) {
        struct quantity *q =
            quantity_parse(b->arena, b->units, pair->value->text, pair->value->place, b->diags);
        if (!q || !check_part(b, q, pair->value->place))
            return NULL;
        return node_scalar(b->arena, FORM_TEXT,
                           quantity_canonical(b->arena, b->units, pair->value->text),
                           pair->value->place);
    }
    struct expr *e = constant_expr(b, pair->value);
    if (!e)
        return NULL;
    *array_push(b->arena, &p->list) = (struct quantity_part){pair->key, e, pair->value->place};
    return node_scalar(b->arena, FORM_TEXT, expr_text(b->arena, e), pair->value->place);
}

/* The canonical node of `values: {low: {is: 2 h, p: 30 %}, high: 9 h ...}`. */
static const struct field discrete_value_fields[] = {
    {.key = "is",
     .type = FIELD_QUANTITY,
     .flags = REQUIRED | CERTAIN | CONSTANT,
     .offset = 0,
     .dim = ANY,
     .help = "The value"},
    {.key = "p",
     .type = FIELD_QUANTITY,
     .flags = REQUIRED | CERTAIN | CONSTANT | REST,
     .offset = sizeof(void *),
     .dim = PROBABILITY,
     .help = "Its probability, or rest"},
};
static const struct table discrete_value = {.name = "value of a distribution",
                                            .size = 2 * sizeof(void *),
                                            .fields = discrete_value_fields,
                                            .n_fields = 2,
                                            .help = "A value and its probability"};
static const struct field discrete_part = {.type = FIELD_STRUCT, .table = &discrete_value};
static const struct field discrete_rows = {
    .key = "values", .type = FIELD_ROWS, .part = &discrete_part};

struct discrete_pair {
    struct quantity *is, *p;
};

static struct quantity *build_discrete(struct binding *b, const struct rows *rows,
                                       const struct node *canonical)
{
    struct quantity_part *values = NEW_ARRAY(b->arena, rows->n, struct quantity_part);
    double *p = NEW_ARRAY(b->arena, rows->n, double), sum = 0;
    size_t rest = rows->n;
    for (size_t i = 0; i < rows->n; i++) {
        const struct discrete_pair *row = ROW(struct discrete_pair, *rows, i);
        const struct node *is = node_get(canonical->pairs[i].value, "is");
        values[i] = (struct quantity_part){"is", row->is->expr, is->place};
        if (row->p->expr)
            sum += p[i] = expr_constant(row->p->expr);
        else if (rest < rows->n)
            diag_add(b->diags, canonical->pairs[i].place, "only one probability can be the rest");
        else
            rest = i;
    }
    if (rest < rows->n)
        p[rest] = 1 - sum;
    return quantity_discrete(b->arena, b->units, rows->n, values, p, canonical->place, b->diags);
}

static struct quantity *build(struct binding *b, struct parts *p, const struct node *map,
                              const struct rows *discrete, const struct node *values)
{
    if (p->range) {
        if (p->shape || p->list.n || values) {
            diag_add(b->diags, map->place, "\"range\" stands alone or with \"times\"");
            return NULL;
        }
        return quantity_parse(b->arena, b->units, p->range->text, p->range->place, b->diags);
    }
    if (values) {
        if (p->list.n == 0 && (!p->shape || text_equal(p->shape, "discrete")))
            return build_discrete(b, discrete, values);
        diag_add(b->diags, map->place, "a discrete distribution has only \"values\"");
        return NULL;
    }
    return quantity_build(b->arena, b->units, p->shape, p->shape_at, p->list.at, p->list.n,
                          map->place, b->diags);
}

static struct node *take_range(struct binding *b, struct parts *p, const struct node *value)
{
    if (!quantity_parse(b->arena, b->units, value->text, value->place, b->diags))
        return NULL;
    p->range = value;
    return node_scalar(b->arena, FORM_TEXT, quantity_canonical(b->arena, b->units, value->text),
                       value->place);
}

static struct node *take(struct binding *b, struct parts *p, const struct pair *pair,
                         struct rows *discrete)
{
    const struct node *value = pair->value;
    if (!bind_is_quantity_key(pair->key)) {
        unknown_key(b, pair);
        return NULL;
    }
    if (bind_is_removal(b, value))
        return node_scalar(b->arena, FORM_NO, "no", value->place);
    if (text_equal(pair->key, "values"))
        return bind_field(b, &discrete_rows, value, b->change ? NULL : discrete);
    if (text_equal(pair->key, "shape") || text_equal(pair->key, "range")) {
        if (value->type != NODE_SCALAR) {
            diag_add(b->diags, value->place, "expected a single value, found %s",
                     bind_node_words(value));
            return NULL;
        }
        if (text_equal(pair->key, "range"))
            return take_range(b, p, value);
        p->shape = value->text;
        p->shape_at = value->place;
        return node_scalar(b->arena, FORM_TEXT, value->text, value->place);
    }
    if (text_equal(pair->key, "times") && !b->change)
        return take_times(b, p, value);
    return take_parameter(b, p, pair);
}

static struct node *bind_map_quantity(struct binding *b, const struct field *f,
                                      const struct node *map, void *member)
{
    struct parts p = {.times = 1, .fine = true};
    struct rows discrete = {0};
    struct node *canonical = node_map(b->arena, map->place), *values = NULL;
    size_t errors = b->diags->count;
    for (size_t i = 0; i < map->n; i++) {
        struct node *part = take(b, &p, &map->pairs[i], &discrete);
        p.fine = p.fine && part;
        if (part && text_equal(map->pairs[i].key, "values"))
            values = part;
        if (part)
            node_add(b->arena, canonical, map->pairs[i].key, map->pairs[i].place, part);
    }
    node_sort(canonical);
    if (!p.fine)
        return NULL;
    if (b->change)
        return canonical;
    struct quantity *q = build(b, &p, map, &discrete, values);
    if (!q)
        return NULL;
    q->times *= p.times;
    if (p.times_text)
        q->text = arena_printf(b->arena, "%s times (%s)", p.times_text, q->text);
    if (!check_value(b, f, q, map->place) || b->diags->count != errors)
        return NULL;
    if (member)
        *(struct quantity **)member = q;
    return canonical;
}

struct node *bind_quantity(struct binding *b, const struct field *f, const struct node *node,
                           void *member)
{
    if (node->type == NODE_SCALAR)
        return bind_scalar_quantity(b, f, node, member);
    if (node->type == NODE_MAP)
        return bind_map_quantity(b, f, node, member);
    diag_add(
        b->diags, node->place,
        "expected a quantity such as 180 kEUR or 90 %% within 140 kEUR .. 190 kEUR, found a list");
    return NULL;
}
