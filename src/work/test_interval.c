/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How often an element should be tested: the interval that costs least, all that were tried, the
 * curve, and what each hazard makes of it. */
#include "decide/interval.h"
#include "work/work.h"

static const struct tried_interval *today(const struct interval_search *s)
{
    return &s->tried.at[s->today];
}

static const struct tried_interval *best(const struct interval_search *s)
{
    return &s->tried.at[s->best];
}

/* --- in a sentence --- */

static const char *range_words(struct job *j, const struct interval_search *s)
{
    const struct tried_interval *from = &s->tried.at[s->near_from], *to = &s->tried.at[s->near_to];
    if (from == to)
        return "No other interval that was tried comes within 5 % of that.";
    return arena_printf(j->arena, "Between %s and %s the cost is within 5 %%.", from->every,
                        to->every);
}

static void recommendation(struct job *j, const struct interval_search *s)
{
    const char *unit = unit_per_year(j), *id = s->element->id;
    const struct tried_interval *b = best(s);
    const char *risk = money_text(j->arena, b->faults + b->trips, unit);
    const char *total = money_text(j->arena, b->total, unit);
    const char *now = b->today ? "which is how often it is tested today"
                               : arena_printf(j->arena, "today's %s cost %s", today(s)->every,
                                              money_text(j->arena, today(s)->total, unit));
    report_note(j->report, "recommendation",
                "Testing %s every %s costs least: %s, of which %s risk; %s. %s", id, b->every,
                total, risk, now, range_words(j, s));
}

/* --- what was tried --- */

static const char *remark(const struct interval_search *s, size_t i)
{
    const struct tried_interval *t = &s->tried.at[i];
    if (i == s->best)
        return t->today ? "best, today" : "best";
    if (t->today)
        return "today";
    return i >= s->near_from && i <= s->near_to ? "within 5 %" : "";
}

static bool counts_trips(const struct interval_search *s)
{
    for (size_t i = 0; i < s->hazards.n; i++)
        if (s->hazards.at[i].by_trips)
            return true;
    return false;
}

static void interval_row(struct job *j, struct block *b, const struct interval_search *s, size_t i)
{
    const struct tried_interval *t = &s->tried.at[i];
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, t->every);
    row_number(r, row, t->years, NULL);
    row_number(r, row, t->costs,
               t->tests == FIGURE_NONE ? NULL : figure_name(j->figures, j->arena, t->tests));
    row_number(r, row, t->faults, NULL);
    if (counts_trips(s))
        row_number(r, row, t->trips, NULL);
    row_number(r, row, t->total, NULL);
    row_number(r, row, t->total - best(s)->total, NULL);
    row_text(r, row, remark(s, i));
}

static void intervals_table(struct job *j, const struct interval_search *s)
{
    struct report *r = j->report;
    const char *unit = unit_per_year(j);
    struct block *b = report_table(r, "intervals", "Cost per year by the interval between tests");
    block_column(r, b, "every", "Tested every", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "years", "In years", "a", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "tests", "Tests", unit, STYLE_MONEY)->keep = 3;
    block_column(r, b, "risk", counts_trips(s) ? "Risk without trips" : "Risk", unit, STYLE_MONEY)
        ->keep = 3;
    if (counts_trips(s))
        block_column(r, b, "trips", "Risk of unwanted trips", unit, STYLE_MONEY)->keep = 3;
    block_column(r, b, "total", "Together", unit, STYLE_MONEY);
    block_column(r, b, "above", "Above the least", unit, STYLE_MONEY)->keep = 2;
    block_column(r, b, "remark", "Remark", "", STYLE_PLAIN)->keep = 4;
    for (size_t i = 0; i < s->tried.n; i++)
        interval_row(j, b, s, i);
}

/* --- the curve --- */

static void add_line(struct job *j, struct block *b, const struct interval_search *s,
                     const char *name, const char *symbol,
                     double (*of)(const struct tried_interval *))
{
    struct curve_line *line = curve_add_line(j->report, b, name, symbol);
    for (size_t i = 0; i < s->tried.n; i++)
        curve_add_point(j->report, line, s->tried.at[i].years, of(&s->tried.at[i]));
}

static double total_of(const struct tried_interval *t)
{
    return t->total;
}

static double risk_of(const struct tried_interval *t)
{
    return t->faults + t->trips;
}

static double costs_of(const struct tried_interval *t)
{
    return t->costs;
}

/* Are the tests large enough to be seen beside the risk? */
static bool shows_parts(const struct interval_search *s)
{
    return s->tried.at[0].costs > 0.1 * best(s)->total;
}

static void curve(struct job *j, const struct interval_search *s)
{
    struct report *r = j->report;
    struct block *b = report_curve(r, "curve", "Cost per year over the interval between tests");
    curve_set_x(r, b, "interval", "Interval between tests", "a", STYLE_PLAIN)->log = true;
    curve_set_y(r, b, "cost", "Cost per year", unit_per_year(j), STYLE_MONEY)->from_data =
        !shows_parts(s);
    add_line(j, b, s, "together", "*", total_of);
    if (shows_parts(s)) {
        add_line(j, b, s, "risk", "r", risk_of);
        add_line(j, b, s, "tests", "t", costs_of);
    }
    curve_add_mark(r, b, best(s)->today ? "best, today" : "best", best(s)->years, best(s)->total);
    if (!best(s)->today)
        curve_add_mark(r, b, "today", today(s)->years, today(s)->total);
}

/* --- hazards --- */

static void risk_cell(struct job *j, struct row *row, const struct compiled *c)
{
    const struct hazard_exports *x = c->exports;
    row_number(j->report, row, figure_value(j->figures, x->risk),
               figure_name(j->figures, j->arena, x->risk));
}

static void hazards_table(struct job *j, const struct interval_search *s)
{
    struct report *r = j->report;
    const char *unit = unit_per_year(j);
    struct block *b =
        report_table(r, "interval-hazards", "Risk of each hazard that the test changes");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "today", arena_printf(j->arena, "Every %s", today(s)->every), unit,
                 STYLE_MONEY);
    if (!best(s)->today)
        block_column(r, b, "best", arena_printf(j->arena, "Every %s", best(s)->every), unit,
                     STYLE_MONEY);
    for (size_t i = 0; i < s->hazards.n; i++) {
        struct row *row = block_row(r, b);
        row_text(r, row, s->hazards.at[i].id);
        row_text(r, row, object_name(today(s)->hazards[i]->object));
        risk_cell(j, row, today(s)->hazards[i]);
        if (!best(s)->today)
            risk_cell(j, row, best(s)->hazards[i]);
    }
}

/* --- notes --- */

static void end_note(struct job *j, const struct interval_search *s)
{
    bool first = s->best == 0, last = s->best + 1 == s->tried.n;
    if (first || last)
        report_note(j->report, "end",
                    "This is the %s interval that was tried: the cost may still fall beyond it.",
                    first ? "shortest" : "longest");
}

static void costs_note(struct job *j, const struct interval_search *s)
{
    if (today(s)->tests == FIGURE_NONE)
        report_note(j->report, "no-costs",
                    "The register states no `costs` of this test: what is found here is the least "
                    "risk, and tests are seldom free.");
}

static void trips_note(struct job *j, const struct interval_search *s)
{
    const struct element *x = s->element->data;
    if (x->test->trips && !counts_trips(s))
        report_note(j->report, "trips",
                    "A test of %s may trip the plant (`trips`), but no hazard that could be "
                    "computed counts such trips by unwanted(...): they are left out here.",
                    s->element->id);
}

static void conventions(struct job *j)
{
    report_note(
        j->report, "interval-conventions",
        "Risks are averages over whole cycles of tests, so that they do not depend on which tests "
        "fall into the horizon, as those of `ohmen report` do; failures that no test finds are "
        "averaged over the horizon. Damage counted: %s. Tests are counted whole.",
        perspective_words(j));
    report_note(j->report, "interval-caution",
                "An interval that a code, an authority or the maker of the device prescribes comes "
                "first, whatever it costs.");
}

/* --- the use case --- */

static void take_left_out(struct job *j, const struct interval_search *s)
{
    for (size_t i = 0; i < s->left_out.n; i++)
        *array_push(j->arena, &j->not_computed) =
            (struct not_computed){s->left_out.at[i].id, s->left_out.at[i].why};
}

static void write_search(struct job *j, const struct interval_search *s)
{
    struct hazards shown = {0};
    for (size_t i = 0; i < s->hazards.n; i++)
        *array_push(j->arena, &shown) = today(s)->hazards[i];
    report_heading(
        j->report, 1,
        arena_printf(j->arena, "Test interval of %s: %s", s->element->id, object_name(s->element)));
    recommendation(j, s);
    end_note(j, s);
    costs_note(j, s);
    part_not_computed(j);
    intervals_table(j, s);
    curve(j, s);
    hazards_table(j, s);
    trips_note(j, s);
    conventions(j);
    part_linearity(j, &shown);
    part_unused(j);
    part_cautions(j);
}

static ohmen_status run_test_interval(struct job *j, void *ctx, ohmen_error *e)
{
    struct interval_search *s = NULL;
    ohmen_status status = job_load_figures(j, e);
    job_progress(j, "computing", 0, 1);
    if (status == OHMEN_OK)
        status = interval_compile(j->figures, ctx, &s, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(s->figures, e);
    if (status != OHMEN_OK)
        return status;
    j->figures = s->figures;
    interval_rank(s);
    take_left_out(j, s);
    write_search(j, s);
    return OHMEN_OK;
}

ohmen_status ohmen_test_interval(ohmen_register *r, const ohmen_query *q, const char *element,
                                 ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_test_interval, (void *)element, out, e);
}
