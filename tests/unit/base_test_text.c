/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Text buffers, order of bytes and nearest names. */
#include <locale.h>
#include <stdio.h>
#include <string.h>

#include "base/text.h"
#include "base_test.h"

START_TEST(buffer_adds_up)
{
    struct arena *a = arena_new(NULL);
    struct text t;
    text_init(&t, a);
    ck_assert_str_eq(text_str(&t), "");
    text_add(&t, "");
    text_add(&t, "risk");
    text_byte(&t, ':');
    text_addn(&t, " 17 xxx", 4);
    text_repeat(&t, "-=", 3);
    text_repeat(&t, "never", 0);
    text_printf(&t, "[%5.1f|%s]", 2.25, "k");
    ck_assert_str_eq(text_str(&t), "risk: 17 -=-=-=[  2.2|k]");
    ck_assert_uint_eq(t.n, strlen(text_str(&t)));
    arena_free(a);
}
END_TEST

START_TEST(buffer_holds_zero_bytes_and_grows)
{
    struct arena *a = arena_new(NULL);
    struct text t;
    text_init(&t, a);
    for (int i = 0; i < 70000; i++)
        text_addn(&t, "a\0", 2);
    ck_assert_uint_eq(t.n, 140000);
    for (size_t i = 0; i < t.n; i++)
        ck_assert_int_eq(t.at[i], i % 2 ? 0 : 'a');
    ck_assert_int_eq(t.at[t.n], 0);
    arena_free(a);
}
END_TEST

START_TEST(order_is_of_unsigned_bytes)
{
    static const char *sorted[] = {"",    "A",  "AB", "B",        "a",
                                   "a-1", "a0", "~",  "\xC3\xA4", "\xE2\x82\xAC"};
    for (int i = 0; i < 10; i++)
        for (int k = 0; k < 10; k++) {
            int c = text_compare(sorted[i], sorted[k]);
            ck_assert_int_eq((c > 0) - (c < 0), (i > k) - (i < k));
            ck_assert_int_eq(text_equal(sorted[i], sorted[k]), i == k);
        }
    ck_assert(text_starts("breakdown", "break"));
    ck_assert(text_starts("x", ""));
    ck_assert(!text_starts("brea", "break"));
}
END_TEST

/* wanted, candidates, the one that must be taken. */
static const struct near_case {
    const char *wanted;
    const char *offered[4];
    const char *best;
} near_cases[] = {
    {"frequncy", {"friends", "frequency", "currency"}, "frequency"}, /* one letter dropped */
    {"fiedl", {"fields", "field", "file"}, "field"},                /* neighbours swapped: 1 */
    {"KV", {"V", "kA", "kV"}, "kV"},                                /* only the case: 1/2 */
    {"kV", {"kV"}, "kV"},
    {"title", {"TITLE"}, NULL},           /* five halves: more than two letters */
    {"IT", {"it"}, "it"},                 /* a Turkish i would be one half too much */
    {"date", {"dose", "rate", "gate"}, "gate"},  /* a tie: first in byte order */
    {"date", {"gate", "rate", "dose"}, "gate"},
    {"date", {"dusk"}, NULL},             /* three of four letters differ */
    {"x", {"y", "xy"}, NULL},             /* any other letter would do */
    {"m", {"k", "M"}, "M"},
    {"", {"a", "b"}, NULL},
    {"abcdefghijkl", {"abcdefghiXYZ"}, "abcdefghiXYZ"}, /* three letters: the most */
    {"abcdefghijkl", {"abcdefghWXYZ"}, NULL},           /* four */
    {"\xC3\xA4rger", {"arger"}, "arger"},               /* two bytes of six */
};
enum { NEAR_CASES = sizeof near_cases / sizeof near_cases[0] };

static void check_nearest(const struct near_case *c)
{
    struct nearest n;
    nearest_init(&n, c->wanted);
    for (int i = 0; i < 4 && c->offered[i]; i++)
        nearest_offer(&n, c->offered[i]);
    if (c->best)
        ck_assert_pstr_eq(nearest_take(&n), c->best);
    else
        ck_assert_pstr_eq(nearest_take(&n), NULL);
}

START_TEST(nearest_name)
{
    check_nearest(&near_cases[_i]);
}
END_TEST

START_TEST(nearest_name_in_turkish)
{
    ck_assert_ptr_nonnull(setlocale(LC_ALL, "tr_TR.UTF-8"));
    check_nearest(&near_cases[_i]);
    setlocale(LC_ALL, "C");
}
END_TEST

START_TEST(nearest_has_a_longest_name)
{
    char wanted[66], candidate[66];
    for (size_t n = 64; n <= 65; n++) {
        memset(wanted, 'n', n);
        memset(candidate, 'n', n);
        wanted[n] = candidate[n] = 0;
        candidate[5] = 'x';
        struct nearest near;
        nearest_init(&near, wanted);
        nearest_offer(&near, candidate);
        ck_assert_pstr_eq(nearest_take(&near), n == 64 ? candidate : NULL);
    }
}
END_TEST

Suite *suite_text(void)
{
    Suite *s = suite_create("text");
    TCase *t = tcase_create("text");
    tcase_add_test(t, buffer_adds_up);
    tcase_add_test(t, buffer_holds_zero_bytes_and_grows);
    tcase_add_test(t, order_is_of_unsigned_bytes);
    tcase_add_loop_test(t, nearest_name, 0, NEAR_CASES);
    tcase_add_loop_test(t, nearest_name_in_turkish, 0, NEAR_CASES);
    tcase_add_test(t, nearest_has_a_longest_name);
    suite_add_tcase(s, t);
    return s;
}
