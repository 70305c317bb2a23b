/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A decision in several stages: what is best in a sentence or two, and the parts that stand only on
 * pages of such decisions. Words and tables around the figures of decide/branching.h; owns nothing.
 */
#include "work/branching.h"

#include <math.h>
#include <stdlib.h>

static double value_of(const struct job *j, figure_id id)
{
    return id == FIGURE_NONE ? 0 : figure_value(j->figures, id);
}

static const char *money(struct job *j, double x)
{
    return money_text(j->arena, x, j->model->settings->currency);
}

/* --- what is best --- */

/* What is less than this share of what it is a difference of is rounding. */
static const double ROUNDING = 1e-9;

/* Is the best alternative worth just as much as doing nothing? */
static bool is_worthless(const struct job *j, const struct weighing *w,
                         const struct alternative *best)
{
    double size = fabs(value_of(j, w->alternatives.at[0].total));
    return fabs(value_of(j, best->net)) <= ROUNDING * size;
}

/* The best of those that are not what the policy begins with: of a choice that comes again the
 * policy, and the branch that it takes first, are one. */
static const struct alternative *next_best(const struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[w->order[i]];
        double lead = value_of(j, best->net) - value_of(j, x->net);
        if (!w->branching->repeats || lead > ROUNDING * fabs(value_of(j, best->total)))
            return x;
    }
    return NULL;
}

static const char *lead_words(struct job *j, const struct weighing *w,
                              const struct alternative *best)
{
    const struct alternative *next = next_best(j, w);
    if (!next || next->n == 0)
        return "";
    return arena_printf(j->arena, ", and %s more than the next alternative, %s",
                        money(j, value_of(j, best->net) - value_of(j, next->net)), next->name);
}

const char *branching_plan(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    if (w->branching->repeats)
        return policy_sentence(j, w);
    return following_sentence(j, w->branching, first_way(w->branching, best));
}

const char *branching_sentence(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    const char *plan = branching_plan(j, w);
    if (best->n == 0 || is_worthless(j, w, best))
        return arena_printf(j->arena, "Do nothing: no branch is worth its money over %g years.",
                            w->horizon);
    return arena_printf(j->arena, "%s: worth %s more than doing nothing over %g years%s.%s%s",
                        best->name, money(j, value_of(j, best->net)), w->horizon,
                        lead_words(j, w, best), *plan ? " " : "", plan);
}

/* --- what readings are worth --- */

static const char *survey_sentence(struct job *j, const struct survey_worth *s)
{
    double worth = value_of(j, s->worth), price = value_of(j, s->price);
    const char *of =
        arena_printf(j->arena, "The reading of %s with which %s begins", s->test, s->of->name);
    if (worth <= 0)
        return arena_printf(j->arena,
                            "%s is worth nothing: even free of charge %s would not be better than "
                            "%s.",
                            of, s->of->name, alternative_noun(s->other));
    return arena_printf(j->arena, "%s is worth up to %s, and costs %s%s.", of, money(j, worth),
                        money(j, price),
                        price > worth ? ", which is more: it is not worth its price" : "");
}

/* The figures that the sentences round. */
static void survey_table(struct job *j, const struct branching *b)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *t = report_table(r, "worth-of-readings", "What readings are worth");
    block_column(r, t, "test", "Reading of", "", STYLE_PLAIN);
    block_column(r, t, "alternative", "With", "", STYLE_PLAIN);
    block_column(r, t, "worth", "Worth up to", currency, STYLE_MONEY);
    block_column(r, t, "price", "Costs", currency, STYLE_MONEY);
    block_column(r, t, "against", "Against", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; i < b->surveys.n; i++) {
        struct row *row = block_row(r, t);
        row_text(r, row, b->surveys.at[i].test);
        row_text(r, row, b->surveys.at[i].of->name);
        figure_cell(j, row, b->surveys.at[i].worth);
        figure_cell(j, row, b->surveys.at[i].price);
        row_text(r, row, alternative_words(b->surveys.at[i].other));
    }
}

static void part_surveys(struct job *j, const struct branching *b)
{
    for (size_t i = 0; i < b->surveys.n; i++)
        report_note(j->report, "survey", "%s", survey_sentence(j, &b->surveys.at[i]));
    if (b->surveys.n)
        survey_table(j, b);
}

/* --- options that it applies --- */

static int by_name(const void *p, const void *q)
{
    return text_compare(*(const char *const *)p, *(const char *const *)q);
}

void branching_options(struct arena *a, const struct branching *b, struct applied_options *out)
{
    struct strmap seen = {0};
    for (size_t i = 0; i < b->points.n; i++)
        for (size_t k = 0; k < b->points.at[i].n; k++) {
            const struct way *x = &b->points.at[i].branches[k];
            for (size_t m = 0; m < x->moves.n; m++) {
                const char *option = x->moves.at[m].what;
                if (x->moves.at[m].kind != MOVE_APPLY || strmap_has(&seen, option))
                    continue;
                strmap_set(a, &seen, option, NULL);
                *array_push(a, out) = option;
            }
        }
    if (out->n > 1)
        qsort(out->at, out->n, sizeof *out->at, by_name);
}

/* --- supply and people over the horizon --- */

static bool any_effect(const struct job *j, const struct weighing *w, bool people)
{
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        if (value_of(j, people ? x->present_fatalities : x->present_time) != 0)
            return true;
    }
    return false;
}

static void effects_row(struct job *j, struct block *b, const struct alternative *x, bool time,
                        bool people)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, alternative_words(x));
    if (time)
        row_number(r, row, value_of(j, x->present_time) * HOURS_PER_YEAR,
                   figure_name(j->figures, j->arena, x->present_time));
    if (people)
        figure_cell(j, row, x->present_fatalities);
}

void part_branching_effects(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    bool time = any_effect(j, w, false), people = any_effect(j, w, true);
    if (!time && !people)
        return;
    struct block *b = report_table(r, "effects", "What is avoided over the horizon, discounted");
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    if (time)
        block_column(r, b, "customer-time", "Customer hours without supply", "h", STYLE_PLAIN);
    if (people)
        block_column(r, b, "fatalities", "Deaths", "", STYLE_PLAIN);
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[w->order[i]].n)
            effects_row(j, b, &w->alternatives.at[w->order[i]], time, people);
    report_note(r, "effects-words", "Expected amounts of all years, discounted as money is.%s",
                people ? " Deaths stand beside the money and are not part of it. What a person "
                         "risks in a year under each alternative is not worked out for a decision "
                         "in several stages: `ohmen people` has it as it is now."
                       : "");
}

/* --- all that stands only here --- */

void part_branching(struct job *j, const struct weighing *w)
{
    part_surveys(j, w->branching);
    if (w->branching->repeats)
        part_policy(j, w);
    else
        part_tree(j, w);
    part_readings(j, w);
    part_profile(j, w);
}

void part_branching_sure(struct job *j, const struct weighing *w)
{
    report_note(j->report, "sure-plan",
                "%sAn alternative is its plan: behind the first choice the branches that are best "
                "today are taken, by what was read or seen.",
                w->branching->worlds.hidden.n > 1
                    ? "An unknown state is among what is possible: in each sample one of its "
                      "values is the case, whoever knows it. "
                    : "");
}

void part_branching_turn(struct job *j)
{
    report_note(j->report, "turn-plan",
                "All of this is with the branches as they are best today: behind the first choice "
                "they stay so while an input moves. So it tells when another alternative is "
                "better, not when a later choice would fall otherwise.");
}
