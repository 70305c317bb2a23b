/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The same bits everywhere: a hash of the results of 100,000 fixed arguments a function.
 * The arguments are made of whole numbers only. The hashes are computed, by this code:
 * they change when a function does, and must not change with compiler, optimisation or
 * machine. */
#include <inttypes.h>
#include <math.h>

#include "elementary_test.h"
#include "math/elementary.h"

enum { ARGUMENTS = 100000 };

/* FNV-1a, 64 bits, over the eight bytes of the result, lowest first. All NaNs are one. */
static uint64_t add_result(uint64_t hash, double y)
{
    uint64_t bits = isnan(y) ? UINT64_C(0x7ff8000000000000) : bits_of(y);
    for (int i = 0; i < 64; i += 8)
        hash = (hash ^ (bits >> i & 0xff)) * UINT64_C(0x100000001b3);
    return hash;
}

static double random_sign(struct random *r, double x)
{
    return random_next(r) & 1 ? x : -x;
}

struct subject {
    const char *name;
    double (*f)(double);
    double lo, hi; /* of the size of most arguments */
    int positive;
    uint64_t hash;
};

static const struct subject subjects[] = {
    {"exp", math_exp, 0x1p-30, 750, 0, UINT64_C(0x02c31fe2b558fad9)},
    {"expm1", math_expm1, 0x1p-60, 750, 0, UINT64_C(0xe220f7dbc950d4c6)},
    {"log", math_log, 0x1p-1074, 0x1p1023, 1, UINT64_C(0xb443903396d75b66)},
    {"log10", math_log10, 0x1p-1074, 0x1p1023, 1, UINT64_C(0xc059cde5e1e24566)},
    {"log1p", math_log1p, 0x1p-60, 0x1p60, 0, UINT64_C(0x8c124ee0feb6217f)},
    {"erfc", math_erfc, 0x1p-10, 30, 0, UINT64_C(0x5789ca23d68b5316)},
};

START_TEST(same_bits)
{
    const struct subject *s = &subjects[_i];
    struct random r = random_seed(41);
    uint64_t hash = UINT64_C(0xcbf29ce484222325);
    for (int i = 0; i < ARGUMENTS; i++) {
        double x = random_between(&r, s->lo, s->hi);
        if (i % 10 == 0)
            x = double_of(random_next(&r)); /* anything */
        else if (i % 10 == 1)
            x = 1 + random_sign(&r, random_between(&r, 0x1p-52, 0.5));
        else if (!s->positive)
            x = random_sign(&r, x);
        hash = add_result(hash, s->f(x));
    }
    ck_assert_msg(hash == s->hash, "%s: hash 0x%016" PRIx64, s->name, hash);
}
END_TEST

START_TEST(same_bits_of_pow)
{
    struct random r = random_seed(43);
    uint64_t hash = UINT64_C(0xcbf29ce484222325);
    for (int i = 0; i < ARGUMENTS; i++) {
        double x = random_between(&r, 0x1p-20, 0x1p20);
        double y = (double)random_range(&r, -(1 << 20), 1 << 20) / (1 << (i % 24));
        if (i % 10 == 0)
            y = double_of(random_next(&r)); /* anything */
        if (i % 7 == 0)
            x = -x;
        hash = add_result(hash, math_pow(x, y));
    }
    ck_assert_msg(hash == UINT64_C(0x7f9901611fac5652), "pow: hash 0x%016" PRIx64, hash);
}
END_TEST

Suite *suite_elementary_bits(void)
{
    Suite *s = suite_create("elementary bits");
    TCase *c = tcase_create("bits");
    tcase_set_timeout(c, 60);
    tcase_add_loop_test(c, same_bits, 0, sizeof subjects / sizeof *subjects);
    tcase_add_test(c, same_bits_of_pow);
    suite_add_tcase(s, c);
    return s;
}
