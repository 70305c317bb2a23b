/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure the answer to a decision is, and what it depends on: the sample of its alternatives,
 * what each input swings, moves with and turns, and a map over two of them. */
#include "work/work.h"

struct sensitivity_request {
    const char *decision, *x, *y;
};

static ohmen_status write_sensitivity(struct job *j, struct weighing *w,
                                      const struct sensitivity_request *q, ohmen_error *e)
{
    weigh_rank(j->figures, w);
    report_heading(j->report, 1, arena_printf(j->arena, "%s: %s", w->id, w->decision->question));
    report_note(j->report, "recommendation", "%s", weighing_sentence(j, w));
    part_sure(j, w);
    part_swings(j, w);
    ohmen_status status = part_map(j, w, q->x, q->y, e);
    if (status != OHMEN_OK)
        return status;
    part_information(j, w);
    part_sure_moves(j, w);
    part_elasticities(j, w);
    part_turn(j, w);
    part_conventions(j);
    part_unused(j);
    part_cautions(j);
    return OHMEN_OK;
}

static ohmen_status run_sensitivity(struct job *j, void *ctx, ohmen_error *e)
{
    const struct sensitivity_request *q = ctx;
    struct weighing *w = NULL;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = weigh_compile(j->figures, q->decision, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    return status == OHMEN_OK ? write_sensitivity(j, w, q, e) : status;
}

ohmen_status ohmen_sensitivity(ohmen_register *r, const ohmen_query *q, const char *decision,
                               const char *x, const char *y, ohmen_report **out, ohmen_error *e)
{
    struct sensitivity_request request = {decision, x, y};
    return job_do(r, STORE_READ, q, run_sensitivity, &request, out, e);
}
