/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Kernels for different instruction sets.
 *
 * A kernel file is compiled once for each row of ISAS, with KERNELS_FOR set to the row's name, and
 * exports one table whose name ends in it (ISA_NAME). Which table is used is decided at run time.
 * Invariant: all give the same bytes, since every operation on doubles is the same IEEE operation
 * (nothing is contracted or reassociated); only the number of lanes at a time differs. */
#ifndef BASE_ISA_H
#define BASE_ISA_H

#include <stdbool.h>

/* Name, and what the processor must have. Built for x86-64 (the top meson.build has the options of
 * each); on other processors every name stands for the plain code. */
#define ISAS(X)                                                                                    \
    X(plain, "what every processor of the kind has")                                               \
    X(wide, "AVX2")                                                                                \
    X(widest, "AVX-512 F, DQ, VL and BW")

enum isa {
#define X(name, needs) ISA_##name,
    ISAS(X)
#undef X
        ISA_COUNT
};

/* "plain" */
const char *isa_name(enum isa i);
/* False where there is none of that name. */
bool isa_of_name(const char *name, enum isa *out);
/* Has this processor what it needs? Plain always. */
bool isa_runs(enum isa i);
/* The last that runs. */
enum isa isa_best(void);

/* ISA_NAME(eval_kernels) is eval_kernels_wide in the file that is compiled for `wide`. */
#define ISA_PASTE(stem, name) stem##_##name
#define ISA_PASTE_2(stem, name) ISA_PASTE(stem, name)
#define ISA_NAME(stem) ISA_PASTE_2(stem, KERNELS_FOR)

#endif
