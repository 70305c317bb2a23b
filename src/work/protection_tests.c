/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Routine tests: which are overdue, what an element is worth between them, and what no test
 * shows. Owns nothing. */
#include <stdlib.h>

#include "base/date.h"
#include "work/protection.h"

/* Columns of what a test says of itself. */
enum { BRIEF = 60 };

static const struct element *element_of(const struct upkeep *u)
{
    return u->element->object->data;
}

static const struct element_exports *exports_of(const struct compiled *element)
{
    return element->exports;
}

static void date_cell(struct job *j, struct row *row, day d)
{
    char text[DATE_TEXT];
    if (d == DAY_NONE)
        row_empty(j->report, row);
    else
        row_date(j->report, row, date_write(text, d));
}

/* --- remarks --- */

static void add_remark(struct text *t, const char *words)
{
    text_printf(t, "%s%s", t->n ? "; " : "", words);
}

/* "finds only 90 %" where the test says `key`. */
static void add_said(struct job *j, struct text *t, const struct upkeep *u, const char *key,
                     const char *before, const char *behind)
{
    const struct node *test = node_get(u->element->object->node, "test");
    const struct node *n = test ? node_get(test, key) : NULL;
    if (n)
        add_remark(t,
                   arena_printf(j->arena, "%s%s%s", before, node_says(j->arena, n, BRIEF), behind));
}

static const char *remarks(struct job *j, const struct upkeep *u)
{
    struct text t;
    char date[DATE_TEXT];
    text_init(&t, j->arena);
    if (!u->tested_then && u->last != DAY_NONE)
        add_remark(&t, arena_printf(j->arena, "no test since it was sound on %s",
                                    date_write(date, u->last)));
    if (u->plan_passed)
        add_remark(&t, "the planned test is taken as done");
    add_said(j, &t, u, "finds", "finds only ", " of failures");
    add_said(j, &t, u, "leaves-failed", "may leave it failed (", ")");
    add_said(j, &t, u, "trips", "may trip the plant (", ")");
    return text_str(&t);
}

/* --- the table --- */

static int by_due(const void *p, const void *q)
{
    const struct upkeep *a = p, *b = q;
    if (a->overdue != b->overdue)
        return a->overdue > b->overdue ? -1 : 1;
    if (a->due != b->due)
        return a->due < b->due ? -1 : 1;
    return text_compare(a->element->id, b->element->id);
}

static struct block *tests_table(struct job *j)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "tests", NULL);
    block_column(r, b, "element", "Element", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "last", "Last test", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "every", "Every", "a", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "due", "Due", "", STYLE_PLAIN)->keep = 6;
    block_column(r, b, "overdue", "Overdue", "a", STYLE_PLAIN);
    block_column(r, b, "planned", "Planned", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "today", "Fails today", "", STYLE_PROBABILITY);
    block_column(r, b, "mean", "Mean", "", STYLE_PROBABILITY)->keep = 7;
    block_column(r, b, "on-time", "On time", "", STYLE_PROBABILITY)->keep = 7;
    block_column(r, b, "remark", "Remark", "", STYLE_PLAIN)->keep = 5;
    return b;
}

static void test_row(struct job *j, struct block *b, const struct upkeep *u)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, u->element->id);
    row_text(r, row, object_name(u->element->object));
    date_cell(j, row, u->tested_then ? u->last : DAY_NONE);
    row_number(r, row, exports_of(u->element)->every, NULL);
    date_cell(j, row, u->due);
    if (u->overdue > 0)
        row_number(r, row, u->overdue, NULL);
    else
        row_empty(r, row);
    date_cell(j, row, element_of(u)->test->next);
    protection_probability(j, row, u->today);
    protection_probability(j, row, u->element->main);
    protection_probability(j, row, u->on_time);
    row_text(r, row, remarks(j, u));
}

/* "Of 3 routine tests with a date, 2 are overdue on 2026-12-01." */
static const char *overdue_words(struct job *j, size_t dated, size_t overdue)
{
    char date[DATE_TEXT];
    const char *none = overdue == 0 ? "not " : "";
    date_write(date, j->date);
    if (dated == 1)
        return arena_printf(j->arena, "The one routine test with a date is %soverdue on %s.", none,
                            date);
    if (overdue == 0)
        return arena_printf(j->arena, "Of %zu routine tests with a date none is overdue on %s.",
                            dated, date);
    return arena_printf(j->arena, "Of %zu routine tests with a date, %zu %s overdue on %s.", dated,
                        overdue, overdue == 1 ? "is" : "are", date);
}

static void tests_note(struct job *j, size_t dated, size_t overdue)
{
    report_note(j->report, "tests-note",
                "%s Fails: the probability that the element fails when it is called on, today, as "
                "a mean over the horizon, and with a test at every interval, on time.",
                overdue_words(j, dated, overdue));
}

/* --- sentences --- */

struct words ARRAY_BODY(const char *);

static void undated_note(struct job *j, const struct words *w)
{
    if (w->n == 0)
        return;
    report_note(j->report, "tests-undated",
                "No date of a test is known of %s: %s taken as tested%s on the first day of the "
                "horizon.",
                protection_list(j->arena, w->n, w->at), w->n == 1 ? "it is" : "they are",
                w->n == 1 ? "" : " together");
}

static void never_note(struct job *j, const struct words *w)
{
    if (w->n > 0)
        report_note(j->report, "never-shown",
                    "Nothing shows a failure of %s: there is neither a routine test nor a demand "
                    "that would.",
                    protection_list(j->arena, w->n, w->at));
}

void part_tests(struct job *j, struct protection *p, int level)
{
    struct words undated = {0}, never = {0};
    struct upkeep *dated = NEW_ARRAY(j->arena, p->tested.n + 1, struct upkeep);
    size_t n = 0, overdue = 0;
    for (size_t i = 0; i < p->tested.n; i++) {
        if (p->tested.at[i].due == DAY_NONE)
            *array_push(j->arena, &undated) = p->tested.at[i].element->id;
        else
            dated[n++] = p->tested.at[i];
        overdue += p->tested.at[i].overdue > 0;
    }
    for (size_t i = 0; i < p->elements.n; i++)
        if (upkeep_never_shown(p->elements.at[i]))
            *array_push(j->arena, &never) = p->elements.at[i]->id;
    if (p->tested.n + never.n == 0)
        return;
    report_heading(j->report, level, "Tests");
    if (n > 1)
        qsort(dated, n, sizeof *dated, by_due);
    if (n > 0) {
        tests_note(j, n, overdue);
        struct block *b = tests_table(j);
        for (size_t i = 0; i < n; i++)
            test_row(j, b, &dated[i]);
    }
    undated_note(j, &undated);
    never_note(j, &never);
}
