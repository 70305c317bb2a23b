/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which register is meant. */
#ifndef CLI_LOCATE_H
#define CLI_LOCATE_H

#include "cli/args.h"

enum { LOCATE_NAME = 256 }; /* bytes of a name in a folder, terminating zero included */

/* The name that -r or OHMEN_REGISTER gives; NULL where neither does. */
const char *locate_named(const struct args *args);

/* *path becomes that name, else the only *.ohmen file of the current folder, copied
 * to `found`. OHMEN_USAGE, naming the files, where none or several are there. */
ohmen_status locate_register(const struct args *args, char found[LOCATE_NAME], const char **path,
                             ohmen_error *e);

#endif
