/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The page of an element: what its probability of failure is made of and how it changes with
 * time, what is said of its tests, its common causes, and the hazards in which it matters. */
#include <math.h>
#include <stdlib.h>

#include "figure/contributions.h"
#include "figure/horizon.h"
#include "work/show.h"

/* --- unwanted operation, as it is stated --- */

static void unwanted_row(struct job *j, struct block *b, const char *when, const struct node *n,
                         const struct node *of_object)
{
    struct report *r = j->report;
    const struct node *is = n->type == NODE_MAP ? node_get(n, "is") : NULL;
    const struct node *own = n->type == NODE_MAP ? node_get(n, "source") : NULL;
    const struct node *source = own ? own : of_object;
    struct row *row = block_row(r, b);
    row_text(r, row, when);
    row_text(r, row, node_says(j->arena, is ? is : n, SHOW_BRIEF));
    if (source)
        row_text(r, row, source->text);
    else
        row_empty(r, row);
}

/* doc: of the element or its type; it says something of unwanted operation. */
static void unwanted_table(struct job *j, const struct node *doc, const char *title)
{
    struct report *r = j->report;
    const struct node *n = node_get(doc, "unwanted"), *source = node_get(doc, "source");
    const struct node *by_itself = node_get(n, "by-itself"), *events = node_get(n, "per-event");
    struct block *b = report_table(r, "unwanted", title);
    block_column(r, b, "when", "When", "", STYLE_PLAIN);
    block_column(r, b, "stated", "As stated", "", STYLE_PLAIN);
    block_column(r, b, "source", "Source", "", STYLE_PLAIN)->keep = 1;
    if (by_itself)
        unwanted_row(j, b, "by itself", by_itself, source);
    for (size_t i = 0; events && i < events->n; i++)
        unwanted_row(j, b, arena_printf(j->arena, "at each %s", events->pairs[i].key),
                     events->pairs[i].value, source);
}

static void part_unwanted(struct job *j, const struct object *o)
{
    const struct element *x = o->data;
    const struct object *type = x->type ? model_find(j->model, x->type) : NULL;
    const struct node *own = object_document(j->arena, o);
    const struct node *of_type = type ? object_document(j->arena, type) : NULL;
    if (node_get(own, "unwanted"))
        unwanted_table(j, own, "Unwanted operation, as stated");
    else if (of_type && node_get(of_type, "unwanted"))
        unwanted_table(j, of_type,
                       arena_printf(j->arena, "Unwanted operation, as stated of %s", type->id));
}

/* --- what the probability of failure is made of --- */

static const char *const contribution_words[CONTRIBUTIONS] = {
    [CONTRIBUTION_ON_DEMAND] = "Fails on demand",
    [CONTRIBUTION_IN_REPAIR] = "In repair after a failure that supervision showed",
    [CONTRIBUTION_IN_TEST] = "Out of service for a routine test",
    [CONTRIBUTION_OUT] = "Out of service for other reasons",
    [CONTRIBUTION_LEFT] = "Left failed by a routine test",
    [CONTRIBUTION_TESTED] = "Failed undetected, until a test or a demand shows it",
    [CONTRIBUTION_UNTESTED] = "Failed undetected, and no routine test finds it",
};

static void contribution_row(struct job *j, struct block *b, const char *words, figure_id id,
                             bool named, double whole)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    double p = figure_value(j->figures, id);
    row_text(r, row, words);
    row_number(r, row, p, named ? figure_name(j->figures, j->arena, id) : NULL);
    row_number(r, row, whole == 0 ? 0 : p / whole, NULL);
}

static void part_contributions(struct job *j, const struct compiled *c,
                               const struct contributions *x)
{
    struct report *r = j->report;
    double whole = figure_value(j->figures, c->main);
    struct block *b =
        report_table(r, "contributions", "What its probability of failure is made of");
    block_column(r, b, "part", "Part", "", STYLE_PLAIN);
    block_column(r, b, "probability", "Mean", "", STYLE_PROBABILITY);
    block_column(r, b, "share", "Of the whole", "%", STYLE_PERCENT)->keep = 1;
    for (int i = 0; i < CONTRIBUTIONS; i++)
        if (x->at[i] != FIGURE_NONE)
            contribution_row(j, b, contribution_words[i], x->at[i], x->named[i], whole);
    contribution_row(j, b, "Fails, for whichever reason", c->main, true, whole);
}

/* --- tests in words --- */

static const char *date_words(struct job *j, day d)
{
    char date[DATE_TEXT];
    return arena_str(j->arena, date_write(date, d));
}

static const char *every_words(struct job *j, const struct test *t)
{
    struct text words;
    text_init(&words, j->arena);
    expr_write(&words, t->every->expr);
    return text_str(&words);
}

/* Last known to be sound, but for tests. */
static day known_sound(const struct element *x)
{
    if (x->since == DAY_NONE || x->known == DAY_NONE)
        return x->since == DAY_NONE ? x->known : x->since;
    return x->since > x->known ? x->since : x->known;
}

/* "Last tested 2017-05-03"; "" where no day is known. */
static const char *last_words(struct job *j, const struct element *x, day *from)
{
    day sound = known_sound(x), last = x->test ? x->test->last : DAY_NONE;
    bool tested = last != DAY_NONE && (sound == DAY_NONE || last >= sound);
    *from = tested ? last : sound;
    if (*from == DAY_NONE)
        return "";
    const char *words = tested                                      ? "Last tested"
                        : x->known != DAY_NONE && x->known == sound ? "Last known to be sound on"
                                                                    : "In service since";
    return arena_printf(j->arena, "%s %s", words, date_words(j, *from));
}

/* "due on 2028-04-14", or "due since 2021-05-03, overdue by 5.58 a on 2026-12-01". */
static const char *due_words(struct job *j, double due)
{
    char late[32];
    double today = horizon_years(j->model->settings, j->date);
    const char *date = calendar_date(j, due);
    if (due >= today)
        return arena_printf(j->arena, "due on %s", date);
    return arena_printf(j->arena, "due since %s, overdue by %s a on %s", date,
                        number_text(late, today - due, STYLE_PLAIN), date_words(j, j->date));
}

static const char *next_words(struct job *j, const struct test *t, double first)
{
    bool planned = t->next != DAY_NONE;
    return arena_printf(j->arena, "%s %s",
                        planned ? "the next planned test is on" : "the next test is taken to be on",
                        calendar_date(j, first));
}

static void dated_test(struct job *j, const struct element *x, const char *last, day from,
                       double first)
{
    double due = horizon_years(j->model->settings, from) + expr_constant(x->test->every->expr);
    report_note(j->report, "tests", "%s, every %s: %s; %s.", last, every_words(j, x->test),
                due_words(j, due), next_words(j, x->test, first));
}

static void undated_test(struct job *j, const struct test *t)
{
    if (t->next != DAY_NONE)
        report_note(j->report, "tests",
                    "Tested every %s; no last test is known, and the next planned test is on %s: "
                    "it is taken as tested one interval before that, or at the start of the "
                    "horizon where that is earlier.",
                    every_words(j, t), date_words(j, t->next));
    else
        report_note(j->report, "tests",
                    "Tested every %s. No date of a test is known: it is taken as tested on the "
                    "first day of the horizon, together with all others whose dates are not known.",
                    every_words(j, t));
}

static void untested(struct job *j, const char *last, const struct element_exports *x)
{
    if (x->undetected == NODE_NONE)
        return;
    const char *but = x->revealed != NODE_NONE ? "only demands show its undetected failures"
                                               : "nothing shows its undetected failures";
    report_note(j->report, "tests", "No routine test is stated: %s.%s%s%s", but, *last ? " " : "",
                last, *last ? "." : "");
}

static void part_tests(struct job *j, const struct element *x, const struct element_exports *f)
{
    day from;
    const char *last = last_words(j, x, &from);
    if (!x->test)
        untested(j, last, f);
    else if (from == DAY_NONE)
        undated_test(j, x->test);
    else if (f->whole.timed)
        dated_test(j, x, last, from, f->whole.when.first);
}

/* --- the course --- */

enum {
    POINTS = 240, /* over the horizon, but for those at tests */
    TESTS = 200   /* that are drawn; the curve ends behind them */
};
static const double JUST_BEFORE = 1e-9; /* of an interval */

struct drawing {
    struct job *job;
    struct curve_line *line;
    const struct course *course;
    double x[5]; /* arguments, at the means of what is unknown */
};

static void draw_point(struct drawing *d, double t, double at)
{
    curve_add_point(d->job->report, d->line, calendar_year(d->job, t),
                    course_at(d->course, d->x, at));
}

/* From one test to the next: enough points for the bend, the last one just before the test. */
static void draw_stretch(struct drawing *d, double from, double to, double step)
{
    size_t n = (size_t)ceil((to - from) / step);
    for (size_t i = 0; i < n; i++)
        draw_point(d, from + (to - from) * (double)i / (double)n,
                   from + (to - from) * (double)i / (double)n);
    draw_point(d, to, to - JUST_BEFORE * (to - from));
}

static double end_of_curve(const struct job *j, const struct course *c)
{
    double horizon = horizon_length(j->model->settings);
    double last = fmax(c->first, 0) + TESTS * c->every;
    return isfinite(c->first) && last < horizon ? last : horizon;
}

/* The first test at or behind the start of the horizon. */
static double test_from(const struct course *c, size_t k)
{
    double skipped = c->first < 0 ? ceil(-c->first / c->every) : 0;
    return c->first + (skipped + (double)k) * c->every;
}

static void draw_course(struct drawing *d)
{
    double end = end_of_curve(d->job, d->course), from = 0;
    double step = end / POINTS;
    for (size_t k = 0; from < end; k++) {
        double test = test_from(d->course, k);
        double to = test < end ? test : end;
        if (to > from)
            draw_stretch(d, from, to, step);
        from = to;
    }
}

/* The next test, where the curve is highest before it. */
static void mark_test(struct drawing *d, struct block *b)
{
    double first = d->course->first;
    if (!(first > 0) || first >= end_of_curve(d->job, d->course))
        return;
    double before = course_at(d->course, d->x, first * (1 - JUST_BEFORE));
    curve_add_mark(d->job->report, b,
                   arena_printf(d->job->arena, "next test %s", calendar_date(d->job, first)),
                   calendar_year(d->job, first), before);
}

static void part_course(struct job *j, const struct element_exports *x)
{
    struct report *r = j->report;
    if (!x->whole.timed)
        return;
    struct drawing d = {.job = j, .course = graph_course_of(j->figures->graph, x->whole.node)};
    const node_id *args = graph_args(j->figures->graph, x->whole.node);
    for (int i = 0; i < 5; i++)
        d.x[i] = means_value(j->figures->means, args[i]);
    struct block *b = report_curve(r, "course", "Probability of failure over the horizon");
    curve_set_x(r, b, "year", "Year", "", STYLE_YEAR);
    curve_set_y(r, b, "fails", "Fails", "", STYLE_PROBABILITY);
    d.line = curve_add_line(r, b, "Fails", "*");
    d.line->figure = figure_name(j->figures, j->arena, x->whole.course);
    draw_course(&d);
    mark_test(&d, b);
}

/* --- common causes --- */

static bool is_member(const struct common_cause *x, const char *element)
{
    for (size_t i = 0; i < x->of.n; i++)
        if (text_equal(x->of.at[i], element))
            return true;
    return false;
}

static bool shock_hits(const struct shock *s, const char *element)
{
    for (size_t i = 0; i < s->n; i++)
        if (text_equal(s->members[i], element))
            return true;
    return false;
}

static const char *members_words(struct job *j, const struct shock *s)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < s->n; i++)
        text_printf(&t, "%s%s", i ? ", " : "", s->members[i]);
    return text_str(&t);
}

static const double NOTICED = 1.02; /* by how much the parts exceed the whole when it is said */

/* What schemes count of an element with common causes: itself alone, and each of these. */
struct counted {
    const char *cause, *words; /* cause: NULL, alone */
    figure_id fails;
};
struct counted_list ARRAY_BODY(struct counted);

static void count_shocks(struct job *j, const struct compiled *group, const char *element,
                         struct counted_list *out)
{
    const struct group_exports *x = group->exports;
    for (size_t i = 0; i < x->n; i++)
        if (shock_hits(&x->shocks[i], element))
            *array_push(j->arena, out) = (struct counted){
                group->id, members_words(j, &x->shocks[i]), x->shocks[i].fails.fails};
}

static void cause_row(struct job *j, struct block *b, const struct counted *x, double sum)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, x->words);
    row_text(r, row, x->cause ? x->cause : "");
    row_text(r, row, x->cause ? show_name(j, x->cause) : "by itself");
    show_number(j, row, x->fails);
    row_number(r, row, sum == 0 ? 0 : figure_value(j->figures, x->fails) / sum, NULL);
}

struct causes ARRAY_BODY(const struct compiled *);

static ohmen_status compile_causes(struct job *j, const char *element, struct causes *out,
                                   ohmen_error *e)
{
    const struct objects *all = &j->model->of[KIND_COMMON_CAUSE];
    for (size_t i = 0; i < all->n; i++) {
        const struct compiled *c;
        if (!is_member(all->at[i]->data, element))
            continue;
        ohmen_error why = OHMEN_ERROR_INIT;
        ohmen_status status = figures_compile(j->figures, j->base, all->at[i]->id, &c, &why);
        if (status == OHMEN_OK)
            *array_push(j->arena, out) = c;
        else
            status = job_leave_out(j, all->at[i]->id, status, &why, e);
        if (status != OHMEN_OK)
            return status;
    }
    return OHMEN_OK;
}

static void causes_table(struct job *j, const struct counted_list *all, double sum)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "common-causes", "Failures by itself and with others");
    block_column(r, b, "members", "Fails", "", STYLE_PLAIN);
    block_column(r, b, "cause", "Common cause", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "probability", "Mean", "", STYLE_PROBABILITY);
    block_column(r, b, "share", "Share", "%", STYLE_PERCENT)->keep = 2;
    for (size_t i = 0; i < all->n; i++)
        cause_row(j, b, &all->at[i], sum);
}

/* The figures of its common causes, and of itself alone where something calls on it, have been
 * evaluated. */
static void part_causes(struct job *j, const struct causes *causes, const struct compiled *c)
{
    struct counted_list all = {0};
    double sum = 0;
    figure_id alone = compiled_figure(j->figures, c, PROPERTY_FAILS, "alone", NULL);
    if (causes->n && alone != FIGURE_NONE)
        *array_push(j->arena, &all) = (struct counted){NULL, c->id, alone};
    for (size_t i = 0; i < causes->n; i++)
        count_shocks(j, causes->at[i], c->id, &all);
    if (all.n == 0)
        return;
    for (size_t i = 0; i < all.n; i++)
        sum += figure_value(j->figures, all.at[i].fails);
    causes_table(j, &all, sum);
    if (sum > NOTICED * figure_value(j->figures, c->main))
        report_note(
            j->report, "common-causes-note",
            "A common cause that no test of this element finds, such as a wrong setting, lasts "
            "longer than its other failures: these parts add up to more than what is said of "
            "the element as a whole above.");
}

/* --- hazards in which it matters --- */

static ohmen_status compile_users(struct job *j, const char *element, struct hazards *out,
                                  ohmen_error *e)
{
    struct hazard_list users = {0};
    ohmen_status status = OHMEN_OK;
    hazards_that_use(j, element, &users);
    for (size_t i = 0; status == OHMEN_OK && i < users.n; i++) {
        const struct compiled *c;
        ohmen_error why = OHMEN_ERROR_INIT;
        job_progress(j, "computing", i, users.n);
        status = figures_compile(j->figures, j->base, users.at[i]->id, &c, &why);
        if (status == OHMEN_OK)
            *array_push(j->arena, out) = c;
        else
            status = job_leave_out(j, users.at[i]->id, status, &why, e);
    }
    return status;
}

/* What the element does in one hazard. */
struct part_in {
    const struct compiled *hazard;
    const char *event; /* "VH-51A", "VH-51A, VH-51B together" */
    double share, vesely, achievement;
    bool alone; /* it is enough to leave the fault uncleared */
};
struct parts_in ARRAY_BODY(struct part_in);

static bool is_single(const struct cut_sets *singles, const struct event *e)
{
    for (size_t i = 0; i < singles->n; i++)
        if (text_equal(singles->at[i].events[0]->name, e->name))
            return true;
    return false;
}

static void find_in_hazard(struct job *j, struct arena *scratch, const struct compiled *hazard,
                           const char *element, struct parts_in *out)
{
    struct effects all;
    struct cut_sets singles;
    importance_in_hazard(j->figures, scratch, hazard, &all);
    single_failures_of_hazard(j->figures, scratch, hazard, &singles);
    for (size_t i = 0; i < all.n; i++) {
        const struct effect *x = &all.at[i];
        bool alone = is_single(&singles, &x->event);
        if (event_hits(&x->event, element) && (x->gain != 0 || alone))
            *array_push(j->arena, out) =
                (struct part_in){.hazard = hazard,
                                 .event = event_words(j, &x->event),
                                 .share = x->share,
                                 .vesely = effect_fussell_vesely(&all, x),
                                 .achievement = effect_achievement(&all, x),
                                 .alone = alone};
    }
}

static void find_all(struct job *j, const struct hazards *users, const char *element,
                     struct parts_in *out)
{
    for (size_t i = 0; i < users->n; i++) {
        struct arena *scratch = arena_child(j->arena);
        find_in_hazard(j, scratch, users->at[i], element, out);
        arena_free(scratch);
    }
}

static void matters_row(struct job *j, struct block *b, const struct part_in *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, x->hazard->id);
    row_text(r, row, object_name(x->hazard->object));
    row_text(r, row, x->event);
    row_number(r, row, x->vesely, NULL);
    row_number(r, row, x->achievement, NULL);
    row_number(r, row, x->share, NULL);
    row_yes(r, row, x->alone);
}

static void matters_table(struct job *j, const struct parts_in *parts)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "matters", "Hazards in which it matters");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "event", "Fails", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "fussell-vesely", "Fussell-Vesely", "%", STYLE_PERCENT);
    block_column(r, b, "achievement", "Achievement worth", "", STYLE_RATIO)->keep = 1;
    block_column(r, b, "risk", "Risk through it", unit_per_year(j), STYLE_MONEY);
    block_column(r, b, "alone", "Enough alone", "", STYLE_PLAIN)->keep = 3;
    for (size_t i = 0; i < parts->n; i++)
        matters_row(j, b, &parts->at[i]);
    report_note(r, "matters-note",
                "Risk through it: what goes away if it never fails by that event, at the means of "
                "what is unknown. Enough alone: it leaves the fault uncleared although every "
                "function sees it and all else works.");
}

/* By falling risk through it; ties by hazard and event. */
static int by_share(const void *p, const void *q)
{
    const struct part_in *a = p, *b = q;
    if (a->share != b->share)
        return a->share > b->share ? -1 : 1;
    int order = text_compare(a->hazard->id, b->hazard->id);
    return order ? order : text_compare(a->event, b->event);
}

static void single_note(struct job *j, const struct parts_in *parts)
{
    struct text t;
    const char *before = "";
    text_init(&t, j->arena);
    for (size_t i = 0; i < parts->n; i++) {
        const char *id = parts->at[i].hazard->id;
        if (!parts->at[i].alone || text_equal(id, before))
            continue;
        text_printf(&t, "%s%s", t.n ? ", " : "", id);
        before = id;
    }
    if (t.n)
        report_note(j->report, "single-failures",
                    "A single point of failure: it alone can leave these uncleared: %s.",
                    text_str(&t));
}

static void part_matters(struct job *j, const struct hazards *users, const char *element)
{
    struct parts_in parts = {0};
    find_all(j, users, element, &parts);
    if (parts.n == 0) {
        report_note(j->report, "matters-nowhere", "%s",
                    users->n ? "It has no effect on the risk of any hazard."
                             : "No hazard calls on it.");
        return;
    }
    single_note(j, &parts);
    qsort(parts.at, parts.n, sizeof *parts.at, by_share);
    matters_table(j, &parts);
}

/* --- the page --- */

/* What it does with others and in hazards. */
static ohmen_status part_surroundings(struct job *j, const struct compiled *c, ohmen_error *e)
{
    struct hazards users = {0};
    struct causes causes = {0};
    ohmen_error why = OHMEN_ERROR_INIT;
    ohmen_status status = compile_causes(j, c->id, &causes, e);
    if (status == OHMEN_OK)
        status = compile_users(j, c->id, &users, e);
    if (status != OHMEN_OK)
        return status;
    status = figures_evaluate(j->figures, &why);
    if (status != OHMEN_OK)
        return job_leave_out(j, c->id, status, &why, e);
    part_causes(j, &causes, c);
    part_matters(j, &users, c->id);
    return OHMEN_OK;
}

static ohmen_status part_element_figures(struct job *j, const struct compiled *c, ohmen_error *e)
{
    struct contributions parts;
    element_contributions(j->figures, c, &parts);
    ohmen_status status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    part_contributions(j, c, &parts);
    show_figures_table(j, c);
    part_tests(j, c->object->data, c->exports);
    part_course(j, c->exports);
    return part_surroundings(j, c, e);
}

ohmen_status show_element(struct job *j, const struct object *o, const struct compiled *c,
                          ohmen_error *e)
{
    part_unwanted(j, o);
    return c ? part_element_figures(j, c, e) : OHMEN_OK;
}
