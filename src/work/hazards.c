/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Hazards as a table, and their grid. */
#include "work/filter.h"

/* Of figures that are loaded. */
static ohmen_status evaluate_hazards(struct job *j, struct hazards *h, ohmen_error *e)
{
    ohmen_status status = job_compile_hazards(j, h, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    return status;
}

static ohmen_status compute_hazards(struct job *j, struct hazards *h, ohmen_error *e)
{
    ohmen_status status = job_load_figures(j, e);
    return status == OHMEN_OK ? evaluate_hazards(j, h, e) : status;
}

static ohmen_status run_hazards(struct job *j, void *ctx, ohmen_error *e)
{
    struct hazards h = {0};
    struct filter *f = NULL;
    (void)ctx;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = filter_read(j, KIND_HAZARD, hazard_columns, N_HAZARD_COLUMNS, &f, e);
    if (status == OHMEN_OK)
        status = evaluate_hazards(j, &h, e);
    if (status != OHMEN_OK)
        return status;
    part_not_computed(j);
    part_hazards_where(j, &h, f);
    report_note(j->report, "perspective", "Damage counted: %s.", perspective_words(j));
    return OHMEN_OK;
}

ohmen_status ohmen_hazards(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                           ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_hazards, NULL, out, e);
}

static ohmen_status run_grid(struct job *j, void *ctx, ohmen_error *e)
{
    struct hazards h = {0};
    struct weighing *w = NULL;
    ohmen_status status;
    if (!ctx) {
        status = compute_hazards(j, &h, e);
        if (status != OHMEN_OK)
            return status;
        part_not_computed(j);
        part_hazard_grid(j, &h);
        return OHMEN_OK;
    }
    if (j->query.site)
        return error_set(e, OHMEN_USAGE,
                         "the grid of a decision shows every hazard that it reaches: it takes no "
                         "site");
    status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = weigh_compile(j->figures, ctx, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status == OHMEN_OK)
        part_weighing_grid(j, w);
    return status;
}

ohmen_status ohmen_grid(ohmen_register *r, const ohmen_query *q, const char *decision,
                        ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_grid, (void *)decision, out, e);
}
