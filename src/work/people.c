/* SPDX-License-Identifier: GPL-3.0-or-later */
/* People: what a person of each group faces over all hazards, in the worst year, among the
 * criteria for people, and from what; the chapter of the report, and the command that prints it
 * alone. Owns nothing. */
#include <stdlib.h>

#include "figure/horizon.h"
#include "work/work.h"

/* A contribution below this share of the risk of a group is not shown. */
static const double LEAST_SHARE = 0.01;

/* --- what it needs --- */

static bool harms(const struct compiled *hazard)
{
    const struct hazard *h = hazard->object->data;
    for (size_t k = 0; k < h->outcomes.n; k++)
        if (ROW(struct outcome, h->outcomes, k)->harm.n)
            return true;
    return false;
}

ohmen_status people_compile(struct job *j, const struct hazards *h, struct people_part *p,
                            ohmen_error *e)
{
    *p = (struct people_part){.hazards = h};
    for (size_t i = 0; i < h->n; i++)
        p->any = p->any || harms(h->at[i]);
    return p->any ? figures_people(j->figures, h->n, h->at, &p->groups, e) : OHMEN_OK;
}

/* --- groups --- */

struct worst {
    figure_id risk;
    uint32_t year;
};

/* The first year with the highest individual risk. */
static struct worst worst_year(const struct job *j, const struct harm_to *x)
{
    struct worst w = {x->yearly[0], 0};
    for (uint32_t y = 1; x->of_year && y < horizon_length(j->model->settings); y++)
        if (figure_value(j->figures, x->yearly[y]) > figure_value(j->figures, w.risk))
            w = (struct worst){x->yearly[y], y};
    return w;
}

static struct block *groups_table(struct job *j, bool years)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "groups", "Individual risk of each group");
    block_column(r, b, "group", "Group", "", STYLE_PLAIN);
    block_column(r, b, "name", "Who they are", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "persons", "Persons", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "individual-risk", "Individual risk", "1/a", STYLE_FREQUENCY);
    if (years) {
        block_column(r, b, "highest", "Highest year", "1/a", STYLE_FREQUENCY)->keep = 6;
        block_column(r, b, "year", "In", "", STYLE_PLAIN)->keep = 5;
    }
    block_column(r, b, "injury-risk", "Injury risk", "1/a", STYLE_FREQUENCY)->keep = 2;
    block_column(r, b, "fatalities", "Fatalities", "1/a", STYLE_FREQUENCY)->keep = 4;
    if (*people_word(j, 0))
        block_column(r, b, "criterion", "Criterion", "", STYLE_PLAIN)->keep = 7;
    return b;
}

static void group_row(struct job *j, struct block *b, const struct harm_to *x, bool years)
{
    struct report *r = j->report;
    const struct object *o = model_find(j->model, x->group);
    struct worst w = worst_year(j, x);
    const char *word = people_word(j, figure_value(j->figures, w.risk));
    struct row *row = block_row(r, b);
    row_text(r, row, x->group);
    row_text(r, row, object_name(o));
    row_count(r, row, (uint64_t)((const struct group_of_people *)o->data)->persons);
    figure_cell(j, row, x->death);
    if (years) {
        figure_cell(j, row, w.risk);
        row_text(r, row,
                 x->of_year ? horizon_label(j->arena, j->model->settings, w.year) : "any year");
    }
    figure_cell(j, row, x->injury);
    figure_cell(j, row, x->fatalities);
    if (*word)
        row_text(r, row, word);
}

static bool any_years(const struct job *j, const struct people_part *p)
{
    for (size_t i = 0; i < j->model->of[KIND_GROUP].n; i++)
        if (p->groups[i].of_year)
            return true;
    return false;
}

static void part_groups(struct job *j, const struct people_part *p)
{
    bool years = any_years(j, p);
    struct block *b = groups_table(j, years);
    for (size_t i = 0; i < j->model->of[KIND_GROUP].n; i++)
        group_row(j, b, &p->groups[i], years);
    report_note(j->report, "groups-basis",
                "Individual risk: the probability per year that a given person of the group dies, "
                "from all hazards of the register together, as a mean over the horizon. "
                "Fatalities: the same times the persons.");
}

static void part_limits(struct job *j)
{
    if (*people_word(j, 0))
        report_note(j->report, "people-limits",
                    "Limits of individual risk, as the register states them: %s. A group is judged "
                    "by its highest year.",
                    people_limit_words(j));
    else
        report_note(j->report, "people-limits",
                    "The register states no limits of individual risk (`criteria`, `people`).");
}

/* --- where it comes from --- */

struct contribution {
    const struct compiled *hazard;
    size_t outcome;
    figure_id risk;
};
struct contributions ARRAY_BODY(struct contribution);

static const char *outcome_key(const struct contribution *x)
{
    return ((const struct hazard *)x->hazard->object->data)->outcomes.keys[x->outcome];
}

static void find_contributions(struct job *j, const struct people_part *p, const char *group,
                               struct contributions *out)
{
    for (size_t i = 0; i < p->hazards->n; i++) {
        const struct compiled *c = p->hazards->at[i];
        const struct hazard *h = c->object->data;
        for (size_t k = 0; k < h->outcomes.n; k++) {
            const char *of = arena_printf(j->arena, "%s.%s", group, h->outcomes.keys[k]);
            figure_id id = hazard_effect(j, c, PROPERTY_DEATH, of);
            if (id != FIGURE_NONE)
                *array_push(j->arena, out) = (struct contribution){c, k, id};
        }
    }
}

static size_t *falling(struct job *j, const struct contributions *all)
{
    double *values = NEW_ARRAY(j->arena, all->n, double);
    for (size_t i = 0; i < all->n; i++)
        values[i] = figure_value(j->figures, all->at[i].risk);
    return falling_order(j->arena, all->n, values);
}

static void contribution_row(struct job *j, struct block *b, const char *group,
                             const struct contribution *x, double share)
{
    struct report *r = j->report;
    const struct hazard_exports *h = x->hazard->exports;
    struct row *row = block_row(r, b);
    row_text(r, row, group);
    row_text(r, row, x->hazard->id);
    row_text(r, row, object_name(x->hazard->object));
    row_text(r, row, outcome_key(x));
    figure_cell(j, row, h->frequency_of[x->outcome]);
    figure_cell(j, row, x->risk);
    row_number(r, row, share, NULL);
}

static void contributions_of(struct job *j, struct block *b, const struct people_part *p,
                             const struct harm_to *group)
{
    struct contributions all = {0};
    double whole = figure_value(j->figures, group->death);
    find_contributions(j, p, group->group, &all);
    size_t *order = falling(j, &all);
    for (size_t i = 0; i < all.n && whole > 0; i++) {
        double share = figure_value(j->figures, all.at[order[i]].risk) / whole;
        if (share >= LEAST_SHARE)
            contribution_row(j, b, group->group, &all.at[order[i]], share);
    }
}

static void part_contributions(struct job *j, const struct people_part *p)
{
    struct report *r = j->report;
    struct block *b =
        report_table(r, "individual-risk-from", "What individual risk comes from, from 1 % on");
    block_column(r, b, "group", "Group", "", STYLE_PLAIN);
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "frequency", "Outcome occurs", "1/a", STYLE_FREQUENCY)->keep = 2;
    block_column(r, b, "individual-risk", "Individual risk", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "share", "Share", "%", STYLE_PERCENT);
    for (size_t i = 0; i < j->model->of[KIND_GROUP].n; i++)
        contributions_of(j, b, p, &p->groups[i]);
    if (b->rows.n == 0)
        r->blocks.n--;
}

/* --- the chapter --- */

/* What is not stated counts as nothing: the reader must know how much that is. */
static void part_silent(struct job *j, const struct people_part *p)
{
    size_t silent = 0;
    for (size_t i = 0; i < p->hazards->n; i++)
        silent += !harms(p->hazards->at[i]);
    if (silent)
        report_note(j->report, "people-silent",
                    "No harm is stated of %zu of %s; %s as harming nobody.", silent,
                    count_words(j->arena, p->hazards->n, "hazard", "hazards"),
                    silent == 1 ? "it counts" : "they count");
}

void part_people(struct job *j, const struct people_part *p)
{
    if (!p->any) {
        report_note(j->report, "people-none", "No hazard here says whom it may harm.");
        return;
    }
    part_groups(j, p);
    part_limits(j);
    part_contributions(j, p);
    part_silent(j, p);
    report_note(j->report, "people-cautions",
                "How often people are present is stated in the register, not measured. These "
                "figures replace no duty of care: local codes and licensed practice come first.");
}

static ohmen_status run_people(struct job *j, void *ctx, ohmen_error *e)
{
    struct hazards h = {0};
    struct people_part p;
    (void)ctx;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = job_compile_hazards(j, &h, e);
    if (status == OHMEN_OK)
        status = people_compile(j, &h, &p, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, "People");
    part_not_computed(j);
    part_people(j, &p);
    return OHMEN_OK;
}

ohmen_status ohmen_people(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                          ohmen_error *e)
{
    if (q && q->site)
        return error_set(e, OHMEN_USAGE,
                         "individual risk is over all hazards of the register: it takes no site");
    return job_do(r, STORE_READ, q, run_people, NULL, out, e);
}
