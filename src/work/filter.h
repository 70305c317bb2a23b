/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which objects of a kind a table shows, and in which order: the conditions and the order of
 * a query, read once against the field table of the kind, then asked of each object.
 *
 * A field is named by its path as in documents ("test/every"; the key of a row stands for
 * itself: "outcomes/slow/name"), by "id" or "name", or by the key of a computed column, which
 * hides a field of the same name. A part that has a short form stands for the field that the
 * short form is ("running" is "running/is"). Private to src/work. */
#ifndef WORK_FILTER_H
#define WORK_FILTER_H

#include "work/work.h"

/* What an object says in a field, or what was computed for it. */
struct filter_value {
    bool given;
    bool number;             /* compared by `value`: counts, dates, quantities of one number, by the
                        mean where they have a distribution */
    double value;            /* in base units; of a date its day */
    struct dim dim;          /* of value */
    const char *text;        /* the canonical text in one line; NULL of what is computed */
    const struct names *set; /* of a set of names; or NULL */
};

/* A computed column: FIELD_COUNT, FIELD_QUANTITY or FIELD_TEXT. */
struct filter_column {
    const char *key;
    enum field_type type;
    enum field_dim dim;
};

/* An object that may be shown. */
struct filter_item {
    const struct object *object;
    const struct filter_value *computed; /* one a computed column */
    size_t index;                        /* the caller's own */
};
struct filter_items ARRAY_BODY(struct filter_item);

/* Reads the query of the job for objects of a kind. The columns are borrowed. */
struct filter;
ohmen_status filter_read(struct job *j, enum kind kind, const struct filter_column *columns,
                         size_t n_columns, struct filter **out, ohmen_error *e);

/* Takes out the items for which a condition does not hold, and orders what is left; without an
 * order asked for, it stays as it was. */
void filter_apply(struct filter *f, struct filter_items *items);

/* Is there an order asked for? */
bool filter_orders(const struct filter *f);

/* The i-th field of the documents that the query names, each once; NULL behind the last one. A
 * table shows them even where it has no column for them otherwise. */
const struct filter_field *filter_asked(const struct filter *f, size_t i);
/* Its path as the key of such a column: "test/every" is test-every. */
const char *filter_column_key(struct arena *a, const char *path);

/* A note: how many are shown, and why these; nothing without conditions and order. */
void part_filter(struct job *j, const struct filter *f);

/* --- hazards with their figures (parts.c) --- */

/* The computed columns of the table of hazards. */
enum hazard_column {
    HAZARD_RANK,
    HAZARD_FREQUENCY,
    HAZARD_DAMAGING,
    HAZARD_DAMAGE,
    HAZARD_RISK,
    HAZARD_CRITERION,
    N_HAZARD_COLUMNS
};
extern const struct filter_column hazard_columns[N_HAZARD_COLUMNS];

/* The table of those hazards that the filter asks for, ranked among all; f NULL: all. */
void part_hazards_where(struct job *j, const struct hazards *h, struct filter *f);

/* --- fields (filter_field.c) --- */

enum filter_origin { FILTER_ID, FILTER_NAME, FILTER_FIELD, FILTER_COMPUTED };

/* A field that was found by its path. */
struct filter_field {
    const char *path;
    enum filter_origin origin;
    enum field_type type;
    const struct field *leaf;  /* FILTER_FIELD */
    enum field_dim dim;        /* FIELD_QUANTITY */
    size_t column;             /* FILTER_COMPUTED */
    ARRAY(const char *) steps; /* FILTER_FIELD: keys from the object down */
    size_t n_asked;            /* steps of the path; one less than steps behind a short form */
};

ohmen_status filter_find(struct job *j, enum kind kind, const struct filter_column *columns,
                         size_t n_columns, const char *path, struct filter_field *out,
                         ohmen_error *e);
struct filter_value filter_value_of(struct job *j, const struct filter_field *f,
                                    const struct filter_item *item);
/* Is anything given there? A part counts by itself, not by its short form. */
bool filter_is_given(struct job *j, const struct filter_field *f, const struct filter_item *item);

/* Does the field hold single values of these sorts? */
bool filter_is_number(const struct filter_field *f); /* a count, a date, a quantity */
bool filter_is_set(const struct filter_field *f);    /* names */
bool filter_has_parts(const struct filter_field *f); /* rows, lists, structures */
/* "a date", "a quantity", "a text": for messages. */
const char *filter_type_words(const struct filter_field *f);

/* --- what a field is compared with (filter_operand.c) --- */

/* Reads the text of a condition as the field's type asks: a wrong one is OHMEN_USAGE, the id of
 * an object that there is not OHMEN_UNKNOWN. exact: of = and !=, otherwise of an order. */
ohmen_status filter_operand(struct job *j, const struct filter_field *f, const char *condition,
                            const char *text, bool exact, struct filter_value *out, ohmen_error *e);

#endif
