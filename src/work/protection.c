/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What protection hinges on: the chapter as a whole, importance, single points of failure, common
 * causes, and the command that prints it alone. Owns nothing. */
#include "work/protection.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "figure/weakness.h"

/* Rows of the table of importance. */
enum { MOST_IMPORTANT = 15 };

/* --- what it needs --- */

static const struct hazard_exports *exports_of(const struct compiled *hazard)
{
    return hazard->exports;
}

static void mark_events(struct job *j, const struct hazard_exports *x, struct strmap *used)
{
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit)
            mark_events(j, exports_of(x->states[i].unit), used);
    for (size_t i = 0; i < x->n_events; i++)
        if (x->events[i].kind == EVENT_ELEMENT)
            strmap_set(j->arena, used, x->events[i].id, (void *)used);
}

ohmen_status protection_compile(struct job *j, const struct hazards *h, struct protection *p,
                                ohmen_error *e)
{
    struct strmap used = {0};
    const struct objects *all = &j->model->of[KIND_ELEMENT];
    *p = (struct protection){.hazards = h};
    for (size_t i = 0; i < h->n; i++)
        mark_events(j, exports_of(h->at[i]), &used);
    for (size_t i = 0; i < all->n; i++) {
        const struct compiled *c;
        if (!strmap_has(&used, all->at[i]->id))
            continue;
        ohmen_status status = figures_compile(j->figures, j->base, all->at[i]->id, &c, e);
        if (status != OHMEN_OK)
            return status;
        *array_push(j->arena, &p->elements) = c;
        if (((const struct element_exports *)c->exports)->tested)
            upkeep_of(j->figures, c, array_push(j->arena, &p->tested));
    }
    figures_total(j->figures, h->n, h->at);
    return OHMEN_OK;
}

/* --- shared --- */

void protection_probability(struct job *j, struct row *row, figure_id id)
{
    if (id == FIGURE_NONE)
        row_empty(j->report, row);
    else
        row_number(j->report, row, figure_value(j->figures, id),
                   figure_name(j->figures, j->arena, id));
}

const char *protection_name(struct job *j, const char *id)
{
    const struct object *o = model_find(j->model, id);
    return o ? object_name(o) : "";
}

double protection_share(const struct effects *in, enum event_kind kind, const char *id)
{
    double sum = 0;
    for (size_t i = 0; i < in->n; i++)
        if (in->at[i].event.kind == kind && text_equal(in->at[i].event.id, id))
            sum += in->at[i].share;
    return sum;
}

figure_id protection_fails(const struct protection *p, const char *element)
{
    for (size_t i = 0; i < p->elements.n; i++)
        if (text_equal(p->elements.at[i]->id, element))
            return p->elements.at[i]->main;
    return FIGURE_NONE;
}

const char *protection_list(struct arena *a, size_t n, const char *const *words)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++)
        text_printf(&t, "%s%s", i == 0 ? "" : i + 1 == n ? " and " : ", ", words[i]);
    return text_str(&t);
}

/* --- events --- */

/* The shock of an event in the base, or NULL. */
static const struct shock *shock_of(struct job *j, const struct event *e)
{
    const struct compiled *c;
    if (figures_compile(j->figures, j->base, e->id, &c, NULL) != OHMEN_OK)
        return NULL;
    const struct group_exports *x = c->exports;
    for (size_t i = 0; i < x->n; i++)
        if (text_equal(x->shocks[i].name, e->name))
            return &x->shocks[i];
    return NULL;
}

static const char *members_words(struct job *j, const struct event *e)
{
    const struct shock *s = shock_of(j, e);
    return s ? protection_list(j->arena, s->n, s->members) : e->name;
}

/* "BAT in H-BUS": an element that a fault puts out of action; others by their ids. */
static const char *event_id(struct job *j, const struct effect *x)
{
    if (x->event.kind == EVENT_DISABLED)
        return arena_printf(j->arena, "%s in %s", x->event.id, x->hazard);
    return x->event.id;
}

/* "Relay of incomer 1, by itself": what an event is, beside its id. */
static const char *event_words(struct job *j, const struct effect *x)
{
    const struct event *e = &x->event;
    const char *name = protection_name(j, e->id);
    const char *gap = *name ? ", " : "";
    if (e->kind == EVENT_SHOCK)
        return arena_printf(j->arena, "%s%s%s together", name, *name ? ": " : "",
                            members_words(j, e));
    if (e->kind == EVENT_DISABLED)
        return arena_printf(j->arena, "%s%sput out of action", name, gap);
    if (!text_equal(e->name, e->id))
        return arena_printf(j->arena, "%s%sby itself", name, gap);
    return name;
}

/* --- 1. importance --- */

static struct block *importance_table(struct job *j)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "importance", NULL);
    block_column(r, b, "element", "Element", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "fails", "Fails", "", STYLE_PROBABILITY)->keep = 5;
    block_column(r, b, "hazards", "Hazards", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "risk", "Risk through it", unit_per_year(j), STYLE_MONEY)->keep = 4;
    block_column(r, b, "fussell-vesely", "Fussell-Vesely", "%", STYLE_PERCENT);
    block_column(r, b, "achievement-worth", "Achievement worth", "", STYLE_RATIO)->keep = 5;
    block_column(r, b, "reduction-worth", "Reduction worth", "", STYLE_RATIO)->keep = 1;
    return b;
}

static void importance_row(struct job *j, struct block *b, const struct protection *p,
                           const struct effect *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, event_id(j, x));
    row_text(r, row, event_words(j, x));
    protection_probability(j, row, x->event.fails.fails);
    row_count(r, row, x->n_hazards);
    row_number(r, row, x->share, NULL);
    row_number(r, row, effect_fussell_vesely(&p->all, x), NULL);
    row_number(r, row, effect_achievement(&p->all, x), NULL);
    if (isfinite(effect_reduction(&p->all, x)))
        row_number(r, row, effect_reduction(&p->all, x), NULL);
    else
        row_empty(r, row); /* nothing would remain */
}

static size_t carrying(const struct effects *all)
{
    size_t n = 0;
    while (n < all->n && all->at[n].share > 0)
        n++;
    return n;
}

static void part_importance(struct job *j, const struct protection *p, int level)
{
    size_t n = carrying(&p->all), shown = n < MOST_IMPORTANT ? n : MOST_IMPORTANT;
    if (n == 0)
        return;
    report_heading(j->report, level, "What the risk hinges on");
    report_note(
        j->report, "importance-note",
        "%s Risk through it: what would fall away if it never failed; Fussell-Vesely: the same as "
        "a "
        "share of the risk of all hazards here, %s (what several failures cause together counts "
        "for each). Achievement worth: how many times as high the risk is if it is sure to fail; "
        "reduction worth: how many times as low if it never fails. At the means of what is "
        "unknown.",
        n > shown
            ? arena_printf(j->arena, "The first %zu of %zu failures that carry risk.", shown, n)
            : "All failures that carry risk.",
        money_text(j->arena, p->all.whole, unit_per_year(j)));
    struct block *b = importance_table(j);
    for (size_t i = 0; i < shown; i++)
        importance_row(j, b, p, &p->all.at[i]);
}

/* --- 2. single points of failure --- */

/* One event over all hazards in which it is enough. */
struct point {
    struct effect event; /* for its words */
    double probability, frequency;
    ARRAY(const char *) hazards;
};
struct points ARRAY_BODY(struct point);

static struct point *point_of(struct job *j, struct points *all, const struct single *s)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].event.event.name, s->event.name))
            return &all->at[i];
    struct point *p = array_push(j->arena, all);
    *p = (struct point){.event = {.event = s->event}, .probability = s->probability};
    return p;
}

static void find_points(struct job *j, const struct protection *p, struct points *out)
{
    for (size_t i = 0; i < p->hazards->n; i++) {
        struct singles singles = {0};
        singles_of_hazard(j->figures, j->arena, p->hazards->at[i], &singles);
        for (size_t k = 0; k < singles.n; k++) {
            struct point *x = point_of(j, out, &singles.at[k]);
            bool listed = x->hazards.n && x->hazards.at[x->hazards.n - 1] == singles.at[k].hazard;
            x->frequency += singles.at[k].frequency;
            if (!listed)
                *array_push(j->arena, &x->hazards) = singles.at[k].hazard;
        }
    }
}

static int by_frequency(const void *p, const void *q)
{
    const struct point *a = p, *b = q;
    if (a->frequency != b->frequency)
        return a->frequency > b->frequency ? -1 : 1;
    return text_compare(a->event.event.name, b->event.event.name);
}

static struct block *points_table(struct job *j)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "single-points", NULL);
    block_column(r, b, "element", "Element", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "fails", "Fails", "", STYLE_PROBABILITY)->keep = 2;
    block_column(r, b, "hazards", "Hazards", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "frequency", "Fault stays", "1/a", STYLE_FREQUENCY);
    return b;
}

static void part_points(struct job *j, const struct protection *p, int level)
{
    struct report *r = j->report;
    struct points all = {0};
    find_points(j, p, &all);
    if (all.n == 0)
        return;
    if (all.n > 1)
        qsort(all.at, all.n, sizeof *all.at, by_frequency);
    report_heading(r, level, "Single points of failure");
    report_note(r, "single-points-note",
                "The failure of one of these alone leaves a fault uncleared in the hazards named. "
                "Fault stays: how often such a fault meets that failure.");
    struct block *b = points_table(j);
    for (size_t i = 0; i < all.n; i++) {
        const struct point *x = &all.at[i];
        struct row *row = block_row(r, b);
        row_text(r, row, x->event.event.id);
        row_text(r, row, event_words(j, &x->event));
        protection_probability(j, row, x->event.event.fails.fails);
        row_text(r, row, protection_list(j->arena, x->hazards.n, x->hazards.at));
        row_number(r, row, x->frequency, NULL);
    }
}

/* --- 7. common causes --- */

static void beta_cell(struct job *j, struct row *row, const char *group)
{
    const struct compiled *c;
    figure_id id = FIGURE_NONE;
    if (figures_compile(j->figures, j->base, group, &c, NULL) == OHMEN_OK)
        id = compiled_figure(j->figures, c, PROPERTY_BETA, NULL, NULL);
    protection_probability(j, row, id);
}

static struct block *common_table(struct job *j)
{
    struct report *r = j->report;
    report_note(r, "common-causes-note",
                "What makes these elements fail at once, beside their failures one by one.");
    struct block *b = report_table(r, "common-causes", NULL);
    block_column(r, b, "group", "Group", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "members", "Fail together", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "beta", "Beta", "%", STYLE_PERCENT)->keep = 2;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY)->keep = 4;
    block_column(r, b, "risk", "Risk through it", unit_per_year(j), STYLE_MONEY);
    return b;
}

static void part_common(struct job *j, const struct protection *p, int level)
{
    struct report *r = j->report;
    struct block *b = NULL;
    for (size_t i = 0; i < p->all.n; i++) {
        const struct effect *x = &p->all.at[i];
        if (x->event.kind != EVENT_SHOCK)
            continue;
        if (!b) {
            report_heading(r, level, "Common causes");
            b = common_table(j);
        }
        struct row *row = block_row(r, b);
        row_text(r, row, x->event.id);
        row_text(r, row, protection_name(j, x->event.id));
        row_text(r, row, members_words(j, &x->event));
        beta_cell(j, row, x->event.id);
        protection_probability(j, row, x->event.fails.fails);
        row_number(r, row, x->share, NULL);
    }
}

/* --- the chapter --- */

void part_protection(struct job *j, struct protection *p, int level)
{
    const struct hazards *h = p->hazards;
    size_t before = j->report->blocks.n;
    p->each = NEW_ARRAY(j->arena, h->n + 1, struct effects);
    importance_in_each(j->figures, j->arena, h->n, h->at, &p->all, p->each);
    part_importance(j, p, level);
    part_points(j, p, level);
    part_unbacked(j, p, level);
    part_tests(j, p, level);
    part_taken_away(j, p, level);
    part_unwanted(j, p, level);
    part_common(j, p, level);
    if (j->report->blocks.n == before)
        report_note(j->report, "protection-none",
                    "No hazard here depends on whether protection works.");
}

static ohmen_status run_protection(struct job *j, void *ctx, ohmen_error *e)
{
    struct hazards h = {0};
    struct protection p;
    (void)ctx;
    ohmen_status status = job_load_figures(j, e);
    if (status == OHMEN_OK)
        status = job_compile_hazards(j, &h, e);
    if (status == OHMEN_OK)
        status = protection_compile(j, &h, &p, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status != OHMEN_OK)
        return status;
    report_heading(j->report, 1, "What protection hinges on");
    part_not_computed(j);
    part_protection(j, &p, 2);
    report_note(j->report, "perspective", "Damage counted: %s.", perspective_words(j));
    return OHMEN_OK;
}

ohmen_status ohmen_protection(ohmen_register *r, const ohmen_query *q, ohmen_report **out,
                              ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_protection, NULL, out, e);
}
