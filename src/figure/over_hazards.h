/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Sums over hazards: what the files supply.c, people.c and find.c share. Private to src/figure. */
#ifndef FIGURE_OVER_HAZARDS_H
#define FIGURE_OVER_HAZARDS_H

#include "figure/compile.h"
#include "figure/supply.h"

#define PART_ACCOUNTS "accounts"
#define PART_SITE "site"

/* Hazards of the register as it is, without options, and their effects. */
struct over {
    struct figures *f;
    const struct variant *base;
    size_t n;
    const struct compiled *const *hazards;
    const struct compiled **parts; /* the effects of each */
};

/* Compiles the effects of these hazards. */
ohmen_status over_hazards(struct figures *f, size_t n, const struct compiled *const *hazards,
                          struct over *out, ohmen_error *e);

/* Every hazard of the register, compiled. */
ohmen_status over_all_hazards(struct figures *f, struct over *out, ohmen_error *e);

/* The sum of an effect over those that have it; 0 where none has. */
node_id over_sum(struct building *b, const struct over *o, enum property p, const char *of);

/* The same as a figure of the unit under construction. */
figure_id over_add(struct building *b, const struct over *o, enum property p, const char *of);

/* The sums of a site as a part of it, for figures_find. */
ohmen_status compile_site_sums(struct figures *f, const struct variant *v, const struct object *o,
                               ohmen_error *e);

#endif
