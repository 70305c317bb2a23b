/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Collects the field tables by following fields. Tables may lead to themselves (a
 * branch holds branches), so each is entered once. */
#include "model/tables_all.h"

const struct table *field_table(const struct field *f)
{
    while (f->type == FIELD_ROWS || f->type == FIELD_LIST)
        f = f->part;
    return f->type == FIELD_STRUCT ? f->table : NULL;
}

static void add_table(struct arena *a, struct tables *out, const struct table *t)
{
    for (size_t i = 0; i < out->n; i++)
        if (out->at[i] == t)
            return;
    *array_push(a, out) = t;
    for (size_t i = 0; i < t->n_fields; i++)
        if (field_table(&t->fields[i]))
            add_table(a, out, field_table(&t->fields[i]));
}

void tables_all(struct arena *a, struct tables *out)
{
    for (int k = 0; k < KIND_COUNT; k++)
        add_table(a, out, kinds[k].table);
}
