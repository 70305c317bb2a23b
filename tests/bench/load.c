/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A large register from its document to its risks, step by step, in memory.
 *
 *     load HAZARDS
 *
 * The document is a random one (tests/lib/registers.h) of that many hazards. Each step
 * runs RUNS times on what the step before gave; the medians are told. Binding is timed
 * alone and as part of loading; checking is the difference. Owns the arenas. */
#include <stdio.h>
#include <stdlib.h>

#include "doc/yaml.h"
#include "figure/figure.h"
#include "median.h"
#include "model/bind.h"
#include "model/documents.h"
#include "registers.h"

enum { READ, MERGE, BIND, LOAD, COMPILE, EVALUATE, STEPS };

struct bench {
    struct arena *a; /* of one run */
    struct text yaml;
    struct diags diags;
    double times[STEPS][RUNS];
    size_t figures;
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "load: %s\n", why);
    exit(EXIT_FAILURE);
}

static void bind_all(struct bench *b, const struct model *m, const struct model_sources *all)
{
    struct units standard = {.currency = m->units.currency};
    for (size_t i = 0; i < all->n; i++) {
        const struct model_source *s = &all->at[i];
        struct binding binding = {.arena = b->a,
                                  .units = s->kind == KIND_REGISTER ? &standard : &m->units,
                                  .diags = &b->diags};
        struct node *canonical;
        void *data;
        if (!bind_object(&binding, kinds[s->kind].table, s->node, &canonical, &data))
            fail("an object cannot be bound");
    }
}

static void compile_all(struct bench *b, const struct model *m, struct figures *f)
{
    const struct variant *v;
    const struct compiled *c;
    ohmen_error e = OHMEN_ERROR_INIT;
    if (figures_variant(f, 0, NULL, &v, &e) != OHMEN_OK)
        fail(e.text);
    for (size_t i = 0; i < m->of[KIND_HAZARD].n; i++)
        if (figures_compile(f, v, m->of[KIND_HAZARD].at[i]->id, &c, &e) != OHMEN_OK)
            fail(e.text);
    b->figures = f->list.n;
}

static void run(struct bench *b, int i)
{
    struct model_sources stored = {0}, all = {0};
    struct figures *f;
    ohmen_error e = OHMEN_ERROR_INIT;
    double t[STEPS + 1];
    diags_init(&b->diags, b->a);
    t[READ] = bench_now();
    const struct node *root = yaml_read(b->a, "document", b->yaml.at, b->yaml.n, &b->diags);
    t[MERGE] = bench_now();
    if (!root || !documents_merge(b->a, &stored, 1, &root, &all, &b->diags))
        fail("the document cannot be read");
    t[BIND] = bench_now();
    const struct node *settings = node_get(root, "register");
    struct model units = {.units = model_units(b->a, settings)};
    bind_all(b, &units, &all);
    t[LOAD] = bench_now();
    const struct model *m = model_load(b->a, all.at, all.n, &b->diags);
    t[COMPILE] = bench_now();
    if (!m || figures_new(b->a, m, "all", date_of(2026, 12, 1), &f, &e) != OHMEN_OK)
        fail("the register cannot be loaded");
    compile_all(b, m, f);
    t[EVALUATE] = bench_now();
    if (figures_evaluate(f, &e) != OHMEN_OK)
        fail(e.text);
    t[STEPS] = bench_now();
    for (int k = 0; k < STEPS; k++)
        b->times[k][i] = t[k + 1] - t[k];
}

static void tell(struct bench *b, unsigned hazards)
{
    static const char *const names[STEPS] = {"read",  "merge",   "bind",
                                             "check", "compile", "evaluate"};
    double ms[STEPS], sum = 0;
    for (int k = 0; k < STEPS; k++)
        ms[k] = bench_median(b->times[k]);
    ms[LOAD] -= ms[BIND]; /* loading binds too */
    for (int k = 0; k < STEPS; k++)
        sum += ms[k];
    printf("%u hazards, a document of %zu kB, %zu figures\n", hazards, b->yaml.n / 1000,
           b->figures);
    for (int k = 0; k < STEPS; k++)
        printf("  %-9s %8.1f ms\n", names[k], ms[k]);
    printf("  %-9s %8.1f ms\n", "together", sum);
}

int main(int argc, char **argv)
{
    struct bench b = {0};
    struct register_shape shape = register_small;
    struct arena *document = arena_new(NULL);
    unsigned n = argc == 2 ? (unsigned)strtoul(argv[1], NULL, 10) : 0;
    if (n == 0 || !document)
        fail("usage: load HAZARDS");
    shape.hazards = n;
    shape.schemes = shape.elements = n / 2 + 1;
    shape.values = n / 10 + 1;
    shape.options = 10;
    shape.stored = false;
    text_init(&b.yaml, document);
    yaml_write(&b.yaml, random_register(document, 7, &shape));
    for (int i = 0; i < RUNS; i++) {
        b.a = arena_new(NULL);
        if (!b.a)
            fail("out of memory");
        run(&b, i);
        arena_free(b.a);
    }
    tell(&b, n);
    arena_free(document);
    return EXIT_SUCCESS;
}
