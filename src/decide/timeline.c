/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Dates as years of the horizon, and the horizon cut into stretches. Owns nothing. */
#include "decide/timeline.h"

#include <math.h>
#include <stdlib.h>

#include "figure/horizon.h"

struct service timeline_service(const struct figures *f, const char *id, double horizon)
{
    const struct register_settings *s = f->base->settings;
    const struct option *o = model_get(f->base, KIND_OPTION, id);
    double from = o->in_service == DAY_NONE ? 0 : horizon_years(s, o->in_service);
    double to = o->life ? from + expr_constant(o->life->expr) : horizon;
    struct service r = {fmin(fmax(from, 0), horizon), fmin(fmax(to, 0), horizon)};
    return r;
}

static int by_number(const void *p, const void *q)
{
    double a = *(const double *)p, b = *(const double *)q;
    return (a > b) - (a < b);
}

static ohmen_status active_variant(struct figures *f, const struct alternative *x, double from,
                                   double horizon, const struct variant **out, ohmen_error *e)
{
    const char **active = NEW_ARRAY(f->arena, x->n, const char *);
    size_t n = 0;
    for (size_t i = 0; i < x->n; i++) {
        struct service s = timeline_service(f, x->options[i], horizon);
        if (s.from <= from && from < s.to)
            active[n++] = x->options[i];
    }
    return figures_variant(f, n, active, out, e);
}

ohmen_status timeline_cut(struct figures *f, const struct alternative *x, double horizon,
                          struct stretches *out, ohmen_error *e)
{
    double *cuts = NEW_ARRAY(f->arena, 2 * x->n + 2, double);
    size_t n = 0;
    cuts[n++] = 0;
    cuts[n++] = horizon;
    for (size_t i = 0; i < x->n; i++) {
        struct service s = timeline_service(f, x->options[i], horizon);
        cuts[n++] = s.from;
        cuts[n++] = s.to;
    }
    qsort(cuts, n, sizeof *cuts, by_number);
    for (size_t i = 0; i + 1 < n; i++) {
        if (cuts[i] == cuts[i + 1])
            continue;
        struct stretch s = {cuts[i], cuts[i + 1], NULL};
        ohmen_status status = active_variant(f, x, s.from, horizon, &s.variant, e);
        if (status != OHMEN_OK)
            return status;
        *array_push(f->arena, out) = s;
    }
    return OHMEN_OK;
}

double timeline_year(const struct register_settings *s, day d)
{
    double year = date_year(d) - date_year(horizon_start(s));
    return fmax(horizon_years(s, d) < year ? year - 1 : year, 0);
}
