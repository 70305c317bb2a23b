/* SPDX-License-Identifier: GPL-3.0-or-later */
/* All field tables: those of the kinds and whatever they lead to. For what is generated
 * from the tables (schema, documentation) and for tests that loop over them. */
#ifndef MODEL_TABLES_ALL_H
#define MODEL_TABLES_ALL_H

#include "model/kinds.h"

struct tables ARRAY_BODY(const struct table *);

/* Appends every table once: each kind in its order, followed by the tables below it,
 * depth first in the order of fields. */
void tables_all(struct arena *a, struct tables *out);

/* The table that rows or a list of this field, or the field itself, lead to; NULL. */
const struct table *field_table(const struct field *f);

#endif
