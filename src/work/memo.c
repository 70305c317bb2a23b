/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The memo of one decision, to be attached to a request for money: what is asked, what is
 * recommended, what it costs, what it avoids for whom, how often it ends badly, what it rests on,
 * what would turn it, what is left out, who signs. Words around the parts that `weigh` prints. */
#include <limits.h>
#include <math.h>

#include "figure/horizon.h"
#include "work/work.h"

struct memo {
    struct job *j;
    struct weighing *w;
    const struct alternative *best;
    const char *currency;
};

static double value_of(const struct memo *m, figure_id id)
{
    return id == FIGURE_NONE ? 0 : figure_value(m->j->figures, id);
}

/* Is there anything to weigh beside doing nothing? */
static bool any_alternative(const struct memo *m)
{
    return m->w->alternatives.n > 1;
}

static const char *money(const struct memo *m, double x)
{
    return money_text(m->j->arena, x, m->currency);
}

static const char *money_rate(const struct memo *m, double x)
{
    return money_text(m->j->arena, x, unit_per_year(m->j));
}

/* --- head --- */

static void pair(struct memo *m, struct block *b, const char *name, const char *text)
{
    if (text && *text)
        row_text(m->j->report, block_pair(m->j->report, b, name), text);
}

static void part_head(struct memo *m, ohmen_error *e)
{
    const struct decision *d = m->w->decision;
    char date[DATE_TEXT];
    part_title_block(m->j, e);
    report_heading(m->j->report, 2, arena_printf(m->j->arena, "%s: %s", m->w->id, d->question));
    struct block *b = report_pairs(m->j->report, "decision", NULL);
    pair(m, b, "Question", d->question);
    pair(m, b, "Decides", d->owner);
    pair(m, b, "Review", d->review == DAY_NONE ? "" : date_write(date, d->review));
    pair(m, b, "Note", d->note);
}

/* --- the recommendation --- */

static const struct option *option_of(const struct memo *m, const char *id)
{
    return model_get(m->j->model, KIND_OPTION, id);
}

/* "TQ-ARC (Arc protection by light at Tern Quay) and TQ-ROUNDS (...)". */
static const char *options_words(const struct memo *m, const struct alternative *x)
{
    struct text t;
    text_init(&t, m->j->arena);
    for (size_t i = 0; i < x->n; i++)
        text_printf(&t, "%s%s (%s)",
                    i == 0          ? ""
                    : i + 1 == x->n ? " and "
                                    : ", ",
                    x->options[i], option_of(m, x->options[i])->name);
    return text_str(&t);
}

static void recommended(struct memo *m)
{
    const char *note = weighing_sentence(m->j, m->w);
    if (m->best->n == 0)
        report_note(m->j->report, "recommendation", "Recommended: to do nothing now. %s", note);
    else
        report_note(m->j->report, "recommendation", "Recommended: %s. %s",
                    options_words(m, m->best), note);
}

/* --- what it costs --- */

static double option_figure(const struct memo *m, const char *option, const char *property)
{
    figure_id id;
    const char *name = arena_printf(m->j->arena, "%s.%s", option, property);
    return weigh_find(m->j->figures, name, &id, NULL) == OHMEN_OK ? figure_value(m->j->figures, id)
                                                                  : 0;
}

static int investment_year(const struct memo *m, const struct option *o)
{
    return date_year(o->invest->on == DAY_NONE ? horizon_start(m->j->model->settings)
                                               : o->invest->on);
}

/* What an option takes of one year in investment; 0 where it invests nothing then. */
static double invested_in(const struct memo *m, const char *option, int year)
{
    const struct option *o = option_of(m, option);
    return o->invest && investment_year(m, o) == year ? option_figure(m, option, "invest") : 0;
}

/* The first year after this one in which something is invested; INT_MAX when there is none. */
static int next_investment(const struct memo *m, const struct alternative *x, int after)
{
    int next = INT_MAX;
    for (size_t i = 0; i < x->n; i++) {
        const struct option *o = option_of(m, x->options[i]);
        int year = o->invest ? investment_year(m, o) : after;
        if (year > after && year < next)
            next = year;
    }
    return next;
}

/* "48 kEUR in 2027 and 60 kEUR in 2030", each year once; "" without investment. */
static const char *investments(const struct memo *m, const struct alternative *x)
{
    struct text t;
    text_init(&t, m->j->arena);
    for (int year = next_investment(m, x, INT_MIN); year < INT_MAX;
         year = next_investment(m, x, year)) {
        double sum = 0;
        for (size_t i = 0; i < x->n; i++)
            sum += invested_in(m, x->options[i], year);
        text_printf(&t, "%s%s in %d", t.n ? " and " : "", money(m, sum), year);
    }
    return text_str(&t);
}

static double running(const struct memo *m, const struct alternative *x)
{
    double sum = 0;
    for (size_t i = 0; i < x->n; i++)
        if (option_of(m, x->options[i])->running)
            sum += option_figure(m, x->options[i], "running");
    return sum;
}

static void costs(struct memo *m)
{
    const struct alternative *x = m->best;
    if (x->n == 0) {
        report_note(m->j->report, "costs",
                    "Costs: nothing is spent; the damage goes on as today, %s as a present value "
                    "over %g years on the hazards that are weighed here.",
                    money(m, value_of(m, x->present_damage)), m->w->horizon);
        return;
    }
    const char *once = investments(m, x);
    double yearly = running(m, x);
    report_note(m->j->report, "costs",
                "Costs: %s%s%s%s; as a present value %s, the same as %s in each year of the "
                "horizon. %s",
                *once ? "an investment of " : "no investment", once,
                yearly > 0 ? ", and to run it " : "", yearly > 0 ? money_rate(m, yearly) : "",
                money(m, value_of(m, x->present_cost)), money_rate(m, value_of(m, x->annual_cost)),
                *once ? payback_sentence(m->j, m->w, x) : "");
}

/* --- what it avoids --- */

/* "society 8.16 kEUR/a, company 3.46 kEUR/a". */
static const char *avoids_by_perspective(const struct memo *m)
{
    const struct rows *rows = &m->j->model->settings->perspectives;
    struct text t;
    text_init(&t, m->j->arena);
    for (size_t p = 0; p < rows->n; p++)
        text_printf(&t, "%s%s %s", t.n ? ", " : "", rows->keys[p],
                    money_rate(m, value_of(m, m->best->of[p].avoids)));
    return text_str(&t);
}

static const char *customers_words(const struct memo *m)
{
    double hours = value_of(m, m->best->avoids_time) * HOURS_PER_YEAR;
    if (hours == 0)
        return "";
    return arena_printf(
        m->j->arena,
        " Customers are without supply for %s h %s in a mean year, "
        "summed over all of them%s.",
        plain_text(m->j, fabs(hours)), hours > 0 ? "less" : "more",
        hours < 0 || m->best->per_hour == FIGURE_NONE
            ? ""
            : arena_printf(m->j->arena, ", at a cost of %s for each such hour",
                           money(m, value_of(m, m->best->per_hour) / HOURS_PER_YEAR)));
}

static const char *deaths_words(const struct memo *m)
{
    double deaths = value_of(m, m->best->avoids_fatalities);
    if (deaths == 0)
        return "";
    return arena_printf(m->j->arena, " Expected deaths %s by %s per year.",
                        deaths > 0 ? "fall" : "RISE", plain_text(m->j, fabs(deaths)));
}

static const char *why_nothing(const struct memo *m)
{
    if (any_alternative(m))
        return "What the options would avoid is worth less than they cost; the table of "
               "alternatives has it.";
    return m->w->decision->options.n ? "None of the options is possible."
                                     : "The decision names no options.";
}

static void avoids(struct memo *m)
{
    const struct alternative *x = m->best;
    if (x->n == 0) {
        report_note(m->j->report, "avoids", "Avoids: nothing. %s", why_nothing(m));
        return;
    }
    const char *by = avoids_by_perspective(m);
    report_note(m->j->report, "avoids", "Avoids per year, once in service: %s (%s)%s%s.%s%s",
                money_rate(m, value_of(m, x->avoids)), perspective_words(m->j),
                *by ? "; for each: " : "", by, customers_words(m), deaths_words(m));
}

static void ends(struct memo *m)
{
    const char *words = endings_sentence(m->j, m->w);
    if (*words)
        report_note(m->j->report, "ends", "%s", words);
}

static void perspectives(struct memo *m)
{
    const char *other = perspectives_sentence(m->j, m->w);
    const char *outside = outside_focus_sentence(m->j, m->w);
    if (*other)
        report_note(m->j->report, "to-others", "%s", other);
    if (*outside)
        report_note(m->j->report, "outside-focus", "%s", outside);
}

/* --- people --- */

/* "9.45e-6 per year (1 in 1.06e5 a)" */
static const char *risk_words(const struct memo *m, double risk)
{
    const char *number = plain_text(m->j, risk);
    if (risk <= 0)
        return arena_printf(m->j->arena, "%s per year", number);
    return arena_printf(m->j->arena, "%s per year (1 in %s a)", number, plain_text(m->j, 1 / risk));
}

static const char *limit_words(const struct memo *m, double risk)
{
    const char *word = people_word(m->j, risk);
    if (text_equal(word, "intolerable"))
        return "which is INTOLERABLE by the criteria of the register: money alone must not decide";
    return *word ? arena_printf(m->j->arena, "which is %s by the criteria of the register", word)
                 : "the register states no criteria for people";
}

/* The group that bears most where that is intolerable, or nothing is done; else the one for whom
 * the alternative changes most. */
static size_t told_group(const struct memo *m)
{
    const struct alternative *nothing = &m->w->alternatives.at[0];
    size_t group;
    double most = 0, worst = worst_individual_risk(m->j, m->w, m->best, &group);
    if (text_equal(people_word(m->j, worst), "intolerable"))
        return group;
    for (size_t i = 0; i < m->w->groups.n; i++) {
        double change = fabs(figure_value(m->j->figures, nothing->individual[i]) -
                             figure_value(m->j->figures, m->best->individual[i]));
        if (change > most) {
            most = change;
            group = i;
        }
    }
    return group;
}

static void people(struct memo *m)
{
    const struct alternative *nothing = &m->w->alternatives.at[0];
    if (m->w->groups.n == 0)
        return;
    size_t group = told_group(m);
    double worst = figure_value(m->j->figures, m->best->individual[group]);
    const char *who = m->w->groups.at[group].id;
    if (m->best->n == 0) {
        report_note(m->j->report, "people-with-it",
                    "People: a person of %s bears a risk of death of %s over all hazards, %s.", who,
                    risk_words(m, worst), limit_words(m, worst));
        return;
    }
    double today = figure_value(m->j->figures, nothing->individual[group]);
    if (text_equal(risk_words(m, today), risk_words(m, worst))) {
        report_note(m->j->report, "people-with-it",
                    "People: a person of %s bears a risk of death of %s over all hazards, today "
                    "and with it, %s.",
                    who, risk_words(m, worst), limit_words(m, worst));
        return;
    }
    report_note(m->j->report, "people-with-it",
                "People: a person of %s bears a risk of death of %s over all hazards today, and %s "
                "with it, %s.",
                who, risk_words(m, today), risk_words(m, worst), limit_words(m, worst));
}

static void further(struct memo *m)
{
    const char *words = further_sentence(m->j, m->w);
    if (*words)
        report_note(m->j->report, "people-further", "%s", words);
}

static void turns(struct memo *m)
{
    report_note(m->j->report, "turns", "%s", turn_sentence(m->j, m->w));
}

static void how_sure(struct memo *m)
{
    const char *words = sure_sentence(m->j, m->w);
    if (*words)
        report_note(m->j->report, "how-sure", "%s", words);
    words = information_sentence(m->j, m->w);
    if (*words)
        report_note(m->j->report, "information-sentence", "%s", words);
}

static void part_recommendation(struct memo *m)
{
    report_heading(m->j->report, 2, "Recommendation");
    if (m->w->branching) {
        part_branching_recommendation(m->j, m->w);
        return;
    }
    recommended(m);
    how_sure(m);
    costs(m);
    avoids(m);
    ends(m);
    perspectives(m);
    people(m);
    further(m);
    if (any_alternative(m))
        turns(m);
}

/* --- what is left out --- */

static const char *not_weighed(const struct memo *m)
{
    struct text t;
    text_init(&t, m->j->arena);
    for (size_t i = 0; i < m->w->left_out.n; i++)
        text_printf(&t, "%s%s (%s)", i ? "; " : "", m->w->left_out.at[i].options,
                    m->w->left_out.at[i].why);
    return text_str(&t);
}

/* Hazards that no option reaches: how many, and what they carry. */
static void untouched(struct memo *m)
{
    size_t all = m->j->model->of[KIND_HAZARD].n, here = 0;
    for (size_t i = 0; i < m->w->hazards.n; i++)
        here += m->w->hazards.at[i].now != NULL;
    report_note(m->j->report, "untouched",
                "Weighed: %zu of the %zu hazards of the register, those that %s reaches or "
                "that stand in the focus. What is not in the register is not covered at all.",
                here, all, m->w->branching ? "a branch or an unknown state" : "an option");
}

static void part_left_out(struct memo *m)
{
    const char *impossible = not_weighed(m);
    report_heading(m->j->report, 2, "What is not covered, and cautions");
    untouched(m);
    if (*impossible)
        report_note(m->j->report, "not-weighed", "Not possible, and so not weighed: %s.",
                    impossible);
    for (size_t i = 0; i < m->w->not_counted.n; i++)
        report_note(m->j->report, "not-counted",
                    "Not counted among the risks of people: %s, since %s.",
                    m->w->not_counted.at[i].options, m->w->not_counted.at[i].why);
    part_conventions(m->j);
    part_unused(m->j);
    part_cautions(m->j);
}

/* --- how sure it is --- */

/* No input is asked for, so that the map cannot fail. */
static void part_how_sure(struct memo *m)
{
    if (!any_alternative(m))
        return;
    report_heading(m->j->report, 2, "How sure the answer is");
    part_sure(m->j, m->w);
    part_swings(m->j, m->w);
    part_map(m->j, m->w, NULL, NULL, NULL);
    part_information_table(m->j, m->w);
    part_sure_moves(m->j, m->w);
    part_elasticities(m->j, m->w);
}

/* --- signatures --- */

static void part_sign(struct memo *m)
{
    const char *owner = m->w->decision->owner;
    report_heading(m->j->report, 2, "Signatures");
    report_note(m->j->report, "to-sign",
                "To be signed by who prepared it, by who checked it, and, as the decision, by %s.",
                owner ? owner : "its owner, whom the register does not name");
    part_signatures(m->j);
}

/* --- the memo --- */

/* No heading stands over nothing: a decision may name no options, or none that is possible. */
static void part_grounds(struct memo *m)
{
    if (any_alternative(m)) {
        report_heading(m->j->report, 2, "What it rests on, and what would turn it");
        part_rests_on(m->j, m->w);
        part_turn(m->j, m->w);
    }
    if (m->w->branching) {
        report_heading(m->j->report, 2, "Options of the plan");
        part_options(m->j, m->w);
        return;
    }
    if (m->w->decision->options.n == 0)
        return;
    report_heading(m->j->report, 2, "Money over the years");
    part_options(m->j, m->w);
    part_flow(m->j, m->w);
}

static void write_memo(struct job *j, struct weighing *w, ohmen_error *e)
{
    weigh_rank(j->figures, w);
    struct memo m = {j, w, &w->alternatives.at[w->order[0]], j->model->settings->currency};
    part_head(&m, e);
    part_recommendation(&m);
    report_heading(j->report, 2, "Alternatives");
    part_alternatives(j, w);
    if (w->branching)
        part_branching(j, w);
    part_worth_by_perspective(j, w);
    part_together(j, w);
    part_customers_and_people(j, w);
    part_how_sure(&m);
    report_heading(j->report, 2, "How bad it may get");
    part_loss(j, w);
    report_heading(j->report, 2, "What happens");
    part_endings(j, w);
    part_weighed_hazards(j, w);
    part_weighing_grid(j, w);
    part_grounds(&m);
    part_left_out(&m);
    part_sign(&m);
}

static ohmen_status run_memo(struct job *j, void *ctx, ohmen_error *e)
{
    struct weighing *w = NULL;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = weigh_compile(j->figures, ctx, &w, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status == OHMEN_OK)
        write_memo(j, w, e);
    return status;
}

ohmen_status ohmen_memo(ohmen_register *r, const ohmen_query *q, const char *decision,
                        ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_memo, (void *)decision, out, e);
}
