/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities written as a map: finds the shape that the keys make, and checks the
 * parameters. Which keys exist is said by the table quantity_shapes alone. */
#include <math.h>
#include <string.h>

#include "quantity/quantity_parts.h"

enum { MAX_KEYS = 4 }; /* of a shape: keys[3] and `also` */

struct build {
    struct maker m;
    const struct quantity_shape *row;
    const struct quantity_part *parts;
    size_t n;
    struct place at;
};

/* The i-th key of a shape, the optional one last; NULL behind the end. */
static const char *key_of(const struct quantity_shape *row, size_t i)
{
    size_t n = 0;
    while (n < 3 && row->keys[n])
        n++;
    if (i < n)
        return row->keys[i];
    return i == n ? row->also : NULL;
}

static bool has_key(const struct quantity_shape *row, const char *key)
{
    for (size_t i = 0; i < MAX_KEYS && key_of(row, i); i++)
        if (text_equal(key_of(row, i), key))
            return true;
    return false;
}

static const struct quantity_part *find_part(const struct build *b, const char *key)
{
    for (size_t i = 0; i < b->n; i++)
        if (text_equal(b->parts[i].key, key))
            return &b->parts[i];
    return NULL;
}

/* "median, error-factor and, if wanted, at-most" */
static const char *keys_in_words(struct arena *a, const struct quantity_shape *row)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < 3 && row->keys[i]; i++)
        text_printf(&t, i ? ", %s" : "%s", row->keys[i]);
    if (row->also)
        text_printf(&t, " and, if wanted, %s", row->also);
    return text_str(&t);
}

static const struct quantity_shape *named_shape(const struct build *b, const char *name,
                                                struct place at)
{
    struct nearest near;
    struct text all;
    text_init(&all, b->m.a);
    nearest_init(&near, name);
    for (size_t i = 0; i < quantity_n_shapes; i++) {
        if (text_equal(quantity_shapes[i].name, name))
            return &quantity_shapes[i];
        nearest_offer(&near, quantity_shapes[i].name);
        text_printf(&all, " %s", quantity_shapes[i].name);
    }
    const char *best = nearest_take(&near);
    if (best)
        diag_add(b->m.d, at, "'%s' is not a shape; the nearest is '%s'", name, best);
    else
        diag_add(b->m.d, at, "'%s' is not a shape; the shapes are%s", name, text_str(&all));
    return NULL;
}

/* How many of the parts are keys of the shape. */
static size_t matches(const struct build *b, const struct quantity_shape *row)
{
    size_t n = 0;
    for (size_t i = 0; i < b->n; i++)
        n += has_key(row, b->parts[i].key);
    return n;
}

/* Is every required key there and nothing else? */
static bool fits(const struct build *b, const struct quantity_shape *row)
{
    for (size_t i = 0; i < 3 && row->keys[i]; i++)
        if (!find_part(b, row->keys[i]))
            return false;
    return matches(b, row) == b->n;
}

/* The shape without a name that shares most keys, the first on a tie; NULL when
 * none shares any. */
static const struct quantity_shape *likeliest(const struct build *b)
{
    const struct quantity_shape *best = NULL;
    size_t most = 0;
    for (size_t i = 0; i < quantity_n_shapes; i++) {
        size_t n = matches(b, &quantity_shapes[i]);
        if (n > most) {
            most = n;
            best = &quantity_shapes[i];
        }
    }
    return best;
}

/* Names the shapes that the keys would fit if `shape` were given. */
static bool needs_name(const struct build *b)
{
    struct text names;
    text_init(&names, b->m.a);
    size_t n = 0;
    for (size_t i = 0; i < quantity_n_shapes; i++)
        if (!quantity_shapes[i].unnamed && fits(b, &quantity_shapes[i]))
            text_printf(&names, n++ ? " or '%s'" : "'%s'", quantity_shapes[i].name);
    if (n > 0)
        diag_add(b->m.d, b->at, "these keys need 'shape', which may be %s", text_str(&names));
    return n > 0;
}

/* A key that no shape has. */
static void tell_unknown_keys(const struct build *b)
{
    for (size_t i = 0; i < b->n; i++) {
        struct nearest near;
        nearest_init(&near, b->parts[i].key);
        bool known = false;
        for (size_t j = 0; j < quantity_n_shapes; j++)
            for (size_t k = 0; k < MAX_KEYS && key_of(&quantity_shapes[j], k); k++) {
                nearest_offer(&near, key_of(&quantity_shapes[j], k));
                known |= text_equal(key_of(&quantity_shapes[j], k), b->parts[i].key);
            }
        const char *best = nearest_take(&near);
        if (!known)
            diag_add(b->m.d, b->parts[i].place, best ? "'%s' is not a key of a distribution; the "
                     "nearest is '%s'" : "'%s' is not a key of a distribution",
                     b->parts[i].key, best);
    }
}

static const struct quantity_shape *unnamed_shape(const struct build *b)
{
    for (size_t i = 0; i < quantity_n_shapes; i++)
        if (quantity_shapes[i].unnamed && fits(b, &quantity_shapes[i]))
            return &quantity_shapes[i];
    if (needs_name(b))
        return NULL;
    size_t before = b->m.d->count;
    tell_unknown_keys(b);
    if (b->m.d->count > before)
        return NULL;
    const struct quantity_shape *row = likeliest(b);
    if (row)
        diag_add(b->m.d, b->at, "these keys do not make one distribution; %s takes %s",
                 row->name, keys_in_words(b->m.a, row));
    else
        diag_add(b->m.d, b->at, "a distribution needs its keys, such as median and error-factor");
    return NULL;
}

/* With a named shape: no key may be missing, none may be too many. */
static bool check_keys(const struct build *b)
{
    bool good = true;
    const char *name = b->row->name, *takes = keys_in_words(b->m.a, b->row);
    for (size_t i = 0; i < b->n; i++) {
        const char *key = b->parts[i].key;
        if (has_key(b->row, key))
            continue;
        struct nearest near;
        nearest_init(&near, key);
        for (size_t k = 0; k < MAX_KEYS && key_of(b->row, k); k++)
            nearest_offer(&near, key_of(b->row, k));
        const char *best = nearest_take(&near);
        diag_add(b->m.d, b->parts[i].place, "'%s' is not a key of %s, which takes %s%s%s%s", key,
                 name, takes, best ? "; did you mean '" : "", best ? best : "", best ? "'?" : "");
        good = false;
    }
    for (size_t i = 0; i < 3 && b->row->keys[i]; i++)
        if (!find_part(b, b->row->keys[i])) {
            diag_add(b->m.d, b->at, "'%s' is missing; %s takes %s", b->row->keys[i], name, takes);
            good = false;
        }
    return good;
}

/* Is the i-th parameter of the shape a pure number whatever the quantity is? */
static bool is_pure(enum shape shape, size_t i)
{
    return shape == SHAPE_BETA || (i == 1 && (shape == SHAPE_LOGNORMAL || shape == SHAPE_GAMMA));
}

/* Fills q->p with the values of the keys in order; NAN where an optional one is not. */
static bool read_parameters(const struct build *b, struct quantity *q)
{
    bool good = true;
    for (size_t i = 0; i < 3; i++) {
        const char *key = key_of(b->row, i);
        const struct quantity_part *part = key ? find_part(b, key) : NULL;
        struct parameter x;
        q->p[i] = key && !part ? NAN : 0;
        if (!part)
            continue;
        if (!certain_parameter(&b->m, part->expr, part->place, &x)) {
            good = false;
            continue;
        }
        q->p[i] = x.value;
        struct dim expected = is_pure(q->shape, i) ? dim_number : q->dim;
        if (i == 0 && !is_pure(q->shape, 0))
            q->dim = x.dim;
        else if (good && !dim_equal(x.dim, expected)) {
            diag_add(b->m.d, part->place, "'%s' must be %s, but it is %s", key,
                     dim_words(b->m.a, b->m.u, expected), dim_words(b->m.a, b->m.u, x.dim));
            good = false;
        }
    }
    return good;
}

/* Adds a diagnostic at the part of the i-th key unless `holds`. */
static bool require(const struct build *b, bool holds, size_t i, const char *what)
{
    if (holds)
        return true;
    const struct quantity_part *part = find_part(b, key_of(b->row, i));
    diag_add(b->m.d, part->place, "'%s' must be %s, but it is %s", part->key, what,
             expr_text(b->m.a, part->expr));
    return false;
}

static bool is_in_range(double x, double greatest)
{
    return x >= QUANTITY_LEAST_SHAPE && x <= greatest;
}

/* Both are evaluated, so that both can complain. */
static bool check_two(bool first, bool second)
{
    return first && second;
}

static bool check_parameters(const struct build *b, const struct quantity *q)
{
    const double *p = q->p;
    const double gamma = QUANTITY_GREATEST_GAMMA, beta = QUANTITY_GREATEST_BETA;
    switch (q->shape) {
    case SHAPE_NORMAL:
        return require(b, p[1] > 0, 1, "above 0");
    case SHAPE_LOGNORMAL:
        return check_two(require(b, p[0] > 0, 0, "above 0"), require(b, p[1] > 1, 1, "above 1")) &&
               require(b, isnan(p[2]) || p[2] > p[0], 2, "above the median");
    case SHAPE_GAMMA:
        return check_two(require(b, p[0] > 0, 0, "above 0"),
                         require(b, is_in_range(p[1], gamma), 1, "between 1e-6 and 1e4"));
    case SHAPE_BETA:
        return check_two(require(b, is_in_range(p[0], beta), 0, "between 1e-6 and 1e9"),
                         require(b, is_in_range(p[1], beta), 1, "between 1e-6 and 1e9"));
    case SHAPE_UNIFORM:
        return require(b, p[1] > p[0], 1, "above 'from'");
    default: /* triangular, pert */
        return require(b, p[1] >= p[0], 1, "at least 'from'") &&
               require(b, p[2] >= p[1], 2, "at least 'most-likely'") &&
               require(b, p[2] > p[0], 2, "above 'from'");
    }
}

/* "median 0.01 per a, error factor 3"; the name in front where keys do not tell. */
static const char *build_text(const struct build *b)
{
    struct text t;
    text_init(&t, b->m.a);
    if (!b->row->unnamed || b->row->shape == SHAPE_BETA)
        text_printf(&t, "%s, ", b->row->name);
    for (size_t i = 0, n = 0; i < MAX_KEYS && key_of(b->row, i); i++) {
        const char *key = key_of(b->row, i);
        const struct quantity_part *part = find_part(b, key);
        if (!part)
            continue;
        text_add(&t, n++ ? ", " : "");
        for (; *key; key++)
            text_byte(&t, *key == '-' ? ' ' : *key);
        text_byte(&t, ' ');
        expr_write(&t, part->expr);
    }
    return text_str(&t);
}

struct quantity *quantity_build(struct arena *a, const struct units *u, const char *shape,
                                struct place shape_at, const struct quantity_part *parts, size_t n,
                                struct place at, struct diags *d)
{
    struct build b = {{a, u, d}, NULL, parts, n, at};
    b.row = shape ? named_shape(&b, shape, shape_at) : unnamed_shape(&b);
    if (!b.row || !check_keys(&b))
        return NULL;
    if (b.row->shape == SHAPE_DISCRETE) {
        diag_add(d, at,
                 "the values of a discrete distribution are a map: {low: {is: 2 h, p: 30 %%}}");
        return NULL;
    }
    struct quantity *q = NEW(a, struct quantity);
    q->shape = b.row->shape;
    q->times = 1;
    if (!read_parameters(&b, q) || !check_parameters(&b, q))
        return NULL;
    q->text = build_text(&b);
    return q;
}

/* Sorts by value, keeping the order of equal ones. */
static void sort_values(double *values, double *probabilities, size_t n)
{
    for (size_t i = 1; i < n; i++) {
        double v = values[i], p = probabilities[i];
        size_t j = i;
        for (; j > 0 && values[j - 1] > v; j--) {
            values[j] = values[j - 1];
            probabilities[j] = probabilities[j - 1];
        }
        values[j] = v;
        probabilities[j] = p;
    }
}

static bool read_values(const struct maker *m, struct quantity *q,
                        const struct quantity_part *values)
{
    bool good = true;
    for (size_t i = 0; i < q->n; i++) {
        struct parameter x;
        if (!certain_parameter(m, values[i].expr, values[i].place, &x)) {
            good = false;
            continue;
        }
        q->values[i] = x.value;
        if (i == 0)
            q->dim = x.dim;
        else if (good && !dim_equal(q->dim, x.dim)) {
            diag_add(m->d, values[i].place, "the values must be of one kind, but the first is %s "
                     "and this is %s", dim_words(m->a, m->u, q->dim),
                     dim_words(m->a, m->u, x.dim));
            good = false;
        }
    }
    return good;
}

/* Copies the probabilities, each divided by their sum. */
static bool read_probabilities(const struct maker *m, struct quantity *q, const double *from,
                               struct place at)
{
    double sum = 0;
    char text[32];
    for (size_t i = 0; i < q->n; i++) {
        if (!(from[i] >= 0 && from[i] <= 1)) {
            diag_add(m->d, at, "probability %zu must be between 0 and 1, but it is %s", i + 1,
                     isfinite(from[i]) ? text_double(text, from[i]) : "not finite");
            return false;
        }
        sum += from[i];
    }
    if (!(fabs(sum - 1) <= 1e-9)) {
        diag_add(m->d, at, "the probabilities must sum to 1, but they sum to %s",
                 text_double(text, sum));
        return false;
    }
    for (size_t i = 0; i < q->n; i++)
        q->probabilities[i] = from[i] / sum;
    return true;
}

static const char *discrete_text(struct arena *a, size_t n, const struct quantity_part *values,
                                 const double *probabilities)
{
    struct text t;
    text_init(&t, a);
    for (size_t i = 0; i < n; i++) {
        char p[32];
        text_add(&t, i ? ", " : "one of ");
        expr_write(&t, values[i].expr);
        text_printf(&t, " (%s)", text_double(p, probabilities[i]));
    }
    return text_str(&t);
}

struct quantity *quantity_discrete(struct arena *a, const struct units *u, size_t n,
                                   const struct quantity_part *values,
                                   const double *probabilities, struct place at, struct diags *d)
{
    struct maker m = {a, u, d};
    if (n == 0) {
        diag_add(d, at, "a discrete distribution needs at least one value");
        return NULL;
    }
    struct quantity *q = NEW(a, struct quantity);
    q->shape = SHAPE_DISCRETE;
    q->times = 1;
    q->n = n;
    q->values = NEW_ARRAY(a, n, double);
    q->probabilities = NEW_ARRAY(a, n, double);
    bool good = read_values(&m, q, values);
    if (!read_probabilities(&m, q, probabilities, at) || !good)
        return NULL;
    q->text = discrete_text(a, n, values, probabilities);
    sort_values(q->values, q->probabilities, n);
    return q;
}
