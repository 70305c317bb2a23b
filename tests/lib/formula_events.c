/* SPDX-License-Identifier: GPL-3.0-or-later */
/* probability(EVENTS): the Boolean expression is read into a small tree and summed over
 * every combination of its distinct events; where these change with time, at each instant that
 * the average asks for. */
#include <string.h>

#include "formula_parts.h"

enum kind_of_part { EVENT, NOT, AT_LEAST, NEVER, ALWAYS };

#define PARTS 20000

struct part {
    enum kind_of_part kind;
    int event;       /* EVENT */
    int k, first, n; /* AT_LEAST: k of the n parts in `below` from `first`; NOT: one */
};

struct events {
    struct reader *r;
    struct part parts[PARTS];
    int below[PARTS];
    int n_parts, n_below;
    char names[FORMULA_EVENTS][NAME_BYTES];
    int n_events;
};

static int either(struct events *e);

/* -1 when there are too many. */
static int add_part(struct events *e, struct part p)
{
    if (e->n_parts == PARTS)
        return formula_fail(e->r, "the expression is too long"), -1;
    e->parts[e->n_parts] = p;
    return e->n_parts++;
}

/* k of the parts in list[0 .. n). */
static int add_at_least(struct events *e, int k, int n, const int *list)
{
    int first = e->n_below;
    if (first + n > PARTS)
        return formula_fail(e->r, "the expression is too long"), -1;
    memcpy(e->below + first, list, (size_t)n * sizeof *list);
    e->n_below += n;
    return add_part(e, (struct part){.kind = AT_LEAST, .k = k, .first = first, .n = n});
}

static int event_number(struct events *e, const char *id)
{
    for (int i = 0; i < e->n_events; i++)
        if (strcmp(e->names[i], id) == 0)
            return i;
    if (e->n_events == FORMULA_EVENTS)
        return formula_fail(e->r, "more events than can be enumerated"), -1;
    strcpy(e->names[e->n_events], id);
    return e->n_events++;
}

static int at_least(struct events *e)
{
    int list[64], n = 0;
    long double k;
    if (!formula_expect(e->r, '(') || !formula_number(e->r, &k))
        return -1;
    while (formula_take(e->r, ';')) {
        if (n == 64)
            return formula_fail(e->r, "more than 64 parts"), -1;
        list[n] = either(e);
        if (list[n++] < 0)
            return -1;
    }
    return formula_expect(e->r, ')') ? add_at_least(e, (int)k, n, list) : -1;
}

static int primary(struct events *e)
{
    char id[NAME_BYTES];
    if (formula_take(e->r, '(')) {
        int inner = either(e);
        return inner >= 0 && formula_expect(e->r, ')') ? inner : -1;
    }
    formula_blanks(e->r);
    if (formula_take_word(e->r, "at-least"))
        return at_least(e);
    if (formula_take_word(e->r, "absent"))
        return add_part(e, (struct part){.kind = NEVER});
    if (formula_take_word(e->r, "certain"))
        return add_part(e, (struct part){.kind = ALWAYS});
    if (!formula_name(e->r, id))
        return formula_fail(e->r, "expected an event"), -1;
    int event = event_number(e, id);
    return event < 0 ? -1 : add_part(e, (struct part){.kind = EVENT, .event = event});
}

static int factor(struct events *e)
{
    formula_blanks(e->r);
    if (!formula_take_word(e->r, "not"))
        return primary(e);
    if (++e->r->depth > 500)
        return formula_fail(e->r, "nested too deep"), -1;
    int inner = factor(e);
    e->r->depth--;
    if (inner < 0)
        return -1;
    int first = e->n_below;
    if (first == PARTS)
        return formula_fail(e->r, "the expression is too long"), -1;
    e->below[e->n_below++] = inner;
    return add_part(e, (struct part){.kind = NOT, .first = first, .n = 1});
}

/* A chain of `word`: all of its parts, or any of them. */
static int chain(struct events *e, const char *word, int (*part)(struct events *))
{
    int list[256], n = 0;
    do {
        if (n == 256)
            return formula_fail(e->r, "more than 256 parts"), -1;
        list[n] = part(e);
        if (list[n++] < 0)
            return -1;
        formula_blanks(e->r);
    } while (formula_take_word(e->r, word));
    return n == 1 ? list[0] : add_at_least(e, strcmp(word, "and") == 0 ? n : 1, n, list);
}

static int both(struct events *e)
{
    return chain(e, "and", factor);
}

static int either(struct events *e)
{
    if (++e->r->depth > 500)
        return formula_fail(e->r, "nested too deep"), -1;
    int part = chain(e, "or", both);
    e->r->depth--;
    return part;
}

/* What is known of a part when the first `known` events are those of the bits of `set`. */
enum truth { NO, YES, OPEN };

static enum truth at_least_holds(const struct events *e, const struct part *p, int known,
                                 unsigned long set);

static enum truth holds(const struct events *e, int part, int known, unsigned long set)
{
    const struct part *p = &e->parts[part];
    switch (p->kind) {
    case EVENT: return p->event >= known ? OPEN : set >> p->event & 1 ? YES : NO;
    case NOT: {
        enum truth inner = holds(e, e->below[p->first], known, set);
        return inner == OPEN ? OPEN : inner == YES ? NO : YES;
    }
    case NEVER: return NO;
    case ALWAYS: return YES;
    case AT_LEAST: break;
    }
    return at_least_holds(e, p, known, set);
}

static enum truth at_least_holds(const struct events *e, const struct part *p, int known,
                                 unsigned long set)
{
    int met = 0, open = 0;
    for (int i = 0; i < p->n && met < p->k && met + open + p->n - i >= p->k; i++) {
        enum truth part = holds(e, e->below[p->first + i], known, set);
        met += part == YES;
        open += part == OPEN;
    }
    return met >= p->k ? YES : met + open >= p->k ? OPEN : NO;
}

/* --- probabilities of events --- */

/* What an event is called behind the id of its object: RELAY.fails.alone for RELAY.alone. */
static void figure_of(const char *event, const char *property, char out[NAME_BYTES + 12])
{
    size_t n = strcspn(event, ".");
    memcpy(out, event, n);
    out[n] = 0;
    strcat(out, property);
    strcat(out, event + n);
}

/* The figure that tells how probable an event is, and whether it tells when it is true. */
static bool told_by(const char *event, char out[NAME_BYTES + 12])
{
    static const char spared[] = "spared.";
    bool sees = strncmp(event, "sees.", 5) == 0;
    bool asserts = strncmp(event, "asserts.", 8) == 0, up = strncmp(event, "up.", 3) == 0;
    if (sees)
        strcpy(out, event);
    else if (asserts || up)
        strcat(strcpy(out, event), ".fails");
    else if (strncmp(event, spared, sizeof spared - 1) == 0)
        strcat(strcpy(out, "disabled."), event + sizeof spared - 1);
    else
        figure_of(event, ".fails", out);
    return sees;
}

/* The probabilities of the events at one time: [i][0] false, [i][1] true. An element works, a
 * common cause does not strike, a function sees, a hazard spares. */
typedef long double chances[FORMULA_EVENTS][2];

static bool chance_of(const struct events *e, int event, long double p[2])
{
    const struct formula_world *w = e->r->world;
    char figure[NAME_BYTES + 12];
    bool yes = told_by(e->names[event], figure);
    long double x;
    if (!w->find(w->ctx, figure, &x))
        return formula_fail(e->r, figure);
    p[yes] = x;
    p[!yes] = 1 - x;
    return true;
}

/* Sum over all combinations that hold, event by event: what the first `known` events are
 * is in `set`. Where these decide already, the others sum to 1. */
static long double sum(const struct events *e, int root, const long double (*p)[2], int known,
                       unsigned long set, long double weight)
{
    enum truth so_far = weight == 0 ? NO : holds(e, root, known, set);
    if (so_far != OPEN)
        return so_far == YES ? weight : 0;
    return sum(e, root, p, known + 1, set, weight * p[known][0]) +
           sum(e, root, p, known + 1, set | 1ul << known, weight * p[known][1]);
}

bool formula_probability(struct reader *r, long double *out)
{
    struct events e = {.r = r};
    chances p;
    int root = either(&e);
    if (root < 0)
        return false;
    for (int i = 0; i < e.n_events; i++)
        if (!chance_of(&e, i, p[i]))
            return false;
    *out = sum(&e, root, (const long double(*)[2])p, 0, 0, 1);
    return true;
}

/* --- over time --- */

struct events_over {
    struct events events;
    int root;
    chances p;
    int timed[FORMULA_EVENTS]; /* the event of each course */
};

static long double value_at(struct formula_timed *x, long double t)
{
    const struct events_over *o = x->of;
    chances p;
    memcpy(p, o->p, sizeof p);
    for (size_t i = 0; i < x->n; i++) {
        p[o->timed[i]][0] = formula_course_at(&x->course[i], t);
        p[o->timed[i]][1] = 1 - p[o->timed[i]][0];
    }
    return sum(&o->events, o->root, (const long double(*)[2])p, 0, 0, 1);
}

/* Each event by its course, else by its probability. */
static bool find_chances(struct events_over *o, struct formula_timed *x)
{
    for (int i = 0; i < o->events.n_events; i++) {
        char course[NAME_BYTES + 12];
        figure_of(o->events.names[i], ".course", course);
        if (formula_find_course(o->events.r, course, &x->course[x->n]))
            o->timed[x->n++] = i;
        else if (!chance_of(&o->events, i, o->p[i]))
            return false;
    }
    return true;
}

bool formula_probability_over(struct reader *r, long double from, long double to, long double *out)
{
    struct events_over o = {.events = {.r = r}};
    struct formula_timed x = {.value = value_at, .of = &o};
    o.root = either(&o.events);
    if (o.root < 0 || !formula_expect(r, ')') || !find_chances(&o, &x))
        return false;
    *out = formula_average(&x, from, to);
    return true;
}
