/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Mutations. Invariant: only the number decides; the seeds are not changed. */
#include "mutate.h"

#include <dirent.h>
#include <stdbool.h>
#include <string.h>

#include "base/file.h"
#include "base/text.h"

/* ---- the corpus ---- */

static void add_seed(struct arena *a, struct corpus *c, size_t *cap, const char *folder,
                     const char *name)
{
    char *text;
    size_t n;
    if (file_read(a, arena_printf(a, "%s/%s", folder, name), MUTATE_BYTES, &text, &n, NULL))
        return;
    c->seeds = array_room(a, c->seeds, c->n, cap, 1, sizeof *c->seeds);
    size_t i = c->n++;
    for (; i > 0 && text_compare(c->seeds[i - 1].name, name) > 0; i--)
        c->seeds[i] = c->seeds[i - 1];
    c->seeds[i] = (struct input){arena_str(a, name), text, n};
}

struct corpus corpus_read(struct arena *a, const char *folder, const char *const *words)
{
    struct corpus c = {.words = words};
    size_t cap = 0;
    DIR *d = opendir(folder);
    if (!d)
        return c;
    for (struct dirent *entry; (entry = readdir(d)) != NULL;)
        if (entry->d_name[0] != '.')
            add_seed(a, &c, &cap, folder, entry->d_name);
    closedir(d);
    return c;
}

/* ---- steps ---- */

struct work {
    struct random r;
    const struct corpus *c;
    char *bytes; /* room for MUTATE_BYTES */
    size_t n;
};

static size_t smaller(size_t a, size_t b)
{
    return a < b ? a : b;
}

/* Opens a gap of n bytes at `at`, fewer when they do not fit; returns how many. */
static size_t open_gap(struct work *w, size_t at, size_t n)
{
    n = smaller(n, MUTATE_BYTES - w->n);
    memmove(w->bytes + at + n, w->bytes + at, w->n - at);
    w->n += n;
    return n;
}

static void insert(struct work *w, size_t at, const char *bytes, size_t n)
{
    n = open_gap(w, at, n);
    memcpy(w->bytes + at, bytes, n);
}

static void insert_word(struct work *w)
{
    size_t words = 0;
    while (w->c->words[words])
        words++;
    if (words == 0)
        return;
    const char *word = w->c->words[random_index(&w->r, words)];
    insert(w, random_index(&w->r, w->n + 1), word, strlen(word));
}

static void flip_bit(struct work *w)
{
    if (w->n > 0)
        w->bytes[random_index(&w->r, w->n)] ^= (char)(1 << random_index(&w->r, 8));
}

static void overwrite_byte(struct work *w)
{
    if (w->n > 0)
        w->bytes[random_index(&w->r, w->n)] = (char)random_index(&w->r, 256);
}

static void remove_some(struct work *w)
{
    size_t at = random_index(&w->r, w->n + 1);
    size_t n = smaller(1 + random_index(&w->r, 16), w->n - at);
    memmove(w->bytes + at, w->bytes + at + n, w->n - at - n);
    w->n -= n;
}

static void remove_line(struct work *w)
{
    size_t from = random_index(&w->r, w->n + 1);
    while (from > 0 && w->bytes[from - 1] != '\n')
        from--;
    size_t to = from;
    while (to < w->n && w->bytes[to++] != '\n')
        ;
    memmove(w->bytes + from, w->bytes + to, w->n - to);
    w->n -= to - from;
}

static void repeat_some(struct work *w)
{
    char copy[64];
    size_t from = random_index(&w->r, w->n + 1);
    size_t n = smaller(1 + random_index(&w->r, sizeof copy), w->n - from);
    memcpy(copy, w->bytes + from, n);
    for (size_t times = 1 + random_index(&w->r, 4); times > 0; times--)
        insert(w, from, copy, n);
}

static void cut_end(struct work *w)
{
    w->n = random_index(&w->r, w->n + 1);
}

/* A piece of another seed takes the place of the rest. */
static void splice(struct work *w)
{
    const struct input *other = &w->c->seeds[random_index(&w->r, w->c->n)];
    size_t from = random_index(&w->r, other->n + 1);
    cut_end(w);
    insert(w, w->n, other->bytes + from, other->n - from);
}

/* Indents a line further, as editors do by mistake. */
static void indent_line(struct work *w)
{
    size_t at = random_index(&w->r, w->n + 1);
    while (at < w->n && w->bytes[at] != '\n')
        at++;
    if (at < w->n)
        insert(w, at + 1, random_index(&w->r, 4) ? " " : "\t", 1);
}

/* ---- steps that keep the form: words for words, digits for digits ---- */

static bool is_word_byte(char c)
{
    return (c >= 'a' && c <= 'z') || (c >= 'A' && c <= 'Z') || (c >= '0' && c <= '9') ||
           c == '-' || c == '.' || c == '%';
}

/* A word of the text at a random place; n is 0 when there stands none. */
static struct input some_word(struct work *w)
{
    size_t from = random_index(&w->r, w->n + 1), to = from;
    while (from > 0 && is_word_byte(w->bytes[from - 1]))
        from--;
    while (to < w->n && is_word_byte(w->bytes[to]))
        to++;
    return (struct input){NULL, w->bytes + from, to - from};
}

/* One word takes the place of another one. */
static void change_word(struct work *w)
{
    char copy[64];
    struct input with = some_word(w), old = some_word(w);
    if (old.n == 0 || with.n == 0 || with.n > sizeof copy)
        return;
    size_t at = (size_t)(old.bytes - w->bytes);
    memcpy(copy, with.bytes, with.n);
    memmove(w->bytes + at, w->bytes + at + old.n, w->n - at - old.n);
    w->n -= old.n;
    insert(w, at, copy, with.n);
}

static void change_digit(struct work *w)
{
    size_t at = random_index(&w->r, w->n + 1);
    while (at < w->n && (w->bytes[at] < '0' || w->bytes[at] > '9'))
        at++;
    if (at < w->n)
        w->bytes[at] = (char)('0' + random_index(&w->r, 10));
}

struct input mutate(struct arena *a, const struct corpus *c, uint64_t number)
{
    static void (*const steps[])(struct work *) = {insert_word, insert_word, flip_bit,
                                                   overwrite_byte, remove_some, remove_line,
                                                   repeat_some, cut_end, splice, indent_line};
    static void (*const gentle[])(struct work *) = {change_word, change_digit, change_digit,
                                                    change_digit, remove_line};
    struct work w = {.r = random_seed(number), .c = c};
    bool keep_form = random_index(&w.r, 2);
    const struct input *seed = &c->seeds[random_index(&w.r, c->n)];
    w.bytes = arena_alloc(a, MUTATE_BYTES);
    insert(&w, 0, seed->bytes, seed->n);
    /* few steps more often than many, so that a good part stays readable */
    for (size_t n = 1 + random_index(&w.r, 1 + random_index(&w.r, 6)); n > 0; n--)
        (keep_form ? random_pick(&w.r, gentle) : random_pick(&w.r, steps))(&w);
    return (struct input){seed->name, w.bytes, w.n};
}
