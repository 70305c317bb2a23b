/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The derived tables as SQL text: what is executed, what stands in the file's schema,
 * and what schema/derived.sql shows are the same bytes. Owns nothing. */
#include "store/projection.h"

const struct fixed_relation projection_fixed[] = {
    {"table", "object",
     "CREATE TABLE \"object\"( -- The live version of each object\n"
     "    \"kind\" TEXT NOT NULL, -- Kind of the object\n"
     "    \"id\" TEXT NOT NULL, -- Id of the object\n"
     "    \"seq\" INTEGER NOT NULL, -- Entry that made this version\n"
     "    \"body\" TEXT NOT NULL, -- Hash of its body\n"
     "    PRIMARY KEY(\"kind\", \"id\")\n"
     ") STRICT, WITHOUT ROWID",
     2},
    {"table", "reference",
     "CREATE TABLE \"reference\"( -- Which live object refers to which\n"
     "    \"kind\" TEXT NOT NULL, -- Kind of the object that refers\n"
     "    \"from\" TEXT NOT NULL, -- Its id\n"
     "    \"path\" TEXT NOT NULL, -- Where in it\n"
     "    \"to\" TEXT NOT NULL, -- Id that it refers to\n"
     "    \"trace\" INTEGER NOT NULL, -- 1: computes nothing (a site, a source); 0: it does\n"
     "    PRIMARY KEY(\"kind\", \"from\", \"path\", \"to\")\n"
     ") STRICT, WITHOUT ROWID",
     4},
    {"table", "snapshot",
     "CREATE TABLE \"snapshot\"( -- All live versions at some entries\n"
     "    \"at\" INTEGER NOT NULL, -- The entry\n"
     "    \"kind\" TEXT NOT NULL, -- Kind of the object\n"
     "    \"id\" TEXT NOT NULL, -- Id of the object\n"
     "    \"seq\" INTEGER NOT NULL, -- Entry that made this version\n"
     "    \"body\" TEXT NOT NULL, -- Hash of its body\n"
     "    PRIMARY KEY(\"at\", \"kind\", \"id\")\n"
     ") STRICT, WITHOUT ROWID",
     3},
    {"index", "reference_to", "CREATE INDEX \"reference_to\" ON \"reference\"(\"to\")", 0},
};
const size_t projection_n_fixed = sizeof projection_fixed / sizeof projection_fixed[0];

const char *projection_sql(struct arena *a, const struct relation *r)
{
    struct text t;
    text_init(&t, a);
    text_printf(&t, "CREATE TABLE \"%s\"( -- %s\n", r->name, r->help);
    for (size_t i = 0; i < r->columns.n; i++) {
        const struct column *c = &r->columns.at[i];
        text_printf(&t, "    \"%s\" %s%s, -- %s\n", c->name, c->whole ? "INTEGER" : "TEXT",
                    c->needed ? " NOT NULL" : "", c->help);
    }
    text_add(&t, "    PRIMARY KEY(");
    for (size_t i = 0; i < r->n_key; i++)
        text_printf(&t, "%s\"%s\"", i ? ", " : "", r->columns.at[i].name);
    text_add(&t, ")\n) STRICT, WITHOUT ROWID");
    return text_str(&t);
}

const char *projection_text(struct arena *a)
{
    struct text t;
    text_init(&t, a);
    text_add(&t, "-- SPDX-License-Identifier: GPL-3.0-or-later\n"
                 "-- The derived tables of a register, made from the field tables of "
                 "src/model;\n"
                 "-- a test holds this file to what the program makes. They follow from the "
                 "enduring\n"
                 "-- tables (schema/register.sql) alone and can be dropped at any time. Only "
                 "live\n"
                 "-- objects have rows. Quantities stand as they are written in documents.\n");
    for (size_t i = 0; i < projection_n_fixed; i++)
        text_printf(&t, "\n%s;\n", projection_fixed[i].sql);
    const struct projection *p = projection_new(a);
    for (size_t i = 0; i < p->relations.n; i++)
        text_printf(&t, "\n%s;\n", projection_sql(a, p->relations.at[i]));
    return text_str(&t);
}
