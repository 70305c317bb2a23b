/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A decision in several stages. */
#include "decide/branching.h"

#include "work/work.h"

void part_branching(struct job *j, struct weighing *w)
{
    struct report *r = j->report;
    struct branching *b = w->branching;
    weigh_rank(j->figures, w);
    part_alternatives(j, w);
    struct block *t = report_table(r, "points", "Points");
    block_column(r, t, "path", "Path", "", STYLE_PLAIN);
    block_column(r, t, "steps", "Steps", "", STYLE_PLAIN);
    block_column(r, t, "p", "p", "", STYLE_PROBABILITY);
    block_column(r, t, "value", "Value", "EUR", STYLE_MONEY);
    block_column(r, t, "figure", "Figure", "EUR", STYLE_MONEY);
    block_column(r, t, "reach", "Reach", "", STYLE_PROBABILITY);
    block_column(r, t, "reach-figure", "Reach figure", "", STYLE_PROBABILITY);
    for (size_t i = 0; i < b->points.n; i++)
        for (size_t k = 0; k < b->points.at[i].n; k++) {
            const struct way *x = &b->points.at[i].branches[k];
            struct row *row = block_row(r, t);
            row_text(r, row, x->path);
            row_text(r, row, x->steps);
            row_number(r, row, x->probability, NULL);
            row_number(r, row, x->value, NULL);
            figure_cell(j, row, x->value_figure);
            row_number(r, row, x->reach, NULL);
            figure_cell(j, row, x->reach_figure);
        }
    for (size_t i = 0; i < b->surveys.n; i++) {
        struct survey_worth *s = &b->surveys.at[i];
        report_note(r, "s", "%s price %s worth %s", s->of->name,
                    money_text(j->arena, figure_value(j->figures, s->price), "EUR"),
                    money_text(j->arena, figure_value(j->figures, s->worth), "EUR"));
    }
}
