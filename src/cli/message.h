/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What the tool says on the side: errors and diagnostics, made harmless first, since
 * they may quote documents, names of files and the command line. */
#ifndef CLI_MESSAGE_H
#define CLI_MESSAGE_H

#include <stdio.h>

#include <ohmen/ohmen.h>

/* Fills *e, unless it holds an error already, and returns `status`. */
ohmen_status message_set(ohmen_error *e, ohmen_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

/* Writes a text with every byte as \xNN that could steer a terminal or mislead a
 * reader: control characters (C0, DEL, C1), line and paragraph separators, marks of
 * writing direction, bytes that are not UTF-8; with `ascii` all bytes beyond ASCII. */
void message_text(FILE *to, const char *text, bool ascii);

/* One line on standard error: "text", and "ohmen: text". */
void message_line(const char *text, bool ascii);
void message_error(const char *text, bool ascii);

#endif
