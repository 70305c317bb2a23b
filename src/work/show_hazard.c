/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The page of a hazard: what is stated of it, its event tree with numbers, what its risk hinges
 * on, where it is weak, and its risk over the years. */
#include <string.h>

#include "work/show.h"

/* Minimal cut sets that the page has room for. */
enum { CUT_SETS = 10 };

/* --- the response and the damage of a hazard, as they are stated --- */

static void write_branch(struct text *t, const struct node *n);

static const char *share_words(struct arena *a, const struct node *branch)
{
    const struct node *share = node_get(branch, "share");
    const struct node *is = share->type == NODE_MAP ? node_get(share, "is") : NULL;
    return node_says(a, is ? is : share, SHOW_BRIEF);
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
        row_text(j->report, row, node_says(j->arena, is ? is : n, SHOW_BRIEF));
    else
        row_empty(j->report, row);
}

static void source_cell(struct job *j, struct row *row, const struct node *n)
{
    stated_cell(j, row, n && n->type == NODE_MAP ? node_get(n, "source") : NULL);
}

static void response_row(struct job *j, struct block *b, const char *key, const struct node *n,
                         bool backs_up)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    struct text ends;
    text_init(&ends, j->arena);
    write_branch(&ends, n);
    row_text(r, row, key);
    stated_cell(j, row, node_get(n, "cleared-by"));
    if (backs_up)
        stated_cell(j, row, node_get(n, "breaker-failure-of"));
    stated_cell(j, row, node_get(n, "in"));
    stated_cell(j, row, node_get(n, "sees"));
    source_cell(j, row, node_get(n, "sees"));
    row_text(r, row, text_str(&ends));
}

static struct block *response_table(struct report *r, bool backs_up)
{
    struct block *b = report_table(r, "response", "Response");
    block_column(r, b, "row", "Row", "", STYLE_PLAIN);
    block_column(r, b, "cleared-by", "Cleared by", "", STYLE_PLAIN);
    if (backs_up)
        block_column(r, b, "breaker-failure-of", "If breaker fails of", "", STYLE_PLAIN)->keep = 3;
    block_column(r, b, "in", "In", "", STYLE_PLAIN)->right = true;
    block_column(r, b, "sees", "Sees", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "source", "Source", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "ends", "Ends in", "", STYLE_PLAIN);
    return b;
}

static bool any_backs_up(const struct node *rows)
{
    for (size_t i = 0; i < rows->n; i++)
        if (node_get(rows->pairs[i].value, "breaker-failure-of"))
            return true;
    return false;
}

/* Is the end the first one of its row? */
static bool begins_row(const struct hazard_exports *x, size_t end)
{
    return end == 0 || !text_equal(x->ends[end].row, x->ends[end - 1].row);
}

/* In the order in which the rows act, which is that of the ends; where there are no figures, as
 * in the document. */
static void part_response(struct job *j, const struct node *doc, const struct hazard_exports *x)
{
    const struct node *rows = node_get(doc, "response");
    bool backs_up = any_backs_up(rows);
    struct block *b = response_table(j->report, backs_up);
    for (size_t i = 0; x && i < x->n_ends; i++)
        if (begins_row(x, i))
            response_row(j, b, x->ends[i].row, node_get(rows, x->ends[i].row), backs_up);
    for (size_t i = 0; !x && i < rows->n; i++)
        response_row(j, b, rows->pairs[i].key, rows->pairs[i].value, backs_up);
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

/* --- figures --- */

static double end_damage(const struct job *j, const struct end *end)
{
    double p = figure_value(j->figures, end->probability);
    return end->damage == FIGURE_NONE ? 0 : p * figure_value(j->figures, end->damage);
}

/* The damage of one occurrence, whatever its end. */
static double all_damage(const struct job *j, const struct hazard_exports *x)
{
    double sum = 0;
    for (size_t i = 0; i < x->n_ends; i++)
        sum += end_damage(j, &x->ends[i]);
    return sum;
}

static void end_row(struct job *j, struct block *b, const struct hazard_exports *x,
                    const struct end *end)
{
    struct report *r = j->report;
    struct row *row = block_row(r, b);
    double p = figure_value(j->figures, end->probability), all = all_damage(j, x);
    row_text(r, row, end->path);
    row_text(r, row, end->outcome);
    show_number(j, row, end->probability);
    row_number(r, row, p * figure_value(j->figures, x->frequency), NULL);
    if (end->damage == FIGURE_NONE)
        row_empty(r, row);
    else
        show_number(j, row, end->damage);
    row_number(r, row, all == 0 ? 0 : end_damage(j, end) / all, NULL);
}

/* x: of one operating state, where there are several. */
static void ends_table(struct job *j, const struct hazard_exports *x)
{
    struct report *r = j->report;
    struct block *b = report_table(r, "ends", "Event tree: how it ends, given that it occurs");
    block_column(r, b, "end", "End", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN)->keep = 4;
    block_column(r, b, "probability", "Probability", "", STYLE_PROBABILITY);
    block_column(r, b, "frequency", "Frequency", "1/a", STYLE_FREQUENCY)->keep = 1;
    block_column(r, b, "damage", "Damage", j->model->settings->currency, STYLE_MONEY)->keep = 2;
    block_column(r, b, "risk-share", "Share of risk", "%", STYLE_PERCENT)->keep = 3;
    for (size_t i = 0; i < x->n_ends; i++)
        end_row(j, b, x, &x->ends[i]);
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
        show_number(j, row, x->probability[k]);
        show_number(j, row, x->frequency_of[k]);
        show_number(j, row, x->damage_of[k]);
        show_number(j, row, x->risk_of[k]);
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
/* What the states are that reach the hazard: such as vary with time, such as are unknown, or both;
 * by the names of a combination, "T2-OUT=normal+T2-WINDING=aged". */
static const struct state_words {
    const char *title, *share, *noun, *why;
} state_words[] = {
    {"Operating states", "Share of time", "operating states", "holds most of the time"},
    {"Unknown states", "Probability", "unknown states", "is the most probable"},
    {"States, operating and unknown", "Probability", "operating and the unknown states",
     "is the most probable"},
};

static const struct state_words *words_of_states(struct job *j, const struct hazard_exports *x)
{
    bool varies = false, unknown = false;
    for (const char *at = x->states[0].name; at; at = strchr(at, '+')) {
        at += *at == '+';
        const char *id = arena_strn(j->arena, at, strcspn(at, "="));
        const struct state *s = model_get(j->model, KIND_STATE, id);
        unknown = unknown || (s && s->is.n);
        varies = varies || (s && !s->is.n);
    }
    return &state_words[varies && unknown ? 2 : unknown];
}

static void states_table(struct job *j, const struct compiled *c)
{
    struct report *r = j->report;
    const struct hazard_exports *x = c->exports;
    const struct state_words *words = words_of_states(j, x);
    struct block *b = report_table(r, "states", words->title);
    block_column(r, b, "state", "State", "", STYLE_PLAIN);
    block_column(r, b, "share", words->share, "", STYLE_PROBABILITY);
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
        show_number(j, row, y->frequency);
        show_number(j, row, y->damaging);
        show_number(j, row, y->risk);
    }
}

static const struct hazard_exports *exports_of(const struct compiled *c)
{
    return c->exports;
}

/* The operating state whose event tree is shown; NULL where there is only one. */
static const struct hazard_state *shown_state(const struct hazard_exports *x)
{
    for (size_t i = 0; i < x->n_states; i++)
        if (x->states[i].unit && exports_of(x->states[i].unit)->ends == x->ends)
            return &x->states[i];
    return NULL;
}

/* The hazard in that state; itself where there is only one. */
static const struct compiled *shown_unit(const struct compiled *c)
{
    const struct hazard_state *s = shown_state(exports_of(c));
    return s ? s->unit : c;
}

static void part_states(struct job *j, const struct compiled *c)
{
    const struct hazard_exports *x = c->exports;
    if (x->n_states == 0)
        return;
    states_table(j, c);
    report_note(
        j->report, "states",
        "The figures are means over the %s; the response, the event tree and the minimal cut "
        "sets are those of %s, which %s.",
        words_of_states(j, x)->noun, shown_state(x)->name, words_of_states(j, x)->why);
}

/* --- weak points --- */

static void part_singles(struct job *j, const struct compiled *c)
{
    struct cut_sets singles;
    single_failures_of_hazard(j->figures, j->arena, c, &singles);
    if (singles.n == 0)
        return;
    report_note(j->report, "single-failures",
                "One failure is enough to leave this fault uncleared: %s.",
                single_words(j, &singles));
}

/* What the fault itself puts out of action, with its probability as it is stated. */
static void part_disabled(struct job *j, const struct node *doc)
{
    const struct node *disables = node_get(doc, "disables");
    struct text t;
    text_init(&t, j->arena);
    for (size_t i = 0; disables && i < disables->n; i++) {
        const struct node *n = disables->pairs[i].value;
        const struct node *is = n->type == NODE_MAP ? node_get(n, "is") : NULL;
        text_printf(&t, "%s%s (%s)", i ? ", " : "", disables->pairs[i].key,
                    node_says(j->arena, is ? is : n, SHOW_BRIEF));
    }
    if (t.n)
        report_note(j->report, "disabled", "The fault itself may put out of action: %s.",
                    text_str(&t));
}

/* --- breakers that nobody backs up --- */

/* A row that clears, with all that its scheme needs. */
struct clearing {
    const char *key, *by, *backs_up; /* backs_up: whose breaker it stands in for, or NULL */
    const struct node *in;           /* or NULL */
    struct strmap parts;
};
struct clearings {
    struct arena *arena;
    const struct model *model; /* of the operating state that is shown */
    ARRAY(struct clearing) list;
};

/* In the order in which they act. */
static void find_clearings(struct job *j, const struct compiled *u, const struct node *doc,
                           struct clearings *out)
{
    const struct hazard_exports *x = exports_of(u);
    const struct node *rows = node_get(doc, "response");
    for (size_t i = 0; i < x->n_ends; i++) {
        const struct node *n = node_get(rows, x->ends[i].row);
        const struct node *by = node_get(n, "cleared-by");
        const struct node *of = node_get(n, "breaker-failure-of");
        if (!begins_row(x, i) || !by)
            continue;
        struct clearing *c = array_push(j->arena, &out->list);
        *c = (struct clearing){x->ends[i].row, by->text, of ? of->text : NULL, NULL, {0}};
        c->in = node_get(n, "in");
        parts_below(j->arena, out->model, by->text, &c->parts);
    }
}

static bool is_breaker(const struct model *m, const struct object *o)
{
    if (o->kind != KIND_ELEMENT)
        return false;
    const struct element *x = o->data;
    const struct element_type *t = x->type ? model_get(m, KIND_TYPE, x->type) : NULL;
    int kind = x->kind >= 0 || !t ? x->kind : t->kind;
    return kind >= 0 && text_equal(element_kinds[kind], "breaker");
}

/* Does this operate where one element has failed and all others are sound? */
struct without {
    struct arena *arena;
    const struct model *model;
    const char *failed;
    struct strmap known; /* scheme -> it operates: this struct, or NULL */
};

static bool operates(struct without *x, const char *id);

static bool structure_operates(struct without *x, const struct structure *s)
{
    if (s->op == STRUCTURE_NAME)
        return operates(x, s->name);
    size_t sound = 0;
    for (size_t i = 0; i < s->n; i++)
        sound += structure_operates(x, s->of[i]);
    return s->op != STRUCTURE_ABSENT && sound >= s->k;
}

static bool operates(struct without *x, const char *id)
{
    const struct object *o = model_find(x->model, id);
    if (!o || o->kind != KIND_SCHEME)
        return !text_equal(id, x->failed);
    if (strmap_has(&x->known, id))
        return strmap_get(&x->known, id) != NULL;
    bool does = structure_operates(x, ((const struct scheme *)o->data)->works);
    strmap_set(x->arena, &x->known, id, does ? x : NULL);
    return does;
}

static bool does_without(const struct clearings *all, const struct clearing *c, const char *breaker)
{
    struct without x = {all->arena, all->model, breaker, {0}};
    return operates(&x, c->by);
}

/* The row that stands in for the breaker of row `of` for this very purpose; or NULL. */
static const struct clearing *breaker_failure(const struct clearings *all, size_t of,
                                              const char *breaker)
{
    for (size_t i = 0; i < all->list.n; i++)
        if (all->list.at[i].backs_up &&
            text_equal(all->list.at[i].backs_up, all->list.at[of].key) &&
            does_without(all, &all->list.at[i], breaker))
            return &all->list.at[i];
    return NULL;
}

/* The next row that clears without it; or NULL. */
static const struct clearing *later_row(const struct clearings *all, size_t than,
                                        const char *breaker)
{
    for (size_t i = than + 1; i < all->list.n; i++)
        if (!all->list.at[i].backs_up && does_without(all, &all->list.at[i], breaker))
            return &all->list.at[i];
    return NULL;
}

struct backing {
    struct text nobody, later; /* "breaker VH-Q1 of row incomer, ..." */
};

static void judge_breaker(struct job *j, const struct clearings *all, size_t row,
                          const char *breaker, struct backing *out)
{
    for (size_t i = 0; i < row; i++)
        if (strmap_has(&all->list.at[i].parts, breaker))
            return; /* told with that row */
    if (breaker_failure(all, row, breaker))
        return;
    const struct clearing *later = later_row(all, row, breaker);
    struct text *t = later ? &out->later : &out->nobody;
    text_printf(t, "%sbreaker %s of row %s", t->n ? "; " : "", breaker, all->list.at[row].key);
    if (later)
        text_printf(t, " (the fault then lasts until row %s clears it%s%s)", later->key,
                    later->in ? " in " : "",
                    later->in ? node_says(j->arena, later->in, SHOW_BRIEF) : "");
}

static void part_backing(struct job *j, const struct compiled *u, const struct node *doc)
{
    struct clearings all = {.arena = j->arena, .model = u->variant->model};
    struct backing b;
    text_init(&b.nobody, j->arena);
    text_init(&b.later, j->arena);
    find_clearings(j, u, doc, &all);
    for (size_t i = 0; i < all.list.n; i++)
        for (size_t k = 0; k < all.list.at[i].parts.n; k++)
            if (is_breaker(all.model, all.list.at[i].parts.at[k].value))
                judge_breaker(j, &all, i, all.list.at[i].parts.at[k].key, &b);
    if (b.later.n)
        report_note(j->report, "no-breaker-failure",
                    "No breaker failure protection stands behind: %s.", text_str(&b.later));
    if (b.nobody.n)
        report_note(j->report, "not-backed-up", "Nobody backs up: %s.", text_str(&b.nobody));
}

static void part_weak_points(struct job *j, const struct compiled *c, const struct node *doc)
{
    size_t before = j->report->blocks.n;
    part_singles(j, c);
    part_disabled(j, doc);
    part_backing(j, shown_unit(c), doc);
    if (j->report->blocks.n > before)
        j->report->blocks.at[before].title = "Weak points";
}

/* --- the page --- */

static void part_importance(struct job *j, const struct compiled *c)
{
    struct effects effects;
    struct cut_sets sets;
    importance_in_hazard(j->figures, j->arena, c, &effects);
    part_hinges(j, shown_unit(c), &effects, true);
    cut_sets_of_hazard(j->figures, j->arena, c, CUT_SETS, &sets);
    part_cut_sets(j, &sets, true);
}

static void part_risk_years(struct job *j, const struct hazard_exports *x)
{
    struct year_steps s = {.key = "risk-years",
                           .title = "Risk over the years",
                           .head = "Risk",
                           .unit = unit_per_year(j),
                           .style = STYLE_MONEY,
                           .yearly = x->yearly,
                           .of_year = x->of_year,
                           .mean = x->risk};
    part_years(j, &s);
}

static void part_figures(struct job *j, const struct compiled *c, const struct node *doc)
{
    const struct compiled *u = shown_unit(c);
    hazard_pairs(j, c);
    outcomes_table(j, c);
    part_states(j, c);
    ends_table(j, exports_of(u));
    report_note(j->report, "perspective", "Damage counted: %s.", perspective_words(j));
    part_effects(j, c);
    part_weak_points(j, c, doc);
    part_importance(j, c);
    part_risk_years(j, exports_of(c));
}

/* What is stated is that of the operating state whose event tree is shown. */
void show_hazard(struct job *j, const struct object *o, const struct compiled *c)
{
    const struct compiled *u = c ? shown_unit(c) : NULL;
    const struct node *doc = object_document(j->arena, u ? u->object : o);
    part_response(j, doc, u ? exports_of(u) : NULL);
    part_damage(j, doc);
    if (c)
        part_figures(j, c, doc);
}
