/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Documents to figures for tests. Owns nothing: all is the caller's arena's. */
#include "loaded.h"

#include <check.h>
#include <dirent.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "doc/yaml.h"

static void refuse_diags(struct arena *a, struct diags *d)
{
    diags_sort(d);
    ck_assert_msg(d->count == 0, "%s", d->list.n ? diag_line(a, &d->list.at[0]) : "diagnostics");
}

void loaded_objects(struct loaded *l, struct arena *a, const struct model_sources *sources,
                    const char *perspective)
{
    struct diags d;
    diags_init(&d, a);
    *l = (struct loaded){.arena = a};
    l->model = model_load(a, sources->at, sources->n, &d);
    refuse_diags(a, &d);
    ck_assert_ptr_nonnull(l->model);
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_new(a, l->model, perspective, LOADED_DATE, &l->figures, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
}

void loaded_texts(struct loaded *l, struct arena *a, size_t n, const char *const *texts,
                  const char *perspective)
{
    struct diags d;
    struct model_sources none = {0}, all = {0};
    const struct node **roots = NEW_ARRAY(a, n, const struct node *);
    diags_init(&d, a);
    for (size_t i = 0; i < n; i++) {
        const char *name = arena_printf(a, "text-%zu.yaml", i);
        roots[i] = yaml_read(a, name, texts[i], strlen(texts[i]), &d);
    }
    refuse_diags(a, &d);
    bool merged = documents_merge(a, &none, n, roots, &all, &d);
    refuse_diags(a, &d);
    ck_assert(merged);
    loaded_objects(l, a, &all, perspective);
}

void loaded_text(struct loaded *l, struct arena *a, const char *text, const char *perspective)
{
    loaded_texts(l, a, 1, &text, perspective);
}

static int by_text(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

static const char *file_text(struct arena *a, const char *name)
{
    char *text;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = file_read(a, name, YAML_BYTES, &text, &n, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return arena_strn(a, text, n);
}

void loaded_folder(struct loaded *l, struct arena *a, const char *folder, const char *perspective)
{
    ARRAY(const char *) names = {0};
    DIR *dir = opendir(folder);
    ck_assert_msg(dir != NULL, "cannot read the folder %s", folder);
    for (const struct dirent *entry; (entry = readdir(dir));) {
        size_t n = strlen(entry->d_name);
        if (n > 5 && text_equal(entry->d_name + n - 5, ".yaml"))
            *array_push(a, &names) = arena_printf(a, "%s/%s", folder, entry->d_name);
    }
    closedir(dir);
    ck_assert_uint_gt(names.n, 0);
    qsort(names.at, names.n, sizeof *names.at, by_text);
    for (size_t i = 0; i < names.n; i++)
        names.at[i] = file_text(a, names.at[i]);
    loaded_texts(l, a, names.n, names.at, perspective);
}

figure_id loaded_find(struct loaded *l, const char *name)
{
    figure_id id = FIGURE_NONE;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = weigh_find(l->figures, name, &id, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", name, e.text);
    return id;
}

void loaded_evaluate(struct loaded *l)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_evaluate(l->figures, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
}

double loaded_value(struct loaded *l, const char *name)
{
    figure_id id = loaded_find(l, name);
    loaded_evaluate(l);
    return figure_value(l->figures, id);
}

const struct variant *loaded_variant(struct loaded *l, size_t n, const char *const *options)
{
    const struct variant *v = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_variant(l->figures, n, options, &v, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return v;
}

const struct compiled *loaded_compile(struct loaded *l, const struct variant *v, const char *id)
{
    const struct compiled *u = NULL;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = figures_compile(l->figures, v, id, &u, &e);
    ck_assert_msg(status == OHMEN_OK, "%s: %s", id, e.text);
    return u;
}
