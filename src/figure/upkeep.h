/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What routine tests do to an element: how it stands today, and how it would stand if it were
 * tested on time. docs/methods.md ("Elements in time") has the course p(t). */
#ifndef FIGURE_UPKEEP_H
#define FIGURE_UPKEEP_H

#include "figure/figure.h"

struct upkeep {
    const struct compiled *element;
    day last; /* the last test, or the day that it was last known or taken to be sound; DAY_NONE */
    bool tested_then; /* `last` is that of a test */
    day due;          /* one interval behind `last`, else the planned day; DAY_NONE: undated */
    double overdue;   /* years from `due` to the day of evaluation; 0: not overdue */
    bool plan_passed; /* the planned day lies before the day of evaluation, behind the last test:
                         figures take the test as done */
    figure_id today;  /* X.fails.today: p on the day of evaluation; FIGURE_NONE where that is before
                         all that is known */
    figure_id on_time; /* X.fails.on-time: the average of p with a test at every interval: over one
                          interval, or, where something is never tested, over the horizon, of which
                          the first day is that of a test */
};

/* Of an element (under no option) with a routine test. What it adds to the graph is there once; a
 * figures_evaluate must follow. */
void upkeep_of(struct figures *f, const struct compiled *element, struct upkeep *out);

/* Can undetected failures of it come, and nothing ever shows them: no test, no demand? */
bool upkeep_never_shown(const struct compiled *element);

#endif
