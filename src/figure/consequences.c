/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a hazard does, as a part of its own: damage by perspective and category, interruptions of
 * supply, harm to people; in one operating state, or as the mean over them. Owns nothing. */
#include "figure/counting.h"

/* --- the hazard as it is in one operating state, or where there are none --- */

static void begin(struct counting *c, struct figures *f, const struct compiled *hazard)
{
    *c = (struct counting){.f = f, .hazard = hazard, .data = hazard->object->data};
    c->of = hazard->exports;
    compiled_begin_part(f, hazard->variant, hazard->object, hazard->id, PART_CONSEQUENCES, &c->b);
    c->one_year = compile_const(&c->b, 1, dim_time, "1 a");
}

static void finish(struct counting *c, struct consequence_exports *x)
{
    x->n = c->effects.n;
    x->effects = c->effects.at;
    c->b.unit->exports = x;
    c->b.unit->main = x->interruptions;
    compiled_end(&c->b);
}

static void compile_plain(struct figures *f, const struct compiled *hazard)
{
    struct consequence_exports *x = NEW(f->arena, struct consequence_exports);
    struct counting c;
    begin(&c, f, hazard);
    counting_slots(&c);
    count_categories(&c);
    count_perspectives(&c);
    count_interruptions(&c, x);
    count_harm(&c, x);
    finish(&c, x);
}

static void compile_mean(struct figures *f, const struct compiled *hazard)
{
    struct consequence_exports *x = NEW(f->arena, struct consequence_exports);
    struct counting c;
    begin(&c, f, hazard);
    count_means(&c, x);
    finish(&c, x);
}

/* --- for others --- */

static ohmen_status compile_states_first(struct figures *f, const struct hazard_exports *x,
                                         ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < x->n_states; i++) {
        const struct compiled *u = x->states[i].unit, *unused;
        if (u)
            status = figures_consequences(f, u->variant, u->id, &unused, e);
    }
    return status;
}

ohmen_status figures_consequences(struct figures *f, const struct variant *v, const char *hazard,
                                  const struct compiled **out, ohmen_error *e)
{
    const struct compiled *u;
    ohmen_status status = figures_compile(f, v, hazard, &u, e);
    if (status != OHMEN_OK)
        return status;
    const struct hazard_exports *x = u->exports;
    struct building under = {.figures = f, .variant = u->variant};
    *out = compiled_part(&under, hazard, PART_CONSEQUENCES);
    if (*out)
        return OHMEN_OK;
    status = compile_states_first(f, x, e);
    if (status != OHMEN_OK)
        return status;
    if (x->n_states)
        compile_mean(f, u);
    else
        compile_plain(f, u);
    *out = compiled_part(&under, hazard, PART_CONSEQUENCES);
    return OHMEN_OK;
}

ohmen_status compile_consequences(struct figures *f, const struct variant *v,
                                  const struct object *o, ohmen_error *e)
{
    const struct compiled *unused;
    return figures_consequences(f, v, o->id, &unused, e);
}

const struct consequence *consequence_of(const struct compiled *part, enum property p,
                                         const char *of)
{
    const struct consequence_exports *x = part->exports;
    return effect_find(x->n, x->effects, p, of);
}
