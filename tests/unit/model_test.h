/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The suites of the model layer, one file each, and what they share. */
#ifndef TESTS_MODEL_TEST_H
#define TESTS_MODEL_TEST_H

#include <check.h>

#include "base/file.h"
#include "doc/yaml.h"
#include "model/bind.h"
#include "model/documents.h"
#include "model/model.h"

Suite *suite_walk(void);
Suite *suite_bind(void);
Suite *suite_quantities(void);
Suite *suite_registers(void);
Suite *suite_documents(void);
Suite *suite_load(void);
Suite *suite_variant(void);
Suite *suite_bad(void);
Suite *suite_schema(void);

/* The root of the source, from the command line. */
extern const char *model_test_root;

/* A new arena with empty diagnostics. */
struct sheet {
    struct arena *arena;
    struct diags diags;
};
struct sheet sheet_new(void);

/* The whole of a file below the root; fails when it cannot be read. */
const char *sheet_file(struct sheet *s, const char *path);

/* A document; NULL with diagnostics. */
struct node *sheet_yaml(struct sheet *s, const char *text);

/* What documents make of an empty register; false with diagnostics. */
bool sheet_merge(struct sheet *s, size_t n, const struct node *const *roots,
                 struct model_sources *out);

/* The model of one document, settings included; NULL with diagnostics. */
struct model *sheet_load(struct sheet *s, const char *text);

/* The same behind settings of its own (currency EUR, counts section and bay), which take
 * the first lines. */
#define SHEET_SETTINGS_LINES 7
struct model *sheet_register(struct sheet *s, const char *text);

/* Exactly one diagnostic, at this place, that holds all the words (NULL-terminated). */
void sheet_expect(struct sheet *s, uint32_t line, uint32_t column, ...);
/* No diagnostic; prints the first one otherwise. */
void sheet_fine(struct sheet *s);

/* A canonical node as JSON. */
const char *sheet_json(struct sheet *s, const struct node *n);

/* Compares `text` with a file below the root; with OHMEN_ACCEPT=1 in the environment
 * writes the file instead. */
void sheet_accept(struct sheet *s, const char *path, const char *text);

#endif
