/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The risk profile of a decision in several stages: what each alternative may come to over chances
 * and readings, as a table and a curve, and which dominates which. Owns nothing. */
#include "decide/profile_of.h"

#include "work/branching.h"

enum { MOST_LINES = 5 /* of the curve */ };

static const double LOW = 0.05, MIDDLE = 0.5, HIGH = 0.95;

struct profiling {
    struct job *j;
    const struct weighing *w;
    const struct profile *of; /* by alternative */
};

static size_t index_of(const struct profiling *x, size_t rank)
{
    return x->w->order[rank];
}

/* The amount that it stays below with this probability; profiles hold worth. */
static double amount_at(const struct profile *p, double u)
{
    return 0 - profile_quantile(p, 1 - u);
}

static void profile_row(struct profiling *x, struct block *b, size_t i)
{
    struct report *r = x->j->report;
    const struct profile *p = &x->of[i];
    struct row *row = block_row(r, b);
    row_text(r, row, alternative_words(&x->w->alternatives.at[i]));
    row_count(r, row, p->n);
    row_number(r, row, 0 - p->value[p->n - 1], NULL);
    row_number(r, row, amount_at(p, LOW), NULL);
    row_number(r, row, amount_at(p, MIDDLE), NULL);
    row_number(r, row, amount_at(p, HIGH), NULL);
    row_number(r, row, 0 - p->value[0], NULL);
}

static void profile_table(struct profiling *x)
{
    struct report *r = x->j->report;
    const char *currency = x->j->model->settings->currency;
    struct block *b = report_table(r, "profile", "What each alternative may come to");
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "amounts", "Amounts", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "least", "Least", currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "p5", "5 %", currency, STYLE_MONEY)->keep = 3;
    block_column(r, b, "p50", "50 %", currency, STYLE_MONEY)->keep = 3;
    block_column(r, b, "p95", "95 %", currency, STYLE_MONEY);
    block_column(r, b, "worst", "Worst", currency, STYLE_MONEY);
    for (size_t i = 0; i < x->w->alternatives.n; i++)
        profile_row(x, b, index_of(x, i));
}

/* --- the curve --- */

/* The probability of more than an amount, over the amount: each holds up to the next. */
static void profile_line(struct profiling *x, struct block *b, size_t rank)
{
    char symbol[2] = {(char)('a' + rank), 0};
    const struct profile *p = &x->of[index_of(x, rank)];
    struct curve_line *line = curve_add_line(
        x->j->report, b, alternative_words(&x->w->alternatives.at[index_of(x, rank)]),
        arena_str(x->j->arena, symbol));
    line->steps = true;
    for (size_t k = p->n; k > 0; k--) {
        double amount = 0 - p->value[k - 1], more = 0;
        for (size_t i = 0; i + 1 < k; i++)
            more += p->probability[i];
        if (k == p->n)
            curve_add_point(x->j->report, line, amount, 1);
        curve_add_point(x->j->report, line, amount, more);
    }
}

static void profile_curve(struct profiling *x)
{
    const char *currency = x->j->model->settings->currency;
    struct block *b =
        report_curve(x->j->report, "profile-curve", "Probability of coming to more than an amount");
    curve_set_x(x->j->report, b, "amount", "Cost and expected damage", currency, STYLE_MONEY);
    curve_set_y(x->j->report, b, "probability", "Probability", "", STYLE_PROBABILITY);
    for (size_t i = 0; i < x->w->alternatives.n && i < MOST_LINES; i++)
        profile_line(x, b, i);
}

/* --- dominance --- */

/* "survey-first dominates renew-now (first order)": the best alternative and all others, and pairs
 * in which another one dominates the best. */
static void dominance_note(struct profiling *x)
{
    struct text first, second;
    size_t best = index_of(x, 0);
    text_init(&first, x->j->arena);
    text_init(&second, x->j->arena);
    for (size_t i = 1; i < x->w->alternatives.n; i++) {
        size_t other = index_of(x, i);
        enum profile_dominance d = profile_dominates(&x->of[best], &x->of[other]);
        struct text *t = d == PROFILE_FIRST ? &first : &second;
        if (d != PROFILE_NONE)
            text_printf(t, "%s%s", t->n ? ", " : "",
                        alternative_noun(&x->w->alternatives.at[other]));
    }
    const char *name = alternative_noun(&x->w->alternatives.at[best]);
    struct text t;
    text_init(&t, x->j->arena);
    if (first.n)
        text_printf(&t,
                    "By these amounts %s dominates %s for everybody who wants to lose less "
                    "(first order). ",
                    name, text_str(&first));
    if (second.n)
        text_printf(&t,
                    "By these amounts %s dominates %s for whoever is averse to risk (second "
                    "order). ",
                    name, text_str(&second));
    if (!first.n && !second.n)
        text_printf(&t,
                    "By these amounts %s dominates no other alternative: who dislikes risk may "
                    "choose otherwise. ",
                    name);
    report_note(x->j->report, "dominance", "%s", text_str(&t));
}

void part_profile(struct job *j, const struct weighing *w)
{
    struct profiling x = {j, w, branching_profiles(j->arena, w->branching)};
    bool varies = false, merged = false;
    for (size_t i = 0; i < w->alternatives.n; i++) {
        varies = varies || x.of[i].n > 1;
        merged = merged || x.of[i].is_merged;
    }
    if (!varies)
        return;
    profile_table(&x);
    profile_curve(&x);
    dominance_note(&x);
    report_note(j->report, "profile-words",
                "Present cost and expected damage, over what chances and readings may bring, the "
                "best branches being taken. How much the damage itself varies around what is "
                "expected is not in it: that is told with the bad ends.%s",
                merged ? " Amounts that lie close together are merged." : "");
}
