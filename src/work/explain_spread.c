/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a point of a figure's spread comes from: the sample in words, what else it says, and the
 * unknown inputs that the figure moves with. Owns nothing. */
#include <math.h>
#include <string.h>

#include "work/spreads.h"

enum { MOST_INPUTS = 10 };
/* Correlations below this size are no more than chance in a sample of usual size. */
static const double LEAST_CORRELATION = 0.1;

/* A figure's sample, with those of figures that were sampled together with it. */
struct sampled_figure {
    figure_id id;
    bool is_net;
    size_t n; /* figures of the sample */
    const figure_id *ids;
    struct sampling sampling;
    const double *values; /* of the figure */
    struct figure_spread spread;
    struct sampling_plan plan;
};

/* --- the sample --- */

/* A net present value is sampled with those of the other alternatives of its decision. */
static ohmen_status sample_net(struct job *j, struct weighing *w, struct sampled_figure *x,
                               ohmen_error *e)
{
    struct sure sure;
    weigh_rank(j->figures, w);
    ohmen_status status = sure_find(j->figures, j->arena, w, &j->plan, &sure, e);
    if (status != OHMEN_OK)
        return status;
    figure_id *ids = NEW_ARRAY(j->arena, w->alternatives.n, figure_id);
    x->is_net = true;
    x->n = sure.sample.n_roots;
    x->plan = sure.plan;
    x->sampling = sure.sample;
    x->ids = ids;
    for (size_t k = 1; k < w->alternatives.n; k++) {
        ids[sure.root[k]] = w->alternatives.at[k].net;
        if (w->alternatives.at[k].net != x->id)
            continue;
        x->values = sure.sample.values[sure.root[k]];
        x->spread = sure.of[k].net;
    }
    return OHMEN_OK;
}

static ohmen_status sample_other(struct job *j, struct sampled_figure *x, ohmen_error *e)
{
    struct spread_samples all;
    x->plan = j->plan; /* an interruption changes that of the job */
    ohmen_status status = spreads_sample(j, j->arena, x->id, &all, e);
    if (status != OHMEN_OK)
        return status;
    figure_id *ids = NEW_ARRAY(j->arena, all.n, figure_id);
    x->sampling = all.sampling;
    x->n = all.n;
    x->ids = ids;
    for (size_t k = 0; k < all.n; k++) {
        ids[k] = all.of[k].id;
        if (ids[k] != x->id)
            continue;
        x->values = all.sampling.values[k];
        x->spread = all.of[k].spread;
    }
    return OHMEN_OK;
}

/* The decision of which this is an alternative's net present value; NULL. */
static struct weighing *weighing_of(struct job *j, figure_id id)
{
    const struct figure *g = figure_at(j->figures, id);
    const char *owner = j->figures->units.at[g->unit]->id;
    struct weighing *w;
    if (g->property != PROPERTY_NET || !model_get(j->model, KIND_DECISION, owner) ||
        weigh_compile(j->figures, owner, &w, NULL) != OHMEN_OK)
        return NULL;
    for (size_t k = 1; k < w->alternatives.n; k++)
        if (w->alternatives.at[k].net == id)
            return w;
    return NULL;
}

static ohmen_status sample_figure(struct job *j, struct sampled_figure *x, ohmen_error *e)
{
    struct weighing *w = weighing_of(j, x->id);
    return w ? sample_net(j, w, x, e) : sample_other(j, x, e);
}

/* --- on the page --- */

static void note_certain(struct job *j, figure_id id)
{
    report_note(j->report, "spread",
                "%s is certain: nothing unknown is in it, or cancels. All points of its spread are "
                "its value.",
                figure_name(j->figures, j->arena, id));
}

static void note_point(struct job *j, const struct sampled_figure *x, enum spread_point at)
{
    const struct sampled *p = &x->spread.at[at];
    report_note(
        j->report, "spread",
        "%s = %s, with a standard error of %s: over all that is unknown %s is below it with "
        "a probability of %g %%. Its mean is %s.",
        spread_name(j->figures, j->arena, x->id, at), figure_words(j, x->id, p->value),
        figure_words(j, x->id, p->error), figure_name(j->figures, j->arena, x->id),
        100 * spread_probability[at], figure_words(j, x->id, figure_value(j->figures, x->id)));
}

static const char *together_words(struct job *j, const struct sampled_figure *x)
{
    struct text names;
    size_t n = 0;
    text_init(&names, j->arena);
    if (x->is_net)
        return " Sampled together with the other alternatives.";
    for (size_t k = 0; k < x->n; k++)
        if (x->ids[k] != x->id)
            text_printf(&names, "%s%s", n++ ? ", " : "",
                        figure_name(j->figures, j->arena, x->ids[k]));
    return n ? arena_printf(j->arena, " Sampled together with %s.", text_str(&names)) : "";
}

static void note_sample(struct job *j, const struct sampled_figure *x)
{
    struct sampled mean = x->spread.mean;
    report_note(j->report, "spread-sample",
                "%s. The mean of this sample is %s, with a standard error of %s. What differs from "
                "one occurrence to the next is averaged over in each sample. Standard errors are "
                "those between the sets.%s",
                sampling_words(j, &x->sampling), figure_words(j, x->id, mean.value),
                figure_words(j, x->id, mean.error), together_words(j, x));
}

static void points_row(struct job *j, struct block *b, figure_id id, const char *point,
                       const char *name, struct sampled x)
{
    struct row *row = block_row(j->report, b);
    char exact[32];
    row_text(j->report, row, point);
    row_text(j->report, row, name);
    row_text(j->report, row, figure_words(j, id, x.value));
    row_text(j->report, row, x.error > 0 ? figure_words(j, id, x.error) : "");
    row_text(j->report, row, text_double(exact, x.value));
    row_text(j->report, row, dim_unit(j->arena, &j->model->units, figure_dim(j->figures, id)));
}

static void points_table(struct job *j, const struct sampled_figure *x)
{
    static const char *const words[SPREAD_POINTS] = {"5 %", "median", "95 %"};
    struct report *r = j->report;
    struct block *b = report_table(r, "points", "The spread");
    const char *name = figure_name(j->figures, j->arena, x->id);
    struct sampled mean = {figure_value(j->figures, x->id), figure_error(j->figures, x->id)};
    block_column(r, b, "point", "Point", "", STYLE_PLAIN);
    block_column(r, b, "figure", "Figure", "", STYLE_PLAIN);
    block_column(r, b, "value", "Value", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "error", "Standard error", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "exact", "Exact", "", STYLE_PLAIN)->data = true;
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN)->data = true;
    points_row(j, b, x->id, "mean", name, mean);
    for (int k = 0; k < SPREAD_POINTS; k++)
        points_row(j, b, x->id, words[k],
                   spread_name(j->figures, j->arena, x->id, (enum spread_point)k), x->spread.at[k]);
}

/* --- what it moves with --- */

/* The first figure of an input; FIGURE_NONE. */
static figure_id figure_of_input(const struct figures *f, uint32_t input)
{
    for (node_id n = 0; n < graph_size(f->graph) && n < f->of_node.n; n++)
        if (graph_at(f->graph, n)->op == OP_INPUT && graph_at(f->graph, n)->extra == input &&
            f->of_node.at[n] != FIGURE_NONE)
            return f->of_node.at[n];
    return FIGURE_NONE;
}

static void input_row(struct job *j, struct block *b, const struct rank_input *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    figure_id id = figure_of_input(j->figures, x->input);
    bool named = id != FIGURE_NONE;
    const char *text = named ? figure_at(j->figures, id)->text : NULL;
    row_text(r, row, named ? figure_name(j->figures, j->arena, id) : x->name);
    row_text(r, row, named ? figure_subject(j, id) : "");
    row_text(r, row, text ? text : "");
    row_number(r, row, x->correlation, NULL);
}

static void inputs_table(struct job *j, const struct rank_inputs *all)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "moves-with", "The unknown inputs that it moves with");
    block_column(r, b, "input", "Input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "stated", "As stated", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "correlation", "Rank correlation", "", STYLE_RATIO);
    for (size_t i = 0; i < all->n && i < MOST_INPUTS; i++)
        input_row(j, b, &all->at[i]);
    report_note(r, "moves-with-note",
                "Spearman's rank correlation over the sample: 1 where the figure always rises with "
                "the input, -1 where it always falls; below %g it is not told from chance.",
                LEAST_CORRELATION);
}

static ohmen_status part_ranks(struct job *j, const struct sampled_figure *x, ohmen_error *e)
{
    struct rank_inputs all = {0};
    node_id node = figure_at(j->figures, x->id)->node;
    ohmen_status status = figure_ranks(j->figures, j->arena, &x->plan, x->n, x->ids, 1, &node,
                                       x->values, x->sampling.sets, LEAST_CORRELATION, &all, e);
    if (status == OHMEN_OK && all.n)
        inputs_table(j, &all);
    return status;
}

ohmen_status part_spread_point(struct job *j, figure_id id, enum spread_point at, ohmen_error *e)
{
    struct sampled_figure x = {.id = id};
    if (figure_is_certain(j->figures, id)) {
        note_certain(j, id);
        return OHMEN_OK;
    }
    ohmen_status status = sample_figure(j, &x, e);
    if (status != OHMEN_OK)
        return status;
    if (x.spread.is_certain) {
        note_certain(j, id);
        return OHMEN_OK;
    }
    note_point(j, &x, at);
    points_table(j, &x);
    note_sample(j, &x);
    return part_ranks(j, &x, e);
}

ohmen_status spread_prepare(struct job *j, const char *figure, ohmen_error *e)
{
    struct hazards all = {0};
    const char *id = arena_strn(j->arena, figure, strcspn(figure, "."));
    const struct object *o = model_find(j->model, id);
    if (!o || (o->kind != KIND_REGISTER && o->kind != KIND_GROUP))
        return OHMEN_OK;
    ohmen_status status = job_compile_hazards(j, &all, e);
    return status == OHMEN_OK ? spreads_compile(j, &all, e) : status;
}

/* "H.risk[p90]" is no figure, and no point either. */
ohmen_status spread_check(struct job *j, const char *name, ohmen_error *e)
{
    const char *figure, *from = strrchr(name, '[');
    enum spread_point at;
    if (!from || from == name || from[-1] == '@' || from[-1] == '+' || from[1] != 'p' ||
        from[2 + strspn(from + 2, "0123456789.")] != ']' || !text_equal(strchr(from, ']'), "]") ||
        spread_is_named(j->arena, name, &figure, &at))
        return OHMEN_OK;
    return error_set(e, OHMEN_UNKNOWN,
                     "there is no point \"%s\" of a figure: [p5], [p50] or [p95] goes behind its "
                     "name",
                     from);
}

void note_spread(struct job *j, figure_id id)
{
    uint16_t op = graph_at(j->figures->graph, figure_at(j->figures, id)->node)->op;
    if (op != OP_COURSE && op != OP_DIAGRAM && !figure_is_certain(j->figures, id))
        report_note(j->report, "spread",
                    "How sure it is, and what it moves with: ohmen explain \"%s\".",
                    spread_name(j->figures, j->arena, id, SPREAD_P95));
}
