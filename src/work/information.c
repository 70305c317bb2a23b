/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What finding something out before deciding is worth: in a sentence, as a table of unknown
 * quantities with the values at which they turn the choice, and the derivation of one such worth. A
 * decision is looked at once a job. */
#include "decide/information.h"

#include <math.h>

#include "work/work.h"

enum { MOST_BRIEF = 3, MOST_INPUTS = 15, MOST_CHANGES = 3 };

/* Of the greatest worth, or of what knowing everything is worth: what is less is not listed, and no
 * worth that is told in a sentence. */
static const double LEAST = 1e-3;
/* Of the worth: a smaller error is told as none. */
static const double LEAST_ERROR = 1e-6;
/* Of the currency: a smaller worth is told as less than this. */
static const double LEAST_MONEY = 0.01;

/* What is kept of a decision. */
struct known_information {
    const struct weighing *w;
    struct information all;
    struct information_whole whole;
    const struct sure *sure; /* NULL: nothing could be sampled */
};

static bool go_on(void *ctx, size_t done, size_t all)
{
    return job_goes_on(ctx, "information", done, all);
}

static const struct known_information *information_of(struct job *j, struct weighing *w)
{
    struct known_information *known = strmap_get(&j->informations, w->id);
    if (known)
        return known;
    struct information_watch watch = {go_on, j};
    known = NEW(j->arena, struct known_information);
    known->w = w;
    known->sure = known_sure(j, w);
    information_of_decision(j->figures, j->arena, w, known->sure, &j->plan, &watch, &known->whole);
    known->all = known->whole.all;
    if (!known->whole.has_sample)
        known->sure = NULL;
    job_progress(j, "information", 1, 1);
    strmap_set(j->arena, &j->informations, w->id, known);
    return known;
}

/* Is there a choice, and something to be found out? */
static bool is_open(const struct known_information *k)
{
    return k->all.n_all > 0 || k->all.not_seen.n > 0;
}

static struct sampled everything(const struct known_information *k)
{
    return k->whole.everything;
}

/* --- words --- */

static const char *money(struct job *j, double x)
{
    return money_text(j->arena, x, j->model->settings->currency);
}

static const char *noun_of(const struct weighing *w, size_t alternative)
{
    return alternative_noun(&w->alternatives.at[alternative]);
}

/* "above 3.69e-3 per a" */
static const char *beyond_words(struct job *j, const struct information_input *in,
                                const struct information_change *c)
{
    static const char *const sides[] = {"below", "above"}, *const ends[] = {"less", "more"};
    if (c->side == INFORMATION_IF)
        return arena_printf(j->arena, "if it is %s", c->state);
    const char *at = figure_words(j, in->figure, c->at);
    return in->is_discrete ? arena_printf(j->arena, "at %s or %s", at, ends[c->side])
                           : arena_printf(j->arena, "%s %s", sides[c->side], at);
}

/* "above 3.69e-3 per a, which has a probability of 16 %, A is better; ..." */
static const char *changes_words(struct job *j, const struct weighing *w,
                                 const struct information_input *in)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < in->changes.n && i < MOST_CHANGES; i++) {
        const struct information_change *c = &in->changes.at[i];
        text_printf(&t, "%s%s, which has a probability of %s, %s is better", i ? "; " : "",
                    beyond_words(j, in, c), percent_words(j, c->probability),
                    noun_of(w, c->beyond));
    }
    if (in->changes.n > MOST_CHANGES)
        text_printf(&t, "; and at %zu more places", in->changes.n - MOST_CHANGES);
    return text_str(&t);
}

static double error_shown(const struct information_input *in)
{
    return in->error > LEAST_ERROR * in->worth ? two_digits(in->error) : 0;
}

static const char *error_words(struct job *j, const struct information_input *in)
{
    if (in->is_exact && in->error <= LEAST * in->worth)
        return "";
    return arena_printf(j->arena, " (%s, error about %s)",
                        in->is_exact ? "computed" : "approximate", money(j, two_digits(in->error)));
}

/* --- the sentence --- */

static const char *everything_words(struct job *j, const struct known_information *k)
{
    struct sampled all = everything(k);
    if (!k->sure)
        return "";
    if (all.value == 0)
        return " Knowing everything would be worth nothing either.";
    return arena_printf(j->arena, " Knowing everything would be worth %s (standard error %s).",
                        money(j, all.value), money(j, two_digits(all.error)));
}

/* Is it worth telling: does it turn the choice at some value that is not quite improbable? */
static bool is_worth_telling(const struct known_information *k, const struct information_input *in)
{
    return in->changes.n > 0 && in->worth > LEAST * everything(k).value;
}

static const char *sentence_of(struct job *j, const struct known_information *k)
{
    const struct information *x = &k->all;
    const struct information_input *first = x->list.n ? &x->list.at[0] : NULL;
    const char *partly = x->interrupted ? "As far as was looked before the interruption: " : "";
    if (x->n_turning == 0)
        return arena_printf(j->arena,
                            "%sNo single unknown turns the choice: knowing any one of them exactly "
                            "before deciding is worth nothing.%s",
                            partly, everything_words(j, k));
    if (!is_worth_telling(k, first))
        return arena_printf(j->arena,
                            "%sNothing that could be found out by itself is worth more than %s: "
                            "hardly any single unknown turns the choice.%s",
                            partly, money(j, fmax(first->worth, LEAST_MONEY)),
                            everything_words(j, k));
    return arena_printf(j->arena,
                        "%sKnowing %s exactly before deciding is worth at most %s%s: %s.%s", partly,
                        first->name, money(j, first->worth), error_words(j, first),
                        changes_words(j, k->w, first), everything_words(j, k));
}

const char *information_sentence(struct job *j, struct weighing *w)
{
    if (w->alternatives.n < 2)
        return "";
    const struct known_information *k = information_of(j, w);
    return is_open(k) ? sentence_of(j, k) : "";
}

/* --- the table --- */

static void information_columns(struct job *j, struct block *b)
{
    struct report *r = j->report;
    const char *currency = j->model->settings->currency;
    block_column(r, b, "input", "Unknown", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "worth", "Worth knowing", currency, STYLE_MONEY);
    block_column(r, b, "error", "Error", currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "share", "Share", "%", STYLE_PERCENT)->keep = 3;
    block_column(r, b, "side", "Turns", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "at", "at", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN)->keep = 5;
    block_column(r, b, "probability", "Probability", "%", STYLE_PERCENT)->keep = 4;
    block_column(r, b, "then", "Then best", "", STYLE_PLAIN)->keep = 6;
    block_column(r, b, "exact", "Exact", "", STYLE_PLAIN)->data = true;
}

static void empty_cells(struct job *j, struct row *row, size_t n)
{
    for (size_t i = 0; i < n; i++)
        row_empty(j->report, row);
}

enum { CELLS_OF_INPUT = 5, CELLS_OF_CHANGE = 5 };

static void everything_row(struct job *j, struct block *b, const struct known_information *k)
{
    struct sampled all = everything(k);
    if (!k->sure)
        return;
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, "everything");
    row_text(j->report, row, "all that is unknown together");
    row_number(j->report, row, all.value, information_name(j->arena, k->w, NULL));
    row_number(j->report, row, two_digits(all.error), NULL);
    empty_cells(j, row, 1 + CELLS_OF_CHANGE + 1);
}

static void input_cells(struct job *j, struct row *row, const struct known_information *k,
                        const struct information_input *in)
{
    struct report *r = j->report;
    double all = everything(k).value;
    row_text(r, row, in->name);
    row_text(r, row, in->figure == FIGURE_NONE ? "" : figure_subject(j, in->figure));
    row_number(r, row, in->worth, information_name(j->arena, k->w, in->name))->mark =
        in->is_exact ? NULL : "*";
    row_number(r, row, error_shown(in), NULL);
    if (all > 0)
        row_number(r, row, in->worth / all, NULL);
    else
        row_empty(r, row);
}

static const char *side_word(const struct information_input *in, const struct information_change *c)
{
    if (c->side == INFORMATION_IF)
        return "if";
    if (in->is_discrete)
        return c->side == INFORMATION_ABOVE ? "at or above" : "at or below";
    return c->side == INFORMATION_ABOVE ? "above" : "below";
}

static void change_cells(struct job *j, struct row *row, const struct weighing *w,
                         const struct information_input *in, const struct information_change *c)
{
    struct report *r = j->report;
    row_text(r, row, side_word(in, c));
    if (c->side == INFORMATION_IF) {
        row_empty(r, row);
        row_text(r, row, c->state);
    } else {
        row_number(r, row, figure_shown(j, in->figure, c->at), NULL);
        row_text(r, row, figure_unit(j, in->figure));
    }
    row_number(r, row, c->probability, NULL);
    row_text(r, row, alternative_words(&w->alternatives.at[c->beyond]));
}

/* A row for the first change, and one more for each further one. */
static void input_rows(struct job *j, struct block *b, const struct known_information *k,
                       const struct information_input *in)
{
    for (size_t i = 0; i == 0 || i < in->changes.n; i++) {
        struct row *row = block_row(j->report, b);
        if (i == 0)
            input_cells(j, row, k, in);
        else
            empty_cells(j, row, CELLS_OF_INPUT);
        if (in->changes.n)
            change_cells(j, row, k->w, in, &in->changes.at[i]);
        else
            empty_cells(j, row, CELLS_OF_CHANGE);
        if (i == 0)
            row_yes(j->report, row, in->is_exact);
        else
            row_empty(j->report, row);
    }
}

/* How many stand in a table of so many at most. */
static size_t count_listed(const struct information *x, size_t most)
{
    size_t n = 0;
    while (n < x->n_turning && n < most && x->list.at[n].worth > LEAST * x->list.at[0].worth)
        n++;
    return n;
}

static void table(struct job *j, const struct known_information *k, size_t most)
{
    struct block *b = report_table(j->report, "information", "What is worth finding out");
    information_columns(j, b);
    everything_row(j, b, k);
    for (size_t i = 0; i < count_listed(&k->all, most); i++)
        input_rows(j, b, k, &k->all.list.at[i]);
}

/* --- notes below it --- */

static void words_note(struct job *j)
{
    report_note(
        j->report, "information-words",
        "Worth knowing: what is gained on average by knowing it exactly before deciding, "
        "everything "
        "else staying as unknown as it is. No test, survey or study of it alone may cost more. "
        "Share: of what knowing everything is worth, which comes from samples (above 100 %% by "
        "their chance alone). Worths of single unknowns do not add up. Turns at: the value beyond "
        "which another alternative is best, and "
        "the probability that it lies beyond.");
}

static void rest_note(struct job *j, const struct information *x, size_t listed)
{
    size_t more = x->n_turning - listed, never = x->list.n - x->n_turning;
    struct text t;
    text_init(&t, j->arena);
    if (more) {
        double most = x->list.at[listed].worth;
        text_printf(&t, "%s worth %s %s%s.",
                    count_words(j->arena, more, "more unknown is", "more unknowns are"),
                    most < LEAST_MONEY ? "less than" : "at most", money(j, fmax(most, LEAST_MONEY)),
                    more > 1 ? " each" : "");
    }
    if (never)
        text_printf(&t, "%s%s cannot change the choice, whatever %s: knowing %s is worth nothing.",
                    t.n ? " " : "", count_words(j->arena, never, "unknown", "unknowns"),
                    never == 1 ? "it is" : "one of them is", never == 1 ? "it" : "that");
    if (t.n)
        report_note(j->report, "information-rest", "%s", text_str(&t));
}

static bool any_approximate(const struct information *x, size_t listed)
{
    for (size_t i = 0; i < listed; i++)
        if (!x->list.at[i].is_exact)
            return true;
    return false;
}

static const char *joined(struct job *j, size_t n, const char *const *names)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i ? ", " : "", names[i]);
    return text_str(&t);
}

static void exception_notes(struct job *j, const struct information *x, size_t listed)
{
    struct report *r = j->report;
    if (any_approximate(x, listed))
        report_note(r, "information-approximate",
                    "* Approximate, since something else that is unknown bends what it does: the "
                    "error is what the samples differ by from it, with their standard error.");
    if (x->not_possible.n)
        report_note(r, "information-not-possible",
                    "Not told, since at a value between their 0.1 %% and 99.9 %% points a "
                    "probability or a frequency would be none: %s.",
                    joined(j, x->not_possible.n, x->not_possible.at));
    if (x->not_seen.n)
        report_note(r, "information-not-seen",
                    "Not looked at, since their mean is not above 0, or no document states them by "
                    "themselves: %s.",
                    joined(j, x->not_seen.n, x->not_seen.at));
    if (x->interrupted)
        report_note(r, "information-interrupted",
                    "The search was interrupted after %zu of %zu unknowns: what others are worth "
                    "is not told.",
                    x->n_looked, x->n_all);
}

static void table_and_notes(struct job *j, const struct known_information *k, size_t most)
{
    size_t listed = count_listed(&k->all, most);
    if (listed) {
        table(j, k, most);
        words_note(j);
    }
    rest_note(j, &k->all, listed);
    exception_notes(j, &k->all, listed);
}

/* --- parts --- */

static void sentence_note(struct job *j, struct weighing *w)
{
    const char *words = information_sentence(j, w);
    if (*words)
        report_note(j->report, "information-sentence", "%s", words);
}

static void part(struct job *j, struct weighing *w, size_t most)
{
    const struct known_information *k = w->alternatives.n < 2 ? NULL : information_of(j, w);
    if (k && is_open(k))
        table_and_notes(j, k, most);
}

void part_information_briefly(struct job *j, struct weighing *w)
{
    sentence_note(j, w);
    part(j, w, MOST_BRIEF);
}

void part_information_table(struct job *j, struct weighing *w)
{
    part(j, w, MOST_INPUTS);
}

void part_information(struct job *j, struct weighing *w)
{
    sentence_note(j, w);
    part(j, w, MOST_INPUTS);
}

/* --- the derivation --- */

static const struct alternative *best_of(const struct weighing *w)
{
    return &w->alternatives.at[w->order[0]];
}

static double value_of(const struct information_value *v)
{
    return v->input ? v->input->worth : v->everything.value;
}

static const char *net_of_best(struct job *j, const struct weighing *w)
{
    figure_id net = best_of(w)->net;
    return net == FIGURE_NONE ? money(j, 0) : figure_name(j->figures, j->arena, net);
}

struct consumed information_consumed(struct job *j, const struct information_value *v)
{
    const struct weighing *w = v->weighing;
    struct consumed c = {.name = v->name, .value = value_of(v), .dim = dim_money};
    c.words = money(j, c.value);
    c.formula = v->input ? arena_printf(j->arena,
                                        "mean over %s of: the greatest net present value of %s, "
                                        "each in the mean over all else - %s",
                                        v->input->name, w->id, net_of_best(j, w))
                         : arena_printf(j->arena,
                                        "mean over samples of: the greatest net present value of "
                                        "%s - %s",
                                        w->id, net_of_best(j, w));
    if (v->input && v->input->figure != FIGURE_NONE)
        *array_push(j->arena, &c.inputs) = v->input->figure;
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[w->order[i]].net != FIGURE_NONE)
            *array_push(j->arena, &c.inputs) = w->alternatives.at[w->order[i]].net;
    return c;
}

void part_information_head(struct job *j, const struct information_value *v)
{
    const char *what =
        v->input ? arena_printf(j->arena,
                                "what is gained on average by knowing %s exactly before deciding, "
                                "everything else staying as unknown as it is",
                                v->input->name)
                 : arena_printf(j->arena,
                                "what is gained on average by knowing everything that is unknown "
                                "before deciding; the same as %s.regret[%s]",
                                v->weighing->id, best_of(v->weighing)->name);
    report_note(j->report, "figure", "%s = %s: %s. Damage counted: %s.", v->name,
                money(j, value_of(v)), what, perspective_words(j));
}

static const char *way_words(const struct information_input *in)
{
    if (in->is_discrete)
        return "The mean over all values that it may have.";
    if (in->is_linear)
        return "By quadrature over it, between the values at which the best alternative changes; "
               "the net present values are straight lines in it.";
    return "By quadrature over it, between the values at which the best alternative changes; the "
           "net present values are curves in it.";
}

static void changes_note(struct job *j, const struct information_value *v)
{
    const struct information_input *in = v->input;
    const char *now = alternative_noun(best_of(v->weighing));
    if (in->worth == 0)
        report_note(j->report, "changes",
                    "At whatever value it has %s stays best: knowing it changes nothing.", now);
    else if (in->changes.n == 0)
        report_note(j->report, "changes", "Between its 0.1 %% and its 99.9 %% point %s stays best.",
                    now);
    else
        report_note(j->report, "changes", "Against %s: %s.", now,
                    changes_words(j, v->weighing, in));
}

void part_information_method(struct job *j, const struct information_value *v)
{
    const struct information_input *in = v->input;
    const char *sample = sampling_words(j, &v->sample);
    if (!in) {
        report_note(j->report, "sampled", "From %s. Its standard error is %s.", sample,
                    money(j, two_digits(v->everything.error)));
        return;
    }
    changes_note(j, v);
    report_note(j->report, "information-method", "%s", way_words(in));
    if (in->is_exact)
        report_note(j->report, "information-error", "%s",
                    error_shown(in) == 0 ? "That is exact, apart from rounding."
                                         : arena_printf(j->arena, "Its error is at most about %s.",
                                                        money(j, error_shown(in))));
    else
        report_note(j->report, "information-error",
                    "Approximate, since something else that is unknown bends what it does. %s, "
                    "regression makes another worth of it: the difference and its standard error "
                    "are together %s.",
                    arena_printf(j->arena, "From %s", sample), money(j, two_digits(in->error)));
}
