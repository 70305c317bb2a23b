/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Exponential utility of a decision that states a risk tolerance: certainty equivalents of its
 * alternatives, which is best by them, and where that turns. Owns nothing. */
#include "decide/utility.h"

#include <string.h>

#include "work/loss.h"

/* Alternatives among which turns are looked for. */
enum { MOST_FOR_TURNS = 16 };
static const char name_word[] = ".certainty-equivalent[";

static const char *money(struct job *j, double x)
{
    return money_text(j->arena, x, j->model->settings->currency);
}

/* --- what is found --- */

struct equivalents {
    struct known_loss *loss;
    const struct weighing *w;
    double tolerance;
    size_t n;
    struct utility *of; /* by alternative */
    double *costs;
};

static double cost_of(struct job *j, const struct alternative *x)
{
    return x->present_cost == FIGURE_NONE ? 0 : figure_value(j->figures, x->present_cost);
}

static ohmen_status find(struct job *j, const struct weighing *w, struct equivalents *out,
                         ohmen_error *e)
{
    struct equivalents x = {.w = w, .tolerance = utility_tolerance(w), .n = w->alternatives.n};
    x.loss = loss_of_decision(j, w);
    if (x.loss->why)
        return error_set(e, OHMEN_COMPUTE, "%s", x.loss->why);
    x.of = NEW_ARRAY(j->arena, x.n, struct utility);
    x.costs = NEW_ARRAY(j->arena, x.n, double);
    for (size_t k = 0; k < x.n; k++) {
        ohmen_status status =
            utility_find(x.loss->world, j->arena, &x.loss->cases[k], x.tolerance, &x.of[k], e);
        if (status != OHMEN_OK)
            return status;
        x.of[k].cost = x.costs[k] = cost_of(j, &w->alternatives.at[k]);
    }
    *out = x;
    return OHMEN_OK;
}

static double together(const struct equivalents *x, size_t k)
{
    return x->of[k].damage + x->of[k].cost;
}

/* The least; of equals the first. */
static size_t best_of(const struct equivalents *x)
{
    size_t best = 0;
    for (size_t k = 1; k < x->n; k++)
        if (together(x, k) < together(x, best))
            best = k;
    return best;
}

static const char *name_of(struct job *j, const struct weighing *w, const struct alternative *x)
{
    return arena_printf(j->arena, "%s%s%s]", w->id, name_word, x->name);
}

/* --- the part --- */

static const char *turns_words(struct job *j, const struct equivalents *x)
{
    struct utility_turn t;
    struct text words;
    if (x->n < 2 || x->n > MOST_FOR_TURNS)
        return "";
    if (loss_result_of(j, x->loss, 0)->is_drawn)
        return " At which risk tolerance that would change is not looked for, since some damage is "
               "drawn.";
    if (utility_turns(x->loss->world, j->arena, x->n, x->loss->cases, x->costs, x->tolerance, &t,
                      NULL) != OHMEN_OK)
        return "";
    text_init(&words, j->arena);
    if (t.below > 0)
        text_printf(&words, " Below a risk tolerance of %s it would be %s.", money(j, t.below),
                    alternative_noun(&x->w->alternatives.at[t.below_other]));
    if (t.above > 0 && t.above_other < x->n)
        text_printf(&words, " Above %s it would be %s.", money(j, t.above),
                    alternative_noun(&x->w->alternatives.at[t.above_other]));
    if (t.below == 0 && t.above == 0)
        text_printf(&words,
                    " No risk tolerance from a thousandth of that to a thousand times as much "
                    "would change it.");
    if (t.least > 0)
        text_printf(&words, " Below %s there is no certainty equivalent.", money(j, t.least));
    return text_str(&words);
}

static void table(struct job *j, const struct equivalents *x)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    struct block *b =
        report_table(r, "certainty-equivalents",
                     arena_printf(j->arena, "Certainty equivalents, with a risk tolerance of %s",
                                  money(j, x->tolerance)));
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "mean", "Mean damage", currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "damage", "As bad as", currency, STYLE_MONEY);
    block_column(r, b, "cost", "Cost", currency, STYLE_MONEY)->keep = 1;
    block_column(r, b, "together", "Together", currency, STYLE_MONEY);
    block_column(r, b, "error", "Standard error", currency, STYLE_MONEY)->data = true;
    for (size_t i = 0; i < x->n; i++) {
        size_t k = x->w->order[i];
        const struct alternative *of = &x->w->alternatives.at[k];
        struct row *row = block_row(r, b);
        row_text(r, row, alternative_words(of));
        figure_cell(j, row, of->present_damage);
        row_number(r, row, x->of[k].damage, NULL);
        row_number(r, row, x->of[k].cost, NULL);
        row_number(r, row, together(x, k), name_of(j, x->w, of));
        row_number(r, row, x->of[k].error, NULL);
    }
}

void part_utility(struct job *j, const struct weighing *w)
{
    struct equivalents x;
    ohmen_error why = OHMEN_ERROR_INIT;
    if (utility_tolerance(w) == 0)
        return;
    if (find(j, w, &x, &why) != OHMEN_OK) {
        report_note(j->report, "utility-sentence", "The risk tolerance is not used: %s.", why.text);
        return;
    }
    size_t best = best_of(&x);
    report_note(j->report, "utility-sentence",
                "To who has a risk tolerance of %s, %s is best: its damage and cost together are "
                "as bad as %s for certain.%s",
                money(j, x.tolerance), alternative_noun(&w->alternatives.at[best]),
                money(j, together(&x, best)), turns_words(j, &x));
    table(j, &x);
    report_note(j->report, "utility-words",
                "As bad as: the certain present value that is as bad as the damage, by "
                "exponential utility; damage is discounted here. The ranking of the decision is "
                "by means and stays as it is.");
}

/* --- the derivation --- */

bool utility_is_named(const char *name)
{
    const char *point = strchr(name, '.');
    return point && strncmp(point, name_word, strlen(name_word)) == 0;
}

static ohmen_status find_ranked(struct job *j, const char *name, struct equivalents *x,
                                ohmen_error *e)
{
    struct weighing *w;
    const char *id = arena_strn(j->arena, name, (size_t)(strchr(name, '.') - name));
    ohmen_status status = weigh_ranked(j->figures, id, &w, e);
    if (status == OHMEN_OK && utility_tolerance(w) == 0)
        return error_set(e, OHMEN_UNKNOWN, "the decision \"%s\" states no risk-tolerance", id);
    return status == OHMEN_OK ? find(j, w, x, e) : status;
}

static struct consumed consumed_of(struct job *j, const struct equivalents *x, size_t k)
{
    const struct alternative *of = &x->w->alternatives.at[k];
    struct consumed c = {.name = name_of(j, x->w, of), .value = together(x, k), .dim = dim_money};
    c.words = money(j, c.value);
    c.formula =
        arena_printf(j->arena, "R log mean of exp(damage, discounted / R), R = %s, + present cost",
                     money(j, x->tolerance));
    *array_push(j->arena, &c.inputs) = of->present_damage;
    if (of->present_cost != FIGURE_NONE)
        *array_push(j->arena, &c.inputs) = of->present_cost;
    return c;
}

ohmen_status utility_value_find(struct job *j, const char *name, struct consumed *out,
                                ohmen_error *e)
{
    struct equivalents x;
    struct nearest near;
    ohmen_status status = find_ranked(j, name, &x, e);
    if (status != OHMEN_OK)
        return status;
    nearest_init(&near, name);
    for (size_t k = 0; k < x.n; k++) {
        struct consumed c = consumed_of(j, &x, k);
        nearest_offer(&near, c.name);
        if (!text_equal(c.name, name))
            continue;
        report_note(j->report, "figure",
                    "%s = %s: what damage (%s) and cost (%s) of %s are as bad as for certain, as "
                    "present values. The standard error is %s. Damage counted: %s.",
                    name, c.words, money(j, x.of[k].damage), money(j, x.of[k].cost),
                    alternative_noun(&x.w->alternatives.at[k]), money(j, x.of[k].error),
                    perspective_words(j));
        *out = c;
        return OHMEN_OK;
    }
    return error_set(e, OHMEN_UNKNOWN, "there is no figure \"%s\"%s", name,
                     nearest_hint(j->arena, &near));
}
