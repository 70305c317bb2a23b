/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Text: a growing buffer, a map keyed by strings, and nearest names.
 *
 * Strings are zero-terminated UTF-8 in an arena. Numbers are written and read
 * without the C locale's say: `.` is the decimal point, always. */
#ifndef BASE_TEXT_H
#define BASE_TEXT_H

#include <stdbool.h>

#include "base/array.h"

struct text {
    struct arena *arena;
    char *at; /* zero-terminated once anything was added */
    size_t n, cap;
};

void text_init(struct text *t, struct arena *a);
void text_add(struct text *t, const char *s);
void text_addn(struct text *t, const char *s, size_t n);
void text_byte(struct text *t, char c);
void text_repeat(struct text *t, const char *s, size_t times);
void text_printf(struct text *t, const char *format, ...) __attribute__((format(printf, 2, 3)));
/* The text so far, "" when empty; valid until the next addition. */
const char *text_str(const struct text *t);

bool text_equal(const char *a, const char *b);
/* Order of bytes as unsigned values: the order of everything that is listed. */
int text_compare(const char *a, const char *b);
bool text_starts(const char *s, const char *prefix);

/* A map from strings to pointers. Keys are borrowed. Iteration (at[0..n)) is in
 * order of insertion, never in hash order. A zeroed struct is an empty map. */
struct strmap {
    struct strmap_pair {
        const char *key;
        void *value;
    } *at;
    size_t n, cap;
    struct strmap_slot {
        uint32_t index; /* + 1, or 0 */
        uint32_t hash;  /* of the key */
    } *slots;
    size_t n_slots;
};

void *strmap_get(const struct strmap *m, const char *key);
bool strmap_has(const struct strmap *m, const char *key);
/* Sets or replaces. */
void strmap_set(struct arena *a, struct strmap *m, const char *key, void *value);

/* Nearest name: feed candidates, then take the best. At most one third of the
 * bytes of `wanted` (rounded up, at most 3, and never the only one) may differ;
 * ties go to the first in byte order. Distance is the optimal string alignment
 * distance (insert, drop, replace, swap neighbours: one each; the case of an
 * ASCII letter: one half). Names longer than 64 bytes are never near. Both
 * strings are borrowed. */
struct nearest {
    const char *wanted;
    const char *best;
    unsigned distance;
};
void nearest_init(struct nearest *n, const char *wanted);
void nearest_offer(struct nearest *n, const char *candidate);
/* The best candidate, or NULL when none is near. */
const char *nearest_take(const struct nearest *n);
/* " (did you mean "x"?)" for the end of a message, or "". */
const char *nearest_hint(struct arena *a, const struct nearest *n);

/* x with the fewest digits (at most 17) at which its correctly rounded decimal
 * reads back as exactly x: 2.385, 1.2e-7, 340, 1e15, -0. buf holds at least 32
 * bytes. x is finite. Returns buf. */
char *text_double(char *buf, double x);

/* Reads [0-9]+(.[0-9]+)?([eE][+-]?[0-9]+)? from s up to `end`; false when it is
 * not wholly such a number, longer than 1100 bytes, or not finite. Correctly
 * rounded; what is too small becomes a subnormal or 0. */
bool text_to_double(const char *s, const char *end, double *out);

#endif
