/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Markdown made from the field tables: one row a field. Owns nothing; what a document
 * says elsewhere is found by a first pass over its marks. */
#include "model/fields_text.h"

#include <string.h>

#include "model/tables_all.h"

/* Tables are spread out in one another this deep; deeper ones are named. */
#define SPREAD 3

/* --- one field in words --- */

static const char *dim_word(enum field_dim d)
{
    switch (d) {
    case ANY: return "quantity";
    case NUMBER: return "number";
    case PROBABILITY: return "probability";
    case TIME: return "time";
    case POWER: return "power";
    case MONEY: return "money";
    case FREQUENCY: return "frequency";
    case MONEY_RATE: return "money per time";
    case INTEREST: return "interest";
    }
    return "";
}

/* What is said of the number itself; a constant is certain too. */
static void quantity_words(struct text *out, const struct field *f)
{
    text_add(out, f->flags & CONSTANT ? "plain " : f->flags & CERTAIN ? "certain " : "");
    text_add(out, dim_word(f->dim));
    if (f->flags & REST)
        text_add(out, " or `rest`");
    if (f->flags & POSITIVE)
        text_add(out, ", above 0");
    if (f->flags & NOT_NEGATIVE)
        text_add(out, ", not below 0");
}

static void word_list(struct text *out, const char *const *words)
{
    for (size_t i = 0; words[i]; i++)
        text_printf(out, "%s`%s`", i ? ", " : "", words[i]);
}

#define LARGE 1000000000000 /* limits from here on are no news to a reader */

static void count_words(struct text *out, const struct field *f)
{
    text_add(out, "whole number");
    if (f->high && f->high < LARGE)
        text_printf(out, ", %lld to %lld", (long long)f->low, (long long)f->high);
}

/* "an element or a scheme" */
static const char *ids_of(struct text *out, const struct field *f)
{
    return kinds_words(out->arena, f->kinds);
}

static void field_words(struct text *out, const struct field *f);

static void rows_words(struct text *out, const struct field *f)
{
    text_add(out, f->year_keys ? "map by year: " : "map by ");
    if (!f->year_keys)
        text_printf(out, "%s%s: ", f->kinds ? "id of " : "name", f->kinds ? ids_of(out, f) : "");
    field_words(out, f->part);
}

static void field_words(struct text *out, const struct field *f)
{
    switch (f->type) {
    case FIELD_TEXT: text_add(out, "text"); break;
    case FIELD_NAME: text_add(out, "name"); break;
    case FIELD_REF: text_printf(out, "id of %s", ids_of(out, f)); break;
    case FIELD_REFS: text_printf(out, "list of ids, each of %s", ids_of(out, f)); break;
    case FIELD_NAMES: text_add(out, "list of names"); break;
    case FIELD_ORDERED: text_add(out, "list of names, in order"); break;
    case FIELD_WORD: word_list(out, f->words); break;
    case FIELD_YES: text_add(out, "`yes` or `no`"); break;
    case FIELD_COUNT: count_words(out, f); break;
    case FIELD_DATE: text_add(out, "date"); break;
    case FIELD_WHEN: text_add(out, "date or year"); break;
    case FIELD_UNIT: text_add(out, "units"); break;
    case FIELD_QUANTITY: quantity_words(out, f); break;
    case FIELD_STRUCT: text_printf(out, "*%s*", f->table->name); break;
    case FIELD_ROWS: rows_words(out, f); break;
    case FIELD_LIST:
        text_add(out, "list: ");
        field_words(out, f->part);
        break;
    case FIELD_STRUCTURE: text_add(out, "structure"); break;
    case FIELD_CHANGE: text_add(out, "change"); break;
    }
}

/* --- rows --- */

struct spreading {
    struct text *out;
    const struct strmap *elsewhere;
    const struct table *above[SPREAD + 1]; /* being spread out now */
    unsigned depth;
};

/* "yes", "one of these" for keys of a group, or nothing. */
static const char *need_words(const struct table *t, const struct field *f)
{
    if (f->flags & REQUIRED)
        return "yes";
    for (size_t i = 0; i < t->n_groups; i++)
        for (size_t k = 0; k < 8 && t->groups[i].keys[k]; k++)
            if (text_equal(t->groups[i].keys[k], f->key))
                return t->groups[i].needed ? "one of" : "at most one of";
    return "";
}

static void table_rows(struct spreading *s, const struct table *t, const char *above,
                       unsigned flags);

/* Is the table named where a field leads to it, and not spread out? */
static bool is_named(const struct spreading *s, const struct table *t)
{
    bool named = strmap_has(s->elsewhere, t->name) || s->depth == SPREAD;
    for (unsigned i = 0; i <= s->depth; i++)
        named = named || s->above[i] == t;
    return named;
}

/* The rows below a field that leads to a table; `NAME` stands for the key of rows. */
static void spread(struct spreading *s, const struct field *f, const char *key, unsigned flags)
{
    const struct table *below = field_table(f);
    if (!below || is_named(s, below))
        return;
    const char *path = key;
    for (; f->type == FIELD_ROWS || f->type == FIELD_LIST; f = f->part)
        if (f->type == FIELD_ROWS)
            path = arena_printf(s->out->arena, "%s.%s", path, f->year_keys ? "YEAR" : "NAME");
    s->above[++s->depth] = below;
    table_rows(s, below, path, flags);
    s->depth--;
}

static void table_rows(struct spreading *s, const struct table *t, const char *above,
                       unsigned flags)
{
    for (size_t i = 0; i < t->n_fields; i++) {
        const struct field *f = &t->fields[i];
        unsigned all = flags | f->flags;
        const char *key = arena_printf(s->out->arena, "%s%s%s", above, *above ? "." : "", f->key);
        text_printf(s->out, "| `%s` | ", key);
        field_words(s->out, f);
        text_printf(s->out, " | %s | %s | %s |\n", need_words(t, f), all & LATER ? "stored" : "yes",
                    f->help);
        spread(s, f, key, all & LATER);
    }
}

void fields_markdown(struct text *out, const struct table *t, const struct strmap *elsewhere)
{
    struct spreading s = {.out = out, .elsewhere = elsewhere, .above = {t}};
    text_add(out, "| key | expects | needed | used | |\n| --- | --- | --- | --- | --- |\n");
    table_rows(&s, t, "", 0);
}

/* --- documents --- */

struct filling {
    struct arena *arena;
    struct tables tables;
    struct strmap blocks; /* names of tables that have a block */
    const char **problem;
};

/* The name in "<!-- fields: NAME -->", or NULL. */
static const char *mark(struct arena *a, const char *line, size_t n)
{
    static const char head[] = "<!-- fields: ", tail[] = " -->";
    size_t around = sizeof head + sizeof tail - 2;
    if (n <= around || strncmp(line, head, sizeof head - 1) != 0 ||
        strncmp(line + n - (sizeof tail - 1), tail, sizeof tail - 1) != 0)
        return NULL;
    return arena_strn(a, line + sizeof head - 1, n - around);
}

static bool is_end(const char *line, size_t n)
{
    return n == strlen("<!-- end -->") && strncmp(line, "<!-- end -->", n) == 0;
}

static const struct table *table_named(const struct filling *f, const char *name)
{
    for (size_t i = 0; i < f->tables.n; i++)
        if (text_equal(f->tables.at[i]->name, name))
            return f->tables.at[i];
    return NULL;
}

/* The line that begins at *p without its end; moves *p behind it. */
static size_t next_line(const char **p, const char **line)
{
    const char *end = strchr(*p, '\n');
    *line = *p;
    size_t n = end ? (size_t)(end - *p) : strlen(*p);
    *p += n + (end != NULL);
    return n;
}

static bool find_blocks(struct filling *f, const char *document)
{
    size_t number = 0, opened = 0;
    for (const char *p = document, *line; *p;) {
        size_t n = next_line(&p, &line);
        const char *name = mark(f->arena, line, n);
        number++;
        if (is_end(line, n))
            opened = 0;
        if (!name)
            continue;
        const char *wrong = !table_named(f, name)          ? "there is no table"
                            : strmap_has(&f->blocks, name) ? "there are two blocks of"
                            : opened                       ? "no end before the block of"
                                                           : NULL;
        if (wrong)
            *f->problem = arena_printf(f->arena, "%zu: %s \"%s\"", number, wrong, name);
        if (wrong)
            return false;
        strmap_set(f->arena, &f->blocks, name, (void *)table_named(f, name));
        opened = number;
    }
    if (opened)
        *f->problem = arena_printf(f->arena, "%zu: this block has no end", opened);
    return opened == 0;
}

bool fields_fill(struct text *out, const char *document, const char **problem)
{
    struct filling f = {.arena = out->arena, .problem = problem};
    tables_all(out->arena, &f.tables);
    if (!find_blocks(&f, document))
        return false;
    bool inside = false;
    for (const char *p = document, *line; *p;) {
        size_t n = next_line(&p, &line);
        const char *name = mark(f.arena, line, n);
        inside = inside && !is_end(line, n);
        if (inside)
            continue;
        text_addn(out, line, (size_t)(p - line));
        if (name)
            fields_markdown(out, table_named(&f, name), &f.blocks);
        inside = name != NULL;
    }
    return true;
}
