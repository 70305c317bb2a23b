/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One entry under way, as the two halves of a commit share it. Private to
 * src/store/commit*.c. */
#ifndef STORE_COMMIT_H
#define STORE_COMMIT_H

#include "store/journal.h"
#include "store/projection.h"

struct change {
    const char *kind; /* name */
    const struct store_change *in;
    const char *body; /* hash; NULL: removed */
};

struct commit {
    struct store *s;
    const struct store_transaction *t;
    struct arena *a;
    ohmen_error *e;
    ARRAY(struct change) changes; /* sorted by bytes of kind and id; only real ones */
    ARRAY(struct journal_observation) observations; /* only new ones */
    struct journal_entry entry;
    bool settings; /* the register's own object is among the changes */
};

/* Writes the entry behind entry `head`, reads it back, and lets the derived tables
 * follow. The caller holds the write transaction. */
ohmen_status commit_write(struct commit *c, int64_t head);

#endif
