/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The completion for bash from the tables. Owns nothing. The script asks for nothing
 * at run time, so that completing never opens a register. */
#include "cli/help.h"

static const char opening[] =
    "# Completion for bash, made by 'ohmen help --completion'.\n"
    "_ohmen()\n"
    "{\n"
    "    local word=${COMP_WORDS[COMP_CWORD]} previous=${COMP_WORDS[COMP_CWORD - 1]}\n"
    "    local command= operands= taken= i IFS=$'\\n'\n"
    "    COMPREPLY=()\n"
    "    for ((i = 1; i < COMP_CWORD; i++)); do\n"
    "        case ${COMP_WORDS[i]} in\n";

static const char middle[] = "        -*) ;;\n"
                             "        *) command=${COMP_WORDS[i]}; break ;;\n"
                             "        esac\n"
                             "    done\n"
                             "    case $previous in\n";

static const char ending[] =
    "    [[ $word == -* ]] && operands=$taken\n"
    "    if [[ $operands == FILES ]]; then\n"
    "        COMPREPLY=($(compgen -f -- \"$word\"))\n"
    "    else\n"
    "        COMPREPLY=($(compgen -W \"${operands// /$'\\n'}\" -- \"$word\"))\n"
    "    fi\n"
    "}\n"
    "complete -o filenames -F _ohmen ohmen\n";

static void write_names(FILE *to, const struct option *o)
{
    if (o->letter)
        fprintf(to, "-%c | ", o->letter);
    fprintf(to, "--%s", o->name);
}

/* One pattern of all options with a value: the word behind them is no command. */
static void write_skipping(FILE *to)
{
    int n = 0;
    fputs("        ", to);
    for (int id = 0; id < OPTION_COUNT; id++) {
        if (options[id].value == VALUE_NONE)
            continue;
        fputs(n++ ? " | " : "", to);
        write_names(to, &options[id]);
    }
    fputs(") ((i++)) ;;\n", to);
}

/* What completes the value of an option. */
static void write_value(FILE *to, const struct option *o)
{
    if (o->value == VALUE_NONE)
        return;
    fputs("    ", to);
    write_names(to, o);
    fputs(") ", to);
    if (o->value == VALUE_FILE || o->value == VALUE_FOLDER)
        fprintf(to, "COMPREPLY=($(compgen -%c -- \"$word\")); ",
                o->value == VALUE_FILE ? 'f' : 'd');
    if (o->value == VALUE_WORD) {
        fputs("COMPREPLY=($(compgen -W $'", to);
        for (int i = 0; o->words[i]; i++)
            fprintf(to, "%s%s", i ? "\\n" : "", o->words[i]);
        fputs("' -- \"$word\")); ", to);
    }
    fputs("return ;;\n", to);
}

static void write_taken(FILE *to, const struct command *c)
{
    const char *gap = "";
    fputs("taken='", to);
    for (int id = 0; id < OPTION_COUNT; id++) {
        if (!command_takes(c, (enum option_id)id))
            continue;
        fprintf(to, "%s--%s", gap, options[id].name);
        gap = " ";
    }
    fputc('\'', to);
}

static void write_all_commands(FILE *to)
{
    fputs("operands='", to);
    for (unsigned i = 0; i < n_commands; i++)
        fprintf(to, "%s%s", i ? " " : "", commands[i].name);
    fputc('\'', to);
}

static void write_command(FILE *to, const struct command *c)
{
    fprintf(to, "    %s) ", c->name);
    write_taken(to, c);
    if (c->operand.is_file)
        fputs(" operands=FILES", to);
    if (c->run == command_help) {
        fputc(' ', to);
        write_all_commands(to);
    }
    fputs(" ;;\n", to);
}

void help_completion(FILE *to)
{
    fputs(opening, to);
    write_skipping(to);
    fputs(middle, to);
    for (int id = 0; id < OPTION_COUNT; id++)
        write_value(to, &options[id]);
    fputs("    esac\n    case $command in\n    '') ", to);
    write_taken(to, NULL);
    fputc(' ', to);
    write_all_commands(to);
    fputs(" ;;\n", to);
    for (unsigned i = 0; i < n_commands; i++)
        write_command(to, &commands[i]);
    fputs("    esac\n", to);
    fputs(ending, to);
}
