/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loop written by hand (rollback_model.h). Owns nothing. */
#include "rollback_model.h"

static void choose(size_t n, const double *restrict amount, const double *restrict child,
                   double *restrict value)
{
    for (size_t i = 0; i < n; i++) {
        double a = child[3 * i], b = child[3 * i + 1], c = child[3 * i + 2];
        double best = b > a ? b : a;
        value[i] = amount[i] + (c > best ? c : best);
    }
}

static void chance(size_t n, const double *restrict amount, const double *restrict p,
                   const double *restrict child, double *restrict value)
{
    for (size_t i = 0; i < n; i++)
        value[i] = amount[i] + (p[3 * i] * child[3 * i] + p[3 * i + 1] * child[3 * i + 1] +
                                p[3 * i + 2] * child[3 * i + 2]);
}

void ISA_NAME(rollback_model)(const struct rollback_model *m, const double *amount, const double *p,
                              double *value)
{
    int last = m->levels - 1;
    for (size_t i = m->start[last]; i < m->start[last] + m->size[last]; i++)
        value[i] = amount[i];
    for (int l = last - 1; l >= 0; l--) {
        size_t at = m->start[l], child = m->start[l + 1];
        if (l % 2)
            chance(m->size[l], amount + at, p + child, value + child, value + at);
        else
            choose(m->size[l], amount + at, value + child, value + at);
    }
}
