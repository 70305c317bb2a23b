/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Memos (memo.h): a table of open addressing on the bits of the inputs' values, which points into
 * one array of entries. Owns both, and the averages of the diagram. It is full at MOST_DOUBLES. */
#include "eval/memo.h"

#include <string.h>

enum { MOST_DOUBLES = 1 << 19, FIRST_SLOTS = 1 << 12 };

struct memo {
    struct arena *arena;
    struct eval *v;
    node_id diagram;
    size_t n, n_results;
    uint32_t *inputs;
    ARRAY(double) entries; /* values of the inputs, and the results behind them */
    uint32_t *slots;       /* number of an entry, from 1 on */
    size_t n_slots;
    struct averages *averages;
    bool *moves; /* by variable: whether it meets an input */
    bool begun;
};

static bool meets(const struct memo *m, node_id arg)
{
    size_t n, i = 0;
    const uint32_t *inputs = graph_uncertain(m->v->g, arg, &n);
    for (size_t k = 0; k < m->n; k++) {
        while (i < n && inputs[i] < m->inputs[k])
            i++;
        if (i < n && inputs[i] == m->inputs[k])
            return true;
    }
    return false;
}

struct memo *memo_new(struct arena *a, struct eval *v, node_id diagram, size_t n,
                      const uint32_t *inputs)
{
    struct memo *m = NEW(a, struct memo);
    size_t n_args = graph_at(v->g, diagram)->n;
    *m = (struct memo){.arena = a, .v = v, .diagram = diagram, .n = n};
    m->inputs = arena_copy(a, inputs, n * sizeof *inputs);
    m->n_results = eval_results(v, diagram);
    m->n_slots = FIRST_SLOTS;
    m->slots = NEW_ARRAY(a, m->n_slots, uint32_t);
    m->moves = NEW_ARRAY(a, n_args, bool);
    for (size_t i = 0; i < n_args; i++)
        m->moves[i] = meets(m, graph_args(v->g, diagram)[i]);
    return m;
}

bool memo_is_of(const struct memo *m, node_id diagram, size_t n, const uint32_t *inputs)
{
    return m->diagram == diagram && m->n == n &&
           (n == 0 || memcmp(m->inputs, inputs, n * sizeof *inputs) == 0);
}

/* ---- the table ---- */

static size_t size_of(const struct memo *m)
{
    return m->n + m->n_results;
}

static size_t slot_of(const struct memo *m, const double *x)
{
    uint64_t h = 0, bits;
    for (size_t i = 0; i < m->n; i++) {
        memcpy(&bits, &x[i], sizeof bits);
        h = (h ^ bits) * UINT64_C(0x9E3779B97F4A7C15);
        h ^= h >> 29;
    }
    size_t i = h & (m->n_slots - 1);
    for (; m->slots[i]; i = (i + 1) & (m->n_slots - 1)) {
        const double *entry = m->entries.at + (m->slots[i] - 1) * size_of(m);
        if (m->n == 0 || memcmp(entry, x, m->n * sizeof *x) == 0)
            break;
    }
    return i;
}

static void grow(struct memo *m)
{
    m->n_slots *= 2;
    m->slots = NEW_ARRAY(m->arena, m->n_slots, uint32_t);
    for (size_t i = 0; i < m->entries.n / size_of(m); i++)
        m->slots[slot_of(m, m->entries.at + i * size_of(m))] = (uint32_t)i + 1;
}

const double *memo_find(const struct memo *m, const double *x)
{
    uint32_t number = m->slots[slot_of(m, x)];
    return number ? m->entries.at + (number - 1) * size_of(m) + m->n : NULL;
}

void memo_keep(struct memo *m, const double *x, const double *results)
{
    size_t i = slot_of(m, x), had = m->entries.n;
    if (m->slots[i] || had + size_of(m) > MOST_DOUBLES)
        return;
    array_reserve(m->arena, &m->entries, size_of(m));
    m->entries.n += size_of(m);
    for (size_t k = 0; k < m->n; k++)
        m->entries.at[had + k] = x[k];
    for (size_t k = 0; k < m->n_results; k++)
        m->entries.at[had + m->n + k] = results[k];
    m->slots[i] = (uint32_t)(m->entries.n / size_of(m));
    if (2 * m->entries.n / size_of(m) > m->n_slots)
        grow(m);
}

void memo_diagram(struct memo *m, const double *x, double *results)
{
    const double *known = memo_find(m, x);
    if (known) {
        memcpy(results, known, m->n_results * sizeof *results);
        return;
    }
    struct averaged what = eval_averaged(m->v, m->diagram);
    if (!m->averages)
        m->averages = averages_new(m->arena, &what);
    averages_take(m->averages, &what, m->begun ? m->moves : NULL, results);
    m->begun = true;
    memo_keep(m, x, results);
}
