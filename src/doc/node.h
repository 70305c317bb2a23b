/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The document tree: what YAML, CSV cells, and canonical JSON are read into.
 *
 * A node is a scalar, a map, or a list. Keys of a map are unique (the readers
 * refuse duplicates). A tree read from YAML holds only FORM_TEXT scalars and
 * keeps the order of the document; a *canonical* tree (what bodies are made of)
 * has keys in byte order, text in NFC, and typed scalars. Trees are immutable
 * once built and may share subtrees; all memory is an arena's. No tree is nested
 * deeper than the readers allow (JSON_DEPTH), so walking one may recurse. */
#ifndef DOC_NODE_H
#define DOC_NODE_H

#include <stdbool.h>

#include "base/array.h"
#include "base/diag.h"

enum node_type { NODE_SCALAR, NODE_MAP, NODE_LIST };

/* How a scalar is written in canonical JSON. */
enum node_form {
    FORM_TEXT,  /* a string */
    FORM_COUNT, /* an integer, 0 .. 2^53 - 1; `text` holds its decimal digits */
    FORM_YES,   /* true: `text` is "yes" */
    FORM_NO     /* false: `text` is "no"; in a change it removes what it stands for */
};

struct node {
    enum node_type type;
    enum node_form form;   /* scalars only */
    const char *text;      /* scalars only */
    bool quoted;           /* a scalar that stood in quotes or in a block */
    struct place place;    /* of the value's first character */
    size_t n;              /* pairs of a map or items of a list */
    struct pair *pairs;    /* maps only */
    struct node **items;   /* lists only */
    size_t cap;            /* room in pairs or items: of node_add and node_push only */
    bool sorted;           /* maps: the keys are known to be in byte order */
};

struct pair {
    const char *key;
    struct place place; /* of the key's first character */
    struct node *value;
};

struct node *node_scalar(struct arena *a, enum node_form form, const char *text, struct place at);
struct node *node_map(struct arena *a, struct place at);
struct node *node_list(struct arena *a, struct place at);

/* The value under `key`, or NULL (also when `map` is NULL or no map). Linear for
 * small maps, binary search for maps sorted by node_sort with many keys. */
struct node *node_get(const struct node *map, const char *key);

/* Appends a pair; the caller knows that the key is new. Amortised O(1). */
void node_add(struct arena *a, struct node *map, const char *key, struct place at,
              struct node *value);
/* Sets or replaces the value under `key`. */
void node_set(struct arena *a, struct node *map, const char *key, struct node *value);
void node_push(struct arena *a, struct node *list, struct node *item);

/* Sorts the keys of this map (not of its children) by bytes. */
void node_sort(struct node *map);

/* Same types, forms, texts, keys (in any order) and items; places and quotes do
 * not count. Linear where the keys of both stand in the same order; keys of maps
 * that are not sorted and stand in another order are looked up one by one. */
bool node_equal(const struct node *a, const struct node *b);

/* A deep copy in which no map or list is shared with the original. */
struct node *node_copy(struct arena *a, const struct node *n);

#endif
