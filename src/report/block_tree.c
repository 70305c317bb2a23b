/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Building trees of choices and policies. Owns nothing.
 * Invariant: a node of a tree does not move once it was added; a policy has a cell for each
 * condition and time as soon as one was set. */
#include <assert.h>

#include "report/block_add.h"

/* --- trees --- */

struct block *report_tree(struct report *r, const char *key, const char *title, const char *unit,
                          enum number_style style, const char *head)
{
    struct block *b = report_add(r, BLOCK_TREE, key, title);
    b->tree = NEW(r->arena, struct tree);
    b->tree->unit = report_keep(r, unit ? unit : "");
    b->tree->style = style;
    b->tree->value_head = report_keep(r, head ? head : "");
    return b;
}

struct tree_node *tree_add(struct report *r, struct block *b, struct tree_node *parent,
                           enum tree_kind kind, const char *label)
{
    struct tree_node *n = NEW(r->arena, struct tree_node);
    n->kind = kind;
    n->label = report_keep(r, label ? label : "");
    n->best = !parent;
    assert(parent || !b->tree->root);
    if (parent)
        *array_push(r->arena, &parent->children) = n;
    else
        b->tree->root = n;
    return n;
}

/* --- policies --- */

struct block *report_policy(struct report *r, const char *key, const char *title)
{
    struct block *b = report_add(r, BLOCK_POLICY, key, title);
    b->policy = NEW(r->arena, struct policy);
    return b;
}

struct policy_action *policy_add_action(struct report *r, struct block *b, const char *name,
                                        bool nothing)
{
    struct policy_action *a = array_push(r->arena, &b->policy->actions);
    a->name = report_keep(r, name ? name : "");
    a->nothing = nothing;
    return a;
}

void policy_add_time(struct report *r, struct block *b, const char *label)
{
    assert(b->policy->cells.n == 0);
    *array_push(r->arena, &b->policy->times) = report_keep(r, label ? label : "");
}

void policy_add_condition(struct report *r, struct block *b, const char *label)
{
    assert(b->policy->cells.n == 0);
    *array_push(r->arena, &b->policy->conditions) = report_keep(r, label ? label : "");
}

static void make_cells(struct report *r, struct policy *p)
{
    for (size_t n = p->conditions.n * p->times.n; n-- > 0;)
        *array_push(r->arena, &p->cells) = (struct policy_cell){.action = POLICY_NONE};
}

void policy_set(struct report *r, struct block *b, size_t condition, size_t time, size_t action,
                double reach, const char *figure)
{
    struct policy *p = b->policy;
    assert(condition < p->conditions.n && time < p->times.n);
    assert(action == POLICY_NONE || action < p->actions.n);
    assert(reach >= 0 && report_can_draw(reach));
    if (p->cells.n == 0)
        make_cells(r, p);
    p->cells.at[condition * p->times.n + time] =
        (struct policy_cell){action, reach, report_keep(r, figure)};
}

bool policy_is_whole(const struct policy *p)
{
    return p->conditions.n > 0 && p->times.n > 0;
}
