/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is known of rates and probabilities after events were counted.
 *
 * A rate x per exposure and time, with the prior that its document states, after n events
 * in the exposure T, which are Poisson with mean x T:
 *     gamma prior, shape a, rate b    gamma, shape a + n, rate b + T (conjugate)
 *     lognormal prior                 density proportional to prior(x) x^n exp(-x T), by
 *                                     quadrature (math/dist.h, DIST_COUNTED, with its error
 *                                     bound)
 * A probability on demand with beta(a, b), after f failures in n demands: beta(a + f,
 * b + n - f), with a = b = 1/2 (jeffreys) or 1 (uniform). NUREG/CR-6823, sections 6.2.2 and
 * 6.3.2; NASA/SP-2009-569.
 *
 * Exposure: each stretch counts its amount times its days / 365 (days from `from` to `to`,
 * both included; without `to`, to the day of evaluation, itself included). Stretches add
 * up, those that overlap as well: two stretches of one day are two exposures on it. */
#ifndef EVIDENCE_POSTERIOR_H
#define EVIDENCE_POSTERIOR_H

#include "model/model.h"

/* The exposure of a rate on the day of evaluation, in base units (amount a). OHMEN_COMPUTE
 * names the stretch that begins or ends behind that day. `id`: of the rate, for messages. */
ohmen_status posterior_exposure(const struct rate *r, const char *id, day date, double *out,
                                ohmen_error *e);

/* The quantity of a rate: `is` itself, the prior where no events were counted, else the
 * posterior. Its text reads "gamma prior with mean 2.5e-3 per section a, weight 0.5; 3
 * events in 8 section for 4483 d". Errors as above. The rate is one that
 * model_load accepted. */
ohmen_status posterior_rate(struct arena *a, const struct rate *r, const char *id, day date,
                            const struct quantity **out, ohmen_error *e);

/* The quantity of a probability of failure on demand: `is` itself, or the posterior of its
 * counts: "jeffreys prior with 2 failures in 118 demands". */
const struct quantity *posterior_demands(struct arena *a, const struct demand_record *r);

#endif
