/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The parser of expressions, inside: a cursor over one text, shared by the
 * files expr_*.c. Not for other layers; they call expr_parse.
 *
 * Invariant: `p` stands inside the zero-terminated `s`. Each function that
 * returns NULL or false has added exactly one diagnostic; the caller returns at
 * once, so a text gives at most one. Recursion is bounded by EXPR_DEPTH. */
#ifndef QUANTITY_EXPR_PARSER_H
#define QUANTITY_EXPR_PARSER_H

#include "quantity/expr.h"

#define NAME_BYTES 64

struct parser {
    struct arena *a;
    const struct units *u;
    const char *s, *p;
    struct place at;
    struct diags *d;
    unsigned depth;       /* open parentheses */
    const char *mark;     /* a place whose column is known, so that columns are */
    uint32_t mark_column; /* counted once along the text */
};

/* expr_words.c: characters and words. */
bool is_letter(char c);
bool is_digit(char c);
bool is_blank(char c);
void skip_blanks(struct parser *ps);
/* Bytes of the word (letter { letter | digit | "-" }) at p, not eating "->"; 0
 * when there is none. */
size_t word_length(const char *p);
bool word_is(const char *p, const char *word);
/* Does "(" follow at p, blanks aside? */
bool opens_call(const char *p);
/* Is the word of n bytes reserved (no unit)? */
bool word_is_reserved(const char *p, size_t n);
/* Is there a unit at p (a word or "%")? Its bytes, or 0. */
size_t unit_at(const struct parser *ps, const char *p, struct unit *out);
uint32_t column_of(struct parser *ps, const char *where);

/* expr_slips.c: adds the diagnostic and returns NULL. */
void *parse_fail(struct parser *ps, const char *where, const char *format, ...)
    __attribute__((format(printf, 3, 4)));
/* Something stands at the cursor that cannot: tells what, and what was expected. */
void *parse_unexpected(struct parser *ps, const char *expected);
/* The word at the cursor stands behind a number and is no unit. */
void *parse_no_unit(struct parser *ps, const char *number);

/* expr_literal.c: a literal; a plain number without units (for exponents). */
struct expr *parse_literal(struct parser *ps);
struct expr *parse_exponent(struct parser *ps);

/* expr_parse.c, expr_call.c */
struct expr *parse_node(struct parser *ps, enum expr_op op, const char *where);
struct expr *parse_expression(struct parser *ps);
/* A call whose word of n bytes stands at the cursor and whose "(" follows. */
struct expr *parse_call(struct parser *ps, size_t n);
/* Checks and reads the name of n bytes at the cursor. */
const char *parse_name(struct parser *ps, size_t n);
/* Is the word of n bytes the word of a call? */
bool is_call_word(const char *p, size_t n);
bool parse_open(struct parser *ps);
bool parse_close(struct parser *ps, const char *expected);

#endif
