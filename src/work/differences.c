/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Differences between versions of objects as rows of a table, field by field. */
#include "doc/patch.h"
#include "work/work.h"

/* Columns of a value in a table of differences. */
enum { BRIEF = 120 };

struct block *part_difference_table(struct job *j, const char *key, const char *title,
                                    const char *lead_key, const char *lead_head)
{
    struct report *r = j->report;
    struct block *b = report_table(r, key, title);
    block_column(r, b, lead_key, lead_head, "", STYLE_PLAIN);
    block_column(r, b, "field", "Field", "", STYLE_PLAIN);
    block_column(r, b, "before", "Before", "", STYLE_PLAIN);
    block_column(r, b, "after", "After", "", STYLE_PLAIN);
    return b;
}

static void difference_row(struct job *j, struct block *b, const char *lead, const char *field,
                           const struct node *before, const struct node *after)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, lead);
    row_text(j->report, row, field);
    const struct node *sides[] = {before, after};
    for (size_t i = 0; i < 2; i++)
        if (sides[i])
            row_text(j->report, row, node_says(j->arena, sides[i], BRIEF));
        else
            row_empty(j->report, row);
}

void part_differences(struct job *j, struct block *table, const char *lead,
                      const struct node *before, const struct node *after)
{
    struct differences d = {0};
    patch_differences(j->arena, before, after, &d);
    for (size_t i = 0; i < d.n; i++)
        difference_row(j, table, lead, d.at[i].path, d.at[i].before, d.at[i].after);
}
