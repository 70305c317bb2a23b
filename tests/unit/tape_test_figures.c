/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Tapes of the sample's figures: risks of all hazards and what alternatives are worth, at values of
 * all that is unknown. */
#include "tape_test.h"

#include "loaded.h"

#include <math.h>

const char *tape_figures_folder;

/* More than a group of lanes, and a broken one. */
enum { FIGURE_LANES = 67 };

static struct loaded l;
static struct tape_world w;

static void setup(void)
{
    ohmen_error e = OHMEN_ERROR_INIT;
    struct arena *a = arena_new(NULL);
    loaded_folder(&l, a, tape_figures_folder, NULL);
    const struct variant *base = loaded_variant(&l, 0, NULL);
    for (size_t i = 0; i < l.model->of[KIND_HAZARD].n; i++)
        loaded_compile(&l, base, l.model->of[KIND_HAZARD].at[i]->id);
    struct weighing *weighing;
    ck_assert_int_eq(weigh_compile(l.figures, l.model->of[KIND_DECISION].at[0]->id, &weighing, &e),
                     OHMEN_OK);
    loaded_evaluate(&l);
    w = (struct tape_world){
        .arena = a, .g = l.figures->graph, .v = l.figures->eval, .r = random_seed(11)};
}

static void teardown(void)
{
    arena_free(l.arena);
}

/* Means of the inputs, each with a factor of its own between low and high in each lane. */
static struct tape_lanes draw_values(double low, double high)
{
    size_t n = l.figures->inputs.n;
    struct tape_lanes values = {FIGURE_LANES, n, NEW_ARRAY(w.arena, n, double *), true};
    for (size_t i = 0; i < n; i++) {
        double mean = quantity_mean(l.figures->inputs.at[i]);
        values.in[i] = NEW_ARRAY(w.arena, FIGURE_LANES, double);
        for (size_t k = 0; k < FIGURE_LANES; k++)
            values.in[i][k] = mean * (low < high ? random_uniform(&w.r, low, high) : low);
    }
    return values;
}

struct figures_tape {
    struct tape_inputs in;
    struct node_ids ARRAY_BODY(node_id) roots;
};

static struct figures_tape ask(void)
{
    struct figures_tape f = {0};
    for (size_t i = 0; i < l.figures->list.n; i++) {
        const struct figure *figure = &l.figures->list.at[i];
        if (figure->property == PROPERTY_RISK || figure->property == PROPERTY_NET)
            *array_push(w.arena, &f.roots) = figure->node;
    }
    size_t n = l.figures->inputs.n;
    uint32_t *inputs = NEW_ARRAY(w.arena, n, uint32_t);
    for (uint32_t i = 0; i < n; i++)
        inputs[i] = i;
    f.in = (struct tape_inputs){n, inputs, 0, NULL};
    ck_assert_uint_gt(f.roots.n, 50);
    ck_assert_uint_gt(n, 10);
    return f;
}

START_TEST(figures_of_the_sample)
{
    struct figures_tape f = ask();
    struct tape_lanes values = draw_values(0.5, 1.1);
    tape_check(&w, &f.in, f.roots.n, f.roots.at, &values, 0);
    struct tape *t = tape_new(w.arena, w.v, ISA_plain, &f.in, f.roots.n, f.roots.at);
    struct tape_size size = tape_size(t);
    ck_assert_uint_lt(size.instructions, size.operations);
}
END_TEST

/* Where nothing varies every lane is the value at the means. */
START_TEST(equal_lanes_are_the_point_value)
{
    struct figures_tape f = ask();
    struct tape_lanes values = draw_values(1, 1);
    struct tape *t = tape_new(w.arena, w.v, isa_best(), &f.in, f.roots.n, f.roots.at);
    struct tape_work *work = tape_work_new(w.arena, t, FIGURE_LANES);
    double **out = NEW_ARRAY(w.arena, f.roots.n, double *);
    for (size_t k = 0; k < f.roots.n; k++)
        out[k] = NEW_ARRAY(w.arena, FIGURE_LANES, double);
    tape_run(t, work, FIGURE_LANES, (const double *const *)values.in, out);
    for (size_t k = 0; k < f.roots.n; k++)
        for (size_t i = 0; i < FIGURE_LANES; i++)
            ck_assert(isfinite(out[k][i]) && out[k][i] == eval_value(w.v, f.roots.at[k]));
}
END_TEST

Suite *tape_figures_suite(void)
{
    Suite *s = suite_create("tapes of figures");
    TCase *t = tcase_create("tapes of figures");
    tcase_set_timeout(t, 300);
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_add_test(t, figures_of_the_sample);
    tcase_add_test(t, equal_lanes_are_the_point_value);
    suite_add_tcase(s, t);
    return s;
}
