/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Loops over lanes (tape_kernels.h): compiled once for each instruction set. Loops for short
 * programs are made by macros, one for each form of their operands: s, a row of lanes, or c, a
 * constant. Rows may be those of arguments: each vector is read before it is written. Owns nothing.
 */
#include "eval/tape_kernels.h"

#include "eval/tape_vector.h"

/* An operand before the loop, and at lane i. */
#define BEFORE_s(x, k) const double *x = w->row[c->rows[1 + k]]
#define BEFORE_c(x, k) const vector x = all(w->constant[c->rows[1 + k]])
#define AT_s(x) load(x + i)
#define AT_c(x) x

#define KERNEL(name, before, result)                                                               \
    static void name(const struct tape_call *c, struct tape_work *w, size_t n)                     \
    {                                                                                              \
        double *to = w->row[c->rows[0]];                                                           \
        before;                                                                                    \
        for (size_t i = 0; i < n; i += WIDTH)                                                      \
            store(to + i, result);                                                                 \
    }

/* ---- one code ---- */

#define ALONE(code) KERNEL(alone_##code, BEFORE_s(x, 0), op_##code(AT_s(x)))
TAPE_CODES_0(ALONE)

#define WITH_FORM(code, A, B)                                                                      \
    KERNEL(with_##code##_##A##B, BEFORE_##A(x, 0);                                                 \
           BEFORE_##B(y, 1), op_##code(AT_##A(x), AT_##B(y)))
#define WITH(code) WITH_FORM(code, s, s) WITH_FORM(code, c, s) WITH_FORM(code, s, c)
TAPE_CODES_1(WITH)

/* ---- two codes ---- */

#define THREE_FORM(name, A, B, C, result)                                                          \
    KERNEL(name##_##A##B##C, BEFORE_##A(x, 0); BEFORE_##B(y, 1); BEFORE_##C(z, 2), result)
#define PAIR_FORM(first, second, A, B, C)                                                          \
    THREE_FORM(pair_##first##_##second, A, B, C,                                                   \
               op_##second(op_##first(AT_##A(x), AT_##B(y)), AT_##C(z)))
#define PAIR(first, second)                                                                        \
    PAIR_FORM(first, second, s, s, s)                                                              \
    PAIR_FORM(first, second, c, s, s)                                                              \
    PAIR_FORM(first, second, s, c, s)                                                              \
    PAIR_FORM(first, second, c, c, s)                                                              \
    PAIR_FORM(first, second, s, s, c)                                                              \
    PAIR_FORM(first, second, c, s, c)                                                              \
    PAIR_FORM(first, second, s, c, c)
TAPE_PAIRS(PAIR)

#define BLEND_FORM(A, B, C) THREE_FORM(blend, A, B, C, op_blend(AT_##A(x), AT_##B(y), AT_##C(z)))
BLEND_FORM(s, s, s)
BLEND_FORM(s, c, s)
BLEND_FORM(s, s, c)
BLEND_FORM(s, c, c)

#define COMPLEMENT_TIMES(A, B)                                                                     \
    KERNEL(complement_times_##A##B, BEFORE_##A(x, 0); BEFORE_##B(y, 1), (1 - AT_##A(x)) * AT_##B(y))
COMPLEMENT_TIMES(s, s)
COMPLEMENT_TIMES(s, c)

/* ---- any program ---- */

/* One code for a tile of eight vectors. */
#define EACH(DO) DO(0) DO(1) DO(2) DO(3) DO(4) DO(5) DO(6) DO(7)
#define EACH_OF(DO, code)                                                                          \
    DO(code, 0)                                                                                    \
    DO(code, 1)                                                                                    \
    DO(code, 2)                                                                                    \
    DO(code, 3)                                                                                    \
    DO(code, 4)                                                                                    \
    DO(code, 5)                                                                                    \
    DO(code, 6)                                                                                    \
    DO(code, 7)
enum { TILE = 8 * WIDTH };

#define FIRST_s(k) load(first + k * WIDTH)
#define FIRST_c(k) all_first
#define SECOND_s(k) load(second + k * WIDTH)
#define SECOND_c(k) all_second
#define READ_s(x) const double *x = w->row[*arg++] + i
#define READ_c(x) const vector all_##x = all(w->constant[*arg++])

#define CASE(name, form, body)                                                                     \
    case TAPE_FORMS *TAPE_##name + form: {                                                         \
        body;                                                                                      \
        break;                                                                                     \
    }
#define CASE_0(name, DO) CASE(name, 0, EACH(DO))
#define CASES_1(name, DO)                                                                          \
    CASE(name, 0, READ_s(first); EACH(DO##_s))                                                     \
    CASE(name, 1, READ_c(first); EACH(DO##_c))
#define CASES_2(name, DO)                                                                          \
    CASE(name, 0, READ_s(first); READ_s(second); EACH(DO##_ss))                                    \
    CASE(name, 1, READ_c(first); READ_s(second); EACH(DO##_cs))                                    \
    CASE(name, 2, READ_s(first); READ_c(second); EACH(DO##_sc))                                    \
    CASE(name, 3, READ_c(first); READ_c(second); EACH(DO##_cc))

#define TAKE_s(k) a##k = FIRST_s(k);
#define TAKE_c(k) a##k = FIRST_c(k);
#define PLUS_PRODUCT_ss(k) a##k = a##k + FIRST_s(k) * SECOND_s(k);
#define PLUS_PRODUCT_cs(k) a##k = a##k + FIRST_c(k) * SECOND_s(k);
#define PLUS_PRODUCT_sc(k) a##k = a##k + FIRST_s(k) * SECOND_c(k);
#define PLUS_PRODUCT_cc(k) a##k = a##k + FIRST_c(k) * SECOND_c(k);
#define BLEND_ss(k) a##k = op_blend(a##k, FIRST_s(k), SECOND_s(k));
#define BLEND_cs(k) a##k = op_blend(a##k, FIRST_c(k), SECOND_s(k));
#define BLEND_sc(k) a##k = op_blend(a##k, FIRST_s(k), SECOND_c(k));
#define BLEND_cc(k) a##k = op_blend(a##k, FIRST_c(k), SECOND_c(k));
#define ADD_PRODUCT_ss(k) add_to(&s##k, &l##k, FIRST_s(k) * SECOND_s(k));
#define ADD_PRODUCT_cs(k) add_to(&s##k, &l##k, FIRST_c(k) * SECOND_s(k));
#define ADD_PRODUCT_sc(k) add_to(&s##k, &l##k, FIRST_s(k) * SECOND_c(k));
#define ADD_PRODUCT_cc(k) add_to(&s##k, &l##k, FIRST_c(k) * SECOND_c(k));
#define REACH_ss(k) a##k = select(s##k >= FIRST_s(k), SECOND_s(k), a##k);
#define REACH_cs(k) a##k = select(s##k >= FIRST_c(k), SECOND_s(k), a##k);
#define REACH_sc(k) a##k = select(s##k >= FIRST_s(k), SECOND_c(k), a##k);
#define REACH_cc(k) a##k = select(s##k >= FIRST_c(k), SECOND_c(k), a##k);
#define BEGIN_SUM(k) s##k = l##k = (vector){0};
#define ADD(k) add_to(&s##k, &l##k, a##k);
#define ADD_ONE_s(k) add_to(&s##k, &l##k, FIRST_s(k));
#define ADD_ONE_c(k) add_to(&s##k, &l##k, FIRST_c(k));
#define END_SUM(k) a##k = s##k + l##k;
#define RESUME_AT(k, sum, rest) s##k = sum, l##k = rest;
#define RESUME_ss(k) RESUME_AT(k, FIRST_s(k), SECOND_s(k))
#define RESUME_cs(k) RESUME_AT(k, FIRST_c(k), SECOND_s(k))
#define RESUME_sc(k) RESUME_AT(k, FIRST_s(k), SECOND_c(k))
#define RESUME_cc(k) RESUME_AT(k, FIRST_c(k), SECOND_c(k))
#define END_PART(k)                                                                                \
    a##k = s##k;                                                                                   \
    store(lost + k * WIDTH, l##k);
#define UNITE(k) s##k += a##k * (1 - s##k);
#define UNITE_ONE_s(k) s##k += FIRST_s(k) * (1 - s##k);
#define UNITE_ONE_c(k) s##k += FIRST_c(k) * (1 - s##k);
#define END_EITHER(k) a##k = s##k;
#define KEY_s(k) s##k = FIRST_s(k);
#define KEY_c(k) s##k = FIRST_c(k);
#define END_LOOKUP(k) a##k = select(s##k == s##k, a##k, s##k);
#define ALONE_AT(code, k) a##k = op_##code(a##k);
#define WITH_s(code, k) a##k = op_##code(a##k, FIRST_s(k));
#define WITH_c(code, k) a##k = op_##code(a##k, FIRST_c(k));
#define ALONE_CASE(code) CASE(code, 0, EACH_OF(ALONE_AT, code))
#define WITH_CASES(code)                                                                           \
    CASE(code, 0, READ_s(first); EACH_OF(WITH_s, code))                                            \
    CASE(code, 1, READ_c(first); EACH_OF(WITH_c, code))
#define STORE(k) store(to + i + k * WIDTH, a##k);
#define DECLARE(k) vector a##k = {0}, s##k = {0}, l##k = {0};

static void program(const struct tape_call *c, struct tape_work *w, size_t n)
{
    const struct tape_program *p = c->more;
    double *to = w->row[c->rows[0]];
    for (size_t i = 0; i < n; i += TILE) {
        const uint32_t *arg = c->rows + 1;
        EACH(DECLARE)
        for (size_t k = 0; k < p->n; k++)
            switch (p->code[k]) {
                TAPE_CODES_0(ALONE_CASE)
                TAPE_CODES_1(WITH_CASES)
                CASES_1(take, TAKE)
                CASES_2(plus_product, PLUS_PRODUCT)
                CASES_2(blend, BLEND)
                CASE_0(begin_sum, BEGIN_SUM)
                CASE_0(add, ADD)
                CASES_1(add_one, ADD_ONE)
                CASES_2(add_product, ADD_PRODUCT)
                CASE_0(end_sum, END_SUM)
                CASES_2(resume, RESUME)
                CASE(end_part, 0, double *lost = w->row[*arg++] + i; EACH(END_PART))
                CASE_0(begin_either, BEGIN_SUM)
                CASE_0(unite, UNITE)
                CASES_1(unite_one, UNITE_ONE)
                CASE_0(end_either, END_EITHER)
                CASES_1(key, KEY)
                CASES_2(reach, REACH)
                CASE_0(end_lookup, END_LOOKUP)
            default: break;
            }
        EACH(STORE)
    }
}

/* ---- the table ---- */

/* clang-format off */
#define ALONE_ROW(code) [TAPE_##code] = alone_##code,
#define WITH_ROW(code) [TAPE_##code] = {with_##code##_ss, with_##code##_cs, with_##code##_sc},
#define PAIR_ROW(first, second)                                                                    \
    [TAPE_##first##_##second] = {pair_##first##_##second##_sss, pair_##first##_##second##_css,     \
                                 pair_##first##_##second##_scs, pair_##first##_##second##_ccs,     \
                                 pair_##first##_##second##_ssc, pair_##first##_##second##_csc,     \
                                 pair_##first##_##second##_scc},

const struct tape_kernels ISA_NAME(tape_kernels) = {
    .alone = {TAPE_CODES_0(ALONE_ROW)},
    .with = {TAPE_CODES_1(WITH_ROW)},
    .pair = {TAPE_PAIRS(PAIR_ROW)},
    .complement_times = {complement_times_ss, NULL, complement_times_sc},
    .blend = {blend_sss, NULL, blend_scs, NULL, blend_ssc, NULL, blend_scc},
    .program = program,
    .diagram = ISA_NAME(tape_diagram),
};
/* clang-format on */
