/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A register of responses, from its file to its risks, beside the least that this needs.
 *
 *     protection HAZARDS FOLDER
 *
 * A register of that many hazards is imported into FOLDER, which is empty. Then, RUNS times in
 * turn:
 *
 *     total      what `ohmen hazards` does, from opening the file to the report
 *     read       opening the file, reading, hashing and parsing every body, loading the model
 *     diagrams   the diagrams of all hazards, from structures in memory, by the builder alone
 *     averages   averages over time of these diagrams alone, with all that they need at hand
 *     option     one hazard changed by an option, behind a whole calculation: the variant, the
 *                hazards under it, the new values; the first option of a calculation also has to
 *                learn what uses what, so another one is timed behind it
 *
 * The diagrams must be those of the product, and an option must cost two sections: the hazard
 * and its frequency. Owns the arenas. */
#include <ohmen/ohmen.h>
#include <stdio.h>
#include <stdlib.h>

#include "doc/json.h"
#include "figure/figure.h"
#include "graph/average.h"
#include "median.h"
#include "protection_register.h"
#include "store/store.h"

enum { OPTIONS = 2 * RUNS };

/* What the product made of the register, kept while the parts are timed. */
struct whole {
    struct arena *arena;
    const struct model *model;
    struct figures *figures;
    const struct variant *base;
    struct averaged *averaged; /* by hazard */
};

struct bench {
    struct arena *arena;
    const char *path;
    struct protection p;
    struct whole whole;
    double *results;
    double total[RUNS], read[RUNS], diagrams[RUNS], averages[RUNS], first[RUNS], second[RUNS];
    double compile[RUNS], evaluate[RUNS];
    size_t sections;
};

static _Noreturn void fail(const char *why)
{
    fprintf(stderr, "protection: %s\n", why);
    exit(EXIT_FAILURE);
}

static void must(ohmen_status status, const ohmen_error *e)
{
    if (status != OHMEN_OK)
        fail(e->text);
}

/* ---- the register ---- */

static void write_file(const char *path, const struct text *t)
{
    FILE *f = fopen(path, "w");
    if (!f || fwrite(t->at, 1, t->n, f) != t->n || fclose(f) != 0)
        fail("the document cannot be written");
}

static void make_register(struct bench *b, const char *folder)
{
    struct arena *a = arena_child(b->arena);
    const char *document = arena_printf(a, "%s/responses.yaml", folder);
    ohmen_import_settings s = {&document, 1, "bench", "bench", false};
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *r = NULL;
    ohmen_report *report = NULL;
    struct text t;
    text_init(&t, a);
    protection_write(&t, &b->p);
    write_file(document, &t);
    must(ohmen_create(b->path, &e), &e);
    must(ohmen_open(b->path, OHMEN_WRITE, &r, &e), &e);
    ohmen_status status = ohmen_import(r, &s, &report, &e);
    if (report && ohmen_report_diagnostic(report, 0))
        fail(ohmen_report_diagnostic(report, 0));
    must(status, &e);
    ohmen_report_free(report);
    ohmen_close(r);
    printf("%zu hazards, a document of %zu kB\n", b->p.n, t.n / 1000);
    arena_free(a);
}

/* ---- the parts ---- */

static double total(struct bench *b)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_register *r = NULL;
    ohmen_report *report = NULL;
    ohmen_query q = ohmen_query_defaults();
    q.date = "2026-12-01";
    double begin = bench_now();
    must(ohmen_open(b->path, OHMEN_READ, &r, &e), &e);
    must(ohmen_hazards(r, &q, &report, &e), &e);
    ohmen_close(r);
    ohmen_report_free(report);
    return bench_now() - begin;
}

static const struct model *read_model(struct bench *b, struct arena *a)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s;
    uint64_t head;
    struct store_objects objects = {0};
    struct diags d;
    must(store_open(a, b->path, STORE_READ, &s, &e), &e);
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

static double bare_read(struct bench *b)
{
    double begin = bench_now();
    struct arena *a = arena_child(b->arena);
    read_model(b, a);
    arena_free(a);
    return bench_now() - begin;
}

static double build_diagrams(struct bench *b)
{
    double begin = bench_now();
    struct arena *a = arena_child(b->arena);
    for (size_t i = 0; i < b->p.n; i++)
        chains_diagram(a, &b->p.chains[i]);
    arena_free(a);
    return bench_now() - begin;
}

static double average_diagrams(struct bench *b)
{
    double begin = bench_now();
    for (size_t i = 0; i < b->p.n; i++)
        average_values(b->arena, &b->whole.averaged[i], b->results);
    return bench_now() - begin;
}

/* ---- what the product makes ---- */

static void compile_all(const struct whole *w, const struct variant *v)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct compiled *c;
    for (size_t i = 0; i < w->model->of[KIND_HAZARD].n; i++)
        must(figures_compile(w->figures, v, w->model->of[KIND_HAZARD].at[i]->id, &c, &e), &e);
}

static void make_whole(struct bench *b, int run)
{
    struct whole *w = &b->whole;
    ohmen_error e = OHMEN_ERROR_INIT;
    *w = (struct whole){.arena = arena_child(b->arena)};
    w->model = read_model(b, w->arena);
    double begin = bench_now();
    must(figures_new(w->arena, w->model, "all", date_of(2026, 12, 1), &w->figures, &e), &e);
    must(figures_variant(w->figures, 0, NULL, &w->base, &e), &e);
    compile_all(w, w->base);
    double compiled = bench_now();
    must(figures_evaluate(w->figures, &e), &e);
    b->compile[run] = compiled - begin;
    b->evaluate[run] = bench_now() - compiled;
}

typedef double course_arguments[COURSE_ARGS];

/* What a hazard's diagram averages, from the values of its arguments. */
static struct averaged averaged_of(const struct whole *w, const struct hazard_exports *x)
{
    const struct graph *g = w->figures->graph;
    size_t n = graph_at(g, x->node)->n;
    const node_id *args = graph_args(g, x->node);
    double *p = NEW_ARRAY(w->arena, n, double), *q = NEW_ARRAY(w->arena, n, double);
    const struct course **course = NEW_ARRAY(w->arena, n, const struct course *);
    course_arguments *values = NEW_ARRAY(w->arena, n, course_arguments);
    for (size_t i = 0; i < n; i++) {
        if (graph_at(g, args[i])->op != OP_COURSE)
            fail("an element does not change with time");
        p[i] = eval_value(w->figures->eval, args[i]);
        q[i] = 1 - p[i];
        course[i] = graph_course_of(g, args[i]);
        for (int k = 0; k < COURSE_ARGS; k++)
            values[i][k] = eval_value(w->figures->eval, graph_args(g, args[i])[k]);
    }
    return (struct averaged){.diagram = x->diagram,
                             .n = n,
                             .p = p,
                             .q = q,
                             .course = course,
                             .x = (const course_arguments *)values,
                             .windows = graph_windows_of(g, x->node),
                             .isa = isa_best()};
}

static void gather(struct bench *b, bool check)
{
    struct whole *w = &b->whole;
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct compiled *c;
    w->averaged = NEW_ARRAY(w->arena, b->p.n, struct averaged);
    for (size_t i = 0; i < b->p.n; i++) {
        const char *id = w->model->of[KIND_HAZARD].at[i]->id;
        must(figures_compile(w->figures, w->base, id, &c, &e), &e);
        const struct hazard_exports *x = c->exports;
        w->averaged[i] = averaged_of(w, x);
        if (check && !diagram_equal(x->diagram, chains_diagram(w->arena, &b->p.chains[i])))
            fail("the product's diagram is another one");
    }
}

static double change_one(struct bench *b, int number)
{
    struct whole *w = &b->whole;
    ohmen_error e = OHMEN_ERROR_INIT;
    const struct variant *v;
    const char *option = arena_printf(w->arena, "OPT-%02d", number);
    size_t before = graph_sections(w->figures->graph);
    double begin = bench_now();
    must(figures_variant(w->figures, 1, &option, &v, &e), &e);
    compile_all(w, v);
    must(figures_evaluate(w->figures, &e), &e);
    double time = bench_now() - begin;
    b->sections = graph_sections(w->figures->graph) - before;
    if (b->sections != 2)
        fail("the option does not cost two sections");
    return time;
}

/* ---- all ---- */

static void run(struct bench *b, int i)
{
    b->total[i] = total(b);
    b->read[i] = bare_read(b);
    b->diagrams[i] = build_diagrams(b);
    make_whole(b, i);
    gather(b, i == 0);
    b->averages[i] = average_diagrams(b);
    b->first[i] = change_one(b, 2 * i);
    b->second[i] = change_one(b, 2 * i + 1);
    arena_free(b->whole.arena);
}

static void tell(struct bench *b)
{
    double whole = bench_median(b->total), parts = 0;
    const struct {
        const char *name;
        double *times;
    } summed[] = {{"bare read", b->read}, {"diagrams", b->diagrams}, {"averages", b->averages}};
    printf("  %-9s %8.1f ms\n", "total", whole);
    for (size_t k = 0; k < sizeof summed / sizeof *summed; k++) {
        double ms = bench_median(summed[k].times);
        printf("  %-9s %8.1f ms\n", summed[k].name, ms);
        parts += ms;
    }
    printf("  %-9s %8.2f (total / sum of the three)\n", "ratio", whole / parts);
    printf("  of the total, compiling %.1f ms, evaluating %.1f ms\n", bench_median(b->compile),
           bench_median(b->evaluate));
    printf("  one hazard changed by an option: %zu sections, %.1f ms; by a second one %.1f ms\n",
           b->sections, bench_median(b->first), bench_median(b->second));
}

int main(int argc, char **argv)
{
    struct bench b = {.arena = arena_new(NULL)};
    size_t n = argc == 3 ? strtoul(argv[1], NULL, 10) : 0;
    if (n < OPTIONS || !b.arena)
        fail("usage: protection HAZARDS FOLDER (22 hazards or more)");
    b.path = arena_printf(b.arena, "%s/responses.ohmen", argv[2]);
    b.p = protection_draw(b.arena, n, OPTIONS);
    b.results = NEW_ARRAY(b.arena, MOST_SCHEMES + 1, double);
    make_register(&b, argv[2]);
    for (int i = 0; i < RUNS; i++)
        run(&b, i);
    tell(&b);
    arena_free(b.arena);
    return EXIT_SUCCESS;
}
