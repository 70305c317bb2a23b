/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Filling the caller's error object. */
#ifndef BASE_ERROR_H
#define BASE_ERROR_H

#include <stdarg.h>

#include "ohmen/error.h"

/* Sets *e (when e is not NULL and holds no error yet) and returns `status`, so
 * that a failing function can write `return error_set(e, OHMEN_IO, ...)`.
 * The text is a sentence without a final full stop. */
ohmen_status error_set(ohmen_error *e, ohmen_status status, const char *format, ...)
    __attribute__((format(printf, 3, 4)));

ohmen_status error_vset(ohmen_error *e, ohmen_status status, const char *format, va_list args)
    __attribute__((format(printf, 3, 0)));

/* The text of a system error (errno), in English whatever the locale. Valid
 * until the thread's next call. */
const char *error_system(int number);

#endif
