/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Instruction sets: their names, and what runs. */
#include "base_test.h"

#include <string.h>

#include "base/isa.h"

START_TEST(names_come_back)
{
    static const char *const names[] = {"plain", "wide", "widest"};
    ck_assert_int_eq(ISA_COUNT, sizeof names / sizeof *names);
    for (int i = 0; i < ISA_COUNT; i++) {
        enum isa back = ISA_COUNT;
        ck_assert_str_eq(isa_name((enum isa)i), names[i]);
        ck_assert(isa_of_name(names[i], &back));
        ck_assert_int_eq(back, i);
    }
}
END_TEST

START_TEST(other_names_leave_the_output)
{
    static const char *const none[] = {"", "plai", "plain ", "Plain", "wid", "widesT", "avx2"};
    for (size_t i = 0; i < sizeof none / sizeof *none; i++) {
        enum isa out = ISA_wide;
        ck_assert_msg(!isa_of_name(none[i], &out), "'%s' is a name", none[i]);
        ck_assert_int_eq(out, ISA_wide);
    }
}
END_TEST

START_TEST(plain_always_runs)
{
    ck_assert(isa_runs(ISA_plain));
}
END_TEST

START_TEST(the_best_is_the_last_that_runs)
{
    enum isa best = isa_best();
    ck_assert(isa_runs(best));
    for (int i = best + 1; i < ISA_COUNT; i++)
        ck_assert_msg(!isa_runs((enum isa)i), "%s is better", isa_name((enum isa)i));
}
END_TEST

/* The processors that have what a row needs have what the row before it needs. */
START_TEST(what_runs_comes_first)
{
    for (int i = 1; i < ISA_COUNT; i++)
        ck_assert(!isa_runs((enum isa)i) || isa_runs((enum isa)(i - 1)));
}
END_TEST

Suite *suite_isa(void)
{
    Suite *s = suite_create("instruction sets");
    TCase *t = tcase_create("instruction sets");
    tcase_add_test(t, names_come_back);
    tcase_add_test(t, other_names_leave_the_output);
    tcase_add_test(t, plain_always_runs);
    tcase_add_test(t, the_best_is_the_last_that_runs);
    tcase_add_test(t, what_runs_comes_first);
    suite_add_tcase(s, t);
    return s;
}
