/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How a rate changes with time: growth and ageing.
 *
 * Time t is in years from the begin of the day of evaluation, negative before it; day D
 * begins at (D - date) / 365. The level that a document states or evidence teaches is that
 * of t = 0. Then
 *     lambda(t) / lambda(0) = (1 + g)^t  x  (a(t) / a(0))^(b - 1)
 * with the growth g per year, the exponent b of ageing, and the age a(t) = t + a(0) in
 * years since `since`: the power law (Duane, AMSAA) process, NIST/SEMATECH e-Handbook,
 * sections 8.1.7.2 and 8.2.2.3, and IEC 61164 (both from memory). b > 1 gets worse with
 * age, b < 1 better, b = 1 stays.
 *
 * Renewal puts something new in the place of what ages: from `begin` on, the age counts
 * from there, and
 *     lambda(t) / lambda(0) = (1 + g)^t  x  ((t - begin) / a(0))^(b - 1)
 * with a(0) still the age of the old one at t = 0, since it is at that age that the rate
 * has its level; growth is not of the thing and goes on. An option renews by a later
 * `since`: up to that day the trend of the rate without the option holds, from there on
 * trend_renewed of it, with begin = (the new since - date) / 365. Evidence is of the old
 * one: posterior_rate_trended takes the old trend. */
#ifndef EVIDENCE_TREND_H
#define EVIDENCE_TREND_H

#include "model/model.h"

struct trend {
    double growth;    /* per year, above -1 */
    bool ages;        /* else what follows has no meaning */
    double exponent;  /* b > 0 */
    double age;       /* at t = 0; below 0: years until it begins to age */
    double reference; /* > 0: the age at which the rate has the level lambda(0) */
};

/* The trend of a rate that model_load accepted, on the day of evaluation. OHMEN_COMPUTE
 * names a rate whose ageing does not begin before that day. */
ohmen_status trend_of(const struct rate *r, const char *id, day date, struct trend *out,
                      ohmen_error *e);

/* The trend after a renewal at t = begin, for times from there on. */
struct trend trend_renewed(const struct trend *t, double begin);

/* Does the rate stay as it is? */
bool trend_is_flat(const struct trend *t);

/* Does `years` lie before the ageing begins (by more than rounding)? */
bool trend_is_before(const struct trend *t, double years);

/* The mean of lambda(t) / lambda(0) over from < t < to, where from < to and `from` does not
 * lie before the ageing begins. Exactly 1 where it is flat; else within 1e-12, closed where
 * growth or ageing stands alone. Infinite or 0 where it leaves the range of a double. */
double trend_mean(const struct trend *t, double from, double to);

#endif
