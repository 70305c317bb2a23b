/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Conditions and order of a query: read, asked of each object, told in a note. Owns the
 * conditions. Invariant: a condition that was read fits the type of its field. */
#include "work/filter.h"

#include <math.h>
#include <stdlib.h>
#include <string.h>

#include "base/utf8.h"

enum sign { EQUAL, UNEQUAL, LESS, AT_MOST, GREATER, AT_LEAST, CONTAINS };

/* In the order in which they are looked for: the longer ones first. */
static const struct {
    const char *text;
    enum sign sign;
} signs[] = {{"!=", UNEQUAL}, {"<=", AT_MOST}, {">=", AT_LEAST}, {"=", EQUAL},
             {"<", LESS},     {">", GREATER},  {"~", CONTAINS}};

enum { N_SIGNS = sizeof signs / sizeof *signs };

struct where {
    const char *text; /* as asked for */
    struct filter_field field;
    enum sign sign;
    bool presence; /* EQUAL: not given; UNEQUAL: given */
    bool of_site;  /* wanted.text is a site, and what is inside counts */
    struct filter_value wanted;
    const char *folded; /* of wanted.text */
};

struct filter {
    struct job *job;
    ARRAY(struct where) conditions;
    bool sorted, reverse;
    struct filter_field order;
    size_t all, shown;    /* items before and behind filter_apply */
    size_t without_value; /* left out because a formula has no value to compare */
};

/* --- reading --- */

static bool is_blank(char c)
{
    return c == ' ' || c == '\t';
}

static const char *trimmed(struct arena *a, const char *s, size_t n)
{
    while (n > 0 && is_blank(s[n - 1]))
        n--;
    while (n > 0 && is_blank(*s))
        s++, n--;
    return arena_strn(a, s, n);
}

static ohmen_status no_condition(const char *text, ohmen_error *e)
{
    return error_set(e, OHMEN_USAGE,
                     "\"%s\" is no condition: expected a field, one of = != < <= > >= ~, and a "
                     "text, such as owner=Board",
                     text);
}

/* Parts a condition at its sign. Signs do not stand in the names of fields. */
static ohmen_status split(struct arena *a, struct where *c, const char **path, const char **text,
                          ohmen_error *e)
{
    size_t n = strcspn(c->text, "=!<>~"), i = 0;
    while (i < N_SIGNS && !text_starts(c->text + n, signs[i].text))
        i++;
    *path = trimmed(a, c->text, n);
    if (i == N_SIGNS || !**path)
        return no_condition(c->text, e);
    const char *behind = c->text + n + strlen(signs[i].text);
    c->sign = signs[i].sign;
    *text = trimmed(a, behind, strlen(behind));
    c->presence = !**text && (c->sign == EQUAL || c->sign == UNEQUAL);
    return **text || c->presence ? OHMEN_OK : no_condition(c->text, e);
}

static ohmen_status check_sign(const struct where *c, ohmen_error *e)
{
    const struct filter_field *f = &c->field;
    const char *words = filter_type_words(f);
    bool order = c->sign != EQUAL && c->sign != UNEQUAL && c->sign != CONTAINS;
    if (c->presence || (order && filter_is_number(f)))
        return OHMEN_OK;
    if (filter_has_parts(f) && c->sign != CONTAINS)
        return error_set(e, OHMEN_USAGE,
                         "in \"%s\", \"%s\" is %s: only ~ (contains), = and != without a text fit "
                         "it",
                         c->text, f->path, words);
    if (order)
        return error_set(e, OHMEN_USAGE,
                         "in \"%s\", \"%s\" is %s: = and != fit it, and ~ (contains); the others "
                         "fit dates, counts and quantities",
                         c->text, f->path, words);
    if (c->sign == CONTAINS && f->origin == FILTER_COMPUTED && filter_is_number(f))
        return error_set(e, OHMEN_USAGE, "in \"%s\", \"%s\" is a number: ~ fits texts only",
                         c->text, f->path);
    return OHMEN_OK;
}

static ohmen_status read_wanted(struct filter *f, struct where *c, const char *text, ohmen_error *e)
{
    ohmen_status status = check_sign(c, e);
    c->wanted = (struct filter_value){.given = true, .text = text};
    if (status == OHMEN_OK && !c->presence && c->sign != CONTAINS)
        status = filter_operand(f->job, &c->field, c->text, text,
                                c->sign == EQUAL || c->sign == UNEQUAL, &c->wanted, e);
    if (status != OHMEN_OK)
        return status;
    c->of_site = c->field.type == FIELD_REF && c->sign != CONTAINS && !c->presence &&
                 c->field.leaf->kinds == KIND_BIT(KIND_SITE);
    c->folded = utf8_fold(f->job->arena, c->wanted.text);
    return OHMEN_OK;
}

static ohmen_status harmless_text(struct arena *a, const char *text, const char **out,
                                  ohmen_error *e)
{
    if (utf8_check(text, strlen(text)) != strlen(text))
        return error_set(e, OHMEN_USAGE, "\"%s\" is not valid UTF-8", text);
    *out = utf8_nfc(a, text);
    return OHMEN_OK;
}

struct kind_columns {
    enum kind kind;
    const struct filter_column *at;
    size_t n;
};

static ohmen_status read_condition(struct filter *f, const struct kind_columns *k, const char *text,
                                   ohmen_error *e)
{
    struct where c = {0};
    const char *path = NULL, *wanted = NULL;
    ohmen_status status = harmless_text(f->job->arena, text, &c.text, e);
    if (status == OHMEN_OK)
        status = split(f->job->arena, &c, &path, &wanted, e);
    if (status == OHMEN_OK)
        status = filter_find(f->job, k->kind, k->at, k->n, path, &c.field, e);
    if (status == OHMEN_OK)
        status = read_wanted(f, &c, wanted, e);
    if (status == OHMEN_OK)
        *array_push(f->job->arena, &f->conditions) = c;
    return status;
}

static ohmen_status read_order(struct filter *f, const struct kind_columns *k, ohmen_error *e)
{
    const ohmen_query *q = &f->job->query;
    const char *path = NULL;
    if (!q->sort)
        return q->reverse ? error_set(e, OHMEN_USAGE, "a reverse order needs a field to sort by")
                          : OHMEN_OK;
    ohmen_status status = harmless_text(f->job->arena, q->sort, &path, e);
    if (status == OHMEN_OK)
        status = filter_find(f->job, k->kind, k->at, k->n, path, &f->order, e);
    if (status == OHMEN_OK && filter_has_parts(&f->order))
        status = error_set(e, OHMEN_USAGE, "\"%s\" is %s: nothing can be sorted by it", path,
                           filter_type_words(&f->order));
    f->sorted = true;
    f->reverse = q->reverse;
    return status;
}

ohmen_status filter_read(struct job *j, enum kind kind, const struct filter_column *columns,
                         size_t n_columns, struct filter **out, ohmen_error *e)
{
    const struct kind_columns k = {kind, columns, n_columns};
    struct filter *f = NEW(j->arena, struct filter);
    *f = (struct filter){.job = j};
    ohmen_status status = OHMEN_OK;
    for (size_t i = 0; status == OHMEN_OK && i < j->query.n_where; i++)
        status = read_condition(f, &k, j->query.where[i], e);
    if (status == OHMEN_OK)
        status = read_order(f, &k, e);
    *out = f;
    return status;
}

/* --- conditions --- */

/* Two numbers closer than this, of themselves, are one: the same quantity in two units. */
#define SAME 1e-12

static bool same_number(double a, double b)
{
    return a == b || fabs(a - b) <= SAME * fmax(fabs(a), fabs(b));
}

static bool same_folded(struct arena *a, const struct where *c, const char *text)
{
    return text && text_equal(utf8_fold(a, text), c->folded);
}

static bool equals(struct job *j, const struct where *c, const struct filter_value *v)
{
    if (!v->given)
        return false;
    if (c->of_site)
        return site_is_in(j->model, v->text, c->wanted.text);
    if (c->wanted.number)
        return v->number && dim_equal(v->dim, c->wanted.dim) &&
               same_number(v->value, c->wanted.value);
    if (!v->set)
        return same_folded(j->arena, c, v->text);
    for (size_t i = 0; i < v->set->n; i++)
        if (same_folded(j->arena, c, v->set->at[i]))
            return true;
    return false;
}

static bool is_ordered(struct filter *f, const struct where *c, const struct filter_value *v)
{
    double x = v->value, wanted = c->wanted.value;
    if (!v->given)
        return false;
    if (!v->number) {
        f->without_value++;
        return false;
    }
    if (!dim_equal(v->dim, c->wanted.dim))
        return false;
    if (same_number(x, wanted))
        return c->sign == AT_MOST || c->sign == AT_LEAST;
    return (x < wanted) == (c->sign == LESS || c->sign == AT_MOST);
}

static bool holds(struct filter *f, const struct where *c, const struct filter_item *item)
{
    struct job *j = f->job;
    if (c->presence)
        return filter_is_given(j, &c->field, item) == (c->sign == UNEQUAL);
    struct filter_value v = filter_value_of(j, &c->field, item);
    switch (c->sign) {
    case EQUAL: return equals(j, c, &v);
    case UNEQUAL: return !equals(j, c, &v);
    case CONTAINS: return v.text && strstr(utf8_fold(j->arena, v.text), c->folded);
    default: return is_ordered(f, c, &v);
    }
}

static void select_items(struct filter *f, struct filter_items *items)
{
    size_t kept = 0;
    for (size_t i = 0; i < items->n; i++) {
        bool wanted = true;
        for (size_t k = 0; wanted && k < f->conditions.n; k++)
            wanted = holds(f, &f->conditions.at[k], &items->at[i]);
        if (wanted)
            items->at[kept++] = items->at[i];
    }
    items->n = kept;
}

/* --- order --- */

enum { ORDER_BITS = 40 }; /* of a number that count when it is sorted: about 12 digits */

/* The same quantity in two units is one, so that ids decide. */
static double rounded(double x)
{
    int exponent;
    double part = frexp(x, &exponent);
    return ldexp(rint(ldexp(part, ORDER_BITS)), exponent - ORDER_BITS);
}

struct ordered {
    struct filter_item item;
    struct filter_value value;
    const char *folded, *unit;
    double rounded; /* value.value */
    bool reverse;
};

static int compare_values(const struct ordered *a, const struct ordered *b)
{
    if (a->value.number != b->value.number)
        return a->value.number ? -1 : 1;
    if (!a->value.number)
        return text_compare(a->folded, b->folded);
    if (!text_equal(a->unit, b->unit))
        return text_compare(a->unit, b->unit);
    return (a->rounded > b->rounded) - (a->rounded < b->rounded);
}

static int by_value(const void *p, const void *q)
{
    const struct ordered *a = p, *b = q;
    if (a->value.given != b->value.given)
        return a->value.given ? -1 : 1;
    int order = a->value.given ? compare_values(a, b) : 0;
    if (order != 0)
        return a->reverse ? -order : order;
    return text_compare(a->item.object->id, b->item.object->id);
}

static void sort_items(struct filter *f, struct filter_items *items)
{
    struct arena *a = f->job->arena;
    struct ordered *ordered = NEW_ARRAY(a, items->n + 1, struct ordered);
    for (size_t i = 0; i < items->n; i++) {
        struct filter_value v = filter_value_of(f->job, &f->order, &items->at[i]);
        ordered[i] = (struct ordered){.item = items->at[i],
                                      .value = v,
                                      .folded = utf8_fold(a, v.text ? v.text : ""),
                                      .unit = dim_unit(a, &f->job->model->units, v.dim),
                                      .rounded = rounded(v.value),
                                      .reverse = f->reverse};
    }
    if (items->n > 1)
        qsort(ordered, items->n, sizeof *ordered, by_value);
    for (size_t i = 0; i < items->n; i++)
        items->at[i] = ordered[i].item;
}

void filter_apply(struct filter *f, struct filter_items *items)
{
    f->all = items->n;
    select_items(f, items);
    f->shown = items->n;
    if (f->sorted)
        sort_items(f, items);
}

bool filter_orders(const struct filter *f)
{
    return f->sorted;
}

/* --- the fields that are asked for --- */

/* In the order of the query: of its conditions, then of its order. */
static const struct filter_field *named_field(const struct filter *f, size_t i)
{
    if (i < f->conditions.n)
        return &f->conditions.at[i].field;
    return f->sorted && i == f->conditions.n ? &f->order : NULL;
}

static bool is_new_field(const struct filter *f, size_t i)
{
    const struct filter_field *field = named_field(f, i);
    bool is_new = field->origin == FILTER_FIELD;
    for (size_t k = 0; is_new && k < i; k++)
        is_new = !text_equal(named_field(f, k)->path, field->path);
    return is_new;
}

const struct filter_field *filter_asked(const struct filter *f, size_t i)
{
    size_t n = 0;
    for (size_t k = 0; named_field(f, k); k++)
        if (is_new_field(f, k) && n++ == i)
            return named_field(f, k);
    return NULL;
}

const char *filter_column_key(struct arena *a, const char *path)
{
    char *key = arena_str(a, path);
    for (char *p = key; *p; p++) {
        bool kept = (*p >= 'a' && *p <= 'z') || (*p >= '0' && *p <= '9');
        if (*p >= 'A' && *p <= 'Z')
            *p = (char)(*p - 'A' + 'a');
        else if (!kept)
            *p = '-';
    }
    return key;
}

/* --- the note --- */

static const char *conditions_words(const struct filter *f)
{
    struct text t;
    text_init(&t, f->job->arena);
    for (size_t i = 0; i < f->conditions.n; i++)
        text_printf(&t, "%s%s", i ? " and " : "", f->conditions.at[i].text);
    return text_str(&t);
}

void part_filter(struct job *j, const struct filter *f)
{
    if (f->conditions.n)
        report_note(j->report, "filter", "Shown: %zu of %zu, where %s.", f->shown, f->all,
                    conditions_words(f));
    if (f->without_value)
        report_note(j->report, "filter-formulas",
                    "Left out: %s that %s a field compared here by a formula of other objects. "
                    "Its value is a figure, which a list does not compute.",
                    count_words(j->arena, f->without_value, "object", "objects"),
                    f->without_value == 1 ? "states" : "state");
    if (f->sorted)
        report_note(j->report, "order", "In %s order of %s.", f->reverse ? "falling" : "rising",
                    f->order.path);
}
