/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Decision diagrams against oracles of another kind: truth tables of all
 * combinations in quad precision (113 bits), and the BuDDy library. The structures are drawn as
 * protection is built: elements that fail with small probabilities, gates over them
 * (all, any, at least k of n), nested and shared, and three rows of response of
 * which the first that works counts. */
#include "graph/diagram.h"
#include "random.h"

#include <bdd.h>
#include <check.h>
#include <math.h>
#include <stdlib.h>
#include <string.h>

__extension__ typedef __float128 quad;

enum { MOST_GATES = 64, MOST_CHILDREN = 6, MOST_VARIABLES = 40, ROWS = 3 };

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

/* ---- structures ---- */

/* n = 0: the element `variable` works (it has not failed); else at least k of the
 * children work, which are earlier gates. */
struct gate {
    uint32_t n, k, variable;
    uint32_t child[MOST_CHILDREN];
};

struct structure {
    uint32_t n_variables, n_gates;
    struct gate gates[MOST_GATES];
    uint32_t row[ROWS];
    double p[MOST_VARIABLES], q[MOST_VARIABLES];
};

static void draw_gate(struct random *r, struct structure *s)
{
    struct gate *gate = &s->gates[s->n_gates];
    gate->n = (uint32_t)random_range(r, 2, MOST_CHILDREN);
    gate->k = (uint32_t)random_range(r, 1, gate->n);
    if (random_index(r, 3))
        gate->k = random_index(r, 2) ? 1 : gate->n;
    for (uint32_t i = 0; i < gate->n; i++) /* late gates more often: deep structures */
        gate->child[i] = (uint32_t)(random_index(r, 2) ? random_index(r, s->n_gates)
                                                       : s->n_gates - 1 - random_index(r, 4));
    s->n_gates++;
}

static struct structure draw(struct random *r, uint32_t n_variables, uint32_t n_gates)
{
    struct structure s = {.n_variables = n_variables};
    for (uint32_t v = 0; v < n_variables; v++) {
        s.p[v] = random_log_uniform(r, 1e-9, 0.5);
        s.q[v] = 1 - s.p[v];
        s.gates[s.n_gates++] = (struct gate){.variable = v};
    }
    for (uint32_t i = 0; i < n_gates; i++)
        draw_gate(r, &s);
    for (int i = 0; i < ROWS; i++)
        s.row[i] = s.n_gates - 1 - (uint32_t)random_index(r, n_gates);
    return s;
}

static struct structure draw_within(struct random *r, int least_variables, int most_variables,
                                    int least_gates, int most_gates)
{
    uint32_t n_variables = (uint32_t)random_range(r, least_variables, most_variables);
    return draw(r, n_variables, (uint32_t)random_range(r, least_gates, most_gates));
}

/* Outcome i < ROWS: row i is the first that works; ROWS: none works. */
static const struct diagram *as_diagram(const struct structure *s)
{
    bfun f[MOST_GATES], children[MOST_CHILDREN], outcomes[ROWS + 1], open = BFUN_TRUE;
    for (uint32_t i = 0; i < s->n_gates; i++) {
        const struct gate *gate = &s->gates[i];
        for (uint32_t c = 0; c < gate->n; c++)
            children[c] = f[gate->child[c]];
        f[i] = gate->n ? diagram_at_least(b, gate->k, gate->n, children)
                       : diagram_not(b, diagram_variable(b, gate->variable));
    }
    for (int i = 0; i < ROWS; i++) {
        outcomes[i] = diagram_and(b, open, f[s->row[i]]);
        open = diagram_and(b, open, diagram_not(b, f[s->row[i]]));
    }
    outcomes[ROWS] = open;
    return diagram_freeze(arena, b, ROWS + 1, outcomes);
}

static double *scratch(const struct diagram *d)
{
    return NEW_ARRAY(arena, d->n_nodes + 2, double);
}

static bool close(double got, double want, double relative)
{
    return fabs(got - want) <= relative * fabs(want);
}

/* ---- oracle: all combinations, 64 at a time, weights in quad precision ---- */

static void works_in(const struct structure *s, size_t block, uint64_t *works)
{
    static const uint64_t low[6] = {0xAAAAAAAAAAAAAAAA, 0xCCCCCCCCCCCCCCCC, 0xF0F0F0F0F0F0F0F0,
                                    0xFF00FF00FF00FF00, 0xFFFF0000FFFF0000, 0xFFFFFFFF00000000};
    for (uint32_t i = 0; i < s->n_gates; i++) {
        const struct gate *gate = &s->gates[i];
        uint32_t v = gate->variable;
        if (!gate->n) {
            works[i] = ~(v < 6 ? low[v] : block >> (v - 6) & 1 ? UINT64_MAX : 0);
            continue;
        }
        uint64_t enough[MOST_CHILDREN + 1] = {UINT64_MAX};
        for (uint32_t c = 0; c < gate->n; c++)
            for (uint32_t j = gate->k; j > 0; j--)
                enough[j] |= enough[j - 1] & works[gate->child[c]];
        works[i] = enough[gate->k];
    }
}

static void enumerate(const struct structure *s, quad *outcomes)
{
    size_t all = (size_t)1 << s->n_variables;
    quad *weight = NEW_ARRAY(arena, all, quad);
    weight[0] = 1;
    for (uint32_t v = 0; v < s->n_variables; v++)
        for (size_t m = (size_t)1 << v; m-- > 0;) {
            weight[m | (size_t)1 << v] = weight[m] * s->p[v];
            weight[m] *= 1 - (quad)s->p[v];
        }
    for (int i = 0; i <= ROWS; i++)
        outcomes[i] = 0;
    uint64_t works[MOST_GATES];
    for (size_t m = 0; m < all; m++) {
        if (m % 64 == 0)
            works_in(s, m / 64, works);
        int i = 0;
        while (i < ROWS && !(works[s->row[i]] >> m % 64 & 1))
            i++;
        outcomes[i] += weight[m];
    }
}

START_TEST(probabilities_equal_full_enumeration)
{
    struct random r = random_seed(2385);
    int tiny = 0, tiniest = 0, compared = 0;
    for (int n = 0; n < 400; n++) {
        arena_free(arena);
        setup();
        struct structure s = draw_within(&r, 4, 16, 3, 20);
        const struct diagram *d = as_diagram(&s);
        double got[ROWS + 1];
        quad want[ROWS + 1];
        diagram_evaluate(d, s.p, s.q, scratch(d), got);
        enumerate(&s, want);
        for (int i = 0; i <= ROWS; i++) {
            ck_assert_msg(close(got[i], (double)want[i], 1e-13), "structure %d, outcome %d: "
                          "%.17g, not %.17g", n, i, got[i], (double)want[i]);
            compared += want[i] > 0;
            tiny += want[i] > 0 && want[i] < 1e-12;
            tiniest += want[i] > 0 && want[i] < 1e-24;
        }
    }
    ck_assert_int_gt(compared, 600);
    ck_assert_int_gt(tiny, 50);
    ck_assert_int_gt(tiniest, 10);
}
END_TEST

/* ---- oracle: BuDDy ---- */

static BDD buddy_at_least(const struct gate *gate, const BDD *f)
{
    BDD enough[MOST_CHILDREN + 1] = {bddtrue};
    for (uint32_t j = 1; j <= gate->k; j++)
        enough[j] = bddfalse;
    for (uint32_t c = 0; c < gate->n; c++)
        for (uint32_t j = gate->k; j > 0; j--)
            enough[j] = bdd_addref(bdd_ite(f[gate->child[c]], enough[j - 1], enough[j]));
    return enough[gate->k];
}

static void buddy_outcomes(const struct structure *s, BDD *outcomes)
{
    BDD f[MOST_GATES], open = bddtrue;
    for (uint32_t i = 0; i < s->n_gates; i++)
        f[i] = s->gates[i].n ? buddy_at_least(&s->gates[i], f)
                             : bdd_nithvar((int)s->gates[i].variable);
    for (int i = 0; i < ROWS; i++) {
        outcomes[i] = bdd_addref(bdd_apply(open, f[s->row[i]], bddop_and));
        open = bdd_addref(bdd_apply(open, f[s->row[i]], bddop_diff));
    }
    outcomes[ROWS] = open;
}

/* known[f] < 0: not yet. */
static double buddy_probability(BDD f, const struct structure *s, double *known)
{
    if (f == bddtrue || f == bddfalse)
        return f == bddtrue;
    if (known[f] < 0) {
        int v = bdd_var(f);
        known[f] = s->p[v] * buddy_probability(bdd_high(f), s, known) +
                   s->q[v] * buddy_probability(bdd_low(f), s, known);
    }
    return known[f];
}

START_TEST(probabilities_equal_another_library)
{
    struct random r = random_seed(40);
    size_t largest = 0;
    for (int n = 0; n < 200; n++) {
        arena_free(arena);
        setup();
        struct structure s = draw_within(&r, 12, 40, 4, 24);
        bdd_init(20000, 5000);
        bdd_gbc_hook(NULL);
        bdd_resize_hook(NULL);
        bdd_setvarnum((int)s.n_variables);
        BDD outcomes[ROWS + 1];
        buddy_outcomes(&s, outcomes);
        double *known = NEW_ARRAY(arena, (size_t)bdd_getallocnum(), double);
        for (int i = 0; i < bdd_getallocnum(); i++)
            known[i] = -1;
        const struct diagram *d = as_diagram(&s);
        double got[ROWS + 1];
        diagram_evaluate(d, s.p, s.q, scratch(d), got);
        for (int i = 0; i <= ROWS; i++)
            ck_assert(close(got[i], buddy_probability(outcomes[i], &s, known), 1e-13));
        ck_assert_int_eq((int)d->n_nodes, bdd_anodecount(outcomes, ROWS + 1));
        largest = d->n_nodes > largest ? d->n_nodes : largest;
        bdd_done();
    }
    ck_assert_uint_gt(largest, 200);
}
END_TEST

/* ---- derivatives ---- */

/* A probability is linear in each variable: the derivative is the difference of
 * sure and impossible. */
static double difference(const struct diagram *d, struct structure *s, uint32_t v,
                         const double *weight)
{
    double p = s->p[v], q = s->q[v], with[ROWS + 1], without[ROWS + 1], total = 0;
    s->p[v] = 1, s->q[v] = 0;
    diagram_evaluate(d, s->p, s->q, scratch(d), with);
    s->p[v] = 0, s->q[v] = 1;
    diagram_evaluate(d, s->p, s->q, scratch(d), without);
    s->p[v] = p, s->q[v] = q;
    for (int i = 0; i <= ROWS; i++)
        total += weight[i] * (with[i] - without[i]);
    return total;
}

START_TEST(derivatives_are_exact_differences)
{
    struct random r = random_seed(7);
    for (int n = 0; n < 100; n++) {
        arena_free(arena);
        setup();
        struct structure s = draw_within(&r, 4, 30, 3, 12);
        const struct diagram *d = as_diagram(&s);
        double got[ROWS + 1], weight[ROWS + 1], dp[MOST_VARIABLES], *work = scratch(d);
        for (int i = 0; i <= ROWS; i++)
            weight[i] = random_uniform(&r, -2, 3);
        for (uint32_t v = 0; v < s.n_variables; v++)
            dp[v] = v; /* is added to */
        diagram_evaluate(d, s.p, s.q, work, got);
        diagram_backward(d, s.p, s.q, work, weight, scratch(d), dp);
        for (uint32_t v = 0; v < s.n_variables; v++) {
            double want = v + difference(d, &s, v, weight);
            ck_assert_msg(fabs(dp[v] - want) <= 1e-13 * (1 + v), "structure %d, variable %u: %g, "
                          "not %g", n, v, dp[v], want);
        }
    }
}
END_TEST

/* ---- functions ---- */

START_TEST(equal_functions_are_one)
{
    bfun x = diagram_variable(b, 3), y = diagram_variable(b, 1), z = diagram_variable(b, 2);
    ck_assert_uint_eq(diagram_variable(b, 3), x);
    ck_assert_uint_eq(diagram_and(b, x, y), diagram_and(b, y, x));
    ck_assert_uint_eq(diagram_or(b, x, y), diagram_or(b, y, x));
    ck_assert_uint_eq(diagram_not(b, diagram_not(b, x)), x);
    ck_assert_uint_eq(diagram_and(b, x, diagram_not(b, x)), BFUN_FALSE);
    ck_assert_uint_eq(diagram_or(b, x, diagram_not(b, x)), BFUN_TRUE);
    ck_assert_uint_eq(diagram_ite(b, x, y, y), y);
    ck_assert_uint_eq(diagram_ite(b, x, BFUN_TRUE, BFUN_FALSE), x);
    bfun left = diagram_and(b, x, diagram_or(b, y, z));
    bfun right = diagram_or(b, diagram_and(b, x, y), diagram_and(b, z, x));
    ck_assert_uint_eq(left, right);
    bfun both = diagram_not(b, diagram_and(b, x, z));
    ck_assert_uint_eq(both, diagram_or(b, diagram_not(b, x), diagram_not(b, z)));
    bfun chosen = diagram_or(b, diagram_and(b, x, y), diagram_and(b, diagram_not(b, x), z));
    ck_assert_uint_eq(diagram_ite(b, x, y, z), chosen);
    ck_assert_uint_eq(diagram_ite(b, x, x, z), diagram_or(b, x, z));
    ck_assert_uint_eq(diagram_ite(b, x, y, x), diagram_and(b, x, y));
}
END_TEST

START_TEST(at_least_counts)
{
    enum { N = 9 };
    bfun f[N];
    for (uint32_t i = 0; i < N; i++)
        f[i] = diagram_variable(b, i);
    for (uint32_t k = 0; k <= N + 1; k++) {
        bfun enough = diagram_at_least(b, k, N, f);
        const struct diagram *d = diagram_freeze(arena, b, 1, &enough);
        for (unsigned m = 0; m < 1u << N; m++) {
            double p[N], q[N], got;
            for (int i = 0; i < N; i++)
                p[i] = m >> i & 1, q[i] = 1 - p[i];
            diagram_evaluate(d, p, q, scratch(d), &got);
            ck_assert(got == (double)((uint32_t)__builtin_popcount(m) >= k));
        }
    }
    ck_assert_uint_eq(diagram_at_least(b, 0, N, f), BFUN_TRUE);
    ck_assert_uint_eq(diagram_at_least(b, 0, 0, NULL), BFUN_TRUE);
    ck_assert_uint_eq(diagram_at_least(b, 1, 0, NULL), BFUN_FALSE);
    ck_assert_uint_eq(diagram_at_least(b, N + 1, N, f), BFUN_FALSE);
    ck_assert_uint_eq(diagram_at_least(b, 1, 2, f), diagram_or(b, f[0], f[1]));
    bfun twice[] = {f[0], f[1], f[0]};
    ck_assert_uint_eq(diagram_at_least(b, 2, 3, twice), f[0]);
}
END_TEST

/* 100 of 200 by counting: C(200, 100) combinations could never be listed. The
 * binomial tail with p = 1/2: P(at least 100 of 200) = 1/2 + C(200, 100) / 2^201. */
START_TEST(at_least_does_not_enumerate)
{
    enum { N = 200 };
    bfun f[N];
    double p[N], q[N], got, middle = 1;
    for (uint32_t i = 0; i < N; i++)
        f[i] = diagram_variable(b, i), p[i] = q[i] = 0.5;
    bfun enough = diagram_at_least(b, 100, N, f);
    const struct diagram *d = diagram_freeze(arena, b, 1, &enough);
    ck_assert_uint_eq(d->n_nodes, 100 * 101);
    diagram_evaluate(d, p, q, scratch(d), &got);
    for (int i = 1; i <= 100; i++)
        middle *= (100.0 + i) / (4.0 * i); /* C(200, 100) / 4^100 */
    ck_assert(close(got, 0.5 + middle / 2, 1e-13));
}
END_TEST

/* ---- frozen diagrams ---- */

START_TEST(frozen_bytes_are_canonical)
{
    struct random r = random_seed(11);
    for (int n = 0; n < 50; n++) {
        arena_free(arena);
        struct structure s = draw(&r, 10, 8);
        setup();
        const struct diagram *alone = as_diagram(&s);
        struct structure other = draw(&r, 14, 8);
        struct arena *first = arena;
        setup();
        for (uint32_t v = 20; v-- > 0;)
            diagram_not(b, diagram_variable(b, v));
        as_diagram(&other);
        const struct diagram *among = as_diagram(&s), *unlike = as_diagram(&other);
        ck_assert(diagram_equal(alone, among));
        ck_assert(alone->hash == among->hash && alone->n_nodes == among->n_nodes);
        ck_assert(alone->n_nodes == 0 ||
                  memcmp(alone->nodes, among->nodes, alone->n_nodes * sizeof *alone->nodes) == 0);
        ck_assert(memcmp(alone->roots, among->roots, alone->n_roots * sizeof *alone->roots) == 0);
        ck_assert(!diagram_equal(alone, unlike));
        arena_free(first);
    }
}
END_TEST

START_TEST(children_come_before_parents)
{
    struct random r = random_seed(12);
    size_t largest = 0;
    for (int k = 0; k < 50; k++) {
        struct structure s = draw(&r, 20, 20);
        const struct diagram *d = as_diagram(&s);
        largest = d->n_nodes > largest ? d->n_nodes : largest;
        for (size_t i = 0; i < d->n_nodes; i++) {
            const struct diagram_node *n = &d->nodes[i];
            ck_assert(n->high < i + 2 && n->low < i + 2 && n->high != n->low);
            ck_assert(n->variable < d->n_variables);
            ck_assert(n->high < 2 || d->nodes[n->high - 2].variable > n->variable);
            ck_assert(n->low < 2 || d->nodes[n->low - 2].variable > n->variable);
        }
    }
    ck_assert_uint_gt(largest, 50);
}
END_TEST

START_TEST(order_of_roots_is_kept)
{
    bfun x = diagram_variable(b, 0), y = diagram_variable(b, 5);
    bfun roots[] = {y, BFUN_TRUE, x, BFUN_FALSE, y};
    const struct diagram *d = diagram_freeze(arena, b, 5, roots);
    double p[] = {0.25, 9, 9, 9, 9, 0.75}, q[] = {0.75, 9, 9, 9, 9, 0.25}, got[5];
    diagram_evaluate(d, p, q, scratch(d), got);
    ck_assert(got[0] == 0.75 && got[1] == 1 && got[2] == 0.25 && got[3] == 0 && got[4] == 0.75);
    ck_assert(d->n_variables == 6 && d->n_nodes == 2 && d->n_roots == 5);
    const struct diagram *constant = diagram_freeze(arena, b, 1, &roots[1]);
    ck_assert(constant->n_variables == 0 && constant->n_nodes == 0);
    diagram_evaluate(constant, NULL, NULL, scratch(constant), got);
    ck_assert(got[0] == 1);
}
END_TEST

/* ---- the limit ---- */

START_TEST(the_limit_is_the_limit)
{
    for (uint32_t v = 0; v < DIAGRAM_NODES; v++)
        if (diagram_variable(b, v) == DIAGRAM_FULL)
            ck_abort_msg("full at %u", v);
    ck_assert_uint_eq(diagram_variable(b, DIAGRAM_NODES), DIAGRAM_FULL);
    bfun last = diagram_variable(b, DIAGRAM_NODES - 1), first = diagram_variable(b, 0);
    ck_assert_uint_ne(last, DIAGRAM_FULL);
    ck_assert_uint_eq(diagram_and(b, first, last), DIAGRAM_FULL);
    ck_assert_uint_eq(diagram_and(b, first, first), first); /* needs no new node */
    ck_assert_uint_eq(diagram_not(b, DIAGRAM_FULL), DIAGRAM_FULL);
    ck_assert_uint_eq(diagram_or(b, BFUN_TRUE, DIAGRAM_FULL), DIAGRAM_FULL);
    ck_assert_uint_eq(diagram_at_least(b, 1, 2, (bfun[]){first, DIAGRAM_FULL}), DIAGRAM_FULL);
    ck_assert_ptr_null(diagram_freeze(arena, b, 2, (bfun[]){first, DIAGRAM_FULL}));
    ck_assert_ptr_nonnull(diagram_freeze(arena, b, 1, &last));
}
END_TEST

/* A structure that grows exponentially in this order ends at the limit, too. */
START_TEST(a_bad_order_is_refused)
{
    bfun f = BFUN_FALSE;
    for (uint32_t i = 0; i < 30; i++)
        f = diagram_or(b, f, diagram_and(b, diagram_variable(b, i), diagram_variable(b, i + 30)));
    ck_assert_uint_eq(f, DIAGRAM_FULL);
}
END_TEST

static Suite *diagram_suite(void)
{
    Suite *s = suite_create("diagram");
    TCase *t = tcase_create("diagram");
    tcase_set_timeout(t, 240);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, equal_functions_are_one);
    tcase_add_test(t, at_least_counts);
    tcase_add_test(t, at_least_does_not_enumerate);
    tcase_add_test(t, probabilities_equal_full_enumeration);
    tcase_add_test(t, probabilities_equal_another_library);
    tcase_add_test(t, derivatives_are_exact_differences);
    tcase_add_test(t, frozen_bytes_are_canonical);
    tcase_add_test(t, children_come_before_parents);
    tcase_add_test(t, order_of_roots_is_kept);
    tcase_add_test(t, the_limit_is_the_limit);
    tcase_add_test(t, a_bad_order_is_refused);
    suite_add_tcase(s, t);
    return s;
}

int main(void)
{
    SRunner *runner = srunner_create(diagram_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), run = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || run == 0;
}
