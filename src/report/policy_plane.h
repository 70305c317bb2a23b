/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the writers of a policy share: its signs, the columns that can be joined, its key.
 *
 * Times that follow each other are joined only when every condition shows the same sign at all of
 * them. */
#ifndef REPORT_POLICY_PLANE_H
#define REPORT_POLICY_PLANE_H

#include "report/page.h"

#define POLICY_UNREACHED_WORDS "not reached when this is followed"
#define POLICY_EMPTY_WORDS "the condition cannot hold then"
#define POLICY_SILENT_SIGN "-"
#define POLICY_SILENT_WORDS "reached, but no action is told"
#define POLICY_REACH_WORDS "Numbers beside the signs: the probability of being there."

/* The times from, from + 1, ... until - 1, which are one column. */
struct policy_span {
    size_t from, until;
};
struct policy_spans ARRAY_BODY(struct policy_span);

struct policy_plane {
    const struct page *page;
    const struct policy *policy;
    const char **signs; /* one an action */
};

/* The policy is whole. */
void policy_open(struct policy_plane *g, const struct page *p, const struct policy *o);
struct policy_cell policy_cell_at(const struct policy *o, size_t condition, size_t time);
/* The sign of a cell: of its action, "" for none. */
const char *policy_sign(const struct policy_plane *g, const struct policy_cell *c);
/* A column for each time, or for each run of equal ones. */
struct policy_spans policy_columns(const struct policy_plane *g, bool joined);
/* "2027" or "2027-2031", clean. */
const char *policy_time(const struct policy_plane *g, const struct policy_span *s);

/* The key: the actions with their cells; whether there are cells that are not reached, and the
 * remarks on the signs. The block is in the scratch arena. */
const struct block *policy_key(const struct policy_plane *g);
bool policy_has_unreached(const struct policy *o);
struct lines policy_remarks(const struct policy_plane *g);
/* The cells as a table: a row for each run of times at which a condition has the same sign. */
const struct block *policy_runs(const struct policy_plane *g);
/* Every cell as a row, for CSV. */
const struct block *policy_data(struct arena *a, const struct policy *o);

#endif
