/* SPDX-License-Identifier: GPL-3.0-or-later */
/* chain(...): by the exponential of the whole matrix, squared again and again. Written from the
 * words of docs/figures.md. */
#include <math.h>
#include <string.h>

#include "formula_parts.h"

enum { STATES = 16, TERMS = 30 };

/* A share of time is gathered in one more state, behind the others. */
typedef long double matrix[STATES + 1][STATES + 1];

static void multiply(matrix x, matrix y, matrix out)
{
    matrix z = {{0}};
    for (int i = 0; i <= STATES; i++)
        for (int k = 0; k <= STATES; k++)
            for (int j = 0; x[i][k] != 0 && j <= STATES; j++)
                z[i][j] += x[i][k] * y[k][j];
    memcpy(out, z, sizeof z);
}

/* exp of q, which has no negative numbers but on its diagonal; these are made up for, so that what
 * is small keeps its digits. */
static void exponential(matrix q, matrix out)
{
    matrix term = {{0}};
    long double most = 0, scale = 1;
    int halved = 0;
    for (int i = 0; i <= STATES; i++)
        most = fmaxl(most, -q[i][i]);
    for (; most * scale > 0.5L; scale /= 2)
        halved++;
    for (int i = 0; i <= STATES; i++) {
        term[i][i] = 1;
        for (int j = 0; j <= STATES; j++)
            q[i][j] = scale * (q[i][j] + (i == j ? most : 0));
    }
    memcpy(out, term, sizeof term);
    for (int k = 1; k <= TERMS; k++) {
        multiply(term, q, term);
        for (int i = 0; i <= STATES; i++)
            for (int j = 0; j <= STATES; j++) {
                term[i][j] /= k;
                out[i][j] += term[i][j];
            }
    }
    for (int i = 0; i <= STATES; i++)
        for (int j = 0; j <= STATES; j++)
            out[i][j] *= expl(-most * scale);
    while (halved--)
        multiply(out, out, out);
}

static bool state(struct reader *r, int *out)
{
    long double x = 0;
    if (!formula_number(r, &x))
        return false;
    if (!(x < STATES))
        return formula_fail(r, "too many states");
    *out = (int)x;
    return true;
}

static bool words(struct reader *r, const char *word)
{
    formula_blanks(r);
    return formula_take_word(r, word) || formula_fail(r, word);
}

/* "; 0 to 1 at RATE", until the parenthesis. */
static bool flows(struct reader *r, long double years, matrix q)
{
    while (formula_take(r, ';')) {
        int from = 0, to = 0;
        long double rate = 0;
        if (!state(r, &from) || !words(r, "to") || !state(r, &to) || !words(r, "at") ||
            !formula_sum(r, &rate))
            return false;
        q[from][to] += rate * years;
        q[from][from] -= rate * years;
    }
    return formula_expect(r, ')');
}

bool formula_chain(struct reader *r, long double *out)
{
    matrix q = {{0}}, e;
    int start = 0, end = 0;
    long double years = 0;
    formula_blanks(r);
    bool share = formula_take_word(r, "share");
    if ((share && !words(r, "of")) || !state(r, &end) || !formula_expect(r, ';') ||
        !words(r, "from") || !state(r, &start) || !formula_expect(r, ';') ||
        !formula_sum(r, &years) || !flows(r, years, q))
        return false;
    if (share)
        q[end][STATES] = 1;
    exponential(q, e);
    *out = e[start][share ? STATES : end];
    return true;
}
