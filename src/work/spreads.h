/* SPDX-License-Identifier: GPL-3.0-or-later */
/* What figures may be over all that is unknown: the chapter of the report, and the sample of one
 * figure, which explain prints too. Private to src/work. */
#ifndef WORK_SPREADS_H
#define WORK_SPREADS_H

#include "work/work.h"

/* What the sample of a figure says; certain too where what is unknown cancels in it. */
struct spread_sample {
    figure_id id;
    struct figure_spread spread;
};

/* A sample of figures that are sampled together. */
struct spread_samples {
    size_t n;
    struct spread_sample *of; /* root k of the sampling */
    struct sampling sampling;
};

/* Compiles sums over all these hazards, which are sampled together: the risk of the register, the
 * indices of supply, the individual risk of each group. To be called before figures_evaluate by
 * whoever samples one of them, so that it has the same sample everywhere. */
ohmen_status spreads_compile(struct job *j, const struct hazards *h, ohmen_error *e);

/* Samples a figure that is not certain by the plan of the job: alone, or with others that are made
 * of the same: those sums, or the risk of a hazard with how often it does damage. Where a precision
 * is asked for it is that of the first. The values live in `a`. OHMEN_COMPUTE as figures_sample. */
ohmen_status spreads_sample(struct job *j, struct arena *a, figure_id id,
                            struct spread_samples *out, ohmen_error *e);

/* Fills a row of a block of spreads; values are shown times `factor`. */
void spread_fill(struct job *j, struct spread *s, const struct spread_sample *x, double factor);

struct spread_row {
    const char *label;
    struct spread_sample sample;
    bool done;       /* sampled, certain, or left out */
    bool left_out;   /* it has no sample: */
    const char *why; /* NULL: it was not begun when the sampling was interrupted */
};
struct spread_rows ARRAY_BODY(struct spread_row);

enum spreads_table {
    SPREADS_RISK,
    SPREADS_DAMAGING,
    SPREADS_SUPPLY,
    SPREADS_PEOPLE,
    SPREADS_TABLES
};
struct spreads_part {
    struct spread_rows tables[SPREADS_TABLES];
    size_t n_interrupted;
    bool any;                     /* was anything sampled? */
    struct sampling fewest, most; /* batches; without their values */
};

/* Samples the figures of the chapter, some of which may be without; figures_evaluate has been
 * called after figures_total of the hazards, or spreads_compile. */
ohmen_status spreads_compute(struct job *j, const struct hazards *h, const struct supply_part *s,
                             const struct people_part *people, struct spreads_part *p,
                             ohmen_error *e);
void part_spreads(struct job *j, const struct spreads_part *p);

/* A point of a figure's spread: what it is, the sample that it is from, and the inputs that the
 * figure moves with. Of an alternative's net present value it is that of the weighing. The
 * figure is evaluated. OHMEN_COMPUTE as figures_sample, and for what has no single value. */
ohmen_status part_spread_point(struct job *j, figure_id id, enum spread_point at, ohmen_error *e);
/* Compiles what the figure of this name may be sampled with: before it is compiled itself. */
ohmen_status spread_prepare(struct job *j, const char *figure, ohmen_error *e);
/* OHMEN_UNKNOWN for the name of a point that there is not, such as H.risk[p90]. */
ohmen_status spread_check(struct job *j, const char *name, ohmen_error *e);
/* How to see the spread of a figure that is not certain. */
void note_spread(struct job *j, figure_id id);

/* supply.c: the unit of an index of supply, and its value in it. */
const char *supply_unit(struct job *j, figure_id id, double *shown);

#endif
