/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How often the hazards of a decision end badly, now and with what is recommended: a table and a
 * sentence; owns nothing. */
#include "work/work.h"

static double value_of(const struct job *j, figure_id id)
{
    return id == FIGURE_NONE ? 0 : figure_value(j->figures, id);
}

/* Outcomes with at least this share of a hazard's risk, before or after, are bad ends. */
static const double SHARE_OF_RISK = 0.1;

struct ending {
    const struct compiled *hazard; /* NULL: there is none */
    size_t outcome;                /* SIZE_MAX: it has none of that name */
};

static struct ending ending_of(const struct compiled *hazard, const char *outcome)
{
    struct ending x = {hazard, SIZE_MAX};
    const struct hazard *h = hazard ? hazard->object->data : NULL;
    for (size_t k = 0; h && k < h->outcomes.n; k++)
        if (text_equal(h->outcomes.keys[k], outcome))
            x.outcome = k;
    return x;
}

static bool is_bad(const struct job *j, const struct ending *x)
{
    if (!x->hazard || x->outcome == SIZE_MAX)
        return false;
    const struct hazard_exports *h = x->hazard->exports;
    double all = figure_value(j->figures, h->risk);
    return all > 0 && figure_value(j->figures, h->risk_of[x->outcome]) >= SHARE_OF_RISK * all;
}

/* A bad end of a hazard: as it is now, and with the best alternative. */
struct bad_end {
    const char *hazard, *name;
    struct ending now, then;
    figure_id damage, risk;
};
struct bad_ends ARRAY_BODY(struct bad_end);

static figure_id ending_frequency(const struct ending *x)
{
    const struct hazard_exports *h = x->hazard ? x->hazard->exports : NULL;
    return h && x->outcome != SIZE_MAX ? h->frequency_of[x->outcome] : FIGURE_NONE;
}

static void add_end(struct job *j, const char *id, const struct ending *now,
                    const struct ending *then, struct bad_ends *out)
{
    const struct ending *shown = now->hazard && now->outcome != SIZE_MAX ? now : then;
    const struct hazard *h = shown->hazard->object->data;
    const struct hazard_exports *x = shown->hazard->exports;
    *array_push(j->arena, out) = (struct bad_end){
        .hazard = id,
        .name = ROW(struct outcome, h->outcomes, shown->outcome)->name,
        .now = *now,
        .then = *then,
        .damage = x->damage_of[shown->outcome],
        .risk = x->risk_of[shown->outcome],
    };
}

/* Outcomes of one hazard: those that it has now, then those that only the alternative has. */
static void add_ends(struct job *j, const char *id, const struct compiled *now,
                     const struct compiled *then, struct bad_ends *out)
{
    const struct compiled *of[] = {now, then};
    for (size_t side = 0; side < 2; side++) {
        const struct hazard *h = of[side] ? of[side]->object->data : NULL;
        for (size_t k = 0; h && k < h->outcomes.n; k++) {
            struct ending p = ending_of(now, h->outcomes.keys[k]);
            struct ending q = ending_of(then, h->outcomes.keys[k]);
            bool seen = side == 1 && p.hazard && p.outcome != SIZE_MAX;
            if (!seen && (is_bad(j, &p) || is_bad(j, &q)))
                add_end(j, id, &p, &q, out);
        }
    }
}

/* What is asked about, and what the alternative changes; all where neither is said. */
static bool matters(const struct weighing *w, size_t hazard, const struct alternative *best)
{
    const struct weighed_hazard *h = &w->hazards.at[hazard];
    if (w->branching) /* what may be done lies on many paths: as it is now */
        return h->in_focus || w->decision->focus.n == 0;
    bool changed = best->hazards[hazard] != h->now;
    return changed || h->in_focus || (w->decision->focus.n == 0 && best->n == 0);
}

static void find_ends(struct job *j, const struct weighing *w, struct bad_ends *out)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    for (size_t i = 0; i < w->hazards.n; i++)
        if (matters(w, i, best))
            add_ends(j, w->hazards.at[i].id, w->hazards.at[i].now,
                     w->branching ? w->hazards.at[i].now : best->hazards[i], out);
}

/* Is there one frequency with the best alternative, beside that of today? */
static bool has_then(const struct weighing *w)
{
    return !w->branching && w->alternatives.at[w->order[0]].n > 0;
}

static void ending_row(struct job *j, struct block *b, const struct bad_end *x, bool both)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, x->hazard);
    row_text(j->report, row, x->name);
    figure_cell(j, row, ending_frequency(&x->now));
    if (both)
        figure_cell(j, row, ending_frequency(&x->then));
    figure_cell(j, row, x->damage);
}

void part_endings(struct job *j, const struct weighing *w)
{
    const struct alternative *best = &w->alternatives.at[w->order[0]];
    struct report *r = j->report;
    struct bad_ends all = {0};
    find_ends(j, w, &all);
    struct block *b = report_table(r, "endings", "How often it ends badly");
    block_column(r, b, "hazard", "Hazard", "", STYLE_PLAIN);
    block_column(r, b, "outcome", "Outcome", "", STYLE_PLAIN);
    block_column(r, b, "today", "Today", "1/a", STYLE_FREQUENCY);
    if (has_then(w))
        block_column(r, b, "recommended", arena_printf(j->arena, "With %s", best->name), "1/a",
                     STYLE_FREQUENCY);
    block_column(r, b, "damage", "Damage", j->model->settings->currency, STYLE_MONEY)->keep = 1;
    for (size_t i = 0; i < all.n; i++)
        ending_row(j, b, &all.at[i], has_then(w));
    report_note(
        r, "endings-shown",
        "Of the hazards in focus%s: outcomes that hold at least %.0f %% of the risk of their "
        "hazard%s.",
        w->branching ? ", as they are now" : " and those that change", 100 * SHARE_OF_RISK,
        has_then(w) ? ", now or with what is recommended" : "");
}

/* "1 in 64 a", "1.54 per a", or that it never happens. */
static const char *how_often(struct job *j, figure_id frequency)
{
    double f = value_of(j, frequency);
    if (f >= 1)
        return arena_printf(j->arena, "%s per a", plain_text(j, f));
    return f > 0 ? arena_printf(j->arena, "1 in %s a", plain_text(j, 1 / f)) : "never";
}

static size_t worst_end(const struct job *j, const struct bad_ends *all, const bool *told)
{
    size_t worst = SIZE_MAX;
    for (size_t i = 0; i < all->n; i++)
        if (!told[i] &&
            (worst == SIZE_MAX || value_of(j, all->at[i].risk) > value_of(j, all->at[worst].risk)))
            worst = i;
    return worst;
}

static bool in_focus(const struct weighing *w, const char *hazard)
{
    for (size_t i = 0; i < w->hazards.n; i++)
        if (w->hazards.at[i].in_focus && text_equal(w->hazards.at[i].id, hazard))
            return true;
    return false;
}

/* Marks as told what is not asked about; returns how many remain. */
static size_t keep_focus(const struct weighing *w, const struct bad_ends *all, bool *told)
{
    size_t n = 0;
    for (size_t i = 0; i < all->n; i++) {
        told[i] = w->decision->focus.n && !in_focus(w, all->at[i].hazard);
        n += !told[i];
    }
    return n;
}

static void tell_end(struct job *j, struct text *t, const struct bad_end *x, bool both)
{
    const char *now = how_often(j, ending_frequency(&x->now));
    const char *then = how_often(j, ending_frequency(&x->then));
    text_printf(t, "%s%s (%s, %s) %s today", t->n ? "; " : "", x->name, x->hazard,
                money_text(j->arena, value_of(j, x->damage), j->model->settings->currency), now);
    if (both)
        text_printf(t, ", %s with it", text_equal(now, then) ? "as often" : then);
}

const char *endings_sentence(struct job *j, const struct weighing *w)
{
    enum { MOST = 3 };
    struct bad_ends all = {0};
    struct text t;
    text_init(&t, j->arena);
    find_ends(j, w, &all);
    bool *told = NEW_ARRAY(j->arena, all.n, bool);
    size_t n = keep_focus(w, &all, told);
    for (size_t i = 0; i < MOST && i < n; i++) {
        size_t k = worst_end(j, &all, told);
        told[k] = true;
        tell_end(j, &t, &all.at[k], has_then(w));
    }
    return n ? arena_printf(j->arena, "How often it ends badly: %s.", text_str(&t)) : "";
}
