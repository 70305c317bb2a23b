/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What figures may be, beside what their means are: samples of figures of registers, whose means
 * must be those that are exact or integrated, and the inputs that move with them. */
#include <check.h>
#include <math.h>
#include <stdlib.h>

#include "figure/samples.h"
#include "loaded.h"
#include "registers.h"

static struct arena *arena;

static void setup(void)
{
    arena = arena_new(NULL);
}

static void teardown(void)
{
    arena_free(arena);
}

static struct sampling sample_of(struct loaded *l, const struct sampling_plan *p, figure_id id)
{
    struct sampling s;
    ohmen_error e = OHMEN_ERROR_INIT;
    ck_assert_msg(figures_sample(l->figures, arena, p, 1, &id, &s, &e) == OHMEN_OK, "%s", e.text);
    return s;
}

/* ---- what moves with a figure ---- */

/* A frequency that is the product of ten unknown values. That of the last name is by far the
 * widest, so that the frequency rises with it nearly always: with log x = s z and T the sum of the
 * squares of all s, Pearson's correlation of the logarithms is s / sqrt(T) = .9907, and Spearman's
 * of a bivariate normal 6 / pi asin(.9907 / 2) = .9897 (Kendall & Gibbons, ch. 10, from memory). */
#define NARROW(name) name ": {is: {median: 1, error-factor: 1.1}}, "
static const char product[] =
    "register: {title: T, currency: EUR, prices: 2026, horizon: 1 a, discount: 0 % per a}\n"
    "values: {" NARROW("A") NARROW("B") NARROW("C") NARROW("D") NARROW("E") NARROW("F") NARROW("G")
        NARROW("I") NARROW("J") "Z: {is: {median: 1 per a, error-factor: 8}}}\n"
                                "hazards: {H: {name: H, frequency: A * B * C * D * E * F * G * I * "
                                "J * Z, response: {never: "
                                "{outcome: lost}}, outcomes: {lost: {name: Lost, damage: {loss: "
                                "{category: c, is: 1 EUR}}}}}}\n";

static double spearman_of_pearson(double r)
{
    return 6 / acos(-1) * asin(r / 2);
}

START_TEST(the_widest_input_moves_most)
{
    struct loaded l;
    struct sampling_plan p = sampling_defaults();
    struct rank_inputs ranks = {0};
    loaded_text(&l, arena, product, NULL);
    figure_id id = loaded_find(&l, "H.frequency");
    loaded_evaluate(&l);
    node_id node = figure_at(l.figures, id)->node;
    p.log2_points = 8;
    struct sampling s = sample_of(&l, &p, id);
    ck_assert(figure_ranks(l.figures, arena, &p, 1, &id, 1, &node, s.values[0], s.sets, 0, &ranks,
                           NULL) == OHMEN_OK);
    double wide = log(8), narrow = log(1.1),
           pearson = wide / sqrt(wide * wide + 9 * narrow * narrow);
    ck_assert_uint_eq(ranks.n, 10);
    ck_assert_msg(fabs(ranks.at[0].correlation - spearman_of_pearson(pearson)) < 0.002,
                  "%s: %.6g, not %.6g", ranks.at[0].name, ranks.at[0].correlation,
                  spearman_of_pearson(pearson));
    ck_assert(ranks.at[1].correlation < 0.1 && ranks.at[9].correlation > 0);
}
END_TEST

/* ---- means ---- */

/* Batches of 16 sets; standard errors that a mean may be away, which of some thousand figures
 * hardly one is by chance (Student's t with 31 degrees of freedom: 2e-5); what is allowed where
 * nothing unknown is in a figure, and where something varies, which samples average over by rules
 * of fixed steps: coarse where the figure has a kink. */
enum { BATCHES = 2, MOST_ERRORS = 5 };
static const double EXACTLY = 1e-9, BY_STEPS = 1e-3;
static const char *root_folder;

struct compared {
    size_t figures, certain;
};

static bool has_samples(const struct figures *f, figure_id id)
{
    uint16_t op = graph_at(f->graph, figure_at(f, id)->node)->op;
    return op != OP_COURSE && op != OP_DIAGRAM;
}

static double allowed(const struct figures *f, figure_id id)
{
    size_t count, varying = 0;
    const uint32_t *inputs = graph_uncertain(f->graph, figure_at(f, id)->node, &count);
    for (size_t i = 0; i < count; i++)
        varying += f->input_varies.at[inputs[i]];
    return (varying ? BY_STEPS : EXACTLY) * fabs(figure_value(f, id));
}

/* One value of the sample more or less at the other end: of a discrete input whose rare value falls
 * on as many points in all sets the sets tell no error. */
static double one_value(const struct sampling *s, size_t k)
{
    double least = INFINITY, greatest = -INFINITY;
    size_t n = s->sets * s->points;
    for (size_t i = 0; i < n; i++) {
        least = fmin(least, s->values[k][i]);
        greatest = fmax(greatest, s->values[k][i]);
    }
    return (greatest - least) / (double)n;
}

static void compare(const struct figures *f, const struct sampling *s, size_t k, figure_id id,
                    struct compared *c)
{
    bool certain = figure_is_certain(f, id);
    struct sampled m = statistics_mean(s->sets, s->points, s->values[k]);
    double want = figure_value(f, id), error = hypot(m.error, figure_error(f, id));
    double most = allowed(f, id) + (certain ? 0 : MOST_ERRORS * error + one_value(s, k));
    ck_assert_msg(fabs(m.value - want) <= most, "%s: %.9g +- %.3g, not %.9g",
                  figure_name(f, arena, id), m.value, m.error, want);
    c->figures++;
    c->certain += certain;
}

/* By node: does it jump, as a lookup and a discrete input do? What jumps with a small probability
 * is in the mean and in no sample, so that no error of the sets tells of it. */
static bool *find_jumps(const struct figures *f)
{
    bool *jumps = NEW_ARRAY(arena, graph_size(f->graph), bool);
    for (node_id n = 0; n < graph_size(f->graph); n++) {
        const struct graph_node *node = graph_at(f->graph, n);
        jumps[n] = node->op == OP_LOOKUP ||
                   (node->op == OP_INPUT && f->inputs.at[node->extra]->shape == SHAPE_DISCRETE);
        for (uint32_t i = 0; i < node->n; i++)
            jumps[n] = jumps[n] || jumps[graph_args(f->graph, n)[i]];
    }
    return jumps;
}

/* Figures that were compiled, in samples of the same worlds. */
static void compare_all(struct loaded *l, bool with_jumps, struct compared *c)
{
    struct figures *f = l->figures;
    struct sampling_plan p = sampling_defaults();
    struct sampling s;
    ohmen_error e = OHMEN_ERROR_INIT;
    figure_id *ids = NEW_ARRAY(arena, f->list.n, figure_id);
    size_t n = 0;
    loaded_evaluate(l);
    bool *jumps = find_jumps(f);
    for (figure_id id = 0; id < f->list.n; id++)
        if (has_samples(f, id) && (with_jumps || !jumps[figure_at(f, id)->node]))
            ids[n++] = id;
    p.most_batches = BATCHES;
    ck_assert_msg(figures_sample(f, arena, &p, n, ids, &s, &e) == OHMEN_OK, "%s", e.text);
    for (size_t k = 0; k < n; k++)
        compare(f, &s, k, ids[k], c);
}

/* What the register has of a kind, by the figure that stands for it. */
static void compile_kind(struct loaded *l, enum kind kind, const char *property)
{
    const struct objects *all = &l->model->of[kind];
    for (size_t i = 0; i < all->n; i++)
        loaded_find(l, arena_printf(arena, "%s.%s", all->at[i]->id, property));
}

static void compile_all(struct loaded *l)
{
    compile_kind(l, KIND_HAZARD, "risk");
    compile_kind(l, KIND_HAZARD, "customer-time");
    compile_kind(l, KIND_SITE, "risk");
    compile_kind(l, KIND_GROUP, "individual-risk");
    loaded_find(l, "register.risk");
    loaded_find(l, "register.customer-time");
}

/* The exact and integrated means of all figures of the sample register beside those of samples: two
 * ways that share the graph alone. */
START_TEST(means_of_the_sample_register)
{
    struct loaded l;
    struct compared c = {0};
    loaded_folder(&l, arena, arena_printf(arena, "%s/samples/skerry", root_folder), NULL);
    compile_all(&l);
    loaded_find(&l, "register.caidi");
    compare_all(&l, true, &c);
    ck_assert(c.figures > 6000 && c.certain > 1000 && c.certain < c.figures / 2);
}
END_TEST

static void load_random(struct loaded *l, uint64_t seed)
{
    struct register_shape shape = register_small;
    struct model_sources none = {0}, all = {0};
    struct diags d;
    shape.stored = false;
    diags_init(&d, arena);
    const struct node *root = random_register(arena, seed, &shape);
    ck_assert(documents_merge(arena, &none, 1, &root, &all, &d));
    loaded_objects(l, arena, &all, NULL);
}

/* Those figures that do not jump. */
enum { SEEDS = 10 };

START_TEST(means_of_random_registers)
{
    struct compared c = {0};
    for (uint64_t seed = 0; seed < SEEDS; seed++) {
        struct loaded l;
        load_random(&l, seed);
        compile_all(&l);
        compare_all(&l, false, &c);
    }
    ck_assert_msg(c.figures > 1500 && c.certain < c.figures - 500, "%zu of %zu certain", c.certain,
                  c.figures);
}
END_TEST

int main(int argc, char **argv)
{
    if (argc != 2)
        return EXIT_FAILURE;
    root_folder = argv[1];
    Suite *suite = suite_create("spreads");
    TCase *t = tcase_create("spreads");
    tcase_add_checked_fixture(t, setup, teardown);
    tcase_set_timeout(t, 600);
    tcase_add_test(t, the_widest_input_moves_most);
    tcase_add_test(t, means_of_the_sample_register);
    tcase_add_test(t, means_of_random_registers);
    suite_add_tcase(suite, t);
    SRunner *runner = srunner_create(suite);
    srunner_run_all(runner, CK_NORMAL);
    int failed = srunner_ntests_failed(runner), ran = srunner_ntests_run(runner);
    srunner_free(runner);
    return failed || !ran ? EXIT_FAILURE : EXIT_SUCCESS;
}
