/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Which kernels of averages are for which instruction set. Constants only. */
#include "graph/average_kernels.h"

#define X(name, needs) extern const struct average_kernels average_kernels_##name;
ISAS(X)
#undef X

const struct average_kernels *average_kernels(enum isa i)
{
    static const struct average_kernels *const all[ISA_COUNT] = {
#define X(name, needs) &average_kernels_##name,
        ISAS(X)
#undef X
    };
    return all[i];
}
