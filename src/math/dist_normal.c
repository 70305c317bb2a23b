/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The standard normal distribution: both tails to full relative accuracy.
 * Owns nothing. */
#include <math.h>

#include "math/dist.h"
#include "math/elementary.h"
#include "math/normal_core.h"

double dist_normal_probability(double z)
{
    return 0.5 * math_erfc(-z * 0.70710678118654752440); /* z / sqrt 2; DLMF 7.17.1 */
}

/* Below -35 the tail is phi(z)/|z| (1 - 1/z^2 + 3/z^4 - 15/z^6 + ...),
 * Abramowitz & Stegun 26.2.12; six terms give 1e-15 there. */
static double log_far_tail(double z)
{
    double t = 1 / (z * z);
    double series = -t * (1 - t * (3 - t * (15 - t * (105 - t * 945))));
    return -0.5 * z * z - math_log(-z) - 0.91893853320467274178 + math_log1p(series);
}

double dist_normal_log_probability(double z)
{
    if (z < -35)
        return log_far_tail(z);
    return z < 0 ? math_log(dist_normal_probability(z)) : math_log1p(-dist_normal_probability(-z));
}

double dist_normal_deviate(double p)
{
    double centred = p - 0.5;
    if (fabs(centred) <= NORMAL_CENTRE)
        return normal_centre(centred);
    double r = normal_tail_root(centred < 0 ? p : 1 - p);
    double z = r <= NORMAL_FAR ? normal_tail(r) : normal_far_tail(r);
    return centred < 0 ? -z : z;
}
