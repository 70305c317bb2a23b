/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How sure the figures are: the range in which each may be over all that is unknown. The chapter of
 * the report, and what one figure's sample is wherever it is printed. Owns nothing.
 *
 * Invariant: a figure is sampled alone, or with certain others of its own object, whatever else is
 * printed, so that its spread is the same everywhere. */
#include "work/spreads.h"

#include <math.h>

#include "figure/importance.h"

/* Less than this part of the mean between 5 and 95 % is the rounding of what is certain in effect:
 * what is unknown cancels. */
static const double LEAST_WIDTH = 1e-9;

/* --- samples --- */

static void add_together(struct job *j, figure_id id)
{
    if (id != FIGURE_NONE)
        *array_push(j->arena, &j->together) = id;
}

ohmen_status spreads_compile(struct job *j, const struct hazards *h, ohmen_error *e)
{
    struct supply s;
    struct harm_to *groups;
    j->together = (struct figure_ids){0};
    ohmen_status status = figures_supply(j->figures, h->n, h->at, &s, e);
    if (status == OHMEN_OK)
        status = figures_people(j->figures, h->n, h->at, &groups, e);
    if (status != OHMEN_OK)
        return status;
    add_together(j, figures_total(j->figures, h->n, h->at));
    add_together(j, s.saidi);
    add_together(j, s.saifi);
    add_together(j, s.caidi);
    add_together(j, s.not_supplied);
    for (size_t i = 0; i < j->model->of[KIND_GROUP].n; i++)
        add_together(j, groups[i].death);
    return OHMEN_OK;
}

static bool is_among(const struct figure_ids *all, figure_id id)
{
    for (size_t i = 0; i < all->n; i++)
        if (all->at[i] == id)
            return true;
    return false;
}

static void keep_unknown(struct job *j, struct figure_ids *to, figure_id id)
{
    if (id != FIGURE_NONE && !figure_is_certain(j->figures, id))
        *array_push(j->arena, to) = id;
}

/* Those that are sampled with this one, itself among them, since they are made of the same: the
 * sums over the register; the risk of a hazard and how often it does damage. */
static struct figure_ids find_together(struct job *j, figure_id id)
{
    const struct figures *f = j->figures;
    const struct figure *g = figure_at(f, id);
    const struct compiled *unit = f->units.at[g->unit];
    struct figure_ids ids = {0};
    if (is_among(&j->together, id)) {
        for (size_t k = 0; k < j->together.n; k++)
            keep_unknown(j, &ids, j->together.at[k]);
    } else if (!g->q1 && (g->property == PROPERTY_RISK || g->property == PROPERTY_DAMAGING)) {
        keep_unknown(j, &ids, compiled_figure(f, unit, PROPERTY_RISK, NULL, NULL));
        keep_unknown(j, &ids, compiled_figure(f, unit, PROPERTY_DAMAGING, NULL, NULL));
    } else {
        keep_unknown(j, &ids, id);
    }
    return ids;
}

static bool is_certain_in_effect(const struct figures *f, const struct spread_sample *x)
{
    double width = x->spread.at[SPREAD_P95].value - x->spread.at[SPREAD_P5].value;
    return width <= LEAST_WIDTH * fabs(figure_value(f, x->id));
}

ohmen_status spreads_sample(struct job *j, struct arena *a, figure_id id,
                            struct spread_samples *out, ohmen_error *e)
{
    struct sampling_plan plan = j->plan;
    struct spread_samples x = {0};
    struct figure_ids ids = find_together(j, id);
    plan.n_judged = 1;
    x.n = ids.n;
    x.of = NEW_ARRAY(a, ids.n, struct spread_sample);
    ohmen_status status = figures_sample(j->figures, a, &plan, ids.n, ids.at, &x.sampling, e);
    if (status != OHMEN_OK)
        return status;
    for (size_t k = 0; k < x.n; k++) {
        x.of[k] = (struct spread_sample){
            .id = ids.at[k],
            .spread = figure_spread_of(j->figures, a, &x.sampling, k, ids.at[k]),
        };
        x.of[k].spread.is_certain = is_certain_in_effect(j->figures, &x.of[k]);
    }
    *out = x;
    return OHMEN_OK;
}

/* --- which figures --- */

static void add(struct job *j, struct spreads_part *p, enum spreads_table table, figure_id id,
                const char *label)
{
    if (id == FIGURE_NONE)
        return;
    struct spread_row *row = array_push(j->arena, &p->tables[table]);
    *row = (struct spread_row){.label = label, .sample.id = id};
}

/* The risk of all hazards: of the site that is asked for, else of the register. */
static figure_id total_risk(struct job *j, const struct hazards *h, const struct supply_part *s)
{
    if (!j->query.site)
        return figures_total(j->figures, h->n, h->at);
    for (size_t i = 0; i < s->sites.n; i++)
        if (text_equal(s->sites.at[i].site->id, j->query.site))
            return s->sites.at[i].sums.risk;
    return FIGURE_NONE;
}

static void add_hazards(struct job *j, const struct hazards *h, const struct supply_part *s,
                        struct spreads_part *p)
{
    size_t *order = hazards_by_risk(j, h);
    for (size_t i = 0; i < h->n; i++) {
        const struct hazard_exports *x = h->at[order[i]]->exports;
        add(j, p, SPREADS_RISK, x->risk, h->at[order[i]]->id);
        add(j, p, SPREADS_DAMAGING, x->damaging, h->at[order[i]]->id);
    }
    if (h->n > 1)
        add(j, p, SPREADS_RISK, total_risk(j, h, s), "All together");
}

static void add_effects(struct job *j, const struct supply_part *s,
                        const struct people_part *people, struct spreads_part *p)
{
    if (s->any) {
        add(j, p, SPREADS_SUPPLY, s->sums.saifi, "SAIFI");
        add(j, p, SPREADS_SUPPLY, s->sums.saidi, "SAIDI");
        add(j, p, SPREADS_SUPPLY, s->sums.caidi, "CAIDI");
        add(j, p, SPREADS_SUPPLY, s->sums.not_supplied, "ENS");
    }
    for (size_t i = 0; people->any && i < j->model->of[KIND_GROUP].n; i++)
        add(j, p, SPREADS_PEOPLE, people->groups[i].death, people->groups[i].group);
}

/* --- their samples --- */

static struct spread_row *find_row(struct spreads_part *p, figure_id id)
{
    for (int t = 0; t < SPREADS_TABLES; t++)
        for (size_t i = 0; i < p->tables[t].n; i++)
            if (p->tables[t].at[i].sample.id == id)
                return &p->tables[t].at[i];
    return NULL;
}

static void note_batches(struct spreads_part *p, const struct sampling *s)
{
    if (!p->any || s->batches < p->fewest.batches)
        p->fewest = *s;
    if (!p->any || s->batches > p->most.batches)
        p->most = *s;
    p->any = true;
}

static void keep(struct spreads_part *p, const struct spread_samples *all)
{
    for (size_t k = 0; k < all->n; k++) {
        struct spread_row *row = find_row(p, all->of[k].id);
        if (row) {
            row->sample = all->of[k];
            row->done = true;
        }
    }
    note_batches(p, &all->sampling);
}

/* With those that are sampled together with it. What cannot be sampled is left out. */
static ohmen_status sample_row(struct job *j, struct spreads_part *p, struct spread_row *row,
                               ohmen_error *e)
{
    ohmen_error why = OHMEN_ERROR_INIT;
    struct spread_samples all;
    if (j->interrupted) {
        p->n_interrupted++;
        row->done = row->left_out = true;
        return OHMEN_OK;
    }
    struct arena *scratch = arena_child(j->arena);
    ohmen_status status = spreads_sample(j, scratch, row->sample.id, &all, &why);
    if (status == OHMEN_OK)
        keep(p, &all);
    arena_free(scratch);
    row->done = true;
    row->left_out = status == OHMEN_COMPUTE;
    if (status == OHMEN_COMPUTE)
        row->why = arena_str(j->arena, why.text);
    else if (status != OHMEN_OK)
        return error_set(e, status, "%s", why.text);
    return OHMEN_OK;
}

/* Samples that are to be taken, for who watches. */
static void count_samples(struct job *j, struct spreads_part *p)
{
    j->sampled.done = j->sampled.all = 0;
    for (int t = 0; t < SPREADS_TABLES; t++)
        for (size_t i = 0; i < p->tables[t].n; i++) {
            struct spread_row *row = &p->tables[t].at[i];
            row->done = figure_is_certain(j->figures, row->sample.id);
            row->sample.spread.is_certain = row->done;
            if (!row->done && find_together(j, row->sample.id).at[0] == row->sample.id)
                j->sampled.all++;
        }
}

ohmen_status spreads_compute(struct job *j, const struct hazards *h, const struct supply_part *s,
                             const struct people_part *people, struct spreads_part *p,
                             ohmen_error *e)
{
    ohmen_status status = OHMEN_OK;
    *p = (struct spreads_part){0};
    add_hazards(j, h, s, p);
    add_effects(j, s, people, p);
    count_samples(j, p);
    for (int t = 0; t < SPREADS_TABLES; t++)
        for (size_t i = 0; status == OHMEN_OK && i < p->tables[t].n; i++) {
            if (p->tables[t].at[i].done)
                continue;
            status = sample_row(j, p, &p->tables[t].at[i], e);
            j->sampled.done++;
        }
    j->sampled.done = j->sampled.all = 0;
    return status;
}

/* --- on the page --- */

/* Supply is counted in a year; its values stand in the unit that the figure has on the page. */
static const char *unit_of(struct job *j, enum spreads_table table, figure_id id, double *factor)
{
    double shown, value = figure_value(j->figures, id);
    *factor = 1;
    if (table == SPREADS_RISK)
        return unit_per_year(j);
    if (table != SPREADS_SUPPLY)
        return "1/a";
    const char *unit = supply_unit(j, id, &shown);
    *factor = value == 0 ? 1 : shown / value;
    return unit;
}

static void set(struct job *j, struct spread *s, enum spread_part part, struct sampled x,
                double factor, const char *figure)
{
    spread_set(j->report, s, part, x.value * factor, x.error < 0 ? -1 : x.error * factor, figure);
}

/* The mean is that of the register, not that of the sample: it has an error where it is sampled. */
void spread_fill(struct job *j, struct spread *s, const struct spread_sample *x, double factor)
{
    static const enum spread_part parts[SPREAD_POINTS] = {SPREAD_LOW, SPREAD_MEDIAN, SPREAD_HIGH};
    double error = figure_error(j->figures, x->id);
    struct sampled mean = {figure_value(j->figures, x->id),
                           error > LEAST_WIDTH * fabs(figure_value(j->figures, x->id)) ? error
                                                                                       : -1};
    set(j, s, SPREAD_MEAN, mean, factor, figure_name(j->figures, j->arena, x->id));
    for (int k = 0; k < SPREAD_POINTS; k++)
        set(j, s, parts[k], x->spread.at[k], factor,
            spread_name(j->figures, j->arena, x->id, (enum spread_point)k));
}

static const struct table_words {
    const char *key, *title;
    enum number_style style;
} table_words[SPREADS_TABLES] = {
    [SPREADS_RISK] = {"spread-risk", "What the risk may be", STYLE_MONEY},
    [SPREADS_DAMAGING] = {"spread-damaging", "How often hazards may do damage", STYLE_FREQUENCY},
    [SPREADS_SUPPLY] = {"spread-supply", "What the indices of supply may be", STYLE_GROUPED},
    [SPREADS_PEOPLE] = {"spread-people", "What individual risk may be", STYLE_FREQUENCY},
};

static bool has_spread(const struct spread_row *row)
{
    return !row->sample.spread.is_certain && !row->left_out;
}

static void part_table(struct job *j, enum spreads_table table, const struct spread_rows *rows)
{
    struct block *b = NULL;
    for (size_t i = 0; i < rows->n; i++) {
        const struct spread_row *row = &rows->at[i];
        double factor;
        if (!has_spread(row))
            continue;
        if (!b)
            b = report_spreads(j->report, table_words[table].key, table_words[table].title);
        const char *unit = unit_of(j, table, row->sample.id, &factor);
        spread_fill(j, spreads_add(j->report, b, row->label, unit, table_words[table].style),
                    &row->sample, factor);
    }
}

static bool are_alike(const struct spreads_part *p)
{
    return p->fewest.batches == p->most.batches && p->fewest.interrupted == p->most.interrupted &&
           p->fewest.reached == p->most.reached;
}

static void note_sample(struct job *j, const struct spreads_part *p)
{
    const char *words = sampling_words(j, &p->fewest);
    if (!are_alike(p))
        words = arena_printf(j->arena, "the fewest %s; the most %s", words,
                             sampling_words(j, &p->most));
    report_note(
        j->report, "spread-sample",
        "What the figures may be, by samples over all that is unknown: %s. What differs from "
        "one occurrence to the next is no lack of knowledge: it is averaged over in each "
        "sample. 5 %% and 95 %%: the figure is below them with that probability, as far as "
        "what the register states of its inputs is right; what it leaves out is in no "
        "range. The mean is that of the other chapters. Points of a sum are not the sums of "
        "points.",
        words);
}

static void note_certain(struct job *j, const struct spreads_part *p)
{
    struct text names;
    size_t n = 0;
    text_init(&names, j->arena);
    for (int t = 0; t < SPREADS_TABLES; t++)
        for (size_t i = 0; i < p->tables[t].n; i++)
            if (p->tables[t].at[i].sample.spread.is_certain)
                text_printf(&names, "%s%s", n++ ? ", " : "",
                            figure_name(j->figures, j->arena, p->tables[t].at[i].sample.id));
    if (n)
        report_note(j->report, "spread-certain",
                    "Certain, since nothing unknown is in %s, or cancels: %s.",
                    n > 1 ? "them" : "it", text_str(&names));
}

static void note_left_out(struct job *j, const struct spreads_part *p)
{
    for (int t = 0; t < SPREADS_TABLES; t++)
        for (size_t i = 0; i < p->tables[t].n; i++)
            if (p->tables[t].at[i].why)
                report_note(j->report, arena_printf(j->arena, "spread-without-%d-%zu", t, i),
                            "Without a range: %s.", p->tables[t].at[i].why);
    if (p->n_interrupted)
        report_note(j->report, "spread-interrupted",
                    "The sampling was interrupted before %s could be sampled: %s without a range "
                    "here.",
                    count_words(j->arena, p->n_interrupted, "figure", "figures"),
                    p->n_interrupted > 1 ? "they are" : "it is");
}

void part_spreads(struct job *j, const struct spreads_part *p)
{
    if (p->any)
        note_sample(j, p);
    for (int t = 0; t < SPREADS_TABLES; t++)
        part_table(j, (enum spreads_table)t, &p->tables[t]);
    note_certain(j, p);
    note_left_out(j, p);
}
