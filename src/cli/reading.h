/* SPDX-License-Identifier: GPL-3.0-or-later */
/* From a call to an open register to a printed report: the way that all commands on
 * a register go. */
#ifndef CLI_READING_H
#define CLI_READING_H

#include "cli/commands.h"

/* What the options say about what a report is about. */
ohmen_query reading_query(const struct args *args);

/* Finds and opens the register of the call. *out is the caller's, to ohmen_close. */
ohmen_status reading_open(const struct call *call, ohmen_mode mode, ohmen_register **out,
                          ohmen_error *e);

/* The report on standard output as text, JSON or CSV. */
ohmen_status reading_print(const struct call *call, ohmen_report *report, ohmen_error *e);

/* Its diagnostics on standard error, one a line. */
void reading_tell(const struct call *call, const ohmen_report *report);

#endif
