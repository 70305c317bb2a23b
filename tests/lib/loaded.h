/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A register for tests of figures: from the text of documents straight to figures, without
 * a register file. What is wrong with the documents fails the Check test, with its place. */
#ifndef TESTS_LOADED_H
#define TESTS_LOADED_H

#include "decide/weigh.h"
#include "model/documents.h"

/* Their day of evaluation. */
#define LOADED_DATE date_of(2026, 12, 1)

struct loaded {
    struct arena *arena;
    struct model *model;
    struct figures *figures;
};

/* Reads n documents and makes figures from the perspective (NULL: the register's own). All
 * memory is the arena's. */
void loaded_texts(struct loaded *l, struct arena *a, size_t n, const char *const *texts,
                  const char *perspective);
void loaded_text(struct loaded *l, struct arena *a, const char *text, const char *perspective);

/* The same of every *.yaml file of a folder, in byte order of their names. */
void loaded_folder(struct loaded *l, struct arena *a, const char *folder, const char *perspective);

/* The same of objects: document nodes or canonical ones. */
void loaded_objects(struct loaded *l, struct arena *a, const struct model_sources *sources,
                    const char *perspective);

/* Compiles and evaluates a figure of any kind by its name; fails the test when there is
 * none. */
figure_id loaded_find(struct loaded *l, const char *name);
double loaded_value(struct loaded *l, const char *name);

/* Compiles an object under a set of options, and evaluates all that was compiled. */
const struct variant *loaded_variant(struct loaded *l, size_t n, const char *const *options);
const struct compiled *loaded_compile(struct loaded *l, const struct variant *v, const char *id);
void loaded_evaluate(struct loaded *l);

#endif
