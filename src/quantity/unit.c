/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Units: the table of built-in ones, money and counts of a register, and
 * dimensions in words.
 *
 * Invariant: a factor is the quotient of two whole numbers below 2^53, so that
 * one division rounds it correctly. Years have 365 days here: 1 a = 8760 h. */
#include "quantity/unit.h"

#include <stdlib.h>
#include <string.h>

#include "base/text.h"

const struct dim dim_number = {{0}};
const struct dim dim_time = {{[DIM_TIME] = 1}};
const struct dim dim_length = {{[DIM_LENGTH] = 1}};
const struct dim dim_power = {{[DIM_POWER] = 1}};
const struct dim dim_energy = {{[DIM_POWER] = 1, [DIM_TIME] = 1}};
const struct dim dim_money = {{[DIM_MONEY] = 1}};
const struct dim dim_frequency = {{[DIM_TIME] = -1}};
const struct dim dim_money_rate = {{[DIM_MONEY] = 1, [DIM_TIME] = -1}};

struct unit_row {
    const char *name;
    double up, down;
    const struct dim *dim;
};

static const struct unit_row built_in[] = {
    {"ms", 1, 8760.0 * 3600 * 1000, &dim_time},
    {"s", 1, 8760.0 * 3600, &dim_time},
    {"min", 1, 8760.0 * 60, &dim_time},
    {"h", 1, 8760, &dim_time},
    {"d", 1, 365, &dim_time},
    {"week", 7, 365, &dim_time},
    {"month", 1, 12, &dim_time},
    {"a", 1, 1, &dim_time},
    {"m", 1, 1000, &dim_length},
    {"km", 1, 1, &dim_length},
    {"W", 1, 1000, &dim_power},
    {"kW", 1, 1, &dim_power},
    {"MW", 1000, 1, &dim_power},
    {"GW", 1000000, 1, &dim_power},
    {"Wh", 1, 8760.0 * 1000, &dim_energy},
    {"kWh", 1, 8760, &dim_energy},
    {"MWh", 1000, 8760, &dim_energy},
    {"GWh", 1000000, 8760, &dim_energy},
    {"%", 1, 100, &dim_number},
};

enum { N_BUILT_IN = sizeof built_in / sizeof built_in[0] };

static const struct {
    const char *prefix;
    double up;
} money[] = {{"", 1}, {"k", 1000}, {"M", 1000000}};

enum { N_MONEY = sizeof money / sizeof money[0] };

static struct unit make_unit(double up, double down, struct dim dim)
{
    return (struct unit){.factor = up / down, .up = up, .down = down, .dim = dim};
}

static bool is_word(const char *word, const char *s, size_t n)
{
    return strlen(word) == n && memcmp(word, s, n) == 0;
}

static bool find_money(const char *currency, const char *name, size_t n, struct unit *out)
{
    for (size_t i = 0; i < N_MONEY; i++) {
        size_t prefix = strlen(money[i].prefix);
        if (n < prefix || memcmp(name, money[i].prefix, prefix) != 0)
            continue;
        if (is_word(currency, name + prefix, n - prefix)) {
            *out = make_unit(money[i].up, 1, dim_money);
            return true;
        }
    }
    return false;
}

static bool find_count(const struct units *u, const char *name, size_t n, struct unit *out)
{
    for (size_t i = 0; i < u->n_counts && i < UNIT_COUNTS; i++)
        if (is_word(u->counts[i], name, n)) {
            struct dim one = {{0}};
            one.e[DIM_COUNTS + i] = 1;
            *out = make_unit(1, 1, one);
            return true;
        }
    return false;
}

bool unit_find(const struct units *u, const char *name, size_t n, struct unit *out)
{
    for (size_t i = 0; i < N_BUILT_IN; i++)
        if (is_word(built_in[i].name, name, n)) {
            *out = make_unit(built_in[i].up, built_in[i].down, *built_in[i].dim);
            return true;
        }
    if (u->currency && u->currency[0] && find_money(u->currency, name, n, out))
        return true;
    return find_count(u, name, n, out);
}

void unit_names(const struct units *u, void (*offer)(void *ctx, const char *name), void *ctx)
{
    for (size_t i = 0; i < N_BUILT_IN; i++)
        offer(ctx, built_in[i].name);
    if (u->currency && u->currency[0])
        offer(ctx, u->currency);
    for (size_t i = 0; i < u->n_counts && i < UNIT_COUNTS; i++)
        offer(ctx, u->counts[i]);
}

const char *unit_nearest(struct arena *a, const struct units *u, const char *wanted)
{
    struct nearest near;
    nearest_init(&near, wanted);
    for (size_t i = 0; i < N_BUILT_IN; i++)
        nearest_offer(&near, built_in[i].name);
    for (size_t i = 0; u->currency && u->currency[0] && i < N_MONEY; i++)
        nearest_offer(&near, arena_printf(a, "%s%s", money[i].prefix, u->currency));
    for (size_t i = 0; i < u->n_counts && i < UNIT_COUNTS; i++)
        nearest_offer(&near, u->counts[i]);
    return nearest_take(&near);
}

/* How the kinds of quantity are called, in the order in which they are written.
 * `energy` stands for power and time when both have the same single exponent. */
struct part {
    const char *name;
    int exponent;
};

enum { MAX_PARTS = DIM_SLOTS + 1 };

static size_t split_in_words(const struct units *u, struct dim d, struct part *out)
{
    size_t n = 0;
    for (size_t i = 0; i < UNIT_COUNTS; i++) {
        const char *name = i < u->n_counts ? u->counts[i] : "count";
        out[n++] = (struct part){name, d.e[DIM_COUNTS + i]};
    }
    int energy = d.e[DIM_POWER] == d.e[DIM_TIME] && abs(d.e[DIM_TIME]) == 1 ? d.e[DIM_TIME] : 0;
    out[n++] = (struct part){"money", d.e[DIM_MONEY]};
    out[n++] = (struct part){"energy", energy};
    out[n++] = (struct part){"power", d.e[DIM_POWER] - energy};
    out[n++] = (struct part){"length", d.e[DIM_LENGTH]};
    out[n++] = (struct part){"time", d.e[DIM_TIME] - energy};
    return n;
}

static size_t split_in_units(const struct units *u, struct dim d, struct part *out)
{
    size_t n = 0;
    const char *currency = u->currency && u->currency[0] ? u->currency : "money";
    out[n++] = (struct part){currency, d.e[DIM_MONEY]};
    for (size_t i = 0; i < UNIT_COUNTS; i++) {
        const char *name = i < u->n_counts ? u->counts[i] : "count";
        out[n++] = (struct part){name, d.e[DIM_COUNTS + i]};
    }
    out[n++] = (struct part){"kW", d.e[DIM_POWER]};
    out[n++] = (struct part){"km", d.e[DIM_LENGTH]};
    out[n++] = (struct part){"a", d.e[DIM_TIME]};
    return n;
}

/* Adds the parts whose exponents have the sign of `sign`; returns how many. */
static size_t add_parts(struct text *t, const struct part *parts, size_t n, int sign)
{
    size_t added = 0;
    for (size_t i = 0; i < n; i++) {
        int e = parts[i].exponent * sign;
        if (e <= 0)
            continue;
        text_printf(t, added++ ? " %s" : "%s", parts[i].name);
        if (e > 1)
            text_printf(t, "^%d", e);
    }
    return added;
}

const char *dim_words(struct arena *a, const struct units *u, struct dim d)
{
    struct part parts[MAX_PARTS];
    size_t n = split_in_words(u, d, parts);
    struct text over, under;
    text_init(&over, a);
    text_init(&under, a);
    size_t n_over = add_parts(&over, parts, n, 1), n_under = add_parts(&under, parts, n, -1);
    if (n_over + n_under == 0)
        return "a pure number";
    if (n_under == 0)
        return text_str(&over);
    const char *joint = n_over ? " per " : " / ";
    const char *format = n_under > 1 ? "%s%s(%s)" : "%s%s%s";
    return arena_printf(a, format, n_over ? text_str(&over) : "1", joint, text_str(&under));
}

const char *dim_unit(struct arena *a, const struct units *u, struct dim d)
{
    struct part parts[MAX_PARTS];
    size_t n = split_in_units(u, d, parts);
    struct text out;
    text_init(&out, a);
    size_t n_over = add_parts(&out, parts, n, 1);
    struct text under;
    text_init(&under, a);
    if (add_parts(&under, parts, n, -1) > 0)
        text_printf(&out, n_over ? "/%s" : "1/%s", text_str(&under));
    return text_str(&out);
}
