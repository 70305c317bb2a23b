/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The status table and the error object. Nothing here allocates, so that an
 * out-of-memory error can always be told. */
#include "base/error.h"

#include <locale.h>
#include <stdio.h>
#include <string.h>

static const struct {
    int exit_status;
    const char *text;
} statuses[] = {
#define X(name, exit_status, text) {exit_status, text},
    OHMEN_STATUS_LIST(X)
#undef X
};

enum { STATUS_COUNT = sizeof statuses / sizeof statuses[0] };

int ohmen_status_exit(ohmen_status status)
{
    if ((unsigned)status >= STATUS_COUNT)
        return statuses[OHMEN_INTERNAL].exit_status;
    return statuses[status].exit_status;
}

const char *ohmen_status_text(ohmen_status status)
{
    if ((unsigned)status >= STATUS_COUNT)
        return statuses[OHMEN_INTERNAL].text;
    return statuses[status].text;
}

/* Ends a text that did not fit with "..." without splitting a UTF-8 sequence. */
static void mark_cut(char *text, size_t size)
{
    size_t end = size - 4;
    while (end > 0 && ((unsigned char)text[end] & 0xC0) == 0x80)
        end--;
    memcpy(text + end, "...", 4);
}

ohmen_status error_vset(ohmen_error *e, ohmen_status status, const char *format, va_list args)
{
    if (!e || e->status != OHMEN_OK)
        return status;
    e->status = status;
    int n = vsnprintf(e->text, sizeof e->text, format, args);
    if (n >= (int)sizeof e->text)
        mark_cut(e->text, sizeof e->text);
    return status;
}

ohmen_status error_set(ohmen_error *e, ohmen_status status, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    error_vset(e, status, format, args);
    va_end(args);
    return status;
}

const char *error_system(int number)
{
    locale_t plain = newlocale(LC_ALL_MASK, "C", (locale_t)0);
    if (!plain)
        return "system error";
    const char *text = strerror_l(number, plain);
    freelocale(plain);
    return text;
}
