/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tool `ohmen`: from the command line to one function of the table of commands,
 * and from its status to the exit status. Owns the error of the run. Invariant: each
 * failure is told in one line on standard error and by the exit status; a mistake in
 * the command line also by where help stands. */
#include <stdio.h>

#include "cli/commands.h"
#include "cli/help.h"
#include "cli/layout.h"
#include "cli/message.h"
#include "cli/output.h"
#include "cli/progress.h"

static void print_commands(void)
{
    fputs("Usage: ohmen [-r FILE] COMMAND [OPTION...]\n\n", stderr);
    for (unsigned i = 0; i < n_commands; i++)
        fprintf(stderr, "  %-15s%s\n", commands[i].name, commands[i].brief);
    fputc('\n', stderr);
}

/* Whether the wish for help can be met: it then goes before any mistake in the line,
 * except an unknown command, which has no help. */
static bool wants_help(const struct args *args)
{
    return args->given[OPTION_HELP] && (args->command || !args->operands);
}

static ohmen_status run(const struct call *call, ohmen_error *e)
{
    const struct args *args = call->args;
    if (wants_help(args)) {
        *e = (ohmen_error)OHMEN_ERROR_INIT;
        if (args->command)
            help_command(stdout, args->command);
        else
            help_all(stdout);
    } else if (e->status == OHMEN_OK && args->given[OPTION_VERSION]) {
        printf("ohmen %s\n", ohmen_version());
    } else if (e->status == OHMEN_OK && !args->command) {
        message_set(e, OHMEN_USAGE, "a command is missing");
    } else if (e->status == OHMEN_OK) {
        return args->command->run(call, e);
    }
    return e->status;
}

/* bare: the tool was called without any argument. */
static void complain(const struct call *call, ohmen_status status, const ohmen_error *e, bool bare)
{
    message_error(e->text[0] ? e->text : ohmen_status_text(status), call->layout.ascii);
    if (status != OHMEN_USAGE)
        return;
    const struct command *c = call->args->command;
    if (bare)
        print_commands();
    fprintf(stderr, "See 'ohmen %s%s--help'.\n", c ? c->name : "", c ? " " : "");
}

int main(int argc, char **argv)
{
    ohmen_error error = OHMEN_ERROR_INIT;
    struct args args;
    ohmen_keep_memory();
    output_guard_streams();
    args_parse(argc, argv, &args, &error);
    struct progress progress;
    progress_begin(&progress);
    struct call call = {.args = &args, .layout = layout_choose(&args), .progress = &progress};
    ohmen_status status = run(&call, &error);
    progress_end(&progress);
    ohmen_status written = output_finish(&error);
    if (status == OHMEN_OK)
        status = written;
    if (status != OHMEN_OK)
        complain(&call, status, &error, argc < 2);
    return ohmen_status_exit(status);
}
