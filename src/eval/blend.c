/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Blends (blend.h): which inputs are whose, the rule of each variable, and the evaluation at one
 * point of the shared inputs. A variable that meets no shared input is computed once.
 *
 * Owns nothing but what it makes in the arena it was given. Invariant: no sum depends on numbers
 * of nodes or inputs; two inputs of a variable are taken in the order of their names. */
#include "eval/blend.h"

#include "eval/knot.h"

#include <math.h>
#include <string.h>

/* When a level changes nothing by more than this part, it is the last (as in knot.c); the greatest
 * one, by the number of inputs; what may be left out. */
#define AGREED 1e-6
static const size_t last_level[3] = {0, 5, 1};
#define LEAST_PART 1e-12

enum { MOST_OWN = 2 };

/* One point of a variable's rule. */
struct node {
    double x[MOST_OWN], weight;
};

struct variable {
    node_id arg;
    size_t index;                /* in the diagram */
    const struct course *course; /* NULL: a plain number */
    uint32_t own[MOST_OWN];
    struct spread *spread[MOST_OWN];
    size_t n_own;
    bool moves;              /* with the shared inputs */
    struct knot_steps steps; /* from its own inputs */
    size_t n;
    struct node *nodes; /* NULL where it has no inputs of its own */
    double *weight;     /* of a course: as struct mixture has it */
    struct course_values *versions;
};

struct blend {
    struct arena *arena;
    struct eval *v;
    struct spreads *spreads;
    struct knot_search *search;
    node_id node;
    const struct diagram *diagram;
    size_t n;
    struct variable *variables; /* that occur */
    uint32_t *shared;
    size_t n_shared;
    struct knot_steps steps; /* from the shared inputs */
    bool begun;
    /* By variable of the diagram: */
    double *p, *q;
    const struct course **courses;
    struct course_values *values;
    struct mixture *mixtures;
    bool *changed;
    struct averages *averages; /* NULL without windows */
    double *work, *results;
};

/* ---- whose inputs ---- */

static void find_variables(struct blend *b)
{
    const node_id *args = graph_args(b->v->g, b->node);
    bool *occurs = NEW_ARRAY(b->arena, b->diagram->n_variables, bool);
    for (size_t i = 0; i < b->diagram->n_nodes; i++)
        occurs[b->diagram->nodes[i].variable] = true;
    b->variables = NEW_ARRAY(b->arena, b->diagram->n_variables, struct variable);
    for (size_t i = 0; i < b->diagram->n_variables; i++) {
        if (!occurs[i])
            continue;
        bool is_course =
            graph_windows_of(b->v->g, b->node).n && graph_at(b->v->g, args[i])->op == OP_COURSE;
        b->variables[b->n++] =
            (struct variable){.arg = args[i],
                              .index = i,
                              .course = is_course ? graph_course_of(b->v->g, args[i]) : NULL};
    }
}

/* Of the inputs over which the diagram is curved, those that two variables have in common. */
static void find_shared(struct blend *b)
{
    size_t n_curved, n;
    const uint32_t *curved = graph_curved(b->v->g, b->node, &n_curved);
    uint8_t *met = NEW_ARRAY(b->arena, n_curved, uint8_t);
    b->shared = NEW_ARRAY(b->arena, n_curved, uint32_t);
    for (size_t i = 0; i < b->n; i++) {
        const uint32_t *inputs = graph_uncertain(b->v->g, b->variables[i].arg, &n);
        for (size_t k = 0; k < n; k++) {
            uint32_t place = knot_place(curved, n_curved, inputs[k]);
            if (place != UINT32_MAX && met[place] < 2)
                met[place]++;
        }
    }
    for (size_t i = 0; i < n_curved; i++)
        if (met[i] == 2)
            b->shared[b->n_shared++] = curved[i];
}

static bool is_shared(const struct blend *b, uint32_t input)
{
    return knot_place(b->shared, b->n_shared, input) != UINT32_MAX;
}

static void share(struct blend *b, uint32_t input)
{
    size_t at = b->n_shared++;
    for (; at > 0 && b->shared[at - 1] > input; at--)
        b->shared[at] = b->shared[at - 1];
    b->shared[at] = input;
}

/* Takes a spread among the variable's own, which are in the order of their names; the last of too
 * many is shared. */
static void take_own(struct blend *b, struct variable *x, struct spread *s)
{
    size_t at = x->n_own;
    while (at > 0 && strcmp(x->spread[at - 1]->name, s->name) > 0)
        at--;
    if (x->n_own == MOST_OWN) {
        share(b, at == MOST_OWN ? s->input : x->spread[MOST_OWN - 1]->input);
        x->n_own--;
    }
    if (at == MOST_OWN) {
        x->n_own = MOST_OWN;
        return;
    }
    for (size_t i = x->n_own++; i > at; i--)
        x->spread[i] = x->spread[i - 1];
    x->spread[at] = s;
}

/* The curved inputs that no other variable has. */
static void find_own(struct blend *b, struct variable *x)
{
    size_t n;
    const uint32_t *curved = graph_curved(b->v->g, x->arg, &n);
    for (size_t i = 0; i < n; i++)
        if (!is_shared(b, curved[i]))
            take_own(b, x, spreads_find(b->spreads, curved[i]));
}

/* ---- the rule of a variable ---- */

/* What a variable is at some point: of a plain number itself and its complement; of a course its
 * arguments, and its probability early, at last, and of not at last. */
enum { MOST_ASPECTS = COURSE_ARGS + 5 };

static void course_values_of(const struct eval *v, node_id course, double x[COURSE_ARGS])
{
    const node_id *args = graph_args(v->g, course);
    for (int k = 0; k < COURSE_ARGS; k++)
        x[k] = v->value.at[args[k]];
}

static double longest_stretch(const struct blend *b, const struct course *c, double *age)
{
    struct windows w = graph_windows_of(b->v->g, b->node);
    double end = -INFINITY;
    for (size_t i = 0; i < w.n; i++)
        end = fmax(end, w.at[i].to);
    *age = end - c->born;
    double first = fmin(c->first, end) - c->from;
    return c->first < end ? fmax(first, fmin(c->every, end - c->first)) : first;
}

static size_t aspects_of(const struct blend *b, const struct variable *x, double *aspect)
{
    if (!x->course) {
        aspect[0] = b->v->value.at[x->arg];
        aspect[1] = eval_complement(b->v, x->arg);
        return 2;
    }
    double age, longest = longest_stretch(b, x->course, &age);
    course_values_of(b->v, x->arg, aspect);
    aspect[COURSE_ARGS] = course_change(aspect, false, longest / 8, age / 8);
    aspect[COURSE_ARGS + 1] = course_change(aspect, false, longest, age);
    aspect[COURSE_ARGS + 2] = 1 - aspect[COURSE_ARGS + 1];
    aspect[COURSE_ARGS + 3] = course_change(aspect, true, longest / 8, age / 8);
    aspect[COURSE_ARGS + 4] = course_change(aspect, true, longest, age);
    return MOST_ASPECTS;
}

/* The points of a level; their weights sum up to 1. */
static void make_nodes(struct blend *b, struct variable *x, size_t level)
{
    const struct spread *s = x->spread[0], *t = x->n_own == 2 ? x->spread[1] : NULL;
    size_t n_t = t ? t->n[level] : 1;
    double total = 0;
    x->n = 0;
    x->nodes = NEW_ARRAY(b->arena, s->n[level] * n_t, struct node);
    for (size_t i = 0; i < s->n[level]; i++)
        for (size_t j = 0; j < n_t; j++) {
            struct node node = {{s->x[i], t ? t->x[j] : 0}, s->weight[i] * (t ? t->weight[j] : 1)};
            if (node.weight < 5.4e-32 && !(s->is_discrete && (!t || t->is_discrete)))
                continue;
            total += node.weight;
            x->nodes[x->n++] = node;
        }
    for (size_t i = 0; i < x->n; i++)
        x->nodes[i].weight /= total;
}

/* Means of the aspects over the points, and of the sizes of them. */
static size_t means_of_aspects(struct blend *b, const struct variable *x, double *mean,
                               double *size)
{
    size_t n = 0;
    for (size_t k = 0; k < MOST_ASPECTS; k++)
        mean[k] = size[k] = 0;
    for (size_t i = 0; i < x->n; i++) {
        double aspect[MOST_ASPECTS];
        knot_walk(b->v, &x->steps, x->nodes[i].x);
        n = aspects_of(b, x, aspect);
        for (size_t k = 0; k < n; k++) {
            mean[k] += x->nodes[i].weight * aspect[k];
            size[k] += x->nodes[i].weight * fabs(aspect[k]);
        }
    }
    return n;
}

static bool are_discrete(const struct variable *x)
{
    return x->spread[0]->is_discrete && (x->n_own == 1 || x->spread[1]->is_discrete);
}

static bool agree(size_t n, const double *a, const double *b, const double *size)
{
    for (size_t k = 0; k < n; k++)
        if (!(fabs(a[k] - b[k]) <= AGREED * size[k]))
            return false;
    return true;
}

/* Leaves out points that count for nothing in any aspect. */
static void thin_out(struct blend *b, struct variable *x, const double *size)
{
    size_t kept = 0;
    double total = 0;
    for (size_t i = 0; i < x->n; i++) {
        double aspect[MOST_ASPECTS], part = x->nodes[i].weight;
        knot_walk(b->v, &x->steps, x->nodes[i].x);
        size_t n = aspects_of(b, x, aspect);
        for (size_t k = 0; k < n; k++)
            if (size[k] > 0)
                part = fmax(part, x->nodes[i].weight * fabs(aspect[k]) / size[k]);
        if (part < LEAST_PART)
            continue;
        total += x->nodes[i].weight;
        x->nodes[kept++] = x->nodes[i];
    }
    x->n = kept;
    for (size_t i = 0; i < x->n; i++)
        x->nodes[i].weight /= total;
}

/* False where no level is the last one. */
static ohmen_status find_rule(struct blend *b, struct variable *x, bool *found, ohmen_error *e)
{
    double before[MOST_ASPECTS], mean[MOST_ASPECTS], size[MOST_ASPECTS];
    *found = false;
    for (size_t level = 0; !*found && level <= last_level[x->n_own]; level++) {
        for (size_t i = 0; i < x->n_own; i++) {
            ohmen_status status = spread_rule(b->spreads, x->spread[i], level, e);
            if (status != OHMEN_OK)
                return status;
        }
        make_nodes(b, x, level);
        size_t n = means_of_aspects(b, x, mean, size);
        *found = are_discrete(x) || (level > 0 && agree(n, mean, before, size));
        memcpy(before, mean, sizeof before);
    }
    if (*found && !are_discrete(x))
        thin_out(b, x, size);
    return OHMEN_OK;
}

/* The steps from its own inputs, which are numbered as its spreads. A course is no step: its
 * arguments are what is asked for. */
static void find_own_steps(struct blend *b, struct variable *x)
{
    uint32_t inputs[MOST_OWN];
    bool turned = x->n_own == 2 && x->spread[0]->input > x->spread[1]->input;
    for (size_t i = 0; i < x->n_own; i++)
        inputs[i] = x->spread[turned ? 1 - i : i]->input;
    x->steps = (struct knot_steps){0};
    knot_find_steps(b->search, 1, &x->arg, x->n_own, inputs, &x->steps);
    for (size_t i = 0; i < x->steps.n && turned; i++)
        if (x->steps.at[i].input != UINT32_MAX)
            x->steps.at[i].input = 1 - x->steps.at[i].input;
    if (x->course)
        x->steps.n--;
}

/* Its own inputs, or none where they have no rule: then they count among the shared. */
static ohmen_status settle_own(struct blend *b, struct variable *x, ohmen_error *e)
{
    bool found = true;
    find_own(b, x);
    if (x->n_own == 0)
        return OHMEN_OK;
    find_own_steps(b, x);
    ohmen_status status = find_rule(b, x, &found, e);
    knot_walk(b->v, &x->steps, NULL);
    if (found || status != OHMEN_OK)
        return status;
    for (size_t i = 0; i < x->n_own; i++)
        share(b, x->spread[i]->input);
    x->n_own = x->n = 0;
    x->nodes = NULL;
    return OHMEN_OK;
}

/* ---- beginning ---- */

static void make_versions(struct blend *b, struct variable *x)
{
    if (!x->course || !x->nodes)
        return;
    x->weight = NEW_ARRAY(b->arena, x->n, double);
    x->versions = NEW_ARRAY(b->arena, x->n, struct course_values);
    for (size_t i = 0; i < x->n; i++)
        x->weight[i] = x->nodes[i].weight;
    b->mixtures[x->index] =
        (struct mixture){x->n, x->weight, (const double(*)[COURSE_ARGS])x->versions};
}

static void make_room(struct blend *b)
{
    size_t n = graph_at(b->v->g, b->node)->n;
    b->p = NEW_ARRAY(b->arena, n, double);
    b->q = NEW_ARRAY(b->arena, n, double);
    b->courses = NEW_ARRAY(b->arena, n, const struct course *);
    b->values = NEW_ARRAY(b->arena, n, struct course_values);
    b->mixtures = NEW_ARRAY(b->arena, n, struct mixture);
    b->changed = NEW_ARRAY(b->arena, n, bool);
    b->work = NEW_ARRAY(b->arena, b->diagram->n_nodes + 2, double);
    b->results = NEW_ARRAY(b->arena, eval_results(b->v, b->node), double);
    for (size_t i = 0; i < b->n; i++) {
        b->courses[b->variables[i].index] = b->variables[i].course;
        make_versions(b, &b->variables[i]);
    }
}

static void find_movers(struct blend *b)
{
    size_t n;
    node_id *roots = NEW_ARRAY(b->arena, b->n, node_id);
    for (size_t i = 0; i < b->n; i++) {
        struct variable *x = &b->variables[i];
        const uint32_t *inputs = graph_uncertain(b->v->g, x->arg, &n);
        for (size_t k = 0; k < n && !x->moves; k++)
            x->moves = is_shared(b, inputs[k]);
        roots[i] = x->arg;
    }
    knot_find_steps(b->search, b->n, roots, b->n_shared, b->shared, &b->steps);
}

static struct averaged averaged_of(const struct blend *b)
{
    return (struct averaged){.diagram = b->diagram,
                             .n = graph_at(b->v->g, b->node)->n,
                             .p = b->p,
                             .q = b->q,
                             .course = b->courses,
                             .x = (const double(*)[COURSE_ARGS])b->values,
                             .mixture = b->mixtures,
                             .windows = graph_windows_of(b->v->g, b->node),
                             .isa = b->v->isa};
}

ohmen_status blend_new(struct arena *a, struct eval *v, struct spreads *s,
                       struct knot_search *search, node_id n, struct blend **out, ohmen_error *e)
{
    struct blend *b = *out = NEW(a, struct blend);
    *b = (struct blend){.arena = a, .v = v, .spreads = s, .search = search, .node = n};
    b->diagram = graph_diagram_of(v->g, n);
    find_variables(b);
    find_shared(b);
    for (size_t i = 0; i < b->n; i++) {
        ohmen_status status = settle_own(b, &b->variables[i], e);
        if (status != OHMEN_OK)
            return status;
    }
    find_movers(b);
    make_room(b);
    struct averaged what = averaged_of(b);
    if (what.windows.n)
        b->averages = averages_new(a, &what);
    return OHMEN_OK;
}

const uint32_t *blend_inputs(const struct blend *b, size_t *n)
{
    *n = b->n_shared;
    return b->shared;
}

bool blend_has_own(const struct blend *b)
{
    for (size_t i = 0; i < b->n; i++)
        if (b->variables[i].nodes)
            return true;
    return false;
}

/* ---- one point ---- */

static void take_course(struct blend *b, struct variable *x)
{
    if (!x->nodes)
        course_values_of(b->v, x->arg, b->values[x->index].x);
    for (size_t i = 0; i < x->n; i++) {
        knot_walk(b->v, &x->steps, x->nodes[i].x);
        course_values_of(b->v, x->arg, x->versions[i].x);
    }
}

static void take_number(struct blend *b, struct variable *x)
{
    double *p = &b->p[x->index], *q = &b->q[x->index];
    *p = x->nodes ? 0 : b->v->value.at[x->arg];
    *q = x->nodes ? 0 : eval_complement(b->v, x->arg);
    for (size_t i = 0; i < x->n; i++) {
        knot_walk(b->v, &x->steps, x->nodes[i].x);
        *p += x->nodes[i].weight * b->v->value.at[x->arg];
        *q += x->nodes[i].weight * eval_complement(b->v, x->arg);
    }
}

const double *blend_at(struct blend *b, const double *x)
{
    knot_walk(b->v, &b->steps, x);
    for (size_t i = 0; i < b->n; i++) {
        struct variable *one = &b->variables[i];
        b->changed[one->index] = one->moves || !b->begun;
        if (!b->changed[one->index])
            continue;
        if (one->course)
            take_course(b, one);
        else
            take_number(b, one);
    }
    struct averaged what = averaged_of(b);
    if (b->averages)
        averages_take(b->averages, &what, b->begun ? b->changed : NULL, b->results);
    else
        diagram_evaluate(b->diagram, b->p, b->q, b->work, b->results);
    b->begun = true;
    return b->results;
}

/* Own inputs first: what depends on shared ones too, a course among it, is a step of these. */
void blend_end(struct blend *b)
{
    for (size_t i = 0; i < b->n; i++)
        knot_walk(b->v, &b->variables[i].steps, NULL);
    knot_walk(b->v, &b->steps, NULL);
}
