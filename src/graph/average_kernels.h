/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The loops over lanes that averages are made of, inside src/graph: for each instruction set, all
 * with the same bits (base/isa.h). Rows of lanes do not overlap; none allocates. */
#ifndef GRAPH_AVERAGE_KERNELS_H
#define GRAPH_AVERAGE_KERNELS_H

#include "graph/course_lanes.h"
#include "graph/legendre.h"

/* Lanes from the end of the run before up to `end` lie in one piece of a window. */
struct run {
    size_t end, window;
    const struct stretch *now; /* by timing */
};

/* A node of a diagram: its row is to = p high + q low. */
struct row {
    uint32_t to, variable, high, low;
};

/* How likely a variable is at the most, and on which of its arms something grows from 0. */
struct extreme {
    double p, q;
    bool grows_true, grows_false;
};

typedef double orders[LEGENDRE_ORDERS];

struct average_kernels {
    course_kernel *course;
    /* Where the courses of one timing are at the times t; `fresh`: fill at->left, too. */
    void (*moments)(const double *t, const struct run *runs, size_t timing, double born, bool fresh,
                    struct moments *at);
    /* The rows in their order, p and q by variable. */
    void (*rows)(size_t n, const struct row *rows, const double *const *p, const double *const *q,
                 lanes *work);
    /* Adds weight[i] * work[roots[k]][i] for lanes begin .. end to sums[k], in the order of i. */
    void (*add)(size_t begin, size_t end, const double *weight, size_t n_roots,
                const uint32_t *roots, lanes *work, double *sums);
    /* part[row.to] = p part[high] + q part[low], each one order higher where its arm grows. */
    void (*orders)(size_t n, const struct row *rows, const struct extreme *extremes, orders *part);
};

/* For an instruction set that runs. */
const struct average_kernels *average_kernels(enum isa i);

#ifdef KERNELS_FOR
extern const struct average_kernels ISA_NAME(average_kernels);
#endif

#endif
