/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a decision rests on: its inputs by how much they move it, each with its source; the sources;
 * and the derivation of one such movement. */
#include "decide/lean.h"

#include <math.h>

#include "work/work.h"

enum { MOST_ROWS = 15 };

static const struct source *source_of(const struct job *j, const char *id)
{
    return model_get(j->model, KIND_SOURCE, id);
}

static const struct object *source_object(const struct job *j, const char *id)
{
    return source_of(j, id) ? model_find(j->model, id) : NULL;
}

/* --- the table --- */

static void lean_row(struct job *j, struct block *b, const struct lean *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    const struct figure *g = figure_at(j->figures, x->input);
    const char *name = figure_name(j->figures, j->arena, x->input);
    double shown;
    const char *unit = figure_display(j, x->input, &shown);
    row_text(r, row, name);
    row_text(r, row, figure_subject(j, x->input));
    row_number(r, row, shown, name);
    row_text(r, row, unit);
    row_text(r, row, g->text ? g->text : "");
    row_text(r, row, figure_source(j, x->input));
    row_number(r, row, x->one_percent, x->name);
}

static void lean_table(struct job *j, const struct leans *all)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "rests-on", "The inputs that move it most");
    block_column(r, b, "input", "Input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "now", "Mean", "", STYLE_PLAIN);
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    block_column(r, b, "stated", "As stated", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "source", "Source", "", STYLE_PLAIN);
    block_column(r, b, "one-percent", "1 % more adds", j->model->settings->currency, STYLE_MONEY);
    for (size_t i = 0; i < all->n && i < MOST_ROWS; i++)
        lean_row(j, b, &all->at[i]);
}

static void lean_note(struct job *j, const struct leans *all)
{
    size_t rest = all->n > MOST_ROWS ? all->n - MOST_ROWS : 0;
    report_note(
        j->report, "rests-on-more",
        "1 %% more adds: what one per cent more of the input, alone, adds to the net present "
        "value of %s, at the means of what is unknown.%s",
        all->at[0].of->name,
        rest ? arena_printf(j->arena, " %zu more inputs move it by at most %s each.", rest,
                            money_text(j->arena, fabs(all->at[MOST_ROWS].one_percent),
                                       j->model->settings->currency))
             : "");
}

/* --- sources --- */

struct used_sources {
    struct strmap ids;
    bool any_without;
};

static void find_sources(struct job *j, const struct leans *all, struct used_sources *used)
{
    for (size_t i = 0; i < all->n; i++) {
        const char *id = figure_source(j, all->at[i].input);
        if (source_of(j, id))
            strmap_set(j->arena, &used->ids, id, (void *)id);
        else
            used->any_without = true;
    }
}

static void source_row(struct job *j, struct block *b, const struct object *o)
{
    const struct source *s = o->data;
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    char date[DATE_TEXT];
    row_text(r, row, o->id);
    row_text(r, row, s->title);
    row_text(r, row, s->by ? s->by : "");
    if (s->date == DAY_NONE)
        row_empty(r, row);
    else
        row_date(r, row, date_write(date, s->date));
    row_text(r, row, s->reference ? s->reference : "");
    if (node_get(o->node, "verified"))
        row_yes(r, row, s->verified);
    else
        row_empty(r, row);
}

static void without_note(struct job *j, const struct leans *all)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < all->n; i++)
        if (!source_of(j, figure_source(j, all->at[i].input)))
            text_printf(&t, "%s%s", t.n ? ", " : "",
                        figure_name(j->figures, j->arena, all->at[i].input));
    if (t.n)
        report_note(j->report, "without-source", "Without a source: %s.", text_str(&t));
}

static void sources_table(struct job *j, const struct leans *all)
{
    struct report *r = j->report;
    struct used_sources used = {0};
    const struct objects *sources = &j->model->of[KIND_SOURCE];
    find_sources(j, all, &used);
    if (used.ids.n) {
        struct block *b = report_table(r, "sources", "Its sources");
        block_column(r, b, "source", "Source", "", STYLE_PLAIN);
        block_column(r, b, "title", "Title", "", STYLE_PLAIN);
        block_column(r, b, "by", "By", "", STYLE_PLAIN)->keep = 1;
        block_column(r, b, "date", "Date", "", STYLE_PLAIN)->keep = 2;
        block_column(r, b, "reference", "Reference", "", STYLE_PLAIN)->keep = 1;
        block_column(r, b, "verified", "Verified", "", STYLE_PLAIN)->keep = 3;
        for (size_t i = 0; i < sources->n; i++)
            if (strmap_has(&used.ids, sources->at[i]->id))
                source_row(j, b, source_object(j, sources->at[i]->id));
    }
    if (used.any_without)
        without_note(j, all);
}

void part_rests_on(struct job *j, const struct weighing *w)
{
    struct leans all = {0};
    leans_find(j->figures, w, &all);
    if (all.n == 0)
        return;
    lean_table(j, &all);
    lean_note(j, &all);
    sources_table(j, &all);
}

/* --- the derivation --- */

void part_lean_head(struct job *j, const struct lean *x)
{
    const char *currency = j->model->settings->currency;
    report_note(
        j->report, "figure",
        "%s = %s: what one per cent more of %s, alone, adds to %s, by its derivative at the "
        "means of what is unknown. Damage counted: %s.",
        x->name, money_text(j->arena, x->one_percent, currency),
        figure_name(j->figures, j->arena, x->input), figure_name(j->figures, j->arena, x->of->net),
        perspective_words(j));
}

struct consumed lean_consumed(struct job *j, const struct lean *x)
{
    struct consumed c = {.name = x->name, .value = x->one_percent, .dim = dim_money};
    c.words = money_text(j->arena, x->one_percent, j->model->settings->currency);
    c.formula = arena_printf(
        j->arena, "1 %% * %s * slope(%s; %s)", figure_name(j->figures, j->arena, x->input),
        figure_name(j->figures, j->arena, x->of->net), figure_name(j->figures, j->arena, x->input));
    *array_push(j->arena, &c.inputs) = x->input;
    *array_push(j->arena, &c.inputs) = x->of->net;
    return c;
}
