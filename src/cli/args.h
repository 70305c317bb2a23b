/* SPDX-License-Identifier: GPL-3.0-or-later */
/* A command line taken apart by the tables of commands and options.
 *
 * Options and operands may stand in any order; the first operand is the command. A
 * value follows its option as the next argument or behind "=" (`--width=80`), behind
 * a letter also directly (`-rFILE`). `--` ends the options; "-" is an operand. */
#ifndef CLI_ARGS_H
#define CLI_ARGS_H

#include <ohmen/ohmen.h>

#include "cli/options.h"

/* The values of an option that may be repeated, in their order. */
struct repeated {
    const char *at[REPEATS_MOST];
    size_t n;
};

struct args {
    const struct command *command; /* NULL: none, or an unknown one */
    bool given[OPTION_COUNT];
    const char *text[OPTION_COUNT]; /* the value as written; NULL: not given */
    struct repeated repeated[OPTION_COUNT]; /* those that may be; text has the last one */
    unsigned number[OPTION_COUNT];  /* VALUE_NUMBER: the value; VALUE_WORD: its place */
    char **operands;                /* behind the command */
    size_t n_operands;
};

/* Reads the command line; argv is reordered, its texts stay, and *out borrows them.
 * OHMEN_USAGE for what the tables do not allow; *out then holds what could be read, so
 * that a wish for help can still be met. */
ohmen_status args_parse(int argc, char **argv, struct args *out, ohmen_error *e);

/* Says that no command has this name, and which one may be meant; OHMEN_USAGE. */
ohmen_status args_unknown_command(const char *name, ohmen_error *e);

#endif
