/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Each limit of YAML documents at the limit and one past it, and large maps. */
#include <string.h>

#include "doc/yaml.h"
#include "doc_test.h"
#include "failmem.h"

/* Reads t and gives the diagnostics, "" when it was read. */
static const char *verdict(struct trial *trial, const struct text *t)
{
    const struct node *n = yaml_read(trial->a, "f", text_str(t), t->n, &trial->d);
    const char *lines = trial_lines(trial);
    ck_assert_int_eq(n != NULL, *lines == 0);
    return lines;
}

static const char *nested(struct trial *t, size_t lists, bool flow)
{
    struct text s;
    text_init(&s, t->a);
    text_add(&s, flow ? "a: " : "a:\n  ");
    text_repeat(&s, flow ? "[" : "- ", lists);
    text_add(&s, "x");
    text_repeat(&s, flow ? "]" : "", lists);
    return verdict(t, &s);
}

START_TEST(depth)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(nested(&t, YAML_DEPTH - 1, true), "");
    ck_assert_str_eq(nested(&t, YAML_DEPTH - 1, false), "");
    ck_assert_str_eq(nested(&t, YAML_DEPTH, true),
                     "f:1:43: the text is nested deeper than 40 levels");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_eq(nested(&t, YAML_DEPTH, false),
                     "f:2:81: the text is nested deeper than 40 levels");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_ne(nested(&t, 100000, true), "");
    trial_close(&t);
}
END_TEST

static const char *with_key(struct trial *t, size_t bytes)
{
    struct text s;
    text_init(&s, t->a);
    text_repeat(&s, "k", bytes);
    text_add(&s, ": 1\n");
    return verdict(t, &s);
}

START_TEST(key_length)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_key(&t, YAML_KEY_BYTES), "");
    ck_assert_str_eq(with_key(&t, YAML_KEY_BYTES + 1),
                     "f:1:1: a key may have at most 200 bytes, this one has 201");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_eq(with_key(&t, 2000),
                     "f:1:1: the key in this line is too long: it may have at most 200 bytes");
    trial_close(&t);
}
END_TEST

static const char *with_scalar(struct trial *t, size_t bytes)
{
    struct text s;
    text_init(&s, t->a);
    text_add(&s, "a: ");
    text_repeat(&s, "x", bytes);
    return verdict(t, &s);
}

START_TEST(scalar_length)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_scalar(&t, YAML_SCALAR_BYTES), "");
    ck_assert_str_eq(with_scalar(&t, YAML_SCALAR_BYTES + 1),
                     "f:1:4: a value may have at most 100000 bytes, this one has 100001");
    trial_close(&t);
}
END_TEST

/* The root and the list are two nodes. */
static const char *with_nodes(struct trial *t, size_t nodes)
{
    struct text s;
    text_init(&s, t->a);
    text_add(&s, "a: [");
    text_repeat(&s, "x,", nodes - 2);
    text_add(&s, "]\n");
    return verdict(t, &s);
}

START_TEST(number_of_nodes)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_nodes(&t, YAML_NODES), "");
    trial_close(&t);
    trial_open(&t);
    ck_assert_str_eq(with_nodes(&t, YAML_NODES + 1),
                     "f:1:4000001: the file holds more than 2000000 values: split it");
    trial_close(&t);
}
END_TEST

/* One comment fills the file. */
static const char *with_bytes(struct trial *t, size_t bytes)
{
    char *s = arena_alloc(t->a, bytes);
    memset(s, ' ', bytes);
    memcpy(s, "a: 1\n#", 6);
    for (size_t i = 100; i < bytes; i += 100)
        memcpy(s + i - 2, "\n#", 2);
    const struct node *n = yaml_read(t->a, "f", s, bytes, &t->d);
    ck_assert_int_eq(n != NULL, t->d.count == 0);
    return trial_lines(t);
}

START_TEST(file_size)
{
    struct trial t;
    trial_open(&t);
    ck_assert_str_eq(with_bytes(&t, YAML_BYTES), "");
    ck_assert_str_eq(with_bytes(&t, YAML_BYTES + 1),
                     "f:1:1: the file has 67108865 bytes, more than the 67108864 that are read: "
                     "split it");
    trial_close(&t);
}
END_TEST

enum { MANY = 100000 };

static void many_keys(struct text *s, size_t keys, const char *before, const char *between)
{
    text_add(s, before);
    for (size_t i = 0; i < keys; i++)
        text_printf(s, "%sk%zu: v%zu", i ? between : "", i * 7919 % keys, i);
}

/* Each kind of large map is read, and its one duplicate is found. Quadratic work
 * would be 1e10 comparisons here, far beyond the time limit of the test. */
START_TEST(many_keys_and_their_duplicates)
{
    static const char *const frames[][3] = {
        {"", "\n", "\nk5: again"}, {"{", ", ", ", k5: again}"}, {"a: {", ", ", ", k5: x}"}};
    struct trial t;
    trial_open(&t);
    struct text s;
    text_init(&s, t.a);
    many_keys(&s, MANY, frames[_i][0], frames[_i][1]);
    text_add(&s, frames[_i][2]);
    ck_assert_ptr_null(yaml_read(t.a, "f", text_str(&s), s.n, &t.d));
    ck_assert_uint_eq(t.d.count, 1);
    ck_assert_ptr_nonnull(strstr(trial_lines(&t), "the key 'k5' stands twice: first in line"));
    trial_close(&t);
}
END_TEST

/* The duplicate of every key, where a walk becomes a set and around it. */
START_TEST(every_duplicate)
{
    for (size_t keys = 1; keys < 20; keys++) {
        for (size_t twice = 0; twice < keys; twice++) {
            struct trial t;
            trial_open(&t);
            struct text s;
            text_init(&s, t.a);
            for (size_t i = 0; i < keys; i++)
                text_printf(&s, "k%zu: 1\n", i);
            text_printf(&s, "k%zu: 2\n", twice);
            const char *line = arena_printf(
                t.a, "f:%zu:1: the key 'k%zu' stands twice: first in line %zu, column 1", keys + 1,
                twice, twice + 1);
            ck_assert_str_eq(verdict(&t, &s), line);
            trial_close(&t);
        }
    }
}
END_TEST

/* More diagnostics than are kept, on one long line. */
START_TEST(many_slips)
{
    struct trial t;
    trial_open(&t);
    struct text s;
    text_init(&s, t.a);
    text_add(&s, "a: {b: 1");
    for (size_t i = 0; i < MANY; i++)
        text_printf(&s, ", %zu", i);
    text_add(&s, "}");
    ck_assert_ptr_null(yaml_read(t.a, "f", text_str(&s), s.n, &t.d));
    ck_assert_uint_eq(t.d.count, MANY);
    ck_assert_uint_eq(t.d.list.n, DIAG_KEPT);
    trial_close(&t);
}
END_TEST

static bool read_with(const struct mem *mem, const char *text)
{
    jmp_buf out_of_memory;
    struct diags d;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    diags_init(&d, a);
    yaml_read(a, "f", text, strlen(text), &d);
    arena_free(a);
    return true;
}

/* Memory fails at each allocation in turn; nothing is kept, by us or (as the leak
 * check of a sanitizer build sees) by the parser. */
START_TEST(memory_runs_out)
{
    static const char *const texts[] = {"a: {b: [1, 2], c: \"\xC3\xA9\"}\nd:\n  - x\n",
                                        "a: *x\nb: !t 1\na: {c}\n? [d]\n: e\n",
                                        "a: \"open", "a: \x01"};
    struct text s;
    struct arena *a = arena_new(NULL);
    text_init(&s, a);
    many_keys(&s, 300, "", "\n");
    for (size_t i = 0; i < 5; i++) {
        size_t refused = 0;
        for (size_t k = 0;; k++) {
            struct failmem f;
            failmem_init(&f, k);
            bool done = read_with(&f.mem, i < 4 ? texts[i] : text_str(&s));
            failmem_check(&f);
            ck_assert_int_eq(done, f.failed == 0);
            if (done)
                break;
            refused++;
        }
        ck_assert_uint_gt(refused, 1);
    }
    arena_free(a);
}
END_TEST

Suite *suite_yaml_limits(void)
{
    Suite *s = suite_create("yaml limits");
    TCase *t = tcase_create("limits");
    tcase_set_timeout(t, 60);
    tcase_add_test(t, depth);
    tcase_add_test(t, key_length);
    tcase_add_test(t, scalar_length);
    tcase_add_test(t, number_of_nodes);
    tcase_add_test(t, file_size);
    tcase_add_loop_test(t, many_keys_and_their_duplicates, 0, 3);
    tcase_add_test(t, every_duplicate);
    tcase_add_test(t, many_slips);
    tcase_add_test(t, memory_runs_out);
    suite_add_tcase(s, t);
    return s;
}
