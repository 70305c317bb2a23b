/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Time of a register: years from the start of its horizon. Years are calendar years, and days
 * behind the anniversary count 1/365; intervals such as `every: 4 a` are added to that. */
#ifndef FIGURE_HORIZON_H
#define FIGURE_HORIZON_H

#include "model/model.h"

/* First day of the horizon. */
day horizon_start(const struct register_settings *s);

/* Years from there to a date (may be negative). */
double horizon_years(const struct register_settings *s, day d);

/* Its length in whole years. */
uint32_t horizon_length(const struct register_settings *s);

/* "2031": the calendar year in which year `y` of the horizon begins. */
const char *horizon_label(struct arena *a, const struct register_settings *s, uint32_t y);

#endif
