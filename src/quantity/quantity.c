/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Quantities written as a scalar: an expression, or a range with its level
 * (`90 % within 14 MW .. 22 MW as normal`); and what can be asked of any quantity
 * but its moments. A range is cut at its words `within`, `..` and `as`; each piece
 * is an expression of its own, parsed at its own place. */
#include "quantity/quantity.h"

#include <math.h>
#include <string.h>

#include "base/utf8.h"
#include "math/dist.h"
#include "math/elementary.h"
#include "quantity/expr_parser.h"
#include "quantity/quantity_parts.h"

static bool refuse_name(void *ctx, const struct expr *e, struct place at, struct dim *out)
{
    struct diags *d = ctx;
    (void)out;
    const char *name = e->name ? e->name : e->op == EXPR_WAS ? "was" : "clearance-time";
    diag_add(d, at, "a parameter of a distribution must be certain: numbers with units, "
             "without '%s'", name);
    return false;
}

bool certain_parameter(const struct maker *m, struct expr *e, struct place at,
                       struct parameter *out)
{
    struct expr_names names = {m->d, refuse_name};
    if (!expr_check(m->a, m->u, e, &names, at, m->d))
        return false;
    double value = expr_constant(e);
    if (!isfinite(value)) {
        diag_add(m->d, at, "'%s' has no finite value", expr_text(m->a, e));
        return false;
    }
    *out = (struct parameter){value, e->dim};
    return true;
}

const char *expr_text(struct arena *a, const struct expr *e)
{
    struct text t;
    text_init(&t, a);
    expr_write(&t, e);
    return text_str(&t);
}

/* A piece of the scalar: bytes from..end of s, which begins at `at`. */
struct piece {
    const char *text;
    struct place at;
};

static struct piece cut(struct arena *a, const char *s, const char *from, const char *end,
                        struct place at)
{
    uint32_t column = (uint32_t)utf8_count(s, (size_t)(from - s));
    return (struct piece){arena_strn(a, from, (size_t)(end - from)), place_inside(at, column)};
}

/* The word in s, not as a part of a longer one; NULL when it is not there. */
static const char *find_word(const char *s, const char *word)
{
    while (*s) {
        size_t n = word_length(s);
        if (n && word_is(s, word))
            return s;
        s += n ? n : 1;
    }
    return NULL;
}

struct range {
    struct expr *level, *low, *high;
    struct place level_at, low_at, high_at, shape_at;
    const char *shape; /* NULL when not named */
};

static const struct {
    const char *name;
    enum shape shape;
} range_shapes[] = {{"lognormal", SHAPE_LOGNORMAL}, {"normal", SHAPE_NORMAL}};

enum { N_RANGE_SHAPES = sizeof range_shapes / sizeof range_shapes[0] };

/* Reads the shape behind `as`. */
static bool read_shape(const struct maker *m, const struct piece *p, struct range *r)
{
    const char *word = p->text;
    while (is_blank(*word))
        word++;
    size_t n = word_length(word), end = n;
    while (is_blank(word[end]))
        end++;
    r->shape_at = place_inside(p->at, (uint32_t)(word - p->text));
    r->shape = arena_strn(m->a, word, n);
    for (size_t i = 0; i < N_RANGE_SHAPES; i++)
        if (word[end] == 0 && text_equal(range_shapes[i].name, r->shape))
            return true;
    diag_add(m->d, r->shape_at, "a range is 'as lognormal' or 'as normal', not 'as %s'", word);
    return false;
}

/* Cuts "LEVEL within LOW .. HIGH [as SHAPE]" and parses the pieces. */
static bool read_range(const struct maker *m, const char *s, const char *within, struct place at,
                       struct range *r)
{
    const char *low = within + strlen("within"), *dots = strstr(low, ".."), *end = s + strlen(s);
    if (!dots) {
        struct piece p = cut(m->a, s, low, end, at);
        diag_add(m->d, p.at, "a range needs two bounds parted by '..': 90 %% within A .. B");
        return false;
    }
    const char *as = find_word(dots, "as");
    struct piece level = cut(m->a, s, s, within, at), from = cut(m->a, s, low, dots, at);
    struct piece to = cut(m->a, s, dots + 2, as ? as : end, at);
    r->level = expr_parse(m->a, m->u, level.text, level.at, m->d);
    r->low = expr_parse(m->a, m->u, from.text, from.at, m->d);
    r->high = expr_parse(m->a, m->u, to.text, to.at, m->d);
    r->level_at = level.at;
    r->low_at = from.at;
    r->high_at = to.at;
    r->shape = NULL;
    bool good = r->level && r->low && r->high;
    if (!as)
        return good;
    struct piece shape = cut(m->a, s, as + strlen("as"), end, at);
    return read_shape(m, &shape, r) && good;
}

/* Columns of pieces count from the piece; a diagnostic about a whole piece stands
 * at its expression's first character. */
static struct place first_of(const struct expr *e, struct place at)
{
    while (e->n > 0 && e->op >= EXPR_ADD && e->op <= EXPR_POWER && e->op != EXPR_NEGATE)
        e = e->args[0];
    return place_inside(at, e->column);
}

/* 99.9 / 100 is a little more than 0.999 in binary. */
static const double least_level = 0.01, greatest_level = 0.999 * (1 + 1e-12);

static bool check_level(const struct maker *m, const struct range *r, struct parameter *level)
{
    if (!certain_parameter(m, r->level, r->level_at, level))
        return false;
    bool pure = dim_is_number(level->dim);
    if (pure && level->value >= least_level && level->value <= greatest_level)
        return true;
    bool bare = pure && level->value > 1 && level->value < 100;
    const char *text = expr_text(m->a, r->level);
    diag_add(m->d, first_of(r->level, r->level_at), bare
             ? "the level of a range is between 1 %% and 99.9 %%; did you mean %s %%?"
             : "the level of a range is between 1 %% and 99.9 %%, not %s", text);
    return false;
}

static bool check_bounds(const struct maker *m, const struct range *r,
                         const struct parameter *low, const struct parameter *high)
{
    struct place at = first_of(r->high, r->high_at);
    if (!dim_equal(low->dim, high->dim)) {
        diag_add(m->d, at, "both bounds of a range must be of one kind, but the lower is %s and "
                 "the upper is %s", dim_words(m->a, m->u, low->dim),
                 dim_words(m->a, m->u, high->dim));
        return false;
    }
    if (low->value < high->value)
        return true;
    diag_add(m->d, at, "the upper bound of a range must exceed the lower one: '%s' does not "
             "exceed '%s'", expr_text(m->a, r->high), expr_text(m->a, r->low));
    return false;
}

static bool check_shape(const struct maker *m, const struct range *r, double low)
{
    bool normal = r->shape && text_equal(r->shape, "normal");
    if (normal || low > 0)
        return true;
    diag_add(m->d, first_of(r->low, r->low_at), "a lognormal range must be above 0; write 'as "
             "normal' behind a range that reaches 0 or below");
    return false;
}

static const char *range_text(struct arena *a, const struct range *r)
{
    struct text t;
    text_init(&t, a);
    expr_write(&t, r->level);
    text_add(&t, " within ");
    expr_write(&t, r->low);
    text_add(&t, " .. ");
    expr_write(&t, r->high);
    if (r->shape)
        text_printf(&t, " as %s", r->shape);
    return text_str(&t);
}

/* The bounds are the (1 - level)/2 and (1 + level)/2 quantiles: with z that of the
 * standard normal, mean -+ z sd, or median / exp(z s) and median * exp(z s). */
static void fit_range(struct quantity *q, double level, double low, double high)
{
    double z = -dist_normal_deviate((1 - level) / 2);
    if (q->shape == SHAPE_NORMAL) {
        q->p[0] = low + (high - low) / 2;
        q->p[1] = (high - low) / (2 * z);
        return;
    }
    q->p[0] = sqrt(low) * sqrt(high);
    q->p[1] = math_exp(DIST_Z95 * (math_log(high / low) / (2 * z)));
    q->p[2] = NAN;
}

static struct quantity *parse_range(const struct maker *m, const char *s, const char *within,
                                    struct place at)
{
    struct range r;
    struct parameter level, low, high;
    if (!read_range(m, s, within, at, &r))
        return NULL;
    bool good = check_level(m, &r, &level);
    bool bounds = certain_parameter(m, r.low, r.low_at, &low);
    bounds = certain_parameter(m, r.high, r.high_at, &high) && bounds;
    if (!bounds || !check_bounds(m, &r, &low, &high) || !check_shape(m, &r, low.value) || !good)
        return NULL;
    struct quantity *q = NEW(m->a, struct quantity);
    bool normal = r.shape && text_equal(r.shape, "normal");
    q->shape = normal ? SHAPE_NORMAL : SHAPE_LOGNORMAL;
    q->dim = low.dim;
    q->times = 1;
    q->text = range_text(m->a, &r);
    fit_range(q, level.value, low.value, high.value);
    if (isfinite(q->p[0]) && isfinite(q->p[1]))
        return q;
    diag_add(m->d, first_of(r.low, r.low_at), "the bounds of the range are too far apart");
    return NULL;
}

struct quantity *quantity_parse(struct arena *a, const struct units *u, const char *s,
                                struct place at, struct diags *d)
{
    struct maker m = {a, u, d};
    const char *within = find_word(s, "within");
    if (within && strlen(s) <= EXPR_BYTES)
        return parse_range(&m, s, within, at);
    struct expr *e = expr_parse(a, u, s, at, d);
    if (!e)
        return NULL;
    struct quantity *q = NEW(a, struct quantity);
    q->shape = SHAPE_EXPRESSION;
    q->expr = e;
    q->times = 1;
    q->text = expr_text(a, e);
    return q;
}

const char *quantity_canonical(struct arena *a, const struct units *u, const char *s)
{
    struct diags d;
    diags_init(&d, a);
    struct quantity *q = quantity_parse(a, u, s, (struct place){0}, &d);
    return q ? q->text : NULL;
}

bool quantity_check(struct arena *a, const struct units *u, struct quantity *q,
                    const struct expr_names *names, struct place at, struct diags *d)
{
    if (q->shape != SHAPE_EXPRESSION)
        return true;
    if (!expr_check(a, u, q->expr, names, at, d))
        return false;
    q->dim = q->expr->dim;
    return true;
}

static void note_name(void *ctx, const struct expr *e)
{
    bool *found = ctx;
    switch (e->op) {
    case EXPR_NAME:
    case EXPR_WAS:
    case EXPR_CLEARANCE:
    case EXPR_UNWANTED:
    case EXPR_FAILS:
    case EXPR_FREQUENCY:
    case EXPR_SHARE:
        *found = true;
        return;
    default:
        return;
    }
}

bool quantity_is_constant(const struct quantity *q)
{
    bool names = false;
    if (q->shape != SHAPE_EXPRESSION)
        return false;
    expr_walk(q->expr, note_name, &names);
    return !names;
}
