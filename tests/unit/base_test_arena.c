/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Arenas, arrays and string maps: zeroed and aligned memory, order of release,
 * the jump to the guard at every possible failing allocation, growth. */
#include <stdio.h>
#include <string.h>
#include <wchar.h>

#include "base/array.h"
#include "base/text.h"
#include "base_test.h"
#include "failmem.h"
#include "random.h"

static bool all_are(const unsigned char *p, size_t n, unsigned char value)
{
    for (size_t i = 0; i < n; i++)
        if (p[i] != value)
            return false;
    return true;
}

START_TEST(memory_is_zero_aligned_and_apart)
{
    struct failmem f;
    failmem_init(&f, FAILMEM_NEVER);
    struct arena *a = arena_new(&f.mem);
    struct random r = random_seed(1);
    unsigned char *blocks[500];
    size_t sizes[500];
    for (int i = 0; i < 500; i++) {
        sizes[i] = (size_t)random_range(&r, 0, i % 50 == 0 ? 3000000 : 300);
        blocks[i] = arena_alloc(a, sizes[i]);
        ck_assert_uint_eq((uintptr_t)blocks[i] % 16, 0);
        ck_assert(all_are(blocks[i], sizes[i], 0));
        memset(blocks[i], i + 1, sizes[i]);
    }
    for (int i = 0; i < 500; i++)
        ck_assert(all_are(blocks[i], sizes[i], (unsigned char)(i + 1)));
    arena_free(a);
    failmem_check(&f);
}
END_TEST

/* Around the size of a large page (2^21), beside small ones, from the C library itself. */
START_TEST(large_blocks_are_zero_and_apart)
{
    enum { BLOCKS = 24 };
    for (int round = 0; round < 2; round++) { /* what was freed comes again */
        struct arena *a = arena_new(NULL);
        struct random r = random_seed(7);
        unsigned char *blocks[BLOCKS];
        size_t sizes[BLOCKS];
        for (int i = 0; i < BLOCKS; i++) {
            size_t about = (size_t)random_range(&r, 1, 3) << 21;
            sizes[i] = i % 2 ? about + (size_t)random_range(&r, -70, 70) : 100;
            blocks[i] = arena_alloc(a, sizes[i]);
            ck_assert_uint_eq((uintptr_t)blocks[i] % 16, 0);
            ck_assert(all_are(blocks[i], sizes[i], 0));
            memset(blocks[i], i + 1, sizes[i]);
        }
        for (int i = 0; i < BLOCKS; i++)
            ck_assert(all_are(blocks[i], sizes[i], (unsigned char)(i + 1)));
        arena_free(a);
    }
}
END_TEST

START_TEST(sizes_at_the_edges)
{
    struct arena *a = arena_new(NULL);
    ck_assert_ptr_eq(arena_mem(a), &mem_system);
    ck_assert_ptr_nonnull(arena_alloc(a, 0));
    ck_assert_ptr_nonnull(arena_array(a, 0, 8));
    ck_assert_ptr_nonnull(arena_array(a, SIZE_MAX, 0));
    ck_assert_str_eq(arena_strn(a, "clearance", 5), "clear");
    ck_assert_str_eq(arena_strn(a, NULL, 0), "");
    ck_assert_mem_eq(arena_copy(a, "a\0b", 3), "a\0b", 3);
    ck_assert_str_eq(arena_printf(a, "%s=%d", "n", 7), "n=7");
    arena_free(a);
    arena_free(NULL);
}
END_TEST

/* Allocates in ways that must end in the guard. */
static void ask_too_much(struct arena *a, int way)
{
    switch (way) {
    case 0: arena_alloc(a, SIZE_MAX); break;
    case 1: arena_alloc(a, SIZE_MAX / 2 + 1); break;
    case 2: arena_array(a, SIZE_MAX / 8 + 1, 8); break;
    case 3: arena_array(a, 3, SIZE_MAX / 2); break;
    case 4: arena_exhausted(a);
    case 5: {
        struct {
            struct arena *arena;
            char *at;
            size_t n, cap;
        } xs = {0};
        xs.n = xs.cap = SIZE_MAX - 1;
        array_reserve(a, &xs, 2);
        break;
    }
    default: {
        struct text t;
        text_init(&t, a);
        text_addn(&t, "", SIZE_MAX / 2);
    }
    }
}

START_TEST(too_much_jumps_to_the_guard)
{
    jmp_buf guard;
    static struct failmem f; /* static: kept over the jump, as an automatic one need not be */
    failmem_init(&f, FAILMEM_NEVER);
    struct arena *a = arena_new(&f.mem);
    volatile bool jumped = false;
    if (setjmp(guard) == 0) {
        arena_guard(a, &guard);
        ask_too_much(arena_child(arena_child(a)), _i);
    } else {
        jumped = true;
    }
    ck_assert(jumped);
    arena_free(a);
    failmem_check(&f);
}
END_TEST

START_TEST(own_guard_goes_before_the_parents)
{
    jmp_buf outer, inner;
    struct arena *a = arena_new(NULL);
    struct arena *volatile child = NULL;
    volatile int where = 0;
    if (setjmp(outer) == 0) {
        arena_guard(a, &outer);
        child = arena_child(a);
        if (setjmp(inner) == 0) {
            arena_guard(child, &inner);
            arena_exhausted(child);
        }
        where = 1;
        arena_exhausted(a);
    } else {
        where += 10;
    }
    ck_assert_int_eq(where, 11);
    arena_free(a);
}
END_TEST

/* Each release appends its letter to this log. */
struct mark {
    char *log;
    char letter;
};

static void write_letter(void *object)
{
    struct mark *m = object;
    size_t n = strlen(m->log);
    m->log[n] = m->letter;
    m->log[n + 1] = 0;
}

START_TEST(release_goes_backwards_children_first)
{
    char log[16] = "";
    struct mark m[] = {{log, 'a'}, {log, 'b'}, {log, 'c'}, {log, 'd'}, {log, 'e'}};
    struct arena *a = arena_new(NULL);
    arena_defer(a, write_letter, &m[0]);
    struct arena *child = arena_child(a), *other = arena_child(a);
    arena_defer(child, write_letter, &m[1]);
    arena_defer(arena_child(child), write_letter, &m[2]);
    arena_defer(other, write_letter, &m[3]);
    arena_defer(a, write_letter, &m[4]);
    arena_free(other);
    ck_assert_str_eq(log, "d");
    arena_free(a);
    ck_assert_str_eq(log, "dcbea");
}
END_TEST

START_TEST(a_middle_child_may_go_first)
{
    struct failmem f;
    failmem_init(&f, FAILMEM_NEVER);
    struct arena *a = arena_new(&f.mem);
    struct arena *kids[3] = {arena_child(a), arena_child(a), arena_child(a)};
    size_t held = f.blocks;
    arena_free(kids[1]);
    ck_assert_uint_eq(f.blocks, held - 1);
    arena_free(kids[2]);
    ck_assert_ptr_eq(arena_mem(kids[0]), &f.mem);
    arena_free(a);
    failmem_check(&f);
}
END_TEST

static void count_release(void *object)
{
    ++*(int *)object;
}

/* Takes 300 resources, each to be released once; false when memory ran out. */
static bool take_resources(const struct mem *mem, int *released, int *taken)
{
    jmp_buf guard;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(guard)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &guard);
    for (int i = 0; i < 300; i++) {
        ++*taken;
        arena_defer(arena_child(a), count_release, released);
        ++*taken;
        arena_defer(a, count_release, released);
    }
    arena_free(a);
    return true;
}

START_TEST(no_resource_is_lost_when_memory_is_short)
{
    for (size_t k = 0;; k++) {
        struct failmem f;
        failmem_init(&f, k);
        int released = 0, taken = 0;
        bool done = take_resources(&f.mem, &released, &taken);
        failmem_check(&f);
        ck_assert_int_le(taken - released, 1); /* the child itself may have failed */
        if (f.failed == 0) {
            ck_assert(done);
            ck_assert_int_eq(released, 600);
            break;
        }
        ck_assert(!done);
    }
}
END_TEST

START_TEST(a_failed_defer_releases_at_once)
{
    static struct failmem f; /* static because of the jump */
    static int released;
    released = 0;
    failmem_init(&f, 1); /* the arena comes, its first chunk does not */
    struct arena *a = arena_new(&f.mem);
    jmp_buf guard;
    if (setjmp(guard) == 0) {
        arena_guard(a, &guard);
        arena_defer(a, count_release, &released);
        ck_abort_msg("the allocation should have failed");
    }
    ck_assert_int_eq(released, 1);
    arena_free(a);
    ck_assert_int_eq(released, 1);
    failmem_check(&f);
}
END_TEST

/* printf fails on a wide character that the C locale cannot write; the other way
 * to make it fail, more than INT_MAX bytes, takes gigabytes. */
START_TEST(text_that_cannot_be_formatted)
{
    struct arena *a = arena_new(NULL);
    jmp_buf guard;
    static const wchar_t lone_surrogate[] = {0xD800, 0};
    volatile int jumps = 0;
    arena_guard(a, &guard);
    static struct text t; /* static because of the jumps */
    text_init(&t, a);
    text_add(&t, "kept");
    if (setjmp(guard) == 0)
        arena_printf(a, "x%ls", lone_surrogate);
    else
        jumps++;
    if (setjmp(guard) == 0)
        text_printf(&t, "x%ls", lone_surrogate);
    else
        jumps++;
    ck_assert_int_eq(jumps, 2);
    ck_assert_str_eq(text_str(&t), "kept");
    ck_assert_uint_eq(t.n, 4);
    arena_free(a);
}
END_TEST

START_TEST(arrays_grow_and_keep)
{
    struct arena *a = arena_new(NULL);
    ARRAY(uint64_t) xs = {0};
    for (uint64_t i = 0; i < 100000; i++) {
        uint64_t *x = array_push(a, &xs);
        ck_assert_uint_eq(*x, 0);
        *x = i * i;
    }
    ck_assert_uint_eq(xs.n, 100000);
    ck_assert_uint_ge(xs.cap, xs.n);
    for (uint64_t i = 0; i < xs.n; i++)
        ck_assert_uint_eq(xs.at[i], i * i);
    ck_assert_uint_eq(*array_last(&xs), 99999ull * 99999ull);
    uint64_t *before = xs.at;
    array_reserve(a, &xs, xs.cap - xs.n);
    ck_assert_ptr_eq(xs.at, before);
    array_reserve(a, &xs, xs.cap - xs.n + 1);
    ck_assert_ptr_ne(xs.at, before);
    ck_assert_uint_eq(xs.at[316], 316 * 316);
    arena_free(a);
}
END_TEST

/* What stood in an array before it was cut shorter does not come back. */
START_TEST(a_new_element_is_zeroed_after_a_cut)
{
    struct arena *a = arena_new(NULL);
    ARRAY(uint64_t) xs = {0};
    *array_push(a, &xs) = 2385;
    *array_push(a, &xs) = 2386;
    xs.n--;
    ck_assert_uint_eq(*array_push(a, &xs), 0);
    ck_assert_uint_eq(xs.at[0], 2385);
    arena_free(a);
}
END_TEST

START_TEST(map_keeps_order_and_replaces)
{
    struct arena *a = arena_new(NULL);
    struct strmap m = {0};
    static int values[5000];
    ck_assert_ptr_null(strmap_get(&m, "k0"));
    ck_assert(!strmap_has(&m, ""));
    for (int i = 0; i < 5000; i++)
        strmap_set(a, &m, arena_printf(a, "k%d", i * 7919 % 5000), &values[i]);
    ck_assert_uint_eq(m.n, 5000);
    for (int i = 0; i < 5000; i++) {
        char key[16];
        snprintf(key, sizeof key, "k%d", i * 7919 % 5000);
        ck_assert_str_eq(m.at[i].key, key);
        ck_assert_ptr_eq(strmap_get(&m, key), &values[i]);
    }
    strmap_set(a, &m, "k3", &values[77]);
    ck_assert_uint_eq(m.n, 5000);
    ck_assert_ptr_eq(strmap_get(&m, "k3"), &values[77]);
    ck_assert_ptr_null(strmap_get(&m, "k5000"));
    strmap_set(a, &m, "", NULL);
    ck_assert(strmap_has(&m, ""));
    ck_assert_ptr_null(strmap_get(&m, ""));
    arena_free(a);
}
END_TEST

enum { MAP_KEYS = 300 };

/* Sets a key with memory from `a`; false when that ran out. */
static bool set_key(struct arena *a, struct strmap *m, char *key)
{
    jmp_buf guard;
    if (setjmp(guard))
        return false;
    arena_guard(a, &guard);
    strmap_set(a, m, key, key);
    return true;
}

/* Each key is first set from an arena that gets no chunk: it comes in without
 * memory, or the map stays as it was. */
START_TEST(map_is_whole_after_a_failure)
{
    static char keys[MAP_KEYS][8];
    struct arena *a = arena_new(NULL);
    struct strmap m = {0};
    size_t refused = 0;
    for (size_t n = 0; n < MAP_KEYS; n++) {
        snprintf(keys[n], sizeof keys[n], "k%zu", n);
        struct failmem f;
        failmem_init(&f, 1);
        struct arena *barren = arena_new(&f.mem);
        bool done = set_key(barren, &m, keys[n]);
        arena_free(barren);
        failmem_check(&f);
        ck_assert_int_eq(done, f.failed == 0);
        ck_assert_uint_eq(m.n, done ? n + 1 : n);
        ck_assert_int_eq(strmap_has(&m, keys[n]), done);
        for (size_t i = 0; i < n; i++)
            ck_assert_ptr_eq(strmap_get(&m, keys[i]), keys[i]);
        refused += !done;
        ck_assert(set_key(a, &m, keys[n]));
    }
    ck_assert_uint_eq(refused, 7); /* at 0, 8, 16, 32, 64, 128 and 256 keys */
    ck_assert_uint_eq(m.n, MAP_KEYS);
    arena_free(a);
}
END_TEST

/* Vectors of splitmix64 from seed 1234567: computed by the published C code. */
START_TEST(generator_repeats)
{
    struct random r = random_seed(1234567);
    ck_assert_uint_eq(random_next(&r), 6457827717110365317u);
    ck_assert_uint_eq(random_next(&r), 3203168211198807973u);
    ck_assert_uint_eq(random_next(&r), 9817491932198370423u);
    for (int i = 0; i < 1000; i++) {
        int64_t n = random_range(&r, -2, 2);
        ck_assert(n >= -2 && n <= 2);
        double x = random_log_uniform(&r, 1e-9, 2.385);
        ck_assert(x >= 1e-9 && x < 2.385);
    }
}
END_TEST

Suite *suite_arena(void)
{
    Suite *s = suite_create("arena, array, map");
    TCase *t = tcase_create("memory");
    tcase_add_test(t, memory_is_zero_aligned_and_apart);
    tcase_add_test(t, large_blocks_are_zero_and_apart);
    tcase_add_test(t, sizes_at_the_edges);
    tcase_add_loop_test(t, too_much_jumps_to_the_guard, 0, 7);
    tcase_add_test(t, own_guard_goes_before_the_parents);
    tcase_add_test(t, release_goes_backwards_children_first);
    tcase_add_test(t, a_middle_child_may_go_first);
    tcase_add_test(t, no_resource_is_lost_when_memory_is_short);
    tcase_add_test(t, a_failed_defer_releases_at_once);
    tcase_add_test(t, text_that_cannot_be_formatted);
    tcase_add_test(t, arrays_grow_and_keep);
    tcase_add_test(t, a_new_element_is_zeroed_after_a_cut);
    tcase_add_test(t, map_keeps_order_and_replaces);
    tcase_add_test(t, map_is_whole_after_a_failure);
    tcase_add_test(t, generator_repeats);
    suite_add_tcase(s, t);
    return s;
}
