/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Rolling back (math/rollback.h) against a recursion over the nodes as they were added, which
 * knows no layout: random trees and graphs, every instruction set that runs here, bit by bit. The
 * hand examples are worked out beside them. Owns an arena for each test. */
#include <check.h>
#include <inttypes.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "math/rollback.h"
#include "random.h"

enum { MOST_NODES = 90, MOST_ARITY = 9, ROUNDS = 400 };

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* ---- the recursion ---- */

struct world {
    size_t n, root;
    struct {
        enum rollback_kind kind;
        double amount;
        uint32_t arity;
        size_t child[MOST_ARITY];
        double p[MOST_ARITY];
    } node[MOST_NODES];
};

static double value_of(const struct world *w, size_t at)
{
    double child[MOST_ARITY] = {0}, after = 0;
    if (w->node[at].kind == ROLLBACK_END)
        return w->node[at].amount;
    for (uint32_t k = 0; k < w->node[at].arity; k++)
        child[k] = value_of(w, w->node[at].child[k]);
    for (uint32_t k = 0; k < w->node[at].arity; k++) {
        double p = w->node[at].p[k];
        if (w->node[at].kind == ROLLBACK_CHANCE)
            after = k == 0 ? p * child[k] : after + p * child[k];
        else if (k == 0 || child[k] > after)
            after = child[k];
    }
    return w->node[at].amount + after;
}

/* The definition as it stands, in long doubles. */
static long double equivalent_of(const struct world *w, size_t at, double tolerance)
{
    long double sum = 0, best = -INFINITY;
    if (w->node[at].kind == ROLLBACK_END)
        return w->node[at].amount;
    for (uint32_t k = 0; k < w->node[at].arity; k++) {
        long double child = equivalent_of(w, w->node[at].child[k], tolerance);
        sum += w->node[at].p[k] * expl(-child / tolerance);
        best = child > best ? child : best;
    }
    if (w->node[at].kind == ROLLBACK_CHANCE)
        best = -tolerance * logl(sum);
    return w->node[at].amount + best;
}

static uint32_t choice_of(const struct world *w, size_t at)
{
    uint32_t best = 0;
    for (uint32_t k = 1; k < w->node[at].arity; k++)
        if (value_of(w, w->node[at].child[k]) > value_of(w, w->node[at].child[best]))
            best = k;
    return best;
}

/* Adds p to each node that is on the way, path by path. */
static void walk_paths(const struct world *w, size_t at, double p, double *reach)
{
    reach[at] += p;
    if (w->node[at].kind == ROLLBACK_CHANCE)
        for (uint32_t k = 0; k < w->node[at].arity; k++)
            walk_paths(w, w->node[at].child[k], p * w->node[at].p[k], reach);
    else if (w->node[at].kind != ROLLBACK_END)
        walk_paths(w, w->node[at].child[choice_of(w, at)], p, reach);
}

/* ---- random ones ---- */

/* Amounts are often equal, so that there are ties, or whole, so that -0 and 0 come up. */
static double random_amount(struct random *r)
{
    switch (random_index(r, 3)) {
    case 0: return (double)random_range(r, -2, 2);
    case 1: return -0.0;
    default: return random_uniform(r, -50, 50);
    }
}

static void random_chance(struct random *r, uint32_t n, double *p)
{
    double sum = 0;
    for (uint32_t k = 0; k < n; k++)
        sum += p[k] = random_index(r, 5) == 0 ? 0 : random_log_uniform(r, 1e-6, 1);
    if (sum == 0)
        sum = p[0] = 1;
    for (uint32_t k = 0; k < n; k++)
        p[k] /= sum;
}

/* Node i of a world whose nodes from i + 1 on are there. */
static void random_node(struct random *r, struct world *w, size_t i, size_t reach)
{
    static const enum rollback_kind kinds[] = {ROLLBACK_CHOOSE, ROLLBACK_CHANCE, ROLLBACK_STEP};
    size_t left = w->n - 1 - i;
    w->node[i].amount = random_amount(r);
    w->node[i].kind = left && random_index(r, 4) ? random_pick(r, kinds) : ROLLBACK_END;
    w->node[i].arity = 0;
    if (w->node[i].kind == ROLLBACK_END)
        return;
    uint32_t most = w->node[i].kind == ROLLBACK_STEP ? 1 : random_index(r, 4) ? 3 : MOST_ARITY;
    w->node[i].arity = (uint32_t)random_range(r, 1, most);
    for (uint32_t k = 0; k < w->node[i].arity; k++)
        w->node[i].child[k] = i + 1 + random_index(r, left < reach ? left : reach);
    if (w->node[i].kind == ROLLBACK_CHANCE)
        random_chance(r, w->node[i].arity, w->node[i].p);
}

/* Paths must stay few enough for a recursion without memory. */
static double paths_of(const struct world *w, size_t at, double *known)
{
    if (known[at] == 0)
        for (uint32_t k = 0; k < w->node[at].arity; k++)
            known[at] += paths_of(w, w->node[at].child[k], known);
    if (known[at] == 0)
        known[at] = 1;
    return known[at];
}

static void random_world(struct random *r, struct world *w)
{
    double paths = INFINITY;
    while (paths > 3000) {
        double known[MOST_NODES] = {0};
        memset(w, 0, sizeof *w);
        w->n = 1 + random_index(r, MOST_NODES);
        size_t reach = 1 + random_index(r, MOST_NODES);
        for (size_t i = w->n; i-- > 0;)
            random_node(r, w, i, reach);
        paths = paths_of(w, w->root, known);
    }
}

/* Adds the nodes in an order of its own: node i of the world becomes number[i]. */
static const struct rollback *laid_out(struct random *r, const struct world *w, size_t *number)
{
    struct rollback_builder *b = rollback_new(arena);
    size_t order[MOST_NODES] = {0}, none = 0;
    for (size_t i = 0; i < w->n; i++) {
        size_t k = random_index(r, i + 1);
        order[i] = order[k];
        order[k] = i;
    }
    for (size_t i = 0; i < w->n; i++)
        number[order[i]] = i;
    for (size_t i = 0; i < w->n; i++) {
        size_t at = order[i], child[MOST_ARITY] = {0};
        bool chance = w->node[at].kind == ROLLBACK_CHANCE;
        for (uint32_t k = 0; k < w->node[at].arity; k++)
            child[k] = number[w->node[at].child[k]];
        size_t added = rollback_add(b, w->node[at].kind, w->node[at].amount, w->node[at].arity,
                                    child, chance ? w->node[at].p : NULL);
        ck_assert_uint_eq(added, i);
    }
    const struct rollback *l = rollback_lay_out(b, number[w->root], &none);
    ck_assert_ptr_nonnull(l);
    return l;
}

/* ---- the layout ---- */

static void check_run(const struct rollback *l, const struct rollback_run *run)
{
    size_t end = run->first_child + run->n * run->arity;
    ck_assert_uint_gt(run->n, 0);
    if (run->kind == ROLLBACK_LINK) {
        ck_assert_uint_le(run->first_child + run->n, l->n_links);
        for (size_t i = 0; i < run->n; i++) {
            size_t meant = l->link[run->first_child + i];
            ck_assert_uint_ge(meant, run->first + run->n);
            ck_assert_uint_eq(rollback_meant(l, run->first + i), meant);
            ck_assert_uint_eq(rollback_meant(l, meant), meant);
        }
    } else if (run->arity) {
        ck_assert_uint_ge(run->first_child, run->first + run->n);
        ck_assert_uint_le(end, l->n);
    }
}

START_TEST(layout_holds)
{
    struct random r = random_seed(71);
    struct world w;
    for (int round = 0; round < ROUNDS; round++) {
        size_t number[MOST_NODES] = {0}, next = 0;
        random_world(&r, &w);
        const struct rollback *l = laid_out(&r, &w, number);
        ck_assert_uint_eq(l->place[number[w.root]], 0);
        for (size_t i = 0; i < l->n_runs; next += l->runs[i++].n) {
            ck_assert_uint_eq(l->runs[i].first, next);
            check_run(l, &l->runs[i]);
        }
        ck_assert_uint_eq(next, l->n);
        for (size_t i = 0; i < w.n; i++) {
            size_t at = l->place[number[i]];
            for (uint32_t k = 0; at != ROLLBACK_NOWHERE && k < w.node[i].arity; k++) {
                size_t child = rollback_child(l, at, k);
                ck_assert_uint_eq(rollback_meant(l, child), l->place[number[w.node[i].child[k]]]);
                if (w.node[i].kind == ROLLBACK_CHANCE)
                    ck_assert(l->probability[child] == w.node[i].p[k]);
            }
        }
    }
}
END_TEST

/* ---- values ---- */

static bool same_bits(double x, double y)
{
    return memcmp(&x, &y, sizeof x) == 0;
}

static void check_values(const struct world *w, const struct rollback *l, const size_t *number,
                         enum isa isa)
{
    double *value = NEW_ARRAY(arena, l->n, double);
    uint32_t *chosen = NEW_ARRAY(arena, l->n, uint32_t);
    rollback_values(l, isa, value);
    rollback_policy(l, isa, value, chosen);
    for (size_t i = 0; i < w->n; i++) {
        size_t at = l->place[number[i]];
        if (at == ROLLBACK_NOWHERE)
            continue;
        ck_assert_msg(same_bits(value[at], value_of(w, i)), "%s node %zu: %a is not %a",
                      isa_name(isa), i, value[at], value_of(w, i));
        ck_assert_uint_eq(chosen[at], w->node[i].kind == ROLLBACK_CHOOSE ? choice_of(w, i) : 0);
    }
}

START_TEST(values_are_those_of_recursion)
{
    struct random r = random_seed(72);
    struct world w;
    for (int round = 0; round < ROUNDS; round++) {
        size_t number[MOST_NODES] = {0};
        random_world(&r, &w);
        const struct rollback *l = laid_out(&r, &w, number);
        for (int i = 0; i < ISA_COUNT; i++)
            if (isa_runs((enum isa)i))
                check_values(&w, l, number, (enum isa)i);
    }
}
END_TEST

START_TEST(reach_is_that_of_all_paths)
{
    struct random r = random_seed(73);
    struct world w;
    for (int round = 0; round < ROUNDS; round++) {
        size_t number[MOST_NODES] = {0};
        double paths[MOST_NODES] = {0}, mean = 0, size = 1;
        random_world(&r, &w);
        const struct rollback *l = laid_out(&r, &w, number);
        double *value = NEW_ARRAY(arena, l->n, double), *reach = NEW_ARRAY(arena, l->n, double);
        uint32_t *chosen = NEW_ARRAY(arena, l->n, uint32_t);
        rollback_values(l, isa_best(), value);
        rollback_policy(l, isa_best(), value, chosen);
        rollback_reach(l, chosen, reach);
        walk_paths(&w, w.root, 1, paths);
        for (size_t i = 0; i < w.n; i++) {
            size_t at = l->place[number[i]];
            if (at == ROLLBACK_NOWHERE)
                ck_assert(paths[i] == 0);
            else
                ck_assert(fabs(reach[at] - paths[i]) <= 1e-15 * 16 * paths[i]);
            mean += paths[i] * w.node[i].amount;
            size += paths[i] * fabs(w.node[i].amount);
        }
        ck_assert(fabs(mean - value[0]) <= 1e-13 * size);
    }
}
END_TEST

/* ---- certainty equivalents ---- */

START_TEST(equivalents_are_those_of_recursion)
{
    static const double tolerances[] = {7.3, 23.85, 412.5, 1e5};
    struct random r = random_seed(74);
    struct world w;
    for (int round = 0; round < ROUNDS; round++) {
        size_t number[MOST_NODES] = {0};
        random_world(&r, &w);
        double tolerance = random_pick(&r, tolerances);
        const struct rollback *l = laid_out(&r, &w, number);
        double *first = NEW_ARRAY(arena, l->n, double), *value = NEW_ARRAY(arena, l->n, double);
        rollback_equivalents(l, ISA_plain, tolerance, first);
        for (size_t i = 0; i < w.n; i++)
            if (l->place[number[i]] != ROLLBACK_NOWHERE) {
                double expected = (double)equivalent_of(&w, i, tolerance);
                double off = fabs(first[l->place[number[i]]] - expected);
                ck_assert_msg(off <= 1e-15 * tolerance + 2e-13 * 50, "off by %g", off);
            }
        for (int i = 0; i < ISA_COUNT; i++) {
            if (!isa_runs((enum isa)i))
                continue;
            rollback_equivalents(l, (enum isa)i, tolerance, value);
            ck_assert_mem_eq(first, value, l->n * sizeof *value);
        }
    }
}
END_TEST

/* One lottery; what it is worth with the tolerance. */
static double worth(uint32_t n, const double *p, const double *x, double tolerance)
{
    struct rollback_builder *b = rollback_new(arena);
    size_t *child = NEW_ARRAY(arena, n, size_t), circle = 0;
    for (uint32_t k = 0; k < n; k++)
        child[k] = rollback_add(b, ROLLBACK_END, x[k], 0, NULL, NULL);
    size_t root = rollback_add(b, ROLLBACK_CHANCE, 0, n, child, p);
    const struct rollback *l = rollback_lay_out(b, root, &circle);
    double *value = NEW_ARRAY(arena, l->n, double);
    rollback_equivalents(l, isa_best(), tolerance, value);
    return value[0];
}

/* By hand: with R = 1/ln 2 and amounts that are whole, exp(-x / R) = 2^-x. */
START_TEST(equivalents_by_hand)
{
    double r = 1 / 0.69314718055994530942;
    double even[] = {0.5, 0.5}, x[] = {0, 1};
    /* -R ln((1 + 1/2) / 2) = R ln(4/3) = log2(4/3) */
    ck_assert(fabs(worth(2, even, x, r) - 0.41503749927884381855) < 1e-15);
    /* far apart: the worse one and R ln 2 = 1 more */
    double far[] = {-4000, 4000};
    ck_assert(fabs(worth(2, even, far, r) - -3999) < 1e-12);
    /* the worse one of probability 2^-40: (2^4000 2^-40) dominates, -4000 + 40 */
    double rare[] = {0x1p-40, 1 - 0x1p-40};
    ck_assert(fabs(worth(2, rare, far, r) - -3960) < 1e-12);
    /* a probability of 0 does not count, however bad */
    double never[] = {0, 1}, bad[] = {-1e9, 3.25};
    ck_assert(worth(2, never, bad, r) == 3.25);
}
END_TEST

/* With R large the equivalent is the mean less variance / 2 R (J. W. Pratt, "Risk aversion in the
 * small and in the large", Econometrica 32 (1964) 122-136, from memory); the next term of the
 * series is the third moment / 6 R^2. */
START_TEST(equivalents_of_great_tolerance)
{
    double p[] = {0.2385, 0.7615}, x[] = {-12.25, 3.5}, mean = 0, variance = 0;
    for (int k = 0; k < 2; k++)
        mean += p[k] * x[k];
    for (int k = 0; k < 2; k++)
        variance += p[k] * (x[k] - mean) * (x[k] - mean);
    for (double r = 1e9; r < 1e17; r *= 10)
        ck_assert(fabs(worth(2, p, x, r) - (mean - variance / 2 / r)) < 1e-14);
    ck_assert(worth(2, p, x, INFINITY) == p[0] * x[0] + p[1] * x[1]);
}
END_TEST

/* More children than one block holds, each of one of three sorts. */
START_TEST(equivalents_of_many)
{
    enum { MANY = 1801 };
    double *p = NEW_ARRAY(arena, MANY, double), *x = NEW_ARRAY(arena, MANY, double);
    double three[3] = {0}, values[] = {-30.25, 2.385, 11};
    for (int k = 0; k < MANY; k++) {
        p[k] = 1.0 / MANY;
        x[k] = values[k % 7 % 3];
        three[k % 7 % 3] += p[k];
    }
    double expected = worth(3, three, values, 9.5);
    ck_assert(fabs(worth(MANY, p, x, 9.5) - expected) < 1e-12);
}
END_TEST

/* ---- ends of the range ---- */

START_TEST(circles_are_found)
{
    for (size_t long_one = 1; long_one < 40; long_one++) {
        struct rollback_builder *b = rollback_new(arena);
        size_t circle = ROLLBACK_NOWHERE;
        size_t first[] = {1, 2};
        rollback_add(b, ROLLBACK_CHOOSE, 0, 2, first, NULL);
        rollback_add(b, ROLLBACK_END, 0, 0, NULL, NULL);
        for (size_t i = 2; i < 2 + long_one; i++) {
            size_t next[] = {1, i + 1 < 2 + long_one ? i + 1 : 2};
            rollback_add(b, ROLLBACK_CHOOSE, 0, 2, next, NULL);
        }
        ck_assert_ptr_null(rollback_lay_out(b, 0, &circle));
        ck_assert_uint_ge(circle, 2);
        ck_assert_uint_lt(circle, 2 + long_one);
        ck_assert_ptr_nonnull(rollback_lay_out(b, 1, &circle));
    }
}
END_TEST

/* Deep, so that recursion in the builder would end badly; the mean of what steps add up to. */
START_TEST(long_chains)
{
    enum { DEEP = 1000000 };
    struct rollback_builder *b = rollback_new(arena);
    size_t circle = 0;
    for (size_t i = 0; i < DEEP; i++) {
        size_t next = i + 1;
        rollback_add(b, ROLLBACK_STEP, 0.25, 1, &next, NULL);
    }
    rollback_add(b, ROLLBACK_END, 0.25, 0, NULL, NULL);
    const struct rollback *l = rollback_lay_out(b, 0, &circle);
    double *value = NEW_ARRAY(arena, l->n, double);
    rollback_values(l, isa_best(), value);
    ck_assert(value[0] == 0.25 * (DEEP + 1));
}
END_TEST

/* A recombining tree of `DEEP` ups and downs, and the same unfolded. */
enum { DEEP_TREE = 13 };

static size_t add_unfolded(struct rollback_builder *b, int depth, int ups, double up)
{
    double x = 3.25 * ups - 1.75 * (depth - ups) - 0.3125, p[] = {up, 1 - up};
    if (depth == DEEP_TREE)
        return rollback_add(b, ROLLBACK_END, x, 0, NULL, NULL);
    size_t child[] = {add_unfolded(b, depth + 1, ups + 1, up), add_unfolded(b, depth + 1, ups, up)};
    size_t on = rollback_add(b, ROLLBACK_CHANCE, -0.11 * depth, 2, child, p);
    size_t stop = rollback_add(b, ROLLBACK_END, x, 0, NULL, NULL), choice[] = {on, stop};
    return rollback_add(b, ROLLBACK_CHOOSE, 0, 2, choice, NULL);
}

/* Three nodes for each (depth, ups): the choice, going on, stopping. */
static size_t add_folded(struct rollback_builder *b, double up)
{
    size_t next = 0;
    for (int depth = 0; depth <= DEEP_TREE; depth++) {
        size_t below = next + 3 * ((size_t)depth + 1);
        for (int ups = 0; ups <= depth; ups++, next += 3) {
            double x = 3.25 * ups - 1.75 * (depth - ups) - 0.3125, p[] = {up, 1 - up};
            size_t choice[] = {next + 1, next + 2};
            size_t child[] = {below + 3 * ((size_t)ups + 1), below + 3 * (size_t)ups};
            bool last = depth == DEEP_TREE;
            rollback_add(b, ROLLBACK_CHOOSE, 0, last ? 1 : 2, last ? &choice[1] : choice, NULL);
            if (last)
                rollback_add(b, ROLLBACK_END, 0, 0, NULL, NULL);
            else
                rollback_add(b, ROLLBACK_CHANCE, -0.11 * depth, 2, child, p);
            rollback_add(b, ROLLBACK_END, x, 0, NULL, NULL);
        }
    }
    return 0;
}

START_TEST(folded_is_unfolded)
{
    static const double tolerances[] = {2.385, 40, INFINITY};
    for (int i = 0; i < 3; i++) {
        struct rollback_builder *b = rollback_new(arena), *f = rollback_new(arena);
        size_t circle = 0, root = add_unfolded(b, 0, 0, 0.4375);
        const struct rollback *wide = rollback_lay_out(b, root, &circle);
        const struct rollback *l = rollback_lay_out(f, add_folded(f, 0.4375), &circle);
        double *value = NEW_ARRAY(arena, wide->n, double), *small = NEW_ARRAY(arena, l->n, double);
        rollback_equivalents(wide, isa_best(), tolerances[i], value);
        rollback_equivalents(l, isa_best(), tolerances[i], small);
        ck_assert_uint_lt(20 * l->n, wide->n);
        ck_assert(fabs(small[0] - value[0]) <= 1e-12);
        ck_assert(small[0] != 0);
    }
}
END_TEST

/* ---- the same bits everywhere ---- */

static uint64_t add_bits(uint64_t hash, double y)
{
    uint64_t bits = 0;
    memcpy(&bits, &y, sizeof bits);
    for (int i = 0; i < 64; i += 8)
        hash = (hash ^ (bits >> i & 0xff)) * UINT64_C(0x100000001b3); /* FNV-1a */
    return hash;
}

/* The hash is computed, by this code: it must not change with compiler or machine. */
START_TEST(same_bits_everywhere)
{
    uint64_t hash = UINT64_C(0xcbf29ce484222325);
    struct random r = random_seed(75);
    struct world w;
    for (int round = 0; round < ROUNDS; round++) {
        size_t number[MOST_NODES] = {0};
        random_world(&r, &w);
        const struct rollback *l = laid_out(&r, &w, number);
        double *value = NEW_ARRAY(arena, l->n, double);
        rollback_values(l, isa_best(), value);
        for (size_t i = 0; i < l->n; i++)
            hash = add_bits(hash, value[i]);
        rollback_equivalents(l, isa_best(), 23.85, value);
        for (size_t i = 0; i < l->n; i++)
            hash = add_bits(hash, value[i]);
    }
    ck_assert_msg(hash == UINT64_C(0x66208b7ccc256add), "hash 0x%016" PRIx64, hash);
}
END_TEST

int main(void)
{
    Suite *s = suite_create("rollback");
    TCase *t = tcase_create("rollback");
    tcase_set_timeout(t, 120);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, layout_holds);
    tcase_add_test(t, values_are_those_of_recursion);
    tcase_add_test(t, reach_is_that_of_all_paths);
    tcase_add_test(t, equivalents_are_those_of_recursion);
    tcase_add_test(t, equivalents_by_hand);
    tcase_add_test(t, equivalents_of_great_tolerance);
    tcase_add_test(t, equivalents_of_many);
    tcase_add_test(t, circles_are_found);
    tcase_add_test(t, long_chains);
    tcase_add_test(t, folded_is_unfolded);
    tcase_add_test(t, same_bits_everywhere);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed == 0 && run > 0 ? EXIT_SUCCESS : EXIT_FAILURE;
}
