/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Whose damage a risk is: risk of each hazard as each perspective bears it, and damage by
 * category. Owns nothing.
 *
 * Each perspective has an account of its own. What several bear stands in each of them, so that
 * nothing here is summed over perspectives. */
#include "work/work.h"

/* --- what it needs --- */

ohmen_status perspectives_compile(struct job *j, const struct hazards *h, struct perspectives *p,
                                  ohmen_error *e)
{
    *p = (struct perspectives){.hazards = h};
    if (!j->query.site)
        return figures_accounts(j->figures, h->n, h->at, &p->sums, e);
    struct site_sums here;
    const struct object *site = model_find(j->model, j->query.site);
    ohmen_status status = figures_site(j->figures, site, h->n, h->at, &here, e);
    p->sums = here.accounts;
    return status;
}

/* --- risk by perspective --- */

static const struct rows *rows_of(const struct job *j)
{
    return &j->model->settings->perspectives;
}

/* The effect of a hazard, in its part that has been compiled. */
static figure_id borne_by(struct job *j, const struct compiled *hazard, const char *perspective)
{
    return hazard_effect(j, hazard, PROPERTY_BORNE, perspective);
}

/* The rank of each hazard in the account of a perspective. */
static size_t *ranks_of(struct job *j, const struct hazards *h, const char *perspective)
{
    double *risks = NEW_ARRAY(j->arena, h->n, double);
    size_t *ranks = NEW_ARRAY(j->arena, h->n, size_t);
    for (size_t i = 0; i < h->n; i++)
        risks[i] = figure_value(j->figures, borne_by(j, h->at[i], perspective));
    size_t *order = falling_order(j->arena, h->n, risks);
    for (size_t i = 0; i < h->n; i++)
        ranks[order[i]] = i + 1;
    return ranks;
}

static struct block *perspective_table(struct job *j)
{
    struct report *r = j->report;
    const struct rows *rows = rows_of(j);
    struct block *b = report_table(r, "risk-by-perspective", "Risk by perspective");
    unsigned keep = (unsigned)(2 * rows->n);
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < rows->n; i++) {
        const char *name = rows->keys[i];
        block_column(r, b, arena_printf(j->arena, "risk-%s", name),
                     arena_printf(j->arena, "Risk of %s", name), unit_per_year(j), STYLE_MONEY)
            ->keep = i ? keep-- : 0;
        block_column(r, b, arena_printf(j->arena, "rank-%s", name), "Rank", "", STYLE_PLAIN)->keep =
            keep--;
    }
    return b;
}

static void total_row(struct job *j, struct block *b, const struct perspectives *p)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, "all hazards");
    row_empty(j->report, row);
    for (size_t i = 0; i < rows_of(j)->n; i++) {
        figure_cell(j, row, p->sums.borne[i]);
        row_empty(j->report, row);
    }
}

static void part_risk_by_perspective(struct job *j, const struct perspectives *p)
{
    const struct rows *rows = rows_of(j);
    const struct hazards *h = p->hazards;
    size_t *order = hazards_by_risk(j, h);
    size_t **ranks = NEW_ARRAY(j->arena, rows->n, size_t *);
    for (size_t i = 0; i < rows->n; i++)
        ranks[i] = ranks_of(j, h, rows->keys[i]);
    struct block *b = perspective_table(j);
    for (size_t i = 0; i < h->n; i++) {
        const struct compiled *c = h->at[order[i]];
        struct row *row = block_row(j->report, b);
        row_text(j->report, row, c->id);
        row_text(j->report, row, object_name(c->object));
        for (size_t k = 0; k < rows->n; k++) {
            figure_cell(j, row, borne_by(j, c, rows->keys[k]));
            row_count(j->report, row, ranks[k][order[i]]);
        }
    }
    total_row(j, b, p);
    if (rows->n > 1)
        report_note(j->report, "perspectives-apart",
                    "Each perspective has an account of its own: what several of them bear stands "
                    "in each, so that their risks are not to be added.");
}

/* --- damage by category --- */

static const char *bearers(struct job *j, const char *category)
{
    const struct rows *rows = rows_of(j);
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < rows->n; i++) {
        const struct names *names = &((const struct names *)rows->at)[i];
        for (size_t k = 0; k < names->n; k++)
            if (text_equal(names->at[k], category))
                text_printf(&t, "%s%s", t.n ? ", " : "", rows->keys[i]);
    }
    return text_str(&t);
}

static struct block *category_table(struct job *j)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "risk-by-category", "Risk by category of damage");
    block_column(r, b, "category", "Category", "", STYLE_PLAIN);
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    block_column(r, b, "share", "Share", "%", STYLE_PERCENT)->keep = 1;
    if (rows_of(j)->n)
        block_column(r, b, "borne-by", "Borne by", "", STYLE_PLAIN)->keep = 2;
    return b;
}

static void part_risk_by_category(struct job *j, const struct perspectives *p)
{
    const struct accounts *x = &p->sums;
    double *risks = NEW_ARRAY(j->arena, x->n_categories, double), sum = 0;
    for (size_t i = 0; i < x->n_categories; i++)
        sum += risks[i] = figure_value(j->figures, x->by_category[i]);
    size_t *order = falling_order(j->arena, x->n_categories, risks);
    struct block *b = category_table(j);
    for (size_t i = 0; i < x->n_categories; i++) {
        size_t k = order[i];
        struct row *row = block_row(j->report, b);
        row_text(j->report, row, x->categories[k]);
        figure_cell(j, row, x->by_category[k]);
        row_number(j->report, row, sum > 0 ? risks[k] / sum : 0, NULL);
        if (rows_of(j)->n)
            row_text(j->report, row, bearers(j, x->categories[k]));
    }
}

void part_perspectives(struct job *j, const struct perspectives *p)
{
    if (p->hazards->n == 0)
        return;
    if (rows_of(j)->n)
        part_risk_by_perspective(j, p);
    if (p->sums.n_categories)
        part_risk_by_category(j, p);
}
