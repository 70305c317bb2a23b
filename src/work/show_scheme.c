/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The page of a scheme: how it is built, how it fails, what that hinges on, and where it is
 * used. */
#include "work/show.h"

enum {
    CUT_SETS = 10, /* that the page has room for */
    TREE_DEPTH = 8 /* levels of schemes within schemes that are written out */
};

/* --- its structure --- */

struct outline {
    struct job *job;
    struct block *block;
    size_t level, depth;   /* of lines; of schemes */
    struct strmap written; /* schemes whose structure stands there already */
};

/* One line of the tree, behind a bar for each level. */
static struct row *tree_row(struct outline *x, const char *words)
{
    struct text t;
    text_init(&t, x->job->arena);
    text_repeat(&t, "| ", x->level);
    text_add(&t, words);
    struct row *row = block_row(x->job->report, x->block);
    row_text(x->job->report, row, text_str(&t));
    return row;
}

static void write_structure(struct outline *x, const struct structure *s);

/* The mean probability that a part fails, where the figures have it. */
static void fails_cell(struct job *j, struct row *row, const char *id)
{
    const struct compiled *u;
    ohmen_error unused = OHMEN_ERROR_INIT;
    bool known = figures_compile(j->figures, j->base, id, &u, &unused) == OHMEN_OK &&
                 figures_evaluate(j->figures, &unused) == OHMEN_OK;
    if (known && u->main != FIGURE_NONE)
        show_number(j, row, u->main);
    else
        row_empty(j->report, row);
}

/* A scheme within the scheme, by its own structure. */
static void write_scheme(struct outline *x, const struct object *o)
{
    if (x->depth >= TREE_DEPTH || strmap_has(&x->written, o->id))
        return;
    strmap_set(x->job->arena, &x->written, o->id, x);
    x->level++;
    x->depth++;
    write_structure(x, ((const struct scheme *)o->data)->works);
    x->level--;
    x->depth--;
}

static void write_part(struct outline *x, const char *id)
{
    const struct object *o = model_find(x->job->model, id);
    struct row *row = tree_row(x, id);
    row_text(x->job->report, row, show_name(x->job, id));
    fails_cell(x->job, row, id);
    if (o && o->kind == KIND_SCHEME)
        write_scheme(x, o);
}

static const char *gate_words(struct job *j, const struct structure *s)
{
    if (s->op == STRUCTURE_ABSENT)
        return "nothing: it is absent";
    if (s->k == s->n)
        return "all of";
    return s->k == 1 ? "any of" : arena_printf(j->arena, "%u of these %zu", s->k, s->n);
}

static void write_structure(struct outline *x, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME) {
        write_part(x, s->name);
        return;
    }
    struct row *row = tree_row(x, gate_words(x->job, s));
    row_text(x->job->report, row, "");
    row_text(x->job->report, row, "");
    x->level++;
    for (size_t i = 0; i < s->n; i++)
        write_structure(x, s->of[i]);
    x->level--;
}

static void part_structure(struct job *j, const struct scheme *s)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "structure", "What it needs to operate");
    block_column(r, b, "needs", "Needs", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "fails", "Fails", "", STYLE_PROBABILITY);
    struct outline x = {.job = j, .block = b};
    write_structure(&x, s->works);
}

/* --- figures --- */

/* Figures that a scheme has besides, where the register says enough for them. */
static const struct further {
    const char *property, *words, *unit;
    enum number_style style;
} further[] = {
    {"unwanted", "Operates unwantedly", "1/a", STYLE_FREQUENCY},
    {"availability", "Available", "", STYLE_PROBABILITY},
    {"unavailability", "Not available", "", STYLE_PROBABILITY},
};
enum { FURTHER = sizeof further / sizeof *further };

/* FIGURE_NONE: there is no such figure. */
static void find_further(struct job *j, const char *id, figure_id found[FURTHER])
{
    for (size_t i = 0; i < FURTHER; i++) {
        ohmen_error unused = OHMEN_ERROR_INIT;
        const char *name = arena_printf(j->arena, "%s.%s", id, further[i].property);
        if (figures_find(j->figures, name, &found[i], &unused) != OHMEN_OK)
            found[i] = FIGURE_NONE;
    }
}

static void figure_pair(struct job *j, struct block *b, const char *words, figure_id id,
                        const char *unit, enum number_style style)
{
    struct row *row = block_pair(j->report, b, words);
    pair_number(j->report, row, figure_value(j->figures, id), unit, style,
                figure_name(j->figures, j->arena, id));
}

static ohmen_status part_scheme_figures(struct job *j, const struct compiled *c, ohmen_error *e)
{
    figure_id found[FURTHER];
    ohmen_error why = OHMEN_ERROR_INIT;
    find_further(j, c->id, found);
    ohmen_status status = figures_evaluate(j->figures, &why);
    if (status != OHMEN_OK)
        return job_leave_out(j, c->id, status, &why, e);
    struct block *b = report_pairs(j->report, "scheme-figures", "Figures");
    figure_pair(j, b, "Fails to operate on demand", c->main, "", STYLE_PROBABILITY);
    for (size_t i = 0; i < FURTHER; i++)
        if (found[i] != FIGURE_NONE)
            figure_pair(j, b, further[i].words, found[i], further[i].unit, further[i].style);
    return OHMEN_OK;
}

/* The figure of each window, as add_scheme made them: fails.2027. */
static void part_fails_years(struct job *j, const struct compiled *c)
{
    const struct scheme_exports *x = c->exports;
    if (!x->span.yearly)
        return;
    figure_id *yearly = NEW_ARRAY(j->arena, x->span.windows.n, figure_id);
    size_t n = 0;
    for (figure_id i = c->first; i < c->first + c->n; i++) {
        const struct figure *g = figure_at(j->figures, i);
        if (g->property == PROPERTY_FAILS && g->q1 && n < x->span.windows.n)
            yearly[n++] = i;
    }
    struct year_steps s = {.key = "fails-years",
                           .title = "Probability of failure over the years",
                           .head = "Fails",
                           .unit = "",
                           .style = STYLE_PROBABILITY,
                           .yearly = yearly,
                           .of_year = x->span.of_year,
                           .mean = c->main};
    part_years(j, &s);
}

static void part_scheme_hinges(struct job *j, const struct compiled *c)
{
    struct effects effects;
    struct cut_sets sets, singles;
    single_failures_of_scheme(j->figures, j->arena, c, &singles);
    if (singles.n)
        report_note(j->report, "single-failures", "One failure is enough to disable it: %s.",
                    single_words(j, &singles))
            ->title = "Weak points";
    importance_in_scheme(j->figures, j->arena, c, &effects);
    part_hinges(j, c, &effects, false);
    cut_sets_of_scheme(j->figures, j->arena, c, CUT_SETS, &sets);
    part_cut_sets(j, &sets, false);
}

/* --- where it is used --- */

struct use {
    struct job *job;
    struct block *block;
    const char *scheme;
};

static bool needs(struct use *u, const char *id, const char **through)
{
    struct strmap parts = {0};
    parts_below(u->job->arena, u->job->model, id, &parts);
    *through = text_equal(id, u->scheme) ? "" : id;
    return strmap_has(&parts, u->scheme);
}

static void use_row(struct use *u, const struct object *hazard, const char *row,
                    const char *through, const char *what)
{
    struct report *r = u->job->report;
    struct row *out = block_row(r, u->block);
    row_text(r, out, hazard->id);
    row_text(r, out, row);
    row_text(r, out, what);
    row_text(r, out, through);
}

static void uses_in_branch(struct use *u, const struct object *hazard, const char *row,
                           const struct branch *b)
{
    const char *through;
    if (b->if_works) {
        if (needs(u, b->if_works, &through))
            use_row(u, hazard, row, through, "decides how it ends");
        uses_in_branch(u, hazard, row, b->yes);
        uses_in_branch(u, hazard, row, b->no);
    }
    for (size_t i = 0; i < b->split.n; i++)
        uses_in_branch(u, hazard, row, ROW(struct branch, b->split, i));
}

static void uses_in_hazard(struct use *u, const struct object *o)
{
    const struct hazard *h = o->data;
    const char *through;
    for (size_t i = 0; i < h->response.n; i++) {
        const struct response_row *row = ROW(struct response_row, h->response, i);
        const char *what = row->breaker_failure_of
                               ? arena_printf(u->job->arena, "clears it if the breaker of %s fails",
                                              row->breaker_failure_of)
                               : "clears it";
        if (row->cleared_by && needs(u, row->cleared_by, &through))
            use_row(u, o, h->response.keys[i], through, what);
        uses_in_branch(u, o, h->response.keys[i], &row->then);
    }
}

static void part_uses(struct job *j, const char *scheme)
{
    struct report *r = j->report;
    struct hazard_list hazards = {0};
    hazards_that_use(j, scheme, &hazards);
    if (hazards.n == 0) {
        report_note(r, "not-used-by", "No hazard calls on it.");
        return;
    }
    struct block *b = report_table(r, "uses", "Where it is called on");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "row", "Row", "", STYLE_PLAIN);
    block_column(r, b, "what", "What it does there", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "through", "Through", "", STYLE_PLAIN)->keep = 2;
    struct use u = {j, b, scheme};
    for (size_t i = 0; i < hazards.n; i++)
        uses_in_hazard(&u, hazards.at[i]);
}

ohmen_status show_scheme(struct job *j, const struct object *o, const struct compiled *c,
                         ohmen_error *e)
{
    part_structure(j, o->data);
    if (c) {
        ohmen_status status = part_scheme_figures(j, c, e);
        if (status != OHMEN_OK)
            return status;
        part_fails_years(j, c);
        part_scheme_hinges(j, c);
    }
    part_uses(j, o->id);
    return OHMEN_OK;
}
