/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Reading and writing lists of observations. Owns nothing. */
#include "work/observations.h"

#include <stdlib.h>
#include <string.h>

enum list_column { DATE, KIND, OBJECT, COUNT, RESULT, NOTE, KEY, COLUMNS };
static const char *const column_names[COLUMNS] = {"date",   "kind", "object", "count",
                                                  "result", "note", "key"};
static const char *const kind_words[] = {"fault", "trip", "test", NULL};
static const char *const test_results[] = {"passed", "failed", NULL};

struct reading {
    struct arena *arena;
    const struct model *model;
    const struct csv *csv;
    struct diags *diags;
    size_t at[COLUMNS]; /* index of the column, SIZE_MAX: not there */
    struct strmap seen; /* content -> (void *) how often */
    struct strmap keys; /* key -> its first cell */
};

static bool find_column(struct reading *r, size_t column)
{
    const struct csv_cell *head = &r->csv->header[column];
    struct nearest near;
    nearest_init(&near, head->text);
    for (int k = 0; k < COLUMNS; k++) {
        if (text_equal(head->text, column_names[k])) {
            r->at[k] = column;
            return true;
        }
        nearest_offer(&near, column_names[k]);
    }
    diag_add(r->diags, head->place,
             "a list of observations has no column \"%s\"%s; it has date, kind, object, count, "
             "result, note, "
             "key",
             head->text, nearest_hint(r->arena, &near));
    return false;
}

static bool find_columns(struct reading *r)
{
    bool fine = true;
    for (int k = 0; k < COLUMNS; k++)
        r->at[k] = SIZE_MAX;
    for (size_t c = 0; c < r->csv->columns; c++)
        fine = find_column(r, c) && fine;
    for (int k = DATE; k <= OBJECT; k++)
        if (r->at[k] == SIZE_MAX) {
            diag_add(r->diags, r->csv->header[0].place, "this list lacks the column \"%s\"",
                     column_names[k]);
            fine = false;
        }
    return fine;
}

static const struct csv_cell *cell(const struct reading *r, size_t row, enum list_column c)
{
    return r->at[c] == SIZE_MAX ? NULL : &r->csv->cells[row * r->csv->columns + r->at[c]];
}

static const char *text_of(const struct reading *r, size_t row, enum list_column c)
{
    const struct csv_cell *x = cell(r, row, c);
    return x ? x->text : "";
}

static bool check_word(struct reading *r, const struct csv_cell *x, const char *const *words)
{
    struct nearest near;
    struct text list;
    nearest_init(&near, x->text);
    text_init(&list, r->arena);
    for (size_t i = 0; words[i]; i++) {
        if (text_equal(x->text, words[i]))
            return true;
        nearest_offer(&near, words[i]);
        text_printf(&list, "%s%s", i ? ", " : "", words[i]);
    }
    diag_add(r->diags, x->place, "\"%s\" is none of %s%s", x->text, text_str(&list),
             nearest_hint(r->arena, &near));
    return false;
}

static bool read_count(struct reading *r, size_t row, int64_t *out)
{
    const struct csv_cell *x = cell(r, row, COUNT);
    *out = 1;
    if (!x || !*x->text)
        return true;
    size_t n = strlen(x->text);
    if (n <= 9 && strspn(x->text, "0123456789") == n)
        *out = strtoll(x->text, NULL, 10);
    else
        *out = 0;
    if (*out >= 1)
        return true;
    diag_add(r->diags, x->place, "expected a whole number from 1 to 999999999, found \"%s\"",
             x->text);
    return false;
}

static bool check_object_cell(struct reading *r, const struct csv_cell *x)
{
    if (!r->model || model_find(r->model, x->text))
        return true;
    struct nearest near;
    nearest_init(&near, x->text);
    for (size_t i = 0; i < r->model->by_id.n; i++)
        nearest_offer(&near, r->model->by_id.at[i].key);
    diag_add(r->diags, x->place, "there is no \"%s\" in the register%s", x->text,
             nearest_hint(r->arena, &near));
    return false;
}

/* Its key at the source, or a hash of what it says with its ordinal among equals. */
static const char *identity(struct reading *r, size_t row, const struct store_observation *o)
{
    const struct csv_cell *key = cell(r, row, KEY);
    if (key && *key->text) {
        const struct csv_cell *first = strmap_get(&r->keys, key->text);
        if (first)
            diag_add(r->diags, key->place, "the key \"%s\" stands twice; the first is in line %u",
                     key->text, first->place.line);
        strmap_set(r->arena, &r->keys, key->text, (void *)key);
        return key->text;
    }
    struct text t;
    char date[DATE_TEXT], hash[STORE_HASH_TEXT];
    text_init(&t, r->arena);
    text_printf(&t, "%s\n%s\n%s\n%lld\n%s\n%s", date_write(date, o->day), o->what, o->subject,
                (long long)o->count, o->result, o->note);
    uintptr_t before = (uintptr_t)strmap_get(&r->seen, text_str(&t));
    strmap_set(r->arena, &r->seen, text_str(&t), (void *)(before + 1));
    store_hash(text_str(&t), t.n, hash);
    return arena_printf(r->arena, "content:%s:%zu", hash, (size_t)before + 1);
}

static void read_row(struct reading *r, size_t row, struct store_observations *out)
{
    const struct csv_cell *date = cell(r, row, DATE), *what = cell(r, row, KIND);
    const struct csv_cell *result = cell(r, row, RESULT);
    struct store_observation o = {.what = what->text,
                                  .subject = text_of(r, row, OBJECT),
                                  .result = text_of(r, row, RESULT),
                                  .note = text_of(r, row, NOTE)};
    bool fine = date_read(date->text, &o.day);
    if (!fine)
        diag_add(r->diags, date->place,
                 "\"%s\" is no date: a date is written as 2027-06-30, year, month, day",
                 date->text);
    fine = check_word(r, what, kind_words) && fine;
    fine = check_object_cell(r, cell(r, row, OBJECT)) && fine;
    fine = read_count(r, row, &o.count) && fine;
    if (text_equal(o.what, "test") && result && *result->text)
        fine = check_word(r, result, test_results) && fine;
    if (!fine)
        return;
    o.ident = identity(r, row, &o);
    *array_push(r->arena, out) = o;
}

void observations_read(struct arena *a, const struct model *model, const struct csv *csv,
                       struct store_observations *out, struct diags *d)
{
    struct reading r = {.arena = a, .model = model, .csv = csv, .diags = d};
    if (!find_columns(&r))
        return;
    for (size_t i = 0; i < csv->rows; i++)
        read_row(&r, i, out);
}

void observations_write(struct text *out, const struct store_observations *all)
{
    char date[DATE_TEXT], count[32];
    text_add(out, "date,kind,object,count,result,note,key\n");
    for (size_t i = 0; i < all->n; i++) {
        const struct store_observation *o = &all->at[i];
        const char *cells[COLUMNS] = {date_write(date, o->day),
                                      o->what,
                                      o->subject,
                                      text_double(count, (double)o->count),
                                      o->result,
                                      o->note,
                                      o->ident};
        for (int k = 0; k < COLUMNS; k++) {
            text_add(out, k ? "," : "");
            csv_cell_write(out, cells[k], false);
        }
        text_byte(out, '\n');
    }
}
