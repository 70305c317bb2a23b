/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The derivation of a figure: formula by formula, down to inputs with their source. And of what is
 * worked out from figures and is none of the graph: values at which a decision turns, what it
 * leans on, swings, elasticities, how sure it is, and what more information is worth. */
#include "decide/interval.h"
#include "work/loss.h"
#include "work/spreads.h"

struct explaining {
    struct job *job;
    unsigned depth; /* 0: all */
    struct figure_ids todo;
    ARRAY(unsigned) levels;
};

static bool is_known(const struct explaining *x, figure_id id)
{
    for (size_t i = 0; i < x->todo.n; i++)
        if (x->todo.at[i] == id)
            return true;
    return false;
}

static void add(struct explaining *x, figure_id id, unsigned level)
{
    *array_push(x->job->arena, &x->todo) = id;
    *array_push(x->job->arena, &x->levels) = level;
}

/* Breadth first, each figure once, at its least level. */
static void collect(struct explaining *x)
{
    struct job *j = x->job;
    for (size_t i = 0; i < x->todo.n; i++) {
        struct figure_ids inputs = {0};
        if (x->depth && x->levels.at[i] >= x->depth)
            continue;
        unsigned level = x->levels.at[i] + 1;
        figure_inputs(j->figures, j->arena, x->todo.at[i], &inputs);
        for (size_t k = 0; k < inputs.n; k++)
            if (!is_known(x, inputs.at[k]))
                add(x, inputs.at[k], level);
    }
}

/* "NUREG-6928: Industry-average performance ..., table 5-1"; "none" for a leaf without. */
static const char *source_words(struct job *j, figure_id id)
{
    const char *source = figure_source(j, id);
    const struct source *s = model_get(j->model, KIND_SOURCE, source);
    if (!s)
        return source;
    return arena_printf(j->arena, "%s: %s%s%s", source, s->title, s->reference ? ", " : "",
                        s->reference ? s->reference : "");
}

static const char *shown_value(struct job *j, figure_id id)
{
    return figure_words(j, id, figure_value(j->figures, id));
}

static void explain_row(struct job *j, struct block *b, figure_id id, unsigned level)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_count(r, row, level);
    row_text(r, row, figure_name(j->figures, j->arena, id));
    row_text(r, row, shown_value(j, id));
    row_text(r, row, figure_formula(j->figures, j->arena, id));
    row_text(r, row, source_words(j, id));
    char exact[32];
    row_text(r, row, text_double(exact, figure_value(j->figures, id)));
    row_text(r, row, dim_unit(j->arena, &j->model->units, figure_dim(j->figures, id)));
}

static void consumed_row(struct job *j, struct block *b, const struct consumed *c)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    char exact[32];
    row_count(r, row, 1);
    row_text(r, row, c->name);
    row_text(r, row, c->words);
    row_text(r, row, c->formula);
    row_text(r, row, "");
    row_text(r, row, text_double(exact, c->value));
    row_text(r, row, dim_unit(j->arena, &j->model->units, c->dim));
}

static void explain_table(struct explaining *x, const struct consumed *first)
{
    struct report *r = x->job->report;
    struct block *b = report_table(r, "derivation", "Derivation");
    b->entries = true;
    block_column(r, b, "level", "Level", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "figure", "Figure", "", STYLE_PLAIN);
    block_column(r, b, "value", "Value", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "formula", "Formula", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "source", "Source", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "exact", "Exact", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN)->keep = 2;
    if (first)
        consumed_row(x->job, b, first);
    for (size_t i = 0; i < x->todo.n; i++)
        explain_row(x->job, b, x->todo.at[i], x->levels.at[i]);
}

/* Whose damage a figure counts; NULL where it counts none. */
static const char *damage_words(struct job *j, figure_id id)
{
    const struct figure *g = figure_at(j->figures, id);
    const char *who = NULL;
    switch (g->property) {
    case PROPERTY_CATEGORY: return arena_printf(j->arena, "the category %s", g->q1);
    case PROPERTY_BORNE: who = g->q1; break;
    case PROPERTY_NET:
    case PROPERTY_BENEFIT:
    case PROPERTY_AVOIDS: who = g->q2; break;
    case PROPERTY_INVEST:
    case PROPERTY_RUNNING:
    case PROPERTY_PRESENT_COST:
    case PROPERTY_PER_HOUR:
    case PROPERTY_FATALITY_WORTH: return NULL;
    default: break;
    }
    if (who)
        return arena_printf(j->arena, "what %s bears", who);
    return figure_dim(j->figures, id).e[DIM_MONEY] != 0 ? perspective_words(j) : NULL;
}

/* Harm to people is told in years too: ", 1 in 18700 a". */
static const char *once_in_words(struct job *j, figure_id id)
{
    enum property p = figure_at(j->figures, id)->property;
    double often = figure_value(j->figures, id);
    bool harm = p == PROPERTY_DEATH || p == PROPERTY_INJURY || p == PROPERTY_FATALITIES ||
                p == PROPERTY_AVOIDS_FATALITIES;
    char words[48];
    if (!harm || often <= 0 || often >= 1)
        return "";
    return arena_printf(j->arena, ", %s", return_period_text(words, often));
}

/* What the figure is, and whose damage it counts. */
static void figure_note(struct job *j, figure_id id)
{
    const char *damage = damage_words(j, id);
    report_note(j->report, "figure", "%s = %s%s: %s.%s", figure_name(j->figures, j->arena, id),
                shown_value(j, id), once_in_words(j, id),
                properties[figure_at(j->figures, id)->property].help,
                damage ? arena_printf(j->arena, " Damage counted: %s.", damage) : "");
}

/* Where the mean is not the value at the means: both, and how the mean came about. */
static void method_note(struct job *j, figure_id id)
{
    enum mean_method method = figure_method(j->figures, id);
    if (method == MEAN_EXACT)
        return;
    const char *at_means = figure_words(j, id, figure_at_means(j->figures, id));
    if (method == MEAN_QUADRATURE)
        report_note(j->report, "mean",
                    "The mean over what is unknown, by quadrature. At the means of what is unknown "
                    "it would be %s: something unknown enters more than once, or in a curve.",
                    at_means);
    else
        report_note(j->report, "mean",
                    "The mean over what is unknown, by a sample of %d points: its standard error "
                    "is %s. At the means of what is unknown it would be %s: something unknown "
                    "enters more than once, or in a curve.",
                    MEAN_SETS * MEAN_STRATA, figure_words(j, id, figure_error(j->figures, id)),
                    at_means);
}

struct explain_request {
    const char *figure;
    unsigned depth;
};

/* The derivation of what is worked out from figures. */
static void derive(struct job *j, const struct explain_request *q, const struct consumed *c)
{
    struct explaining x = {.job = j, .depth = q->depth};
    for (size_t i = 0; i < c->inputs.n && q->depth != 1; i++)
        add(&x, c->inputs.at[i], 2);
    collect(&x);
    explain_table(&x, c);
}

static ohmen_status explain_turn(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct turn turn;
    ohmen_status status = turn_find(j->figures, q->figure, &turn, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = turn_consumed(j, &turn);
    part_turn_head(j, &turn);
    derive(j, q, &c);
    part_turn_method(j, &turn);
    return OHMEN_OK;
}

static ohmen_status explain_lean(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct lean lean;
    ohmen_status status = lean_find(j->figures, q->figure, &lean, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = lean_consumed(j, &lean);
    part_lean_head(j, &lean);
    derive(j, q, &c);
    return OHMEN_OK;
}

static ohmen_status explain_swing(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct swing_value swing;
    ohmen_status status = swing_find(j->figures, q->figure, &swing, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = swing_consumed(j, &swing);
    part_swing_head(j, &swing);
    derive(j, q, &c);
    part_swing_method(j, &swing);
    return OHMEN_OK;
}

static ohmen_status explain_elasticity(struct job *j, const struct explain_request *q,
                                       ohmen_error *e)
{
    struct elasticity elasticity;
    ohmen_status status = elasticity_find(j->figures, q->figure, &elasticity, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = elasticity_consumed(j, &elasticity);
    part_elasticity_head(j, &elasticity);
    derive(j, q, &c);
    return OHMEN_OK;
}

static ohmen_status explain_sure(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct sure_value value;
    ohmen_status status = sure_value_find(j->figures, q->figure, &j->plan, &value, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = sure_consumed(j, &value);
    part_sure_head(j, &value);
    derive(j, q, &c);
    part_sure_method(j, &value);
    return OHMEN_OK;
}

static ohmen_status explain_loss(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct loss_value value;
    ohmen_status status = loss_value_find(j, q->figure, &value, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = loss_consumed(j, &value);
    part_loss_head(j, &value);
    derive(j, q, &c);
    part_loss_method(j, &value);
    return OHMEN_OK;
}

static ohmen_status explain_information(struct job *j, const struct explain_request *q,
                                        ohmen_error *e)
{
    struct information_value value;
    ohmen_status status = information_value_find(j->figures, q->figure, &j->plan, &value, e);
    if (status != OHMEN_OK)
        return status;
    struct consumed c = information_consumed(j, &value);
    part_information_head(j, &value);
    derive(j, q, &c);
    part_information_method(j, &value);
    return OHMEN_OK;
}

static ohmen_status explain_utility(struct job *j, const struct explain_request *q, ohmen_error *e)
{
    struct consumed c;
    ohmen_status status = utility_value_find(j, q->figure, &c, e);
    if (status == OHMEN_OK)
        derive(j, q, &c);
    return status;
}

/* What is worked out from figures and is none of the graph, by the form of its name. */
static const struct worked_out {
    bool (*is_named)(const char *name);
    ohmen_status (*explain)(struct job *j, const struct explain_request *q, ohmen_error *e);
} worked_out[] = {
    {turn_is_named, explain_turn},   {lean_is_named, explain_lean},
    {swing_is_named, explain_swing}, {elasticity_is_named, explain_elasticity},
    {sure_is_named, explain_sure},   {loss_is_named, explain_loss},
    {information_is_named, explain_information}, {utility_is_named, explain_utility},
};

static const struct worked_out *worked_out_named(const char *name)
{
    for (size_t i = 0; i < sizeof worked_out / sizeof *worked_out; i++)
        if (worked_out[i].is_named(name))
            return &worked_out[i];
    return NULL;
}

/* Compiled and evaluated. */
static ohmen_status find_figure(struct job *j, const char *name, figure_id *id, bool *over_cycles,
                                ohmen_error *e)
{
    ohmen_status status;
    *over_cycles = interval_is_named(name);
    if (*over_cycles)
        status = interval_find(j->figures, name, &j->figures, id, e);
    else
        status = weigh_find(j->figures, name, id, e);
    return status == OHMEN_OK ? figures_evaluate(j->figures, e) : status;
}

static ohmen_status run_explain(struct job *j, void *ctx, ohmen_error *e)
{
    const struct explain_request *q = ctx;
    figure_id id = FIGURE_NONE;
    ohmen_status status = job_load_figures(j, e);
    const struct worked_out *other = worked_out_named(q->figure);
    if (status == OHMEN_OK && other)
        return other->explain(j, q, e);
    const char *figure = q->figure;
    enum spread_point at;
    bool over_cycles, is_point = spread_is_named(j->arena, q->figure, &figure, &at);
    if (status == OHMEN_OK)
        status = spread_check(j, q->figure, e);
    if (status == OHMEN_OK && is_point)
        status = spread_prepare(j, figure, e);
    if (status == OHMEN_OK)
        status = loss_prepare(j, figure, e);
    if (status == OHMEN_OK)
        status = find_figure(j, figure, &id, &over_cycles, e);
    if (status == OHMEN_OK && is_point)
        status = part_spread_point(j, id, at, e);
    if (status != OHMEN_OK)
        return status;
    struct explaining x = {.job = j, .depth = q->depth};
    figure_note(j, id);
    if (over_cycles)
        report_note(
            j->report, "whole-cycles",
            "All figures here are averages over whole cycles of tests, whatever their variant, "
            "as `ohmen test-interval` takes them.");
    add(&x, id, 1);
    collect(&x);
    explain_table(&x, NULL);
    method_note(j, id);
    if (!is_point)
        note_spread(j, id);
    return OHMEN_OK;
}

ohmen_status ohmen_explain(ohmen_register *r, const ohmen_query *q, const char *figure,
                           unsigned depth, ohmen_report **out, ohmen_error *e)
{
    struct explain_request request = {figure, depth};
    return job_do(r, STORE_READ, q, run_explain, &request, out, e);
}
