/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Mean, variance, quantile and range of distributions: the shapes of src/math with
 * the factor `times` in front. Formulas and their sources stand in math/dist.c. */
#include <assert.h>
#include <math.h>

#include "math/dist.h"
#include "quantity/quantity.h"

static const enum dist_shape dist_shapes[SHAPE_COUNT] = {
    [SHAPE_NORMAL] = DIST_NORMAL,
    [SHAPE_LOGNORMAL] = DIST_LOGNORMAL,
    [SHAPE_GAMMA] = DIST_GAMMA,
    [SHAPE_BETA] = DIST_BETA,
    [SHAPE_UNIFORM] = DIST_UNIFORM,
    [SHAPE_TRIANGULAR] = DIST_TRIANGULAR,
    [SHAPE_PERT] = DIST_PERT,
    [SHAPE_DISCRETE] = DIST_DISCRETE,
    [SHAPE_COUNTED] = DIST_COUNTED,
};

struct dist quantity_dist(const struct quantity *q)
{
    assert(q->shape != SHAPE_EXPRESSION);
    return (struct dist){.shape = dist_shapes[q->shape], .p = {q->p[0], q->p[1], q->p[2], q->p[3]},
                         .n = q->n, .values = q->values, .probabilities = q->probabilities};
}

double quantity_mean(const struct quantity *q)
{
    struct dist d = quantity_dist(q);
    return q->times * dist_mean(&d);
}

double quantity_variance(const struct quantity *q)
{
    struct dist d = quantity_dist(q);
    return q->times == 0 ? 0 : q->times * q->times * dist_variance(&d);
}

ohmen_status quantity_tail(const struct quantity *x, double p, double q, double *out,
                           ohmen_error *e)
{
    struct dist d = quantity_dist(x);
    bool mirrored = x->times < 0; /* the p quantile is then that of 1 - p */
    double at = mirrored ? dist_quantile(&d, q, p) : dist_quantile(&d, p, q);
    char text[32];
    if (!isfinite(at))
        return error_set(e, OHMEN_COMPUTE, "the quantile at %s of '%s' cannot be computed",
                         isfinite(p) ? text_double(text, p) : "a number that is not finite",
                         x->text ? x->text : "a distribution");
    *out = x->times * at;
    return OHMEN_OK;
}

ohmen_status quantity_quantile(const struct quantity *q, double p, double *out, ohmen_error *e)
{
    return quantity_tail(q, p, 1 - p, out, e);
}

static void range_of_shape(const struct quantity *q, double *low, double *high)
{
    *low = 0;
    *high = INFINITY;
    switch (q->shape) {
    case SHAPE_NORMAL:
        *low = -INFINITY;
        return;
    case SHAPE_LOGNORMAL:
        *high = isnan(q->p[2]) ? INFINITY : q->p[2];
        return;
    case SHAPE_GAMMA:
    case SHAPE_COUNTED:
        return;
    case SHAPE_BETA:
        *high = 1;
        return;
    case SHAPE_UNIFORM:
        *low = q->p[0];
        *high = q->p[1];
        return;
    case SHAPE_TRIANGULAR:
    case SHAPE_PERT:
        *low = q->p[0];
        *high = q->p[2];
        return;
    case SHAPE_DISCRETE:
        *low = q->values[0];
        *high = q->values[q->n - 1];
        return;
    default:
        *low = quantity_is_constant(q) ? expr_constant(q->expr) : -INFINITY;
        *high = quantity_is_constant(q) ? *low : INFINITY;
    }
}

/* 0 times infinity is 0 here: nothing is left of the quantity. */
static double scaled(double times, double x)
{
    return times == 0 ? 0 : times * x;
}

void quantity_range(const struct quantity *q, double *low, double *high)
{
    double a, b;
    range_of_shape(q, &a, &b);
    *low = scaled(q->times, q->times < 0 ? b : a);
    *high = scaled(q->times, q->times < 0 ? a : b);
}
