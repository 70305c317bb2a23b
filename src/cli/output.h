/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Standard output. A full disk or another failed write is an error (OHMEN_IO). A
 * reader that leaves early (`ohmen report | head`) ends the tool by SIGPIPE, quietly,
 * as the system does by default; where a caller had SIGPIPE ignored, the failed write
 * is told like any other. */
#ifndef CLI_OUTPUT_H
#define CLI_OUTPUT_H

#include <ohmen/ohmen.h>

/* Makes sure that descriptors 0, 1 and 2 are taken, so that no file that is opened
 * later gets the number of a closed standard stream; writing to one still fails. */
void output_guard_streams(void);

/* Prints a text as it is. */
ohmen_status output_text(const char *text, ohmen_error *e);

/* Flushes; to be called once behind the last output. OHMEN_IO when anything that was
 * printed, by whatever function, did not arrive. */
ohmen_status output_finish(ohmen_error *e);

#endif
