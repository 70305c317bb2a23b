/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Root of a monotone function: the bracket shrinks at every step; Newton's point
 * is taken when it lies inside, else the middle, or a wider step while one end of
 * the bracket is still open. */
#include <math.h>
#include <stdbool.h>

#include "math/dist.h"

enum { MOST_STEPS = 400 };

/* Where to look next when Newton's point cannot be used. */
static double middle(double u, double low, double high, double *width)
{
    if (isfinite(low) && isfinite(high))
        return low + (high - low) / 2;
    *width *= 2;
    return isfinite(low) ? u + *width : u - *width;
}

double dist_root(const struct dist_function *f, double start, double high)
{
    double low = -INFINITY, u = start, width = 0.5;
    for (int step = 0; step < MOST_STEPS; step++) {
        double value, slope;
        f->at(f->ctx, u, &value, &slope);
        if (isnan(value))
            return NAN;
        if (value == 0)
            return u;
        if (value * f->direction > 0)
            high = u;
        else
            low = u;
        double next = u - value / slope;
        bool inside = isfinite(next) && next > low && next < high;
        if (inside && fabs(next - u) <= 1e-13 * fmax(1, fabs(u)))
            return next;
        if (!inside)
            next = middle(u, low, high, &width);
        if (next == low || next == high || next == u)
            return next;
        u = next;
    }
    return NAN;
}

/* Newton's steps square the error, but for a factor; 1e-7 leaves 1e-13 or so. */
double dist_root_near(void (*at)(const void *ctx, double u, double *value, double *slope),
                      const void *ctx, double near)
{
    enum { FEW = 4 };
    double u = near, value, slope;
    for (int i = 0; i < FEW && isfinite(u); i++) {
        at(ctx, u, &value, &slope);
        double step = value / slope;
        u -= step;
        if (fabs(step) <= 1e-7)
            return u;
    }
    return NAN;
}
