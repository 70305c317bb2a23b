/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The list of diagnostics. Owns nothing beyond its arena. */
#include "base/diag.h"

#include <string.h>

#include "base/text.h"

void diags_init(struct diags *d, struct arena *a)
{
    *d = (struct diags){.arena = a};
}

static uint32_t file_order(struct diags *d, const char *file)
{
    for (size_t i = 0; i < d->files.n; i++)
        if (text_equal(d->files.at[i], file))
            return (uint32_t)i;
    *array_push(d->arena, &d->files) = file;
    return (uint32_t)(d->files.n - 1);
}

void diags_file(struct diags *d, const char *file)
{
    file_order(d, file);
}

static bool same_place(const struct place *a, const struct place *b)
{
    if (a->line != b->line || a->column != b->column || !text_equal(a->file, b->file))
        return false;
    if (a->line != 0)
        return true;
    return text_equal(a->path ? a->path : "", b->path ? b->path : "");
}

void diag_add(struct diags *d, struct place at, const char *format, ...)
{
    va_list args;
    va_start(args, format);
    const char *text = arena_vprintf(d->arena, format, args);
    va_end(args);
    if (!at.file)
        at.file = "register";
    for (size_t i = 0; i < d->list.n; i++)
        if (same_place(&d->list.at[i].place, &at) && text_equal(d->list.at[i].text, text))
            return;
    d->count++;
    if (d->list.n >= DIAG_KEPT)
        return;
    *array_push(d->arena, &d->list) = (struct diag){at, text, file_order(d, at.file)};
}

static bool comes_after(const struct diag *a, const struct diag *b)
{
    if (a->order != b->order)
        return a->order > b->order;
    if (a->place.line != b->place.line)
        return a->place.line > b->place.line;
    return a->place.column > b->place.column;
}

void diags_sort(struct diags *d)
{
    for (size_t i = 1; i < d->list.n; i++) {
        struct diag x = d->list.at[i];
        size_t j = i;
        for (; j > 0 && comes_after(&d->list.at[j - 1], &x); j--)
            d->list.at[j] = d->list.at[j - 1];
        d->list.at[j] = x;
    }
}

const char *diag_line(struct arena *a, const struct diag *d)
{
    const struct place *p = &d->place;
    if (p->line == 0)
        return arena_printf(a, "%s: %s", p->path ? p->path : p->file, d->text);
    return arena_printf(a, "%s:%u:%u: %s", p->file, p->line, p->column, d->text);
}
