/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A register of hazards that each have a response of their own: two schemes over 12 to 16
 * elements, of which three in ten are shared with other hazards. Elements fail undetected, each at
 * its own rate, and are tested every 1, 2, 4 or 6 years, on no known day. One option for each of
 * `n_options` hazards, spread evenly, changes its frequency. The same size, the same register. */
#ifndef TESTS_BENCH_PROTECTION_REGISTER_H
#define TESTS_BENCH_PROTECTION_REGISTER_H

#include "base/text.h"
#include "chains.h"

struct protection {
    size_t n, n_options;
    struct chains *chains; /* of hazard i */
};

/* Hazard i is H-00000 and so on in byte order, option i OPT-00. n_options <= n. */
struct protection protection_draw(struct arena *a, size_t n, size_t n_options);

/* As documents in YAML. */
void protection_write(struct text *t, const struct protection *p);

#endif
