/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Shares of kinds of fault: marginals by hand, how they read, as figures and in expressions,
 * and what is refused. Published ones are in tests/published/evidence_trends.txt. */
#include <string.h>

#include "evidence_test.h"

static const struct share_case {
    const char *keys;
    size_t kind; /* in byte order */
    double a, b;
    const char *text;
} shares[] = {
    {"kinds: {earth: 20, two-phase: 5, three-phase: 1}", 0, 21, 8,
     "uniform prior over 3 kinds with 20 of 26 faults"},
    {"kinds: {earth: 20, two-phase: 5, three-phase: 1}", 1, 2, 27,
     "uniform prior over 3 kinds with 1 of 26 faults"},
    {"kinds: {earth: 20, two-phase: 5, three-phase: 1}, kinds-prior: jeffreys", 2, 5.5, 22,
     "jeffreys prior over 3 kinds with 5 of 26 faults"},
    {"kinds: {x: 1, y: 0}, kinds-prior: uniform", 0, 2, 1,
     "uniform prior over 2 kinds with 1 of 1 fault"},
    {"kinds: {p: 0, q: 0, t: 0, u: 0}, kinds-prior: jeffreys", 3, 0.5, 1.5,
     "jeffreys prior over 4 kinds with 0 of 0 faults"},
};
#define SHARES ((int)(sizeof shares / sizeof shares[0]))

START_TEST(share_of_a_kind)
{
    const struct share_case *c = &shares[_i];
    struct arena *scratch = arena_new(NULL);
    struct sheet s = sheet_of(arena_printf(scratch, "is: 0.1 per section a, %s", c->keys));
    const struct rate *r = rate_of(&s);
    const struct quantity *q = posterior_share(s.arena, r, c->kind);
    ck_assert(q->shape == SHAPE_BETA && q->p[0] == c->a && q->p[1] == c->b && q->times == 1);
    ck_assert(dim_is_number(q->dim));
    ck_assert_str_eq(q->text, c->text);
    double low, high, sum = 0;
    quantity_range(q, &low, &high);
    ck_assert(low == 0 && high == 1);
    for (size_t i = 0; i < r->kinds_of_fault.n; i++) {
        const char *name = arena_printf(scratch, "r.share.%s", r->kinds_of_fault.keys[i]);
        sum += loaded_value(&s.l, name);
    }
    ck_assert_double_eq_tol(sum, 1, 1e-15);
    figure_id id =
        loaded_find(&s.l, arena_printf(scratch, "r.share.%s", r->kinds_of_fault.keys[c->kind]));
    ck_assert_double_eq_tol(figure_value(s.l.figures, id), c->a / (c->a + c->b), 1e-16);
    ck_assert_str_eq(figure_at(s.l.figures, id)->text, c->text);
    arena_free(s.arena);
    arena_free(scratch);
}
END_TEST

#define RATE                                                                                       \
    "rates: {r: {per: section a, is: 0.13 per section a, kinds: {earth: 20, two-phase: 5}}}\n"
#define HAZARD                                                                                     \
    "values: {v: 1 - share(r; earth)}\n"                                                           \
    "hazards: {H: {name: H, frequency: 8 section * r * share(r; two-phase), response: {n: "        \
    "{split: {p: {share: v, outcome: o}, q: {share: rest, outcome: none}}}}, outcomes: {o: "       \
    "{name: O, damage: {x: {category: c, is: 7 EUR}}}}}}\n"                                        \
    "options: {O: {name: O, change: {rates: {r: {kinds: {earth: 30, cross: 4}}}}}}\n"

START_TEST(share_in_expressions)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    const char *option = "O";
    loaded_text(&l, a, HEAD RATE HAZARD, NULL);
    ck_assert_double_eq_tol(loaded_value(&l, "v.value"), 6.0 / 27, 1e-15);
    ck_assert_double_eq_tol(loaded_value(&l, "H.frequency"), 8 * 0.13 * 6 / 27, 1e-15);
    ck_assert_double_eq_tol(loaded_value(&l, "H.risk"), 8 * 0.13 * 36 / 27 / 27 * 7, 1e-14);
    ck_assert_str_eq(figure_formula(l.figures, a, loaded_find(&l, "H.frequency")),
                     "8 section * r.rate * r.share.two-phase");
    ck_assert_str_eq(figure_formula(l.figures, a, loaded_find(&l, "r.share.earth")),
                     "mean(uniform prior over 2 kinds with 20 of 25 faults)");
    /* the counts of an option: 30, 5 and 4 of 39, over three kinds */
    loaded_compile(&l, loaded_variant(&l, 1, &option), "H");
    ck_assert_double_eq_tol(loaded_value(&l, "H.frequency@O"), 8 * 0.13 * 6 / 42, 1e-15);
    ck_assert_double_eq_tol(loaded_value(&l, "r.share.cross@O"), 5.0 / 42, 1e-16);
    arena_free(a);
}
END_TEST

TCase *case_share(void)
{
    TCase *t = tcase_create("share");
    tcase_add_loop_test(t, share_of_a_kind, 0, SHARES);
    tcase_add_test(t, share_in_expressions);
    return t;
}
