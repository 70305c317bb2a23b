/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What would turn a decision: as a table, as a sentence, and the derivation of one value at which
 * it turns. */
#include <string.h>

#include "decide/turn.h"
#include "work/work.h"

enum { MOST_ROWS = 12 };

/* --- words --- */

/* "1 in 340 section a" for a rate per section and year that is seldom; "" for anything else. */
static const char *seldom(struct job *j, const char *unit, double x)
{
    char number[32];
    static const char per[] = "per ";
    if (!text_starts(unit, per) || strpbrk(unit, "0123456789") || !(x > 0 && x < 1))
        return "";
    number_text(number, 1 / x, STYLE_PLAIN);
    return arena_printf(j->arena, "1 in %s %s", number, unit + strlen(per));
}

static const char *words(struct job *j, const struct turn *t, double x)
{
    const char *period = seldom(j, figure_unit(j, t->input), figure_shown(j, t->input, x));
    return *period ? period : figure_words(j, t->input, x);
}

/* --- finding --- */

/* What turns the decision within reach of a report, found once a job; NULL and why. */
static const struct turns *near_turns(struct job *j, const struct weighing *w, ohmen_error *why)
{
    struct turns *known = strmap_get(&j->turns, w->id);
    if (known)
        return known;
    struct turns *t = NEW(j->arena, struct turns);
    if (turns_find(j->figures, w, TURN_NEAR, t, why) != OHMEN_OK)
        return NULL;
    strmap_set(j->arena, &j->turns, w->id, t);
    return t;
}

/* --- the table --- */

static void turn_row(struct job *j, struct block *b, const struct turn *t)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    const char *unit = figure_unit(j, t->input),
               *name = figure_name(j->figures, j->arena, t->input);
    double at = figure_shown(j, t->input, t->at);
    row_text(r, row, name);
    row_text(r, row, figure_subject(j, t->input));
    row_number(r, row, figure_shown(j, t->input, figure_value(j->figures, t->input)), name);
    row_number(r, row, at, t->name);
    row_text(r, row, unit);
    row_text(r, row, seldom(j, unit, at));
    row_number(r, row, t->factor, NULL);
    if (t->spread == TURN_CERTAIN)
        row_empty(r, row);
    else
        row_yes(r, row, t->spread == TURN_WITHIN);
    row_text(r, row, alternative_words(t->other));
}

static void turn_table(struct job *j, const struct turns *t)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "turn", "What would turn it");
    block_column(r, b, "input", "Input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "now", "Now", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "turns-at", "Turns at", "", STYLE_PLAIN);
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    block_column(r, b, "period", "That is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "factor", "Factor", "", STYLE_RATIO)->keep = 3;
    block_column(r, b, "within", "5 to 95 %", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "then", "Then better", "", STYLE_PLAIN);
    for (size_t i = 0; i < t->list.n && i < MOST_ROWS; i++)
        turn_row(j, b, &t->list.at[i]);
}

static void more_note(struct job *j, const struct turns *t)
{
    size_t n = t->list.n;
    if (n > MOST_ROWS)
        report_note(j->report, "turn-more",
                    "%zu more stated quantit%s, moved alone, would turn it within a factor of ten.",
                    n - MOST_ROWS, n - MOST_ROWS == 1 ? "y" : "ies");
    else
        report_note(j->report, "turn-more",
                    "No %sstated quantity, moved alone, turns it within a factor of ten.",
                    n ? "other " : "");
}

static void shift_note(struct job *j, const struct turns *t)
{
    if (t->shifted && t->list.n)
        report_note(
            j->report, "turn-shift",
            "Something unknown enters these present values more than once, or in a curve. What "
            "that adds to their difference is taken to stay as it is now while an input moves; so "
            "the values at which it turns are approximate.");
}

void part_turn(struct job *j, struct weighing *w)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    if (w->alternatives.n < 2)
        return;
    const struct turns *t = near_turns(j, w, &why);
    if (!t) {
        report_note(j->report, "turn-more", "What would turn it cannot be told: %s.", why.text);
        return;
    }
    if (t->list.n)
        turn_table(j, t);
    more_note(j, t);
    shift_note(j, t);
    if (w->branching)
        part_branching_turn(j);
}

const char *turn_sentence(struct job *j, const struct weighing *w)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    const struct turns *all = near_turns(j, w, &why);
    if (!all)
        return arena_printf(j->arena, "What would turn it cannot be told: %s.", why.text);
    if (all->list.n == 0)
        return "No stated quantity, moved alone, turns it within a factor of ten.";
    const struct turn *t = &all->list.at[0];
    return arena_printf(j->arena, "It would turn to %s if %s (%s) were %s %s; now %s.",
                        alternative_noun(t->other), figure_name(j->figures, j->arena, t->input),
                        figure_subject(j, t->input), turn_sides[t->side], words(j, t, t->at),
                        words(j, t, t->now));
}

/* --- the derivation --- */

static const char *net_words(struct job *j, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? money_text(j->arena, 0, j->model->settings->currency)
                                 : figure_name(j->figures, j->arena, x->net);
}

struct consumed turn_consumed(struct job *j, const struct turn *t)
{
    struct consumed c = {.name = t->name, .value = t->at, .dim = figure_dim(j->figures, t->input)};
    figure_id all[] = {t->input, t->best->net, t->other->net};
    c.words = figure_words(j, t->input, t->at);
    c.formula =
        arena_printf(j->arena, "turns(%s; %s; %s)", figure_name(j->figures, j->arena, t->input),
                     net_words(j, t->best), net_words(j, t->other));
    for (size_t i = 0; i < sizeof all / sizeof *all; i++)
        if (all[i] != FIGURE_NONE)
            *array_push(j->arena, &c.inputs) = all[i];
    return c;
}

void part_turn_head(struct job *j, const struct turn *t)
{
    report_note(j->report, "figure",
                "%s = %s: where %s is worth as much as %s, if %s alone is moved. Damage counted: "
                "%s.",
                t->name, words(j, t, t->at), alternative_noun(t->best), alternative_noun(t->other),
                figure_name(j->figures, j->arena, t->input), perspective_words(j));
}

/* What the means of the nets do to the value that was found. */
static const char *mean_words(struct job *j, const struct turn *t)
{
    const struct alternative *of[] = {t->best, t->other};
    bool exact = true;
    struct text all;
    text_init(&all, j->arena);
    for (size_t i = 0; i < 2; i++) {
        figure_id net = of[i]->net;
        exact = exact && (net == FIGURE_NONE || figure_method(j->figures, net) == MEAN_EXACT);
        if (net != FIGURE_NONE && figure_method(j->figures, net) == MEAN_SAMPLE)
            text_printf(&all, " The standard error of %s, which is sampled, is %s.",
                        net_words(j, of[i]), figure_words(j, net, figure_error(j->figures, net)));
    }
    if (!exact)
        text_add(&all, " What is unknown enters it more than once, or in a curve; what that adds "
                       "to it is taken to stay as it is now, so that the value is approximate.");
    return text_str(&all);
}

void part_turn_method(struct job *j, const struct turn *t)
{
    char low[32], high[32];
    const char *currency = j->model->settings->currency;
    report_note(
        j->report, "solved",
        "Solved for the difference of %s and %s. With the input at %s, as it is now, that is %s; "
        "at the value found it is %s. It changes its sign between %s and %s (in base units), "
        "which are less than one part in 1e10 apart. %s%s",
        net_words(j, t->best), net_words(j, t->other), words(j, t, t->now),
        money_text(j->arena, t->difference, currency), money_text(j->arena, t->there, currency),
        text_double(low, t->low), text_double(high, t->high),
        t->is_linear ? "The difference is a straight line in this input."
                     : "The difference may be curved in this input: the value is the nearest that "
                       "was found in steps of a factor of 1.78.",
        mean_words(j, t));
}
