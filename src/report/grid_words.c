/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The words at the decades of a grid's axes. Owns nothing. */
#include "report/grid_words.h"

#include <stdlib.h>

#include "report/number.h"

const char *grid_power_text(const struct page *p, int k)
{
    static const char *const raised[] = {"⁰", "¹", "²", "³", "⁴", "⁵", "⁶", "⁷", "⁸", "⁹"};
    if (p->ascii)
        return arena_printf(p->arena, "1e%d", k);
    struct text t;
    text_init(&t, p->arena);
    text_add(&t, k < 0 ? "10⁻" : "10");
    for (const char *s = arena_printf(p->arena, "%d", abs(k)); *s; s++)
        text_add(&t, raised[*s - '0']);
    return text_str(&t);
}

const char *grid_period_of_power(const struct page *p, int k)
{
    static const char *const plain[] = {"1", "10", "100", "1000", "10000"};
    int n = abs(k);
    const char *number = n < 5 ? plain[n] : arena_printf(p->arena, "1e%d", n);
    return arena_printf(p->arena, k < 0 ? "1 in %s a" : "%s per a", number);
}

const char *grid_amount_of_power(const struct page *p, int k, const char *unit)
{
    static const char *const plain[] = {"1", "10", "100"};
    if (k < -2 || k > 11)
        return arena_printf(p->arena, *unit ? "1e%d %s" : "1e%d%s", k, unit);
    const char *number = k < 0 ? k == -1 ? "0.1" : "0.01" : plain[k % 3];
    const char *prefix = k < 0 ? "" : money_prefix(k / 3 * 3);
    return arena_printf(p->arena, *unit || *prefix ? "%s %s%s" : "%s%s%s", number, prefix, unit);
}
