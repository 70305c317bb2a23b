/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Choices that come again: what to do in which condition and when, as a picture, as a table of when
 * to act, and in a sentence. Owns nothing.
 *
 * A condition is what is seen or believed at a choice, with what is in service then. Where there
 * are more of them than a page takes, those are kept that are most probable to be met. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "work/branching.h"

enum {
    MOST_UNMET = 12,      /* conditions, with such as are never met */
    MOST_CONDITIONS = 24, /* of a picture */
    MOST_RUNS = 60,       /* of the table */
    MOST_SAID = 4         /* conditions in a sentence */
};

struct situation {
    const char *name;
    size_t *at;   /* by stage: the point + 1; 0: it cannot be met then */
    size_t first; /* stage */
    double reach; /* greatest of its points */
};

struct situations ARRAY_BODY(struct situation);

/* Years in a row in which the same branch is best in a condition. */
struct run {
    const struct situation *condition;
    size_t from, to; /* stages */
    const char *branch;
};

struct telling {
    struct job *j;
    const struct weighing *w;
    const struct branching *b;
    struct situations all;
    size_t left_out;
    ARRAY(struct run) runs;
};

/* --- conditions --- */

static size_t stage_of(const struct branching *b, const struct point *p)
{
    return (size_t)floor(p->time / b->every + 0.5);
}

/* What stands behind the stage in its path: unlike its state that is its own. */
static const char *condition_of(const struct point *p)
{
    const char *slash = strchr(p->path, '/');
    return slash ? slash + 1 : p->state;
}

static struct situation *condition_named(struct telling *t, const char *name)
{
    for (size_t i = 0; i < t->all.n; i++)
        if (text_equal(t->all.at[i].name, name))
            return &t->all.at[i];
    struct situation *c = array_push(t->j->arena, &t->all);
    *c = (struct situation){.name = name, .first = SIZE_MAX};
    c->at = NEW_ARRAY(t->j->arena, t->b->n_stages, size_t);
    return c;
}

static int by_first_and_name(const void *p, const void *q)
{
    const struct situation *x = p, *y = q;
    if (x->first != y->first)
        return x->first < y->first ? -1 : 1;
    return text_compare(x->name, y->name);
}

static int by_reach(const void *p, const void *q)
{
    const struct situation *x = p, *y = q;
    if (x->reach != y->reach)
        return x->reach > y->reach ? -1 : 1;
    return by_first_and_name(p, q);
}

/* Of many those that are never met when the policy is followed, then the least probable ones. */
static void leave_out(struct telling *t)
{
    size_t n = t->all.n;
    qsort(t->all.at, n, sizeof *t->all.at, by_reach);
    while (n > MOST_UNMET && !(array_last(&t->all)->reach > 0))
        t->all.n--;
    if (t->all.n > MOST_CONDITIONS)
        t->all.n = MOST_CONDITIONS;
    t->left_out = n - t->all.n;
}

static void find_conditions(struct telling *t)
{
    for (size_t i = 0; i < t->b->points.n; i++) {
        const struct point *p = &t->b->points.at[i];
        if (!p->is_stage)
            continue;
        struct situation *c = condition_named(t, condition_of(p));
        size_t stage = stage_of(t->b, p);
        c->at[stage] = i + 1;
        c->first = stage < c->first ? stage : c->first;
        c->reach = fmax(c->reach, p->reach);
    }
    leave_out(t);
    qsort(t->all.at, t->all.n, sizeof *t->all.at, by_first_and_name);
}

static const struct point *point_in(const struct telling *t, const struct situation *c,
                                    size_t stage)
{
    return c->at[stage] ? &t->b->points.at[c->at[stage] - 1] : NULL;
}

static const char *best_label(const struct point *p)
{
    return p->branches[p->best].label;
}

static void find_runs(struct telling *t)
{
    for (size_t i = 0; i < t->all.n; i++) {
        struct run *last = NULL;
        for (size_t s = 0; s < t->b->n_stages; s++) {
            const struct point *p = point_in(t, &t->all.at[i], s);
            if (p && last && text_equal(last->branch, best_label(p))) {
                last->to = s;
                continue;
            }
            last = NULL;
            if (!p)
                continue;
            last = array_push(t->j->arena, &t->runs);
            *last = (struct run){&t->all.at[i], s, s, best_label(p)};
        }
    }
}

static struct telling telling_of(struct job *j, const struct weighing *w)
{
    struct telling t = {.j = j, .w = w, .b = w->branching};
    find_conditions(&t);
    find_runs(&t);
    return t;
}

/* --- the picture --- */

static bool does_nothing(const struct decision *d, const char *label)
{
    for (size_t i = 0; i < d->choose.n; i++)
        if (text_equal(d->choose.keys[i], label))
            return ((const struct list *)d->choose.at)[i].n == 0;
    return false;
}

static size_t action_named(const struct decision *d, const char *label)
{
    size_t i = 0;
    while (i < d->choose.n && !text_equal(d->choose.keys[i], label))
        i++;
    return i;
}

static void picture(struct telling *t)
{
    struct report *r = t->j->report;
    const struct decision *d = t->w->decision;
    struct block *b = report_policy(r, "policy", "What to do, by condition and time");
    for (size_t i = 0; i < d->choose.n; i++)
        policy_add_action(r, b, d->choose.keys[i], does_nothing(d, d->choose.keys[i]));
    for (size_t s = 0; s < t->b->n_stages; s++)
        policy_add_time(r, b, t->b->stages[s]);
    for (size_t i = 0; i < t->all.n; i++)
        policy_add_condition(r, b, t->all.at[i].name);
    for (size_t i = 0; i < t->all.n; i++)
        for (size_t s = 0; s < t->b->n_stages; s++) {
            const struct point *p = point_in(t, &t->all.at[i], s);
            if (p)
                policy_set(r, b, i, s, action_named(d, best_label(p)), p->reach,
                           p->reach_figure == FIGURE_NONE
                               ? NULL
                               : figure_name(t->j->figures, t->j->arena, p->reach_figure));
        }
}

/* --- when to act --- */

static bool is_in(const struct run *x, size_t point)
{
    for (size_t s = x->from; s <= x->to; s++)
        if (x->condition->at[s] == point + 1)
            return true;
    return false;
}

/* The probability of ever being in the condition within these years: of coming to one of its points
 * for the first time. */
static double ever(const struct telling *t, const struct run *x)
{
    const struct branching *b = t->b;
    double *before = NEW_ARRAY(t->j->arena, b->points.n, double), sum = 0;
    before[0] = 1;
    for (size_t i = b->points.n; i > 0; i--) {
        size_t at = b->order[i - 1];
        const struct point *p = &b->points.at[at];
        bool inside = p->is_stage && is_in(x, at);
        if (inside)
            sum += before[at];
        for (size_t k = 0; !inside && k < p->n; k++)
            if (p->kind != POINT_CHOOSE || k == p->best)
                before[p->branches[k].to] += before[at] * p->branches[k].probability;
    }
    return sum;
}

static void run_row(struct telling *t, struct block *b, const struct run *x)
{
    struct report *r = t->j->report;
    struct row *row = block_row(r, b);
    row_text(r, row, x->condition->name);
    row_text(r, row, t->b->stages[x->from]);
    row_text(r, row, t->b->stages[x->to]);
    row_text(r, row, x->branch);
    row_number(r, row, ever(t, x), NULL);
}

static void when_to_act(struct telling *t)
{
    struct report *r = t->j->report;
    struct block *b = report_table(r, "when", "When to act");
    block_column(r, b, "condition", "Condition", "", STYLE_PLAIN);
    block_column(r, b, "from", "From", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "until", "Until", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "branch", "Do", "", STYLE_PLAIN);
    block_column(r, b, "ever", "Ever there", "%", STYLE_PERCENT);
    size_t n = t->runs.n < MOST_RUNS ? t->runs.n : MOST_RUNS;
    for (size_t i = 0; i < n; i++)
        run_row(t, b, &t->runs.at[i]);
    if (t->runs.n > n)
        report_note(r, "when-more", "%zu more rows are not listed here.", t->runs.n - n);
}

void part_policy(struct job *j, const struct weighing *w)
{
    struct telling t = telling_of(j, w);
    picture(&t);
    if (t.left_out)
        report_note(
            j->report, "policy-more",
            "%zu more conditions are not shown, which are never met when this is followed, or "
            "are the least probable.",
            t.left_out);
    when_to_act(&t);
    report_note(j->report, "when-words",
                "Ever there: the probability of being in that condition at a choice within these "
                "years at least once, when the best branch is taken each time.");
}

/* --- in a sentence --- */

/* "renew until 2041, then keep" */
static void say_condition(const struct telling *t, struct text *out, const struct situation *c)
{
    bool first = true;
    for (size_t i = 0; i < t->runs.n; i++) {
        const struct run *x = &t->runs.at[i];
        if (x->condition != c)
            continue;
        bool last = i + 1 == t->runs.n || t->runs.at[i + 1].condition != c;
        text_printf(out, "%s%s", first ? "" : ", then ", x->branch);
        if (!last)
            text_printf(out, " until %s", t->b->stages[x->to]);
        first = false;
    }
}

/* At the first choice, by what is seen there. */
static const char *now_sentence(const struct telling *t)
{
    struct text out;
    text_init(&out, t->j->arena);
    for (size_t i = 0; i < t->all.n; i++) {
        const struct point *p = point_in(t, &t->all.at[i], 0);
        if (p)
            text_printf(&out, "%s%s: %s", out.n ? "; when " : "Now, when ", t->all.at[i].name,
                        best_label(p));
    }
    return out.n ? arena_printf(t->j->arena, "%s. The table of when to act has what follows.",
                                text_str(&out))
                 : "";
}

const char *policy_sentence(struct job *j, const struct weighing *w)
{
    struct telling t = telling_of(j, w);
    struct text out;
    text_init(&out, j->arena);
    if (t.all.n > MOST_SAID || t.left_out)
        return now_sentence(&t);
    for (size_t i = 0; i < t.all.n; i++) {
        text_printf(&out, "%s%s: ", i ? ". When " : "When ", t.all.at[i].name);
        say_condition(&t, &out, &t.all.at[i]);
    }
    text_add(&out, t.all.n ? "." : "");
    return text_str(&out);
}
