/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the faults themselves make of protection: breakers that nobody backs up, elements that a
 * fault puts out of action, operations that nobody called for. Owns nothing. */
#include <stdlib.h>
#include <string.h>

#include "figure/weakness.h"
#include "work/protection.h"

/* --- 3. breakers without breaker failure protection --- */

/* One breaker over all hazards in which nobody backs it up. */
struct lone {
    const char *breaker;
    struct text rows, remark;
    double risk;
    size_t hazard; /* the last one + 1 */
};
struct lones ARRAY_BODY(struct lone);

static struct lone *lone_of(struct job *j, struct lones *all, const char *breaker)
{
    for (size_t i = 0; i < all->n; i++)
        if (text_equal(all->at[i].breaker, breaker))
            return &all->at[i];
    struct lone *x = array_push(j->arena, all);
    *x = (struct lone){.breaker = breaker};
    text_init(&x->rows, j->arena);
    text_init(&x->remark, j->arena);
    return x;
}

/* "there is a row, but VH-BF is absent" */
static void add_remark(struct job *j, struct lone *x, const char *scheme)
{
    const struct scheme *s = model_get(j->model, KIND_SCHEME, scheme);
    bool absent = s && s->works->op == STRUCTURE_ABSENT;
    const char *words = arena_printf(j->arena, "there is a row, but %s %s", scheme,
                                     absent ? "is absent" : "can never operate");
    if (!strstr(text_str(&x->remark), words))
        text_printf(&x->remark, "%s%s", x->remark.n ? "; " : "", words);
}

static void add_lone(struct job *j, const struct protection *p, size_t hazard,
                     const struct unbacked *u, struct lones *all)
{
    struct lone *x = lone_of(j, all, u->breaker);
    if (x->hazard == hazard + 1) {
        text_printf(&x->rows, ", %s", u->row);
    } else {
        text_printf(&x->rows, "%s%s: %s", x->rows.n ? "; " : "", u->hazard, u->row);
        x->risk += protection_share(&p->each[hazard], EVENT_ELEMENT, u->breaker);
    }
    x->hazard = hazard + 1;
    if (u->absent)
        add_remark(j, x, u->absent);
}

static int by_risk(const void *p, const void *q)
{
    const struct lone *a = p, *b = q;
    if (a->risk != b->risk)
        return a->risk > b->risk ? -1 : 1;
    return text_compare(a->breaker, b->breaker);
}

static struct block *unbacked_table(struct job *j, bool remarks)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "no-breaker-failure", NULL);
    block_column(r, b, "breaker", "Breaker", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "rows", "Hazards and rows", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "fails", "Fails", "", STYLE_PROBABILITY)->keep = 3;
    block_column(r, b, "risk", "Risk through it", unit_per_year(j), STYLE_MONEY);
    if (remarks)
        block_column(r, b, "remark", "Remark", "", STYLE_PLAIN)->keep = 2;
    return b;
}

void part_unbacked(struct job *j, struct protection *p, int level)
{
    struct report *r = j->report;
    struct lones all = {0};
    bool remarks = false;
    for (size_t i = 0; i < p->hazards->n; i++) {
        struct unbackeds found = {0};
        unbacked_of_hazard(j->figures, j->arena, p->hazards->at[i], &found);
        for (size_t k = 0; k < found.n; k++)
            add_lone(j, p, i, &found.at[k], &all);
    }
    for (size_t i = 0; i < all.n; i++)
        remarks = remarks || all.at[i].remark.n;
    if (all.n == 0)
        return;
    if (all.n > 1)
        qsort(all.at, all.n, sizeof *all.at, by_risk);
    report_heading(r, level, "Breakers without breaker failure protection");
    report_note(r, "no-breaker-failure-note",
                "When one of these breakers fails to open in the rows named, no breaker failure "
                "protection trips the breakers around it.");
    struct block *b = unbacked_table(j, remarks);
    for (size_t i = 0; i < all.n; i++) {
        struct lone *x = &all.at[i];
        struct row *row = block_row(r, b);
        row_text(r, row, x->breaker);
        row_text(r, row, protection_name(j, x->breaker));
        row_text(r, row, text_str(&x->rows));
        protection_probability(j, row, protection_fails(p, x->breaker));
        row_number(r, row, x->risk, NULL);
        if (remarks)
            row_text(r, row, text_str(&x->remark));
    }
}

/* --- 5. what the fault takes away --- */

static struct block *taken_table(struct job *j)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "taken-away", NULL);
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "element", "Element", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY)->keep = 3;
    block_column(r, b, "alone", "Alone enough", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "risk", "Risk through it", unit_per_year(j), STYLE_MONEY);
    return b;
}

/* Of a mean over operating states, that of the first state which has the hazard. */
static figure_id disabled_figure(struct job *j, const struct compiled *hazard, const char *element)
{
    const struct hazard_exports *x = hazard->exports;
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit)
            return disabled_figure(j, x->states[i].unit, element);
    return compiled_figure(j->figures, hazard, PROPERTY_SHARE, element, "disabled");
}

static void taken_rows(struct job *j, struct block *b, const struct protection *p, size_t i)
{
    struct report *r = j->report;
    const struct compiled *hazard = p->hazards->at[i];
    const struct hazard *h = hazard->object->data;
    for (size_t k = 0; k < h->disables.n; k++) {
        const char *element = h->disables.keys[k];
        struct row *row = block_row(r, b);
        row_text(r, row, hazard->id);
        row_text(r, row, element);
        row_text(r, row, protection_name(j, element));
        protection_probability(j, row, disabled_figure(j, hazard, element));
        row_yes(r, row, is_single(j->figures, hazard, element));
        row_number(r, row, protection_share(&p->each[i], EVENT_DISABLED, element), NULL);
    }
}

void part_taken_away(struct job *j, struct protection *p, int level)
{
    struct block *b = NULL;
    for (size_t i = 0; i < p->hazards->n; i++) {
        const struct hazard *h = p->hazards->at[i]->object->data;
        if (h->disables.n == 0)
            continue;
        if (!b) {
            report_heading(j->report, level, "What the fault itself takes away");
            report_note(j->report, "taken-away-note",
                        "The fault may put these elements out of action, sound as they are. Alone "
                        "enough: it then stays uncleared, whatever else works.");
            b = taken_table(j);
        }
        taken_rows(j, b, p, i);
    }
}

/* --- 6. unwanted operation --- */

struct named {
    struct job *job;
    ARRAY(const char *) schemes;
    unsigned depth;
};

static void look_at(struct named *n, const struct quantity *q);

static void see(void *ctx, const struct expr *e)
{
    struct named *n = ctx;
    const struct value *v =
        e->op == EXPR_NAME ? model_get(n->job->model, KIND_VALUE, e->name) : NULL;
    if (v)
        look_at(n, v->is ? v->is : v->varies);
    if (e->op != EXPR_UNWANTED)
        return;
    for (size_t i = 0; i < n->schemes.n; i++)
        if (text_equal(n->schemes.at[i], e->name))
            return;
    *array_push(n->job->arena, &n->schemes) = e->name;
}

/* Schemes in an expression and in the values that it names (which never name themselves). */
static void look_at(struct named *n, const struct quantity *q)
{
    if (q && q->shape == SHAPE_EXPRESSION && q->expr && n->depth < EXPR_DEPTH) {
        n->depth++;
        expr_walk(q->expr, see, n);
        n->depth--;
    }
}

static const struct compiled *computed(const struct protection *p, const char *hazard)
{
    for (size_t i = 0; i < p->hazards->n; i++)
        if (text_equal(p->hazards->at[i]->id, hazard))
            return p->hazards->at[i];
    return NULL;
}

static struct block *unwanted_table(struct job *j)
{
    struct report *r = j->report;
    report_note(r, "unwanted-note",
                "Hazards of which protection that operates without need is the beginning.");
    struct block *b = report_table(r, "unwanted", NULL);
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "name", "What happens", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "scheme", "Scheme", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "frequency", "Occurs", "1/a", STYLE_FREQUENCY)->keep = 2;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    return b;
}

static void unwanted_row(struct job *j, struct block *b, const struct protection *p,
                         const struct object *o, const struct named *n)
{
    struct report *r = j->report;
    const struct compiled *c = computed(p, o->id);
    const struct hazard_exports *x = c ? c->exports : NULL;
    struct row *row = block_row(r, b);
    row_text(r, row, o->id);
    row_text(r, row, object_name(o));
    row_text(r, row, protection_list(j->arena, n->schemes.n, n->schemes.at));
    protection_probability(j, row, x ? x->frequency : FIGURE_NONE);
    protection_probability(j, row, x ? x->risk : FIGURE_NONE);
}

void part_unwanted(struct job *j, struct protection *p, int level)
{
    const struct objects *all = &j->model->of[KIND_HAZARD];
    struct block *b = NULL;
    for (size_t i = 0; i < all->n; i++) {
        const struct hazard *h = all->at[i]->data;
        struct named n = {.job = j};
        if (!job_at_site(j, h->site))
            continue;
        look_at(&n, h->frequency);
        if (n.schemes.n == 0)
            continue;
        if (!b) {
            report_heading(j->report, level, "Unwanted operation");
            b = unwanted_table(j);
        }
        unwanted_row(j, b, p, all->at[i], &n);
    }
}
