/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The commands of the tool, one row each: a new command is a row in commands.c, a
 * function, and its golden cases. */
#ifndef CLI_COMMANDS_H
#define CLI_COMMANDS_H

#include <ohmen/ohmen.h>

#include "cli/args.h"

struct progress;

/* One run of a command: what was asked for, how text is to look, and the progress line. */
struct call {
    const struct args *args;
    ohmen_layout layout;
    struct progress *progress;
};

/* Commands are listed by the job that they serve. */
enum command_job { JOB_KEEP, JOB_RISK, JOB_DECIDE, JOB_PROVE, JOB_LOOK_UP, JOB_COUNT };
extern const char *const command_jobs[JOB_COUNT];

struct operand {
    const char *shown; /* "FILE"; NULL: the command takes none */
    unsigned least, most;
    const char *help; /* "a document (*.yaml) ..." */
    bool is_file;     /* for completion */
};
enum { OPERANDS_ANY = 1u << 30 }; /* for `most` */

struct command {
    const char *name;
    enum command_job job;
    struct operand operand;
    unsigned options;    /* OPTION_BIT()s; --help goes with all of them */
    unsigned needs;      /* those that the usage line shows as needed */
    const char *brief;   /* one line */
    const char *text;    /* what it does: paragraphs parted by a newline */
    const char *example; /* a command line that runs behind those of the rows before */
    ohmen_status (*run)(const struct call *call, ohmen_error *e);
};

extern const struct command commands[];
extern const unsigned n_commands;

/* NULL where no command has this name. */
const struct command *command_named(const char *name);

/* Whether the command takes the option; c NULL: whether it makes sense without one. */
bool command_takes(const struct command *c, enum option_id id);

ohmen_status command_new(const struct call *call, ohmen_error *e);
ohmen_status command_backup(const struct call *call, ohmen_error *e);
ohmen_status command_import(const struct call *call, ohmen_error *e);
ohmen_status command_export(const struct call *call, ohmen_error *e);
ohmen_status command_gaps(const struct call *call, ohmen_error *e);
ohmen_status command_hazards(const struct call *call, ohmen_error *e);
ohmen_status command_protection(const struct call *call, ohmen_error *e);
ohmen_status command_supply(const struct call *call, ohmen_error *e);
ohmen_status command_people(const struct call *call, ohmen_error *e);
ohmen_status command_damage(const struct call *call, ohmen_error *e);
ohmen_status command_list(const struct call *call, ohmen_error *e);
ohmen_status command_show(const struct call *call, ohmen_error *e);
ohmen_status command_grid(const struct call *call, ohmen_error *e);
ohmen_status command_report(const struct call *call, ohmen_error *e);
ohmen_status command_weigh(const struct call *call, ohmen_error *e);
ohmen_status command_sensitivity(const struct call *call, ohmen_error *e);
ohmen_status command_memo(const struct call *call, ohmen_error *e);
ohmen_status command_test_interval(const struct call *call, ohmen_error *e);
ohmen_status command_explain(const struct call *call, ohmen_error *e);
ohmen_status command_history(const struct call *call, ohmen_error *e);
ohmen_status command_verify(const struct call *call, ohmen_error *e);
ohmen_status command_schema(const struct call *call, ohmen_error *e);
ohmen_status command_help(const struct call *call, ohmen_error *e);

#endif
