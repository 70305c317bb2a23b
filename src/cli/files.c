/* SPDX-License-Identifier: GPL-3.0-or-later */
/* `ohmen new` and `ohmen backup`: register files come into being. Owns the open
 * register for the length of a call. */
#include <stdio.h>
#include <string.h>

#include "cli/locate.h"
#include "cli/message.h"
#include "cli/reading.h"

/* Whether a shell takes the name as it stands. */
static bool is_plain(const char *name)
{
    static const char plain[] = "abcdefghijklmnopqrstuvwxyzABCDEFGHIJKLMNOPQRSTUVWXYZ"
                                "0123456789_./-+,:@%";
    return name[0] != '-' && name[strspn(name, plain)] == 0;
}

static ohmen_status new_name(const struct args *args, const char **path, ohmen_error *e)
{
    const char *operand = args->n_operands > 0 ? args->operands[0] : NULL;
    *path = operand ? operand : locate_named(args);
    if (!*path)
        return message_set(e, OHMEN_USAGE, "'new' needs the name of the register to create");
    if (operand && args->given[OPTION_REGISTER] && strcmp(operand, locate_named(args)) != 0)
        return message_set(e, OHMEN_USAGE,
                           "'new' creates one register, but '%s' and '%s' are given",
                           locate_named(args), operand);
    return OHMEN_OK;
}

ohmen_status command_new(const struct call *call, ohmen_error *e)
{
    const char *path = NULL;
    ohmen_status status = new_name(call->args, &path, e);
    if (status == OHMEN_OK)
        status = ohmen_create(path, e);
    if (status != OHMEN_OK)
        return status;
    fputs("Created ", stdout);
    message_text(stdout, path, call->layout.ascii);
    printf(". Next: ohmen -r %s import FILE... --why TEXT\n", is_plain(path) ? path : "FILE");
    return OHMEN_OK;
}

ohmen_status command_backup(const struct call *call, ohmen_error *e)
{
    ohmen_register *reg = NULL;
    ohmen_status status = reading_open(call, OHMEN_READ, &reg, e);
    if (status == OHMEN_OK)
        status = ohmen_backup(reg, call->args->operands[0], e);
    ohmen_close(reg);
    return status;
}
