/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Field tables: one description of every kind of object, from which the binder,
 * the walkers, the derived SQL tables, the JSON Schema, the export and the docs come.
 *
 * A table describes a C struct and the map that a user writes for it. Composite
 * fields (rows, lists) describe their parts by a field of their own, so recursion
 * (a response row that splits into branches that split) needs no code.
 *
 * Three forms of an object:
 *   document node   what the user wrote (src/doc/yaml.h)
 *   canonical node  what is stored: sorted keys, typed scalars, normalised texts,
 *                   short forms written out; binding a canonical node again gives
 *                   the same canonical node
 *   bound struct    what the program reads */
#ifndef MODEL_FIELD_H
#define MODEL_FIELD_H

#include "base/date.h"
#include "doc/node.h"
#include "quantity/quantity.h"

/* The C member of each type, and its canonical form. */
enum field_type {
    FIELD_TEXT,      /* const char *; text in NFC, NULL when absent */
    FIELD_NAME,      /* const char *; a name by the grammar of names, free of meaning elsewhere */
    FIELD_REF,       /* const char *; the id of an object of one of the kinds in `kinds` */
    FIELD_REFS,      /* struct names; a set of such ids, canonical: sorted list */
    FIELD_NAMES,     /* struct names; a set of names, canonical: sorted list */
    FIELD_ORDERED,   /* struct names; a list of names whose order matters */
    FIELD_WORD,      /* int; index into `words`, -1 when absent */
    FIELD_YES,       /* bool; yes or no */
    FIELD_COUNT,     /* int64_t; low .. high, -1 when absent; canonical: an integer */
    FIELD_DATE,      /* day; YYYY-MM-DD, DAY_NONE when absent */
    FIELD_WHEN,      /* day; a date, or a year (its first day); canonical as written */
    FIELD_UNIT,      /* const char *; units such as `section a` */
    FIELD_QUANTITY,  /* struct quantity *; dimension by `dim` */
    FIELD_STRUCT,    /* void *; a map by `table`, NULL when absent */
    FIELD_ROWS,      /* struct rows; a map from keys to `part` */
    FIELD_LIST,      /* struct list; a list of `part` */
    FIELD_STRUCTURE, /* struct structure *; how elements work together */
    FIELD_CHANGE     /* const struct node *; a change of the register: a map of sections */
};

/* What a quantity must be. */
enum field_dim {
    ANY,
    NUMBER,
    PROBABILITY /* a number 0..1 */,
    TIME,
    POWER,
    MONEY,
    FREQUENCY /* 1/time */,
    MONEY_RATE /* money/time */,
    INTEREST /* 1/time, more than -1 per a */
};

/* The dimension; NULL for ANY. */
const struct dim *field_dimension(enum field_dim d);
/* The same for messages: "a time such as 2 h". */
const char *field_dimension_words(enum field_dim d);

enum field_flag {
    REQUIRED = 1 << 0,
    CERTAIN = 1 << 1,  /* a quantity: no distribution, and its names must be certain too */
    POSITIVE = 1 << 2, /* a quantity or its constant: > 0 */
    NOT_NEGATIVE = 1 << 3,
    REST = 1 << 4,     /* a quantity that may be the word `rest` (expr is NULL then) */
    LATER = 1 << 5,    /* read, checked, stored and written back, but not used in the figures
                          of this version: reports name it where it is given */
    CONSTANT = 1 << 6, /* a quantity of literals only */
    VARYING = 1 << 7,  /* a quantity drawn anew at each occurrence */
    TRACE = 1 << 8,    /* a reference that computes nothing: site, source, owner */
    FREQUENCY_ONLY = 1 << 9 /* references to hazards of which only the frequency is asked */
};

struct table;

struct field {
    const char *key; /* as written; NULL for the part of rows and lists */
    enum field_type type;
    unsigned flags;
    size_t offset;
    enum field_dim dim;        /* FIELD_QUANTITY */
    unsigned kinds;            /* FIELD_REF, FIELD_REFS, keys of FIELD_ROWS: 1 << kind, ... */
    int64_t low, high;         /* FIELD_COUNT */
    const char *const *words;  /* FIELD_WORD, NULL-terminated */
    const struct table *table; /* FIELD_STRUCT */
    const struct field *part;  /* FIELD_ROWS, FIELD_LIST; its offset is 0 */
    bool year_keys;            /* FIELD_ROWS: keys are years */
    const char *help;          /* one line for docs and schema */
};

/* Keys of which one, or at most one, may be given. */
struct group {
    bool needed; /* exactly one */
    const char *keys[8];
};

struct table {
    const char *name; /* "element", "response row": for messages, SQL and schema */
    size_t size;      /* of the struct */
    const struct field *fields;
    size_t n_fields;
    const struct group *groups;
    size_t n_groups;
    const char *short_key; /* a scalar, a list, or a map of a quantity's keys stands for a map
                                 with this one key; NULL: none */
    bool structure_keys;   /* `all`, `any`, `at-least` and `of` may stand here instead of
                                 under the short key */
    const char *help;
};

struct names {
    size_t n;
    const char **at;
};

struct rows {
    size_t n;
    const char **keys; /* in byte order */
    void *at;          /* n members of the part's type; for FIELD_STRUCT parts: void * */
};

struct list {
    size_t n;
    void *at; /* n members of the part's type */
};

/* The i-th struct of rows or a list whose part is a FIELD_STRUCT. */
#define ROW(T, rows, i) (((T *const *)(rows).at)[i])

/* How elements and schemes together perform a function (IEC 60050-448). */
enum structure_op { STRUCTURE_NAME, STRUCTURE_AT_LEAST, STRUCTURE_ABSENT };
struct structure {
    enum structure_op op;
    const char *name; /* STRUCTURE_NAME: an element or a scheme */
    uint32_t k;       /* STRUCTURE_AT_LEAST: all is n of n, any is 1 of n */
    size_t n;
    struct structure **of;
};
#define STRUCTURE_DEPTH 20

const struct field *table_field(const struct table *t, const char *key);

/* Bytes of the C member of a field's type, for the parts of rows and lists. */
size_t field_size(const struct field *f);

#endif
