/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The place of a risk among the criteria of the register. One function here knows what the limits
 * in money apply to. Owns nothing. */
#include "work/work.h"

/* --- money --- */

/* The limits of this scope, or NULL. */
static const struct money_criteria *limits_of(const struct job *j, enum scope scope)
{
    const struct criteria *c = j->model->settings->criteria;
    return c && c->money && c->money->scope == (int)scope ? c->money : NULL;
}

static const char *place_among(const struct quantity *low, const struct quantity *high, double x)
{
    if (high && x > expr_constant(high->expr))
        return "intolerable";
    if (low && x < expr_constant(low->expr))
        return "acceptable";
    return "tolerable";
}

const char *criteria_word(const struct job *j, enum scope scope, double risk)
{
    const struct money_criteria *m = limits_of(j, scope);
    return m ? place_among(m->acceptable_below, m->intolerable_above, risk) : "";
}

static const char *limit_words(struct job *j, const char *words, const struct quantity *q)
{
    const char *money = money_text(j->arena, expr_constant(q->expr), unit_per_year(j));
    return arena_printf(j->arena, "%s %s", words, money);
}

static void limit_line(struct job *j, struct block *grid, const char *words,
                       const struct quantity *q, const char *symbol)
{
    if (q && expr_constant(q->expr) > 0)
        grid_add_line(j->report, grid, limit_words(j, words, q), expr_constant(q->expr), symbol);
}

/* A grid shows hazards one by one. */
void part_criteria_lines(struct job *j, struct block *grid)
{
    const struct money_criteria *m = limits_of(j, SCOPE_HAZARD);
    if (!m)
        return;
    limit_line(j, grid, "acceptable below", m->acceptable_below, "a");
    limit_line(j, grid, "intolerable above", m->intolerable_above, "i");
}

const char *criteria_sentence(struct job *j, enum scope scope, double risk)
{
    const struct money_criteria *m = limits_of(j, scope);
    if (!m)
        return "";
    const struct quantity *low = m->acceptable_below, *high = m->intolerable_above;
    return arena_printf(j->arena, " By the register's criteria that is %s%s%s%s%s%s.",
                        criteria_word(j, scope, risk), low || high ? " (" : "",
                        low ? limit_words(j, "acceptable below", low) : "", low && high ? ", " : "",
                        high ? limit_words(j, "intolerable above", high) : "",
                        low || high ? ")" : "");
}

/* --- people --- */

static const struct people_criteria *people_limits(const struct job *j)
{
    const struct criteria *c = j->model->settings->criteria;
    const struct people_criteria *p = c ? c->people : NULL;
    return p && (p->acceptable_below || p->intolerable_above) ? p : NULL;
}

const char *people_word(const struct job *j, double individual_risk)
{
    const struct people_criteria *p = people_limits(j);
    return p ? place_among(p->acceptable_below, p->intolerable_above, individual_risk) : "";
}

static const char *frequency_words(struct job *j, const char *words, const struct quantity *q)
{
    char number[32], period[32];
    double x = expr_constant(q->expr);
    return arena_printf(j->arena, "%s %s per a (%s)", words,
                        number_text(number, x, STYLE_FREQUENCY), return_period_text(period, x));
}

const char *people_limit_words(struct job *j)
{
    const struct people_criteria *p = people_limits(j);
    if (!p)
        return "";
    const struct quantity *low = p->acceptable_below, *high = p->intolerable_above;
    return arena_printf(j->arena, "%s%s%s", low ? frequency_words(j, "acceptable below", low) : "",
                        low && high ? ", " : "",
                        high ? frequency_words(j, "intolerable above", high) : "");
}
