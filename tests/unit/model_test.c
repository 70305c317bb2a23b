/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the model layer. A run without a test is a failure. */
#include "model_test.h"

#include <stdarg.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "doc/json.h"

const char *model_test_root;

static void release(void *arena)
{
    arena_free(arena);
}

/* Freed at the end of the program: failed checks jump over the end of a test. */
static struct arena *all;

struct sheet sheet_new(void)
{
    if (!all)
        all = arena_new(NULL);
    struct sheet s = {.arena = arena_new(NULL)};
    ck_assert_ptr_nonnull(s.arena);
    arena_defer(all, release, s.arena);
    diags_init(&s.diags, s.arena);
    return s;
}

static const char *below_root(struct sheet *s, const char *path)
{
    return arena_printf(s->arena, "%s/%s", model_test_root, path);
}

const char *sheet_file(struct sheet *s, const char *path)
{
    char *text;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    ohmen_status status = file_read(s->arena, below_root(s, path), 1u << 24, &text, &n, &e);
    ck_assert_msg(status == OHMEN_OK, "%s", e.text);
    return text;
}

struct node *sheet_yaml(struct sheet *s, const char *text)
{
    return yaml_read(s->arena, "test.yaml", text, strlen(text), &s->diags);
}

bool sheet_merge(struct sheet *s, size_t n, const struct node *const *roots,
                 struct model_sources *out)
{
    struct model_sources nothing = {0};
    return documents_merge(s->arena, &nothing, n, roots, out, &s->diags);
}

struct model *sheet_load(struct sheet *s, const char *text)
{
    const struct node *root = sheet_yaml(s, text);
    struct model_sources sources = {0};
    if (!root || !sheet_merge(s, 1, &root, &sources))
        return NULL;
    return model_load(s->arena, sources.at, sources.n, &s->diags);
}

struct model *sheet_register(struct sheet *s, const char *text)
{
    static const char settings[] = "register:\n"
                                   "  title: A register\n"
                                   "  currency: EUR\n"
                                   "  prices: 2026\n"
                                   "  horizon: 20 a\n"
                                   "  discount: 4 % per a\n"
                                   "  counts: [section, bay]\n";
    return sheet_load(s, arena_printf(s->arena, "%s%s", settings, text));
}

void sheet_fine(struct sheet *s)
{
    if (s->diags.count)
        ck_abort_msg("%s", diag_line(s->arena, &s->diags.list.at[0]));
}

void sheet_expect(struct sheet *s, uint32_t line, uint32_t column, ...)
{
    va_list words;
    diags_sort(&s->diags);
    for (size_t i = 1; i < s->diags.list.n; i++)
        fprintf(stderr, "also: %s\n", diag_line(s->arena, &s->diags.list.at[i]));
    ck_assert_msg(s->diags.count == 1, "%zu diagnostics", s->diags.count);
    const struct diag *d = &s->diags.list.at[0];
    const char *found = diag_line(s->arena, d);
    ck_assert_msg(d->place.line == line && d->place.column == column, "expected at %u:%u: %s", line,
                  column, found);
    va_start(words, column);
    for (const char *word; (word = va_arg(words, const char *)) != NULL;)
        ck_assert_msg(strstr(d->text, word), "expected \"%s\": %s", word, found);
    va_end(words);
}

const char *sheet_json(struct sheet *s, const struct node *n)
{
    struct text t;
    text_init(&t, s->arena);
    json_write(&t, n);
    return text_str(&t);
}

void sheet_accept(struct sheet *s, const char *path, const char *text)
{
    const char *accept = getenv("OHMEN_ACCEPT");
    if (accept && text_equal(accept, "1"))
        ck_assert_int_eq(file_write(below_root(s, path), text, strlen(text), NULL), OHMEN_OK);
    const char *stored = sheet_file(s, path);
    size_t same = 0, line = 1;
    for (; stored[same] && stored[same] == text[same]; same++)
        line += text[same] == '\n';
    ck_assert_msg(stored[same] == text[same],
                  "%s:%zu: not what the field tables give; OHMEN_ACCEPT=1 writes it anew", path,
                  line);
}

int main(int argc, char **argv)
{
    if (argc != 2)
        return EXIT_FAILURE;
    model_test_root = argv[1];
    SRunner *sr = srunner_create(suite_walk());
    srunner_add_suite(sr, suite_bind());
    srunner_add_suite(sr, suite_quantities());
    srunner_add_suite(sr, suite_registers());
    srunner_add_suite(sr, suite_documents());
    srunner_add_suite(sr, suite_load());
    srunner_add_suite(sr, suite_variant());
    srunner_add_suite(sr, suite_bad());
    srunner_add_suite(sr, suite_schema());
    srunner_run_all(sr, CK_NORMAL);
    bool good = srunner_ntests_run(sr) > 0 && srunner_ntests_failed(sr) == 0;
    srunner_free(sr);
    arena_free(all);
    return good ? EXIT_SUCCESS : EXIT_FAILURE;
}
