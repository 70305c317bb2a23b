/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sets, found again by a table of open addressing. Owns the members in the caller's arena.
 *
 * Invariant: members of a set never change nor move while somebody holds them, as an arena
 * keeps what it gave when an array grows. */
#include "graph/sets.h"

#include <string.h>

static uint64_t set_hash(const uint32_t *at, size_t n)
{
    uint64_t h = n;
    for (size_t i = 0; i < n; i++) {
        h = (h ^ at[i]) * UINT64_C(0x9E3779B97F4A7C15);
        h ^= h >> 32;
    }
    return h;
}

static size_t find_slot(const struct sets *s, const uint32_t *at, size_t n)
{
    size_t i = set_hash(at, n) & (s->n_slots - 1);
    for (; s->slots[i]; i = (i + 1) & (s->n_slots - 1)) {
        struct set k = s->all.at[s->slots[i] - 1];
        if (k.n == n && (n == 0 || memcmp(s->members.at + k.first, at, n * sizeof *at) == 0))
            break;
    }
    return i;
}

static void grow_slots(struct sets *s)
{
    s->n_slots = s->n_slots ? 2 * s->n_slots : 64;
    s->slots = NEW_ARRAY(s->arena, s->n_slots, uint32_t);
    for (size_t k = 0; k < s->all.n; k++) {
        struct set x = s->all.at[k];
        s->slots[find_slot(s, s->members.at + x.first, x.n)] = (uint32_t)k + 1;
    }
}

uint32_t sets_number(struct sets *s, const uint32_t *at, size_t n)
{
    if (2 * (s->all.n + 1) > s->n_slots)
        grow_slots(s);
    size_t i = find_slot(s, at, n);
    if (s->slots[i])
        return s->slots[i] - 1;
    *array_push(s->arena, &s->all) = (struct set){(uint32_t)s->members.n, (uint32_t)n};
    array_reserve(s->arena, &s->members, n);
    if (n)
        memcpy(s->members.at + s->members.n, at, n * sizeof *at);
    s->members.n += n;
    s->slots[i] = (uint32_t)s->all.n;
    return s->slots[i] - 1;
}

const uint32_t *sets_members(const struct sets *s, uint32_t set, size_t *n)
{
    *n = s->all.at[set].n;
    return s->members.at + s->all.at[set].first;
}

void sets_init(struct sets *s, struct arena *a)
{
    *s = (struct sets){.arena = a};
    array_reserve(a, &s->members, 1); /* never NULL, so that offsets into it are defined */
    sets_number(s, NULL, 0);
}
