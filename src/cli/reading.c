/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The commands that read a register and print one report. Each is a call of one
 * function of the library; what they share stands once, in read_and_print. Owns the
 * register and the report for the length of a call. */
#include "cli/reading.h"

#include "cli/locate.h"
#include "cli/interrupt.h"
#include "cli/message.h"
#include "cli/output.h"
#include "cli/progress.h"

typedef ohmen_status maker(ohmen_register *r, const struct args *args, ohmen_report **out,
                           ohmen_error *e);

ohmen_query reading_query(const struct args *args)
{
    ohmen_query query = ohmen_query_defaults();
    query.as_of = args->text[OPTION_AS_OF];
    query.perspective = args->text[OPTION_PERSPECTIVE];
    query.date = args->text[OPTION_DATE];
    query.site = args->text[OPTION_SITE];
    query.where = args->repeated[OPTION_WHERE].at;
    query.n_where = args->repeated[OPTION_WHERE].n;
    query.sort = args->text[OPTION_SORT];
    query.reverse = args->given[OPTION_REVERSE];
    query.samples = args->number[OPTION_SAMPLES];
    query.precision = args->text[OPTION_PRECISION];
    query.seed = args->number[OPTION_SEED];
    query.threads = args->number[OPTION_THREADS];
    query.kernels = args->text[OPTION_KERNELS];
    return query;
}

/* An ohmen_progress; ctx is the progress line. */
static void follow(void *ctx, const char *phase, size_t done, size_t total)
{
    interrupt_follow(phase, done, total);
    progress_show(ctx, phase, done, total);
}

ohmen_status reading_open(const struct call *call, ohmen_mode mode, ohmen_register **out,
                          ohmen_error *e)
{
    char found[LOCATE_NAME];
    const char *path = NULL;
    ohmen_status status = locate_register(call->args, found, &path, e);
    if (status == OHMEN_OK)
        status = ohmen_open(path, mode, out, e);
    if (status == OHMEN_OK) {
        ohmen_watch(*out, follow, call->progress);
        ohmen_stop_when(*out, interrupt_asked, NULL);
    }
    return status;
}

ohmen_status reading_print(const struct call *call, ohmen_report *report, ohmen_error *e)
{
    const bool *given = call->args->given;
    const char *text = given[OPTION_JSON]   ? ohmen_report_json(report)
                       : given[OPTION_CSV]  ? ohmen_report_csv(report)
                       : given[OPTION_HTML] ? ohmen_report_html(report)
                                            : ohmen_report_text(report, &call->layout);
    if (!text)
        return message_set(e, OHMEN_MEMORY, "out of memory while the report was written");
    return output_text(text, e);
}

void reading_tell(const struct call *call, const ohmen_report *report)
{
    const char *line;
    for (size_t i = 0; (line = ohmen_report_diagnostic(report, i)); i++)
        message_line(line, call->layout.ascii);
}

/* A report that comes with a failure holds what was found: it is printed too, and the
 * failure stays the result. */
static ohmen_status read_and_print(const struct call *call, maker *make, ohmen_error *e)
{
    ohmen_register *reg = NULL;
    ohmen_report *report = NULL;
    ohmen_status status = reading_open(call, OHMEN_READ, &reg, e);
    if (status == OHMEN_OK)
        status = make(reg, call->args, &report, e);
    interrupt_end();
    progress_end(call->progress);
    if (report) {
        ohmen_status printed = reading_print(call, report, e);
        reading_tell(call, report);
        status = status == OHMEN_OK ? printed : status;
    }
    ohmen_report_free(report);
    ohmen_close(reg);
    return status;
}

static const char *operand(const struct args *args)
{
    return args->n_operands > 0 ? args->operands[0] : NULL;
}

static ohmen_status make_gaps(ohmen_register *r, const struct args *args, ohmen_report **out,
                              ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_gaps(r, &query, out, e);
}

static ohmen_status make_hazards(ohmen_register *r, const struct args *args, ohmen_report **out,
                                 ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_hazards(r, &query, out, e);
}

static ohmen_status make_protection(ohmen_register *r, const struct args *args, ohmen_report **out,
                                    ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_protection(r, &query, out, e);
}

static ohmen_status make_supply(ohmen_register *r, const struct args *args, ohmen_report **out,
                                ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_supply(r, &query, out, e);
}

static ohmen_status make_people(ohmen_register *r, const struct args *args, ohmen_report **out,
                                ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_people(r, &query, out, e);
}

static ohmen_status make_list(ohmen_register *r, const struct args *args, ohmen_report **out,
                              ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_list(r, &query, operand(args), out, e);
}

static ohmen_status make_show(ohmen_register *r, const struct args *args, ohmen_report **out,
                              ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_show(r, &query, operand(args), out, e);
}

static ohmen_status make_grid(ohmen_register *r, const struct args *args, ohmen_report **out,
                              ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_grid(r, &query, operand(args), out, e);
}

static ohmen_status make_report(ohmen_register *r, const struct args *args, ohmen_report **out,
                                ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_report_all(r, &query, out, e);
}

static ohmen_status make_weigh(ohmen_register *r, const struct args *args, ohmen_report **out,
                               ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_weigh(r, &query, operand(args), out, e);
}

static ohmen_status make_sensitivity(ohmen_register *r, const struct args *args, ohmen_report **out,
                                     ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_sensitivity(r, &query, operand(args), args->text[OPTION_X], args->text[OPTION_Y],
                             out, e);
}

static ohmen_status make_damage(ohmen_register *r, const struct args *args, ohmen_report **out,
                                ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_damage(r, &query, operand(args), out, e);
}

static ohmen_status make_memo(ohmen_register *r, const struct args *args, ohmen_report **out,
                              ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_memo(r, &query, operand(args), out, e);
}

static ohmen_status make_test_interval(ohmen_register *r, const struct args *args,
                                       ohmen_report **out, ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_test_interval(r, &query, operand(args), out, e);
}

static ohmen_status make_explain(ohmen_register *r, const struct args *args, ohmen_report **out,
                                 ohmen_error *e)
{
    ohmen_query query = reading_query(args);
    return ohmen_explain(r, &query, operand(args), args->number[OPTION_DEPTH], out, e);
}

static ohmen_status make_history(ohmen_register *r, const struct args *args, ohmen_report **out,
                                 ohmen_error *e)
{
    return ohmen_history(r, operand(args), out, e);
}

static ohmen_status make_verify(ohmen_register *r, const struct args *args, ohmen_report **out,
                                ohmen_error *e)
{
    (void)args;
    return ohmen_verify(r, out, e);
}

ohmen_status command_gaps(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_gaps, e);
}

ohmen_status command_hazards(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_hazards, e);
}

ohmen_status command_protection(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_protection, e);
}

ohmen_status command_supply(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_supply, e);
}

ohmen_status command_people(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_people, e);
}

ohmen_status command_list(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_list, e);
}

ohmen_status command_show(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_show, e);
}

ohmen_status command_grid(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_grid, e);
}

ohmen_status command_report(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_report, e);
}

ohmen_status command_damage(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_damage, e);
}

ohmen_status command_weigh(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_weigh, e);
}

ohmen_status command_sensitivity(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_sensitivity, e);
}

ohmen_status command_memo(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_memo, e);
}

ohmen_status command_test_interval(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_test_interval, e);
}

ohmen_status command_explain(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_explain, e);
}

ohmen_status command_history(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_history, e);
}

ohmen_status command_verify(const struct call *call, ohmen_error *e)
{
    return read_and_print(call, make_verify, e);
}
