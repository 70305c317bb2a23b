/* SPDX-License-Identifier: GPL-3.0-or-later */
/* docs/commands.md from the tables. Owns nothing. Invariant: the page is the output,
 * byte for byte (a golden case compares them); its examples are console blocks, which
 * the docs suite runs in their order. */
#include "cli/help.h"

#include <string.h>

#include "cli/wrap.h"

static const char opening[] =
    "# Commands\n"
    "\n"
    "<!-- Made by `ohmen help --markdown` from the tables in src/cli; change them, not this "
    "page. -->\n"
    "\n"
    "`ohmen [-r FILE] COMMAND [OPTION...]`\n"
    "\n"
    "Options and operands may stand in any order. A value follows its option as the next\n"
    "argument or behind `=`; `--` ends the options. The report goes to standard output,\n"
    "errors and diagnostics go to standard error, one a line. Without a command the tool\n"
    "prints how it is used on standard error and ends with status 2. A reader that leaves\n"
    "early (`ohmen report | head`) ends the tool quietly, by the signal SIGPIPE.\n";

static void write_commands(FILE *to)
{
    fputs("\n| command | what it does |\n| --- | --- |\n", to);
    for (unsigned i = 0; i < n_commands; i++)
        fprintf(to, "| [%s](#%s) | %s |\n", commands[i].name, commands[i].name, commands[i].brief);
}

/* A plain text: nothing in it is a mark of Markdown, or ends the cell of a table. */
static void write_plain(FILE *to, const char *text)
{
    for (; *text; text++)
        fprintf(to, strchr("|*<", *text) ? "\\%c" : "%c", *text);
}

static void write_option(FILE *to, const struct option *o)
{
    fputs("| `", to);
    if (o->letter)
        fprintf(to, "-%c`, `", o->letter);
    fprintf(to, "--%s%s", o->name, o->shown ? " " : "");
    write_plain(to, o->shown ? o->shown : "");
    fputs("` | ", to);
    write_plain(to, o->help);
    fputs(" |\n", to);
}

/* All options once; the commands then only name theirs. */
static void write_options(FILE *to)
{
    fputs("\n## Options\n\n| option | meaning |\n| --- | --- |\n", to);
    for (int id = 0; id < OPTION_COUNT; id++)
        write_option(to, &options[id]);
}

static void write_variables(FILE *to)
{
    fputs("\n## Environment\n\n| variable | meaning |\n| --- | --- |\n", to);
    for (unsigned i = 0; i < n_variables; i++)
        fprintf(to, "| %s | %s |\n", variables[i].name, variables[i].help);
}

static void write_statuses(FILE *to)
{
    fputs("\n## Exit status\n\n| status | meaning |\n| --- | --- |\n", to);
    for (unsigned i = 0; i < n_exit_statuses; i++)
        fprintf(to, "| %d | %s |\n", exit_statuses[i].status, exit_statuses[i].text);
}

static void write_command(FILE *to, const struct command *c)
{
    fprintf(to, "\n### %s\n\n`", c->name);
    help_usage(to, c);
    fputs("`\n\n", to);
    wrap_text(to, c->text, 0, 0);
    if (c->operand.shown) {
        fprintf(to, "\n`%s`: ", c->operand.shown);
        write_plain(to, c->operand.help);
        fputc('\n', to);
    }
    fputs("\nOptions:", to);
    for (int id = 0, n = 0; id < OPTION_COUNT; id++)
        if (command_takes(c, (enum option_id)id))
            fprintf(to, "%s `--%s`", n++ ? "," : "", options[id].name);
    fprintf(to, "\n\n```console\n$ %s\n...\n```\n", c->example);
}

void help_markdown(FILE *to)
{
    fputs(opening, to);
    write_commands(to);
    write_options(to);
    write_variables(to);
    write_statuses(to);
    for (int job = 0; job < JOB_COUNT; job++) {
        fprintf(to, "\n## %s\n", command_jobs[job]);
        for (unsigned i = 0; i < n_commands; i++)
            if ((int)commands[i].job == job)
                write_command(to, &commands[i]);
    }
}
