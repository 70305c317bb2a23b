/* SPDX-License-Identifier: GPL-3.0-or-later */
/* COURSE: a probability over time (graph.h). Owns nothing.
 *
 * With y = s x, h = start exp(-y) + rate x phi(y), where phi(y) = (1 - exp(-y)) / y and phi(0) = 1:
 * no difference of near numbers, so that the smallest probabilities keep their digits. The same
 * for m. Its slope phi' = (exp(-y) - phi) / y would cancel near 0; a series takes its place. */
#include "graph/course.h"

#include "math/elementary.h"

#include <math.h>

struct stretch course_stretch(const struct course *c, double t)
{
    if (!(t >= c->first))
        return (struct stretch){c->from, c->first, c->fresh};
    double k = floor((t - c->first) / c->every);
    if (c->first + k * c->every > t)
        k--;
    if (c->first + (k + 1) * c->every <= t)
        k++;
    return (struct stretch){c->first + k * c->every, c->first + (k + 1) * c->every, false};
}

static double phi(double y)
{
    return y == 0 ? 1 : -math_expm1(-y) / y;
}

/* phi'(y) = sum over k >= 1 of (-1)^k k y^(k-1) / (k + 1)!: these terms reach below rounding for
 * y < 0.5. */
static double phi_slope(double y, double decay)
{
    static const double terms[] = {
        -0.5,
        0.3333333333333333,
        -0.125,
        0.03333333333333333,
        -0.006944444444444444,
        0.0011904761904761906,
        -0.00017361111111111112,
        2.2045855379188714e-05,
        -2.48015873015873e-06,
        2.505210838544172e-07,
        -2.296443268665491e-08,
        1.9270852604185937e-09,
        -1.4911969277048643e-10,
        1.0706029224547743e-11,
        -7.169215998581078e-13,
        4.498331606952833e-14,
    };
    if (!(fabs(y) < 0.5))
        return (decay - phi(y)) / y;
    double sum = 0;
    for (size_t k = sizeof terms / sizeof *terms; k-- > 0;)
        sum = sum * y + terms[k];
    return sum;
}

/* What follows du/dx = rate (1 - u) - ending u from `start`. */
static double rising(double start, double rate, double ending, double x)
{
    double y = (rate + ending) * x, grown = rate == 0 ? 0 : rate * x * phi(y);
    return start == 0 ? grown : start * math_exp(-y) + grown;
}

double course_change(const double x[COURSE_ARGS], bool fresh, double since, double age)
{
    double start = fresh ? 0 : x[COURSE_LEFT];
    double h = rising(start, x[COURSE_RATE], x[COURSE_ENDING], since);
    if (x[COURSE_UNRESET] == 0)
        return h;
    return h + rising(0, x[COURSE_UNRESET], x[COURSE_ENDING], age) * (1 - h);
}

struct slopes {
    double start, rate, ending;
};

static struct slopes rising_slopes(double start, double rate, double ending, double x)
{
    double y = (rate + ending) * x, decay = math_exp(-y);
    double common = -start * x * decay;
    if (rate != 0)
        common += rate * x * x * phi_slope(y, decay);
    return (struct slopes){decay, x * phi(y) + common, common};
}

void course_change_slopes(const double x[COURSE_ARGS], bool fresh, double since, double age,
                          double slope[COURSE_ARGS])
{
    double start = fresh ? 0 : x[COURSE_LEFT], ending = x[COURSE_ENDING];
    double h = rising(start, x[COURSE_RATE], ending, since);
    double m = rising(0, x[COURSE_UNRESET], ending, age);
    struct slopes dh = rising_slopes(start, x[COURSE_RATE], ending, since);
    struct slopes dm = rising_slopes(0, x[COURSE_UNRESET], ending, age);
    slope[COURSE_STANDING] = 0;
    slope[COURSE_RATE] = (1 - m) * dh.rate;
    slope[COURSE_ENDING] = (1 - m) * dh.ending + (1 - h) * dm.ending;
    slope[COURSE_LEFT] = fresh ? 0 : (1 - m) * dh.start;
    slope[COURSE_UNRESET] = (1 - h) * dm.rate;
}

double course_at(const struct course *c, const double x[COURSE_ARGS], double t)
{
    struct stretch s = course_stretch(c, t);
    double change = course_change(x, s.fresh, t - s.origin, t - c->born);
    return x[COURSE_STANDING] + change * (1 - x[COURSE_STANDING]);
}

void course_backward(const struct course *c, const double x[COURSE_ARGS], double w, double *back)
{
    struct stretch s = course_stretch(c, 0);
    double slope[COURSE_ARGS];
    course_change_slopes(x, s.fresh, -s.origin, -c->born, slope);
    for (int i = 0; i < COURSE_ARGS; i++)
        back[i] += w * (1 - x[COURSE_STANDING]) * slope[i];
    back[COURSE_STANDING] += w * (1 - course_change(x, s.fresh, -s.origin, -c->born));
}
