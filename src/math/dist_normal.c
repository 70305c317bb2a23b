/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The standard normal distribution: both tails to full relative accuracy. */
#include <math.h>

#include "math/dist.h"
#include "math/elementary.h"

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

/* c[0] + c[1] x + ... + c[7] x^7 */
static double polynomial(const double c[8], double x)
{
    double y = c[7];
    for (int i = 6; i >= 0; i--)
        y = y * x + c[i];
    return y;
}

/* Coefficients of Wichura 1988, PPND16: centre, tail, far tail. */
static const double centre_up[8] = {
    3.3871328727963666080e0, 1.3314166789178437745e2, 1.9715909503065514427e3,
    1.3731693765509461125e4, 4.5921953931549871457e4, 6.7265770927008700853e4,
    3.3430575583588128105e4, 2.5090809287301226727e3};
static const double centre_down[8] = {
    1, 4.2313330701600911252e1, 6.8718700749205790830e2, 5.3941960214247511077e3,
    2.1213794301586595867e4, 3.9307895800092710610e4, 2.8729085735721942674e4,
    5.2264952788528545610e3};
static const double tail_up[8] = {
    1.42343711074968357734e0, 4.63033784615654529590e0, 5.76949722146069140550e0,
    3.64784832476320460504e0, 1.27045825245236838258e0, 2.41780725177450611770e-1,
    2.27238449892691845833e-2, 7.74545014278341407640e-4};
static const double tail_down[8] = {
    1, 2.05319162663775882187e0, 1.67638483018380384940e0, 6.89767334985100004550e-1,
    1.48103976427480074590e-1, 1.51986665636164571966e-2, 5.47593808499534494600e-4,
    1.05075007164441684324e-9};
static const double far_up[8] = {
    6.65790464350110377720e0, 5.46378491116411436990e0, 1.78482653991729133580e0,
    2.96560571828504891230e-1, 2.65321895265761230930e-2, 1.24266094738807843860e-3,
    2.71155556874348757815e-5, 2.01033439929228813265e-7};
static const double far_down[8] = {
    1, 5.99832206555887937690e-1, 1.36929880922735805310e-1, 1.48753612908506148525e-2,
    7.86869131145613259100e-4, 1.84631831751005468180e-5, 1.42151175831644588870e-7,
    2.04426310338993978564e-15};

double dist_normal_deviate(double p)
{
    double centred = p - 0.5;
    if (fabs(centred) <= 0.425) {
        double r = 0.180625 - centred * centred;
        return centred * polynomial(centre_up, r) / polynomial(centre_down, r);
    }
    double r = sqrt(-math_log(centred < 0 ? p : 1 - p));
    double z = r <= 5 ? polynomial(tail_up, r - 1.6) / polynomial(tail_down, r - 1.6)
                      : polynomial(far_up, r - 5) / polynomial(far_down, r - 5);
    return centred < 0 ? -z : z;
}
