/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The invariants of diagnostics, counted here anew from the bytes. */
#include "fuzz.h"

#include <string.h>

#include "base/utf8.h"

struct arena *fuzz_arena(void)
{
    struct arena *a = arena_new(NULL);
    REQUIRE(a != NULL);
    return a; /* without a guard: arena_exhausted aborts */
}

/* Characters of line `line` (from 1), or -1 when there is no such line. */
static long line_length(const char *text, size_t n, uint32_t line)
{
    size_t start = 0;
    for (uint32_t at = 1;; at++) {
        size_t end = start;
        while (end < n && text[end] != '\n' && text[end] != '\r')
            end++;
        if (at == line)
            return (long)utf8_count(text + start, end - start);
        if (end == n)
            return -1;
        start = end + (text[end] == '\r' && end + 1 < n && text[end + 1] == '\n' ? 2 : 1);
    }
}

void fuzz_check_diags(const struct diags *d, const char *text, size_t n)
{
    for (size_t i = 0; i < d->list.n; i++) {
        const struct diag *x = &d->list.at[i];
        size_t length = strlen(x->text);
        REQUIRE(length > 0 && x->text[length - 1] != '.');
        REQUIRE(utf8_check(x->text, length) == length);
        REQUIRE(x->place.line >= 1 && x->place.column >= 1);
        long characters = line_length(text, n, x->place.line);
        REQUIRE(characters >= 0);
        REQUIRE((long)x->place.column <= characters + 1);
    }
}
