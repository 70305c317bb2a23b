/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The parser of the command line. Owns nothing: texts stay in argv, whose operands are
 * moved to its front. Invariant: what is allowed stands in the tables of options and
 * commands alone; the first mistake is the one that is told, except that an unknown
 * option waits until the command is known, which decides what may have been meant. */
#include "cli/args.h"

#include <string.h>

#include "cli/commands.h"
#include "cli/message.h"
#include "cli/nearest.h"

struct reader {
    int argc, at;
    char **argv;
    struct args *out;
    const char *unknown; /* an option that no row describes, if it is the first mistake */
    ohmen_error *e;
};

static bool is_name(const char *text, size_t n, const char *name)
{
    return strlen(name) == n && strncmp(text, name, n) == 0;
}

static enum option_id option_named(const char *text, size_t n)
{
    int id = 0;
    while (id < OPTION_COUNT && !is_name(text, n, options[id].name))
        id++;
    return (enum option_id)id;
}

static enum option_id option_lettered(char letter)
{
    int id = 0;
    while (id < OPTION_COUNT && (!letter || options[id].letter != letter))
        id++;
    return (enum option_id)id;
}

/* A next argument that is an option itself is no value: it shows that one was left
 * out. `--why=--json` gives such a value all the same. */
static bool looks_like_option(const char *text)
{
    if (strncmp(text, "--", 2) != 0)
        return false;
    const char *name = text + 2;
    return option_named(name, strcspn(name, "=")) != OPTION_COUNT;
}

static void read_number(struct reader *r, enum option_id id, const char *text)
{
    const struct option *o = &options[id];
    size_t digits = strspn(text, "0123456789");
    uint64_t number = 0;
    for (size_t i = 0; i < digits && number <= o->high; i++)
        number = number * 10 + (unsigned)(text[i] - '0');
    if (digits == 0 || text[digits] || number < o->low || number > o->high)
        message_set(r->e, OHMEN_USAGE, "--%s needs a whole number from %u to %u, not '%s'", o->name,
                    o->low, o->high, text);
    r->out->number[id] = (unsigned)number;
}

static void read_word(struct reader *r, enum option_id id, const char *text)
{
    const struct option *o = &options[id];
    unsigned i = 0;
    while (o->words[i] && strcmp(o->words[i], text) != 0)
        i++;
    r->out->number[id] = i;
    if (o->words[i])
        return;
    char list[128] = "";
    for (i = 0; o->words[i]; i++) {
        size_t n = strlen(list);
        snprintf(list + n, sizeof list - n, "%s%s",
                 i == 0            ? ""
                 : o->words[i + 1] ? ", "
                                   : " or ",
                 o->words[i]);
    }
    message_set(r->e, OHMEN_USAGE, "--%s needs %s, not '%s'", o->name, list, text);
}

static void read_repeated(struct reader *r, enum option_id id, const char *text)
{
    struct repeated *all = &r->out->repeated[id];
    if (all->n == REPEATS_MOST)
        message_set(r->e, OHMEN_USAGE, "--%s is given more than %d times", options[id].name,
                    REPEATS_MOST);
    else
        all->at[all->n++] = text;
}

static void read_value(struct reader *r, enum option_id id, const char *text)
{
    const struct option *o = &options[id];
    if (o->repeats)
        read_repeated(r, id, text);
    else if (r->out->given[id] && strcmp(r->out->text[id], text) != 0)
        message_set(r->e, OHMEN_USAGE, "--%s is given twice: '%s' and '%s'", o->name,
                    r->out->text[id], text);
    if (text[strspn(text, " \t")] == 0)
        message_set(r->e, OHMEN_USAGE, "the value of --%s is empty; it needs %s", o->name,
                    o->shown);
    if (o->value == VALUE_NUMBER)
        read_number(r, id, text);
    if (o->value == VALUE_WORD)
        read_word(r, id, text);
    r->out->text[id] = text;
}

/* Takes option `id`; `joined` is a value in the same argument, NULL where there is none. */
static void read_option(struct reader *r, enum option_id id, const char *joined)
{
    const struct option *o = &options[id];
    if (o->value == VALUE_NONE && joined) {
        message_set(r->e, OHMEN_USAGE, "--%s takes no value", o->name);
    } else if (o->value != VALUE_NONE) {
        bool follows = r->at + 1 < r->argc && !looks_like_option(r->argv[r->at + 1]);
        if (!joined && !follows) {
            message_set(r->e, OHMEN_USAGE, "--%s needs a value: --%s %s", o->name, o->name,
                        o->shown);
            return;
        }
        read_value(r, id, joined ? joined : r->argv[++r->at]);
    }
    r->out->given[id] = true;
}

static void read_long(struct reader *r, const char *argument)
{
    size_t n = strcspn(argument + 2, "=");
    const char *end = argument + 2 + n;
    enum option_id id = option_named(argument + 2, n);
    if (id != OPTION_COUNT)
        read_option(r, id, *end ? end + 1 : NULL);
    else if (!r->unknown && r->e->status == OHMEN_OK)
        r->unknown = argument;
}

static void read_short(struct reader *r, const char *argument)
{
    enum option_id id = option_lettered(argument[1]);
    bool known = id != OPTION_COUNT && (options[id].value != VALUE_NONE || argument[2] == 0);
    if (known)
        read_option(r, id, argument[2] ? argument + 2 : NULL);
    else if (!r->unknown && r->e->status == OHMEN_OK)
        r->unknown = argument;
}

/* Reads all arguments; returns how many operands stand at the front of argv now. */
static size_t read_all(struct reader *r)
{
    size_t n = 0;
    bool options_end = false;
    for (r->at = 1; r->at < r->argc; r->at++) {
        char *argument = r->argv[r->at];
        if (options_end || argument[0] != '-' || argument[1] == 0)
            r->argv[n++] = argument;
        else if (strcmp(argument, "--") == 0)
            options_end = true;
        else if (argument[1] == '-')
            read_long(r, argument);
        else
            read_short(r, argument);
    }
    return n;
}

static void complain_unknown_option(struct reader *r)
{
    const struct command *c = r->out->command;
    char name[64];
    snprintf(name, sizeof name, "%.*s", (int)strcspn(r->unknown, "="), r->unknown);
    struct spelling near = {.wanted = name + strspn(name, "-")};
    for (int id = 0; id < OPTION_COUNT; id++)
        if (command_takes(c, (enum option_id)id))
            spelling_offer(&near, options[id].name);
    message_set(r->e, OHMEN_USAGE, "there is no option '%s'%s%s%s", name,
                near.name ? "; did you mean '--" : "", near.name ? near.name : "",
                near.name ? "'?" : "");
}

ohmen_status args_unknown_command(const char *name, ohmen_error *e)
{
    struct spelling near = {.wanted = name};
    for (unsigned i = 0; i < n_commands; i++)
        spelling_offer(&near, commands[i].name);
    return message_set(e, OHMEN_USAGE, "there is no command '%s'%s%s%s", name,
                       near.name ? "; did you mean '" : "", near.name ? near.name : "",
                       near.name ? "'?" : "");
}

/* A report has one form. */
static void check_forms(struct reader *r)
{
    static const enum option_id forms[] = {OPTION_JSON, OPTION_CSV, OPTION_HTML};
    const char *first = NULL;
    for (size_t i = 0; i < sizeof forms / sizeof *forms; i++) {
        const char *name = options[forms[i]].name;
        if (r->out->given[forms[i]] && first)
            message_set(r->e, OHMEN_USAGE, "--%s and --%s are two forms of one report; choose one",
                        first, name);
        else if (r->out->given[forms[i]])
            first = name;
    }
}

static void check_options(struct reader *r)
{
    const struct command *c = r->out->command;
    for (int id = 0; id < OPTION_COUNT; id++)
        if (r->out->given[id] && id != OPTION_VERSION && !command_takes(c, (enum option_id)id))
            message_set(r->e, OHMEN_USAGE, "'%s' takes no option --%s", c->name, options[id].name);
    check_forms(r);
}

static void check_operands(struct reader *r)
{
    const struct args *a = r->out;
    const struct operand *o = &a->command->operand;
    if (!o->shown && a->n_operands > 0)
        message_set(r->e, OHMEN_USAGE, "'%s' takes no operand, but '%s' is given", a->command->name,
                    a->operands[0]);
    else if (a->n_operands < o->least)
        message_set(r->e, OHMEN_USAGE, "'%s' needs %s: %s", a->command->name, o->shown, o->help);
    else if (a->n_operands > o->most)
        message_set(r->e, OHMEN_USAGE, "'%s' takes one %s, but '%s' and '%s' are given",
                    a->command->name, o->shown, a->operands[0], a->operands[1]);
    for (size_t i = 0; i < a->n_operands; i++)
        if (a->operands[i][0] == 0)
            message_set(r->e, OHMEN_USAGE, "the %s of '%s' is empty", o->shown, a->command->name);
}

ohmen_status args_parse(int argc, char **argv, struct args *out, ohmen_error *e)
{
    *out = (struct args){0};
    struct reader r = {.argc = argc, .argv = argv, .out = out, .e = e};
    size_t n = read_all(&r);
    if (n > 0) {
        out->command = command_named(argv[0]);
        out->operands = argv + 1;
        out->n_operands = n - 1;
    }
    if (r.unknown)
        *e = (ohmen_error)OHMEN_ERROR_INIT;
    if (n > 0 && !out->command)
        args_unknown_command(argv[0], e);
    if (r.unknown)
        complain_unknown_option(&r);
    if (out->command) {
        check_options(&r);
        check_operands(&r);
    }
    return e->status;
}
