/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the register generator share. Private to registers*.c. */
#ifndef TESTS_REGISTERS_PARTS_H
#define TESTS_REGISTERS_PARTS_H

#include "base/text.h"
#include "registers.h"

struct ids ARRAY_BODY(const char *);

/* A named value and its dimension. */
struct known_value {
    const char *id;
    enum field_dim dim;
};

struct generator {
    struct arena *arena;
    struct random random;
    struct register_shape shape;
    struct node *root;
    struct ids ids[KIND_COUNT]; /* those that references may name */
    ARRAY(struct known_value) values;
    struct ids rate_per; /* of each usable rate: "section a", "km a", "a" */
    struct ids own;      /* elements with a plain probability of their own */
    struct ids absent;   /* schemes that are absent */
    struct ids shares;   /* "share(rate-1; earth)" */
    unsigned years;      /* of the horizon */
    bool winding_is_unknown;
    size_t applied; /* options that a tree applies already */
};

/* --- drawing --- */

/* One chance in n. */
bool random_chance(struct generator *g, unsigned n);
unsigned random_draw(struct generator *g, unsigned low, unsigned high);
/* Three digits, evenly in the logarithm; lo > 0. */
const char *random_number(struct generator *g, double lo, double hi);
const char *random_text(struct generator *g);
const char *random_date(struct generator *g);
/* One of the ids of a kind; one of those near `around` (a number of an object) where
 * there are many, so that large registers fall into neighbourhoods. */
const char *random_id(struct generator *g, enum kind kind);
const char *random_near_id(struct generator *g, enum kind kind, unsigned around, unsigned width);

/* --- nodes --- */

struct node *make_scalar(struct generator *g, const char *text);
struct node *make_map(struct generator *g);
struct node *make_list(struct generator *g);
void put_node(struct generator *g, struct node *m, const char *key, struct node *value);
void put_text(struct generator *g, struct node *m, const char *key, const char *text);
/* {key: value} */
struct node *make_pair(struct generator *g, const char *key, struct node *value);

/* --- quantities --- */

/* A literal; not negative, a probability at most 1. */
const char *random_literal(struct generator *g, enum field_dim dim);
/* An expression of that dimension, not negative, a probability at most 1. */
const char *random_expression(struct generator *g, enum field_dim dim, unsigned depth);
/* An expression, a range or a distribution. */
struct node *random_quantity(struct generator *g, enum field_dim dim);

/* --- filling by the field tables (registers_fill.c) --- */

/* Adds what the table requires and what chance wants of the rest, but no key of a group
 * and none of `skip` (NULL-terminated). */
void fill_fields(struct generator *g, struct node *m, const struct table *t,
                 const char *const *skip);
/* A probability of failure on demand that can be evaluated. */
struct node *random_record(struct generator *g);
/* A structure over the elements and the earlier schemes around number `around`. */
struct node *random_structure(struct generator *g, unsigned around, unsigned depth);
/* Growth, ageing and kinds of fault of a rate, which begins to age before 2010. */
void random_course(struct generator *g, struct node *rate, const char *id);
void registers_add_stored(struct generator *g);

/* --- hazards and options (registers_hazard.c) --- */

void registers_add_hazards(struct generator *g);
void registers_add_options(struct generator *g);

#endif
