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
 * up, those that overlap as well: two stretches of one day are two exposures on it.
 *
 * Of a rate that grows or ages (evidence/trend.h) each stretch counts amount times the
 * integral of lambda(t)/lambda(0) over it: the events are Poisson with mean lambda(0) T, and
 * what is learnt is lambda(0), the rate on the day of evaluation.
 *
 * Shares of kinds of fault: counts n_i of K kinds are multinomial, with the Dirichlet prior
 * of K equal parameters c, 1 (uniform) or 1/2 (jeffreys). Posterior: Dirichlet(c + n_i); the
 * share of kind i alone is beta(c + n_i, sum of the others). NASA/SP-2009-569, example 7.
 * The shares of one rate sum to 1, so they depend on each other: each quantity here is the
 * marginal of one, right for whatever is linear in shares, while the mean of a product of
 * two shares of one rate is not the product of their means. */
#ifndef EVIDENCE_POSTERIOR_H
#define EVIDENCE_POSTERIOR_H

#include "evidence/trend.h"

/* The exposure of a rate on the day of evaluation, in base units (amount a), weighted by the
 * trend. OHMEN_COMPUTE names the stretch that begins or ends behind that day or begins before
 * what ages was there, or a sum that is not finite and above 0. `id`: of the rate, for
 * messages. */
ohmen_status posterior_exposure(const struct rate *r, const char *id, day date,
                                const struct trend *trend, double *out, ohmen_error *e);

/* The quantity of a rate on the day of evaluation: `is` itself, the prior where no events
 * were counted, else the posterior. Its text reads "gamma prior with mean 2.5e-3 per section
 * a, weight 0.5; 3 events in 8 section for 4483 d", and where the rate changes "3 events in
 * 8 section for 4483 d from 2014-08-25, weighted by growth 2 % per a and ageing 1.8 since
 * 2001-05-01 for 2026-12-01". Errors as above, and those of trend_of where events were
 * counted. The rate is one that model_load accepted. */
ohmen_status posterior_rate(struct arena *a, const struct rate *r, const char *id, day date,
                            const struct quantity **out, ohmen_error *e);

/* The same under the trend of `as`, by which its events came about: for a rate `r` that an
 * option changes, `as` is the rate without the option. What an option does to growth or age
 * is of the future, and its evidence stays what it was. */
ohmen_status posterior_rate_trended(struct arena *a, const struct rate *r, const struct rate *as,
                                    const char *id, day date, const struct quantity **out,
                                    ohmen_error *e);

/* The share of a kind of fault, by its index in `kinds`, at least two: "uniform prior over 3
 * kinds with 20 of 26 faults". */
const struct quantity *posterior_share(struct arena *a, const struct rate *r, size_t kind);

/* The quantity of a probability of failure on demand: `is` itself, or the posterior of its
 * counts: "jeffreys prior with 2 failures in 118 demands". */
const struct quantity *posterior_demands(struct arena *a, const struct demand_record *r);

#endif
