/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reading: the state as of every entry against a replay in memory, times, contents. */
#include <stdio.h>
#include <string.h>

#include "random.h"
#include "store_test.h"

/* A register that lives in memory only: which number each site and value holds. */
enum { THINGS = 40, ENTRIES = 300 };
struct replay {
    struct thing {
        bool live;
        unsigned number;
        uint64_t seq;
    } at[2][THINGS];
};

static enum kind kind_at(int k)
{
    return k ? KIND_VALUE : KIND_SITE;
}

static const char *id_at(struct arena *a, int k, int i)
{
    return arena_printf(a, "%s-%03d", k ? "V" : "S", i);
}

/* One random entry: up to 6 things set or removed; real changes only. */
static void random_entry(struct random *r, struct sample *t, struct replay *now, uint64_t seq)
{
    while (t->changes.n == 0) {
        size_t n = 1 + random_index(r, seq % 50 == 49 ? 40 : 6);
        bool used[2][THINGS] = {0};
        for (size_t c = 0; c < n; c++) {
            int k = (int)random_index(r, 2), i = (int)random_index(r, THINGS);
            struct thing *thing = &now->at[k][i];
            if (used[k][i])
                continue;
            used[k][i] = true;
            if (thing->live && random_index(r, 3) == 0) {
                thing->live = false;
                sample_remove(t, kind_at(k), id_at(t->arena, k, i));
            } else {
                *thing = (struct thing){true, (unsigned)seq * 7 + (unsigned)c, seq};
                sample_change(t, kind_at(k), id_at(t->arena, k, i), thing->number);
            }
        }
    }
}

static const char *replay_dump(struct arena *a, const struct replay *r)
{
    struct text t;
    text_init(&t, a);
    for (int k = 0; k < 2; k++)
        for (int i = 0; i < THINGS; i++)
            if (r->at[k][i].live)
                text_printf(&t, "%s %s %llu %s\n", kinds[kind_at(k)].name, id_at(a, k, i),
                            (unsigned long long)r->at[k][i].seq,
                            sample_body(a, kind_at(k), r->at[k][i].number));
    return text_str(&t);
}

static const char *state_dump(struct arena *a, const struct store_objects *objects)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < objects->n; i++)
        text_printf(&t, "%s %s %llu %s\n", kinds[objects->at[i].kind].name, objects->at[i].id,
                    (unsigned long long)objects->at[i].seq, objects->at[i].json);
    return text_str(&t);
}

static void check_state(struct arena *a, struct store *s, uint64_t at, const struct replay *r)
{
    struct store_objects objects = {0};
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_state(s, at, &objects, &e), &e);
    ck_assert_str_eq(state_dump(a, &objects), replay_dump(a, r));
}

START_TEST(state_at_every_entry_equals_a_replay)
{
    struct arena *a = test_arena();
    static struct replay after[ENTRIES + 1];
    struct random r = random_seed(20260802);
    ohmen_error e = OHMEN_ERROR_INIT;
    const char *path = test_path(a, "long.ohmen");
    MUST(store_create(path, &e), &e);
    struct store *s = test_open(a, path, STORE_WRITE);
    for (uint64_t seq = 1; seq <= ENTRIES; seq++) {
        struct sample t;
        after[seq] = after[seq - 1];
        sample_begin(&t, a, seq - 1);
        random_entry(&r, &t, &after[seq], seq);
        ck_assert_uint_eq(test_commit(s, &t), seq);
    }
    for (uint64_t at = 0; at <= ENTRIES; at++) {
        struct arena *scratch = arena_child(a);
        check_state(scratch, s, at, &after[at]);
        arena_free(scratch);
    }
    check_state(a, s, UINT64_MAX, &after[ENTRIES]);
    check_state(a, s, ENTRIES + 5, &after[ENTRIES]);
    test_is_sound(s);
    arena_free(a);
}
END_TEST

/* The delta behind the last snapshot is at most half of what is live, at every entry. */
START_TEST(no_state_needs_a_long_delta)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    for (unsigned i = 0; i < 120; i++) {
        struct sample t;
        uint64_t head;
        MUST(store_head(s, &head, &e), &e);
        sample_begin(&t, a, head);
        sample_change(&t, KIND_SITE, arena_printf(a, "S-%u", i % 50 + 10), i);
        test_commit(s, &t);
        int64_t last, delta, live;
        MUST(query_number(&s->base, "SELECT max(at) FROM snapshot", 0, 0, &last, &e), &e);
        MUST(query_number(&s->base, "SELECT count(*) FROM version WHERE seq > ?1", last, 0, &delta,
                          &e),
             &e);
        MUST(query_number(&s->base, "SELECT count(*) FROM object", 0, 0, &live, &e), &e);
        ck_assert_int_le(2 * delta, live);
    }
    int64_t snapshots;
    MUST(query_number(&s->base, "SELECT count(*) FROM snapshot", 0, 0, &snapshots, &e), &e);
    ck_assert_int_le(snapshots, 2 * (120 + 9)); /* each row of one is paid by half a change */
    arena_free(a);
}
END_TEST

START_TEST(times_lead_to_entries)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_change(&t, KIND_SITE, "S-2", 1);
    int64_t first = 1767323045, second = t.t.utc;
    test_commit(s, &t);
    const struct {
        int64_t utc;
        uint64_t seq;
    } all[] = {{0, 0}, {first - 1, 0}, {first, 1}, {second - 1, 1}, {second, 2}, {INT64_MAX, 2}};
    for (size_t i = 0; i < sizeof all / sizeof all[0]; i++) {
        uint64_t seq = 99;
        MUST(store_at_time(s, all[i].utc, &seq, &e), &e);
        ck_assert_uint_eq(seq, all[i].seq);
    }
    arena_free(a);
}
END_TEST

static void content(struct store *s, uint64_t at, char hash[STORE_HASH_TEXT])
{
    ohmen_error e = OHMEN_ERROR_INIT;
    MUST(store_content_hash(s, at, hash, &e), &e);
}

START_TEST(contents_do_not_depend_on_history)
{
    struct arena *a = test_arena();
    const char *path, *other_path = test_path(a, "other.ohmen");
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    MUST(store_create(other_path, &e), &e);
    struct store *other = test_open(a, other_path, STORE_WRITE);
    struct sample t;
    sample_begin(&t, a, 0);
    sample_change(&t, KIND_SITE, "S-1", 99);
    sample_change(&t, KIND_SITE, "S-5", 99);
    sample_observe(&t, "log-18", 19990, "H-1");
    test_commit(other, &t);
    sample_begin(&t, a, 1);
    sample_fill(&t);
    sample_remove(&t, KIND_SITE, "S-5");
    test_commit(other, &t);
    char one[STORE_HASH_TEXT], two[STORE_HASH_TEXT], before[STORE_HASH_TEXT];
    content(s, UINT64_MAX, one);
    content(other, UINT64_MAX, two);
    ck_assert_str_eq(one, two);
    content(other, 1, before);
    ck_assert_str_ne(before, two);
    sample_begin(&t, a, 1);
    sample_observe(&t, "log-99", 19990, "H-1");
    test_commit(s, &t);
    content(s, UINT64_MAX, two);
    ck_assert_str_ne(one, two);
    content(s, 1, two);
    ck_assert_str_eq(one, two);
    arena_free(a);
}
END_TEST

/* No command withdraws yet; the state knows how all the same. */
START_TEST(withdrawn_observations_do_not_count)
{
    struct arena *a = test_arena();
    const char *path;
    ohmen_error e = OHMEN_ERROR_INIT;
    struct store *s = test_register(a, &path);
    struct sample t;
    sample_begin(&t, a, 1);
    sample_observe(&t, "log-17b", 20000, "V-1");
    ck_assert_uint_eq(test_commit(s, &t), 2);
    MUST(query_exec(&s->base,
                    "INSERT INTO withdrawal(observation, seq, replaced_by) "
                    "VALUES(1, 2, 3)",
                    &e),
         &e);
    struct store_observations all = {0};
    MUST(store_state_observations(s, 1, &all, &e), &e);
    ck_assert_uint_eq(all.n, 2);
    ck_assert_str_eq(all.at[1].ident, "log-17");
    MUST(store_state_observations(s, 2, &all, &e), &e);
    ck_assert_uint_eq(all.n, 2);
    ck_assert_str_eq(all.at[1].ident, "log-17b");
    ck_assert_str_eq(all.at[1].note, "wet \"day\"");
    ck_assert_int_eq(all.at[1].count, 2);
    arena_free(a);
}
END_TEST

void store_read_tests(Suite *suite)
{
    TCase *tc = tcase_create("read");
    tcase_set_timeout(tc, 120);
    tcase_add_test(tc, state_at_every_entry_equals_a_replay);
    tcase_add_test(tc, no_state_needs_a_long_delta);
    tcase_add_test(tc, times_lead_to_entries);
    tcase_add_test(tc, contents_do_not_depend_on_history);
    tcase_add_test(tc, withdrawn_observations_do_not_count);
    suite_add_tcase(suite, tc);
}
