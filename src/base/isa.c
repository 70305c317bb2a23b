/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Instruction sets (isa.h). Asks the processor itself; owns nothing. */
#include "base/isa.h"

#include <string.h>

static const char *const names[ISA_COUNT] = {
#define X(name, needs) #name,
    ISAS(X)
#undef X
};

const char *isa_name(enum isa i)
{
    return names[i];
}

bool isa_of_name(const char *name, enum isa *out)
{
    for (int i = 0; i < ISA_COUNT; i++)
        if (strcmp(names[i], name) == 0) {
            *out = (enum isa)i;
            return true;
        }
    return false;
}

#ifdef __x86_64__

bool isa_runs(enum isa i)
{
    __builtin_cpu_init();
    switch (i) {
    case ISA_plain: return true;
    case ISA_wide: return __builtin_cpu_supports("avx2");
    case ISA_widest:
        return __builtin_cpu_supports("avx512f") && __builtin_cpu_supports("avx512dq") &&
               __builtin_cpu_supports("avx512vl") && __builtin_cpu_supports("avx512bw");
    default: return false;
    }
}

#else

bool isa_runs(enum isa i)
{
    return i < ISA_COUNT;
}

#endif

enum isa isa_best(void)
{
    int best = ISA_COUNT - 1;
    while (!isa_runs((enum isa)best))
        best--;
    return (enum isa)best;
}
