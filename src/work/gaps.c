/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What is missing in a register: owners, sources, reviews, statuses, treatments, tests, by which
 * a risk register stays alive (ISO 31000). Computes nothing but what is there and what is not.
 * Invariant: an object stands in the list once, with all that it lacks, by kind and then id. */
#include <string.h>

#include "base/date.h"
#include "work/work.h"

enum lack {
    LACK_OWNER,
    LACK_SOURCE,
    LACK_REVIEW,
    LACK_OVERDUE,
    LACK_STATUS,
    LACK_TREATMENT,
    LACK_TEST,
    LACK_HARM,
    LACK_VERIFIED,
    N_LACKS
};
#define LACK_BIT(lack) (1u << (lack))

static const char *const lack_words[N_LACKS] = {
    [LACK_OWNER] = "an owner",
    [LACK_SOURCE] = "a source",
    [LACK_REVIEW] = "a date of review",
    [LACK_OVERDUE] = "a review that is overdue",
    [LACK_STATUS] = "a status",
    [LACK_TREATMENT] = "a treatment, though it is being treated",
    [LACK_TEST] = "a test or a demand that shows undetected failures",
    [LACK_HARM] = "a hazard that harms it",
    [LACK_VERIFIED] = "somebody who has looked it up",
};

struct gap {
    const struct object *object;
    unsigned lacks; /* LACK_BIT()s */
    day due;        /* of a review that is overdue */
};

struct gaps {
    ARRAY(struct gap) list;
    size_t looked_at;
};

/* --- sources --- */

/* Does the reference lead to something from which the object's numbers come? */
static bool is_basis(const struct object *o, const struct reference *r)
{
    switch (o->kind) {
    case KIND_HAZARD: return text_equal(r->path, "frequency");
    case KIND_ELEMENT: return text_equal(r->path, "type");
    case KIND_VALUE:
    case KIND_RATE:
    case KIND_SCHEME: return !r->trace;
    default: return false;
    }
}

static bool names_source(const struct object *o, const struct reference *r)
{
    return r->kinds == KIND_BIT(KIND_SOURCE) &&
           (o->kind != KIND_HAZARD || text_equal(r->path, "source"));
}

/* Has the object a source, or anything that its numbers come from? Of a hazard only its
 * frequency counts: what outcomes cost has sources of its own. */
static bool has_source(struct job *j, const struct object *o, struct strmap *seen)
{
    if (!o || strmap_has(seen, o->id))
        return false;
    strmap_set(j->arena, seen, o->id, (void *)o);
    for (size_t i = 0; i < o->refs.n; i++)
        if (names_source(o, &o->refs.at[i]))
            return true;
    for (size_t i = 0; i < o->refs.n; i++)
        if (is_basis(o, &o->refs.at[i]) &&
            has_source(j, model_find(j->model, o->refs.at[i].id), seen))
            return true;
    return false;
}

static unsigned source_lack(struct job *j, const struct object *o)
{
    struct strmap seen = {0};
    return has_source(j, o, &seen) ? 0 : LACK_BIT(LACK_SOURCE);
}

/* --- what each kind lacks --- */

static unsigned owner_lack(const char *owner)
{
    return owner ? 0 : LACK_BIT(LACK_OWNER);
}

static unsigned review_lack(const struct job *j, day review)
{
    if (review == DAY_NONE)
        return LACK_BIT(LACK_REVIEW);
    return review < j->date ? LACK_BIT(LACK_OVERDUE) : 0;
}

static bool is_being_treated(const struct hazard *h)
{
    return h->status >= 0 && text_equal(hazard_status[h->status], "being-treated");
}

static void hazard_gap(struct job *j, const struct object *o, struct gap *g)
{
    const struct hazard *h = o->data;
    g->due = h->review;
    g->lacks = owner_lack(h->owner) | source_lack(j, o) | review_lack(j, h->review);
    if (h->status < 0)
        g->lacks |= LACK_BIT(LACK_STATUS);
    if (is_being_treated(h) && !h->treatment)
        g->lacks |= LACK_BIT(LACK_TREATMENT);
}

static void decision_gap(struct job *j, const struct object *o, struct gap *g)
{
    const struct decision *d = o->data;
    g->due = d->review;
    g->lacks = owner_lack(d->owner) | review_lack(j, d->review);
}

/* Failures that nothing shows, as the chapter on protection tells them. */
static bool stays_undetected(const struct job *j, const struct element *e)
{
    const struct element_type *t = e->type ? model_get(j->model, KIND_TYPE, e->type) : NULL;
    return (e->undetected || (t && t->undetected)) && !e->test && !e->exercised &&
           e->revealed_by.n == 0;
}

static void element_gap(struct job *j, const struct object *o, struct gap *g)
{
    g->lacks = source_lack(j, o);
    if (stays_undetected(j, o->data))
        g->lacks |= LACK_BIT(LACK_TEST);
}

static bool is_harmed(const struct job *j, const char *group)
{
    const struct objects *hazards = &j->model->of[KIND_HAZARD];
    for (size_t i = 0; i < hazards->n; i++)
        for (size_t k = 0; k < hazards->at[i]->refs.n; k++) {
            const struct reference *r = &hazards->at[i]->refs.at[k];
            if (r->kinds == KIND_BIT(KIND_GROUP) && text_equal(r->id, group))
                return true;
        }
    return false;
}

static struct gap gap_of(struct job *j, const struct object *o)
{
    struct gap g = {.object = o, .due = DAY_NONE};
    switch (o->kind) {
    case KIND_HAZARD: hazard_gap(j, o, &g); break;
    case KIND_DECISION: decision_gap(j, o, &g); break;
    case KIND_ELEMENT: element_gap(j, o, &g); break;
    case KIND_VALUE:
    case KIND_RATE:
    case KIND_TYPE: g.lacks = source_lack(j, o); break;
    case KIND_OPTION: g.lacks = owner_lack(((const struct option *)o->data)->owner); break;
    case KIND_GROUP: g.lacks = is_harmed(j, o->id) ? 0 : LACK_BIT(LACK_HARM); break;
    case KIND_SOURCE:
        if (node_get(o->node, "verified") && !((const struct source *)o->data)->verified)
            g.lacks = LACK_BIT(LACK_VERIFIED);
        break;
    default: break;
    }
    return g;
}

static void find_gaps(struct job *j, struct gaps *out)
{
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; i < j->model->of[k].n; i++) {
            const struct object *o = j->model->of[k].at[i];
            if (!job_has_at_site(j, o))
                continue;
            struct gap g = gap_of(j, o);
            out->looked_at++;
            if (g.lacks)
                *array_push(j->arena, &out->list) = g;
        }
}

/* --- the table --- */

static const char *lacks_words(struct job *j, const struct gap *g)
{
    struct text t;
    char date[DATE_TEXT];
    text_init(&t, j->arena);
    for (int lack = 0; lack < N_LACKS; lack++) {
        if (!(g->lacks & LACK_BIT(lack)))
            continue;
        text_printf(&t, "%s%s", t.n ? "; " : "", lack_words[lack]);
        if (lack == LACK_OVERDUE)
            text_printf(&t, " since %s", date_write(date, g->due));
    }
    return text_str(&t);
}

static void gap_row(struct job *j, struct block *b, const struct gap *g, const char *ids,
                    const char *name)
{
    struct row *row = block_row(j->report, b);
    row_text(j->report, row, kinds[g->object->kind].table->name);
    row_text(j->report, row, ids);
    row_text(j->report, row, name);
    row_text(j->report, row, lacks_words(j, g));
}

/* Sources that nobody has looked up differ in nothing: they share a row. Returns how many of the
 * list it took. */
static size_t source_row(struct job *j, struct block *b, const struct gaps *g, size_t from)
{
    struct text ids;
    size_t n = 0;
    text_init(&ids, j->arena);
    for (; from + n < g->list.n && g->list.at[from + n].object->kind == KIND_SOURCE; n++)
        text_printf(&ids, "%s%s", n ? ", " : "", g->list.at[from + n].object->id);
    gap_row(j, b, &g->list.at[from], text_str(&ids),
            n == 1 ? object_name(g->list.at[from].object)
                   : count_words(j->arena, n, "source", "sources"));
    return n;
}

static const char *count_sentence(struct job *j, const struct gaps *g)
{
    char date[DATE_TEXT];
    const char *of = count_words(j->arena, g->looked_at, "object", "objects");
    date_write(date, j->date);
    if (g->list.n == 0)
        return arena_printf(j->arena, "None of %s lacks anything that is asked here, on %s.", of,
                            date);
    return arena_printf(j->arena, "%zu of %s %s something, on %s.", g->list.n, of,
                        g->list.n == 1 ? "lacks" : "lack", date);
}

void part_gaps(struct job *j)
{
    struct report *r = j->report;
    struct gaps g = {0};
    find_gaps(j, &g);
    struct block *b = report_table(r, "gaps", "What is missing in the register");
    block_column(r, b, "kind", "Kind", "", STYLE_PLAIN)->keep = 2;
    block_column(r, b, "object", "Object", "", STYLE_PLAIN);
    block_column(r, b, "name", "Name", "", STYLE_PLAIN)->keep = 1;
    block_column(r, b, "lacks", "Lacks", "", STYLE_PLAIN);
    for (size_t i = 0; i < g.list.n;) {
        const struct object *o = g.list.at[i].object;
        if (o->kind == KIND_SOURCE) {
            i += source_row(j, b, &g, i);
            continue;
        }
        gap_row(j, b, &g.list.at[i++], o->id, object_name(o));
    }
    report_note(r, "gaps-count", "%s", count_sentence(j, &g));
}

/* --- the chapter of the report --- */

static size_t count_lack(const struct gaps *g, int lack)
{
    size_t n = 0;
    for (size_t i = 0; i < g->list.n; i++)
        n += (g->list.at[i].lacks & LACK_BIT(lack)) != 0;
    return n;
}

void part_gaps_counted(struct job *j)
{
    struct report *r = j->report;
    struct gaps g = {0};
    find_gaps(j, &g);
    report_heading(r, 2, "What is missing");
    report_note(r, "gaps-count", "%s%s", count_sentence(j, &g),
                g.list.n ? " `ohmen gaps` lists them." : "");
    if (g.list.n == 0)
        return;
    struct block *b = report_table(r, "gaps-counted", NULL);
    block_column(r, b, "lack", "Lacking", "", STYLE_PLAIN);
    block_column(r, b, "objects", "Objects", "", STYLE_PLAIN);
    for (int lack = 0; lack < N_LACKS; lack++) {
        size_t n = count_lack(&g, lack);
        if (n == 0)
            continue;
        struct row *row = block_row(r, b);
        row_text(r, row, lack_words[lack]);
        row_count(r, row, n);
    }
}

static ohmen_status run_gaps(struct job *j, void *ctx, ohmen_error *e)
{
    (void)ctx;
    ohmen_status status = job_load_model(j, e);
    if (status == OHMEN_OK)
        status = job_check_site(j, e);
    if (status == OHMEN_OK)
        part_gaps(j);
    return status;
}

ohmen_status ohmen_gaps(ohmen_register *r, const ohmen_query *q, ohmen_report **out, ohmen_error *e)
{
    return job_do(r, STORE_READ, q, run_gaps, NULL, out, e);
}
