/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Random reports for properties that hold of every report: all sorts of blocks; texts with
 * controls, escape sequences, markup, wide, combining and right-to-left characters, bytes
 * that are not UTF-8; numbers from subnormal to the largest. */
#ifndef REPORT_TEST_RANDOM_H
#define REPORT_TEST_RANDOM_H

#include "random.h"
#include "report/block.h"

const char *some_text(struct random *r);
void add_some_table(struct random *r, struct report *report);
void add_some_pairs(struct random *r, struct report *report);
void add_some_grid(struct random *r, struct report *report);
void add_some_curve(struct random *r, struct report *report);
void add_some_swings(struct random *r, struct report *report);
void add_some_map(struct random *r, struct report *report);
void add_some_spreads(struct random *r, struct report *report);
void add_some_tree(struct random *r, struct report *report);
void add_some_policy(struct random *r, struct report *report);
/* One to six blocks. */
void fill_at_random(struct random *r, struct report *report);

#endif
