/* SPDX-License-Identifier: GPL-3.0-or-later */
/* One object: all that it says, what is computed of it, and who refers to it. */
#include <math.h>
#include <string.h>

#include "work/show.h"

/* --- what it says --- */

/* Fields of a hazard that stand in tables of their own. */
static const char *const tabled[] = {"response/*/cleared-by",
                                     "response/*/breaker-failure-of",
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
        row_text(j->report, row, node_says(j->arena, n, SHOW_BRIEF));
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

/* --- what it needs --- */

static void structure_below(struct arena *a, const struct model *m, const struct structure *s,
                            struct strmap *out)
{
    if (s->op == STRUCTURE_NAME)
        parts_below(a, m, s->name, out);
    for (size_t i = 0; i < s->n; i++)
        structure_below(a, m, s->of[i], out);
}

void parts_below(struct arena *a, const struct model *m, const char *id, struct strmap *out)
{
    const struct object *o = model_find(m, id);
    if (!o || strmap_has(out, id))
        return;
    strmap_set(a, out, id, (void *)o);
    if (o->kind == KIND_SCHEME)
        structure_below(a, m, ((const struct scheme *)o->data)->works, out);
}

/* --- who needs it --- */

static bool refers_to_any(const struct object *o, const struct strmap *ids)
{
    for (size_t i = 0; i < o->refs.n; i++)
        if (!o->refs.at[i].trace && strmap_has(ids, o->refs.at[i].id))
            return true;
    return false;
}

/* Adds the schemes that need one of these, as long as there are more. */
static void add_schemes(struct job *j, struct strmap *ids)
{
    const struct objects *all = &j->model->of[KIND_SCHEME];
    for (size_t before = 0; before != ids->n;) {
        before = ids->n;
        for (size_t i = 0; i < all->n; i++)
            if (!strmap_has(ids, all->at[i]->id) && refers_to_any(all->at[i], ids))
                strmap_set(j->arena, ids, all->at[i]->id, j);
    }
}

void hazards_that_use(struct job *j, const char *id, struct hazard_list *out)
{
    const struct objects *all = &j->model->of[KIND_HAZARD];
    struct strmap ids = {0};
    strmap_set(j->arena, &ids, id, j);
    add_schemes(j, &ids);
    for (size_t i = 0; i < all->n; i++)
        if (refers_to_any(all->at[i], &ids))
            *array_push(j->arena, out) = all->at[i];
}

/* --- figures --- */

void show_number(struct job *j, struct row *row, figure_id id)
{
    row_number(j->report, row, figure_value(j->figures, id), figure_name(j->figures, j->arena, id));
}

const char *show_name(struct job *j, const char *id)
{
    const struct object *o = model_find(j->model, id);
    return o ? object_name(o) : "";
}

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

/* Years and the course of an element are told by its curve. */
static bool is_curve(const struct figure *g)
{
    return g->property == PROPERTY_COURSE || (g->property == PROPERTY_FAILS && g->q1);
}

static void figure_row(struct job *j, struct block *b, figure_id id, bool uncertain)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    double shown;
    const char *name = figure_name(j->figures, j->arena, id);
    const char *unit = figure_display(j, id, &shown);
    row_text(r, row, name);
    row_number(r, row, shown, name);
    if (uncertain)
        quantile_cells(j, row, id, shown);
    row_text(r, row, unit);
}

void show_figures_table(struct job *j, const struct compiled *c)
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
    for (figure_id i = c->first; i < c->first + c->n; i++)
        if (!is_curve(figure_at(j->figures, i)))
            figure_row(j, b, i, uncertain);
}

static bool has_figures(const struct object *o)
{
    enum kind k = o->kind;
    if (k == KIND_STATE)
        return state_values(o->data)->n > 0;
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
    const struct compiled *effects;
    *c = NULL;
    *why = NULL;
    if (has_figures(o))
        status = figures_compile(j->figures, j->base, o->id, c, &error);
    if (status == OHMEN_OK && o->kind == KIND_HAZARD)
        status = figures_consequences(j->figures, j->base, o->id, &effects, &error);
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

/* --- kinds --- */

static ohmen_status show_figures(struct job *j, const struct object *o, const struct compiled *c,
                                 ohmen_error *e)
{
    switch (o->kind) {
    case KIND_ELEMENT: return show_element(j, o, c, e);
    case KIND_SCHEME: return show_scheme(j, o, c, e);
    case KIND_HAZARD: show_hazard(j, o, c); return OHMEN_OK;
    default: break;
    }
    if (c && c->n)
        show_figures_table(j, c);
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
    part_object(j, o, object_document(j->arena, o));
    status = show_figures(j, o, c, e);
    if (status != OHMEN_OK)
        return status;
    if (why)
        report_note(j->report, "no-figures", "No figures: %s.", why);
    part_not_computed(j);
    part_users(j, o);
    return OHMEN_OK;
}

ohmen_status ohmen_show(ohmen_register *r, const ohmen_query *q, const char *id, ohmen_report **out,
                        ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_show, (void *)id, out, e);
}
