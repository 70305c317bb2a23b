/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One object: all that it says, what is computed of it, and who refers to it. */
#include <math.h>
#include <string.h>

#include "work/work.h"

/* Columns of what one field says. */
enum { BRIEF = 400 };

/* --- what it says --- */

/* Fields of a hazard that stand in tables of their own. */
static const char *const tabled[] = {"response/*/cleared-by",
                                     "response/*/in",
                                     "response/*/sees",
                                     "response/*/outcome",
                                     "response/*/split",
                                     "response/*/if-works",
                                     "response/*/yes",
                                     "response/*/no",
                                     "outcomes/*/name",
                                     "outcomes/*/damage/*/category",
                                     "outcomes/*/damage/*/is",
                                     "outcomes/*/damage/*/varies",
                                     "outcomes/*/damage/*/source",
                                     NULL};

/* Does the path begin with the pattern, in which * stands for any one step? */
static bool path_matches(const char *path, const char *pattern)
{
    while (*pattern) {
        size_t step = strcspn(path, "/"), want = strcspn(pattern, "/");
        bool any = want == 1 && *pattern == '*';
        if (!any && (step != want || strncmp(path, pattern, step) != 0))
            return false;
        path += step + (path[step] == '/');
        pattern += want + (pattern[want] == '/');
    }
    return true;
}

static bool is_tabled(const struct object *o, const char *path)
{
    for (size_t i = 0; o->kind == KIND_HAZARD && tabled[i]; i++)
        if (path_matches(path, tabled[i]))
            return true;
    return false;
}

/* A distribution is said in one line. */
static bool is_quantity(const char *key)
{
    return text_equal(key, "is") || text_equal(key, "varies");
}

static void flatten(struct job *j, struct block *b, const struct object *o, const char *path,
                    const struct node *n)
{
    if (is_tabled(o, path))
        return;
    const char *slash = strrchr(path, '/');
    bool deep = n->type == NODE_MAP && n->n > 0 && !is_quantity(slash ? slash + 1 : path);
    if (!deep) {
        struct row *row = block_row(j->report, b);
        row_text(j->report, row, path);
        row_text(j->report, row, node_says(j->arena, n, BRIEF));
        return;
    }
    for (size_t i = 0; i < n->n; i++)
        flatten(j, b, o, arena_printf(j->arena, "%s%s%s", path, *path ? "/" : "", n->pairs[i].key),
                n->pairs[i].value);
}

static void part_object(struct job *j, const struct object *o, const struct node *doc)
{
    struct report *r = j->report;
    const char *name = object_name(o);
    bool lone = o->kind == KIND_REGISTER;
    report_heading(r, 1,
                   arena_printf(j->arena, "%s%s%s%s%s", kind_title(j->arena, o->kind),
                                lone ? "" : " ", lone ? "" : o->id, *name ? ": " : "", name));
    struct block *b = report_table(r, "object", NULL);
    block_column(r, b, "field", "Field", "", STYLE_PLAIN);
    block_column(r, b, "value", "Says", "", STYLE_PLAIN);
    flatten(j, b, o, "", doc);
}

/* --- the response and the damage of a hazard, as they are stated --- */

static void write_branch(struct text *t, const struct node *n);

static const char *share_words(struct arena *a, const struct node *branch)
{
    const struct node *share = node_get(branch, "share");
    const struct node *is = share->type == NODE_MAP ? node_get(share, "is") : NULL;
    return node_says(a, is ? is : share, BRIEF);
}

/* "20 %: fire; rest: burnt", the rest last. */
static void write_split(struct text *t, const struct node *split)
{
    const char *gap = "";
    for (size_t i = 0; i < 2 * split->n; i++) {
        const struct node *branch = split->pairs[i % split->n].value;
        const char *share = share_words(t->arena, branch);
        bool last = i >= split->n, ends = node_get(branch, "outcome") != NULL;
        if (text_equal(share, "rest") != last)
            continue;
        text_printf(t, "%s%s: %s", gap, share, ends ? "" : "(");
        write_branch(t, branch);
        text_add(t, ends ? "" : ")");
        gap = "; ";
    }
}

static void write_branch(struct text *t, const struct node *n)
{
    const struct node *outcome = node_get(n, "outcome"), *split = node_get(n, "split");
    if (outcome) {
        text_add(t, outcome->text);
        return;
    }
    if (split) {
        write_split(t, split);
        return;
    }
    text_printf(t, "if %s works: ", node_get(n, "if-works")->text);
    write_branch(t, node_get(n, "yes"));
    text_add(t, "; else: ");
    write_branch(t, node_get(n, "no"));
}

/* What a field says without its source, or an empty cell. */
static void stated_cell(struct job *j, struct row *row, const struct node *n)
{
    const struct node *is = n && n->type == NODE_MAP ? node_get(n, "is") : NULL;
    if (n)
        row_text(j->report, row, node_says(j->arena, is ? is : n, BRIEF));
    else
        row_empty(j->report, row);
}

static void source_cell(struct job *j, struct row *row, const struct node *n)
{
    stated_cell(j, row, n && n->type == NODE_MAP ? node_get(n, "source") : NULL);
}

static void response_row(struct job *j, struct block *b, const char *key, const struct node *n)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    struct text ends;
    text_init(&ends, j->arena);
    write_branch(&ends, n);
    row_text(r, row, key);
    stated_cell(j, row, node_get(n, "cleared-by"));
    stated_cell(j, row, node_get(n, "in"));
    stated_cell(j, row, node_get(n, "sees"));
    source_cell(j, row, node_get(n, "sees"));
    row_text(r, row, text_str(&ends));
}

static struct block *response_table(struct report *r)
{
    struct block *b = report_table(r, "response", "Response");
    block_column(r, b, "row", "Row", "", STYLE_PLAIN);
    block_column(r, b, "cleared-by", "Cleared by", "", STYLE_PLAIN);
    block_column(r, b, "in", "In", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "sees", "Sees", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "source", "Source", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "ends", "Ends in", "", STYLE_PLAIN);
    return b;
}

/* In the order in which the rows act, which is that of the ends; where there are no figures, as
 * in the document. */
static void part_response(struct job *j, const struct node *doc, const struct hazard_exports *x)
{
    const struct node *rows = node_get(doc, "response");
    struct block *b = response_table(j->report);
    for (size_t i = 0; x && i < x->n_ends; i++)
        if (i == 0 || !text_equal(x->ends[i].row, x->ends[i - 1].row))
            response_row(j, b, x->ends[i].row, node_get(rows, x->ends[i].row));
    for (size_t i = 0; !x && i < rows->n; i++)
        response_row(j, b, rows->pairs[i].key, rows->pairs[i].value);
}

static void damage_row(struct job *j, struct block *b, const char *outcome, const struct pair *item)
{
    struct row *row = block_row(j->report, b);
    const struct node *n = item->value, *is = node_get(n, "is");
    row_text(j->report, row, outcome);
    row_text(j->report, row, item->key);
    stated_cell(j, row, node_get(n, "category"));
    row_text(j->report, row, is ? "is" : "varies");
    stated_cell(j, row, is ? is : node_get(n, "varies"));
    source_cell(j, row, n);
}

static void part_damage(struct job *j, const struct node *doc)
{
    struct report *r = j->report;
    const struct node *outcomes = node_get(doc, "outcomes");
    struct block *b = report_table(r, "damage", "Damage as stated");
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "item", "Item", "", STYLE_PLAIN);
    block_column(r, b, "category", "Category", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "sort", "", "", STYLE_PLAIN);
    block_column(r, b, "stated", "As stated", "", STYLE_PLAIN);
    block_column(r, b, "source", "Source", "", STYLE_PLAIN)->keep = 1;
    for (size_t i = 0; outcomes && i < outcomes->n; i++) {
        const struct node *items = node_get(outcomes->pairs[i].value, "damage");
        for (size_t k = 0; items && k < items->n; k++)
            damage_row(j, b, outcomes->pairs[i].key, &items->pairs[k]);
    }
    if (b->rows.n == 0)
        r->blocks.n--;
}

/* --- who refers to it --- */

/* The path of a reference without the quantity's own key at its end. */
static const char *reference_place(struct arena *a, const char *path)
{
    const char *slash = strrchr(path, '/');
    return slash && is_quantity(slash + 1) ? arena_strn(a, path, (size_t)(slash - path)) : path;
}

static void user_row(struct job *j, struct block *b, const struct object *user,
                     const struct object *o)
{
    struct text places;
    text_init(&places, j->arena);
    for (size_t i = 0; i < user->refs.n; i++)
        if (text_equal(user->refs.at[i].id, o->id))
            text_printf(&places, "%s%s", places.n ? ", " : "",
                        reference_place(j->arena, user->refs.at[i].path));
    if (places.n == 0)
        return;
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, kinds[user->kind].name);
    row_text(j->report, row, user->id);
    row_text(j->report, row, text_str(&places));
}

static void part_users(struct job *j, const struct object *o)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "used-by", "Used by");
    block_column(r, b, "kind", "Kind", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "at", "At", "", STYLE_PLAIN);
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < j->model->of[k].n; i++)
            user_row(j, b, j->model->of[k].at[i], o);
    if (b->rows.n == 0)
        r->blocks.n--;
}

/* --- figures --- */

/* The distribution behind a figure that is an input; NULL: it is a number or a formula. */
static const struct quantity *distribution_of(const struct job *j, figure_id id)
{
    const struct graph_node *n = graph_at(j->figures->graph, figure_at(j->figures, id)->node);
    return n->op == OP_INPUT ? j->figures->inputs.at[n->extra] : NULL;
}

static bool any_distribution(const struct job *j, const struct compiled *c)
{
    for (figure_id i = c->first; i < c->first + c->n; i++)
        if (distribution_of(j, i))
            return true;
    return false;
}

/* The points of a distribution that knowledge is told by, in the unit of the mean shown. */
static void quantile_cells(struct job *j, struct row *row, figure_id id, double shown)
{
    static const double levels[] = {0.05, 0.5, 0.95};
    const struct quantity *q = distribution_of(j, id);
    double scale = shown / figure_value(j->figures, id), x;
    for (size_t i = 0; i < sizeof levels / sizeof *levels; i++)
        if (q && isfinite(scale) && quantity_quantile(q, levels[i], &x, NULL) == OHMEN_OK)
            row_number(j->report, row, x * scale, NULL);
        else
            row_empty(j->report, row);
}

static void figures_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    bool uncertain = any_distribution(j, c);
    struct block *b = report_table(r, "figures", "Figures");
    block_column(r, b, "figure", "Figure", "", STYLE_PLAIN);
    block_column(r, b, "value", uncertain ? "Mean" : "Value", "", STYLE_PLAIN);
    if (uncertain) {
        block_column(r, b, "p5", "5 %", "", STYLE_PLAIN)->keep = 1;
        block_column(r, b, "p50", "50 %", "", STYLE_PLAIN)->keep = 2;
        block_column(r, b, "p95", "95 %", "", STYLE_PLAIN)->keep = 1;
    }
    block_column(r, b, "unit", "Unit", "", STYLE_PLAIN);
    for (figure_id i = c->first; i < c->first + c->n; i++) {
        struct row *row = block_row(r, b);
        double shown;
        const char *name = figure_name(j->figures, j->arena, i);
        const char *unit = figure_display(j, i, &shown);
        row_text(r, row, name);
        row_number(r, row, shown, name);
        if (uncertain)
            quantile_cells(j, row, i, shown);
        row_text(r, row, unit);
    }
}

static void number_cell(struct job *j, struct row *row, figure_id id)
{
    row_number(j->report, row, figure_value(j->figures, id), figure_name(j->figures, j->arena, id));
}

static void ends_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    struct block *b = report_table(r, "ends", "Event tree: how it ends, given that it occurs");
    block_column(r, b, "end", "End", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY);
    block_column(r, b, "damage", "Damage", j->model->settings->currency, STYLE_MONEY)->keep = 1;
    for (size_t i = 0; i < x->n_ends; i++) {
        const struct end *end = &x->ends[i];
        struct row *row = block_row(r, b);
        row_text(r, row, end->path);
        row_text(r, row, end->outcome);
        number_cell(j, row, end->probability);
        if (end->damage == FIGURE_NONE)
            row_empty(r, row);
        else
            number_cell(j, row, end->damage);
    }
}

static void outcomes_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    const struct hazard *h = c->object->data;
    struct block *b = report_table(r, "outcomes", "Outcomes");
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "name", "What has happened", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY)->keep = 1;
    block_column(r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 3;
    block_column(r, b, "damage", "Mean damage", j->model->settings->currency, STYLE_MONEY)->keep =
        3;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    for (size_t k = 0; k < x->n_outcomes; k++) {
        struct row *row = block_row(r, b);
        row_text(r, row, h->outcomes.keys[k]);
        row_text(r, row, ROW(struct outcome, h->outcomes, k)->name);
        number_cell(j, row, x->probability[k]);
        number_cell(j, row, x->frequency_of[k]);
        number_cell(j, row, x->damage_of[k]);
        number_cell(j, row, x->risk_of[k]);
    }
}

static void hazard_pairs(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    const char *currency = j->model->settings->currency;
    struct block *b = report_pairs(r, "hazard-figures", "Figures");
    const struct {
        const char *name, *unit;
        enum number_style style;
        figure_id id;
    } rows[] = {
        {"Occurs", "1/a", STYLE_FREQUENCY, x->frequency},
        {"Does damage", "1/a", STYLE_FREQUENCY, x->damaging},
        {"Mean damage when it does", currency, STYLE_MONEY, x->damage},
        {"Risk", unit_per_year(j), STYLE_MONEY, x->risk},
    };
    for (size_t i = 0; i < sizeof rows / sizeof *rows; i++)
        pair_number(r, block_pair(r, b, rows[i].name), figure_value(j->figures, rows[i].id),
                    rows[i].unit, rows[i].style, figure_name(j->figures, j->arena, rows[i].id));
}

/* The operating states that the hazard is a mean over. */
static void states_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    struct block *b = report_table(r, "states", "Operating states");
    block_column(r, b, "state", "State", "", STYLE_PLAIN);
    block_column(r, b, "share", "Share of time", "", STYLE_PROBABILITY);
    block_column(r, b, "frequency", "Occurs", "1/a", STYLE_FREQUENCY)->keep = 1;
    block_column(r, b, "damaging", "Does damage", "1/a", STYLE_FREQUENCY)->keep = 2;
    block_column(r, b, "risk", "Risk", unit_per_year(j), STYLE_MONEY);
    for (size_t i = 0; i < x->n_states; i++) {
        const struct hazard_state *s = &x->states[i];
        const struct hazard_exports *y = s->unit ? s->unit->exports : NULL;
        struct row *row = block_row(r, b);
        row_text(r, row, s->name);
        row_number(r, row, s->share, NULL);
        for (int k = 0; !y && k < 3; k++)
            row_empty(r, row);
        if (!y)
            continue;
        number_cell(j, row, y->frequency);
        number_cell(j, row, y->damaging);
        number_cell(j, row, y->risk);
    }
}

/* Whose event tree the table of ends shows, where there are several. */
static const char *shown_state(const struct hazard_exports *x)
{
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit &&
            ((const struct hazard_exports *)x->states[i].unit->exports)->ends == x->ends)
            return x->states[i].name;
    return NULL;
}

static void part_states(struct job *j, const struct compiled *c)
{
    const struct hazard_exports *x = c->exports;
    if (x->n_states == 0)
        return;
    states_table(j, c);
    report_note(j->report, "states",
                "The figures are means over the operating states; the event tree is that of %s, "
                "which holds most of the time.",
                shown_state(x));
}

static void part_figures(struct job *j, const struct compiled *c)
{
    if (c->n == 0)
        return;
    if (c->object->kind != KIND_HAZARD) {
        figures_table(j, c);
        return;
    }
    hazard_pairs(j, c);
    outcomes_table(j, c);
    part_states(j, c);
    ends_table(j, c);
    report_note(j->report, "perspective", "Damage counted: %s.", perspective_words(j));
}

static bool has_figures(const struct object *o)
{
    enum kind k = o->kind;
    if (k == KIND_STATE)
        return ((const struct state *)o->data)->varies.n > 0;
    return k == KIND_VALUE || k == KIND_RATE || k == KIND_TYPE || k == KIND_ELEMENT ||
           k == KIND_SCHEME || k == KIND_HAZARD;
}

static ohmen_status unknown_object(struct job *j, const char *id, ohmen_error *e)
{
    struct nearest near;
    nearest_init(&near, id);
    for (size_t i = 0; i < j->model->by_id.n; i++)
        nearest_offer(&near, j->model->by_id.at[i].key);
    return error_set(e, OHMEN_UNKNOWN, "there is no \"%s\" in the register%s", id,
                     nearest_hint(j->arena, &near));
}

/* The figures of the object in *c; NULL, with a reason in *why, where this version has none. */
static ohmen_status compute(struct job *j, const struct object *o, const struct compiled **c,
                            const char **why, ohmen_error *e)
{
    ohmen_error error = OHMEN_ERROR_INIT;
    ohmen_status status = OHMEN_OK;
    *c = NULL;
    *why = NULL;
    if (has_figures(o))
        status = figures_compile(j->figures, j->base, o->id, c, &error);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, &error);
    if (status == OHMEN_OK)
        return OHMEN_OK;
    if (status != OHMEN_COMPUTE)
        return error_set(e, status, "%s", error.text);
    *c = NULL;
    *why = arena_str(j->arena, error.text);
    return OHMEN_OK;
}

static ohmen_status run_show(struct job *j, void *ctx, ohmen_error *e)
{
    const struct compiled *c;
    const char *why;
    ohmen_status status = job_load_figures(j, e);
    if (status != OHMEN_OK)
        return status;
    const struct object *o = model_find(j->model, ctx);
    if (!o)
        return unknown_object(j, ctx, e);
    status = compute(j, o, &c, &why, e);
    if (status != OHMEN_OK)
        return status;
    const struct node *doc = object_document(j->arena, o);
    part_object(j, o, doc);
    if (o->kind == KIND_HAZARD) {
        part_response(j, doc, c ? c->exports : NULL);
        part_damage(j, doc);
    }
    if (c)
        part_figures(j, c);
    if (why)
        report_note(j->report, "no-figures", "No figures: %s.", why);
    part_users(j, o);
    return OHMEN_OK;
}

ohmen_status ohmen_show(ohmen_register *r, const ohmen_query *q, const char *id, ohmen_report **out,
                        ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_show, (void *)id, out, e);
}
