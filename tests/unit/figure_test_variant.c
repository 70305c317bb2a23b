/* SPDX-License-Identifier: GPL-3.0-or-later */
/* Variants: the figures under a set of options are those of a register that says so at
 * once, and what no change reaches is the very figure of the register as it is. */
#include <string.h>

#include "figure_merge.h"
#include "figure_test.h"
#include "loaded.h"
#include "registers.h"

static struct {
    size_t figures, moved, same_unit, own_unit, sets, refused;
} met;

/* A register under a set of options, and the same register written out. */
struct pair_of_registers {
    struct loaded *base, fresh;
    const struct variant *variant;
    const char *where; /* for messages */
};

static bool has_figures(enum kind k)
{
    return k == KIND_VALUE || k == KIND_RATE || k == KIND_TYPE || k == KIND_ELEMENT ||
           k == KIND_SCHEME || k == KIND_HAZARD || k == KIND_COMMON_CAUSE;
}

static double distance(double x)
{
    return x < 0 ? -x : x;
}

/* --- the same figures --- */

static const char *bare_name(struct arena *a, const char *name)
{
    return arena_strn(a, name, strcspn(name, "@"));
}

static void compare_units(struct pair_of_registers *p, const struct compiled *u,
                          const struct compiled *fresh)
{
    struct arena *a = p->fresh.arena;
    ck_assert_uint_eq(u->n, fresh->n);
    for (figure_id i = 0; i < u->n; i++) {
        const char *name = figure_name(p->base->figures, a, u->first + i);
        const char *other = figure_name(p->fresh.figures, a, fresh->first + i);
        double x = figure_value(p->base->figures, u->first + i);
        double y = figure_value(p->fresh.figures, fresh->first + i);
        ck_assert_str_eq(bare_name(a, name), other);
        ck_assert_msg(distance(x - y) <= 1e-13 * distance(y), "%s, %s: %.17g, written out %.17g",
                      p->where, name, x, y);
        met.figures++;
    }
}

/* --- what depends on what --- */

/* An element leads to what it fails together with, before the option and with it: one that the
 * option takes out of a common cause has no part of it any more. */
static void see_common_causes(struct arena *a, const struct model *m, const char *id,
                              struct strmap *seen)
{
    for (size_t i = 0; i < m->of[KIND_COMMON_CAUSE].n; i++) {
        const struct object *o = m->of[KIND_COMMON_CAUSE].at[i];
        const struct common_cause *x = o->data;
        for (size_t k = 0; k < x->of.n; k++)
            if (text_equal(x->of.at[k], id) && !strmap_has(seen, o->id))
                strmap_set(a, seen, o->id, NULL);
    }
}

/* Does anything that `o` leads to in `m`, or `o` itself, stand in the option's change? */
static bool depends(struct arena *a, const struct model *base, const struct model *m,
                    const struct variant *v, size_t option, const char *root)
{
    struct strmap seen = {0};
    strmap_set(a, &seen, root, NULL);
    for (size_t i = 0; i < seen.n; i++) {
        const struct object *o = model_find(m, seen.at[i].key);
        if (merge_touches(base, v->n, v->options, option, seen.at[i].key))
            return true;
        see_common_causes(a, m, seen.at[i].key, &seen);
        see_common_causes(a, base, seen.at[i].key, &seen);
        for (size_t r = 0; o && r < o->refs.n; r++) {
            const struct reference *ref = &o->refs.at[r];
            const struct object *to = model_find(m, ref->id);
            bool computes = !ref->trace && !ref->later && to && has_figures(to->kind);
            if (computes && !strmap_has(&seen, to->id))
                strmap_set(a, &seen, to->id, NULL);
        }
    }
    return false;
}

/* The name behind @ holds the options on which the object depends, and no others; with none
 * of them it is the unit of the register as it is. */
static void check_projection(struct pair_of_registers *p, const struct compiled *u)
{
    struct arena *a = p->fresh.arena;
    struct text expected;
    text_init(&expected, a);
    for (size_t i = 0; i < p->variant->n; i++) {
        const char *option = p->variant->options[i];
        bool reached = depends(a, p->base->model, p->fresh.model, p->variant, i, u->id);
        if (reached)
            text_printf(&expected, "%s%s", expected.n ? "+" : "@", option);
        ck_assert_int_eq(reached, strmap_has(&p->variant->reached[i], u->id));
    }
    if (u->n == 0)
        return;
    const char *name = figure_name(p->base->figures, a, u->first);
    ck_assert_str_eq(name + strcspn(name, "@"), text_str(&expected));
    if (expected.n) {
        met.own_unit++;
        return;
    }
    const struct compiled *base = loaded_compile(p->base, loaded_variant(p->base, 0, NULL), u->id);
    ck_assert_ptr_eq(u, base);
    ck_assert_uint_eq(u->first, base->first);
    met.same_unit++;
}

/* --- one set of options --- */

/* Compiles an object in both, which both can or neither. */
static bool compile_both(struct pair_of_registers *p, const char *id, const struct compiled **u,
                         const struct compiled **fresh)
{
    ohmen_error e = OHMEN_ERROR_INIT, f = OHMEN_ERROR_INIT;
    ohmen_status status = figures_compile(p->base->figures, p->variant, id, u, &e);
    const struct variant *plain = loaded_variant(&p->fresh, 0, NULL);
    ohmen_status other = figures_compile(p->fresh.figures, plain, id, fresh, &f);
    ck_assert_msg(status == other, "%s, %s: %s / %s", p->where, id, e.text, f.text);
    met.refused += status != OHMEN_OK;
    return status == OHMEN_OK;
}

struct both {
    const struct compiled *unit, *fresh;
};

static void compare_registers(struct pair_of_registers *p)
{
    ARRAY(struct both) all = {0};
    for (int k = 0; k < KIND_COUNT; k++)
        for (size_t i = 0; has_figures((enum kind)k) && i < p->fresh.model->of[k].n; i++) {
            struct both b;
            if (compile_both(p, p->fresh.model->of[k].at[i]->id, &b.unit, &b.fresh))
                *array_push(p->fresh.arena, &all) = b;
        }
    loaded_evaluate(p->base);
    loaded_evaluate(&p->fresh);
    for (size_t i = 0; i < all.n; i++) {
        compare_units(p, all.at[i].unit, all.at[i].fresh);
        check_projection(p, all.at[i].unit);
    }
}

/* Does the variant differ at all? Counted, so that the test knows that options do something. */
static void count_moved(struct pair_of_registers *p)
{
    const struct variant *plain = loaded_variant(p->base, 0, NULL);
    for (size_t i = 0; i < p->base->model->of[KIND_HAZARD].n; i++) {
        const char *id = p->base->model->of[KIND_HAZARD].at[i]->id;
        if (!model_find(p->variant->model, id))
            continue;
        const struct compiled *now = loaded_compile(p->base, plain, id);
        const struct compiled *then = loaded_compile(p->base, p->variant, id);
        loaded_evaluate(p->base);
        met.moved +=
            figure_value(p->base->figures, now->main) != figure_value(p->base->figures, then->main);
    }
}

/* An option that renews a state says so in the state, not in its change: see branching_test.c. */
static bool renews_a_state(const struct loaded *l, size_t n, const char *const *options)
{
    const struct objects *states = &l->model->of[KIND_STATE];
    for (size_t i = 0; i < states->n; i++)
        for (size_t k = 0; k < n; k++)
            if (state_renewed(states->at[i]->data, options[k]))
                return true;
    return false;
}

static void check_set(struct loaded *base, size_t n, const char *const *options, const char *where)
{
    if (renews_a_state(base, n, options))
        return;
    struct pair_of_registers p = {.base = base, .where = where};
    struct model_sources sources = {0};
    struct arena *a = arena_new(NULL);
    p.variant = loaded_variant(base, n, options);
    merge_options(a, base->model, n, options, &sources);
    const char *perspective = base->figures->perspective;
    loaded_objects(&p.fresh, a, &sources, perspective ? perspective : "all");
    p.fresh.figures->points_only = true; /* the same graph at the same point */
    compare_registers(&p);
    count_moved(&p);
    met.sets++;
    arena_free(a);
}

/* --- sets of options --- */

/* A register that is written out has no option that would say since when its parts are there: so
 * options are taken to be there from the start. Times are tests of weighing. */
static void from_the_start(struct loaded *l)
{
    const struct objects *options = &l->model->of[KIND_OPTION];
    for (size_t i = 0; i < options->n; i++)
        ((struct option *)options->at[i]->data)->in_service = DAY_NONE;
}

/* Takes options one after the other, in an order drawn, each with some chance and when it
 * contradicts none that was taken. */
static size_t draw_set(struct random *r, struct loaded *l, const char **set)
{
    const struct objects *options = &l->model->of[KIND_OPTION];
    size_t n = 0;
    for (size_t i = 0; i < options->n; i++) {
        const char *id = options->at[i]->id;
        bool fits = random_index(r, 3) != 0;
        for (size_t k = 0; k < n && fits; k++)
            fits = !model_contradiction(l->arena, l->model, set[k], id);
        if (fits)
            set[n++] = id;
    }
    return n;
}

static void check_sets(struct loaded *l, uint64_t seed, size_t sets)
{
    struct random r = random_seed(seed);
    const char **set = NEW_ARRAY(l->arena, l->model->of[KIND_OPTION].n, const char *);
    for (size_t i = 0; i < sets; i++) {
        size_t n = draw_set(&r, l, set);
        check_set(l, n, set,
                  arena_printf(l->arena, "register %llu, set %zu", (unsigned long long)seed, i));
    }
}

START_TEST(sample_options)
{
    struct arena *a = arena_new(NULL);
    struct loaded l;
    loaded_folder(&l, a, figure_sample, NULL);
    from_the_start(&l);
    l.figures->points_only = true;
    size_t before = met.moved;
    for (size_t i = 0; i < l.model->of[KIND_OPTION].n; i++)
        check_set(&l, 1, &l.model->of[KIND_OPTION].at[i]->id, l.model->of[KIND_OPTION].at[i]->id);
    check_sets(&l, 1, 4);
    ck_assert_uint_gt(met.moved - before, 20);
    arena_free(a);
}
END_TEST

/* What depends on what through states is told in states_test.c and branching_test.c. */
static void leave_out_states(struct model_sources *all)
{
    size_t n = 0;
    for (size_t i = 0; i < all->n; i++)
        if (all->at[i].kind != KIND_STATE && all->at[i].kind != KIND_DECISION)
            all->at[n++] = all->at[i];
    all->n = n;
}

START_TEST(random_registers)
{
    size_t sets = met.sets;
    for (uint64_t seed = 1; seed <= 12; seed++) {
        struct arena *a = arena_new(NULL);
        const struct node *root = random_register(a, seed, &register_small);
        struct model_sources none = {0}, all = {0};
        struct diags d;
        struct loaded l;
        diags_init(&d, a);
        ck_assert(documents_merge(a, &none, 1, &root, &all, &d));
        leave_out_states(&all);
        loaded_objects(&l, a, &all, seed % 2 ? "all" : NULL);
        from_the_start(&l);
        l.figures->points_only = true;
        check_sets(&l, seed, 4);
        arena_free(a);
    }
    ck_assert_uint_eq(met.sets - sets, 48);
    ck_assert_uint_gt(met.figures, 8000);
    ck_assert_uint_gt(met.moved, 80);
    ck_assert_uint_gt(met.same_unit, 200);
    ck_assert_uint_gt(met.own_unit, 200);
}
END_TEST

TCase *figure_variant_case(void)
{
    TCase *t = tcase_create("variants");
    tcase_set_timeout(t, 300);
    tcase_add_test(t, sample_options);
    tcase_add_test(t, random_registers);
    return t;
}
