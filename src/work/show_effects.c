/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a hazard does, on its page: damage by perspective and category, interruptions of supply,
 * harm to people. Owns nothing. */
#include "work/show.h"

static const struct consequence_exports *effects_of(struct job *j, const struct compiled *c)
{
    const struct compiled *part = NULL;
    figures_consequences(j->figures, c->variant, c->id, &part, NULL);
    return part ? part->exports : NULL;
}

static figure_id effect_mean(const struct consequence_exports *x, enum property p, const char *of)
{
    for (size_t i = 0; i < x->n; i++)
        if (x->effects[i].property == p && text_equal(x->effects[i].of, of))
            return x->effects[i].mean;
    return FIGURE_NONE;
}

/* --- damage --- */

static void part_accounts(struct job *j, const struct consequence_exports *x)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "accounts", "Risk by perspective and category");
    block_column(r, b, "of", "", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN);
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    for (size_t i = 0; i < x->n; i++) {
        const struct consequence *effect = &x->effects[i];
        bool perspective = effect->property == PROPERTY_BORNE;
        if (!perspective && effect->property != PROPERTY_CATEGORY)
            continue;
        struct row *row = block_row(r, b);
        row_text(r, row, perspective ? "perspective" : "category");
        row_text(r, row, effect->of);
        show_number(j, row, effect->mean);
    }
    if (b->rows.n == 0)
        r->blocks.n--;
}

/* --- supply --- */

static void part_interruptions(struct job *j, const struct consequence_exports *x)
{
    struct report *r = j->report;
    const struct {
        const char *name;
        figure_id id;
    } rows[] = {
        {"Customers interrupted, sustained", x->interruptions},
        {"Customers interrupted, momentary", x->momentary},
        {"Customer hours without supply", x->customer_time},
        {"Energy not supplied", x->not_supplied},
    };
    struct block *b = report_pairs(r, "interruptions", "Interruptions of supply");
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++) {
        double shown;
        const char *unit = figure_display(j, rows[i].id, &shown);
        unit = *unit ? arena_printf(j->arena, "%s/a", unit) : "per a";
        pair_number(r, block_pair(r, b, rows[i].name), shown, unit, STYLE_GROUPED,
                    figure_name(j->figures, j->arena, rows[i].id));
    }
}

/* --- people --- */

static const char *group_of(struct job *j, const char *of, const char **outcome)
{
    size_t n = 0;
    while (of[n] && of[n] != '.')
        n++;
    *outcome = of[n] ? of + n + 1 : "all";
    return arena_strn(j->arena, of, n);
}

static void harm_row(struct job *j, struct block *b, const struct consequence_exports *x,
                     const struct consequence *effect)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    const char *outcome, *group = group_of(j, effect->of, &outcome);
    bool whole = text_equal(group, effect->of);
    row_text(r, row, group);
    row_text(r, row, outcome);
    show_number(j, row, effect->mean);
    if (whole) {
        show_number(j, row, effect_mean(x, PROPERTY_INJURY, group));
        show_number(j, row, effect_mean(x, PROPERTY_FATALITIES, group));
        return;
    }
    row_empty(r, row);
    row_empty(r, row);
}

/* Of each group: what each outcome adds, then all together. */
static void part_harm(struct job *j, const struct consequence_exports *x)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "harm", "Harm to people");
    block_column(r, b, "group", "Group", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "individual-risk", "Individual risk", "1/a", STYLE_FREQUENCY);
    block_column(r, b, "injury-risk", "Injury risk", "1/a", STYLE_FREQUENCY)->keep = 1;
    block_column(r, b, "fatalities", "Fatalities", "1/a", STYLE_FREQUENCY)->keep = 2;
    for (size_t i = 0; i < x->n; i++)
        if (x->effects[i].property == PROPERTY_DEATH)
            harm_row(j, b, x, &x->effects[i]);
    if (b->rows.n == 0)
        r->blocks.n--;
}

void part_effects(struct job *j, const struct compiled *c)
{
    const struct consequence_exports *x = effects_of(j, c);
    const struct hazard *h = c->object->data;
    bool interrupts = false;
    for (size_t k = 0; k < h->outcomes.n; k++)
        interrupts |= ROW(struct outcome, h->outcomes, k)->interruptions.n > 0;
    if (!x)
        return;
    part_accounts(j, x);
    if (interrupts)
        part_interruptions(j, x);
    part_harm(j, x);
}
