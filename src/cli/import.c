/* SPDX-License-Identifier: GPL-3.0-or-later */
/* `ohmen import`: documents and observations into the register, or a preview. Owns the
 * register and the report for the length of the call. Invariant: without a reason and
 * an author nothing is stored. */
#include <pwd.h>
#include <stdlib.h>
#include <unistd.h>

#include "cli/message.h"
#include "cli/progress.h"
#include "cli/reading.h"

/* Who changes the register: --by, OHMEN_AUTHOR, the login name; NULL: unknown. */
static const char *author(const struct args *args)
{
    if (args->given[OPTION_BY])
        return args->text[OPTION_BY];
    const char *name = getenv("OHMEN_AUTHOR");
    if (name && *name)
        return name;
    const struct passwd *user = getpwuid(getuid());
    return user ? user->pw_name : NULL;
}

static ohmen_status read_settings(const struct args *args, ohmen_import_settings *s, ohmen_error *e)
{
    *s = (ohmen_import_settings){
        .files = (const char *const *)args->operands,
        .n_files = args->n_operands,
        .reason = args->text[OPTION_WHY],
        .author = author(args),
        .dry_run = args->given[OPTION_DRY_RUN],
    };
    if (!s->dry_run && !s->reason)
        return message_set(e, OHMEN_USAGE,
                           "'import' needs a reason for the journal, --why TEXT, unless it is a "
                           "--dry-run");
    if (!s->dry_run && !s->author)
        return message_set(e, OHMEN_USAGE,
                           "whose change it is is unknown; name the author with --by TEXT or "
                           "OHMEN_AUTHOR");
    return OHMEN_OK;
}

/* A refused import is told by its diagnostics; its report repeats them, so it is only
 * printed for a program that reads JSON. */
static ohmen_status print(const struct call *call, ohmen_report *report, ohmen_status status,
                          ohmen_error *e)
{
    reading_tell(call, report);
    if (status == OHMEN_OK)
        return reading_print(call, report, e);
    if (call->args->given[OPTION_JSON])
        reading_print(call, report, e);
    return status;
}

ohmen_status command_import(const struct call *call, ohmen_error *e)
{
    ohmen_import_settings settings;
    ohmen_register *reg = NULL;
    ohmen_report *report = NULL;
    ohmen_status status = read_settings(call->args, &settings, e);
    if (status == OHMEN_OK)
        status = reading_open(call, settings.dry_run ? OHMEN_READ : OHMEN_WRITE, &reg, e);
    if (status == OHMEN_OK)
        status = ohmen_import(reg, &settings, &report, e);
    progress_end(call->progress);
    if (report)
        status = print(call, report, status, e);
    ohmen_report_free(report);
    ohmen_close(reg);
    return status;
}
