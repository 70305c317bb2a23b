/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Canonical text of expressions. Parentheses follow from the table of ranks
 * alone, so that parsing the text gives back the same tree. */
#include <string.h>

#include "quantity/expr_spine.h"

/* How tightly a part binds; an argument of lower rank than its place needs
 * stands in parentheses. */
enum rank { RANK_SUM, RANK_TERM, RANK_FACTOR, RANK_POWER, RANK_PRIMARY };

static bool is_plain_number(const struct expr *e)
{
    return !strpbrk(e->text, " -");
}

static enum rank rank_of(const struct expr *e)
{
    switch (e->op) {
    case EXPR_ADD:
    case EXPR_SUBTRACT:
        return RANK_SUM;
    case EXPR_MULTIPLY:
    case EXPR_DIVIDE:
        return RANK_TERM;
    case EXPR_NEGATE:
        return RANK_FACTOR;
    case EXPR_POWER:
        return RANK_POWER;
    case EXPR_LITERAL: /* units bind like factors: (5 km)^2 */
        return is_plain_number(e) ? RANK_PRIMARY : RANK_POWER;
    default:
        return RANK_PRIMARY;
    }
}

static const char *sign_of(enum expr_op op)
{
    switch (op) {
    case EXPR_ADD:
        return " + ";
    case EXPR_SUBTRACT:
        return " - ";
    case EXPR_MULTIPLY:
        return " * ";
    default:
        return " / ";
    }
}

static enum rank right_rank(const struct expr *e)
{
    return rank_of(e) == RANK_SUM ? RANK_TERM : RANK_FACTOR;
}

static void write_at_least(struct text *out, const struct expr *e, enum rank rank)
{
    bool parentheses = rank_of(e) < rank;
    if (parentheses)
        text_byte(out, '(');
    expr_write(out, e);
    if (parentheses)
        text_byte(out, ')');
}

static const char *call_word(enum expr_op op)
{
    switch (op) {
    case EXPR_MIN:
        return "min";
    case EXPR_MAX:
        return "max";
    case EXPR_EXP:
        return "exp";
    case EXPR_LOG:
        return "log";
    case EXPR_SQRT:
        return "sqrt";
    case EXPR_LOOKUP:
        return "lookup";
    case EXPR_UNWANTED:
        return "unwanted";
    case EXPR_FAILS:
        return "fails";
    default:
        return "frequency";
    }
}

/* What stands before argument i of a call that already holds something. */
static const char *argument_mark(enum expr_op op, size_t i)
{
    if (op == EXPR_LOOKUP && i > 0 && i % 2 == 0)
        return " -> ";
    if (op == EXPR_UNWANTED && i % 2 == 1)
        return " ";
    return "; ";
}

static void write_call(struct text *out, const struct expr *e)
{
    text_printf(out, "%s(%s", call_word(e->op), e->name ? e->name : "");
    for (size_t i = 0; i < e->n; i++) {
        if (i > 0 || e->name)
            text_add(out, argument_mark(e->op, i));
        expr_write(out, e->args[i]);
    }
    text_byte(out, ')');
}

static void write_other(struct text *out, const struct expr *e)
{
    switch (e->op) {
    case EXPR_LITERAL:
        text_add(out, e->text);
        return;
    case EXPR_NAME:
        text_add(out, e->name);
        return;
    case EXPR_WAS:
        text_add(out, "was");
        return;
    case EXPR_CLEARANCE:
        text_add(out, "clearance-time");
        return;
    case EXPR_SHARE:
        text_printf(out, "share(%s; %s)", e->name, e->text);
        return;
    case EXPR_NEGATE:
        text_byte(out, '-');
        write_at_least(out, e->args[0], RANK_POWER);
        return;
    case EXPR_POWER:
        write_at_least(out, e->args[0], RANK_PRIMARY);
        text_byte(out, '^');
        expr_write(out, e->args[1]);
        return;
    default:
        write_call(out, e);
    }
}

/* Must the left argument of a binary e stand in parentheses? */
static bool left_in_parentheses(const struct expr *e)
{
    return rank_of(e->args[0]) < rank_of(e);
}

void expr_write(struct text *out, const struct expr *e)
{
    const struct expr *nodes[SPINE];
    size_t n = expr_spine(e, nodes);
    if (n == 0) {
        write_other(out, e);
        return;
    }
    for (size_t i = 0; i < n; i++)
        if (left_in_parentheses(nodes[i]))
            text_byte(out, '(');
    expr_write(out, nodes[n - 1]->args[0]);
    while (n-- > 0) {
        if (left_in_parentheses(nodes[n]))
            text_byte(out, ')');
        text_add(out, sign_of(nodes[n]->op));
        write_at_least(out, nodes[n]->args[1], right_rank(nodes[n]));
    }
}
