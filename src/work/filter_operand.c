/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What a condition compares a field with, read as the type of the field asks. Owns nothing.
 * Invariant: a text that no object could be equal to is refused with what would fit. */
#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"
#include "work/filter.h"

struct reading {
    struct job *j;
    const struct filter_field *field;
    const char *condition, *text; /* the whole, and what stands behind its sign */
    bool exact;
    struct filter_value *out;
};

static ohmen_status no_fit(const struct reading *r, const char *what, ohmen_error *e)
{
    return error_set(e, OHMEN_USAGE, "in \"%s\", \"%s\" is %s", r->condition, r->text, what);
}

static bool all_digits(const char *s, size_t most)
{
    size_t n = strlen(s);
    return n > 0 && n <= most && strspn(s, "0123456789") == n;
}

static void take_number(const struct reading *r, double value)
{
    r->out->number = true;
    r->out->value = value;
}

enum { COUNT_DIGITS = 15, YEAR_DIGITS = 4 }; /* digits that a double holds exactly */

static ohmen_status read_count(const struct reading *r, ohmen_error *e)
{
    if (!all_digits(r->text, COUNT_DIGITS))
        return no_fit(r, "no whole number such as 12", e);
    take_number(r, (double)strtoll(r->text, NULL, 10));
    return OHMEN_OK;
}

/* A year is its first day, in the fields where documents may say so. */
static ohmen_status read_date(const struct reading *r, ohmen_error *e)
{
    day d;
    bool when = r->field->type == FIELD_WHEN;
    if (when && strlen(r->text) == YEAR_DIGITS && all_digits(r->text, YEAR_DIGITS) &&
        atoi(r->text) > 0)
        d = date_of(atoi(r->text), 1, 1);
    else if (!date_read(r->text, &d))
        return no_fit(r,
                      when ? "neither a year such as 2027 nor a date such as 2027-06-30"
                           : "no date such as 2027-06-30",
                      e);
    take_number(r, (double)d);
    return OHMEN_OK;
}

/* --- quantities --- */

static bool no_name(void *ctx, const struct expr *e, struct place at, struct dim *out)
{
    (void)ctx, (void)e, (void)at, (void)out;
    return false;
}

static ohmen_status check_dimension(const struct reading *r, struct dim found, ohmen_error *e)
{
    const struct dim *wanted = field_dimension(r->field->dim);
    if (!wanted || dim_equal(*wanted, found))
        return OHMEN_OK;
    return error_set(e, OHMEN_USAGE, "in \"%s\", \"%s\" is %s; \"%s\" is compared with %s",
                     r->condition, r->text, dim_words(r->j->arena, &r->j->model->units, found),
                     r->field->path, field_dimension_words(r->field->dim));
}

/* A formula or a distribution can only read the same. */
static ohmen_status take_formula(const struct reading *r, ohmen_error *e)
{
    if (!r->exact || r->field->origin == FILTER_COMPUTED)
        return error_set(e, OHMEN_USAGE, "in \"%s\", \"%s\" is no single number: expected %s",
                         r->condition, r->text, field_dimension_words(r->field->dim));
    r->out->text = quantity_canonical(r->j->arena, &r->j->model->units, r->text);
    return OHMEN_OK;
}

static ohmen_status read_quantity(const struct reading *r, ohmen_error *e)
{
    struct arena *a = r->j->arena;
    const struct units *units = &r->j->model->units;
    const struct expr_names names = {.dim = no_name};
    struct diags d;
    diags_init(&d, a);
    struct quantity *q = quantity_parse(a, units, r->text, (struct place){0}, &d);
    if (q && !quantity_is_constant(q))
        return take_formula(r, e);
    if (!q || !quantity_check(a, units, q, &names, (struct place){0}, &d))
        return error_set(e, OHMEN_USAGE, "in \"%s\", %s; expected %s", r->condition,
                         d.list.n ? d.list.at[0].text : "the quantity cannot be read",
                         field_dimension_words(r->field->dim));
    double x = expr_constant(q->expr);
    if (!isfinite(x))
        return no_fit(r, "no finite number", e);
    take_number(r, x);
    r->out->dim = q->dim;
    return check_dimension(r, q->dim, e);
}

/* --- words and names --- */

static bool same_text(struct arena *a, const char *p, const char *q)
{
    return text_equal(utf8_fold(a, p), utf8_fold(a, q));
}

static ohmen_status read_word(const struct reading *r, ohmen_error *e)
{
    static const char *const yes_no[] = {"yes", "no", NULL};
    const char *const *words = r->field->type == FIELD_YES ? yes_no : r->field->leaf->words;
    struct nearest near;
    struct text all;
    nearest_init(&near, r->text);
    text_init(&all, r->j->arena);
    for (size_t i = 0; words[i]; i++) {
        if (same_text(r->j->arena, words[i], r->text))
            return OHMEN_OK;
        nearest_offer(&near, words[i]);
        text_printf(&all, "%s%s", i ? ", " : "", words[i]);
    }
    return error_set(e, OHMEN_USAGE, "in \"%s\", \"%s\" is none of %s%s", r->condition, r->text,
                     text_str(&all), nearest_hint(r->j->arena, &near));
}

/* The object that is meant: of that very id, else of one that differs in case alone. */
static ohmen_status read_id(const struct reading *r, unsigned allowed, ohmen_error *e)
{
    struct nearest near;
    const char *found = NULL;
    nearest_init(&near, r->text);
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; (allowed & KIND_BIT(k)) && i < r->j->model->of[k].n; i++) {
            const char *id = r->j->model->of[k].at[i]->id;
            if (text_equal(id, r->text) || (!found && same_text(r->j->arena, id, r->text)))
                found = id;
            nearest_offer(&near, id);
        }
    if (!found)
        return error_set(e, OHMEN_UNKNOWN, "in \"%s\", \"%s\" is not the id of %s%s", r->condition,
                         r->text, kinds_words(r->j->arena, allowed),
                         nearest_hint(r->j->arena, &near));
    r->out->text = found;
    return OHMEN_OK;
}

ohmen_status filter_operand(struct job *j, const struct filter_field *f, const char *condition,
                            const char *text, bool exact, struct filter_value *out, ohmen_error *e)
{
    struct reading r = {j, f, condition, text, exact, out};
    *out = (struct filter_value){.given = true, .text = text};
    switch (f->type) {
    case FIELD_COUNT: return read_count(&r, e);
    case FIELD_DATE:
    case FIELD_WHEN: return read_date(&r, e);
    case FIELD_QUANTITY: return read_quantity(&r, e);
    case FIELD_YES:
    case FIELD_WORD: return read_word(&r, e);
    case FIELD_REF:
    case FIELD_REFS: return read_id(&r, f->leaf->kinds, e);
    default: return OHMEN_OK;
    }
}
