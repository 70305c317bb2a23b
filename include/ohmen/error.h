/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Status codes, exit statuses and the error object of libohmen.
 *
 * Every function that can fail returns an ohmen_status and takes, as its last
 * parameter, an ohmen_error owned by the caller, which may be NULL. On failure
 * the outputs of the function are untouched and the error holds one sentence:
 * what is wrong with which thing, and what was expected. The first cause wins:
 * a message is never overwritten on its way up. */
#ifndef OHMEN_ERROR_H
#define OHMEN_ERROR_H

/* One row a status: name, exit status of the command line tool, short text.
 * docs/commands.md lists the exit statuses from this table. */
#define OHMEN_STATUS_LIST(X)                                                              \
    X(OK, 0, "done")                                                                      \
    X(USAGE, 2, "the command line is wrong")                                              \
    X(INPUT, 3, "a document or a list is wrong; nothing was stored")                      \
    X(UNKNOWN, 4, "the named thing does not exist")                                       \
    X(REGISTER, 5, "the register cannot be used: wrong kind of file, newer, or damaged")  \
    X(CONFLICT, 6, "the register changed meanwhile; nothing was stored")                  \
    X(IO, 7, "reading or writing failed")                                                 \
    X(COMPUTE, 8, "a figure cannot be computed from what the register holds")             \
    X(MEMORY, 9, "out of memory")                                                         \
    X(INTERRUPTED, 10, "the sampling was interrupted; the report has what there was")     \
    X(INTERNAL, 70, "a programming error in ohmen")

typedef enum ohmen_status {
#define X(name, exit_status, text) OHMEN_##name,
    OHMEN_STATUS_LIST(X)
#undef X
} ohmen_status;

/* Bytes of an error's text, terminating zero included; longer texts are cut at
 * a character boundary and end in "...". */
#define OHMEN_ERROR_TEXT 1024

typedef struct ohmen_error {
    ohmen_status status; /* OHMEN_OK when nothing has failed */
    char text[OHMEN_ERROR_TEXT];
} ohmen_error;

#define OHMEN_ERROR_INIT {OHMEN_OK, {0}}

/* The exit status of the command line tool for a status (0..255). */
int ohmen_status_exit(ohmen_status status);

/* A short static text for a status, such as "out of memory". */
const char *ohmen_status_text(ohmen_status status);

#endif
