/* SPDX-License-Identifier: GPL-3.0-or-later */
/* An alternative year by year: as a table, and when it has paid for itself, in a sentence. */
#include "decide/flow.h"

#include "work/work.h"

static const struct flow *job_flow(struct job *j, struct weighing *w, const struct alternative *x)
{
    const struct flow *flow = NULL;
    ohmen_status status = flow_compile(j->figures, w, x, &flow, NULL);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, NULL);
    return status == OHMEN_OK ? flow : NULL;
}

void part_flow(struct job *j, struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    const char *currency = j->model->settings->currency;
    struct report *r = j->report;
    const struct flow *flow = best->n ? job_flow(j, w, best) : NULL;
    if (!flow)
        return;
    struct block *b =
        report_table(r, "flow", arena_printf(j->arena, "Year by year: %s", best->name));
    block_column(r, b, "year", "Year", "", STYLE_PLAIN);
    block_column(r, b, "invested", "Invested", currency, STYLE_MONEY);
    block_column(r, b, "running", "To run", currency, STYLE_MONEY);
    block_column(r, b, "avoided", "Damage avoided", currency, STYLE_MONEY);
    block_column(r, b, "cumulated", "Cumulated, discounted", currency, STYLE_MONEY);
    for (size_t y = 0; y < flow->n; y++) {
        const struct flow_year *x = &flow->years[y];
        struct row *row = block_row(r, b);
        row_text(r, row, x->label);
        figure_cell(j, row, x->invested);
        figure_cell(j, row, x->running);
        figure_cell(j, row, x->avoided);
        figure_cell(j, row, x->cumulated);
    }
    report_note(r, "flow-words",
                "Invested, to run, avoided: not discounted; what options are worth at the end is "
                "taken off what is invested in the last year.");
}

const char *payback_sentence(struct job *j, struct weighing *w, const struct alternative *x)
{
    const struct flow *flow = job_flow(j, w, x);
    if (!flow)
        return "";
    size_t year = flow_payback(j->figures, flow);
    if (year == flow->n)
        return "It does not pay for itself within the horizon.";
    return arena_printf(j->arena,
                        "With interest it has paid for itself by the end of %s, after %zu year%s.",
                        flow->years[year].label, year + 1, year == 0 ? "" : "s");
}
