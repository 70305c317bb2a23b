/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How bad it may get (loss.h): from sources to samples, to a lattice, and to what is read off. Owns
 * nothing beyond the arenas that it is given.
 *
 * Invariant: samples are those of all cases together, so that cases meet the same worlds; a lattice
 * is that of one case, so that a result does not hang on which others were asked for. */
#include "decide/loss.h"

#include <math.h>
#include <string.h>

#include "decide/loss_samples.h"
#include "math/aggregate.h"

enum { LOG2_ROUGH = 10, LOG2_ONE = 14, LOG2_MANY = 13, MOST_TRIES = 8, CURVE_POINTS = 48 };
/* The lattice reaches to where the damage is exceeded with this probability, and a little on. */
static const double BEYOND_LATTICE = 5e-4, A_LITTLE = 1.1;
/* How much wider the next lattice is where the last was too narrow. */
static const double WIDER = 8;
/* A lattice is narrowed while it is so many times as wide as it must be. */
static const double NARROWED = 8;

const double loss_tail[LOSS_KINDS] = {
    [LOSS_EXCEEDED_10] = 0.1, [LOSS_EXCEEDED_5] = 0.05, [LOSS_EXCEEDED_1] = 0.01,
    [LOSS_WORST_5] = 0.05,    [LOSS_WORST_1] = 0.01,
};

double loss_middle(const struct loss_number *x)
{
    return (x->low + x->high) / 2;
}

/* ---- a path on a lattice ---- */

/* Means of the lower and the upper end, in steps. */
struct ends {
    double of[2];
};

struct finding {
    struct loss_world *world;
    struct arena *arena;
    const struct loss_case *of;
    struct lattice lattice;
    unsigned log2_points;
    const struct loss_path *path; /* at hand */
    /* Of the case: all together, and by set. */
    struct aggregate all, *sets;
    struct ends means;
    struct ends *set_means;
    size_t points;           /* samples of a set that are taken: all, or one */
    struct ends *path_means; /* of the path at hand, by sample */
};

/* Samples of rough lattices are the first ones of each set. */
static size_t sample_of(const struct finding *x, size_t sample)
{
    return x->points == x->world->points ? sample : sample * x->world->points;
}

static void add_sources(void *ctx, size_t worker, size_t sample, struct intensity *to)
{
    const struct finding *x = ctx;
    struct ends *means = &x->path_means[sample];
    size_t s = sample_of(x, sample);
    (void)worker;
    *means = (struct ends){{0, 0}};
    for (size_t k = 0; k < x->path->sources->n; k++) {
        const struct loss_source *source = &x->path->sources->at[k];
        double expected = loss_expected(x->world, source, s), of_one[2];
        to->expected += expected;
        loss_damage_add(loss_world_damage(x->world, source->damage), &x->lattice, s, expected,
                        to->down, to->up, of_one);
        for (int end = 0; end < 2; end++)
            means->of[end] += expected * of_one[end];
    }
}

/* The means of both ends of a path, over all samples and by set, in their order. */
static void add_means(struct finding *x)
{
    size_t n = x->world->sets * x->points;
    for (size_t s = 0; s < n; s++)
        for (int end = 0; end < 2; end++) {
            double mean = x->path_means[s].of[end] * x->path->probability;
            x->means.of[end] += mean / (double)n;
            x->set_means[s / x->points].of[end] += mean / (double)x->points;
        }
}

static void place_all(struct finding *x)
{
    for (size_t p = 0; p < x->of->n_paths; p++)
        for (size_t k = 0; k < x->of->paths[p].sources->n; k++)
            loss_world_place(x->world, x->of->paths[p].sources->at[k].damage, &x->lattice);
}

/* The distribution of the case on the lattice. */
static void distribute(struct finding *x)
{
    const struct loss_world *w = x->world;
    size_t n = x->of->n_paths;
    struct aggregate_plan plan = {.log2_points = x->log2_points,
                                  .sets = w->sets,
                                  .points = x->points,
                                  .threads = w->plan.threads,
                                  .isa = w->plan.isa};
    struct aggregate *all = NEW_ARRAY(x->arena, n, struct aggregate);
    struct aggregate *sets = NEW_ARRAY(x->arena, n * w->sets, struct aggregate);
    struct aggregate *of_set = NEW_ARRAY(x->arena, n, struct aggregate);
    double *probability = NEW_ARRAY(x->arena, n, double);
    x->lattice.n = (size_t)1 << x->log2_points;
    place_all(x);
    x->sets = NEW_ARRAY(x->arena, w->sets, struct aggregate);
    x->path_means = NEW_ARRAY(x->arena, w->sets * x->points, struct ends);
    x->set_means = NEW_ARRAY(x->arena, w->sets, struct ends);
    x->means = (struct ends){{0, 0}};
    for (size_t p = 0; p < n; p++) {
        x->path = &x->of->paths[p];
        probability[p] = x->path->probability;
        aggregate_find(x->arena, &plan, add_sources, x, &all[p], sets + p * w->sets);
        add_means(x);
    }
    aggregate_mix(x->arena, n, probability, all, &x->all);
    for (size_t s = 0; s < w->sets; s++) {
        for (size_t p = 0; p < n; p++)
            of_set[p] = sets[p * w->sets + s];
        aggregate_mix(x->arena, n, probability, of_set, &x->sets[s]);
    }
}

/* ---- which lattice ---- */

/* A round number, at least x: amounts in round numbers lie at its points. */
static double round_step(double x)
{
    static const double round[] = {1, 1.25, 2, 2.5, 4, 5, 8};
    double unit = 1;
    while (unit > x)
        unit /= 10;
    while (unit * 10 <= x)
        unit *= 10;
    for (size_t i = 0; i < sizeof round / sizeof *round; i++)
        if (unit * round[i] >= x)
            return unit * round[i];
    return unit * 10;
}

/* Where the damage surely ends, roughly: the greatest damage of an occurrence and the mean sum, a
 * few times. */
static double first_reach(const struct finding *x)
{
    const struct loss_world *w = x->world;
    double greatest = 0, sum = 0;
    for (size_t p = 0; p < x->of->n_paths; p++)
        for (size_t k = 0; k < x->of->paths[p].sources->n; k++) {
            const struct loss_source *s = &x->of->paths[p].sources->at[k];
            const struct loss_damage *d = loss_world_damage(w, s->damage);
            for (size_t i = 0; i < d->n; i++)
                greatest = fmax(greatest, loss_damage_high(d, i));
            for (size_t i = 0; i < w->sets * w->points; i++)
                sum += loss_expected(w, s, i) * fmax(loss_damage_mean(d, i), 0);
        }
    return greatest + 4 * sum / (double)(w->sets * w->points);
}

static double reach_of(const struct finding *x)
{
    size_t q = aggregate_quantile(&x->all, &x->all.high, 1 - BEYOND_LATTICE);
    return q < x->all.n ? (double)(q + 1) * x->lattice.step * A_LITTLE : INFINITY;
}

/* By rough lattices, until one fits. */
static void find_step(struct finding *x)
{
    struct arena *outer = x->arena;
    unsigned log2_points = x->world->n_cases == 1 ? LOG2_ONE : LOG2_MANY;
    double reach = fmax(first_reach(x), 1);
    x->log2_points = LOG2_ROUGH;
    x->points = 1;
    for (int i = 0; i < MOST_TRIES; i++) {
        double wide = reach;
        x->arena = arena_child(outer);
        x->lattice.step = round_step(wide / (1 << LOG2_ROUGH));
        distribute(x);
        reach = reach_of(x);
        arena_free(x->arena);
        if (reach <= wide && reach >= wide / NARROWED)
            break;
        if (!(reach < INFINITY))
            reach = wide * WIDER;
    }
    x->arena = outer;
    x->log2_points = log2_points;
    x->points = x->world->points;
    x->lattice.step = round_step(reach / (1 << log2_points));
}

/* ---- what is read off ---- */

static double read_end(const struct aggregate *x, const struct aggregate_end *end, double mean,
                       double step, enum loss_kind kind)
{
    double p = 1 - loss_tail[kind];
    if (kind == LOSS_NONE)
        return x->high.p[0];
    if (kind >= LOSS_WORST_5)
        return aggregate_shortfall(x, end, mean, p) * step;
    return (double)aggregate_quantile(x, end, p) * step;
}

static struct loss_number read(const struct aggregate *x, const struct ends *means, double step,
                               enum loss_kind kind)
{
    return (struct loss_number){read_end(x, &x->low, means->of[0], step, kind),
                                read_end(x, &x->high, means->of[1], step, kind), 0};
}

/* The error by sectioning, as of quantiles in math/statistics.h: sets against all together. */
static double error_of(const struct finding *x, enum loss_kind kind, double all)
{
    size_t n = x->world->sets;
    double sum = 0;
    if (n < 2)
        return 0;
    for (size_t s = 0; s < n; s++) {
        struct loss_number of = read(&x->sets[s], &x->set_means[s], x->lattice.step, kind);
        double away = loss_middle(&of) - all;
        sum += away * away;
    }
    return sqrt(sum / ((double)n * (double)(n - 1)));
}

static double mean_error(const struct finding *x)
{
    double *means = NEW_ARRAY(x->arena, x->world->sets, double);
    for (size_t s = 0; s < x->world->sets; s++)
        means[s] = (x->set_means[s].of[0] + x->set_means[s].of[1]) / 2 * x->lattice.step;
    return x->world->sets < 2 ? 0 : statistics_of_sets(x->world->sets, means).error;
}

/* Evenly to where it is exceeded with LOSS_RAREST. */
static void read_curve(struct arena *a, const struct finding *x, struct loss_result *out)
{
    size_t last = aggregate_quantile(&x->all, &x->all.high, 1 - LOSS_RAREST), before = SIZE_MAX;
    last = last < x->all.n ? last : x->all.n - 1;
    for (int i = 0; i <= CURVE_POINTS; i++) {
        size_t j = last * (size_t)i / CURVE_POINTS;
        if (j == before)
            continue;
        before = j;
        *array_push(a, &out->curve) =
            (struct loss_point){(double)j * x->lattice.step, aggregate_exceedance(&x->all.low, j),
                                aggregate_exceedance(&x->all.high, j)};
    }
}

static void read_all(struct arena *a, const struct finding *x, struct loss_result *out)
{
    double step = x->lattice.step;
    for (int k = 0; k < LOSS_KINDS; k++) {
        enum loss_kind kind = (enum loss_kind)k;
        out->at[k] = read(&x->all, &x->means, step, kind);
        out->at[k].error = error_of(x, kind, loss_middle(&out->at[k]));
    }
    out->mean = (struct loss_number){x->means.of[0] * step, x->means.of[1] * step, mean_error(x)};
    out->step = step;
    out->points = x->all.n;
    read_curve(a, x, out);
    for (size_t p = 0; p < x->of->n_paths; p++)
        for (size_t k = 0; k < x->of->paths[p].sources->n; k++) {
            node_id node = x->of->paths[p].sources->at[k].damage;
            const struct loss_damage *d = loss_world_damage(x->world, node);
            out->is_drawn = out->is_drawn || d->form == LOSS_DRAWN;
            out->is_below_zero = out->is_below_zero || loss_damage_is_below_zero(d);
        }
}

/* No damage at all: certainly 0. */
static bool has_sources(const struct loss_case *of)
{
    for (size_t p = 0; p < of->n_paths; p++)
        if (of->paths[p].sources->n)
            return true;
    return false;
}

static void nothing_of(struct arena *a, struct loss_result *out)
{
    out->at[LOSS_NONE] = (struct loss_number){1, 1, 0};
    *array_push(a, &out->curve) = (struct loss_point){0, 0, 0};
}

void loss_find_case(struct loss_world *w, struct arena *a, const struct loss_case *of,
                    struct loss_result *out)
{
    struct arena *scratch = arena_child(a);
    struct finding x = {.world = w, .arena = scratch, .of = of};
    *out = (struct loss_result){.of = of};
    if (has_sources(of)) {
        find_step(&x);
        distribute(&x);
        read_all(a, &x, out);
    } else {
        nothing_of(a, out);
    }
    arena_free(scratch);
}

/* ---- names ---- */

static const char *const kind_words[LOSS_KINDS] = {
    [LOSS_NONE] = "no-damage",        [LOSS_EXCEEDED_10] = "exceeded-10",
    [LOSS_EXCEEDED_5] = "exceeded-5", [LOSS_EXCEEDED_1] = "exceeded-1",
    [LOSS_WORST_5] = "worst-5",       [LOSS_WORST_1] = "worst-1",
};

const char *loss_name(struct arena *a, const char *owner, enum loss_kind kind, const char *of)
{
    return arena_printf(a, "%s.%s[%s]", owner, kind_words[kind], of);
}

bool loss_name_parts(struct arena *a, const char *name, const char **owner, enum loss_kind *kind,
                     const char **of)
{
    const char *point = strchr(name, '.');
    for (int k = 0; point && k < LOSS_KINDS; k++) {
        size_t n = strlen(kind_words[k]);
        if (strncmp(point + 1, kind_words[k], n) != 0 || point[1 + n] != '[')
            continue;
        const char *from = point + 2 + n;
        size_t length = strlen(from);
        *kind = (enum loss_kind)k;
        *owner = arena_strn(a, name, (size_t)(point - name));
        *of = arena_strn(a, from, length && from[length - 1] == ']' ? length - 1 : length);
        return true;
    }
    return false;
}

bool loss_is_named(const char *name)
{
    const char *point = strchr(name, '.');
    for (int k = 0; point && k < LOSS_KINDS; k++) {
        size_t n = strlen(kind_words[k]);
        if (strncmp(point + 1, kind_words[k], n) == 0 && point[1 + n] == '[')
            return true;
    }
    return false;
}

bool loss_is_figure(const char *rest)
{
    const char *word = properties[PROPERTY_HORIZON_DAMAGE].word;
    size_t n = strlen(word);
    return strncmp(rest, word, n) == 0 && (rest[n] == 0 || rest[n] == '.');
}
