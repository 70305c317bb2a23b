/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The best sets of a family, best first, without listing the others.
 *
 * For each node the better of its arms is known, so that from any place the best way
 * down is a walk. A candidate is the best set of all those that begin in one way. The
 * best candidate is the next set; on its way down, each turn not taken begins a new
 * candidate. So each set is a candidate once at most (E. L. Lawler, A procedure for
 * computing the K best solutions, Management Science 18 (1972) 401-405).
 *
 * That is right because adding a variable to both of two sets keeps their order: exact
 * products and numbers of zeros and of members do, and the new variable comes before
 * all theirs. Owns a child of the caller's arena. */
#include "graph/cuts_parts.h"

struct prefix { /* members chosen, the last first */
    uint32_t variable;
    const struct prefix *before;
    struct product product; /* of all of them */
};

struct candidate {
    const struct prefix *prefix; /* or NULL */
    uint32_t rest;               /* a family: its best set completes this one */
    struct product product;
};

struct search {
    struct arena *arena;
    const struct family *family;
    const double *p;
    struct product *best; /* of family 1, and of each node */
    bool *takes;          /* the best set of this node has its variable */
    struct exact *exact;
    uint32_t *mine, *other; /* room for the members of two sets */
    ARRAY(struct candidate) heap;
};

static struct prefix longer(const struct search *s, const struct prefix *before, uint32_t variable)
{
    struct product last = product_of(s->p[variable]);
    return (struct prefix){variable, before, before ? product_join(before->product, last) : last};
}

static struct candidate candidate_of(const struct search *s, const struct prefix *prefix,
                                     uint32_t rest)
{
    struct product product = s->best[rest];
    return (struct candidate){prefix, rest,
                              prefix ? product_join(prefix->product, product) : product};
}

/* The members in ascending order. */
static void list_members(const struct search *s, const struct candidate *c, uint32_t *out)
{
    size_t n = c->prefix ? c->prefix->product.n_members : 0;
    for (const struct prefix *x = c->prefix; x; x = x->before)
        out[--n] = x->variable;
    n = c->prefix ? c->prefix->product.n_members : 0;
    for (uint32_t f = c->rest; f != FAMILY_UNIT;) {
        const struct diagram_node *node = &s->family->nodes[f - 2];
        if (s->takes[f])
            out[n++] = node->variable;
        f = s->takes[f] ? node->high : node->low;
    }
}

static bool comes_first(const struct search *s, const struct candidate *x,
                        const struct candidate *y)
{
    int order = product_compare(x->product, y->product);
    if (order)
        return order < 0;
    uint32_t nx = x->product.n_members, ny = y->product.n_members;
    list_members(s, x, s->mine);
    list_members(s, y, s->other);
    order = exact_compare(s->exact, nx, s->mine, ny, s->other);
    if (order || nx != ny)
        return order ? order < 0 : nx < ny;
    uint32_t i = 0;
    while (i < nx && s->mine[i] == s->other[i])
        i++;
    return i < nx && s->mine[i] < s->other[i];
}

/* Arms come before their nodes. */
static void find_best_arms(struct search *s)
{
    s->best[FAMILY_UNIT] = product_one();
    for (uint32_t f = 2; f < s->family->n_nodes + 2; f++) {
        const struct diagram_node *node = &s->family->nodes[f - 2];
        struct prefix taken = longer(s, NULL, node->variable);
        struct candidate high = candidate_of(s, &taken, node->high);
        struct candidate low = candidate_of(s, NULL, node->low);
        s->takes[f] = node->low == FAMILY_NONE || comes_first(s, &high, &low);
        s->best[f] = s->takes[f] ? high.product : low.product;
    }
}

/* ---- the heap: no parent comes after its children ---- */

static void swap(struct candidate *x, struct candidate *y)
{
    struct candidate t = *x;
    *x = *y;
    *y = t;
}

static void push(struct search *s, struct candidate c)
{
    *array_push(s->arena, &s->heap) = c;
    struct candidate *at = s->heap.at;
    for (size_t i = s->heap.n - 1; i > 0 && comes_first(s, &at[i], &at[(i - 1) / 2]);) {
        swap(&at[i], &at[(i - 1) / 2]);
        i = (i - 1) / 2;
    }
}

static struct candidate pop(struct search *s)
{
    struct candidate *at = s->heap.at, first = at[0];
    at[0] = at[--s->heap.n];
    for (size_t i = 0, child; (child = 2 * i + 1) < s->heap.n; i = child) {
        if (child + 1 < s->heap.n && comes_first(s, &at[child + 1], &at[child]))
            child++;
        if (!comes_first(s, &at[child], &at[i]))
            break;
        swap(&at[child], &at[i]);
    }
    return first;
}

/* Down the best way; each turn not taken is a candidate. */
static void branch(struct search *s, struct candidate c)
{
    for (uint32_t f = c.rest; f != FAMILY_UNIT;) {
        const struct diagram_node *node = &s->family->nodes[f - 2];
        struct prefix *taken = NEW(s->arena, struct prefix);
        *taken = longer(s, c.prefix, node->variable);
        if (!s->takes[f])
            push(s, candidate_of(s, taken, node->high));
        else if (node->low != FAMILY_NONE)
            push(s, candidate_of(s, c.prefix, node->low));
        c.prefix = s->takes[f] ? taken : c.prefix;
        f = s->takes[f] ? node->high : node->low;
    }
}

static struct cut cut_of(struct arena *a, const struct search *s, const struct candidate *c)
{
    uint32_t n = c->product.n_members, *members = NEW_ARRAY(a, n, uint32_t);
    list_members(s, c, members);
    return (struct cut){exact_product(s->exact, n, members), n, members};
}

static struct search search_new(struct arena *a, const struct family *f, uint32_t n_variables,
                                const double *p)
{
    struct search s = {.arena = arena_child(a), .family = f, .p = p};
    s.best = NEW_ARRAY(s.arena, f->n_nodes + 2, struct product);
    s.takes = NEW_ARRAY(s.arena, f->n_nodes + 2, bool);
    s.exact = exact_new(s.arena, f, n_variables, p);
    s.mine = NEW_ARRAY(s.arena, n_variables, uint32_t);
    s.other = NEW_ARRAY(s.arena, n_variables, uint32_t);
    return s;
}

size_t family_best(struct arena *a, const struct family *f, uint32_t n_variables, const double *p,
                   size_t limit, const struct cut **out)
{
    ARRAY(struct cut) cuts = {0};
    if (limit && f->root != FAMILY_NONE) {
        struct search s = search_new(a, f, n_variables, p);
        find_best_arms(&s);
        push(&s, candidate_of(&s, NULL, f->root));
        while (s.heap.n && cuts.n < limit) {
            struct candidate c = pop(&s);
            *array_push(a, &cuts) = cut_of(a, &s, &c);
            branch(&s, c);
        }
        arena_free(s.arena);
    }
    *out = cuts.at;
    return cuts.n;
}
