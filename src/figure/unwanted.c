/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Unwanted operation of schemes: by what their elements do by themselves, by what they do under
 * stress, and by routine tests. The model stands in docs/methods.md ("Unwanted operation").
 *
 * Relays, receivers, settings and persons decide; all else carries what was decided. An element
 * asserts itself unwantedly, has failed, or is sound; one that has failed asserts nothing. Each
 * structure has four functions of this:
 *     passes    it gives a trip, deciders as they are
 *     conducts  it would give one if all deciders asserted themselves
 *     caused    an asserted carrier makes it give one
 *     opened    a breaker opens by itself
 * Frequency of initiating events times the probability of the rest: Vesely, Nuclear Engineering
 * and Design 13 (1970) 337. */
#include "figure/clause.h"

struct ids ARRAY_BODY(const char *);

/* --- what elements state --- */

static const char *first_source(const char *own, const char *of_object)
{
    return own ? own : of_object;
}

static void add_stated(struct building *b, const struct unwanted *u, const char *source)
{
    struct figures *f = b->figures;
    const struct estimate *e = u ? u->by_itself : NULL;
    if (e)
        compiled_add(b, PROPERTY_UNWANTED, NULL, NULL, compile_quantity(b, e->is),
                     first_source(e->source, source), quantity_reads(f, e->is));
    for (size_t i = 0; u && i < u->per_event.n; i++) {
        e = ROW(struct estimate, u->per_event, i);
        compiled_add(b, PROPERTY_UNWANTED_PER_EVENT, u->per_event.keys[i], NULL,
                     compile_quantity(b, e->is), first_source(e->source, source),
                     quantity_reads(f, e->is));
    }
}

static void add_test_trips(struct building *b, const struct element *x)
{
    const struct test *t = x->test;
    if (!t || !t->trips)
        return;
    node_id n = graph_op2(b->figures->graph, OP_DIVIDE, compile_quantity(b, t->trips),
                          compile_quantity(b, t->every));
    compiled_add(b, PROPERTY_UNWANTED, "tests", NULL, n, first_source(t->source, x->source), NULL);
}

static void compile_statements(struct figures *f, const struct variant *v, const struct object *o)
{
    struct building b;
    compiled_begin_part(f, v, o, o->id, PART_UNWANTED, &b);
    if (o->kind == KIND_TYPE) {
        const struct element_type *t = o->data;
        add_stated(&b, t->unwanted, t->source);
    } else {
        const struct element *x = o->data;
        add_stated(&b, x->unwanted, x->source);
        add_test_trips(&b, x);
    }
    compiled_end(&b);
}

/* --- who asserts itself --- */

/* One element of the scheme. */
struct member {
    const char *id;
    bool decides, breaker;
    const char *states;  /* whose statements hold: itself or its type; or NULL */
    node_id by_itself;   /* rate, or NODE_NONE */
    node_id asserts;     /* in the stress class at hand, given that it has not failed */
    figure_id assertion; /* the figure of that */
    size_t failed;       /* root, or SIZE_MAX */
};

struct operation {
    struct clause passes, conducts, caused, opened;
    bool decides; /* a decider is in it */
};

struct unwanted_building {
    struct building *b;
    const struct model *model;
    const struct object *scheme;
    ARRAY(struct member) members;
    struct strmap seen; /* ids that were gathered; elements: index + 1 */
    /* of one diagram: */
    struct wiring *wiring;
    const struct member *alone; /* the one that asserts itself by itself, or NULL: a stress */
    struct strmap operations;   /* scheme -> struct operation, for `alone` */
};

static struct arena *arena_of(const struct unwanted_building *u)
{
    return u->b->figures->arena;
}

static const struct structure *structure_of(const struct object *scheme)
{
    const struct scheme *s = scheme->data;
    return s->trips_on ? s->trips_on : s->works;
}

static const struct unwanted *statements(const struct model *m, const struct element *x,
                                         const char *id, const char **whose)
{
    const struct element_type *t = x->type ? model_get(m, KIND_TYPE, x->type) : NULL;
    *whose = x->unwanted ? id : t && t->unwanted ? x->type : NULL;
    return x->unwanted ? x->unwanted : t ? t->unwanted : NULL;
}

/* Without a kind, an element decides where it may operate unwantedly. */
static bool decides(const struct model *m, const struct element *x, bool stated)
{
    static const char *const deciding[] = {"relay", "receiver", "setting", "person"};
    int kind = element_kind(m, x);
    if (kind < 0)
        return stated;
    for (size_t i = 0; i < sizeof deciding / sizeof *deciding; i++)
        if (text_equal(element_kinds[kind], deciding[i]))
            return true;
    return false;
}

static void gather_element(struct unwanted_building *u, const struct object *o)
{
    const struct element *x = o->data;
    struct member m = {.id = o->id, .by_itself = NODE_NONE, .asserts = NODE_NONE};
    bool stated = statements(u->model, x, o->id, &m.states) != NULL;
    m.decides = decides(u->model, x, stated);
    m.breaker = element_is_breaker(u->model, x);
    m.failed = SIZE_MAX;
    *array_push(arena_of(u), &u->members) = m;
    strmap_set(arena_of(u), &u->seen, o->id, (void *)(uintptr_t)u->members.n);
}

static void gather(struct unwanted_building *u, const char *id);

static void gather_structure(struct unwanted_building *u, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        gather(u, s->name);
    for (size_t i = 0; i < s->n; i++)
        gather_structure(u, s->of[i]);
}

/* All elements below, each once, depth first. */
static void gather(struct unwanted_building *u, const char *id)
{
    const struct object *o = model_find(u->model, id);
    if (strmap_has(&u->seen, id))
        return;
    if (o->kind == KIND_ELEMENT) {
        gather_element(u, o);
        return;
    }
    strmap_set(arena_of(u), &u->seen, id, NULL);
    gather_structure(u, structure_of(o));
}

/* --- functions --- */

static struct operation operation_of(struct unwanted_building *u, const char *id);

static struct event assertion(struct unwanted_building *u, const struct member *m)
{
    struct figures *f = u->b->figures;
    return (struct event){EVENT_ASSERTS,
                          m->id,
                          arena_printf(f->arena, "asserts.%s", m->id),
                          {.node = m->asserts, .fails = m->assertion, .course = FIGURE_NONE}};
}

static struct operation element_operation(struct unwanted_building *u, const struct member *m)
{
    struct wiring *w = u->wiring;
    struct clause asserts = clause_of(u->alone == m), sound = clause_of(true);
    if (!u->alone && m->asserts != NODE_NONE) {
        struct event e = assertion(u, m);
        asserts = clause_happens(w, &e);
    }
    if (m->decides)
        return (struct operation){asserts, clause_of(true), clause_of(false), clause_of(false),
                                  true};
    if (u->alone != m)
        sound = clause_element(w, m->id);
    asserts = clause_and(w, asserts, sound);
    return (struct operation){sound, sound, asserts, m->breaker ? asserts : clause_of(false),
                              false};
}

/* An asserted carrier of all: the others conduct. */
static struct clause caused_in_all(struct wiring *w, size_t n, const struct operation *parts)
{
    struct arena *a = w->under.figures->arena;
    struct clause *all = NEW_ARRAY(a, n, struct clause);
    struct clause caused = clause_of(false);
    for (size_t j = 0; j < n; j++) {
        if (parts[j].caused.f == BFUN_FALSE)
            continue;
        for (size_t k = 0; k < n; k++)
            all[k] = k == j ? parts[j].caused : parts[k].conducts;
        caused = clause_or(w, caused, clause_at_least(w, (uint32_t)n, n, all));
    }
    return caused;
}

/* One of k: parts that pass or are caused make up the number, one of them at least caused. */
static struct clause caused_in_some(struct wiring *w, uint32_t k, size_t n,
                                    const struct operation *parts)
{
    struct arena *a = w->under.figures->arena;
    struct clause *either = NEW_ARRAY(a, n, struct clause);
    struct clause *caused = NEW_ARRAY(a, n, struct clause);
    for (size_t j = 0; j < n; j++) {
        caused[j] = parts[j].caused;
        either[j] = clause_or(w, parts[j].passes, parts[j].caused);
    }
    struct clause any = clause_at_least(w, 1, n, caused);
    if (k == 1)
        return any;
    return clause_and(w, clause_at_least(w, k, n, either), any);
}

static struct operation threshold(struct unwanted_building *u, const struct structure *s)
{
    struct wiring *w = u->wiring;
    struct operation *parts = NEW_ARRAY(arena_of(u), s->n, struct operation), out = {0};
    struct clause *passes = NEW_ARRAY(arena_of(u), s->n, struct clause);
    struct clause *conducts = NEW_ARRAY(arena_of(u), s->n, struct clause);
    out.opened = clause_of(false);
    for (size_t i = 0; i < s->n; i++) {
        const struct structure *part = s->of[i];
        parts[i] = part->op == STRUCTURE_NAME ? operation_of(u, part->name)
                   : part->op == STRUCTURE_ABSENT
                       ? (struct operation){clause_of(false), clause_of(false), clause_of(false),
                                            clause_of(false), false}
                       : threshold(u, part);
        passes[i] = parts[i].passes;
        conducts[i] = parts[i].conducts;
        out.opened = clause_or(w, out.opened, parts[i].opened);
        out.decides = out.decides || parts[i].decides;
    }
    for (size_t i = 0; s->k < s->n && out.decides && i < s->n; i++)
        if (!parts[i].decides) /* beside others that decide, it waits to be asserted itself */
            parts[i].passes = passes[i] = clause_of(false);
    out.passes = clause_at_least(w, s->k, s->n, passes);
    out.conducts = clause_at_least(w, s->k, s->n, conducts);
    out.caused =
        s->k == s->n ? caused_in_all(w, s->n, parts) : caused_in_some(w, s->k, s->n, parts);
    return out;
}

static struct operation structure_operation(struct unwanted_building *u, const struct structure *s)
{
    /* A name, or `absent`, as the whole: all of one. */
    struct structure one = {STRUCTURE_AT_LEAST, NULL, 1, 1, (struct structure *[]){NULL}};
    if (s->op == STRUCTURE_AT_LEAST)
        return threshold(u, s);
    struct structure copy = *s;
    one.of[0] = &copy;
    return threshold(u, &one);
}

static struct operation operation_of(struct unwanted_building *u, const char *id)
{
    const struct object *o = model_find(u->model, id);
    if (o->kind == KIND_ELEMENT) {
        size_t number = (size_t)(uintptr_t)strmap_get(&u->seen, id);
        return element_operation(u, &u->members.at[number - 1]);
    }
    struct operation *known = strmap_get(&u->operations, id);
    if (known)
        return *known;
    struct operation *made = NEW(arena_of(u), struct operation);
    *made = structure_operation(u, structure_of(o));
    strmap_set(arena_of(u), &u->operations, id, made);
    return *made;
}

/* The scheme trips, with `alone` or under the stress at hand. */
static struct clause trips(struct unwanted_building *u, const struct member *alone)
{
    u->alone = alone;
    u->operations = (struct strmap){0};
    struct operation o = operation_of(u, u->scheme->id);
    struct clause passes = o.decides ? o.passes : clause_of(false);
    return clause_or(u->wiring, clause_or(u->wiring, passes, o.caused), o.opened);
}

/* --- by itself --- */

/* What an element states, or its type. */
static node_id stated(const struct unwanted_building *u, const char *whose, enum property p,
                      const char *q1)
{
    const struct compiled *part = whose ? compiled_part(u->b, whose, PART_UNWANTED) : NULL;
    figure_id id = part ? compiled_figure(u->b->figures, part, p, q1, NULL) : FIGURE_NONE;
    return id == FIGURE_NONE ? NODE_NONE : figure_at(u->b->figures, id)->node;
}

/* Variables in the order of elements. */
static void order_members(struct unwanted_building *u)
{
    for (size_t i = 0; i < u->members.n; i++) {
        const struct member *m = &u->members.at[i];
        if (!m->decides)
            wiring_order(u->wiring, m->id);
        if (m->asserts != NODE_NONE) {
            struct event e = assertion(u, m);
            wiring_variable(u->wiring, &e);
        }
    }
}

static struct wiring *new_wiring(struct unwanted_building *u)
{
    u->wiring = NEW(arena_of(u), struct wiring);
    wiring_init(u->wiring, u->b->figures, u->b->variant, NULL);
    order_members(u);
    return u->wiring;
}

/* The probability of a clause: a root of the diagram, unless it is constant. */
struct chance {
    struct clause clause;
    size_t root;
};

static struct chance chance_of(struct clause_roots *r, struct clause c, const char *words)
{
    struct chance k = {c, SIZE_MAX};
    if (c.f != BFUN_TRUE && c.f != BFUN_FALSE)
        k.root = clause_root(r, c, words);
    return k;
}

static node_id chance_node(const struct clause_roots *r, const struct chance *k)
{
    if (k->root != SIZE_MAX)
        return clause_mean(r, k->root);
    return compile_const(r->b, k->clause.f == BFUN_TRUE, dim_number, NULL);
}

/* Rate times the probability that the rest lets it through. */
static node_id contribution(struct unwanted_building *u, const struct clause_roots *r,
                            const struct member *m, const struct chance *k)
{
    node_id n = m->by_itself;
    if (k->clause.f != BFUN_TRUE)
        n = graph_op2(u->b->figures->graph, OP_MULTIPLY, n, chance_node(r, k));
    compiled_add(u->b, PROPERTY_UNWANTED, "by-itself", m->id, n, NULL, NULL);
    return n;
}

/* A carrier that some stress may make assert itself, of which only the diagram knows how often it
 * has failed: it has common causes, or changes with time. */
static bool needs_failed_root(const struct unwanted_building *u, const struct member *m)
{
    struct events events = {0};
    if (m->decides || !m->states)
        return false;
    wiring_events(u->wiring, m->id, &events);
    return events.n > 1 || events.at[0].fails.timed;
}

static node_id sum_of(struct building *b, size_t n, const node_id *x)
{
    if (n == 0)
        return compile_const(b, 0, dim_frequency, NULL);
    return n == 1 ? x[0] : graph_op(b->figures->graph, OP_SUM, n, x);
}

static node_id test_trips(struct unwanted_building *u)
{
    node_id *all = NEW_ARRAY(arena_of(u), u->members.n + 1, node_id);
    size_t n = 0;
    for (size_t i = 0; i < u->members.n; i++) {
        node_id one = stated(u, u->members.at[i].id, PROPERTY_UNWANTED, "tests");
        if (one != NODE_NONE)
            all[n++] = one;
    }
    if (n == 0)
        return NODE_NONE;
    node_id sum = sum_of(u->b, n, all);
    compiled_add(u->b, PROPERTY_UNWANTED, "tests", NULL, sum, NULL, NULL);
    return sum;
}

/* By itself and in tests: the main figure. */
static void add_total(struct unwanted_building *u, const struct clause_roots *r,
                      const struct chance *chances)
{
    node_id *parts = NEW_ARRAY(arena_of(u), u->members.n + 1, node_id);
    size_t n = 0;
    for (size_t i = 0; i < u->members.n; i++)
        if (u->members.at[i].by_itself != NODE_NONE)
            parts[n++] = contribution(u, r, &u->members.at[i], &chances[i]);
    node_id tests = test_trips(u);
    if (tests != NODE_NONE)
        parts[n++] = tests;
    u->b->unit->main =
        compiled_add(u->b, PROPERTY_UNWANTED, NULL, NULL, sum_of(u->b, n, parts), NULL, NULL);
}

static bool compile_by_itself(struct unwanted_building *u, struct clause_roots *r)
{
    struct chance *chances = NEW_ARRAY(arena_of(u), u->members.n + 1, struct chance);
    *r = (struct clause_roots){.b = u->b, .wiring = new_wiring(u)};
    for (size_t i = 0; i < u->members.n; i++) {
        struct member *m = &u->members.at[i];
        const char *words =
            arena_printf(arena_of(u), "%s trips when %s asserts itself", u->scheme->id, m->id);
        m->by_itself = stated(u, m->states, PROPERTY_UNWANTED, NULL);
        if (m->by_itself != NODE_NONE)
            chances[i] = chance_of(r, trips(u, m), words);
        if (needs_failed_root(u, m))
            m->failed = clause_root(r, clause_not(u->wiring, clause_element(u->wiring, m->id)),
                                    arena_printf(arena_of(u), "%s has failed", m->id));
    }
    if (!clause_diagram(r))
        return false;
    add_total(u, r, chances);
    return true;
}

/* --- under stress --- */

/* Given that it has not failed, so that it asserts itself with the stated probability in all. */
static node_id given_sound(struct unwanted_building *u, const struct clause_roots *r,
                           const struct member *m, node_id stated_node)
{
    struct graph *g = u->b->figures->graph;
    struct events events = {0};
    node_id fails;
    if (m->decides)
        return stated_node;
    wiring_events(u->wiring, m->id, &events);
    if (m->failed != SIZE_MAX)
        fails = clause_mean(r, m->failed);
    else
        fails = figure_at(u->b->figures, events.at[0].fails.fails)->node;
    return graph_op2(g, OP_RATIO, stated_node, graph_op1(g, OP_COMPLEMENT, fails));
}

static void set_assertions(struct unwanted_building *u, const struct clause_roots *r,
                           const char *stress)
{
    for (size_t i = 0; i < u->members.n; i++) {
        struct member *m = &u->members.at[i];
        m->asserts = stated(u, m->states, PROPERTY_UNWANTED_PER_EVENT, stress);
        if (m->asserts == NODE_NONE)
            continue;
        m->asserts = given_sound(u, r, m, m->asserts);
        m->assertion = compiled_add(u->b, PROPERTY_ASSERTS, stress, m->id, m->asserts, NULL, NULL);
    }
}

static bool compile_stress(struct unwanted_building *u, const struct clause_roots *by_itself,
                           const char *stress)
{
    set_assertions(u, by_itself, stress);
    struct clause_roots r = {.b = u->b, .wiring = new_wiring(u)};
    const char *words =
        arena_printf(arena_of(u), "%s trips in an event of %s", u->scheme->id, stress);
    struct chance k = chance_of(&r, trips(u, NULL), words);
    if (!clause_diagram(&r))
        return false;
    compiled_add(u->b, PROPERTY_UNWANTED_PER_EVENT, stress, NULL, chance_node(&r, &k), NULL, NULL);
    return true;
}

/* The classes that some element of the scheme knows. */
static void classes_of(struct unwanted_building *u, struct strmap *out)
{
    for (size_t i = 0; i < u->members.n; i++) {
        const char *whose, *id = u->members.at[i].id;
        const struct unwanted *x = statements(u->model, model_find(u->model, id)->data, id, &whose);
        for (size_t k = 0; x && k < x->per_event.n; k++)
            strmap_set(arena_of(u), out, x->per_event.keys[k], NULL);
    }
}

/* --- the unit --- */

static ohmen_status too_intertwined(struct building *b, ohmen_error *e)
{
    compiled_give_up(b);
    return error_set(e, OHMEN_COMPUTE,
                     "the unwanted operation of the scheme \"%s\" is too intertwined: it needs "
                     "more than %u diagram nodes",
                     b->unit->id, DIAGRAM_NODES);
}

static ohmen_status compile_unit(struct unwanted_building *u, const struct variant *v,
                                 ohmen_error *e)
{
    struct figures *f = u->b->figures;
    struct clause_roots r;
    struct strmap classes = {0};
    compiled_begin_part(f, v, u->scheme, u->scheme->id, PART_UNWANTED, u->b);
    bool fine = compile_by_itself(u, &r);
    classes_of(u, &classes);
    for (size_t i = 0; fine && i < classes.n; i++)
        fine = compile_stress(u, &r, classes.at[i].key);
    if (!fine)
        return too_intertwined(u->b, e);
    compiled_end(u->b);
    return OHMEN_OK;
}

/* The elements' own statements first. */
static ohmen_status compile_scheme_unwanted(struct figures *f, const struct variant *v,
                                            const struct object *o, ohmen_error *e)
{
    struct building b = {.figures = f, .variant = v};
    struct unwanted_building u = {.b = &b, .model = v->model, .scheme = o};
    ohmen_status status = compile_references(f, v, o, e);
    if (status == OHMEN_OK)
        gather(&u, o->id);
    for (size_t i = 0; status == OHMEN_OK && i < u.members.n; i++) {
        const struct member *m = &u.members.at[i];
        status = compile_unwanted(f, v, model_find(v->model, m->id), e);
        if (status == OHMEN_OK && m->states)
            status = compile_unwanted(f, v, model_find(v->model, m->states), e);
    }
    return status == OHMEN_OK ? compile_unit(&u, v, e) : status;
}

ohmen_status compile_unwanted(struct figures *f, const struct variant *v, const struct object *o,
                              ohmen_error *e)
{
    const struct variant *projected;
    ohmen_status status = variant_project(f, v, o->id, &projected, e);
    struct building under = {.figures = f, .variant = projected};
    if (status != OHMEN_OK || compiled_part(&under, o->id, PART_UNWANTED))
        return status;
    o = model_find(projected->model, o->id);
    if (o->kind == KIND_SCHEME)
        return compile_scheme_unwanted(f, projected, o, e);
    compile_statements(f, projected, o);
    return OHMEN_OK;
}

/* --- unwanted(SCHEME; class frequency; ...) --- */

/* A class that no element of the scheme knows does nothing to it. */
static node_id per_event(struct building *b, const struct compiled *part, const char *stress)
{
    figure_id id = compiled_figure(b->figures, part, PROPERTY_UNWANTED_PER_EVENT, stress, NULL);
    return id == FIGURE_NONE ? compile_const(b, 0, dim_number, NULL)
                             : figure_at(b->figures, id)->node;
}

node_id compile_unwanted_expr(struct building *b, const struct expr *e)
{
    struct graph *g = b->figures->graph;
    const struct compiled *part = compiled_part(b, e->name, PART_UNWANTED);
    node_id *parts = NEW_ARRAY(b->figures->arena, e->n / 2 + 1, node_id);
    size_t n = 0;
    parts[n++] = figure_at(b->figures, part->main)->node;
    for (size_t i = 0; i + 1 < e->n; i += 2) {
        node_id frequency = compile_expr(b, e->args[i + 1]);
        parts[n++] = graph_op2(g, OP_MULTIPLY, frequency, per_event(b, part, e->args[i]->name));
    }
    return sum_of(b, n, parts);
}
