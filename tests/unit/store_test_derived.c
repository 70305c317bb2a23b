/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Derived tables: what stands in them, and that they can be dropped and made anew. */
#include <string.h>

#include "base/file.h"
#include "store/projection.h"
#include "store_test.h"

/* All rows of a SELECT as one text: cells parted by "|", rows by "; ". */
static const char *answer(struct arena *a, const struct base *b, const char *sql)
{
    struct text t;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct query q = query_new(b, sql, &e);
    text_init(&t, a);
    for (size_t row = 0; query_row(&q); row++) {
        text_add(&t, row ? "; " : "");
        for (int i = 0; i < sqlite3_column_count(q.stmt); i++)
            text_printf(&t, "%s%s", i ? "|" : "", query_is_null(&q, i) ? "-" : query_name(&q, i));
    }
    MUST(query_end(&q), &e);
    return text_str(&t);
}

START_TEST(one_select_answers)
{
    static const struct {
        const char *sql, *rows;
    } all[] = {
        {"SELECT id, name, customers FROM site", "S-1|Station 7|107"},
        {"SELECT id, kind, site, per_demand_is, test_every, test_last, test_costs FROM element",
         "E-1|relay|S-1|2 %|4 a|2017-09-20|-; E-2|relay|S-1|3 %|4 a|2017-09-20|-"},
        {"SELECT scheme, path, within, op, k, name FROM scheme_member ORDER BY path",
         "C-1|works||all|2|-; C-1|works/0|works|name|-|E-1; C-1|works/1|works|any|1|-; "
         "C-1|works/1/0|works/1|name|-|E-1; C-1|works/1/1|works/1|name|-|E-2"},
        {"SELECT hazard, key, cleared_by, \"in\", outcome FROM response_row",
         "H-1|main|C-1|1.1 s|slow; H-1|never|-|-|-"},
        {"SELECT r.key, b.key, b.share, b.outcome FROM branch b JOIN response_row r ON "
         "r.hazard = b.hazard AND r.path = b.within ORDER BY b.key",
         "never|fire|20 %|burnt; never|no-fire|rest|slow"},
        {"SELECT o.key, d.key, d.category, d.\"is\" FROM damage d JOIN outcome o ON "
         "o.hazard = d.hazard AND o.path = d.within",
         "burnt|rebuild|equipment|41 kEUR"},
        {"SELECT option, at, value FROM option_change", "P-1|hazards/H-1/frequency|0.6 * was"},
        {"SELECT id, invest_is FROM option", "P-1|141 kEUR"},
        {"SELECT key, path FROM decision_choose", "keep|choose/keep; renew|choose/renew"},
        {"SELECT path, within, position, pay, apply FROM step ORDER BY path",
         "choose/renew/0|choose/renew|0|2 kEUR|-; choose/renew/1|choose/renew|1|-|-; "
         "choose/renew/1/choose/now/0|choose/renew/1/choose/now|0|-|P-1"},
        {"SELECT currency, prices, horizon FROM register", "EUR|2026|25 a"},
        {"SELECT value FROM register_counts", "bay"},
        {"SELECT kind, id, seq FROM object ORDER BY kind, id LIMIT 3",
         "decision|D-1|1; element|E-1|1; element|E-2|1"},
        {"SELECT \"from\", path, trace FROM reference WHERE \"to\" = 'S-1' ORDER BY \"from\"",
         "E-1|site|1; E-2|site|1; H-1|site|1"},
        {"SELECT path, \"to\", trace FROM reference WHERE \"from\" = 'H-1' ORDER BY path",
         "frequency|V-1|0; response/main/cleared-by|C-1|0; site|S-1|1"},
        {"SELECT DISTINCT \"to\" FROM reference WHERE \"from\" = 'C-1' ORDER BY 1", "E-1; E-2"},
        {"SELECT count(*), min(at) FROM snapshot", "9|1"},
    };
    struct arena *a = test_arena();
    const char *path;
    struct store *s = test_register(a, &path);
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++)
        ck_assert_str_eq(answer(a, &s->base, all[i].sql), all[i].rows);
    arena_free(a);
}
END_TEST

/* Every row of every derived table. */
static const char *dump_derived(struct arena *a, struct store *s)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < projection_n_fixed; i++)
        if (projection_fixed[i].n_key)
            text_printf(&t, "%s: %s\n", projection_fixed[i].name,
                        answer(a, &s->base,
                               arena_printf(a, "SELECT * FROM \"%s\" ORDER BY 1, 2, 3",
                                            projection_fixed[i].name)));
    const struct projection *p = store_projection(s);
    for (size_t i = 0; i < p->relations.n; i++)
        text_printf(&t, "%s: %s\n", p->relations.at[i]->name,
                    answer(a, &s->base,
                           arena_printf(a, "SELECT * FROM \"%s\" ORDER BY 1, 2",
                                        p->relations.at[i]->name)));
    return text_str(&t);
}

static void history_of_changes(struct arena *a, struct store *s)
{
    struct sample t;
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_HAZARD, "H-1", 9);
    sample_change(&t, KIND_HAZARD, "H-2", 3);
    sample_remove(&t, KIND_DECISION, "D-1");
    test_commit(s, &t);
    sample_begin(&t, a, 2);
    sample_change(&t, KIND_REGISTER, REGISTER_ID, 6);
    sample_change(&t, KIND_ELEMENT, "E-2", 8);
    test_commit(s, &t);
    sample_begin(&t, a, 3);
    sample_change(&t, KIND_SCHEME, "C-1", 8);
    test_commit(s, &t);
}

START_TEST(rebuilt_tables_are_equal)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    history_of_changes(a, s);
    const char *before = dump_derived(a, s);
    test_is_sound(s);
    MUST(store_rebuild(s, &e), &e);
    ck_assert_str_eq(dump_derived(a, s), before);
    ck_assert_ptr_nonnull(strstr(before, "H-2"));
    ck_assert_ptr_nonnull(strstr(before, "\ndecision: \n"));
    test_is_sound(s);
    arena_free(a);
}
END_TEST

/* A file whose derived tables another version made: it is read, told by the audit, and
 * put right by the next entry. */
START_TEST(tables_of_another_version_are_replaced)
{
    struct arena *a = test_arena();
    const char *path;
    struct store *s = test_register(a, &path);
    history_of_changes(a, s);
    const char *before = dump_derived(a, s);
    test_tamper(path,
                "DROP TABLE damage; CREATE TABLE damage(old TEXT); CREATE TABLE older(x TEXT)");
    struct store *other = test_open(a, path, STORE_WRITE);
    ck_assert(test_finds(other, "not laid out"));
    struct sample t;
    sample_begin(&t, a, 4);
    sample_change(&t, KIND_SITE, "S-1", 8);
    ck_assert_uint_eq(test_commit(other, &t), 5);
    test_is_sound(other);
    ck_assert_str_eq(answer(a, &other->base, "SELECT count(*) FROM damage"), "2");
    ck_assert_str_eq(
        answer(a, &other->base, "SELECT count(*) FROM sqlite_schema WHERE name = 'older'"), "0");
    ck_assert_str_ne(dump_derived(a, other), before);
    arena_free(a);
}
END_TEST

/* Another wording of a help text is no other layout; another column is. */
START_TEST(comments_are_no_layout)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    bool ours = false;
    struct store *s = test_register(a, &path);
    const char *sql = projection_sql(a, store_projection(s)->of[KIND_SITE]);
    const char *word = strstr(sql, "Name of the place");
    ck_assert_ptr_nonnull(word);
    const char *other = arena_printf(a, "%.*sWhat it is called%s", (int)(word - sql), sql,
                                     word + strlen("Name of the place"));
    const char *kept = "CREATE TABLE kept AS SELECT * FROM site; DROP TABLE site;";
    test_tamper(path, arena_printf(a, "%s %s; INSERT INTO site SELECT * FROM kept; DROP TABLE kept",
                                   kept, other));
    MUST(rebuild_layout_is_ours(s, &ours, &e), &e);
    ck_assert(ours);
    test_is_sound(s);
    test_tamper(path, "ALTER TABLE site ADD COLUMN more TEXT");
    MUST(rebuild_layout_is_ours(s, &ours, &e), &e);
    ck_assert(!ours);
    arena_free(a);
}
END_TEST

/* After a change of the field tables: store_test SOURCE-FOLDER accept. */
START_TEST(the_shown_text_is_true)
{
    struct arena *a = test_arena();
    char *shown;
    size_t n;
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *name = arena_printf(a, "%s/schema/derived.sql", test_source);
    MUST(file_read(a, name, 1 << 20, &shown, &n, &e), &e);
    ck_assert_str_eq(shown, projection_text(a));
    arena_free(a);
}
END_TEST

/* Every field of every kind leads to a table that SQLite takes, and names are unique. */
START_TEST(each_relation_has_its_name)
{
    struct arena *a = test_arena();
    const struct projection *p = projection_new(a);
    struct strmap names = {0};
    ck_assert_uint_ge(p->relations.n, KIND_COUNT);
    for (size_t i = 0; i < p->relations.n; i++) {
        const struct relation *r = p->relations.at[i];
        struct strmap columns = {0};
        ck_assert_uint_eq(r->index, i);
        if (strmap_has(&names, r->name))
            ck_abort_msg("two relations %s", r->name);
        strmap_set(a, &names, r->name, a);
        for (size_t c = 0; c < r->columns.n; c++) {
            if (strmap_has(&columns, r->columns.at[c].name))
                ck_abort_msg("two columns %s.%s", r->name, r->columns.at[c].name);
            strmap_set(a, &columns, r->columns.at[c].name, a);
        }
    }
    arena_free(a);
}
END_TEST

void store_derived_tests(Suite *suite)
{
    TCase *tc = tcase_create("derived");
    tcase_set_timeout(tc, 60);
    tcase_add_test(tc, one_select_answers);
    tcase_add_test(tc, rebuilt_tables_are_equal);
    tcase_add_test(tc, tables_of_another_version_are_replaced);
    tcase_add_test(tc, comments_are_no_layout);
    tcase_add_test(tc, the_shown_text_is_true);
    tcase_add_test(tc, each_relation_has_its_name);
    suite_add_tcase(suite, tc);
}
