/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Runs the suites of the elementary functions. A run without a test is a failure. */
#include "elementary_test.h"

#include <stdlib.h>
#include <string.h>

uint64_t bits_of(double x)
{
    uint64_t bits;
    memcpy(&bits, &x, sizeof bits);
    return bits;
}

double double_of(uint64_t bits)
{
    double x;
    memcpy(&x, &bits, sizeof x);
    return x;
}

double random_between(struct random *r, double lo, double hi)
{
    uint64_t a = bits_of(lo), b = bits_of(hi);
    uint64_t least = a < b ? a : b, most = a < b ? b : a;
    return double_of(least + random_next(r) % (most - least + 1));
}

int main(void)
{
    SRunner *sr = srunner_create(suite_elementary_values());
    srunner_add_suite(sr, suite_elementary_sweep());
    srunner_add_suite(sr, suite_elementary_order());
    srunner_add_suite(sr, suite_elementary_bits());
    srunner_run_all(sr, CK_NORMAL);
    int bad = srunner_ntests_failed(sr) != 0 || srunner_ntests_run(sr) == 0;
    srunner_free(sr);
    return bad ? EXIT_FAILURE : EXIT_SUCCESS;
}
