/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Parts that several reports have: title block, hazards, notes, cautions. */
#include <math.h>
#include <stdlib.h>

#include "base/date.h"
#include "base/utf8.h"
#include "doc/json.h"
#include "figure/horizon.h"
#include "work/work.h"

const char *object_name(const struct object *o)
{
    static const char *const keys[] = {"name", "title", "question"};
    for (size_t i = 0; i < sizeof keys / sizeof *keys; i++) {
        const struct node *n = node_get(o->node, keys[i]);
        if (n && n->type == NODE_SCALAR)
            return n->text;
    }
    return "";
}

const char *unit_per_year(struct job *j)
{
    return arena_printf(j->arena, "%s/a", j->model->settings->currency);
}

const char *perspective_words(struct job *j)
{
    const char *who = j->figures->perspective;
    return who ? arena_printf(j->arena, "what %s bears", who) : "every category";
}

static const char *money_rate(struct job *j, double x)
{
    return money_text(j->arena, x, unit_per_year(j));
}

static const char *reads(struct job *j, const struct quantity *q)
{
    struct text t;
    text_init(&t, j->arena);
    expr_write(&t, q->expr);
    return text_str(&t);
}

/* --- title block --- */

static void pair(struct job *j, struct block *b, const char *name, const char *text)
{
    row_text(j->report, block_pair(j->report, b, name), text);
}

/* The entry that is looked at: number, time, author. */
static const char *entry_words(struct job *j, const struct store_entry *x)
{
    char utc[UTC_TEXT];
    return arena_printf(j->arena, "entry %llu of %s by %s", (unsigned long long)x->seq,
                        utc_write(utc, x->utc), x->author);
}

void part_title_block(struct job *j, ohmen_error *e)
{
    const struct register_settings *s = j->model->settings;
    struct store_entries entries = {0};
    char date[DATE_TEXT], hash[STORE_HASH_TEXT], now[UTC_TEXT];
    struct report *r = j->report;
    report_heading(r, 1, s->title);
    struct block *b = report_pairs(r, "title-block", NULL);
    pair(j, b, "Register", j->path);
    if (store_entries(j->store, j->at, j->at, &entries, e) == OHMEN_OK && entries.n)
        pair(j, b, "Data as of", entry_words(j, &entries.at[0]));
    if (store_content_hash(j->store, j->at, hash, e) == OHMEN_OK)
        pair(j, b, "Content", arena_printf(j->arena, "BLAKE2b-256 %.16s...", hash));
    pair(j, b, "Evaluated",
         arena_printf(j->arena, "for %s, at %s with ohmen %s", date_write(date, j->date),
                      utc_write(now, clock_now()), OHMEN_VERSION));
    pair(j, b, "Damage counted", perspective_words(j));
    pair(j, b, "Money",
         arena_printf(j->arena, "%s at prices of %lld, interest %s", s->currency,
                      (long long)s->prices, reads(j, s->discount)));
    pair(j, b, "Horizon",
         arena_printf(j->arena, "%s from %s", reads(j, s->horizon),
                      date_write(date, horizon_start(s))));
    if (j->query.site)
        pair(j, b, "Only site", j->query.site);
}

/* --- hazards --- */

static const struct hazard_exports *exports(const struct compiled *c)
{
    return c->exports;
}

static double risk_of(const struct job *j, const struct compiled *c)
{
    return figure_value(j->figures, exports(c)->risk);
}

struct ranked {
    double value;
    size_t index;
};

static int by_falling_value(const void *p, const void *q)
{
    const struct ranked *a = p, *b = q;
    if (a->value != b->value)
        return a->value > b->value ? -1 : 1;
    return (a->index > b->index) - (a->index < b->index);
}

size_t *falling_order(struct arena *a, size_t n, const double *values)
{
    size_t *order = NEW_ARRAY(a, n, size_t);
    struct ranked *ranked = NEW_ARRAY(a, n, struct ranked);
    for (size_t i = 0; i < n; i++)
        ranked[i] = (struct ranked){values[i], i};
    if (n > 1)
        qsort(ranked, n, sizeof *ranked, by_falling_value);
    for (size_t i = 0; i < n; i++)
        order[i] = ranked[i].index;
    return order;
}

size_t *hazards_by_risk(struct job *j, const struct hazards *h)
{
    double *risks = NEW_ARRAY(j->arena, h->n, double);
    for (size_t i = 0; i < h->n; i++)
        risks[i] = risk_of(j, h->at[i]);
    return falling_order(j->arena, h->n, risks);
}

figure_id hazard_effect(struct job *j, const struct compiled *hazard, enum property p,
                        const char *of)
{
    const struct compiled *part = NULL;
    figures_consequences(j->figures, hazard->variant, hazard->id, &part, NULL);
    const struct consequence *x = part ? consequence_of(part, p, of) : NULL;
    return x ? x->mean : FIGURE_NONE;
}

void figure_cell(struct job *j, struct row *row, figure_id id)
{
    row_number(j->report, row, figure_value(j->figures, id), figure_name(j->figures, j->arena, id));
}

static void hazard_row(struct job *j, struct block *b, size_t rank, const struct compiled *c)
{
    const struct hazard_exports *x = exports(c);
    struct row *row = block_row(j->report, b);
    row_count(j->report, row, rank);
    row_text(j->report, row, c->id);
    row_text(j->report, row, object_name(c->object));
    figure_cell(j, row, x->frequency);
    figure_cell(j, row, x->damaging);
    figure_cell(j, row, x->damage);
    figure_cell(j, row, x->risk);
    if (*criteria_word(j, SCOPE_HAZARD, 0))
        row_text(j->report, row, criteria_word(j, SCOPE_HAZARD, risk_of(j, c)));
}

void part_hazards(struct job *j, const struct hazards *h)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *b = report_table(r, "hazards", "Hazards by risk");
    block_column(r, b, "rank", "Rank", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "frequency", "Occurs", "1/a", STYLE_FREQUENCY)->keep = 1;
    block_column(r, b, "damaging", "Does damage", "1/a", STYLE_FREQUENCY)->keep = 4;
    block_column(r, b, "damage", "Mean damage", currency, STYLE_MONEY)->keep = 4;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    if (*criteria_word(j, SCOPE_HAZARD, 0))
        block_column(r, b, "criterion", "Criterion", "", STYLE_PLAIN)->keep = 2;
    size_t *order = hazards_by_risk(j, h);
    for (size_t i = 0; i < h->n; i++)
        hazard_row(j, b, i + 1, h->at[order[i]]);
}

void part_hazard_grid(struct job *j, const struct hazards *h)
{
    struct report *r = j->report;
    struct block *b =
        report_grid(r, "grid", "Hazards by frequency and damage", j->model->settings->currency);
    part_criteria_lines(j, b);
    size_t *order = hazards_by_risk(j, h);
    for (size_t i = 0; i < h->n; i++) {
        const struct compiled *c = h->at[order[i]];
        const struct hazard_exports *x = exports(c);
        struct grid_mark *m = grid_add_mark(
            r, b, arena_printf(j->arena, "%zu", i + 1),
            arena_printf(j->arena, "%s %s", c->id, object_name(c->object)),
            figure_value(j->figures, x->damaging), figure_value(j->figures, x->damage));
        m->frequency_figure = figure_name(j->figures, j->arena, x->damaging);
        m->damage_figure = figure_name(j->figures, j->arena, x->damage);
    }
}

/* --- notes --- */

void part_not_computed(struct job *j)
{
    struct report *r = j->report;
    if (j->not_computed.n == 0)
        return;
    struct block *b = report_table(r, "not-computed", "LEFT OUT: what cannot be computed");
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "why", "Why", "", STYLE_PLAIN);
    for (size_t i = 0; i < j->not_computed.n; i++) {
        struct row *row = block_row(r, b);
        row_text(r, row, j->not_computed.at[i].id);
        row_text(r, row, j->not_computed.at[i].why);
    }
}

void part_unused(struct job *j)
{
    struct unused u = {0};
    struct text t;
    figures_unused(j->arena, j->model, &u);
    if (u.n == 0)
        return;
    text_init(&t, j->arena);
    for (size_t i = 0; i < u.n; i++)
        text_printf(&t, "%s%s", i ? "; " : "", u.at[i]);
    report_note(
        j->report, "not-used",
        "Stored, but not used in the figures of this version: %s. Where one of these would matter, "
        "the figures here leave it out.",
        text_str(&t));
}

/* How the means came about, and the hazards whose means were sampled. */
void part_linearity(struct job *j, const struct hazards *h)
{
    struct text sampled;
    bool any = false;
    text_init(&sampled, j->arena);
    for (size_t i = 0; i < h->n; i++) {
        figure_id id = exports(h->at[i])->risk;
        enum mean_method method = figure_method(j->figures, id);
        any = any || method != MEAN_EXACT;
        if (method == MEAN_SAMPLE)
            text_printf(&sampled, "%s%s (\xc2\xb1 %s)", sampled.n ? ", " : "", h->at[i]->id,
                        money_rate(j, figure_error(j->figures, id)));
    }
    report_note(j->report, "means",
                "Every figure is the mean over what is unknown and what varies from one occurrence "
                "to the next.%s%s%s%s",
                any ? " Where an unknown enters more than once, such as the failure rate of a type "
                      "that several elements share, or in a curve, the mean is integrated; it is "
                      "not the value at the means, which `explain` shows beside it."
                    : " Each unknown enters each risk once, so that it is the value at the means, "
                      "exactly.",
                sampled.n ? " By a sample with the standard error given: " : "",
                sampled.n ? text_str(&sampled) : "", sampled.n ? "." : "");
}

void part_cautions(struct job *j)
{
    report_note(
        j->report, "cautions",
        "Cautions: these are statistical estimates from the data named, no prediction of single "
        "events, and no substitute for protection coordination, arc-flash and earthing studies. "
        "Where people may come to harm, local codes and the judgement of licensed engineers come "
        "first.");
}
