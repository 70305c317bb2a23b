/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dominance between profiles (profile.h). Owns nothing.
 *
 * With F and G the probabilities that p and q are at most x, p dominates q first where G - F is
 * never negative, and second where its integral from below is not. G - F is constant from one value
 * of either to the next, so the integral is a straight line there. Above all values both are 1;
 * what rounding leaves of that does not count. */
#include <math.h>

#include "math/profile.h"

/* A number in two doubles: head + tail, the tail being below half a unit of the head's last place.
 * T. J. Dekker, Numerische Mathematik 18 (1971) 224-242; D. E. Knuth, The Art of Computer
 * Programming 2, 4.2.2 (from memory). */
struct pair {
    double head, tail;
};

static struct pair sum_of(double a, double b)
{
    double head = a + b, of_b = head - a;
    return (struct pair){head, (a - (head - of_b)) + (b - of_b)};
}

static struct pair plus(struct pair x, struct pair y)
{
    struct pair heads = sum_of(x.head, y.head), tails = sum_of(x.tail, y.tail);
    struct pair s = sum_of(heads.head, heads.tail + tails.head);
    return sum_of(s.head, s.tail + tails.tail);
}

/* The upper half of the digits. */
static double top_of(double x)
{
    double y = (0x1p27 + 1) * x;
    return y - (y - x);
}

static struct pair product_of(double a, double b)
{
    double head = a * b, top_a = top_of(a), top_b = top_of(b);
    double low_a = a - top_a, low_b = b - top_b;
    double error = ((top_a * top_b - head) + top_a * low_b + low_a * top_b) + low_a * low_b;
    return (struct pair){head, error};
}

static struct pair times(struct pair x, struct pair y)
{
    struct pair z = product_of(x.head, y.head);
    return sum_of(z.head, z.tail + (x.head * y.tail + x.tail * y.head));
}

static int sign_of(struct pair x)
{
    double decides = x.head != 0 ? x.head : x.tail;
    return (decides > 0) - (decides < 0);
}

/* What was met of a function: negative, positive. */
struct signs {
    bool below, above;
};

static void meet(struct signs *s, struct pair x)
{
    s->below = s->below || sign_of(x) < 0;
    s->above = s->above || sign_of(x) > 0;
}

/* The next value of either from places i and k on; INFINITY behind the last. */
static double next_of(const struct profile *p, size_t i, const struct profile *q, size_t k)
{
    double x = i < p->n ? p->value[i] : INFINITY, y = k < q->n ? q->value[k] : INFINITY;
    return x < y ? x : y;
}

enum profile_dominance profile_dominates(const struct profile *p, const struct profile *q)
{
    struct signs first = {0}, second = {0};
    struct pair ahead = {0}, area = {0}; /* G - F, and its integral */
    size_t i = 0, k = 0;
    while (i < p->n || k < q->n) {
        double x = next_of(p, i, q, k);
        if (i < p->n && p->value[i] == x)
            ahead = plus(ahead, (struct pair){-p->probability[i++], 0});
        if (k < q->n && q->value[k] == x)
            ahead = plus(ahead, (struct pair){q->probability[k++], 0});
        double next = next_of(p, i, q, k);
        if (isinf(next))
            break;
        meet(&first, ahead);
        area = plus(area, times(ahead, sum_of(next, -x)));
        meet(&second, area);
    }
    if (first.above && !first.below)
        return PROFILE_FIRST;
    return second.above && !second.below ? PROFILE_SECOND : PROFILE_NONE;
}
