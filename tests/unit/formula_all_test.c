/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The printed formula of every figure of the sample's report, and of all that they are made
 * of, gives the printed figure; every leaf tells its source, or that it has none. All by
 * include/ohmen: what is read here is what anybody sees. */
#include <check.h>
#include <math.h>
#include <ohmen/ohmen.h>
#include <stdio.h>
#include <string.h>

#include "base/text.h"
#include "decide/information.h"
#include "decide/sure.h"
#include "figure/samples.h"
#include "formula_all.h"
#include "json_check.h"
#include "work/loss.h"
#include "loaded.h"
#include "sample.h"

static const char *sample;

/* One row of a derivation. */
struct derived {
    const char *figure, *formula, *source;
    double exact;
};

struct checking_all {
    struct arena *arena;
    ohmen_register *reg;
    struct loaded loaded; /* for the titles of sources */
    struct strmap rows;   /* figure -> struct derived */
    size_t reported, formulas, means, literals, sourced, points;
};

static void must(ohmen_status status, const ohmen_error *e)
{
    ck_assert_msg(status == OHMEN_OK, "%s", e->text);
}

/* --- the register --- */

static void import_sample(struct checking_all *c, const char *path)
{
    static const char *const names[] = {"register", "network", "hazards", "options", "decisions"};
    const char *files[5];
    ohmen_register *reg = NULL;
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    for (size_t i = 0; i < 5; i++)
        files[i] = arena_printf(c->arena, "%s/%s.yaml", sample, names[i]);
    ohmen_import_settings settings = {
        .files = files, .n_files = 5, .author = "a test", .reason = "to read it"};
    must(ohmen_create(path, &e), &e);
    must(ohmen_open(path, OHMEN_WRITE, &reg, &e), &e);
    must(ohmen_import(reg, &settings, &report, &e), &e);
    ohmen_report_free(report);
    ohmen_close(reg);
}

static void open_sample(struct checking_all *c, struct arena *a)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    *c = (struct checking_all){.arena = a};
    const char *path = arena_printf(a, "%s/sample.ohmen", sample_folder(a));
    import_sample(c, path);
    must(ohmen_open(path, OHMEN_READ, &c->reg, &e), &e);
    loaded_folder(&c->loaded, a, sample, NULL);
}

/* --- reading JSON --- */

/* The text of a string at a key; strings without escapes only. */
static const char *text_at(struct arena *a, const char *json, const char *key)
{
    size_t n;
    const char *s = json_pick(json, key, &n);
    ck_assert_msg(s && n >= 2 && *s == '"' && !memchr(s, '\\', n), "%s of %s", key, json);
    return arena_strn(a, s + 1, n - 2);
}

static double number_of(const char *text)
{
    double x = NAN;
    bool negative = *text == '-';
    ck_assert_msg(text_to_double(text + negative, text + strlen(text), &x), "%s", text);
    return negative ? -x : x;
}

/* A row stands on a line of its own: {"level": ...}, with what ends the row or the table. */
static const char *row_object(struct arena *a, const char *line, size_t n)
{
    const char *end = line + n;
    while (end > line && end[-1] != '}')
        end--;
    for (const char *copy; end > line; end--) {
        copy = arena_strn(a, line, (size_t)(end - line));
        if (end[-1] == '}' && json_check(copy, (size_t)(end - line), NULL))
            return copy;
    }
    ck_abort_msg("no row: %.200s", line);
    return NULL;
}

static void read_row(struct checking_all *c, const char *row)
{
    struct derived *d = NEW(c->arena, struct derived);
    *d = (struct derived){text_at(c->arena, row, "figure"), text_at(c->arena, row, "formula"),
                          text_at(c->arena, row, "source"),
                          number_of(text_at(c->arena, row, "exact"))};
    const struct derived *known = strmap_get(&c->rows, d->figure);
    if (!known) {
        strmap_set(c->arena, &c->rows, d->figure, d);
        return;
    }
    ck_assert_str_eq(known->formula, d->formula); /* whatever else is explained beside it */
    ck_assert(known->exact == d->exact);
}

static void read_derivation(struct checking_all *c, const char *json)
{
    static const char head[] = "{\"level\":";
    struct arena *scratch = arena_child(c->arena);
    size_t rows = 0;
    for (const char *at = json; (at = strstr(at, head)) != NULL; rows++) {
        size_t n = strcspn(at, "\n");
        read_row(c, row_object(scratch, at, n));
        at += n;
    }
    ck_assert_uint_gt(rows, 0);
    arena_free(scratch);
}

static void explain(struct checking_all *c, const char *name)
{
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    must(ohmen_explain(c->reg, NULL, name, 0, &report, &e), &e);
    read_derivation(c, ohmen_report_json(report));
    ohmen_report_free(report);
    ck_assert_msg(strmap_has(&c->rows, name), "%s is not in its own derivation", name);
}

/* The texts at "value" and "unit" of a number before its figure's name in the report. */
static bool number_before(struct arena *a, const char *figure, const char **value,
                          const char **unit)
{
    static const char head[] = "{\"value\": ", middle[] = ", \"unit\": \"";
    const char *at = figure;
    while (*at != '{')
        at--;
    if (!text_starts(at, head))
        return false;
    size_t n = strcspn(at + sizeof head - 1, ",");
    *value = arena_strn(a, at + sizeof head - 1, n);
    at += sizeof head - 1 + n;
    if (!text_starts(at, middle))
        return false;
    *unit = arena_strn(a, at + sizeof middle - 1, strcspn(at + sizeof middle - 1, "\""));
    return true;
}

/* A point of a spread has no formula: it stands in a table of points, with the digits of the report
 * where that has it in base units. */
static void explain_point(struct checking_all *c, const char *name, const char *in_report)
{
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *value, *unit;
    must(ohmen_explain(c->reg, NULL, name, 1, &report, &e), &e);
    const char *json = ohmen_report_json(report);
    const char *row = strstr(json, arena_printf(c->arena, "\"figure\": \"%s\"", name));
    ck_assert_msg(row != NULL, "%s is not among its own points", name);
    while (*row != '{')
        row--;
    row = row_object(c->arena, row, strcspn(row, "\n"));
    ck_assert(number_before(c->arena, in_report, &value, &unit));
    if (text_equal(text_at(c->arena, row, "unit"), unit)) {
        ck_assert_str_eq(text_at(c->arena, row, "exact"), value);
        c->points++;
    }
    ohmen_report_free(report);
}

/* Every figure that the report of all names, explained to the ground. */
static void explain_all(struct checking_all *c)
{
    static const char key[] = "\"figure\": \"";
    ohmen_report *report = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct strmap seen = {0};
    const char *figure;
    enum spread_point point;
    must(ohmen_report_all(c->reg, NULL, &report, &e), &e);
    for (const char *at = ohmen_report_json(report); (at = strstr(at, key)) != NULL;) {
        at += sizeof key - 1;
        const char *name = arena_strn(c->arena, at, strcspn(at, "\""));
        if (strmap_has(&seen, name))
            continue;
        strmap_set(c->arena, &seen, name, NULL);
        if (spread_is_named(c->arena, name, &figure, &point))
            explain_point(c, name, at);
        else
            explain(c, name);
    }
    c->reported = seen.n;
    ohmen_report_free(report);
}

/* --- evaluating --- */

/* What a formula may name: the figures of the derivations, and means. */
struct asked {
    struct checking_all *c;
    const struct formula_world *literals;
    const char *variant; /* "@A+B" of the figure itself, or "" */
    const char *hazard;
    size_t names, means;
};

static const struct derived *row_named(struct asked *x, const char *name)
{
    struct arena *a = x->c->arena;
    if (strncmp(name, "sees.", 5) == 0)
        name = arena_printf(a, "%s.share.%s.sees%s", x->hazard, name + 5, x->variant);
    else if (strncmp(name, "disabled.", 9) == 0)
        name = arena_printf(a, "%s.share.%s.disabled%s", x->hazard, name + 9, x->variant);
    return strmap_get(&x->c->rows, name);
}

/* An element in a condition is that of the figure's variant, as far as the variant reaches
 * it: the longest set of the variant's options for which there is such a figure. */
static const struct derived *element_row(struct asked *x, const char *name)
{
    const struct derived *best = row_named(x, name);
    for (size_t i = 0; i < x->c->rows.n && *x->variant; i++) {
        const char *known = x->c->rows.at[i].key, *at = strchr(known, '@');
        size_t n = at ? (size_t)(at - known) : 0;
        if (!at || strlen(name) != n || strncmp(known, name, n) != 0)
            continue;
        bool ours = true;
        for (const char *p = at; ours && *p;) {
            size_t k = strcspn(p + 1, "+");
            const char *option = arena_strn(x->c->arena, p + 1, k);
            const char *found = strstr(x->variant, option);
            ours = found && (found[k] == 0 || found[k] == '+') && strchr("@+", found[-1]);
            p += 1 + k;
        }
        if (ours && (!best || strlen(known) > strlen(best->figure)))
            best = x->c->rows.at[i].value;
    }
    return best;
}

static const char *behind_object(const char *name)
{
    return name + strcspn(name, ".");
}

static bool find(void *ctx, const char *name, long double *out)
{
    struct asked *x = ctx;
    size_t n = strlen(name);
    if (strncmp(name, "mean(", 5) == 0) {
        x->means++;
        return mean_of_text(arena_strn(x->c->arena, name + 5, n - 6), x->literals, out);
    }
    bool element = strncmp(behind_object(name), ".fails", 6) == 0;
    const struct derived *d = element ? element_row(x, name) : row_named(x, name);
    x->names++;
    if (d)
        *out = d->exact;
    return d != NULL;
}

/* A course by its own row. */
static bool find_course(void *ctx, const char *name, struct formula_course *out)
{
    struct asked *x = ctx;
    struct formula_world world = *x->literals;
    char error[FORMULA_ERROR];
    const struct derived *d = element_row(x, name);
    if (!d)
        return false;
    world.ctx = x;
    world.find = find;
    world.course = find_course;
    bool fine = formula_course(d->formula, &world, out, error);
    ck_assert_msg(fine, "%s = %s: %s", d->figure, d->formula, error);
    return true;
}

static bool nothing(void *ctx, const char *name, long double *out)
{
    (void)ctx, (void)name, (void)out;
    return false;
}

/* "ID: title" of a source of the sample, or the word none. */
static void check_source(struct checking_all *c, const struct derived *d)
{
    size_t n = strcspn(d->source, ":");
    if (strcmp(d->source, "none") == 0)
        return;
    const char *id = arena_strn(c->arena, d->source, n);
    const struct source *s = model_get(c->loaded.model, KIND_SOURCE, id);
    ck_assert_msg(s, "%s has the source \"%s\"", d->figure, d->source);
    const char *begins = arena_printf(c->arena, "%s: %s", id, s->title);
    ck_assert_msg(text_starts(d->source, begins), "%s has the source \"%s\"", d->figure, d->source);
    c->sourced++;
}

/* What a sample says has words for a formula, which name the figures that were sampled. */
static bool is_in_words(const struct derived *d)
{
    return sure_is_named(d->figure) || loss_is_named(d->figure) || utility_is_named(d->figure) ||
           information_is_named(d->figure);
}

static void check_row(struct checking_all *c, const struct derived *d)
{
    const struct units *u = &c->loaded.model->units;
    struct formula_world literals = {u->currency, u->counts, u->n_counts, NULL, nothing, NULL};
    const char *at = strchr(d->figure, '@');
    struct asked x = {.c = c, .literals = &literals, .variant = at ? at : ""};
    x.hazard = arena_strn(c->arena, d->figure, strcspn(d->figure, "."));
    struct formula_world world = {u->currency, u->counts, u->n_counts, &x, find, find_course};
    char error[FORMULA_ERROR];
    long double value = NAN;
    bool fine = formula_evaluate(d->formula, &world, &value, error);
    ck_assert_msg(fine, "%s = %s: %s", d->figure, d->formula, error);
    ck_assert_msg(fabsl(value - d->exact) <= 1e-12L * fabsl(value),
                  "%s = %s is %.17Lg, explained as %.17g", d->figure, d->formula, value, d->exact);
    c->formulas++;
    c->means += x.means;
    if (x.names > 0)
        return;
    c->literals += x.means == 0;
    check_source(c, d);
}

START_TEST(formulas_of_the_report)
{
    struct arena *a = arena_new(NULL);
    struct checking_all c;
    open_sample(&c, a);
    explain_all(&c);
    for (size_t i = 0; i < c.rows.n; i++)
        if (!is_in_words(c.rows.at[i].value))
            check_row(&c, c.rows.at[i].value);
    ck_assert_uint_gt(c.reported, 40);
    ck_assert_uint_gt(c.formulas, 100);
    ck_assert_uint_gt(c.means, 5);
    ck_assert_uint_gt(c.literals, 10);
    ck_assert_uint_gt(c.sourced, 5);
    ck_assert_uint_gt(c.points, 10);
    ohmen_close(c.reg);
    arena_free(a);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2) {
        fprintf(stderr, "usage: %s tests/published/hand\n", argv[0]);
        return 2;
    }
    sample = argv[1];
    Suite *s = suite_create("formulas of the report");
    TCase *t = tcase_create("formulas");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, formulas_of_the_report);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
