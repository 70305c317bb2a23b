/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tests of the whole job share: registers in folders of their own, imports in
 * one line, and the checks that every report must pass. All through include/ohmen. */
#ifndef TESTS_WORK_TEST_H
#define TESTS_WORK_TEST_H

#include <check.h>
#include <ohmen/ohmen.h>

#include "sample.h"

/* The folder of the sources and the path of the tool, from the command line. */
extern const char *test_source, *test_tool;

/* A new arena; running out of memory ends the program. */
struct arena *test_arena(void);
/* Fails the test with the error's text when it is one. */
void must(ohmen_status status, const ohmen_error *e);

/* A new empty register in a folder of its own. */
const char *test_new(struct arena *a);
/* A file beside the register; its path. */
const char *test_file(struct arena *a, const char *reg, const char *name, const char *text);
/* A file of the sources as text. */
const char *test_read(struct arena *a, const char *path);

/* Imports files (NULL-terminated) as one entry. The report may be NULL, then it is freed. */
ohmen_status test_import(const char *reg, const char *const *files, ohmen_report **out,
                         ohmen_error *e);
/* The same with one document given as text; must succeed. */
void test_import_text(struct arena *a, const char *reg, const char *yaml);
/* A register that holds the sample network with its observations, in entry 1. */
const char *test_skerry(struct arena *a);

/* The same of the small sample samples/mill-street.yaml. */
const char *test_mill(struct arena *a);
/* The sample's files, NULL-terminated; the last one holds the observations. */
const char *const *test_skerry_files(struct arena *a);

ohmen_register *test_open(const char *reg, ohmen_mode mode);

/* Content hash as of the newest entry, and the number of that entry. */
struct test_state {
    char hash[STORE_HASH_TEXT];
    uint64_t head;
};
struct test_state test_state(const char *reg);
void test_same_state(const char *reg, const struct test_state *before);

/* The register exported: objects as YAML or observations as CSV. */
const char *test_export(struct arena *a, const char *reg, ohmen_export_part part);

/* What every report must be: text in UTF-8 that ends in a line, one JSON text, and CSV
 * whose tables have rows of one length. Returns the JSON. */
const char *test_report(ohmen_report *r);
/* The same, then frees the report; the JSON is kept in the arena. */
const char *test_json(struct arena *a, ohmen_report *r);

/* How often `part` stands in `text`. */
size_t test_count(const char *text, const char *part);

void work_report_tests(Suite *suite);
void work_figure_tests(Suite *suite);
void work_import_tests(Suite *suite);
void work_journal_tests(Suite *suite);
void work_error_tests(Suite *suite);
void work_round_tests(Suite *suite);
void work_show_tests(Suite *suite);
void work_bad_tests(Suite *suite);
void work_protection_tests(Suite *suite);
void work_turn_tests(Suite *suite);
void work_filter_tests(Suite *suite);

#endif
