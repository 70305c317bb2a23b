/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The deviate of the standard normal distribution, as parts that dist_normal.c and
 * lanes_kernels.c put together: M. J. Wichura, Algorithm AS 241 (PPND16), Applied Statistics 37
 * (1988) 477-484. A template like elementary_core.h: on doubles or on vectors of them. */
#ifndef MATH_NORMAL_CORE_H
#define MATH_NORMAL_CORE_H

#include "math/elementary_core.h"

#define NORMAL_CENTRE 0.425 /* as far from 1/2 the centre reaches */
#define NORMAL_FAR 5        /* the root from which on a tail is far */

/* c[0] + c[1] x + ... + c[7] x^7 */
static inline real normal_polynomial(const double c[8], real x)
{
    real y = elementary_every(c[7]);
    for (int i = 6; i >= 0; i--)
        y = y * x + c[i];
    return y;
}

/* Coefficients of Wichura 1988, PPND16: centre, tail, far tail. */
static const double normal_centre_up[8] = {3.3871328727963666080e0, 1.3314166789178437745e2,
                                           1.9715909503065514427e3, 1.3731693765509461125e4,
                                           4.5921953931549871457e4, 6.7265770927008700853e4,
                                           3.3430575583588128105e4, 2.5090809287301226727e3};
static const double normal_centre_down[8] = {1,
                                             4.2313330701600911252e1,
                                             6.8718700749205790830e2,
                                             5.3941960214247511077e3,
                                             2.1213794301586595867e4,
                                             3.9307895800092710610e4,
                                             2.8729085735721942674e4,
                                             5.2264952788528545610e3};
static const double normal_tail_up[8] = {1.42343711074968357734e0,  4.63033784615654529590e0,
                                         5.76949722146069140550e0,  3.64784832476320460504e0,
                                         1.27045825245236838258e0,  2.41780725177450611770e-1,
                                         2.27238449892691845833e-2, 7.74545014278341407640e-4};
static const double normal_tail_down[8] = {1,
                                           2.05319162663775882187e0,
                                           1.67638483018380384940e0,
                                           6.89767334985100004550e-1,
                                           1.48103976427480074590e-1,
                                           1.51986665636164571966e-2,
                                           5.47593808499534494600e-4,
                                           1.05075007164441684324e-9};
static const double normal_far_up[8] = {6.65790464350110377720e0,  5.46378491116411436990e0,
                                        1.78482653991729133580e0,  2.96560571828504891230e-1,
                                        2.65321895265761230930e-2, 1.24266094738807843860e-3,
                                        2.71155556874348757815e-5, 2.01033439929228813265e-7};
static const double normal_far_down[8] = {1,
                                          5.99832206555887937690e-1,
                                          1.36929880922735805310e-1,
                                          1.48753612908506148525e-2,
                                          7.86869131145613259100e-4,
                                          1.84631831751005468180e-5,
                                          1.42151175831644588870e-7,
                                          2.04426310338993978564e-15};

/* For p - 1/2, at most NORMAL_CENTRE either way. */
static inline real normal_centre(real centred)
{
    real r = 0.180625 - centred * centred;
    return centred * normal_polynomial(normal_centre_up, r) /
           normal_polynomial(normal_centre_down, r);
}

/* What the tails go by; p is the smaller of p and 1 - p. */
static inline real normal_tail_root(real p)
{
    return elementary_root(-elementary_log(p));
}

/* The size of the deviate, up to NORMAL_FAR. */
static inline real normal_tail(real root)
{
    real r = root - 1.6;
    return normal_polynomial(normal_tail_up, r) / normal_polynomial(normal_tail_down, r);
}

/* And from there on. */
static inline real normal_far_tail(real root)
{
    real r = root - NORMAL_FAR;
    return normal_polynomial(normal_far_up, r) / normal_polynomial(normal_far_down, r);
}

#endif
