/* SPDX-License-Identifier: GPL-3.0-or-later */
/* How text is to look, from the options, the environment and the terminal. */
#ifndef CLI_LAYOUT_H
#define CLI_LAYOUT_H

#include <ohmen/ohmen.h>

#include "cli/args.h"

/* Width: --width; on a terminal COLUMNS, else what the terminal says, 60..200; else
 * 100. ASCII: --ascii, or the first of LC_ALL, LC_CTYPE, LANG that is set and not
 * empty does not name UTF-8 (none set: ASCII). Colour: --colour; auto is a terminal
 * without NO_COLOR (set and not empty). The terminal is that of standard output. */
ohmen_layout layout_choose(const struct args *args);

#endif
