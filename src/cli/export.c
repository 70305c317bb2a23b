/* SPDX-License-Identifier: GPL-3.0-or-later */
/* `ohmen export`: the register as documents, on standard output or in a folder. Owns
 * the register and the reports, which own the texts, for the length of the call. */
#include "cli/folder.h"
#include "cli/message.h"
#include "cli/output.h"
#include "cli/reading.h"

static ohmen_status print_part(ohmen_register *reg, const struct args *args, ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    ohmen_export_part part =
        args->given[OPTION_OBSERVATIONS] ? OHMEN_EXPORT_OBSERVATIONS : OHMEN_EXPORT_OBJECTS;
    ohmen_report *report = NULL;
    const char *text = NULL;
    ohmen_status status = ohmen_export(reg, &query, part, &report, &text, e);
    if (status == OHMEN_OK)
        status = output_text(text, e);
    ohmen_report_free(report);
    return status;
}

static ohmen_status write_folder(ohmen_register *reg, const struct args *args, ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    ohmen_report *objects = NULL, *observations = NULL;
    struct folder_file files[FOLDER_FILES] = {{.name = "register.yaml"},
                                              {.name = "observations.csv"}};
    ohmen_status status =
        ohmen_export(reg, &query, OHMEN_EXPORT_OBJECTS, &objects, &files[0].text, e);
    if (status == OHMEN_OK)
        status =
            ohmen_export(reg, &query, OHMEN_EXPORT_OBSERVATIONS, &observations, &files[1].text, e);
    if (status == OHMEN_OK)
        status = folder_write(args->text[OPTION_TO], files, e);
    ohmen_report_free(objects);
    ohmen_report_free(observations);
    return status;
}

ohmen_status command_export(const struct call *call, ohmen_error *e)
{
    const struct args *args = call->args;
    ohmen_register *reg = NULL;
    if (args->given[OPTION_TO] && args->given[OPTION_OBSERVATIONS])
        return message_set(e, OHMEN_USAGE,
                           "--to writes the observations too; leave out --observations");
    ohmen_status status = reading_open(call, OHMEN_READ, &reg, e);
    if (status == OHMEN_OK)
        status = args->given[OPTION_TO] ? write_folder(reg, args, e) : print_part(reg, args, e);
    ohmen_close(reg);
    return status;
}
