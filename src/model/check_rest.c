/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Settings, elements and options. Rates are in check_rate.c, common causes in
 * check_common_cause.c, states and decisions in check_decide.c. */
#include "model/check.h"

#include <math.h>

/* --- settings --- */

static bool has_key(const struct rows *rows, const char *key)
{
    for (size_t i = 0; i < rows->n; i++)
        if (text_equal(rows->keys[i], key))
            return true;
    return false;
}

static void check_perspective(struct checking *c, const struct object *o)
{
    const struct register_settings *s = o->data;
    if (!s->perspective || text_equal(s->perspective, "all") ||
        has_key(&s->perspectives, s->perspective))
        return;
    struct nearest near;
    nearest_init(&near, s->perspective);
    for (size_t i = 0; i < s->perspectives.n; i++)
        nearest_offer(&near, s->perspectives.keys[i]);
    diag_add(c->diags, node_get(o->node, "perspective")->place, "there is no perspective \"%s\"%s",
             s->perspective, nearest_hint(c->arena, &near));
}

static void check_limits(struct checking *c, const struct quantity *below,
                         const struct quantity *above, const struct node *node)
{
    if (below && above && expr_constant(below->expr) >= expr_constant(above->expr))
        diag_add(c->diags, node_get(node, "intolerable-above")->place,
                 "\"intolerable-above\" must lie above \"acceptable-below\"");
}

/* Horizons are whole years: the present value of a year needs no convention for
 * a broken one, and no horizon is longer than this. */
#define LONGEST_HORIZON 200

static void check_horizon(struct checking *c, const struct object *o)
{
    const struct register_settings *s = o->data;
    double years = expr_constant(s->horizon->expr);
    if (dim_equal(s->horizon->dim, dim_time) &&
        (years != floor(years) || years < 1 || years > LONGEST_HORIZON))
        diag_add(c->diags, node_get(o->node, "horizon")->place,
                 "the horizon is a whole number of years from 1 to %d", LONGEST_HORIZON);
}

void check_settings(struct checking *c, const struct object *o)
{
    const struct register_settings *s = o->data;
    check_perspective(c, o);
    check_horizon(c, o);
    if (!s->criteria)
        return;
    const struct node *criteria = node_get(o->node, "criteria");
    const struct money_criteria *m = s->criteria->money;
    const struct people_criteria *p = s->criteria->people;
    if (m)
        check_limits(c, m->acceptable_below, m->intolerable_above, node_get(criteria, "money"));
    if (p)
        check_limits(c, p->acceptable_below, p->intolerable_above, node_get(criteria, "people"));
}

/* --- elements --- */

static void check_record(struct checking *c, const struct demand_record *r, const struct node *node)
{
    if (r->is && (r->failures >= 0 || r->demands >= 0))
        diag_add(c->diags, node->place, "counts of failures and demands go with a prior");
    if (r->prior < 0)
        return;
    if (r->failures < 0 || r->demands < 0)
        diag_add(c->diags, node->place, "a prior needs \"failures\" and \"demands\"");
    else if (r->failures > r->demands)
        diag_add(c->diags, node_get(node, "failures")->place,
                 "there are more failures than demands; the demands include the failures");
}

/* Days in order: in service, known to be sound, last test, next test; tests that end. */
static void check_times(struct checking *c, const struct object *o)
{
    const struct element *x = o->data;
    const struct node *test = node_get(o->node, "test");
    if (x->since != DAY_NONE && x->known != DAY_NONE && x->known < x->since)
        diag_add(c->diags, node_get(o->node, "when-known")->place,
                 "\"when-known\" lies before \"since\"");
    if (!x->test)
        return;
    if (x->test->takes && expr_constant(x->test->takes->expr) > expr_constant(x->test->every->expr))
        diag_add(c->diags, node_get(test, "takes")->place,
                 "a test cannot take longer than the time from one test to the next");
    if (x->test->last != DAY_NONE && x->since != DAY_NONE && x->test->last < x->since)
        diag_add(c->diags, node_get(test, "last")->place,
                 "the last test lies before \"since\", when the element came into service");
    if (x->test->last != DAY_NONE && x->test->next != DAY_NONE && x->test->next <= x->test->last)
        diag_add(c->diags, node_get(test, "next")->place,
                 "the next test must lie behind the last one");
}

static void check_repair(struct checking *c, const struct object *o)
{
    const struct element *x = o->data;
    const struct element_type *t = x->type ? model_get(c->model, KIND_TYPE, x->type) : NULL;
    bool detected = x->detected || (t && t->detected), repair = x->repair || (t && t->repair);
    const struct node *at = node_get(o->node, "detected");
    if (detected && !repair && !x->out_while_repaired)
        diag_add(c->diags, at ? at->place : node_get(o->node, "type")->place,
                 "detected failures need \"repair\", the time until they are mended");
}

void check_element(struct checking *c, const struct object *o)
{
    bool is_element = o->kind == KIND_ELEMENT;
    const struct demand_record *r = is_element ? ((const struct element *)o->data)->per_demand
                                               : ((const struct element_type *)o->data)->per_demand;
    if (r)
        check_record(c, r, node_get(o->node, "per-demand"));
    if (!is_element)
        return;
    check_times(c, o);
    check_repair(c, o);
}

/* --- options --- */

static void check_other_options(struct checking *c, const struct object *o,
                                const struct names *names, const char *key)
{
    const struct node *node = node_get(o->node, key);
    for (size_t i = 0; i < names->n; i++)
        if (text_equal(names->at[i], o->id))
            diag_add(c->diags, node->items[i]->place, "an option cannot name itself in \"%s\"",
                     key);
}

static void check_contradictions(struct checking *c, const struct object *o)
{
    const struct option *p = o->data;
    const struct node *node = node_get(o->node, "requires");
    for (size_t i = 0; i < p->requires.n; i++) {
        const char *other = p->requires.at[i];
        if (!model_get(c->model, KIND_OPTION, other) || text_equal(other, o->id))
            continue;
        const char *path = model_contradiction(c->arena, c->model, o->id, other);
        if (path)
            diag_add(c->diags, node->items[i]->place,
                     "the options \"%s\" and \"%s\" contradict each other at %s, yet the one "
                     "requires the other",
                     o->id, other, path);
    }
}

void check_option(struct checking *c, const struct object *o)
{
    const struct option *p = o->data;
    check_other_options(c, o, &p->excludes, "excludes");
    check_other_options(c, o, &p->requires, "requires");
    check_contradictions(c, o);
    check_service(c, o);
    check_combinations(c, o);
    for (size_t i = 0; i < p->excludes.n; i++)
        for (size_t k = 0; k < p->requires.n; k++)
            if (text_equal(p->excludes.at[i], p->requires.at[k]))
                diag_add(c->diags, node_get(o->node, "excludes")->items[i]->place,
                         "\"%s\" is both required and excluded", p->excludes.at[i]);
}
