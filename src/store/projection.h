/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Derived tables: which relations the field tables make, and the rows that bodies
 * make in them.
 *
 * A kind is a relation with one row an object; maps inside an object are columns with a
 * prefix (test_every); rows, lists, sets, structures and changes are relations of their
 * own, whose rows are known by the object and the path inside it. `within` is the path
 * of the row that a row stands in, so that
 *     SELECT * FROM damage JOIN outcome
 *         ON damage.hazard = outcome.hazard AND damage.within = outcome.path
 * A map that may contain itself (a branch, a step) is one relation, however deep.
 *
 * Beside them: object (the live versions), reference (who refers to whom), snapshot
 * (the live versions at some entries). All of it follows from the enduring tables
 * alone; it may be dropped at any time. schema/derived.sql shows it. */
#ifndef STORE_PROJECTION_H
#define STORE_PROJECTION_H

#include "model/walk.h"
#include "store/internal.h"

struct column {
    const char *name;
    bool whole;  /* INTEGER, else TEXT */
    bool needed; /* NOT NULL */
    const char *help;
};

struct relation {
    const char *name;
    const char *help;
    ARRAY(struct column) columns; /* the first n_key are the primary key */
    size_t n_key;
    size_t index;   /* in the projection */
    enum kind kind; /* whose objects make it */
};

/* Where a field goes when it is met at one place of an object. */
enum spot_shape {
    SPOT_COLUMN,    /* a column of the open row */
    SPOT_GROUP,     /* a map: its fields are columns of the open row */
    SPOT_ROWS,      /* rows or a list: each member is a row of `relation` */
    SPOT_ROW,       /* one such member, or a map that may contain itself */
    SPOT_SET,       /* each name is a row */
    SPOT_STRUCTURE, /* each member is a row */
    SPOT_CHANGE     /* each leaf is a row */
};

struct spot {
    enum spot_shape shape;
    const struct field *field;
    struct relation *relation; /* that it makes rows of; of SPOT_COLUMN and SPOT_GROUP: NULL */
    size_t column;             /* SPOT_COLUMN; SPOT_ROW of a scalar; else 0 */
    struct spots *below;       /* SPOT_GROUP, SPOT_ROWS, SPOT_ROW */
    struct spot *content;      /* SPOT_ROW whose part is a set, a structure or a change */
};
struct spots ARRAY_BODY(struct spot *);

struct projection {
    ARRAY(struct relation *) relations; /* in the order of kinds, parents first */
    struct relation *of[KIND_COUNT];    /* the relation of each kind */
    struct spots *spots[KIND_COUNT];
};

/* Columns that relations begin with. */
enum { KIND_KEYS = 1 /* id */, ROW_KEYS = 2 /* owner, path */ };
enum { ROW_OWNER, ROW_PATH, ROW_WITHIN, ROW_KEY };

struct projection *projection_new(struct arena *a);
/* CREATE TABLE of one relation, as it stands in sqlite_schema. */
const char *projection_sql(struct arena *a, const struct relation *r);
/* The names and CREATE statements of object, reference, snapshot and its index. */
struct fixed_relation {
    const char *type, *name, *sql;
    size_t n_key; /* of a table: columns of its primary key */
};
extern const struct fixed_relation projection_fixed[];
extern const size_t projection_n_fixed;
/* All of schema/derived.sql. */
const char *projection_text(struct arena *a);

/* --- derive.c: from bodies to rows --- */

/* Makes all derived tables, empty. */
ohmen_status derive_create(struct arena *a, const struct base *to, const struct projection *p,
                           ohmen_error *e);

/* Writes the rows of objects into one database. */
struct derivation;
struct derivation *derive_begin(struct arena *a, const struct base *to, struct projection *p,
                                const struct units *units, ohmen_error *e);
/* Replaces the rows of an object by those of its body; n bytes of json, NULL: removed. */
ohmen_status derive_object(struct derivation *d, enum kind kind, const char *id, const char *json,
                           size_t n);
ohmen_status derive_end(struct derivation *d);

/* --- rebuild.c: the whole --- */

/* The projection of a store, made when first needed. */
struct projection *store_projection(struct store *s);

/* Is a snapshot due after `changes` since the last one, with `live` objects? */
bool rebuild_snapshot_due(int64_t changes, int64_t live);
/* Takes one of all that is in `object`. */
ohmen_status rebuild_snapshot(const struct base *to, int64_t seq, ohmen_error *e);
/* One version in `object`. */
void rebuild_head(struct query *put, struct query *drop, const struct state_row *row);
#define REBUILD_PUT_SQL                                                                            \
    "INSERT INTO object(kind, id, seq, body) VALUES(?1, ?2, ?3, ?4) "                              \
    "ON CONFLICT(kind, id) DO UPDATE SET seq = excluded.seq, body = excluded.body"
#define REBUILD_DROP_SQL "DELETE FROM object WHERE kind = ?1 AND id = ?2"

/* Are the derived tables of the file those of this version? */
ohmen_status rebuild_layout_is_ours(struct store *s, bool *ours, ohmen_error *e);
/* Fills empty derived tables in `to` from the enduring tables of s. */
ohmen_status rebuild_fill(struct store *s, const struct base *to, ohmen_error *e);
/* Drops, makes and fills those of the file itself; the caller holds a write transaction. */
ohmen_status rebuild_all(struct store *s, ohmen_error *e);
/* The units that quantities of the register as it stands in version are read with. */
ohmen_status rebuild_units(struct store *s, struct arena *a, struct units *out, ohmen_error *e);

#endif
