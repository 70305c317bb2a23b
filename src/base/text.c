/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Text buffers, string maps, nearest names, and numbers as text.
 * Owns nothing: all memory is the arena's. */
#include "base/text.h"

#include <float.h>
#include <langinfo.h>
#include <math.h>
#include <stdio.h>
#include <stdlib.h>
#include <string.h>

void text_init(struct text *t, struct arena *a)
{
    *t = (struct text){.arena = a};
}

void text_addn(struct text *t, const char *s, size_t n)
{
    if (n >= SIZE_MAX / 2)
        arena_exhausted(t->arena);
    t->at = array_room(t->arena, t->at, t->n, &t->cap, n + 1, 1);
    if (n)
        memcpy(t->at + t->n, s, n);
    t->n += n;
    t->at[t->n] = 0;
}

void text_add(struct text *t, const char *s)
{
    text_addn(t, s, strlen(s));
}

void text_byte(struct text *t, char c)
{
    text_addn(t, &c, 1);
}

void text_repeat(struct text *t, const char *s, size_t times)
{
    while (times--)
        text_add(t, s);
}

void text_printf(struct text *t, const char *format, ...)
{
    va_list args, again;
    va_start(args, format);
    va_copy(again, args);
    size_t room = t->cap - t->n;
    int n = vsnprintf(room ? t->at + t->n : NULL, room, format, args);
    bool fits = n >= 0 && (size_t)n < room;
    if (room && !fits)
        t->at[t->n] = 0; /* as it was, whatever happens now */
    if (n < 0)
        arena_exhausted(t->arena); /* longer than INT_MAX, or a wide character without a form */
    if (!fits) {
        t->at = array_room(t->arena, t->at, t->n, &t->cap, (size_t)n + 1, 1);
        vsnprintf(t->at + t->n, (size_t)n + 1, format, again);
    }
    t->n += (size_t)n;
    va_end(again);
    va_end(args);
}

const char *text_str(const struct text *t)
{
    return t->at ? t->at : "";
}

bool text_equal(const char *a, const char *b)
{
    return strcmp(a, b) == 0;
}

int text_compare(const char *a, const char *b)
{
    return strcmp(a, b); /* C17 7.24.4: compares as unsigned char */
}

bool text_starts(const char *s, const char *prefix)
{
    return strncmp(s, prefix, strlen(prefix)) == 0;
}

/* FNV-1a of 64 bits, folded. */
static uint32_t hash_string(const char *s)
{
    uint64_t h = 14695981039346656037u;
    for (; *s; s++)
        h = (h ^ (unsigned char)*s) * 1099511628211u;
    return (uint32_t)(h ^ h >> 32);
}

/* The slot of a key, or the free one where it would be. */
static struct strmap_slot *find_slot(const struct strmap *m, const char *key, uint32_t hash)
{
    size_t mask = m->n_slots - 1;
    for (size_t i = hash & mask;; i = (i + 1) & mask) {
        struct strmap_slot *slot = &m->slots[i];
        if (slot->index == 0 || (slot->hash == hash && text_equal(m->at[slot->index - 1].key, key)))
            return slot;
    }
}

void *strmap_get(const struct strmap *m, const char *key)
{
    if (m->n == 0)
        return NULL;
    const struct strmap_slot *slot = find_slot(m, key, hash_string(key));
    return slot->index ? m->at[slot->index - 1].value : NULL;
}

bool strmap_has(const struct strmap *m, const char *key)
{
    return m->n != 0 && find_slot(m, key, hash_string(key))->index != 0;
}

static void grow_slots(struct arena *a, struct strmap *m)
{
    const struct strmap_slot *old = m->slots;
    size_t n_old = m->n_slots, n_slots = n_old ? n_old * 2 : 16;
    m->slots = NEW_ARRAY(a, n_slots, struct strmap_slot); /* may jump: the map is whole till here */
    m->n_slots = n_slots;
    for (size_t k = 0; k < n_old; k++) {
        size_t i = old[k].hash & (n_slots - 1);
        if (old[k].index == 0)
            continue;
        while (m->slots[i].index)
            i = (i + 1) & (n_slots - 1);
        m->slots[i] = old[k];
    }
}

void strmap_set(struct arena *a, struct strmap *m, const char *key, void *value)
{
    if ((m->n + 1) * 2 > m->n_slots)
        grow_slots(a, m);
    uint32_t hash = hash_string(key);
    struct strmap_slot *slot = find_slot(m, key, hash);
    if (slot->index) {
        m->at[slot->index - 1].value = value;
        return;
    }
    *array_push(a, m) = (struct strmap_pair){key, value};
    *slot = (struct strmap_slot){(uint32_t)m->n, hash};
}

enum { LONGEST_NAME = 64 };

static unsigned least(unsigned a, unsigned b)
{
    return a < b ? a : b;
}

/* tolower would ask the locale, and Turkish has its own idea of I. */
static char ascii_lower(char c)
{
    return c >= 'A' && c <= 'Z' ? (char)(c - 'A' + 'a') : c;
}

static unsigned letter_cost(char a, char b)
{
    if (a == b)
        return 0;
    return ascii_lower(a) == ascii_lower(b) ? 1 : 2;
}

/* Twice the optimal string alignment distance; names longer than LONGEST_NAME
 * are never near. */
static unsigned twice_distance(const char *a, const char *b)
{
    size_t n = strlen(a), m = strlen(b);
    if (n > LONGEST_NAME || m > LONGEST_NAME)
        return 1000;
    unsigned d[3][LONGEST_NAME + 1];
    unsigned *before = d[0], *last = d[1], *row = d[2];
    for (size_t j = 0; j <= m; j++)
        last[j] = 2 * (unsigned)j;
    for (size_t i = 1; i <= n; i++) {
        row[0] = 2 * (unsigned)i;
        for (size_t j = 1; j <= m; j++) {
            unsigned best = last[j - 1] + letter_cost(a[i - 1], b[j - 1]);
            best = least(best, least(last[j] + 2, row[j - 1] + 2));
            if (i > 1 && j > 1 && a[i - 1] == b[j - 2] && a[i - 2] == b[j - 1])
                best = least(best, before[j - 2] + 2);
            row[j] = best;
        }
        unsigned *free_row = before;
        before = last;
        last = row;
        row = free_row;
    }
    return last[m];
}

void nearest_init(struct nearest *n, const char *wanted)
{
    size_t letters = strlen(wanted);
    unsigned allowed = letters > 6 ? 6 : 2 * (unsigned)((letters + 2) / 3);
    if (letters == 1)
        allowed = 1; /* else any other letter would do */
    *n = (struct nearest){.wanted = wanted, .distance = allowed + 1};
}

void nearest_offer(struct nearest *n, const char *candidate)
{
    unsigned d = twice_distance(n->wanted, candidate);
    if (d < n->distance || (d == n->distance && n->best && text_compare(candidate, n->best) < 0)) {
        n->distance = d;
        n->best = candidate;
    }
}

const char *nearest_take(const struct nearest *n)
{
    return n->best;
}

const char *nearest_hint(struct arena *a, const struct nearest *n)
{
    return n->best ? arena_printf(a, " (did you mean \"%s\"?)", n->best) : "";
}

/* snprintf and strtod follow the locale's decimal point; these two undo it.
 * nl_langinfo, because localeconv writes to one static struct from all threads. */
static void point_to_dot(char *s)
{
    const char *point = nl_langinfo(RADIXCHAR);
    char *at = strstr(s, point);
    if (!at || text_equal(point, "."))
        return;
    size_t extra = strlen(point) - 1;
    *at = '.';
    memmove(at + 1, at + 1 + extra, strlen(at + 1 + extra) + 1);
}

/* Rewrites 1.2e-07 as 1.2e-7 and 1e+20 as 1e20. */
static void tidy_exponent(char *s)
{
    char *e = strchr(s, 'e');
    if (!e)
        return;
    char *to = e + 1, *from = e + 1;
    if (*from == '-')
        *to++ = *from++;
    else if (*from == '+')
        from++;
    while (*from == '0' && from[1])
        from++;
    memmove(to, from, strlen(from) + 1);
}

/* The exact value of s, read with `.` as the decimal point whatever the locale.
 * s is at most 1100 bytes of a checked number. */
static double parse_double(const char *s)
{
    const char *point = nl_langinfo(RADIXCHAR);
    if (text_equal(point, "."))
        return strtod(s, NULL);
    char local[1200];
    const char *dot = strchr(s, '.');
    if (!dot)
        return strtod(s, NULL);
    snprintf(local, sizeof local, "%.*s%s%s", (int)(dot - s), s, point, dot + 1);
    return strtod(local, NULL);
}

char *text_double(char *buf, double x)
{
    /* 15 digits always survive in a normal double; a subnormal may need but one. */
    int digits = fabs(x) < DBL_MIN ? 1 : DBL_DIG;
    for (; digits <= DBL_DECIMAL_DIG; digits++) {
        snprintf(buf, 32, "%.*g", digits, x);
        point_to_dot(buf);
        if (parse_double(buf) == x)
            break;
    }
    tidy_exponent(buf);
    return buf;
}

static const char *skip_digits(const char *s, const char *end)
{
    while (s < end && *s >= '0' && *s <= '9')
        s++;
    return s;
}

/* The end of a number that starts at s, or NULL. */
static const char *number_end(const char *s, const char *end)
{
    const char *p = skip_digits(s, end);
    if (p == s)
        return NULL;
    if (p < end && *p == '.') {
        const char *q = skip_digits(p + 1, end);
        if (q == p + 1)
            return NULL;
        p = q;
    }
    if (p < end && (*p == 'e' || *p == 'E')) {
        const char *q = p + 1;
        if (q < end && (*q == '+' || *q == '-'))
            q++;
        p = skip_digits(q, end);
        if (p == q)
            return NULL;
    }
    return p;
}

bool text_to_double(const char *s, const char *end, double *out)
{
    char copy[1101];
    if (number_end(s, end) != end || (size_t)(end - s) >= sizeof copy)
        return false;
    memcpy(copy, s, (size_t)(end - s));
    copy[end - s] = 0;
    double x = parse_double(copy);
    if (!isfinite(x))
        return false;
    *out = x;
    return true;
}
