/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the memo of a decision in several stages says of its recommendation: the plan, what it costs
 * and what it avoids over the horizon. Sentences; owns nothing. */
#include "work/branching.h"

#include <math.h>

struct saying {
    struct job *j;
    const struct weighing *w;
    const struct alternative *best;
};

static double value_of(const struct saying *m, figure_id id)
{
    return id == FIGURE_NONE ? 0 : figure_value(m->j->figures, id);
}

static const char *money(const struct saying *m, double x)
{
    return money_text(m->j->arena, x, m->j->model->settings->currency);
}

static void recommended(const struct saying *m)
{
    report_note(m->j->report, "recommendation", "Recommended: %s. %s",
                m->best->n ? m->best->name : "to do nothing now", branching_sentence(m->j, m->w));
}

/* Now, and then. */
static void plan(const struct saying *m)
{
    const struct way *x = first_way(m->w->branching, m->best);
    const char *then = branching_plan(m->j, m->w);
    if (m->best->n == 0 || !x)
        return;
    report_note(m->j->report, "plan", "Now: %s.%s%s", *x->steps ? x->steps : "nothing is done yet",
                *then ? " Then: " : "", then);
}

static void costs(const struct saying *m)
{
    if (m->best->n == 0) {
        report_note(m->j->report, "costs",
                    "Costs: nothing is spent; the damage goes on as today, %s as a present value "
                    "over %g years on the hazards that are weighed here.",
                    money(m, value_of(m, m->best->present_damage)), m->w->horizon);
        return;
    }
    report_note(m->j->report, "costs",
                "Costs: what is spent depends on what is found; its mean is %s as a present "
                "value, the same as %s in each year of the horizon.",
                money(m, value_of(m, m->best->present_cost)),
                money_text(m->j->arena, value_of(m, m->best->annual_cost), unit_per_year(m->j)));
}

/* "Customers are without supply for 12 h less, and 0.003 fewer deaths are expected" */
static const char *effects_words(const struct saying *m)
{
    double hours = value_of(m, m->best->present_time) * HOURS_PER_YEAR;
    double deaths = value_of(m, m->best->present_fatalities);
    struct text t;
    text_init(&t, m->j->arena);
    if (hours != 0)
        text_printf(&t,
                    " Customers are without supply for %s h %s, summed over all of them and "
                    "discounted.",
                    plain_text(m->j, fabs(hours)), hours > 0 ? "less" : "more");
    if (deaths != 0)
        text_printf(&t, " Expected deaths over the horizon, discounted, %s by %s.",
                    deaths > 0 ? "fall" : "RISE", plain_text(m->j, fabs(deaths)));
    return text_str(&t);
}

static void avoids(const struct saying *m)
{
    double nothing = value_of(m, m->w->alternatives.at[0].present_damage);
    if (m->best->n == 0) {
        report_note(m->j->report, "avoids",
                    "Avoids: nothing. What the branches would avoid is worth less than they cost; "
                    "the table of alternatives has it.");
        return;
    }
    report_note(m->j->report, "avoids",
                "Avoids: damage of %s on average, as a present value over %g years (%s); by doing "
                "nothing it would be %s, with the plan it is %s.%s",
                money(m, value_of(m, m->best->benefit)), m->w->horizon, perspective_words(m->j),
                money(m, nothing), money(m, value_of(m, m->best->present_damage)),
                effects_words(m));
}

static void note(const struct saying *m, const char *key, const char *text)
{
    if (*text)
        report_note(m->j->report, key, "%s", text);
}

void part_branching_recommendation(struct job *j, const struct weighing *w)
{
    struct saying m = {j, w, &w->alternatives.at[w->order[0]]};
    recommended(&m);
    plan(&m);
    note(&m, "how-sure", sure_sentence(j, w));
    costs(&m);
    avoids(&m);
    note(&m, "ends", endings_sentence(j, w));
    note(&m, "to-others", perspectives_sentence(j, w));
    note(&m, "people-further", further_sentence(j, w));
    if (w->alternatives.n > 1)
        report_note(j->report, "turns", "%s That is with the branches as they are best today.",
                    turn_sentence(j, w));
}
