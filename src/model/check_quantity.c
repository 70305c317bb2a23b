/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dimensions: what each name means, and whether each quantity fits its field. */
#include "model/check.h"

struct known_dim {
    enum { DIM_OPEN, DIM_KNOWN, DIM_NONE } state;
    struct dim dim;
};

/* What an expression is being checked for. */
struct naming {
    struct checking *c;
    const struct object *object;
    bool clearance; /* may it use clearance-time? */
};

static bool dim_of_name(void *ctx, const struct expr *e, struct place at, struct dim *out);

static bool check_own(struct checking *c, const struct object *o, struct quantity *q,
                      struct place at, bool clearance)
{
    struct naming n = {c, o, clearance};
    struct expr_names names = {.ctx = &n, .dim = dim_of_name};
    return quantity_check(c->arena, &c->model->units, q, &names, at, c->diags);
}

/* `section a` as the dimension of 1 / (section a). */
static bool dim_per(struct checking *c, const char *units, struct dim *out)
{
    struct diags quiet;
    diags_init(&quiet, c->arena);
    const char *literal = arena_printf(c->arena, "1 %s", units);
    struct expr *e = expr_parse(c->arena, &c->model->units, literal,
                                (struct place){.file = "register", .line = 1}, &quiet);
    if (!e)
        return false;
    *out = dim_divide(dim_number, e->dim);
    return true;
}

/* The dimension of a value by its own quantity, found once. The quantity of an object
 * below a variant was checked when its model was loaded. */
static bool dim_of_value(struct checking *c, const struct object *o, struct dim *out)
{
    const struct value *v = o->data;
    struct quantity *q = v->is ? v->is : v->varies;
    const struct node *node = node_get(o->node, v->is ? "is" : "varies");
    if (c->depth >= VALUE_DEPTH) {
        diag_add(c->diags, node->place, "values use values more than %d deep", VALUE_DEPTH);
        return false;
    }
    c->depth++;
    bool fine = check_own(c, o, q, node->place, false);
    c->depth--;
    *out = q->dim;
    return fine;
}

bool check_dim_of(struct checking *c, const char *id, struct dim *out)
{
    const struct object *o = model_find(c->model, id);
    if (!o || (o->kind != KIND_VALUE && o->kind != KIND_RATE))
        return false;
    struct known_dim *k = strmap_get(&c->dims, id);
    if (!k) {
        k = NEW(c->arena, struct known_dim);
        k->state = DIM_OPEN; /* met again below: a cycle, reported by check_cycles */
        strmap_set(c->arena, &c->dims, id, k);
        bool fine = o->kind == KIND_VALUE
                        ? dim_of_value(c, o, &k->dim)
                        : dim_per(c, ((const struct rate *)o->data)->per, &k->dim);
        k->state = fine ? DIM_KNOWN : DIM_NONE;
    }
    *out = k->dim;
    return k->state == DIM_KNOWN;
}

static bool dim_of_clearance(struct naming *n, struct place at, struct dim *out)
{
    *out = dim_time;
    if (n->clearance)
        return true;
    diag_add(n->c->diags, at,
             "clearance-time has a meaning only in the damage of a hazard's outcome");
    return false;
}

/* A number, whatever it names. A rate that is not there is told with the references. */
static bool dim_of_share(struct naming *n, const struct expr *e, struct place at, struct dim *out)
{
    const struct rate *r = model_get(n->c->model, KIND_RATE, e->name);
    struct nearest near;
    nearest_init(&near, e->text);
    *out = dim_number;
    for (size_t i = 0; r && i < r->kinds_of_fault.n; i++) {
        if (text_equal(r->kinds_of_fault.keys[i], e->text))
            return true;
        nearest_offer(&near, r->kinds_of_fault.keys[i]);
    }
    if (r)
        diag_add(n->c->diags, at, "the rate \"%s\" counts no kind of fault \"%s\"%s", e->name,
                 e->text, nearest_hint(n->c->arena, &near));
    return true;
}

/* --- stress classes --- */

static void collect_classes(struct checking *c, const struct unwanted *u)
{
    for (size_t i = 0; u && i < u->per_event.n; i++)
        strmap_set(c->arena, &c->stress_classes, u->per_event.keys[i], NULL);
}

/* All that an element or a type of the model knows; once. */
static void collect_all_classes(struct checking *c)
{
    for (const struct model *m = c->collected ? NULL : c->model; m; m = m->below)
        for (size_t i = 0; i < m->by_id.n; i++) {
            const struct object *o = m->by_id.at[i].value;
            if (o && o->kind == KIND_ELEMENT)
                collect_classes(c, ((const struct element *)o->data)->unwanted);
            else if (o && o->kind == KIND_TYPE)
                collect_classes(c, ((const struct element_type *)o->data)->unwanted);
        }
    c->collected = true;
}

/* A frequency, whatever the scheme. A class that nothing knows is a slip of the pen. */
static bool dim_of_unwanted(struct naming *n, const struct expr *e, struct place at,
                            struct dim *out)
{
    struct checking *c = n->c;
    *out = dim_frequency;
    collect_all_classes(c);
    for (size_t i = 0; i + 1 < e->n; i += 2) {
        const struct expr *stress = e->args[i];
        struct nearest near;
        if (strmap_has(&c->stress_classes, stress->name))
            continue;
        nearest_init(&near, stress->name);
        for (size_t k = 0; k < c->stress_classes.n; k++)
            nearest_offer(&near, c->stress_classes.at[k].key);
        diag_add(c->diags, place_inside(at, stress->column - e->column),
                 "no element or type has a probability of unwanted operation \"per-event\" of "
                 "the stress class \"%s\"%s",
                 stress->name, nearest_hint(c->arena, &near));
    }
    return true;
}

static bool dim_of_name(void *ctx, const struct expr *e, struct place at, struct dim *out)
{
    struct naming *n = ctx;
    switch (e->op) {
    case EXPR_NAME: return check_dim_of(n->c, e->name, out);
    case EXPR_CLEARANCE: return dim_of_clearance(n, at, out);
    case EXPR_FAILS: *out = dim_number; return true;
    case EXPR_FREQUENCY: *out = dim_frequency; return true;
    case EXPR_SHARE: return dim_of_share(n, e, at, out);
    case EXPR_UNWANTED: return dim_of_unwanted(n, e, at, out);
    default: return false;
    }
}

/* --- fields --- */

const struct dim *field_dimension(enum field_dim d)
{
    switch (d) {
    case NUMBER:
    case PROBABILITY: return &dim_number;
    case TIME: return &dim_time;
    case POWER: return &dim_power;
    case MONEY: return &dim_money;
    case FREQUENCY:
    case INTEREST: return &dim_frequency;
    case MONEY_RATE: return &dim_money_rate;
    case ANY: break;
    }
    return NULL;
}

const char *field_dimension_words(enum field_dim d)
{
    switch (d) {
    case NUMBER: return "a pure number";
    case PROBABILITY: return "a probability such as 5 %";
    case TIME: return "a time such as 2 h";
    case POWER: return "power such as 3 MW";
    case MONEY: return "money such as 40 kEUR";
    case FREQUENCY: return "a number per time such as 0.02 per a";
    case INTEREST: return "interest per time such as 4 % per a";
    case MONEY_RATE: return "money per time such as 5 kEUR per a";
    case ANY: break;
    }
    return "a quantity";
}

struct certainty {
    struct checking *c;
    bool certain;
};

static void look_at_name(void *ctx, const struct expr *e)
{
    struct certainty *k = ctx;
    if (e->op == EXPR_SHARE)
        k->certain = false;
    if (e->op != EXPR_NAME)
        return;
    const struct value *v = model_get(k->c->model, KIND_VALUE, e->name);
    if (!v || !v->is || k->c->depth >= VALUE_DEPTH) {
        k->certain = false;
        return;
    }
    k->c->depth++;
    k->certain = k->certain && check_is_certain(k->c, v->is);
    k->c->depth--;
}

bool check_is_certain(struct checking *c, const struct quantity *q)
{
    struct certainty k = {c, q->shape == SHAPE_EXPRESSION};
    if (k.certain && q->expr)
        expr_walk(q->expr, look_at_name, &k);
    return k.certain;
}

struct quantities_walk {
    struct checking *c;
    const struct object *object;
    unsigned outcomes; /* > 0 inside `outcomes` */
};

static void check_field(struct quantities_walk *w, const struct visit *v)
{
    struct quantity *q = *(struct quantity *const *)v->member;
    struct place at = v->node->place;
    if (q->shape == SHAPE_EXPRESSION && !q->expr)
        return; /* rest */
    if (w->object->kind == KIND_VALUE) {
        struct dim d;
        check_dim_of(w->c, w->object->id, &d);
    } else if (!check_own(w->c, w->object, q, at, w->outcomes > 0)) {
        return;
    }
    const struct dim *want = field_dimension(v->field->dim);
    if (want && !dim_equal(*want, q->dim))
        diag_add(w->c->diags, at, "expected %s%s%s%s, found %s",
                 field_dimension_words(v->field->dim), v->key ? " for \"" : "",
                 v->key ? v->key : "", v->key ? "\"" : "",
                 dim_words(w->c->arena, &w->c->model->units, q->dim));
    if ((v->field->flags & CERTAIN) && !check_is_certain(w->c, q))
        diag_add(w->c->diags, at, "a certain number is needed here, but a name in it is uncertain");
}

static enum walk enter_field(void *ctx, const struct visit *v)
{
    struct quantities_walk *w = ctx;
    if (v->key && !v->in && text_equal(v->key, "outcomes"))
        w->outcomes++;
    if (v->field->type == FIELD_QUANTITY)
        check_field(w, v);
    return WALK_INTO;
}

static void leave_field(void *ctx, const struct visit *v)
{
    struct quantities_walk *w = ctx;
    if (v->key && !v->in && text_equal(v->key, "outcomes"))
        w->outcomes--;
}

void check_quantities(struct checking *c, const struct object *o)
{
    struct quantities_walk w = {c, o, 0};
    struct walker walker = {.ctx = &w, .enter = enter_field, .leave = leave_field};
    walk_table(c->arena, kinds[o->kind].table, o->node, o->data, &walker);
}
