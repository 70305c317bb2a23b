/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Help, made from the tables of commands, options, statuses and variables. */
#ifndef CLI_HELP_H
#define CLI_HELP_H

#include <stdio.h>

#include "cli/commands.h"

/* A variable of the environment that the tool reads. */
struct variable {
    const char *name, *help;
};
extern const struct variable variables[];
extern const unsigned n_variables;

/* The statuses of ohmen/error.h with the text for each. */
struct exit_status {
    int status;
    const char *text;
};
extern const struct exit_status exit_statuses[];
extern const unsigned n_exit_statuses;

/* What the tool is, in one line. */
extern const char help_title[];

/* "ohmen import FILE... --why TEXT [OPTION...]" */
void help_usage(FILE *to, const struct command *c);

/* The list of commands; the text of one. */
void help_all(FILE *to);
void help_command(FILE *to, const struct command *c);

/* docs/commands.md, and the completion script for bash. */
void help_markdown(FILE *to);
void help_completion(FILE *to);

#endif
