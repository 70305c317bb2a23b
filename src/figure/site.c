/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A site as a unit: customers and load that are supplied from it, where it states them. Owns
 * nothing. */
#include "figure/compile.h"

static figure_id add_customers(struct building *b, const struct site *s)
{
    char number[32];
    const char *text = arena_str(b->figures->arena, text_double(number, (double)s->customers));
    node_id n = compile_const(b, (double)s->customers, dim_number, text);
    return compiled_add(b, PROPERTY_CUSTOMERS, NULL, NULL, n, NULL, text);
}

static figure_id add_load(struct building *b, const struct site *s)
{
    return compiled_add(b, PROPERTY_LOAD, NULL, NULL, compile_quantity(b, s->load), NULL,
                        quantity_reads(b->figures, s->load));
}

ohmen_status compile_site(struct figures *f, const struct variant *v, const struct object *o,
                          struct compiled **out, ohmen_error *e)
{
    const struct site *s = o->data;
    struct building b;
    (void)e;
    compiled_begin(f, v, o, o->id, &b);
    if (s->load)
        b.unit->main = add_load(&b, s);
    if (s->customers >= 0)
        b.unit->main = add_customers(&b, s);
    compiled_end(&b);
    *out = b.unit;
    return OHMEN_OK;
}
