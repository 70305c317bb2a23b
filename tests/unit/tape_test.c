/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tapes: every operation, for every instruction set, lane by lane the bits of the point rules. */
#include "tape_test.h"

#include "failmem.h"

#include <math.h>
#include <stdlib.h>

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

/* Diagrams over windows take their time. */
static size_t lanes_of(enum graph_op op)
{
    return op == OP_COURSE ? 65 : TAPE_MOST_LANES;
}

static void check_op(enum graph_op op, uint64_t seed)
{
    struct tape_world w;
    tape_world_open(&w, arena, seed);
    node_id roots[8];
    for (int i = 0; i < 8; i++)
        roots[i] = tape_world_add(&w, op);
    struct tape_lanes values = tape_lanes_draw(&w, lanes_of(op), TAPE_INPUTS);
    tape_check(&w, &tape_all_inputs, 8, roots, &values, 0);
}

START_TEST(every_operation)
{
    for (enum graph_op op = 0; op < OP_COUNT; op++)
        for (uint64_t seed = 0; seed < (op == OP_COURSE ? 2 : 6); seed++)
            check_op(op, 100 * seed + op);
}
END_TEST

/* ---- graphs ---- */

/* Seldom a diagram over windows. */
static enum graph_op draw_op(struct tape_world *w)
{
    enum graph_op op = (enum graph_op)random_index(&w->r, OP_COUNT);
    return op != OP_COURSE || random_index(&w->r, 20) == 0 ? op : OP_MULTIPLY;
}

static void draw_roots(struct tape_world *w, size_t n, node_id *roots)
{
    for (size_t k = 0; k < n; k++)
        roots[k] = w->pool.at[random_index(&w->r, w->pool.n)];
    roots[n - 1] = roots[0];
}

static void draw_graph(struct tape_world *w, uint64_t seed, size_t n)
{
    tape_world_open(w, arena, seed);
    for (size_t i = 0; i < n; i++)
        tape_world_add(w, draw_op(w));
}

START_TEST(random_graphs)
{
    static const size_t blocks[] = {0, 1, 64, 65, 200, 512, 1000};
    for (uint64_t seed = 0; seed < 60; seed++) {
        struct tape_world w;
        node_id roots[7];
        draw_graph(&w, 1000 + seed, 30);
        draw_roots(&w, 7, roots);
        struct tape_lanes values = tape_lanes_draw(&w, seed % 10 ? 130 : 1000, TAPE_INPUTS);
        tape_check(&w, &tape_all_inputs, 7, roots, &values, random_pick(&w.r, blocks));
    }
}
END_TEST

static int by_number(const void *a, const void *b)
{
    return (*(const node_id *)a > *(const node_id *)b) -
           (*(const node_id *)a < *(const node_id *)b);
}

/* Nodes whose operation may be replaced, that rise; inputs of these graphs are found by number. */
static size_t draw_given(struct tape_world *w, node_id *given)
{
    size_t n = 0;
    for (int i = 0; i < 3; i++) {
        node_id one = w->pool.at[TAPE_INPUTS + random_index(&w->r, w->pool.n - TAPE_INPUTS)];
        enum graph_op op = graph_at(w->g, one)->op;
        bool is_new = op != OP_INPUT && op != OP_PICK && op != OP_CONST;
        for (size_t k = 0; k < n; k++)
            is_new = is_new && given[k] != one;
        if (is_new)
            given[n++] = one;
    }
    qsort(given, n, sizeof *given, by_number);
    return n;
}

START_TEST(given_nodes_and_few_inputs)
{
    static const uint32_t two[] = {1, 3};
    for (uint64_t seed = 0; seed < 40; seed++) {
        struct tape_world w;
        node_id roots[7], given[3];
        draw_graph(&w, 5000 + seed, 30);
        draw_roots(&w, 7, roots);
        size_t n = draw_given(&w, given);
        struct tape_inputs in = {2, two, n, given};
        struct tape_lanes values = tape_lanes_draw(&w, 65, 2 + n);
        tape_check(&w, &in, 7, roots, &values, 0);
    }
}
END_TEST

/* ---- memory ---- */

/* How many allocations a run asks for. */
static size_t allocations_of_run(struct tape_world *w, const struct failmem *f,
                                 const struct tape_lanes *values)
{
    node_id roots[7];
    double *out[7];
    draw_roots(w, 7, roots);
    roots[0] = *array_last(&w->pool);
    struct tape *t = tape_new(arena, w->v, isa_best(), &tape_all_inputs, 7, roots);
    struct tape_work *work = tape_work_new(arena, t, values->n);
    for (size_t k = 0; k < 7; k++)
        out[k] = NEW_ARRAY(arena, values->n, double);
    size_t before = f->allocations;
    tape_run(t, work, values->n, (const double *const *)values->in, out);
    return f->allocations - before;
}

START_TEST(running_allocates_nothing)
{
    static struct failmem f;
    failmem_init(&f, FAILMEM_NEVER);
    for (uint64_t seed = 0; seed < 20; seed++) {
        struct tape_world w;
        teardown();
        arena = arena_new(&f.mem);
        tape_world_open(&w, arena, 9000 + seed);
        for (enum graph_op op = 0; op < OP_COUNT; op++)
            tape_world_add(&w, op);
        tape_world_add(&w, OP_COURSE);
        struct tape_lanes values = tape_lanes_draw(&w, 100, TAPE_INPUTS);
        ck_assert_uint_eq(allocations_of_run(&w, &f, &values), 0);
    }
    arena_free(arena);
    failmem_check(&f);
    setup();
}
END_TEST

/* ---- slots ---- */

/* How many values are alive at once, from a tape where each has a slot of its own. */
static size_t count_alive(const struct tape *t)
{
    size_t most = 0;
    for (size_t i = 0; i < t->steps.n; i++) {
        size_t alive = 0;
        for (uint32_t slot = 0; slot < t->n_slots; slot++) {
            bool made = false, read_later = false, made_here = false;
            for (size_t j = 0; j < t->steps.n; j++) {
                const struct tape_step *s = &t->steps.at[j];
                for (size_t k = 0; k < s->to.n; k++) {
                    made = made || (s->to.at[k] == slot && j <= i);
                    made_here = made_here || (s->to.at[k] == slot && j == i);
                }
                for (size_t k = 0; k < s->args.n; k++)
                    read_later = read_later || (s->args.at[k] == slot && j > i);
            }
            alive += made_here || (made && read_later);
        }
        most = alive > most ? alive : most;
    }
    return most;
}

/* A sum over many: its terms are not kept, and it is compensated as in one piece. */
START_TEST(long_sums_in_parts)
{
    enum { TERMS = 100 };
    struct tape_world w;
    tape_world_open(&w, arena, 77);
    node_id terms[TERMS], x = w.pool.at[0], y = w.pool.at[1];
    for (int i = 0; i < TERMS; i++) {
        node_id c = graph_const(w.g, random_uniform(&w.r, -1, 1), (struct dim){{0}});
        node_id both[] = {graph_op2(w.g, OP_MULTIPLY, x, c), y, c};
        terms[i] = graph_op(w.g, OP_SUM, 3, both);
    }
    node_id roots[2] = {graph_op(w.g, OP_SUM, TERMS, terms), graph_op(w.g, OP_SUM, 19, terms)};
    ck_assert_int_eq(eval_point(w.v, NULL, NULL), OHMEN_OK);
    struct tape_lanes values = tape_lanes_draw(&w, 130, TAPE_INPUTS);
    tape_check(&w, &tape_all_inputs, 2, roots, &values, 0);
    struct tape *t = tape_new(arena, w.v, ISA_plain, &tape_all_inputs, 1, roots);
    ck_assert_uint_le(tape_size(t).slots, 12);
    ck_assert_uint_eq(tape_size(t).operations, 2 * TERMS + 1);
}
END_TEST

START_TEST(slots_are_used_again)
{
    size_t saved = 0;
    for (uint64_t seed = 0; seed < 40; seed++) {
        struct tape_world w;
        node_id roots[7];
        draw_graph(&w, 7000 + seed, 40);
        draw_roots(&w, 7, roots);
        for (int fusing = TAPE_SINGLE; fusing <= TAPE_FUSED; fusing++) {
            struct tape_how how = {.fusing = fusing},
                            each = {.fusing = fusing, .keeps_slots = true};
            struct tape *t = tape_new_as(arena, w.v, ISA_plain, &tape_all_inputs, 7, roots, how);
            struct tape *own = tape_new_as(arena, w.v, ISA_plain, &tape_all_inputs, 7, roots, each);
            ck_assert_uint_eq(tape_size(t).instructions, tape_size(own).instructions);
            ck_assert_uint_le(tape_size(t).slots, count_alive(own));
            saved += tape_size(own).slots - tape_size(t).slots;
        }
    }
    ck_assert_uint_gt(saved, 100);
}
END_TEST

int main(int argc, char **argv)
{
    ck_assert(argc == 2);
    tape_figures_folder = argv[1];
    Suite *s = suite_create("tapes");
    TCase *t = tcase_create("tapes");
    tcase_set_timeout(t, 300);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, every_operation);
    tcase_add_test(t, random_graphs);
    tcase_add_test(t, given_nodes_and_few_inputs);
    tcase_add_test(t, running_allocates_nothing);
    tcase_add_test(t, slots_are_used_again);
    tcase_add_test(t, long_sums_in_parts);
    suite_add_tcase(s, t);
    SRunner *runner = srunner_create(s);
    srunner_add_suite(runner, tape_figures_suite());
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner);
    srunner_free(runner);
    return failed != 0;
}
