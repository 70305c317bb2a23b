/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Conditions on events as Boolean functions and as the text of a formula at once, so that what is
 * computed and what is explained cannot part ways. Parts that are certain or impossible vanish
 * from both. */
#ifndef FIGURE_CLAUSE_H
#define FIGURE_CLAUSE_H

#include "figure/compile.h"

/* Longer conditions are told in words (clause_text). */
#define CLAUSE_BYTES 2000

struct clause {
    bfun f;
    const char *text; /* NULL: longer than CLAUSE_BYTES */
    bool joined;      /* it needs parentheses inside another one */
};

struct clause clause_of(bool truth);
/* The event happens: "asserts.VH-CT1". */
struct clause clause_happens(struct wiring *w, const struct event *e);
/* The event, a failure, does not happen: "VH-CT1". */
struct clause clause_spared(struct wiring *w, const struct event *e);
struct clause clause_not(struct wiring *w, struct clause c);
struct clause clause_at_least(struct wiring *w, uint32_t k, size_t n, const struct clause *parts);
struct clause clause_and(struct wiring *w, struct clause a, struct clause b);
struct clause clause_or(struct wiring *w, struct clause a, struct clause b);
/* None of the events of an element happens. */
struct clause clause_element(struct wiring *w, const char *element);

/* The roots of one diagram of a part unit. */
struct clause_roots {
    struct building *b;
    struct wiring *wiring;
    ARRAY(bfun) functions;
    ARRAY(const char *) texts;
    node_id node;
    struct span span;
};
/* The number of the root; `words` stand in quotation marks where the condition is too long. */
size_t clause_root(struct clause_roots *r, struct clause c, const char *words);
/* Makes the DIAGRAM of all roots, over the windows of its events, and tells the unit's formulas
 * of it. False when it needs too many nodes. Without roots nothing is made. */
bool clause_diagram(struct clause_roots *r);
/* The probability of a root: its mean over the span. */
node_id clause_mean(const struct clause_roots *r, size_t root);

#endif
