/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Conditions as functions and as text. Invariant: a clause whose function is constant has the text
 * "certain" or "absent" and nothing else. All of it lives with the figures. */
#include "figure/clause.h"

#include <string.h>

#include "figure/span.h"

static struct arena *arena_of(const struct wiring *w)
{
    return w->under.figures->arena;
}

struct clause clause_of(bool truth)
{
    return (struct clause){truth ? BFUN_TRUE : BFUN_FALSE, truth ? "certain" : "absent", false};
}

static bool is_constant(struct clause c)
{
    return c.f == BFUN_TRUE || c.f == BFUN_FALSE;
}

/* A function with its text, unless it turned out constant. */
static struct clause clause_with(bfun f, const char *text, bool joined)
{
    struct clause c = {f, text && strlen(text) <= CLAUSE_BYTES ? text : NULL, joined};
    return is_constant(c) ? clause_of(f == BFUN_TRUE) : c;
}

struct clause clause_happens(struct wiring *w, const struct event *e)
{
    return clause_with(diagram_variable(w->builder, wiring_variable(w, e)), e->name, false);
}

struct clause clause_spared(struct wiring *w, const struct event *e)
{
    bfun happens = diagram_variable(w->builder, wiring_variable(w, e));
    return clause_with(diagram_not(w->builder, happens), e->name, false);
}

static const char *bracketed(struct arena *a, struct clause c)
{
    return c.joined ? arena_printf(a, "(%s)", c.text) : c.text;
}

struct clause clause_not(struct wiring *w, struct clause c)
{
    bfun f = diagram_not(w->builder, c.f);
    const char *text = c.text ? bracketed(arena_of(w), c) : NULL;
    return clause_with(f, text ? arena_printf(arena_of(w), "not %s", text) : NULL, false);
}

/* --- thresholds --- */

static bool holds_already(size_t n, const struct clause *kept, struct clause c)
{
    for (size_t i = 0; i < n; i++)
        if (kept[i].f == c.f)
            return true;
    return false;
}

/* "A and B", "A or B", "at-least(2; A; B; C)"; NULL where a part has no text. */
static const char *joined_text(struct wiring *w, uint32_t k, size_t n, const struct clause *parts)
{
    bool word = k == 1 || k == n;
    struct text t;
    text_init(&t, arena_of(w));
    if (!word)
        text_printf(&t, "at-least(%u", k);
    for (size_t i = 0; i < n && t.n <= CLAUSE_BYTES; i++) {
        if (!parts[i].text)
            return NULL;
        text_add(&t, !word ? "; " : i == 0 ? "" : k == 1 ? " or " : " and ");
        text_add(&t, word ? bracketed(arena_of(w), parts[i]) : parts[i].text);
    }
    text_add(&t, word ? "" : ")");
    return text_str(&t);
}

/* Without parts that are constant, and without repetitions where they tell nothing. */
struct clause clause_at_least(struct wiring *w, uint32_t k, size_t n, const struct clause *parts)
{
    struct clause *kept = NEW_ARRAY(arena_of(w), n + 1, struct clause);
    bfun *functions = NEW_ARRAY(arena_of(w), n + 1, bfun);
    bool all = k == n, any = k == 1;
    size_t m = 0;
    for (size_t i = 0; i < n; i++) {
        if (parts[i].f == BFUN_TRUE)
            k -= k > 0;
        else if (parts[i].f != BFUN_FALSE && !((all || any) && holds_already(m, kept, parts[i])))
            kept[m++] = parts[i];
        else if (all)
            k -= parts[i].f != BFUN_FALSE;
    }
    if (k == 0 || k > m)
        return clause_of(k == 0);
    if (m == 1)
        return kept[0];
    for (size_t i = 0; i < m; i++)
        functions[i] = kept[i].f;
    return clause_with(diagram_at_least(w->builder, k, m, functions), joined_text(w, k, m, kept),
                       k == 1 || k == m);
}

struct clause clause_and(struct wiring *w, struct clause a, struct clause b)
{
    return clause_at_least(w, 2, 2, (struct clause[]){a, b});
}

struct clause clause_or(struct wiring *w, struct clause a, struct clause b)
{
    return clause_at_least(w, 1, 2, (struct clause[]){a, b});
}

struct clause clause_element(struct wiring *w, const char *element)
{
    struct events events = {0};
    struct clause c = clause_of(true);
    wiring_events(w, element, &events);
    for (size_t i = 0; i < events.n; i++)
        c = clause_and(w, c, clause_spared(w, &events.at[i]));
    return c;
}

/* --- diagrams --- */

size_t clause_root(struct clause_roots *r, struct clause c, const char *words)
{
    struct arena *a = arena_of(r->wiring);
    *array_push(a, &r->functions) = c.f;
    *array_push(a, &r->texts) = c.text ? c.text : arena_printf(a, "\"%s\"", words);
    return r->functions.n - 1;
}

bool clause_diagram(struct clause_roots *r)
{
    struct figures *f = r->b->figures;
    struct wiring *w = r->wiring;
    if (r->functions.n == 0)
        return true;
    const struct diagram *d = diagram_freeze(f->arena, w->builder, r->functions.n, r->functions.at);
    if (!d)
        return false;
    r->span = span_of(f, w->events.n, wiring_behaviours(f->arena, w));
    r->node =
        graph_diagram_over(f->graph, d, w->events.n, wiring_arguments(r->b, w), &r->span.windows);
    *array_push(f->arena, &r->b->unit->conditions) =
        (struct conditions){r->node, w->events.n, w->events.at, r->texts.at};
    return true;
}

node_id clause_mean(const struct clause_roots *r, size_t root)
{
    struct figures *f = r->b->figures;
    uint32_t n = (uint32_t)r->span.windows.n;
    node_id *values = NEW_ARRAY(f->arena, n + 1, node_id);
    if (n == 0)
        return graph_pick(f->graph, r->node, (uint32_t)root);
    for (uint32_t w = 0; w < n; w++)
        values[w] = graph_pick_in(f->graph, r->node, w, (uint32_t)root);
    return span_mean(r->b, &r->span, values);
}
