/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Where one stands on the way through a tree that is being grown. Private to src/decide.
 *
 * Paths and beliefs are shared by places: whoever changes one makes a copy before. */
#ifndef DECIDE_BRANCHING_STANDING_H
#define DECIDE_BRANCHING_STANDING_H

#include "decide/branching_parts.h"

/* Times closer than this are one: some seconds, in years. */
#define SAME_TIME 1e-7

struct standing {
    double time; /* years from the start */
    struct path done;
    const double *belief; /* by hidden state */
    const char *path;
};

size_t standing_hidden(const struct growing *g);
/* "a/b"; b alone where a is empty. */
const char *standing_join(struct growing *g, const char *path, const char *label);
/* OHMEN_COMPUTE: the decision and the path, and why. */
ohmen_status standing_fail(struct growing *g, const char *path, ohmen_error *e, const char *why);

bool standing_has_name(const struct names *all, const char *name);
/* The option as it was applied; NULL: it was not. */
struct applied *standing_applied(const struct path *p, const char *option);
void standing_apply(struct growing *g, struct path *p, const char *option, double later);
void standing_change(struct growing *g, struct path *p, const char *name, const struct node *change,
                     double from);
bool standing_sets_states(const struct growing *g, const char *option);
bool standing_leaves_trace(struct growing *g, const struct standing *s, const struct applied *x);

/* What tells a place in the document from others: time, what is in service, beliefs. */
void standing_write_belief(const struct growing *g, struct text *t, const double *belief);
const char *standing_key(struct growing *g, const void *place, const struct standing *s);

struct move *standing_move(struct growing *g, struct way *b, enum move_kind kind, double at);
/* What the option sets is believed from now on. */
void standing_reset(struct growing *g, struct way *b, struct standing *s, const char *option);
/* Lets time pass until then, or to the end of the horizon. */
ohmen_status standing_pass(struct growing *g, struct way *b, struct standing *s, double to,
                           ohmen_error *e);

#endif
