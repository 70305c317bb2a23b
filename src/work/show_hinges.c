/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a risk or a scheme hinges on: importance of events, minimal cut sets, single failures. */
#include <math.h>
#include <string.h>

#include "work/show.h"

/* Events and sets that the page has room for. */
enum { HINGES = 10 };

/* --- events in words --- */

/* Members of a shock, whose name is "GROUP.A.B": "A, B". */
static const char *shock_members(struct job *j, const struct event *e)
{
    struct text t;
    text_init(&t, j->arena);
    for (const char *s = e->name + strlen(e->id) + 1; *s; s++)
        if (*s == '.')
            text_add(&t, ", ");
        else
            text_byte(&t, *s);
    return text_str(&t);
}

const char *event_words(struct job *j, const struct event *e)
{
    switch (e->kind) {
    case EVENT_SHOCK: return arena_printf(j->arena, "%s together", shock_members(j, e));
    case EVENT_DISABLED: return arena_printf(j->arena, "%s put out of action", e->id);
    case EVENT_ASSERTS: return arena_printf(j->arena, "%s operates without need", e->id);
    case EVENT_ELEMENT:
    case EVENT_SEES: break;
    }
    return e->id;
}

bool event_hits(const struct event *e, const char *element)
{
    if (e->kind != EVENT_SHOCK)
        return e->kind != EVENT_SEES && text_equal(e->id, element);
    size_t n = strlen(element);
    for (const char *s = strchr(e->name, '.'); s; s = strchr(s + 1, '.'))
        if (strncmp(s + 1, element, n) == 0 && (s[n + 1] == '.' || s[n + 1] == '\0'))
            return true;
    return false;
}

/* What the words do not say: the name of the element, or of the common cause. */
static const char *event_name(struct job *j, const struct event *e)
{
    const char *name = show_name(j, e->id);
    return e->kind == EVENT_SHOCK && !*name ? e->id : name;
}

/* --- importance --- */

static void probability_cell(struct job *j, struct row *row, const struct compiled *u,
                             const struct event *e)
{
    figure_id id = e->kind == EVENT_DISABLED
                       ? compiled_figure(j->figures, u, PROPERTY_SHARE, e->id, "disabled")
                       : e->fails.fails;
    if (id == FIGURE_NONE)
        row_empty(j->report, row);
    else
        show_number(j, row, id);
}

/* Infinite where nothing is left without the event. */
static void reduction_cell(struct job *j, struct row *row, double x)
{
    if (isfinite(x))
        row_number(j->report, row, x, NULL);
    else
        row_text(j->report, row, "infinite");
}

static struct block *hinges_table(struct job *j, bool money)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "hinges", "What it hinges on");
    block_column(r, b, "event", "Fails", "", STYLE_PLAIN);
    block_column(r, b, "name", "What it is", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY)->keep = 5;
    block_column(r, b, "fussell-vesely", "Fussell-Vesely", "%", STYLE_PERCENT);
    block_column(r, b, "achievement", "Achievement worth", "", STYLE_RATIO)->keep = 4;
    block_column(r, b, "reduction", "Reduction worth", "", STYLE_RATIO)->keep = 2;
    if (money)
        block_column(r, b, "birnbaum", "Birnbaum", unit_per_year(j), STYLE_MONEY)->keep = 3;
    else
        block_column(r, b, "birnbaum", "Birnbaum", "", STYLE_PROBABILITY)->keep = 3;
    return b;
}

static void hinge_row(struct job *j, struct block *b, const struct compiled *u,
                      const struct effects *all, const struct effect *x)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, event_words(j, &x->event));
    row_text(r, row, event_name(j, &x->event));
    probability_cell(j, row, u, &x->event);
    row_number(r, row, effect_fussell_vesely(all, x), NULL);
    row_number(r, row, effect_achievement(all, x), NULL);
    reduction_cell(j, row, effect_reduction(all, x));
    row_number(r, row, x->gain, NULL);
}

static void hinges_note(struct job *j, size_t n, bool money)
{
    const char *what = money ? "risk" : "probability of failure";
    const char *more =
        n > HINGES
            ? arena_printf(j->arena, " The %d with the greatest share of %zu are shown.", HINGES, n)
            : "";
    report_note(j->report, "hinges-note",
                "Fussell-Vesely: the share of the %s that goes away if the event never happens. "
                "Achievement worth: by how much the %s is multiplied if it is certain. Reduction "
                "worth: by how much it is divided if it never happens. Birnbaum: the %s if it is "
                "certain less that if it never happens. All at the means of what is unknown.%s",
                what, what, what, more);
}

void part_hinges(struct job *j, const struct compiled *u, const struct effects *effects, bool money)
{
    size_t n = 0;
    for (size_t i = 0; i < effects->n; i++)
        n += effects->at[i].gain != 0;
    if (n == 0 || effects->whole == 0)
        return;
    struct block *b = hinges_table(j, money);
    for (size_t i = 0; i < effects->n && b->rows.n < HINGES; i++)
        if (effects->at[i].gain != 0)
            hinge_row(j, b, u, effects, &effects->at[i]);
    hinges_note(j, n, money);
}

/* --- minimal cut sets --- */

static const char *set_words(struct job *j, const struct cut_set *s)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < s->n; i++) {
        bool grouped = s->n > 1 && s->events[i]->kind != EVENT_ELEMENT;
        text_printf(&t, grouped ? "%s(%s)" : "%s%s", i ? " + " : "", event_words(j, s->events[i]));
    }
    return text_str(&t);
}

static void sets_table(struct job *j, const struct cut_sets *sets)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "cut-sets", "Minimal cut sets");
    block_column(r, b, "set", "Fail together", "", STYLE_PLAIN);
    block_column(r, b, "order", "Order", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY);
    for (size_t i = 0; i < sets->n; i++) {
        struct row *row = block_row(r, b);
        row_text(r, row, set_words(j, &sets->at[i]));
        row_count(r, row, sets->at[i].n);
        row_number(r, row, sets->at[i].probability, NULL);
    }
}

static const char *sets_number(struct job *j, const struct cut_sets *sets)
{
    if (sets->n_all == UINT64_MAX)
        return "There are more of them than can be counted";
    if (sets->n_all == 1)
        return "There is one";
    return arena_printf(j->arena, "There are %llu", (unsigned long long)sets->n_all);
}

static const char *what_sets_do(bool hazard)
{
    return hazard ? "leaves the fault uncleared although every function sees it"
                  : "keeps the scheme from operating";
}

/* Where there is no table: nothing need fail, nothing suffices, or nobody knows. Else NULL. */
static const char *no_sets(struct job *j, const struct cut_sets *sets, bool hazard)
{
    if (sets->too_many)
        return "They are too many to be found.";
    if (sets->n_all == 0)
        return arena_printf(j->arena, "No set of failures %s.", what_sets_do(hazard));
    if (sets->n && sets->at[0].n == 0)
        return arena_printf(j->arena,
                            "It takes no failure: what is stated %s even when all of it works.",
                            what_sets_do(hazard));
    return NULL;
}

void part_cut_sets(struct job *j, const struct cut_sets *sets, bool hazard)
{
    const char *none = no_sets(j, sets, hazard);
    if (none) {
        report_note(j->report, "no-cut-sets", "%s", none)->title = "Minimal cut sets";
        return;
    }
    sets_table(j, sets);
    report_note(j->report, "cut-sets-note",
                "Each is a set of failures that %s, and of which none can be spared. %s%s. A "
                "probability is the product of the mean probabilities of the members. The sets "
                "overlap%s: they do not add up to the probability %s.",
                what_sets_do(hazard), sets_number(j, sets),
                sets->n < sets->n_all
                    ? arena_printf(j->arena, ", of which the %zu most probable are shown", sets->n)
                    : "",
                hazard ? ", and functions that do not see the fault come on top" : "",
                hazard ? "of the event tree" : "that the scheme fails");
}

const char *single_words(struct job *j, const struct cut_sets *singles)
{
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; i < singles->n; i++) {
        const struct event *e = singles->at[i].events[0];
        const char *name = event_name(j, e);
        text_printf(&t, "%s%s", i ? "; " : "", event_words(j, e));
        if (*name && e->kind != EVENT_DISABLED)
            text_printf(&t, " (%s)", name);
    }
    return text_str(&t);
}
