/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The tables of lanes_kernels.c, one for each instruction set. Only for lanes.c. */
#ifndef MATH_LANES_KERNELS_H
#define MATH_LANES_KERNELS_H

#include "math/lanes.h"

#define X(name, needs) extern const struct lanes_functions lanes_kernels_##name;
ISAS(X)
#undef X

#endif
