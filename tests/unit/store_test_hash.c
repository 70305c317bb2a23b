/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hashes against an independent BLAKE2b: the program b2sum of GNU coreutils (RFC 7693),
 * fed with preimages that are put together here from docs/journal-format.md, not by the
 * code under test. The recipes of that page are run as they stand. */
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

#include "base/file.h"
#include "store/journal.h"
#include "store_test.h"

/* The first 64 characters that a shell command prints. */
static const char *output_of(struct arena *a, const char *command)
{
    char *line = arena_alloc(a, 4096);
    FILE *p = popen(command, "r");
    ck_assert_ptr_nonnull(p);
    if (!fgets(line, 4096, p))
        line[0] = 0;
    ck_assert_int_eq(pclose(p), 0);
    line[strcspn(line, "\n")] = 0;
    return line;
}

static const char *b2sum(struct arena *a, const char *bytes, size_t n)
{
    const char *path = test_path(a, "preimage");
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(file_write(path, bytes, n, &e), &e);
    return output_of(a, arena_printf(a, "b2sum -l 256 < %s | cut -c1-64", path));
}

/* RFC 7693 gives BLAKE2b-512 only; b2sum is the reference for 256 bits. */
START_TEST(plain_hashes_agree)
{
    struct arena *a = test_arena();
    static const size_t lengths[] = {0, 1, 3, 127, 128, 129, 255, 256, 257, 5000};
    char bytes[5000], hash[STORE_HASH_TEXT];
    for (size_t i = 0; i < sizeof bytes; i++)
        bytes[i] = (char)(i * 37 + 11);
    for (size_t i = 0; i < sizeof lengths / sizeof lengths[0]; i++) {
        store_hash(bytes, lengths[i], hash);
        ck_assert_str_eq(hash, b2sum(a, bytes, lengths[i]));
    }
    arena_free(a);
}
END_TEST

/* A text of the samples as JSON: only quotes and line feeds need an escape there. */
static const char *quoted(struct arena *a, const char *s)
{
    struct text t;
    text_init(&t, a);
    text_byte(&t, '"');
    for (; *s; s++) {
        if (*s == '\n') {
            text_add(&t, "\\n");
        } else {
            if (*s == '"')
                text_byte(&t, '\\');
            text_byte(&t, *s);
        }
    }
    text_byte(&t, '"');
    return text_str(&t);
}

static const char *body_by_hand(struct arena *a, const struct store_object *o)
{
    const char *preimage = arena_printf(a, "ohmen body 1\nkind \"%s\"\nformat 1\nbytes %zu\n%s",
                                        kinds[o->kind].name, strlen(o->json), o->json);
    return b2sum(a, preimage, strlen(preimage));
}

static int by_kind_name(const void *p, const void *q)
{
    const struct store_object *a = p, *b = q;
    int order = strcmp(kinds[a->kind].name, kinds[b->kind].name);
    return order ? order : strcmp(a->id, b->id);
}

static void versions_by_hand(struct arena *a, struct text *t, struct store_objects *objects)
{
    qsort(objects->at, objects->n, sizeof *objects->at, by_kind_name);
    for (size_t i = 0; i < objects->n; i++) {
        const struct store_object *o = &objects->at[i];
        const char *body = body_by_hand(a, o);
        ck_assert_str_eq(body, o->hash);
        text_printf(t, "version \"%s\" \"%s\" \"%s\"\n", kinds[o->kind].name, o->id, body);
    }
}

START_TEST(entry_1_agrees)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct store_objects objects = {0};
    struct store_entries entries = {0};
    MUST(store_state(s, 1, &objects, &e), &e);
    MUST(store_entries(s, 1, 1, &entries, &e), &e);
    struct text digest;
    text_init(&digest, a);
    text_add(&digest, "ohmen digest 1\n");
    versions_by_hand(a, &digest, &objects);
    /* 20000 and 19990 days after 1970-01-01 (date -u -d @1728000000 and @1727136000) */
    text_add(&digest, "observation 1 \"log-17\" \"2024-10-04\" \"fault\" \"V-1\" \"cleared\" 2 "
                      "\"wet \\\"day\\\"\"\n"
                      "observation 2 \"log-18\" \"2024-09-24\" \"fault\" \"H-1\" \"cleared\" 2 "
                      "\"wet \\\"day\\\"\"\n");
    const char *by_hand = b2sum(a, text_str(&digest), digest.n);
    ck_assert_str_eq(by_hand, entries.at[0].digest);
    const char *entry = arena_printf(
        a,
        "ohmen entry 1\nseq 1\nutc 1767323045\nauthor \"J. Doe\"\nreason %s\ncommand \"import\"\n"
        "tool \"ohmen 0.1.0\"\nchanges 9\nobservations 2\nwithdrawals 0\nrecords 0\ndigest \"%s\"\n"
        "prev \"%064d\"\n",
        quoted(a, "survey \"north\"\nand south"), by_hand, 0);
    ck_assert_str_eq(b2sum(a, entry, strlen(entry)), entries.at[0].hash);
    arena_free(a);
}
END_TEST

START_TEST(entry_2_follows_entry_1)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_remove(&t, KIND_DECISION, "D-1");
    test_commit(s, &t);
    struct store_entries entries = {0};
    MUST(store_entries(s, 0, UINT64_MAX, &entries, &e), &e);
    static const char digest[] = "ohmen digest 1\nversion \"decision\" \"D-1\" null\n";
    ck_assert_str_eq(b2sum(a, digest, sizeof digest - 1), entries.at[1].digest);
    ck_assert_str_eq(entries.at[1].prev, entries.at[0].hash);
    arena_free(a);
}
END_TEST

START_TEST(contents_agree)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct store_objects objects = {0};
    MUST(store_state(s, 1, &objects, &e), &e);
    qsort(objects.at, objects.n, sizeof *objects.at, by_kind_name);
    struct text t;
    text_init(&t, a);
    text_add(&t, "ohmen content 1\n");
    for (size_t i = 0; i < objects.n; i++)
        text_printf(&t, "object \"%s\" \"%s\" \"%s\"\n", kinds[objects.at[i].kind].name,
                    objects.at[i].id, objects.at[i].hash);
    text_add(&t, "observation \"log-18\" \"2024-09-24\" \"fault\" \"H-1\" \"cleared\" "
                 "\"wet \\\"day\\\"\" 2\n"
                 "observation \"log-17\" \"2024-10-04\" \"fault\" \"V-1\" \"cleared\" "
                 "\"wet \\\"day\\\"\" 2\n");
    char hash[STORE_HASH_TEXT];
    MUST(store_content_hash(s, UINT64_MAX, hash, &e), &e);
    ck_assert_str_eq(b2sum(a, text_str(&t), t.n), hash);
    arena_free(a);
}
END_TEST

/* Lines of docs/journal-format.md that begin with "$ " are run; the next line is what
 * they print. */
START_TEST(recipes_of_the_page_hold)
{
    struct arena *a = test_arena();
    char *page;
    size_t n, run = 0;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *name = arena_printf(a, "%s/docs/journal-format.md", test_source);
    MUST(file_read(a, name, 1 << 20, &page, &n, &e), &e);
    for (char *line = page, *next; line && *line; line = next) {
        next = strchr(line, '\n');
        if (next)
            *next++ = 0;
        if (strncmp(line, "$ ", 2) != 0)
            continue;
        const char *expected = arena_strn(a, next, strcspn(next, "\n"));
        ck_assert_str_eq(output_of(a, line + 2), expected);
        run++;
    }
    ck_assert_uint_ge(run, 4);
    arena_free(a);
}
END_TEST

/* The same vectors from the code under test. */
START_TEST(vectors_of_the_page_hold)
{
    struct arena *a = test_arena();
    static const char json[] = "{\"name\":\"Station one\"}";
    char body[STORE_HASH_TEXT], digest[STORE_HASH_TEXT], hash[STORE_HASH_TEXT];
    char *page;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    journal_body_hash(a, "site", 1, json, sizeof json - 1, body);
    struct hashing h;
    hashing_begin(&h, a, "ohmen digest 1");
    journal_version_line(&h, "site", "S-1", body);
    hashing_end(&h, digest);
    const struct journal_entry entry = {.seq = 1,
                                        .utc = 1767323045,
                                        .author = "J. Doe",
                                        .reason = "first \"survey\"",
                                        .command = "import",
                                        .tool = "ohmen 0.1.0",
                                        .changes = 1,
                                        .digest = digest,
                                        .prev = JOURNAL_FIRST};
    journal_entry_hash(a, &entry, hash);
    const char *name = arena_printf(a, "%s/docs/journal-format.md", test_source);
    MUST(file_read(a, name, 1 << 20, &page, &n, &e), &e);
    ck_assert_ptr_nonnull(strstr(page, body));
    ck_assert_ptr_nonnull(strstr(page, digest));
    ck_assert_ptr_nonnull(strstr(page, hash));
    arena_free(a);
}
END_TEST

void store_hash_tests(Suite *suite)
{
    TCase *tc = tcase_create("hash");
    tcase_set_timeout(tc, 60);
    tcase_add_test(tc, plain_hashes_agree);
    tcase_add_test(tc, entry_1_agrees);
    tcase_add_test(tc, entry_2_follows_entry_1);
    tcase_add_test(tc, contents_agree);
    tcase_add_test(tc, recipes_of_the_page_hold);
    tcase_add_test(tc, vectors_of_the_page_hold);
    suite_add_tcase(suite, tc);
}
