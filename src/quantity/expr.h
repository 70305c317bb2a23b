/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Expressions: parsed, checked for dimensions, written in one canonical way.
 *
 *   expression = term  { " + " term | " - " term }        - needs blanks around it
 *   term       = factor { ("*" | "/") factor }
 *   factor     = ["-"] power
 *   power      = primary ["^" ["-"] number]                exponent: a number
 *   primary    = literal | name | call | "(" expression ")"
 *   literal    = number [units] ["per" [number] product]   3 per 100 km a
 *              | "1 in" number [product]                   1 in 340 a, 1 in 1000
 *   units      = product [ "/" product ]                   EUR/kWh; also 3 / h, which is
 *                written 3 per h
 *   product    = unit { unit }                             kW h; blanks multiply; with an
 *                optional power of -9 to 9: m^2, km^-1 (not for %)
 *   call       = min max (2 or more) exp log sqrt (1), arguments parted by ";"
 *              | "lookup(" expression { ";" literal "->" expression } ")"
 *              | "unwanted(" name { ";" name literal } ")" stress class and its frequency
 *              | "fails(" name ")" | "frequency(" name ")"
 *              | "share(" name ";" name ")"               a rate and one of its kinds
 *   name       = letter { letter | digit | "-" }, at most 64, not ending in "-", no unit,
 *                no reserved word; letters and digits are those of ASCII
 *
 * Reserved words: per in was within clearance-time min max exp log sqrt lookup unwanted fails
 * frequency share yes no none all any of at-least absent rest at sees (the last two part the
 * names of figures), and all units; `min` is the minute behind a number and the function before
 * "(". `%` may follow a number directly. "/" behind a literal and before a unit belongs to the
 * literal. `lookup(x; b1 -> v1; b2 -> v2; ...)` is v of the last b that x reaches, and v1 below
 * b1; the b rise strictly.
 *
 * No function here recurses deeper than a few calls for each nested parenthesis, however long a
 * chain of + - * / is. */
#ifndef QUANTITY_EXPR_H
#define QUANTITY_EXPR_H

#include "base/diag.h"
#include "base/text.h"
#include "quantity/unit.h"

#define EXPR_BYTES 4000 /* of one expression, as written and in canonical text */
#define EXPR_DEPTH 60   /* of nesting */

enum expr_op {
    EXPR_LITERAL,   /* value, dim, text */
    EXPR_NAME,      /* name: a value or a rate */
    EXPR_WAS,       /* the value before a change */
    EXPR_CLEARANCE, /* clearance-time */
    EXPR_ADD, EXPR_SUBTRACT, EXPR_MULTIPLY, EXPR_DIVIDE, /* 2 arguments */
    EXPR_NEGATE,    /* 1 */
    EXPR_POWER,     /* 2, the second a literal pure number */
    EXPR_MIN, EXPR_MAX, /* 2 or more */
    EXPR_EXP, EXPR_LOG, EXPR_SQRT, /* 1 */
    EXPR_LOOKUP,    /* 1 + 2k: x, b1, v1, b2, v2, ... */
    EXPR_UNWANTED,  /* name: a scheme; k pairs (EXPR_NAME of a stress class, literal) */
    EXPR_FAILS,     /* name: an element */
    EXPR_FREQUENCY, /* name: a hazard */
    EXPR_SHARE      /* name: a rate; text: one of its kinds of fault */
};

struct expr {
    enum expr_op op;
    double value;     /* EXPR_LITERAL: in base units */
    struct dim dim;   /* EXPR_LITERAL: set by the parser; others: by expr_check */
    const char *text; /* EXPR_LITERAL: canonical text, "3 per 100 km a"; EXPR_SHARE: the kind */
    const char *name;
    size_t n;
    struct expr **args;
    uint32_t column;  /* offset in characters in the text it was parsed from, from 0;
                         of + - * / ^ the sign's, of others where they begin */
};

/* Parses s, which stands at `at`. Adds one diagnostic (with its column inside s)
 * and returns NULL when it is wrong; the message tells what was expected, and
 * knows the common slips: an unknown unit (nearest unit), "-" without blanks,
 * a comma, a colon, a unit without a number, something left over behind the end. */
struct expr *expr_parse(struct arena *a, const struct units *u, const char *s, struct place at,
                        struct diags *d);

/* Canonical text: one blank around + - * and /, none inside parentheses, only the
 * parentheses that are needed, numbers with needless zeros removed ("2.50" is
 * "2.5", "1E-03" is "1e-3", "007" is "7"; the exponent form is kept as written),
 * units as written. Parsing it gives an equal expression with the same text. */
void expr_write(struct text *out, const struct expr *e);

/* Same structure, names, and literal texts. */
bool expr_equal(const struct expr *a, const struct expr *b);

/* What names mean to a check. */
struct expr_names {
    void *ctx;
    /* The dimension of EXPR_NAME, EXPR_CLEARANCE, EXPR_WAS and the four calls on
     * objects (per time for unwanted and frequency, pure for fails and share). `at` is the
     * place of e itself. Stress classes inside unwanted are not asked. false when
     * the name is unknown or not usable here: then it has added a diagnostic. */
    bool (*dim)(void *ctx, const struct expr *e, struct place at, struct dim *out);
};

/* Sets `dim` throughout and checks: both sides of + - min max and lookup agree,
 * exp and log take pure numbers, sqrt even exponents, powers of quantities with a
 * dimension are whole numbers. `at` is where the text begins. Adds diagnostics
 * that say what was found and what was expected; returns false when any. */
bool expr_check(struct arena *a, const struct units *u, struct expr *e,
                const struct expr_names *names, struct place at, struct diags *d);

/* Calls visit for e and everything below it, parents first; a chain of + - * / is
 * visited whole before what it joins, left to right. What stands inside unwanted
 * (stress classes, which are no values, and their frequencies) is not visited. */
void expr_walk(const struct expr *e, void (*visit)(void *ctx, const struct expr *e), void *ctx);

bool expr_uses(const struct expr *e, enum expr_op op);

/* A copy in which every EXPR_WAS is a copy of `before`. Its text parses to an equal
 * expression unless it outgrew EXPR_BYTES or EXPR_DEPTH: who stores the text parses
 * it first. */
struct expr *expr_replace_was(struct arena *a, const struct expr *e, const struct expr *before);

/* Is `e` a product or quotient in which `was` stands once and only as a factor
 * (`0.6 * was`, `was / 2`, `-was`, `was`)? Only such changes commute. */
bool expr_was_is_factor(const struct expr *e);

/* The place of the part at `column` of a text that begins at `at`. */
struct place place_inside(struct place at, uint32_t column);

/* May `s` name an object: grammar of names, 1..64 bytes, no reserved word or unit? */
bool name_is_valid(const struct units *u, const char *s);

/* Why `s`, which is not valid, cannot be a name: "it is a unit", "it is a reserved word", or
 * what names are made of. */
const char *name_objection(const struct units *u, const char *s);

/* Calls offer(ctx, word) for every reserved word that is no unit. */
void reserved_words(void (*offer)(void *ctx, const char *name), void *ctx);

#endif
