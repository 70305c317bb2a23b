/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The whole register as one document: title block, summary, hazards, grid, protection,
 * decisions, inputs with their sources, what is missing, what was left out, cautions. */
#include "work/protection.h"
#include "work/spreads.h"

struct whole {
    struct hazards hazards;
    struct protection protection;
    struct perspectives perspectives;
    struct supply_part supply;
    struct people_part people;
    struct spreads_part spreads;
    ARRAY(struct weighing *) decisions;
};

static ohmen_status compile_decisions(struct job *j, struct whole *w, ohmen_error *e)
{
    const struct objects *all = &j->model->of[KIND_DECISION];
    for (size_t i = 0; i < all->n; i++) {
        struct weighing *x;
        ohmen_error why = OHMEN_ERROR_INIT;
        ohmen_status status = weigh_compile(j->figures, all->at[i]->id, &x, &why);
        if (status == OHMEN_OK)
            *array_push(j->arena, &w->decisions) = x;
        else
            status = job_leave_out(j, all->at[i]->id, status, &why, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

/* --- summary --- */

/* "One hazard, H-BUS, carries a risk of 1.18 kEUR/a." */
static void total_note(struct job *j, const struct whole *w)
{
    double sum = 0, most = 0;
    const char *worst = NULL, *unit = unit_per_year(j);
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct hazard_exports *x = w->hazards.at[i]->exports;
        double risk = figure_value(j->figures, x->risk);
        sum += risk;
        if (!worst || risk > most) {
            most = risk;
            worst = w->hazards.at[i]->id;
        }
    }
    const char *together = money_text(j->arena, sum, unit);
    const char *judged = j->query.site ? "" : criteria_sentence(j, SCOPE_REGISTER, sum);
    if (w->hazards.n == 1)
        report_note(j->report, "summary", "One hazard, %s, carries a risk of %s.%s", worst,
                    together, judged);
    else if (w->hazards.n > 1)
        report_note(
            j->report, "summary",
            "%zu hazards carry a risk of %s together. The largest is %s with %s, %.0f %% of it.%s",
            w->hazards.n, together, worst, money_text(j->arena, most, unit),
            sum > 0 ? 100 * most / sum : 0, judged);
}

static void part_summary(struct job *j, struct whole *w)
{
    report_heading(j->report, 2, "Summary");
    total_note(j, w);
    for (size_t i = 0; i < w->decisions.n; i++) {
        struct weighing *x = w->decisions.at[i];
        weigh_rank(j->figures, x);
        report_note(j->report, arena_printf(j->arena, "summary-%s", x->id), "%s: %s %s", x->id,
                    x->decision->question, weighing_sentence(j, x));
    }
}

/* --- inputs --- */

static void input_row(struct job *j, struct block *b, const struct compiled *c)
{
    struct report *r = j->report;
    const struct figure *g = figure_at(j->figures, c->main);
    struct row *row = block_row(r, b);
    double shown;
    const char *unit = figure_display(j, c->main, &shown);
    const char *name = figure_name(j->figures, j->arena, c->main);
    row_text(r, row, c->id);
    row_text(r, row, object_name(c->object));
    row_number(r, row, shown, name);
    row_text(r, row, unit);
    row_text(r, row, g->text ? g->text : figure_formula(j->figures, j->arena, c->main));
    row_text(r, row, figure_source(j, c->main));
}

static bool is_input(const struct compiled *c)
{
    return c->object && c->main != FIGURE_NONE && c->variant->n == 0 &&
           (c->object->kind == KIND_VALUE || c->object->kind == KIND_RATE ||
            c->object->kind == KIND_TYPE || c->object->kind == KIND_ELEMENT);
}

/* Values, rates, types and elements that the figures rest on, in that order. */
static void part_inputs(struct job *j)
{
    struct report *r = j->report;
    report_heading(r, 2, "What the figures rest on");
    struct block *b = report_table(r, "inputs", NULL);
    block_column(r, b, "input", "Input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "value", "Mean", "", STYLE_PLAIN);
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    block_column(r, b, "stated", "As stated", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "source", "Source", "", STYLE_PLAIN);
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < j->model->of[k].n; i++) {
            const struct compiled *c =
                strmap_get(&j->figures->compiled_by_key, j->model->of[k].at[i]->id);
            if (c && is_input(c))
                input_row(j, b, c);
        }
}

static void part_sources(struct job *j)
{
    struct report *r = j->report;
    const struct objects *all = &j->model->of[KIND_SOURCE];
    struct block *b = report_table(r, "sources", "Sources");
    block_column(r, b, "source", "Source", "", STYLE_PLAIN);
    block_column(r, b, "title", "Title", "", STYLE_PLAIN);
    block_column(r, b, "reference", "Reference", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "verified", "Verified", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < all->n; i++) {
        const struct source *s = all->at[i]->data;
        struct row *row = block_row(r, b);
        row_text(r, row, all->at[i]->id);
        row_text(r, row, s->title);
        row_text(r, row, s->reference ? s->reference : "");
        if (node_get(all->at[i]->node, "verified"))
            row_yes(r, row, s->verified);
        else
            row_empty(r, row);
    }
    if (all->n == 0)
        r->blocks.n--;
}

/* --- the document --- */

static void part_decisions(struct job *j, struct whole *w)
{
    if (j->query.site && w->decisions.n)
        report_note(
            j->report, "decisions-everywhere",
            "The decisions below are weighed over every hazard that they reach, at whatever "
            "site.");
    for (size_t i = 0; i < w->decisions.n; i++) {
        struct weighing *x = w->decisions.at[i];
        report_heading(j->report, 2,
                       arena_printf(j->arena, "%s: %s", x->id, x->decision->question));
        part_weighing(j, x);
        part_weighing_grid(j, x);
    }
}

static ohmen_status compile_chapters(struct job *j, struct whole *w, ohmen_error *e)
{
    const struct hazards *h = &w->hazards;
    ohmen_status status = perspectives_compile(j, h, &w->perspectives, e);
    if (status == OHMEN_OK)
        status = supply_compile(j, h, &w->supply, e);
    if (status == OHMEN_OK && !j->query.site)
        status = people_compile(j, h, &w->people, e);
    if (status == OHMEN_OK)
        status = protection_compile(j, h, &w->protection, e);
    return status == OHMEN_OK ? compile_decisions(j, w, e) : status;
}

static ohmen_status compute_report(struct job *j, struct whole *w, ohmen_error *e)
{
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = job_compile_hazards(j, &w->hazards, e);
    if (status == OHMEN_OK)
        status = compile_chapters(j, w, e);
    if (status == OHMEN_OK && !j->query.site)
        status = spreads_compile(j, &w->hazards, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    return status == OHMEN_OK
               ? spreads_compute(j, &w->hazards, &w->supply, &w->people, &w->spreads, e)
               : status;
}

static void chapter_hazards(struct job *j, const struct whole *w)
{
    report_heading(j->report, 2, "Hazards");
    part_hazards(j, &w->hazards);
    part_hazard_grid(j, &w->hazards);
    part_perspectives(j, &w->perspectives);
    part_sites(j, &w->supply);
}

/* Supply and people, where the register has such data. */
static void chapters_of_effects(struct job *j, const struct whole *w)
{
    if (w->supply.any) {
        report_heading(j->report, 2, "Supply");
        part_supply(j, &w->supply);
    }
    if (w->people.any) {
        report_heading(j->report, 2, "People");
        part_people(j, &w->people);
    }
}

/* Of the register as a whole: at one site it would be another sum under the same name. */
static void chapter_loss(struct job *j, const struct whole *w)
{
    if (j->query.site || w->hazards.n == 0)
        return;
    report_heading(j->report, 2, "How bad it may get");
    part_loss_register(j, &w->hazards);
}

static ohmen_status run_report(struct job *j, void *ctx, ohmen_error *e)
{
    struct whole w = {0};
    (void)ctx;
    ohmen_status status = compute_report(j, &w, e);
    if (status != OHMEN_OK)
        return status;
    part_title_block(j, e);
    part_signatures(j);
    part_summary(j, &w);
    part_not_computed(j);
    chapter_hazards(j, &w);
    chapters_of_effects(j, &w);
    report_heading(j->report, 2, "How sure the figures are");
    part_spreads(j, &w.spreads);
    chapter_loss(j, &w);
    report_heading(j->report, 2, "What protection hinges on");
    part_protection(j, &w.protection, 3);
    part_decisions(j, &w);
    part_inputs(j);
    part_sources(j);
    part_gaps_counted(j);
    report_heading(j->report, 2, "What is left out, and cautions");
    part_linearity(j, &w.hazards);
    part_unused(j);
    part_cautions(j);
    return OHMEN_OK;
}

ohmen_status ohmen_report_all(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                              ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_report, NULL, out, e);
}
