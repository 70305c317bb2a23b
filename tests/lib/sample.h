/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Small registers for tests of the store: bodies of real kinds in their canonical form,
 * transactions made of them, and a folder of their own. All invented. */
#ifndef TESTS_SAMPLE_H
#define TESTS_SAMPLE_H

#include <stdbool.h>

#include "store/store.h"

/* A new empty folder, removed with all that is in it when `a` is freed. */
const char *sample_folder(struct arena *a);

/* The canonical body of an object; another number makes another body of the same kind.
 * The kinds refer to each other: element E-n stands at site S-1, scheme C-1 needs E-1 and
 * E-2, hazard H-1 is cleared by C-1 and occurs as often as value V-1 says. */
const char *sample_body(struct arena *a, enum kind kind, unsigned number);

/* A transaction that grows; texts and bodies live in the arena. */
struct sample {
    struct arena *arena;
    ARRAY(struct store_change) changes;
    ARRAY(struct store_observation) observations;
    struct store_transaction t;
};
void sample_begin(struct sample *s, struct arena *a, uint64_t prepared_on);
void sample_change(struct sample *s, enum kind kind, const char *id, unsigned number);
void sample_remove(struct sample *s, enum kind kind, const char *id);
void sample_observe(struct sample *s, const char *ident, day date, const char *subject);
/* The transaction as it stands now. */
const struct store_transaction *sample_transaction(struct sample *s);

/* The whole small register: settings, sites, value, elements, scheme, hazard, option,
 * decision, state and two observations. */
void sample_fill(struct sample *s);

/* All that a register tells as of `at`, as one text: objects with their entries and
 * observations. Two registers that tell the same give the same text. */
ohmen_status sample_dump(struct arena *a, struct store *s, uint64_t at, const char **out,
                         ohmen_error *e);

#endif
