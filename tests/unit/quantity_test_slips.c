/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is not understood: every message of the parser with its column, and the
 * messages about dimensions. Columns count characters from 1. */
#include "quantity_test.h"

#define VALUE "expected a value, such as 180 kEUR, a name, or '('"
#define OPERATOR "expected one of + - * / ^ or the end"
#define INSIDE "expected ')' or one of + - * / ^"
#define BLANKS "a '-' that subtracts needs a blank on both sides, because names may hold a '-'"

static const struct {
    const char *text;
    unsigned column;
    const char *message;
} slips[] = {
    {"", 1, "the text ends too early; " VALUE},
    {"3 + ", 5, "the text ends too early; " VALUE},
    {"(3", 3, "the text ends too early; " INSIDE},
    {"1,5 kW", 2, "the decimal mark is a point, not a comma"},
    {"min(x, y)", 6, "no expression needs a comma; the arguments of a call are parted by ';'"},
    {"x,5", 2, "no expression needs a comma; the arguments of a call are parted by ';'"},
    {"x: 3", 2, "no expression needs a colon; " OPERATOR},
    {"x; 3", 2, "';' parts the arguments of a call and is not expected here; " OPERATOR},
    {"x)", 2, "')' has no '(' before it; " OPERATOR},
    {"(x + )", 6, "')' is not expected here; " VALUE},
    {"2 ** 3", 4, "a power is written ^, not **"},
    {"2 * * 3", 5, "'*' is not expected here; " VALUE},
    {"x = 3", 3, "'=' is not expected here; " OPERATOR},
    {".5", 1, "a number needs a digit before its point: 0.5, not .5"},
    {"x .", 3, "the point is not expected here; " OPERATOR},
    {"5.", 2, "a number needs a digit behind its point: not 5. but 5 or 5.0"},
    {"5.1.2", 4, "a number has only one decimal point"},
    {"14 MW .. 22 MW", 7, "a range begins with its level: 90 % within A .. B"},
    {"1 000 EUR", 3, "a number is not expected here (digits are not grouped by blanks); "
     OPERATOR},
    {"x %", 3, "'%' must stand behind a number, such as 5 %"},
    {"1e999", 1, "the number is too large or has too many digits; expected at most 1.79e308"},
    {"1e-999", 1, "the number is too small to be told from zero; expected at least 4.95e-324"},
    {"1e308 GW", 1, "the quantity is too large to be computed with"},
    {"1e-320 ms", 1, "the quantity is too small to be told from zero"},
    {"5kW", 2, "a blank is needed between a number and the word behind it: 5 kW"},
    {"5 kWhh", 3, "'kWhh' is not a unit; the nearest unit is 'kWh' (a named value needs a '*': "
     "5 * kWhh)"},
    {"5 sektion", 3, "'sektion' is not a unit; the nearest unit is 'section' (a named value "
     "needs a '*': 5 * sektion)"},
    {"8 bus-fault", 3, "'bus-fault' is not a unit; for a named value write 8 * bus-fault"},
    {"3 per demand", 7, "'demand' is not a unit; for a named value write 1 * demand"},
    {"3 per 100", 10, "the text ends too early; expected a unit behind 'per', such as per a or "
     "per 100 km a"},
    {"3 per 0 km", 7, "nothing can be counted per 0"},
    {"3 per km per a", 10, "a second 'per' is not understood; write the units side by side: "
     "per km a"},
    {"3 / km per a", 8, "'/' and 'per' together are not understood; write the units side by "
     "side: per km a"},
    {"3 per km / a", 10, "'/' behind 'per' or 'in' can be read in two ways; write the units side "
     "by side: per km a"},
    {"3 EUR/kW/a", 9, "a second '/' between units is not understood; all units behind the first "
     "are below it: EUR/kW a"},
    {"2 in 340 a", 3, "only '1 in' is understood, such as 1 in 340 a; write 2 per 340 a"},
    {"1 in a", 6, "the unit 'a' must stand behind a number, such as 1 a"},
    {"1 in 0 a", 6, "nothing can be counted per 0"},
    {"5 m^0", 5, "the power of a unit is a whole number from 1 to 9 or -1 to -9"},
    {"5 m^10", 5, "the power of a unit is a whole number from 1 to 9 or -1 to -9"},
    {"5 m^1.5", 5, "the power of a unit is a whole number from 1 to 9 or -1 to -9"},
    {"5 m^-x", 5, "the power of a unit is a whole number from 1 to 9 or -1 to -9"},
    {"5 %^2", 4, "a percentage takes no power; write (5 %)^2"},
    {"x^y", 3, "'y' is not expected here; expected a plain number as exponent, such as x^2 or "
     "x^-0.5"},
    {"x^2^3", 4, "a power of a power needs parentheses: (x^2)^3"},
    {"x -y", 3, BLANKS},
    {"5-3", 2, BLANKS},
    {"(x)- 3", 4, BLANKS},
    {"x- y", 2, "a '-' that subtracts needs a blank on both sides, and no name ends in one"},
    {"x * kWh", 5, "the unit 'kWh' must stand behind a number, such as 1 kWh"},
    {"x kWh", 3, "the unit 'kWh' must stand behind a number, such as 1 kWh"},
    {"x y", 3, "'y' is not expected here; " OPERATOR},
    {"3 was", 3, "'was' is not expected here; expected a unit or one of + - * /"},
    {"x per a", 3, "'per' belongs directly behind a number, as in 3 per 100 km a or 1 in 340 a"},
    {"3 * (90 % within 2 .. 3)", 11, "a range (90 % within A .. B) cannot be part of an "
     "expression; expected a unit or one of + - * /"},
    {"rest", 1, "'rest' is not expected here; expected a value"},
    {"sine(x)", 1, "'sine' is not a function; the functions are min max exp log sqrt lookup "
     "unwanted fails frequency"},
    {"5 min(2; 3)", 3, "'min' is not expected here; expected a unit or one of + - * /"},
    {"exp + 2", 1, "'exp' needs its arguments in parentheses"},
    {"exp(x; y)", 6, "';' parts the arguments of a call and is not expected here; " INSIDE},
    {"min(x)", 6, "')' is not expected here; expected ';' and at least two arguments, such as "
     "min(a; b)"},
    {"min(x; y", 9, "the text ends too early; expected ';' or ')' or one of + - * / ^"},
    {"lookup(x)", 9, "')' is not expected here; expected ';' and pairs of bound and value: "
     "lookup(x; 0 MW -> 1 h; 5 MW -> 3 h)"},
    {"lookup(x; y -> 2)", 11, "'y' is not expected here; expected a number as bound, such as "
     "5 MW -> 3 h"},
    {"lookup(x; 1: 2)", 12, "no expression needs a colon; expected '->' and a value behind the "
     "bound of lookup"},
    {"lookup(x; 2 -> 1; 2 -> 5)", 19, "the bounds of lookup must rise: '2' does not exceed '2'"},
    {"fails(3)", 7, "a number is not expected here (digits are not grouped by blanks); expected "
     "the name of an element"},
    {"frequency()", 11, "')' is not expected here; expected the name of a hazard"},
    {"unwanted(;)", 10, "';' parts the arguments of a call and is not expected here; expected "
     "the name of a scheme"},
    {"fails(kW)", 7, "'kW' is a unit and cannot be a name"},
    {"fails(was)", 7, "'was' is a reserved word and cannot be a name"},
    {"share(3; earth)", 7, "a number is not expected here (digits are not grouped by blanks); "
     "expected the name of a rate"},
    {"share(r)", 8, "')' is not expected here; expected ';' and a kind of fault, such as "
     "share(cable-fault; earth)"},
    {"share(r; )", 10, "')' is not expected here; expected the name of a kind of fault"},
    {"share(r; kW)", 10, "'kW' is a unit and cannot be a name"},
    {"share(r; earth; x)", 15, "';' parts the arguments of a call and is not expected here; "
     "expected ')'"},
    {"share + 2", 1, "'share' needs its arguments in parentheses"},
    {"unwanted(T1; inrush)", 20, "')' is not expected here; expected the frequency of the stress "
     "class, such as 14 per a"},
    {"unwanted(T1; 3)", 14, "a number is not expected here (digits are not grouped by blanks); "
     "expected the name of a stress class and its frequency"},
    {"\u00e4 + 1", 1, "'\u00e4' is not expected here; " VALUE},
    {"3 \u00d7 4", 3, "'\u00d7' is not known; write * to multiply"},
    {"(2 \u00d7 3)", 4, "'\u00d7' is not known; write * to multiply"},
    {"\u20ac 180", 1, "'\u20ac' is not known; write the code of the currency behind the number, "
     "such as 180 kEUR"},
    {"x\u00b2", 2, "'\u00b2' is not known; write ^2"},
    {"x \u2212 \u00e4", 3, "'\u2212' is not known; write - with a blank on both sides to "
     "subtract"},
    {"aaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaaa", 1,
     "a name has at most 64 characters, this one has 65"},
};

enum { N_SLIPS = sizeof slips / sizeof slips[0] };

START_TEST(slip)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    ck_assert_msg(!expr_parse(a, &test_units, slips[_i].text, test_place, &d), "%s",
                  slips[_i].text);
    one_diagnostic(&d, slips[_i].column, slips[_i].message, slips[_i].text);
    arena_free(a);
}
END_TEST

static const struct {
    const char *text;
    unsigned column;
    const char *message;
} kinds[] = {
    {"1 h + 2 km", 5, "both sides of '+' must be of one kind, but the left is time and the right "
     "is length"},
    {"1 h - 2", 5, "both sides of '-' must be of one kind, but the left is time and the right is "
     "a pure number"},
    {"2 * (9 EUR per a + money)", 18, "both sides of '+' must be of one kind, but the left is "
     "money per time and the right is money"},
    {"exp(1 h)", 5, "exp takes a pure number, but this is time"},
    {"log(bus-load)", 5, "log takes a pure number, but this is power"},
    {"sqrt(2 km)", 6, "sqrt takes a pure number or a square, but this is length"},
    {"(2 km)^0.5", 8, "length can only be raised to a whole number from -9 to 9, not to 0.5"},
    {"(2 km)^-10", 8, "length can only be raised to a whole number from -9 to 9, not to -10"},
    {"min(1 h; 2 h; 3 km)", 15, "the arguments of min must be of one kind, but the first is time "
     "and this is length"},
    {"max(1 h; x)", 10, "the arguments of max must be of one kind, but the first is time and "
     "this is a pure number"},
    {"lookup(x; 1 h -> 2)", 11, "what lookup looks up and its bounds must be of one kind, but "
     "the first is a pure number and this is time"},
    {"lookup(x; 1 -> 2; 2 -> 3 h)", 24, "the values of lookup must be of one kind, but the first "
     "is a pure number and this is time"},
    {"unwanted(T1; inrush 3)", 21, "the frequency of 'inrush' must be a number per time, such as "
     "14 per a, but this is a pure number"},
    {"2 * zz", 5, "nothing is called 'zz'"},
    {"-(zz + 1 h)", 3, "nothing is called 'zz'"},
};

enum { N_KINDS = sizeof kinds / sizeof kinds[0] };

START_TEST(wrong_kind)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct expr_names names = {&d, test_dim};
    struct expr *e = expr_parse(a, &test_units, kinds[_i].text, test_place, &d);
    ck_assert_msg(e != NULL, "%s", kinds[_i].text);
    ck_assert(!expr_check(a, &test_units, e, &names, test_place, &d));
    one_diagnostic(&d, kinds[_i].column, kinds[_i].message, kinds[_i].text);
    arena_free(a);
}
END_TEST

/* Two mistakes side by side are both told. */
START_TEST(two_mistakes)
{
    struct arena *a = arena_new(NULL);
    struct diags d;
    diags_init(&d, a);
    struct expr_names names = {&d, test_dim};
    struct expr *e = expr_parse(a, &test_units, "exp(1 h) + log(1 km) * 2", test_place, &d);
    ck_assert(e && !expr_check(a, &test_units, e, &names, test_place, &d));
    ck_assert_uint_eq(d.count, 2);
    arena_free(a);
}
END_TEST

/* A place in a register has no columns; one in a file starts where the text does. */
START_TEST(places)
{
    struct place file = {"r.yaml", 7, 12, NULL}, object = {"register", 0, 0, "hazards/H/f"};
    ck_assert_uint_eq(place_inside(file, 5).column, 17);
    ck_assert_uint_eq(place_inside(file, 5).line, 7);
    ck_assert_uint_eq(place_inside(object, 5).column, 0);
}
END_TEST

Suite *suite_slips(void)
{
    Suite *s = suite_create("slips");
    TCase *t = tcase_create("slips");
    tcase_add_loop_test(t, slip, 0, N_SLIPS);
    tcase_add_loop_test(t, wrong_kind, 0, N_KINDS);
    tcase_add_test(t, two_mistakes);
    tcase_add_test(t, places);
    suite_add_tcase(s, t);
    return s;
}
