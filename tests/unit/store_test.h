/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the files of the store's unit tests share. */
#ifndef TESTS_STORE_TEST_H
#define TESTS_STORE_TEST_H

#include <check.h>

#include "sample.h"
#include "store/internal.h"

/* The folder of the sources. */
extern const char *test_source;

/* A new arena; running out of memory ends the program. */
struct arena *test_arena(void);
/* Fails the test with the error's text when it is one. */
void must(ohmen_status status, const ohmen_error *e);
#define MUST(call, e) must((call), (e))

/* A path in a folder of its own. */
const char *test_path(struct arena *a, const char *name);
/* A register with the sample's content in entry 1, opened to write. */
struct store *test_register(struct arena *a, const char **path);
struct store *test_open(struct arena *a, const char *path, enum store_mode mode);
uint64_t test_commit(struct store *s, struct sample *sample);
/* Fails the test when the audit finds anything. */
void test_is_sound(struct store *s);
/* Runs SQL on a connection of its own, the triggers dropped for its length. */
void test_tamper(const char *path, const char *sql);
/* Is there a finding with these words? */
bool test_finds(struct store *s, const char *words);

void store_write_tests(Suite *suite);
void store_read_tests(Suite *suite);
void store_open_tests(Suite *suite);
void store_hash_tests(Suite *suite);
void store_derived_tests(Suite *suite);
void store_audit_tests(Suite *suite);
void store_share_tests(Suite *suite);

#endif
