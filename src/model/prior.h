/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which distribution the keys of a rate's prior make.
 *
 *     form, keys                                  distribution
 *     jeffreys                                    gamma, shape 1/2, rate 0 (improper)
 *     constrained: mean M                         gamma, shape 1/2, rate 1/(2 M)
 *     fixed: mean M                               the number M, whatever is counted
 *     [gamma:] mean M, weight W                   gamma, shape W, rate W/M
 *     [gamma:] mean M, error-factor E             gamma with 95 % point over median E
 *     [gamma:] two of p5, p50, p95, p99           gamma with these percentiles
 *     [gamma:] mean, one of p5, p50, p95, p99     gamma; `solution` where two shapes have them
 *     gamma: median, error-factor                 gamma
 *     [lognormal:] median M, error-factor E       lognormal
 *     lognormal: mean M, error-factor E           lognormal, median M exp(-s^2/2), s = ln E / z
 *     lognormal: two percentiles A at z1, B at z2 lognormal, s = ln(B/A) / (z2 - z1)
 *
 * A form in brackets may be left out. z is the 95 % point of the standard normal. Sources:
 * NUREG/CR-6823, section 6.2.2; NASA/SP-2009-569, examples 3, 6, 8; Atwood, Reliability
 * Engineering and System Safety 53 (1996) 37-46 for the constrained one (from memory). */
#ifndef MODEL_PRIOR_H
#define MODEL_PRIOR_H

#include "model/kinds.h"

enum prior_family { PRIOR_FIXED, PRIOR_GAMMA, PRIOR_LOGNORMAL };

/* In base units. */
struct prior_distribution {
    enum prior_family family;
    double mean;                 /* PRIOR_FIXED */
    double shape, rate;          /* PRIOR_GAMMA; rate 0: improper */
    double median, error_factor; /* PRIOR_LOGNORMAL */
};

/* The distribution; NULL when the keys make one, else a sentence that says why they do not,
 * and in *key the key that it is about (NULL: the prior as a whole). All quantities must
 * agree in dimension. Shapes of gamma distributions: see math/gamma_fit.h. */
const char *prior_resolve(struct arena *a, const struct prior *p, struct prior_distribution *out,
                          const char **key);

#endif
