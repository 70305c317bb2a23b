/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What each input does to the worth of one alternative: swings of what is not known, elasticities
 * of all that is stated; and the derivation of one such number. */
#include "decide/swing.h"

#include <math.h>

#include "decide/elasticity.h"
#include "work/work.h"

enum { MOST_SWINGS = 15, MOST_ELASTICITIES = 15 };

/* Of the widest one: what is smaller is not drawn. */
static const double LEAST_SWING = 0.01;

/* What is kept of a decision: its swings, or why there are none. */
struct known_swings {
    struct input_swings all;
    const char *why; /* or NULL */
};

static const struct known_swings *swings_of(struct job *j, const struct weighing *w)
{
    struct known_swings *known = strmap_get(&j->swings, w->id);
    ohmen_error why = OHMEN_ERROR_INIT;
    if (known)
        return known;
    known = NEW(j->arena, struct known_swings);
    job_progress(j, "swings", 0, 1);
    if (swings_find(j->figures, w, &known->all, &why) != OHMEN_OK)
        known->why = arena_str(j->arena, why.text);
    job_progress(j, "swings", 1, 1);
    strmap_set(j->arena, &j->swings, w->id, known);
    return known;
}

const struct alternative *judged_alternative(const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    if (best->n)
        return best;
    return w->alternatives.n > 1 ? &w->alternatives.at[w->order[1]] : NULL;
}

void widest_inputs(struct job *j, const struct weighing *w, const char *out[2])
{
    const struct known_swings *known = swings_of(j, w);
    for (size_t i = 0; i < 2; i++)
        if (!known->why && i < known->all.list.n && known->all.list.at[i].width > 0)
            out[i] = known->all.list.at[i].name;
}

/* --- the picture --- */

struct picture {
    struct job *j;
    const struct weighing *w;
    const struct input_swings *all;
    const struct alternative *of;
    size_t place;   /* of it, among the alternatives */
    double *widths; /* by swing */
    size_t *order;  /* widest first */
};

static double worth_at(const struct picture *p, const struct input_swing *s, enum swing_side side)
{
    return s->ends[side].worth[p->place];
}

static void open_picture(struct picture *p)
{
    size_t n = p->all->list.n;
    p->widths = NEW_ARRAY(p->j->arena, n, double);
    for (size_t i = 0; i < n; i++) {
        const struct input_swing *s = &p->all->list.at[i];
        p->widths[i] = fabs(worth_at(p, s, SWING_AT_HIGH) - worth_at(p, s, SWING_AT_LOW));
    }
    p->order = falling_order(p->j->arena, n, p->widths);
}

/* "2.1e-3 .. 9.4e-3 per a" */
static const char *ends_words(struct job *j, const struct input_swing *s)
{
    char low[32], high[32];
    const char *unit = figure_unit(j, s->input);
    number_text(low, figure_shown(j, s->input, s->ends[SWING_AT_LOW].at), STYLE_PLAIN);
    number_text(high, figure_shown(j, s->input, s->ends[SWING_AT_HIGH].at), STYLE_PLAIN);
    return arena_printf(j->arena, "%s .. %s%s%s", low, high, *unit ? " " : "", unit);
}

static bool turns_at(const struct picture *p, const struct input_swing *s, enum swing_side side)
{
    return s->ends[side].best != p->w->order[0];
}

static void add_swing(struct picture *p, struct block *b, const struct input_swing *s)
{
    struct figures *f = p->j->figures;
    struct swing *row = swings_add(p->j->report, b, s->name, ends_words(p->j, s),
                                   worth_at(p, s, SWING_AT_LOW), worth_at(p, s, SWING_AT_HIGH));
    row->low_figure = swing_name(f, p->w, s, p->of, SWING_AT_LOW);
    row->high_figure = swing_name(f, p->w, s, p->of, SWING_AT_HIGH);
    row->low_turns = turns_at(p, s, SWING_AT_LOW);
    row->high_turns = turns_at(p, s, SWING_AT_HIGH);
}

/* The widest, and whatever turns the decision. */
static bool is_shown(const struct picture *p, size_t rank)
{
    const struct input_swing *s = &p->all->list.at[p->order[rank]];
    double width = p->widths[p->order[rank]], widest = p->widths[p->order[0]];
    return s->turns || rank == 0 || (rank < MOST_SWINGS && width > LEAST_SWING * widest);
}

static void draw_swings(struct picture *p)
{
    struct job *j = p->j;
    const char *currency = j->model->settings->currency;
    const char *title = arena_printf(
        j->arena,
        "Net present value of %s with one input at its 5 %% or its 95 %% point, everything else as "
        "unknown as it was",
        p->of->name);
    struct block *b =
        report_swings(j->report, "swings", title, figure_value(j->figures, p->of->net),
                      figure_name(j->figures, j->arena, p->of->net));
    swings_set_axis(j->report, b, "net", "Net present value", currency, STYLE_MONEY);
    swings_set_turns(j->report, b, "another alternative is best at this end");
    for (size_t i = 0; i < p->all->list.n; i++)
        if (is_shown(p, i))
            add_swing(p, b, &p->all->list.at[p->order[i]]);
}

/* --- notes below it --- */

static void rest_note(const struct picture *p)
{
    size_t rest = 0;
    double most = 0;
    for (size_t i = 0; i < p->all->list.n; i++)
        if (!is_shown(p, i) && p->widths[p->order[i]] > 0) {
            rest++;
            most = fmax(most, p->widths[p->order[i]]);
        }
    if (rest)
        report_note(p->j->report, "swings-more", "%zu more input%s swing%s it by at most %s%s.",
                    rest, rest == 1 ? "" : "s", rest == 1 ? "s" : "",
                    money_text(p->j->arena, most, p->j->model->settings->currency),
                    rest == 1 ? "" : " each");
}

/* "tq-switch-fault.rate low: do nothing, high: TQ-ARC" */
static const char *turned_words(const struct picture *p, const struct input_swing *s)
{
    struct text t;
    text_init(&t, p->j->arena);
    for (int side = SWING_AT_LOW; side <= SWING_AT_HIGH; side++)
        if (turns_at(p, s, (enum swing_side)side))
            text_printf(&t, "%s%s: %s", t.n ? ", " : "", swing_sides[side],
                        alternative_words(&p->w->alternatives.at[s->ends[side].best]));
    return arena_printf(p->j->arena, "%s %s", s->name, text_str(&t));
}

/* What is best where the picture has its mark. */
static void turned_note(const struct picture *p)
{
    struct text t;
    text_init(&t, p->j->arena);
    for (size_t i = 0; i < p->all->list.n; i++) {
        const struct input_swing *s = &p->all->list.at[p->order[i]];
        if (s->turns)
            text_printf(&t, "%s%s", t.n ? "; " : "", turned_words(p, s));
    }
    if (t.n)
        report_note(p->j->report, "swings-turned", "Best at the ends marked !: %s.", text_str(&t));
    else
        report_note(p->j->report, "swings-turned",
                    "At these points no input, moved alone, makes another alternative best.");
}

/* Names of what is shown and not exact. */
static const char *approximate(const struct picture *p)
{
    struct text t;
    text_init(&t, p->j->arena);
    for (size_t i = 0; i < p->all->list.n; i++) {
        const struct input_swing *s = &p->all->list.at[p->order[i]];
        if (is_shown(p, i) && !s->is_exact)
            text_printf(&t, "%s%s", t.n ? ", " : "", s->name);
    }
    return text_str(&t);
}

static const char *not_moved(const struct picture *p)
{
    struct text t;
    text_init(&t, p->j->arena);
    for (size_t i = 0; i < p->all->not_possible.n; i++)
        text_printf(&t, "%s%s", t.n ? ", " : "",
                    figure_name(p->j->figures, p->j->arena, p->all->not_possible.at[i]));
    return text_str(&t);
}

static void swing_notes(const struct picture *p)
{
    struct report *r = p->j->report;
    const char *inexact = approximate(p), *still = not_moved(p);
    turned_note(p);
    rest_note(p);
    if (*inexact)
        report_note(r, "swings-approximate",
                    "Approximate, since something else that is unknown bends what these do: %s.",
                    inexact);
    if (*still)
        report_note(r, "swings-not-possible",
                    "Not moved, since at one of these points a probability or a frequency would "
                    "be none: %s.",
                    still);
}

void part_swings(struct job *j, const struct weighing *w)
{
    struct picture p = {.j = j, .w = w, .of = judged_alternative(w)};
    if (!p.of)
        return;
    const struct known_swings *known = swings_of(j, w);
    if (known->why) {
        report_note(j->report, "swings-words", "What its inputs swing cannot be told: %s.",
                    known->why);
        return;
    }
    p.all = &known->all;
    p.place = (size_t)(p.of - w->alternatives.at);
    if (p.all->list.n == 0 && p.all->not_possible.n == 0) {
        report_note(j->report, "swings-words",
                    "No input that moves it is stated as unknown: nothing swings it.");
        return;
    }
    open_picture(&p);
    if (p.all->list.n)
        draw_swings(&p);
    swing_notes(&p);
}

/* --- elasticities --- */

static void elasticity_row(struct job *j, struct block *b, const struct elasticity *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    const char *name = figure_name(j->figures, j->arena, x->input);
    row_text(r, row, name);
    row_text(r, row, figure_subject(j, x->input));
    row_number(r, row, figure_shown(j, x->input, figure_value(j->figures, x->input)), name);
    row_text(r, row, figure_unit(j, x->input));
    row_number(r, row, x->value, x->name)->mark = x->is_at_tie ? "*" : NULL;
}

static void elasticity_notes(struct job *j, const struct elasticities *all)
{
    bool tie = false;
    size_t n = all->n < MOST_ELASTICITIES ? all->n : MOST_ELASTICITIES;
    for (size_t i = 0; i < n; i++)
        tie = tie || all->at[i].is_at_tie;
    report_note(
        j->report, "elasticities-words",
        "By how many per cent of its size %s changes for each per cent more of the input, "
        "by the slope at the means of what is unknown.%s%s",
        figure_name(j->figures, j->arena, all->at[0].figure),
        tie ? " * One of two equal amounts counts here: the slope is that of the first." : "",
        all->n > n ? arena_printf(j->arena, " %zu more inputs change it by less.", all->n - n)
                   : "");
}

void part_elasticities(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    struct elasticities all = {0};
    const struct alternative *of = judged_alternative(w);
    ohmen_error why = OHMEN_ERROR_INIT;
    if (!of || elasticities_find(j->figures, w, of->name, &all, &why) != OHMEN_OK || all.n == 0)
        return;
    struct block *b = report_table(
        r, "elasticities", arena_printf(j->arena, "Elasticities of what %s is worth", of->name));
    block_column(r, b, "input", "Input", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "now", "Mean", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "elasticity", "% per %", "", STYLE_RATIO);
    for (size_t i = 0; i < all.n && i < MOST_ELASTICITIES; i++)
        elasticity_row(j, b, &all.at[i]);
    elasticity_notes(j, &all);
}

/* --- the derivation of a swing --- */

static const char *point_words(enum swing_side side)
{
    return side == SWING_AT_LOW ? "5 %" : "95 %";
}

static const char *at_words(struct job *j, const struct swing_value *v)
{
    return figure_words(j, v->swing.input, v->swing.ends[v->side].at);
}

struct consumed swing_consumed(struct job *j, const struct swing_value *v)
{
    struct consumed c = {.name = v->name, .value = v->worth, .dim = dim_money};
    c.words = money_text(j->arena, v->worth, j->model->settings->currency);
    c.formula =
        arena_printf(j->arena, "mean(%s; %s = %s)", figure_name(j->figures, j->arena, v->of->net),
                     v->swing.name, at_words(j, v));
    *array_push(j->arena, &c.inputs) = v->swing.input;
    *array_push(j->arena, &c.inputs) = v->of->net;
    return c;
}

void part_swing_head(struct job *j, const struct swing_value *v)
{
    report_note(j->report, "figure",
                "%s = %s: what %s is worth if %s is %s for certain, its %s point, and everything "
                "else is as unknown as it was. Damage counted: %s.",
                v->name, money_text(j->arena, v->worth, j->model->settings->currency), v->of->name,
                v->swing.name, at_words(j, v), point_words(v->side), perspective_words(j));
}

void part_swing_method(struct job *j, const struct swing_value *v)
{
    report_note(
        j->report, "swung", "%s",
        v->swing.is_exact
            ? "The mean over everything else that is unknown, exactly (apart from rounding)."
            : "Approximate: something else that is unknown bends what this input does; "
              "what that adds is taken as it is now, such that the mean over the input "
              "stays the worth of today.");
}

/* --- the derivation of an elasticity --- */

struct consumed elasticity_consumed(struct job *j, const struct elasticity *x)
{
    struct consumed c = {.name = x->name, .value = x->value, .dim = dim_number};
    const char *input = figure_name(j->figures, j->arena, x->input);
    const char *figure = figure_name(j->figures, j->arena, x->figure);
    c.words = plain_text(j, x->value);
    c.formula =
        arena_printf(j->arena, "%s * slope(%s; %s) / size(%s)", input, figure, input, figure);
    *array_push(j->arena, &c.inputs) = x->input;
    *array_push(j->arena, &c.inputs) = x->figure;
    return c;
}

void part_elasticity_head(struct job *j, const struct elasticity *x)
{
    report_note(j->report, "figure",
                "%s = %s: by how many per cent of its size %s changes for each per cent more of "
                "%s, by its derivative at the means of what is unknown.%s Damage counted: %s.",
                x->name, plain_text(j, x->value), figure_name(j->figures, j->arena, x->figure),
                figure_name(j->figures, j->arena, x->input),
                x->is_at_tie ? " One of two equal amounts counts there: the derivative is that of "
                               "the first."
                             : "",
                perspective_words(j));
}
