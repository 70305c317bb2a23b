/* SPDX-License-Identifier: GPL-3.0-or-later */
/* UTF-8: validity byte by byte, composition, columns, and that nothing which
 * could move a cursor or hide text gets through utf8_clean. */
#include <locale.h>
#include <stdio.h>
#include <string.h>

#include "base/text.h"
#include "base/utf8.h"
#include "base_test.h"
#include "failmem.h"

/* The table of well-formed byte sequences: The Unicode Standard 15.0, table 3-7. */
static bool well_formed(const unsigned char *s, size_t n)
{
    if (n == 1)
        return s[0] >= 1 && s[0] <= 0x7F; /* the zero byte is no text of ours */
    for (size_t i = 2; i < n; i++)
        if (s[i] < 0x80 || s[i] > 0xBF)
            return false;
    unsigned char lo = s[0] == 0xE0 ? 0xA0 : s[0] == 0xF0 ? 0x90 : 0x80;
    unsigned char hi = s[0] == 0xED ? 0x9F : s[0] == 0xF4 ? 0x8F : 0xBF;
    if (s[1] < lo || s[1] > hi)
        return false;
    return n == 2   ? s[0] >= 0xC2 && s[0] <= 0xDF
           : n == 3 ? s[0] >= 0xE0 && s[0] <= 0xEF
                    : s[0] >= 0xF0 && s[0] <= 0xF4;
}

/* Every pair of bytes, followed by the continuation bytes that a lead asks for. */
START_TEST(every_beginning)
{
    for (unsigned a = 0; a < 256; a++)
        for (unsigned b = 0; b < 256; b++) {
            unsigned char s[] = {(unsigned char)a, (unsigned char)b, 0x80, 0xBF};
            size_t n = a < 0x80 ? 1 : a < 0xE0 ? 2 : a < 0xF0 ? 3 : 4;
            size_t good = well_formed(s, n) ? n : 0;
            ck_assert_uint_eq(utf8_check((char *)s, n), good);
            if (n > 1)
                ck_assert_uint_eq(utf8_check((char *)s, n - 1), 0); /* cut short */
        }
}
END_TEST

static const struct {
    const char *bytes;
    size_t n, first_bad;
} validity[] = {
    {"", 0, 0},
    {"plain", 5, 5},
    {"a\0b", 3, 1},
    {"\xC3\xA4\xE2\x82\xAC\xF0\x9F\x94\x8C", 9, 9},
    {"ab\xC0\xAF", 4, 2},         /* '/' in two bytes: overlong */
    {"ab\xE0\x80\xAF", 5, 2},     /* in three */
    {"ab\xF0\x80\x80\xAF", 6, 2}, /* in four */
    {"\xED\xA0\x80", 3, 0},       /* U+D800 */
    {"\xED\xBF\xBF", 3, 0},       /* U+DFFF */
    {"\xED\x9F\xBF", 3, 3},       /* U+D7FF */
    {"\xF4\x8F\xBF\xBF", 4, 4},   /* U+10FFFF */
    {"\xF4\x90\x80\x80", 4, 0},   /* U+110000 */
    {"\xF8\x88\x80\x80\x80", 5, 0},
    {"ok\xC3", 3, 2},
    {"ok\xE2\x82", 4, 2},
    {"ok\x80", 3, 2},
    {"ok\xFF", 3, 2},
    {"ok\xC3(", 4, 2},
    {"\xEF\xBF\xBE", 3, 3}, /* a noncharacter is valid UTF-8: Unicode 15.0, D14 and 3.9 */
};
enum { VALIDITY = sizeof validity / sizeof validity[0] };

START_TEST(first_bad_byte)
{
    ck_assert_uint_eq(utf8_check(validity[_i].bytes, validity[_i].n), validity[_i].first_bad);
}
END_TEST

/* UAX #15, table 3 (singletons), table 4 (multiple marks), and Hangul. */
static const struct {
    const char *from, *to;
} compositions[] = {
    {"plain", "plain"},
    {"", ""},
    {"A\xCC\x8A", "\xC3\x85"},                   /* A + ring = U+00C5 */
    {"\xE2\x84\xAB", "\xC3\x85"},                /* the angstrom sign */
    {"\xE2\x84\xA6", "\xCE\xA9"},                /* the ohm sign = Omega */
    {"o\xCC\x82", "\xC3\xB4"},
    {"s\xCC\xA3\xCC\x87", "\xE1\xB9\xA9"},       /* s, dot below, dot above = U+1E69 */
    {"s\xCC\x87\xCC\xA3", "\xE1\xB9\xA9"},       /* in the other order */
    {"q\xCC\x87\xCC\xA3", "q\xCC\xA3\xCC\x87"},  /* ordered, nothing composed */
    {"\xE1\x84\x80\xE1\x85\xA1\xE1\x86\xA8", "\xEA\xB0\x81"}, /* U+1100 1161 11A8 = U+AC01 */
    {"\xEF\xAC\x81", "\xEF\xAC\x81"},            /* the fi ligature: only NFKC splits it */
    {"\xE0\xA4\x95\xE0\xA4\xBC", "\xE0\xA4\x95\xE0\xA4\xBC"}, /* a composition exclusion */
    {"\xC2\xB5", "\xC2\xB5"},                    /* the micro sign stays */
};
enum { COMPOSITIONS = sizeof compositions / sizeof compositions[0] };

START_TEST(composition)
{
    struct arena *a = arena_new(NULL);
    const char *once = utf8_nfc(a, compositions[_i].from);
    ck_assert_str_eq(once, compositions[_i].to);
    ck_assert_str_eq(utf8_nfc(a, once), compositions[_i].to);
    arena_free(a);
}
END_TEST

/* text, folded: CaseFolding.txt of Unicode, statuses C and F, then form C */
static const struct {
    const char *from, *to;
} foldings[] = {
    {"", ""},
    {"relay 51-a", "relay 51-a"},
    {"Relay 51-A", "relay 51-a"},
    {"Stra\xC3\x9F"
     "e",
     "strasse"},
    {"\xE1\xBA\x9E", "ss"},
    {"\xCE\xA3", "\xCF\x83"}, /* sigma, and the final one */
    {"\xCF\x82", "\xCF\x83"},
    {"E\xCC\x81", "\xC3\xA9"}, /* e acute, composed */
    {"\xC3\x89", "\xC3\xA9"},
    {"I", "i"}, /* in every locale */
    {"\xC4\xB0", "i\xCC\x87"},
    {"\xEF\xAC\x81", "fi"}, /* a ligature */
};

#define FOLDINGS (int)(sizeof foldings / sizeof foldings[0])

START_TEST(folding)
{
    struct arena *a = arena_new(NULL);
    const char *once = utf8_fold(a, foldings[_i].from);
    ck_assert_str_eq(once, foldings[_i].to);
    ck_assert_str_eq(utf8_fold(a, once), foldings[_i].to);
    arena_free(a);
}
END_TEST

START_TEST(composition_draws_from_the_seam)
{
    struct failmem f;
    failmem_init(&f, FAILMEM_NEVER);
    struct arena *a = arena_new(&f.mem);
    struct text t;
    text_init(&t, a);
    text_repeat(&t, "A\xCC\x8A", 20000);
    size_t before = f.bytes;
    const char *composed = utf8_nfc(a, text_str(&t));
    ck_assert_uint_eq(strlen(composed), 40000);
    ck_assert_uint_ge(f.bytes, before + 40000);
    arena_free(a);
    failmem_check(&f);
}
END_TEST

/* text, terminal columns, characters, cleaned, cleaned to ASCII */
static const struct {
    const char *s;
    size_t columns, count;
    const char *clean, *ascii;
} shown[] = {
    {"", 0, 0, "", ""},
    {"busbar 1", 8, 8, "busbar 1", "busbar 1"},
    {"\xC3\xA4\xC3\xB6", 2, 2, "\xC3\xA4\xC3\xB6", "\\u{00e4}\\u{00f6}"},
    {"e\xCC\x81", 1, 2, "e\xCC\x81", "e\\u{0301}"},
    {"\xE9\x9B\xBB\xE6\xB0\x97", 4, 2, "\xE9\x9B\xBB\xE6\xB0\x97", "\\u{96fb}\\u{6c17}"},
    {"\xF0\x9F\x94\x8C", 2, 1, "\xF0\x9F\x94\x8C", "\\u{1f50c}"},
    {"\xE2\x89\xA4 5 \xE2\x80\x93 7\xC2\xA0kV", 10, 10, "\xE2\x89\xA4 5 \xE2\x80\x93 7\xC2\xA0kV",
     "<= 5 - 7 kV"},
    {"\xE2\x80\x9C" "a\xE2\x80\x9D\xE2\x80\xA6", 4, 4, "\xE2\x80\x9C" "a\xE2\x80\x9D\xE2\x80\xA6",
     "\"a\"..."},
    {"a\nb\tc\rd", 16, 7, "a\\x0ab\\x09c\\x0dd", "a\\x0ab\\x09c\\x0dd"},
    {"\x1B[31mred\x1B[0m", 18, 12, "\\x1b[31mred\\x1b[0m", "\\x1b[31mred\\x1b[0m"},
    {"\x7F", 4, 1, "\\x7f", "\\x7f"},
    {"\xC2\x9B" "2J", 10, 3, "\\u{009b}2J", "\\u{009b}2J"},
    {"\xE2\x80\xAE" "evil", 12, 5, "\\u{202e}evil", "\\u{202e}evil"},
    {"a\xE2\x80\x8B" "b", 10, 3, "a\\u{200b}b", "a\\u{200b}b"},
    {"\xEF\xBB\xBF" "x", 9, 2, "\\u{feff}x", "\\u{feff}x"},
    {"\xF3\xA0\x80\x81", 9, 1, "\\u{e0001}", "\\u{e0001}"},
    {"\xF4\x80\x80\x80", 10, 1, "\\u{100000}", "\\u{100000}"},
    {"bad\xFF\xC3", 11, 5, "bad\\xff\\xc3", "bad\\xff\\xc3"},
};
enum { SHOWN = sizeof shown / sizeof shown[0] };

static void check_shown(int i)
{
    struct arena *a = arena_new(NULL);
    ck_assert_str_eq(utf8_clean(a, shown[i].s, false), shown[i].clean);
    ck_assert_str_eq(utf8_clean(a, shown[i].s, true), shown[i].ascii);
    ck_assert_uint_eq(utf8_columns(shown[i].s), shown[i].columns);
    ck_assert_uint_eq(utf8_columns(shown[i].clean), shown[i].columns);
    if (utf8_check(shown[i].s, strlen(shown[i].s)) == strlen(shown[i].s))
        ck_assert_uint_eq(utf8_count(shown[i].s, strlen(shown[i].s)), shown[i].count);
    arena_free(a);
}

START_TEST(shown_harmlessly)
{
    check_shown(_i);
}
END_TEST

START_TEST(shown_alike_in_other_locales)
{
    ck_assert_ptr_nonnull(setlocale(LC_ALL, "de_DE.UTF-8"));
    check_shown(_i);
    ck_assert_ptr_nonnull(setlocale(LC_ALL, "tr_TR.UTF-8"));
    check_shown(_i);
    setlocale(LC_ALL, "C");
}
END_TEST

static void encode(char *s, unsigned c)
{
    unsigned char *u = (unsigned char *)s;
    size_t n = c < 0x80 ? 1 : c < 0x800 ? 2 : c < 0x10000 ? 3 : 4;
    static const unsigned char lead[] = {0, 0, 0xC0, 0xE0, 0xF0};
    for (size_t i = n - 1; i > 0; i--, c >>= 6)
        u[i] = (unsigned char)(0x80 | (c & 0x3F));
    u[0] = (unsigned char)(lead[n] | c);
    u[n] = 0;
}

/* Ranges that must never reach a terminal. Controls: Unicode 15.0, 23.1; the
 * bidirectional ones: UAX #9, 2.1-2.6; Default_Ignorable_Code_Point:
 * DerivedCoreProperties.txt 15.0. */
static const unsigned hidden[][2] = {
    {0x01, 0x1F},       {0x7F, 0x9F},     {0xAD, 0xAD},       {0x34F, 0x34F},
    {0x61C, 0x61C},     {0x115F, 0x1160}, {0x17B4, 0x17B5},   {0x180B, 0x180E},
    {0x200B, 0x200F},   {0x2028, 0x202E}, {0x2060, 0x206F},   {0x3164, 0x3164},
    {0xE000, 0xE010},   {0xFE00, 0xFE0F}, {0xFEFF, 0xFEFF},   {0xFFA0, 0xFFA0},
    {0xFFF0, 0xFFFB},   {0x1BCA0, 0x1BCA3}, {0x1D173, 0x1D17A}, {0xE0000, 0xE0FFF},
    {0x10FFFF, 0x10FFFF},
};
enum { HIDDEN = sizeof hidden / sizeof hidden[0] };

START_TEST(nothing_hidden_gets_through)
{
    struct arena *a = arena_new(NULL);
    for (unsigned c = hidden[_i][0]; c <= hidden[_i][1]; c++) {
        char s[5], expected[16];
        encode(s, c);
        snprintf(expected, sizeof expected, c < 0x80 ? "\\x%02x" : "\\u{%04x}", c);
        ck_assert_str_eq(utf8_clean(a, s, false), expected);
        ck_assert_uint_eq(utf8_columns(s), strlen(expected));
    }
    arena_free(a);
}
END_TEST

START_TEST(ascii_mode_gives_ascii)
{
    struct arena *a = arena_new(NULL);
    for (unsigned c = 1; c <= 0x2FFFF; c++) {
        if (c >= 0xD800 && c <= 0xDFFF)
            continue;
        char s[5];
        encode(s, c);
        ck_assert_uint_eq(utf8_check(s, strlen(s)), strlen(s));
        for (const char *p = utf8_clean(a, s, true); *p; p++)
            ck_assert_int_ge(*p, 0x20);
        ck_assert_uint_eq(utf8_columns(utf8_clean(a, s, false)), utf8_columns(s));
    }
    arena_free(a);
}
END_TEST

START_TEST(prefixes)
{
    const char *s = "a\xE9\x9B\xBB" "e\xCC\x81\x1Bz"; /* columns 1, 2, 1 + 0, 4, 1 */
    static const size_t bytes[] = {0, 1, 1, 4, 7, 7, 7, 7, 8, 9, 9};
    for (size_t columns = 0; columns < 11; columns++)
        ck_assert_uint_eq(utf8_prefix(s, columns), bytes[columns]);
    ck_assert_uint_eq(utf8_prefix("", 5), 0);
}
END_TEST

Suite *suite_utf8(void)
{
    Suite *s = suite_create("utf8");
    TCase *t = tcase_create("utf8");
    tcase_add_test(t, every_beginning);
    tcase_add_loop_test(t, first_bad_byte, 0, VALIDITY);
    tcase_add_loop_test(t, composition, 0, COMPOSITIONS);
    tcase_add_loop_test(t, folding, 0, FOLDINGS);
    tcase_add_test(t, composition_draws_from_the_seam);
    tcase_add_loop_test(t, shown_harmlessly, 0, SHOWN);
    tcase_add_loop_test(t, shown_alike_in_other_locales, 0, SHOWN);
    tcase_add_loop_test(t, nothing_hidden_gets_through, 0, HIDDEN);
    tcase_add_test(t, ascii_mode_gives_ascii);
    tcase_add_test(t, prefixes);
    suite_add_tcase(s, t);
    return s;
}
