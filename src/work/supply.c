/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Supply: indices of interruption (IEEE 1366), which hazards interrupt most, and what it is at
 * each site; the chapter of the report, and the command that prints it alone. Owns nothing. */
#include <stdlib.h>

#include "work/spreads.h"

/* Rows of the table of hazards. */
enum { MOST_INTERRUPTING = 15 };

/* --- what it needs --- */

static bool interrupts(const struct compiled *hazard)
{
    const struct hazard *h = hazard->object->data;
    for (size_t k = 0; k < h->outcomes.n; k++)
        if (ROW(struct outcome, h->outcomes, k)->interruptions.n)
            return true;
    return false;
}

static ohmen_status compile_sites(struct job *j, struct supply_part *s, ohmen_error *e)
{
    const struct objects *all = &j->model->of[KIND_SITE];
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < all->n; i++) {
        struct site_row x = {.site = all->at[i]};
        if (!job_at_site(j, all->at[i]->id))
            continue;
        status = figures_site(j->figures, all->at[i], s->hazards->n, s->hazards->at, &x.sums, e);
        if (status == OHMEN_OK && x.sums.n_hazards)
            *array_push(j->arena, &s->sites) = x;
    }
    return status;
}

/* Of the site that is asked for, what it contributes. */
static ohmen_status compile_sums(struct job *j, struct supply_part *s, ohmen_error *e)
{
    const struct hazards *h = s->hazards;
    if (!j->query.site)
        return figures_supply(j->figures, h->n, h->at, &s->sums, e);
    struct site_sums here;
    const struct object *site = model_find(j->model, j->query.site);
    ohmen_status status = figures_site(j->figures, site, h->n, h->at, &here, e);
    s->sums = here.supply;
    return status;
}

ohmen_status supply_compile(struct job *j, const struct hazards *h, struct supply_part *s,
                            ohmen_error *e)
{
    *s = (struct supply_part){.hazards = h};
    for (size_t i = 0; i < h->n; i++)
        s->any = s->any || interrupts(h->at[i]);
    ohmen_status status = compile_sums(j, s, e);
    return status == OHMEN_OK ? compile_sites(j, s, e) : status;
}

/* --- indices --- */

static const struct index_row {
    size_t offset; /* in struct supply */
    const char *key, *meaning;
    enum { OF_REGISTER, OF_SITES_TOO } of;
} index_rows[] = {
    {offsetof(struct supply, saifi), "SAIFI", "Sustained interruptions of a customer in a year",
     OF_SITES_TOO},
    {offsetof(struct supply, saidi), "SAIDI", "Time without supply of a customer in a year",
     OF_SITES_TOO},
    {offsetof(struct supply, caidi), "CAIDI", "Mean time of a sustained interruption", OF_REGISTER},
    {offsetof(struct supply, asai), "ASAI", "Share of time in which a customer is supplied",
     OF_REGISTER},
    {offsetof(struct supply, maifi), "MAIFI", "Momentary interruptions of a customer in a year",
     OF_SITES_TOO},
    {offsetof(struct supply, not_supplied), "ENS", "Energy not supplied in a year", OF_SITES_TOO},
    {offsetof(struct supply, customer_time), "Customer hours",
     "Time without supply in a year, over all customers", OF_SITES_TOO},
};

/* "1/a" of what is counted in a year has no unit of its own. */
const char *supply_unit(struct job *j, figure_id id, double *shown)
{
    const char *unit = figure_display(j, id, shown);
    enum property p = figure_at(j->figures, id)->property;
    if (p == PROPERTY_ASAI || p == PROPERTY_CAIDI)
        return unit;
    return *unit ? arena_printf(j->arena, "%s/a", unit) : "1/a";
}

static void index_row(struct job *j, struct block *b, const struct index_row *x, figure_id id)
{
    double shown;
    const char *unit = supply_unit(j, id, &shown);
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, x->key);
    row_text(j->report, row, x->meaning);
    row_number(j->report, row, shown, figure_name(j->figures, j->arena, id));
    row_text(j->report, row, unit);
}

static void indices_table(struct job *j, const struct supply_part *s)
{
    struct report *r = j->report;
    const char *title = j->query.site ? arena_printf(j->arena, "What %s contributes", j->query.site)
                                      : "Indices of supply (IEEE 1366)";
    struct block *b = report_table(r, "indices", title);
    block_column(r, b, "index", "Index", "", STYLE_PLAIN);
    block_column(r, b, "meaning", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "value", "Value", "", STYLE_GROUPED);
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    for (size_t i = 0; i < sizeof index_rows / sizeof *index_rows; i++) {
        figure_id id = *(const figure_id *)((const char *)&s->sums + index_rows[i].offset);
        if (id != FIGURE_NONE)
            index_row(j, b, &index_rows[i], id);
    }
}

/* The limit between momentary and sustained, as the register says it. */
static const char *threshold_words(struct job *j)
{
    const struct quantity *q = j->model->settings->sustained_over;
    struct text t;
    if (!q)
        return "5 min (IEEE 1366-2012; the register says nothing else)";
    text_init(&t, j->arena);
    expr_write(&t, q->expr);
    return text_str(&t);
}

static void part_indices(struct job *j, const struct supply_part *s)
{
    int64_t served = j->model->settings->customers_served;
    indices_table(j, s);
    if (served > 0)
        report_note(j->report, "supply-basis",
                    "For each of %lld customers served. An interruption is sustained where it "
                    "lasts longer than %s, and momentary otherwise.",
                    (long long)served, threshold_words(j));
    else
        report_note(j->report, "supply-basis",
                    "SAIFI, SAIDI, CAIDI, ASAI and MAIFI need `customers-served` of the register, "
                    "which is not stated. An interruption is sustained where it lasts longer than "
                    "%s, and momentary otherwise.",
                    threshold_words(j));
}

/* --- hazards --- */

static double value_of(struct job *j, const struct compiled *hazard, enum property p)
{
    return figure_value(j->figures, hazard_effect(j, hazard, p, NULL));
}

static void supply_columns(struct job *j, struct block *b)
{
    struct report *r = j->report;
    block_column(r, b, "interruptions", "Sustained", "1/a", STYLE_GROUPED)->keep = 3;
    block_column(r, b, "momentary", "Momentary", "1/a", STYLE_GROUPED)->keep = 1;
    block_column(r, b, "customer-hours", "Customer hours", "h/a", STYLE_GROUPED)->keep = 4;
    block_column(r, b, "energy-not-supplied", "Energy", "MWh/a", STYLE_GROUPED)->keep = 2;
}

static void shown_cell(struct job *j, struct row *row, figure_id id)
{
    double shown;
    figure_display(j, id, &shown);
    row_number(j->report, row, shown, figure_name(j->figures, j->arena, id));
}

static void hazard_row(struct job *j, struct block *b, const struct compiled *c)
{
    static const enum property shown[] = {PROPERTY_INTERRUPTIONS, PROPERTY_MOMENTARY,
                                          PROPERTY_CUSTOMER_TIME, PROPERTY_NOT_SUPPLIED};
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, c->id);
    row_text(j->report, row, object_name(c->object));
    for (size_t i = 0; i < sizeof shown / sizeof *shown; i++)
        shown_cell(j, row, hazard_effect(j, c, shown[i], NULL));
}

/* By what they are ranked: customer hours, or energy where no customers are counted. */
static size_t *by_interruption(struct job *j, const struct hazards *h, enum property p)
{
    double *values = NEW_ARRAY(j->arena, h->n, double);
    for (size_t i = 0; i < h->n; i++)
        values[i] = value_of(j, h->at[i], p);
    return falling_order(j->arena, h->n, values);
}

static struct hazards interrupting(struct job *j, const struct hazards *h)
{
    struct hazards some = {0};
    for (size_t i = 0; i < h->n; i++)
        if (interrupts(h->at[i]))
            *array_push(j->arena, &some) = h->at[i];
    return some;
}

static void part_hazards_that_interrupt(struct job *j, const struct supply_part *s)
{
    struct report *r = j->report;
    struct hazards h = interrupting(j, s->hazards);
    bool customers = figure_value(j->figures, s->sums.customer_time) > 0;
    size_t *order =
        by_interruption(j, &h, customers ? PROPERTY_CUSTOMER_TIME : PROPERTY_NOT_SUPPLIED);
    size_t shown = h.n < MOST_INTERRUPTING ? h.n : MOST_INTERRUPTING;
    struct block *b =
        report_table(r, "interruptions-by-hazard", "Customers interrupted in a year, by hazard");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 1;
    supply_columns(j, b);
    for (size_t i = 0; i < shown; i++)
        hazard_row(j, b, h.at[order[i]]);
    if (h.n > shown)
        report_note(r, "interruptions-more", "%s more, with %s, %s not shown.",
                    count_words(j->arena, h.n - shown, "hazard", "hazards"),
                    customers ? "fewer customer hours" : "less energy",
                    h.n - shown == 1 ? "is" : "are");
}

/* --- sites --- */

static struct block *sites_table(struct job *j, const struct supply_part *s)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "sites", "Sites");
    block_column(r, b, "site", "Site", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "hazards", "Hazards", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    if (*criteria_word(j, SCOPE_SITE, 0))
        block_column(r, b, "criterion", "Criterion", "", STYLE_PLAIN)->keep = 6;
    if (s->any)
        supply_columns(j, b);
    if (s->any && s->sums.saidi != FIGURE_NONE)
        block_column(r, b, "saidi", "Part of SAIDI", "min/a", STYLE_GROUPED)->keep = 5;
    return b;
}

static void site_row(struct job *j, struct block *b, const struct supply_part *s,
                     const struct site_row *x)
{
    struct report *r = j->report;
    const struct supply *sums = &x->sums.supply;
    const char *word = criteria_word(j, SCOPE_SITE, figure_value(j->figures, x->sums.risk));
    struct row *row = block_row(r, b);
    row_text(r, row, x->site->id);
    row_text(r, row, object_name(x->site));
    row_count(r, row, x->sums.n_hazards);
    figure_cell(j, row, x->sums.risk);
    if (*word)
        row_text(r, row, word);
    if (!s->any)
        return;
    shown_cell(j, row, sums->interruptions);
    shown_cell(j, row, sums->momentary);
    shown_cell(j, row, sums->customer_time);
    shown_cell(j, row, sums->not_supplied);
    if (s->sums.saidi != FIGURE_NONE)
        shown_cell(j, row, sums->saidi);
}

void part_sites(struct job *j, const struct supply_part *s)
{
    if (s->sites.n == 0)
        return;
    struct block *b = sites_table(j, s);
    for (size_t i = 0; i < s->sites.n; i++)
        site_row(j, b, s, &s->sites.at[i]);
    report_note(j->report, "sites-nest",
                "A site has the hazards at it and at the sites in it, so that rows of sites that "
                "nest are not to be added.");
}

/* --- the chapter --- */

/* What is not stated counts as nothing: the reader must know how much that is. */
static void part_silent(struct job *j, const struct supply_part *s)
{
    size_t silent = s->hazards->n - interrupting(j, s->hazards).n;
    if (silent)
        report_note(j->report, "supply-silent",
                    "No interruption is stated of %zu of %s here; %s as interrupting nobody.",
                    silent, count_words(j->arena, s->hazards->n, "hazard", "hazards"),
                    silent == 1 ? "it counts" : "they count");
}

void part_supply(struct job *j, const struct supply_part *s)
{
    if (!s->any) {
        report_note(j->report, "supply-none", "No hazard here says whom it interrupts.");
        return;
    }
    part_indices(j, s);
    part_hazards_that_interrupt(j, s);
    part_silent(j, s);
}

static ohmen_status run_supply(struct job *j, void *ctx, ohmen_error *e)
{
    struct hazards h = {0};
    struct supply_part s;
    (void)ctx;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = job_compile_hazards(j, &h, e);
    if (status == OHMEN_OK)
        status = supply_compile(j, &h, &s, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, "Supply");
    part_not_computed(j);
    part_supply(j, &s);
    part_sites(j, &s);
    report_note(j->report, "perspective", "Damage counted: %s.", perspective_words(j));
    return OHMEN_OK;
}

ohmen_status ohmen_supply(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                          ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_supply, NULL, out, e);
}
