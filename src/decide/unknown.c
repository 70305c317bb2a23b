/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Targets along one unknown quantity (unknown.h). Owns nothing beyond the arena of the figures. */
#include "decide/unknown.h"

#include <math.h>
#include <string.h>

#include "decide/gain.h"
#include "math/elementary.h"

enum { HALF = UNKNOWN_MOST / 2 };

/* cos(k pi / 32) for k = 0 .. 16 (computed). */
static const double cosines[HALF + 1] = {1,
                                         0.995184726672196886,
                                         0.980785280403230449,
                                         0.956940335732208865,
                                         0.923879532511286756,
                                         0.88192126434835503,
                                         0.831469612302545237,
                                         0.773010453362736961,
                                         0.707106781186547524,
                                         0.634393284163645498,
                                         0.555570233019602225,
                                         0.471396736825997649,
                                         0.382683432365089772,
                                         0.290284677254462368,
                                         0.195090322016128268,
                                         0.098017140329560602,
                                         0};

static const double STEP = 0.25;                           /* of the mean over z */
static const double DENSITY_AT_0 = 0.39894228040143267794; /* 1 / sqrt(2 pi) */

/* --- which inputs --- */

static const char *stream_of(const struct figures *f, figure_id id)
{
    const struct graph_node *n = graph_at(f->graph, figure_at(f, id)->node);
    return n->op == OP_INPUT ? f->input_names.at[n->extra] : "";
}

/* Of "ID.property.q1.q2". */
static size_t plain_length(const char *name)
{
    return strcspn(name, "@");
}

static bool is_anew(const struct figures *f, const struct turn_input *first,
                    const struct turn_input *other)
{
    size_t n = plain_length(first->name);
    return n == plain_length(other->name) && strncmp(first->name, other->name, n) == 0 &&
           text_equal(stream_of(f, first->figure), stream_of(f, other->figure));
}

static bool is_unknown(const struct moving *m, size_t i)
{
    return turn_unknown(m->f, m->inputs.at[i].figure) != NULL;
}

/* Inputs are in the order of their names, so that what is stated without a variant comes first. */
bool unknown_is_first(const struct moving *m, size_t i)
{
    for (size_t k = 0; k < i; k++)
        if (is_unknown(m, k) && is_anew(m->f, &m->inputs.at[k], &m->inputs.at[i]))
            return false;
    return is_unknown(m, i);
}

static void gather_parts(struct unknown *u, size_t first)
{
    const struct moving *m = u->moving;
    struct turn_input *all = m->inputs.at;
    struct arena *a = m->f->arena;
    u->parts = NEW_ARRAY(a, m->inputs.n - first, const struct turn_input *);
    for (size_t i = first; i < m->inputs.n; i++)
        if (i == first || (is_unknown(m, i) && is_anew(m->f, &all[first], &all[i])))
            u->parts[u->n++] = &all[i];
    u->spread = NEW_ARRAY(a, u->n, const struct quantity *);
    for (size_t i = 0; i < u->n; i++)
        u->spread[i] = turn_unknown(m->f, u->parts[i]->figure);
    u->x = NEW_ARRAY(a, u->n, double);
    u->values = NEW_ARRAY(a, m->n, double);
}

static bool reaches(const struct unknown *u)
{
    for (size_t i = 0; i < u->n; i++)
        if (moving_reaches(u->moving, u->parts[i]))
            return true;
    return false;
}

bool unknown_take(struct moving *m, size_t first, struct unknown *out)
{
    struct unknown u = {.moving = m, .way = UNKNOWN_POINTS};
    gather_parts(&u, first);
    bool any = reaches(&u);
    moving_take_bare(m, u.n, u.parts);
    u.is_linear = u.n == 1 && prober_is_linear(m->prober);
    u.is_exact = prober_is_exact(m->prober);
    u.is_discrete = u.n == 1 && u.spread[0]->shape == SHAPE_DISCRETE;
    if (any && !u.is_exact && (u.is_linear || u.is_discrete))
        moving_take(m, 1, u.parts);
    *out = u;
    return any;
}

/* --- points --- */

bool unknown_put(struct unknown *u, double z)
{
    const double most = 1 - 0x1p-53; /* in the far tails the greater one */
    ohmen_error unused = OHMEN_ERROR_INIT;
    double p = fmin(dist_normal_probability(z), most);
    double rest = fmin(dist_normal_probability(-z), most);
    for (size_t i = 0; i < u->n; i++)
        if (quantity_tail(u->spread[i], p, rest, &u->x[i], &unused) != OHMEN_OK)
            return false;
    return true;
}

static bool take_point(struct unknown *u, bool far, double *out)
{
    struct moving *m = u->moving;
    if (!(far ? moving_far(m, u->x) : moving_to(m, u->x)))
        return false;
    memcpy(out, m->worth, m->n * sizeof *out);
    return true;
}

static const double *take_at(struct unknown *u, double z, bool far)
{
    double *values = NEW_ARRAY(u->moving->f->arena, u->moving->n, double);
    return unknown_put(u, z) && take_point(u, far, values) ? values : NULL;
}

/* --- lines --- */

bool unknown_line(struct unknown *u)
{
    for (size_t i = 0; i < 2; i++) {
        u->at_end[i] = take_at(u, i ? GAIN_RANGE : -GAIN_RANGE, false);
        if (!u->at_end[i])
            return false;
        u->end[i] = u->x[0];
    }
    u->way = u->end[0] < u->end[1] ? UNKNOWN_LINE : UNKNOWN_POINTS;
    return true;
}

static void take_on_line(struct unknown *u)
{
    double part = (u->x[0] - u->end[0]) / (u->end[1] - u->end[0]);
    for (size_t k = 0; k < u->moving->n; k++)
        u->values[k] = u->at_end[0][k] + (u->at_end[1][k] - u->at_end[0][k]) * part;
}

/* --- nodes --- */

/* Node k of 32; falling. */
static double place_of(size_t k)
{
    return UNKNOWN_FAR * (k <= HALF ? cosines[k] : -cosines[UNKNOWN_MOST - k]);
}

/* The polynomial through the nodes so far; they may be of another number than n_nodes. */
static void interpolate(const struct unknown *u, size_t n_nodes, double z, double *out)
{
    double sum = 0;
    size_t step = UNKNOWN_MOST / n_nodes, n = u->moving->n;
    memset(out, 0, n * sizeof *out);
    for (size_t i = 0; i <= n_nodes; i++) {
        double away = z - place_of(i * step);
        if (away == 0) {
            memcpy(out, u->node[i * step], n * sizeof *out);
            return;
        }
        double weight = (i % 2 ? -1 : 1) * (i == 0 || i == n_nodes ? 0.5 : 1) / away;
        sum += weight;
        for (size_t k = 0; k < n; k++)
            out[k] += weight * u->node[i * step][k];
    }
    for (size_t k = 0; k < n; k++)
        out[k] /= sum;
}

/* How far the difference of two targets, or one of them, is off. */
static double greatest_off(const struct unknown *u, const double *values, const double *right)
{
    double least = 0, most = 0;
    for (size_t k = 0; k < u->moving->n; k++) {
        least = fmin(least, values[k] - right[k]);
        most = fmax(most, values[k] - right[k]);
    }
    return most - least;
}

/* Takes those of n nodes that are not there; each stands for the way between its neighbours in the
 * mean of what the polynomial through the others is off. */
static bool add_nodes(struct unknown *u, size_t n, size_t before, double *off)
{
    size_t step = UNKNOWN_MOST / n;
    *off = 0;
    for (size_t i = 0; i <= n; i++) {
        double z = place_of(i * step);
        if (u->node[i * step])
            continue;
        u->node[i * step] = take_at(u, z, fabs(z) > GAIN_RANGE);
        if (!u->node[i * step])
            return false;
        if (!before)
            continue;
        double way = place_of((i - 1) * step) - place_of((i + 1) * step);
        interpolate(u, before, z, u->values);
        *off += greatest_off(u, u->values, u->node[i * step]) * DENSITY_AT_0 *
                math_exp(-z * z / 2) * way;
    }
    u->n_nodes = n;
    return true;
}

/* The mean of the polynomial over z becomes the mean of today. */
static void find_missing(struct unknown *u)
{
    struct moving *m = u->moving;
    struct arena *scratch = arena_child(m->f->arena);
    double weight = 0, *sum = NEW_ARRAY(scratch, m->n, double);
    for (double z = -UNKNOWN_FAR; z <= UNKNOWN_FAR; z += STEP) {
        double part = math_exp(-z * z / 2);
        interpolate(u, u->n_nodes, z, u->values);
        weight += part;
        for (size_t k = 0; k < m->n; k++)
            sum[k] += part * u->values[k];
    }
    for (size_t k = 0; k < m->n; k++)
        if (m->nodes[k] != NODE_NONE)
            m->missing[k] = moving_mean(m, m->nodes[k]) - sum[k] / weight;
    arena_free(scratch);
}

/* The first nodes, up to those of half of n. */
static bool begin_nodes(struct unknown *u, size_t half)
{
    double unused;
    if (u->node[0])
        return true;
    if (!take_at(u, GAIN_RANGE, false) || !take_at(u, -GAIN_RANGE, false))
        return false;
    return add_nodes(u, half / 2, 0, &unused) && add_nodes(u, half, half / 2, &u->off);
}

bool unknown_nodes(struct unknown *u, size_t n)
{
    struct moving *m = u->moving;
    double off = 0;
    memset(m->missing, 0, m->n * sizeof *m->missing);
    if (!begin_nodes(u, n / 2))
        return false;
    double before = n == UNKNOWN_LEAST ? u->off : u->half_off;
    if (!add_nodes(u, n, n / 2, &off))
        return false;
    u->half_off = off;
    u->off = before > off ? off * (off / before) : off;
    u->way = UNKNOWN_NODES;
    if (!u->is_exact)
        find_missing(u);
    return true;
}

/* --- values --- */

double *unknown_values(struct unknown *u, double z, bool far)
{
    if (u->way == UNKNOWN_LINE)
        take_on_line(u);
    else if (u->way == UNKNOWN_NODES)
        interpolate(u, u->n_nodes, z, u->values);
    else if (!take_point(u, far, u->values))
        return NULL;
    double sign = (u->way == UNKNOWN_NODES) - u->bare; /* nodes are without it */
    for (size_t k = 0; sign != 0 && k < u->moving->n; k++)
        u->values[k] += sign * u->moving->missing[k];
    return u->values;
}
