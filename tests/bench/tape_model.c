/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The model in one loop (tape_model.h): a tape is measured by what a compiler makes of it. */
#include "tape_model.h"

#include <math.h>

struct sum {
    double sum, lost;
};

static inline struct sum add(struct sum s, double x)
{
    double t = s.sum + x;
    int keeps = fabs(s.sum) >= fabs(x);
    double greater = keeps ? s.sum : x, less = keeps ? x : s.sum;
    return (struct sum){t, s.lost + ((greater - t) + less)};
}

static inline double least(double x, double y)
{
    return y < x ? y : x;
}

void ISA_NAME(tape_model)(size_t n, const double *const *x, const double *c, double *restrict risk)
{
    const double *restrict x0 = x[0], *restrict x1 = x[1], *restrict x2 = x[2], *restrict x3 = x[3];
    const double *restrict x4 = x[4], *restrict x5 = x[5], *restrict x6 = x[6];
    for (size_t i = 0; i < n; i++) {
        double rate = x0[i] * c[0], exposed = rate * c[1];
        double p0 = least(x1[i] * c[2], 1), p1 = least(x2[i] * c[3], 1);
        double p2 = least(x3[i] * c[4], 1), p3 = least(x4[i] * c[5], 1);
        double q0 = 1 - p0, q1 = 1 - p1, q2 = 1 - p2;
        double a = p1 * c[6] + q1 * c[7], b = p2 * c[8] + q2 * c[9], harm = p0 * a + q0 * b;
        double people = x5[i] * c[10], money = x6[i] * c[11];
        double e1 = exposed * p0, e2 = exposed * q0;
        struct sum s = {0};
        s = add(s, e1 * p3 * people);
        s = add(s, e1 * money * a);
        s = add(s, e2 * people * b);
        s = add(s, e2 * money * c[12]);
        s = add(s, exposed * harm * c[13]);
        s = add(s, rate * money * c[12]);
        risk[i] = (s.sum + s.lost) * c[14];
    }
}
