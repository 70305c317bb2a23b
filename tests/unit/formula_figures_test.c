/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Every formula that a figure prints, evaluated by the evaluator of tests/lib from the
 * figures that it names, gives that figure, all at the means of what is unknown (the figure itself
 * is the mean, which a formula cannot show): over the sample and random registers, the base
 * and the variant of each option. */
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "doc/yaml.h"
#include "decide/weigh.h"
#include "formula.h"
#include "model/documents.h"
#include "registers.h"
#include "timed_world.h"

static const char *root_folder;

struct counted {
    size_t formulas, leaves, probabilities, averages;
};

/* What graph.h promises of averages over time. */
#define AVERAGED 1e-11L

static const struct model *load(struct arena *a, size_t n, const struct node *const *roots)
{
    struct diags d;
    struct model_sources nothing = {0}, sources = {0};
    diags_init(&d, a);
    const struct model *m = NULL;
    if (documents_merge(a, &nothing, n, roots, &sources, &d))
        m = model_load(a, sources.at, sources.n, &d);
    ck_assert_msg(m, "%s", d.count ? diag_line(a, &d.list.at[0]) : "not loaded");
    return m;
}

/* --- compiling everything --- */

static void compile_under(struct figures *f, const struct variant *v, const struct model *m)
{
    static const enum kind computed[] = {KIND_VALUE,   KIND_RATE,   KIND_TYPE,  KIND_COMMON_CAUSE,
                                         KIND_ELEMENT, KIND_SCHEME, KIND_HAZARD};
    for (size_t k = 0; k < sizeof computed / sizeof *computed; k++)
        for (size_t i = 0; i < m->of[computed[k]].n; i++) {
            const struct compiled *u;
            ohmen_error e = OHMEN_ERROR_INIT;
            const char *id = m->of[computed[k]].at[i]->id;
            if (!model_find(v->model, id))
                continue;
            ohmen_status status = figures_compile(f, v, id, &u, &e);
            ck_assert_msg(status == OHMEN_OK, "%s: %s", id, e.text);
        }
}

static void compile_all(struct figures *f, const struct model *m)
{
    const struct variant *v;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(figures_variant(f, 0, NULL, &v, &e), OHMEN_OK);
    compile_under(f, v, m);
    for (size_t i = 0; i < m->of[KIND_OPTION].n; i++) {
        const char *option = m->of[KIND_OPTION].at[i]->id;
        ck_assert_int_eq(figures_variant(f, 1, &option, &v, &e), OHMEN_OK);
        compile_under(f, v, m);
    }
    for (size_t i = 0; i < m->of[KIND_DECISION].n; i++) {
        struct weighing *w;
        ohmen_status status = weigh_compile(f, m->of[KIND_DECISION].at[i]->id, &w, &e);
        ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    }
    ohmen_status status = figures_evaluate(f, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
}

/* --- one formula --- */

/* What a formula may ask for: the figures that it lists, and nothing else. */
struct asked {
    struct figures *figures;
    struct arena *arena;
    struct figure_ids ids;
    struct formula_inputs inputs;
    struct formula_world world;
};

static bool find_figure(void *ctx, const char *name, long double *out)
{
    struct asked *x = ctx;
    return formula_find_input(&x->inputs, name, out);
}

static struct asked *ask_of(struct figures *f, struct arena *a, figure_id id);

/* A course by its own formula, from the figures that this one lists. */
static bool find_course(void *ctx, const char *name, struct formula_course *out)
{
    struct asked *x = ctx;
    char error[FORMULA_ERROR];
    size_t n = strlen(name);
    for (size_t i = 0; i < x->ids.n; i++) {
        const char *known = x->inputs.names[i];
        if (strncmp(known, name, n) != 0 || (known[n] != 0 && known[n] != '@'))
            continue;
        const char *formula = figure_formula(x->figures, x->arena, x->ids.at[i]);
        struct asked *own = ask_of(x->figures, x->arena, x->ids.at[i]);
        bool fine = formula_course(formula, &own->world, out, error);
        ck_assert_msg(fine, "%s = %s: %s", name, formula, error);
        return true;
    }
    return false;
}

static struct asked *ask_of(struct figures *f, struct arena *a, figure_id id)
{
    const struct units *u = &f->base->units;
    struct asked *x = NEW(a, struct asked);
    *x = (struct asked){.figures = f, .arena = a};
    figure_inputs(f, a, id, &x->ids);
    const char **names = NEW_ARRAY(a, x->ids.n, const char *);
    double *values = NEW_ARRAY(a, x->ids.n, double);
    for (size_t i = 0; i < x->ids.n; i++) {
        names[i] = figure_name(f, a, x->ids.at[i]);
        values[i] = figure_at_means(f, x->ids.at[i]);
    }
    x->inputs = (struct formula_inputs){x->ids.n, names, values};
    x->world =
        (struct formula_world){u->currency, u->counts, u->n_counts, x, find_figure, find_course};
    return x;
}

static bool is_difference(enum property p)
{
    static const enum property all[] = {PROPERTY_BENEFIT,           PROPERTY_NET,
                                        PROPERTY_TOGETHER,          PROPERTY_AVOIDS,
                                        PROPERTY_AVOIDED,           PROPERTY_CUMULATED,
                                        PROPERTY_AVOIDS_TIME,       PROPERTY_PRESENT_TIME,
                                        PROPERTY_AVOIDS_FATALITIES, PROPERTY_PRESENT_FATALITIES};
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        if (p == all[i])
            return true;
    return false;
}

/* What rounding may take from the difference of values that are nearly alike: that of the
 * largest of them. */
static long double lost(struct figures *f, struct arena *a, figure_id id)
{
    enum property p = figure_at(f, id)->property;
    long double largest = 0;
    if (!is_difference(p))
        return 1e-300L;
    const struct asked *x = ask_of(f, a, id);
    for (size_t i = 0; i < x->inputs.n; i++)
        largest = fmaxl(largest, fabsl((long double)x->inputs.values[i]));
    return 1e-14L * largest;
}

static void expect_formula(struct figures *f, struct arena *a, figure_id id, struct counted *c)
{
    const char *formula = figure_formula(f, a, id), *name = figure_name(f, a, id);
    char error[FORMULA_ERROR];
    long double x;
    if (text_starts(formula, "mean(")) {
        c->leaves++; /* a distribution: nothing to compute here */
        return;
    }
    bool fine = formula_evaluate(formula, &ask_of(f, a, id)->world, &x, error);
    ck_assert_msg(fine, "%s = %.2000s: %s", name, formula, error);
    double y = figure_at_means(f, id);
    bool over = text_starts(formula, "over(");
    ck_assert_msg(fabsl(x - y) <= (over ? AVERAGED : 1e-12L) * fabsl(x) + lost(f, a, id),
                  "%s = %.2000s: %.17Lg, figure %.17g", name, formula, x, y);
    c->formulas++;
    c->probabilities += strstr(formula, "probability(") != NULL;
    c->averages += over;
}

static void expect_all(struct arena *a, const struct model *m, const char *perspective,
                       struct counted *c)
{
    struct figures *f;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_int_eq(figures_new(a, m, perspective, date_of(2026, 12, 1), &f, &e), OHMEN_OK);
    f->points_only = true; /* formulas are of values at the means */
    compile_all(f, m);
    for (figure_id id = 0; id < f->list.n; id++) {
        struct arena *scratch = arena_child(a);
        expect_formula(f, scratch, id, c);
        arena_free(scratch);
    }
}

/* --- tests --- */

static const char *source_file(struct arena *a, const char *path)
{
    char *text;
    size_t n;
    path = arena_printf(a, "%s/%s", root_folder, path);
    ck_assert_int_eq(file_read(a, path, 1u << 20, &text, &n, NULL), OHMEN_OK);
    return text;
}

/* The register of the hand calculations; random ones have all that it has not. */
#define SMALL "tests/published/hand"
#define SAMPLE "samples/skerry"

static const struct model *load_folder(struct arena *a, const char *folder)
{
    static const char *const files[] = {"register", "network",   "hazards",
                                        "options",  "decisions", "states"};
    enum { FILES = sizeof files / sizeof *files };
    struct diags d;
    const struct node *roots[FILES];
    size_t n = text_equal(folder, SAMPLE) ? FILES : FILES - 1; /* the other one has no states */
    diags_init(&d, a);
    for (size_t i = 0; i < n; i++) {
        const char *path = arena_printf(a, "%s/%s.yaml", folder, files[i]);
        const char *text = source_file(a, path);
        roots[i] = yaml_read(a, path, text, strlen(text), &d);
    }
    return load(a, n, roots);
}

START_TEST(formulas_of_a_register)
{
    struct arena *a = arena_new(NULL);
    struct counted c = {0};
    expect_all(a, load_folder(a, SMALL), NULL, &c);
    expect_all(a, load_folder(a, SMALL), "company", &c);
    ck_assert_uint_gt(c.formulas, 200);
    ck_assert_uint_gt(c.probabilities, 20);
    arena_free(a);
}
END_TEST

START_TEST(formulas_of_random_registers)
{
    struct register_shape shape = register_small;
    struct counted c = {0};
    shape.stored = false;
    for (uint64_t seed = 0; seed < 8; seed++) {
        struct arena *a = arena_new(NULL);
        const struct node *root = random_register(a, seed, &shape);
        expect_all(a, load(a, 1, &root), NULL, &c);
        arena_free(a);
    }
    ck_assert_uint_gt(c.formulas, 2000);
    ck_assert_uint_gt(c.probabilities, 200);
}
END_TEST

/* Events of the elements; each is a factor of two for an evaluator that enumerates. */
static size_t events_of(const struct timed_world *w)
{
    size_t n = w->n_elements;
    for (size_t i = 0; i < w->n_causes; i++)
        n += ((size_t)1 << w->cause[i].n) - w->cause[i].n - 1;
    return n;
}

START_TEST(formulas_in_time)
{
    struct counted c = {0};
    for (uint64_t seed = 1; seed <= 60; seed++) {
        struct arena *a = arena_new(NULL);
        struct diags d;
        diags_init(&d, a);
        const struct timed_world *w = timed_world_random(a, seed);
        const char *text = timed_world_text(w);
        const struct node *root = yaml_read(a, "time.yaml", text, strlen(text), &d);
        if (events_of(w) <= 12)
            expect_all(a, load(a, 1, &root), NULL, &c);
        arena_free(a);
    }
    ck_assert_uint_gt(c.formulas, 1000);
    ck_assert_uint_gt(c.averages, 300);
}
END_TEST

/* --- docs/figures.md --- */

START_TEST(page_has_every_property)
{
    struct arena *a = arena_new(NULL);
    const char *page = source_file(a, "docs/figures.md");
    for (int p = 0; p < PROPERTY_COUNT; p++) {
        const char *row =
            arena_printf(a, "\n| `%s` | %s | `", properties[p].word, properties[p].help);
        ck_assert_msg(strstr(page, row), "docs/figures.md lacks the row%s", row);
    }
    arena_free(a);
}
END_TEST

/* What stands between ` and ` at the end of a row of a table, or NULL. */
static const char *example_in(struct arena *a, const char *line, size_t n)
{
    if (n < 5 || line[0] != '|' || strncmp(line + n - 3, "` |", 3) != 0)
        return NULL;
    size_t from = n - 4;
    while (line[from] != '`')
        from--;
    return arena_strn(a, line + from + 1, n - 4 - from);
}

/* The examples are figures of the sample. */
START_TEST(examples_of_the_page)
{
    struct arena *a = arena_new(NULL);
    struct figures *f;
    size_t count = 0;
    ck_assert_int_eq(figures_new(a, load_folder(a, SAMPLE), NULL, date_of(2026, 12, 1), &f, NULL),
                     OHMEN_OK);
    for (const char *p = source_file(a, "docs/figures.md"); *p;) {
        size_t n = strcspn(p, "\n");
        const char *name = example_in(a, p, n);
        p += n + (p[n] == '\n');
        if (!name)
            continue;
        figure_id id;
        ohmen_error e = OHMEN_ERROR_INIT;
        ck_assert_msg(weigh_find(f, name, &id, &e) == OHMEN_OK, "%s: %s", name, e.text);
        ck_assert_str_eq(figure_name(f, a, id), name);
        count++;
    }
    ck_assert_uint_ge(count, PROPERTY_COUNT + 8);
    arena_free(a);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2)
        return EXIT_FAILURE;
    root_folder = argv[1];
    Suite *s = suite_create("formulas of figures");
    TCase *t = tcase_create("formulas");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, formulas_of_a_register);
    tcase_add_test(t, formulas_of_random_registers);
    tcase_add_test(t, page_has_every_property);
    tcase_add_test(t, examples_of_the_page);
    suite_add_tcase(s, t);
    TCase *time = tcase_create("time");
    tcase_set_timeout(time, 300);
    tcase_add_test(time, formulas_in_time);
    suite_add_tcase(s, time);
    SRunner *sr = srunner_create(s);
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
