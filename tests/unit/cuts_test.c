/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Minimal cut sets against oracles of another kind: the definition itself applied to
 * truth tables, sets of a structure multiplied out from its elements up (with
 * absorption), binomial coefficients, and products in quad precision (113 bits), which
 * are exact for the factors of few bits that are drawn to make ties. */
#include "graph/cuts.h"
#include "failmem.h"
#include "random.h"

#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

__extension__ typedef __float128 quad;

enum { MOST_VARIABLES = 60, MOST_GATES = 100, MOST_CHILDREN = 5, MOST_SETS = 1000 };

static struct arena *arena;
static struct diagram_builder *b;

static void setup(void)
{
    arena = arena_new(NULL);
    b = diagram_builder_new(arena);
}

static void teardown(void)
{
    arena_free(arena);
}

static void again(void)
{
    teardown();
    setup();
}

static const struct diagram *freeze(bfun f)
{
    const struct diagram *d = diagram_freeze(arena, b, 1, &f);
    ck_assert_ptr_nonnull(d);
    return d;
}

static struct cuts find(bfun f, const double *p, size_t limit)
{
    struct cuts c = cuts_find(arena, freeze(f), 0, p, limit);
    ck_assert(!c.too_many);
    return c;
}

static bfun variable(uint32_t v)
{
    return diagram_variable(b, v);
}

static uint64_t mask_of(const struct cut *c)
{
    uint64_t mask = 0;
    for (uint32_t i = 0; i < c->n_members; i++) {
        ck_assert(i == 0 || c->members[i - 1] < c->members[i]);
        mask |= UINT64_C(1) << c->members[i];
    }
    return mask;
}

/* ---- the order of sets, from its words in cuts.h ---- */

struct expected {
    uint64_t set;
    int n_zero, n_members;
    quad product; /* of those that are not 0 */
};

static struct expected expect(uint64_t set, const double *p)
{
    struct expected x = {.set = set, .product = 1};
    for (int v = 0; v < MOST_VARIABLES; v++)
        if (set >> v & 1) {
            x.n_members++;
            x.n_zero += p[v] == 0;
            x.product *= p[v] == 0 ? 1 : p[v];
        }
    return x;
}

static int by_order(const void *a, const void *c)
{
    const struct expected *x = a, *y = c;
    if (x->n_zero != y->n_zero)
        return x->n_zero - y->n_zero;
    if (x->product != y->product)
        return x->product > y->product ? -1 : 1;
    if (x->n_members != y->n_members)
        return x->n_members - y->n_members;
    uint64_t differ = x->set ^ y->set;
    return differ ? (x->set & differ & -differ ? -1 : 1) : 0;
}

/* All sets are known: compares what was found with the first of them. */
static void check_all(const struct cuts *got, size_t n, struct expected *all, size_t limit)
{
    if (n)
        qsort(all, n, sizeof *all, by_order);
    uint32_t singles = 0;
    for (size_t i = 0; i < n; i++)
        singles += all[i].n_members == 1;
    ck_assert_uint_eq(got->n_all, n);
    ck_assert_uint_eq(got->n_singles, singles);
    ck_assert_uint_eq(got->n, n < limit ? n : limit);
    for (size_t i = 0; i < got->n; i++) {
        ck_assert_uint_eq(mask_of(&got->sets[i]), all[i].set);
        ck_assert(got->sets[i].product == (all[i].n_zero ? 0 : (double)all[i].product));
    }
}

static uint32_t fewest(size_t n, const struct expected *all)
{
    uint32_t least = CUTS_NEVER;
    for (size_t i = 0; i < n; i++)
        least = (uint32_t)all[i].n_members < least ? (uint32_t)all[i].n_members : least;
    return least;
}

enum pool { ANY, TIES, SAME, N_POOLS };

/* TIES: few bits, many equal products of unlike sets, sure and impossible ones. */
static void draw_probabilities(struct random *r, enum pool pool, double *p)
{
    static const double few[] = {0, 1, 0.5, 0.25, 0.125, 0.0625, 0.75, 0.375, 0.5625, 0.1875};
    for (int v = 0; v < MOST_VARIABLES; v++)
        p[v] = pool == SAME ? 0.2385 : pool == TIES ? random_pick(r, few)
                                                    : random_log_uniform(r, 1e-9, 0.5);
}

/* ---- truth tables ---- */

/* The function of the table over variables v .. n - 1, those before v as in `set`. */
static bfun of_table(const bool *table, uint32_t v, uint32_t n, unsigned set)
{
    if (v == n)
        return table[set] ? BFUN_TRUE : BFUN_FALSE;
    bfun high = of_table(table, v + 1, n, set | 1u << v), low = of_table(table, v + 1, n, set);
    return diagram_ite(b, variable(v), high, low);
}

static void draw_table(struct random *r, uint32_t n, bool monotone, bool *table)
{
    size_t rarity = (size_t)1 << random_index(r, n + 1);
    int least = (int)random_index(r, n / 2 + 1); /* members: many sets beside each other */
    for (unsigned set = 0; set < 1u << n; set++) {
        table[set] = __builtin_popcount(set) >= least && random_index(r, rarity) == 0;
        for (uint32_t v = 0; monotone && v < n; v++)
            table[set] |= (set >> v & 1) && table[set & ~(1u << v)];
    }
}

/* By the definition: true, and no proper subset is. hull[set]: some subset is true. */
static size_t sets_of_table(uint32_t n, const bool *table, const double *p, struct expected *all)
{
    bool hull[1 << 12];
    size_t n_sets = 0;
    for (unsigned set = 0; set < 1u << n; set++) {
        bool below = false;
        for (uint32_t v = 0; v < n; v++)
            below |= (set >> v & 1) && hull[set & ~(1u << v)];
        hull[set] = below || table[set];
        if (table[set] && !below)
            all[n_sets++] = expect(set, p);
    }
    return n_sets;
}

static size_t check_table(struct random *r, uint32_t n, bool monotone, enum pool pool)
{
    static bool table[1 << 12];
    static struct expected all[1 << 12];
    double p[MOST_VARIABLES];
    draw_probabilities(r, pool, p);
    draw_table(r, n, monotone, table);
    size_t n_sets = sets_of_table(n, table, p, all);
    bfun f = of_table(table, 0, n, 0);
    size_t limit = random_index(r, 3) ? n_sets + random_index(r, 2) : random_index(r, n_sets + 1);
    struct cuts got = find(f, p, limit);
    check_all(&got, n_sets, all, limit);
    ck_assert_uint_eq(cuts_order(arena, freeze(f), 0), fewest(n_sets, all));
    return n_sets;
}

START_TEST(sets_equal_full_enumeration)
{
    struct random r = random_seed(2386);
    size_t most[2] = {0};
    int several[2] = {0};
    for (int i = 0; i < 1200; i++) {
        again();
        bool monotone = i % 2;
        uint32_t n = (uint32_t)random_range(&r, 0, i % 10 ? 8 : 12);
        size_t sets = check_table(&r, n, monotone, (enum pool)(i / 2 % N_POOLS));
        most[monotone] = sets > most[monotone] ? sets : most[monotone];
        several[monotone] += sets > 3;
    }
    for (int i = 0; i < 2; i++) {
        ck_assert_uint_gt(most[i], 50);
        ck_assert_int_gt(several[i], 100);
    }
}
END_TEST

/* ---- structures of 30 to 60 elements ---- */

/* n = 0: an element; else at least k of earlier gates, or fewer if negated. */
struct gate {
    bool negated;
    uint32_t n, k, variable;
    uint32_t child[MOST_CHILDREN];
};

struct structure {
    uint32_t n_variables, n_gates;
    struct gate gates[MOST_GATES];
};

/* `negated` gates in a hundred. */
static void draw_structure(struct random *r, size_t negated, struct structure *s)
{
    *s = (struct structure){.n_variables = (uint32_t)random_range(r, 30, MOST_VARIABLES)};
    for (uint32_t v = 0; v < s->n_variables; v++)
        s->gates[s->n_gates++] = (struct gate){.variable = v};
    for (int64_t more = random_range(r, 12, 39); more > 0; more--) {
        struct gate *gate = &s->gates[s->n_gates];
        gate->n = (uint32_t)random_range(r, 2, MOST_CHILDREN);
        gate->k = (uint32_t)random_range(r, 1, gate->n);
        if (random_index(r, 3))
            gate->k = gate->k > 2 ? 2 : gate->k;
        for (uint32_t i = 0; i < gate->n; i++)
            gate->child[i] = (uint32_t)(random_index(r, 2) ? random_index(r, s->n_gates)
                                                           : s->n_gates - 1 - random_index(r, 20));
        gate->negated = random_index(r, 100) < negated;
        s->n_gates++;
    }
}

static bfun function_of(const struct structure *s)
{
    bfun f[MOST_GATES], children[MOST_CHILDREN];
    for (uint32_t i = 0; i < s->n_gates; i++) {
        const struct gate *gate = &s->gates[i];
        for (uint32_t c = 0; c < gate->n; c++)
            children[c] = f[gate->child[c]];
        f[i] = gate->n ? diagram_at_least(b, gate->k, gate->n, children)
                       : variable(gate->variable);
        if (gate->negated)
            f[i] = diagram_not(b, f[i]);
    }
    return f[s->n_gates - 1];
}

static bool is_true(const struct structure *s, uint64_t set)
{
    bool f[MOST_GATES];
    for (uint32_t i = 0; i < s->n_gates; i++) {
        const struct gate *gate = &s->gates[i];
        uint32_t n = 0;
        for (uint32_t c = 0; c < gate->n; c++)
            n += f[gate->child[c]];
        f[i] = gate->n ? (n >= gate->k) != gate->negated : set >> gate->variable & 1;
    }
    return f[s->n_gates - 1];
}

/* Sets of elements, none of which contains another; too many: n > MOST_SETS. */
struct sets {
    size_t n;
    uint64_t *at;
};

static void add_set(struct sets *s, uint64_t set)
{
    size_t kept = 0;
    if (s->n > MOST_SETS)
        return;
    for (size_t i = 0; i < s->n; i++) {
        if ((s->at[i] & set) == s->at[i])
            return;
        if ((s->at[i] & set) != set)
            s->at[kept++] = s->at[i];
    }
    s->at[kept++] = set;
    s->n = kept;
}

static struct sets no_sets(void)
{
    return (struct sets){0, NEW_ARRAY(arena, MOST_SETS + 1, uint64_t)};
}

/* x, and what is in both y and z. */
static struct sets either_or_both(struct sets x, struct sets y, struct sets z)
{
    struct sets out = no_sets();
    if (x.n > MOST_SETS || y.n > MOST_SETS || z.n > MOST_SETS) {
        out.n = MOST_SETS + 1;
        return out;
    }
    for (size_t i = 0; i < x.n; i++)
        add_set(&out, x.at[i]);
    for (size_t i = 0; i < y.n; i++)
        for (size_t k = 0; k < z.n; k++)
            add_set(&out, y.at[i] | z.at[k]);
    return out;
}

static struct sets multiply_out(const struct structure *s)
{
    struct sets of[MOST_GATES];
    for (uint32_t i = 0; i < s->n_gates; i++) {
        const struct gate *gate = &s->gates[i];
        struct sets enough[MOST_CHILDREN + 1];
        for (uint32_t k = 0; k <= gate->k; k++)
            enough[k] = no_sets();
        add_set(&enough[0], gate->n ? 0 : UINT64_C(1) << gate->variable);
        for (uint32_t c = 0; c < gate->n; c++)
            for (uint32_t k = gate->k; k > 0; k--)
                enough[k] = either_or_both(enough[k], enough[k - 1], of[gate->child[c]]);
        of[i] = enough[gate->k];
    }
    return of[s->n_gates - 1];
}

static void check_multiplied_out(bfun f, struct sets sets, const double *p, size_t limit)
{
    struct expected *all = NEW_ARRAY(arena, sets.n, struct expected);
    for (size_t i = 0; i < sets.n; i++)
        all[i] = expect(sets.at[i], p);
    struct cuts got = find(f, p, limit);
    check_all(&got, sets.n, all, limit);
    ck_assert_uint_eq(cuts_order(arena, freeze(f), 0), fewest(sets.n, all));
}

/* The best product of any true-set: the best way through the function's own diagram. */
static double best_way(const struct diagram *d, const double *p)
{
    double *best = NEW_ARRAY(arena, d->n_nodes + 2, double);
    best[1] = 1;
    for (size_t i = 0; i < d->n_nodes; i++)
        best[i + 2] = fmax(p[d->nodes[i].variable] * best[d->nodes[i].high],
                           best[d->nodes[i].low]);
    return best[d->roots[0]];
}

/* No proper subset is a true-set. Where none is negated, those one smaller will do. */
static void check_minimal(const struct structure *s, uint64_t set, bool monotone)
{
    for (uint64_t one = set; monotone && one; one &= one - 1)
        ck_assert(!is_true(s, set & ~(one & -one)));
    for (uint64_t part = set; !monotone && part;) {
        part = (part - 1) & set;
        ck_assert(!is_true(s, part));
    }
}

static void check_each(const struct structure *s, bfun f, const double *p, bool monotone)
{
    struct cuts got = find(f, p, 100);
    ck_assert_uint_gt(got.n, 0);
    ck_assert_uint_le(got.n, got.n_all);
    ck_assert(fabs(got.sets[0].product / best_way(freeze(f), p) - 1) <= 1e-13);
    struct expected before = {0};
    for (size_t i = 0; i < got.n; i++) {
        struct expected x = expect(mask_of(&got.sets[i]), p);
        ck_assert(i == 0 || by_order(&before, &x) < 0);
        ck_assert(i == 0 || got.sets[i].product <= got.sets[i - 1].product);
        ck_assert(is_true(s, x.set));
        if (monotone || x.n_members <= 16)
            check_minimal(s, x.set, monotone);
        before = x;
    }
}

START_TEST(sets_of_structures)
{
    struct random r = random_seed(41);
    int multiplied = 0, beyond = 0;
    size_t most = 0;
    for (int i = 0; i < 150; i++) {
        again();
        struct structure s;
        double p[MOST_VARIABLES];
        draw_structure(&r, 0, &s);
        draw_probabilities(&r, i % 2 ? ANY : SAME, p);
        bfun f = function_of(&s);
        check_each(&s, f, p, true);
        struct sets sets = multiply_out(&s);
        if (sets.n <= MOST_SETS)
            check_multiplied_out(f, sets, p, random_index(&r, 2) ? sets.n : 20);
        multiplied += sets.n > 10 && sets.n <= MOST_SETS;
        beyond += sets.n > MOST_SETS;
        most = sets.n <= MOST_SETS && sets.n > most ? sets.n : most;
    }
    ck_assert_int_gt(multiplied, 50);
    ck_assert_int_gt(beyond, 5);
    ck_assert_uint_gt(most, 300);
}
END_TEST

START_TEST(sets_of_structures_with_negations)
{
    struct random r = random_seed(47);
    int compared = 0, of_two = 0;
    for (int i = 0; i < 150; i++) {
        again();
        struct structure s;
        double p[MOST_VARIABLES];
        draw_structure(&r, 15, &s);
        draw_probabilities(&r, i % 2 ? ANY : SAME, p);
        bfun f = function_of(&s);
        if (f == BFUN_FALSE || is_true(&s, 0))
            continue;
        check_each(&s, f, p, false);
        compared++;
        of_two += cuts_order(arena, freeze(f), 0) > 1;
    }
    ck_assert_int_gt(compared, 40);
    ck_assert_int_gt(of_two, 10);
}
END_TEST

/* ---- cases known from elsewhere ---- */

/* The pressure tank: NASA, Fault Tree Handbook with Aerospace Applications, 2002, as in
 * the FFORT data set (second-hand), see tests/published/fault_trees.txt: the five sets
 * {T} {K2} {S S1} {S K1} {S R}. The order follows by hand from the probabilities. */
START_TEST(pressure_tank)
{
    enum { T, K2, S, S1, K1, R };
    const double p[] = {[T] = 5e-6, [K2] = 3e-5, [S] = 1e-4, [S1] = 3e-5, [K1] = 5e-6, [R] = 1e-4};
    static const uint64_t want[] = {1 << K2, 1 << T, 1 << S | 1 << R, 1 << S | 1 << S1,
                                    1 << S | 1 << K1};
    static const double product[] = {3e-5, 5e-6, 1e-8, 3e-9, 5e-10};
    bfun contact = diagram_or(b, variable(S1), diagram_or(b, variable(K1), variable(R)));
    bfun f = diagram_or(b, variable(T),
                        diagram_or(b, variable(K2), diagram_and(b, variable(S), contact)));
    struct cuts got = find(f, p, 10);
    ck_assert(got.n_all == 5 && got.n == 5 && got.n_singles == 2);
    for (int i = 0; i < 5; i++) {
        ck_assert_uint_eq(mask_of(&got.sets[i]), want[i]);
        ck_assert(fabs(got.sets[i].product / product[i] - 1) <= 3e-16);
    }
    ck_assert_uint_eq(cuts_order(arena, freeze(f), 0), 1);
}
END_TEST

static bfun at_least(uint32_t k, uint32_t n)
{
    bfun *f = NEW_ARRAY(arena, n, bfun);
    for (uint32_t v = 0; v < n; v++)
        f[v] = variable(v);
    return diagram_at_least(b, k, n, f);
}

/* C(n, k) by Pascal's triangle; UINT64_MAX when beyond. */
static uint64_t binomial(uint32_t n, uint32_t k)
{
    uint64_t *row = NEW_ARRAY(arena, n + 2, uint64_t);
    row[0] = 1;
    for (uint32_t i = 0; i < n; i++)
        for (uint32_t j = i + 1; j > 0; j--)
            row[j] = row[j] > UINT64_MAX - row[j - 1] ? UINT64_MAX : row[j] + row[j - 1];
    return row[k];
}

START_TEST(k_of_n)
{
    static const struct {
        uint32_t k, n;
    } cases[] = {{2, 4}, {1, 9}, {9, 9}, {5, 12}, {30, 60}, {33, 67}, {34, 68}, {100, 200}};
    double p[200];
    for (int v = 0; v < 200; v++)
        p[v] = 0.02385;
    for (size_t i = 0; i < sizeof cases / sizeof *cases; i++) {
        uint32_t k = cases[i].k, n = cases[i].n;
        struct cuts got = find(at_least(k, n), p, 3);
        ck_assert_uint_eq(got.n_all, binomial(n, k));
        ck_assert_uint_eq(got.n_singles, k == 1 ? n : 0);
        ck_assert_uint_eq(cuts_order(arena, freeze(at_least(k, n)), 0), k);
        ck_assert_uint_eq(got.n, k == n ? 1 : 3);
        for (uint32_t s = 0; s < got.n; s++) /* equal products: first k - 1, then k, k + 1 */
            for (uint32_t m = 0; m < k; m++)
                ck_assert_uint_eq(got.sets[s].members[m], m + 1 < k ? m : m + s);
    }
    ck_assert_uint_ne(binomial(67, 33), UINT64_MAX);
    ck_assert_uint_eq(binomial(68, 34), UINT64_MAX);
}
END_TEST

/* Likely ones last: the best of 100 of 200 are at the far end. By hand. */
START_TEST(the_best_are_found_without_listing)
{
    double p[200];
    for (int v = 0; v < 200; v++)
        p[v] = 0.1 + v / 1024.0;
    struct cuts got = find(at_least(100, 200), p, 200);
    ck_assert_uint_eq(got.n, 200);
    for (uint32_t m = 0; m < 100; m++) {
        ck_assert_uint_eq(got.sets[0].members[m], 100 + m);
        ck_assert_uint_eq(got.sets[1].members[m], m ? 100 + m : 99);
    }
    for (size_t i = 1; i < got.n; i++)
        ck_assert(got.sets[i].product < got.sets[i - 1].product);
}
END_TEST

START_TEST(constants_have_one_set_or_none)
{
    bfun roots[] = {BFUN_TRUE, BFUN_FALSE, diagram_not(b, variable(3)), variable(3)};
    const struct diagram *d = diagram_freeze(arena, b, 4, roots);
    const double p[] = {NAN, NAN, NAN, 0.2385};
    static const uint32_t order[] = {0, CUTS_NEVER, 0, 1};
    for (size_t k = 0; k < 4; k++) {
        struct cuts got = cuts_find(arena, d, k, p, 7);
        ck_assert(!got.too_many && got.n_all == (k != 1) && got.n == got.n_all);
        ck_assert_uint_eq(got.n_singles, k == 3);
        ck_assert_uint_eq(cuts_order(arena, d, k), order[k]);
        if (got.n) {
            ck_assert(got.sets[0].n_members == (k == 3));
            ck_assert(got.sets[0].product == (k == 3 ? 0.2385 : 1));
        }
    }
}
END_TEST

/* Not monotone, by hand from the definition: x without y, or y and z without x; an odd
 * number; an even one but none; x and y alike. */
START_TEST(what_must_be_absent_is_left_out)
{
    const double p[] = {0.1, 0.2, 0.3};
    bfun x = variable(0), y = variable(1), z = variable(2), odd = BFUN_FALSE;
    bfun f = diagram_ite(b, x, diagram_not(b, y), diagram_and(b, y, z));
    struct cuts got = find(f, p, 9);
    ck_assert(got.n == 2 && mask_of(&got.sets[0]) == 1 && mask_of(&got.sets[1]) == 6);
    for (uint32_t v = 0; v < 3; v++)
        odd = diagram_ite(b, variable(v), diagram_not(b, odd), odd);
    got = find(odd, p, 9);
    ck_assert(got.n_all == 3 && got.n_singles == 3 && mask_of(&got.sets[0]) == 4);
    bfun even = diagram_and(b, diagram_not(b, odd), diagram_or(b, x, diagram_or(b, y, z)));
    got = find(even, p, 9);
    ck_assert(got.n_all == 3 && got.n_singles == 0 && mask_of(&got.sets[0]) == 6);
    /* {x y} is true and no set of one member is, but the empty set is true, too */
    bfun same = diagram_ite(b, x, y, diagram_not(b, y));
    got = find(same, p, 9);
    ck_assert(got.n_all == 1 && got.sets[0].n_members == 0);
}
END_TEST

/* ---- the order ---- */

/* (1/2 + e)(1/2 - e) and 1/4 are one double when e = 2^-31, but not one number. */
START_TEST(products_are_compared_exactly)
{
    const double e = 0x1p-31, p[] = {0.5 + e, 0.5 - e, 0.5, 0.5, 0.25};
    bfun f = diagram_or(b, diagram_and(b, variable(0), variable(1)),
                        diagram_and(b, variable(2), variable(3)));
    f = diagram_or(b, f, variable(4));
    struct cuts got = find(f, p, 3);
    ck_assert(got.n == 3 && mask_of(&got.sets[0]) == 16 && mask_of(&got.sets[1]) == 12 &&
              mask_of(&got.sets[2]) == 3);
    ck_assert(got.sets[2].product == 0.25 && got.sets[0].product == 0.25);
}
END_TEST

/* (1 + 2^-5 + 2^-48)(1 + 2^-48) = 1 + 2^-5 + 2^-47 + 2^-53 + 2^-96: just above the middle
 * of two doubles, so up; without the last term it would be down, to the even one. */
START_TEST(products_are_rounded_once)
{
    const double p[] = {0.5 * (1 + 0x1p-5 + 0x1p-48), 0.5 * (1 + 0x1p-48)};
    struct cuts got = find(diagram_and(b, variable(0), variable(1)), p, 1);
    ck_assert(got.sets[0].product == 0.25 * (1 + 0x1p-5 + 0x1p-47 + 0x1p-52));
}
END_TEST

/* 20 members of 1e-20: far below all doubles, and in order nevertheless. 16 members of
 * 2^-67 give 2^-1072, which is one. */
START_TEST(products_below_all_doubles_keep_their_order)
{
    double p[60];
    bfun all[3];
    for (uint32_t v = 0; v < 60; v++) {
        p[v] = v < 20 ? 1e-20 : v < 40 ? 2e-20 : v < 56 ? 0x1p-67 : 1;
        bfun before = v % 20 ? all[v / 20] : BFUN_TRUE;
        all[v / 20] = diagram_and(b, before, variable(v));
    }
    struct cuts got = find(diagram_or(b, all[0], diagram_or(b, all[1], all[2])), p, 3);
    ck_assert_uint_eq(got.n, 3);
    for (uint32_t i = 0; i < 3; i++)
        ck_assert(got.sets[i].members[0] == 40 - 20 * i && got.sets[i].n_members == 20);
    ck_assert(got.sets[0].product == 0x1p-1072 && got.sets[1].product == 0);
}
END_TEST

START_TEST(a_lower_limit_gives_the_beginning)
{
    struct random r = random_seed(43);
    struct structure s;
    double p[MOST_VARIABLES];
    struct cuts whole = {0};
    while (whole.n_all < 200) {
        again();
        draw_structure(&r, 0, &s);
        draw_probabilities(&r, TIES, p);
        whole = find(function_of(&s), p, 200);
    }
    for (size_t limit = 0; limit < 200; limit += 7) {
        struct cuts got = find(function_of(&s), p, limit);
        ck_assert(got.n == limit && got.n_all == whole.n_all && got.n_singles == whole.n_singles);
        for (size_t i = 0; i < limit; i++)
            ck_assert(mask_of(&got.sets[i]) == mask_of(&whole.sets[i]) &&
                      got.sets[i].product == whole.sets[i].product);
    }
}
END_TEST

/* ---- limits ---- */

/* One of each pair whose halves are far apart: 2^12 choices, of which each is a set. */
START_TEST(choices_are_counted)
{
    double p[24];
    bfun f = BFUN_TRUE;
    for (uint32_t v = 0; v < 12; v++) {
        p[v] = 0.2385, p[v + 12] = 0.1;
        f = diagram_and(b, f, diagram_or(b, variable(v), variable(v + 12)));
    }
    struct cuts got = find(f, p, 2);
    ck_assert(got.n_all == 1 << 12 && got.n == 2 && got.n_singles == 0);
    ck_assert_uint_eq(mask_of(&got.sets[0]), (1 << 12) - 1);
    ck_assert_uint_eq(mask_of(&got.sets[1]), (1 << 11) - 1 + (1 << 23));
    ck_assert_uint_eq(cuts_order(arena, freeze(f), 0), 12);
}
END_TEST

/* All of many sums of 5 out of 60: the function fits, its sets do not. */
START_TEST(too_many_are_refused)
{
    struct random r = random_seed(48);
    double p[MOST_VARIABLES];
    draw_probabilities(&r, ANY, p);
    bfun f = BFUN_TRUE;
    for (int i = 0; i < 25; i++) {
        bfun sum = BFUN_FALSE;
        for (int k = 0; k < 5; k++)
            sum = diagram_or(b, sum, variable((uint32_t)random_index(&r, MOST_VARIABLES)));
        f = diagram_and(b, f, sum);
    }
    const struct diagram *d = freeze(f);
    struct cuts got = cuts_find(arena, d, 0, p, 1);
    ck_assert(got.too_many);
    ck_assert(got.n_all == 0 && got.n_singles == 0 && got.n == 0 && got.sets == NULL);
    uint32_t order = cuts_order(arena, d, 0);
    ck_assert(order > 4 && order < 26);
}
END_TEST

/* ---- memory ---- */

static bool whole_job(const struct mem *mem, double *result)
{
    jmp_buf out_of_memory;
    struct arena *a = arena_new(mem);
    if (!a)
        return false;
    if (setjmp(out_of_memory)) {
        arena_free(a);
        return false;
    }
    arena_guard(a, &out_of_memory);
    struct diagram_builder *builder = diagram_builder_new(a);
    bfun f[16];
    double p[16];
    for (uint32_t v = 0; v < 16; v++)
        f[v] = diagram_variable(builder, v), p[v] = 0.5;
    bfun root = diagram_at_least(builder, 8, 16, f);
    const struct diagram *d = diagram_freeze(a, builder, 1, &root);
    struct cuts got = cuts_find(a, d, 0, p, 300);
    *result = (double)got.n_all + got.sets[299].product + cuts_order(a, d, 0);
    arena_free(a);
    return true;
}

START_TEST(memory_may_run_out_anywhere)
{
    bool done = false;
    size_t k = 0;
    for (; !done; k++) {
        struct failmem f;
        double result = -1;
        failmem_init(&f, k);
        done = whole_job(&f.mem, &result);
        failmem_check(&f);
        ck_assert(done == (f.failed == 0));
        ck_assert(!done || result == 12870 + 0x1p-8 + 8); /* C(16, 8) = 12870 */
    }
    ck_assert_uint_gt(k, 12);
}
END_TEST

/* Scratch memory is given back: with no sets asked for, nothing stays. */
START_TEST(scratch_is_given_back)
{
    struct failmem f;
    failmem_init(&f, FAILMEM_NEVER);
    const struct diagram *d = freeze(at_least(30, 60));
    struct arena *a = arena_new(&f.mem);
    size_t before = f.bytes;
    struct cuts got = cuts_find(a, d, 0, NULL, 0);
    ck_assert(got.n_all == binomial(60, 30) && got.n == 0 && f.bytes == before && f.peak > before);
    cuts_order(a, d, 0);
    ck_assert_uint_eq(f.bytes, before);
    arena_free(a);
    failmem_check(&f);
}
END_TEST

static Suite *cuts_suite(void)
{
    Suite *s = suite_create("cuts");
    TCase *t = tcase_create("cuts");
    tcase_set_timeout(t, 240);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, pressure_tank);
    tcase_add_test(t, k_of_n);
    tcase_add_test(t, the_best_are_found_without_listing);
    tcase_add_test(t, constants_have_one_set_or_none);
    tcase_add_test(t, what_must_be_absent_is_left_out);
    tcase_add_test(t, sets_equal_full_enumeration);
    tcase_add_test(t, sets_of_structures);
    tcase_add_test(t, sets_of_structures_with_negations);
    tcase_add_test(t, products_are_compared_exactly);
    tcase_add_test(t, products_are_rounded_once);
    tcase_add_test(t, products_below_all_doubles_keep_their_order);
    tcase_add_test(t, a_lower_limit_gives_the_beginning);
    tcase_add_test(t, choices_are_counted);
    tcase_add_test(t, too_many_are_refused);
    tcase_add_test(t, memory_may_run_out_anywhere);
    tcase_add_test(t, scratch_is_given_back);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *runner = srunner_create(cuts_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
