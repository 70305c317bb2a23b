/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Edit distance over short names. Owns nothing. Names longer than LONGEST are never
 * near: no command or option is that long. */
#include "cli/nearest.h"

#include <stdbool.h>
#include <string.h>

enum { LONGEST = 32 };

static unsigned least(unsigned a, unsigned b)
{
    return a < b ? a : b;
}

static bool same(char a, char b)
{
    char small = a >= 'A' && a <= 'Z' ? (char)(a - 'A' + 'a') : a;
    return small == b;
}

/* The distance of the first n letters of a and the first m of b, both <= LONGEST:
 * d[i][j] for i letters of a and j of b, from the shorter beginnings. */
static unsigned distance(const char *a, size_t n, const char *b, size_t m)
{
    unsigned d[LONGEST + 1][LONGEST + 1];
    for (size_t i = 0; i <= n; i++) {
        for (size_t j = 0; j <= m; j++) {
            if (i == 0 || j == 0) {
                d[i][j] = (unsigned)(i + j);
                continue;
            }
            unsigned other = !same(a[i - 1], b[j - 1]);
            d[i][j] = least(least(d[i - 1][j], d[i][j - 1]) + 1, d[i - 1][j - 1] + other);
            if (i > 1 && j > 1 && same(a[i - 1], b[j - 2]) && same(a[i - 2], b[j - 1]))
                d[i][j] = least(d[i][j], d[i - 2][j - 2] + 1);
        }
    }
    return d[n][m];
}

void spelling_offer(struct spelling *n, const char *name)
{
    size_t wanted = strlen(n->wanted), offered = strlen(name);
    if (wanted > LONGEST || offered > LONGEST)
        return;
    unsigned limit = (unsigned)(wanted > offered ? wanted : offered) / 3;
    unsigned far = distance(n->wanted, wanted, name, offered);
    if (far > limit || (n->name && far >= n->distance))
        return;
    n->name = name;
    n->distance = far;
}
