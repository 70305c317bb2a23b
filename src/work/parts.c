/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Parts that several reports have: title block, hazards, notes, cautions. */
#include <math.h>
#include <stdlib.h>

#include "base/date.h"
#include "base/utf8.h"
#include "doc/json.h"
#include "figure/horizon.h"
#include "work/filter.h"

/* The share of a hazard's risk from which an outcome has a mark in the grid. */
static const double LEAST_SHARE_OF_RISK = 0.1;

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

/* "2 hazards", "1 hazard"; nothing for none. */
static void add_number(struct text *t, size_t n, const char *what)
{
    if (n)
        text_printf(t, "%s%zu %s%s", t->n ? ", " : "", n, what, n > 1 ? "s" : "");
}

static size_t count_left_out(const struct job *j, enum kind kind)
{
    size_t n = 0;
    const struct objects *all = &j->model->of[kind];
    for (size_t i = 0; i < j->not_computed.n; i++)
        for (size_t k = 0; k < all->n; k++)
            n += text_equal(all->at[k]->id, j->not_computed.at[i].id);
    return n;
}

/* What the figures leave out: who signs them must know. */
static const char *not_included(struct job *j)
{
    struct unused u = {0};
    struct text t;
    text_init(&t, j->arena);
    figures_unused(j->arena, j->model, &u);
    add_number(&t, count_left_out(j, KIND_HAZARD), "hazard");
    add_number(&t, count_left_out(j, KIND_DECISION), "decision");
    if (t.n)
        text_add(&t, " without figures");
    if (u.n)
        text_printf(&t,
                    "%sfields of %zu object%s that are stored, but not used (see the last chapter)",
                    t.n ? "; " : "", u.n, u.n > 1 ? "s" : "");
    return t.n ? text_str(&t) : "nothing";
}

void part_signatures(struct job *j)
{
    static const char *const roles[] = {"Prepared", "Checked", "Approved"};
    report_signatures(j->report, "signatures", NULL, roles, sizeof roles / sizeof *roles);
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
    pair(j, b, "Not included", not_included(j));
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
    if (id == FIGURE_NONE) {
        row_empty(j->report, row);
        return;
    }
    row_number(j->report, row, figure_value(j->figures, id), figure_name(j->figures, j->arena, id));
}

static struct row *hazard_row(struct job *j, struct block *b, size_t rank, const struct compiled *c)
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
    return row;
}

const struct filter_column hazard_columns[N_HAZARD_COLUMNS] = {
    [HAZARD_RANK] = {"rank", FIELD_COUNT, NUMBER},
    [HAZARD_FREQUENCY] = {"frequency", FIELD_QUANTITY, FREQUENCY},
    [HAZARD_DAMAGING] = {"damaging", FIELD_QUANTITY, FREQUENCY},
    [HAZARD_DAMAGE] = {"damage", FIELD_QUANTITY, MONEY},
    [HAZARD_RISK] = {"risk", FIELD_QUANTITY, MONEY_RATE},
    [HAZARD_CRITERION] = {"criterion", FIELD_TEXT, ANY},
};

static struct filter_value computed_number(double value, enum field_dim d)
{
    return (struct filter_value){
        .given = true, .number = true, .value = value, .dim = *field_dimension(d)};
}

static struct filter_item hazard_item(struct job *j, const struct compiled *c, size_t index)
{
    const struct hazard_exports *x = exports(c);
    const figure_id of[N_HAZARD_COLUMNS] = {[HAZARD_FREQUENCY] = x->frequency,
                                            [HAZARD_DAMAGING] = x->damaging,
                                            [HAZARD_DAMAGE] = x->damage,
                                            [HAZARD_RISK] = x->risk};
    struct filter_value *v = NEW_ARRAY(j->arena, N_HAZARD_COLUMNS, struct filter_value);
    v[HAZARD_RANK] = computed_number((double)(index + 1), NUMBER);
    for (size_t i = HAZARD_FREQUENCY; i <= HAZARD_RISK; i++)
        v[i] = computed_number(figure_value(j->figures, of[i]), hazard_columns[i].dim);
    const char *word = criteria_word(j, SCOPE_HAZARD, v[HAZARD_RISK].value);
    v[HAZARD_CRITERION] = (struct filter_value){.given = *word != 0, .text = word};
    return (struct filter_item){.object = c->object, .computed = v, .index = index};
}

static struct block *hazards_table(struct job *j, const char *title)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *b = report_table(r, "hazards", title);
    block_column(r, b, "rank", "Rank", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "frequency", "Occurs", "1/a", STYLE_FREQUENCY)->keep = 1;
    block_column(r, b, "damaging", "Does damage", "1/a", STYLE_FREQUENCY)->keep = 4;
    block_column(r, b, "damage", "Mean damage", currency, STYLE_MONEY)->keep = 4;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    if (*criteria_word(j, SCOPE_HAZARD, 0))
        block_column(r, b, "criterion", "Criterion", "", STYLE_PLAIN)->keep = 2;
    return b;
}

/* Fields that the query asks for, behind the figures. */
enum { KEEP_ASKED = 6, ASKED_COLUMNS = 100 };

static void asked_columns(struct job *j, struct block *b, const struct filter *f)
{
    const struct filter_field *x;
    for (size_t i = 0; f && (x = filter_asked(f, i)); i++) {
        const char *key = filter_column_key(j->arena, x->path);
        block_column(j->report, b, key, x->path, "", STYLE_PLAIN)->keep = KEEP_ASKED;
    }
}

static void asked_cells(struct job *j, struct row *row, const struct filter *f,
                        const struct filter_item *item)
{
    const struct filter_field *x;
    for (size_t i = 0; f && (x = filter_asked(f, i)); i++) {
        const char *text = filter_value_of(j, x, item).text;
        row_text(j->report, row, text ? brief(j->arena, text, ASKED_COLUMNS) : NULL);
    }
}

void part_hazards_where(struct job *j, const struct hazards *h, struct filter *f)
{
    struct filter_items items = {0};
    bool by_another = f && filter_orders(f);
    struct block *b = hazards_table(j, by_another ? "Hazards" : "Hazards by risk");
    asked_columns(j, b, f);
    size_t *order = hazards_by_risk(j, h);
    for (size_t i = 0; i < h->n; i++)
        *array_push(j->arena, &items) = hazard_item(j, h->at[order[i]], i);
    if (f)
        filter_apply(f, &items);
    for (size_t i = 0; i < items.n; i++) {
        size_t rank = items.at[i].index;
        asked_cells(j, hazard_row(j, b, rank + 1, h->at[order[rank]]), f, &items.at[i]);
    }
    if (f)
        part_filter(j, f);
}

void part_hazards(struct job *j, const struct hazards *h)
{
    part_hazards_where(j, h, NULL);
}

static struct grid_mark *add_mark(struct job *j, struct block *b, const char *label,
                                  const char *name, figure_id frequency, figure_id damage)
{
    struct grid_mark *m =
        grid_add_mark(j->report, b, label, name, figure_value(j->figures, frequency),
                      figure_value(j->figures, damage));
    m->frequency_figure = figure_name(j->figures, j->arena, frequency);
    m->damage_figure = figure_name(j->figures, j->arena, damage);
    return m;
}

/* The outcomes of a hazard that do damage, by falling risk; *n of them. */
static struct ranked *outcomes_by_risk(struct job *j, const struct hazard_exports *x, size_t *n)
{
    struct ranked *all = NEW_ARRAY(j->arena, x->n_outcomes, struct ranked);
    *n = 0;
    for (size_t k = 0; k < x->n_outcomes; k++) {
        double risk = figure_value(j->figures, x->risk_of[k]);
        if (risk > 0)
            all[(*n)++] = (struct ranked){risk, k};
    }
    if (*n > 1)
        qsort(all, *n, sizeof *all, by_falling_value);
    return all;
}

/* "burnt: Switchboard burnt out" of a hazard's outcome k. */
static const char *outcome_words(struct job *j, const struct compiled *c, size_t k)
{
    const struct hazard *h = c->object->data;
    const char *name = ROW(struct outcome, h->outcomes, k)->name;
    return name ? arena_printf(j->arena, "%s %s: %s", c->id, h->outcomes.keys[k], name)
                : arena_printf(j->arena, "%s %s", c->id, h->outcomes.keys[k]);
}

/* Closer than this share two points of a grid are one. */
static const double NEAR = 0.1;

static bool is_near(const struct job *j, figure_id a, figure_id b)
{
    double x = figure_value(j->figures, a), y = figure_value(j->figures, b);
    return fabs(x - y) <= NEAR * y;
}

/* Hollow marks, "3a", for the outcomes that hold enough of the risk of mark `whole`: its
 * mean damage hides that they are rare and ruinous. What lies where the hazard lies is the hazard
 * itself. */
static void add_outcomes(struct job *j, struct block *b, const struct compiled *c, int whole)
{
    const struct hazard_exports *x = exports(c);
    size_t n;
    struct ranked *by = outcomes_by_risk(j, x, &n);
    const char *rank = b->grid->marks.at[whole].label;
    double least = LEAST_SHARE_OF_RISK * risk_of(j, c);
    for (size_t i = 0; n > 1 && i < n && by[i].value >= least; i++) {
        size_t k = by[i].index;
        if (is_near(j, x->frequency_of[k], x->damaging) && is_near(j, x->damage_of[k], x->damage))
            continue;
        const char *label = arena_printf(j->arena, "%s%c", rank, (char)('a' + i));
        add_mark(j, b, label, outcome_words(j, c, k), x->frequency_of[k], x->damage_of[k])
            ->part_of = whole;
    }
}

void part_hazard_grid(struct job *j, const struct hazards *h)
{
    struct block *b = report_grid(j->report, "grid", "Hazards by frequency and damage",
                                  j->model->settings->currency);
    b->grid->wholes = "a hazard";
    b->grid->parts = "an outcome with at least 10 % of its hazard's risk";
    part_criteria_lines(j, b);
    size_t *order = hazards_by_risk(j, h);
    for (size_t i = 0; i < h->n; i++) {
        const struct compiled *c = h->at[order[i]];
        const struct hazard_exports *x = exports(c);
        int whole = (int)b->grid->marks.n;
        add_mark(j, b, arena_printf(j->arena, "%zu", i + 1),
                 arena_printf(j->arena, "%s %s", c->id, object_name(c->object)), x->damaging,
                 x->damage);
        add_outcomes(j, b, c, whole);
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
