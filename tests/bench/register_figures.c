/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The figures of all hazards of a register (register_figures.h). Owns nothing. */
#include "register_figures.h"

#include "doc/json.h"
#include "store/store.h"

#include <stdio.h>
#include <stdlib.h>

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "the figures of the register: %s\n", why);
    exit(EXIT_FAILURE);
}

static void must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        fail(e->text);
}

static const struct model *read_model(struct arena *a, const char *path)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s;
    uint64_t head;
    struct store_objects objects = {0};
    struct diags d;
    must(store_open(a, path, STORE_READ, &s, &e), &e);
    must(store_head(s, &head, &e), &e);
    must(store_state(s, head, &objects, &e), &e);
    struct model_source *sources = NEW_ARRAY(a, objects.n, struct model_source);
    for (size_t i = 0; i < objects.n; i++) {
        const struct store_object *o = &objects.at[i];
        struct node *node;
        must(json_read(a, o->json, o->n, o->id, &node, &e), &e);
        sources[i] = (struct model_source){o->kind, o->id, node};
    }
    diags_init(&d, a);
    const struct model *m = model_load(a, sources, objects.n, &d);
    if (!m)
        fail("the register cannot be loaded");
    return m;
}

const struct compiled *bench_hazard(struct figures *f, size_t i)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct variant *base;
    const struct compiled *c;
    must(figures_variant(f, 0, NULL, &base, &e), &e);
    must(figures_compile(f, base, f->base->of[KIND_HAZARD].at[i]->id, &c, &e), &e);
    return c;
}

struct figures *bench_figures(struct arena *a, const char *path)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct figures *f;
    const struct model *m = read_model(a, path);
    must(figures_new(a, m, "all", date_of(2026, 12, 1), &f, &e), &e);
    for (size_t i = 0; i < m->of[KIND_HAZARD].n; i++)
        bench_hazard(f, i);
    must(figures_evaluate(f, &e), &e);
    return f;
}
