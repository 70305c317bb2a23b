/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure the answer to a decision is: in a sentence, as a table of alternatives, by the inputs
 * that it moves with, and the derivation of one such number. A decision is sampled once a job. */
#include "decide/sure.h"

#include <math.h>
#include <stdlib.h>

#include "report/number.h"
#include "work/work.h"

enum { MOST_MOVES = 15, TEN = 10 };

/* What is kept of a decision: the sample, or why there is none. */
struct known_sure {
    const struct sure *sure;
    const char *why;
};

static const struct known_sure *sure_of(struct job *j, const struct weighing *w)
{
    struct known_sure *known = strmap_get(&j->sures, w->id);
    ohmen_error why = OHMEN_ERROR_INIT;
    if (known)
        return known;
    struct sure *x = NEW(j->arena, struct sure);
    known = NEW(j->arena, struct known_sure);
    if (sure_find(j->figures, j->arena, w, &j->plan, x, &why) == OHMEN_OK)
        known->sure = x;
    else
        known->why = arena_str(j->arena, why.text);
    strmap_set(j->arena, &j->sures, w->id, known);
    return known;
}

const struct sure *known_sure(struct job *j, const struct weighing *w)
{
    return w->alternatives.n < 2 ? NULL : sure_of(j, w)->sure;
}

/* --- words --- */

static size_t count_of(const struct sure *x)
{
    return x->sample.sets * x->sample.points;
}

const char *percent_words(struct job *j, double x)
{
    char number[32];
    return arena_printf(j->arena, "%s %%", number_text(number, x, STYLE_PERCENT));
}

static const char *money(struct job *j, double x)
{
    return money_text(j->arena, x, j->model->settings->currency);
}

double two_digits(double x)
{
    double unit = 1;
    if (!(x > 0))
        return x;
    int exponent = number_exponent(x) - 1;
    for (int i = 0; i < abs(exponent); i++)
        unit *= TEN;
    return exponent < 0 ? round(x * unit) / unit : round(x / unit) * unit;
}

static const struct sure_alternative *sure_at(const struct sure *x, const struct alternative *of)
{
    return &x->of[of - x->weighing->alternatives.at];
}

/* Is nothing unknown in any of them? */
static bool is_certain(const struct sure *x)
{
    for (size_t k = 1; k < x->weighing->alternatives.n; k++)
        if (!x->of[k].net.is_certain)
            return false;
    return true;
}

/* The one that is best in most samples; of equals the first in the ranking. */
static const struct alternative *most_often(const struct sure *x)
{
    const struct weighing *w = x->weighing;
    const struct alternative *most = x->best;
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *other = &w->alternatives.at[w->order[i]];
        if (sure_at(x, other)->best.value > sure_at(x, most)->best.value)
            most = other;
    }
    return most;
}

/* --- the sentence --- */

static const char *capital_noun(const struct alternative *x)
{
    return x->n == 0 ? "Doing nothing" : x->name;
}

static const char *most_often_words(struct job *j, const struct sure *x)
{
    const struct alternative *most = most_often(x);
    if (most == x->best)
        return "";
    return arena_printf(j->arena, " Most often %s is best, in %s; but not on average.",
                        alternative_noun(most), percent_words(j, sure_at(x, most)->best.value));
}

static const char *regret_words(struct job *j, const struct sure *x)
{
    const struct sure_alternative *best = sure_at(x, x->best);
    return arena_printf(
        j->arena,
        "Deciding for it now, before more is known, costs %s on average (standard error %s) "
        "against knowing everything.",
        money(j, best->regret.value), money(j, two_digits(best->regret.error)));
}

static const char *sentence_of(struct job *j, const struct sure *x)
{
    const struct sure_alternative *best = sure_at(x, x->best);
    const char *name = capital_noun(x->best);
    if (is_certain(x))
        return "Every input of this decision is stated as certain, so that nothing tells how sure "
               "the answer is.";
    if (best->best.value == 1)
        return arena_printf(j->arena,
                            "%s is the best alternative in all %zu samples of what is possible: in "
                            "none of them would knowing more have led to another choice.",
                            name, count_of(x));
    if (best->best.value == 0)
        return arena_printf(j->arena,
                            "%s is the best alternative on average, but in none of %zu samples of "
                            "what is possible.%s %s",
                            name, count_of(x), most_often_words(j, x), regret_words(j, x));
    return arena_printf(
        j->arena, "%s is the best alternative in %s of what is possible (standard error %s).%s %s",
        name, percent_words(j, best->best.value), percent_words(j, two_digits(best->best.error)),
        most_often_words(j, x), regret_words(j, x));
}

const char *sure_sentence(struct job *j, const struct weighing *w)
{
    if (w->alternatives.n < 2)
        return "";
    const struct known_sure *known = sure_of(j, w);
    if (!known->sure)
        return arena_printf(j->arena, "How sure the answer is cannot be told: %s.", known->why);
    return sentence_of(j, known->sure);
}

/* --- the table --- */

static const char *const point_keys[SPREAD_POINTS] = {"p5", "p50", "p95"};
static const char *const point_heads[SPREAD_POINTS] = {"5 %", "50 %", "95 %"};
static const unsigned point_keeps[SPREAD_POINTS] = {2, 1, 2};

static void error_column(struct report *r, struct block *b, const char *of, const char *unit,
                         enum number_style style)
{
    struct column *c =
        block_column(r, b, arena_printf(r->arena, "%s-error", of),
                     arena_printf(r->arena, "Standard error of %s", of), unit, style);
    c->data = true;
}

static void sure_columns(struct job *j, struct block *b)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "mean", "Mean worth", currency, STYLE_MONEY);
    for (int k = 0; k < SPREAD_POINTS; k++)
        block_column(r, b, point_keys[k], point_heads[k], currency, STYLE_MONEY)->keep =
            point_keeps[k];
    block_column(r, b, "best", "Is best", "%", STYLE_PERCENT)->keep = 5;
    block_column(r, b, "worth-it", "Worth it", "%", STYLE_PERCENT)->keep = 3;
    block_column(r, b, "regret", "Regret", currency, STYLE_MONEY)->keep = 4;
    for (int k = 0; k < SPREAD_POINTS; k++)
        error_column(r, b, point_keys[k], currency, STYLE_MONEY);
    error_column(r, b, "best", "%", STYLE_PERCENT);
    error_column(r, b, "worth-it", "%", STYLE_PERCENT);
    error_column(r, b, "regret", currency, STYLE_MONEY);
}

static void point_cell(struct job *j, struct row *row, const struct weighing *w,
                       const struct alternative *of, const struct sure_alternative *s,
                       enum spread_point k)
{
    enum sure_kind kind = (enum sure_kind)(SURE_P5 + k);
    row_number(j->report, row, s->net.at[k].value,
               of->n == 0 ? NULL : sure_name(j->arena, w, kind, of->name));
}

static void sure_row(struct job *j, struct block *b, const struct sure *x,
                     const struct alternative *of)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    const struct sure_alternative *s = sure_at(x, of);
    const struct weighing *w = x->weighing;
    row_text(r, row, alternative_words(of));
    if (of->net == FIGURE_NONE)
        row_number(r, row, 0, NULL);
    else
        figure_cell(j, row, of->net);
    for (int k = 0; k < SPREAD_POINTS; k++)
        point_cell(j, row, w, of, s, (enum spread_point)k);
    row_number(r, row, s->best.value, sure_name(j->arena, w, SURE_BEST, of->name));
    if (of->n == 0)
        row_empty(r, row);
    else
        row_number(r, row, s->worth_it.value, sure_name(j->arena, w, SURE_WORTH_IT, of->name));
    row_number(r, row, s->regret.value, sure_name(j->arena, w, SURE_REGRET, of->name));
    for (int k = 0; k < SPREAD_POINTS; k++)
        row_number(r, row, s->net.at[k].error, NULL);
    row_number(r, row, s->best.error, NULL);
    row_number(r, row, s->worth_it.error, NULL);
    row_number(r, row, s->regret.error, NULL);
}

static void sure_table(struct job *j, const struct sure *x)
{
    const struct weighing *w = x->weighing;
    struct block *b = report_table(j->report, "sure", "Worth over all that is unknown, and regret");
    sure_columns(j, b);
    for (size_t i = 0; i < w->alternatives.n; i++)
        sure_row(j, b, x, &w->alternatives.at[w->order[i]]);
}

/* The greatest standard error of each sort of number. */
struct greatest {
    double point, best, worth_it, regret;
};

static struct greatest greatest_of(const struct sure *x)
{
    struct greatest g = {0};
    for (size_t i = 0; i < x->weighing->alternatives.n; i++) {
        const struct sure_alternative *s = &x->of[i];
        for (int k = 0; k < SPREAD_POINTS; k++)
            g.point = fmax(g.point, s->net.at[k].error);
        g.best = fmax(g.best, s->best.error);
        g.worth_it = fmax(g.worth_it, s->worth_it.error);
        g.regret = fmax(g.regret, s->regret.error);
    }
    return g;
}

static void sure_notes(struct job *j, const struct sure *x)
{
    struct greatest g = greatest_of(x);
    report_note(j->report, "sure-words",
                "Possible is what the register states as unknown; what it states as certain, or "
                "leaves out, is not in it. Worth: the net present value, which is below what "
                "stands under 5, 50 and 95 %% with that probability. Is best, worth it: in how "
                "much of what is possible no other alternative is worth more, and it is worth more "
                "than doing nothing. Regret: what is lost on average by deciding for it now, "
                "against knowing everything.");
    report_note(
        j->report, "sure-errors",
        "Means are computed; all else here comes from %s. Standard errors are at most %s of "
        "the points, %s of being best, %s of being worth it, and %s of regret.",
        sampling_words(j, &x->sample), money(j, two_digits(g.point)),
        percent_words(j, two_digits(g.best)), percent_words(j, two_digits(g.worth_it)),
        money(j, two_digits(g.regret)));
}

void part_sure(struct job *j, const struct weighing *w)
{
    const char *sentence = sure_sentence(j, w);
    if (*sentence)
        report_note(j->report, "sure-sentence", "%s", sentence);
    part_sure_table(j, w);
}

void part_sure_table(struct job *j, const struct weighing *w)
{
    const struct known_sure *known = w->alternatives.n < 2 ? NULL : sure_of(j, w);
    if (!known || !known->sure || is_certain(known->sure))
        return;
    sure_table(j, known->sure);
    sure_notes(j, known->sure);
    if (w->branching)
        part_branching_sure(j, w);
}

/* --- what it moves with --- */

/* Of an input without a figure: what the object is called whose stream it is. */
static const char *subject_of_stream(struct job *j, const char *stream)
{
    size_t n = 0;
    while (stream[n] && stream[n] != '#' && stream[n] != '/')
        n++;
    const struct object *o = model_find(j->model, arena_strn(j->arena, stream, n));
    return o ? object_name(o) : "";
}

static void move_row(struct job *j, struct block *b, const struct sure *x,
                     const struct rank_input *m)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, m->name);
    row_text(j->report, row,
             m->figure == FIGURE_NONE ? subject_of_stream(j, m->name)
                                      : figure_subject(j, m->figure));
    row_number(j->report, row, m->correlation,
               sure_name(j->arena, x->weighing, SURE_MOVES, m->name));
}

static const char *lead_words(struct job *j, const struct sure *x)
{
    if (x->next->n == 0)
        return arena_printf(j->arena, "what %s is worth", x->best->name);
    return arena_printf(j->arena, "what %s is worth beyond %s", alternative_noun(x->best),
                        alternative_noun(x->next));
}

void part_sure_moves(struct job *j, const struct weighing *w)
{
    const struct known_sure *known = w->alternatives.n < 2 ? NULL : sure_of(j, w);
    if (!known || !known->sure || known->sure->moves.n == 0)
        return;
    const struct sure *x = known->sure;
    struct report *r = j->report;
    struct block *b = report_table(r, "moves", "What the choice moves with");
    block_column(r, b, "input", "Unknown input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "correlation", "Rank correlation", "", STYLE_RATIO);
    size_t n = x->moves.n < MOST_MOVES ? x->moves.n : MOST_MOVES;
    for (size_t i = 0; i < n; i++)
        move_row(j, b, x, &x->moves.at[i]);
    report_note(r, "moves-words",
                "Spearman's rank correlation, over the samples, of the input with %s: 1 where more "
                "of it always goes with more, -1 with less, 0 where they have nothing to do with "
                "each other. Correlations below 0.1 in size are left out.%s",
                lead_words(j, x),
                x->moves.n > n
                    ? arena_printf(j->arena, " %zu more are weaker than these.", x->moves.n - n)
                    : "");
}

/* --- the derivation --- */

static const struct alternative *alternative_named(const struct weighing *w, const char *name)
{
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (text_equal(w->alternatives.at[i].name, name))
            return &w->alternatives.at[i];
    return NULL;
}

static const char *net_words(struct job *j, const struct alternative *x)
{
    return x->net == FIGURE_NONE ? money(j, 0) : figure_name(j->figures, j->arena, x->net);
}

/* Is it a point of the net present value? */
static bool is_point(const struct sure_value *v)
{
    return v->kind >= SURE_P5 && v->kind <= SURE_P95;
}

static bool is_money(const struct sure_value *v)
{
    return v->kind == SURE_REGRET || is_point(v);
}

static const char *value_words(struct job *j, const struct sure_value *v, double x)
{
    if (v->kind == SURE_MOVES)
        return plain_text(j, x);
    return is_money(v) ? money(j, x) : percent_words(j, x);
}

/* "5 %" */
static const char *below_words(struct job *j, const struct sure_value *v)
{
    return percent_words(j, spread_probability[v->kind - SURE_P5]);
}

static const char *formula_of(struct job *j, const struct sure_value *v)
{
    const struct sure *x = v->sure;
    const struct alternative *of = alternative_named(v->weighing, v->of);
    const char *id = v->weighing->id;
    switch (v->kind) {
    case SURE_BEST:
        return arena_printf(j->arena,
                            "share of samples in which %s is the greatest net present "
                            "value of %s",
                            net_words(j, of), id);
    case SURE_WORTH_IT:
        return arena_printf(j->arena, "share of samples in which %s > %s", net_words(j, of),
                            money(j, 0));
    case SURE_REGRET:
        return arena_printf(j->arena,
                            "mean over samples of: the greatest net present value of %s "
                            "- %s",
                            id, net_words(j, of));
    case SURE_P5:
    case SURE_P50:
    case SURE_P95:
        return arena_printf(j->arena, "%s point over samples of: %s", below_words(j, v),
                            net_words(j, of));
    default:
        return arena_printf(j->arena, "rank correlation over samples of: %s; %s - %s", v->of,
                            net_words(j, x->best), net_words(j, x->next));
    }
}

static void add_net(struct job *j, struct consumed *c, const struct alternative *x)
{
    if (x->net != FIGURE_NONE)
        *array_push(j->arena, &c->inputs) = x->net;
}

struct consumed sure_consumed(struct job *j, const struct sure_value *v)
{
    const struct weighing *w = v->weighing;
    struct consumed c = {.name = v->name, .value = v->value.value};
    c.dim = is_money(v) ? dim_money : dim_number;
    c.words = value_words(j, v, v->value.value);
    c.formula = formula_of(j, v);
    if (v->kind == SURE_MOVES) {
        if (v->figure != FIGURE_NONE)
            *array_push(j->arena, &c.inputs) = v->figure;
        add_net(j, &c, v->sure->best);
        add_net(j, &c, v->sure->next);
    } else if (v->kind == SURE_WORTH_IT || is_point(v)) {
        add_net(j, &c, alternative_named(w, v->of));
    } else {
        for (size_t i = 0; i < w->alternatives.n; i++)
            add_net(j, &c, &w->alternatives.at[w->order[i]]);
    }
    return c;
}

static const char *meaning_of(struct job *j, const struct sure_value *v)
{
    const struct alternative *of = alternative_named(v->weighing, v->of);
    switch (v->kind) {
    case SURE_BEST:
        return arena_printf(j->arena,
                            "the probability that no other alternative is worth more "
                            "than %s",
                            alternative_noun(of));
    case SURE_WORTH_IT:
        return arena_printf(j->arena, "the probability that %s is worth more than doing nothing",
                            alternative_noun(of));
    case SURE_REGRET:
        return arena_printf(j->arena,
                            "what is lost on average by deciding now %s, against "
                            "knowing everything",
                            of->n == 0 ? "to do nothing"
                                       : arena_printf(j->arena, "for %s", of->name));
    case SURE_P5:
    case SURE_P50:
    case SURE_P95:
        return arena_printf(j->arena, "what %s is worth less than with a probability of %s",
                            alternative_noun(of), below_words(j, v));
    default:
        return arena_printf(j->arena, "Spearman's rank correlation of %s with %s", v->of,
                            lead_words(j, v->sure));
    }
}

void part_sure_head(struct job *j, const struct sure_value *v)
{
    report_note(j->report, "figure", "%s = %s: %s, over all that is unknown. Damage counted: %s.",
                v->name, value_words(j, v, v->value.value), meaning_of(j, v), perspective_words(j));
}

void part_sure_method(struct job *j, const struct sure_value *v)
{
    const char *sample = sampling_words(j, &v->sure->sample);
    if (v->kind == SURE_MOVES)
        report_note(j->report, "sampled", "From %s.", sample);
    else
        report_note(j->report, "sampled", "From %s. Its standard error is %s.", sample,
                    value_words(j, v, two_digits(v->value.error)));
}
