/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The derivation of a number that tells how bad it may get: what it is, its ends, and the sources
 * that it is made of. Owns nothing. */
#include <math.h>
#include <string.h>

#include "work/loss.h"

enum { MOST_SOURCES = 15 };

/* --- which number --- */

static ohmen_status find_decision(struct job *j, const char *decision, struct known_loss **out,
                                  ohmen_error *e)
{
    struct weighing *w;
    ohmen_status status = weigh_ranked(j->figures, decision, &w, e);
    if (status == OHMEN_OK)
        *out = loss_of_decision(j, w);
    return status;
}

static ohmen_status find_register(struct job *j, struct known_loss **out, ohmen_error *e)
{
    struct hazards all = {0};
    ohmen_status status = job_compile_hazards(j, &all, e);
    if (status == OHMEN_OK)
        status = figures_evaluate(j->figures, e);
    if (status == OHMEN_OK)
        *out = loss_of_hazards(j, &all);
    return status;
}

static ohmen_status find_owner(struct job *j, const char *owner, struct known_loss **out,
                               ohmen_error *e)
{
    ohmen_status status = text_equal(owner, LOSS_REGISTER) ? find_register(j, out, e)
                                                           : find_decision(j, owner, out, e);
    if (status == OHMEN_OK && (*out)->why)
        return error_set(e, OHMEN_COMPUTE, "%s", (*out)->why);
    return status;
}

ohmen_status loss_value_find(struct job *j, const char *name, struct loss_value *out,
                             ohmen_error *e)
{
    const char *owner = NULL, *of = NULL;
    struct nearest near;
    struct loss_value v = {.kind = LOSS_NONE};
    loss_name_parts(j->arena, name, &owner, &v.kind, &of);
    ohmen_status status = find_owner(j, owner, &v.known, e);
    if (status != OHMEN_OK)
        return status;
    nearest_init(&near, name);
    for (v.k = 0; v.k < v.known->n; v.k++) {
        v.name = loss_name(j->arena, owner, v.kind, v.known->cases[v.k].name);
        nearest_offer(&near, v.name);
        if (!text_equal(v.name, name))
            continue;
        v.result = loss_result_of(j, v.known, v.k);
        *out = v;
        return OHMEN_OK;
    }
    return error_set(e, OHMEN_UNKNOWN, "\"%s\" has no figure \"%s\"%s", owner,
                     name + strlen(owner) + 1, nearest_hint(j->arena, &near));
}

ohmen_status loss_prepare(struct job *j, const char *figure, ohmen_error *e)
{
    const char *point = strchr(figure, '.');
    struct known_loss *unused;
    if (!point || !loss_is_figure(point + 1) ||
        !text_equal(arena_strn(j->arena, figure, (size_t)(point - figure)), LOSS_REGISTER))
        return OHMEN_OK;
    return find_register(j, &unused, e);
}

/* --- words --- */

static const char *number_words(struct job *j, const struct loss_value *v, double x)
{
    char number[32];
    if (loss_is_probability(v->kind))
        return arena_printf(j->arena, "%s %%", number_text(number, x, STYLE_PERCENT));
    return money_text(j->arena, x, j->model->settings->currency);
}

static double value_of(const struct loss_value *v)
{
    return loss_middle(&v->result->at[v->kind]);
}

static const char *meaning_of(struct job *j, const struct loss_value *v)
{
    double tail = 100 * loss_tail[v->kind], years = v->known->horizon;
    if (v->kind == LOSS_NONE)
        return arena_printf(j->arena, "the probability of no damage over %g a", years);
    if (v->kind >= LOSS_WORST_5)
        return arena_printf(j->arena, "the mean damage over %g a in the worst %g %% of all cases",
                            years, tail);
    return arena_printf(j->arena,
                        "the damage over %g a that is exceeded with a probability of "
                        "%g %%",
                        years, tail);
}

static const char *formula_of(struct job *j, const struct loss_value *v)
{
    double tail = 100 * loss_tail[v->kind];
    const char *sum = "the sum of all damage, compound Poisson, over what is unknown";
    if (v->kind == LOSS_NONE)
        return arena_printf(j->arena, "mean of exp(-expected occurrences with damage)");
    if (v->kind >= LOSS_WORST_5)
        return arena_printf(j->arena, "mean above the %g %% point of: %s", 100 - tail, sum);
    return arena_printf(j->arena, "%g %% point of: %s", 100 - tail, sum);
}

struct consumed loss_consumed(struct job *j, const struct loss_value *v)
{
    struct consumed c = {.name = v->name, .value = value_of(v)};
    c.dim = loss_is_probability(v->kind) ? dim_number : dim_money;
    c.words = number_words(j, v, c.value);
    c.formula = formula_of(j, v);
    if (v->result->of->expected != FIGURE_NONE)
        *array_push(j->arena, &c.inputs) = v->result->of->expected;
    return c;
}

void part_loss_head(struct job *j, const struct loss_value *v)
{
    report_note(j->report, "figure", "%s = %s: %s. Damage counted: %s.", v->name,
                number_words(j, v, value_of(v)), meaning_of(j, v), perspective_words(j));
}

/* --- what it is made of --- */

/* Sources of a case with what each is expected to cost. */
struct weighed_source {
    const struct loss_source *source;
    double expected, damage;
};

static size_t sources_of(struct job *j, const struct loss_value *v, struct weighed_source **out)
{
    const struct loss_path *path = v->result->of->paths;
    size_t n = path->sources->n;
    struct weighed_source *all = *out = NEW_ARRAY(j->arena, n, struct weighed_source);
    for (size_t i = 0; i < n; i++) {
        const struct loss_source *s = &path->sources->at[i];
        all[i] = (struct weighed_source){s, loss_source_expected(v->known->world, s),
                                         loss_source_damage(v->known->world, s)};
    }
    return n;
}

static void source_row(struct job *j, struct block *b, const struct weighed_source *x)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, x->source->hazard);
    row_text(j->report, row, x->source->outcome);
    row_text(j->report, row, x->source->where);
    row_number(j->report, row, x->source->from, NULL);
    row_number(j->report, row, x->source->to, NULL);
    row_number(j->report, row, x->expected, NULL);
    row_number(j->report, row, x->damage, NULL);
    row_number(j->report, row, x->expected * x->damage, NULL);
}

static void sources_table(struct job *j, const struct loss_value *v)
{
    struct report *r = j->report;
    struct weighed_source *all;
    size_t n = sources_of(j, v, &all), most = n < MOST_SOURCES ? n : MOST_SOURCES;
    double *sizes = NEW_ARRAY(j->arena, n, double);
    const char *currency = j->model->settings->currency;
    for (size_t i = 0; i < n; i++)
        sizes[i] = all[i].expected * all[i].damage;
    size_t *order = falling_order(j->arena, n, sizes);
    struct block *b = report_table(r, "sources-of-damage", "Where the damage comes from");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "where", "Where", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "from", "From", "a", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "to", "To", "a", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "expected", "Expected times", "", STYLE_PLAIN);
    block_column(r, b, "damage", "Mean damage of one", currency, STYLE_MONEY);
    block_column(r, b, "sum", "Together", currency, STYLE_MONEY);
    for (size_t i = 0; i < most; i++)
        source_row(j, b, &all[order[i]]);
    if (n > most)
        report_note(r, "sources-more", "%zu more are expected to cost less than these.", n - most);
}

void part_loss_method(struct job *j, const struct loss_value *v)
{
    const struct loss_number *x = &v->result->at[v->kind];
    const char *error = "";
    if (loss_world_sample(v->known->world))
        error = arena_printf(j->arena, " What is unknown comes from %s; the standard error is %s.",
                             loss_sample_words(j, v->known), number_words(j, v, x->error));
    sources_table(j, v);
    report_note(j->report, "bracket",
                "Between %s and %s: amounts rounded down and up to a lattice of %zu points, %s "
                "apart.%s%s",
                number_words(j, v, x->low), number_words(j, v, x->high), v->result->points,
                money_text(j->arena, v->result->step, j->model->settings->currency), error,
                v->result->is_drawn ? " Some damage was drawn, and is not bracketed." : "");
}
