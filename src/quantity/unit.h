/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Units: their names, factors and dimensions.
 *
 * Base units, in which every double of ohmen is held: year (a) for time, km for
 * length, kW for power, one unit of the register's currency for money, one of
 * each countable thing. 1 a = 8760 h. So money per year is in EUR per a and
 * energy in kW a (1 kWh = 1/8760 kW a).
 *
 *   time   ms s min h d week month a     (month = a/12, week = 7 d)
 *   length m km      power W kW MW GW    energy Wh kWh MWh GWh
 *   money  the currency's ISO 4217 code, with k or M in front: EUR kEUR MEUR
 *   pure   %
 *   counts what the register declares (section, bay, ...)
 *
 * Units are reserved words: nothing in a register can have a unit's name. */
#ifndef QUANTITY_UNIT_H
#define QUANTITY_UNIT_H

#include "base/arena.h"
#include "math/dim.h"

enum { DIM_TIME, DIM_LENGTH, DIM_POWER, DIM_MONEY, DIM_COUNTS };
#define UNIT_COUNTS (DIM_SLOTS - DIM_COUNTS) /* countable things a register may declare */

struct units {
    const char *currency;            /* "EUR" */
    const char *counts[UNIT_COUNTS]; /* "section", ... ; each its own dimension */
    size_t n_counts;
};

struct unit {
    double factor;   /* base units in one of this unit, correctly rounded */
    double up, down; /* whole numbers; factor is up / down */
    struct dim dim;
};

extern const struct dim dim_number, dim_time, dim_length, dim_power, dim_energy, dim_money,
    dim_frequency /* 1 / time */, dim_money_rate /* money / time */;

/* Finds a unit by its name of n bytes; false when there is none. */
bool unit_find(const struct units *u, const char *name, size_t n, struct unit *out);

/* Calls offer(ctx, name) for every unit's name, for nearest names; the currency
 * is offered without the prefixes k and M, so that each name lives as long as u. */
void unit_names(const struct units *u, void (*offer)(void *ctx, const char *name), void *ctx);

/* The unit whose name is nearest to `wanted`, prefixed money included; NULL when
 * none is near. */
const char *unit_nearest(struct arena *a, const struct units *u, const char *wanted);

/* A dimension in words for messages: "money per time", "a pure number",
 * "energy", "1 / (section time)". */
const char *dim_words(struct arena *a, const struct units *u, struct dim d);

/* A dimension in base units for tables and formulas: "EUR/a", "kW", "1/a", "";
 * all behind the "/" is below it: "1/section a". Exponents as "km^2". */
const char *dim_unit(struct arena *a, const struct units *u, struct dim d);

#endif
