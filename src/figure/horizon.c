/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dates as years of the horizon. Owns nothing. */
#include "figure/horizon.h"

day horizon_start(const struct register_settings *s)
{
    return s->start != DAY_NONE ? s->start : date_of((int)s->prices, 1, 1);
}

double horizon_years(const struct register_settings *s, day d)
{
    day start = horizon_start(s);
    int y0 = date_year(start), y1 = date_year(d);
    int days = (d - date_of(y1, 1, 1)) - (start - date_of(y0, 1, 1));
    return (double)(y1 - y0) + (double)days / 365;
}

uint32_t horizon_length(const struct register_settings *s)
{
    return (uint32_t)expr_constant(s->horizon->expr);
}

const char *horizon_label(struct arena *a, const struct register_settings *s, uint32_t y)
{
    return arena_printf(a, "%d", date_year(horizon_start(s)) + (int)y);
}
