/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The figures of all hazards of a register, for benches. */
#ifndef TESTS_BENCH_REGISTER_FIGURES_H
#define TESTS_BENCH_REGISTER_FIGURES_H

#include "figure/figure.h"

/* Compiled and evaluated, in `a`. Ends the program where that cannot be done. */
struct figures *bench_figures(struct arena *a, const char *path);

/* What is compiled of each hazard, in the order of the model; the unit is the base figure. */
const struct compiled *bench_hazard(struct figures *f, size_t i);

#endif
