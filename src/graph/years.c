/* SPDX-License-Identifier: GPL-3.0-or-later */
/* YEARS: present value of what differs from year to year (graph.h). The same years as those of
 * an annuity, each with its own value, summed with compensation in the order of time. */
#include "graph/ops.h"

#include "math/elementary.h"

#include <math.h>

double years_length(const struct years *y, size_t i, double *middle)
{
    double begin = floor(y->from) + (double)i, end = begin + 1;
    begin = fmax(begin, y->from);
    end = fmin(end, y->to);
    *middle = begin + (end - begin) / 2;
    return end - begin;
}

static double log_rate_of(double rate)
{
    return rate > -1 ? math_log1p(rate) : NAN;
}

/* What 1 in each part of a year is worth now. */
static double factor(const struct years *y, size_t i, double log_rate, double *middle)
{
    double length = years_length(y, i, middle);
    return annuity_worth(length, *middle, log_rate);
}

double years_point(const struct years *y, const double *x)
{
    double log_rate = log_rate_of(x[0]), middle;
    struct compensated sum = {0};
    for (size_t i = 0; i < y->n_years; i++)
        compensated_add(&sum, factor(y, i, log_rate, &middle) * x[1 + y->of_year[i]]);
    return y->n_years || isfinite(log_rate) ? sum.sum + sum.lost : NAN;
}

void years_backward(const struct years *y, const double *x, double w, double *back)
{
    double log_rate = log_rate_of(x[0]), middle;
    struct compensated duration = {0};
    for (size_t i = 0; i < y->n_years; i++) {
        double f = factor(y, i, log_rate, &middle);
        compensated_add(&duration, middle * f * x[1 + y->of_year[i]]);
        back[1 + y->of_year[i]] += w * f;
    }
    back[0] -= w * (duration.sum + duration.lost) / (1 + x[0]);
}
