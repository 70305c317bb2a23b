/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Lists of one kind, and single objects with what is computed of them. */
#include <string.h>

#include "model/bind.h"
#include "work/work.h"

enum { BRIEF = 160 };

/* --- lists --- */

/* Everything that an object says beside its name, in short. */
static const char *says(struct job *j, const struct object *o)
{
    struct node *rest = node_map(j->arena, o->node->place);
    const char *name = object_name(o);
    for (size_t i = 0; i < o->node->n; i++) {
        const struct pair *p = &o->node->pairs[i];
        if (p->value->type != NODE_SCALAR || p->value->text != name)
            node_add(j->arena, rest, p->key, p->place, p->value);
    }
    const struct node *doc = bind_document(j->arena, kinds[o->kind].table, rest);
    const char *brief = node_brief(j->arena, doc, BRIEF);
    size_t n = strlen(brief);
    bool braces = n >= 2 && brief[0] == '{' && brief[n - 1] == '}';
    return braces ? arena_strn(j->arena, brief + 1, n - 2) : brief;
}

static ohmen_status unknown_kind(struct job *j, const char *section, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, section);
    for (int k = 0; k < KIND_COUNT; k++)
        nearest_offer(&near, kinds[k].section);
    const char *best = nearest_take(&near);
    (void)j;
    return error_set(e, OHMEN_UNKNOWN,
                     "there is no kind \"%s\"%s%s%s; kinds are the sections of the documents",
                     section, best ? "; did you mean \"" : "", best ? best : "", best ? "\"?" : "");
}

static ohmen_status run_list(struct job *j, void *ctx, ohmen_error *e)
{
    enum kind kind = kind_of_section(ctx);
    struct report *r = j->report;
    if (kind == KIND_COUNT)
        return unknown_kind(j, ctx, e);
    ohmen_status status = job_load_model(j, e);
    if (status != OHMEN_OK)
        return status;
    const struct objects *all = &j->model->of[kind];
    struct block *b = report_table(r, kinds[kind].section, NULL);
    block_column(r, b, "id", kinds[kind].name, "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "says", "Says", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < all->n; i++) {
        struct row *row = block_row(r, b);
        row_text(r, row, all->at[i]->id);
        row_text(r, row, object_name(all->at[i]));
        row_text(r, row, says(j, all->at[i]));
    }
    if (all->n == 0)
        report_note(r, "none", "The register has no %s.", kinds[kind].section);
    return OHMEN_OK;
}

ohmen_status ohmen_list(ohmen_register *r, const ohmen_query *q, const char *kind,
                        ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_list, (void *)kind, out, e);
}

/* --- one object --- */

static void flatten(struct job *j, struct block *b, const char *path, const struct node *n)
{
    bool deep = n->type == NODE_MAP && n->n > 0;
    if (!deep) {
        struct row *row = block_row(j->report, b);
        row_text(j->report, row, path);
        row_text(j->report, row, node_brief(j->arena, n, BRIEF));
        return;
    }
    for (size_t i = 0; i < n->n; i++)
        flatten(j, b, arena_printf(j->arena, "%s%s%s", path, *path ? "/" : "", n->pairs[i].key),
                n->pairs[i].value);
}

static void part_object(struct job *j, const struct object *o)
{
    struct report *r = j->report;
    const char *name = object_name(o);
    report_heading(
        r, 1,
        arena_printf(j->arena, "%s %s%s%s", kinds[o->kind].name, o->id, *name ? ": " : "", name));
    struct block *b = report_table(r, "object", NULL);
    block_column(r, b, "field", "Field", "", STYLE_PLAIN);
    block_column(r, b, "value", "Says", "", STYLE_PLAIN);
    flatten(j, b, "", bind_document(j->arena, kinds[o->kind].table, o->node));
}

/* Who refers to it. */
static void part_users(struct job *j, const struct object *o)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "used-by", "Used by");
    block_column(r, b, "kind", "Kind", "", STYLE_PLAIN);
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "at", "At", "", STYLE_PLAIN);
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < j->model->of[k].n; i++) {
            const struct object *user = j->model->of[k].at[i];
            for (size_t n = 0; n < user->refs.n; n++) {
                if (!text_equal(user->refs.at[n].id, o->id))
                    continue;
                struct row *row = block_row(r, b);
                row_text(r, row, kinds[k].name);
                row_text(r, row, user->id);
                row_text(r, row, user->refs.at[n].path);
            }
        }
    if (b->rows.n == 0)
        r->blocks.n--;
}

/* --- figures --- */

static void figures_pairs(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "figures", "Figures");
    block_column(r, b, "figure", "Figure", "", STYLE_PLAIN);
    block_column(r, b, "value", "Value", "", STYLE_PLAIN);
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    for (figure_id i = c->first; i < c->first + c->n; i++) {
        struct row *row = block_row(r, b);
        double shown;
        const char *name = figure_name(j->figures, j->arena, i);
        const char *unit = figure_display(j, i, &shown);
        row_text(r, row, name);
        row_number(r, row, shown, name);
        row_text(r, row, unit);
    }
}

static void number_cell(struct job *j, struct row *row, figure_id id)
{
    row_number(j->report, row, figure_value(j->figures, id), figure_name(j->figures, j->arena, id));
}

static void ends_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    struct block *b = report_table(r, "ends", "Event tree: how it ends, given that it occurs");
    block_column(r, b, "end", "End", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY);
    block_column(r, b, "damage", "Damage", j->model->settings->currency, STYLE_MONEY)->keep = 1;
    for (size_t i = 0; i < x->n_ends; i++) {
        const struct end *end = &x->ends[i];
        struct row *row = block_row(r, b);
        row_text(r, row, end->path);
        row_text(r, row, end->outcome);
        number_cell(j, row, end->probability);
        if (end->damage == FIGURE_NONE)
            row_empty(r, row);
        else
            number_cell(j, row, end->damage);
    }
}

static void outcomes_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    const struct hazard *h = c->object->data;
    struct block *b = report_table(r, "outcomes", "Outcomes");
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "name", "What has happened", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY)->keep = 1;
    block_column(r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "damage", "Mean damage", j->model->settings->currency, STYLE_MONEY)->keep =
        3;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    for (size_t k = 0; k < x->n_outcomes; k++) {
        struct row *row = block_row(r, b);
        row_text(r, row, h->outcomes.keys[k]);
        row_text(r, row, ROW(struct outcome, h->outcomes, k)->name);
        number_cell(j, row, x->probability[k]);
        number_cell(j, row, x->frequency_of[k]);
        number_cell(j, row, x->damage_of[k]);
        number_cell(j, row, x->risk_of[k]);
    }
}

static void hazard_pairs(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    const char *currency = j->model->settings->currency;
    struct block *b = report_pairs(r, "hazard-figures", "In figures");
    const struct {
        const char *name, *unit;
        enum number_style style;
        figure_id id;
    } rows[] = {
        {"Occurs", "1/a", STYLE_FREQUENCY, x->frequency},
        {"Does damage", "1/a", STYLE_FREQUENCY, x->damaging},
        {"Mean damage when it does", currency, STYLE_MONEY, x->damage},
        {"Risk", unit_per_year(j), STYLE_MONEY, x->risk},
    };
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++)
        pair_number(r, block_pair(r, b, rows[i].name), figure_value(j->figures, rows[i].id),
                    rows[i].unit, rows[i].style, figure_name(j->figures, j->arena, rows[i].id));
}

static void part_figures(struct job *j, const struct compiled *c)
{
    if (c->n == 0)
        return;
    if (c->object->kind != KIND_HAZARD) {
        figures_pairs(j, c);
        return;
    }
    hazard_pairs(j, c);
    outcomes_table(j, c);
    ends_table(j, c);
    report_note(j->report, "perspective", "Damage borne by: %s.", perspective_words(j));
}

static bool has_figures(enum kind k)
{
    return k == KIND_VALUE || k == KIND_RATE || k == KIND_TYPE || k == KIND_ELEMENT ||
           k == KIND_SCHEME || k == KIND_HAZARD;
}

static ohmen_status unknown_object(struct job *j, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < j->model->by_id.n; i++)
        nearest_offer(&near, j->model->by_id.at[i].key);
    const char *best = nearest_take(&near);
    return error_set(e, OHMEN_UNKNOWN, "there is no \"%s\" in the register%s%s%s", id,
                     best ? "; did you mean \"" : "", best ? best : "", best ? "\"?" : "");
}

static ohmen_status run_show(struct job *j, void *ctx, ohmen_error *e)
{
    ohmen_status status = job_load_figures(j, e);
    if (status != OHMEN_OK)
        return status;
    const struct object *o = model_find(j->model, ctx);
    const struct compiled *c = NULL;
    if (!o)
        return unknown_object(j, ctx, e);
    if (has_figures(o->kind))
        status = figures_compile(j->figures, j->base, o->id, &c, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    part_object(j, o);
    if (c)
        part_figures(j, c);
    part_users(j, o);
    return OHMEN_OK;
}

ohmen_status ohmen_show(ohmen_register *r, const ohmen_query *q, const char *id, ohmen_report **out,
                        ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_show, (void *)id, out, e);
}
