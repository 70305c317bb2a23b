/* SPDX-License-Identifier: GPL-3.0-or-later */
/* The choice among the tables of lanes_kernels.c (lanes.h). Owns nothing. */
#include "math/lanes_kernels.h"

static const struct lanes_functions *const tables[ISA_COUNT] = {
#define X(name, needs) &lanes_kernels_##name,
    ISAS(X)
#undef X
};

const struct lanes_functions *lanes_functions(enum isa i)
{
    return tables[i];
}
