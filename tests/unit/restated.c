/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Registers that state an input otherwise (restated.h). */
#include "restated.h"

#include <check.h>
#include <math.h>
#include <string.h>

static const char digits[] = "0123456789abcdefghij";

size_t restated_place(const struct restated *r, const char *figure)
{
    for (size_t i = 0; i < r->n; i++)
        if (text_equal(r->inputs[i].figure, figure))
            return i;
    return SIZE_MAX;
}

static void write_input(struct text *t, const struct restated_input *in, double x)
{
    char number[32];
    if (isnan(x))
        text_add(t, in->stated);
    else
        text_printf(t, "%s %s", text_double(number, x), in->unit);
}

const char *restated_text(struct arena *a, const struct restated *r, const double *x)
{
    struct text t;
    text_init(&t, a);
    for (const char *c = r->text; *c; c++) {
        const char *place = *c == '$' && c[1] ? strchr(digits, c[1]) : NULL;
        if (!place) {
            text_printf(&t, "%c", *c);
            continue;
        }
        size_t i = (size_t)(place - digits);
        ck_assert_uint_lt(i, r->n);
        write_input(&t, &r->inputs[i], x ? x[i] : NAN);
        c++;
    }
    return text_str(&t);
}

struct weighing *restated_weigh(struct loaded *l, struct arena *a, const char *text)
{
    struct weighing *w;
    ohmen_error e = OHMEN_ERROR_INIT;
    loaded_text(l, a, text, NULL);
    ck_assert_msg(weigh_ranked(l->figures, "D", &w, &e) == OHMEN_OK, "%s\n%s", e.text, text);
    return w;
}

double restated_worth(const struct loaded *l, const struct weighing *w, const char *alternative)
{
    for (size_t i = 0; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        if (text_equal(x->name, alternative))
            return x->net == FIGURE_NONE ? 0 : figure_value(l->figures, x->net);
    }
    ck_abort_msg("there is no alternative %s", alternative);
    return NAN;
}

void restated_check(const char *what, double x, double expected, double size, double tolerance)
{
    double most = fmax(fmax(fabs(x), fabs(expected)), size);
    ck_assert_msg(fabs(x - expected) <= tolerance * most, "%s: %.17g, expected %.17g", what, x,
                  expected);
}

double restated_annuity(void)
{
    long double sum = 0;
    for (int y = 0; y < 10; y++)
        sum += powl(1.05L, -(y + 0.5L));
    return (double)sum;
}
