/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A decision weighed: its alternatives in order of worth, what they do to each hazard,
 * and the grid with an arrow from today's point to each option's. */
#include <math.h>

#include "work/work.h"

const char *alternative_words(const struct alternative *x)
{
    return x->n == 0 ? "do nothing" : x->name;
}

const char *alternative_noun(const struct alternative *x)
{
    return x->n == 0 ? "doing nothing" : x->name;
}

static double net_of(const struct job *j, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? 0 : figure_value(j->figures, x->net);
}

const char *weighing_sentence(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    const char *currency = j->model->settings->currency;
    if (w->branching)
        return branching_sentence(j, w);
    if (best->n == 0)
        return arena_printf(j->arena, "Do nothing: no option is worth its money over %g years.",
                            w->horizon);
    const char *worth = money_text(j->arena, net_of(j, best), currency);
    const char *sentence =
        arena_printf(j->arena, "%s: worth %s more than doing nothing over %g years", best->name,
                     worth, w->horizon);
    const struct alternative *second =
        &w->alternatives.at[w->order[1]]; /* doing nothing at least */
    if (second->n == 0)
        return arena_printf(j->arena, "%s; no other option is worth its money.", sentence);
    const char *lead = money_text(j->arena, net_of(j, best) - net_of(j, second), currency);
    return arena_printf(j->arena, "%s, and %s more than the next alternative, %s.", sentence, lead,
                        second->name);
}

static void alternative_row(struct job *j, struct block *b, const struct alternative *x)
{
    struct row *row = block_row(j->report, b);
    row_count(j->report, row, x->rank);
    row_text(j->report, row, alternative_words(x));
    figure_cell(j, row, x->present_damage);
    figure_cell(j, row, x->present_cost);
    figure_cell(j, row, x->total);
    figure_cell(j, row, x->net);
    figure_cell(j, row, x->ratio);
}

void part_alternatives(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *b =
        report_table(r, "alternatives", "Alternatives, best first, as present values");
    block_column(r, b, "rank", "Rank", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "damage", "Damage", currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "cost", "Cost", currency, STYLE_MONEY)->keep = 3;
    block_column(r, b, "total", "Total", currency, STYLE_MONEY)->keep = 1;
    block_column(r, b, "net", "Net present value", currency, STYLE_MONEY);
    block_column(r, b, "ratio", "Benefit / cost", "", STYLE_RATIO)->keep = 1;
    for (size_t i = 0; i < w->alternatives.n; i++)
        alternative_row(j, b, &w->alternatives.at[w->order[i]]);
}

/* --- options --- */

static const char *day_words(struct job *j, day d, const char *otherwise)
{
    char date[DATE_TEXT];
    return d == DAY_NONE ? otherwise : arena_str(j->arena, date_write(date, d));
}

static void option_row(struct job *j, struct block *b, const struct object *o, const char *undated)
{
    const struct option *p = o->data;
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    figure_id id;
    row_text(r, row, o->id);
    row_text(r, row, p->name);
    static const char *const parts[] = {"invest", "running"};
    for (size_t i = 0; i < 2; i++) {
        const char *name = arena_printf(j->arena, "%s.%s", o->id, parts[i]);
        bool given = i ? p->running != NULL : p->invest != NULL;
        if (given && weigh_find(j->figures, name, &id, NULL) == OHMEN_OK)
            figure_cell(j, row, id);
        else
            row_empty(r, row);
    }
    row_text(r, row, day_words(j, p->in_service, undated));
    if (p->life) {
        double life = expr_constant(p->life->expr);
        row_number(r, row, life, NULL);
    } else {
        row_empty(r, row);
    }
}

void part_options(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "options", "Options");
    block_column(r, b, "option", "Option", "", STYLE_PLAIN);
    block_column(r, b, "name", "What would be done", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "invest", "Investment", j->model->settings->currency, STYLE_MONEY)->keep = 4;
    block_column(r, b, "running", "Running cost", unit_per_year(j), STYLE_MONEY)->keep = 2;
    block_column(r, b, "in-service", "In service", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "life", "Life", "a", STYLE_PLAIN)->keep = 1;
    struct applied_options all = {0};
    for (size_t i = 0; i < w->decision->options.n; i++)
        *array_push(j->arena, &all) = w->decision->options.at[i];
    if (w->branching)
        branching_options(j->arena, w->branching, &all);
    for (size_t i = 0; i < all.n; i++)
        option_row(j, b, model_find(j->model, all.at[i]), w->branching ? "as applied" : "start");
    if (all.n == 0 && w->branching)
        r->blocks.n--;
    else if (w->branching)
        report_note(r, "options-words",
                    "What is applied later is paid and comes into service that much later than its "
                    "dates say.");
}

/* --- hazards --- */

/* A row for each hazard and each single option that reaches it, or the best
 * alternative when that is a combination. */
static bool is_shown(const struct weighing *w, size_t alternative)
{
    const struct alternative *x = &w->alternatives.at[alternative];
    return x->n == 1 || (x->n > 1 && x->rank == 1);
}

static void hazard_row(struct job *j, struct block *b, const struct weighed_hazard *h, bool focus,
                       const struct alternative *x, const struct compiled *c)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, h->id);
    row_text(r, row, x ? x->name : "today");
    if (!c) {
        for (int i = 0; i < 3; i++)
            row_empty(r, row);
    } else {
        const struct hazard_exports *e = c->exports;
        figure_cell(j, row, e->damaging);
        figure_cell(j, row, e->damage);
        figure_cell(j, row, e->risk);
    }
    if (focus)
        row_text(r, row, h->in_focus ? "yes" : "no");
}

void part_weighed_hazards(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *b =
        report_table(r, "weighed-hazards",
                     w->branching ? "Hazards whose damage is counted, as they are now"
                                  : "What the options do to each hazard, once in service");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "with", "With", "", STYLE_PLAIN);
    block_column(r, b, "damaging", "Does damage", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "damage", "Mean damage", currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    bool focus = w->decision->focus.n > 0;
    if (focus)
        block_column(r, b, "in-focus", "In focus", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct weighed_hazard *h = &w->hazards.at[i];
        hazard_row(j, b, h, focus, NULL, h->now);
        for (size_t k = 1; k < w->alternatives.n; k++) {
            const struct alternative *x = &w->alternatives.at[k];
            if (!w->branching && is_shown(w, k) && x->hazards[i] != h->now)
                hazard_row(j, b, h, focus, x, x->hazards[i]);
        }
    }
}

/* --- what was left out --- */

static void left_out_note(struct job *j, const struct weighing *w)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < w->left_out.n; i++)
        text_printf(&t, "%s%s (%s)", i ? "; " : "", w->left_out.at[i].options,
                    w->left_out.at[i].why);
    if (t.n)
        report_note(j->report, "left-out", "Not possible, and so not weighed: %s.", text_str(&t));
    if (w->only_pairs)
        report_note(
            j->report, "only-pairs",
            "This decision has more than %d options: beside single ones only pairs were weighed.",
            WEIGH_ALL);
}

static void sentence(struct job *j, const char *key, const char *text)
{
    if (*text)
        report_note(j->report, key, "%s", text);
}

void part_weighing(struct job *j, struct weighing *w)
{
    weigh_rank(j->figures, w);
    sentence(j, "recommendation", weighing_sentence(j, w));
    sentence(j, "people", people_sentence(j, w));
    sentence(j, "people-further", further_sentence(j, w));
    sentence(j, "to-others", perspectives_sentence(j, w));
    sentence(j, "outside-focus", outside_focus_sentence(j, w));
    part_alternatives(j, w);
    if (w->branching)
        part_branching(j, w);
    part_sure(j, w);
    left_out_note(j, w);
    part_options(j, w);
    part_worth_by_perspective(j, w);
    part_together(j, w);
    part_customers_and_people(j, w);
    part_weighed_hazards(j, w);
}

/* --- the grid --- */

static int add_point(struct job *j, struct block *b, const char *label, const char *name,
                     const struct compiled *c, int from)
{
    const struct hazard_exports *x = c->exports;
    struct grid_mark *m =
        grid_add_mark(j->report, b, label, name, figure_value(j->figures, x->damaging),
                      figure_value(j->figures, x->damage));
    m->frequency_figure = figure_name(j->figures, j->arena, x->damaging);
    m->damage_figure = figure_name(j->figures, j->arena, x->damage);
    m->arrow_from = from;
    return (int)b->grid->marks.n - 1;
}

/* Marks that would lie less than this apart (in either direction) are not drawn twice. */
#define LEAST_MOVE 0.01

static bool moves(const struct job *j, const struct compiled *from, const struct compiled *to)
{
    const struct hazard_exports *p = from->exports, *q = to->exports;
    double f0 = figure_value(j->figures, p->damaging), f1 = figure_value(j->figures, q->damaging);
    double d0 = figure_value(j->figures, p->damage), d1 = figure_value(j->figures, q->damage);
    return fabs(f1 - f0) > LEAST_MOVE * f0 || fabs(d1 - d0) > LEAST_MOVE * d0;
}

static void unmoved_note(struct job *j, size_t n)
{
    if (n)
        report_note(
            j->report, "unmoved",
            "Not drawn: %zu point%s that an option moves by less than 1 %%; the table of hazards "
            "has them.",
            n, n == 1 ? "" : "s");
}

void part_weighing_grid(struct job *j, struct weighing *w)
{
    size_t unmoved = 0;
    if (w->branching) /* its alternatives have no one point */
        return;
    struct block *b = report_grid(j->report, "grid", "From today's point to each option's",
                                  j->model->settings->currency);
    weigh_rank(j->figures, w);
    part_criteria_lines(j, b);
    for (size_t i = 0; i < w->hazards.n; i++) {
        const struct weighed_hazard *h = &w->hazards.at[i];
        int today = -1;
        char letter = 'a';
        if (h->now)
            today = add_point(j, b, arena_printf(j->arena, "%zu", i + 1),
                              arena_printf(j->arena, "%s today", h->id), h->now, -1);
        for (size_t k = 1; k < w->alternatives.n; k++) {
            const struct alternative *x = &w->alternatives.at[k];
            if (!is_shown(w, k) || !x->hazards[i] || x->hazards[i] == h->now)
                continue;
            if (h->now && !moves(j, h->now, x->hazards[i])) {
                unmoved++;
                continue;
            }
            add_point(j, b, arena_printf(j->arena, "%zu%c", i + 1, letter),
                      arena_printf(j->arena, "%s with %s", h->id, x->name), x->hazards[i], today);
            letter = letter < 'z' ? (char)(letter + 1) : 'z';
        }
    }
    unmoved_note(j, unmoved);
}

void part_conventions(struct job *j)
{
    bool at_end = j->model->settings->yearly_amounts == YEARLY_END_OF_YEAR;
    report_note(
        j->report, "conventions",
        "Present values at %s; investments at the start of their year, damage and running cost %s "
        "of each year; damage counted: %s.",
        node_says(j->arena, node_get(model_find(j->model, REGISTER_ID)->node, "discount"), 40),
        at_end ? "at the end" : "in the middle", perspective_words(j));
}

/* --- the use case --- */

static ohmen_status run_weigh(struct job *j, void *ctx, ohmen_error *e)
{
    struct weighing *w = NULL;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = weigh_compile(j->figures, ctx, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, arena_printf(j->arena, "%s: %s", w->id, w->decision->question));
    part_weighing(j, w);
    part_information_briefly(j, w);
    part_turn(j, w);
    part_loss(j, w);
    part_weighing_grid(j, w);
    part_conventions(j);
    part_unused(j);
    part_cautions(j);
    return OHMEN_OK;
}

ohmen_status ohmen_weigh(ohmen_register *r, const ohmen_query *q, const char *decision,
                         ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_weigh, (void *)decision, out, e);
}
