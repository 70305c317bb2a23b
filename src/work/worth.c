/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What alternatives are worth beside their net present value: to each perspective, to customers
 * and to people, and options together and apart. Tables and sentences; owns nothing. */
#include <math.h>
#include <stdlib.h>

#include "work/work.h"

static double value_of(const struct job *j, figure_id id)
{
    return id == FIGURE_NONE ? 0 : figure_value(j->figures, id);
}

/* --- perspectives --- */

static double net_to(const struct job *j, const struct alternative *x, size_t perspective)
{
    return x->n == 0 ? 0 : figure_value(j->figures, x->of[perspective].net);
}

static size_t rank_to(const struct job *j, const struct weighing *w, size_t alternative,
                      size_t perspective)
{
    double net = net_to(j, &w->alternatives.at[alternative], perspective);
    size_t rank = 1;
    for (size_t i = 0; i < w->alternatives.n; i++)
        rank += net_to(j, &w->alternatives.at[i], perspective) > net;
    return rank;
}

static void perspective_row(struct job *j, struct block *b, const struct weighing *w, size_t index)
{
    const struct alternative *x = &w->alternatives.at[index];
    size_t n = j->model->settings->perspectives.n;
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, alternative_words(x));
    for (size_t p = 0; p < n; p++) {
        figure_cell(j, row, x->n ? x->of[p].net : FIGURE_NONE);
        row_count(j->report, row, rank_to(j, w, index, p));
    }
}

void part_worth_by_perspective(struct job *j, const struct weighing *w)
{
    const struct rows *rows = &j->model->settings->perspectives;
    struct report *r = j->report;
    if (rows->n < 2 || w->alternatives.n < 2)
        return;
    struct block *b = report_table(r, "worth-by-perspective",
                                   "Net present value to each perspective, and its rank there");
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    for (size_t p = 0; p < rows->n; p++) {
        const char *who = rows->keys[p];
        block_column(r, b, arena_printf(j->arena, "net-%s", who), who, j->model->settings->currency,
                     STYLE_MONEY);
        block_column(r, b, arena_printf(j->arena, "rank-%s", who), "Rank", "", STYLE_PLAIN)->keep =
            1;
    }
    for (size_t i = 0; i < w->alternatives.n; i++)
        perspective_row(j, b, w, w->order[i]);
}

/* The alternative that is best to a perspective: of equal ones that with fewer options. */
static const struct alternative *best_to(const struct job *j, const struct weighing *w,
                                         size_t perspective)
{
    const struct alternative *best = &w->alternatives.at[0];
    for (size_t i = 1; i < w->alternatives.n; i++)
        if (net_to(j, &w->alternatives.at[i], perspective) > net_to(j, best, perspective))
            best = &w->alternatives.at[i];
    return best;
}

/* "For company the best is TQ-ROUNDS, worth 12.4 kEUR; TQ-ARC would be worth -3 kEUR to it." */
static void other_perspective(struct job *j, struct text *t, const struct alternative *best,
                              size_t p, const struct alternative *x)
{
    const char *currency = j->model->settings->currency;
    text_printf(t, "%sFor %s the best is ", t->n ? " " : "",
                j->model->settings->perspectives.keys[p]);
    if (x->n)
        text_printf(t, "%s, worth %s", x->name, money_text(j->arena, net_to(j, x, p), currency));
    else
        text_add(t, "to do nothing");
    if (best->n)
        text_printf(t, "; to it %s would be worth %s", best->name,
                    money_text(j->arena, net_to(j, best, p), currency));
    text_byte(t, '.');
}

const char *perspectives_sentence(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    const struct rows *rows = &j->model->settings->perspectives;
    struct text t;
    text_init(&t, j->arena);
    for (size_t p = 0; p < rows->n; p++) {
        const struct alternative *x = best_to(j, w, p);
        bool own = j->figures->perspective && text_equal(rows->keys[p], j->figures->perspective);
        if (x != best && !own)
            other_perspective(j, &t, best, p, x);
    }
    return text_str(&t);
}

/* --- together and apart --- */

/* What is less than this share of what it is a difference of is rounding, and shown as 0. */
static const double ROUNDING = 1e-9;

static void together_row(struct job *j, struct block *b, const struct alternative *x)
{
    struct row *row = block_row(j->report, b);
    double together = value_of(j, x->together);
    double size = fabs(value_of(j, x->present_damage)) + fabs(value_of(j, x->benefit));
    if (fabs(together) <= ROUNDING * size)
        together = 0;
    row_text(j->report, row, x->name);
    figure_cell(j, row, x->net);
    row_number(j->report, row, together, figure_name(j->figures, j->arena, x->together));
    row_text(j->report, row, together > 0 ? "more" : together < 0 ? "less" : "the same");
}

/* Combinations of two, since larger ones are made of them, and the best alternative. */
void part_together(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    struct block *b = NULL;
    for (size_t i = 0; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[w->order[i]];
        if (x->together == FIGURE_NONE || (x->n > 2 && x->rank > 1))
            continue;
        if (!b) {
            b = report_table(r, "together", "Options together and apart");
            block_column(r, b, "alternative", "Together", "", STYLE_PLAIN);
            block_column(r, b, "net", "Net present value", j->model->settings->currency,
                         STYLE_MONEY);
            block_column(r, b, "beyond", "Beyond their sum", j->model->settings->currency,
                         STYLE_MONEY);
            block_column(r, b, "worth", "Worth", "", STYLE_PLAIN)->keep = 1;
        }
        together_row(j, b, x);
    }
}

/* --- supply and people --- */

double worst_individual_risk(const struct job *j, const struct weighing *w,
                             const struct alternative *x, size_t *group)
{
    double worst = 0;
    *group = 0;
    for (size_t i = 0; i < w->groups.n; i++)
        if (figure_value(j->figures, x->individual[i]) > worst) {
            worst = figure_value(j->figures, x->individual[i]);
            *group = i;
        }
    return worst;
}

static double most_time(const struct job *j, const struct weighing *w)
{
    double most = 0;
    for (size_t i = 1; i < w->alternatives.n; i++)
        most = fmax(most, fabs(value_of(j, w->alternatives.at[i].avoids_time)));
    return most;
}

static void customer_row(struct job *j, struct block *b, const struct alternative *x, double most)
{
    struct row *row = block_row(j->report, b);
    double time = figure_value(j->figures, x->avoids_time);
    if (fabs(time) <= ROUNDING * most)
        time = 0;
    row_text(j->report, row, alternative_words(x));
    row_number(j->report, row, time * HOURS_PER_YEAR,
               figure_name(j->figures, j->arena, x->avoids_time));
    if (x->per_hour == FIGURE_NONE)
        row_empty(j->report, row);
    else
        row_number(j->report, row, figure_value(j->figures, x->per_hour) / HOURS_PER_YEAR,
                   figure_name(j->figures, j->arena, x->per_hour));
}

static void customers_table(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    const char *per_hour = arena_printf(j->arena, "%s/h", j->model->settings->currency);
    struct block *b = report_table(r, "customers",
                                   "Customer hours without supply that are avoided in a mean year");
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "avoids-customer-time", "Avoided", "h/a", STYLE_PLAIN);
    block_column(r, b, "cost-per-customer-hour", "Cost of each hour", per_hour, STYLE_MONEY);
    for (size_t i = 0; i < w->alternatives.n; i++)
        if (w->alternatives.at[w->order[i]].n)
            customer_row(j, b, &w->alternatives.at[w->order[i]], most_time(j, w));
}

static const struct people_criteria *people_criteria(const struct job *j)
{
    const struct criteria *c = j->model->settings->criteria;
    return c ? c->people : NULL;
}

/* Does any alternative have this price of a life? */
static bool any_price(const struct weighing *w, bool disproportion)
{
    for (size_t i = 1; i < w->alternatives.n; i++) {
        const struct alternative *x = &w->alternatives.at[i];
        if ((disproportion ? x->disproportion : x->per_fatality) != FIGURE_NONE)
            return true;
    }
    return false;
}

static const char *disproportion_word(const struct job *j, const struct alternative *x)
{
    const struct people_criteria *c = people_criteria(j);
    if (!c || !c->disproportion || x->disproportion == FIGURE_NONE)
        return "";
    double limit = expr_constant(c->disproportion->expr);
    return value_of(j, x->disproportion) > limit ? "gross" : "not gross";
}

/* In millions, since the prices of a table may lie far apart. */
static void price_cell(struct job *j, struct row *row, figure_id id)
{
    if (id == FIGURE_NONE)
        row_empty(j->report, row);
    else
        row_number(j->report, row, figure_value(j->figures, id) / 1e6,
                   figure_name(j->figures, j->arena, id));
}

static void people_row(struct job *j, struct block *b, const struct weighing *w,
                       const struct alternative *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    size_t group;
    double worst = worst_individual_risk(j, w, x, &group);
    row_text(r, row, alternative_words(x));
    row_number(r, row, worst, figure_name(j->figures, j->arena, x->individual[group]));
    row_text(r, row, w->groups.at[group].id);
    if (people_criteria(j))
        row_text(r, row, people_word(j, worst));
    figure_cell(j, row, x->avoids_fatalities);
    if (any_price(w, false))
        price_cell(j, row, x->per_fatality);
    if (any_price(w, true)) {
        figure_cell(j, row, x->disproportion);
        row_text(r, row, disproportion_word(j, x));
    }
}

static const char *disproportion_words(struct job *j)
{
    return arena_printf(j->arena,
                        " Disproportion: that cost over what the register would spend on each "
                        "expected death%s.",
                        people_criteria(j)->disproportion ? "; gross above its limit" : "");
}

/* What the columns mean that are there. */
static void people_words(struct job *j, const struct weighing *w)
{
    report_note(
        j->report, "people-words",
        "Risk of a person: of death, per year, over all hazards of the register, once the options "
        "are in service, as a mean over the horizon (the chapter on people judges by the highest "
        "year); of the groups that the hazards weighed here may harm, that which bears "
        "most.%s%s Deaths stand beside the money and are not part of it.",
        any_price(w, false) ? " Net cost of each death avoided: what an alternative costs beyond "
                              "the damage that it avoids; empty where it avoids more than it "
                              "costs, or no deaths."
                            : "",
        any_price(w, true) ? disproportion_words(j) : "");
}

static void people_table(struct job *j, const struct weighing *w)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "people", "People");
    block_column(r, b, "alternative", "Alternative", "", STYLE_PLAIN);
    block_column(r, b, "individual-risk", "Risk of a person", "1/a", STYLE_FREQUENCY);
    block_column(r, b, "group", "Of", "", STYLE_PLAIN)->keep = 3;
    if (people_criteria(j))
        block_column(r, b, "criterion", "Criterion", "", STYLE_PLAIN);
    block_column(r, b, "avoids-fatalities", "Deaths avoided", "1/a", STYLE_PLAIN)->keep = 2;
    if (any_price(w, false))
        block_column(r, b, "net-cost-per-fatality", "Net cost of each",
                     arena_printf(j->arena, "M%s", j->model->settings->currency), STYLE_PLAIN)
            ->keep = 2;
    if (any_price(w, true)) {
        block_column(r, b, "disproportion", "Disproportion", "", STYLE_RATIO)->keep = 1;
        block_column(r, b, "gross", "Gross", "", STYLE_PLAIN)->keep = 3;
    }
    for (size_t i = 0; i < w->alternatives.n; i++)
        people_row(j, b, w, &w->alternatives.at[w->order[i]]);
    people_words(j, w);
}

void part_customers_and_people(struct job *j, const struct weighing *w)
{
    if (w->branching) {
        part_branching_effects(j, w);
        return;
    }
    if (most_time(j, w) > 0)
        customers_table(j, w);
    if (w->groups.n)
        people_table(j, w);
}

const char *plain_text(struct job *j, double x)
{
    char number[32];
    return arena_str(j->arena, number_text(number, x, STYLE_PLAIN));
}

const char *people_sentence(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    size_t group;
    if (w->groups.n == 0)
        return "";
    double worst = worst_individual_risk(j, w, best, &group);
    if (!text_equal(people_word(j, worst), "intolerable"))
        return "";
    return arena_printf(j->arena,
                        "INTOLERABLE for people: with %s a person of %s bears a risk of death of "
                        "%s per year, above the limit of the register. Money alone must not "
                        "decide.",
                        best->n ? best->name : "doing nothing", w->groups.at[group].id,
                        plain_text(j, worst));
}

/* What society would spend to avoid one expected death; 0: not stated. */
static double fatality_worth(const struct job *j)
{
    const struct people_criteria *c = people_criteria(j);
    return c && c->per_fatality ? expr_constant(c->per_fatality->expr) : 0;
}

/* An alternative that avoids more deaths than the best one, by what that costs beyond it. */
struct further {
    const struct alternative *of; /* NULL: there is none */
    double cost, deaths, disproportion;
};

static struct further further_than(const struct job *j, const struct alternative *best,
                                   const struct alternative *x)
{
    struct further f = {.of = x};
    f.cost = value_of(j, best->net) - value_of(j, x->net);
    f.deaths = value_of(j, x->present_fatalities) - value_of(j, best->present_fatalities);
    f.disproportion = f.deaths > 0 ? f.cost / (f.deaths * fatality_worth(j)) : INFINITY;
    return f;
}

/* Beyond this many times what society would spend nobody asks. */
static const double FAR_TOO_MUCH = 1000;

/* That with the least disproportion. */
static struct further least_further(const struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    struct further least = {.disproportion = INFINITY};
    for (size_t i = 0; i < w->alternatives.n; i++) {
        struct further f = further_than(j, best, &w->alternatives.at[w->order[i]]);
        if (f.of != best && f.disproportion < least.disproportion)
            least = f;
    }
    return least;
}

const char *further_sentence(struct job *j, const struct weighing *w)
{
    const struct people_criteria *c = people_criteria(j);
    const char *currency = j->model->settings->currency;
    if ((w->groups.n == 0 && !w->branching) || fatality_worth(j) <= 0)
        return "";
    struct further f = least_further(j, w);
    if (!f.of || f.disproportion > FAR_TOO_MUCH)
        return "";
    double limit = c->disproportion ? expr_constant(c->disproportion->expr) : 0;
    const char *verdict = limit <= 0                ? ""
                          : f.disproportion > limit ? ", which is grossly disproportionate"
                                                    : ", which is NOT grossly disproportionate: to "
                                                      "leave it out has to be justified";
    return arena_printf(j->arena,
                        "For people %s would go further: beside what is best in money it costs %s "
                        "more, %s for each expected death that it avoids beyond that, %s times "
                        "what society would spend%s.",
                        alternative_words(f.of), money_text(j->arena, f.cost, currency),
                        money_text(j->arena, f.cost / f.deaths, currency),
                        plain_text(j, f.disproportion), verdict);
}

/* --- the focus --- */

/* What changes by less than this share of all that is avoided is counted, not named. */
static const double SMALL_CHANGE = 0.01;

static double change_of(const struct job *j, const struct compiled *now,
                        const struct compiled *then)
{
    return (then ? figure_value(j->figures, then->main) : 0) -
           (now ? figure_value(j->figures, now->main) : 0);
}

const char *outside_focus_sentence(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    double least = SMALL_CHANGE * fabs(value_of(j, best->avoids));
    struct text t;
    size_t small = 0;
    text_init(&t, j->arena);
    for (size_t i = 0; !w->branching && w->decision->focus.n && i < w->hazards.n; i++) {
        const struct compiled *now = w->hazards.at[i].now, *then = best->hazards[i];
        if (w->hazards.at[i].in_focus || now == then)
            continue;
        double change = change_of(j, now, then);
        if (fabs(change) < least)
            small++;
        else
            text_printf(&t, "%s%s (%s%s)", t.n ? ", " : "", w->hazards.at[i].id,
                        change > 0 ? "+" : "", money_text(j->arena, change, unit_per_year(j)));
    }
    if (t.n == 0 && small == 0)
        return "";
    if (small)
        text_printf(&t, "%s%zu by less than %.0f %% of all that it avoids", t.n ? ", and " : "",
                    small, 100 * SMALL_CHANGE);
    return arena_printf(j->arena, "%s also changes the risk of hazards outside the focus: %s.",
                        best->name, text_str(&t));
}
