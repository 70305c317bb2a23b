/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Help for a terminal, and the commands `help` and `schema`, which look things up.
 * Owns the tables of variables and exit statuses. Invariant: what commands and options
 * there are, and what they mean, comes from their tables alone. */
#include "cli/help.h"

#include "cli/message.h"
#include "cli/output.h"
#include "cli/wrap.h"

const char help_title[] = "ohmen: a risk register for the protection of electrical networks";

const struct variable variables[] = {
    {"OHMEN_REGISTER", "the register, where -r names none"},
    {"OHMEN_AUTHOR", "whose changes import stores, where --by names nobody"},
    {"OHMEN_CLOCK", "the present second, such as 2026-12-01T08:00:00Z, instead of the system's"},
    {"LC_ALL, LC_CTYPE, LANG", "UTF-8 or ASCII: the first one that is set decides by its name"},
    {"COLUMNS", "the width of a terminal"},
    {"NO_COLOR", "no colour, unless --colour always asks for it"},
};
const unsigned n_variables = sizeof variables / sizeof variables[0];

const struct exit_status exit_statuses[] = {
#define X(name, exit_status, text) {exit_status, text},
    OHMEN_STATUS_LIST(X)
#undef X
};
const unsigned n_exit_statuses = sizeof exit_statuses / sizeof exit_statuses[0];

void help_usage(FILE *to, const struct command *c)
{
    const struct operand *o = &c->operand;
    fprintf(to, "ohmen %s", c->name);
    if (o->shown)
        fprintf(to, o->least ? " %s%s" : " [%s]%s", o->shown, o->most > 1 ? "..." : "");
    for (int id = 0; id < OPTION_COUNT; id++)
        if (c->needs & OPTION_BIT(id))
            fprintf(to, " --%s %s", options[id].name, options[id].shown);
    fputs(" [OPTION...]", to);
}

enum { OPTION_INDENT = 28, COMMAND_INDENT = 17, VARIABLE_INDENT = 26 };

/* Fills up to the column where the explanation stands, on the next line if the name
 * is too long. */
static void pad(FILE *to, unsigned at, unsigned column)
{
    if (at + 2 > column) {
        fputc('\n', to);
        at = 0;
    }
    fprintf(to, "%*s", (int)(column - at), "");
}

static void print_option(FILE *to, const struct option *o)
{
    int n = o->letter ? fprintf(to, "  -%c, --%s", o->letter, o->name)
                      : fprintf(to, "      --%s", o->name);
    if (o->shown)
        n += fprintf(to, " %s", o->shown);
    pad(to, n > 0 ? (unsigned)n : 0, OPTION_INDENT);
    wrap_text(to, o->help, OPTION_INDENT, OPTION_INDENT);
}

static void print_exit_statuses(FILE *to)
{
    fputs("\nExit status:\n", to);
    for (unsigned i = 0; i < n_exit_statuses; i++)
        fprintf(to, "  %2d  %s\n", exit_statuses[i].status, exit_statuses[i].text);
}

void help_command(FILE *to, const struct command *c)
{
    fputs("Usage: ", to);
    help_usage(to, c);
    fputs("\n\n", to);
    wrap_text(to, c->text, 0, 0);
    if (c->operand.shown) {
        int n = fprintf(to, "\n  %s  ", c->operand.shown);
        unsigned indent = n > 1 ? (unsigned)n - 1 : 0;
        wrap_text(to, c->operand.help, indent, indent);
    }
    fputs("\nOptions:\n", to);
    for (int id = 0; id < OPTION_COUNT; id++)
        if (command_takes(c, (enum option_id)id))
            print_option(to, &options[id]);
    fprintf(to, "\nExample:\n  %s\n", c->example);
    print_exit_statuses(to);
}

static void print_commands(FILE *to)
{
    for (int job = 0; job < JOB_COUNT; job++) {
        fprintf(to, "\n%s:\n", command_jobs[job]);
        for (unsigned i = 0; i < n_commands; i++)
            if ((int)commands[i].job == job)
                fprintf(to, "  %-*s%s\n", COMMAND_INDENT - 2, commands[i].name, commands[i].brief);
    }
}

void help_all(FILE *to)
{
    fprintf(to, "%s\n\nUsage: ohmen [-r FILE] COMMAND [OPTION...]\n", help_title);
    print_commands(to);
    fputs("\n'ohmen COMMAND --help' tells what a command does and which options it takes.\n"
          "\nOptions:\n",
          to);
    static const enum option_id for_all[] = {OPTION_REGISTER, OPTION_HELP, OPTION_VERSION};
    for (size_t i = 0; i < sizeof for_all / sizeof for_all[0]; i++)
        print_option(to, &options[for_all[i]]);
    fputs("\nEnvironment:\n", to);
    for (unsigned i = 0; i < n_variables; i++) {
        int n = fprintf(to, "  %s", variables[i].name);
        pad(to, n > 0 ? (unsigned)n : 0, VARIABLE_INDENT);
        wrap_text(to, variables[i].help, VARIABLE_INDENT, VARIABLE_INDENT);
    }
    print_exit_statuses(to);
}

static ohmen_status help_named(const char *name, ohmen_error *e)
{
    const struct command *c = command_named(name);
    if (!c)
        return args_unknown_command(name, e);
    help_command(stdout, c);
    return OHMEN_OK;
}

ohmen_status command_help(const struct call *call, ohmen_error *e)
{
    const struct args *args = call->args;
    int wishes =
        args->given[OPTION_MARKDOWN] + args->given[OPTION_COMPLETION] + (args->n_operands > 0);
    if (wishes > 1)
        return message_set(e, OHMEN_USAGE,
                           "'help' takes one of COMMAND, --markdown and --completion");
    if (args->given[OPTION_MARKDOWN])
        help_markdown(stdout);
    else if (args->given[OPTION_COMPLETION])
        help_completion(stdout);
    else if (args->n_operands > 0)
        return help_named(args->operands[0], e);
    else
        help_all(stdout);
    return OHMEN_OK;
}

ohmen_status command_schema(const struct call *call, ohmen_error *e)
{
    (void)call;
    return output_text(ohmen_document_schema(), e);
}
