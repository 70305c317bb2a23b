/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The bad documents of tests/golden/bad: each gives exactly the diagnostic that stands
 * beside it, at its place, through reading, merging and loading. */
#include "model_test.h"

#include <dirent.h>
#include <stdlib.h>
#include <string.h>

struct names_found ARRAY_BODY(const char *);

static int by_name(const void *p, const void *q)
{
    return strcmp(*(const char *const *)p, *(const char *const *)q);
}

/* Names of the files with this ending, without it, in order. */
static void list_files(struct sheet *s, const char *ending, struct names_found *out)
{
    DIR *folder = opendir(arena_printf(s->arena, "%s/tests/golden/bad", model_test_root));
    ck_assert_ptr_nonnull(folder);
    for (const struct dirent *entry; (entry = readdir(folder)) != NULL;) {
        size_t n = strlen(entry->d_name), tail = strlen(ending);
        if (n > tail && text_equal(entry->d_name + n - tail, ending))
            *array_push(s->arena, out) = arena_strn(s->arena, entry->d_name, n - tail);
    }
    closedir(folder);
    qsort(out->at, out->n, sizeof *out->at, by_name);
}

static void read_all(struct sheet *s, const char *name)
{
    char *text;
    size_t n;
    const char *path = arena_printf(s->arena, "%s/tests/golden/bad/%s.yaml", model_test_root, name);
    ck_assert_int_eq(file_read(s->arena, path, 1u << 20, &text, &n, NULL), OHMEN_OK);
    const struct node *root = yaml_read(s->arena, name, text, n, &s->diags);
    struct model_sources sources = {0};
    if (root && sheet_merge(s, 1, &root, &sources))
        model_load(s->arena, sources.at, sources.n, &s->diags);
}

/* "line:column", then words, one a line. */
static void expect_diagnostic(struct sheet *s, const char *name)
{
    char *line = (char *)sheet_file(s, arena_printf(s->arena, "tests/golden/bad/%s.expect", name));
    const struct diag *d = &s->diags.list.at[0];
    ck_assert_msg(s->diags.count > 0, "%s: no diagnostic", name);
    for (size_t i = 1; i < s->diags.list.n; i++)
        ck_abort_msg("%s: more than one: %s; %s", name, diag_line(s->arena, d),
                     diag_line(s->arena, &s->diags.list.at[i]));
    const char *place = arena_printf(s->arena, "%u:%u", d->place.line, d->place.column);
    line = strtok(line, "\n");
    ck_assert_msg(text_equal(line, place), "%s: expected at %s: %s", name, line,
                  diag_line(s->arena, d));
    size_t words = 0;
    for (; (line = strtok(NULL, "\n")) != NULL; words++)
        ck_assert_msg(strstr(d->text, line), "expected \"%s\": %s", line, diag_line(s->arena, d));
    ck_assert_msg(words > 0, "%s: no words to expect", name);
}

START_TEST(bad_documents_are_explained)
{
    struct sheet lists = sheet_new();
    struct names_found names = {0};
    list_files(&lists, ".expect", &names);
    ck_assert_uint_ge(names.n, 28);
    for (size_t i = 0; i < names.n; i++) {
        struct sheet s = sheet_new();
        read_all(&s, names.at[i]);
        expect_diagnostic(&s, names.at[i]);
    }
}
END_TEST

START_TEST(others_are_good)
{
    struct sheet lists = sheet_new();
    struct names_found documents = {0}, expected = {0};
    list_files(&lists, ".yaml", &documents);
    list_files(&lists, ".expect", &expected);
    size_t good = 0;
    for (size_t i = 0, k = 0; i < documents.n; i++) {
        if (k < expected.n && text_equal(documents.at[i], expected.at[k])) {
            k++;
            continue;
        }
        struct sheet s = sheet_new();
        read_all(&s, documents.at[i]);
        sheet_fine(&s);
        good++;
    }
    ck_assert_uint_eq(documents.n, expected.n + good);
    ck_assert_uint_ge(good, 1);
}
END_TEST

Suite *suite_bad(void)
{
    Suite *s = suite_create("bad documents");
    TCase *t = tcase_create("bad documents");
    tcase_add_test(t, bad_documents_are_explained);
    tcase_add_test(t, others_are_good);
    suite_add_tcase(s, t);
    return s;
}
