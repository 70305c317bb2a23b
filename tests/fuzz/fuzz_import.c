/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Any bytes as a document of an import, and what follows: it is merged, bound and checked;
 * what loads is compiled, evaluated, weighed and explained. Whatever a document says, the
 * end is diagnostics, a status with a sentence, or figures that are finite and add up. */
#include <math.h>
#include <string.h>

#include "base/text.h"
#include "base/utf8.h"
#include "decide/weigh.h"
#include "doc/yaml.h"
#include "fuzz.h"
#include "model/documents.h"

const char *const fuzz_words[] = {"was",
                                  " * was",
                                  "was + ",
                                  "rest",
                                  "no",
                                  "yes",
                                  "none",
                                  "absent",
                                  "all",
                                  "any",
                                  "at-least: 2",
                                  "1e300",
                                  "1e-300",
                                  "-1",
                                  "0",
                                  "100 %",
                                  "101 %",
                                  "1e9",
                                  " per a",
                                  " kEUR",
                                  " EUR/kWh",
                                  " s",
                                  " section",
                                  " MW",
                                  " a",
                                  "90 % within 1 .. 2",
                                  "90 % within -1 .. 2 as normal",
                                  "{median: 0.01, error-factor: 3}",
                                  "{median: 0.01, error-factor: 1e9, at-most: 1}",
                                  "{a: 1e-9, b: 1e9}",
                                  "{mean: 1, weight: 1e-9}",
                                  "{shape: pert, from: 1, most-likely: 1, to: 2}",
                                  "{values: {x: {is: 1, p: 50 %}, y: {is: 0, p: rest}}}",
                                  "clearance-time",
                                  "lookup(clearance-time; 1 s -> 2 EUR; 2 s -> 3 EUR)",
                                  "fails(R1)",
                                  "frequency(H2)",
                                  "unwanted(S1; inrush 3 per a)",
                                  "share(r1; earth)",
                                  "min(1; 2)",
                                  "max(v1; v2)",
                                  "exp(1000)",
                                  "log(0)",
                                  "sqrt(-1)",
                                  " ^ 2",
                                  " / 0",
                                  "R1",
                                  "R2",
                                  "S1",
                                  "S2",
                                  "H1",
                                  "H2",
                                  "O1",
                                  "O2",
                                  "D1",
                                  "v1",
                                  "r1",
                                  "T1",
                                  "L1",
                                  "register:\n",
                                  "like: H1",
                                  "like: R1",
                                  "removed: [R1]\n",
                                  "split: {x: {share: rest, outcome: "
                                  "none}}",
                                  "if-works: S1",
                                  "cleared-by: S1",
                                  "outcome: x",
                                  ", in: 0.1 s",
                                  ", sees: 50 %",
                                  "excludes: [O1]",
                                  "requires: [O2]",
                                  "varies: ",
                                  "is: ",
                                  "name: x",
                                  ": ",
                                  "{",
                                  "}",
                                  "[",
                                  "]",
                                  ", ",
                                  "\n  ",
                                  "\n    ",
                                  "2028",
                                  "2027-02-28",
                                  "horizon: 200 a",
                                  "horizon: 1 a",
                                  NULL};

enum { EXPLAINED = 40 }; /* figures of one register */

/* Settings for documents that bring none. */
static const char settings[] =
    "register: {title: A register, currency: EUR, prices: 2026, horizon: 20 a, "
    "discount: 4 % per a, counts: [section, bay, transformer]}\n";

static const struct node *read_settings(struct arena *a)
{
    struct diags d;
    diags_init(&d, a);
    return yaml_read(a, "settings", settings, sizeof settings - 1, &d);
}

static void check_sentence(const ohmen_error *e, ohmen_status status)
{
    size_t n = strlen(e->text);
    REQUIRE(e->status == status && n > 0);
    REQUIRE(utf8_check(e->text, n) == n);
}

/* Each diagnostic is a sentence with a place in the input, or in the register. */
static void check_diags(const struct diags *d, const char *data, size_t size)
{
    struct diags own = *d;
    own.list.at = arena_copy(d->arena, d->list.at, d->list.n * sizeof *d->list.at);
    own.list.n = 0;
    for (size_t i = 0; i < d->list.n; i++)
        if (text_equal(d->list.at[i].place.file, "input"))
            own.list.at[own.list.n++] = d->list.at[i];
    fuzz_check_diags(&own, data, size);
}

/* --- figures --- */

static bool is_probability(double p)
{
    return p >= -1e-12 && p <= 1 + 1e-9;
}

/* Each end of the event tree is a probability, and together they are everything. */
static void check_hazard(const struct figures *f, const struct compiled *c)
{
    const struct hazard_exports *x = c->exports;
    double ends = 0, outcomes = 0;
    for (size_t i = 0; i < x->n_ends; i++) {
        double p = figure_value(f, x->ends[i].probability);
        REQUIRE(is_probability(p));
        ends += p;
    }
    for (size_t i = 0; i < x->n_outcomes; i++)
        outcomes += figure_value(f, x->probability[i]);
    REQUIRE(fabs(ends - 1) <= 1e-9);
    REQUIRE(outcomes <= 1 + 1e-9);
    REQUIRE(figure_value(f, x->frequency) >= 0 && figure_value(f, x->damaging) >= 0);
}

/* Names lead back to their figure; formulas and inputs can be written. */
static void check_figures(struct arena *a, struct figures *f)
{
    size_t n = f->list.n, step = n / EXPLAINED + 1;
    for (size_t i = 0; i < n; i += step) {
        struct figure_ids inputs = {0};
        REQUIRE(isfinite(figure_value(f, (figure_id)i)));
        REQUIRE(strlen(figure_formula(f, a, (figure_id)i)) > 0);
        figure_inputs(f, a, (figure_id)i, &inputs);
        REQUIRE(strlen(figure_name(f, a, (figure_id)i)) > 0);
    }
}

struct compiled_list ARRAY_BODY(const struct compiled *);

static ohmen_status compile_all(struct figures *f, const struct model *m, const struct variant *v,
                                struct compiled_list *out, ohmen_error *e)
{
    const struct objects *all = &m->of[KIND_HAZARD];
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < all->n; i++) {
        const struct compiled *c;
        status = figures_compile(f, v, all->at[i]->id, &c, e);
        if (status == OHMEN_OK)
            *array_push(f->arena, out) = c;
    }
    return status;
}

/* false where a decision cannot be computed: then not all figures have values. */
static bool weigh_all(struct figures *f, const struct model *m)
{
    const struct objects *all = &m->of[KIND_DECISION];
    for (size_t i = 0; i < all->n; i++) {
        struct weighing *w;
        ohmen_error e = OHMEN_ERROR_INIT;
        ohmen_status status = weigh_compile(f, all->at[i]->id, &w, &e);
        if (status == OHMEN_OK)
            status = figures_evaluate(f, &e);
        if (status != OHMEN_OK) {
            check_sentence(&e, status);
            return false;
        }
        weigh_rank(f, w);
    }
    return true;
}

static void evaluate(struct arena *a, const struct model *m)
{
    struct figures *f;
    const struct variant *v;
    struct unused unused = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    struct compiled_list hazards = {0};
    figures_unused(a, m, &unused);
    ohmen_status status = figures_new(a, m, "all", date_of(2026, 12, 1), &f, &e);
    REQUIRE(status == OHMEN_OK);
    status = figures_variant(f, 0, NULL, &v, &e);
    REQUIRE(status == OHMEN_OK);
    status = compile_all(f, m, v, &hazards, &e);
    if (status == OHMEN_OK)
        status = figures_evaluate(f, &e);
    if (status != OHMEN_OK) {
        check_sentence(&e, status);
        REQUIRE(status == OHMEN_COMPUTE);
        return;
    }
    for (size_t i = 0; i < hazards.n; i++)
        check_hazard(f, hazards.at[i]);
    if (weigh_all(f, m))
        check_figures(a, f);
}

/* --- one input --- */

int LLVMFuzzerTestOneInput(const uint8_t *data, size_t size)
{
    struct arena *a = fuzz_arena();
    struct diags d;
    struct model_sources stored = {0}, all = {0};
    diags_init(&d, a);
    const struct node *root = yaml_read(a, "input", (const char *)data, size, &d);
    if (root) {
        const struct node *roots[2] = {root, read_settings(a)};
        size_t n = node_get(root, "register") ? 1 : 2;
        struct model *m = NULL;
        if (documents_merge(a, &stored, n, roots, &all, &d))
            m = model_load(a, all.at, all.n, &d);
        REQUIRE((m == NULL) == (d.count > 0));
        if (m)
            evaluate(a, m);
    }
    check_diags(&d, (const char *)data, size);
    arena_free(a);
    return 0;
}
