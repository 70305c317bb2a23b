/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Present values of what is paid once and of what is paid year by year, as nodes. The one place
 * that knows the interest and when in a year its amounts are paid (docs/methods.md, "Present
 * value"). Private to src/decide. */
#ifndef DECIDE_MONEY_H
#define DECIDE_MONEY_H

#include "figure/compile.h"

struct money {
    struct figures *f;
    struct building *b;
    double horizon;   /* years */
    node_id rate;     /* interest per year as a pure number */
    node_id one_year; /* 1 a */
};

/* For the section that is built by b, which outlives it. */
void money_begin(struct money *m, struct figures *f, struct building *b, double horizon);

/* (1 + rate)^-years */
node_id money_factor(const struct money *m, double years);

/* The present value of 1 a year from time `from` to `to`: times an amount per year it is money. */
node_id money_annuity(const struct money *m, double from, double to);

/* The present value of amounts that differ from year to year: amounts[y.of_year[i]] in the year i
 * behind floor(y.from). */
node_id money_years(const struct money *m, size_t n, const node_id *amounts, const struct years *y);

/* 0 for none. */
node_id money_sum(const struct money *m, size_t n, const node_id *amounts);

#endif
